"""Work that takes longer than a request: how far it is, what it waits for, and what came of it."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from typing import Any

from flask import Blueprint, Flask, current_app, jsonify, redirect, render_template, url_for

from registry.change_jobs import Change
from registry.import_drafts import Draft
from registry.job_folder import FAILED, Job, JobFolder, state_folder
from registry.jobs import Jobs
from web import writing
from web.errors import Missing

blueprint = Blueprint("working", __name__)
#: What ends within so many seconds is answered with its outcome at once; longer work shows its progress.
PATIENCE_S = 1.0
STATE_WORDS = {
    "waiting": "waiting", "reading": "being read", "read": "read, not stored", "storing": "being stored",
    "working": "at work", "tried": "tried out", "done": "done", "refused": "has problems", "failed": "failed",
}  # fmt: skip
#: What makes the page of an ended change, by its action.
_outcomes: dict[str, Callable[[Change], Any]] = {}


def register(app: Flask, folder: Any = None) -> None:
    """Run the jobs of the application's registry; ``folder``: where they are kept, None for the user's own place."""
    registry = app.extensions["registry"]
    app.extensions["jobs"] = Jobs(registry, JobFolder(folder or state_folder(registry.url)))
    app.jinja_env.filters["by_target"] = by_target
    app.jinja_env.globals["job_state_words"] = lambda job: STATE_WORDS[job.state]
    app.register_blueprint(blueprint)

    @app.context_processor
    def say() -> dict[str, Any]:
        return {"job_at_work": job_at_work, "address_of_job": address_of}


def by_target(kinds: Iterable[Sequence[Any]]) -> list[tuple[str, list[tuple[Any, ...]]]]:
    """(target, verdict before, after, how many) as (target, [(before, after, how many), ...]), in the same order."""
    groups: dict[str, list[tuple[Any, ...]]] = {}
    for target, *change in kinds:
        groups.setdefault(target, []).append(tuple(change))
    return list(groups.items())


def jobs() -> Jobs:
    """The jobs of the application."""
    found: Jobs = current_app.extensions["jobs"]
    return found


def job_at_work() -> Job | None:
    """What is being worked on now, for whoever may start such work."""
    return jobs().at_work if writing.standing().writable else None


def address_of(job: Job) -> str:
    """The page of a job."""
    if isinstance(job, Draft):
        return url_for("importing.page", draft_id=job.job_id)
    return url_for("working.page", job_id=job.job_id)


def outcome_of(*actions: str) -> Callable[[Callable[[Change], Any]], Callable[[Change], Any]]:
    """Let a function make the page of changes that ended (tried out or done), by their actions."""

    def keep(function: Callable[[Change], Any]) -> Callable[[Change], Any]:
        _outcomes.update(dict.fromkeys(actions, function))
        return function

    return keep


def answered(change: Change, done: Callable[[Change], Any] | None = None) -> Any:
    """The answer to a request that started a change: its outcome (``done`` makes it) if it ends soon, else its page."""
    jobs().wait(change.job_id, PATIENCE_S)
    if change.under_way:
        return redirect(address_of(change), 303)
    if change.state == FAILED:
        return _failed(change), 400
    return (done or _outcome)(change)


def state_of(job: Job) -> Any:
    """What a page asks for while it shows the progress."""
    return jsonify(
        state=job.state,
        sentence=jobs().sentence_of(job),
        done=job.done,
        total=job.total,
        under_way=job.under_way,
        started_at=job.started_at,
        ended_at=job.ended_at,
    )


@blueprint.get("/work")
def list_page() -> Any:
    writing.require()
    return render_template("jobs.html", section="Work", jobs=jobs().all(), sentence_of=jobs().sentence_of)


@blueprint.get("/work/<job_id>")
def page(job_id: str) -> Any:
    writing.require()
    job = jobs().find(job_id)
    if job is None:
        raise Missing("job", job_id, [("What ran during the last day", url_for("working.list_page"))])
    if not isinstance(job, Change):
        return redirect(address_of(job), 303)
    if job.under_way:
        return render_template("job.html", section="Work", job=job, sentence=jobs().sentence_of(job))
    return _failed(job) if job.state == FAILED else _outcome(job)


@blueprint.get("/work/<job_id>/state.json")
def state(job_id: str) -> Any:
    if not writing.standing().writable:
        return jsonify(error="Work is shown to whoever may start it."), 403
    job = jobs().find(job_id)
    if job is None:
        return jsonify(error=f"There is no job {job_id}."), 404
    return state_of(job)


def _failed(change: Change) -> str:
    return render_template("job.html", section="Work", job=change, sentence=change.sentence)


def _outcome(change: Change) -> Any:
    if change.action in _outcomes:
        return _outcomes[change.action](change)
    return render_template("job.html", section="Work", job=change, sentence=change.sentence)
