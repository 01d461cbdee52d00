"""The targets: what each one asks of a rock, with weights, sources and cautions."""

from __future__ import annotations

from typing import Any

from flask import Blueprint, render_template, url_for

from registry.explain import read_definition
from registry.store.reading import methods as methods_reading
from registry.store.reading import targets as reading
from web.errors import Missing
from web.reading import offered_columns, registry_connection

blueprint = Blueprint("targets", __name__)


@blueprint.get("/targets")
def list_page() -> Any:
    with registry_connection() as connection:
        targets = reading.target_list(connection)
    shown = [{**target, "applies_to": read_definition(target["definition"]).applies_to} for target in targets]
    return render_template("targets.html", section="Targets", targets=shown)


@blueprint.get("/targets/<code>")
def page(code: str) -> Any:
    with registry_connection() as connection:
        targets = reading.target_list(connection)
        target = next((target for target in targets if target["code"] == code), None)
        drawn = reading.surviving_counts(connection, target["target_id"]) if target else None
        quantities = methods_reading.quantities(connection)
        offered = offered_columns(connection)
    if target is None:
        near = [(other["name"], url_for("targets.page", code=other["code"])) for other in targets]
        raise Missing("target", code, near)
    definition = read_definition(target["definition"])
    labels = {row["name"]: row["label"] for row in quantities}
    units = {name: column.unit for name, column in offered.items()}
    units |= {row["name"]: row["unit"] for row in quantities}
    return render_template(
        "target.html",
        section="Targets",
        target=target,
        drawn=drawn,
        definition=definition,
        labels=labels,
        units=units,
    )
