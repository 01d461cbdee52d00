"""Settings, what is stale, who may write, reading recipes, reference materials, and the catalogue as rows."""

from __future__ import annotations

import sqlalchemy as sa

from registry.store.table_parts import link, own_id, table, words
from registry.store.types import Number, Whole, Words

setting = table(
    "setting", sa.Column("name", Words, primary_key=True), sa.Column("value", Words, nullable=False), counted=False
)
convention_set = table(
    "convention_set",
    own_id("convention_set_id"),
    sa.Column("conventions", Words, nullable=False, unique=True),
    sa.Column("created_at", Words, nullable=False),
)
#: Filled by triggers, drained before the commit: level 1 derive and judge, level 2 judge only.
stale = table(
    "stale",
    sa.Column("sample_id", Whole, primary_key=True, autoincrement=False),
    sa.Column("level", Whole, nullable=False),
    sa.CheckConstraint("level BETWEEN 1 AND 2", name="level"),
    counted=False,
)
#: While a row stands here, the stale triggers are silent (a long import that computes from the arrays in hand).
import_guard = table(
    "import_guard",
    sa.Column("guard", Whole, primary_key=True, autoincrement=False),
    sa.CheckConstraint("guard = 1", name="guard"),
    counted=False,
)
account = table(
    "account",
    own_id("account_id"),
    sa.Column("name", Words, nullable=False, unique=True),
    *words("password_hash role created_at", nullable=False),
)
audit_entry = table(
    "audit_entry",
    own_id("audit_entry_id"),
    *words("at account action", nullable=False),
    *words("subject detail"),
)
#: How a file of one shape is read: ``shape`` is the JSON list of its headings, ``recipe`` the JSON of the intake.
reading_recipe = table(
    "reading_recipe",
    own_id("reading_recipe_id"),
    sa.Column("name", Words, nullable=False, unique=True),
    *words("kind shape recipe created_at", nullable=False),
)
reference_material = table(
    "reference_material", own_id("reference_material_id"), sa.Column("name", Words, nullable=False, unique=True)
)
reference_value = table(
    "reference_value",
    own_id("reference_value_id"),
    link("reference_material_id", "reference_material.reference_material_id", nullable=False, ondelete="CASCADE"),
    sa.Column("analyte", Words, nullable=False),
    sa.Column("value", Number, nullable=False),
    sa.Column("unit", Words, nullable=False),
    sa.Column("uncertainty", Number),
    sa.Column("uncertainty_type", Words),
    *words("status source", nullable=False),
    sa.UniqueConstraint("reference_material_id", "analyte", "unit", "source"),
)

#: The catalogue as rows: rewritten at create and upgrade, read by the views.
quantity = table(
    "quantity",
    sa.Column("position", Whole, primary_key=True, autoincrement=False),
    sa.Column("name", Words, nullable=False, unique=True),
    *words("sheet label unit meaning method source status", nullable=False),
    counted=False,
)
warning_kind = table(
    "warning_kind",
    sa.Column("position", Whole, primary_key=True, autoincrement=False),
    *words("code column_name", nullable=False),
    sa.Column("value_column", Words),
    sa.Column("text", Words, nullable=False),
    counted=False,
)
cause_kind = table(
    "cause_kind",
    sa.Column("position", Whole, primary_key=True, autoincrement=False),
    sa.Column("letter", Words, nullable=False, unique=True),
    *words("code text", nullable=False),
    counted=False,
)
column_guide_row = table(
    "column_guide_row",
    sa.Column("position", Whole, primary_key=True, autoincrement=False),
    *words("view_name column_name unit meaning method source", nullable=False),
    sa.UniqueConstraint("view_name", "column_name"),
    counted=False,
)
