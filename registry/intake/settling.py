"""From headings to result columns: iron, units that were not stated, digestions, and the user's corrections."""

from __future__ import annotations

from dataclasses import replace

from registry.intake.columns import AnalyteColumn
from registry.intake.findings import Findings
from registry.intake.methods import digestion_in
from registry.intake.names import analyte_symbol
from registry.intake.readings import ResultColumn
from registry.intake.recipes import Recipe
from registry.intake.units import CANONICAL_UNITS, canonical_unit, foreign_unit
from registry.petrology.analytes import ANALYTES, ELEMENT_SYMBOLS, OXIDE_OF_ELEMENT_COLUMN, OXIDE_SYMBOLS
from registry.petrology.digestion import DIGESTION_NAMES, WEIGHED

#: Without a stated unit these are oxides in wt% and trace elements in ppm by common practice of the trade.
_BY_CUSTOM_WT = frozenset(OXIDE_SYMBOLS) - {"S", "F", "Cl"} | {"Fe2O3T", "FeOT", "Fe2O3", "FeO", "Total", "H2O"}
_BY_CUSTOM_PPM = frozenset(ELEMENT_SYMBOLS) - {"Au", "Ag", "Pt", "Pd", "Cu", "Pb", "Zn", "Ni", "Re", "B", "Li"}


def settle_columns(
    found: list[AnalyteColumn],
    findings: Findings,
    understood: list[str],
    *,
    stated_unit: str | None,
    stated_digestion: str | None,
    stated_method: str | None,
    recipe: Recipe,
) -> list[ResultColumn]:
    """Make result columns of the headings. Faults go to ``findings``; columns ignored by the recipe are left out.

    ``stated_*`` is what the title lines (or the user) say once for all columns that say nothing themselves.
    """
    choices = recipe.columns
    columns = []
    for heading in found:
        choice = choices.get(heading.header)
        if choice is not None and choice.ignore:
            continue
        method = heading.method
        digestion = next((told for text in (method, heading.header) if text and (told := digestion_in(text))), None)
        if digestion is None and stated_digestion and (method is None or stated_method is None):
            weighed = heading.heading.analyte in WEIGHED
            digestion = None if weighed and stated_method is None else stated_digestion
            method = method or stated_method
        column = ResultColumn(
            heading.position,
            heading.header,
            heading.heading.analyte or "",
            heading.unit or "",
            method,
            digestion or "unknown",
            heading.lower,
            heading.upper,
        )
        if choice is not None:
            column = _corrected(column, choice.analyte, choice.unit, choice.method, choice.digestion, findings)
        if column.analyte:
            columns.append(column)
    fixed = {column.header for column in columns if (wish := choices.get(column.header)) and wish.analyte}
    settle_iron(columns, findings, fixed)
    by_header = {heading.header: heading for heading in found}
    for column in columns:
        if not column.unit:
            _settle_unit(column, by_header[column.header].foreign_unit, stated_unit, findings)
    _say_unknown_digestions(columns, findings)
    for column in columns:
        said = f"column '{column.header}' is {column.analyte} in {column.unit or 'no known unit'}"
        said += f", method {column.method}" if column.method else ""
        said += f", {column.digestion.replace('_', ' ')}" if column.digestion != "unknown" else ""
        said += f", detection limit {column.detection_limit:g}" if column.detection_limit is not None else ""
        said += f", upper limit {column.upper_limit:g}" if column.upper_limit is not None else ""
        understood.append(said)
    return columns


