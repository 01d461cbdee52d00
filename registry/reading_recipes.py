"""Named reading recipes of a registry: save one, propose one for a file of the same shape, forget one."""

from __future__ import annotations

import json
from dataclasses import replace
from typing import Any

from registry import auditing
from registry.clock import now
from registry.errors import NotFound, UsageError
from registry.intake import Recipe
from registry.store import recipe_rows
from registry.store.engine import Registry, reading, writing

KIND = "results"
LONGEST_NAME = 80


def save_recipe(registry: Registry, name: str, recipe: Recipe) -> bool:
    """Keep a recipe under a name; True where one of that name was replaced.

    UsageError for a name that is empty, too long or not printable, and for a recipe without a shape.
    """
    name = " ".join(name.split())
    if not name or len(name) > LONGEST_NAME or not name.isprintable():
        raise UsageError(f"a saved reading needs a name of 1 to {LONGEST_NAME} printable characters")
    if not recipe.shape:
        raise UsageError("this reading knows no headings, so no later file could be told to have its shape")
    named = replace(recipe, name=name)
    with writing(registry, what=f"saving the reading '{name}'") as connection:
        replaced = recipe_rows.save_recipe(
            connection,
            name=name,
            kind=KIND,
            shape=_shape(named.shape),
            recipe=named.to_json(),
            created_at=now(),
        )
        auditing.note(connection, "saved reading", name, "replaced" if replaced else "saved")
    return replaced


def list_recipes(registry: Registry) -> list[dict[str, Any]]:
    """Every saved recipe by name: ``name``, ``created_at``, ``headings`` (how many)."""
    with reading(registry) as connection:
        rows = recipe_rows.list_recipes(connection)
    return [
        {"name": row["name"], "created_at": row["created_at"], "headings": len(json.loads(row["shape"]))}
        for row in rows
    ]


def find_recipe(registry: Registry, name: str) -> Recipe:
    """A saved recipe; NotFound where there is none of that name."""
    with reading(registry) as connection:
        row = recipe_rows.find_recipe(connection, name)
        known = [] if row is not None else [one["name"] for one in recipe_rows.list_recipes(connection)]
    if row is None:
        listed = ", ".join(f"'{one}'" for one in known[:40]) + (" and others" if len(known) > 40 else "")
        raise NotFound(f"there is no saved reading '{name}'; " + (f"saved are {listed}" if known else "none is saved"))
    return Recipe.from_json(row["recipe"])


def proposed_names(registry: Registry, shape: tuple[str, ...]) -> list[str]:
    """Names of the recipes made for files with exactly these headings, newest first."""
    if not shape:
        return []
    with reading(registry) as connection:
        return [row["name"] for row in recipe_rows.recipes_of_shape(connection, KIND, _shape(shape))]


def forget_recipe(registry: Registry, name: str) -> None:
    """Delete a saved recipe; NotFound where there is none of that name."""
    with writing(registry, what=f"forgetting the reading '{name}'") as connection:
        if not recipe_rows.delete_recipe(connection, name):
            raise NotFound(f"there is no saved reading '{name}'")
        auditing.note(connection, "saved reading", name, "forgotten")


def _shape(shape: tuple[str, ...]) -> str:
    return json.dumps(list(shape), ensure_ascii=False)
