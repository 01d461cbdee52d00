"""Checks of result values against what is possible and what is likely; vectorised over columns."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from registry.intake.findings import Findings
from registry.intake.readings import ResultColumn
from registry.petrology.analytes import ANALYTES, ELEMENT_SYMBOLS, OXIDE_SYMBOLS, WT_PERCENT_PER_UNIT

#: Highest content of ordinary rocks and ores of igneous terrains, wt%; above it a warning. Common practice, no source.
_UNLIKELY_ABOVE_WT = {
    "TiO2": 20.0, "Al2O3": 65.0, "MgO": 55.0, "CaO": 57.0, "Na2O": 20.0, "K2O": 17.5, "P2O5": 43.0, "LOI": 50.0,
    "Cr2O3": 60.0, "MnO": 65.0, "NiO": 15.0, "BaO": 66.0, "SrO": 10.0, "ZrO2": 67.5,
}  # fmt: skip
#: Totals and losses may pass the bounds of a mass fraction: a total of 100.6, a gain on ignition of FeO-rich rock.
_TOTAL_LIMIT_WT = 115.0
_GAIN_LIMIT_WT = -10.0
#: A value so many times smaller or larger than the column's median is likely a slip of unit or decimal.
_FAR = 3000.0
_FAR_CHECKED = (set(OXIDE_SYMBOLS) | set(ELEMENT_SYMBOLS)) - set(
    ["Au", "Ag", "Pt", "Pd", "S", "SO3", "CO2", "LOI", "H2O-", "Cu", "Pb", "Zn", "As", "Sb", "Bi", "Cr", "Ni"]
)


def check_values(
    columns: list[ResultColumn],
    values: NDArray[np.float64],
    qualifiers: NDArray[np.uint8],
    lines: NDArray[np.int64],
    findings: Findings,
) -> None:
    """Impossible values become problems with their likely cause, unlikely ones warnings. NaN is passed over."""
    with np.errstate(all="ignore"):
        for index, column in enumerate(columns):
            if column.unit:
                _check_column(column, values[:, index], qualifiers[:, index], lines, findings)


def _check_column(
    column: ResultColumn,
    value: NDArray[np.float64],
    qualifier: NDArray[np.uint8],
    lines: NDArray[np.int64],
    findings: Findings,
) -> None:
    if not value.size:
        return
    per_unit = WT_PERCENT_PER_UNIT[column.unit]
    high = _TOTAL_LIMIT_WT if column.analyte == "Total" else 100.0
    low = _GAIN_LIMIT_WT if column.analyte == "LOI" else 0.0
    top, bottom = np.fmax.reduce(value), np.fmin.reduce(value)
    if top * per_unit > high * (1 + 1e-12):
        for row in np.flatnonzero(value * per_unit > high * (1 + 1e-12)):
            _say_too_high(column, float(value[row]), high, int(lines[row]), findings)
    if bottom < low:
        for row in np.flatnonzero(value < low):
            findings.add(
                f"{column.analyte} is negative" if column.analyte != "LOI" else "the loss on ignition is impossible",
                row=int(lines[row]),
                column=column.header,
                found=f"{value[row]:g}",
                expected=f"{low:g} or more" if low else "0 or more",
                remedy="if the laboratory writes 'below the detection limit' as a negative number, read the file with "
                "negative numbers as below the limit; else correct the value",
            )
    unlikely = _UNLIKELY_ABOVE_WT.get(column.analyte)
    if unlikely is not None and top * per_unit > unlikely:
        for row in np.flatnonzero((value * per_unit > unlikely) & (value * per_unit <= 100.0)):
            findings.warn(
                f"{column.analyte} is unlikely for a rock",
                row=int(lines[row]),
                column=column.header,
                found=f"{value[row]:g} {column.unit}",
                expected=f"at most about {unlikely:g} wt%",
                remedy="check unit and decimal sign",
            )
    if column.analyte in _FAR_CHECKED:
        _check_far(column, value, qualifier, lines, findings, float(top), float(bottom))


def _say_too_high(column: ResultColumn, value: float, high: float, line: int, findings: Findings) -> None:
    if column.analyte == "Total":
        cause = "check the decimal sign, or whether the column is a total"
    elif column.unit == "wt%" and value <= 1e6:
        cause = f"the likely cause is a value in ppm under a heading in wt% ({value:g} ppm = {value * 1e-4:g} wt%)"
    else:
        cause = "the likely cause is a lost decimal sign or a wrong unit in the heading"
    findings.add(
        f"{column.analyte} is more than the whole rock",
        row=line,
        column=column.header,
        found=f"{value:g} {column.unit}",
        expected=f"at most {high / WT_PERCENT_PER_UNIT[column.unit]:g} {column.unit}",
        remedy=cause + "; correct the unit or the value",
    )


def _check_far(
    column: ResultColumn,
    value: NDArray[np.float64],
    qualifier: NDArray[np.uint8],
    lines: NDArray[np.int64],
    findings: Findings,
    top: float,
    bottom: float,
) -> None:
    """Warn of values far from the column's median (of uncensored positive values, at least five)."""
    if not top > 0 or (bottom > 0 and top / bottom < _FAR):
        return
    measured = (qualifier == 0) & (value > 0)
    if measured.sum() < 5:
        return
    some = value[measured]
    median = float(np.median(some))
    if some.min() > median / _FAR and some.max() < median * _FAR:
        return
    for row in np.flatnonzero(measured & ((value < median / _FAR) | (value > median * _FAR))):
        findings.warn(
            f"{column.analyte} is far from the rest of its column",
            row=int(lines[row]),
            column=column.header,
            found=f"{value[row]:g} {column.unit}",
            expected=f"of the order of {median:g} {column.unit}",
            remedy="check unit and decimal sign of this value",
        )


def check_units(columns: list[ResultColumn], values: NDArray[np.float64], findings: Findings) -> None:
    """Warn where a whole column sits far from its usual order: SiO2 as a fraction of one, an oxide in wt% under ppm."""
    with np.errstate(all="ignore"):
        for index, column in enumerate(columns):
            if column.analyte not in ("SiO2", "Al2O3") or not column.unit or column.analyte not in ANALYTES:
                continue
            value = values[:, index]
            top = float(np.fmax.reduce(value)) * WT_PERCENT_PER_UNIT[column.unit] if value.size else np.nan
            if np.isfinite(value).sum() >= 3 and 0 < top < 1.0:
                findings.warn(
                    f"all of {column.analyte} is below 1 wt%",
                    column=column.header,
                    found=f"highest {top:g} wt%",
                    remedy="check the unit of the heading: a fraction of one, or wt% under a heading in ppm",
                )
