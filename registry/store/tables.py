"""The tables, as SQLAlchemy Core sees them. The migrations create them; a test compares both word by word.

Singular names, keys ``<table>_id``, units in the column names. Ids that a log may name are never used twice
(AUTOINCREMENT, identity). Times are UTC in ISO 8601 with Z, lab and field dates are dates, both as text.
"""

from __future__ import annotations

import sqlalchemy as sa

from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.store.sheets import DERIVED_COLUMNS, DERIVED_TEXT_COLUMNS
from registry.store.types import Bytes, Number, Whole, Words

NAMING = {
    "pk": "pk_%(table_name)s",
    "uq": "uq_%(table_name)s_%(column_0_N_name)s",
    "ck": "ck_%(table_name)s_%(constraint_name)s",
    "fk": "fk_%(table_name)s_%(column_0_N_name)s_%(referred_table_name)s",
    "ix": "ix_%(table_name)s_%(column_0_N_name)s",
}
metadata = sa.MetaData(naming_convention=NAMING)


def _id(name: str) -> sa.Column[int]:
    return sa.Column(name, Whole, sa.Identity(), primary_key=True)


def _sample_key() -> sa.Column[int]:
    return sa.Column(
        "sample_id", Whole, sa.ForeignKey("sample.sample_id", ondelete="CASCADE"), primary_key=True, autoincrement=False
    )


def _link(name: str, target: str, nullable: bool = True, ondelete: str | None = None) -> sa.Column[int]:
    return sa.Column(name, Whole, sa.ForeignKey(target, ondelete=ondelete), nullable=nullable)


def _numbers(names: str) -> list[sa.Column[float]]:
    return [sa.Column(name, Number) for name in names.split()]


def _words(names: str, nullable: bool = True) -> list[sa.Column[str]]:
    return [sa.Column(name, Words, nullable=nullable) for name in names.split()]


def _row_version() -> sa.Column[int]:
    return sa.Column("row_version", Whole, nullable=False, server_default=sa.text("1"))


def _one_of(column: str, *words: str) -> sa.CheckConstraint:
    listed = ", ".join(f"'{word}'" for word in words)
    return sa.CheckConstraint(f"{column} IN ({listed})", name=column)


def _table(name: str, *parts: sa.schema.SchemaItem, counted: bool = True, rowid: bool = True) -> sa.Table:
    return sa.Table(name, metadata, *parts, sqlite_strict=True, sqlite_autoincrement=counted, sqlite_with_rowid=rowid)


area = _table(
    "area",
    _id("area_id"),
    sa.Column("name", Words, nullable=False, unique=True),
    sa.Column("epsg", Whole),
    *_numbers("heat_flow_mw_m2 surface_temperature_c conductivity_w_m_k heat_production_uw_m3 heat_production_depth_m"),
    _row_version(),
)
site = _table(
    "site",
    _id("site_id"),
    sa.Column("code", Words, nullable=False, unique=True),
    sa.Column("kind", Words, nullable=False),
    _link("area_id", "area.area_id"),
    *_numbers("easting northing elevation_m"),
    sa.Column("epsg", Whole),
    *_numbers("longitude latitude depth_m"),
    sa.Column("azimuth_reference", Words),
    _row_version(),
    _one_of("kind", "drill_hole", "outcrop"),
    _one_of("azimuth_reference", "true", "grid", "magnetic"),
)
sa.Index(None, site.c.area_id)
survey = _table(
    "survey",
    _id("survey_id"),
    _link("site_id", "site.site_id", nullable=False, ondelete="CASCADE"),
    sa.Column("depth_m", Number, nullable=False),
    sa.Column("azimuth_deg", Number, nullable=False),
    sa.Column("dip_deg", Number, nullable=False),
    sa.UniqueConstraint("site_id", "depth_m"),
    sa.CheckConstraint("depth_m >= 0", name="depth_m"),
)
lithology_interval = _table(
    "lithology_interval",
    _id("lithology_interval_id"),
    _link("site_id", "site.site_id", nullable=False, ondelete="CASCADE"),
    sa.Column("from_m", Number, nullable=False),
    sa.Column("to_m", Number, nullable=False),
    *_words("lithology description"),
    sa.UniqueConstraint("site_id", "from_m"),
    sa.CheckConstraint("from_m < to_m", name="from_m"),
)
intrusion = _table(
    "intrusion",
    _id("intrusion_id"),
    sa.Column("name", Words, nullable=False, unique=True),
    _link("area_id", "area.area_id"),
    sa.Column("shape", Words),
    *_numbers("half_width_m volume_km3 depth_to_top_m emplacement_depth_m age_ma age_sigma_ma country_density_kg_m3"),
    sa.Column("mapped", Whole),
    _row_version(),
    _one_of("shape", "sphere", "slab", "cylinder"),
    sa.CheckConstraint("mapped BETWEEN 0 AND 1", name="mapped"),
)
sa.Index(None, intrusion.c.area_id)
sample = _table(
    "sample",
    _id("sample_id"),
    sa.Column("code", Words, nullable=False, unique=True),
    sa.Column("kind", Words, nullable=False),
    _link("site_id", "site.site_id"),
    *_numbers("from_m to_m"),
    _link("intrusion_id", "intrusion.intrusion_id"),
    *_words("lithology texture alteration igsn collected_on"),
    _link("duplicate_of", "sample.sample_id", ondelete="SET NULL"),
    sa.Column("reference_material", Words),
    *_numbers("magnetic_susceptibility_si density_kg_m3"),
    sa.Column("pulp_available", Whole),
    *_numbers("easting northing elevation_m"),
    sa.Column("epsg", Whole),
    *_numbers("longitude latitude"),
    sa.Column("position_basis", Words),
    _row_version(),
    _one_of("kind", "core", "chips", "outcrop", "float", "unknown", "reference_material", "blank", "duplicate"),
    sa.CheckConstraint("from_m <= to_m", name="from_m"),
    sa.CheckConstraint("pulp_available BETWEEN 0 AND 1", name="pulp_available"),
)
for _column in (sample.c.site_id, sample.c.intrusion_id, sample.c.duplicate_of):
    sa.Index(None, _column)

