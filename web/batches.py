"""Lab certificates: the list, one with its state, controls and digestions, and what can be changed about it."""

from __future__ import annotations

from typing import Any

from flask import Blueprint, current_app, flash, redirect, render_template, request, send_file, url_for

from registry import batching
from registry.store.reading import batches as reading
from registry.store.reading import controls as controls_reading
from web import control_charts, writing
from web.errors import Missing
from web.reading import registry_connection

blueprint = Blueprint("batches", __name__)
#: More control lines than this are not drawn; ``control_sheet`` holds them all.
MOST_CONTROL_LINES = 1_000
STATE_OF = {"withdraw": "withdrawn", "restore": "active"}


@blueprint.get("/batches")
def list_page() -> Any:
    with registry_connection() as connection:
        batches = reading.batch_list(connection)
        controlled = controls_reading.batch_states(connection)
    return render_template("batches.html", section="Batches", batches=batches, controlled=controlled)


@blueprint.get("/batches/<path:code>")
def page(code: str) -> Any:
    with registry_connection() as connection:
        batch = reading.find_batch(connection, code)
        if batch is None:
            near = [(name, url_for("batches.page", code=name)) for name in reading.near_batches(connection)]
            raise Missing("batch", code, near)
        columns = reading.batch_columns(connection, batch["batch_id"])
        lines, samples = reading.batch_samples(connection, batch["batch_id"])
        relatives = reading.batch_relatives(connection, batch["batch_id"])
        counts = controls_reading.control_counts(connection, batch["batch_id"])
        uncertified = controls_reading.without_certificate(connection, batch["batch_id"])
        too_many = sum(counts.values()) > MOST_CONTROL_LINES
        controls: dict[str, Any] = {
            "analytes": [],
            "state": controls_reading.batch_state(connection, batch["batch_id"]),
        }
        if counts and not too_many:
            controls = controls_reading.batch_controls(connection, batch["batch_id"])
    number, conspicuous = control_charts.conspicuous(controls)
    return render_template(
        "batch.html",
        section="Batches",
        batch=batch,
        columns=columns,
        lines=lines,
        samples=samples,
        relatives=relatives,
        counts=counts,
        uncertified=uncertified,
        too_many=too_many,
        control_state=controls["state"],
        charts=control_charts.charts(controls),
        conspicuous=conspicuous,
        conspicuous_number=number,
        digestions=batching.DIGESTION_NAMES,
        chart=control_charts,
    )


@blueprint.get("/batch/file/<path:code>")
def stored_file(code: str) -> Any:
    """The file as the laboratory sent it, byte for byte."""
    name, file = batching.stored_file(current_app.extensions["registry"], code)
    return send_file(file, mimetype="application/octet-stream", as_attachment=True, download_name=name)


@blueprint.get("/batch/<any(withdraw, restore):change>/<path:code>")
def ask(change: str, code: str) -> Any:
    """What withdrawing or restoring a batch would do, and whether to do it."""
    writing.require()
    report = batching.set_state(current_app.extensions["registry"], code, STATE_OF[change], dry_run=True)
    return _confirmation(code, change, report, {})


@blueprint.post("/batch/<any(withdraw, restore):change>/<path:code>")
def do(change: str, code: str) -> Any:
    report = batching.set_state(current_app.extensions["registry"], code, STATE_OF[change])
    return _done(code, f"Batch {code} is {'withdrawn' if change == 'withdraw' else 'in use again'}", report)


@blueprint.post("/batch/digestions/<path:code>")
def digestions(code: str) -> Any:
    """State how columns were digested: first what it would change, then, once confirmed, the change itself."""
    registry = current_app.extensions["registry"]
    stated = {
        int(name.removeprefix("digestion-")): value
        for name, value in request.form.items()
        if name.startswith("digestion-") and name.removeprefix("digestion-").isdecimal()
    }
    with registry_connection() as connection:
        batch = reading.find_batch(connection, code)
        if batch is None:
            raise Missing("batch", code)
        known = {row["position"]: row["digestion"] for row in reading.batch_columns(connection, batch["batch_id"])}
    changed = {position: name for position, name in stated.items() if known.get(position) != name}
    if not changed:
        flash("No digestion is another than before; nothing was changed.")
        return redirect(url_for("batches.page", code=code), 303)
    confirmed = request.form.get("do") == "confirmed"
    report = batching.set_digestions(registry, code, changed, dry_run=not confirmed)
    if confirmed:
        return _done(code, f"The digestion of {len(changed)} columns of batch {code} is stated", report)
    return _confirmation(code, "digestions", report, changed)


def _confirmation(code: str, change: str, report: dict[str, Any], stated: dict[int, str]) -> Any:
    action = (
        url_for("batches.digestions", code=code)
        if change == "digestions"
        else url_for("batches.do", change=change, code=code)
    )
    return render_template(
        "batch_change.html", section="Batches", code=code, change=change, report=report, stated=stated, action=action
    )


def _done(code: str, what: str, report: dict[str, Any]) -> Any:
    samples, verdicts = report["recomputed"], report["verdicts_changed"]
    flash(
        f"{what}: {samples:,} {'sample' if samples == 1 else 'samples'} recomputed, {verdicts:,} "
        f"{'verdict' if verdicts == 1 else 'verdicts'} changed."
    )
    return redirect(url_for("batches.page", code=code), 303)
