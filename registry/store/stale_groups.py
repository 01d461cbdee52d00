"""The list of intrusions and areas whose computed rows have to be computed anew."""

from __future__ import annotations

from typing import Any

import sqlalchemy as sa

from registry.store import raw_rows, tables

KINDS = ("intrusion", "area")


def pending(connection: sa.Connection, kind: str, limit: int | None = None) -> list[int]:
    """Ids of the stale intrusions or areas that are there, ascending, at most ``limit``."""
    _known(kind)
    key = tables.metadata.tables[kind].c[f"{kind}_id"]
    query = (
        sa.select(key)
        .join(tables.stale_group, sa.and_(tables.stale_group.c.group_id == key, tables.stale_group.c.kind == kind))
        .order_by(key)
    )
    return [int(row[0]) for row in connection.execute(query if limit is None else query.limit(limit))]


def any_pending(connection: sa.Connection) -> bool:
    """Whether an intrusion or an area waits."""
    return any(pending(connection, kind, 1) for kind in KINDS)


def mark_of_samples(connection: sa.Connection, sample_ids: Any) -> None:
    """Put the intrusions of these samples on the list."""
    raw_rows.select(
        connection,
        "INSERT INTO stale_group (kind, group_id) SELECT DISTINCT 'intrusion', s.intrusion_id FROM sample AS s "
        "WHERE s.intrusion_id IS NOT NULL AND s.sample_id {ids} AND NOT EXISTS "
        "(SELECT 1 FROM stale_group AS x WHERE x.kind = 'intrusion' AND x.group_id = s.intrusion_id)",
        sample_ids,
    )


def mark_all(connection: sa.Connection) -> None:
    """Put every intrusion and area on the list."""
    for kind in KINDS:
        connection.exec_driver_sql(
            f"INSERT INTO stale_group (kind, group_id) SELECT '{kind}', s.{kind}_id FROM {kind} AS s WHERE NOT EXISTS "
            f"(SELECT 1 FROM stale_group AS x WHERE x.kind = '{kind}' AND x.group_id = s.{kind}_id)"
        )


def clear(connection: sa.Connection, kind: str, ids: Any) -> None:
    """These are computed: take them off the list."""
    _known(kind)
    raw_rows.select(connection, f"DELETE FROM stale_group WHERE kind = '{kind}' AND group_id {{ids}}", ids)


def _known(kind: str) -> None:
    if kind not in KINDS:
        raise ValueError(f"'{kind}' is no group of samples; expected one of {KINDS}")
