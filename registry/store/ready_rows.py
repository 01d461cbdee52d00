"""Rows made ready in a small database in memory, by a process beside the import, and taken over record by record.

Binding two hundred numbers a row is what writing derived rows costs. A child process does it on the second core of
the machine, in tables made by the registry's own statements; what it gives back is SQLite's own file format, as bytes.
Taking the rows over copies their records whole, at a tenth of the cost. CHECKs are not tested row by row here (a test
has SQLite's integrity check look at what an import by this way left).
"""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from functools import lru_cache
from typing import Any

import sqlalchemy as sa

from registry.store import raw_rows

#: Made ready: what is computed of a sample. (Its composition is in the parent's hands anyway.)
TABLES = ("derived", "verdict")
#: The name under which the ready rows are attached to the registry's connection.
_SCHEMA = "ready"


def statements_of(connection: sa.Connection) -> tuple[str, ...]:
    """The statements that make the tables of ready rows as this registry has them; none where there is no such way.

    PostgreSQL has none, neither has an SQLite that was built without serialising.
    """
    if not raw_rows.is_sqlite(connection) or not hasattr(sqlite3.Connection, "deserialize"):
        return ()
    rows = connection.exec_driver_sql("SELECT name, sql FROM main.sqlite_master WHERE type = 'table'")
    made = {row[0]: row[1] for row in rows}
    return tuple(made[table] for table in TABLES)


@contextmanager
def beside(statements: Sequence[str]) -> Iterator[sa.Connection]:
    """A connection in a transaction, on a new database in memory with the tables that ``statements`` make."""
    engine = sa.create_engine("sqlite://", poolclass=sa.pool.StaticPool)
    try:
        with engine.connect() as connection:
            driver: Any = connection.connection.driver_connection
            driver.deserialize(_nothing())  # kept as one piece of memory from now on: quickly packed
            for statement in ("PRAGMA journal_mode=OFF", "PRAGMA ignore_check_constraints=ON", *statements):
                connection.exec_driver_sql(statement)
            yield connection
    finally:
        engine.dispose()


def packed(connection: sa.Connection) -> bytes:
    """Everything in the database of ``beside``."""
    driver: sqlite3.Connection = raw_rows.driver_of(connection)
    driver.commit()
    return driver.serialize()


def take_over(connection: sa.Connection, ready: bytes) -> None:
    """Insert the rows of ``packed``: of samples that have no such rows yet."""
    driver: sqlite3.Connection = raw_rows.driver_of(connection)
    if not _attached(driver):
        driver.execute(f"ATTACH ':memory:' AS {_SCHEMA}")
    driver.deserialize(ready, name=_SCHEMA)
    driver.execute("PRAGMA ignore_check_constraints=ON")
    try:
        for table in TABLES:
            driver.execute(f"INSERT INTO main.{table} SELECT * FROM {_SCHEMA}.{table}")
    finally:
        driver.execute("PRAGMA ignore_check_constraints=OFF")


def let_go(connection: sa.Connection) -> None:
    """Give back the memory of the rows taken over last (detaching has to wait for the end of the transaction)."""
    if raw_rows.is_sqlite(connection):
        driver: sqlite3.Connection = raw_rows.driver_of(connection)
        if _attached(driver):
            driver.deserialize(_nothing(), name=_SCHEMA)


def _attached(driver: sqlite3.Connection) -> bool:
    return any(name == _SCHEMA for _, name, _ in driver.execute("PRAGMA database_list"))


@lru_cache(maxsize=1)
def _nothing() -> bytes:
    """A database without tables."""
    empty = sqlite3.connect(":memory:")
    try:
        empty.execute("PRAGMA page_size=16384")
        empty.execute("PRAGMA user_version=1")
        return empty.serialize()
    finally:
        empty.close()
