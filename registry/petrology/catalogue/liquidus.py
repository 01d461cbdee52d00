"""Records of the liquidus models, followed by those of the temperature chosen from them."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.petrology.catalogue import liquidus_choice
from registry.petrology.catalogue.records import Method, Quantity, Range, Warning
from registry.petrology.catalogue.saturation import MELT_INPUTS, WORKSPACE
from registry.petrology.liquidus_choice import (
    HELZ_THORNBER_MGO_WT,
    OLIVINE_MGO_LOW_WT,
    OLIVINE_MODELS,
    OLIVINE_SIO2_HIGH_WT,
)
from registry.petrology.liquidus_models import (
    liquidus_beattie,
    liquidus_duan,
    liquidus_helz_thornber,
    liquidus_makhluf,
    liquidus_putirka13,
    liquidus_putirka14,
    liquidus_putirka15,
    liquidus_putirka22,
    liquidus_sugawara,
    olivine_liquid_terms,
)

_SHEET = "melt_sheet"
_TERMS = ("olivine_d_mg", "olivine_c_nm", "olivine_c_sio2", "olivine_nf")
_IN_OLIVINE_RANGE = (Range("sio2_vf_wt", None, OLIVINE_SIO2_HIGH_WT), Range("mgo_vf_wt", OLIVINE_MGO_LOW_WT, None))
_MODEL_COLUMNS = tuple(f"liquidus_{model}_c" for model in (*OLIVINE_MODELS, "makhluf", "duan"))
_RANGE_NOTE = "The range is that in which the model may be chosen. "
_DRY_NOTE = "The column is the dry temperature as published; the choice lowers it by the water depression."


def _terms(*oxides: Any) -> dict[str, Any]:
    terms = olivine_liquid_terms(*oxides)
    return {f"olivine_{name}": value for name, value in terms.items()}


def _putirka15(mgo: Any, feot: Any, na2o: Any, k2o: Any, h2o: Any, conventions: Any) -> Any:
    return liquidus_putirka15(mgo, feot, na2o, k2o, h2o, conventions.pressure_gpa)


def _putirka22(d_mg: Any, c_nm: Any, c_sio2: Any, nf: Any, h2o: Any, conventions: Any) -> Any:
    return liquidus_putirka22(d_mg, c_nm, c_sio2, nf, h2o, conventions.pressure_gpa)


def _beattie(d_mg: Any, c_nm: Any, c_sio2: Any, nf: Any, conventions: Any) -> Any:
    return liquidus_beattie(d_mg, c_nm, c_sio2, nf, conventions.pressure_gpa)


def _flagged(temperature: Any, flag: Any) -> Any:
    return ~np.isnan(temperature) & flag


def _temperature(model: str, label: str, meaning: str) -> Quantity:
    return Quantity(f"liquidus_{model}_c", _SHEET, label, "C", meaning, -500.0, 5000.0)


METHODS = (
    *liquidus_choice.METHODS,
    Method(
        key="liquidus_helz_thornber",
        label="Helz and Thornber 1987",
        function=liquidus_helz_thornber,
        inputs=("mgo_vf_wt",),
        outputs=(_temperature("helz_thornber", "T, Helz-Thornber", "dry basaltic liquid from its MgO"),),
        source="helz1987",
        equation="T = 20.1 MgO + 1014",
        status="from memory",
        calibration=(Range("mgo_vf_wt", *HELZ_THORNBER_MGO_WT), Range("sio2_vf_wt", None, OLIVINE_SIO2_HIGH_WT)),
        standard_error="10 C",
        note=_DRY_NOTE,
    ),
    Method(
        key="liquidus_putirka13",
        label="Putirka 2008, equation 13",
        function=liquidus_putirka13,
        inputs=("mgo_vf_wt",),
        outputs=(_temperature("putirka13", "T, Putirka 13", "dry olivine-saturated liquid from its MgO"),),
        source="putirka2008",
        equation="eq. 13",
        status="from memory",
        calibration=_IN_OLIVINE_RANGE,
        standard_error="71 C",
        note=_RANGE_NOTE + _DRY_NOTE,
    ),
    Method(
        key="liquidus_putirka14",
        label="Putirka 2008, equation 14",
        function=liquidus_putirka14,
        inputs=("mgo_vf_wt", "feot_vf_wt", "na2o_vf_wt", "k2o_vf_wt", "h2o_wt"),
        outputs=(_temperature("putirka14", "T, Putirka 14", "olivine-saturated liquid at the convention's water"),),
        source="putirka2008",
        equation="eq. 14",
        status="from memory",
        calibration=_IN_OLIVINE_RANGE,
        standard_error="50 C",
        note=_RANGE_NOTE,
    ),
    Method(
        key="liquidus_putirka15",
        label="Putirka 2008, equation 15",
        function=_putirka15,
        inputs=("mgo_vf_wt", "feot_vf_wt", "na2o_vf_wt", "k2o_vf_wt", "h2o_wt", "conventions"),
        outputs=(
            _temperature(
                "putirka15", "T, Putirka 15", "olivine-saturated liquid at the convention's water and pressure"
            ),
        ),
        source="putirka2008",
        equation="eq. 15",
        status="from memory",
        calibration=_IN_OLIVINE_RANGE,
        standard_error="46-60 C",
        note=_RANGE_NOTE,
    ),
    Method(
        key="olivine_liquid_terms",
        label="olivine-liquid terms",
        function=_terms,
        inputs=MELT_INPUTS,
        outputs=(
            Quantity("olivine_d_mg", WORKSPACE, "D Mg", "1", "partition coefficient of Mg between olivine and melt"),
            Quantity("olivine_c_nm", WORKSPACE, "C NM", "1", "cation fraction of Mg, Fe, Ca and Mn"),
            Quantity("olivine_c_sio2", WORKSPACE, "C SiO2", "1", "cation fraction of Si"),
            Quantity("olivine_nf", WORKSPACE, "NF", "1", "3.5 ln(1 - C Al) + 7 ln(1 - C Ti)"),
        ),
        source="beattie1993",
        equation="D Mg, C NM and NF",
        status="from memory",
    ),
    Method(
        key="liquidus_putirka22",
        label="Putirka 2008, equation 22",
        function=_putirka22,
        inputs=(*_TERMS, "h2o_wt", "conventions"),
        outputs=(
            _temperature("putirka22", "T, Putirka 22", "olivine-liquid pair at the convention's water and pressure"),
        ),
        source="putirka2008",
        equation="eq. 22, D Mg predicted",
        status="from memory",
        calibration=_IN_OLIVINE_RANGE,
        standard_error="43 C (29 C hydrous)",
        note=_RANGE_NOTE,
    ),
    Method(
        key="liquidus_beattie",
        label="Beattie 1993",
        function=_beattie,
        inputs=(*_TERMS, "conventions"),
        outputs=(_temperature("beattie", "T, Beattie", "dry olivine-saturated liquid at the convention's pressure"),),
        source="beattie1993",
        equation="olivine saturation with predicted D Mg",
        status="from memory",
        calibration=_IN_OLIVINE_RANGE,
        standard_error="10 C at low pressure",
        note=_RANGE_NOTE + _DRY_NOTE,
    ),
    Method(
        key="liquidus_sugawara",
        label="Sugawara 2000",
        function=liquidus_sugawara,
        inputs=MELT_INPUTS,
        outputs=(_temperature("sugawara", "T, Sugawara", "dry olivine-saturated liquid at low pressure"),),
        source="sugawara2000",
        equation="olivine-liquid",
        status="from memory",
        calibration=_IN_OLIVINE_RANGE,
        standard_error="30 C",
        note=_RANGE_NOTE + _DRY_NOTE + " The pressure term is left out: its coefficient is not confirmed.",
    ),
    Method(
        key="liquidus_makhluf",
        label="Makhluf and others 2017",
        function=liquidus_makhluf,
        inputs=("h2o_wt",),
        outputs=(_temperature("makhluf", "T, Makhluf", "haplogranite liquidus at the convention's water, 1 GPa"),),
        source="makhluf2017",
        equation="T = -0.0995 w^3 + 5.0242 w^2 - 88.183 w + 1171.0",
        status="provisional",
        calibration=(Range("h2o_wt", 3.0, 12.0), Range("sio2_vf_wt", OLIVINE_SIO2_HIGH_WT, None)),
        note="Published for haplogranite at 10 kbar; that it stands for natural acid melts is provisional.",
    ),
    Method(
        key="liquidus_duan",
        label="Duan and others 2022",
        function=liquidus_duan,
        inputs=("sio2_vf_wt",),
        outputs=(_temperature("duan", "T, Duan", "magma temperature of granitoids from SiO2"),),
        source="duan2022",
        equation="T = -14.16 SiO2 + 1723",
        status="published",
        calibration=(Range("sio2_vf_wt", OLIVINE_SIO2_HIGH_WT, None),),
        note="For granitoids; the printed range was not seen, acid rocks are taken (common practice).",
    ),
)

WARNINGS = (
    *liquidus_choice.WARNINGS,
    *(
        Warning(
            f"{column.removesuffix('_c')}_not_a_liquid",
            column,
            column,
            "{value} C is not a temperature of this rock: it was not a liquid (cumulate or mantle)",
            _flagged,
            (column, "not_a_liquid"),
        )
        for column in _MODEL_COLUMNS
    ),
)
