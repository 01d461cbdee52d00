"""Whether a melt would have reached the surface: diapir in wall rock, and flow in a dyke against freezing.

Order-of-magnitude screens. Velocities are positive upwards: a melt denser than its wall rock gives negative ones.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.constants import GRAVITY_M_PER_S2, SECONDS_PER_YEAR
from registry.petrology.melt_composition import Array, not_negative, positive
from registry.petrology.quotients import is_absent

REACHES_SURFACE = "likely reaches the surface"
MARGINAL = "marginal"
STALLS = "likely stalls"
STALLED_BY_DENSITY = "stalled by density"
ASCENT_OUTCOMES = (REACHES_SURFACE, MARGINAL, STALLS, STALLED_BY_DENSITY)
#: The outcomes of a melt that did not arrive.
STALLED_OUTCOMES = frozenset({STALLS, STALLED_BY_DENSITY})
#: Crossing time over freezing time below which a melt likely arrives, and above which it likely stalls.
CROSSING_RATIO_LOW, CROSSING_RATIO_HIGH = 0.1, 1.0
#: Reynolds number up to which dyke flow is taken as laminar.
HIGHEST_LAMINAR_REYNOLDS = 1000.0

ASCENT_CAUSES = ("liquidus_unknown", "emplacement_depth_unknown", "melt_properties_unknown")


def stokes_velocity_m_per_s(radius_m: ArrayLike, density_contrast_kg_m3: ArrayLike, viscosity_pa_s: ArrayLike) -> Array:
    """Velocity (m/s) of a sphere in a viscous medium, 2 drho g r2/(9 eta); slow flow (Reynolds number below 1).

    ``viscosity_pa_s`` is that of the surrounding medium: wall rock for a diapir, melt for a crystal or bubble.
    Source [stokes1851]. Example: r 1 mm, drho 600, eta 100 -> 1.308e-5.
    """
    r = not_negative(radius_m)
    return (2.0 / 9.0) * np.asarray(density_contrast_kg_m3) * GRAVITY_M_PER_S2 * r * r / positive(viscosity_pa_s)


def diapir_velocity_m_per_yr(
    radius_m: ArrayLike, density_contrast_kg_m3: ArrayLike, wall_rock_viscosity_pa_s: ArrayLike
) -> Array:
    """Velocity (m/yr) of an intrusion that rises as a sphere through wall rock of the given viscosity.

    The wall rock's viscosity (1e17 to 1e21 Pa s), never the melt's. Source [stokes1851]. Example: r 1000 m,
    drho 300, 1e19 Pa s -> 2.06e-3.
    """
    velocity = stokes_velocity_m_per_s(radius_m, density_contrast_kg_m3, wall_rock_viscosity_pa_s)
    return velocity * SECONDS_PER_YEAR


def dyke_velocity_m_per_s(
    dyke_width_m: ArrayLike, density_contrast_kg_m3: ArrayLike, melt_viscosity_pa_s: ArrayLike
) -> Array:
    """Mean velocity (m/s) of buoyant laminar flow between two walls, w2 drho g/(12 eta), w the full width.

    Source [turcotte2002] (flow between parallel plates). Example: 2 m, drho 425, log10 eta 5.156 -> 9.70e-3.
    """
    w = not_negative(dyke_width_m)
    return w * w * np.asarray(density_contrast_kg_m3) * GRAVITY_M_PER_S2 / (12.0 * positive(melt_viscosity_pa_s))


def dyke_reynolds_number(
    velocity_m_per_s: ArrayLike, dyke_width_m: ArrayLike, melt_density_kg_m3: ArrayLike, melt_viscosity_pa_s: ArrayLike
) -> Array:
    """Reynolds number rho v w/eta of dyke flow, pure number; laminar flow is taken up to 1000 (common practice)."""
    speed = np.abs(np.asarray(velocity_m_per_s, dtype=np.float64))
    return np.asarray(melt_density_kg_m3) * speed * np.asarray(dyke_width_m) / positive(melt_viscosity_pa_s)


def dyke_freezing_time_s(dyke_width_m: ArrayLike, thermal_diffusivity_m2_s: ArrayLike) -> Array:
    """Time (s) in which a standing dyke freezes, (w/2)2/kappa; 2 m at 1e-6 m2/s -> 1e6 s (11.6 days)."""
    half = 0.5 * not_negative(dyke_width_m)
    return half * half / positive(thermal_diffusivity_m2_s)


def crossing_over_freezing(
    distance_m: ArrayLike, velocity_m_per_s: ArrayLike, dyke_width_m: ArrayLike, thermal_diffusivity_m2_s: ArrayLike
) -> Array:
    """Time to cross a distance over the time to freeze, pure number; NaN where the melt does not rise."""
    crossing = not_negative(distance_m) / positive(velocity_m_per_s)
    return crossing / positive(dyke_freezing_time_s(dyke_width_m, thermal_diffusivity_m2_s))


def ascent_outcome(
    density_contrast_kg_m3: ArrayLike,
    dyke_velocity: ArrayLike,
    emplacement_depth_m: ArrayLike,
    dyke_width_m: float,
    thermal_diffusivity_m2_s: float,
) -> NDArray[np.object_]:
    """Outcome of dyke ascent from the emplacement depth: one of ``ASCENT_OUTCOMES`` or None, object array (n,).

    Crossing over freezing time below 0.1 likely reaches the surface, to 1 marginal, above likely stalls; a melt no
    lighter than the wall rock is stalled by density at any depth; None where depth or melt is unknown. Common
    practice, no source; an order-of-magnitude screen. Example: log10 eta 5.156, drho 425, 2 m, 5 km -> marginal.
    """
    contrast = np.atleast_1d(np.asarray(density_contrast_kg_m3, dtype=np.float64))
    ratio = crossing_over_freezing(emplacement_depth_m, dyke_velocity, dyke_width_m, thermal_diffusivity_m2_s)
    words = np.array([*ASCENT_OUTCOMES, None], dtype=object)
    by_time = np.where(ratio < CROSSING_RATIO_LOW, 0, np.where(ratio <= CROSSING_RATIO_HIGH, 1, 2))
    known = np.where(np.isnan(ratio), 4, by_time)
    return words[np.where(contrast <= 0.0, 3, known)]


def ascent_cause(
    outcome: ArrayLike, liquidus_c: ArrayLike, density_contrast_kg_m3: ArrayLike, emplacement_depth_m: ArrayLike
) -> NDArray[np.object_]:
    """Why there is no ascent outcome, object array (n,): one of ``ASCENT_CAUSES``; None where there is one."""
    words = np.array([*ASCENT_CAUSES, None], dtype=object)
    missing = is_absent(np.atleast_1d(outcome))
    no_liquidus = np.isnan(np.asarray(liquidus_c, dtype=np.float64))
    no_depth = np.isnan(not_negative(emplacement_depth_m))
    no_density = np.isnan(np.asarray(density_contrast_kg_m3, dtype=np.float64))
    cause = np.where(no_liquidus, 0, np.where(no_depth & ~no_density, 1, 2))
    return words[np.where(missing, cause, 3)]
