"""The catalogue as rows: quantities, warnings, causes and the column guide, rewritten at create and upgrade."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

import sqlalchemy as sa

from registry.store import tables
from registry.store.column_guide import guide_rows

if TYPE_CHECKING:
    from registry.petrology.catalogue.records import Method, Warning


def sync_catalogue(
    connection: sa.Connection,
    methods: Sequence[Method] | None = None,
    warnings: Sequence[Warning] | None = None,
    causes: Mapping[str, tuple[str, str]] | None = None,
    citations: Mapping[str, str] | None = None,
) -> None:
    """Rewrite ``quantity``, ``warning_kind``, ``cause_kind`` and ``column_guide_row``.

    ``position`` of a quantity is its place in ``derived.causes``, that of a warning its place in
    ``derived.warnings``; ``causes`` maps code -> (letter, text). Whatever is left out comes from the catalogue and
    the references of ``registry.petrology``.
    """
    if methods is None or warnings is None or causes is None:
        from registry.petrology import catalogue

        methods = catalogue.METHODS if methods is None else methods
        warnings = catalogue.WARNINGS if warnings is None else warnings
        causes = catalogue.CAUSES if causes is None else causes
    if citations is None:
        from registry.petrology.references import REFERENCES

        citations = REFERENCES
    _rewrite(connection, tables.quantity, _quantities(methods, citations))
    _rewrite(
        connection,
        tables.warning_kind,
        [
            {
                "position": position,
                "code": warning.code,
                "column_name": warning.column,
                "value_column": warning.value_column,
                "text": warning.text,
            }
            for position, warning in enumerate(warnings)
        ],
    )
    _rewrite(
        connection,
        tables.cause_kind,
        [
            {"position": position, "letter": letter, "code": code, "text": text}
            for position, (code, (letter, text)) in enumerate(causes.items())
        ],
    )
    _rewrite(connection, tables.column_guide_row, guide_rows(_quantities(methods, citations)))


def _quantities(methods: Sequence[Method], citations: Mapping[str, str]) -> list[dict[str, Any]]:
    rows: list[dict[str, Any]] = []
    for method in methods:
        source = citations.get(method.source, method.source)
        if method.equation:
            source = f"{source}; {method.equation}"
        for output in method.outputs:
            rows.append(
                {
                    "position": len(rows),
                    "name": output.name,
                    "sheet": output.sheet,
                    "label": output.label,
                    "unit": output.unit,
                    "meaning": output.meaning,
                    "method": method.label,
                    "source": source,
                    "status": method.status,
                }
            )
    return rows


def _rewrite(connection: sa.Connection, table: sa.Table, rows: list[dict[str, Any]]) -> None:
    connection.execute(sa.delete(table))
    if rows:
        connection.execute(sa.insert(table), rows)
