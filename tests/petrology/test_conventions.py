"""Each convention changes what it says it changes, and nothing is changed by default values."""

from __future__ import annotations

from dataclasses import fields
from typing import Any

import numpy as np
import pytest

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.catalogue import QUANTITIES, WARNINGS
from registry.petrology.catalogue.conventions import CONVENTION_GROUPS
from registry.petrology.constants import FEO_FROM_FE2O3
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_CODE
from registry.petrology.iron import SPLITS
from registry.petrology.redox import FROST_BUFFERS
from registry.petrology.water import DEPRESSION_NAMES
from registry.pipeline import Chunk, Computed, compute, empty_chunk

#: Invented: an ultrabasic, a basic, an intermediate and an acid rock.
MAJORS = ("sio2_wt", "tio2_wt", "al2o3_wt", "fe2o3t_reported_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt", "p2o5_wt")
ROCKS = [
    (43.0, 2.4, 12.0, 13.0, 12.0, 11.5, 2.4, 0.8, 0.5),
    (49.5, 1.8, 15.7, 11.7, 6.7, 9.5, 2.9, 1.1, 0.35),
    (58.0, 0.9, 17.0, 7.5, 3.6, 6.8, 3.5, 1.6, 0.2),
    (71.0, 0.3, 14.3, 3.0, 0.7, 1.8, 3.7, 4.1, 0.12),
]
OTHERS = {
    "mno_wt": 0.1, "loi_wt": 0.8, "co2_wt": 0.4, "s_wt": 0.3, "f_wt": 0.08, "cl_wt": 0.03, "zr_ppm": 150.0,
    "nb_ppm": 8.0, "ta_ppm": 0.5, "th_ppm": 10.0, "u_ppm": 3.0, "la_ppm": 35.0, "ce_ppm": 70.0, "pr_ppm": 8.0,
    "nd_ppm": 28.0, "sm_ppm": 5.5, "gd_ppm": 4.5,
}  # fmt: skip
CONTEXT = {"emplacement_depth_m": 5000.0, "age_ma": 0.05, "half_width_m": 1000.0, "depth_to_top_m": 2000.0,
           "magnetic_susceptibility_si": 2e-3}  # fmt: skip


def _chunk(**changes: float) -> Chunk:
    chunk = empty_chunk(len(ROCKS))
    chunk.values[[CHOSEN_INDEX[name] for name in MAJORS]] = np.array(ROCKS).T
    for name, value in {**OTHERS, **changes}.items():
        chunk.values[CHOSEN_INDEX[name]] = value
    chunk.digestions[~np.isnan(chunk.values)] = DIGESTION_CODE["fusion"]
    chunk.qualifiers[CHOSEN_INDEX["ta_ppm"]] = 1
    context: dict[str, np.ndarray] = {name: np.full(len(ROCKS), value) for name, value in CONTEXT.items()}
    context["intrusion_shape"] = np.full(len(ROCKS), "slab", dtype=object)
    return Chunk(chunk.sample_id, chunk.values, chunk.qualifiers, chunk.digestions, context)


def _changed(before: Computed, after: Computed) -> set[str]:
    changed = {
        quantity.name
        for quantity in QUANTITIES
        if str(before.derived[quantity.name].tolist()) != str(after.derived[quantity.name].tolist())
    }
    marks = (before.warnings != after.warnings).any(axis=0)
    return changed | {warning.code for warning, differs in zip(WARNINGS, marks, strict=True) if differs}


