"""Records of the ascent of the magma: diapir in wall rock, flow in a dyke, and the outcome."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.petrology.ascent import (
    HIGHEST_LAMINAR_REYNOLDS,
    ascent_cause,
    ascent_outcome,
    diapir_velocity_m_per_yr,
    dyke_reynolds_number,
    dyke_velocity_m_per_s,
)
from registry.petrology.catalogue.records import Cause, Method, Quantity, Warning
from registry.petrology.catalogue.saturation import WORKSPACE
from registry.petrology.heat import effective_half_width_m
from registry.petrology.quotients import is_absent

_SHEET = "melt_sheet"
_BODY = ("intrusion_shape", "half_width_m", "volume_km3")


def _contrast(melt_density: Any, country_density: Any, conventions: Any) -> Any:
    country = np.where(np.isnan(country_density), conventions.country_density_kg_m3, country_density)
    return country - melt_density


def _diapir(contrast: Any, shape: Any, half_width: Any, volume: Any, conventions: Any) -> Any:
    radius = effective_half_width_m(shape, half_width, volume)
    radius = np.where(np.isnan(radius), conventions.diapir_radius_m, radius)
    return diapir_velocity_m_per_yr(radius, contrast, conventions.wall_rock_viscosity_pa_s)


def _dyke(contrast: Any, log10_viscosity: Any, conventions: Any) -> Any:
    return dyke_velocity_m_per_s(conventions.dyke_width_m, contrast, 10.0**log10_viscosity)


def _outcome(contrast: Any, velocity: Any, depth: Any, conventions: Any) -> Any:
    return ascent_outcome(contrast, velocity, depth, conventions.dyke_width_m, conventions.thermal_diffusivity_m2_s)


def _radius_assumed(velocity: Any, shape: Any, half_width: Any, volume: Any) -> Any:
    return ~np.isnan(velocity) & np.isnan(effective_half_width_m(shape, half_width, volume))


def _turbulent(velocity: Any, density: Any, log10_viscosity: Any, conventions: Any) -> Any:
    reynolds = dyke_reynolds_number(velocity, conventions.dyke_width_m, density, 10.0**log10_viscosity)
    return reynolds >= HIGHEST_LAMINAR_REYNOLDS


def _no_liquidus(liquidus: Any) -> Any:
    return np.isnan(liquidus)


def _no_depth(depth: Any) -> Any:
    return ~(depth >= 0.0)


def _word_present(word: Any) -> Any:
    return ~is_absent(word)


_NO_LIQUIDUS = Cause(
    "liquidus_unknown", "there is no liquidus temperature to take the melt at", _no_liquidus, ("liquidus_c",)
)

METHODS = (
    Method(
        key="density_contrast",
        label="density contrast",
        function=_contrast,
        inputs=("melt_density_kg_m3", "country_density_kg_m3", "conventions"),
        optional=("country_density_kg_m3",),
        outputs=(
            Quantity(
                "density_contrast_kg_m3",
                WORKSPACE,
                "density contrast",
                "kg/m3",
                "country rock less melt",
                -3000.0,
                3000.0,
            ),
        ),
        source="convention",
        equation="country-rock density as given, else by convention",
        status="common practice",
        causes=(_NO_LIQUIDUS,),
    ),
    Method(
        key="stokes_velocity",
        label="diapir velocity",
        function=_diapir,
        inputs=("density_contrast_kg_m3", *_BODY, "conventions"),
        optional=_BODY,
        outputs=(
            Quantity(
                "stokes_velocity_m_per_yr",
                _SHEET,
                "diapir velocity",
                "m/yr",
                "the intrusion rising as a sphere in wall rock of the convention's viscosity; negative sinks",
            ),
        ),
        source="stokes1851",
        equation="2 drho g r2/(9 eta wall rock)",
        status="published",
        standard_error="order of magnitude: wall rock is 1e17 to 1e21 Pa s",
        causes=(_NO_LIQUIDUS,),
    ),
    Method(
        key="dyke_velocity",
        label="dyke velocity",
        function=_dyke,
        inputs=("density_contrast_kg_m3", "melt_viscosity_log10_pa_s", "conventions"),
        outputs=(
            Quantity(
                "dyke_velocity_m_per_s",
                _SHEET,
                "dyke velocity",
                "m/s",
                "laminar buoyant flow of the melt in a dyke of the convention's width; negative sinks",
            ),
        ),
        source="turcotte2002",
        equation="w2 drho g/(12 eta melt), w the full width",
        status="published",
        standard_error="order of magnitude",
        causes=(_NO_LIQUIDUS,),
    ),
    Method(
        key="ascent_outcome",
        label="ascent outcome",
        function=_outcome,
        inputs=("density_contrast_kg_m3", "dyke_velocity_m_per_s", "emplacement_depth_m", "conventions"),
        outputs=(
            Quantity(
                "ascent_outcome",
                _SHEET,
                "ascent",
                "text",
                "likely reaches the surface, marginal, likely stalls, or stalled by density",
            ),
        ),
        source="convention",
        equation="crossing time over freezing time (w/2)2/kappa: below 0.1, to 1, above",
        status="common practice",
        standard_error="order of magnitude",
        note="A screen. The distance is the intrusion's emplacement depth, not its depth to top.",
        causes=(
            _NO_LIQUIDUS,
            Cause(
                "emplacement_depth_unknown",
                "the intrusion's emplacement depth is not recorded, so there is no distance to cross",
                _no_depth,
                ("emplacement_depth_m",),
            ),
        ),
    ),
    Method(
        key="ascent_cause",
        label="why there is no ascent outcome",
        function=ascent_cause,
        inputs=("ascent_outcome", "liquidus_c", "density_contrast_kg_m3", "emplacement_depth_m"),
        optional=("ascent_outcome", "liquidus_c", "density_contrast_kg_m3", "emplacement_depth_m"),
        outputs=(
            Quantity(
                "ascent_cause", _SHEET, "ascent cause", "text", "why ascent_outcome is missing; empty if it is not"
            ),
        ),
        source="convention",
        equation="liquidus_unknown, emplacement_depth_unknown or melt_properties_unknown",
        status="common practice",
        causes=(
            Cause("value_present", "the value is there, so no cause is needed", _word_present, ("ascent_outcome",)),
        ),
    ),
)

WARNINGS = (
    Warning(
        "diapir_radius_assumed",
        "stokes_velocity_m_per_yr",
        None,
        "the intrusion's half-width is unknown: the radius is the convention's",
        _radius_assumed,
        ("stokes_velocity_m_per_yr", *_BODY),
    ),
    Warning(
        "dyke_flow_not_laminar",
        "dyke_velocity_m_per_s",
        "dyke_velocity_m_per_s",
        "{value} m/s gives a Reynolds number of 1000 or more: flow is not laminar and slower than this",
        _turbulent,
        ("dyke_velocity_m_per_s", "melt_density_kg_m3", "melt_viscosity_log10_pa_s", "conventions"),
    ),
)
