"""A change and all that it makes stale, in one transaction, or tried out: what became of samples and verdicts.

A small edit is computed with it; what an edit touches beyond ``AT_ONCE`` samples is left to a job (``change_jobs``).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from registry.progress import Progress, unwatched
from registry.refresh import changes_since, drain, last_change
from registry.store import stale
from registry.store.engine import Registry, writing
from registry.store.reading.changes import changes_by_kind, verdict_changes

#: So many stale samples are computed before the commit of an edit; more would keep the one who asked waiting.
AT_ONCE = 10_000


@dataclass(frozen=True)
class Consequence:
    """What a change does: verdicts that change by (target, before, after, how many), and samples left to compute."""

    changes: tuple[tuple[str, str | None, str | None, int], ...]
    waiting: int

    @property
    def verdicts(self) -> int:
        return sum(number for *_, number in self.changes)


def recomputed_after(
    registry: Registry,
    change: Callable[[Any], Any],
    what: str,
    cause: str,
    dry_run: bool = False,
    *,
    progress: Progress | None = None,
    tell: Callable[[str], Any] | None = None,
) -> dict[str, Any]:
    """Change something and compute all that it touches, in one transaction.

    ``what`` names the change for whoever has to wait for it, ``cause`` stands beside each verdict that changes.
    Returns ``recomputed`` (samples), ``verdicts_changed``, ``changes`` (the first of these) and ``kinds`` (how many,
    by target, verdict before and after). ``dry_run`` tells what would happen and keeps nothing. ``tell`` makes it wait
    for a busy registry and gets the sentence that says what holds it. ``change`` must make no row that refers to a
    missing one: foreign keys are not looked up row by row (half the time of writing verdicts).
    """
    progress = progress or unwatched
    with writing(registry, what=what, tell=tell, bulk=True, trial=dry_run) as connection:
        before = last_change(connection)
        progress("marking", 0, 0)
        change(connection)
        report = {
            "recomputed": drain(connection, cause=cause, progress=progress, trial=dry_run),
            "verdicts_changed": changes_since(connection, before),
            "changes": verdict_changes(connection, before),
            "kinds": changes_by_kind(connection, before),
        }
        progress("writing", 0, 0)
    return report


def consequence_of(connection: Any, change: Callable[[Any], Any], cause: str) -> Consequence:
    """Make a change and compute what it makes stale, unless that is more than ``AT_ONCE``; inside a transaction."""
    before = last_change(connection)
    change(connection)
    waiting = stale.count(connection)
    if waiting > AT_ONCE:
        return Consequence((), waiting)
    drain(connection, cause)
    return Consequence(tuple(changes_by_kind(connection, before)), 0)
