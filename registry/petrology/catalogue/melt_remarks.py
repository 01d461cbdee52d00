"""Remarks that set the temperatures of a melt beside one another, and on what a temperature rests."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.petrology.catalogue.records import Method, Warning
from registry.petrology.melt_composition import SILICA_CLASS_LIMITS_WT
from registry.petrology.melting import haplogranite_minimum, wet_granite_solidus

_, _BASIC_BELOW_WT, _ACID_ABOVE_WT = SILICA_CLASS_LIMITS_WT
#: Calibrated temperatures of [shao2020], C.
ZIRCON_SHAO_LOW_C, ZIRCON_SHAO_HIGH_C = 750.0, 1400.0


def _takes_part(temperature: Any, sio2: Any, water: Any) -> Any:
    """Where the haplogranite polynomial enters the choice: intermediate and acid rocks."""
    return ~np.isnan(temperature) & (sio2 >= _BASIC_BELOW_WT) & ~np.isnan(water)


def _acid(temperature: Any, sio2: Any, *water: Any) -> Any:
    return ~np.isnan(temperature) & (sio2 > _ACID_ABOVE_WT)


def _blended(temperature: Any, sio2: Any, water: Any) -> Any:
    return _takes_part(temperature, sio2, water) & (sio2 <= _ACID_ABOVE_WT)


def _below_solidus(temperature: Any, conventions: Any) -> Any:
    """Below the water-saturated granite solidus at the convention's pressure; the minimum below 0.2 GPa."""
    solidus = wet_granite_solidus(conventions.pressure_gpa)
    return temperature < np.where(np.isnan(solidus), haplogranite_minimum(conventions.pressure_gpa), solidus)


def _above(temperature: Any, liquidus: Any) -> Any:
    return temperature > liquidus


def _outside_shao(temperature: Any) -> Any:
    return (temperature < ZIRCON_SHAO_LOW_C) | (temperature > ZIRCON_SHAO_HIGH_C)


METHODS: tuple[Method, ...] = ()

WARNINGS = (
    Warning(
        "liquidus_makhluf_by_convention",
        "liquidus_makhluf_c",
        "h2o_wt",
        "set by the convention's water ({value} wt%) alone, not by this rock's composition: every rock of that water "
        "has the same; provisional",
        _takes_part,
        ("liquidus_makhluf_c", "sio2_vf_wt", "h2o_wt"),
    ),
    Warning(
        "liquidus_by_convention",
        "liquidus_c",
        "h2o_wt",
        "set by the convention's water ({value} wt%) alone, not by this rock's composition (acid route: haplogranite "
        "of Makhluf and others 2017); provisional",
        _acid,
        ("liquidus_c", "sio2_vf_wt", "h2o_wt"),
    ),
    Warning(
        "liquidus_partly_by_convention",
        "liquidus_c",
        "sio2_vf_wt",
        "SiO2 {value} wt% lies between the basic and the acid route (52-63): the share of the acid one is set by the "
        "convention's water alone, not by this rock's composition; provisional",
        _blended,
        ("liquidus_c", "sio2_vf_wt", "h2o_wt"),
    ),
    Warning(
        "liquidus_duan_from_silica_alone",
        "liquidus_duan_c",
        "sio2_vf_wt",
        "from SiO2 ({value} wt%) alone, by one line through granitoids: its error is not stated and its range of SiO2 "
        "was not seen",
        _acid,
        ("liquidus_duan_c", "sio2_vf_wt"),
    ),
    Warning(
        "liquidus_duan_below_solidus",
        "liquidus_duan_c",
        "liquidus_duan_c",
        "{value} C lies below the solidus of water-saturated granite at the convention's pressure: no granitic melt "
        "of that temperature is expected",
        _below_solidus,
        ("liquidus_duan_c", "conventions"),
    ),
    Warning(
        "apatite_saturation_above_liquidus",
        "apatite_saturation_c",
        "apatite_saturation_c",
        "{value} C is above the chosen liquidus: apatite accumulated, or a peraluminous melt dissolves more P2O5 (the "
        "corrections of Bea and others 1992 and Pichavant and others 1992 are not applied), or the convention's water "
        "is too high",
        _above,
        ("apatite_saturation_c", "liquidus_c"),
    ),
    *(
        Warning(
            f"{column.removesuffix('_c')}_above_liquidus",
            column,
            column,
            "{value} C is above the chosen liquidus: inherited zircon or a cumulate, or the convention's water is too "
            "high",
            _above,
            (column, "liquidus_c"),
        )
        for column in ("zircon_saturation_wh83_c", "zircon_saturation_b13_c", "zircon_saturation_shao_c")
    ),
    Warning(
        "zircon_saturation_shao_extrapolated",
        "zircon_saturation_shao_c",
        "zircon_saturation_shao_c",
        "{value} C lies outside the 750-1400 C of the experiments",
        _outside_shao,
        ("zircon_saturation_shao_c",),
    ),
)
