"""Records of zircon, apatite and monazite saturation and of what makes them usable."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.petrology.catalogue.records import Cause, Method, Quantity, Range, Warning
from registry.petrology.saturation import (
    ZIRCON_M_HIGH,
    ZIRCON_M_LOW,
    ZIRCON_SIO2_LOW_WT,
    ZIRCON_WH83_HIGH_C,
    ZIRCON_WH83_LOW_C,
    saturation_hfse,
    zircon_m,
    zircon_saturation_boehnke,
    zircon_saturation_is_usable,
    zircon_saturation_shao,
    zircon_saturation_watson_harrison,
    zircon_zr_is_total,
)
from registry.petrology.saturation_phosphates import (
    apatite_saturation_harrison_watson,
    monazite_d,
    monazite_saturation_maimaiti,
    monazite_saturation_montel,
)

_SHEET = "melt_sheet"
#: Quantities that later methods and targets read but no view shows.
WORKSPACE = "workspace"
#: The volatile-free melt, all iron as FeO, in the order of the functions' arguments.
MELT_INPUTS = (
    "sio2_vf_wt", "tio2_vf_wt", "al2o3_vf_wt", "feot_vf_wt", "mno_vf_wt", "mgo_vf_wt", "cao_vf_wt", "na2o_vf_wt",
    "k2o_vf_wt", "p2o5_vf_wt",
)  # fmt: skip
_ZIRCON_RANGES = (
    Range("zircon_m", ZIRCON_M_LOW, ZIRCON_M_HIGH),
    Range("sio2_vf_wt", ZIRCON_SIO2_LOW_WT, None),
    Range("a_nk", 1.0, None),
)
_LREE = ("la_ppm", "ce_ppm", "pr_ppm", "nd_ppm", "sm_ppm")


def _temperature(name: str, label: str, meaning: str) -> Quantity:
    return Quantity(name, _SHEET, label, "C", meaning, -200.0, 5000.0)


def _usable(m: Any, sio2: Any, a_nk: Any, digestion: Any) -> Any:
    return zircon_saturation_is_usable(m, sio2, a_nk, zircon_zr_is_total(digestion))


def _apatite_usable(m: Any, sio2: Any, a_nk: Any) -> Any:
    return zircon_saturation_is_usable(m, sio2, a_nk, True)


def _monazite_d(*values: Any) -> Any:
    lithium = values[-1]
    arguments = (*values[:-1], np.where(np.isnan(lithium), 0.0, lithium))
    return monazite_d(*arguments)


def _maimaiti(la: Any, ce: Any, pr: Any, nd: Any, sm: Any, d: Any, h2o: Any, conventions: Any) -> Any:
    return monazite_saturation_maimaiti(la, ce, pr, nd, sm, d, h2o, conventions.pressure_gpa)


def _no_phosphorus(p2o5: Any) -> Any:
    return np.isnan(p2o5)


def _partial_digestion(temperature: Any, digestion: Any) -> Any:
    return ~np.isnan(temperature) & ~zircon_zr_is_total(digestion)


def _extrapolated(temperature: Any) -> Any:
    return (temperature < ZIRCON_WH83_LOW_C) | (temperature > ZIRCON_WH83_HIGH_C)


def _no_lithium(d: Any, lithium: Any) -> Any:
    return ~np.isnan(d) & np.isnan(lithium)


METHODS = (
    Method(
        key="zircon_m",
        label="melt parameter M",
        function=zircon_m,
        inputs=MELT_INPUTS,
        outputs=(
            Quantity(
                "zircon_m", WORKSPACE, "M", "1", "(Na + K + 2 Ca)/(Al Si), cation fractions of the melt", 0.0, 1e6
            ),
        ),
        source="watson1983",
        equation="definition of M",
        status="from memory",
        note="Cation fractions of the volatile-free analysis; iron counts as cations whatever its state.",
    ),
    Method(
        key="zircon_saturation_wh83",
        label="zircon saturation (Watson and Harrison 1983)",
        function=zircon_saturation_watson_harrison,
        inputs=("zr_ppm", "zircon_m"),
        outputs=(
            _temperature(
                "zircon_saturation_wh83_c",
                "zircon saturation, WH83",
                "temperature at which the rock taken as a melt is just saturated in zircon",
            ),
        ),
        source="watson1983",
        equation="ln D = -3.80 - 0.85 (M - 1) + 12900/T",
        status="from memory",
        calibration=_ZIRCON_RANGES,
        note="Calibrated 750-1020 C, M 0.9-1.7, used to 1.9; Zr in zircon 497644 ppm. Inherited zircon raises it.",
    ),
    Method(
        key="zircon_saturation_b13",
        label="zircon saturation (Boehnke and others 2013)",
        function=zircon_saturation_boehnke,
        inputs=("zr_ppm", "zircon_m"),
        outputs=(
            _temperature(
                "zircon_saturation_b13_c",
                "zircon saturation, B13",
                "the same by the recalibration, some 50 C lower; the gap between the two is real",
            ),
        ),
        source="boehnke2013",
        equation="ln D = 10108/T - 1.16 (M - 1) - 1.48",
        status="from memory",
        calibration=_ZIRCON_RANGES,
        note="Range of temperature not stated (not seen), so no value is marked as extrapolated; M, SiO2 and A/NK as "
        "for the first model.",
    ),
    Method(
        key="zircon_saturation_shao",
        label="zircon saturation (Shao and others 2020)",
        function=zircon_saturation_shao,
        inputs=("zr_ppm", "zircon_m"),
        outputs=(_temperature("zircon_saturation_shao_c", "zircon saturation, Shao", "the same by a third model"),),
        source="shao2020",
        equation="ln Zr = 14.297 + 0.964 M - 11113/T",
        status="published",
        calibration=_ZIRCON_RANGES,
        standard_error="0.308, 0.066 and 374 on the three coefficients",
        note="Calibrated 750-1400 C.",
    ),
    Method(
        key="zircon_saturation_usable",
        label="zircon saturation may be used",
        function=_usable,
        inputs=("zircon_m", "sio2_vf_wt", "a_nk", "digestion:zr_ppm"),
        outputs=(
            Quantity(
                "zircon_saturation_usable",
                WORKSPACE,
                "zircon T usable",
                "1",
                "M 0.9-1.9, SiO2 from 63 wt%, A/NK from 1 and Zr by a total digestion",
            ),
        ),
        source="watson1983",
        equation="range of the calibration",
        status="common practice",
    ),
    Method(
        key="saturation_hfse",
        label="Zr-Hf temperature of granites",
        function=saturation_hfse,
        inputs=("zr_ppm", "hf_ppm"),
        outputs=(_temperature("saturation_hfse_c", "Zr-Hf temperature", "melt temperature from Zr and Hf"),),
        source="hfse2022",
        equation="T = -15993/(ln Zr + ln Hf - 21.668)",
        status="published",
        calibration=(Range("zircon_m", None, 2.0), Range("sio2_vf_wt", 63.0, None)),
    ),
    Method(
        key="apatite_saturation",
        label="apatite saturation (Harrison and Watson 1984)",
        function=apatite_saturation_harrison_watson,
        inputs=("sio2_vf_wt", "p2o5_vf_wt"),
        outputs=(
            _temperature(
                "apatite_saturation_c",
                "apatite saturation",
                "temperature at which the rock taken as a melt is just saturated in apatite",
            ),
        ),
        source="harrison1984",
        equation="ln D = (8400 + 26400 (S - 0.5))/T - (3.1 + 12.4 (S - 0.5))",
        status="from memory",
        calibration=(Range("sio2_vf_wt", 45.0, 75.0), Range("a_cnk", None, 1.1)),
        note="P2O5 in apatite 42 wt%. Low for felsic melts; corrections for peraluminous melts are separate functions.",
        causes=(Cause("missing_input", "", _no_phosphorus, ("p2o5_wt",)),),
    ),
    Method(
        key="apatite_saturation_usable",
        label="apatite saturation may be used",
        function=_apatite_usable,
        inputs=("zircon_m", "sio2_vf_wt", "a_nk"),
        outputs=(
            Quantity(
                "apatite_saturation_usable",
                WORKSPACE,
                "apatite T usable",
                "1",
                "M 0.9-1.9, SiO2 from 63 wt% and A/NK from 1",
            ),
        ),
        source="harrison1984",
        equation="range within which it may enter an argument",
        status="common practice",
    ),
    Method(
        key="monazite_d",
        label="melt parameter D",
        function=_monazite_d,
        inputs=(*MELT_INPUTS, "li_ppm"),
        optional=("li_ppm",),
        outputs=(
            Quantity(
                "monazite_d", WORKSPACE, "D", "1", "(Na + K + Li + 2 Ca)/(Al (Al + Si)), cation fractions", 0.0, 1e6
            ),
        ),
        source="montel1993",
        equation="definition of D",
        status="from memory",
    ),
    Method(
        key="monazite_saturation",
        label="monazite saturation (Montel 1993)",
        function=monazite_saturation_montel,
        inputs=(*_LREE, "gd_ppm", "monazite_d", "h2o_wt"),
        outputs=(
            _temperature(
                "monazite_saturation_c",
                "monazite saturation, Montel",
                "temperature at which the rock taken as a melt is just saturated in monazite",
            ),
        ),
        source="montel1993",
        equation="ln REE = 9.50 + 2.34 D + 0.3879 sqrt(H2O) - 13318/T",
        status="from memory",
        calibration=(Range("sio2_vf_wt", 63.0, None),),
        note="La, Ce, Pr, Nd, Sm and Gd are 0.83 of monazite; water by the convention. The range stands for felsic "
        "melts (common practice; the calibrated range was not seen).",
    ),
    Method(
        key="monazite_saturation_maimaiti",
        label="monazite saturation (Maimaiti and others 2019)",
        function=_maimaiti,
        inputs=(*_LREE, "monazite_d", "h2o_wt", "conventions"),
        outputs=(
            _temperature(
                "monazite_saturation_maimaiti_c", "monazite saturation, Maimaiti", "the same by a later model"
            ),
        ),
        source="maimaiti2019",
        equation="ln LREE = 12.77 + 1.52 D + 0.44 sqrt(H2O) - 9934/T - 36.79 P/T + ln 0.83",
        status="published",
        calibration=(Range("sio2_vf_wt", 63.0, None),),
        note="La to Sm; water and pressure by the convention.",
    ),
)

WARNINGS = (
    *(
        Warning(
            f"{column.removesuffix('_c')}_partial_digestion",
            column,
            "zr_ppm",
            "Zr {value} ppm is not from a total digestion: zircon may have stayed undissolved, the temperature is a "
            "minimum and enters no verdict",
            _partial_digestion,
            (column, "digestion:zr_ppm"),
        )
        for column in (
            "zircon_saturation_wh83_c",
            "zircon_saturation_b13_c",
            "zircon_saturation_shao_c",
            "saturation_hfse_c",
        )
    ),
    Warning(
        "zircon_saturation_wh83_extrapolated",
        "zircon_saturation_wh83_c",
        "zircon_saturation_wh83_c",
        "{value} C lies outside the 750-1020 C of the experiments",
        _extrapolated,
        ("zircon_saturation_wh83_c",),
    ),
    Warning(
        "monazite_saturation_without_lithium",
        "monazite_saturation_c",
        None,
        "Li was not reported and counts as zero; in a lithium-rich melt the temperature is lower",
        _no_lithium,
        ("monazite_saturation_c", "li_ppm"),
    ),
)
