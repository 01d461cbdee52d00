"""A column of analytes as its headings say it, and what each heading cell adds to it."""

from __future__ import annotations

import re
from collections.abc import Container
from dataclasses import dataclass

from registry.intake.cells import NUMBER, TEXT, parse_cell
from registry.intake.findings import Findings
from registry.intake.methods import digestion_in, may_be_method
from registry.intake.names import Heading, read_heading
from registry.intake.units import canonical_unit, foreign_unit, spelt_like_a_unit, split_unit

#: What a heading row holds.
UNIT, METHOD, LOWER, UPPER, ANALYTE, LABELS = (
    "units",
    "methods",
    "detection limits",
    "upper limits",
    "analytes",
    "labels",
)


#: Of a result that was computed from another.
_RECALCULATED = re.compile(r"(?i)\b(norm(ali[sz]ed)?|recalc\w*|anhydrous|(volatile|water)[- ]?free)\b")
#: Both limits in one cell: ``0.01 - 100``.
RANGE = re.compile(r"\s*(?P<low>\d[\d.,]*)\s*(?:-|\u2013|\u2014|to)\s*(?P<high>\d[\d.,]*)\s*")


@dataclass
class AnalyteColumn:
    """One analyte column as its headings say it; iron and missing units are settled later."""

    position: int
    header: str
    heading: Heading
    unit: str | None = None
    method: str | None = None
    lower: float | None = None
    upper: float | None = None
    foreign_unit: str | None = None


def measured(columns: list[AnalyteColumn], said: Container[str], findings: Findings) -> list[AnalyteColumn]:
    """The columns without those recalculated (anhydrous, normalised) beside the measured one, with a remark each.

    Of an analyte that stands in a recalculated column only, it is kept; so is a heading that is ``said`` by the user.
    """

    def is_recalculated(column: AnalyteColumn) -> bool:
        return bool(column.method and _RECALCULATED.search(column.method))

    known = {column.heading.analyte for column in columns if not is_recalculated(column)}
    kept = []
    for column in columns:
        if is_recalculated(column) and column.heading.analyte in known and column.header not in said:
            findings.warn(
                "a recalculated column beside the measured one is not read", column=column.header,
                found=column.method, expected="what was measured",
                remedy="nothing to do; if it is the measured one, say so with --column",
            )  # fmt: skip
        else:
            kept.append(column)
    return kept


def take(column: AnalyteColumn, role: str, text: str) -> None:
    """Let one heading cell add what it says to its column."""
    if role == LOWER and (ends := RANGE.fullmatch(text)):
        take(column, LOWER, ends["low"])
        take(column, UPPER, ends["high"])
        return
    if role in (LOWER, UPPER):
        cell = parse_cell(text, "." if "," not in text else ",")
        if cell.state == NUMBER and cell.value > 0:
            if role == LOWER:
                column.lower = cell.value
            else:
                column.upper = cell.value
        return
    unit = canonical_unit(text)
    heading = read_heading(text)
    if role == UNIT:
        found = unit or split_unit(text)[1]
        if found:
            column.unit = column.unit or found
        elif parse_cell(text).state == TEXT and not may_be_method(text):
            column.foreign_unit = text
    elif role in (METHOD, LABELS):
        said = heading.method if heading.analyte else text
        if unit is None and said:
            said = re.sub(r"\.\d{1,2}$", "", said)  # "CODE.12": made unique by a program
            column.method = said if column.method is None or digestion_in(column.method) is None else column.method
        column.unit = column.unit or heading.unit
    elif heading.analyte and heading.unit is None:
        column.foreign_unit = unknown_unit(text) or column.foreign_unit
        if column.foreign_unit is not None:
            column.method = None


def unknown_unit(heading: str) -> str | None:
    """What stands in the place of a unit in an analyte's heading and is none: in brackets, or spelt like a unit."""
    bracket = re.search(r"[(\[]([^()\[\]]+)[)\]]\s*$", heading)
    if bracket:
        return None if may_be_method(bracket.group(1)) else bracket.group(1).strip()
    words = re.split(r"[\s_]+", heading.strip())
    last = words[-1] if len(words) > 1 else ""
    return last if len(last) > 2 and (spelt_like_a_unit(last) or foreign_unit(last)) else None
