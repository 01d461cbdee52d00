"""Create the registry: every table of the first release, on SQLite (STRICT) and on PostgreSQL.

Views and triggers are not here: the store drops them before a migration and builds them again after it.

Revision ID: 0001
Revises:
"""

from __future__ import annotations

import sqlalchemy as sa
from alembic import op
from sqlalchemy.dialects import postgresql, sqlite

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None

whole = sa.BigInteger().with_variant(sqlite.INTEGER(), "sqlite")
number = sa.Double().with_variant(sqlite.REAL(), "sqlite").with_variant(postgresql.DOUBLE_PRECISION(), "postgresql")
words = sa.Text().with_variant(postgresql.TEXT(collation="C"), "postgresql")

CHOSEN_COLUMNS = """
sio2_wt tio2_wt al2o3_wt mno_wt mgo_wt cao_wt na2o_wt k2o_wt p2o5_wt cr2o3_wt nio_wt v2o3_wt bao_wt sro_wt zro2_wt
li2o_wt loi_wt h2o_plus_wt h2o_minus_wt co2_wt s_wt so3_wt f_wt cl_wt fe2o3t_reported_wt feo_titrated_wt
fe2o3_ferric_wt total_reported_wt li_ppm be_ppm b_ppm sc_ppm v_ppm cr_ppm co_ppm ni_ppm cu_ppm zn_ppm ga_ppm ge_ppm
as_ppm rb_ppm sr_ppm y_ppm zr_ppm nb_ppm mo_ppm ag_ppm cd_ppm in_ppm sn_ppm sb_ppm te_ppm cs_ppm ba_ppm la_ppm ce_ppm
pr_ppm nd_ppm sm_ppm eu_ppm gd_ppm tb_ppm dy_ppm ho_ppm er_ppm tm_ppm yb_ppm lu_ppm hf_ppm ta_ppm w_ppm re_ppm tl_ppm
pb_ppm bi_ppm th_ppm u_ppm au_ppm pt_ppm pd_ppm
"""
DERIVED_COLUMNS = """
fe2o3t_wt feot_wt fe2o3_wt feo_wt iron_basis total_wt sio2_vf_wt tio2_vf_wt al2o3_vf_wt fe2o3_vf_wt feo_vf_wt
feot_vf_wt mno_vf_wt mgo_vf_wt cao_vf_wt na2o_vf_wt k2o_vf_wt p2o5_vf_wt cr2o3_vf_wt nio_vf_wt zro2_vf_wt q_wt c_wt
z_wt or_wt ab_wt an_wt lc_wt ne_wt kp_wt hl_wt th_wt ac_wt ns_wt ks_wt di_wt wo_wt hy_wt ol_wt cs_wt mt_wt cm_wt hm_wt
il_wt tn_wt pf_wt ru_wt ap_wt fr_wt pr_wt cc_wt di_wo_wt di_en_wt di_fs_wt hy_en_wt hy_fs_wt ol_fo_wt ol_fa_wt
norm_total_wt norm_residual_wt norm_basis q_cat c_cat z_cat or_cat ab_cat an_cat lc_cat ne_cat kp_cat hl_cat th_cat
ac_cat ns_cat ks_cat di_cat wo_cat hy_cat ol_cat cs_cat mt_cat cm_cat hm_cat il_cat tn_cat pf_cat ru_cat ap_cat fr_cat
pr_cat cc_cat di_wo_cat di_en_cat di_fs_cat hy_en_cat hy_fs_cat ol_fo_cat ol_fa_cat mg_number mg_number_total_iron
differentiation_index solidification_index larsen_index crystallization_index felsic_index mafic_index a_cnk a_nk asi
agpaitic_index mali fe_number rittmann_index r1 r2 q_prime anor eu_anomaly ce_anomaly la_yb la_yb_n k_rb rb_sr nb_ta
zr_hf sr_y v_sc fe2o3_feo ga_al_10000 delta_ox cu_zr cu_pd pd_pt zr_tio2 nb_y al2o3_tio2 ti_zr th_yb zr_y y_nb y_ho
zr_nb_ce_y fssi f_prime hughes_x cia alteration_index ccpi silica_class tas_volcanic tas_plutonic tas_subname a_type
k2o_series afm_series alkalinity alumina_class fe_class mali_class granite_field redox_series fitness fitness_cause
h2o_wt liquidus_c liquidus_model liquidus_cause liquidus_low_c liquidus_high_c liquidus_helz_thornber_c
liquidus_putirka13_c liquidus_putirka14_c liquidus_putirka15_c liquidus_putirka22_c liquidus_beattie_c
liquidus_sugawara_c liquidus_makhluf_c liquidus_duan_c zircon_saturation_wh83_c zircon_saturation_b13_c
zircon_saturation_shao_c saturation_hfse_c apatite_saturation_c monazite_saturation_c monazite_saturation_maimaiti_c
melt_density_kg_m3 melt_viscosity_log10_pa_s melt_viscosity_shaw_log10_pa_s stokes_velocity_m_per_yr
dyke_velocity_m_per_s ascent_outcome ascent_cause heat_production_uw_m3 heat_production_cause theta_centre
theta_centre_low theta_centre_high heat_x_thickness_mw_m2 not_a_liquid olivine_d_mg olivine_c_nm olivine_c_sio2
olivine_nf zircon_m monazite_d heat_production_density_kg_m3 redox_evidence zircon_saturation_usable
apatite_saturation_usable density_contrast_kg_m3
"""
#: Those of the derived quantities that hold words.
DERIVED_TEXT_COLUMNS = """
iron_basis norm_basis silica_class tas_volcanic tas_plutonic tas_subname a_type k2o_series afm_series alkalinity
alumina_class fe_class mali_class granite_field redox_series fitness fitness_cause liquidus_model liquidus_cause
ascent_outcome ascent_cause heat_production_cause redox_evidence
"""

