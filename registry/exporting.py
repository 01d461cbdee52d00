"""Write a view to a file for spreadsheets and other programs."""

from __future__ import annotations

import csv
import re
from collections.abc import Sequence
from pathlib import Path

from registry.errors import NotFound, UsageError
from registry.refresh import refresh_registry
from registry.store import exports
from registry.store.engine import Registry, reading
from registry.store.sheets import SHEETS

_CONDITION = re.compile(r"\s*(\w+)\s*(<=|>=|!=|=|<|>)\s*(.*?)\s*", re.DOTALL)


def export_sheet(registry: Registry, sheet: str, target: Path, where: Sequence[str] = ()) -> int:
    """Write the rows of a view that meet every condition to a CSV file (UTF-8 with BOM); how many there were.

    What is stale is recomputed first. NULL is written as an empty cell.
    """
    if sheet not in SHEETS:
        raise NotFound(f"there is no sheet '{sheet}'; the sheets are {', '.join(SHEETS)}")
    if target.suffix.lower() != ".csv":
        raise UsageError(f"'{target.suffix}' files are not there yet; write .csv, which every spreadsheet opens")
    conditions = [condition(sheet, text) for text in where]
    refresh_registry(registry)
    partial = target.with_name(target.name + ".part")
    try:
        with reading(registry) as connection, partial.open("w", newline="", encoding="utf-8-sig") as file:
            writer = csv.writer(file)
            writer.writerow(SHEETS[sheet])
            count = 0
            for rows in exports.rows_of(connection, sheet, conditions):
                writer.writerows(rows)
                count += len(rows)
        partial.replace(target)
    except OSError as error:
        raise UsageError(f"{target} cannot be written: {error.strerror}; choose another file with --to") from error
    finally:
        partial.unlink(missing_ok=True)
    return count


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
