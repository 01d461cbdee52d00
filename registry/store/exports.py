"""Rows of a view that meet simple conditions, a batch of rows at a time."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

import sqlalchemy as sa

from registry.store.sheets import SHEETS

ROWS_AT_A_TIME = 2_000


def rows_of(
    connection: sa.Connection, sheet: str, conditions: Sequence[tuple[str, str, float | str]]
) -> Iterator[list[Any]]:
    """Lists of rows of ``sheet`` (columns in contract order) where every ``(column, sign, value)`` holds."""
    view = sa.table(sheet, *(sa.column(name) for name in SHEETS[sheet]))
    query = sa.select(view)
    for name, sign, value in conditions:
        query = query.where(view.c[name].op(sign)(sa.literal(value)))
    result = connection.execution_options(stream_results=True).execute(query)
    while rows := result.fetchmany(ROWS_AT_A_TIME):
        yield [tuple(row) for row in rows]
