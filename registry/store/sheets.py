"""The public face: every view with its columns, in contract order.

Everything else in the store is made from these lists: the derived table, the views of both engines, the column guide
and the golden list of the tests. A change here is a change of the contract.
"""

from __future__ import annotations

from registry.petrology.analytes import ELEMENT_COLUMNS, OXIDE_COLUMNS


def _names(text: str) -> tuple[str, ...]:
    return tuple(text.split())


#: Kinds of sample that are never judged.
CONTROL_KINDS = ("reference_material", "blank", "duplicate")
#: Verdict words by stored code.
VERDICT_WORDS = ("favourable", "possible", "unfavourable", "undecided")
#: Outcome words by the letter of the packed reasons.
OUTCOME_WORDS = {"m": "met", "r": "near", "n": "not met", "u": "unknown"}
#: Words for the state of one control result, and of an analyte in a batch, by stored code.
CONTROL_STATE_WORDS = ("not judged", "passed", "warned", "failed")
ANALYTE_STATE_WORDS = ("passes", "passes with remarks", "fails")

VOLATILE_FREE_COLUMNS = _names(
    "sio2_vf_wt tio2_vf_wt al2o3_vf_wt fe2o3_vf_wt feo_vf_wt feot_vf_wt mno_vf_wt mgo_vf_wt cao_vf_wt "
    "na2o_vf_wt k2o_vf_wt p2o5_vf_wt cr2o3_vf_wt nio_vf_wt zro2_vf_wt"
)
MINERALS = _names(
    "q c z or ab an lc ne kp hl th ac ns ks di wo hy ol cs mt cm hm il tn pf ru ap fr pr cc"
)  # order of the norm sheet
NORM_COLUMNS = (
    *(f"{mineral}_wt" for mineral in MINERALS),
    *_names("di_wo_wt di_en_wt di_fs_wt hy_en_wt hy_fs_wt ol_fo_wt ol_fa_wt norm_total_wt norm_residual_wt norm_basis"),
)
CATION_NORM_COLUMNS = (
    *(f"{mineral}_cat" for mineral in MINERALS),
    *_names("di_wo_cat di_en_cat di_fs_cat hy_en_cat hy_fs_cat ol_fo_cat ol_fa_cat"),
)
INDEX_COLUMNS = _names(
    "mg_number mg_number_total_iron differentiation_index solidification_index larsen_index "
    "crystallization_index felsic_index mafic_index a_cnk a_nk asi agpaitic_index mali fe_number "
    "rittmann_index r1 r2 q_prime anor eu_anomaly ce_anomaly la_yb la_yb_n k_rb rb_sr nb_ta zr_hf sr_y v_sc "
    "fe2o3_feo ga_al_10000 delta_ox cu_zr cu_pd pd_pt zr_tio2 nb_y al2o3_tio2 ti_zr th_yb zr_y y_nb y_ho "
    "zr_nb_ce_y fssi f_prime hughes_x cia alteration_index ccpi"
)
CLASS_COLUMNS = _names(
    "silica_class tas_volcanic tas_plutonic tas_subname a_type k2o_series afm_series alkalinity alumina_class "
    "fe_class mali_class granite_field redox_series fitness fitness_cause"
)
LIQUIDUS_MODELS = _names("helz_thornber putirka13 putirka14 putirka15 putirka22 beattie sugawara makhluf duan")
MELT_COLUMNS = (
    *_names("h2o_wt liquidus_c liquidus_model liquidus_cause liquidus_low_c liquidus_high_c"),
    *(f"liquidus_{model}_c" for model in LIQUIDUS_MODELS),
    *_names(
        "zircon_saturation_wh83_c zircon_saturation_b13_c zircon_saturation_shao_c saturation_hfse_c "
        "apatite_saturation_c monazite_saturation_c monazite_saturation_maimaiti_c melt_density_kg_m3 "
        "melt_viscosity_log10_pa_s melt_viscosity_shaw_log10_pa_s stokes_velocity_m_per_yr dyke_velocity_m_per_s "
        "ascent_outcome ascent_cause heat_production_uw_m3 heat_production_cause"
    ),
)
#: Columns of the composition sheet that are computed: they stand in the derived table.
COMPUTED_IRON_COLUMNS = ("fe2o3t_wt", "feot_wt", "fe2o3_wt", "feo_wt", "iron_basis", "total_wt")

#: Computed for each sample and shown by intrusion.
BODY_COLUMNS = _names("theta_centre theta_centre_low theta_centre_high heat_x_thickness_mw_m2")
#: Computed on the way to the columns of the sheets; stored since warnings and reasons name their numbers.
ON_THE_WAY_COLUMNS = _names(
    "not_a_liquid olivine_d_mg olivine_c_nm olivine_c_sio2 olivine_nf zircon_m monazite_d "
    "heat_production_density_kg_m3 redox_evidence zircon_saturation_usable apatite_saturation_usable "
    "density_contrast_kg_m3"
)

