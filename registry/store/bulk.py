"""Fast writes of results, compositions, derived rows and verdicts, alike on both engines. All upsert, none replaces."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from typing import Any

import numpy as np
import sqlalchemy as sa

from registry.petrology.analytes import CHOSEN_COLUMNS, QUALIFIER_SIGNS
from registry.petrology.digestion import DIGESTION_LETTERS
from registry.store import raw_rows
from registry.store.raw_rows import cells
from registry.store.sheets import DERIVED_COLUMNS, VERDICT_WORDS
from registry.store.stale_rules import PREFIX
from registry.store.verdict_rows import (
    NO_VERDICT,
    Judged,
    codes_of,
    count_verdict_changes,
    last_verdict_change,
    log_verdict_changes,
    verdicts_of,
    write_verdicts,
)

__all__ = [
    "NO_VERDICT",
    "QUALIFIER_LETTERS",
    "Judged",
    "allocate_ids",
    "censored",
    "codes_of",
    "count_verdict_changes",
    "guarded",
    "insert_aliquots",
    "insert_results",
    "last_verdict_change",
    "log_verdict_changes",
    "packed",
    "strings",
    "verdicts_of",
    "write_composition",
    "write_derived",
    "write_verdicts",
]

QUALIFIER_LETTERS = ".<>"
_DERIVED = frozenset(DERIVED_COLUMNS)


@contextmanager
def guarded(connection: sa.Connection) -> Iterator[None]:
    """Keep the stale triggers silent inside: for a route that computes what it writes from the arrays in hand.

    On SQLite even a silent trigger costs a third of inserting results: those on new results are lifted meanwhile. An
    error rolls the whole transaction back, triggers and guard with it, so nothing is put back here then.
    """
    connection.exec_driver_sql("INSERT INTO import_guard (guard) VALUES (1)")
    lifted: list[tuple[str, str]] = []
    if raw_rows.is_sqlite(connection):
        rows = connection.execute(
            sa.text(
                "SELECT name, sql FROM sqlite_master WHERE type = 'trigger' AND tbl_name = 'result' "
                "AND name LIKE :stale AND name LIKE '%insert'"
            ),
            {"stale": f"{PREFIX}stale%"},
        )
        lifted = [(name, statement) for name, statement in rows]
    for name, _ in lifted:
        connection.exec_driver_sql(f"DROP TRIGGER {name}")
    yield
    for _, statement in lifted:
        connection.exec_driver_sql(statement)
    connection.exec_driver_sql("DELETE FROM import_guard")


def allocate_ids(connection: sa.Connection, table: str, count: int) -> np.ndarray:
    """``count`` ids of a table, int64 ascending, that no row has had or will get."""
    if count == 0:
        return np.zeros(0, dtype=np.int64)
    if raw_rows.is_sqlite(connection):
        last = connection.exec_driver_sql("SELECT seq FROM sqlite_sequence WHERE name = ?", (table,)).scalar() or 0
        return np.arange(last + 1, last + 1 + count, dtype=np.int64)
    rows = connection.execute(
        sa.text("SELECT nextval(pg_get_serial_sequence(:table, :key)) FROM generate_series(1, :count)"),
        {"table": table, "key": f"{table}_id", "count": count},
    ).scalars()
    return np.sort(np.fromiter(rows, dtype=np.int64, count=count))


def insert_aliquots(
    connection: sa.Connection,
    sample_ids: np.ndarray,
    batch_id: int,
    line_no: Any,
    kinds: Any,
    repeat_no: Any,
    control_text: Sequence[str | None] | None = None,
) -> np.ndarray:
    """Insert one aliquot a line of a certificate (all arrays (n,)); their ids, int64 (n,), ascending.

    ``control_text`` is what the certificate says of the lines (``BLANK``), None where it says nothing.
    """
    ids = allocate_ids(connection, "aliquot", len(sample_ids))
    columns: dict[str, Any] = {
        "aliquot_id": ids,
        "sample_id": sample_ids,
        "batch_id": np.full(len(ids), batch_id),
        "line_no": line_no,
        "kind": np.asarray(kinds, dtype=object),
        "repeat_no": repeat_no,
    }
    if control_text is not None:
        columns["control_text"] = np.asarray(control_text, dtype=object)
    sqlite = raw_rows.is_sqlite(connection)
    raw_rows.insert(
        connection, "aliquot", list(columns), [cells(name, column, sqlite) for name, column in columns.items()]
    )
    return ids


def insert_results(
    connection: sa.Connection, aliquot_ids: Any, column_ids: Any, values: np.ndarray, qualifiers: np.ndarray
) -> int:
    """Insert results and say how many; written in key order, which is half the cost of a random one.

    ``aliquot_ids`` (n,), ``column_ids`` (m,), ``values`` float64 (n, m) as reported, ``qualifiers`` uint8 (n, m).
    NaN without a qualifier is no result; NaN with one is a result without a number.
    """
    aliquots, columns = np.asarray(aliquot_ids, dtype=np.int64), np.asarray(column_ids, dtype=np.int64)
    if values.shape != (len(aliquots), len(columns)) or qualifiers.shape != values.shape:
        raise ValueError(
            f"values {values.shape} and qualifiers {qualifiers.shape} must both be "
            f"({len(aliquots)}, {len(columns)}): a row an aliquot, a column a batch column"
        )
    rows, places = np.argsort(aliquots, kind="stable"), np.argsort(columns, kind="stable")
    sqlite = raw_rows.is_sqlite(connection)
    count = 0
    step = max(1, 1_000_000 // max(1, len(columns)))
    for start in range(0, len(rows), step):
        part = np.ix_(rows[start : start + step], places)
        numbers, signs = values[part], qualifiers[part]
        keep = ~np.isnan(numbers) | (signs > 0)
        line, place = np.nonzero(keep)
        raw_rows.insert(
            connection,
            "result",
            ("aliquot_id", "column_id", "value", "qualifier"),
            [
                aliquots[rows[start : start + step]][line].tolist(),
                columns[places][place].tolist(),
                cells("result.value", numbers[keep], sqlite),
                signs[keep].tolist(),
            ],
        )
        count += len(line)
    return count


def packed(codes: np.ndarray, letters: str) -> list[str]:
    """One string a row of ``codes`` uint8 (n, width), each code written as its letter."""
    table = np.frombuffer(letters.encode("latin-1"), dtype=np.uint8)
    return strings(table[codes])


def strings(characters: np.ndarray) -> list[str]:
    """One string a row of characters, uint8 (n, width)."""
    n, width = characters.shape
    text = np.ascontiguousarray(characters, dtype=np.uint8).tobytes().decode("latin-1")
    return [text[start : start + width] for start in range(0, n * width, width)] if width else [""] * n


def censored(qualifiers: np.ndarray) -> list[str | None]:
    """``zr_ppm<,sn_ppm>`` for each sample of ``qualifiers`` uint8 (81, n); None where nothing is censored."""
    labels = [[f"{column}{sign}" for sign in QUALIFIER_SIGNS] for column in CHOSEN_COLUMNS]
    texts: list[str | None] = [None] * qualifiers.shape[1]
    sample, column = np.nonzero(qualifiers.T)
    if not len(sample):
        return texts
    words = [labels[c][q] for c, q in zip(column.tolist(), qualifiers[column, sample].tolist(), strict=True)]
    starts = np.flatnonzero(np.r_[True, sample[1:] != sample[:-1]])
    ends = [*starts[1:].tolist(), len(words)]
    for row, start, end in zip(sample[starts].tolist(), starts.tolist(), ends, strict=True):
        texts[row] = ",".join(words[start:end])
    return texts


def write_composition(
    connection: sa.Connection,
    sample_ids: Any,
    values: np.ndarray,
    qualifiers: np.ndarray,
    digestions: np.ndarray,
    fresh: bool = False,
) -> None:
    """Upsert compositions: values float64, qualifier and digestion codes uint8, each (81, n).

    ``fresh`` (here and below): the samples have no such rows yet, so that nothing needs to be looked up.
    """
    sqlite = raw_rows.is_sqlite(connection)
    filled = {
        name: cells(name, column, sqlite)
        for name, column in zip(CHOSEN_COLUMNS, values, strict=True)
        if not np.isnan(column).all()
    }
    columns = {
        "sample_id": cells("sample_id", sample_ids, sqlite),
        **filled,
        "qualifiers": packed(qualifiers.T, QUALIFIER_LETTERS),
        "digestions": packed(digestions.T, DIGESTION_LETTERS),
        "censored": censored(qualifiers),
    }
    cleared = [name for name in CHOSEN_COLUMNS if name not in filled]
    raw_rows.upsert(connection, "composition", ("sample_id",), list(columns), list(columns.values()), cleared, fresh)


def write_derived(
    connection: sa.Connection,
    sample_ids: Any,
    columns: Mapping[str, np.ndarray],
    causes: np.ndarray,
    warnings: np.ndarray,
    convention_set_id: int,
    method_version: str,
    best_target: np.ndarray | None = None,
    best_verdict: np.ndarray | None = None,
    fresh: bool = False,
) -> None:
    """Upsert derived rows: ``columns`` by name (n,), float64 or object with None; what is not given becomes NULL.

    ``causes`` and ``warnings`` are characters, uint8 (n, quantities) and (n, warnings); ``best_target`` codes and
    ``best_verdict`` words, object arrays with None. ValueError names a column the table does not have.
    """
    strangers = sorted(set(columns) - _DERIVED)
    if strangers:
        raise ValueError(
            f"the derived table has no columns {strangers}; a new quantity needs a migration and a place in sheets"
        )
    sqlite = raw_rows.is_sqlite(connection)
    n = len(sample_ids)
    rows = {"sample_id": cells("sample_id", sample_ids, sqlite)}
    for name, column in columns.items():
        if column.dtype.kind != "f" or not np.isnan(column).all():
            rows[name] = cells(name, column, sqlite)
    rows["causes"], rows["warnings"] = strings(causes), strings(warnings)
    rows["convention_set_id"], rows["method_version"] = [convention_set_id] * n, [method_version] * n
    if best_target is not None and best_verdict is not None:
        codes = {word: code for code, word in enumerate(VERDICT_WORDS)}
        rows["best_target"] = best_target.tolist()
        rows["best_verdict"] = [codes.get(word) for word in best_verdict.tolist()]
    cleared = [name for name in (*DERIVED_COLUMNS, "best_target", "best_verdict") if name not in rows]
    raw_rows.upsert(connection, "derived", ("sample_id",), list(rows), list(rows.values()), cleared, fresh)
