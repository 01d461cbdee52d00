"""Lab certificates: the list, and one with its columns and digestions."""

from __future__ import annotations

from typing import Any

from flask import Blueprint, render_template, url_for

from registry.store.reading import batches as reading
from web.errors import Missing
from web.reading import registry_connection

blueprint = Blueprint("batches", __name__)


@blueprint.get("/batches")
def list_page() -> Any:
    with registry_connection() as connection:
        batches = reading.batch_list(connection)
    return render_template("batches.html", section="Batches", batches=batches)


@blueprint.get("/batches/<path:code>")
def page(code: str) -> Any:
    with registry_connection() as connection:
        batch = reading.find_batch(connection, code)
        if batch is None:
            near = [(name, url_for("batches.page", code=name)) for name in reading.near_batches(connection)]
            raise Missing("batch", code, near)
        columns = reading.batch_columns(connection, batch["batch_id"])
        lines, samples = reading.batch_samples(connection, batch["batch_id"])
    return render_template("batch.html", section="Batches", batch=batch, columns=columns, lines=lines, samples=samples)
