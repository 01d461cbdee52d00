"""Changes that touch many samples, as jobs: batches, digestions, conventions; tried out first or made at once."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

from registry import batching, setting_changes
from registry.clock import now
from registry.job_folder import DONE, TRIED, WORKING, Job
from registry.jobs import Jobs
from registry.progress import Progress, words
from registry.refresh import refresh_registry
from registry.store.engine import Registry

WITHDRAW, RESTORE, DIGESTIONS, SETTINGS, REFRESH = "withdraw", "restore", "digestions", "settings", "refresh"
_WORDS = {
    WITHDRAW: "withdrawing batch {}", RESTORE: "restoring batch {}", DIGESTIONS: "stating digestions of batch {}",
    SETTINGS: "changing the settings", REFRESH: "computing anew after {}",
}  # fmt: skip


@dataclass
class Change(Job, kind="change"):
    """A change of ``subject`` (the code of a batch, or what was edited) with what is wished.

    ``wishes``: digestions by column position, or what was typed for settings by name. ``trial``: what it would do is
    told and nothing kept. ``report`` is what ``recomputed_after`` returns, ``told`` the wish in the words of the page.
    """

    action: str = ""
    subject: str = ""
    wishes: dict[str, Any] = field(default_factory=dict)
    trial: bool = False
    told: list[str] = field(default_factory=list)
    report: dict[str, Any] | None = None

    def what(self) -> str:
        return ("a trial of " if self.trial else "") + _WORDS[self.action].format(self.subject)

    def is_same(self, other: Job) -> bool:
        """Whether another job is the same change."""
        return isinstance(other, Change) and all(
            getattr(self, name) == getattr(other, name) for name in ("action", "subject", "wishes", "trial")
        )


def start(
    jobs: Jobs,
    action: str,
    subject: str = "",
    wishes: dict[str, Any] | None = None,
    *,
    trial: bool = False,
    told: list[str] | None = None,
) -> Change:
    """Let a change be made or tried out; the same one that is under way already is returned instead."""
    change = Change(
        "", now(), action=action, subject=subject, wishes=wishes or {}, trial=trial, told=told or []
    )  # fmt: skip
    for other in jobs.live():
        if isinstance(other, Change) and change.is_same(other):
            return other
    change.job_id = jobs.folder.new_id()
    jobs.start(change, lambda: _run(jobs, change))
    return change


def _run(jobs: Jobs, change: Change) -> None:
    def say(what: str, done: int, total: int) -> tuple[str, str]:
        return WORKING, words(what, done, total, trial=change.trial)

    change.report = _made(jobs.registry, change, jobs.watched(change, say), jobs.told(change))
    samples, verdicts = change.report["recomputed"], change.report.get("verdicts_changed", 0)
    named = f"{verdicts:,} {'verdict' if verdicts == 1 else 'verdicts'}" if verdicts else "no verdict"
    if change.trial:
        jobs.end(change, TRIED, f"{named[:1].upper()}{named[1:]} would change; nothing is changed yet.")
    else:
        computed = f"{samples:,} {'sample' if samples == 1 else 'samples'} computed anew"
        jobs.end(change, DONE, f"{computed}, {named} changed." if change.action != REFRESH else f"{computed}.")


def _made(registry: Registry, change: Change, progress: Progress, tell: Callable[[str], Any]) -> dict[str, Any]:
    watched: dict[str, Any] = {"progress": progress, "tell": tell}
    if change.action in (WITHDRAW, RESTORE):
        state = "withdrawn" if change.action == WITHDRAW else "active"
        return batching.set_state(registry, change.subject, state, change.trial, **watched)
    if change.action == DIGESTIONS:
        stated = {int(position): name for position, name in change.wishes.items()}
        return batching.set_digestions(registry, change.subject, stated, change.trial, **watched)
    if change.action == SETTINGS:
        wishes = [f"{name}={typed}" for name, typed in change.wishes.items()]
        return setting_changes.change_settings(registry, wishes, change.trial, **watched)
    return {"recomputed": refresh_registry(registry, cause="edited", **watched)}
