"""Columns that hold nothing but the sign of the numbers of another column."""

from __future__ import annotations

import re

from registry.intake.layout import QUALIFIER_WORD, WideLayout
from registry.intake.readings import ResultColumn
from registry.intake.units import split_unit

_QUALIFIER = re.compile(r"(?i)(?P<of>.*?)[\s_\-]*" + QUALIFIER_WORD.pattern.removeprefix("(?i)"))


def qualifier_columns(
    layout: WideLayout, columns: list[ResultColumn], others: list[int], rows: list[list[str]]
) -> dict[int, int]:
    """Columns that hold only the qualifier of an analyte column beside them or named in their heading."""
    found: dict[int, int] = {}
    by_position = {column.position: index for index, column in enumerate(columns)}
    for place in others:
        label = layout.labels[place]
        cells = {row[place].strip() for row in rows if place < len(row)}
        signs = bool(cells & {"<", ">", "<=", ">="}) and cells <= {"", "<", ">", "<=", ">=", "="}
        named = _QUALIFIER.fullmatch(label)
        if not signs and not (named and not cells - {""}):
            continue
        index = None
        if named and named["of"]:
            wanted = split_unit(named["of"])[0].casefold()
            index = next((i for i, c in enumerate(columns) if split_unit(c.header)[0].casefold() == wanted), None)
        if index is None:  # left of its number (as a sign is written), else right of it
            neighbours = (place + 1, place - 1) if not label else (place - 1, place + 1)
            index = next((by_position[other] for other in neighbours if other in by_position), None)
        if index is not None and index not in found.values():
            found[place] = index
    return found
