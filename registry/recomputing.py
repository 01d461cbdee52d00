"""What a change makes stale is computed with it where that is quick, else in the background of the process."""

from __future__ import annotations

import logging
import threading
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from registry.errors import PlutonbookError
from registry.refresh import drain, last_change, refresh_registry
from registry.store import stale
from registry.store.engine import Registry, writing
from registry.store.reading.changes import changes_by_kind

#: So many stale samples are computed before the commit; more would keep the one who asked waiting.
AT_ONCE = 10_000

_log = logging.getLogger(__name__)


@dataclass(frozen=True)
class Consequence:
    """What a change does: verdicts that change by (target, before, after, how many), and samples left to compute."""

    changes: tuple[tuple[str, str | None, str | None, int], ...]
    waiting: int

    @property
    def verdicts(self) -> int:
        return sum(number for *_, number in self.changes)


class _Undo(Exception):
    """Ends a dry run: the transaction is rolled back."""


def consequence_of(connection: Any, change: Callable[[Any], Any], cause: str) -> Consequence:
    """Make a change and compute what it makes stale, unless that is more than ``AT_ONCE``; inside a transaction."""
    before = last_change(connection)
    change(connection)
    waiting = stale.count(connection)
    if waiting > AT_ONCE:
        return Consequence((), waiting)
    drain(connection, cause)
    return Consequence(tuple(changes_by_kind(connection, before)), 0)


def dry_run(registry: Registry, change: Callable[[Any], Any], cause: str) -> Consequence:
    """What ``change(connection)`` would do; everything is rolled back."""
    told: list[Consequence] = []
    try:
        with writing(registry, what="a dry run") as connection:
            told.append(consequence_of(connection, change, cause))
            raise _Undo
    except _Undo:
        pass
    return told[0]


def refresh_in_background(registry: Registry, cause: str) -> threading.Thread:
    """Compute everything that is stale in a thread of its own; pages go on reading, other writers wait."""

    def work() -> None:
        try:
            refresh_registry(registry, cause=cause)
        except PlutonbookError as fault:
            _log.warning("a refresh in the background was not done: %s", fault)

    thread = threading.Thread(target=work, name="plutonbook-refresh", daemon=True)
    thread.start()
    return thread
