"""One sample as it is stored, made ready to be judged again: a workspace of arrays of length 1."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from registry.petrology.analytes import CHOSEN_COLUMNS, CHOSEN_INDEX, QUALIFIER_BELOW
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_LETTERS
from registry.petrology.logged import logged_words


def workspace_of_sample(sample: Mapping[str, Any], conventions: Conventions | None = None) -> dict[str, Any]:
    """A workspace of one sample from its stored row: columns by name, None for missing.

    ``qualifiers`` and ``digestions`` are the packed strings of the composition; a censored column holds its limit.
    """
    conventions = conventions or Conventions()
    workspace: dict[str, Any] = {"conventions": conventions}
    for name, value in sample.items():
        if value is None or name in ("qualifiers", "digestions", "conventions"):
            continue
        if isinstance(value, str):
            workspace[name] = np.array([value], dtype=object)
        elif isinstance(value, bool | int | float | np.number | np.bool_):
            workspace[name] = np.array([value], dtype=bool if isinstance(value, bool | np.bool_) else np.float64)
    _add_qualifiers(workspace, sample, conventions)
    words = [np.array([sample.get(name)], dtype=object) for name in ("lithology", "texture", "alteration")]
    for name, flag in logged_words(*words).items():
        workspace.setdefault(name, flag)
    workspace.setdefault("has_intrusion", np.array([bool(sample.get("intrusion"))]))
    return workspace


def _add_qualifiers(workspace: dict[str, Any], sample: Mapping[str, Any], conventions: Conventions) -> None:
    signs, letters = sample.get("qualifiers"), sample.get("digestions")
    for column in CHOSEN_COLUMNS:
        position = CHOSEN_INDEX[column]
        if letters:
            code = DIGESTION_LETTERS.index(letters[position])
            workspace[f"digestion:{column}"] = np.array([code], dtype=np.uint8)
        if signs and column in workspace and signs[position] in "<>":
            code = QUALIFIER_BELOW if signs[position] == "<" else 2
            workspace[f"qualifier:{column}"] = np.array([code], dtype=np.uint8)
            workspace[f"reported:{column}"] = workspace[column]
            if code == QUALIFIER_BELOW:
                workspace[column] = workspace[column] * conventions.censored_substitute
