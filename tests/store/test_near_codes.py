"""Near misses of sample codes. The codes are invented."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.store.near_codes import KnownCodes, near_misses, nearest, pattern_of, written_twice

KNOWN = ["BH1-001", "BH1-012", "S16", "A1-12", "Q 7"]


@pytest.mark.parametrize(
    ("code", "meant"),
    [("bh1-001", "BH1-001"),
     ("BH1/1", "BH1-001"), ("BH 01 012", "BH1-012"), ("S016", "S16"), ("S-16", "S16"), ("q7", "Q 7"),
     ("BH1\u2013001", "BH1-001")],
)  # fmt: skip
def test_code_that_differs_in_case_spaces_zeros_or_dashes_is_suggested(code, meant):
    assert near_misses([code], KNOWN) == {code: [meant]}


@pytest.mark.parametrize("code", ["A11-2", "BH1-002", "T16", "S160", "BH1-001"])
def test_code_that_is_another_or_known_as_written_has_no_near_miss(code):
    assert near_misses([code], KNOWN) == {}


MANY = ["KD002-200", "KD002-205", "KD002-206", "Q001a", "X-1"]


@pytest.mark.parametrize(
    ("code", "meant"),
    [("KD002-2OO", "KD002-200"), ("kd002-2oo", "KD002-200"), ("KD002-2055", "KD002-205"), ("X-l", "X-1"),
     ("KD002-2990", None), ("KD002-207", None), ("Q001", "Q001a")],
)  # fmt: skip
def test_nearest_code_is_one_slip_of_the_pen_away(code, meant):
    assert nearest([code], MANY).get(code) == meant


def test_pattern_of_codes_shows_digits_as_signs_and_the_ends():
    assert pattern_of(["Q003", "Q001", "Q240", "ST-1"]) == ("Q### (Q001 to Q240) and 1 of other forms", 4)
    assert pattern_of(["BLANK", "BLANK"]) == ("BLANK", 2)


SPELLINGS = st.lists(st.text("aA0oO1-_ .", min_size=1, max_size=5), max_size=12)


@given(known=SPELLINGS, new=SPELLINGS)
def test_known_codes_find_what_near_misses_finds(known: list[str], new: list[str]) -> None:
    """Invented codes of few letters, so that many are almost alike."""
    assert KnownCodes(lambda: known).near_misses(new) == near_misses(new, known)
    assert len(KnownCodes(lambda: known)) == len(known)


def test_codes_of_one_list_that_are_written_almost_the_same_point_to_the_first():
    codes = ["S1", "S2", "s-1", "S01", "S1", "OC 1", "A1-12", "OC1", "A11-2"]
    assert written_twice(codes) == {"s-1": "S1", "S01": "S1", "OC1": "OC 1"}
