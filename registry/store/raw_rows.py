"""Many rows at once through the raw driver: ``executemany`` on SQLite, COPY on PostgreSQL.

:func:`cells` is where arrays become values that both drivers store alike: numpy numbers become Python's, NaN becomes
NULL, an infinity is refused.
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Sequence
from itertools import chain, islice
from typing import Any

import numpy as np
import sqlalchemy as sa

#: Variables bound in one multi-row statement (SQLite allows 32,766).
VARIABLES_AT_A_TIME = 400
#: Columns of a row that still goes many to a statement.
NARROW = 6


def cells(name: str, column: Any, sqlite: bool) -> list[Any]:
    """The values of one column as a list; ``name`` stands in the message where a number is infinite.

    On SQLite NaN stays NaN: the driver itself stores it as NULL.
    """
    array = column if isinstance(column, np.ndarray) else np.asarray(column)
    if array.dtype.kind == "f":
        array = array.astype(np.float64, copy=False)
        if np.isinf(array).any():
            row = int(np.flatnonzero(np.isinf(array))[0])
            raise ValueError(
                f"{name}: row {row} holds an infinite number; the register stores finite numbers or NULL, so the "
                "method must give NaN with a cause instead"
            )
        if sqlite:
            return array.tolist()
        missing = np.isnan(array)
        if not missing.any():
            return array.tolist()
        values = array.astype(object)
        values[missing] = None
        return values.tolist()
    if array.dtype.kind in "iub":
        return array.astype(np.int64, copy=False).tolist()
    if array.dtype.kind in "UO":
        return array.tolist()
    raise TypeError(f"{name}: values of type {array.dtype} cannot be stored; use float64, integers or text")


def driver_of(connection: sa.Connection) -> Any:
    """The driver's own connection, inside the transaction of ``connection``."""
    if not connection.in_transaction():
        raise RuntimeError("bulk rows are written inside writing(), which begins and ends the transaction")
    return connection.connection.driver_connection


def is_sqlite(connection: sa.Connection) -> bool:
    return connection.dialect.name == "sqlite"


def insert(connection: sa.Connection, table: str, names: Sequence[str], columns: Sequence[list[Any]]) -> None:
    """Insert rows given by columns; a row that clashes with another raises the driver's integrity error."""
    if not columns or not columns[0]:
        return
    listed = ", ".join(names)
    if is_sqlite(connection):
        _insert_sqlite(driver_of(connection), table, listed, len(names), columns)
    else:
        with (
            driver_of(connection).cursor() as cursor,
            cursor.copy(f"COPY {table} ({listed}) FROM STDIN") as copy,
        ):
            for row in zip(*columns, strict=True):
                copy.write_row(row)


def _insert_sqlite(driver: Any, table: str, listed: str, width: int, columns: Sequence[list[Any]]) -> None:
    """Many rows a statement take half the time for narrow rows, and twice for wide ones: those go one by one."""
    one = f"({', '.join('?' * width)})"
    if width > NARROW:
        driver.executemany(f"INSERT INTO {table} ({listed}) VALUES {one}", zip(*columns, strict=True))
        return
    rows_each = max(1, VARIABLES_AT_A_TIME // width)
    flat: list[Any] = [None] * (width * len(columns[0]))
    for position, column in enumerate(columns):
        flat[position::width] = column
    whole = len(columns[0]) // rows_each * rows_each * width
    step = rows_each * width
    many = f"INSERT INTO {table} ({listed}) VALUES {', '.join([one] * rows_each)}"
    if whole:
        driver.executemany(many, (flat[start : start + step] for start in range(0, whole, step)))
    driver.executemany(
        f"INSERT INTO {table} ({listed}) VALUES {one}",
        (flat[start : start + width] for start in range(whole, len(flat), width)),
    )


def upsert(
    connection: sa.Connection,
    table: str,
    keys: Sequence[str],
    names: Sequence[str],
    columns: Sequence[list[Any]],
    cleared: Sequence[str] = (),
    fresh: bool = False,
) -> None:
    """Insert rows given by columns, or overwrite those with the same ``keys``.

    ``names`` are the columns' names, keys among them; ``cleared`` are further columns, set to NULL.
    ``fresh``: no row has one of these keys yet, so the rows are simply inserted.
    """
    if not columns or not columns[0]:
        return
    if fresh:
        insert(connection, table, names, columns)
        return
    changed = [name for name in names if name not in keys]
    updates = [f"{name} = excluded.{name}" for name in changed] + [f"{name} = NULL" for name in cleared]
    listed = ", ".join(names)
    ending = f"ON CONFLICT ({', '.join(keys)}) DO UPDATE SET {', '.join(updates)}"
    if is_sqlite(connection):
        places = ", ".join("?" * len(names))
        driver_of(connection).executemany(
            f"INSERT INTO {table} ({listed}) VALUES ({places}) {ending}", zip(*columns, strict=True)
        )
        return
    with driver_of(connection).cursor() as cursor:
        cursor.execute(f"CREATE TEMPORARY TABLE incoming ON COMMIT DROP AS SELECT {listed} FROM {table} WITH NO DATA")
        with cursor.copy(f"COPY incoming ({listed}) FROM STDIN") as copy:
            for row in zip(*columns, strict=True):
                copy.write_row(row)
        cursor.execute(f"INSERT INTO {table} ({listed}) SELECT {listed} FROM incoming {ending}")
        cursor.execute("DROP TABLE incoming")


def select(connection: sa.Connection, query: str, ids: Iterable[int] | None = None) -> list[tuple[Any, ...]]:
    """Rows of a query as plain tuples, by the raw driver; ``{ids}`` in it stands for the condition on the ids.

    Write ``WHERE sample_id {ids}``: it becomes membership in the given ids, or is always true where ids is None
    (``column`` then must not be NULL).
    """
    driver = driver_of(connection)
    if ids is None:
        return driver.execute(query.replace("{ids}", "IS NOT NULL")).fetchall()
    numbers = ids.tolist() if isinstance(ids, np.ndarray) else [int(number) for number in ids]
    if is_sqlite(connection):
        listed = json.dumps(numbers)
        times = query.count("{ids}")
        return driver.execute(
            query.replace("{ids}", "IN (SELECT value FROM json_each(?))"), (listed,) * times
        ).fetchall()
    with driver.cursor() as cursor:
        times = query.count("{ids}")
        cursor.execute(query.replace("{ids}", "= ANY(CAST(%s AS bigint[]))"), (numbers,) * times)
        return cursor.fetchall() if cursor.description else []


def numbers_of(rows: Sequence[tuple[Any, ...]], width: int) -> np.ndarray:
    """Rows of numbers (none NULL) as a float64 array (len(rows), width); whole numbers up to 2**53 stay exact."""
    flat = np.fromiter(chain.from_iterable(rows), dtype=np.float64, count=len(rows) * width)
    return flat.reshape(len(rows), width)


def in_parts(values: Iterable[Any], size: int) -> Iterator[list[Any]]:
    """Lists of at most ``size`` values, in order."""
    source = iter(values)
    while part := list(islice(source, size)):
        yield part
