"""What was understood of a file, as plain words and lists that a page can show and that a person can correct."""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from registry.errors import Problem
from registry.intake import KINDS, ColumnChoice, Reading, Recipe, ResultTable
from registry.intake.corrections import column_keys
from registry.intake.names import read_heading
from registry.intake.units import CANONICAL_UNITS
from registry.petrology.analytes import ANALYTES, CHOSEN_INDEX, WT_PERCENT_PER_UNIT
from registry.petrology.digestion import (
    CARRIES,
    DIGESTION_CODE,
    DIGESTION_WORDS,
    MINIMUM,
    REFUSED,
    settle_unknown,
)

KIND_NAMES = KINDS
#: What the signs in numbers and between cells are called.
DECIMALS = {"point": ".", "comma": ","}
THOUSANDS = {"point": ".", "comma": ",", "space": " ", "apostrophe": "'", "none": ""}
SEPARATORS = {"comma": ",", "semicolon": ";", "tab": "\t", "bar": "|"}
UNIT_NAMES = CANONICAL_UNITS
ANALYTE_NAMES = tuple(ANALYTES)
TIMES = "\N{MULTIPLICATION SIGN}"
#: Equal problems that are listed one by one.
LISTED = 20


@dataclass(frozen=True)
class ColumnWish:
    """What a person says of one column."""

    header: str
    analyte: str
    unit: str
    method: str
    digestion: str
    ignore: bool


def describe_reading(reading: Reading) -> dict[str, Any]:
    """A reading as JSON values: kind, rows, sentences, problems, columns with how each is used, and its recipe."""
    table, master = reading.results, reading.master
    return {
        "kind": reading.kind,
        "part": reading.part,
        "rows": len(table) if table is not None else len(master) if master is not None else 0,
        "ok": reading.ok,
        "understood": [text for text in reading.understood if not is_of_column(text)],
        "problems": _listed(reading.problems),
        "refused_rows": len(reading.refused_lines),
        "whole_file_refused": reading.whole_file_refused,
        "columns": [] if table is None else described_columns(table),
        "read": list(master.columns) if master is not None else [],
        "ignored": _not_read(reading),
        "code_headings": [] if table is None else list(table.code_headings),
        "sample_header": table.sample_header if table is not None else None,
        "certificate": table.certificate if table is not None else None,
        "lab": table.lab if table is not None else None,
        "recipe": None if reading.recipe is None else reading.recipe.to_json(),
    }


def _not_read(reading: Reading) -> list[str]:
    """The columns that were not read; all of them where it is only known that they are there."""
    table = reading.results or reading.master
    if table is not None:
        return list(table.ignored)
    return [] if reading.recipe is None else column_keys(reading.recipe.shape)


def _listed(problems: Sequence[Problem]) -> list[dict[str, Any]]:
    """Problems as dictionaries, of many alike the first; the rest is counted in a last one."""
    listed: list[dict[str, Any]] = []
    counts: Counter[tuple[str, str]] = Counter()
    for problem in problems:
        group = (problem.severity, problem.what)
        counts[group] += 1
        if counts[group] <= LISTED:
            listed.append(problem.as_dict())
    for (severity, what), count in counts.items():
        if count > LISTED:
            more = Problem(problems[0].file, f"{count - LISTED:,} more of the same kind ({what})", severity=severity)
            listed.append(more.as_dict())
    return listed


def is_of_column(sentence: str) -> bool:
    """Whether a sentence of what was understood tells of one column, which the list of columns tells as well."""
    return sentence.startswith("column '") and " is " in sentence


def described_columns(table: ResultTable) -> list[dict[str, Any]]:
    """The columns of a table of results with how each is used."""
    silica = any(column.analyte == "SiO2" for column in table.columns)
    return [
        {
            "header": column.header,
            "analyte": column.analyte,
            "unit": column.unit,
            "method": column.method or "",
            "digestion": column.digestion,
            "detection_limit": column.detection_limit,
            "ignore": False,
            "use": use_words(column.analyte, column.unit, column.digestion, silica),
        }
        for column in table.columns
    ]


def use_words(analyte: str, unit: str, digestion: str, reports_silica: bool) -> str:
    """How a column enters the composition: its place, the conversion, and what its digestion makes of it."""
    known = ANALYTES.get(analyte)
    if known is None or unit not in WT_PERCENT_PER_UNIT:
        return ""
    if known.column is None:
        return "kept as a result only"
    factor = WT_PERCENT_PER_UNIT[unit] / WT_PERCENT_PER_UNIT[known.unit] * known.factor
    words = known.column + ("" if abs(factor - 1.0) < 1e-9 else f" = value {TIMES} {factor:.5g}")
    code = int(settle_unknown(DIGESTION_CODE[digestion], reports_silica))
    carried = int(CARRIES[code, CHOSEN_INDEX[known.column]])
    if carried == REFUSED:
        return f"not used: {DIGESTION_WORDS[code]} does not carry it"
    return words + (f"; a minimum by {DIGESTION_WORDS[code]}" if carried == MINIMUM else "")


