"""Recompute the check values that ship with the formulas (``published/*.csv``) and say which of them still hold.

A row names a method of the catalogue by its key, or a function outside it by its dotted name under
``registry.petrology`` (``iron.buffer_log_fo2``). The inputs are a JSON object. Numbers and truths become arrays of
shape (1,), texts object arrays of shape (1,), lists arrays as they stand and objects mappings of such arrays;
a parameter of a plain function that is annotated ``str``, ``float``, ``int`` or ``bool`` is handed over as it is.
Inputs of a catalogue method that the row leaves out are missing (NaN, None, False or the qualifier 0), and
``conventions`` holds the defaults but for what the row says.
"""

from __future__ import annotations

import csv
import json
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from importlib import import_module
from importlib.resources import files
from inspect import signature
from typing import Any

import numpy as np

from registry.petrology.conventions import Conventions

COLUMNS = ("method", "source", "page_or_table", "status", "inputs", "output", "value", "tolerance", "note")
STATUSES = ("published", "from memory", "recomputed", "common practice")
#: Written as ``value`` where the output must be missing.
MISSING = "missing"
#: Inputs of the context that are words, and those that are truths.
TEXT_INPUTS = frozenset(["sample_kind", "lithology", "texture", "alteration", "intrusion_shape", "site_kind"])
TRUTH_INPUTS = frozenset({"has_intrusion", "body_mapped_or_cored", "is_plutonic"})
_SCALARS = {"str": str, "float": float, "int": int, "bool": bool}


@dataclass(frozen=True)
class Check:
    """One row of a check file; ``file`` and ``line`` say where it stands."""

    method: str
    source: str
    page: str
    status: str
    inputs: Mapping[str, Any]
    output: str
    expected: float | str
    tolerance: float
    note: str
    file: str
    line: int


@dataclass(frozen=True)
class CheckResult:
    """What came of one check. ``problem`` says why nothing could be computed, else it is None."""

    method: str
    source: str
    page: str
    status: str
    output: str
    expected: float | str
    found: float | str | None
    tolerance: float
    passed: bool
    problem: str | None
    file: str
    line: int

    def sentence(self) -> str:
        place = f"{self.file}, row {self.line}: {self.method} {self.output}"
        if self.problem is not None:
            return f"{place}: {self.problem}."
        verdict = "agrees with" if self.passed else "differs from"
        return f"{place}: {self.found} {verdict} {self.expected} +- {self.tolerance} ({self.source}, {self.status})."


def published_checks() -> list[Check]:
    """All rows of all check files, by file name and line; ValueError where a row is malformed."""
    checks: list[Check] = []
    folder = files("registry.petrology") / "published"
    paths = [path for path in folder.iterdir() if path.name.endswith(".csv")]
    for path in sorted(paths, key=lambda entry: entry.name):
        checks.extend(read_checks(path.name, path.read_text(encoding="utf-8").splitlines()))
    return checks


def read_checks(name: str, lines: Iterable[str]) -> list[Check]:
    """The rows of one check file given as its lines; ValueError naming file, row and column of a fault."""
    reader = csv.DictReader(lines)
    if tuple(reader.fieldnames or ()) != COLUMNS:
        raise ValueError(f"{name}, row 1: found the columns {reader.fieldnames}; expected {list(COLUMNS)}")
    return [_check(name, reader.line_num, row) for row in reader]


def _check(name: str, line: int, row: Mapping[str, str]) -> Check:
    if None in row or None in row.values():
        raise ValueError(f"{name}, row {line}: expected {len(COLUMNS)} cells; quote cells that hold commas")
    if row["status"] not in STATUSES:
        raise ValueError(f"{name}, row {line}, column 'status': found '{row['status']}', expected one of {STATUSES}")
    try:
        inputs = json.loads(row["inputs"])
    except json.JSONDecodeError as error:
        raise ValueError(f"{name}, row {line}, column 'inputs': not a JSON object: {error}") from error
    if not isinstance(inputs, dict):
        raise ValueError(f"{name}, row {line}, column 'inputs': expected a JSON object, found '{row['inputs']}'")
    try:
        expected: float | str = float(row["value"])
    except ValueError:
        expected = row["value"]
    try:
        tolerance = float(row["tolerance"] or 0.0)
    except ValueError as error:
        raise ValueError(
            f"{name}, row {line}, column 'tolerance': found '{row['tolerance']}', expected a number"
        ) from error
    return Check(
        method=row["method"],
        source=row["source"],
        page=row["page_or_table"],
        status=row["status"],
        inputs=inputs,
        output=row["output"],
        expected=expected,
        tolerance=tolerance,
        note=row["note"],
        file=name,
        line=line,
    )


