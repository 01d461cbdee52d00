"""Every shipped check value is recomputed; a value that is not published says so in its status."""

from __future__ import annotations

import pytest

from registry.petrology.references import REFERENCES
from registry.petrology.selftest import Check, published_checks, run_check

CHECKS = published_checks()


def _name(check: Check) -> str:
    return f"{check.file}:{check.line}-{check.method}-{check.output}"


@pytest.mark.parametrize("check", CHECKS, ids=_name)
def test_published_value_recomputed_agrees(check: Check) -> None:
    result = run_check(check)

    assert result.passed, result.sentence()


@pytest.mark.parametrize("check", CHECKS, ids=_name)
def test_published_row_source_is_a_known_reference(check: Check) -> None:
    assert check.source in REFERENCES or "common practice" in (check.source, check.status), check


def test_published_files_are_there() -> None:
    assert {check.file for check in CHECKS} >= {"iron.csv", "closure.csv", "norm.csv"}