#: Convention -> another value, what must change, what must not, and what the analyses need beside.
CASES: dict[str, tuple[Any, set[str], set[str], dict[str, float]]] = {
    "iron_split": ("fixed_ratio", {"feo_wt", "mg_number", "mt_wt"}, {"feot_wt", "mg_number_total_iron"}, {}),
    "norm_co2_as_calcite": (True, {"cc_wt", "an_wt", "cc_cat", "norm_basis"}, {"feo_wt"}, {}),
    "norm_sulphur_as_pyrite": (True, {"pr_wt", "hy_wt", "pr_cat"}, {"cc_wt", "hl_wt"}, {}),
    "norm_halogens": (True, {"fr_wt", "hl_wt", "ap_wt"}, {"cc_wt", "pr_wt"}, {}),
    "censored_substitute": (1.0, {"nb_ta"}, {"zr_y", "sio2_vf_wt"}, {}),
    "h2o_ultrabasic_wt": (1.0, {"h2o_wt", "liquidus_c"}, {"liquidus_beattie_c"}, {}),
    "h2o_basic_wt": (2.0, {"h2o_wt", "liquidus_c", "liquidus_putirka22_c"}, {"liquidus_beattie_c"}, {}),
    "h2o_intermediate_wt": (2.0, {"h2o_wt", "liquidus_c", "melt_density_kg_m3"}, {"liquidus_beattie_c"}, {}),
    "h2o_acid_wt": (5.0, {"h2o_wt", "liquidus_makhluf_c", "melt_viscosity_log10_pa_s", "monazite_saturation_c"},
                    {"liquidus_duan_c"}, {}),
    "pressure_gpa": (0.8, {"liquidus_putirka15_c", "liquidus_putirka22_c", "liquidus_beattie_c", "melt_density_kg_m3",
                           "monazite_saturation_maimaiti_c"}, {"liquidus_putirka14_c", "zircon_saturation_wh83_c"}, {}),
    "water_depression": ("medard_grove", {"liquidus_c", "liquidus_low_c"}, {"liquidus_putirka13_c", "h2o_wt"}, {}),
    "wall_rock_viscosity_pa_s": (1e18, {"stokes_velocity_m_per_yr"}, {"dyke_velocity_m_per_s"}, {}),
    "diapir_radius_m": (500.0, {"stokes_velocity_m_per_yr"}, {"dyke_velocity_m_per_s"}, {}),
    "dyke_width_m": (0.5, {"dyke_velocity_m_per_s", "ascent_outcome"}, {"stokes_velocity_m_per_yr"}, {}),
    "country_density_kg_m3": (2600.0, {"density_contrast_kg_m3", "stokes_velocity_m_per_yr"},
                              {"melt_density_kg_m3"}, {}),
    "thermal_diffusivity_m2_s": (5e-7, {"theta_centre"}, {"dyke_velocity_m_per_s"}, {}),
    "density_ultrabasic_kg_m3": (3300.0, {"heat_production_uw_m3"}, {"melt_density_kg_m3"}, {}),
    "density_basic_kg_m3": (3000.0, {"heat_production_uw_m3"}, {"melt_density_kg_m3"}, {}),
    "density_intermediate_kg_m3": (2800.0, {"heat_production_uw_m3"}, {"melt_density_kg_m3"}, {}),
    "density_acid_kg_m3": (2600.0, {"heat_production_uw_m3", "heat_x_thickness_mw_m2"}, {"melt_density_kg_m3"}, {}),
    "total_warn_low_wt": (99.9, {"fitness", "total_outside_limits"}, {"sio2_vf_wt"}, {}),
    "total_warn_high_wt": (99.0, {"fitness", "total_outside_limits"}, {"sio2_vf_wt"}, {}),
    "total_fail_low_wt": (99.9, {"fitness", "total_fails_fitness"}, {"sio2_vf_wt"}, {}),
    "total_fail_high_wt": (99.0, {"fitness", "total_fails_fitness"}, {"sio2_vf_wt"}, {}),
    "loi_warn_wt": (0.5, {"loi_high", "redox_series", "liquidus_of_altered_rock", "sr_y_altered"},
                    {"loi_fails_fitness"},
                    {"sr_ppm": 300.0, "y_ppm": 20.0}),
    "loi_fail_wt": (0.5, {"fitness", "loi_fails_fitness"}, {"redox_series"}, {}),
    "loi_exempt_mgo_vf_wt": (11.0, {"fitness_cause", "loi_fails_fitness"}, {"redox_series"}, {"loi_wt": 7.0}),
    "sulphur_warn_wt": (0.2, {"mg_number_sulphidic"}, {"mg_number"}, {}),
    "magnetite_series_si": (1e-3, {"redox_series"}, {"fe2o3_feo"}, {}),
}  # fmt: skip
#: Read by one of the others' choices, or no part of what is computed of an analysis.
ELSEWHERE = {
    "iron_fixed_ratio", "iron_buffer", "iron_buffer_shift", "failed_control", "probability_draws",
    "error_major_percent", "error_trace_percent", "error_feo_percent", "error_volatile_percent",
}  # fmt: skip


