"""Every column with its unit, method and source: the data dictionary as a page, folded view by view."""

from __future__ import annotations

from typing import Any

from flask import Blueprint, render_template

from registry.store.reading import methods as reading
from web.reading import registry_connection
from web.wording import VIEW_WORDS

blueprint = Blueprint("methods", __name__)
#: In every view of samples; they are told of once and get no anchor.
LISTED_AGAIN = ("sample_id", "sample_code", "is_stale")
#: What the views hold that do not have one row a sample.
MORE_WORDS = {
    "verdict_sheet": "Verdicts, a row for each sample and target",
    "reason_sheet": "Reasons, a row for each sample, target and criterion",
    "result_sheet": "Results as reported",
    "warning_sheet": "Remarks on values that stand",
    "cause_sheet": "Why values are missing",
    "change_sheet": "Verdicts that changed",
    "control_sheet": "Results of controls",
    "batch_sheet": "Lab certificates",
    "intrusion_sheet": "Intrusions",
    "area_sheet": "Areas: geotherm and melting",
    "suite_sheet": "What was computed of whole intrusions",
    "mass_change_sheet": "Altered samples against their fresh rock",
    "column_guide": "This dictionary",
}


@blueprint.get("/methods")
def list_page() -> Any:
    with registry_connection() as connection:
        guide = reading.column_guide(connection)
        quantities = {row["name"]: row for row in reading.quantities(connection)}
        warnings = reading.warning_kinds(connection)
    remarks: dict[str, list[dict[str, Any]]] = {}
    for warning in warnings:
        remarks.setdefault(warning["column_name"], []).append(warning)
    views: dict[str, list[dict[str, Any]]] = {}
    seen: set[str] = set(LISTED_AGAIN)
    for row in guide:
        if row["column_name"] in LISTED_AGAIN and views and row["view_name"] != next(iter(views)):
            views.setdefault(row["view_name"], [])
            continue
        quantity = quantities.get(row["column_name"], {})
        row["label"], row["status"] = quantity.get("label", ""), quantity.get("status", "")
        # the anchor that a sample's page leads to: where the quantity stands in its own sheet
        row["first"] = row["column_name"] not in seen and quantity.get("sheet") in (None, row["view_name"])
        seen |= {row["column_name"]} if row["first"] else set()
        views.setdefault(row["view_name"], []).append(row)
    for rows in views.values():
        _share_methods(rows)
    words = {**VIEW_WORDS, **MORE_WORDS}
    return render_template("methods.html", section="Methods", views=views, remarks=remarks, words=words)


def _share_methods(rows: list[dict[str, Any]]) -> None:
    """Rows in succession by one method after one source share a cell: ``span`` rows of the first, 0 of the others."""
    first: dict[str, Any] = {}
    for row in rows:
        shared = tuple(row[name] for name in ("method", "source", "status"))
        if first and tuple(first[name] for name in ("method", "source", "status")) == shared:
            first["span"] += 1
            row["span"] = 0
        else:
            first = row
            row["span"] = 1
