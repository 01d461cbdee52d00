"""The conventions of a registry as settings: what may be chosen, and what was typed checked."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from registry.judging import read_conventions
from registry.petrology.catalogue.conventions import CONVENTION_GROUPS, CONVENTIONS
from registry.petrology.catalogue.records import Convention

__all__ = ["CONVENTIONS", "CONVENTION_GROUPS", "Convention", "current", "read_typed"]

CAUSE = "settings changed"
YES, NO = "yes", "no"
#: Pairs of limits of which the first must not lie above the second.
_ORDERED = (
    ("total_fail_low_wt", "total_warn_low_wt"),
    ("total_warn_high_wt", "total_fail_high_wt"),
    ("loi_warn_wt", "loi_fail_wt"),
)


def current(connection: Any) -> dict[str, Any]:
    """The conventions in force, by name."""
    return read_conventions(connection).as_dict()


def read_typed(typed: Mapping[str, str], before: Mapping[str, Any]) -> tuple[dict[str, Any], dict[str, str]]:
    """(values that differ from ``before``, a sentence for each field that cannot be taken); names not typed stay."""
    faults: dict[str, str] = {}
    values = {
        name: _value(record, typed[name].strip(), faults) for name, record in CONVENTIONS.items() if name in typed
    }
    after = {**before, **{name: value for name, value in values.items() if name not in faults}}
    for low, high in _ORDERED:
        if low not in faults and high not in faults and after[low] > after[high]:
            name = low if low in values and values[low] != before[low] else high
            faults[name] = (
                f"The limit that remarks must lie inside the limit that fails: {after[low]:g}, {after[high]:g}."
            )
    changed = {name: value for name, value in values.items() if name not in faults and value != before[name]}
    return changed, faults


def _value(record: Convention, text: str, faults: dict[str, str]) -> Any:
    if isinstance(record.default, bool):
        if text not in (YES, NO):
            faults[record.name] = f"“{text}” is neither yes nor no."
        return text == YES
    if record.choices:
        if text not in record.choices:
            faults[record.name] = f"“{text}” is no choice; choose one of {', '.join(record.choices)}."
        return text
    low, high = float(record.low or 0.0), float(record.high or 0.0)
    span = f"from {low:g} to {high:g}" + (f" {record.unit}" if record.unit != "1" else "")
    try:
        value = float(text.replace("\N{MINUS SIGN}", "-"))
    except ValueError:
        hint = f"; write {text.replace(',', '.')} with a point" if text.count(",") == 1 else ""
        faults[record.name] = f"“{text}” is not a number{hint}; expected a number {span}."
        return None
    if not (math.isfinite(value) and low <= value <= high):
        faults[record.name] = f"{text} lies outside what is taken; expected a number {span}."
    return value
