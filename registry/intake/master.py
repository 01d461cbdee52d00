"""A file of master data as a table of typed values, every cell and row checked."""

from __future__ import annotations

import re
import unicodedata
from typing import Any

import numpy as np

from registry.intake import fields, kinds
from registry.intake.cells import decimal_sign
from registry.intake.codes import LONGEST_CODE, tidy_codes, unfit_codes
from registry.intake.findings import Findings
from registry.intake.kinds import NEEDS, Field
from registry.intake.master_checks import check_rows
from registry.intake.names import analyte_symbol
from registry.intake.readings import MasterTable, ReadingOptions
from registry.intake.sources import Source
from registry.intake.units import CANONICAL_UNITS, canonical_unit

_CODES = frozenset({"site_code", "sample_code", "duplicate_of"})


def header_row(rows: list[list[str]], kind: str) -> int:
    """The row among the first twenty that names most columns of the kind, the first of equals; -1 if none does."""
    best, choice = 0, -1
    for index, row in enumerate(rows[:20]):
        known = len(kinds.columns_of(kind, row))
        if known > best:
            best, choice = known, index
    return choice


def read_master(
    kind: str, source: Source, options: ReadingOptions, findings: Findings, understood: list[str]
) -> MasterTable | None:
    """Read master data of a known kind; None if the headings do not allow it."""
    preview, _ = source.preview()
    header = header_row(preview, kind)
    if header < 0:
        findings.add(
            f"no row of headings for {kind} was found",
            expected=NEEDS[kind],
            remedy="write the headings into the first row",
        )
        return None
    headings = [cell.strip().strip("\ufeff") for cell in preview[header]]
    positions = kinds.columns_of(kind, headings)
    if not _has_required(kind, positions, headings, findings):
        return None
    rows, lines = _body(source, header + 1)
    by_name = {one.name: one for one in kinds.FIELDS[kind]}
    numeric = [position for name, position in positions.items() if by_name[name].holds == kinds.NUMBER]
    decimal, _ = decimal_sign([row[at] for row in rows[:500] for at in numeric if at < len(row)])
    understood.append(f"headings in row {header + 1}; decimal sign: {'comma' if decimal == ',' else 'point'}")
    table: dict[str, list[Any]] = {}
    used = set(positions.values())
    order = [one.name for one in kinds.FIELDS[kind] if one.name in positions]
    for name in order:
        at = positions[name]
        cells = [row[at] if at < len(row) else "" for row in rows]
        factor = _factor(name, headings[at], kind, findings, understood)
        if factor is None:
            table[name] = [None] * len(rows)
            continue
        table[name] = _column(by_name[name], headings[at], cells, lines, decimal, factor, findings, understood)
        if headings[at] != name:
            understood.append(f"column '{headings[at]}' is {name}")
    if kind == "samples" and "sample_kind" in positions:
        at = positions["sample_kind"]
        _take_stages(table, order, [row[at] if at < len(row) else "" for row in rows], headings[at], understood)
    ignored = tuple(heading for at, heading in enumerate(headings) if at not in used and heading)
    if ignored:
        understood.append("columns not read: " + ", ".join(f"'{heading}'" for heading in ignored))
        for heading in ignored:
            known = kinds.field_of(kind, heading)
            findings.warn(
                f"the column is not one of {kind} and is ignored" if known is None
                else f"another column is {known[0].name} as well; this one is ignored", column=heading,
                found=None if known is None else f"'{headings[positions[known[0].name]]}' before it",
                remedy="nothing to do if it is not needed; else give it a known heading" if known is None
                else "see which of the two is meant, and take the other out",
            )  # fmt: skip
    if not rows:
        findings.add("the file holds headings and no rows", expected=f"rows of {kind}", remedy="add the rows")
        return None
    check_rows(
        kind, table, lines, {name: headings[at] for name, at in positions.items()}, options, findings, understood
    )
    understood.append(f"{len(rows)} rows of {kind}")
    return MasterTable(kind, tuple(order), table, lines, ignored)


def _take_stages(
    table: dict[str, list[Any]], order: list[str], cells: list[str], heading: str, understood: list[str]
) -> None:
    """Stages of duplicates that the kind names (``pulp duplicate``), where no column of their own says them."""
    named = [fields.stage_in(cell) for cell in cells]
    if not any(named):
        return
    said = table.get("duplicate_stage", [None] * len(named))
    table["duplicate_stage"] = [one or other for one, other in zip(said, named, strict=True)]
    if "duplicate_stage" not in order:
        order.append("duplicate_stage")
    understood.append(f"column '{heading}' says the stage of {sum(map(bool, named))} duplicates")


def _has_required(kind: str, positions: dict[str, int], headings: list[str], findings: Findings) -> bool:
    missing = [one.name for one in kinds.FIELDS[kind] if one.required and one.name not in positions]
    placed = {"easting", "northing"} <= positions.keys() or {"longitude", "latitude"} <= positions.keys()
    if kind == "sites" and not missing and not placed:
        missing = ["easting and northing, or longitude and latitude"]
    for name in missing:
        findings.add(
            f"a column that {kind} need is missing", column=name, found=", ".join(filter(None, headings))[:200],
            expected=NEEDS[kind], remedy=f"add the column {name}, or correct its heading",
        )  # fmt: skip
    return not missing


