"""What it would take to melt the crust and the mantle under an area: heating, decompression or water.

A screen of one dimension: steady conduction, one conductivity, the water-saturated granite solidus for the crust (a
dry one is not computed) and the dry peridotite solidus below the Moho only.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.geotherm import geotherm_exponential_c
from registry.petrology.melt_composition import Array, positive
from registry.petrology.melting import WET_GRANITE, wet_granite_solidus
from registry.petrology.melting_conditions import (
    ALREADY_MELTS,
    BY_DECOMPRESSION,
    MOHO_DEPTH_M,
    NOT_BY_DECOMPRESSION,
    area_geotherm,
    lithostatic_pressure_gpa,
    melting_conditions,
)

#: The conductive geotherm is followed into the mantle down to here (common practice, no source).
DEEPEST_M = 100_000.0
_STEP_M = 100.0
#: Why the mantle columns are empty, besides the causes of the geotherm.
MANTLE_CAUSES = ("moho_depth_not_known", "colder_than_the_saturated_solidus_at_the_moho")
#: Why no melting depth is given though there is a geotherm.
CRUST_TOO_COLD, CRUST_TOO_THIN = "crust_colder_than_solidus", "crust_thinner_than_the_granite_solidus_begins"
NUMBERS = (
    "mantle_heat_flow_mw_m2", "wet_granite_solidus_depth_km", "crust_heating_needed_c", "crust_heating_depth_km",
    "moho_temperature_c", "mantle_heating_needed_c", "mantle_water_needed_wt", "dry_peridotite_solidus_depth_km",
    "mantle_decompression_needed_gpa", "mantle_decompression_depth_km",
)  # fmt: skip
TEXTS = ("geotherm_cause", "crust_decompression", "crust_water", "mantle_decompression", "mantle_cause")


def area_melting(
    heat_flow_mw_m2: ArrayLike,
    surface_temperature_c: ArrayLike,
    conductivity_w_m_k: ArrayLike,
    heat_production_uw_m3: ArrayLike,
    heat_production_depth_m: ArrayLike,
    moho_depth_m: ArrayLike,
) -> dict[str, Any]:
    """The columns ``NUMBERS`` (float64) and ``TEXTS`` (object, None for nothing) of areas, each shape (n,).

    Depths in m, NaN for missing. Without a Moho the crust is searched to 40 km and the mantle is not computed. Rock
    at the Moho cannot rise without entering the crust, so decompression is asked of the whole column down to 100 km.
    Sources [lachenbruch1970], [stern1973], [hirschmann2000], [katz2003].
    """
    columns = np.broadcast_arrays(
        *(
            np.atleast_1d(np.asarray(values, dtype=np.float64))
            for values in (
                heat_flow_mw_m2,
                surface_temperature_c,
                conductivity_w_m_k,
                heat_production_uw_m3,
                heat_production_depth_m,
                moho_depth_m,
            )
        )
    )
    n = len(columns[0])
    found: dict[str, Any] = {name: np.full(n, np.nan) for name in NUMBERS}
    found.update({name: np.full(n, None, dtype=object) for name in TEXTS})
    for row in range(n):
        for name, value in _one_area(*(float(column[row]) for column in columns)).items():
            found[name][row] = value
    return found


def _one_area(q0: float, surface: float, k: float, heat: float, scale: float, moho: float) -> dict[str, Any]:
    entered = bool(positive(moho) > 0.0)
    base = moho if entered else MOHO_DEPTH_M
    too_thin = lithostatic_pressure_gpa(base, base) < WET_GRANITE[0][0]
    geotherm = area_geotherm(q0, surface, k, heat, scale, MOHO_DEPTH_M if too_thin else base)
    found: dict[str, Any] = {name: values[0] for name, values in geotherm.items()}
    if too_thin and found["geotherm_cause"] in (None, CRUST_TOO_COLD):
        found.update(wet_granite_solidus_depth_km=np.nan, geotherm_cause=CRUST_TOO_THIN)
    depth = np.arange(0.0, base + _STEP_M, _STEP_M)
    depth = np.append(depth[depth < base], base)
    temperature = geotherm_exponential_c(depth, q0, surface, k, heat, scale)
    if np.isnan(temperature).all():
        return {**found, "mantle_cause": found["geotherm_cause"]}
    found.update(_crust(depth, temperature, base, float(found["wet_granite_solidus_depth_km"])))
    if not entered:
        return {**found, "mantle_cause": MANTLE_CAUSES[0]}
    below = np.nextafter(np.arange(base, max(DEEPEST_M, base) + _STEP_M, _STEP_M), np.inf)
    return {**found, **_mantle(below, geotherm_exponential_c(below, q0, surface, k, heat, scale), base)}


def _crust(depth: Array, temperature: Array, moho: float, crossing_km: float) -> dict[str, Any]:
    shortfall = wet_granite_solidus(lithostatic_pressure_gpa(depth, moho)) - temperature
    if np.isnan(shortfall).all():
        return {}
    nearest = int(np.nanargmin(shortfall))
    heating, where = max(float(shortfall[nearest]), 0.0), float(depth[nearest]) / 1000.0
    melts_from = crossing_km if not np.isnan(crossing_km) else where
    water = (
        f"to saturation, from {melts_from:.1f} km down"
        if heating == 0.0
        else f"no amount: {heating:.0f} C too cold even at saturation, at {where:.1f} km"
    )
    return {
        "crust_heating_needed_c": heating,
        "crust_heating_depth_km": melts_from if heating == 0.0 else where,
        "crust_decompression": NOT_BY_DECOMPRESSION,
        "crust_water": water,
    }


def _mantle(depth: Array, temperature: Array, moho: float) -> dict[str, Any]:
    conditions = melting_conditions(depth, temperature, moho)
    heating, rise = conditions["heating_needed_c"], conditions["decompression_needed_gpa"]
    water = float(conditions["water_needed_wt"][0])
    found: dict[str, Any] = {
        "moho_temperature_c": float(temperature[0]),
        "mantle_heating_needed_c": float(heating[0]),
        "mantle_water_needed_wt": water,
        "mantle_cause": MANTLE_CAUSES[1] if np.isnan(water) else None,
    }
    melts = np.flatnonzero(heating == 0.0)
    if melts.size:
        first = float(depth[melts[0]]) / 1000.0
        return {
            **found,
            "dry_peridotite_solidus_depth_km": first,
            "mantle_decompression": ALREADY_MELTS,
            "mantle_decompression_needed_gpa": 0.0,
            "mantle_decompression_depth_km": first,
        }
    if np.isnan(rise).all():
        return {**found, "mantle_decompression": NOT_BY_DECOMPRESSION}
    least = int(np.nanargmin(rise))
    return {
        **found,
        "mantle_decompression": BY_DECOMPRESSION,
        "mantle_decompression_needed_gpa": float(rise[least]),
        "mantle_decompression_depth_km": float(depth[least]) / 1000.0,
    }
