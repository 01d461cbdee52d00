"""The controls of batches out of the store and their judged results into it."""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import sqlalchemy as sa

from registry.store import raw_rows, survival_rows, tables
from registry.store.raw_rows import cells
from registry.store.sheets import CONTROL_KINDS

_KINDS = ", ".join(f"'{kind}'" for kind in CONTROL_KINDS)
#: Code of a failing analyte in ``control_state``.
FAILS = 2


@dataclass(frozen=True)
class StoredLine:
    """A control line of a batch, or a repeated line."""

    aliquot_id: int
    line_no: int
    repeat_no: int
    control_text: str | None
    sample_id: int
    code: str
    kind: str
    reference_material: str | None
    duplicate_of: int | None
    duplicate_stage: str | None


@dataclass(frozen=True)
class StoredColumn:
    """A column of a batch as its controls see it."""

    column_id: int
    analyte: str
    unit: str
    digestion: str
    detection_limit: float | None


def control_lines(connection: sa.Connection, batch_id: int) -> list[StoredLine]:
    """The lines of a batch that are control samples, repeats, or called controls by the certificate, in line order."""
    rows = raw_rows.select(
        connection,
        "SELECT a.aliquot_id, a.line_no, a.repeat_no, a.control_text, s.sample_id, s.code, s.kind, "
        "s.reference_material, s.duplicate_of, s.duplicate_stage FROM aliquot AS a "
        "JOIN sample AS s ON s.sample_id = a.sample_id "
        f"WHERE a.batch_id {{ids}} AND (s.kind IN ({_KINDS}) OR a.repeat_no > 0 OR a.control_text IS NOT NULL) "
        "ORDER BY a.line_no, a.aliquot_id",
        [batch_id],
    )
    return [StoredLine(*row) for row in rows]


def batch_columns(connection: sa.Connection, batch_id: int) -> list[StoredColumn]:
    """The columns of a batch, by id."""
    rows = raw_rows.select(
        connection,
        "SELECT batch_column_id, analyte, unit, digestion, detection_limit FROM batch_column WHERE batch_id {ids} "
        "ORDER BY batch_column_id",
        [batch_id],
    )
    return [StoredColumn(*row) for row in rows]


def first_lines(connection: sa.Connection, batch_id: int, sample_ids: Iterable[int]) -> dict[int, int]:
    """The aliquot of the first line of each sample in a batch, by sample id."""
    rows = raw_rows.select(
        connection,
        "SELECT sample_id, aliquot_id FROM aliquot WHERE sample_id {ids} AND repeat_no = 0 "
        f"AND batch_id = {int(batch_id)} ORDER BY line_no DESC, aliquot_id DESC",
        list(sample_ids),
    )
    return dict(rows)


def parts_beside(connection: sa.Connection, batch_id: int) -> list[int]:
    """The other parts of the certificate of a batch that are active or in the same state, oldest first."""
    rows = connection.exec_driver_sql(
        "SELECT p.batch_id FROM batch AS b JOIN batch AS p ON coalesce(p.part_of, p.batch_id) = "
        f"coalesce(b.part_of, b.batch_id) AND p.state IN ('active', b.state) AND p.batch_id <> b.batch_id "
        f"WHERE b.batch_id = {int(batch_id)} ORDER BY p.batch_id"
    )
    return [row[0] for row in rows]


def with_their_parts(connection: sa.Connection, batch_ids: Sequence[int]) -> list[int]:
    """These batches with all other parts of their certificates, ascending."""
    if not batch_ids:
        return []
    rows = raw_rows.select(
        connection,
        "SELECT DISTINCT p.batch_id FROM batch AS b JOIN batch AS p ON coalesce(p.part_of, p.batch_id) = "
        "coalesce(b.part_of, b.batch_id) WHERE b.batch_id {ids}",
        batch_ids,
    )
    return sorted({*batch_ids, *(row[0] for row in rows)})


def lines_before(connection: sa.Connection, batch_id: int, line_no: np.ndarray) -> np.ndarray:
    """The aliquot of the line before each given line of a batch, int64, 0 where it is the first."""
    rows = raw_rows.select(
        connection, "SELECT line_no, aliquot_id FROM aliquot WHERE batch_id {ids} ORDER BY line_no", [batch_id]
    )
    lines = raw_rows.numbers_of(rows, 2).astype(np.int64)
    place = np.searchsorted(lines[:, 0], line_no) - 1
    return np.where(place < 0, 0, lines[np.maximum(place, 0), 1])


