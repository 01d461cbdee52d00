"""Control results as judged, the state of each analyte of a batch, and the batches to be judged anew."""

from __future__ import annotations

import sqlalchemy as sa

from registry.store.table_parts import link, numbers, one_of, table, words
from registry.store.types import Whole, Words

#: One result of one control line; no foreign keys but the batch's (a trigger deletes with the line and the column).
control_outcome = table(
    "control_outcome",
    sa.Column("aliquot_id", Whole, primary_key=True, autoincrement=False),
    sa.Column("column_id", Whole, primary_key=True, autoincrement=False),
    link("batch_id", "batch.batch_id", nullable=False, ondelete="CASCADE"),
    sa.Column("kind", Words, nullable=False),
    sa.Column("material", Words),
    *numbers("expected found z limit_low limit_high"),
    sa.Column("state", Whole, nullable=False),
    *words("rule source"),
    one_of("kind", "reference_material", "blank", "duplicate", "lab_repeat"),
    sa.CheckConstraint("state BETWEEN 0 AND 3", name="state"),
    counted=False,
    rowid=False,
)
sa.Index(None, control_outcome.c.batch_id)
#: One column of a batch that has judged controls.
control_state = table(
    "control_state",
    sa.Column("column_id", Whole, primary_key=True, autoincrement=False),
    link("batch_id", "batch.batch_id", nullable=False, ondelete="CASCADE"),
    sa.Column("state", Whole, nullable=False),
    sa.Column("remarks", Words, nullable=False),
    sa.Column("reference_results", Whole, nullable=False),
    sa.Column("blank_results", Whole, nullable=False),
    sa.Column("pairs", Whole, nullable=False),
    *numbers("bias_percent bias_error_percent drift_percent drift_error_percent precision_s0 precision_k"),
    sa.CheckConstraint("state BETWEEN 0 AND 2", name="state"),
    counted=False,
)
sa.Index(None, control_state.c.batch_id)
#: Filled by a trigger where a control line vanishes; the stale control samples name the others.
stale_batch = table("stale_batch", sa.Column("batch_id", Whole, primary_key=True, autoincrement=False), counted=False)
