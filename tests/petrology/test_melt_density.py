"""Melt density: the published effect of water, and its sense with temperature, pressure and composition."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.melt_density import DENSITY_OXIDES, VOLUMES_LANGE_CARMICHAEL, melt_density_lange
from tests.petrology.melt_rocks import ANDESITE, BASALT, GRANITE


def test_density_one_percent_water_equals_the_published_heating() -> None:
    """1 wt% H2O lowers basalt by as much as about 400 C of heating (Ochs and Lange 1999, abstract; one digit)."""
    dry, wet = melt_density_lange(BASALT, 1200.0), melt_density_lange(BASALT, 1200.0, h2o_wt=1.0)
    per_degree = (dry - melt_density_lange(BASALT, 1300.0)) / 100.0

    assert float((dry - wet) / per_degree) == pytest.approx(400.0, abs=50.0)


def test_density_one_percent_water_is_near_the_published_decompression() -> None:
    """The abstract prints about 500 MPa; these compressibilities (another source) give 440: within 15 %."""
    dry, wet = melt_density_lange(BASALT, 1200.0), melt_density_lange(BASALT, 1200.0, h2o_wt=1.0)
    per_mpa = (melt_density_lange(BASALT, 1200.0, 0.2) - dry) / 200.0

    assert float((dry - wet) / per_mpa) == pytest.approx(500.0, rel=0.15)


def test_density_first_set_of_volumes_agrees_within_a_percent_of_the_second() -> None:
    """Lange and Carmichael basalt 1200 C, 1 bar: 2664.7 kg/m3 (recomputed) against 2658.6."""
    older = melt_density_lange(BASALT, 1200.0, volumes=VOLUMES_LANGE_CARMICHAEL)

    assert float(older) == pytest.approx(2664.7, abs=0.05)
    assert float(older) == pytest.approx(float(melt_density_lange(BASALT, 1200.0)), rel=0.01)


def test_density_order_of_the_average_rocks() -> None:
    basalt, andesite, granite = (float(melt_density_lange(rock, 1200.0)) for rock in (BASALT, ANDESITE, GRANITE))

    assert basalt > andesite > granite


@given(st.floats(800.0, 1500.0), st.floats(0.0, 1.0), st.floats(0.0, 6.0))
def test_density_falls_with_heat_and_water_and_rises_with_pressure(t: float, p: float, water: float) -> None:
    here = melt_density_lange(ANDESITE, t, p, water)

    assert melt_density_lange(ANDESITE, t + 50.0, p, water) < here
    assert melt_density_lange(ANDESITE, t, p, water + 0.5) < here
    assert melt_density_lange(ANDESITE, t, p + 0.1, water) > here


@given(st.floats(0.2, 5.0))
def test_density_scaled_analysis_is_the_same(factor: float) -> None:
    scaled = {name: value * factor for name, value in BASALT.items()}

    assert melt_density_lange(scaled, 1200.0, h2o_wt=2.0) == pytest.approx(
        float(melt_density_lange(BASALT, 1200.0, h2o_wt=2.0)), rel=1e-12
    )


@pytest.mark.parametrize("oxide", list(DENSITY_OXIDES))
def test_density_negative_oxide_is_missing(oxide: str) -> None:
    assert np.isnan(melt_density_lange({**BASALT, oxide: -0.1}, 1200.0))


def test_density_missing_temperature_stays_in_its_row() -> None:
    rocks = {name: np.array([value, value]) for name, value in BASALT.items()}
    values = melt_density_lange(rocks, np.array([1200.0, np.nan]))

    assert float(values[0]) == pytest.approx(float(melt_density_lange(BASALT, 1200.0)), rel=1e-14)
    assert np.isnan(values[1])
