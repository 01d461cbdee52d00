"""Opening a registry for reading; the pages reach the store through this module alone."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from sqlalchemy import Connection

from registry.store.engine import open_registry, reading

__all__ = ["open_for_reading", "query_only"]


def open_for_reading(path_or_url: str) -> Any:
    """The registry at a path or SQLAlchemy URL."""
    return open_registry(path_or_url)


@contextmanager
def query_only(registry: Any) -> Iterator[Connection]:
    """A connection that cannot write, with one unchanging picture of the registry while it is open."""
    with reading(registry) as connection:
        yield connection
