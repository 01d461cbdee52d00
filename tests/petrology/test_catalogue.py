"""The catalogue as a whole: nothing derived without source, equation, range, status, check rows and words."""

from __future__ import annotations

import re
import sqlite3
from collections import Counter, defaultdict
from contextlib import closing
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import registry.petrology
from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.petrology.catalogue import (
    CAUSES,
    METHOD_OF_QUANTITY,
    METHODS,
    QUANTITIES,
    WARNINGS,
    Method,
    Range,
    _ordered,
)
from registry.petrology.catalogue.records import STATUSES
from registry.petrology.references import REFERENCES
from registry.petrology.selftest import Check, published_checks
from registry.store.sheets import DERIVED_COLUMNS, DERIVED_SHEETS, SHEETS

PACKAGE = Path(registry.petrology.__file__).parent
FEWEST_CHECKS = 3


def _checks() -> dict[str, list[Check]]:
    by_method: dict[str, list[Check]] = defaultdict(list)
    for check in published_checks():
        by_method[check.method].append(check)
    return by_method


CHECKS = _checks()
RANGED = [method for method in METHODS if method.calibration]
LIMITS = [(method, limits) for method in RANGED for limits in method.calibration]


def _key(value: Any) -> str:
    return value.key if isinstance(value, Method) else value.column if isinstance(value, Range) else str(value)


def test_catalogue_fills_every_derived_column_and_no_other_once() -> None:
    names = [quantity.name for quantity in QUANTITIES]

    assert [name for name, count in Counter(names).items() if count > 1] == []
    assert set(names) == set(DERIVED_COLUMNS)


@pytest.mark.parametrize("column", DERIVED_COLUMNS)
def test_derived_column_has_a_method_that_computes_it_and_says_how(column: str) -> None:
    method = METHOD_OF_QUANTITY[column]

    assert method.function is not None
    assert method.source in REFERENCES
    assert method.label and method.equation and method.standard_error
    assert method.status in STATUSES
    assert all(limits.low is not None or limits.high is not None for limits in method.calibration)


@pytest.mark.parametrize("quantity", QUANTITIES, ids=lambda quantity: quantity.name)
def test_quantity_has_unit_label_and_meaning(quantity: Any) -> None:
    assert quantity.unit.strip() and quantity.label.strip() and quantity.meaning.strip() and quantity.sheet
    assert quantity.low is None or quantity.high is None or quantity.low < quantity.high


@pytest.mark.parametrize("method", METHODS, ids=_key)
def test_method_has_three_check_rows_or_more(method: Method) -> None:
    assert len(CHECKS[method.key]) >= FEWEST_CHECKS
    checked = {check.output for check in CHECKS[method.key]}
    assert checked <= {output.name for output in method.outputs} | {""}


@pytest.mark.parametrize("method", RANGED, ids=_key)
def test_method_with_a_range_has_a_check_row_outside_it(method: Method) -> None:
    def is_outside(check: Check) -> bool:
        values = ((limits, check.inputs.get(limits.column)) for limits in method.calibration)
        return "outside the range" in check.note or any(
            isinstance(value, int | float) and _outside(limits, value) for limits, value in values
        )

    assert any(is_outside(check) for check in CHECKS[method.key])


def _outside(limits: Range, value: float) -> bool:
    below = limits.low is not None and value < limits.low
    return below or (limits.high is not None and value > limits.high)


@pytest.mark.parametrize(("method", "limits"), LIMITS, ids=_key)
def test_value_outside_a_range_is_warned_and_on_its_limit_is_not(method: Method, limits: Range) -> None:
    warning = next(warning for warning in WARNINGS if warning.code == f"{method.key}_outside_range")
    is_text = method.outputs[0].unit == "text"
    value = np.array(["a word"], dtype=object) if is_text else np.array([1.0])
    inside = {each.column: each.low if each.low is not None else each.high for each in method.calibration}

    def is_raised(**changes: float) -> bool:
        columns = [np.array([{**inside, **changes}[column]]) for column in warning.inputs[1:]]
        return bool(warning.mask(value, *columns)[0])

    assert warning.column == method.outputs[0].name
    for limit, beyond in ((limits.low, -1e-6), (limits.high, 1e-6)):
        if limit is not None:
            assert not is_raised(**{limits.column: limit})
            assert is_raised(**{limits.column: limit + beyond})


