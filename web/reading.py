"""One query-only connection a request, and what every page knows of the registry."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from flask import current_app

from registry.keeping_current import refresh_a_few
from registry.store.reading.columns import Columns, load_columns
from registry.store.reading.session import query_only


@contextmanager
def registry_connection() -> Iterator[Any]:
    """A query-only connection to the application's registry; a few stale samples are brought up to date first."""
    registry = current_app.extensions["registry"]
    refresh_a_few(registry)
    with query_only(registry) as connection:
        yield connection


def offered_columns(connection: Any) -> Columns:
    """The columns of the sample views; read once, for they change only when the registry is upgraded."""
    columns: Columns | None = current_app.extensions.get("columns")
    if columns is None:
        columns = current_app.extensions["columns"] = load_columns(connection)
    return columns
