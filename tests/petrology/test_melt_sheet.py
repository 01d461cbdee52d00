"""The melt sheet through the whole computation: every contract column, its causes, its warnings, row by row."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.catalogue import CAUSES, METHOD_OF_QUANTITY, QUANTITIES, WARNINGS
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_CODE
from registry.petrology.references import REFERENCES
from registry.pipeline import Chunk, Computed, compute, empty_chunk
from tests.petrology.melt_rocks import ANDESITE, BASALT, GRANITE

#: The contract's columns, in its order.
MELT_COLUMNS = (
    "h2o_wt", "liquidus_c", "liquidus_model", "liquidus_cause", "liquidus_low_c", "liquidus_high_c",
    "liquidus_helz_thornber_c", "liquidus_putirka13_c", "liquidus_putirka14_c", "liquidus_putirka15_c",
    "liquidus_putirka22_c", "liquidus_beattie_c", "liquidus_sugawara_c", "liquidus_makhluf_c",
    "liquidus_duan_c", "zircon_saturation_wh83_c", "zircon_saturation_b13_c", "zircon_saturation_shao_c",
    "saturation_hfse_c", "apatite_saturation_c", "monazite_saturation_c", "monazite_saturation_maimaiti_c",
    "melt_density_kg_m3", "melt_viscosity_log10_pa_s", "melt_viscosity_shaw_log10_pa_s",
    "stokes_velocity_m_per_yr", "dyke_velocity_m_per_s", "ascent_outcome", "ascent_cause",
    "heat_production_uw_m3", "heat_production_cause",
)  # fmt: skip
_POSITION = {quantity.name: position for position, quantity in enumerate(QUANTITIES)}
_CODE_OF_LETTER = {letter: code for code, (letter, _) in CAUSES.items()}
_TRACES = {
    "zr_ppm": 150.0, "hf_ppm": 4.2, "th_ppm": 15.0, "u_ppm": 4.0, "la_ppm": 35.0, "ce_ppm": 70.0, "pr_ppm": 8.0,
    "nd_ppm": 28.0, "sm_ppm": 5.5, "gd_ppm": 4.5, "li_ppm": 20.0, "loi_wt": 0.5,
}  # fmt: skip
#: Invented.
DUNITE = {
    "sio2_wt": 41.0, "tio2_wt": 0.02, "al2o3_wt": 1.0, "fe2o3t_reported_wt": 8.5, "mno_wt": 0.12, "mgo_wt": 46.0,
    "cao_wt": 1.0, "na2o_wt": 0.1, "k2o_wt": 0.05, "p2o5_wt": 0.02,
}  # fmt: skip


def _as_reported(rock: dict[str, float]) -> dict[str, float]:
    names = {"feo_wt": "feo_titrated_wt", "fe2o3_wt": "fe2o3_ferric_wt"}
    return {names.get(name, name): value for name, value in rock.items() if name != "feot_wt"}


def _chunk(*samples: dict[str, float], digestion: str = "fusion", **context: Any) -> Chunk:
    chunk = empty_chunk(len(samples))
    for row, sample in enumerate(samples):
        for name, value in sample.items():
            chunk.values[CHOSEN_INDEX[name], row] = value
            chunk.digestions[CHOSEN_INDEX[name], row] = DIGESTION_CODE[digestion]
    n = len(samples)
    numbers = {"emplacement_depth_m": 5000.0, "half_width_m": 1000.0, "depth_to_top_m": 2000.0, "age_ma": 0.05}
    defaults = {name: np.full(n, value) for name, value in numbers.items()}
    given = {name: np.asarray(value) for name, value in context.items()}
    shape = {"intrusion_shape": np.full(n, "slab", dtype=object)}
    return Chunk(chunk.sample_id, chunk.values, chunk.qualifiers, chunk.digestions, {**shape, **defaults, **given})


def _compute(*samples: dict[str, float], conventions: Conventions | None = None, **context: Any) -> Computed:
    return compute(_chunk(*samples, **context), [], conventions or Conventions())


def _sample(rock: dict[str, float], **changes: float) -> dict[str, float]:
    return {**_as_reported(rock), **_TRACES, **changes}


def _cause(computed: Computed, column: str, row: int = 0) -> str:
    letter = chr(computed.causes[row, _POSITION[column]])
    return "" if letter == "." else _CODE_OF_LETTER[letter]


def _warned(computed: Computed, row: int = 0) -> set[str]:
    return {warning.code for warning, mark in zip(WARNINGS, computed.warnings[row], strict=True) if mark == ord("1")}


def test_melt_sheet_every_contract_column_is_computed_with_a_known_source() -> None:
    for column in MELT_COLUMNS:
        method = METHOD_OF_QUANTITY[column]
        assert method.function is not None, column
        assert method.source in REFERENCES, column


def test_melt_sheet_complete_granite_has_every_number() -> None:
    computed = _compute(_sample(GRANITE))

    for column in MELT_COLUMNS:
        value = computed.derived[column][0]
        if column.endswith("_cause"):
            assert value is None, column
        else:
            assert value is not None and value == value, column
            assert _cause(computed, column) == "", column


def test_melt_sheet_average_granite_takes_the_acid_route() -> None:
    """Le Maitre's average granite at 4 wt% water: 892 C, zircon 777.6 C below, 949 C above (recomputed)."""
    derived = _compute(_sample(GRANITE)).derived

    assert derived["liquidus_model"][0] == "makhluf"
    assert derived["liquidus_c"][0] == pytest.approx(892.0, abs=0.5)
    assert derived["liquidus_low_c"][0] == pytest.approx(777.6, abs=0.05)
    assert derived["liquidus_high_c"][0] == pytest.approx(949.0, abs=0.5)