NAMING = {
    "pk": "pk_%(table_name)s",
    "uq": "uq_%(table_name)s_%(column_0_N_name)s",
    "ck": "ck_%(table_name)s_%(constraint_name)s",
    "fk": "fk_%(table_name)s_%(column_0_N_name)s_%(referred_table_name)s",
    "ix": "ix_%(table_name)s_%(column_0_N_name)s",
}
metadata = sa.MetaData(naming_convention=NAMING)


def own_id(name: str) -> sa.Column[int]:
    return sa.Column(name, whole, sa.Identity(), primary_key=True)


def sample_key() -> sa.Column[int]:
    return sa.Column(
        "sample_id", whole, sa.ForeignKey("sample.sample_id", ondelete="CASCADE"), primary_key=True, autoincrement=False
    )


def link(name: str, target: str, nullable: bool = True, ondelete: str | None = None) -> sa.Column[int]:
    return sa.Column(name, whole, sa.ForeignKey(target, ondelete=ondelete), nullable=nullable)


def reals(names: str) -> list[sa.Column[float]]:
    return [sa.Column(name, number) for name in names.split()]


def texts(names: str, nullable: bool = True) -> list[sa.Column[str]]:
    return [sa.Column(name, words, nullable=nullable) for name in names.split()]


def row_version() -> sa.Column[int]:
    return sa.Column("row_version", whole, nullable=False, server_default=sa.text("1"))


def one_of(column: str, *words: str) -> sa.CheckConstraint:
    listed = ", ".join(f"'{word}'" for word in words)
    return sa.CheckConstraint(f"{column} IN ({listed})", name=column)


def table(name: str, *parts: sa.schema.SchemaItem, counted: bool = True, rowid: bool = True) -> sa.Table:
    return sa.Table(name, metadata, *parts, sqlite_strict=True, sqlite_autoincrement=counted, sqlite_with_rowid=rowid)


