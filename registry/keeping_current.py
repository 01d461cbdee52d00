"""What a reader's request may do by itself: bring a few stale samples up to date, without ever waiting for it."""

from __future__ import annotations

from typing import Any

from sqlalchemy.exc import SQLAlchemyError

from registry.errors import PlutonbookError
from registry.refresh import SMALL_REFRESH, drain
from registry.store import stale, stale_groups
from registry.store.engine import reading, writing


def refresh_a_few(registry: Any, limit: int = SMALL_REFRESH) -> int:
    """Recompute at most ``limit`` stale samples if nobody else writes; how many were done.

    A registry that is busy, or that cannot be written, is left as it is: its stale rows are shown marked.
    """
    try:
        with reading(registry) as connection:
            if not stale.pending(connection, 1) and not stale_groups.any_pending(connection):
                return 0
        with writing(registry, what="a small refresh", wait_s=0.0) as connection:
            return drain(connection, limit=limit)
    except (PlutonbookError, SQLAlchemyError):
        return 0