def _body(source: Source, first_row: int) -> tuple[list[list[str]], np.ndarray]:
    rows: list[list[str]] = []
    lines: list[int] = []
    skip = first_row
    for chunk in source.chunks():
        for row, line in zip(chunk.rows, chunk.lines.tolist(), strict=True):
            if skip:
                skip -= 1
            elif any(cell.strip() for cell in row):
                rows.append(row)
                lines.append(line)
    return rows, np.array(lines, np.int64)


def _factor(name: str, heading: str, kind: str, findings: Findings, understood: list[str]) -> float | None:
    known = kinds.field_of(kind, heading)
    unit = known[1] if known else None
    if not unit:
        return 1.0
    factor = fields.unit_factor(name, unit)
    if factor is None:
        findings.add(
            "the unit in the heading does not belong to this column", column=heading, found=unit,
            expected=f"the unit of {name}", remedy="convert the numbers and correct the heading",
        )  # fmt: skip
        return None
    if factor != 1.0:
        understood.append(f"column '{heading}' is multiplied by {factor:g} to give {name}")
    return factor


def _column(
    one: Field,
    heading: str,
    cells: list[str],
    lines: np.ndarray,
    decimal: str,
    factor: float,
    findings: Findings,
    understood: list[str],
) -> list[Any]:
    if one.name in _CODES:
        codes, freed, eaten = tidy_codes(cells)
        if freed:
            understood.append(f"{freed} codes in column '{heading}' are freed of the '.0' of a spreadsheet")
        for place, what in unfit_codes(codes).items():
            findings.add(
                what, row=int(lines[place]), column=heading, found=codes[place],
                expected=f"a code of at most {LONGEST_CODE} characters on one line",
                remedy="see whether a quotation mark or a separator is missing, and correct the code",
            )  # fmt: skip
        for place in eaten:
            findings.warn(
                "the code looks like a date or number made by a spreadsheet", row=int(lines[place]), column=heading,
                found=codes[place], remedy="compare with the original list and correct the code",
            )  # fmt: skip
        cells = list(codes)
    values: list[Any] = []
    for text, line in zip(cells, lines.tolist(), strict=True):
        text = text.strip()
        if not text or (one.holds != kinds.TEXT and fields.is_blank(text)):
            if one.required:
                findings.add(
                    f"{one.name} is blank", row=line, column=heading, found="", expected=_expected(one),
                    remedy="fill the cell",
                )  # fmt: skip
            values.append(None)
            continue
        values.append(_value(one, heading, text, line, decimal, factor, findings))
    return values


def _expected(one: Field) -> str:
    if one.holds == kinds.NUMBER:
        return f"a number from {one.low:g} to {one.high:g}"
    if one.holds == kinds.WORD:
        return "one of " + ", ".join(one.words)
    if one.holds == kinds.DATE:
        return "a date such as 2024-05-31"
    return "yes or no" if one.holds == kinds.TRUTH else "a text"


def _value(one: Field, heading: str, text: str, line: int, decimal: str, factor: float, findings: Findings) -> Any:
    value: Any
    remedy = "correct the cell, or leave it blank"
    if one.holds == kinds.NUMBER:
        value = fields.epsg_number(text, decimal) if one.name == "epsg" else fields.number(text, decimal)
        if value is None:
            what = f"{one.name} is not a number"
            if fields.number(text, "," if decimal == "." else ".") is not None:
                remedy = f"the rest of the file has the decimal sign '{decimal}'; write this number with it"
            elif one.name in ("latitude", "longitude") and re.search(r"\d\s*[°d'\u2032]", text):
                remedy = "write degrees, minutes and seconds as one decimal number, as -12.2583"
        else:
            value *= factor
            if one.low is not None and one.high is not None and not one.low <= value <= one.high:
                what, value = f"{one.name} is out of range", None
                if one.name in ("latitude", "longitude"):
                    remedy = "see whether longitude and latitude are exchanged, or the numbers are metres"
                elif one.name == "density_kg_m3" and factor == 1.0:
                    remedy = "if it is in g/cm3, say so in the heading: density (g/cm3)"
            elif one.name == "epsg":
                value, what = (int(value), "") if value == int(value) else (None, "epsg is not a whole number")
    elif one.holds == kinds.WORD:
        value, what = fields.word(text, one.words), f"{one.name} is not a known word"
    elif one.holds == kinds.DATE:
        value, what = fields.iso_date(text), f"{one.name} is not a date that can be read in one way only"
        remedy = "write year-month-day, as 2024-05-31"
    elif one.holds == kinds.TRUTH:
        value, what = fields.truth(text), f"{one.name} is neither yes nor no"
    elif one.name == "analyte":
        value, what = analyte_symbol(text), "the analyte is not known"
        remedy = "write a symbol such as SiO2, Fe2O3T or Zr"
    elif one.name == "unit":
        value, what = canonical_unit(text), "the unit is not known"
        remedy = "write one of " + " ".join(CANONICAL_UNITS)
    else:
        return unicodedata.normalize("NFC", text)
    if value is None:
        findings.add(what, row=line, column=heading, found=text, expected=_expected(one), remedy=remedy)
    return value
