"""Whole columns of results against what rocks hold: a unit wrong by a thousand shows in the median."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from registry.petrology.plausible import LEAST_MAJOR_WT, PLAUSIBLE_PPM, is_implausible
from registry.quality.assessment import Column, carried_wholly
from registry.quality.substances import conversion, substance

#: Of fewer results than this the median says little. Common practice, no source.
FEWEST = 3
#: So many results of a column, evenly taken from all of it, stand for the others.
MOST_LOOKED_AT = 100_000


def implausible_columns(columns: Sequence[Column], values: Any, qualifiers: Any) -> list[str]:
    """Sentences on columns whose median lies outside any rock; ``values``, ``qualifiers`` (n, m), plain or spooled.

    Columns of which half the results or more lie beyond the laboratory's limits are passed over; of a digestion that
    leaves part behind only the upper bound counts, and so it is in files of peridotite, vein quartz or ore.
    """
    reports_silica = any(column.analyte == "SiO2" for column in columns)
    mgo = _median_wt(columns, values, qualifiers, "Mg", "MgO")
    sio2 = _median_wt(columns, values, qualifiers, "Si", "SiO2")
    told = []
    for place, column in enumerate(columns):
        told += _too_little(column, place, values, qualifiers, reports_silica)
        element = substance(column.analyte)[0]
        factor = conversion(column.analyte, column.unit, element, "ppm") if column.unit else None
        if element not in PLAUSIBLE_PPM or factor is None:
            continue
        median = _median(values, qualifiers, place)
        if np.isnan(median):
            continue
        low, high = PLAUSIBLE_PPM[element]
        if median * factor < low and not carried_wholly(column, reports_silica):
            continue
        if is_implausible(np.array([median * factor]), element, np.array([mgo]), np.array([sio2]))[0]:
            told.append(
                f"{column.analyte} ({column.unit}): the median is {median:.4g} {column.unit}, rocks hold about "
                f"{_plain(low / factor)} to {_plain(high / factor)} {column.unit}: is the unit %, ppm or ppb? "
                "Verdicts on these samples rest on it"
            )
    return told


def _too_little(column: Column, place: int, values: Any, qualifiers: Any, reports_silica: bool) -> list[str]:
    """A sentence on a column of a major oxide, or of its metal, of which the median is next to nothing."""
    if not column.unit or not carried_wholly(column, reports_silica):
        return []
    for oxide, least in LEAST_MAJOR_WT.items():
        factor = conversion(column.analyte, column.unit, oxide, "wt%")
        if factor is None:
            continue
        median = _median(values, qualifiers, place)
        if median * factor >= least or np.isnan(median):
            return []
        return [
            f"{column.analyte} ({column.unit}): the median is {median:.4g} {column.unit}, {median * factor:.2g} wt% of "
            f"{oxide}; all but ores and carbonates hold more than {least:g} wt%: is the unit %, or a fraction of one? "
            "Verdicts on these samples rest on it"
        ]
    return []


def _plain(number: float) -> str:
    return f"{number:,.0f}" if number >= 1000.0 else f"{number:.2g}" if number < 100.0 else f"{number:.0f}"


def _median_wt(columns: Sequence[Column], values: Any, qualifiers: Any, element: str, oxide: str) -> float:
    for place, column in enumerate(columns):
        if column.unit and substance(column.analyte)[0] == element:
            factor = conversion(column.analyte, column.unit, oxide, "wt%")
            return float("nan") if factor is None else _median(values, qualifiers, place) * factor
    return float("nan")


def _median(values: Any, qualifiers: Any, place: int) -> float:
    """The median of the positive results within the laboratory's limits; NaN of too few or mostly censored ones."""
    step = len(values) // MOST_LOOKED_AT + 1
    numbers, signs = values[:, place][::step], qualifiers[:, place][::step]
    censored = int((signs > 0).sum())
    measured = numbers[(signs == 0) & (numbers > 0.0)]
    if len(measured) < FEWEST or censored >= len(measured):
        return float("nan")
    return float(np.median(measured))
