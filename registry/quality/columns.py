"""Columns of one file that report the same metal twice (MnO and Mn, Fe2O3T and Fe): do they agree?"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from registry.petrology.consistency import DUPLICATE_PERCENT, disagreement_percent
from registry.petrology.quotients import Floats
from registry.quality.assessment import Column, carried_wholly
from registry.quality.substances import conversion, substance

#: Below so many detection limits two results say little about each other. Common practice, no source.
DETECTION_LIMITS = 10.0


def disagreeing_columns(
    columns: Sequence[Column], values: Floats, qualifiers: NDArray[np.uint8], line_no: NDArray[np.int64]
) -> list[str]:
    """Sentences on pairs of columns of one substance that differ by more than 10 % in some line (common practice).

    ``values`` and ``qualifiers`` (n, m) as reported. Columns by a digestion that leaves part behind are not compared,
    nor results beyond the laboratory's limits or below ten detection limits.
    """
    reports_silica = any(column.analyte == "SiO2" for column in columns)
    told = []
    for first, one in enumerate(columns):
        for second in range(first + 1, len(columns)):
            other = columns[second]
            if substance(one.analyte)[0] != substance(other.analyte)[0]:
                continue
            factor = conversion(other.analyte, other.unit, one.analyte, one.unit)
            if factor is None or not (carried_wholly(one, reports_silica) and carried_wholly(other, reports_silica)):
                continue
            told += _compare(one, other, values[:, first], values[:, second] * factor,
                             (qualifiers[:, first] == 0) & (qualifiers[:, second] == 0), factor, line_no)  # fmt: skip
    return told


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
