"""Targets with their versions and criteria, the verdicts and the log of their changes."""

from __future__ import annotations

import sqlalchemy as sa

from registry.store.table_parts import link, numbers, one_of, own_id, sample_key, table, words
from registry.store.types import Whole, Words

target = table(
    "target",
    own_id("target_id"),
    sa.Column("code", Words, nullable=False, unique=True),
    sa.Column("name", Words, nullable=False),
)
target_version = table(
    "target_version",
    own_id("target_version_id"),
    link("target_id", "target.target_id", nullable=False, ondelete="CASCADE"),
    *words("version definition created_at", nullable=False),
    sa.Column("active", Whole, nullable=False),
    sa.UniqueConstraint("target_id", "version"),
    sa.CheckConstraint("active BETWEEN 0 AND 1", name="active"),
)
criterion = table(
    "criterion",
    own_id("criterion_id"),
    link("target_version_id", "target_version.target_version_id", nullable=False, ondelete="CASCADE"),
    sa.Column("position", Whole, nullable=False),
    *words("kind code label", nullable=False),
    *words("column_name comparison"),
    *numbers("threshold weight"),
    sa.Column("unit", Words),
    sa.Column("provisional", Whole, nullable=False),
    *words("source note"),
    sa.UniqueConstraint("target_version_id", "position"),
    sa.UniqueConstraint("target_version_id", "code"),
    one_of("kind", "fitness", "rule", "criterion"),
    sa.CheckConstraint("provisional BETWEEN 0 AND 1", name="provisional"),
)
verdict = table(
    "verdict",
    sample_key(),
    sa.Column("target_id", Whole, sa.ForeignKey("target.target_id"), primary_key=True, autoincrement=False),
    link("target_version_id", "target_version.target_version_id", nullable=False),
    sa.Column("verdict", Whole, nullable=False),
    *numbers("score_min score_max coverage probability"),
    sa.Column("probability_state", Words, nullable=False, server_default="not_computed"),
    sa.Column("provisional", Whole, nullable=False),
    sa.Column("reasons", Words, nullable=False),
    sa.CheckConstraint("verdict BETWEEN 0 AND 3", name="verdict"),
    sa.CheckConstraint("json_valid(reasons)", name="reasons").ddl_if(dialect="sqlite"),
    sa.CheckConstraint("reasons::jsonb IS NOT NULL", name="reasons").ddl_if(dialect="postgresql"),
    counted=False,
    rowid=False,
)
#: Covers the ranking of intrusions by a target; ``sample_id`` before the score keeps an import appending.
sa.Index(None, verdict.c.target_id, verdict.c.verdict, verdict.c.sample_id, verdict.c.score_min)
#: A log: it outlives the sample it names, so it holds no foreign key.
verdict_change = table(
    "verdict_change",
    own_id("verdict_change_id"),
    sa.Column("sample_id", Whole, nullable=False),
    sa.Column("target_id", Whole, nullable=False),
    sa.Column("changed_at", Words, nullable=False),
    sa.Column("verdict_from", Whole),
    sa.Column("verdict_to", Whole),
    sa.Column("cause", Words, nullable=False),
)
sa.Index(None, verdict_change.c.sample_id)
