"""Records of the density and viscosity of the melt at its liquidus."""

from __future__ import annotations

from typing import Any

from registry.petrology.catalogue.records import Cause, Method, Quantity, Range
from registry.petrology.catalogue.saturation import MELT_INPUTS
from registry.petrology.melt_composition import MELT_OXIDES
from registry.petrology.melt_density import DENSITY_OXIDES, melt_density_lange
from registry.petrology.viscosity import melt_viscosity_giordano, melt_viscosity_shaw

_SHEET = "melt_sheet"
_DENSITY_INPUTS = tuple(column.removesuffix("_wt") + "_vf_wt" for column in DENSITY_OXIDES)


def _density(*values: Any) -> Any:
    *oxides, temperature, h2o, conventions = values
    columns = dict(zip(DENSITY_OXIDES, oxides, strict=True))
    return melt_density_lange(columns, temperature, conventions.pressure_gpa, h2o)


def _giordano(*values: Any) -> Any:
    *oxides, temperature, h2o = values
    return melt_viscosity_giordano(dict(zip(MELT_OXIDES, oxides, strict=True)), temperature, h2o)


def _shaw(*values: Any) -> Any:
    *oxides, temperature, h2o = values
    return melt_viscosity_shaw(dict(zip(MELT_OXIDES, oxides, strict=True)), temperature, h2o)


def _is_true(flag: Any) -> Any:
    return flag


_NOT_A_LIQUID = Cause("not_a_liquid", "", _is_true, ("not_a_liquid",))

METHODS = (
    Method(
        key="melt_density",
        label="melt density",
        function=_density,
        inputs=(*_DENSITY_INPUTS, "liquidus_c", "h2o_wt", "conventions"),
        outputs=(
            Quantity(
                "melt_density_kg_m3",
                _SHEET,
                "melt density",
                "kg/m3",
                "density of the melt at its liquidus, the convention's water and pressure",
                1000.0,
                4000.0,
            ),
        ),
        source="lange1997",
        equation="mass over the sum of partial molar volumes",
        status="from memory",
        calibration=(Range("liquidus_c", 427.0, 1627.0),),
        standard_error="0.32 % at 1400 C",
        note="TiO2, Fe2O3 and FeO of [lange1987], compressibilities of [kress1991], water of [ochs1999]; MnO and P2O5 "
        "are left out of mass and volume. The range is that of the title, 700-1900 K.",
        causes=(_NOT_A_LIQUID,),
    ),
    Method(
        key="melt_viscosity",
        label="melt viscosity (Giordano and others 2008)",
        function=_giordano,
        inputs=(*MELT_INPUTS, "liquidus_c", "h2o_wt"),
        outputs=(
            Quantity(
                "melt_viscosity_log10_pa_s",
                _SHEET,
                "log10 viscosity",
                "log10 Pa s",
                "viscosity of the crystal-free melt at its liquidus and the convention's water",
                -5.0,
                20.0,
            ),
        ),
        source="giordano2008",
        equation="eq. 1 and table 1",
        status="from memory",
        calibration=(Range("liquidus_c", 535.0, 1705.0),),
        standard_error="0.40 log10 units",
        note="1 bar; pressure is left out.",
        causes=(_NOT_A_LIQUID,),
    ),
    Method(
        key="melt_viscosity_shaw",
        label="melt viscosity (Shaw 1972)",
        function=_shaw,
        inputs=(*MELT_INPUTS, "liquidus_c", "h2o_wt"),
        outputs=(
            Quantity(
                "melt_viscosity_shaw_log10_pa_s",
                _SHEET,
                "log10 viscosity, Shaw",
                "log10 Pa s",
                "the same by an older model, for comparison",
                -5.0,
                20.0,
            ),
        ),
        source="shaw1972",
        equation="ln (poise) = s 1e4/T - 1.50 s - 6.40",
        status="from memory",
        calibration=(Range("sio2_vf_wt", 40.0, 80.0),),
        note="The range is common practice, no source.",
        causes=(_NOT_A_LIQUID,),
    ),
)

WARNINGS = ()
