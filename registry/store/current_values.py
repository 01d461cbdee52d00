"""What rows of sites or samples will hold once they are in: a blank cell leaves what is stored of the same code."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any


def current(
    stored: Mapping[str, list[Any]], known: Mapping[tuple[Any, ...], Mapping[str, Any]], name: str
) -> list[Any]:
    """One column of the rows; ``stored`` are their columns as they are to be stored, ``known`` what is, by key."""
    codes = stored["code"]
    rows = zip(stored.get(name, [None] * len(codes)), codes, strict=True)
    return [known.get((code,), {}).get(name) if value is None else value for value, code in rows]
