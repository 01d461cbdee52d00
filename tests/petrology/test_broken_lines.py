"""Broken lines against numpy's own interpolation, and codes against numpy's own choice."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.broken_lines import broken_line, first_code
from registry.petrology.quotients import is_absent

CORNERS = ((1.0, 2.0, 4.0, 7.0), (5.0, 1.0, 3.0, -2.0))


@given(st.lists(st.floats(-10.0, 20.0), min_size=1, max_size=30))
def test_broken_line_is_what_numpy_interpolates(x: list[float]) -> None:
    np.testing.assert_allclose(broken_line(x, *CORNERS), np.interp(x, *CORNERS), rtol=0, atol=1e-12)


def test_broken_line_is_exact_at_its_corners_and_keeps_nan() -> None:
    assert broken_line(CORNERS[0], *CORNERS).tolist() == list(CORNERS[1])
    assert np.isnan(broken_line([np.nan], *CORNERS)).all()
    assert np.isnan(broken_line([np.nan], *CORNERS, extended=True)).all()


@pytest.mark.parametrize(("x", "held", "extended"), [(0.0, 5.0, 9.0), (10.0, -2.0, -7.0)])
def test_broken_line_beyond_its_ends_is_held_or_carried_on(x: float, held: float, extended: float) -> None:
    assert broken_line([x], *CORNERS).tolist() == [held]
    assert broken_line([x], *CORNERS, extended=True).tolist() == pytest.approx([extended])


def test_broken_line_of_two_corners_is_a_straight_line() -> None:
    assert broken_line([0.0, 1.0, 2.0], (0.0, 2.0), (0.0, 4.0)).tolist() == [0.0, 2.0, 4.0]


def test_first_code_is_that_of_the_first_condition_that_holds() -> None:
    first, second = np.array([True, False, False]), np.array([True, True, False])
    codes = np.array([7, 8, 9], dtype=np.int8)

    assert first_code([first, second], [1, codes], -1).tolist() == [1, 8, -1]
    assert first_code([first, second], [1, 2], codes).tolist() == [1, 2, 9]


def test_is_absent_tells_none_and_nothing_else() -> None:
    words = np.array([None, "", "a word", 0, np.nan, None], dtype=object)

    assert is_absent(words).tolist() == [True, False, False, False, False, True]
    assert is_absent(words[::2]).tolist() == [True, False, False]
    assert is_absent(words[:0]).tolist() == []
