"""The data dictionary: unit, meaning, method and source of every column of every view. None of them is ever NULL.

What is computed takes its words from the catalogue; what was entered or reported is described here.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from registry.petrology.analytes import (
    CHOSEN_COLUMNS,
    ELEMENT_COLUMNS,
    ELEMENT_SYMBOLS,
    IRON_COLUMNS,
    OXIDE_COLUMNS,
    OXIDE_SYMBOLS,
)
from registry.store.column_meanings import BY_VIEW, MEANINGS
from registry.store.sheets import SHEETS

AS_ENTERED = "as entered"
_AS_ANALYSED = "as reported by the laboratory, chosen by digestion and then the newest batch, converted to this unit"
_SYMBOLS = dict(zip((*OXIDE_COLUMNS, *ELEMENT_COLUMNS), (*OXIDE_SYMBOLS, *ELEMENT_SYMBOLS), strict=True))
#: Longest suffix first.
UNITS_BY_SUFFIX = {
    "_log10_pa_s": "log10(Pa s)",
    "_m_per_yr": "m/yr",
    "_m_per_s": "m/s",
    "_kg_m3": "kg/m3",
    "_mw_m2": "mW/m2",
    "_uw_m3": "uW/m3",
    "_w_m_k": "W/(m K)",
    "_percent": "%",
    "_ppm": "ppm",
    "_km3": "km3",
    "_cat": "cation %",
    "_km": "km",
    "_ma": "Ma",
    "_wt": "wt%",
    "_c": "degC",
    "_m": "m",
}


def guide_rows(quantities: Sequence[Mapping[str, Any]]) -> list[dict[str, Any]]:
    """Rows of ``column_guide_row``, in the order of the sheets; ``quantities`` are rows of ``quantity``."""
    computed = {row["name"]: row for row in quantities}
    rows: list[dict[str, Any]] = []
    for view, columns in SHEETS.items():
        for column in columns:
            unit, meaning, method, source = _described(view, column, computed)
            rows.append(
                {
                    "position": len(rows),
                    "view_name": view,
                    "column_name": column,
                    "unit": unit,
                    "meaning": meaning,
                    "method": method,
                    "source": source,
                }
            )
    return rows


def unit_by_name(column: str) -> str:
    """The unit that a column's name ends in; ``text`` where it names none."""
    return next((unit for suffix, unit in UNITS_BY_SUFFIX.items() if column.endswith(suffix)), "text")


def _described(view: str, column: str, computed: Mapping[str, Mapping[str, Any]]) -> tuple[str, str, str, str]:
    entered = BY_VIEW.get((view, column))
    if entered is not None:
        return entered
    if column in computed:
        row = computed[column]
        return row["unit"], row["meaning"], row["method"], row["source"]
    if column in CHOSEN_COLUMNS:
        return unit_by_name(column), _analysed(column), _AS_ANALYSED, AS_ENTERED
    if column in MEANINGS:
        return MEANINGS[column]
    return unit_by_name(column), "not computed by this version", "not yet computed", "none yet"


def _analysed(column: str) -> str:
    if column == "total_reported_wt":
        return "total as the laboratory printed it"
    if column == "feo_titrated_wt":
        return "ferrous iron by titration"
    if column in IRON_COLUMNS:
        return "iron as reported"
    return f"{_SYMBOLS[column]} as analysed; below or above a limit, the limit itself (see censored)"
