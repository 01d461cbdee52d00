"""Sampled intervals of a hole that overlap partly: one length of core can lie in one bag only."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
import sqlalchemy as sa

from registry.errors import Problem
from registry.store import raw_rows
from registry.store.current_values import current

Rows = dict[str, list[Any]]
Known = Mapping[tuple[Any, ...], Mapping[str, Any]]
#: Equal remarks are listed up to this number, then counted.
LISTED = 20
#: Overlaps up to this are rounding (feet, a marker block). Common practice, no source.
ROUNDING_M = 0.01
#: Kinds that repeat a rock or hold none: their intervals are those of others.
_REPEATS = ("duplicate", "blank", "reference_material")


def partial_overlaps(
    connection: sa.Connection, given: Rows, stored: Rows, known: Known, lines: Sequence[int], file: str
) -> list[Problem]:
    """A warning for each sample of the file whose interval crosses that of another sample of its site.

    The others are those of the file and those registered. An interval that holds another whole, or is the same, is
    taken without a word: a piece for a section out of a longer sample, a second split. Duplicates are left out.
    """
    original = given.get("duplicate_of", [None] * len(lines))
    columns = [current(stored, known, name) for name in ("site_id", "from_m", "to_m", "kind")]
    mine = zip(*columns, stored["code"], strict=True)
    spans = [
        (site, start, end, code, lines[row])
        for row, (site, start, end, kind, code) in enumerate(mine)
        if None not in (site, start, end)
        and start < end
        and kind not in _REPEATS
        and original[row] is None
        and known.get((code,), {}).get("duplicate_of") is None
    ]
    if not spans:
        return []
    own = set(stored["code"])
    query = "SELECT site_id, from_m, to_m, code, kind, duplicate_of FROM sample WHERE site_id {ids}"
    spans += [
        (site, start, end, code, 0)
        for site, start, end, code, kind, of in raw_rows.select(connection, query, {span[0] for span in spans})
        if None not in (start, end) and start < end and kind not in _REPEATS and of is None and code not in own
    ]
    spans.sort(key=lambda span: span[:3])
    numbers = np.array([span[:3] for span in spans], dtype=np.float64)
    crossing = _crossing_pairs(numbers[:, 0], numbers[:, 1], numbers[:, 2])
    told: dict[int, tuple[Any, Any]] = {}
    for first, second in crossing.tolist():
        upper, lower = spans[first], spans[second]
        new, other = (lower, upper) if lower[4] else (upper, lower)
        if new[4]:
            told.setdefault(new[4], (new, other))
    problems = [_remark(*told[line], file) for line in sorted(told)[:LISTED]]
    if len(told) > LISTED:
        more = f"{len(told) - LISTED:,} more samples overlap partly with another of their hole"
        problems.append(Problem(file, more, severity="warning"))
    return problems


def _crossing_pairs(site: np.ndarray, start: np.ndarray, end: np.ndarray) -> np.ndarray:
    """Rows (upper, lower), int64 (p, 2), whose intervals cross: ``upper`` begins and ends first, and ends within
    ``lower``. All (n,), sorted by site, then start. Each row is compared with those before it as far as any of them
    reaches down to it."""
    pairs = [np.zeros((0, 2), dtype=np.int64)]
    bounds = np.flatnonzero(np.r_[True, site[1:] != site[:-1], True])
    first, reach = np.zeros(len(site), dtype=np.int64), np.empty(len(site))
    for low, high in zip(bounds[:-1].tolist(), bounds[1:].tolist(), strict=True):  # holes, not samples
        first[low:high] = low
        reach[low:high] = np.maximum.accumulate(end[low:high])
    rows, lag = np.arange(len(site), dtype=np.int64), 0
    while len(rows):
        lag += 1
        rows = rows[rows - lag >= first[rows]]
        rows = rows[reach[rows - lag] > start[rows] + ROUNDING_M]
        above = rows - lag
        crosses = (start[above] + ROUNDING_M < start[rows]) & (end[above] > start[rows] + ROUNDING_M)
        crosses &= end[above] + ROUNDING_M < end[rows]
        pairs.append(np.column_stack([above[crosses], rows[crosses]]))
    return np.concatenate(pairs)


def _remark(new: tuple[Any, ...], other: tuple[Any, ...], file: str) -> Problem:
    whose = f"sample {other[3]}, " + (f"row {other[4]}" if other[4] else "registered")
    return Problem(
        file,
        "the sampled interval overlaps partly that of another sample of its hole",
        new[4],
        "from_m",
        f"{new[1]:g} to {new[2]:g}",
        f"depths outside {other[1]:g} to {other[2]:g} ({whose})",
        "correct the depths if the overlap is not meant; say what it duplicates if it is a duplicate",
        "warning",
    )
