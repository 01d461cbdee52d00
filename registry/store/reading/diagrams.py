"""The numbers behind a diagram: every sample of a filter with the quantities of the axes and its group."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from sqlalchemy import Connection, text

from registry.store.reading.columns import Column
from registry.store.reading.drawn_samples import Group, details, drawn_rows
from registry.store.reading.filters import Filter


def _causes(connection: Connection, columns: Sequence[Column]) -> dict[str, int]:
    """Place of each derived column in ``derived.causes``."""
    rows = connection.execute(text("SELECT name, position FROM quantity"))
    places = {row.name: row.position for row in rows}
    return {column.name: places[column.field] for column in columns if column.field in places}


def diagram_rows(
    connection: Connection, asked: Filter, columns: Sequence[Column], group: Group, codes: Sequence[str] | None = None
) -> list[Any]:
    """``sample_id, is_control, group, value of every column, letter of every column's cause`` by key.

    The letter (None for a value that is there and for one as analysed) is explained by ``cause_words``. With ``codes``
    the samples of these codes instead of those of the filter.
    """
    places = _causes(connection, columns)
    expressions = [column.sql for column in columns]
    for column in columns:
        letter = f"substr(derived.causes, {int(places[column.name]) + 1}, 1)" if column.name in places else "NULL"
        expressions.append(f"CASE WHEN {column.sql} IS NULL THEN {letter} END")
    tables = {column.table for column in columns} | ({"derived"} if places else set())
    return drawn_rows(connection, asked, expressions, tables, group, codes)


def point_details(connection: Connection, keys: Sequence[int]) -> dict[int, dict[str, Any]]:
    """By key: ``code kind site lithology intrusion censored digestions is_stale`` of the points drawn one by one."""
    columns = (
        "sample.code, sample.kind, sample.lithology, site.code AS site, intrusion.name AS intrusion, "
        "composition.censored, composition.digestions"
    )
    return details(connection, keys, columns, {"site", "intrusion", "composition"})


def cause_words(connection: Connection) -> dict[str, str]:
    """Why a value is missing, in words, by the letter that ``derived.causes`` holds."""
    return {row.letter: row.text for row in connection.execute(text("SELECT letter, text FROM cause_kind"))}
