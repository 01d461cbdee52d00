"""Target definitions as rows: versions are kept, one of each target is active, and settings that change numbers."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from typing import Any

import sqlalchemy as sa

from registry.store import tables


def install_definition(
    connection: sa.Connection,
    code: str,
    name: str,
    version: str,
    definition: str,
    criteria: Sequence[Mapping[str, Any]],
    now: str,
) -> bool:
    """Make this text the active version of a target; False where that version stands already, unchanged.

    ``criteria`` are rows of the criterion table (gates first) without ids. ValueError where the same version number
    holds another text: a changed definition needs a new version number.
    """
    target_id = connection.scalar(sa.select(tables.target.c.target_id).where(tables.target.c.code == code))
    if target_id is None:
        inserted = connection.execute(sa.insert(tables.target).values(code=code, name=name))
        target_id = inserted.inserted_primary_key[0]  # type: ignore[index]
    versions = tables.target_version
    known = connection.execute(
        sa.select(versions.c.target_version_id, versions.c.definition).where(
            versions.c.target_id == target_id, versions.c.version == version
        )
    ).first()
    if known is not None:
        if known.definition != definition:
            raise ValueError(
                f"target {code}: version {version} already stands in the registry with another text; "
                "give the changed definition a new version number"
            )
        return False
    connection.execute(sa.update(versions).where(versions.c.target_id == target_id).values(active=0))
    inserted = connection.execute(
        sa.insert(versions).values(
            target_id=target_id, version=version, definition=definition, active=1, created_at=now
        )
    )
    version_id = inserted.inserted_primary_key[0]  # type: ignore[index]
    connection.execute(sa.insert(tables.criterion), [{"target_version_id": version_id, **row} for row in criteria])
    return True


def active_definitions(connection: sa.Connection) -> list[tuple[int, int, str, str]]:
    """Active versions in the order of installation: (target id, target version id, code, TOML text)."""
    rows = connection.execute(
        sa.select(
            tables.target.c.target_id,
            tables.target_version.c.target_version_id,
            tables.target.c.code,
            tables.target_version.c.definition,
        )
        .join(tables.target_version, tables.target_version.c.target_id == tables.target.c.target_id)
        .where(tables.target_version.c.active == 1)
        .order_by(tables.target.c.target_id)
    )
    return [tuple(row) for row in rows]


def read_settings(connection: sa.Connection) -> dict[str, str]:
    """Every setting by name, as text."""
    return {row.name: row.value for row in connection.execute(sa.select(tables.setting))}


def write_setting(connection: sa.Connection, name: str, value: str) -> None:
    """Set one setting (insert or update)."""
    changed = connection.execute(
        sa.update(tables.setting).where(tables.setting.c.name == name).values(value=value)
    ).rowcount
    if not changed:
        connection.execute(sa.insert(tables.setting).values(name=name, value=value))


def convention_set_id(connection: sa.Connection, conventions: Mapping[str, Any], now: str) -> int:
    """The id of this set of conventions; a set not met before is added."""
    text = json.dumps(dict(conventions), sort_keys=True)
    sets = tables.convention_set
    known = connection.scalar(sa.select(sets.c.convention_set_id).where(sets.c.conventions == text))
    if known is not None:
        return int(known)
    inserted = connection.execute(sa.insert(sets).values(conventions=text, created_at=now))
    return int(inserted.inserted_primary_key[0])  # type: ignore[index]
