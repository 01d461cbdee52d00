"""What a person says of single columns of a table of results: found among its headings and put into the reading."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import replace
from difflib import get_close_matches

from registry.intake.columns import AnalyteColumn
from registry.intake.findings import Findings
from registry.intake.layout import WideLayout
from registry.intake.names import Heading, read_heading
from registry.intake.recipes import ColumnChoice, ColumnCorrection, Recipe

#: What a fault of a column that the file does not have is called; a caller with several tables may look for it.
NO_SUCH_COLUMN = "the file has no such column"
#: So many headings are listed in a sentence.
MOST_LISTED = 40


def column_keys(labels: Sequence[str]) -> list[str]:
    """The name of each column in a recipe: its heading or, where it has none, its number (``#7``)."""
    return [label or f"#{place + 1}" for place, label in enumerate(labels)]


def place_of(wanted: str, labels: Sequence[str]) -> int | None:
    """The position of a column: by its heading as written, then in any case and spacing, then by ``#`` and its number,
    then by a word that stands in the heading of this column alone (``Cu`` of ``ABC-12 Cu ppm``).

    None where there is none, or where several headings differ in case and spacing only and none is as written.
    """
    wanted = wanted.strip()
    if wanted in labels and wanted:
        return list(labels).index(wanted)
    folded = _folded(wanted)
    alike = [place for place, label in enumerate(labels) if folded and _folded(label) == folded]
    if len(alike) == 1:
        return alike[0]
    number = wanted[1:]
    if not alike and wanted.startswith("#") and number.isdecimal() and 0 < int(number) <= len(labels):
        return int(number) - 1
    holding = [place for place, label in enumerate(labels) if wanted and wanted in re.split(r"[\s_,;:()\[\]]+", label)]
    return holding[0] if len(holding) == 1 and not alike else None


def _folded(text: str) -> str:
    return " ".join(text.split()).casefold()


def is_named(label: str, recipe: Recipe | None, corrections: Sequence[ColumnCorrection]) -> bool:
    """Whether the recipe or a correction makes an analyte of a column of this heading."""
    named = recipe.columns.get(label) if recipe is not None else None
    if named is not None and named.analyte is not None and not named.ignore:
        return True
    return any(one.choice and one.choice.analyte and _folded(one.column) == _folded(label) for one in corrections)


def say_no_such_column(wanted: str, labels: Sequence[str], findings: Findings) -> None:
    """A fault that lists the columns of the file, those that are spelt alike first."""
    findings.add(
        NO_SUCH_COLUMN, found=wanted, expected=f"one of {listed(labels, wanted)}",
        remedy="write the heading as it is listed, or # and the number of the column, as #3 for the third",
    )  # fmt: skip


def listed(labels: Sequence[str], wanted: str = "") -> str:
    """The columns of a file in words, those spelt like ``wanted`` first; of very many the first."""
    keys = [key for place, key in enumerate(column_keys(labels)) if labels[place] or len(labels) <= MOST_LISTED]
    alike = get_close_matches(wanted, keys, 3, 0.6)
    order = [*alike, *(key for key in keys if key not in alike)]
    more = f" and {len(order) - MOST_LISTED:,} more" if len(order) > MOST_LISTED else ""
    return ", ".join(f"'{key}'" for key in order[:MOST_LISTED]) + more


def corrected(
    recipe: Recipe, corrections: Sequence[ColumnCorrection], layout: WideLayout, findings: Findings
) -> Recipe:
    """The recipe with the corrections put in, under the headings of this table; faults where a column is not there.

    A column of sample codes that the layout has settled already (of a long table) is left as it is.
    """
    labels = layout.labels
    for one in corrections:
        if one.choice is None and layout.code is not None:
            continue
        place = place_of(one.column, labels)
        if place is None:
            say_no_such_column(one.column, [*labels, *layout.unread], findings)
            continue
        key = column_keys(labels)[place]
        if one.choice is None:
            recipe = replace(recipe, sample_header=key)
        else:
            choice = _joined(recipe.columns.get(key), one.choice)
            recipe = replace(recipe, columns={**recipe.columns, key: choice})
    return recipe


def _joined(earlier: ColumnChoice | None, later: ColumnChoice) -> ColumnChoice:
    """Two choices for one column: the later goes before, and what it leaves open stays; nothing stays of a new one."""
    if earlier is None or later.ignore:
        return later
    same = later.analyte in (None, earlier.analyte)
    return ColumnChoice(
        later.analyte or earlier.analyte,
        later.unit or (earlier.unit if same else None),
        later.method or (earlier.method if same else None),
        later.digestion or (earlier.digestion if same and later.method is None else None),
    )


def take_in(layout: WideLayout, recipe: Recipe, findings: Findings) -> None:
    """Make columns of analytes of those that the recipe says are, though their headings name none that is known."""
    known = {column.position for column in layout.columns}
    for place, key in enumerate(column_keys(layout.labels)):
        choice = recipe.columns.get(key)
        if choice is None or choice.ignore or place in known or key == recipe.sample_header:
            continue
        if choice.analyte is None:
            if choice.unit or choice.method:
                findings.add(
                    "the heading names no analyte, and none is said for it", column=key,
                    expected="an analyte such as SiO2, Fe2O3T, Zr beside its unit", remedy="name the analyte as well",
                )  # fmt: skip
            continue
        unit = read_heading(layout.labels[place]).unit
        layout.columns.append(AnalyteColumn(place, key, Heading(None, unit), unit))
    layout.columns.sort(key=lambda column: column.position)
