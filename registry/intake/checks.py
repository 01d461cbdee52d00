"""Checks of result values against what is possible and what is likely; vectorised over columns."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from registry.intake.cells import NO_DATA_MARKS
from registry.intake.findings import Findings
from registry.intake.readings import ResultColumn
from registry.intake.spooled import column_parts, row_parts
from registry.intake.texts import CONTROL_WORD
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
    values: Any,
    qualifiers: Any,
    lines: Any,
    findings: Findings,
    control: Sequence[str | None] = (),
) -> None:
    """Impossible values become problems with their likely cause, unlikely ones warnings. NaN is passed over.

    ``control`` is what a column says of each line: a blank or a standard is not called far from the rest.
    """
    if not len(values):
        return
    with np.errstate(all="ignore"):
        parts = [(np.fmax.reduce(rows, axis=0), np.fmin.reduce(rows, axis=0)) for _, rows in row_parts(values)]
        tops = np.fmax.reduce([top for top, _ in parts])
        bottoms = np.fmin.reduce([bottom for _, bottom in parts])
        for index, column in enumerate(columns):
            if column.unit:
                _check_column(
                    column, index, values, qualifiers, lines, findings, (tops[index], bottoms[index]), control
                )


def _check_column(
    column: ResultColumn,
    index: int,
    values: Any,
    qualifiers: Any,
    lines: Any,
    findings: Findings,
    ends: tuple[float, float],
    control: Sequence[str | None],
) -> None:
    """Look for the values themselves only where the column's ends, (highest, lowest), say that there are any."""
    per_unit = WT_PERCENT_PER_UNIT[column.unit]
    high = _TOTAL_LIMIT_WT if column.analyte == "Total" else 100.0
    low = _GAIN_LIMIT_WT if column.analyte == "LOI" else 0.0
    top, bottom = ends
    if top * per_unit > high * (1 + 1e-12):
        for row, value in _found(values, index, lambda value: value * per_unit > high * (1 + 1e-12)):
            _say_too_high(column, value, high, int(lines[row]), findings)
    if bottom < low:
        for row, value in _found(values, index, lambda value: value < low):
            findings.add(
                f"{column.analyte} is negative" if column.analyte != "LOI" else "the loss on ignition is impossible",
                row=int(lines[row]),
                column=column.header,
                found=f"{value:g}",
                expected=f"{low:g} or more" if low else "0 or more",
                remedy="it looks like a mark for no data: leave the cell blank, as --negative-means-below does"
                if value in NO_DATA_MARKS
                else "if the laboratory writes 'below the detection limit' as a negative number, use "
                "--negative-means-below; else correct the value",
            )
    unlikely = _UNLIKELY_ABOVE_WT.get(column.analyte)
    if unlikely is not None and top * per_unit > unlikely:
        for row, value in _found(
            values, index, lambda value: (value * per_unit > unlikely) & (value * per_unit <= 100.0)
        ):
            findings.warn(
                f"{column.analyte} is unlikely for a rock",
                row=int(lines[row]),
                column=column.header,
                found=f"{value:g} {column.unit}",
                expected=f"at most about {unlikely:g} wt%",
                remedy="check unit and decimal sign",
            )
    if column.analyte in _FAR_CHECKED:
        _check_far(column, index, values, qualifiers, lines, findings, (float(top), float(bottom)), control)


def _found(
    values: Any, index: int, wanted: Callable[[NDArray[np.float64]], NDArray[np.bool_]]
) -> Iterator[tuple[int, float]]:
    """(row, value) of those values of a column that are wanted."""
    for start, column in column_parts(values, index):
        for row in np.flatnonzero(wanted(column)).tolist():
            yield start + row, float(column[row])


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
    index: int,
    values: Any,
    qualifiers: Any,
    lines: Any,
    findings: Findings,
    ends: tuple[float, float],
    control: Sequence[str | None],
) -> None:
    """Warn of values far from the column's median (of uncensored positive values, at least five)."""
    top, bottom = ends
    if not top > 0 or (bottom > 0 and top / bottom < _FAR):
        return

    whole = 100.0 / WT_PERCENT_PER_UNIT[column.unit]  # what is more than the rock is said already

    def measured() -> Iterator[tuple[int, NDArray[np.float64], NDArray[np.bool_]]]:
        for (start, value), (_, sign) in zip(column_parts(values, index), column_parts(qualifiers, index), strict=True):
            yield start, value, (sign == 0) & (value > 0) & (value <= whole)

    median = median_of_parts(lambda: (value[kept] for _, value, kept in measured()))
    if median is None:
        return
    for start, value, kept in measured():
        for row in np.flatnonzero(kept & ((value < median / _FAR) | (value > median * _FAR))).tolist():
            if control and CONTROL_WORD.search(control[start + row] or ""):
                continue
            findings.warn(
                f"{column.analyte} is far from the rest of its column",
                row=int(lines[start + row]),
                column=column.header,
                found=f"{value[row]:g} {column.unit}",
                expected=f"of the order of {median:g} {column.unit}",
                remedy="check unit and decimal sign of this value",
            )


def median_of_parts(parts: Callable[[], Iterable[NDArray[np.float64]]], at_once: int = 100_000) -> float | None:
    """The median of positive numbers that come in parts, None of fewer than five; many never lie in memory together."""
    count = sum(len(part) for part in parts())
    if count < 5:
        return None
    if count <= at_once:
        return float(np.median(np.concatenate(list(parts()))))
    lower = _of_rank(parts, (count - 1) // 2)
    if count % 2 or sum(int((part <= lower).sum()) for part in parts()) > count // 2:
        return lower
    return 0.5 * (lower + min(float(part[part > lower].min(initial=np.inf)) for part in parts()))


def _of_rank(parts: Callable[[], Iterable[NDArray[np.float64]]], rank: int) -> float:
    """The number of a rank (0 the lowest) among positive ones, which sort as the whole numbers of their bits do."""
    known = 0
    for shift in (48, 32, 16, 0):
        counts = np.zeros(1 << 16, np.int64)
        for part in parts():
            bits = np.ascontiguousarray(part).view(np.int64)
            bits = bits if shift == 48 else bits[bits >> (shift + 16) == known]
            counts += np.bincount((bits >> shift) & 0xFFFF, minlength=1 << 16)
        ends = np.cumsum(counts)
        here = int(np.searchsorted(ends, rank, side="right"))
        rank -= int(ends[here] - counts[here])
        known = known << 16 | here
    return float(np.array([known], np.int64).view(np.float64)[0])


def check_units(columns: list[ResultColumn], values: Any, findings: Findings) -> None:
    """Warn where a whole column sits far from its usual order: SiO2 as a fraction of one, an oxide in wt% under ppm."""
    with np.errstate(all="ignore"):
        for index, column in enumerate(columns):
            if column.analyte not in ("SiO2", "Al2O3") or not column.unit or column.analyte not in ANALYTES:
                continue
            highest, known = np.nan, 0
            for _, value in column_parts(values, index):
                highest = np.fmax(highest, np.fmax.reduce(value, initial=np.nan))
                known += int(np.isfinite(value).sum())
            top = float(highest) * WT_PERCENT_PER_UNIT[column.unit]
            if known >= 3 and 0 < top < 1.0:
                findings.warn(
                    f"all of {column.analyte} is below 1 wt%",
                    column=column.header,
                    found=f"highest {top:g} wt%",
                    remedy="check the unit of the heading: a fraction of one, or wt% under a heading in ppm",
                )
