"""Remarks on analyses that do not agree with themselves: common practice of checking a laboratory's figures."""

from __future__ import annotations

from functools import partial
from typing import Any

import numpy as np

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.catalogue.records import Method, Warning
from registry.petrology.consistency import (
    DUPLICATE_PERCENT,
    NB_TA_LIMITS,
    OXIDE_AND_ELEMENT,
    OXYGEN_PER_FEO,
    ROUGH_FACTOR,
    SMOOTH_RARE_EARTHS,
    TOTALS_DIFFER_WT,
    ZR_HF_LIMITS,
    disagreement_percent,
    element_from_oxide,
    neighbours_of,
    outside,
    rare_earth_residual,
)
from registry.petrology.digestion import CARRIES, MINIMUM
from registry.petrology.plausible import JUDGED_BY_TRACES, PLAUSIBLE_PPM, is_implausible

METHODS: tuple[Method, ...] = ()

#: Weighing error of a loss on ignition, wt%. Common practice, no source.
_WEIGHING_WT = 0.1


def _not_smooth(*columns: Any, symbols: tuple[str, ...]) -> Any:
    """The first of the symbols off the line between the others; ``columns`` are their ppm, then their qualifiers."""
    half = len(symbols)
    own = columns[0]
    if np.isnan(own).all():
        return np.zeros(np.shape(own), dtype=bool)
    ppm = {
        symbol: np.where(signs > 0, np.nan, column) if signs.any() else column
        for symbol, column, signs in zip(symbols, columns[:half], columns[half:], strict=True)
    }
    return np.abs(rare_earth_residual(symbols[0], ppm)) > np.log10(ROUGH_FACTOR)


def _smoothness(symbol: str) -> Warning:
    lighter, heavier = neighbours_of(symbol)
    symbols = (symbol, *lighter, *heavier)
    columns = tuple(f"{each.lower()}_ppm" for each in symbols)
    beside = ", ".join(f"{each} {{{each.lower()}_ppm}}" for each in (*reversed(lighter), *heavier))
    return Warning(
        f"{symbol.lower()}_not_smooth",
        columns[0],
        columns[0],
        f"{symbol} {{value}} ppm lies off the line between its chondrite-normalised neighbours ({beside}) by more than "
        f"a factor of {ROUGH_FACTOR:g}: a slip, an interference or a value near the detection limit; ask for a repeat",
        partial(_not_smooth, symbols=symbols),
        (*columns, *(f"qualifier:{column}" for column in columns)),
    )


def _ratio_outside(value: Any, first: Any, second: Any, limits: tuple[float, float]) -> Any:
    return outside(value, limits) & (first == 0) & (second == 0)


def _ratio(quantity: str, label: str, columns: tuple[str, str], limits: tuple[float, float]) -> Warning:
    both = " over ".join(f"{{{column}}}" for column in columns)
    return Warning(
        f"{quantity}_outside_nature",
        quantity,
        quantity,
        f"{label} {{value}} ({both} ppm) lies outside {limits[0]:g} to {limits[1]:g}, where nearly all igneous "
        "rocks fall (common practice, no source): check both elements, their units and the digestion before "
        "reading petrology into it",
        partial(_ratio_outside, limits=limits),
        (quantity, *(f"qualifier:{column}" for column in columns)),
    )


def _metal_disagrees(element: Any, oxide: Any, digestion: Any, *signs: Any, column: str, formula: str) -> Any:
    """Element and oxide differ, unless a partial digestion explains that the element is the lower."""
    if np.isnan(oxide).all():
        return np.zeros(np.shape(element), dtype=bool)
    converted = element_from_oxide(oxide, formula)
    differ = disagreement_percent(element, converted) > DUPLICATE_PERCENT
    explained = (CARRIES[digestion, CHOSEN_INDEX[column]] == MINIMUM) & (element < converted)
    return differ & ~explained & (signs[0] == 0) & (signs[1] == 0)


