"""The log of changes: who changed what, and when."""

from __future__ import annotations

from typing import Any

from sqlalchemy import Connection, func, select

from registry.store import tables

_entry = tables.audit_entry
#: What the log can be narrowed to.
NARROWED_BY = ("subject", "account", "action")


def audit_entries(
    connection: Connection, narrowed: dict[str, str], offset: int, limit: int
) -> tuple[list[dict[str, Any]], int]:
    """(entries newest first as ``at account action subject detail``, how many there are in all).

    ``narrowed``: columns of NARROWED_BY with the text that they hold, exactly.
    """
    wanted = [_entry.c[name] == narrowed[name] for name in NARROWED_BY if narrowed.get(name)]
    names = ("at", "account", "action", "subject", "detail")
    query = select(*(_entry.c[name] for name in names)).where(*wanted).order_by(_entry.c.audit_entry_id.desc())
    rows = [dict(row._mapping) for row in connection.execute(query.offset(offset).limit(limit))]
    return rows, int(connection.scalar(select(func.count()).select_from(_entry).where(*wanted)) or 0)