@pytest.mark.parametrize("method", RANGED, ids=_key)
def test_value_that_is_missing_is_not_warned_for_its_range(method: Method) -> None:
    warning = next(warning for warning in WARNINGS if warning.code == f"{method.key}_outside_range")
    is_text = method.outputs[0].unit == "text"
    missing = np.array([None], dtype=object) if is_text else np.array([np.nan])

    assert not warning.mask(missing, *(np.array([1e9]) for _ in warning.inputs[1:]))[0]


def test_column_guide_explains_every_computed_column_of_every_sheet(founded_registry_file: Path) -> None:
    unit_of = {quantity.name: quantity.unit for quantity in QUANTITIES}
    with closing(sqlite3.connect(founded_registry_file)) as connection:
        rows = connection.execute("SELECT view_name, column_name, unit, meaning, method, source FROM column_guide")
        guide = {(view, column): tuple(words) for view, column, *words in rows}

    for view in DERIVED_SHEETS:
        for column in SHEETS[view][2:-1]:
            method = METHOD_OF_QUANTITY[column]
            unit, meaning, name, source = guide[view, column]
            assert (unit, name) == (unit_of[column], method.label)
            assert meaning
            assert REFERENCES[method.source] in source and method.equation in source


def test_references_are_all_used_by_a_formula_a_constant_or_a_check() -> None:
    text = "\n".join(
        path.read_text(encoding="utf-8")
        for path in PACKAGE.parent.rglob("*")
        if path.suffix in {".py", ".toml"} and "references" not in path.parts
    )
    cited = {check.source for checks in CHECKS.values() for check in checks}

    assert [key for key in REFERENCES if key not in cited and not re.search(rf"\b{key}\b", text)] == []


def test_citations_in_docstrings_and_notes_are_known_references() -> None:
    text = "\n".join(path.read_text(encoding="utf-8") for path in PACKAGE.rglob("*.py"))

    assert set(re.findall(r"\[([a-z]+\d{4}[a-z]?)\]", text)) <= set(REFERENCES)


def test_methods_that_wait_for_each_other_are_refused_by_name() -> None:
    def method(key: str, needs: str, gives: str) -> Method:
        return replace(METHODS[0], key=key, inputs=(needs,), outputs=(replace(QUANTITIES[0], name=gives),))

    with pytest.raises(ValueError, match=r"methods wait for each other: \['one', 'two'\]"):
        _ordered([method("free", "x", "y"), method("one", "b", "a"), method("two", "a", "b")])


def test_methods_stand_behind_those_whose_outputs_they_read() -> None:
    known: set[str] = set()
    for method in METHODS:
        assert not (set(method.inputs) - known) & set(DERIVED_COLUMNS), method.key
        known |= {output.name for output in method.outputs}


def test_causes_have_letters_of_their_own_and_words() -> None:
    letters = [letter for letter, _ in CAUSES.values()]

    assert len(set(letters)) == len(letters)
    assert all(re.fullmatch("[A-Za-z0-9]", letter) for letter in letters)
    assert all(text.strip() for _, text in CAUSES.values())


def test_causes_of_one_code_have_one_text() -> None:
    texts = defaultdict(set)
    for cause in (cause for method in METHODS for cause in method.causes):
        texts[cause.code].add(cause.text or CAUSES[cause.code][1])

    assert {code: found for code, found in texts.items() if len(found) > 1} == {}


def test_warnings_have_codes_of_their_own_and_stand_on_a_known_column() -> None:
    codes = Counter(warning.code for warning in WARNINGS)
    known = {column for columns in SHEETS.values() for column in columns} | set(DERIVED_COLUMNS)

    assert [code for code, count in codes.items() if count > 1] == []
    assert [warning.code for warning in WARNINGS if warning.column not in known] == []


@pytest.mark.parametrize("warning", WARNINGS, ids=lambda warning: warning.code)
def test_warning_tells_its_value_where_it_names_one(warning: Any) -> None:
    assert ("{value}" in warning.text) == (warning.value_column is not None)
    if warning.value_column is not None:
        assert "4.25" in warning.text.format_map(defaultdict(str, value=4.25))


def test_warnings_name_only_columns_of_the_composition_or_the_derived_row() -> None:
    stored = {*CHOSEN_COLUMNS, *DERIVED_COLUMNS, "value"}
    named = {(w.code, name) for w in WARNINGS for name in re.findall(r"\{(\w+)\}", w.text)}

    assert {(code, name) for code, name in named if name not in stored} == set()
    assert ("feo_exceeds_total_iron", "fe2o3t_reported_wt") in named
    assert ("zr_hf_outside_nature", "hf_ppm") in named