def ignored_columns(recipe: str | None, looked: Mapping[str, Any]) -> list[dict[str, Any]]:
    """The columns of a table that were named but not read, in the form of those read, so that they can be taken in.

    ``recipe`` (JSON) is what the table was read with, ``looked`` its description.
    """
    if recipe is None:
        return []
    read = {column["header"] for column in looked["columns"]}
    there = set(looked["ignored"]) | _headings(looked["recipe"])
    return [
        _column_not_read(
            header, choice, "left out" if choice.ignore else "no results in it" if choice.analyte else "not read"
        )
        for header, choice in Recipe.from_json(recipe).columns.items()
        if header not in read and (not there or header in there) and (choice.ignore or choice.analyte)
    ]


def unread_columns(looked: Mapping[str, Any], listed: Sequence[Mapping[str, Any]]) -> list[dict[str, Any]]:
    """The columns of a table that are not taken as results and stand nowhere else, in the form of those that are."""
    if looked["kind"] != "results":
        return []
    known = {column["header"] for column in listed}
    return [
        _column_not_read(header, ColumnChoice(unit=read_heading(header).unit), "not read")
        for header in looked["ignored"]
        if header not in known
    ]


def _column_not_read(header: str, choice: ColumnChoice, use: str) -> dict[str, Any]:
    return {
        "header": header,
        "analyte": choice.analyte or "",
        "unit": choice.unit or "",
        "method": choice.method or "",
        "digestion": choice.digestion or "unknown",
        "detection_limit": None,
        "ignore": choice.ignore,
        "use": use,
    }


def _headings(made: str | None) -> set[str]:
    """The columns that the recipe of a reading (JSON) knows."""
    if made is None:
        return set()
    recipe = Recipe.from_json(made)
    return {*column_keys(recipe.shape), *recipe.columns}


def recipe_from(made: Sequence[str], chosen: str | None) -> Recipe:
    """The recipe of a file: that of each of its tables (JSON) together, with the settings it was read with."""
    recipes = [Recipe.from_json(one) for one in made] or [Recipe()]
    given = Recipe() if chosen is None else Recipe.from_json(chosen)
    columns = {header: choice for recipe in recipes for header, choice in recipe.columns.items()}
    first = recipes[0]
    return replace(
        first,
        columns={**columns, **given.columns},
        shape=first.shape or given.shape,
        sample_header=given.sample_header or (first.sample_header if len(recipes) == 1 else None),
        separator=given.separator,
        decimal=given.decimal,
        thousands=given.thousands,
        digestion=given.digestion,
    )


def recipe_of_table(looked: Mapping[str, Any], chosen: str | None) -> Recipe:
    """The recipe of one table of a file, to be saved under a name: its own headings and columns only."""
    made = looked["recipe"]
    recipe = recipe_from([made] if made else [], chosen)
    own = _headings(made) | set(looked["ignored"])
    return replace(
        recipe,
        columns={header: choice for header, choice in recipe.columns.items() if header in own},
        decimal=recipe.decimal or (None if made is None else Recipe.from_json(made).decimal),
    )


def of_whole_file(recipe: Recipe, unit: str | None, negative_means_below: bool) -> Recipe:
    """The recipe with what is said of every column at once."""
    return replace(recipe, unit=unit, negative_means_below=negative_means_below)


def corrected_recipe(
    recipe: Recipe,
    wishes: Sequence[ColumnWish],
    given_up: Collection[str],
    sample_header: str,
    separator: str,
    decimal: str,
    thousands: str,
) -> Recipe:
    """The recipe of a reading with what a person says of its columns put in; empty words leave it to the intake.

    Of the columns ``given_up`` nothing is said any more; ``thousands`` is a name of ``THOUSANDS``.
    """
    columns = {
        wish.header: ColumnChoice(
            wish.analyte or None, wish.unit or None, wish.method or None, wish.digestion or None, wish.ignore
        )
        for wish in wishes
    }
    return replace(
        recipe,
        columns={header: said for header, said in {**recipe.columns, **columns}.items() if header not in given_up},
        sample_header=sample_header or recipe.sample_header,
        separator=separator or None,
        decimal=decimal or None,
        thousands=THOUSANDS.get(thousands),
    )


def recipe_text(recipe: Recipe) -> str:
    """A recipe as JSON."""
    return recipe.to_json()
