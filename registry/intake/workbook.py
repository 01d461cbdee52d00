"""Sheets of an .xlsx workbook as rows of text cells."""

from __future__ import annotations

import datetime as dt
import io
import warnings
from typing import Any

import numpy as np

from registry.intake.containers import BadContainer
from registry.intake.sources import GridSource


def read_sheets(data: bytes, only: str | None = None) -> list[tuple[str, GridSource]]:
    """Every visible sheet that holds cells (or the one named), in order, as (name, rows of text).

    Formulas count by the value the workbook last stored. Raises BadContainer when the workbook cannot be read or the
    named sheet is not there.
    """
    from openpyxl import load_workbook  # takes a third of a second: only where a workbook comes

    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # of styles and extensions that do not touch the cells
            book = load_workbook(io.BytesIO(data), read_only=True, data_only=True)
            names = [sheet.title for sheet in book.worksheets]
            found = []
            for sheet in book.worksheets:
                if sheet.title != only if only is not None else sheet.sheet_state != "visible":
                    continue
                grid = _grid(sheet)
                if grid:
                    found.append((sheet.title, GridSource(grid, np.arange(1, len(grid) + 1, dtype=np.int64))))
            book.close()
    except Exception as fault:  # a damaged workbook fails in its reader in many ways, all of them the file's fault
        raise BadContainer(
            f"the workbook cannot be read ({fault})", "save it again, or save the sheet as CSV"
        ) from fault
    if only is not None and only not in names:
        raise BadContainer(f"the workbook has no sheet '{only}'", f"its sheets are {', '.join(names)}")
    return found


def _grid(sheet: Any) -> list[list[str]]:
    sheet.reset_dimensions()  # some writers state a wrong size
    grid: list[list[str]] = []
    filled = 0
    for row in sheet.iter_rows():
        cells = [
            _text(cell.value, getattr(cell, "number_format", "")) if cell.value is not None else "" for cell in row
        ]
        while cells and not cells[-1]:
            cells.pop()
        grid.append(cells)
        if cells:
            filled = len(grid)
    return grid[:filled]


def _text(value: Any, number_format: str | None) -> str:
    if isinstance(value, bool):
        return "TRUE" if value else "FALSE"
    if isinstance(value, (int, float)):
        if number_format and "%" in number_format:
            return f"{value * 100:.12g}%"
        return repr(value)
    if isinstance(value, dt.datetime):
        return value.date().isoformat() if value.time() == dt.time() else value.isoformat(" ")
    if isinstance(value, (dt.date, dt.time)):
        return value.isoformat()
    return str(value)