def test_melt_sheet_average_andesite_blends_its_own_columns() -> None:
    derived = {name: values[0] for name, values in _compute(_sample(ANDESITE)).derived.items()}
    lowered = 39.69 * 3.0**0.73
    in_range = [derived[f"liquidus_{name}_c"] - lowered for name in ("putirka13", "beattie", "sugawara")]
    in_range += [derived[f"liquidus_{name}_c"] for name in ("putirka14", "putirka15", "putirka22")]
    weight = (derived["sio2_vf_wt"] - 52.0) / 11.0
    expected = (1.0 - weight) * np.median(in_range) + weight * derived["liquidus_makhluf_c"]

    assert derived["mgo_vf_wt"] < 5.0, "Helz-Thornber is out of range"
    assert derived["liquidus_c"] == pytest.approx(expected, abs=1e-9)
    assert derived["liquidus_low_c"] == pytest.approx(min(*in_range, derived["liquidus_makhluf_c"]))
    assert derived["liquidus_high_c"] == pytest.approx(max(in_range))


def test_melt_sheet_dunite_is_no_liquid_yet_its_models_stand_flagged() -> None:
    computed = _compute(DUNITE)

    assert computed.derived["liquidus_cause"][0] == "not_a_liquid"
    assert computed.derived["ascent_cause"][0] == "liquidus_unknown"
    for column in (
        "liquidus_c",
        "liquidus_low_c",
        "liquidus_high_c",
        "melt_density_kg_m3",
        "melt_viscosity_log10_pa_s",
    ):
        assert np.isnan(computed.derived[column][0]) and _cause(computed, column) == "not_a_liquid", column
    assert computed.derived["liquidus_putirka13_c"][0] > 2000.0
    assert {"liquidus_putirka13_not_a_liquid", "liquidus_beattie_not_a_liquid"} <= _warned(computed)


def test_melt_sheet_logged_cumulate_is_no_liquid() -> None:
    lithology = np.array(["olivine gabbro cumulate", "gabbro"], dtype=object)
    derived = _compute(_sample(BASALT), _sample(BASALT), lithology=lithology).derived

    assert list(derived["liquidus_cause"]) == ["not_a_liquid", None]


def test_melt_sheet_partial_digestion_keeps_zircon_out_of_the_choice() -> None:
    computed = _compute(_sample(GRANITE), digestion="four_acid")

    assert computed.derived["zircon_saturation_wh83_c"][0] == pytest.approx(777.6, abs=0.05)
    assert "zircon_saturation_wh83_partial_digestion" in _warned(computed)
    assert np.isnan(computed.derived["liquidus_low_c"][0])
    assert _cause(computed, "liquidus_low_c") == "zircon_out_of_range"
    assert not computed.derived["zircon_saturation_usable"][0]


