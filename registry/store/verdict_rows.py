"""Verdicts as rows: written many at a time, read back as codes, and their changes logged."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Protocol

import numpy as np
import sqlalchemy as sa

from registry.store import raw_rows, tables
from registry.store.raw_rows import cells

#: (sample id, target id) -> verdict code.
VerdictCodes = dict[tuple[int, int], int]


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
    """Upsert the verdicts of several targets on n samples; where ``judged`` is false earlier verdicts are deleted.

    ``judged_targets``: (target id, target version id, verdicts). Rows are written in key order (sample, then target),
    which keeps the table half as large as target after target.
    """
    ids = np.asarray(sample_ids, dtype=np.int64)
    sqlite = raw_rows.is_sqlite(connection)
    by_mask: dict[bytes, list[tuple[int, int, Judged]]] = {}
    for entry in sorted(judged_targets, key=lambda entry: entry[0]):
        by_mask.setdefault(np.asarray(entry[2].judged, dtype=bool).tobytes(), []).append(entry)
    for mask, entries in by_mask.items():
        judged = np.frombuffer(mask, dtype=bool)
        if not judged.all() and not fresh:
            targets = ", ".join(str(int(target_id)) for target_id, _, _ in entries)
            raw_rows.select(
                connection, f"DELETE FROM verdict WHERE target_id IN ({targets}) AND sample_id {{ids}}", ids[~judged]
            )
        parts = [_verdict_columns(ids, judged, *entry, sqlite) for entry in entries]
        columns = {name: _interleaved([part[name] for part in parts]) for name in parts[0]}
        raw_rows.upsert(
            connection,
            "verdict",
            ("sample_id", "target_id"),
            list(columns),
            list(columns.values()),
            ("probability",),
            fresh,
        )


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


def verdicts_of(connection: sa.Connection, sample_ids: Any) -> VerdictCodes:
    """The stored verdict codes of samples, by (sample id, target id)."""
    rows = raw_rows.select(
        connection, "SELECT sample_id, target_id, verdict FROM verdict WHERE sample_id {ids}", sample_ids
    )
    return {(sample_id, target_id): verdict for sample_id, target_id, verdict in rows}


def log_verdict_changes(
    connection: sa.Connection, before: VerdictCodes, after: VerdictCodes, cause: str, changed_at: str
) -> int:
    """Log every verdict that changed or vanished between two calls of ``verdicts_of``; how many.

    A first verdict is not a change.
    """
    changed = [(key, code, after.get(key)) for key, code in before.items() if after.get(key) != code]
    changed.sort(key=lambda change: change[0])
    rows = [
        {
            "sample_id": sample_id,
            "target_id": target_id,
            "changed_at": changed_at,
            "verdict_from": old,
            "verdict_to": new,
            "cause": cause,
        }
        for (sample_id, target_id), old, new in changed
    ]
    if rows:
        connection.execute(sa.insert(tables.verdict_change), rows)
    return len(rows)


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