# fmt: off
area = table(
    "area", own_id("area_id"), sa.Column("name", words, nullable=False, unique=True), sa.Column("epsg", whole),
    *reals("heat_flow_mw_m2 surface_temperature_c conductivity_w_m_k heat_production_uw_m3 heat_production_depth_m"),
    sa.Column("moho_depth_m", number), row_version(),
)
site = table(
    "site", own_id("site_id"), sa.Column("code", words, nullable=False, unique=True),
    sa.Column("kind", words, nullable=False), link("area_id", "area.area_id"), *reals("easting northing elevation_m"),
    sa.Column("epsg", whole), *reals("longitude latitude depth_m"), sa.Column("azimuth_reference", words),
    row_version(), one_of("kind", "drill_hole", "outcrop"), one_of("azimuth_reference", "true", "grid", "magnetic"),
)
sa.Index(None, site.c.area_id)
survey = table(
    "survey", own_id("survey_id"), link("site_id", "site.site_id", nullable=False, ondelete="CASCADE"),
    sa.Column("depth_m", number, nullable=False), sa.Column("azimuth_deg", number, nullable=False),
    sa.Column("dip_deg", number, nullable=False), sa.UniqueConstraint("site_id", "depth_m"),
    sa.CheckConstraint("depth_m >= 0", name="depth_m"),
)
lithology_interval = table(
    "lithology_interval", own_id("lithology_interval_id"),
    link("site_id", "site.site_id", nullable=False, ondelete="CASCADE"), sa.Column("from_m", number, nullable=False),
    sa.Column("to_m", number, nullable=False), *texts("lithology description"),
    sa.UniqueConstraint("site_id", "from_m", "to_m"), sa.CheckConstraint("from_m < to_m", name="from_m"),
)
intrusion = table(
    "intrusion", own_id("intrusion_id"), sa.Column("name", words, nullable=False, unique=True),
    link("area_id", "area.area_id"), sa.Column("shape", words),
    *reals("half_width_m volume_km3 depth_to_top_m emplacement_depth_m age_ma age_sigma_ma country_density_kg_m3"),
    sa.Column("mapped", whole), *texts("parent_sample fresh_sample"), row_version(),
    one_of("shape", "sphere", "slab", "cylinder"),
    sa.CheckConstraint("mapped BETWEEN 0 AND 1", name="mapped"),
)
sa.Index(None, intrusion.c.area_id)
sample = table(
    "sample", own_id("sample_id"), sa.Column("code", words, nullable=False, unique=True),
    sa.Column("kind", words, nullable=False), link("site_id", "site.site_id"), *reals("from_m to_m"),
    link("intrusion_id", "intrusion.intrusion_id"), *texts("lithology texture alteration igsn collected_on"),
    link("duplicate_of", "sample.sample_id", ondelete="SET NULL"), sa.Column("reference_material", words),
    *reals("magnetic_susceptibility_si density_kg_m3"), sa.Column("pulp_available", whole),
    *reals("easting northing elevation_m"), sa.Column("epsg", whole), *reals("longitude latitude"),
    sa.Column("position_basis", words), row_version(),
    one_of("kind", "core", "chips", "outcrop", "float", "unknown", "reference_material", "blank", "duplicate"),
    sa.CheckConstraint("from_m <= to_m", name="from_m"),
    sa.CheckConstraint("pulp_available BETWEEN 0 AND 1", name="pulp_available"),
)
for _column in (sample.c.site_id, sample.c.intrusion_id, sample.c.duplicate_of):
    sa.Index(None, _column)
