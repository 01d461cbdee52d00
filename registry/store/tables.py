"""The tables, as SQLAlchemy Core sees them. The migrations create them; a test compares both word by word.

Singular names, keys ``<table>_id``, units in the column names. Ids that a log may name are never used twice
(AUTOINCREMENT, identity). Times are UTC in ISO 8601 with Z, lab and field dates are dates, both as text.
"""

from __future__ import annotations

import sqlalchemy as sa

from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.store.control_tables import control_outcome, control_state, stale_batch
from registry.store.judgement_tables import criterion, target, target_version, verdict, verdict_change
from registry.store.keeping_tables import (
    account,
    audit_entry,
    cause_kind,
    column_guide_row,
    convention_set,
    import_guard,
    quantity,
    reading_recipe,
    reference_material,
    reference_value,
    setting,
    stale,
    warning_kind,
)
from registry.store.sheets import DERIVED_COLUMNS, DERIVED_TEXT_COLUMNS
from registry.store.suite_tables import (
    area_derived,
    intrusion_derived,
    mass_change,
    stale_group,
    suite_outlier,
    suite_row,
)
from registry.store.table_parts import (
    NAMING,
    link,
    metadata,
    numbers,
    one_of,
    own_id,
    row_version,
    sample_key,
    table,
    words,
)
from registry.store.types import Bytes, Number, Whole, Words

__all__ = [
    "NAMING",
    "account",
    "aliquot",
    "area",
    "area_derived",
    "audit_entry",
    "batch",
    "batch_column",
    "batch_file",
    "cause_kind",
    "column_guide_row",
    "composition",
    "control_outcome",
    "control_state",
    "convention_set",
    "criterion",
    "derived",
    "import_guard",
    "intrusion",
    "intrusion_derived",
    "lithology_interval",
    "mass_change",
    "metadata",
    "quantity",
    "reading_recipe",
    "reference_material",
    "reference_value",
    "result",
    "sample",
    "setting",
    "site",
    "stale",
    "stale_batch",
    "stale_group",
    "suite_outlier",
    "suite_row",
    "survey",
    "target",
    "target_version",
    "verdict",
    "verdict_change",
    "warning_kind",
]

area = table(
    "area",
    own_id("area_id"),
    sa.Column("name", Words, nullable=False, unique=True),
    sa.Column("epsg", Whole),
    *numbers("heat_flow_mw_m2 surface_temperature_c conductivity_w_m_k heat_production_uw_m3 heat_production_depth_m"),
    sa.Column("moho_depth_m", Number),
    row_version(),
)
site = table(
    "site",
    own_id("site_id"),
    sa.Column("code", Words, nullable=False, unique=True),
    sa.Column("kind", Words, nullable=False),
    link("area_id", "area.area_id"),
    *numbers("easting northing elevation_m"),
    sa.Column("epsg", Whole),
    *numbers("longitude latitude depth_m"),
    sa.Column("azimuth_reference", Words),
    row_version(),
    one_of("kind", "drill_hole", "outcrop"),
    one_of("azimuth_reference", "true", "grid", "magnetic"),
)
sa.Index(None, site.c.area_id)
survey = table(
    "survey",
    own_id("survey_id"),
    link("site_id", "site.site_id", nullable=False, ondelete="CASCADE"),
    sa.Column("depth_m", Number, nullable=False),
    sa.Column("azimuth_deg", Number, nullable=False),
    sa.Column("dip_deg", Number, nullable=False),
    sa.UniqueConstraint("site_id", "depth_m"),
    sa.CheckConstraint("depth_m >= 0", name="depth_m"),
)
lithology_interval = table(
    "lithology_interval",
    own_id("lithology_interval_id"),
    link("site_id", "site.site_id", nullable=False, ondelete="CASCADE"),
    sa.Column("from_m", Number, nullable=False),
    sa.Column("to_m", Number, nullable=False),
    *words("lithology description"),
    sa.UniqueConstraint("site_id", "from_m", "to_m"),
    sa.CheckConstraint("from_m < to_m", name="from_m"),
)
intrusion = table(
    "intrusion",
    own_id("intrusion_id"),
    sa.Column("name", Words, nullable=False, unique=True),
    link("area_id", "area.area_id"),
    sa.Column("shape", Words),
    *numbers("half_width_m volume_km3 depth_to_top_m emplacement_depth_m age_ma age_sigma_ma country_density_kg_m3"),
    sa.Column("mapped", Whole),
    *words("parent_sample fresh_sample"),
    row_version(),
    one_of("shape", "sphere", "slab", "cylinder"),
    sa.CheckConstraint("mapped BETWEEN 0 AND 1", name="mapped"),
)
sa.Index(None, intrusion.c.area_id)
sample = table(
    "sample",
    own_id("sample_id"),
    sa.Column("code", Words, nullable=False, unique=True),
    sa.Column("kind", Words, nullable=False),
    link("site_id", "site.site_id"),
    *numbers("from_m to_m"),
    link("intrusion_id", "intrusion.intrusion_id"),
    *words("lithology texture alteration igsn collected_on"),
    link("duplicate_of", "sample.sample_id", ondelete="SET NULL"),
    sa.Column("reference_material", Words),
    *numbers("magnetic_susceptibility_si density_kg_m3"),
    sa.Column("pulp_available", Whole),
    *numbers("easting northing elevation_m"),
    sa.Column("epsg", Whole),
    *numbers("longitude latitude"),
    sa.Column("position_basis", Words),
    row_version(),
    sa.Column("duplicate_stage", Words),
    one_of("kind", "core", "chips", "outcrop", "float", "unknown", "reference_material", "blank", "duplicate"),
    sa.CheckConstraint("from_m <= to_m", name="from_m"),
    sa.CheckConstraint("pulp_available BETWEEN 0 AND 1", name="pulp_available"),
)
for _column in (sample.c.site_id, sample.c.intrusion_id, sample.c.duplicate_of):
    sa.Index(None, _column)

