"""How a results table is laid out (wide, long or turned), brought to one wide form that a single reader takes."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from registry.intake.cells import TEXT, parse_cell
from registry.intake.codes import CodeColumn
from registry.intake.corrections import is_named, place_of, say_no_such_column
from registry.intake.findings import Findings
from registry.intake.layout import SEARCH_ROWS, WideLayout, find_header_row, find_wide_layout
from registry.intake.long import LongLayout, find_long_layout, gather
from registry.intake.methods import speaks_of_method
from registry.intake.names import Heading, read_heading
from registry.intake.recipes import ColumnCorrection, Recipe
from registry.intake.sources import GridSource, Source

#: A table turned on its side is held in memory whole: no more cells than this.
MOST_TURNED_CELLS = 20_000_000
#: What a column of signs holds.
_SIGNS = {"", "=", "<", ">", "<=", ">="}
WIDE, LONG, TURNED = "wide", "long", "turned"


@dataclass
class Arranged:
    """A results table in wide form: where to read it and what its headings say."""

    source: Source
    layout: WideLayout
    row_bound: int
    underscores: bool
    control_position: int | None = None


def tell_arrangement(rows: list[list[str]]) -> str | None:
    """``wide``, ``long`` or ``turned`` from the first rows; None where nothing names an analyte."""
    if find_long_layout(rows) is not None:
        return LONG
    across = len(find_header_row(rows)[1])
    down, _ = _analytes_down(rows)
    if down >= 3 and down > 1.5 * across:
        return TURNED
    return WIDE if across else None


def _analytes_down(rows: list[list[str]]) -> tuple[int, int]:
    """The most different analytes that stand under each other in one of the first columns, and which column."""
    best, choice = 0, 0
    for position in range(5):
        found = set()
        for row in rows:
            if position < len(row) and 0 < len(row[position]) <= 40:
                heading = read_heading(row[position])
                plain = heading.method is None or speaks_of_method(heading.method)
                if heading.analyte is not None and plain and not re.search(r"\.\d+$", row[position]):
                    found.add((heading.analyte, heading.method))
        if len(found) > best and any(len(analyte) > 1 for analyte, _ in found):
            best, choice = len(found), position
    return best, choice


def arrange(
    source: Source,
    row_bound: int,
    underscores: bool,
    findings: Findings,
    understood: list[str],
    recipe: Recipe | None = None,
    corrections: Sequence[ColumnCorrection] = (),
) -> Arranged | None:
    """Bring a results table to wide form; None where there are no headings. Those of a wide one may name no analyte."""

    def named(label: str) -> bool:
        return is_named(label, recipe, corrections)

    preview, lines = source.preview()
    arrangement = tell_arrangement(preview)
    if arrangement == LONG:
        wanted = next((one.column for one in corrections if one.choice is None), None)
        saved = None if recipe is None else recipe.sample_header
        layout = find_long_layout(preview, wanted or saved)
        assert layout is not None
        if wanted is not None and place_of(wanted, layout.labels) is None:
            say_no_such_column(wanted, layout.labels, findings)
        arranged = _gathered(source, layout, preview, named, findings, understood)
        plain = find_long_layout(preview)
        if arranged is not None and plain is not None:  # a shape that is the same before and after a correction
            own = [column.header for column in arranged.layout.columns if column.heading.analyte is not None]
            arranged.layout.own_labels = [plain.labels[plain.roles["sample"]], arranged.layout.labels[1], *own]
        return arranged
    if arrangement == TURNED:
        return _turned(source, preview, lines, findings, understood)
    wide = find_wide_layout(preview, _plain_headings(preview))
    return None if wide is None else Arranged(source, wide, row_bound, underscores)


def _plain_headings(rows: list[list[str]]) -> tuple[int, dict[int, Heading]] | None:
    """The row with most words and the places behind the first of them: headings that name no analyte, if any do."""
    words = [
        [place for place, cell in enumerate(row) if cell.strip() and parse_cell(cell).state == TEXT]
        for row in rows[:SEARCH_ROWS]
    ]
    most = max(map(len, words), default=0)
    if most < 2:
        return None
    index = next(index for index, places in enumerate(words) if len(places) == most)
    return index, {place: Heading() for place in words[index][1:]}


def _titles(rows: list[list[str]]) -> list[str]:
    lines = (", ".join(cell.strip() for cell in row if cell.strip()) for row in rows)
    return [line for line in lines if line]


def _gathered(
    source: Source,
    layout: LongLayout,
    preview: list[list[str]],
    named: Callable[[str], bool],
    findings: Findings,
    understood: list[str],
) -> Arranged | None:
    gathered = gather(source, layout, findings, named)
    roles = ", ".join(f"{role} in '{layout.labels[at]}'" for role, at in sorted(layout.roles.items()))
    understood.append(f"a long table, one result a line ({gathered.rows.results} results): {roles}")
    if not gathered.columns:
        return None
    findings.place = gathered.place_of_cells()
    sample = layout.labels[layout.roles["sample"]]
    control = layout.roles.get("control")
    labels = [sample, layout.labels[control] if control is not None else ""]
    labels += [column.header for column in gathered.columns]
    titles = _titles(preview[: layout.header])
    wide = WideLayout(gathered.rows.width, {}, 0, gathered.columns, labels, CodeColumn(0, sample), titles)
    wide.unread, wide.code_labels = gathered.unread, layout.labels
    return Arranged(gathered.rows, wide, len(gathered.rows), True, 1 if control is not None else None)


def _join_signs(grid: list[list[str]], layout: WideLayout, understood: list[str]) -> None:
    """Put the signs that have a column of their own before the numbers of the sample beside it, in place.

    A line of the turned grid with nothing but signs under the analytes is joined to the one of its pair that has the
    numbers; a code above either of the two is the sample's.
    """
    places = [column.position for column in layout.columns]
    joined = 0
    for first in range(layout.first_row, len(grid) - 1):
        pair = grid[first], grid[first + 1]
        held = [{row[at].strip() for at in places} for row in pair]
        signs = [cells <= _SIGNS and cells != {""} for cells in held]
        blank = [not any(row[at].strip() for at in range(len(row)) if at not in places) for row in pair]
        if signs[0] == signs[1] or blank != [False, True]:
            continue
        sign, number = pair if signs[0] else pair[::-1]
        number[:] = [
            sign[at].strip().strip("=") + text if at in places and text.strip() else text or sign[at]
            for at, text in enumerate(number)
        ]
        sign[:] = [""] * len(sign)
        joined += 1
    if joined:
        understood.append(f"the signs of {joined} samples stand in a column of their own beside the numbers")


def _turned(
    source: Source, preview: list[list[str]], preview_lines: np.ndarray, findings: Findings, understood: list[str]
) -> Arranged | None:
    rows: list[list[str]] = []
    lines: list[int] = []
    cells = 0
    for chunk in source.chunks():
        rows += chunk.rows
        lines += chunk.lines.tolist()
        cells += sum(map(len, chunk.rows))
        if cells > MOST_TURNED_CELLS:
            findings.add(
                "a table with samples as columns is too large", found=f"more than {MOST_TURNED_CELLS:,} cells",
                expected="one sample a row", remedy="turn the table so that each sample has a row of its own",
            )  # fmt: skip
            return None
    width = max(map(len, rows))
    grid = [[row[at] if at < len(row) else "" for row in rows] for at in range(width)]
    layout = find_wide_layout(grid)
    if layout is None:
        return None
    _join_signs(grid, layout, understood)
    understood.append("samples stand as columns: the table is turned; its line numbers count the columns of the file")
    _, at = _analytes_down(preview)
    first = next((number for number, row in enumerate(rows) if at < len(row) and read_heading(row[at]).analyte), 0)
    layout.titles = _titles([row for row in rows[: min(first, SEARCH_ROWS)] if sum(map(bool, map(str.strip, row))) < 3])
    line_of = {column.header: lines[column.position] for column in layout.columns}
    names = [next((cell.strip() for cell in column if cell.strip()), "") for column in grid]

    def place(row: int | None, column: str | None) -> tuple[int | None, str | None]:
        if row is None:
            return line_of.get(column or ""), column
        sample = names[row - 1] if 0 < row <= len(names) else None
        return line_of.get(column or ""), f"{sample} (column {row})"

    findings.place = place
    return Arranged(GridSource(grid, np.arange(1, width + 1, dtype=np.int64)), layout, width, True)
