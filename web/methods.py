"""Every column with its unit, method and source: the data dictionary as a page."""

from __future__ import annotations

from typing import Any

from flask import Blueprint, render_template

from registry.store.reading import methods as reading
from web.reading import registry_connection

blueprint = Blueprint("methods", __name__)
#: In every view; they get no anchor.
LISTED_AGAIN = ("sample_id", "sample_code", "is_stale")


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
        quantity = quantities.get(row["column_name"], {})
        row["label"], row["status"] = quantity.get("label", ""), quantity.get("status", "")
        # the anchor that a sample's page leads to: where the quantity stands in its own sheet
        row["first"] = row["column_name"] not in seen and quantity.get("sheet") in (None, row["view_name"])
        seen |= {row["column_name"]} if row["first"] else set()
        views.setdefault(row["view_name"], []).append(row)
    return render_template("methods.html", section="Methods", views=views, remarks=remarks)
