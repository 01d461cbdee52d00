"""No pure function of the melt, ascent and heat modules stumbles over impossible values or spreads them.

Every public function is fed zeros, negatives, missing and absurd numbers: it must not warn (warnings are errors here)
and, where it takes rows, each row alone must give what it gives among others. Invented values; no source.
"""

from __future__ import annotations

import importlib
import inspect
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from registry.petrology.melt_composition import MELT_OXIDES
from registry.petrology.melt_density import DENSITY_OXIDES

MODULES = (
    "liquidus_models", "melt_composition", "saturation", "saturation_phosphates", "water", "melt_density", "viscosity",
    "ascent", "heat", "cooling", "intrusion_heat", "geotherm", "melting", "melting_conditions",
)  # fmt: skip
#: Functions whose arguments are words, mappings of formulas or conventions, tested by name elsewhere.
OTHERWISE_TESTED = {
    "water_depression", "melt_water_by_convention", "rock_density_kg_m3", "oxide_mole_fractions", "wet_wt",
    "cation_fractions", "zircon_zr_is_total", "by_silica_class", "ascent_cause",
}  # fmt: skip
VALUES = np.array([0.0, -1.0, np.nan, 1e-6, 1e-3, 0.5, 1.0, 5.0, 50.0, 70.0, 100.0, 1000.0, 1e5])
ROWS = 500


def _functions() -> list[Callable[..., Any]]:
    found = []
    for name in MODULES:
        module = importlib.import_module(f"registry.petrology.{name}")
        for function_name, function in inspect.getmembers(module, inspect.isfunction):
            own = function.__module__ == module.__name__ and not function_name.startswith("_")
            if own and function_name not in OTHERWISE_TESTED:
                found.append(function)
    return found


def _arguments(function: Callable[..., Any], generator: np.random.Generator) -> dict[str, Any]:
    arguments: dict[str, Any] = {}
    for name, parameter in inspect.signature(function).parameters.items():
        if name == "oxides":
            columns = DENSITY_OXIDES if "density" in function.__name__ else MELT_OXIDES
            arguments[name] = {column: generator.choice(VALUES, ROWS) for column in columns}
        elif name == "intrusion_shape":
            arguments[name] = generator.choice(np.array(["slab", "sphere", "cylinder", None], dtype=object), ROWS)
        elif name == "zr_is_total":
            arguments[name] = generator.random(ROWS) > 0.5
        elif parameter.annotation == "float":
            if parameter.default is inspect.Parameter.empty:
                arguments[name] = 2.0
        elif name != "volumes":
            arguments[name] = generator.choice(VALUES, ROWS)
    return arguments


def _row(arguments: dict[str, Any], row: int) -> dict[str, Any]:
    def one(value: Any) -> Any:
        if isinstance(value, dict):
            return {name: one(part) for name, part in value.items()}
        return value[row : row + 1] if isinstance(value, np.ndarray) else value

    return {name: one(value) for name, value in arguments.items()}


def _columns(result: Any) -> list[np.ndarray]:
    if isinstance(result, dict):
        return list(result.values())
    return list(result) if isinstance(result, tuple) else [result]


@pytest.mark.parametrize("function", _functions(), ids=lambda function: function.__name__)
def test_melt_function_absurd_values_neither_warn_nor_leave_their_row(function: Callable[..., Any]) -> None:
    arguments = _arguments(function, np.random.default_rng(2024))

    together = _columns(function(**arguments))

    for row in range(0, ROWS, 50):
        for whole, alone in zip(together, _columns(function(**_row(arguments, row))), strict=True):
            if np.asarray(whole).dtype.kind == "O":
                assert np.ravel(alone)[0] == np.ravel(whole)[row]
            else:
                np.testing.assert_allclose(np.ravel(alone)[0], np.ravel(whole)[row], rtol=1e-9, atol=1e-12)
