"""Records of the water convention, of what is no liquid, and of the liquidus temperature chosen from the models."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.petrology.catalogue.records import Cause, Method, Quantity, Warning
from registry.petrology.catalogue.saturation import WORKSPACE
from registry.petrology.liquidus_choice import (
    OLIVINE_MODELS,
    choose_liquidus,
    has_no_model_in_range,
    is_not_a_liquid,
    liquidus_cause,
)
from registry.petrology.water import melt_water_by_convention

_SHEET = "melt_sheet"


def _choose(sio2: Any, mgo: Any, h2o: Any, conventions: Any, cumulate: Any, makhluf: Any, *rest: Any) -> dict[str, Any]:
    zircon, usable, *models = rest
    return choose_liquidus(
        sio2,
        h2o,
        dict(zip(OLIVINE_MODELS, models, strict=True)),
        makhluf,
        zircon,
        usable,
        cumulate,
        mgo,
        conventions.water_depression,
    )


def _is_true(flag: Any) -> Any:
    return flag


def _unknown_silica(sio2: Any, mgo: Any) -> Any:
    return np.isnan(sio2) | np.isnan(mgo)


def _zircon_barred(temperature: Any, usable: Any) -> Any:
    return ~np.isnan(temperature) & ~usable


def _zircon_missing(temperature: Any, zircon: Any) -> Any:
    return ~np.isnan(temperature) & np.isnan(zircon)


def _present(value: Any) -> Any:
    return ~np.isnan(value)


def _altered(temperature: Any, loi: Any, mgo: Any, conventions: Any) -> Any:
    exempt = mgo > conventions.loi_exempt_mgo_vf_wt
    return ~np.isnan(temperature) & (loi > conventions.loi_warn_wt) & ~exempt


_NOT_A_LIQUID = Cause(
    "not_a_liquid",
    "not a liquid: olivine in equilibrium would hold more than 93 mol% forsterite, or the log names a cumulate",
    _is_true,
    ("not_a_liquid",),
)
_NO_MODEL = Cause(
    "no_model_in_range",
    "no olivine model in range: up to 63 wt% SiO2 with less than 3 wt% MgO",
    has_no_model_in_range,
    ("sio2_vf_wt", "mgo_vf_wt"),
)

METHODS = (
    Method(
        key="melt_water",
        label="water in the melt",
        function=melt_water_by_convention,
        inputs=("sio2_vf_wt", "conventions"),
        outputs=(Quantity("h2o_wt", _SHEET, "H2O", "wt%", "water in the melt by convention, not measured", 0.0, 15.0),),
        source="convention",
        equation="0, 1, 3 and 4 wt% for ultrabasic, basic, intermediate and acid unless set otherwise",
        status="common practice",
    ),
    Method(
        key="not_a_liquid",
        label="not a liquid",
        function=is_not_a_liquid,
        inputs=("mgo_vf_wt", "feot_vf_wt", "logged_cumulate"),
        outputs=(
            Quantity(
                "not_a_liquid", WORKSPACE, "not a liquid", "1", "equilibrium forsterite above 93, or logged cumulate"
            ),
        ),
        source="roeder1970",
        equation="(Fe2+/Mg) olivine / (Fe2+/Mg) liquid = 0.30, total iron",
        status="common practice",
        standard_error="0.03 on KD",
    ),
    Method(
        key="liquidus_choice",
        label="liquidus temperature chosen",
        function=_choose,
        inputs=(
            "sio2_vf_wt",
            "mgo_vf_wt",
            "h2o_wt",
            "conventions",
            "not_a_liquid",
            "liquidus_makhluf_c",
            "zircon_saturation_wh83_c",
            "zircon_saturation_usable",
            *(f"liquidus_{model}_c" for model in OLIVINE_MODELS),
        ),
        optional=("zircon_saturation_wh83_c", *(f"liquidus_{model}_c" for model in OLIVINE_MODELS)),
        outputs=(
            Quantity("liquidus_c", _SHEET, "liquidus", "C", "liquidus temperature of the rock taken as a melt"),
            Quantity(
                "liquidus_model",
                _SHEET,
                "liquidus route",
                "text",
                "olivine_median (SiO2 below 52), makhluf (above 63) or their blend",
            ),
            Quantity("liquidus_low_c", _SHEET, "liquidus, low", "C", "least of the models; acid: zircon saturation"),
            Quantity("liquidus_high_c", _SHEET, "liquidus, high", "C", "greatest of the models; acid: at 3 wt% H2O"),
        ),
        source="convention",
        equation="median of the olivine models in range, dry ones lowered by water; acid haplogranite; blend between",
        status="provisional",
        note="Models [helz1987], [putirka2008], [beattie1993], [sugawara2000], [makhluf2017], zircon [watson1983]; "
        "water depression [almeev2007] unless set otherwise. The spread is that of the models, not an error.",
        causes=(
            _NOT_A_LIQUID,
            _NO_MODEL,
            Cause("missing_input", "", _unknown_silica, ("sio2_vf_wt", "mgo_vf_wt")),
            Cause("missing_input", "", _zircon_missing, ("liquidus_c", "zircon_saturation_wh83_c")),
            Cause(
                "zircon_out_of_range",
                "zircon saturation is outside its range (M 0.9-1.9, SiO2 from 63 wt%, A/NK from 1), or Zr is a minimum",
                _zircon_barred,
                ("liquidus_c", "zircon_saturation_usable"),
            ),
        ),
    ),
    Method(
        key="liquidus_cause",
        label="why there is no liquidus",
        function=liquidus_cause,
        inputs=("liquidus_c", "not_a_liquid", "sio2_vf_wt", "mgo_vf_wt"),
        optional=("liquidus_c", "sio2_vf_wt", "mgo_vf_wt"),
        outputs=(
            Quantity(
                "liquidus_cause", _SHEET, "liquidus cause", "text", "why liquidus_c is missing; empty if it is not"
            ),
        ),
        source="convention",
        equation="not_a_liquid, no_model_in_range or missing_input",
        status="common practice",
        causes=(Cause("value_present", "the value is there, so no cause is needed", _present, ("liquidus_c",)),),
    ),
)

WARNINGS = (
    Warning(
        "liquidus_of_altered_rock",
        "liquidus_c",
        "loi_wt",
        "loss on ignition {value} wt%: the rock is altered, its liquidus is that of what it is now",
        _altered,
        ("liquidus_c", "loi_wt", "mgo_vf_wt", "conventions"),
    ),
)
