"""Rows of ``account``: who may change the registry through the site, each with the hash of a password."""

from __future__ import annotations

from typing import Any

import sqlalchemy as sa

from registry.store import tables

_account = tables.account


def any_account(connection: sa.Connection) -> bool:
    """Whether the registry holds an account at all."""
    return connection.execute(sa.select(_account.c.account_id).limit(1)).first() is not None


def list_accounts(connection: sa.Connection) -> list[dict[str, Any]]:
    """Every account, oldest first: ``account_id name password_hash role created_at``."""
    query = sa.select(
        *(_account.c[name] for name in ("account_id", "name", "password_hash", "role", "created_at"))
    ).order_by(_account.c.account_id)
    return [dict(row._mapping) for row in connection.execute(query)]


def find_account(connection: sa.Connection, account_id: int) -> dict[str, Any] | None:
    """One account by its id, with the same keys; None where there is none (any more: ids are never used again)."""
    return next((row for row in list_accounts(connection) if row["account_id"] == account_id), None)


def insert_account(connection: sa.Connection, *, name: str, password_hash: str, role: str, created_at: str) -> int:
    """Add an account; its id."""
    inserted = connection.execute(
        sa.insert(_account).values(name=name, password_hash=password_hash, role=role, created_at=created_at)
    )
    return int(inserted.inserted_primary_key[0])  # type: ignore[index]


def set_password_hash(connection: sa.Connection, account_id: int, password_hash: str) -> None:
    """Put another hash in the place of an account's."""
    connection.execute(
        sa.update(_account).where(_account.c.account_id == account_id).values(password_hash=password_hash)
    )


def delete_account(connection: sa.Connection, account_id: int) -> None:
    """Delete an account; what it did keeps its name."""
    connection.execute(sa.delete(_account).where(_account.c.account_id == account_id))