def results_of(
    connection: sa.Connection, aliquot_ids: np.ndarray, column_ids: Sequence[int]
) -> tuple[np.ndarray, np.ndarray]:
    """Values float64 (NaN none) and qualifiers uint8 of aliquots in columns (ids ascending), both (n, m)."""
    values = np.full((len(aliquot_ids), len(column_ids)), np.nan)
    qualifiers = np.zeros(values.shape, dtype=np.uint8)
    wanted = np.unique(aliquot_ids[aliquot_ids > 0])
    if not len(wanted) or not len(column_ids):
        return values, qualifiers
    rows = raw_rows.select(
        connection,
        "SELECT aliquot_id, column_id, value, qualifier FROM result WHERE value IS NOT NULL AND aliquot_id {ids}",
        wanted,
    )
    found = raw_rows.numbers_of(rows, 4)
    columns = np.asarray(column_ids, dtype=np.int64)
    place = np.minimum(np.searchsorted(columns, found[:, 1].astype(np.int64)), len(columns) - 1)
    found, place = found[columns[place] == found[:, 1]], place[columns[place] == found[:, 1]]
    table = np.full((len(wanted), len(columns)), np.nan)
    signs = np.zeros(table.shape, dtype=np.uint8)
    line = np.searchsorted(wanted, found[:, 0].astype(np.int64))
    table[line, place], signs[line, place] = found[:, 2], found[:, 3].astype(np.uint8)
    there = np.flatnonzero(aliquot_ids > 0)
    rows_of = np.searchsorted(wanted, aliquot_ids[there])
    values[there], qualifiers[there] = table[rows_of], signs[rows_of]
    return values, qualifiers


def replace_outcomes(connection: sa.Connection, batch_id: int, columns: dict[str, Any]) -> None:
    """Write the judged results of a batch in place of the earlier ones: columns of ``control_outcome`` (n,)."""
    connection.execute(sa.delete(tables.control_outcome).where(tables.control_outcome.c.batch_id == batch_id))
    sqlite = raw_rows.is_sqlite(connection)
    listed = {name: cells(name, column, sqlite) for name, column in columns.items()}
    n = len(next(iter(listed.values()), []))
    raw_rows.insert(connection, "control_outcome", [*listed, "batch_id"], [*listed.values(), [batch_id] * n])


#: What of the state of an analyte the error of its results follows from.
_PRECISION = ("precision_s0", "precision_k", "bias_error_percent", "reference_results")


def replace_states(connection: sa.Connection, batch_id: int, rows: Sequence[dict[str, Any]]) -> bool:
    """Write the states of the analytes of a batch; whether other columns fail now than before.

    Where they show another precision, the probabilities of the batch's verdicts are set back: they rested on it.
    """
    table = tables.control_state
    before = [dict(row) for row in connection.execute(_STATES, {"batch": batch_id}).mappings()]
    connection.execute(sa.delete(table).where(table.c.batch_id == batch_id))
    if rows:
        connection.execute(sa.insert(table), [{**row, "batch_id": batch_id} for row in rows])
    if before:
        after = [dict(row) for row in connection.execute(_STATES, {"batch": batch_id}).mappings()]
        if [_precision(row) for row in before] != [_precision(row) for row in after]:
            survival_rows.set_back_batch(connection, batch_id)
    return _failing(before) != _failing(rows)


_STATES = (
    sa.select(tables.control_state)
    .where(tables.control_state.c.batch_id == sa.bindparam("batch"))
    .order_by(tables.control_state.c.column_id)
)


def _precision(row: dict[str, Any]) -> list[Any]:
    return [row["column_id"], *(row[name] for name in _PRECISION)]


def _failing(rows: Sequence[dict[str, Any]]) -> set[int]:
    return {row["column_id"] for row in rows if row["state"] == FAILS}


def failed_columns(connection: sa.Connection, batch_id: int | None = None) -> np.ndarray:
    """Ids of the columns that failed their controls, int64 ascending; of one batch or of all."""
    table = tables.control_state
    query = sa.select(table.c.column_id).where(table.c.state == FAILS).order_by(table.c.column_id)
    if batch_id is not None:
        query = query.where(table.c.batch_id == batch_id)
    return np.fromiter(connection.execute(query).scalars(), dtype=np.int64)


def touched_batches(connection: sa.Connection) -> list[int]:
    """Batches whose controls may have changed: named in ``stale_batch``, or with a stale line that controls something.

    A line controls something as a control sample, as one that was judged, or as the original of a duplicate or repeat.
    """
    named = [row[0] for row in connection.execute(sa.select(tables.stale_batch.c.batch_id))]
    rows = connection.exec_driver_sql(
        "SELECT DISTINCT a.batch_id FROM stale AS z JOIN sample AS s ON s.sample_id = z.sample_id "
        "JOIN aliquot AS a ON a.sample_id = z.sample_id WHERE z.level = 1 AND ("
        f"s.kind IN ({_KINDS}) OR a.repeat_no > 0 OR a.control_text IS NOT NULL "
        "OR EXISTS (SELECT 1 FROM control_outcome AS o WHERE o.aliquot_id = a.aliquot_id) "
        "OR EXISTS (SELECT 1 FROM sample AS d WHERE d.duplicate_of = s.sample_id) "
        "OR EXISTS (SELECT 1 FROM aliquot AS r WHERE r.sample_id = s.sample_id AND r.repeat_no > 0))"
    )
    return sorted({*named, *(row[0] for row in rows)})


def clear_batches(connection: sa.Connection) -> None:
    """Every named batch is judged anew: empty the list."""
    connection.execute(sa.delete(tables.stale_batch))


