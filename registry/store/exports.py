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


def placed_rows_of(
    connection: sa.Connection, sheet: str, conditions: Sequence[tuple[str, str, float | str]]
) -> Iterator[list[Any]]:
    """Lists of ``(longitude, latitude, row)`` of a sheet of samples; those without a position are left out."""
    positions = {
        sample_id: (longitude, latitude)
        for sample_id, longitude, latitude in connection.exec_driver_sql(
            "SELECT sample_id, longitude, latitude FROM sample WHERE longitude IS NOT NULL AND latitude IS NOT NULL"
        )
    }
    for rows in rows_of(connection, sheet, conditions):
        yield [(*positions[row[0]], row) for row in rows if row[0] in positions]


def few_values(connection: sa.Connection, sheet: str, name: str, most: int) -> list[str]:
    """The distinct values of a column of ``sheet``, sorted; none where there are more than ``most``."""
    column: sa.ColumnClause[Any] = sa.column(name)
    query = sa.select(column).select_from(sa.table(sheet, column)).where(column.is_not(None)).distinct().limit(most + 1)
    found = sorted(str(value) for value in connection.execute(query).scalars())
    return found if len(found) <= most else []
