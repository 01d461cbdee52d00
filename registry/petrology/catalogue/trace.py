"""Records of the trace-element ratios, the anomalies and the remarks on ratios of two digestions or censored values."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import Any

import numpy as np

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.catalogue.records import Cause, Method, Quantity, Warning
from registry.petrology.digestion import CARRIES, FUSION, INAA, MINIMUM, XRF
from registry.petrology.trace import RATIOS, ce_anomaly, element_ratio, eu_anomaly, zr_nb_ce_y

_SHEET = "index_sheet"
ZERO_DENOMINATOR = "the denominator is zero: a ratio is not defined"

#: Digestions that count as one kind: total methods of the whole rock.
_ONE_KIND = (FUSION, XRF, INAA)


def _denominator_is_zero(denominator: Any) -> Any:
    return denominator <= 0.0


def _any_is_zero(*columns: Any) -> Any:
    return np.logical_or.reduce([column <= 0.0 for column in columns])


def _one_of(digestion: Any, codes: tuple[int, ...]) -> Any:
    mask = np.zeros(np.shape(digestion), dtype=bool)
    for code in codes:
        mask |= digestion == code
    return mask


def _two_digestions(value: Any, *digestions: Any) -> Any:
    first, *others = digestions
    differ = np.logical_or.reduce([first != other for other in others])
    if not differ.any():
        return differ
    known = np.logical_and.reduce([digestion > 0 for digestion in digestions])
    one_kind = np.logical_and.reduce([_one_of(digestion, _ONE_KIND) for digestion in digestions])
    return differ & known & ~one_kind & ~np.isnan(value)


def _from_censored(value: Any, *qualifiers: Any) -> Any:
    return np.logical_or.reduce([qualifier > 0 for qualifier in qualifiers]) & ~np.isnan(value)


def _from_partial(value: Any, *digestions: Any, partial_codes: tuple[tuple[int, ...], ...]) -> Any:
    minimum = [_one_of(digestion, codes) for digestion, codes in zip(digestions, partial_codes, strict=True)]
    return np.logical_or.reduce(minimum) & ~np.isnan(value)


def measured_together(quantity: str, label: str, columns: tuple[str, ...]) -> tuple[Warning, ...]:
    """Remarks on a quantity of several measured columns: two digestions, a partial one, a censored member."""
    digestions = tuple(f"digestion:{column}" for column in columns)
    minimum = tuple(tuple(np.flatnonzero(CARRIES[:, CHOSEN_INDEX[column]] == MINIMUM).tolist()) for column in columns)
    of_minimum = Warning(
        f"{quantity}_partial_digestion",
        quantity,
        quantity,
        f"{label} {{value}} rests on a digestion that leaves part of an element in the residue: that value is a "
        "minimum, so the true figure may lie on either side; re-assay by fusion",
        partial(_from_partial, partial_codes=minimum),
        (quantity, *digestions),
    )
    return (
        *((of_minimum,) if any(minimum) else ()),  # alkalis and light rare earths go wholly into every solution
        Warning(
            f"{quantity}_two_digestions",
            quantity,
            quantity,
            f"{label} {{value}} joins values of two digestions (fusion, XRF and INAA count as one); "
            "re-assay both by one total method before leaning on it",
            _two_digestions,
            (quantity, *digestions),
        ),
        Warning(
            f"{quantity}_censored",
            quantity,
            quantity,
            f"{label} {{value}} rests on a value outside the laboratory's limits, for which the convention's "
            "substitute stands; verdicts use the interval instead",
            _from_censored,
            (quantity, *(f"qualifier:{column}" for column in columns)),
        ),
    )


#: quantity: label, meaning, source, equation, status.
_RATIO_RECORDS: dict[str, tuple[str, str, str, str, str]] = {
    "la_yb": (
        "La/Yb", "La over Yb, ppm: steepness of the rare earths, raw", "richards2007", "definition by mass",
        "published",
    ),
    "la_yb_n": (
        "(La/Yb)N", "La over Yb, each over CI chondrite", "mcdonough1995", "table 1, CI chondrite", "published",
    ),
    "k_rb": (
        "K/Rb", "K over Rb, ppm: falls as granite evolves", "steiner2019", "definition by mass", "published",
    ),
    "rb_sr": (
        "Rb/Sr", "Rb over Sr, ppm: rises as feldspar is taken out", "lehmann1990", "definition by mass", "published",
    ),
    "nb_ta": (
        "Nb/Ta", "Nb over Ta, ppm: 5 parts evolved peraluminous granites", "ballouard2016", "definition by mass",
        "published",
    ),
    "zr_hf": (
        "Zr/Hf", "Zr over Hf, ppm: 26-46 where charge and radius control it", "bau1996", "definition by mass",
        "published",
    ),
    "sr_y": (
        "Sr/Y", "Sr over Y, ppm: high where plagioclase was suppressed", "richards2007", "definition by mass",
        "published",
    ),
    "v_sc": (
        "V/Sc", "V over Sc, ppm", "loucks2014", "definition by mass", "published",
    ),
    "ga_al_10000": (
        "10000 Ga/Al", "10,000 times Ga over Al, ppm: above 2.6 in A-type granites", "whalen1987",
        "definition by mass", "published",
    ),
    "cu_zr": (
        "Cu/Zr", "Cu over Zr, ppm: low where copper went into sulphide elsewhere", "maier1998", "definition by mass",
        "from memory",
    ),
    "cu_pd": (
        "Cu/Pd", "Cu over Pd, ppm: mantle about 7,000; high after sulphide segregation", "maier1998",
        "definition by mass", "published",
    ),
    "pd_pt": (
        "Pd/Pt", "Pd over Pt, ppm", "park2019", "definition by mass", "published",
    ),
    "zr_tio2": (
        "Zr/TiO2", "Zr over TiO2, both in ppm: differentiation seen through alteration", "winchester1977",
        "definition by mass", "from memory",
    ),
    "nb_y": (
        "Nb/Y", "Nb over Y, ppm: alkalinity seen through alteration, above 0.67 alkaline", "winchester1977",
        "definition by mass", "from memory",
    ),
    "al2o3_tio2": (
        "Al2O3/TiO2", "Al2O3 over TiO2, wt%: a fingerprint of immobile elements", "hallberg1984",
        "definition by mass", "from memory",
    ),
    "ti_zr": (
        "Ti/Zr", "Ti over Zr, ppm: rock type seen through alteration", "hallberg1984", "definition by mass",
        "from memory",
    ),
    "th_yb": (
        "Th/Yb", "Th over Yb, ppm: magmatic affinity seen through alteration", "ross2009", "definition by mass",
        "from memory",
    ),
    "zr_y": (
        "Zr/Y", "Zr over Y, ppm: magmatic affinity seen through alteration", "ross2009", "definition by mass",
        "from memory",
    ),
    "y_nb": (
        "Y/Nb", "Y over Nb, ppm: parts the two groups of A-type granites", "eby1992", "definition by mass",
        "from memory",
    ),
    "y_ho": (
        "Y/Ho", "Y over Ho, ppm: 24-34 where charge and radius control it", "bau1996", "definition by mass",
        "published",
    ),
}  # fmt: skip


def _ratio_method(quantity: str) -> Method:
    numerator, denominator, _ = RATIOS[quantity]
    label, meaning, source, equation, status = _RATIO_RECORDS[quantity]
    function: Callable[..., Any] = partial(element_ratio, quantity)
    return Method(
        key=quantity,
        label=label,
        function=function,
        inputs=(numerator, denominator),
        outputs=(Quantity(quantity, _SHEET, label, "1", meaning, 0.0),),
        source=source,
        equation=equation,
        status=status,
        standard_error="that of the two analyses",
        note="Defined for any rock.",
        causes=(Cause("zero_denominator", ZERO_DENOMINATOR, _denominator_is_zero, (denominator,)),),
    )


def _anomaly_method(quantity: str, label: str, function: Callable[..., Any], columns: tuple[str, ...]) -> Method:
    return Method(
        key=quantity,
        label=label,
        function=function,
        inputs=columns,
        outputs=(
            Quantity(quantity, _SHEET, label, "1", f"{label}, geometric mean of the neighbours, CI chondrite", 0.0),
        ),
        source="mcdonough1995",
        equation="CI values of table 1; geometric mean after Taylor and McLennan 1985",
        status="published",
        standard_error="that of the three analyses",
        note="The arithmetic mean gives a lower Eu/Eu* (0.594 for 0.613) [taylor1985]. C1 values of another set "
        "[sun1989] must not be mixed in. Defined for any rock.",
        causes=(Cause("zero_denominator", ZERO_DENOMINATOR, _any_is_zero, columns[1:]),),
    )


_EU, _CE = ("eu_ppm", "sm_ppm", "gd_ppm"), ("ce_ppm", "la_ppm", "pr_ppm")
_SUM = ("zr_ppm", "nb_ppm", "ce_ppm", "y_ppm")

METHODS = (
    *(_ratio_method(quantity) for quantity in RATIOS),
    _anomaly_method("eu_anomaly", "Eu/Eu*", eu_anomaly, _EU),
    _anomaly_method("ce_anomaly", "Ce/Ce*", ce_anomaly, _CE),
    Method(
        key="zr_nb_ce_y",
        label="Zr + Nb + Ce + Y",
        function=zr_nb_ce_y,
        inputs=_SUM,
        outputs=(
            Quantity("zr_nb_ce_y", _SHEET, "Zr + Nb + Ce + Y", "ppm", "sum that is high in A-type granites", 0.0),
        ),
        source="whalen1987",
        equation="sum by mass",
        status="published",
        standard_error="that of the four analyses",
        note="Defined for any rock.",
    ),
)


def _altered(value: Any, loi: Any, conventions: Any) -> Any:
    return (loi > conventions.loi_warn_wt) & ~np.isnan(value)


def _strontium_warning(quantity: str, label: str) -> Warning:
    return Warning(
        f"{quantity}_altered",
        quantity,
        "loi_wt",
        f"LOI is {{value}} wt%: alteration moves strontium and alkalis, {label} may not be the magma's",
        _altered,
        (quantity, "loi_wt", "conventions"),
    )


#: ppm below which one printed decimal of a denominator moves a ratio much. Common practice, no source.
TA_LOW_PPM, HF_LOW_PPM = 0.5, 1.0


def _below(limit: float, value: Any, denominator: Any) -> Any:
    return (denominator < limit) & ~np.isnan(value)


def _rounding_warning(quantity: str, column: str, symbol: str, limit: float) -> Warning:
    return Warning(
        f"{quantity}_low_{symbol.lower()}",
        quantity,
        column,
        f"{symbol} {{value}} ppm is so low that its rounding moves {_RATIO_RECORDS[quantity][0]}",
        partial(_below, limit),
        (quantity, column),
    )


WARNINGS = (
    _rounding_warning("nb_ta", "ta_ppm", "Ta", TA_LOW_PPM),
    _rounding_warning("zr_hf", "hf_ppm", "Hf", HF_LOW_PPM),
    *(
        warning
        for quantity, (numerator, denominator, _) in RATIOS.items()
        for warning in measured_together(quantity, _RATIO_RECORDS[quantity][0], (numerator, denominator))
    ),
    *measured_together("eu_anomaly", "Eu/Eu*", _EU),
    *measured_together("ce_anomaly", "Ce/Ce*", _CE),
    *measured_together("zr_nb_ce_y", "Zr + Nb + Ce + Y", _SUM),
    _strontium_warning("sr_y", "Sr/Y"),
    _strontium_warning("rb_sr", "Rb/Sr"),
)
