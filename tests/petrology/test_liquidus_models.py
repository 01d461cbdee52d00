"""The liquidus models: agreement where they must agree, and behaviour on impossible and missing values.

Printed and recomputed values stand in registry/petrology/published/liquidus.csv (test_published.py).
"""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.liquidus_models import (
    liquidus_beattie,
    liquidus_helz_thornber,
    liquidus_makhluf,
    liquidus_putirka13,
    liquidus_putirka14,
    liquidus_putirka15,
    liquidus_putirka22,
    liquidus_sugawara,
    olivine_liquid_terms,
)
from registry.petrology.melt_composition import (
    MELT_OXIDES,
    by_silica_class,
    cation_fractions,
    equilibrium_forsterite,
    oxide_mole_fractions,
    wet_wt,
)
from tests.petrology.melt_rocks import ANDESITE, BASALT, GLASS, GRANITE, melt, table


def _all_olivine_models(rock: dict[str, object]) -> dict[str, np.ndarray]:
    terms = olivine_liquid_terms(**rock)
    mgo, feot, na2o, k2o = (rock[name] for name in ("mgo_wt", "feot_wt", "na2o_wt", "k2o_wt"))
    return {
        "putirka13": liquidus_putirka13(mgo),
        "putirka14": liquidus_putirka14(mgo, feot, na2o, k2o),
        "putirka15": liquidus_putirka15(mgo, feot, na2o, k2o),
        "putirka22": liquidus_putirka22(**terms),
        "beattie": liquidus_beattie(**terms),
        "sugawara": liquidus_sugawara(**rock),
    }


def test_olivine_models_ridge_basalt_agree_within_their_errors() -> None:
    """Six independent fits on a dry ridge basalt at 1 bar lie within 12 C of each other (recomputed)."""
    temperatures = np.array(list(_all_olivine_models(melt(GLASS)).values()))

    assert temperatures.min() > 1165.0 and temperatures.max() < 1182.0
    assert np.ptp(temperatures) < 12.0


def test_helz_thornber_ridge_basalt_is_within_the_error_of_putirka13() -> None:
    assert abs(float(liquidus_helz_thornber(7.0) - liquidus_putirka13(7.0))) < 71.0


@pytest.mark.parametrize("oxide", list(MELT_OXIDES))
def test_olivine_models_missing_oxide_stays_in_its_row(oxide: str) -> None:
    rocks = table(BASALT, GLASS, ANDESITE)
    whole = _all_olivine_models(rocks)
    rocks[oxide] = np.array([rocks[oxide][0], np.nan, rocks[oxide][2]])
    holed = _all_olivine_models(rocks)

    for model in ("putirka22", "beattie", "sugawara"):
        assert np.isnan(holed[model][1])
        np.testing.assert_array_equal(holed[model][[0, 2]], whole[model][[0, 2]])


def test_olivine_models_one_row_equals_row_of_many() -> None:
    many = _all_olivine_models(table(BASALT, GLASS, ANDESITE, GRANITE))

    for position, rock in enumerate((BASALT, GLASS, ANDESITE, GRANITE)):
        one = _all_olivine_models(melt(rock))
        for model, values in many.items():
            assert one[model] == pytest.approx(values[position], rel=1e-14)


@given(st.floats(0.5, 3.0))
def test_cation_models_scaled_analysis_gives_the_same_temperature(factor: float) -> None:
    scaled = {name: value * factor for name, value in melt(BASALT).items()}

    for model, expected in _all_olivine_models(melt(BASALT)).items():
        if model in ("putirka22", "beattie", "sugawara"):
            assert _all_olivine_models(scaled)[model] == pytest.approx(expected, abs=1e-6)


@given(st.floats(0.0, 6.0), st.floats(0.01, 3.0))
def test_hydrous_models_more_water_lowers_the_liquidus(water: float, more: float) -> None:
    terms = olivine_liquid_terms(**melt(BASALT))

    assert liquidus_putirka22(**terms, h2o_wt=water + more) < liquidus_putirka22(**terms, h2o_wt=water)


def test_beattie_pressure_raises_the_liquidus() -> None:
    terms = olivine_liquid_terms(**melt(BASALT))

    assert liquidus_beattie(**terms, pressure_gpa=1.0) > liquidus_beattie(**terms, pressure_gpa=1e-4)


@given(st.floats(3.0, 11.9), st.floats(0.01, 1.0))
def test_makhluf_within_its_range_falls_with_water(water: float, more: float) -> None:
    assert liquidus_makhluf(min(water + more, 12.0)) <= liquidus_makhluf(water)


def test_cation_fractions_sum_to_one() -> None:
    fractions = cation_fractions(table(BASALT, ANDESITE, GRANITE))

    np.testing.assert_allclose(sum(fractions.values()), 1.0, rtol=1e-14)


def test_cation_fractions_unknown_oxide_is_refused() -> None:
    with pytest.raises(ValueError, match="unknown oxides \\['wo3_wt'\\]"):
        cation_fractions({"sio2_wt": 50.0, "wo3_wt": 1.0})


def test_cation_fractions_empty_analysis_is_missing() -> None:
    assert np.isnan(cation_fractions({"sio2_wt": 0.0})["sio2_wt"])


def test_oxide_mole_fractions_sum_to_one() -> None:
    fractions = oxide_mole_fractions(melt(BASALT), MELT_OXIDES)

    assert sum(fractions.values()) == pytest.approx(1.0, abs=1e-14)


def test_wet_wt_oxides_and_water_sum_to_a_hundred() -> None:
    wet = wet_wt(melt(GRANITE), 4.0)

    assert sum(wet.values()) + 4.0 == pytest.approx(100.0, abs=1e-10)


@pytest.mark.parametrize("water", [-1.0, 100.0, np.nan])
def test_wet_wt_impossible_water_is_missing(water: float) -> None:
    assert np.isnan(wet_wt(melt(GRANITE), water)["sio2_wt"])


def test_equilibrium_forsterite_without_magnesium_and_iron_is_missing() -> None:
    assert np.isnan(equilibrium_forsterite(0.0, 0.0))


def test_silica_classes_on_their_limits_belong_to_the_more_silicic_but_sixty_three() -> None:
    """45 is basic, 52 intermediate, 63 intermediate (acid is above 63): Le Maitre 2002, from memory."""
    values = by_silica_class([44.999, 45.0, 51.999, 52.0, 63.0, 63.001, np.nan], 0, 1, 2, 3)

    np.testing.assert_array_equal(values, [0, 1, 1, 2, 2, 3, np.nan])
