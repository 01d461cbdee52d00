"""Reading samples back for a refresh: their results in blocks, their compositions, and what is known around them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import sqlalchemy as sa

from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.petrology.digestion import DIGESTION_LETTERS
from registry.store import raw_rows
from registry.store.bulk import QUALIFIER_LETTERS
from registry.store.sample_context import load_context

__all__ = [
    "Composition",
    "StoredBlock",
    "StoredColumn",
    "batches_by_newness",
    "load_blocks",
    "load_composition",
    "load_context",
    "samples_with_aliquots",
    "unpacked",
]


@dataclass(frozen=True)
class Composition:
    """Compositions of n samples: ids ascending int64 (n,); values float64, qualifiers and digestions uint8 (81, n)."""

    sample_ids: np.ndarray
    values: np.ndarray
    qualifiers: np.ndarray
    digestions: np.ndarray


@dataclass(frozen=True)
class StoredColumn:
    """A batch column: analyte symbol, unit and digestion as stored, and its id."""

    analyte: str
    unit: str
    digestion: str
    column_id: int


@dataclass(frozen=True)
class StoredBlock:
    """The results of one active batch, at most one line a sample.

    ``sample`` (lines,) positions among the ids asked for, each once; ``values`` float64 (lines, m) as reported, NaN
    where there is none; ``qualifiers`` uint8 (lines, m); ``newness`` ranks batches, 0 oldest; ``repeat`` 0 first line.
    """

    columns: tuple[StoredColumn, ...]
    sample: np.ndarray
    values: np.ndarray
    qualifiers: np.ndarray
    newness: int
    repeat: int


def samples_with_aliquots(connection: sa.Connection, sample_ids: Any) -> np.ndarray:
    """Those of the samples that stand in some batch, int64, ascending."""
    rows = raw_rows.select(
        connection, "SELECT DISTINCT sample_id FROM aliquot WHERE sample_id {ids} ORDER BY sample_id", sample_ids
    )
    return np.array([row[0] for row in rows], dtype=np.int64)


def samples_with_derived(connection: sa.Connection, sample_ids: Any) -> np.ndarray:
    """Those of the samples that have been computed before, int64, ascending."""
    rows = raw_rows.select(
        connection, "SELECT sample_id FROM derived WHERE sample_id {ids} ORDER BY sample_id", sample_ids
    )
    return np.array([row[0] for row in rows], dtype=np.int64)


def load_blocks(connection: sa.Connection, sample_ids: Any, held: np.ndarray | None = None) -> list[StoredBlock]:
    """The results of samples (ids ascending) in active batches, a block a batch and repeat.

    Newer is the batch reported later, then received later, then imported later. ``held`` are ids of batch columns
    whose results are left out.
    """
    ids = np.asarray(sample_ids, dtype=np.int64)
    lines = raw_rows.select(
        connection,
        "SELECT a.batch_id, a.repeat_no, a.sample_id, a.aliquot_id FROM aliquot AS a JOIN batch AS b ON "
        "b.batch_id = a.batch_id WHERE b.state = 'active' AND a.sample_id {ids} "
        "ORDER BY a.batch_id, a.repeat_no, a.sample_id, a.line_no, a.aliquot_id",
        ids,
    )
    if not lines:
        return []
    aliquots = raw_rows.numbers_of(lines, 4).astype(np.int64)
    # the same line said twice (two files of one certificate) goes into blocks of its own
    same = np.r_[False, (aliquots[1:, :3] == aliquots[:-1, :3]).all(axis=1)]
    occurrence = _running_count(same)
    results = raw_rows.select(
        connection,
        "SELECT aliquot_id, column_id, value, qualifier FROM result WHERE value IS NOT NULL AND aliquot_id {ids}",
        aliquots[:, 3],
    )
    found = raw_rows.numbers_of(results, 4)
    if held is not None and len(held):
        found = found[~np.isin(found[:, 1], held)]
    columns = _columns(connection, np.unique(aliquots[:, 0]))
    newness = _newness(connection)
    by_aliquot = np.argsort(aliquots[:, 3], kind="stable")
    line_of = by_aliquot[np.searchsorted(aliquots[by_aliquot, 3], found[:, 0].astype(np.int64))]
    keys = np.stack([aliquots[:, 0], aliquots[:, 1], occurrence], axis=1)
    groups, group_of = np.unique(keys, axis=0, return_inverse=True)
    group_of = group_of.reshape(-1)
    result_group = group_of[line_of]
    order = np.argsort(result_group, kind="stable")
    ends = np.searchsorted(result_group[order], np.arange(len(groups) + 1))
    blocks = []
    for number, (batch_id, repeat, _) in enumerate(groups.tolist()):
        rows = np.flatnonzero(group_of == number)
        here = order[ends[number] : ends[number + 1]]
        column_ids, described = columns.get(batch_id, (np.zeros(0, dtype=np.int64), ()))
        blocks.append(
            _block(
                described,
                column_ids,
                np.searchsorted(ids, aliquots[rows, 2]),
                np.searchsorted(rows, line_of[here]),
                found[here],
                newness[batch_id],
                int(repeat),
            )
        )
    return blocks


def _block(
    described: tuple[StoredColumn, ...],
    column_ids: np.ndarray,
    sample: np.ndarray,
    line: np.ndarray,
    found: np.ndarray,
    newness: int,
    repeat: int,
) -> StoredBlock:
    values = np.full((len(sample), len(column_ids)), np.nan)
    qualifiers = np.zeros(values.shape, dtype=np.uint8)
    wanted = found[:, 1].astype(np.int64)
    place = np.minimum(np.searchsorted(column_ids, wanted), max(0, len(column_ids) - 1))
    known = column_ids[place] == wanted if len(column_ids) else np.zeros(len(found), dtype=bool)
    values[line[known], place[known]] = found[known, 2]
    qualifiers[line[known], place[known]] = found[known, 3].astype(np.uint8)
    return StoredBlock(described, sample, values, qualifiers, newness, repeat)


def _running_count(same: np.ndarray) -> np.ndarray:
    """How many rows before this one, without a gap, said the same."""
    position = np.arange(len(same))
    starts = np.maximum.accumulate(np.where(same, 0, position))
    return position - starts


def _columns(
    connection: sa.Connection, batch_ids: np.ndarray
) -> dict[int, tuple[np.ndarray, tuple[StoredColumn, ...]]]:
    rows = raw_rows.select(
        connection,
        "SELECT batch_id, batch_column_id, analyte, unit, digestion FROM batch_column WHERE batch_id {ids} "
        "ORDER BY batch_id, batch_column_id",
        batch_ids,
    )
    grouped: dict[int, tuple[list[int], list[StoredColumn]]] = {}
    for batch_id, column_id, analyte, unit, digestion in rows:
        ids, described = grouped.setdefault(batch_id, ([], []))
        ids.append(column_id)
        described.append(StoredColumn(analyte, unit, digestion, column_id))
    return {
        batch_id: (np.array(ids, dtype=np.int64), tuple(described)) for batch_id, (ids, described) in grouped.items()
    }


def _newness(connection: sa.Connection) -> dict[int, int]:
    rows = raw_rows.select(
        connection,
        "SELECT batch_id FROM batch ORDER BY coalesce(reported_on, received_on, substr(imported_at, 1, 10)), "
        "imported_at, batch_id",
    )
    return {row[0]: rank for rank, row in enumerate(rows)}


def batches_by_newness(connection: sa.Connection) -> list[str]:
    """The codes of all batches from the oldest to the newest: what ``newness`` of a block counts."""
    ranks = _newness(connection)
    rows = raw_rows.select(connection, "SELECT batch_id, code FROM batch WHERE batch_id {ids}", list(ranks))
    codes = dict(rows)
    return [codes[batch_id] for batch_id in sorted(ranks, key=ranks.__getitem__)]


def load_composition(connection: sa.Connection, sample_ids: Any) -> Composition:
    """The stored compositions of samples; a sample without one has NaN throughout."""
    ids = np.sort(np.asarray(sample_ids, dtype=np.int64))
    shape = (len(CHOSEN_COLUMNS), len(ids))
    values = np.full(shape, np.nan)
    qualifiers, digestions = np.zeros(shape, dtype=np.uint8), np.zeros(shape, dtype=np.uint8)
    rows = raw_rows.select(
        connection,
        f"SELECT sample_id, qualifiers, digestions, {', '.join(CHOSEN_COLUMNS)} FROM composition WHERE sample_id "
        "{ids} ORDER BY sample_id",
        ids,
    )
    if rows:
        stored_ids, signs, letters, *numbers = zip(*rows, strict=True)
        place = np.searchsorted(ids, np.array(stored_ids, dtype=np.int64))
        values[:, place] = np.array(numbers, dtype=np.float64)
        qualifiers[:, place] = unpacked(signs, QUALIFIER_LETTERS).T
        digestions[:, place] = unpacked(letters, DIGESTION_LETTERS).T
    return Composition(ids, values, qualifiers, digestions)


def unpacked(texts: Any, letters: str) -> np.ndarray:
    """The codes, uint8 (n, width), of strings that ``bulk.packed`` wrote; an unknown letter counts as code 0."""
    table = np.zeros(256, dtype=np.uint8)
    table[np.frombuffer(letters.encode("latin-1"), dtype=np.uint8)] = np.arange(len(letters), dtype=np.uint8)
    characters = np.frombuffer("".join(texts).encode("latin-1"), dtype=np.uint8)
    return table[characters].reshape(len(texts), -1)
