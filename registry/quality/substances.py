"""One substance under several names: a certified FeOT beside a reported Fe2O3T, Mn beside MnO, wt% beside ppm."""

from __future__ import annotations

import re
from functools import cache

from registry.petrology.analytes import ANALYTES, WT_PERCENT_PER_UNIT
from registry.petrology.constants import ATOMIC_WEIGHT, formula_atoms, oxide_from_element

#: Total iron has names of its own; ``FeO`` and ``Fe2O3`` alone are the two forms of iron, which cannot be converted.
_TOTAL_IRON = {"Fe2O3T": 1.0 / oxide_from_element("Fe2O3"), "FeOT": 1.0 / oxide_from_element("FeO"), "Fe": 1.0}
_AS_REPORTED = {"FeO", "Fe2O3", "LOI", "Total", "H2O+", "H2O-", "H2O", "C_organic", "CO2", "SO3"}
#: Spellings of published tables.
_SPELLINGS = {"H2Op": "H2O+", "H2Om": "H2O-", "Stot": "S", "Ctot": "C", "Fe2O3tot": "Fe2O3T", "FeOtot": "FeOT"}


def analyte_symbol(text: str) -> str | None:
    """The register's symbol for an analyte as a certificate spells it, in any case; None where it has none."""
    text = text.strip()
    text = _SPELLINGS.get(text, text)
    if text in ANALYTES:
        return text
    squeezed = re.sub(r"[\s_()*]", "", text).casefold()
    return _by_case().get(squeezed)


@cache
def _by_case() -> dict[str, str]:
    return {symbol.casefold(): symbol for symbol in (*ANALYTES, *_SPELLINGS)}


@cache
def substance(analyte: str) -> tuple[str, float]:
    """(what is counted, its mass per mass of the analyte): ``MnO`` -> (``Mn``, 0.7745)."""
    if analyte in _TOTAL_IRON:
        return "total iron", _TOTAL_IRON[analyte]
    if analyte in _AS_REPORTED or analyte in ATOMIC_WEIGHT:
        return analyte, 1.0
    try:
        element = next(iter(formula_atoms(analyte)))
        return element, 1.0 / oxide_from_element(analyte)
    except ValueError:
        return analyte, 1.0


def conversion(analyte: str, unit: str, to_analyte: str, to_unit: str) -> float | None:
    """The factor from a value of one analyte and unit to another's; None where they are not one substance."""
    have, share = substance(analyte)
    want, wanted_share = substance(to_analyte)
    if have != want:
        return None
    return share / wanted_share * WT_PERCENT_PER_UNIT[unit] / WT_PERCENT_PER_UNIT[to_unit]
