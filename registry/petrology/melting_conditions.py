"""What it would take to melt rock at a place: heating, decompression or water, in the crust and in the mantle.

Depths in m, temperatures in C, pressures in GPa. Peridotite curves are used below the Moho only; the crust has its
water-saturated granite solidus only (a dry one is not computed). A screen of one dimension in steady state.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import GRAVITY_M_PER_S2
from registry.petrology.geotherm import geotherm_cause, geotherm_exponential_c, mantle_heat_flow_mw_m2
from registry.petrology.melt_composition import Array, not_negative, positive
from registry.petrology.melting import (
    KATZ_D_H2O,
    KATZ_GAMMA,
    KATZ_K,
    katz_saturation_h2o_wt,
    peridotite_solidus_hirschmann_2000,
    wet_granite_solidus,
)

#: Mean densities for pressure, kg/m3 (common practice, no source).
CRUST_DENSITY_KG_M3, MANTLE_DENSITY_KG_M3 = 2800.0, 3300.0
#: Where the Moho is not known, m (common practice, no source; continental mean).
MOHO_DEPTH_M = 40_000.0
#: Depths searched for the crossing of geotherm and solidus: the granite curve begins at 0.2 GPa.
_SEARCH_STEP_M = 100.0
NOT_BY_DECOMPRESSION = "not by decompression"
BY_DECOMPRESSION = "by decompression"
ALREADY_MELTS = "melts as it is"
DECOMPRESSION_WORDS = (ALREADY_MELTS, BY_DECOMPRESSION, NOT_BY_DECOMPRESSION)


def lithostatic_pressure_gpa(depth_m: ArrayLike, moho_depth_m: ArrayLike = MOHO_DEPTH_M) -> Array:
    """Pressure (GPa) at a depth (m) under crust of 2800 and mantle of 3300 kg/m3."""
    z, moho = not_negative(depth_m), not_negative(moho_depth_m)
    crust = np.minimum(z, moho)
    return GRAVITY_M_PER_S2 * (CRUST_DENSITY_KG_M3 * crust + MANTLE_DENSITY_KG_M3 * (z - crust)) * 1e-9


def wet_granite_solidus_depth_m(
    heat_flow_mw_m2: ArrayLike,
    surface_temperature_c: ArrayLike,
    conductivity_w_m_k: ArrayLike,
    heat_production_uw_m3: ArrayLike,
    heat_production_depth_m: ArrayLike,
    moho_depth_m: float = MOHO_DEPTH_M,
) -> Array:
    """Depth (m) at which the geotherm meets the water-saturated granite solidus, shape (n,).

    The shallowest crossing above the Moho, interpolated on a grid of 100 m; NaN where the crust stays colder, where
    there is no geotherm, or where it is hotter already at 0.2 GPa (7.3 km), above which the solidus is not given.
    Source [lachenbruch1970], [stern1973].
    """
    columns = _columns(
        heat_flow_mw_m2, surface_temperature_c, conductivity_w_m_k, heat_production_uw_m3, heat_production_depth_m
    )
    depth = np.arange(0.0, moho_depth_m + _SEARCH_STEP_M, _SEARCH_STEP_M)
    solidus = wet_granite_solidus(lithostatic_pressure_gpa(depth, moho_depth_m))
    depth, solidus = depth[~np.isnan(solidus)], solidus[~np.isnan(solidus)]
    excess = geotherm_exponential_c(depth, *(column[:, None] for column in columns)) - solidus
    above = excess >= 0.0
    first = np.argmax(above, axis=1)
    rows = np.arange(excess.shape[0])
    before, after = excess[rows, np.maximum(first - 1, 0)], excess[rows, first]
    share = -before / positive(after - before)
    crossing = depth[np.maximum(first - 1, 0)] + share * (depth[first] - depth[np.maximum(first - 1, 0)])
    return np.where(above.any(axis=1) & (first > 0), crossing, np.nan)


def melting_conditions(
    depth_m: ArrayLike, temperature_c: ArrayLike, moho_depth_m: ArrayLike = MOHO_DEPTH_M
) -> dict[str, Any]:
    """What melting at a depth and temperature would take, shape (n,).

    Returns ``pressure_gpa``; ``solidus_c`` (water-saturated granite in the crust, dry peridotite below the Moho);
    ``heating_needed_c`` (zero where it melts as it is); ``decompression`` (words of ``DECOMPRESSION_WORDS``) with
    ``decompression_needed_gpa`` (mantle only: rise at constant temperature to the dry solidus; crust with water does
    not melt by decompression, its solidus rises as pressure falls); ``water_needed_wt`` (mantle only: bulk water that
    brings the solidus down to the temperature, NaN where even saturation does not). NaN where the solidus is not
    given. Source [stern1973], [hirschmann2000], [katz2003].
    """
    depth, temperature, moho = np.broadcast_arrays(
        np.atleast_1d(not_negative(depth_m)), np.asarray(temperature_c, dtype=np.float64), not_negative(moho_depth_m)
    )
    pressure = lithostatic_pressure_gpa(depth, moho)
    in_mantle = depth > moho
    solidus = np.where(in_mantle, peridotite_solidus_hirschmann_2000(pressure), wet_granite_solidus(pressure))
    shortfall = solidus - temperature
    heating = np.where(np.isnan(shortfall), np.nan, np.maximum(shortfall, 0.0))
    melts = shortfall <= 0.0
    rise = pressure - _pressure_of_peridotite_solidus(temperature)
    moho_pressure = lithostatic_pressure_gpa(moho, moho)
    can_rise = in_mantle & ~melts & (pressure - rise >= moho_pressure)
    in_melt = (positive(shortfall) / KATZ_K) ** (1.0 / KATZ_GAMMA)
    bulk = np.where(in_melt <= katz_saturation_h2o_wt(pressure), KATZ_D_H2O * in_melt, np.nan)
    words = np.array([*DECOMPRESSION_WORDS, None], dtype=object)
    return {
        "pressure_gpa": pressure,
        "solidus_c": solidus,
        "heating_needed_c": heating,
        "decompression": words[np.where(np.isnan(shortfall), 3, np.where(melts, 0, np.where(can_rise, 1, 2)))],
        "decompression_needed_gpa": np.where(can_rise, rise, np.nan),
        "water_needed_wt": np.where(in_mantle, np.where(melts, 0.0, bulk), np.nan),
    }


def _pressure_of_peridotite_solidus(temperature_c: Array) -> Array:
    """Pressure (GPa) at which dry peridotite begins to melt at a temperature; NaN below its solidus at the surface."""
    a, b = 5.104, 132.899
    root = b * b - 4.0 * a * (temperature_c - 1120.661)
    pressure = (b - np.sqrt(not_negative(root))) / (2.0 * a)
    return not_negative(pressure)


def area_geotherm(
    heat_flow_mw_m2: ArrayLike,
    surface_temperature_c: ArrayLike,
    conductivity_w_m_k: ArrayLike,
    heat_production_uw_m3: ArrayLike,
    heat_production_depth_m: ArrayLike,
    moho_depth_m: float = MOHO_DEPTH_M,
) -> dict[str, Any]:
    """What an area's geotherm says, shape (n,), by the columns of ``area_sheet``.

    ``mantle_heat_flow_mw_m2`` (may be negative), ``wet_granite_solidus_depth_km`` and ``geotherm_cause``: a word of
    ``GEOTHERM_CAUSES``, ``surface_temperature_missing``, ``crust_colder_than_solidus`` where the two curves do not
    meet between 0.2 GPa and the Moho, or None where the depth is given.
    """
    flow, surface, k, heat, scale = _columns(
        heat_flow_mw_m2, surface_temperature_c, conductivity_w_m_k, heat_production_uw_m3, heat_production_depth_m
    )
    depth_km = wet_granite_solidus_depth_m(flow, surface, k, heat, scale, moho_depth_m) / 1000.0
    cause = geotherm_cause(flow, k, heat, scale)
    unexplained = np.isnan(depth_km) & ~cause.astype(bool)
    words = np.array(["surface_temperature_missing", "crust_colder_than_solidus"], dtype=object)
    return {
        "mantle_heat_flow_mw_m2": mantle_heat_flow_mw_m2(flow, heat, scale),
        "wet_granite_solidus_depth_km": depth_km,
        "geotherm_cause": np.where(unexplained, words[np.where(np.isnan(surface), 0, 1)], cause),
    }


def _columns(*values: ArrayLike) -> tuple[Array, ...]:
    return np.broadcast_arrays(*(np.atleast_1d(np.asarray(value, dtype=np.float64)) for value in values))
