"""What the drawing of probabilities reads and writes: verdicts without one, what controls say of errors, the shares."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import sqlalchemy as sa

from registry.store import raw_rows, tables
from registry.store.raw_rows import cells

NOT_COMPUTED, COMPUTED = "not_computed", "computed"
#: What of a column ``column_errors`` gives, in its order.
ERROR_FIELDS = ("detection_limit", "precision_s0", "precision_k", "bias_error_percent", "reference_results")


def _waiting(after: int, intrusions: Sequence[int] | None) -> Any:
    """Selects the ids of samples above ``after`` with a verdict without a probability, themselves not stale."""
    verdict, sample, stale = tables.verdict, tables.sample, tables.stale
    query = (
        sa.select(verdict.c.sample_id)
        .distinct()
        .where(verdict.c.probability_state != COMPUTED, verdict.c.sample_id > after)
        .where(~sa.exists().where(stale.c.sample_id == verdict.c.sample_id))
    )
    if intrusions is not None:
        query = query.join(sample, sample.c.sample_id == verdict.c.sample_id)
        query = query.where(sample.c.intrusion_id.in_(list(intrusions)))
    return query


def count_waiting(connection: sa.Connection, intrusions: Sequence[int] | None = None) -> int:
    """How many samples have a verdict without a probability; of these intrusions, or of all where None."""
    waiting = _waiting(0, intrusions).subquery()
    return int(connection.scalar(sa.select(sa.func.count()).select_from(waiting)) or 0)


def waiting(connection: sa.Connection, after: int, limit: int, intrusions: Sequence[int] | None = None) -> np.ndarray:
    """The first ``limit`` of them with an id above ``after``, int64 ascending."""
    query = _waiting(after, intrusions).order_by(tables.verdict.c.sample_id).limit(limit)
    return np.fromiter(connection.execute(query).scalars(), dtype=np.int64)


def still_waiting(connection: sa.Connection, sample_ids: np.ndarray) -> np.ndarray:
    """Those of the samples that still have a verdict without a probability and are not stale, int64 ascending."""
    rows = raw_rows.select(
        connection,
        "SELECT DISTINCT sample_id FROM verdict WHERE probability_state <> 'computed' AND sample_id {ids} "
        "AND NOT EXISTS (SELECT 1 FROM stale AS z WHERE z.sample_id = verdict.sample_id) ORDER BY sample_id",
        sample_ids,
    )
    return np.array([row[0] for row in rows], dtype=np.int64)


def intrusion_ids(connection: sa.Connection, names: Sequence[str]) -> dict[str, int]:
    """Ids of the intrusions of these names; names without one are left out."""
    table = tables.intrusion
    rows = connection.execute(sa.select(table.c.name, table.c.intrusion_id).where(table.c.name.in_(list(names))))
    return {name: intrusion_id for name, intrusion_id in rows}


def column_errors(connection: sa.Connection, column_ids: np.ndarray) -> np.ndarray:
    """What is known of the error of batch columns: float64 (n, 5) by ``ERROR_FIELDS``, in the column's unit.

    ``column_ids`` (n,) ascending, each once; NaN where nothing is known.
    """
    found = np.full((len(column_ids), len(ERROR_FIELDS)), np.nan)
    rows = raw_rows.select(
        connection,
        "SELECT c.batch_column_id, c.detection_limit, f.precision_s0, f.precision_k, f.bias_error_percent, "
        "f.reference_results FROM batch_column AS c LEFT JOIN control_state AS f ON f.column_id = c.batch_column_id "
        "WHERE c.batch_column_id {ids}",
        column_ids,
    )
    if rows:
        known = np.array(rows, dtype=np.float64)
        found[np.searchsorted(column_ids, known[:, 0].astype(np.int64))] = known[:, 1:]
    return found


def write_probabilities(
    connection: sa.Connection, sample_ids: np.ndarray, target_ids: Sequence[int], shares: np.ndarray
) -> int:
    """Write the shares (targets, n), NaN where there is no verdict, beside the verdicts; how many."""
    place, sample = np.nonzero(~np.isnan(shares))
    table = tables.verdict
    statement = (
        sa.update(table)
        .where(table.c.sample_id == sa.bindparam("of_sample"), table.c.target_id == sa.bindparam("of_target"))
        .values(probability=sa.bindparam("share"), probability_state=COMPUTED)
    )
    numbers = zip(
        np.asarray(sample_ids)[sample].tolist(),
        np.asarray(target_ids)[place].tolist(),
        cells("probability", shares[place, sample], sqlite=False),
        strict=True,
    )
    rows = [{"of_sample": one, "of_target": target, "share": share} for one, target, share in numbers]
    if rows:
        connection.execute(statement, rows)
    return len(rows)


def set_back_batch(connection: sa.Connection, batch_id: int) -> None:
    """Take the probabilities of every sample of a batch away."""
    table, aliquot = tables.verdict, tables.aliquot
    samples = sa.select(aliquot.c.sample_id).where(aliquot.c.batch_id == batch_id)
    connection.execute(
        sa.update(table)
        .where(table.c.sample_id.in_(samples), table.c.probability_state == COMPUTED)
        .values(probability=None, probability_state=NOT_COMPUTED)
    )
