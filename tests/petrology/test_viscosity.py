"""Melt viscosity: two models against each other within their stated error, sense of heat, water and crystals."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.viscosity import (
    crystal_factor_einstein_roscoe,
    crystal_factor_maron_pierce,
    glass_transition_giordano,
    melt_viscosity_giordano,
    melt_viscosity_shaw,
)
from tests.petrology.melt_rocks import ANDESITE, BASALT, GRANITE, melt, table

#: Root mean square error of Giordano and others 2008, log10 units (from memory).
STATED_ERROR = 0.40


@pytest.mark.parametrize(
    ("rock", "temperature", "water"),
    [
        (BASALT, 1200.0, 0.0),
        (BASALT, 1200.0, 2.0),
        (ANDESITE, 1200.0, 0.0),
        (GRANITE, 1200.0, 0.0),
        (GRANITE, 800.0, 4.0),
    ],
)
def test_viscosity_two_models_agree_within_the_stated_error(rock, temperature, water) -> None:
    difference = melt_viscosity_giordano(melt(rock), temperature, water) - melt_viscosity_shaw(
        melt(rock), temperature, water
    )

    assert abs(float(difference)) <= STATED_ERROR


@given(st.floats(900.0, 1400.0), st.floats(0.0, 5.0))
def test_viscosity_falls_with_heat_and_water(temperature: float, water: float) -> None:
    for model in (melt_viscosity_giordano, melt_viscosity_shaw):
        here = model(melt(ANDESITE), temperature, water)
        assert model(melt(ANDESITE), temperature + 25.0, water) < here
        assert model(melt(ANDESITE), temperature, water + 0.25) < here


def test_viscosity_rises_from_basalt_to_granite() -> None:
    for model in (melt_viscosity_giordano, melt_viscosity_shaw):
        values = model(table(BASALT, ANDESITE, GRANITE), 1200.0)
        assert (np.diff(values) > 0.5).all()


def test_viscosity_fluorine_lowers_it() -> None:
    assert melt_viscosity_giordano(melt(GRANITE), 900.0, 2.0, 1.0) < melt_viscosity_giordano(melt(GRANITE), 900.0, 2.0)


def test_glass_transition_is_where_the_viscosity_is_1e12() -> None:
    kelvin = glass_transition_giordano(melt(GRANITE), 2.0)

    assert melt_viscosity_giordano(melt(GRANITE), kelvin - 273.15, 2.0) == pytest.approx(12.0, abs=1e-9)


def test_viscosity_negative_water_is_missing() -> None:
    assert np.isnan(melt_viscosity_giordano(melt(GRANITE), 900.0, -1.0))
    assert np.isnan(melt_viscosity_shaw(melt(GRANITE), 900.0, -1.0))


def test_viscosity_missing_oxide_column_counts_as_absent() -> None:
    without = {name: value for name, value in melt(GRANITE).items() if name != "mno_wt"}

    assert melt_viscosity_giordano(without, 900.0) == pytest.approx(
        float(melt_viscosity_giordano({**without, "mno_wt": 0.0}, 900.0)), rel=1e-14
    )


@given(st.floats(0.0, 0.59), st.floats(0.001, 0.5))
def test_crystals_raise_the_viscosity(phi: float, more: float) -> None:
    assert crystal_factor_einstein_roscoe(phi) >= 1.0
    if phi + more < 0.599:
        assert crystal_factor_einstein_roscoe(phi + more) > crystal_factor_einstein_roscoe(phi)
        assert crystal_factor_maron_pierce(phi + more, 0.6) > crystal_factor_maron_pierce(phi, 0.6)


@pytest.mark.parametrize("phi", [-0.01, 0.6, 0.9, np.nan])
def test_crystals_beyond_locking_have_no_viscosity(phi: float) -> None:
    assert np.isnan(crystal_factor_einstein_roscoe(phi))
