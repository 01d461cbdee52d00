"""Intrusions and sites: what the registry holds of each, and how their samples stand."""

from __future__ import annotations

from typing import Any

from flask import Blueprint, render_template

from registry.store.reading import places as reading
from web.reading import registry_connection

blueprint = Blueprint("places", __name__)


@blueprint.get("/intrusions")
def intrusions() -> Any:
    with registry_connection() as connection:
        rows = reading.intrusion_list(connection)
    return render_template("intrusions.html", section="Intrusions", intrusions=rows)


@blueprint.get("/sites")
def sites() -> Any:
    with registry_connection() as connection:
        rows = reading.site_list(connection)
    return render_template("sites.html", section="Sites", sites=rows)
