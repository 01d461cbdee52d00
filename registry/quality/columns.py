"""Columns of one file that report the same metal twice (MnO and Mn, Fe2O3T and Fe): do they agree?"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from registry.petrology.consistency import DUPLICATE_PERCENT, disagreement_percent
from registry.petrology.quotients import Floats
from registry.quality.assessment import Column, carried_wholly
from registry.quality.substances import conversion, substance

#: Below so many detection limits two results say little about each other. Common practice, no source.
DETECTION_LIMITS = 10.0
#: Up to so many columns of one substance are compared pair by pair, more of them all at once.
PAIRWISE = 6


def disagreeing_columns(
    columns: Sequence[Column], values: Floats, qualifiers: NDArray[np.uint8], line_no: NDArray[np.int64]
) -> list[str]:
    """Sentences on pairs of columns of one substance that differ by more than 10 % in some line (common practice).

    ``values`` and ``qualifiers`` (n, m) as reported. Columns by a digestion that leaves part behind are not compared,
    nor results beyond the laboratory's limits or below ten detection limits.
    """
    reports_silica = any(column.analyte == "SiO2" for column in columns)
    groups: dict[str, list[int]] = {}
    for position, column in enumerate(columns):
        if carried_wholly(column, reports_silica):
            groups.setdefault(substance(column.analyte)[0], []).append(position)
    told = []
    for positions in groups.values():
        if len(positions) > PAIRWISE:
            told += _compare_many(columns, positions, values, qualifiers, line_no)
            continue
        for first, second in combinations(positions, 2):
            one, other = columns[first], columns[second]
            factor = conversion(other.analyte, other.unit, one.analyte, one.unit)
            if factor is None:
                continue
            told += _compare(one, other, values[:, first], values[:, second] * factor,
                             (qualifiers[:, first] == 0) & (qualifiers[:, second] == 0), factor, line_no)  # fmt: skip
    return told


def _compare_many(
    columns: Sequence[Column],
    positions: Sequence[int],
    values: Floats,
    qualifiers: NDArray[np.uint8],
    line_no: NDArray[np.int64],
) -> list[str]:
    """The least against the greatest of a line, where there are too many columns for a sentence on each pair."""
    one = columns[positions[0]]
    factors = [conversion(columns[at].analyte, columns[at].unit, one.analyte, one.unit) or np.nan for at in positions]
    limits = [(columns[at].detection_limit or 0.0) * factor for at, factor in zip(positions, factors, strict=True)]
    converted = values[:, positions] * factors
    usable = (qualifiers[:, positions] == 0) & (converted > DETECTION_LIMITS * np.nanmax(limits, initial=0.0))
    least = np.where(usable, converted, np.inf)
    most = np.where(usable, converted, -np.inf)
    several = usable.sum(axis=1) > 1
    difference = np.full(len(values), np.nan)
    difference[several] = disagreement_percent(least[several].min(axis=1), most[several].max(axis=1))
    differ = difference > DUPLICATE_PERCENT
    if not differ.any():
        return []
    worst = int(np.nanargmax(difference))
    low, high = least[worst].min(), most[worst].max()
    names = " and ".join(dict.fromkeys(columns[at].analyte for at in positions))
    return [
        f"{len(positions):,} columns of {names} differ by more than {DUPLICATE_PERCENT:g} % in {int(differ.sum()):,} "
        f"of {int(several.sum()):,} lines (line {line_no[worst]}: {low:.4g} against {high:.4g} "
        f"{one.unit}, {difference[worst]:.3g} %): check the units and the columns"
    ]


def _compare(
    one: Column,
    other: Column,
    values: Floats,
    converted: Floats,
    plain: NDArray[np.bool_],
    factor: float,
    line_no: NDArray[np.int64],
) -> list[str]:
    least = DETECTION_LIMITS * max(one.detection_limit or 0.0, (other.detection_limit or 0.0) * factor)
    difference = np.where(plain & (values > least), disagreement_percent(values, converted), np.nan)
    differ = difference > DUPLICATE_PERCENT
    if not differ.any():
        return []
    worst = int(np.nanargmax(difference))
    compared = int((~np.isnan(difference)).sum())
    same = one.analyte == other.analyte
    pair = f"two columns of {one.analyte}" if same else f"{one.analyte} and {other.analyte}"
    worst_line = (
        f"line {line_no[worst]}: {values[worst]:.4g} {one.unit} against {converted[worst]:.4g} from "
        f"{'the other' if same else other.analyte}, {difference[worst]:.3g} %"
    )
    return [
        f"{pair} differ by more than {DUPLICATE_PERCENT:g} % in {int(differ.sum()):,} of {compared:,} lines "
        f"({worst_line}): check the units and the columns"
    ]