def test_melt_sheet_granite_without_zirconium_has_no_low_end() -> None:
    computed = _compute({name: value for name, value in _sample(GRANITE).items() if name != "zr_ppm"})

    assert _cause(computed, "liquidus_low_c") == "missing_input"
    assert _cause(computed, "zircon_saturation_wh83_c") == "missing_input"
    assert computed.derived["liquidus_c"][0] == pytest.approx(892.3, abs=0.05)


def test_melt_sheet_magnesia_poor_monzonite_has_no_model() -> None:
    computed = _compute(_sample(ANDESITE, mgo_wt=2.0))

    assert computed.derived["liquidus_cause"][0] == "no_model_in_range"
    assert _cause(computed, "liquidus_c") == "no_model_in_range"


def test_melt_sheet_basalt_zircon_is_flagged_out_of_range() -> None:
    warned = _warned(_compute(_sample(BASALT)))

    assert {f"zircon_saturation_{model}_outside_range" for model in ("wh83", "b13", "shao")} <= warned


def test_melt_sheet_altered_basalt_warns_but_serpentinite_like_magnesia_is_exempt() -> None:
    computed = _compute(_sample(BASALT, loi_wt=4.0), _sample(BASALT, loi_wt=4.0, mgo_wt=24.0), _sample(BASALT))

    flagged = ["liquidus_of_altered_rock" in _warned(computed, row) for row in range(3)]
    assert flagged == [True, False, False]


def test_melt_sheet_phosphorus_not_reported_gives_no_apatite_temperature() -> None:
    computed = _compute({name: value for name, value in _sample(GRANITE).items() if name != "p2o5_wt"})

    assert np.isnan(computed.derived["apatite_saturation_c"][0])
    assert _cause(computed, "apatite_saturation_c") == "missing_input"


def test_melt_sheet_unknown_depth_has_no_outcome_and_a_cause() -> None:
    computed = _compute(_sample(GRANITE), emplacement_depth_m=[np.nan])

    assert computed.derived["ascent_cause"][0] == "emplacement_depth_unknown"
    assert _cause(computed, "ascent_outcome") == "emplacement_depth_unknown"


def test_melt_sheet_light_country_rock_stalls_by_density_at_any_depth() -> None:
    derived = _compute(_sample(BASALT), emplacement_depth_m=[np.nan], country_density_kg_m3=[2300.0]).derived

    assert derived["ascent_outcome"][0] == "stalled by density"
    assert derived["stokes_velocity_m_per_yr"][0] < 0.0 and derived["dyke_velocity_m_per_s"][0] < 0.0


def test_melt_sheet_diapir_of_unknown_size_takes_the_convention_and_says_so() -> None:
    computed = _compute(_sample(GRANITE), half_width_m=[np.nan])

    assert "diapir_radius_assumed" in _warned(computed)
    assert not np.isnan(computed.derived["stokes_velocity_m_per_yr"][0])


def test_melt_sheet_thin_basalt_in_a_wide_dyke_is_not_laminar() -> None:
    conventions = Conventions(dyke_width_m=20.0)

    assert "dyke_flow_not_laminar" in _warned(_compute(_sample(BASALT), conventions=conventions))


def test_melt_sheet_measured_density_comes_before_the_class() -> None:
    computed = _compute(_sample(GRANITE), _sample(GRANITE), density_kg_m3=[2600.0, np.nan])
    heat = computed.derived["heat_production_uw_m3"]

    assert heat[0] / heat[1] == pytest.approx(2600.0 / 2650.0)
    assert "heat_production_density_assumed" not in _warned(computed, 0)
    assert "heat_production_density_assumed" in _warned(computed, 1)


def test_melt_sheet_four_acid_thorium_beside_zircon_is_a_minimum() -> None:
    computed = _compute(_sample(GRANITE, zr_ppm=250.0), _sample(GRANITE), digestion="four_acid")

    assert "heat_production_minimum" in _warned(computed, 0)
    assert "heat_production_minimum" not in _warned(computed, 1)


