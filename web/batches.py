"""Lab certificates: the list, one with its state, controls and digestions, and what can be changed about it."""

from __future__ import annotations

import re
from typing import Any

from flask import Blueprint, current_app, flash, redirect, render_template, request, send_file, url_for

from registry import batching, change_jobs
from registry.change_jobs import Change
from registry.store.reading import batches as reading
from registry.store.reading import controls as controls_reading
from web import control_charts, working, writing
from web.errors import Missing
from web.numbers import counted
from web.reading import registry_connection
from web.wording import digestion_words

blueprint = Blueprint("batches", __name__)
#: More control lines than this are not drawn; ``control_sheet`` holds them all.
MOST_CONTROL_LINES = 1_000
#: What is said once it is done.
DONE_WORDS = {
    "withdraw": "Batch {} is withdrawn",
    "restore": "Batch {} is in use again",
    "digestions": "Digestions of batch {} are stated",
}


@blueprint.get("/batches")
def list_page() -> Any:
    with registry_connection() as connection:
        batches = reading.batch_list(connection)
        controlled = controls_reading.batch_states(connection)
    return render_template("batches.html", section="Batches", batches=batches, controlled=controlled)


@blueprint.get("/batches/<path:code>")
def page(code: str) -> Any:
    registry = current_app.extensions["registry"]
    batch = _found(code)
    with registry_connection() as connection:
        columns = reading.batch_columns(connection, batch["batch_id"])
        lines, samples = reading.batch_samples(connection, batch["batch_id"])
        relatives = reading.batch_relatives(connection, batch["batch_id"])
        counts = controls_reading.control_counts(connection, batch["batch_id"])
        states = controls_reading.analyte_states(connection, batch["batch_id"])
        uncertified = controls_reading.without_certificate(connection, batch["batch_id"])
        too_many = sum(counts.values()) > MOST_CONTROL_LINES
        controls: dict[str, Any] = {"analytes": []}
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
        standing=control_charts.standing(states) if counts or states else "No control sample was judged on it.",
        digested=_digested(columns),
        counting=batching.counting_instead(registry, code) if batch["state"] != "active" else None,
        elsewhere=_from_other_parts(states),
        charts=control_charts.charts(controls),
        conspicuous=conspicuous,
        conspicuous_number=number,
        digestions=batching.DIGESTION_NAMES,
        weighed=batching.WEIGHED,
        chart=control_charts,
    )


def _from_other_parts(states: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """What the controls of other parts of the certificate say of the analytes: ``analyte state remarks``."""
    found = []
    for one in states:
        said = re.search(r"(?:^|; )(in [^:;]+: .*)", one["remarks"])
        if said is not None:
            found.append({"analyte": one["analyte"], "state": one["state"], "remarks": said[1]})
    return found


def _digested(columns: list[dict[str, Any]]) -> dict[str, list[str]]:
    """The analytes by what was done to the sample, in words: what is unknown first, what is not dissolved last."""
    groups: dict[str, list[str]] = {digestion_words("unknown"): []}
    weighed = []
    for column in columns:
        if column["digestion"] == "unknown" and column["analyte"] in batching.WEIGHED:
            weighed.append(column["analyte"])
        else:
            groups.setdefault(digestion_words(column["digestion"]), []).append(column["analyte"])
    found = {**groups, "weighed or summed": weighed}
    return {words: list(dict.fromkeys(analytes)) for words, analytes in found.items() if analytes}


@blueprint.get("/batch/file/<path:code>")
def stored_file(code: str) -> Any:
    """The file as the laboratory sent it, byte for byte."""
    name, file = batching.stored_file(current_app.extensions["registry"], code)
    return send_file(file, mimetype="application/octet-stream", as_attachment=True, download_name=name)


@blueprint.get("/batch/<any(withdraw, restore):change>/<path:code>")
def ask(change: str, code: str) -> Any:
    """What withdrawing or restoring a batch means; to be tried out, or done."""
    writing.require()
    _found(code)
    return _page_of(change, code)


@blueprint.post("/batch/<any(withdraw, restore):change>/<path:code>")
def do(change: str, code: str) -> Any:
    """Try withdrawing or restoring a batch out, or do it."""
    _found(code)
    trial = request.form.get("do") != "confirmed"
    asked = change_jobs.start(working.jobs(), change, code, trial=trial)
    return working.answered(asked, _outcome if trial else _back_to_batch)


@blueprint.post("/batch/digestions/<path:code>")
def digestions(code: str) -> Any:
    """State how columns were digested: first what it would change, then, once confirmed, the change itself."""
    stated = {
        int(name.removeprefix("digestion-")): batching.digestion_named(value)
        for name, value in request.form.items()
        if name.startswith("digestion-") and name.removeprefix("digestion-").isdecimal()
    }
    fill = batching.digestion_named(request.form["fill"]) if request.form.get("fill") else None
    batch = _found(code)
    with registry_connection() as connection:
        columns = {row["position"]: row for row in reading.batch_columns(connection, batch["batch_id"])}
    if fill is not None:
        stated |= {position: fill for position, name in stated.items() if name == "unknown"}
    changed = {
        position: name
        for position, name in stated.items()
        if position in columns and columns[position]["digestion"] != name
    }
    if not changed:
        flash("No digestion is another than before; nothing was changed.")
        return redirect(url_for("batches.page", code=code), 303)
    told = [
        f"{columns[position]['header'] or columns[position]['analyte']}: "
        f"{digestion_words(columns[position]['digestion'])} → {digestion_words(name)}"
        for position, name in changed.items()
    ]
    trial = request.form.get("do") != "confirmed"
    wishes = {str(position): name for position, name in changed.items()}
    asked = change_jobs.start(working.jobs(), "digestions", code, wishes, trial=trial, told=told)
    return working.answered(asked, _outcome if trial else _back_to_batch)


def _found(code: str) -> dict[str, Any]:
    with registry_connection() as connection:
        batch = reading.find_batch(connection, code)
        if batch is None:
            near = [(name, url_for("batches.page", code=name)) for name in reading.near_batches(connection)]
            raise Missing("batch", code, near)
    return batch


@working.outcome_of("withdraw", "restore", "digestions")
def _outcome(change: Change) -> Any:
    return _page_of(change.action, change.subject, change)


def _page_of(action: str, code: str, change: Change | None = None) -> str:
    address = (
        url_for("batches.digestions", code=code)
        if action == "digestions"
        else url_for("batches.do", change=action, code=code)
    )
    return render_template(
        "batch_change.html",
        section="Batches",
        code=code,
        action=action,
        change=change,
        report=change.report if change is not None else None,
        address=address,
        done_words=DONE_WORDS,
    )


def _back_to_batch(change: Change) -> Any:
    report = change.report or {}
    samples, verdicts = report["recomputed"], report["verdicts_changed"]
    flash(
        f"{DONE_WORDS[change.action].format(change.subject)}: {counted(samples, 'sample')} recomputed, "
        f"{counted(verdicts, 'verdict') if verdicts else 'no verdict'} changed."
    )
    return redirect(url_for("batches.page", code=change.subject), 303)
