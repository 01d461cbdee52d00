"""The catalogue: every derived quantity with its method, in the order of computation, and the remarks on values."""

from __future__ import annotations

import importlib
from typing import Any

import numpy as np

from registry.petrology.catalogue.records import Cause, Method, Quantity, Range, Warning
from registry.petrology.quotients import is_absent

__all__ = [
    "CAUSES",
    "METHODS",
    "METHOD_BY_KEY",
    "METHOD_OF_QUANTITY",
    "QUANTITIES",
    "WARNINGS",
    "Cause",
    "Method",
    "Quantity",
    "Range",
    "Warning",
]

TOPICS = (
    "iron",
    "closure",
    "norm",
    "trace",
    "indices",
    "alteration",
    "classification",
    "liquidus",
    "saturation",
    "melt",
    "ascent",
    "heat",
    "fitness",
    "kinds_of_analysis",
    "consistency",
    "logged",
    "melt_remarks",
)

#: Causes that any quantity can have; a method adds its own. The letter stands in ``derived.causes``.
GENERAL_CAUSES = (
    ("missing_input", "an analyte it needs was not reported, not determined or not carried by the digestion"),
    ("not_yet_computed", "this method is not computed by this version"),
    ("not_applicable", "not defined for this rock"),
    ("beyond_numbers", "an input is so large or so small that the result is no number: check the unit of its column"),
)
_LETTERS = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789"


def _range_warning(method: Method, quantities: dict[str, Quantity]) -> Warning | None:
    ranges = tuple(limits for limits in method.calibration if limits.low is not None or limits.high is not None)
    if not ranges:
        return None
    output = method.outputs[0]

    def outside(value: Any, *columns: Any) -> Any:
        mask = np.zeros(np.shape(value), dtype=bool)
        for limits, column in zip(ranges, columns, strict=True):
            if limits.low is not None:
                mask |= column < limits.low
            if limits.high is not None:
                mask |= column > limits.high
        present = ~np.isnan(value) if value.dtype.kind == "f" else ~is_absent(value)
        return mask & present

    told = [quantities[limits.column] for limits in ranges]
    units = ["" if quantity.unit == "1" else f" {quantity.unit}" for quantity in told]
    spelled = "; ".join(
        f"{quantity.label} {_spell(limits)}{unit}" for quantity, limits, unit in zip(told, ranges, units, strict=True)
    )
    return Warning(
        code=f"{method.key}_outside_range",
        column=output.name,
        value_column=ranges[0].column,
        text=f"outside the range {method.label} was calibrated for ({spelled}); {told[0].label} is "
        f"{{value}}{units[0]}" + (", the others stand in their sheets" if len(ranges) > 1 else ""),
        mask=outside,
        inputs=(output.name, *(limits.column for limits in ranges)),
    )


def _spell(limits: Range) -> str:
    if limits.low is None:
        return f"up to {limits.high:g}"
    if limits.high is None:
        return f"from {limits.low:g}"
    return f"{limits.low:g} to {limits.high:g}"


def _collect() -> tuple[tuple[Method, ...], tuple[Warning, ...]]:
    methods: list[Method] = []
    warnings: list[Warning] = []
    for topic in TOPICS:
        module = importlib.import_module(f"registry.petrology.catalogue.{topic}")
        methods.extend(module.METHODS)
        warnings.extend(module.WARNINGS)
    told = {output.name: output for method in methods for output in method.outputs}
    warnings.extend(warning for method in methods if (warning := _range_warning(method, told)) is not None)
    return _ordered(methods), tuple(warnings)


def _ordered(methods: list[Method]) -> tuple[Method, ...]:
    """Methods so that each follows those whose outputs it reads; ValueError names a circle."""
    produced = {output.name for method in methods for output in method.outputs}
    known: set[str] = set()
    ordered: list[Method] = []
    waiting = list(methods)
    while waiting:
        ready = [m for m in waiting if all(name in known or name not in produced for name in m.inputs)]
        if not ready:
            raise ValueError(f"methods wait for each other: {[method.key for method in waiting]}")
        for method in ready:
            ordered.append(method)
            known.update(output.name for output in method.outputs)
        waiting = [method for method in waiting if method not in ready]
    return tuple(ordered)


def _cause_letters(methods: tuple[Method, ...]) -> dict[str, tuple[str, str]]:
    texts = dict(GENERAL_CAUSES)
    for cause in (cause for method in methods for cause in method.causes):
        texts.setdefault(cause.code, cause.text)
    return {code: (letter, text) for letter, (code, text) in zip(_LETTERS[: len(texts)], texts.items(), strict=True)}


METHODS, WARNINGS = _collect()
QUANTITIES: tuple[Quantity, ...] = tuple(output for method in METHODS for output in method.outputs)
METHOD_BY_KEY: dict[str, Method] = {method.key: method for method in METHODS}
METHOD_OF_QUANTITY: dict[str, Method] = {output.name: method for method in METHODS for output in method.outputs}
#: code -> (letter in ``derived.causes``, text). A dot there means that the value is present.
CAUSES = _cause_letters(METHODS)
