"""Records of radiogenic heat production and of the heat that an intrusion keeps."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.petrology.catalogue.records import Cause, Method, Quantity, Warning
from registry.petrology.catalogue.saturation import WORKSPACE
from registry.petrology.digestion import FOUR_ACID, UNKNOWN_WITHOUT_SILICA
from registry.petrology.heat import (
    SHAPES,
    THICKNESS_OF_HALF_WIDTH,
    effective_half_width_m,
    heat_production_cause,
    heat_production_rybach,
    heat_x_thickness_mw_m2,
    potassium_wt,
    rock_density_kg_m3,
    shape_codes,
)
from registry.petrology.intrusion_heat import theta_centre_interval

_SHEET = "melt_sheet"
_INTRUSION_SHEET = "intrusion_sheet"
#: Zr (ppm) above which zircon that four acids leave behind holds a share of U and Th (common practice, no source).
ZR_THAT_HIDES_URANIUM_PPM = 200.0
_BODY = ("intrusion_shape", "half_width_m", "volume_km3", "depth_to_top_m", "age_ma", "age_sigma_ma")
#: So many bodies in a chunk are told apart by comparing, more by sorting.
FEW_BODIES = 12
#: Weights, independent over the rationals, by which bodies are told apart.
KEY_WEIGHTS = np.sqrt([2.0, 3.0, 5.0, 7.0, 11.0])
_THETA = ("theta_centre", "theta_centre_low", "theta_centre_high")


def _heat_production(u: Any, th: Any, k2o: Any, density: Any) -> Any:
    return heat_production_rybach(u, th, potassium_wt(k2o), density)


def _theta(
    shape: Any, half_width: Any, volume: Any, depth: Any, age: Any, sigma: Any, conventions: Any
) -> dict[str, Any]:
    """theta of each sample's intrusion, reckoned once a body."""
    radius = effective_half_width_m(shape, half_width, volume)
    code = shape_codes(shape)
    result = {name: np.full(radius.shape, np.nan) for name in _THETA}
    known = np.flatnonzero((code > 0) & ~np.isnan(radius) & (age >= 0.0))
    if known.size:
        rows = np.nan_to_num([column[known] for column in (code, radius, depth, age, sigma)], nan=-1.0)
        bodies, body_of = _distinct(rows)
        names = np.array(("", *SHAPES), dtype=object)[bodies[0].astype(np.intp)]
        half, top, years, spread = bodies[1:]
        interval = theta_centre_interval(names, half, top, years, spread, conventions.thermal_diffusivity_m2_s)
        for name in _THETA:
            result[name][known] = interval[name][body_of]
    return result


def _first_of_each(keys: Any) -> tuple[Any, Any]:
    """Where each distinct key stands first, and for each key which of them it is; a few keys need no sorting."""
    first: list[int] = []
    inverse = np.full(keys.shape, -1)
    for which in range(FEW_BODIES):
        position = int(np.argmax(inverse < 0))
        if inverse[position] >= 0:
            return np.array(first), inverse
        first.append(position)
        inverse[keys == keys[position]] = which
    _, places, inverse = np.unique(keys, return_index=True, return_inverse=True)
    return places, inverse


def _distinct(columns: Any) -> tuple[Any, Any]:
    """Distinct columns of a (k, n) array and, for each column, where it stands among them.

    Columns are told apart by one weighted sum, which sorts faster than whole columns; should two that differ share
    it, all are kept.
    """
    first, inverse = _first_of_each(KEY_WEIGHTS @ columns)
    kept = columns[:, first]
    if np.array_equal(kept[:, inverse], columns):
        return kept, inverse
    return columns, np.arange(columns.shape[1])


def _thickness(heat: Any, shape: Any, half_width: Any, volume: Any) -> Any:
    return heat_x_thickness_mw_m2(heat, shape, effective_half_width_m(shape, half_width, volume))


def _density_assumed(heat: Any, measured: Any) -> Any:
    return ~np.isnan(heat) & ~(measured > 0.0)


def _minimum(heat: Any, u_digestion: Any, th_digestion: Any, zr: Any) -> Any:
    partial = (FOUR_ACID, UNKNOWN_WITHOUT_SILICA)
    from_acid = np.isin(u_digestion, partial) | np.isin(th_digestion, partial)
    return ~np.isnan(heat) & from_acid & (zr > ZR_THAT_HIDES_URANIUM_PPM)


def _is_present(value: Any) -> Any:
    return ~np.isnan(value)


def _incomplete(shape: Any, half_width: Any, volume: Any, age: Any) -> Any:
    return (shape_codes(shape) == 0) | np.isnan(effective_half_width_m(shape, half_width, volume)) | ~(age >= 0.0)


def _no_thickness(shape: Any, half_width: Any, volume: Any) -> Any:
    lengthless = np.isnan(np.array([np.nan, *(THICKNESS_OF_HALF_WIDTH[name] for name in SHAPES)])[shape_codes(shape)])
    return lengthless | np.isnan(effective_half_width_m(shape, half_width, volume))


def _sigma_assumed(theta: Any, sigma: Any) -> Any:
    return ~np.isnan(theta) & ~(sigma >= 0.0)


def _upper_bound(theta: Any, shape: Any, depth: Any) -> Any:
    upper = ~np.isnan(theta)
    return upper & (~(depth >= 0.0) | (shape_codes(shape) == 1 + SHAPES.index("cylinder"))) if upper.any() else upper


