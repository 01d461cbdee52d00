"""Ascent: scaling of both velocities, the outcome at its limits, and its causes. The limits are common practice."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.ascent import (
    ASCENT_OUTCOMES,
    STALLED_OUTCOMES,
    ascent_cause,
    ascent_outcome,
    crossing_over_freezing,
    diapir_velocity_m_per_yr,
    dyke_freezing_time_s,
    dyke_reynolds_number,
    dyke_velocity_m_per_s,
    stokes_velocity_m_per_s,
)


def test_diapir_of_a_kilometre_freezes_before_it_rises_ten() -> None:
    """4.8 Myr to rise 10 km against a2/kappa of 31.7 kyr (recomputed)."""
    years = 1e4 / float(diapir_velocity_m_per_yr(1000.0, 300.0, 1e19))

    assert years == pytest.approx(4.85e6, abs=5e3)
    assert years > 100.0 * 31.7e3


@given(st.floats(1.0, 1e4), st.floats(-500.0, 500.0), st.floats(1e15, 1e21))
def test_stokes_doubling_the_radius_quadruples_the_velocity(r: float, contrast: float, viscosity: float) -> None:
    assert stokes_velocity_m_per_s(2.0 * r, contrast, viscosity) == pytest.approx(
        4.0 * float(stokes_velocity_m_per_s(r, contrast, viscosity)), rel=1e-12
    )


def test_stokes_impossible_radius_or_viscosity_is_missing() -> None:
    assert np.isnan(stokes_velocity_m_per_s([-1.0, 1.0], 300.0, [1e19, 0.0])).all()


def test_dyke_worked_example_takes_six_days_against_twelve() -> None:
    """log eta 5.156, contrast 425, 2 m: 5 km in 5.96 d against 11.57 d (recomputed)."""
    velocity = dyke_velocity_m_per_s(2.0, 425.0, 10.0**5.156)

    assert 5000.0 / velocity / 86400.0 == pytest.approx(5.96, abs=0.005)
    assert dyke_freezing_time_s(2.0, 1e-6) / 86400.0 == pytest.approx(11.57, abs=0.005)
    assert ascent_outcome(425.0, velocity, 5000.0, 2.0, 1e-6)[0] == "marginal"


def test_dyke_reynolds_number_of_the_worked_example_is_laminar() -> None:
    assert dyke_reynolds_number(9.70e-3, 2.0, 2275.0, 10.0**5.156) < 1.0
    assert dyke_reynolds_number(-5.0, 2.0, 2600.0, 10.0) == pytest.approx(2600.0)


@pytest.mark.parametrize(
    ("ratio", "outcome"),
    [
        (0.0, "likely reaches the surface"),
        (0.0999, "likely reaches the surface"),
        (0.1001, "marginal"),
        (0.9999, "marginal"),
        (1.0001, "likely stalls"),
    ],
)
def test_outcome_on_either_side_of_its_limits(ratio: float, outcome: str) -> None:
    velocity = 0.01
    distance = ratio * velocity * 1e6

    assert ascent_outcome(100.0, velocity, distance, 2.0, 1e-6)[0] == outcome


def test_outcome_dense_melt_is_stalled_at_any_depth() -> None:
    outcome = ascent_outcome([0.0, -10.0, -10.0], [0.0, -1.0, -1.0], [np.nan, np.nan, 0.0], 2.0, 1e-6)

    assert set(outcome) == {"stalled by density"}
    assert set(outcome) < STALLED_OUTCOMES < set(ASCENT_OUTCOMES)


def test_outcome_missing_values_name_their_cause() -> None:
    outcome = np.array([None, None, None, "marginal"], dtype=object)
    cause = ascent_cause(
        outcome, [np.nan, 900.0, 900.0, 900.0], [np.nan, 300.0, np.nan, 300.0], [5e3, np.nan, 5e3, 5e3]
    )

    assert list(cause) == ["liquidus_unknown", "emplacement_depth_unknown", "melt_properties_unknown", None]


def test_outcome_negative_depth_is_unknown() -> None:
    assert np.isnan(crossing_over_freezing(-100.0, 1.0, 2.0, 1e-6))
    assert ascent_outcome(100.0, 1.0, -100.0, 2.0, 1e-6)[0] is None
