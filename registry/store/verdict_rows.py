"""Verdicts as rows: written many at a time, read back as codes, and their changes logged."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Protocol

import numpy as np
import sqlalchemy as sa

from registry.store import raw_rows, tables
from registry.store.raw_rows import cells

#: Stands in an array of verdict codes where there is no verdict.
NO_VERDICT = 255


class Judged(Protocol):
    """The verdicts of one target on n samples, as ``registry.targets.engine.Verdicts`` holds them."""

    verdict: Any
    score_min: Any
    score_max: Any
    coverage: Any
    provisional: Any
    judged: Any
    reasons: Any


def write_verdicts(
    connection: sa.Connection,
    sample_ids: np.ndarray,
    judged_targets: Sequence[tuple[int, int, Judged]],
    fresh: bool = False,
) -> None:
    """Write the verdicts of several targets on n samples in the place of those that are there.

    Where ``judged`` is false the sample has none afterwards. Deleting the earlier rows and inserting the new ones is
    quicker than overwriting each, up to twice where verdicts change (measured). ``judged_targets``: (target id, target
    version id, verdicts). Rows are written in key order (sample, then target), which keeps the table half as large as
    target after target.
    """
    ids = np.asarray(sample_ids, dtype=np.int64)
    sqlite = raw_rows.is_sqlite(connection)
    by_mask: dict[bytes, list[tuple[int, int, Judged]]] = {}
    if judged_targets and not fresh:
        targets = ", ".join(str(int(target_id)) for target_id, _, _ in judged_targets)
        raw_rows.select(connection, f"DELETE FROM verdict WHERE sample_id {{ids}} AND target_id IN ({targets})", ids)
    for entry in sorted(judged_targets, key=lambda entry: entry[0]):
        by_mask.setdefault(np.asarray(entry[2].judged, dtype=bool).tobytes(), []).append(entry)
    for mask, entries in by_mask.items():
        judged = np.frombuffer(mask, dtype=bool)
        parts = [_verdict_columns(ids, judged, *entry, sqlite) for entry in entries]
        columns = {name: _interleaved([part[name] for part in parts]) for name in parts[0]}
        raw_rows.insert(connection, "verdict", list(columns), list(columns.values()))


def _verdict_columns(
    ids: np.ndarray, judged: np.ndarray, target_id: int, version_id: int, verdicts: Judged, sqlite: bool
) -> dict[str, list[Any]]:
    n = int(judged.sum())
    reasons = list(verdicts.reasons)
    return {
        "sample_id": ids[judged].tolist(),
        "target_id": [int(target_id)] * n,
        "target_version_id": [int(version_id)] * n,
        "verdict": cells("verdict", verdicts.verdict[judged], sqlite),
        "score_min": cells("score_min", verdicts.score_min[judged], sqlite),
        "score_max": cells("score_max", verdicts.score_max[judged], sqlite),
        "coverage": cells("coverage", verdicts.coverage[judged], sqlite),
        "probability_state": ["not_computed"] * n,
        "provisional": cells("provisional", verdicts.provisional[judged], sqlite),
        "reasons": reasons if n == len(reasons) else [reasons[row] for row in np.flatnonzero(judged).tolist()],
    }


def _interleaved(lists: list[list[Any]]) -> list[Any]:
    """The lists (all of one length) row by row: the first of each, then the second of each, ..."""
    mixed: list[Any] = [None] * sum(map(len, lists))
    for offset, values in enumerate(lists):
        mixed[offset :: len(lists)] = values
    return mixed


def verdicts_of(connection: sa.Connection, sample_ids: np.ndarray, target_ids: Sequence[int]) -> np.ndarray:
    """The stored verdict codes of samples (ids ascending), uint8 (targets, n); ``NO_VERDICT`` where there is none."""
    ids, targets = np.asarray(sample_ids, dtype=np.int64), np.asarray(target_ids, dtype=np.int64)
    codes = np.full((len(targets), len(ids)), NO_VERDICT, dtype=np.uint8)
    rows = raw_rows.select(
        connection, "SELECT sample_id, target_id, verdict FROM verdict WHERE sample_id {ids}", sample_ids
    )
    if rows and len(targets):
        found = raw_rows.numbers_of(rows, 3).astype(np.int64)
        order = np.argsort(targets)
        place = order[np.minimum(np.searchsorted(targets[order], found[:, 1]), len(targets) - 1)]
        found, place = found[targets[place] == found[:, 1]], place[targets[place] == found[:, 1]]
        codes[place, np.searchsorted(ids, found[:, 0])] = found[:, 2]
    return codes


def codes_of(judged_targets: Sequence[Judged], n: int) -> np.ndarray:
    """The codes of verdicts that were just made, as ``verdicts_of`` would read them back: uint8 (targets, n)."""
    codes = np.full((len(judged_targets), n), NO_VERDICT, dtype=np.uint8)
    for row, verdicts in zip(codes, judged_targets, strict=True):
        np.copyto(row, np.asarray(verdicts.verdict, dtype=np.uint8), where=np.asarray(verdicts.judged, dtype=bool))
    return codes


def log_verdict_changes(
    connection: sa.Connection,
    sample_ids: np.ndarray,
    target_ids: Sequence[int],
    before: np.ndarray,
    after: np.ndarray,
    cause: str,
    changed_at: str,
) -> int:
    """Log every verdict that changed or vanished, by sample and then target; how many.

    ``before`` and ``after`` are codes, uint8 (targets, n), as ``verdicts_of`` reads them. A first verdict is no change.
    """
    ids, targets = np.asarray(sample_ids, dtype=np.int64), np.asarray(target_ids, dtype=np.int64)
    by_target = np.argsort(targets)
    sample, place = np.nonzero(((before != after) & (before != NO_VERDICT))[by_target].T)
    place = by_target[place]
    later = after[place, sample].tolist()
    raw_rows.insert(
        connection,
        "verdict_change",
        ("sample_id", "target_id", "changed_at", "verdict_from", "verdict_to", "cause"),
        [
            ids[sample].tolist(),
            targets[place].tolist(),
            [changed_at] * len(sample),
            before[place, sample].tolist(),
            [None if code == NO_VERDICT else code for code in later],
            [cause] * len(sample),
        ],
    )
    return len(sample)


def last_verdict_change(connection: sa.Connection) -> int:
    """The id of the newest logged verdict change, 0 where there is none."""
    return int(connection.scalar(sa.select(sa.func.max(tables.verdict_change.c.verdict_change_id))) or 0)


def count_verdict_changes(connection: sa.Connection, after_id: int) -> int:
    """How many verdict changes were logged after the one with that id."""
    changes = tables.verdict_change
    return int(
        connection.scalar(sa.select(sa.func.count()).select_from(changes).where(changes.c.verdict_change_id > after_id))
        or 0
    )
