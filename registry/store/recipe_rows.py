"""Saved reading recipes: how a file of one shape is read, under a name."""

from __future__ import annotations

from typing import Any

import sqlalchemy as sa

from registry.store import tables

_recipe = tables.reading_recipe


def save_recipe(connection: sa.Connection, *, name: str, kind: str, shape: str, recipe: str, created_at: str) -> bool:
    """Keep a recipe under a name; True where one of that name was replaced. ``shape`` and ``recipe`` are JSON."""
    replaced = delete_recipe(connection, name)
    connection.execute(
        sa.insert(_recipe).values(name=name, kind=kind, shape=shape, recipe=recipe, created_at=created_at)
    )
    return replaced


def delete_recipe(connection: sa.Connection, name: str) -> bool:
    """Forget a recipe; False where there is none of that name."""
    return connection.execute(sa.delete(_recipe).where(_recipe.c.name == name)).rowcount > 0


def list_recipes(connection: sa.Connection) -> list[dict[str, Any]]:
    """Every recipe by name."""
    rows = connection.execute(sa.select(*_shown()).order_by(_recipe.c.name))
    return [dict(row._mapping) for row in rows]


def find_recipe(connection: sa.Connection, name: str) -> dict[str, Any] | None:
    """One recipe by its name, None where there is none."""
    row = connection.execute(sa.select(*_shown()).where(_recipe.c.name == name)).first()
    return None if row is None else dict(row._mapping)


def recipes_of_shape(connection: sa.Connection, kind: str, shape: str) -> list[dict[str, Any]]:
    """The recipes made for files of this kind with exactly these headings, newest first."""
    query = sa.select(*_shown()).where(_recipe.c.kind == kind, _recipe.c.shape == shape)
    return [dict(row._mapping) for row in connection.execute(query.order_by(_recipe.c.reading_recipe_id.desc()))]


def _shown() -> list[Any]:
    return [_recipe.c[name] for name in ("name", "kind", "shape", "recipe", "created_at")]