#: Every column of the derived table that a method of the catalogue fills.
DERIVED_COLUMNS = (
    *COMPUTED_IRON_COLUMNS,
    *VOLATILE_FREE_COLUMNS,
    *NORM_COLUMNS,
    *CATION_NORM_COLUMNS,
    *INDEX_COLUMNS,
    *CLASS_COLUMNS,
    *MELT_COLUMNS,
    *BODY_COLUMNS,
    *ON_THE_WAY_COLUMNS,
)
#: Those of them that hold words.
DERIVED_TEXT_COLUMNS = frozenset(
    (
        "iron_basis",
        "norm_basis",
        *CLASS_COLUMNS,
        "liquidus_model",
        "liquidus_cause",
        "ascent_outcome",
        "ascent_cause",
        "heat_production_cause",
        "redox_evidence",
    )
)

COMPOSITION_COLUMNS = (
    *OXIDE_COLUMNS,
    *_names("fe2o3t_wt feot_wt feo_titrated_wt fe2o3_wt feo_wt iron_basis total_reported_wt total_wt"),
    *ELEMENT_COLUMNS,
    "censored",
)
SAMPLE_COLUMNS = _names(
    "sample_kind area site_code site_kind from_m to_m longitude latitude easting northing elevation_m epsg "
    "intrusion lithology texture sio2_wt mgo_wt mg_number_total_iron differentiation_index liquidus_c "
    "tas_volcanic tas_plutonic fitness best_target best_verdict"
)


def _per_sample(columns: tuple[str, ...] | str) -> tuple[str, ...]:
    names = tuple(columns.split()) if isinstance(columns, str) else columns
    return ("sample_id", "sample_code", *names, "is_stale")


#: View -> its columns in contract order.
SHEETS: dict[str, tuple[str, ...]] = {
    "sample_sheet": _per_sample(SAMPLE_COLUMNS),
    "composition_sheet": _per_sample(COMPOSITION_COLUMNS),
    "volatile_free_sheet": _per_sample(VOLATILE_FREE_COLUMNS),
    "norm_sheet": _per_sample(NORM_COLUMNS),
    "cation_norm_sheet": _per_sample(CATION_NORM_COLUMNS),
    "index_sheet": _per_sample(INDEX_COLUMNS),
    "class_sheet": _per_sample(CLASS_COLUMNS),
    "melt_sheet": _per_sample(MELT_COLUMNS),
    "verdict_sheet": _per_sample(
        "target verdict score_min score_max coverage probability probability_state provisional target_version"
    ),
    "reason_sheet": _per_sample(
        "target criterion value value_text threshold margin outcome missing provisional source"
    ),
    "result_sheet": _per_sample("analyte value unit qualifier method digestion batch line_no"),
    "warning_sheet": _per_sample("code column_name value text"),
    "cause_sheet": _per_sample("column_name cause text"),
    "change_sheet": _per_sample("target changed_at verdict_from verdict_to cause"),
    "control_sheet": _names(
        "batch analyte kind expected found z state line_no sample_code material limit_low limit_high rule source "
        "qualifier"
    ),
    "batch_sheet": _names("batch lab state file_name sha256"),
    "intrusion_sheet": _names(
        "intrusion area shape half_width_m age_ma theta_centre theta_centre_low theta_centre_high "
        "heat_x_thickness_mw_m2 samples trend_quality"
    ),
    "area_sheet": _names(
        "area heat_flow_mw_m2 surface_temperature_c conductivity_w_m_k heat_production_uw_m3 "
        "heat_production_depth_m mantle_heat_flow_mw_m2 wet_granite_solidus_depth_km geotherm_cause moho_depth_m "
        "crust_heating_needed_c crust_heating_depth_km crust_decompression crust_water moho_temperature_c "
        "mantle_heating_needed_c mantle_water_needed_wt dry_peridotite_solidus_depth_km mantle_decompression "
        "mantle_decompression_needed_gpa mantle_decompression_depth_km mantle_cause"
    ),
    "suite_sheet": _names("intrusion model quantity value unit quality cause"),
    "mass_change_sheet": _per_sample(
        "reference_sample component change_wt change_percent isocon_slope immobile_components cause"
    ),
    "column_guide": _names("view_name column_name unit meaning method source"),
}
#: The views with one row or more a sample.
PER_SAMPLE_SHEETS = tuple(name for name, columns in SHEETS.items() if columns[-1] == "is_stale")
#: The views with one row a sample that read straight from the derived table.
DERIVED_SHEETS = (
    "volatile_free_sheet",
    "norm_sheet",
    "cation_norm_sheet",
    "index_sheet",
    "class_sheet",
    "melt_sheet",
)
