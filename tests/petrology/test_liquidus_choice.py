"""The choice of one liquidus temperature: routes, ranges, water, spread and causes.

The rules are the register's own convention (common practice); temperatures in the branch tests are invented.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.conventions import Conventions
from registry.petrology.liquidus_choice import (
    DRY_MODELS,
    OLIVINE_MODELS,
    choose_liquidus,
    is_not_a_liquid,
    liquidus_cause,
    median_low_high,
    olivine_models_in_range,
)
from registry.petrology.liquidus_models import liquidus_makhluf
from registry.petrology.water import (
    DEPRESSION_NAMES,
    melt_water_by_convention,
    water_depression,
    water_depression_falloon_danyushevsky,
    water_depressions,
)


def _choose(**changes: Any) -> dict[str, Any]:
    """A basalt with all models at 1200 C, changed as asked."""
    inputs: dict[str, Any] = {
        "sio2_wt": 50.0,
        "h2o_wt": 0.0,
        "olivine_models_c": dict.fromkeys(OLIVINE_MODELS, 1200.0),
        "makhluf_c": 900.0,
        "zircon_c": 780.0,
        "zircon_is_usable": False,
        "not_a_liquid": False,
        "mgo_wt": 7.0,
    }
    return choose_liquidus(**{**inputs, **changes})


def test_choice_basic_rock_takes_the_median_and_range_of_the_models() -> None:
    models = dict(zip(OLIVINE_MODELS, [1150.0, 1160.0, 1170.0, 1180.0, 1190.0, 1200.0, 1210.0], strict=True))
    chosen = _choose(olivine_models_c=models)

    assert chosen["liquidus_c"][0] == 1180.0
    assert (chosen["liquidus_low_c"][0], chosen["liquidus_high_c"][0]) == (1150.0, 1210.0)
    assert chosen["liquidus_model"][0] == "olivine_median"


@pytest.mark.parametrize("mgo", [4.999, 11.001])
def test_choice_magnesia_outside_five_to_eleven_leaves_helz_thornber_out(mgo: float) -> None:
    models = {**dict.fromkeys(OLIVINE_MODELS, 1200.0), "helz_thornber": 500.0}

    assert _choose(olivine_models_c=models, mgo_wt=mgo)["liquidus_low_c"][0] == 1200.0
    assert _choose(olivine_models_c=models, mgo_wt=5.0)["liquidus_low_c"][0] == 500.0


def test_choice_water_lowers_the_dry_models_only() -> None:
    lowered = water_depression(2.0, "almeev")
    chosen = _choose(h2o_wt=2.0)

    assert chosen["liquidus_low_c"][0] == pytest.approx(1200.0 - lowered)
    assert chosen["liquidus_high_c"][0] == 1200.0
    assert chosen["liquidus_c"][0] == pytest.approx(1200.0 - lowered), "four of seven are dry models"
    assert len(DRY_MODELS) == 4


@pytest.mark.parametrize("model", DEPRESSION_NAMES)
def test_choice_water_depression_follows_the_convention(model: str) -> None:
    chosen = _choose(h2o_wt=1.0, depression_model=model)

    assert chosen["liquidus_low_c"][0] == pytest.approx(1200.0 - water_depressions(1.0)[model])


def test_choice_basic_rock_poor_in_magnesia_has_no_model() -> None:
    chosen = _choose(mgo_wt=2.999)
    cause = liquidus_cause(chosen["liquidus_c"], False, 50.0, 2.999)

    assert np.isnan(chosen["liquidus_c"][0]) and chosen["liquidus_model"][0] is None
    assert cause[0] == "no_model_in_range"


def test_choice_acid_rock_takes_haplogranite_with_usable_zircon_below() -> None:
    chosen = _choose(sio2_wt=63.001, makhluf_c=892.3, zircon_is_usable=True, mgo_wt=0.5)

    assert chosen["liquidus_c"][0] == 892.3
    assert chosen["liquidus_low_c"][0] == 780.0
    assert chosen["liquidus_high_c"][0] == pytest.approx(float(liquidus_makhluf(3.0)))
    assert chosen["liquidus_model"][0] == "makhluf"


def test_choice_acid_rock_without_usable_zircon_has_no_low_end() -> None:
    chosen = _choose(sio2_wt=70.0, mgo_wt=0.5)

    assert np.isnan(chosen["liquidus_low_c"][0]) and not np.isnan(chosen["liquidus_c"][0])


def test_choice_intermediate_rock_is_blended_in_proportion_to_silica() -> None:
    chosen = _choose(sio2_wt=np.array([52.0, 57.5, 63.0]), mgo_wt=4.0)

    np.testing.assert_allclose(chosen["liquidus_c"], [1200.0, 1050.0, 900.0])
    np.testing.assert_allclose(chosen["liquidus_low_c"], 900.0)
    np.testing.assert_allclose(chosen["liquidus_high_c"], 1200.0)
    assert list(chosen["liquidus_model"]) == ["blend"] * 3


def test_choice_intermediate_rock_takes_in_the_haplogranite_at_three_percent_water() -> None:
    chosen = _choose(sio2_wt=57.5, makhluf_c=900.0, olivine_models_c=dict.fromkeys(OLIVINE_MODELS, 910.0))

    assert chosen["liquidus_high_c"][0] == pytest.approx(float(liquidus_makhluf(3.0)))


def test_choice_cumulate_has_no_temperature_and_says_so() -> None:
    chosen = _choose(not_a_liquid=True)

    assert np.isnan([chosen[name][0] for name in ("liquidus_c", "liquidus_low_c", "liquidus_high_c")]).all()
    assert liquidus_cause(chosen["liquidus_c"], True, 50.0, 7.0)[0] == "not_a_liquid"


def test_choice_missing_analysis_is_a_missing_input() -> None:
    chosen = _choose(sio2_wt=np.nan)

    assert liquidus_cause(chosen["liquidus_c"], False, np.nan, np.nan)[0] == "missing_input"


def test_choice_temperature_present_has_no_cause() -> None:
    assert liquidus_cause(np.array([1200.0]), False, 50.0, 7.0)[0] is None


def test_choice_without_a_model_is_refused() -> None:
    with pytest.raises(ValueError, match="no temperatures for \\['beattie'\\]"):
        _choose(olivine_models_c={name: 1.0 for name in OLIVINE_MODELS if name != "beattie"})


def test_not_a_liquid_dunite_by_its_forsterite() -> None:
    assert is_not_a_liquid(46.0, 8.0, False)


def test_not_a_liquid_picrite_is_a_liquid() -> None:
    """MgO 18, FeOt 11 wt%: equilibrium forsterite 91."""
    assert not is_not_a_liquid(18.0, 11.0, False)


def test_not_a_liquid_gabbro_logged_as_cumulate() -> None:
    np.testing.assert_array_equal(is_not_a_liquid([7.0, 7.0], [10.0, 10.0], [True, False]), [True, False])


def test_models_in_range_silica_above_sixty_three_leaves_none() -> None:
    assert not any(mask for mask in olivine_models_in_range(63.001, 7.0).values())
    assert all(mask for mask in olivine_models_in_range(63.0, 7.0).values())


@given(st.lists(st.lists(st.floats(0.0, 2000.0) | st.just(np.nan), min_size=7, max_size=7), min_size=1, max_size=5))
def test_median_low_high_agrees_with_sorting_each_row(rows: list[list[float]]) -> None:
    median, low, high = median_low_high(np.array(rows).T)

    for position, row in enumerate(rows):
        known = [value for value in row if not np.isnan(value)]
        if not known:
            assert np.isnan([median[position], low[position], high[position]]).all()
        else:
            assert median[position] == pytest.approx(float(np.median(known)), abs=1e-9)
            assert (low[position], high[position]) == (min(known), max(known))


def test_water_convention_follows_the_silica_class() -> None:
    water = melt_water_by_convention([40.0, 50.0, 60.0, 70.0, np.nan], Conventions(h2o_acid_wt=5.0))

    np.testing.assert_array_equal(water, [0.0, 1.0, 3.0, 5.0, np.nan])


def test_water_depression_unknown_name_is_refused() -> None:
    with pytest.raises(ValueError, match="'nobody' is not known; choose one of \\['almeev'"):
        water_depression(1.0, "nobody")


@given(st.floats(0.0, 4.0), st.floats(0.01, 2.0))
def test_water_depressions_grow_with_water(water: float, more: float) -> None:
    less_wet, wetter = water_depressions(water), water_depressions(water + more)

    assert all(wetter[name] > less_wet[name] for name in DEPRESSION_NAMES)


def test_water_depression_negative_water_is_missing() -> None:
    assert np.isnan(water_depression_falloon_danyushevsky(-0.1))
