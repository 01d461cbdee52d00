"""The check harness itself: what it reads, how it calls and how it tells a failure."""

from __future__ import annotations

import dataclasses
import re

import numpy as np
import pytest

from registry.petrology.catalogue import METHOD_BY_KEY
from registry.petrology.selftest import (
    COLUMNS,
    MISSING,
    Check,
    agrees,
    published_checks,
    read_checks,
    run_check,
    run_selftest,
)

HEADER = ",".join(COLUMNS)
#: Conversion factor 0.89981 by arithmetic of the atomic weights [prohaska2022]: 2 x 71.844 / 159.687.
FEOT = Check(
    method="iron.total_iron_as_feo",
    source="prohaska2022",
    page="",
    status="recomputed",
    inputs={"feo_wt": 0, "fe2o3_wt": 10},
    output="",
    expected=8.9981,
    tolerance=5e-5,
    note="",
    file="test.csv",
    line=2,
)


def test_run_check_right_value_passes() -> None:
    result = run_check(FEOT)

    assert result.passed
    assert result.problem is None
    assert result.found == pytest.approx(8.9981, abs=5e-5)
    assert "agrees with 8.9981" in result.sentence()


def test_run_check_wrong_value_fails_with_both_numbers() -> None:
    result = run_check(dataclasses.replace(FEOT, expected=9.1))

    assert not result.passed
    assert "differs from 9.1" in result.sentence()


def test_run_check_missing_input_gives_missing_output() -> None:
    assert run_check(dataclasses.replace(FEOT, inputs={"feo_wt": None, "fe2o3_wt": 10}, expected=MISSING)).passed


@pytest.mark.parametrize(
    ("changes", "problem"),
    [
        ({"method": "iron.no_such_function"}, "AttributeError: .*no_such_function"),
        ({"inputs": {"feo": 1}}, "TypeError: .*feo"),
        ({"inputs": {"feo_wt": [1, 2], "fe2o3_wt": [1, 2]}}, "gave 2 values"),
        ({"method": "no_such_key"}, "no method 'no_such_key'"),
        ({"method": "iron", "inputs": {"sio2": 50}}, r"takes no inputs \['sio2'\]"),
        ({"method": "iron", "inputs": {}, "output": "feo"}, "no output 'feo'"),
        ({"method": "norm.NORM_COLUMNS"}, "TypeError"),
    ],
)
def test_run_check_impossible_row_tells_the_problem(changes: dict, problem: str) -> None:
    result = run_check(dataclasses.replace(FEOT, **changes))

    assert not result.passed
    assert re.search(problem, result.sentence())


def test_run_check_method_not_computed_yet_tells_so(monkeypatch: pytest.MonkeyPatch) -> None:
    waiting = dataclasses.replace(METHOD_BY_KEY["iron"], function=None)
    monkeypatch.setitem(METHOD_BY_KEY, "iron", waiting)

    result = run_check(dataclasses.replace(FEOT, method="iron"))

    assert not result.passed
    assert result.problem == "LookupError: the method 'iron' is not computed yet"


def test_run_check_text_output_is_compared_as_text() -> None:
    measured = {"feo_titrated_wt": 7.13, "fe2o3_ferric_wt": 3.79}
    check = dataclasses.replace(FEOT, method="iron", inputs=measured, output="iron_basis", expected="titrated FeO")

    assert run_check(check).passed
    assert not run_check(dataclasses.replace(check, expected="guessed")).passed
    assert run_check(dataclasses.replace(check, inputs={}, expected=MISSING)).passed


@pytest.mark.parametrize(
    ("found", "expected", "tolerance", "answer"),
    [
        (1.0, 1.05, 0.05, True),
        (1.0, 1.06, 0.05, False),
        (np.nan, 1.0, 0.5, False),
        (np.nan, MISSING, 0.0, True),
        (None, MISSING, 0.0, True),
        (1.0, MISSING, 0.0, False),
        ("granite", "granite", 0.0, True),
        ("granite", "gabbro", 0.0, False),
        (None, "gabbro", 0.0, False),
    ],
)
def test_agrees_pair_gives_answer(found: object, expected: object, tolerance: float, answer: bool) -> None:
    assert agrees(found, expected, tolerance) is answer


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ('a,b,c,published,{"x":1},y,1', r"expected 9 cells"),
        ("a,b,c,seen,{},y,1,0,", r"row 2, column 'status': found 'seen'"),
        ("a,b,c,published,{,y,1,0,", r"column 'inputs': not a JSON object"),
        ("a,b,c,published,[],y,1,0,", r"column 'inputs': expected a JSON object"),
        ("a,b,c,published,{},y,1,half,", r"column 'tolerance': found 'half'"),
    ],
)
def test_read_checks_bad_row_names_place_and_fault(line: str, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        read_checks("x.csv", [HEADER, line])


def test_read_checks_wrong_header_names_the_columns() -> None:
    with pytest.raises(ValueError, match=r"x.csv, row 1: found the columns \['a'\]"):
        read_checks("x.csv", ["a", "1"])


def test_run_selftest_all_rows_gives_one_record_each() -> None:
    checks = published_checks()[:5]

    assert [result.line for result in run_selftest(checks)] == [check.line for check in checks]
