"""Every shipped check value is recomputed; a value that is not published says so in its status.

One test a file: two thousand tests of a millisecond each would cost more to hand out than to run.
"""

from __future__ import annotations

import pytest

from registry.petrology.references import REFERENCES
from registry.petrology.selftest import Check, published_checks, run_check

CHECKS = published_checks()
FILES = sorted({check.file for check in CHECKS})


def name(check: Check) -> str:
    return f"{check.file}:{check.line}-{check.method}-{check.output}"


@pytest.mark.parametrize("file", FILES)
def test_published_values_recomputed_agree(file: str) -> None:
    results = [(name(check), run_check(check)) for check in CHECKS if check.file == file]

    assert results
    assert [f"{row}: {result.sentence()}" for row, result in results if not result.passed] == []


@pytest.mark.parametrize("file", FILES)
def test_published_row_sources_are_known_references(file: str) -> None:
    checks = [check for check in CHECKS if check.file == file]

    unknown = [
        name(check)
        for check in checks
        if check.source not in REFERENCES and "common practice" not in (check.source, check.status)
    ]
    assert unknown == []


def test_published_files_are_there() -> None:
    assert {check.file for check in CHECKS} >= {"iron.csv", "closure.csv", "norm.csv"}