def run_selftest(checks: Iterable[Check] | None = None) -> list[CheckResult]:
    """Recompute the given checks (all of them if None). Never raises for a failing one: it is in its record."""
    return [run_check(check) for check in (published_checks() if checks is None else checks)]


def run_check(check: Check) -> CheckResult:
    """Recompute one check."""
    found: float | str | None = None
    problem: str | None = None
    try:
        found = _single(_call(check), check.output)
    except Exception as error:  # whatever went wrong is the result of this check, told in its record
        problem = f"{type(error).__name__}: {error}"
    return CheckResult(
        method=check.method,
        source=check.source,
        page=check.page,
        status=check.status,
        output=check.output,
        expected=check.expected,
        found=found,
        tolerance=check.tolerance,
        passed=problem is None and agrees(found, check.expected, check.tolerance),
        problem=problem,
        file=check.file,
        line=check.line,
    )


def agrees(found: float | str | None, expected: float | str, tolerance: float) -> bool:
    """True where a recomputed value is the expected text, lies within the tolerance, or is missing as expected."""
    if expected == MISSING:
        return found is None or (isinstance(found, float) and bool(np.isnan(found)))
    if isinstance(expected, str) or isinstance(found, str) or found is None:
        return found == expected
    return bool(abs(found - expected) <= tolerance + 1e-12 * max(1.0, abs(expected)))


def _call(check: Check) -> Any:
    if "." in check.method:
        module, _, name = check.method.rpartition(".")
        function = getattr(import_module(f"registry.petrology.{module}"), name)
        return function(**_plain_arguments(function, check.inputs))
    from registry.petrology.catalogue import METHOD_BY_KEY

    method = METHOD_BY_KEY.get(check.method)
    if method is None:
        raise LookupError(f"the catalogue has no method '{check.method}'; a function outside it needs its dotted name")
    if method.function is None:
        raise LookupError(f"the method '{check.method}' is not computed yet")
    unknown = sorted(set(check.inputs) - set(method.inputs))
    if unknown:
        raise LookupError(f"'{check.method}' takes no inputs {unknown}; it takes {list(method.inputs)}")
    texts = TEXT_INPUTS | {
        quantity.name for other in METHOD_BY_KEY.values() for quantity in other.outputs if quantity.unit == "text"
    }
    result = method.function(*(_catalogue_argument(name, check.inputs, texts) for name in method.inputs))
    return {method.outputs[0].name: result} if isinstance(result, np.ndarray) else result


def _plain_arguments(function: Callable[..., Any], inputs: Mapping[str, Any]) -> dict[str, Any]:
    annotations = {name: parameter.annotation for name, parameter in signature(function).parameters.items()}
    return {
        name: value
        if annotations.get(name) in _SCALARS or annotations.get(name) in _SCALARS.values()
        else _array(value)
        for name, value in inputs.items()
    }


def _catalogue_argument(name: str, inputs: Mapping[str, Any], texts: frozenset[str]) -> Any:
    if name == "conventions":
        return Conventions.from_dict(dict(inputs.get(name, {})))
    if name.startswith(("qualifier:", "digestion:")):
        return np.array([inputs.get(name, 0)], dtype=np.uint8)
    if name in inputs:
        return _array(inputs[name])
    if name in TRUTH_INPUTS or name.startswith("logged_"):
        return np.array([False])
    return np.array([None], dtype=object) if name in texts else np.array([np.nan])


def _array(value: Any) -> Any:
    if isinstance(value, dict):
        return {name: _array(part) for name, part in value.items()}
    parts = value if isinstance(value, list) else [value]
    if any(isinstance(part, str) for part in parts):
        return np.array(parts, dtype=object)
    if parts and all(isinstance(part, bool) for part in parts):
        return np.array(parts, dtype=bool)
    return np.array([np.nan if part is None else part for part in parts], dtype=np.float64)


def _single(result: Any, output: str) -> float | str | None:
    if isinstance(result, Mapping):
        if output not in result:
            raise LookupError(f"there is no output '{output}'; found {sorted(result)}")
        result = result[output]
    values = np.atleast_1d(np.asarray(result)).ravel()
    if values.shape != (1,):
        raise ValueError(f"'{output}' gave {values.shape[0]} values; a check compares one")
    value = values[0]
    if value is None or isinstance(value, str):
        return None if value is None else str(value)
    return float(value)
