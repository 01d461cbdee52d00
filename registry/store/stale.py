"""The list of samples whose derived values or verdicts have to be computed anew: level 1 derive, level 2 judge only."""

from __future__ import annotations

from collections.abc import Iterable

import sqlalchemy as sa

from registry.store import raw_rows, tables

DERIVE, JUDGE = 1, 2


def pending(connection: sa.Connection, limit: int | None = None) -> list[tuple[int, int]]:
    """(sample id, level) of stale samples, ascending, at most ``limit``; ids without a sample are dropped first."""
    query = (
        sa.select(tables.stale.c.sample_id, tables.stale.c.level)
        .join(tables.sample, tables.sample.c.sample_id == tables.stale.c.sample_id)
        .order_by(tables.stale.c.sample_id)
    )
    if limit is not None:
        query = query.limit(limit)
    return [(row.sample_id, row.level) for row in connection.execute(query)]


def count(connection: sa.Connection) -> int:
    """How many samples are stale."""
    return int(connection.scalar(sa.select(sa.func.count()).select_from(tables.stale)) or 0)


def clear(connection: sa.Connection, sample_ids: Iterable[int]) -> None:
    """These samples are computed: take them off the list."""
    ids = list(sample_ids)
    if ids:
        raw_rows.select(connection, "DELETE FROM stale WHERE sample_id {ids}", ids)


def mark(connection: sa.Connection, sample_ids: Iterable[int], level: int = DERIVE) -> None:
    """Put samples on the list; level 1 wins over 2. Ids without a sample are left out."""
    ids = list(sample_ids)
    if not ids:
        return
    if level == DERIVE:
        raw_rows.select(connection, "UPDATE stale SET level = 1 WHERE level > 1 AND sample_id {ids}", ids)
    raw_rows.select(
        connection,
        f"INSERT INTO stale (sample_id, level) SELECT s.sample_id, {int(level)} FROM sample AS s WHERE s.sample_id "
        "{ids} AND NOT EXISTS (SELECT 1 FROM stale AS x WHERE x.sample_id = s.sample_id)",
        ids,
    )


def mark_all(connection: sa.Connection, level: int = DERIVE) -> None:
    """Put every sample on the list."""
    if level == DERIVE:
        connection.exec_driver_sql("UPDATE stale SET level = 1 WHERE level > 1")
    connection.exec_driver_sql(
        f"INSERT INTO stale (sample_id, level) SELECT s.sample_id, {int(level)} FROM sample AS s "
        "WHERE NOT EXISTS (SELECT 1 FROM stale AS x WHERE x.sample_id = s.sample_id)"
    )