batch = table(
    "batch",
    own_id("batch_id"),
    sa.Column("code", Words, nullable=False, unique=True),
    *words("lab certificate received_on reported_on"),
    *words("imported_at", nullable=False),
    *words("imported_by file_name"),
    sa.Column("sha256", Words, unique=True),
    sa.Column("state", Words, nullable=False, server_default="active"),
    link("superseded_by", "batch.batch_id", ondelete="SET NULL"),
    link("part_of", "batch.batch_id", ondelete="SET NULL"),
    *words("file_part reading"),
    one_of("state", "active", "superseded", "withdrawn"),
)
sa.Index(None, batch.c.certificate)
sa.Index(None, batch.c.superseded_by)
sa.Index(None, batch.c.part_of)
#: The file as it was sent, compressed, in parts.
batch_file = table(
    "batch_file",
    sa.Column(
        "batch_id", Whole, sa.ForeignKey("batch.batch_id", ondelete="CASCADE"), primary_key=True, autoincrement=False
    ),
    sa.Column("part_no", Whole, primary_key=True, autoincrement=False),
    sa.Column("content", Bytes, nullable=False),
    counted=False,
)
batch_column = table(
    "batch_column",
    own_id("batch_column_id"),
    link("batch_id", "batch.batch_id", nullable=False, ondelete="CASCADE"),
    sa.Column("position", Whole, nullable=False),
    sa.Column("header", Words),
    *words("analyte unit", nullable=False),
    sa.Column("method", Words),
    sa.Column("digestion", Words, nullable=False, server_default="unknown"),
    sa.Column("detection_limit", Number),
    sa.UniqueConstraint("batch_id", "position"),
)
aliquot = table(
    "aliquot",
    own_id("aliquot_id"),
    link("sample_id", "sample.sample_id", nullable=False, ondelete="CASCADE"),
    link("batch_id", "batch.batch_id", nullable=False, ondelete="CASCADE"),
    sa.Column("line_no", Whole, nullable=False),
    sa.Column("kind", Words, nullable=False),
    sa.Column("repeat_no", Whole, nullable=False, server_default=sa.text("0")),
    sa.Column("control_text", Words),
    one_of("kind", "original", "repeat", "control"),
)
sa.Index(None, aliquot.c.sample_id)
sa.Index(None, aliquot.c.batch_id)
#: No foreign key to batch_column: unindexed, it made deleting slow. A trigger deletes, ``check`` verifies.
result = table(
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

composition = table(
    "composition",
    sample_key(),
    *numbers(" ".join(CHOSEN_COLUMNS)),
    *words("qualifiers digestions", nullable=False),
    sa.Column("censored", Words),
    counted=False,
)
derived = table(
    "derived",
    sample_key(),
    *(sa.Column(name, Words if name in DERIVED_TEXT_COLUMNS else Number) for name in DERIVED_COLUMNS),
    *words("causes warnings", nullable=False),
    link("convention_set_id", "convention_set.convention_set_id"),
    sa.Column("method_version", Words),
    sa.Column("best_target", Words),
    sa.Column("best_verdict", Whole),
    sa.CheckConstraint("best_verdict BETWEEN 0 AND 3", name="best_verdict"),
    counted=False,
)
