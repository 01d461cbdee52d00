"""Opening a registry for reading; the pages reach the store through this module alone."""

from __future__ import annotations

from collections.abc import Hashable, Iterator
from contextlib import contextmanager
from typing import Any

from sqlalchemy import Connection

from registry.store.engine import open_registry, reading

__all__ = ["change_mark", "open_for_reading", "query_only"]


def open_for_reading(path_or_url: str) -> Any:
    """The registry at a path or SQLAlchemy URL."""
    return open_registry(path_or_url)


@contextmanager
def query_only(registry: Any) -> Iterator[Connection]:
    """A connection that cannot write, with one unchanging picture of the registry while it is open."""
    with reading(registry) as connection:
        yield connection


def change_mark(registry: Any) -> Hashable:
    """Equal as long as nobody has committed a change: what was read under one mark need not be read again under it."""
    if registry.dialect != "sqlite":
        with query_only(registry) as connection:
            return str(connection.exec_driver_sql("SELECT CAST(pg_current_snapshot() AS text)").scalar())
    pooled = registry.watcher.raw_connection()
    try:
        return int(pooled.driver_connection.execute("PRAGMA data_version").fetchone()[0])
    finally:
        pooled.close()
