"""What censored and partial values leave known. Rules: common practice, no source; numbers invented per branch."""

import numpy as np
import pytest

from registry.petrology.analytes import QUALIFIER_ABOVE, QUALIFIER_BELOW
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_CODE
from registry.targets.intervals import interval_text
from registry.targets.quantities import known_of


def workspace(*, below=(), above=(), four_acid=(), **values):
    """One sample; ``below`` and ``above`` name columns whose value is a limit."""
    made = {"conventions": Conventions()}
    for name, value in values.items():
        made[name] = np.array([value * 0.5 if name in below else value])
        made[f"reported:{name}"] = np.array([value])
        made[f"digestion:{name}"] = np.array([DIGESTION_CODE["four_acid" if name in four_acid else "fusion"]])
        code = QUALIFIER_BELOW if name in below else QUALIFIER_ABOVE if name in above else 0
        made[f"qualifier:{name}"] = np.array([code], dtype=np.uint8)
    return made


def ends(made, name):
    value = known_of(made, 1).number(name)
    open_low, open_high = value.ends()
    return float(value.low[0]), float(value.high[0]), bool(open_low[0]), bool(open_high[0])


def test_number_plain_value_is_a_point():
    assert ends(workspace(sn_ppm=8.0), "sn_ppm") == (8.0, 8.0, False, False)


def test_number_below_limit_reaches_from_zero_to_an_open_limit():
    assert ends(workspace(sn_ppm=10.0, below=["sn_ppm"]), "sn_ppm") == (0.0, 10.0, False, True)


def test_number_below_limit_without_the_reported_value_undoes_the_substitute():
    made = workspace(sn_ppm=10.0, below=["sn_ppm"])
    del made["reported:sn_ppm"]
    assert ends(made, "sn_ppm") == (0.0, 10.0, False, True)


def test_number_above_limit_is_open_upwards():
    assert ends(workspace(li_ppm=500.0, above=["li_ppm"], four_acid=["li_ppm"]), "li_ppm") == (
        500.0,
        np.inf,
        True,
        True,
    )


def test_number_four_acid_resistate_element_is_a_minimum():
    assert ends(workspace(zr_ppm=80.0, four_acid=["zr_ppm"]), "zr_ppm") == (80.0, np.inf, False, True)
    assert ends(workspace(sr_ppm=80.0, four_acid=["sr_ppm"]), "sr_ppm") == (80.0, 80.0, False, False)


def test_number_below_limit_of_a_partial_digestion_says_nothing():
    made = workspace(zr_ppm=5.0, below=["zr_ppm"], four_acid=["zr_ppm"])
    assert known_of(made, 1).number("zr_ppm").missing[0]


def test_number_of_a_refused_digestion_is_missing():
    made = workspace(li_ppm=40.0)
    assert known_of(made, 1).number("li_ppm").missing[0]  # lithium borate is the flux


@pytest.mark.parametrize(("zr", "minimum"), [(250.0, True), (150.0, False)])
def test_number_uranium_by_four_acids_is_a_minimum_where_zircon_is_plentiful(zr, minimum):
    made = workspace(u_ppm=5.0, zr_ppm=zr, four_acid=["u_ppm"])
    assert np.isinf(ends(made, "u_ppm")[1]) == minimum


def test_ratio_denominator_below_limit_bounds_it_from_below():
    low, high, open_low, _ = ends(workspace(nb_ppm=8.0, ta_ppm=0.5, below=["ta_ppm"]), "nb_ta")
    assert (low, high, open_low) == (16.0, np.inf, True)


def test_ratio_minimum_denominator_bounds_it_from_above():
    low, high, _, open_high = ends(workspace(sr_ppm=400.0, y_ppm=10.0, four_acid=["y_ppm"]), "sr_y")
    assert (low, high) == (0.0, 40.0)
    assert open_high is False


def test_ratio_both_sides_minimum_is_not_bounded():
    low, high, _, _ = ends(workspace(nb_ppm=8.0, ta_ppm=1.0, four_acid=["nb_ppm", "ta_ppm"]), "nb_ta")
    assert (low, high) == (0.0, np.inf)


def test_europium_anomaly_minimum_gadolinium_bounds_it_from_above():
    points = workspace(eu_ppm=1.0, sm_ppm=5.5, gd_ppm=4.5)
    value = ends(points, "eu_anomaly")[0]
    assert value == pytest.approx(0.613, abs=5e-4)  # McDonough and Sun 1995 chondrite, recomputed
    low, high, _, _ = ends(workspace(eu_ppm=1.0, sm_ppm=5.5, gd_ppm=4.5, four_acid=["gd_ppm"]), "eu_anomaly")
    assert low == 0.0
    assert high == pytest.approx(value)


def test_volatile_free_oxide_below_limit_scales_the_interval():
    made = workspace(tio2_wt=0.02, below=["tio2_wt"])
    made["tio2_vf_wt"] = np.array([0.0102])
    low, high, _, open_high = ends(made, "tio2_vf_wt")
    assert (low, high, open_high) == (0.0, pytest.approx(0.0204), True)


def test_heat_production_unknown_uranium_is_bounded_by_thorium_below_an_index_of_70():
    made = workspace(th_ppm=10.0, k2o_wt=4.0)
    made |= {"differentiation_index": np.array([60.0]), "density_kg_m3": np.array([2700.0])}
    low, high, _, _ = ends(made, "heat_production_uw_m3")
    assert low == pytest.approx(2.7e-2 * (2.56 * 10 + 3.48 * 0.8302 * 4), rel=1e-4)  # Rybach 1988, recomputed
    assert high == pytest.approx(low + 2.7e-2 * 9.52 * 10, rel=1e-4)
    made["differentiation_index"] = np.array([90.0])
    assert ends(made, "heat_production_uw_m3")[1] == np.inf


def test_zircon_temperature_rises_with_a_censored_zirconium():
    made = workspace(zr_ppm=150.0, below=["zr_ppm"])
    made["zircon_saturation_wh83_c"] = np.array([720.0])
    low, high, _, open_high = ends(made, "zircon_saturation_wh83_c")
    # 12900/T falls by ln(2) when Zr doubles (Watson and Harrison 1983, recomputed)
    assert high == pytest.approx(12900 / (12900 / 993.15 - np.log(2)) - 273.15, abs=0.01)
    assert low < -200.0 and open_high


def test_theta_without_a_method_is_computed_from_shape_and_age():
    made = {
        "intrusion_shape": np.array(["slab"], dtype=object), "half_width_m": np.array([1000.0]),
        "depth_to_top_m": np.array([1e7]), "age_ma": np.array([0.03]), "age_sigma_ma": np.array([0.0]),
    }  # fmt: skip
    # centre of a slab of half-width 1 km after 30 kyr: erf(a/2s) (Crank 1975, recomputed)
    assert ends(made, "theta_centre")[0] == pytest.approx(0.533, abs=1.5e-3)


@pytest.mark.parametrize(
    ("end", "text"),
    [
        ((0.0, 5.0, False, True), "< 5"),
        ((16.0, np.inf, True, True), "> 16"),
        ((16.0, np.inf, False, True), "16 to inf"),
        ((1.234567, 4.3, False, False), "1.235 to 4.3"),
        ((0.0, np.inf, False, True), "not bounded"),
        ((3.0, 3.0, False, False), ""),
    ],
)
def test_interval_text_says_the_ends(end, text):
    assert interval_text(*end) == text
