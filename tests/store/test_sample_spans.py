"""Sampled intervals that overlap partly. Holes and codes are invented; what is an overlap is plain arithmetic."""

from __future__ import annotations

from itertools import combinations
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.errors import Problem
from registry.store import masters, sample_spans
from registry.store.engine import Registry, writing


@pytest.fixture
def looked(any_registry: Registry) -> Any:
    """Brings samples into a registry that holds the holes H1 and H2; the problems."""

    def look(kind: str, rows: dict[str, list[Any]]) -> list[Problem]:
        count = len(next(iter(rows.values())))
        with writing(any_registry) as connection:
            return masters.upsert(connection, kind, rows, np.arange(2, count + 2), f"{kind}.csv").problems

    assert look("sites", {"site_code": ["H1", "H2"], "site_kind": ["drill_hole"] * 2, "depth_m": [500.0] * 2}) == []
    return look


def samples(*spans: tuple[str, str, float, float], **more: list[Any]) -> dict[str, list[Any]]:
    names = ("sample_code", "site_code", "from_m", "to_m")
    return {**{name: list(column) for name, column in zip(names, zip(*spans, strict=True), strict=True)}, **more}


def test_samples_of_one_file_that_overlap_partly_are_remarked_on(looked: Any) -> None:
    (problem,) = looked("samples", samples(("B", "H1", 10.5, 11.5), ("A", "H1", 10.0, 11.0), ("C", "H2", 10.5, 11.5)))
    assert problem.severity == "warning"
    assert problem.sentence() == (
        "samples.csv, row 2, column 'from_m': the sampled interval overlaps partly that of another sample of its hole; "
        "found '10.5 to 11.5', expected depths outside 10 to 11 (sample A, row 3); correct the depths if the overlap "
        "is not meant; say what it duplicates if it is a duplicate."
    )


def test_sample_that_overlaps_a_registered_one_is_remarked_on(looked: Any) -> None:
    assert looked("samples", samples(("A", "H1", 10.0, 11.0))) == []
    (problem,) = looked("samples", samples(("B", "H1", 9.5, 10.5)))
    assert (problem.row, problem.found) == (2, "9.5 to 10.5")
    assert problem.expected == "depths outside 10 to 11 (sample A, registered)"


@pytest.mark.parametrize(
    "second",
    [(11.0, 12.0), (10.0, 11.0), (10.2, 10.4), (5.0, 20.0), (10.0, 10.5), (10.995, 12.0), (50.0, 51.0)],
    ids=["joined", "identical", "within", "around", "same top", "rounding", "apart"],
)
def test_intervals_that_do_not_cross_are_taken_without_a_word(looked: Any, second: tuple[float, float]) -> None:
    assert looked("samples", samples(("A", "H1", 10.0, 11.0), ("B", "H1", *second))) == []


def test_duplicates_and_other_controls_are_left_out(looked: Any) -> None:
    rows = samples(
        ("A", "H1", 10.0, 11.0), ("B", "H1", 10.5, 11.5), ("C", "H1", 9.5, 10.5),
        sample_kind=["core", "duplicate", "blank"], duplicate_of=[None, "A", None],
    )  # fmt: skip
    assert looked("samples", rows) == []
    assert looked("samples", samples(("D", "H1", 10.8, 10.9))) == []


def test_changed_depths_of_a_registered_sample_are_compared_as_they_will_be(looked: Any) -> None:
    looked("samples", samples(("A", "H1", 10.0, 11.0), ("B", "H1", 11.0, 12.0)))
    assert looked("samples", samples(("A", "H1", 10.0, 11.0), ("B", "H1", 11.0, 12.0))) == []
    (problem,) = looked("samples", {"sample_code": ["B"], "from_m": [10.5]})
    assert (problem.row, problem.found) == (2, "10.5 to 12")


def test_overlap_beside_a_long_sample_that_holds_both_is_found(looked: Any) -> None:
    rows = samples(("L", "H1", 0.0, 100.0), ("A", "H1", 10.0, 11.0), ("W", "H1", 10.6, 10.7), ("B", "H1", 10.5, 11.5))
    (problem,) = looked("samples", rows)
    assert problem.row == 5


def test_many_overlaps_are_listed_up_to_a_number_and_counted(looked: Any) -> None:
    rows = samples(*((f"S{number}", "H1", float(number), number + 1.5) for number in range(30)))
    problems = looked("samples", rows)
    assert len(problems) == sample_spans.LISTED + 1
    assert problems[-1].what == "9 more samples overlap partly with another of their hole"
    assert problems[-1].severity == "warning"


@given(st.lists(st.tuples(st.integers(1, 2), st.integers(0, 12), st.integers(1, 6)), max_size=12))
def test_crossing_pairs_are_those_found_one_by_one(drawn: list[tuple[int, int, int]]) -> None:
    spans = sorted((site, start, start + length) for site, start, length in drawn)
    site, start, end = np.array(spans, dtype=np.float64).reshape(len(spans), 3).T
    expected = {
        (i, j)
        for (i, a), (j, b) in combinations(enumerate(spans), 2)
        if a[0] == b[0] and a[1] < b[1] < a[2] < b[2]
    }  # fmt: skip
    found = sample_spans._crossing_pairs(site, start, end).tolist()
    assert sorted(map(tuple, found)) == sorted(expected)
