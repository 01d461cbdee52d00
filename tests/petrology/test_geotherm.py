"""The geotherm against integration of its differential equation, and where it refuses."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.geotherm import (
    GEOTHERM_CAUSES,
    geotherm_cause,
    geotherm_exponential_c,
    geotherm_is_sound,
    geotherm_uniform_layer_c,
    mantle_heat_flow_mw_m2,
)


def _integrate(depth_m: float, q0: float, surface: float, k: float, heat_at) -> float:
    """T at a depth from k T'' = -A by the trapezium rule on 20,000 steps."""
    z = np.linspace(0.0, depth_m, 20_001)
    heat = heat_at(z) * 1e-6
    step = z[1] - z[0]
    taken = np.concatenate([[0.0], np.cumsum(0.5 * (heat[1:] + heat[:-1]) * step)])
    gradient = (q0 * 1e-3 - taken) / k
    return float(surface + np.sum(0.5 * (gradient[1:] + gradient[:-1]) * step))


@pytest.mark.parametrize("depth_m", [500.0, 8000.0, 35_000.0])
def test_exponential_geotherm_agrees_with_integration(depth_m: float) -> None:
    expected = _integrate(depth_m, 65.0, 10.0, 2.5, lambda z: 2.5 * np.exp(-z / 1e4))

    assert geotherm_exponential_c(depth_m, 65.0, 10.0, 2.5, 2.5, 1e4) == pytest.approx(expected, abs=1e-4)


@pytest.mark.parametrize("depth_m", [500.0, 8000.0, 35_000.0])
def test_uniform_layer_geotherm_agrees_with_integration(depth_m: float) -> None:
    expected = _integrate(depth_m, 90.0, 10.0, 3.0, lambda z: np.where(z <= 6000.0, 7.0, 0.0))

    assert geotherm_uniform_layer_c(depth_m, 90.0, 10.0, 3.0, 7.0, 6000.0) == pytest.approx(expected, abs=0.05)


@given(st.floats(20.0, 150.0), st.floats(0.0, 10.0), st.floats(1000.0, 20_000.0))
def test_geotherm_is_given_only_where_the_mantle_keeps_fifteen(q0: float, heat: float, scale: float) -> None:
    temperature = geotherm_exponential_c(10_000.0, q0, 10.0, 2.5, heat, scale)

    assert np.isnan(temperature) != bool(geotherm_is_sound(q0, heat, scale))


def test_uniform_layer_of_a_hot_batholith_leaves_the_mantle_too_little() -> None:
    assert np.isnan(geotherm_uniform_layer_c(5000.0, 60.0, 10.0, 3.0, 8.0, 6000.0))


def test_mantle_heat_flow_may_be_negative_and_is_shown() -> None:
    assert mantle_heat_flow_mw_m2(65.0, 8.0, 10_000.0) == pytest.approx(-15.0)


def test_geotherm_cause_names_what_is_missing() -> None:
    nan = np.nan
    causes = geotherm_cause([nan, 65, 65, 65, 65], [2.5, nan, 2.5, 2.5, 2.5], [2.5, 2.5, nan, 8.0, 2.5], 1e4)

    assert list(causes) == [*GEOTHERM_CAUSES, None]


@pytest.mark.parametrize("depth_m", [-1.0, np.nan])
def test_geotherm_impossible_depth_is_missing(depth_m: float) -> None:
    assert np.isnan(geotherm_exponential_c(depth_m, 65.0, 10.0, 2.5, 2.5, 1e4))
