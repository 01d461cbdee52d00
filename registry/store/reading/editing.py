"""What the edit forms offer: names and words that the registry uses already."""

from __future__ import annotations

from sqlalchemy import Connection, select

from registry.store import tables

OFFERED = 300
#: Sample rows looked through for words in use: enough to know them, without reading the whole table.
ROWS_READ = 20_000


def names_in_use(connection: Connection, table: str, column: str, limit: int = OFFERED) -> list[str]:
    """Different texts of a column in order, at most ``limit``; of a long table the first rows are looked through."""
    of = tables.metadata.tables[table].c[column]
    rows = select(of.label("word")).where(of.is_not(None)).limit(ROWS_READ).subquery()
    found = connection.execute(select(rows.c.word).distinct().order_by(rows.c.word).limit(limit)).scalars()
    return list(found)
