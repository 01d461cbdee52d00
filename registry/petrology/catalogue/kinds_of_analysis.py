"""Remarks that tell apart what is no fresh melt: minerals, cumulates, glasses, spots, altered and volatile-rich rocks.

They stand beside the numbers and change none. Limits without a key are common practice, no source.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import Any

import numpy as np

from registry.petrology.analytes import ELEMENT_COLUMNS
from registry.petrology.catalogue.records import Method, Warning
from registry.petrology.kinds_of_analysis import FORMULA_OXIDES, MINERALS, has_formula_of

#: Volatile-free wt% of an accumulation of plagioclase: no lava holds as much alumina below 60 % SiO2.
PLAGIOCLASE_AL2O3_WT, PLAGIOCLASE_SIO2_WT = 21.0, 60.0
#: Eu/Eu* above which plagioclase was added.
PLAGIOCLASE_EU_ANOMALY = 1.1
#: Volatile-free MgO (wt%) above which a plutonic rock has more olivine or pyroxene than its melt.
MAFIC_CUMULATE_MGO_WT = 18.0
#: Carbonate, water and sulphide that the silicates' numbers do not bear, wt%: the first two of [lemaitre2002].
CARBONATE_CO2_WT, HYDROUS_H2O_WT, CARBONATITE_CO2_WT = 0.5, 2.0, 20.0
#: Least altered rocks by [ishikawa1976] and [nesbitt1982], normative corundum of any igneous rock; from memory.
LEAST_ALTERED, WEATHERED_CIA, HIGHEST_CORUNDUM_WT = (20.0, 65.0), 60.0, 5.0
#: Volatile-free SiO2 (wt%) from which the alteration index is read: mafic rocks have a high one when fresh.
ALTERATION_SIO2_WT = 52.0
#: Fluorine (wt%) that lowers viscosity by more than the model's error.
FLUORINE_WT = 0.5

_OXIDES = tuple(FORMULA_OXIDES)
_NORM_ADVICE = "in the norm; set the convention norm_co2_as_calcite"


def _is_mineral(*oxides: Any, mineral: str) -> Any:
    return has_formula_of(mineral, *oxides)


def _plagioclase(al2o3: Any, sio2: Any, eu: Any) -> Any:
    return ((al2o3 > PLAGIOCLASE_AL2O3_WT) & (sio2 < PLAGIOCLASE_SIO2_WT)) | (eu > PLAGIOCLASE_EU_ANOMALY)


def _mafic(mgo: Any, plutonic: Any) -> Any:
    return (mgo > MAFIC_CUMULATE_MGO_WT) & plutonic


def _spot(total: Any, *others: Any) -> Any:
    """Majors, but neither a loss on ignition nor a single trace element."""
    result = ~np.isnan(total)
    for each in others:  # after the loss on ignition there is mostly no row left
        result &= np.isnan(each)
        if not result.any():
            break
    return result


def _carbonate(value: Any, co2: Any, conventions: Any) -> Any:
    return (co2 > CARBONATE_CO2_WT) & ~np.isnan(value) & (not conventions.norm_co2_as_calcite)


def _carbonate_in_cia(value: Any, co2: Any) -> Any:
    return (co2 > CARBONATE_CO2_WT) & ~np.isnan(value)


def _above(limit: float) -> Callable[..., Any]:
    def mask(value: Any) -> Any:
        return value > limit

    return mask


def _index_altered(value: Any, sio2: Any) -> Any:
    low, high = LEAST_ALTERED
    return ((value < low) | (value > high)) & (sio2 >= ALTERATION_SIO2_WT)


def _fluorine(viscosity: Any, fluorine: Any) -> Any:
    return (fluorine > FLUORINE_WT) & ~np.isnan(viscosity)


METHODS: tuple[Method, ...] = ()
WARNINGS = (
    *(
        Warning(
            f"formula_of_{mineral.replace(' ', '_')}",
            "fitness",
            None,
            f"the analysis has the formula of {mineral}: a mineral analysis, or a rock or vein made of it; names, norm "
            "and melt temperatures of a rock do not apply",
            partial(_is_mineral, mineral=mineral),
            _OXIDES,
        )
        for mineral in MINERALS
    ),
    Warning(
        "plagioclase_accumulated",
        "liquidus_c",
        "al2o3_vf_wt",
        "Al2O3 {value} wt% below 60 wt% SiO2, or Eu/Eu* above 1.1: plagioclase has accumulated, so the rock was no "
        "melt as it stands",
        _plagioclase,
        ("al2o3_vf_wt", "sio2_vf_wt", "eu_anomaly"),
    ),
    Warning(
        "mafic_minerals_accumulated",
        "liquidus_c",
        "mgo_vf_wt",
        "MgO {value} wt% in a plutonic rock: olivine or pyroxene has accumulated, so the rock was no melt as it stands",
        _mafic,
        ("mgo_vf_wt", "is_plutonic"),
    ),
    Warning(
        "glass_logged",
        "fitness",
        "total_wt",
        "the log names a glass: it was a liquid, but what its total {value} wt% lacks may be magmatic or later water",
        lambda logged: logged,
        ("logged_glass",),
    ),
    Warning(
        "may_be_a_spot_analysis",
        "fitness",
        "total_wt",
        "neither a loss on ignition nor any trace element: the analysis (total {value} wt%) may be a spot on a glass "
        "or a mineral and not a rock",
        _spot,
        ("total_wt", "loi_wt", *ELEMENT_COLUMNS),
    ),
    Warning(
        "carbonate_in_norm",
        "an_wt",
        "co2_wt",
        f"CO2 {{value}} wt%: lime of carbonate stands as silicate {_NORM_ADVICE}",
        _carbonate,
        ("an_wt", "co2_wt", "conventions"),
    ),
    Warning(
        "carbonate_in_cia",
        "cia",
        "co2_wt",
        "CO2 {value} wt%: lime of carbonate is not taken off, so the index is too low",
        _carbonate_in_cia,
        ("cia", "co2_wt"),
    ),
    Warning(
        "carbonate_rock",
        "fitness",
        "co2_wt",
        "CO2 {value} wt%: a carbonatite, limestone, marble or vein; the silicate methods do not apply",
        _above(CARBONATITE_CO2_WT),
        ("co2_wt",),
    ),
    Warning(
        "hydrous_rock",
        "fitness",
        "h2o_plus_wt",
        "H2O+ {value} wt%: hydrated, so alkalis, lime and iron's oxidation may have changed",
        _above(HYDROUS_H2O_WT),
        ("h2o_plus_wt",),
    ),
    Warning(
        "alteration_index_not_least_altered",
        "alteration_index",
        "alteration_index",
        "{value} lies outside the 20 to 65 of least altered rocks above 52 wt% SiO2: sericite, chlorite, soda or lime "
        "came in, or crystals accumulated; compare it with the median of the same rock",
        _index_altered,
        ("alteration_index", "sio2_vf_wt"),
    ),
    Warning(
        "cia_weathered",
        "cia",
        "cia",
        "{value} is more than fresh igneous rocks have: weathering or clay",
        _above(WEATHERED_CIA),
        ("cia",),
    ),
    Warning(
        "corundum_beyond_igneous_rocks",
        "c_wt",
        "c_wt",
        "{value} wt% normative corundum is more than fresh igneous rocks have: alkalis or lime were lost, or an "
        "aluminous mineral accumulated",
        _above(HIGHEST_CORUNDUM_WT),
        ("c_wt",),
    ),
    Warning(
        "viscosity_without_fluorine",
        "melt_viscosity_log10_pa_s",
        "f_wt",
        "F {value} wt% is left out of the viscosity: such a melt flows more easily",
        _fluorine,
        ("melt_viscosity_log10_pa_s", "f_wt"),
    ),
)
