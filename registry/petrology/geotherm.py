"""Steady temperature in the crust from surface heat flow and heat production, and where that stops making sense."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.melt_composition import Array, not_negative, positive

#: The least heat flow (mW/m2) that the mantle must be left with (common practice, no source).
LEAST_MANTLE_HEAT_FLOW_MW_M2 = 15.0
GEOTHERM_CAUSES = ("heat_flow_missing", "conductivity_missing", "heat_production_missing", "mantle_heat_flow_too_low")


def mantle_heat_flow_mw_m2(
    heat_flow_mw_m2: ArrayLike, heat_production_uw_m3: ArrayLike, heat_production_depth_m: ArrayLike
) -> Array:
    """Heat flow (mW/m2) that enters the crust from below, q0 - A0 D; may come out negative.

    Surface heat flow in mW/m2, heat production at the surface in uW/m3 and its decay depth in m.
    Source [lachenbruch1970]. Example: 65, 2.5, 10000 -> 40.
    """
    crustal = not_negative(heat_production_uw_m3) * not_negative(heat_production_depth_m) * 1e-3
    return np.asarray(heat_flow_mw_m2, dtype=np.float64) - crustal


def geotherm_is_sound(
    heat_flow_mw_m2: ArrayLike, heat_production_uw_m3: ArrayLike, heat_production_depth_m: ArrayLike
) -> NDArray[np.bool_]:
    """Whether A0 D leaves the mantle at least 15 mW/m2; a hot granite's A0 over 10 km often does not."""
    mantle = mantle_heat_flow_mw_m2(heat_flow_mw_m2, heat_production_uw_m3, heat_production_depth_m)
    return mantle >= LEAST_MANTLE_HEAT_FLOW_MW_M2


def geotherm_exponential_c(
    depth_m: ArrayLike,
    heat_flow_mw_m2: ArrayLike,
    surface_temperature_c: ArrayLike,
    conductivity_w_m_k: ArrayLike,
    heat_production_uw_m3: ArrayLike,
    heat_production_depth_m: ArrayLike,
) -> Array:
    """Temperature (C) at a depth (m) with heat production falling as A0 exp(-z/D), shapes broadcast.

    T0 + qm z/k + (A0 D2/k)(1 - exp(-z/D)), qm = q0 - A0 D. NaN where qm is below 15 mW/m2 (the A0 is that of a body,
    not of the crust). Source [lachenbruch1970], [turcotte2002]. Example: q0 65, T0 10, k 2.5, A0 2.5, D 10 km:
    5 km -> 129.3.
    """
    z, k = not_negative(depth_m), positive(conductivity_w_m_k)
    scale = positive(heat_production_depth_m)
    mantle = mantle_heat_flow_mw_m2(heat_flow_mw_m2, heat_production_uw_m3, heat_production_depth_m)
    mantle = np.where(mantle >= LEAST_MANTLE_HEAT_FLOW_MW_M2, mantle, np.nan)
    crust = not_negative(heat_production_uw_m3) * 1e-6 * scale * scale * -np.expm1(-z / scale)
    return np.asarray(surface_temperature_c, dtype=np.float64) + (mantle * 1e-3 * z + crust) / k


def geotherm_uniform_layer_c(
    depth_m: ArrayLike,
    heat_flow_mw_m2: ArrayLike,
    surface_temperature_c: ArrayLike,
    conductivity_w_m_k: ArrayLike,
    heat_production_uw_m3: ArrayLike,
    layer_thickness_m: ArrayLike,
) -> Array:
    """Temperature (C) at a depth (m) with heat production A uniform down to the layer's base, none below.

    Within the layer T0 + q0 z/k - A z2/2k; for a body of known thickness. NaN where A x thickness leaves less than
    15 mW/m2. Source [turcotte2002].
    """
    z, k, thickness = not_negative(depth_m), positive(conductivity_w_m_k), not_negative(layer_thickness_m)
    heat, q0 = not_negative(heat_production_uw_m3) * 1e-6, np.asarray(heat_flow_mw_m2, dtype=np.float64) * 1e-3
    below = q0 - heat * thickness
    below = np.where(below >= LEAST_MANTLE_HEAT_FLOW_MW_M2 * 1e-3 * (1.0 - 1e-12), below, np.nan)
    inside = np.minimum(z, thickness)
    rise = (below + heat * thickness) * inside - 0.5 * heat * inside * inside + below * (z - inside)
    return np.asarray(surface_temperature_c, dtype=np.float64) + rise / k


def geotherm_cause(
    heat_flow_mw_m2: ArrayLike,
    conductivity_w_m_k: ArrayLike,
    heat_production_uw_m3: ArrayLike,
    heat_production_depth_m: ArrayLike,
) -> NDArray[np.object_]:
    """Why an area has no geotherm, object array: one of ``GEOTHERM_CAUSES`` or None."""
    flow, k = np.asarray(heat_flow_mw_m2, dtype=np.float64), positive(conductivity_w_m_k)
    mantle = mantle_heat_flow_mw_m2(flow, heat_production_uw_m3, heat_production_depth_m)
    unknown_heat = np.isnan(not_negative(heat_production_uw_m3) * positive(heat_production_depth_m))
    cold = mantle < LEAST_MANTLE_HEAT_FLOW_MW_M2
    words = np.array([*GEOTHERM_CAUSES, None], dtype=object)
    cause = np.where(
        np.isnan(flow), 0, np.where(np.isnan(k), 1, np.where(unknown_heat, 2, np.where(cold, 3, len(GEOTHERM_CAUSES))))
    )
    return words[np.atleast_1d(cause)]