batch = _table(
    "batch",
    _id("batch_id"),
    sa.Column("code", Words, nullable=False, unique=True),
    *_words("lab certificate received_on reported_on"),
    *_words("imported_at", nullable=False),
    *_words("imported_by file_name"),
    sa.Column("sha256", Words, unique=True),
    sa.Column("file_bytes", Bytes),
    sa.Column("state", Words, nullable=False, server_default="active"),
    _link("superseded_by", "batch.batch_id", ondelete="SET NULL"),
    _one_of("state", "active", "superseded", "withdrawn"),
)
sa.Index(None, batch.c.certificate)
sa.Index(None, batch.c.superseded_by)
batch_column = _table(
    "batch_column",
    _id("batch_column_id"),
    _link("batch_id", "batch.batch_id", nullable=False, ondelete="CASCADE"),
    sa.Column("position", Whole, nullable=False),
    sa.Column("header", Words),
    *_words("analyte unit", nullable=False),
    sa.Column("method", Words),
    sa.Column("digestion", Words, nullable=False, server_default="unknown"),
    sa.Column("detection_limit", Number),
    sa.UniqueConstraint("batch_id", "position"),
)
aliquot = _table(
    "aliquot",
    _id("aliquot_id"),
    _link("sample_id", "sample.sample_id", nullable=False, ondelete="CASCADE"),
    _link("batch_id", "batch.batch_id", nullable=False, ondelete="CASCADE"),
    sa.Column("line_no", Whole, nullable=False),
    sa.Column("kind", Words, nullable=False),
    sa.Column("repeat_no", Whole, nullable=False, server_default=sa.text("0")),
    _one_of("kind", "original", "repeat", "control"),
)
sa.Index(None, aliquot.c.sample_id)
sa.Index(None, aliquot.c.batch_id)
#: No foreign key to batch_column: unindexed, it made deleting slow. A trigger deletes, ``check`` verifies.
result = _table(
    "result",
    sa.Column(
        "aliquot_id",
        Whole,
        sa.ForeignKey("aliquot.aliquot_id", ondelete="CASCADE"),
        primary_key=True,
        autoincrement=False,
    ),
    sa.Column("column_id", Whole, primary_key=True, autoincrement=False),
    sa.Column("value", Number),
    sa.Column("qualifier", Whole, nullable=False, server_default=sa.text("0")),
    sa.CheckConstraint("qualifier BETWEEN 0 AND 2", name="qualifier"),
    counted=False,
    rowid=False,
)

composition = _table(
    "composition",
    _sample_key(),
    *_numbers(" ".join(CHOSEN_COLUMNS)),
    *_words("qualifiers digestions", nullable=False),
    sa.Column("censored", Words),
    counted=False,
)
derived = _table(
    "derived",
    _sample_key(),
    *(sa.Column(name, Words if name in DERIVED_TEXT_COLUMNS else Number) for name in DERIVED_COLUMNS),
    *_words("causes warnings", nullable=False),
    _link("convention_set_id", "convention_set.convention_set_id"),
    sa.Column("method_version", Words),
    sa.Column("best_target", Words),
    sa.Column("best_verdict", Whole),
    sa.CheckConstraint("best_verdict BETWEEN 0 AND 3", name="best_verdict"),
    counted=False,
)