batch = table(
    "batch", own_id("batch_id"), sa.Column("code", words, nullable=False, unique=True),
    *texts("lab certificate received_on reported_on"), *texts("imported_at", nullable=False),
    *texts("imported_by file_name"), sa.Column("sha256", words, unique=True),
    sa.Column("file_bytes", sa.LargeBinary()), sa.Column("state", words, nullable=False, server_default="active"),
    link("superseded_by", "batch.batch_id", ondelete="SET NULL"),
    link("part_of", "batch.batch_id", ondelete="SET NULL"),
    one_of("state", "active", "superseded", "withdrawn"),
)
sa.Index(None, batch.c.certificate)
sa.Index(None, batch.c.superseded_by)
sa.Index(None, batch.c.part_of)
batch_column = table(
    "batch_column", own_id("batch_column_id"), link("batch_id", "batch.batch_id", nullable=False, ondelete="CASCADE"),
    sa.Column("position", whole, nullable=False), sa.Column("header", words), *texts("analyte unit", nullable=False),
    sa.Column("method", words), sa.Column("digestion", words, nullable=False, server_default="unknown"),
    sa.Column("detection_limit", number), sa.UniqueConstraint("batch_id", "position"),
)
aliquot = table(
    "aliquot", own_id("aliquot_id"), link("sample_id", "sample.sample_id", nullable=False, ondelete="CASCADE"),
    link("batch_id", "batch.batch_id", nullable=False, ondelete="CASCADE"),
    sa.Column("line_no", whole, nullable=False), sa.Column("kind", words, nullable=False),
    sa.Column("repeat_no", whole, nullable=False, server_default=sa.text("0")), sa.Column("control_text", words),
    one_of("kind", "original", "repeat", "control"),
)
sa.Index(None, aliquot.c.sample_id)
sa.Index(None, aliquot.c.batch_id)
result = table(
    "result",
    sa.Column(
        "aliquot_id", whole, sa.ForeignKey("aliquot.aliquot_id", ondelete="CASCADE"), primary_key=True,
        autoincrement=False,
    ),
    sa.Column("column_id", whole, primary_key=True, autoincrement=False), sa.Column("value", number),
    sa.Column("qualifier", whole, nullable=False, server_default=sa.text("0")),
    sa.CheckConstraint("qualifier BETWEEN 0 AND 2", name="qualifier"), counted=False, rowid=False,
)
composition = table(
    "composition", sample_key(), *reals(CHOSEN_COLUMNS), *texts("qualifiers digestions", nullable=False),
    sa.Column("censored", words), counted=False,
)
derived = table(
    "derived", sample_key(),
    *(sa.Column(name, words if name in DERIVED_TEXT_COLUMNS.split() else number) for name in DERIVED_COLUMNS.split()),
    *texts("causes warnings", nullable=False), link("convention_set_id", "convention_set.convention_set_id"),
    sa.Column("method_version", words), sa.Column("best_target", words), sa.Column("best_verdict", whole),
    sa.CheckConstraint("best_verdict BETWEEN 0 AND 3", name="best_verdict"), counted=False,
)
target = table(
    "target", own_id("target_id"), sa.Column("code", words, nullable=False, unique=True),
    sa.Column("name", words, nullable=False),
)
target_version = table(
    "target_version", own_id("target_version_id"),
    link("target_id", "target.target_id", nullable=False, ondelete="CASCADE"),
    *texts("version definition created_at", nullable=False), sa.Column("active", whole, nullable=False),
    sa.UniqueConstraint("target_id", "version"), sa.CheckConstraint("active BETWEEN 0 AND 1", name="active"),
)
criterion = table(
    "criterion", own_id("criterion_id"),
    link("target_version_id", "target_version.target_version_id", nullable=False, ondelete="CASCADE"),
    sa.Column("position", whole, nullable=False), *texts("kind code label", nullable=False),
    *texts("column_name comparison"), *reals("threshold weight"), sa.Column("unit", words),
    sa.Column("provisional", whole, nullable=False), *texts("source note"),
    sa.UniqueConstraint("target_version_id", "position"), sa.UniqueConstraint("target_version_id", "code"),
    one_of("kind", "fitness", "rule", "criterion"),
    sa.CheckConstraint("provisional BETWEEN 0 AND 1", name="provisional"),
)
verdict = table(
    "verdict", sample_key(),
    sa.Column("target_id", whole, sa.ForeignKey("target.target_id"), primary_key=True, autoincrement=False),
    link("target_version_id", "target_version.target_version_id", nullable=False),
    sa.Column("verdict", whole, nullable=False), *reals("score_min score_max coverage probability"),
    sa.Column("probability_state", words, nullable=False, server_default="not_computed"),
    sa.Column("provisional", whole, nullable=False), sa.Column("reasons", words, nullable=False),
    sa.CheckConstraint("verdict BETWEEN 0 AND 3", name="verdict"),
    sa.CheckConstraint("json_valid(reasons)", name="reasons").ddl_if(dialect="sqlite"),
    sa.CheckConstraint("reasons::jsonb IS NOT NULL", name="reasons").ddl_if(dialect="postgresql"), counted=False,
    rowid=False,
)
sa.Index(None, verdict.c.target_id, verdict.c.verdict, verdict.c.sample_id, verdict.c.score_min)
verdict_change = table(
    "verdict_change", own_id("verdict_change_id"), sa.Column("sample_id", whole, nullable=False),
    sa.Column("target_id", whole, nullable=False), sa.Column("changed_at", words, nullable=False),
    sa.Column("verdict_from", whole), sa.Column("verdict_to", whole), sa.Column("cause", words, nullable=False),
)
sa.Index(None, verdict_change.c.sample_id)
setting = table(
    "setting", sa.Column("name", words, primary_key=True), sa.Column("value", words, nullable=False), counted=False,
)
convention_set = table(
    "convention_set", own_id("convention_set_id"), sa.Column("conventions", words, nullable=False, unique=True),
    sa.Column("created_at", words, nullable=False),
)
stale = table(
    "stale", sa.Column("sample_id", whole, primary_key=True, autoincrement=False),
    sa.Column("level", whole, nullable=False), sa.CheckConstraint("level BETWEEN 1 AND 2", name="level"),
    counted=False,
)
stale_group = table(
    "stale_group", sa.Column("kind", words, primary_key=True),
    sa.Column("group_id", whole, primary_key=True, autoincrement=False), one_of("kind", "intrusion", "area"),
    counted=False, rowid=False,
)
intrusion_derived = table(
    "intrusion_derived",
    sa.Column(
        "intrusion_id", whole, sa.ForeignKey("intrusion.intrusion_id", ondelete="CASCADE"), primary_key=True,
        autoincrement=False,
    ),
    *reals("theta_centre theta_centre_low theta_centre_high heat_x_thickness_mw_m2"),
    sa.Column("trend_quality", words), counted=False,
)
area_derived = table(
    "area_derived",
    sa.Column(
        "area_id", whole, sa.ForeignKey("area.area_id", ondelete="CASCADE"), primary_key=True, autoincrement=False
    ),
    *reals("mantle_heat_flow_mw_m2 wet_granite_solidus_depth_km"), sa.Column("geotherm_cause", words),
    *reals("crust_heating_needed_c crust_heating_depth_km"), *texts("crust_decompression crust_water"),
    *reals("moho_temperature_c mantle_heating_needed_c mantle_water_needed_wt dry_peridotite_solidus_depth_km"),
    *reals("mantle_decompression_needed_gpa mantle_decompression_depth_km"),
    *texts("mantle_decompression mantle_cause"), counted=False,
)
suite_row = table(
    "suite_row",
    sa.Column(
        "intrusion_id", whole, sa.ForeignKey("intrusion.intrusion_id", ondelete="CASCADE"), primary_key=True,
        autoincrement=False,
    ),
    sa.Column("position", whole, primary_key=True, autoincrement=False), *texts("model quantity", nullable=False),
    sa.Column("value", number), sa.Column("unit", words, nullable=False), *texts("quality cause"), counted=False,
    rowid=False,
)
suite_outlier = table(
    "suite_outlier", sample_key(), link("intrusion_id", "intrusion.intrusion_id", nullable=False, ondelete="CASCADE"),
    *reals("distance distance_limit"), sa.Column("component", words), *reals("component_value component_median"),
    sa.Column("text", words, nullable=False), counted=False,
)
sa.Index(None, suite_outlier.c.intrusion_id)
mass_change = table(
    "mass_change", sample_key(), link("intrusion_id", "intrusion.intrusion_id", nullable=False, ondelete="CASCADE"),
    sa.Column("reference_sample", words), sa.Column("isocon_slope", number),
    *texts("immobile_components cause changes"), counted=False,
)
sa.Index(None, mass_change.c.intrusion_id)
import_guard = table(
    "import_guard", sa.Column("guard", whole, primary_key=True, autoincrement=False),
    sa.CheckConstraint("guard = 1", name="guard"), counted=False,
)
account = table(
    "account", own_id("account_id"), sa.Column("name", words, nullable=False, unique=True),
    *texts("password_hash role created_at", nullable=False),
)
audit_entry = table(
    "audit_entry", own_id("audit_entry_id"), *texts("at account action", nullable=False), *texts("subject detail"),
)
reading_recipe = table(
    "reading_recipe", own_id("reading_recipe_id"), sa.Column("name", words, nullable=False, unique=True),
    *texts("kind shape recipe created_at", nullable=False),
)
reference_material = table(
    "reference_material", own_id("reference_material_id"), sa.Column("name", words, nullable=False, unique=True),
)
reference_value = table(
    "reference_value", own_id("reference_value_id"),
    link("reference_material_id", "reference_material.reference_material_id", nullable=False, ondelete="CASCADE"),
    sa.Column("analyte", words, nullable=False), sa.Column("value", number, nullable=False),
    sa.Column("unit", words, nullable=False), sa.Column("uncertainty", number), sa.Column("uncertainty_type", words),
    *texts("status source", nullable=False), sa.UniqueConstraint("reference_material_id", "analyte", "unit", "source"),
)
control_outcome = table(
    "control_outcome", sa.Column("aliquot_id", whole, primary_key=True, autoincrement=False),
    sa.Column("column_id", whole, primary_key=True, autoincrement=False),
    link("batch_id", "batch.batch_id", nullable=False, ondelete="CASCADE"), sa.Column("kind", words, nullable=False),
    sa.Column("material", words), *reals("expected found z limit_low limit_high"),
    sa.Column("state", whole, nullable=False), *texts("rule source"),
    one_of("kind", "reference_material", "blank", "duplicate", "lab_repeat"),
    sa.CheckConstraint("state BETWEEN 0 AND 3", name="state"), counted=False, rowid=False,
)
sa.Index(None, control_outcome.c.batch_id)
control_state = table(
    "control_state", sa.Column("column_id", whole, primary_key=True, autoincrement=False),
    link("batch_id", "batch.batch_id", nullable=False, ondelete="CASCADE"), sa.Column("state", whole, nullable=False),
    sa.Column("remarks", words, nullable=False), sa.Column("reference_results", whole, nullable=False),
    sa.Column("blank_results", whole, nullable=False), sa.Column("pairs", whole, nullable=False),
    *reals("bias_percent bias_error_percent drift_percent drift_error_percent precision_s0 precision_k"),
    sa.CheckConstraint("state BETWEEN 0 AND 2", name="state"), counted=False,
)
sa.Index(None, control_state.c.batch_id)
stale_batch = table(
    "stale_batch", sa.Column("batch_id", whole, primary_key=True, autoincrement=False), counted=False,
)
quantity = table(
    "quantity", sa.Column("position", whole, primary_key=True, autoincrement=False),
    sa.Column("name", words, nullable=False, unique=True),
    *texts("sheet label unit meaning method source status", nullable=False), counted=False,
)
warning_kind = table(
    "warning_kind", sa.Column("position", whole, primary_key=True, autoincrement=False),
    *texts("code column_name", nullable=False), sa.Column("value_column", words),
    sa.Column("text", words, nullable=False), counted=False,
)
cause_kind = table(
    "cause_kind", sa.Column("position", whole, primary_key=True, autoincrement=False),
    sa.Column("letter", words, nullable=False, unique=True), *texts("code text", nullable=False), counted=False,
)
column_guide_row = table(
    "column_guide_row", sa.Column("position", whole, primary_key=True, autoincrement=False),
    *texts("view_name column_name unit meaning method source", nullable=False),
    sa.UniqueConstraint("view_name", "column_name"), counted=False,
)
# fmt: on


def upgrade() -> None:
    metadata.create_all(op.get_bind(), checkfirst=False)


def downgrade() -> None:
    """Leave an empty database: every row goes. ``plutonbook`` itself never calls this; the tests do."""
    metadata.drop_all(op.get_bind(), checkfirst=False)
