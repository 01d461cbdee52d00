"""Every column with its unit, method and source: the data dictionary as a page."""

from __future__ import annotations

from typing import Any

from flask import Blueprint, render_template

from registry.store.reading import methods as reading
from web.reading import registry_connection

blueprint = Blueprint("methods", __name__)


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
    for row in guide:
        quantity = quantities.get(row["column_name"], {})
        row["label"], row["status"] = quantity.get("label", ""), quantity.get("status", "")
        views.setdefault(row["view_name"], []).append(row)
    return render_template("methods.html", section="Methods", views=views, remarks=remarks)