def test_melt_sheet_uranium_missing_names_it() -> None:
    computed = _compute({name: value for name, value in _sample(GRANITE).items() if name != "u_ppm"})

    assert computed.derived["heat_production_cause"][0] == "u_missing"
    assert _cause(computed, "heat_production_uw_m3") == "missing_input"


def test_melt_sheet_intrusion_heat_names_what_is_missing_and_what_is_assumed() -> None:
    shapes = np.array(["slab", "sphere", "cylinder", None], dtype=object)
    computed = _compute(
        *[_sample(GRANITE)] * 4,
        intrusion_shape=shapes,
        half_width_m=[1000.0, np.nan, 1000.0, 1000.0],
        volume_km3=[np.nan, 4.18879, np.nan, np.nan],
        depth_to_top_m=[2000.0, 2000.0, 2000.0, 2000.0],
        age_sigma_ma=[0.005, np.nan, 0.005, 0.005],
    )
    theta = computed.derived["theta_centre"]

    assert theta[0] > theta[2] > theta[1] > 0.0 and np.isnan(theta[3])
    assert _cause(computed, "theta_centre", 3) == "intrusion_incomplete"
    assert _cause(computed, "heat_x_thickness_mw_m2", 2) == "thickness_unknown"
    assert "age_sigma_assumed" in _warned(computed, 1) and "age_sigma_assumed" not in _warned(computed, 0)
    assert "theta_centre_upper_bound" in _warned(computed, 2) and "theta_centre_upper_bound" not in _warned(computed, 0)


def test_melt_sheet_water_and_pressure_follow_the_conventions() -> None:
    wetter = _compute(_sample(GRANITE), conventions=Conventions(h2o_acid_wt=5.0)).derived
    deeper = _compute(_sample(BASALT), conventions=Conventions(pressure_gpa=0.5)).derived

    assert wetter["h2o_wt"][0] == 5.0
    assert wetter["liquidus_c"][0] == pytest.approx(843.0, abs=0.5), "Makhluf and others at 5 wt% (recomputed)"
    assert deeper["liquidus_putirka15_c"][0] - _compute(_sample(BASALT)).derived["liquidus_putirka15_c"][0] == (
        pytest.approx(39.16 * 0.3)
    )


@pytest.mark.parametrize("hole", ["sio2_wt", "mgo_wt", "k2o_wt", "zr_ppm", "th_ppm", "pr_ppm"])
def test_melt_sheet_missing_value_stays_in_its_row(hole: str) -> None:
    samples = [_sample(BASALT), _sample(ANDESITE), _sample(GRANITE)]
    whole = _compute(*samples).derived
    samples[1] = {name: value for name, value in samples[1].items() if name != hole}
    holed = _compute(*samples).derived

    for column in MELT_COLUMNS:
        for row in (0, 2):
            assert holed[column][row] == whole[column][row] or holed[column][row] != holed[column][row], column


def test_melt_sheet_one_sample_equals_its_row_of_many_in_any_order() -> None:
    samples = [_sample(BASALT), _sample(ANDESITE), _sample(GRANITE), DUNITE]
    many = _compute(*reversed(samples)).derived

    for row, sample in enumerate(samples):
        one = _compute(sample).derived
        for column in MELT_COLUMNS:
            here, there = one[column][0], many[column][3 - row]
            if isinstance(here, str) or here is None:
                assert here == there, column
            else:
                np.testing.assert_allclose(here, there, rtol=1e-12, err_msg=column)


def test_intrusion_heat_bodies_that_share_a_key_are_still_told_apart(monkeypatch: pytest.MonkeyPatch) -> None:
    """With all weights zero every body has the same key; the values must not change."""
    samples = [_sample(GRANITE)] * 3
    half_widths = [500.0, 1000.0, 2000.0]
    expected = _compute(*samples, half_width_m=half_widths).derived["theta_centre"]
    monkeypatch.setattr("registry.petrology.catalogue.heat.KEY_WEIGHTS", np.zeros(5))

    found = _compute(*samples, half_width_m=half_widths).derived["theta_centre"]

    np.testing.assert_array_equal(found, expected)
    assert np.unique(found).size == 3
