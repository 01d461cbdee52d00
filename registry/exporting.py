"""Write a view to a file for spreadsheets and other programs."""

from __future__ import annotations

import csv
import io
import re
import sqlite3
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

from registry.errors import NotFound, UsageError
from registry.export_maps import write_geojson, write_gpkg
from registry.refresh import refresh_registry
from registry.store import exports
from registry.store.engine import Registry, reading
from registry.store.sheets import PER_SAMPLE_SHEETS, SHEETS

#: With these a spreadsheet begins to compute.
FORMULA_STARTS = tuple("=+-@\t\r")
Conditions = Sequence[tuple[str, str, float | str]]

_CONDITION = re.compile(r"\s*(\w+)\s*(<=|>=|!=|=|<|>)\s*(.*?)\s*", re.DOTALL)


#: Rows of a worksheet under its heading, by the file format.
MOST_WORKSHEET_ROWS = 1_048_575


#: Values of a column that are named where no row meets a condition on it.
MOST_VALUES_NAMED = 20


def export_sheet(registry: Registry, sheet: str, target: Path, where: Sequence[str] = ()) -> int:
    """Write the rows of a view that meet every condition to a file; how many there were.

    The suffix says how: ``.csv`` (UTF-8 with BOM), ``.xlsx``, ``.parquet``, ``.geojson`` and ``.gpkg`` (points in
    longitude and latitude, of sheets of samples only; samples without a position are left out). What is stale is
    recomputed first. NULL is an empty cell. The file appears whole or not at all.
    """
    if sheet not in SHEETS:
        raise NotFound(f"there is no sheet '{sheet}'; the sheets are {', '.join(SHEETS)}")
    suffix = target.suffix.lower()
    if suffix not in _WRITERS:
        raise UsageError(f"'{target.suffix}' files cannot be written; choose one of {', '.join(_WRITERS)}")
    if suffix in MAPS and sheet not in PER_SAMPLE_SHEETS:
        raise UsageError(f"{sheet} has no samples to put on a map; write it as .csv, .xlsx or .parquet")
    conditions = [condition(sheet, text) for text in where]
    refresh_registry(registry)
    partial = target.with_name(f".{target.stem}.part{target.suffix}")
    try:
        with reading(registry) as connection:
            count = _WRITERS[suffix](connection, sheet, conditions, partial)
        partial.replace(target)
    except (OSError, sqlite3.Error) as error:
        reason = getattr(error, "strerror", None) or error
        raise UsageError(f"{target} cannot be written: {reason}; choose another file with --to") from error
    finally:
        partial.unlink(missing_ok=True)
    return count


def why_nothing(registry: Registry, sheet: str, where: Sequence[str]) -> str:
    """A sentence on an export that wrote no row: what the text columns of its conditions hold, if it is little."""
    said = ["no row meets the conditions" if where else f"{sheet} has no rows"]
    with reading(registry) as connection:
        for name, _, value in dict.fromkeys(condition(sheet, text) for text in where):
            if isinstance(value, str):
                held = exports.few_values(connection, sheet, name, MOST_VALUES_NAMED)
                said += [f"{name} holds {', '.join(held)}"] if held else []
    return "; ".join(said) + "."


def without_formula(cell: Any) -> Any:
    """Text that a spreadsheet would run as a formula gets an apostrophe in front; all else stays as it is."""
    return f"'{cell}" if isinstance(cell, str) and cell[:1] in FORMULA_STARTS else cell


def _write_csv(connection: Any, sheet: str, conditions: Conditions, target: Path) -> int:
    count = 0
    with target.open("w", newline="", encoding="utf-8-sig") as file:
        writer = csv.writer(file)
        writer.writerow(SHEETS[sheet])
        for rows in exports.rows_of(connection, sheet, conditions):
            writer.writerows([without_formula(cell) for cell in row] for row in rows)
            count += len(rows)
    return count


def _frame(connection: Any, sheet: str, conditions: Conditions) -> Any:
    import pandas as pd

    rows = [row for part in exports.rows_of(connection, sheet, conditions) for row in part]
    return pd.DataFrame.from_records(rows, columns=list(SHEETS[sheet]))


def _write_xlsx(connection: Any, sheet: str, conditions: Conditions, target: Path) -> int:
    frame = _frame(connection, sheet, conditions)
    if len(frame) > MOST_WORKSHEET_ROWS:
        raise UsageError(
            f"{len(frame):,} rows are more than a worksheet holds ({MOST_WORKSHEET_ROWS:,}); narrow them with --where "
            "or write .csv or .parquet"
        )
    words = frame.select_dtypes(exclude="number").columns
    frame[words] = frame[words].map(without_formula)
    workbook = io.BytesIO()  # a zip file that cannot be closed on a full disk complains on its own
    frame.to_excel(workbook, sheet_name=sheet, index=False, freeze_panes=(1, 2))
    target.write_bytes(workbook.getbuffer())
    return len(frame)


def _write_parquet(connection: Any, sheet: str, conditions: Conditions, target: Path) -> int:
    try:
        import pyarrow  # noqa: F401
    except ImportError as error:
        raise UsageError("Parquet needs pyarrow: pip install 'plutonbook[parquet]' puts it in place") from error
    frame = _frame(connection, sheet, conditions)
    frame.to_parquet(target, index=False)
    return len(frame)


def _write_geojson(connection: Any, sheet: str, conditions: Conditions, target: Path) -> int:
    return write_geojson(SHEETS[sheet], exports.placed_rows_of(connection, sheet, conditions), target)


def _write_gpkg(connection: Any, sheet: str, conditions: Conditions, target: Path) -> int:
    return write_gpkg(sheet, SHEETS[sheet], exports.placed_rows_of(connection, sheet, conditions), target)


_WRITERS: dict[str, Callable[[Any, str, Conditions, Path], int]] = {
    ".csv": _write_csv,
    ".xlsx": _write_xlsx,
    ".parquet": _write_parquet,
    ".geojson": _write_geojson,
    ".gpkg": _write_gpkg,
}
MAPS = (".geojson", ".gpkg")


def condition(sheet: str, text: str) -> tuple[str, str, float | str]:
    """``COLUMN OP VALUE`` read into its parts; UsageError says what is wrong with it."""
    match = _CONDITION.fullmatch(text)
    if match is None:
        raise UsageError(f"--where '{text}': expected COLUMN OP VALUE with OP one of = != < <= > >=, e.g. 'sr_y >= 20'")
    column, sign, value = match.groups()
    if column not in SHEETS[sheet]:
        raise UsageError(f"--where '{text}': {sheet} has no column '{column}'; it has {', '.join(SHEETS[sheet])}")
    value = value.strip("'\"")
    try:
        return column, sign, float(value)
    except ValueError:
        return column, sign, value