def _one_metal(element: str, oxide: str, formula: str) -> Warning:
    symbol = element.removesuffix("_ppm").capitalize()
    return Warning(
        f"{element.removesuffix('_ppm')}_disagrees_with_oxide",
        element,
        element,
        f"{symbol} {{value}} ppm and the {formula} of the same sample, {{{oxide}}} wt%, differ by more than "
        f"{DUPLICATE_PERCENT:g} % (common practice): one of the two units or columns is wrong, or they come from "
        "different portions",
        partial(_metal_disagrees, column=element, formula=formula),
        (element, oxide, f"digestion:{element}", f"qualifier:{element}", f"qualifier:{oxide}"),
    )


def _no_rock_holds(ppm: Any, sign: Any, digestion: Any, mgo: Any, sio2: Any, *, symbol: str) -> Any:
    """Outside what rocks hold; too little by a digestion that leaves part behind is explained by it."""
    if np.isnan(ppm).all():
        return np.zeros(np.shape(ppm), dtype=bool)
    low = PLAUSIBLE_PPM[symbol][0]
    explained = (ppm < low) & (CARRIES[digestion, CHOSEN_INDEX[f"{symbol.lower()}_ppm"]] == MINIMUM)
    return is_implausible(ppm, symbol, mgo, sio2) & (sign == 0) & ~explained


def _implausible(symbol: str) -> Warning:
    column = f"{symbol.lower()}_ppm"
    low, high = PLAUSIBLE_PPM[symbol]
    return Warning(
        f"{symbol.lower()}_implausible",
        column,
        column,
        f"{symbol} {{value}} ppm lies outside {low:g} to {high:,.0f} ppm, what silicate rocks hold (common practice, "
        "no source): check whether the laboratory's unit is %, ppm or ppb before trusting a verdict that rests on it",
        partial(_no_rock_holds, symbol=symbol),
        (column, f"qualifier:{column}", f"digestion:{column}", "mgo_wt", "sio2_wt"),
    )


def _gain_on_ignition(loi: Any, iron: Any) -> Any:
    return (loi < 0.0) & ~_more_than_iron_gains(loi, iron)


def _more_than_iron_gains(loi: Any, iron: Any) -> Any:
    """A gain beyond the oxidation of all iron; of an unknown iron content nothing can be said."""
    return loi < -OXYGEN_PER_FEO * iron - _WEIGHING_WT


def _another_total(reported: Any, summed: Any) -> Any:
    return np.abs(reported - summed) > TOTALS_DIFFER_WT


WARNINGS = (
    Warning(
        "total_differs_from_reported",
        "total_reported_wt",
        "total_reported_wt",
        f"the laboratory's total {{value}} wt% and the sum of what was read, {{total_wt}} wt%, differ by more than "
        f"{TOTALS_DIFFER_WT:g} (common practice, no source): a column is missing, was read in another unit or is "
        "counted by the laboratory alone",
        _another_total,
        ("total_reported_wt", "total_wt"),
    ),
    *(_smoothness(symbol) for symbol in SMOOTH_RARE_EARTHS if neighbours_of(symbol)[0]),
    _ratio("zr_hf", "Zr/Hf", ("zr_ppm", "hf_ppm"), ZR_HF_LIMITS),
    _ratio("nb_ta", "Nb/Ta", ("nb_ppm", "ta_ppm"), NB_TA_LIMITS),
    *(_one_metal(element, oxide, formula) for element, (oxide, formula) in OXIDE_AND_ELEMENT.items()),
    *(_implausible(symbol) for symbol in JUDGED_BY_TRACES),
    Warning(
        "loi_negative",
        "loi_wt",
        "loi_wt",
        f"loss on ignition {{value}} wt% is a gain: ferrous iron took up oxygen ({OXYGEN_PER_FEO:.4f} of its FeO at "
        "most), so that the volatiles are that much more than stated",
        _gain_on_ignition,
        ("loi_wt", "feot_wt"),
    ),
    Warning(
        "loi_below_oxidation",
        "loi_wt",
        "loi_wt",
        f"loss on ignition {{value}} wt% is a larger gain than the oxidation of all its iron ({OXYGEN_PER_FEO:.4f} of "
        "FeO {feot_wt} wt%) makes: check the sign and the weighing",
        _more_than_iron_gains,
        ("loi_wt", "feot_wt"),
    ),
)
