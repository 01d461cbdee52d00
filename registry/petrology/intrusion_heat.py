"""How much of its heat an intrusion of a given age keeps, as an interval, and bounds on the part of latent heat."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import SECONDS_PER_YEAR
from registry.petrology.cooling import centre_theta, diffusion_length_m
from registry.petrology.melt_composition import Array, not_negative, positive

SECONDS_PER_MA = 1e6 * SECONDS_PER_YEAR
#: Taken for the standard deviation of an age that has none, as a share of the age (common practice, warned).
ASSUMED_AGE_SIGMA = 0.10


def age_interval_ma(age_ma: ArrayLike, age_sigma_ma: ArrayLike) -> tuple[Array, Array]:
    """Age - 2 sigma (not below zero, since the body is there) and age + 2 sigma, Ma; sigma missing: 10 % of the age."""
    age, sigma = not_negative(age_ma), not_negative(age_sigma_ma)
    sigma = np.where(np.isnan(sigma), ASSUMED_AGE_SIGMA * age, sigma)
    return np.maximum(age - 2.0 * sigma, 0.0), age + 2.0 * sigma


def theta_centre_interval(
    intrusion_shape: ArrayLike,
    half_width_m: ArrayLike,
    depth_to_top_m: ArrayLike,
    age_ma: ArrayLike,
    age_sigma_ma: ArrayLike,
    thermal_diffusivity_m2_s: float = 1e-6,
) -> dict[str, Array]:
    """Share of the excess temperature left at the centre by conduction alone, over age +- 2 sigma.

    Arrays (n,); ``intrusion_shape`` holds ``sphere``, ``slab``, ``cylinder`` or None. Returns ``theta_centre``,
    ``theta_centre_low`` and ``theta_centre_high``. Where the depth to the top is unknown the low end takes a body
    that reaches the surface, the other two no surface at all. A vertical cylinder never feels the surface here: its
    values are upper bounds. Water that moves cools 2-10 times faster. Source [jaeger1964].
    """
    shape, half_width, depth, age, sigma = np.broadcast_arrays(
        np.atleast_1d(np.asarray(intrusion_shape, dtype=object)),
        positive(half_width_m),
        not_negative(depth_to_top_m),
        not_negative(age_ma),
        not_negative(age_sigma_ma),
    )
    youngest, oldest = age_interval_ma(age, sigma)
    depths = np.stack([depth, np.where(np.isnan(depth), 0.0, depth), depth])
    lengths = diffusion_length_m(np.stack([age, oldest, youngest]) * SECONDS_PER_MA, thermal_diffusivity_m2_s)
    theta, low, high = centre_theta(shape, half_width, depths, lengths)
    return {"theta_centre": theta, "theta_centre_low": low, "theta_centre_high": high}


def latent_heat_equivalent_c(
    magma_temperature_c: ArrayLike, latent_heat_j_kg: ArrayLike = 4e5, heat_capacity_j_kg_k: ArrayLike = 1100.0
) -> Array:
    """Magma temperature (C) raised by L/c: all latent heat given off at once, an upper BOUND on what cools.

    The interior never exceeds the magma's own temperature. Source [jaeger1964]. Example: 1200 C, 4e5, 1100 -> 1563.6.
    """
    return np.asarray(magma_temperature_c, dtype=np.float64) + np.asarray(latent_heat_j_kg) / positive(
        heat_capacity_j_kg_k
    )


def latent_heat_effective_capacity_j_kg_k(
    liquidus_c: ArrayLike,
    solidus_c: ArrayLike,
    latent_heat_j_kg: ArrayLike = 4e5,
    heat_capacity_j_kg_k: ArrayLike = 1100.0,
) -> Array:
    """Heat capacity (J/kg/K) that holds while the melt crystallises: c + L/(T liquidus - T solidus). [jaeger1964]"""
    interval = positive(np.asarray(liquidus_c, dtype=np.float64) - np.asarray(solidus_c))
    return np.asarray(heat_capacity_j_kg_k) + np.asarray(latent_heat_j_kg) / interval


def temperature_from_theta_bounds(
    theta: ArrayLike,
    magma_temperature_c: ArrayLike,
    country_temperature_c: ArrayLike,
    latent_heat_j_kg: ArrayLike = 4e5,
    heat_capacity_j_kg_k: ArrayLike = 1100.0,
) -> tuple[Array, Array]:
    """Temperature (C) of a body from theta: without latent heat, and with all of it (never above the magma's)."""
    share, magma, country = (
        np.asarray(v, dtype=np.float64) for v in (theta, magma_temperature_c, country_temperature_c)
    )
    raised = latent_heat_equivalent_c(magma, latent_heat_j_kg, heat_capacity_j_kg_k)
    return country + share * (magma - country), np.minimum(country + share * (raised - country), magma)
