"""Heat production, the density it takes, thickness, and what an intrusion of an age keeps."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.constants import ATOMIC_WEIGHT, molar_mass
from registry.petrology.conventions import Conventions
from registry.petrology.heat import (
    effective_half_width_m,
    heat_production_cause,
    heat_production_rybach,
    heat_production_wangen,
    heat_x_thickness_mw_m2,
    potassium_wt,
    rock_density_kg_m3,
    sphere_radius_m,
)
from registry.petrology.intrusion_heat import (
    age_interval_ma,
    latent_heat_effective_capacity_j_kg_k,
    temperature_from_theta_bounds,
    theta_centre_interval,
)


def test_heat_production_two_authors_agree_within_three_percent_on_granites() -> None:
    """Constants of Rybach 1988 (from memory) against those printed by Wangen 2010."""
    u, th, k = np.array([4.0, 3.4, 12.0]), np.array([15.0, 50.0, 35.0]), np.array([3.5, 4.45, 4.5])

    np.testing.assert_allclose(
        heat_production_rybach(u, th, k, 2650.0), heat_production_wangen(u, th, k, 2650.0), rtol=0.03
    )


@given(st.floats(0.0, 50.0), st.floats(0.0, 100.0), st.floats(0.0, 10.0), st.floats(1.0, 3.0))
def test_heat_production_is_proportional(u: float, th: float, k: float, factor: float) -> None:
    once, scaled = heat_production_rybach(u, th, k, 2650.0), heat_production_rybach(u, th, k, 2650.0 * factor)

    assert scaled == pytest.approx(float(once) * factor, rel=1e-12, abs=1e-12)


def test_potassium_from_its_oxide_by_atomic_weights() -> None:
    assert potassium_wt(1.0) == pytest.approx(2.0 * ATOMIC_WEIGHT["K"] / molar_mass("K2O"))


def test_heat_production_impossible_inputs_are_missing() -> None:
    values = heat_production_rybach([-1.0, 4.0, 4.0], 15.0, [3.5, np.nan, 3.5], [2650.0, 2650.0, 0.0])

    assert np.isnan(values).all()


def test_rock_density_measured_comes_first() -> None:
    density = rock_density_kg_m3([2610.0, np.nan, -1.0, np.nan], [70.0, 70.0, 50.0, np.nan], Conventions())

    np.testing.assert_array_equal(density, [2610.0, 2650.0, 2900.0, np.nan])


def test_heat_production_cause_names_the_first_missing_input() -> None:
    cause = heat_production_cause([np.nan, 4.0, 4.0, 4.0, 4.0], [15.0, np.nan, 15.0, 15.0, 15.0], [1, 1, np.nan, 1, 1],
                                  [2650.0, 2650.0, 2650.0, np.nan, 2650.0])  # fmt: skip

    assert list(cause) == ["u_missing", "th_missing", "k2o_missing", "density_unknown", None]


@given(st.floats(1e-3, 1e5))
def test_sphere_radius_gives_back_its_volume(volume: float) -> None:
    radius_km = float(sphere_radius_m(volume)) / 1000.0

    assert 4.0 / 3.0 * np.pi * radius_km**3 == pytest.approx(volume, rel=1e-12)


def test_half_width_from_a_volume_only_for_a_sphere() -> None:
    shapes = np.array(["sphere", "slab", "cylinder", None, "sphere"], dtype=object)
    radius = effective_half_width_m(shapes, [np.nan, np.nan, np.nan, np.nan, 500.0], 4.18879)

    np.testing.assert_allclose(radius, [1000.0, np.nan, np.nan, np.nan, 500.0], rtol=1e-6)


def test_heat_times_thickness_by_shape() -> None:
    shapes = np.array(["slab", "sphere", "cylinder", None], dtype=object)

    np.testing.assert_allclose(heat_x_thickness_mw_m2(5.0, shapes, 3000.0), [30.0, 20.0, np.nan, np.nan])


def test_mean_chord_of_a_sphere_by_integration() -> None:
    """Vertical chords over the sphere's disc average 4a/3 (derivable; numerical integration here)."""
    r = (np.arange(200_000) + 0.5) / 200_000

    assert np.sum(2.0 * np.sqrt(1.0 - r * r) * r) / np.sum(r) == pytest.approx(4.0 / 3.0, abs=1e-5)


def test_age_interval_without_sigma_takes_ten_percent() -> None:
    low, high = age_interval_ma([1.0, 1.0, 0.1, -1.0], [0.1, np.nan, 0.2, 0.1])

    np.testing.assert_allclose(low, [0.8, 0.8, 0.0, np.nan])
    np.testing.assert_allclose(high, [1.2, 1.2, 0.5, np.nan])


@given(st.floats(100.0, 5000.0), st.floats(0.0, 8000.0), st.floats(0.001, 5.0), st.floats(0.0, 0.5))
def test_theta_interval_holds_its_middle(half_width: float, depth: float, age: float, share: float) -> None:
    shapes = np.array(["slab", "sphere", "cylinder"], dtype=object)
    theta = theta_centre_interval(shapes, half_width, depth, age, share * age)

    assert (theta["theta_centre_low"] <= theta["theta_centre"] + 1e-12).all()
    assert (theta["theta_centre"] <= theta["theta_centre_high"] + 1e-12).all()


def test_theta_old_slab_below_the_surface_has_lost_its_heat() -> None:
    """A slab 5 km thick after 285 Myr: 1.5 % in infinite rock, nothing below a cold surface (recomputed)."""
    slab = np.array(["slab", "slab"], dtype=object)
    theta = theta_centre_interval(slab, 2500.0, [2000.0, np.nan], 285.0, 1.0)

    assert theta["theta_centre"][0] < 1e-4
    assert theta["theta_centre"][1] == pytest.approx(0.015, abs=5e-4)
    assert theta["theta_centre_low"][1] < 1e-4, "unknown depth: the low end reaches the surface"


def test_theta_missing_age_stays_in_its_row() -> None:
    theta = theta_centre_interval(np.array(["slab", "slab"], dtype=object), 2500.0, 2000.0, [0.3, np.nan], 0.01)

    assert not np.isnan(theta["theta_centre"][0]) and np.isnan(theta["theta_centre"][1])


def test_latent_heat_bounds_hold_and_never_exceed_the_magma() -> None:
    without, with_latent = temperature_from_theta_bounds([0.0, 0.5, 0.9, 1.0], 1200.0, 200.0)

    np.testing.assert_allclose(without, [200.0, 700.0, 1100.0, 1200.0])
    assert (with_latent >= without).all() and (with_latent <= 1200.0).all()


def test_latent_heat_capacity_inverted_interval_is_missing() -> None:
    assert np.isnan(latent_heat_effective_capacity_j_kg_k(900.0, 1000.0))
