"""Single rows of master data as they are edited: read with their version, emptied cell by cell, noted."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import sqlalchemy as sa

from registry.store import positions, tables
from registry.store.master_kinds import MASTER_KINDS

#: The coordinates of a sample; without own ones they come from its site.
COORDINATES = ("easting", "northing", "elevation_m", "epsg", "longitude", "latitude")


def read_row(connection: sa.Connection, kind: str, code: str) -> dict[str, Any] | None:
    """The row of a kind (``samples``, ``sites`` ...) with that code by contract column, ``row_version`` and ``row_id``.

    References stand as codes and names. A sample placed by its site has no coordinates of its own here. None where
    there is none.
    """
    spec = MASTER_KINDS[kind]
    table = tables.metadata.tables[spec.table]
    row = connection.execute(sa.select(table).where(table.c[spec.key[0]] == code)).mappings().first()
    if row is None:
        return None
    found: dict[str, Any] = {name: row[column] for name, column in spec.columns.items()}
    for reference in spec.references:
        other = tables.metadata.tables[reference.table]
        found[reference.column] = (
            None
            if row[reference.stored] is None
            else connection.scalar(
                sa.select(other.c[reference.code]).where(other.c[f"{reference.table}_id"] == row[reference.stored])
            )
        )
    if kind == "samples" and row["position_basis"] != positions.OWN:
        found.update(dict.fromkeys(COORDINATES))
    found["row_version"], found["row_id"] = row["row_version"], row[f"{spec.table}_id"]
    return found


def empty_cells(connection: sa.Connection, kind: str, row_id: int, names: Sequence[str]) -> None:
    """Set these contract columns of one row to NULL; what was computed from emptied coordinates is computed anew."""
    if not names:
        return
    spec = MASTER_KINDS[kind]
    table = tables.metadata.tables[spec.table]
    stored = {**spec.columns, **{reference.column: reference.stored for reference in spec.references}}
    values: dict[str, Any] = {stored[name]: None for name in names}
    if kind == "samples" and {"easting", "northing", "longitude", "latitude"} & set(names):
        values |= dict.fromkeys((*COORDINATES, "position_basis"))
    connection.execute(sa.update(table).where(table.c[f"{spec.table}_id"] == row_id).values(values))


def place_samples(connection: sa.Connection, kind: str, row_id: int) -> None:
    """Place the samples that an edited site or sample concerns anew."""
    if kind == "sites":
        positions.replace_positions(connection, [row_id])
    elif kind == "samples":
        table = tables.sample
        row = connection.execute(
            sa.select(table.c.site_id, table.c.position_basis).where(table.c.sample_id == row_id)
        ).one()
        if row.site_id is not None:
            positions.replace_positions(connection, [row.site_id])
        elif row.position_basis != positions.OWN:
            nothing = dict.fromkeys((*COORDINATES, "position_basis"))
            connection.execute(sa.update(table).where(table.c.sample_id == row_id).values(nothing))


def deepest_m(connection: sa.Connection, site_id: int) -> float | None:
    """The greatest depth that a sample, interval or survey of a site states, in metres; None where none does."""
    stated = [
        connection.scalar(sa.select(sa.func.max(column)).where(table.c.site_id == site_id))
        for table, column in (
            (tables.sample, tables.sample.c.from_m),
            (tables.sample, tables.sample.c.to_m),
            (tables.lithology_interval, tables.lithology_interval.c.to_m),
            (tables.survey, tables.survey.c.depth_m),
        )
    ]
    return max((depth for depth in stated if depth is not None), default=None)


def write_audit_entry(connection: sa.Connection, at: str, account: str, action: str, subject: str, detail: str) -> None:
    """One entry of the log of changes."""
    connection.execute(
        sa.insert(tables.audit_entry).values(at=at, account=account, action=action, subject=subject, detail=detail)
    )