def any_batch_named(connection: sa.Connection) -> bool:
    """Whether a batch waits to be judged anew."""
    return connection.execute(sa.select(tables.stale_batch.c.batch_id).limit(1)).first() is not None


def samples_of_batch(connection: sa.Connection, batch_id: int) -> list[int]:
    """The ids of the samples on a batch."""
    query = sa.select(tables.aliquot.c.sample_id).where(tables.aliquot.c.batch_id == batch_id).distinct()
    return list(connection.execute(query).scalars())


def stale_unknown_samples(connection: sa.Connection) -> Iterator[tuple[int, str]]:
    """(id, code) of stale samples of the kind ``unknown``: those that a code pattern may call controls."""
    rows = connection.exec_driver_sql(
        "SELECT s.sample_id, s.code FROM stale AS z JOIN sample AS s ON s.sample_id = z.sample_id "
        "WHERE s.kind = 'unknown' AND z.level = 1"
    )
    for row in rows:
        yield row[0], row[1]


def kinds_of(connection: sa.Connection, codes: Iterable[str]) -> dict[str, str]:
    """The kinds of those codes that are samples, by code."""
    found: dict[str, str] = {}
    for part in raw_rows.in_parts(sorted(codes), 500):
        query = sa.select(tables.sample.c.code, tables.sample.c.kind).where(tables.sample.c.code.in_(part))
        found.update((row.code, row.kind) for row in connection.execute(query))
    return found


def set_kinds(connection: sa.Connection, kinds: dict[str, list[int]]) -> None:
    """Give samples another kind, by kind; a trigger marks them stale."""
    for kind, ids in kinds.items():
        for part in raw_rows.in_parts(ids, 500):
            connection.execute(sa.update(tables.sample).where(tables.sample.c.sample_id.in_(part)).values(kind=kind))


def set_originals(connection: sa.Connection, originals: dict[int, int]) -> None:
    """Say of which sample each duplicate is one, by ids."""
    if originals:
        connection.execute(
            sa.update(tables.sample)
            .where(tables.sample.c.sample_id == sa.bindparam("_duplicate"))
            .values(duplicate_of=sa.bindparam("_original")),
            [{"_duplicate": one, "_original": other} for one, other in originals.items()],
        )


def history(connection: sa.Connection, materials: Sequence[str] | None = None) -> list[tuple[Any, ...]]:
    """Judged results of materials (None: all) in active batches, oldest first, those within the laboratory's limits.

    Each is (material, analyte, unit, digestion, lab, day, batch, line, found, expected, z); ``day`` is the date
    the batch was reported, else received, else imported.
    """
    condition: str = "IS NOT NULL"
    given: tuple[Any, ...] = ()
    if materials is not None:
        sqlite = raw_rows.is_sqlite(connection)
        condition = "IN (SELECT value FROM json_each(?))" if sqlite else "= ANY(%s)"
        given = (json.dumps(list(materials)) if sqlite else list(materials),)
    rows = connection.exec_driver_sql(
        "SELECT o.material, c.analyte, c.unit, c.digestion, h.lab, coalesce(h.reported_on, h.received_on, "
        "substr(h.imported_at, 1, 10)) AS day, h.code, a.line_no, o.found, o.expected, o.z "
        "FROM control_outcome AS o JOIN batch AS h ON h.batch_id = o.batch_id AND h.state = 'active' "
        "JOIN batch_column AS c ON c.batch_column_id = o.column_id JOIN aliquot AS a ON a.aliquot_id = o.aliquot_id "
        "JOIN result AS r ON r.aliquot_id = o.aliquot_id AND r.column_id = o.column_id AND r.qualifier = 0 "
        f"WHERE o.kind = 'reference_material' AND o.z IS NOT NULL AND o.material {condition} "
        "ORDER BY o.material, c.analyte, c.unit, c.digestion, h.lab, day, h.batch_id, a.line_no",
        given,
    )
    return [tuple(row) for row in rows]


def pairs(connection: sa.Connection) -> list[tuple[Any, ...]]:
    """Pairs of duplicates and repeats in active batches.

    Each is (analyte, unit, digestion, lab, kind, code of the duplicate, its stage as the sample list says it, what the
    certificate says of its line, original, duplicate).
    """
    rows = connection.exec_driver_sql(
        "SELECT c.analyte, c.unit, c.digestion, h.lab, o.kind, s.code, s.duplicate_stage, a.control_text, "
        "o.expected, o.found "
        "FROM control_outcome AS o JOIN batch AS h ON h.batch_id = o.batch_id AND h.state = 'active' "
        "JOIN batch_column AS c ON c.batch_column_id = o.column_id JOIN aliquot AS a ON a.aliquot_id = o.aliquot_id "
        "JOIN sample AS s ON s.sample_id = a.sample_id "
        "WHERE o.kind IN ('duplicate', 'lab_repeat') AND o.z IS NOT NULL ORDER BY h.batch_id, a.line_no, a.aliquot_id"
    )
    return [tuple(row) for row in rows]