def test_conventions_all_have_a_case_here() -> None:
    assert {field.name for field in fields(Conventions)} == set(CASES) | ELSEWHERE


@pytest.mark.parametrize("name", CASES)
def test_convention_changes_what_it_names_and_not_more(name: str) -> None:
    value, must, must_not, beside = CASES[name]
    chunk = _chunk(**beside)
    if name == "diapir_radius_m":  # taken where the half-width is unknown
        chunk.context["half_width_m"][:] = np.nan  # type: ignore[index]
    before = compute(chunk, [], Conventions())
    assert getattr(Conventions(), name) != value

    changed = _changed(before, compute(chunk, [], Conventions(**{name: value})))
    assert must <= changed
    assert not must_not & changed


@pytest.mark.parametrize(
    ("base", "name", "value"),
    [
        ({"iron_split": "fixed_ratio"}, "iron_fixed_ratio", 0.3),
        ({"iron_split": "kress_carmichael"}, "iron_buffer_shift", 1.0),
        *(({"iron_split": "kress_carmichael"}, "iron_buffer", buffer) for buffer in FROST_BUFFERS if buffer != "QFM"),
    ],
)
def test_convention_of_one_iron_split_changes_that_split(base: dict[str, Any], name: str, value: Any) -> None:
    before = compute(_chunk(), [], Conventions(**base))
    changed = _changed(before, compute(_chunk(), [], Conventions(**base, **{name: value})))

    assert {"feo_wt", "fe2o3_wt", "iron_basis", "mt_wt"} <= changed
    assert not {"feot_wt", "fe2o3t_wt", "mg_number_total_iron"} & changed


def test_every_iron_split_gives_its_own_ferrous_iron_and_keeps_the_total() -> None:
    splits = {name: compute(_chunk(), [], Conventions(iron_split=name)).derived for name in SPLITS}

    for name, derived in splits.items():
        rows = slice(1 if name == "middlemost" else 0, None)  # no ratio is held for the basanite
        total = derived["feo_wt"] + FEO_FROM_FE2O3 * derived["fe2o3_wt"]
        np.testing.assert_allclose(total[rows], derived["feot_wt"][rows], rtol=1e-12)
    assert len({round(float(derived["feo_wt"][1]), 6) for derived in splits.values()}) == len(SPLITS)


def test_every_water_depression_gives_its_own_liquidus_of_a_basalt() -> None:
    """At 1 wt% water the dry models go down by 39.7 [almeev2007], 37.5 [medard2008] and 74.4 C [falloon2000]."""
    at = {
        name: float(compute(_chunk(), [], Conventions(water_depression=name)).derived["liquidus_c"][1])
        for name in DEPRESSION_NAMES
    }

    assert at["falloon_danyushevsky"] < at["almeev"] < at["medard_grove"]


def test_conventions_of_an_unknown_name_are_refused() -> None:
    with pytest.raises(ValueError, match=r"unknown conventions \['colour'\]; known are"):
        Conventions.from_dict({"colour": "green"})


def test_conventions_go_to_a_dictionary_and_back() -> None:
    conventions = Conventions(iron_split="middlemost", pressure_gpa=0.4)

    assert Conventions.from_dict(conventions.as_dict()) == conventions


def test_convention_records_cover_every_convention_once_with_its_default() -> None:
    records = [record for _, group in CONVENTION_GROUPS for record in group]

    assert sorted(record.name for record in records) == sorted(field.name for field in fields(Conventions))
    for record in records:
        default = getattr(Conventions(), record.name)
        assert record.default == default and type(record.default) is type(default), record.name
        assert record.unit and record.meaning
        assert not record.choices or default in record.choices
        assert record.low is None or record.high is None or record.low <= default <= record.high


@pytest.mark.parametrize(("name", "known"), [("iron_split", SPLITS), ("iron_buffer", FROST_BUFFERS)])
def test_convention_choices_are_those_that_the_formulas_know(name: str, known: Any) -> None:
    record = next(record for _, group in CONVENTION_GROUPS for record in group if record.name == name)

    assert set(record.choices) == set(known)