def _corrected(
    column: ResultColumn,
    analyte: str | None,
    unit: str | None,
    method: str | None,
    digestion: str | None,
    findings: Findings,
) -> ResultColumn:
    if analyte is not None:
        symbol = analyte if analyte in ANALYTES else analyte_symbol(analyte)
        if symbol is None:
            findings.add(
                "the reading recipe names an unknown analyte", column=column.header, found=analyte,
                expected="a symbol such as SiO2, Fe2O3T, Zr", remedy="correct the recipe",
            )  # fmt: skip
        else:
            column = replace(column, analyte=symbol)
    if unit is not None:
        word = canonical_unit(unit)
        if word is None:
            findings.add(
                "the reading recipe names an unknown unit", column=column.header, found=unit,
                expected=" ".join(CANONICAL_UNITS), remedy="correct the recipe",
            )  # fmt: skip
        else:
            column = replace(column, unit=word)
    if digestion is not None:
        if digestion not in DIGESTION_NAMES:
            findings.add(
                "the reading recipe names an unknown digestion", column=column.header, found=digestion,
                expected=" ".join(DIGESTION_NAMES), remedy="correct the recipe",
            )  # fmt: skip
        else:
            column = replace(column, digestion=digestion)
    elif method is not None:
        column = replace(column, digestion=digestion_in(method) or column.digestion)
    return replace(column, method=method) if method is not None else column


def settle_iron(columns: list[ResultColumn], findings: Findings, fixed: set[str]) -> None:
    """Decide what plain ``Fe2O3`` and ``FeO`` headings mean, now that all headings are known.

    Both plain: ferric and titrated ferrous. One plain beside a total: that form alone. One plain alone: total iron,
    with a warning; a plain ``FeO`` whose method is a titration is titrated. Headings in ``fixed`` are left as they are.
    """
    present = {column.analyte for column in columns}
    has_total = bool(present & {"Fe2O3T", "FeOT"})
    for column in columns:
        if column.analyte not in ("Fe2O3", "FeO") or column.header in fixed or has_total:
            continue
        if column.analyte == "FeO" and (column.digestion == "titration" or "Fe2O3" in present or "Fe" in present):
            continue
        if column.analyte == "Fe2O3" and "FeO" in present:
            continue
        plain, total = column.analyte, column.analyte + "T"
        findings.warn(
            f"{plain} stands alone and is taken as total iron",
            column=column.header,
            remedy=f"if it is {'ferric' if plain == 'Fe2O3' else 'ferrous'} iron only, say so with --column",
        )
        column.analyte = total


def _settle_unit(column: ResultColumn, foreign: str | None, stated: str | None, findings: Findings) -> None:
    if foreign is not None:
        known = foreign_unit(foreign)
        findings.add(
            "the unit is not one of a mass fraction" if known else "the unit is not known",
            column=column.header, found=foreign, expected=" ".join(CANONICAL_UNITS),
            remedy="ask the laboratory for mass fractions, or leave the column out with --column" if known
            else "write the unit into the heading, or say it with --column; a method may stand beside it",
        )  # fmt: skip
        return
    if stated is not None:
        column.unit = stated
        return
    symbol = column.analyte
    custom = "wt%" if symbol in _BY_CUSTOM_WT else "ppm" if symbol in _BY_CUSTOM_PPM else None
    if symbol in OXIDE_OF_ELEMENT_COLUMN.values():
        custom = None
    if custom is None:
        findings.add(
            "no unit is stated and custom gives none for this analyte", column=column.header,
            expected=" ".join(CANONICAL_UNITS),
            remedy="write the unit into the heading, as in 'Au (ppb)', or say it with --column",
        )  # fmt: skip
        return
    findings.warn(
        f"no unit is stated; taken as {custom} by custom", column=column.header,
        remedy="write the unit into the heading if this is wrong",
    )  # fmt: skip
    column.unit = custom


def _say_unknown_digestions(columns: list[ResultColumn], findings: Findings) -> None:
    dissolved = [column for column in columns if column.analyte not in WEIGHED]
    unknown = [column.header for column in dissolved if column.digestion == "unknown"]
    if not unknown:
        return
    named = ", ".join(unknown[:6]) + (f" and {len(unknown) - 6} more" if len(unknown) > 6 else "")
    findings.warn(
        f"the digestion is not told for {len(unknown)} of {len(dissolved)} columns ({named})",
        expected="a method row or heading with words such as lithium borate fusion, XRF, four-acid, aqua regia",
        remedy="state it in a method row, with --digestion or with --column; until then it counts as unknown",
    )