METHODS = (
    Method(
        key="heat_production_density",
        label="density for heat production",
        function=rock_density_kg_m3,
        inputs=("density_kg_m3", "sio2_vf_wt", "conventions"),
        optional=("density_kg_m3", "sio2_vf_wt"),
        outputs=(
            Quantity(
                "heat_production_density_kg_m3",
                WORKSPACE,
                "rock density",
                "kg/m3",
                "measured, else the convention's for the silica class; never the melt's",
                500.0,
                10000.0,
            ),
        ),
        source="convention",
        equation="2650, 2750, 2900 and 3200 for acid, intermediate, basic and ultrabasic unless set otherwise",
        status="common practice",
    ),
    Method(
        key="heat_production",
        label="radiogenic heat production",
        function=_heat_production,
        inputs=("u_ppm", "th_ppm", "k2o_wt", "heat_production_density_kg_m3"),
        outputs=(
            Quantity(
                "heat_production_uw_m3",
                _SHEET,
                "heat production",
                "uW/m3",
                "heat from the decay of U, Th and K in a cubic metre of rock today",
                0.0,
                1e5,
            ),
        ),
        source="rybach1988",
        equation="1e-5 rho (9.52 U + 2.56 Th + 3.48 K)",
        status="from memory",
        standard_error="that of the analyses; the constants differ by up to 3 % between authors",
        note="Any rock; one sample is not a pluton. Analyses as reported, not closed to 100.",
    ),
    Method(
        key="heat_production_cause",
        label="why there is no heat production",
        function=heat_production_cause,
        inputs=("u_ppm", "th_ppm", "k2o_wt", "heat_production_density_kg_m3"),
        optional=("u_ppm", "th_ppm", "k2o_wt", "heat_production_density_kg_m3"),
        outputs=(
            Quantity(
                "heat_production_cause",
                _SHEET,
                "heat production cause",
                "text",
                "why heat_production_uw_m3 is missing; empty if it is not",
            ),
        ),
        source="convention",
        equation="u_missing, th_missing, k2o_missing or density_unknown, the first that holds",
        status="common practice",
        causes=(
            Cause(
                "value_present",
                "the value is there, so no cause is needed",
                _is_present,
                ("heat_production_uw_m3",),
            ),
        ),
    ),
    Method(
        key="theta_centre",
        label="heat left at the centre",
        function=_theta,
        inputs=(*_BODY, "conventions"),
        optional=("half_width_m", "volume_km3", "depth_to_top_m", "age_sigma_ma"),
        outputs=(
            Quantity(
                "theta_centre",
                _INTRUSION_SHEET,
                "heat left",
                "1",
                "share of the excess temperature left at the intrusion's centre by conduction alone",
                0.0,
                1.0,
            ),
            Quantity(
                "theta_centre_low",
                _INTRUSION_SHEET,
                "heat left, low",
                "1",
                "the same at the age plus 2 sigma",
                0.0,
                1.0,
            ),
            Quantity(
                "theta_centre_high",
                _INTRUSION_SHEET,
                "heat left, high",
                "1",
                "the same at the age less 2 sigma",
                0.0,
                1.0,
            ),
        ),
        source="jaeger1964",
        equation="slab, sphere [crank1975] or cylinder [carslaw1959] with the mirrored source above the surface",
        status="published",
        note="One pulse, no latent heat, no recharge. Moving water cools 2-10 times faster.",
        causes=(
            Cause(
                "intrusion_incomplete",
                "shape, half-width (or a sphere's volume) or age of the intrusion is not recorded",
                _incomplete,
                ("intrusion_shape", "half_width_m", "volume_km3", "age_ma"),
            ),
        ),
    ),
    Method(
        key="heat_x_thickness",
        label="heat production times thickness",
        function=_thickness,
        inputs=("heat_production_uw_m3", "intrusion_shape", "half_width_m", "volume_km3"),
        optional=("half_width_m", "volume_km3"),
        outputs=(
            Quantity(
                "heat_x_thickness_mw_m2",
                _INTRUSION_SHEET,
                "heat x thickness",
                "mW/m2",
                "heat flow that the body adds: A x 2a for a slab, A x 4a/3 for a sphere",
                0.0,
                1e6,
            ),
        ),
        source="lachenbruch1970",
        equation="A x thickness, A uniform through the body",
        status="common practice",
        causes=(
            Cause(
                "thickness_unknown",
                "neither a slab nor a sphere of known size: the body's thickness is not known",
                _no_thickness,
                ("intrusion_shape", "half_width_m", "volume_km3"),
            ),
        ),
    ),
)

WARNINGS = (
    Warning(
        "heat_production_density_assumed",
        "heat_production_uw_m3",
        "heat_production_density_kg_m3",
        "no density was measured: {value} kg/m3 is the convention's for the silica class",
        _density_assumed,
        ("heat_production_uw_m3", "density_kg_m3"),
    ),
    Warning(
        "heat_production_minimum",
        "heat_production_uw_m3",
        "zr_ppm",
        "U or Th by four acids at Zr {value} ppm: zircon may keep a share, the heat production is a minimum",
        _minimum,
        ("heat_production_uw_m3", "digestion:u_ppm", "digestion:th_ppm", "zr_ppm"),
    ),
    Warning(
        "age_sigma_assumed",
        "theta_centre",
        None,
        "the age of the intrusion has no standard deviation: 10 % is taken",
        _sigma_assumed,
        ("theta_centre", "age_sigma_ma"),
    ),
    Warning(
        "theta_centre_upper_bound",
        "theta_centre",
        "theta_centre",
        "{value} is an upper bound: the surface cools a body whose depth is unknown, or a cylinder, more than this",
        _upper_bound,
        ("theta_centre", "intrusion_shape", "depth_to_top_m"),
    ),
)