target = _table(
    "target",
    _id("target_id"),
    sa.Column("code", Words, nullable=False, unique=True),
    sa.Column("name", Words, nullable=False),
)
target_version = _table(
    "target_version",
    _id("target_version_id"),
    _link("target_id", "target.target_id", nullable=False, ondelete="CASCADE"),
    *_words("version definition created_at", nullable=False),
    sa.Column("active", Whole, nullable=False),
    sa.UniqueConstraint("target_id", "version"),
    sa.CheckConstraint("active BETWEEN 0 AND 1", name="active"),
)
criterion = _table(
    "criterion",
    _id("criterion_id"),
    _link("target_version_id", "target_version.target_version_id", nullable=False, ondelete="CASCADE"),
    sa.Column("position", Whole, nullable=False),
    *_words("kind code label", nullable=False),
    *_words("column_name comparison"),
    *_numbers("threshold weight"),
    sa.Column("unit", Words),
    sa.Column("provisional", Whole, nullable=False),
    *_words("source note"),
    sa.UniqueConstraint("target_version_id", "position"),
    sa.UniqueConstraint("target_version_id", "code"),
    _one_of("kind", "fitness", "rule", "criterion"),
    sa.CheckConstraint("provisional BETWEEN 0 AND 1", name="provisional"),
)
verdict = _table(
    "verdict",
    _sample_key(),
    sa.Column("target_id", Whole, sa.ForeignKey("target.target_id"), primary_key=True, autoincrement=False),
    _link("target_version_id", "target_version.target_version_id", nullable=False),
    sa.Column("verdict", Whole, nullable=False),
    *_numbers("score_min score_max coverage probability"),
    sa.Column("probability_state", Words, nullable=False, server_default="not_computed"),
    sa.Column("provisional", Whole, nullable=False),
    sa.Column("reasons", Words, nullable=False),
    sa.CheckConstraint("verdict BETWEEN 0 AND 3", name="verdict"),
    sa.CheckConstraint("json_valid(reasons)", name="reasons").ddl_if(dialect="sqlite"),
    sa.CheckConstraint("reasons::jsonb IS NOT NULL", name="reasons").ddl_if(dialect="postgresql"),
    counted=False,
    rowid=False,
)
sa.Index(None, verdict.c.target_id, verdict.c.verdict)
#: A log: it outlives the sample it names, so it holds no foreign key.
verdict_change = _table(
    "verdict_change",
    _id("verdict_change_id"),
    sa.Column("sample_id", Whole, nullable=False),
    sa.Column("target_id", Whole, nullable=False),
    sa.Column("changed_at", Words, nullable=False),
    sa.Column("verdict_from", Whole),
    sa.Column("verdict_to", Whole),
    sa.Column("cause", Words, nullable=False),
)
sa.Index(None, verdict_change.c.sample_id)

setting = _table(
    "setting", sa.Column("name", Words, primary_key=True), sa.Column("value", Words, nullable=False), counted=False
)
convention_set = _table(
    "convention_set",
    _id("convention_set_id"),
    sa.Column("conventions", Words, nullable=False, unique=True),
    sa.Column("created_at", Words, nullable=False),
)
#: Filled by triggers, drained before the commit: level 1 derive and judge, level 2 judge only.
stale = _table(
    "stale",
    sa.Column("sample_id", Whole, primary_key=True, autoincrement=False),
    sa.Column("level", Whole, nullable=False),
    sa.CheckConstraint("level BETWEEN 1 AND 2", name="level"),
    counted=False,
)
#: While a row stands here, the stale triggers are silent (a long import that computes from the arrays in hand).
import_guard = _table(
    "import_guard",
    sa.Column("guard", Whole, primary_key=True, autoincrement=False),
    sa.CheckConstraint("guard = 1", name="guard"),
    counted=False,
)
account = _table(
    "account",
    _id("account_id"),
    sa.Column("name", Words, nullable=False, unique=True),
    *_words("password_hash role created_at", nullable=False),
)
audit_entry = _table(
    "audit_entry",
    _id("audit_entry_id"),
    *_words("at account action", nullable=False),
    *_words("subject detail"),
)
reference_material = _table(
    "reference_material", _id("reference_material_id"), sa.Column("name", Words, nullable=False, unique=True)
)
reference_value = _table(
    "reference_value",
    _id("reference_value_id"),
    _link("reference_material_id", "reference_material.reference_material_id", nullable=False, ondelete="CASCADE"),
    sa.Column("analyte", Words, nullable=False),
    sa.Column("value", Number, nullable=False),
    sa.Column("unit", Words, nullable=False),
    sa.Column("uncertainty", Number),
    *_words("status source", nullable=False),
    sa.UniqueConstraint("reference_material_id", "analyte", "unit"),
)

#: The catalogue as rows: rewritten at create and upgrade, read by the views.
quantity = _table(
    "quantity",
    sa.Column("position", Whole, primary_key=True, autoincrement=False),
    sa.Column("name", Words, nullable=False, unique=True),
    *_words("sheet label unit meaning method source status", nullable=False),
    counted=False,
)
warning_kind = _table(
    "warning_kind",
    sa.Column("position", Whole, primary_key=True, autoincrement=False),
    *_words("code column_name", nullable=False),
    sa.Column("value_column", Words),
    sa.Column("text", Words, nullable=False),
    counted=False,
)
cause_kind = _table(
    "cause_kind",
    sa.Column("position", Whole, primary_key=True, autoincrement=False),
    sa.Column("letter", Words, nullable=False, unique=True),
    *_words("code text", nullable=False),
    counted=False,
)
column_guide_row = _table(
    "column_guide_row",
    sa.Column("position", Whole, primary_key=True, autoincrement=False),
    *_words("view_name column_name unit meaning method source", nullable=False),
    sa.UniqueConstraint("view_name", "column_name"),
    counted=False,
)
