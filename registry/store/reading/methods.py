"""The data dictionary and the catalogue's quantities, as the registry holds them."""

from __future__ import annotations

import re
from typing import Any

from sqlalchemy import Connection, text


def quantities(connection: Connection) -> list[dict[str, Any]]:
    """Every derived quantity: ``name sheet label unit meaning method source status``, in order of computation."""
    rows = connection.execute(
        text("SELECT name, sheet, label, unit, meaning, method, source, status FROM quantity ORDER BY position")
    )
    return [dict(row) for row in rows.mappings()]


def column_guide(connection: Connection) -> list[dict[str, Any]]:
    """The data dictionary: ``view_name column_name unit meaning method source`` of every view."""
    rows = connection.execute(
        text("SELECT view_name, column_name, unit, meaning, method, source FROM column_guide_row ORDER BY position")
    )
    return [dict(row) for row in rows.mappings()]


def warning_kinds(connection: Connection) -> list[dict[str, Any]]:
    """The remarks that a value can carry: ``code column_name text``; an ellipsis where numbers of a sample stand."""
    rows = connection.execute(text("SELECT code, column_name, text FROM warning_kind ORDER BY position"))
    return [{**row, "text": re.sub(r"\{\w+\}", "\u2026", row["text"])} for row in rows.mappings()]
