"""Certificates of reference materials: values by material and analyte, the shipped ones and the user's."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import sqlalchemy as sa

from registry.store import tables

_material, _value = tables.reference_material, tables.reference_value
#: Columns of a value besides what identifies it.
_SAID = ("value", "uncertainty", "uncertainty_type", "status")


@dataclass
class Changed:
    """How many values were added, and the changes of known ones in words."""

    added: int = 0
    changes: list[str] = field(default_factory=list)


def upsert_values(connection: sa.Connection, rows: Sequence[Mapping[str, Any]]) -> Changed:
    """Bring in values, each with ``material analyte value unit uncertainty uncertainty_type status source``.

    A value of the same material, analyte, unit and source is updated, an equal one does nothing, others are added.
    """
    ids = _material_ids(connection, [row["material"] for row in rows])
    known = {
        (row.reference_material_id, row.analyte, row.unit, row.source): row
        for row in connection.execute(sa.select(_value).where(_value.c.reference_material_id.in_(set(ids.values()))))
    }
    changed = Changed()
    new: dict[tuple[Any, ...], dict[str, Any]] = {}
    for row in rows:
        key = (ids[row["material"]], row["analyte"], row["unit"], row["source"])
        said = {name: row[name] for name in _SAID}
        before = known.get(key)
        if before is None:
            names = ("reference_material_id", "analyte", "unit", "source")
            new[key] = {**dict(zip(names, key, strict=True)), **said}
        elif any(said[name] != getattr(before, name) for name in _SAID):
            connection.execute(
                sa.update(_value).where(_value.c.reference_value_id == before.reference_value_id).values(**said)
            )
            about = f"{row['material']} {row['analyte']}"
            changed.changes += [
                f"{about}: {name} {_spelled(getattr(before, name))} -> {_spelled(said[name])}"
                for name in _SAID
                if said[name] != getattr(before, name)
            ]
    if new:
        connection.execute(sa.insert(_value), list(new.values()))
    changed.added = len(new)
    return changed


def _material_ids(connection: sa.Connection, names: Iterable[str]) -> dict[str, int]:
    wanted = list(dict.fromkeys(names))
    known = {row.name: row.reference_material_id for row in connection.execute(sa.select(_material))}
    missing = [{"name": name} for name in wanted if name not in known]
    if missing:
        connection.execute(sa.insert(_material), missing)
        known = {row.name: row.reference_material_id for row in connection.execute(sa.select(_material))}
    return {name: known[name] for name in wanted}


def material_names(connection: sa.Connection) -> list[str]:
    """The names of the registered materials."""
    return list(connection.execute(sa.select(_material.c.name).order_by(_material.c.name)).scalars())


def values_of(connection: sa.Connection, materials: Iterable[str]) -> dict[str, list[Any]]:
    """The values of materials, oldest first: rows with the columns of ``reference_value``."""
    found: dict[str, list[Any]] = {}
    query = (
        sa.select(_material.c.name, *_value.c)
        .join(_value, _value.c.reference_material_id == _material.c.reference_material_id)
        .where(_material.c.name.in_(set(materials)))
        .order_by(_value.c.reference_value_id)
    )
    for row in connection.execute(query):
        found.setdefault(row.name, []).append(row)
    return found


def _spelled(value: Any) -> str:
    if value is None:
        return "(blank)"
    return f"{value:g}" if isinstance(value, float) else str(value)
