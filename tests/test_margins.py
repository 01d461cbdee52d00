"""The drawing of a margin: sides, order and ends. The scale is the project's own, no published source."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.margins import SHARE_AT_ONE_UNIT, interval_of, margin
from registry.targets.grammar import parse_near, parse_test

AT_LEAST, AT_MOST = parse_test("sr_y", ">= 35"), parse_test("k_rb", "<= 150")


@given(value=st.floats(-1e9, 1e9), limit=st.floats(-1e6, 1e6))
def test_margin_dot_stays_on_the_line_and_on_the_side_of_the_value(value: float, limit: float) -> None:
    drawn = margin(AT_LEAST, None, value, limit)
    assert drawn is not None and drawn.dot is not None
    assert -1.0 <= drawn.dot <= 1.0
    assert (drawn.dot > 0) <= (value > limit) and (drawn.dot < 0) <= (value < limit)


def test_margin_just_and_by_far_look_different() -> None:
    dots = [margin(AT_LEAST, None, value, 35.0).dot for value in (35.5, 40.0, 60.0, 200.0)]  # type: ignore[union-attr]
    assert dots == sorted(dots)  # type: ignore[type-var]
    assert dots[0] < 0.05 and dots[-1] > 0.7  # type: ignore[operator]


def test_margin_near_limit_stands_a_third_of_the_way_out() -> None:
    drawn = margin(AT_LEAST, parse_near(AT_LEAST, ">= 20"), 20.0, 35.0)
    assert drawn is not None and drawn.dot == pytest.approx(-SHARE_AT_ONE_UNIT)


def test_margin_met_side_follows_the_sign() -> None:
    above, below = margin(AT_LEAST, None, 1.0, 35.0), margin(AT_MOST, None, 1.0, 150.0)
    assert above is not None and (above.met_from, above.met_to) == (0.0, 1.0)
    assert below is not None and (below.met_from, below.met_to) == (-1.0, 0.0)


def test_margin_between_has_two_limits_with_the_met_side_inside() -> None:
    drawn = margin(parse_test("differentiation_index", "between 40 and 88"), None, 64.0, 88.0)
    assert drawn is not None
    assert drawn.ticks == pytest.approx((-SHARE_AT_ONE_UNIT, SHARE_AT_ONE_UNIT))
    assert (drawn.met_from, drawn.met_to, drawn.dot) == (*drawn.ticks, 0.0)


def test_margin_of_a_censored_value_is_an_interval_without_a_dot() -> None:
    drawn = margin(AT_LEAST, None, None, 35.0, "> 16")
    assert drawn is not None and drawn.dot is None
    assert drawn.low is not None and drawn.low < 0 and drawn.high == 1.0


def test_margin_of_words_or_of_nothing_known_is_not_drawn() -> None:
    assert margin(parse_test("redox_series", "= magnetite"), None, None, None, "magnetite") is None
    assert margin(AT_LEAST, None, None, 35.0, "missing: y_ppm") is None


@pytest.mark.parametrize(
    ("text", "ends"),
    [
        ("< 5.01", (0.0, 5.01)), ("> 16", (16.0, math.inf)), ("1.2 to 4.3", (1.2, 4.3)),
        ("749.8 to inf", (749.8, math.inf)),
        ("< 1e-05", (0.0, 1e-5)), ("missing: sn_ppm", None), ("not bounded", None), ("", None),
    ],
)  # fmt: skip
def test_interval_of_reads_what_the_reasons_write(text: str, ends: tuple[float, float] | None) -> None:
    assert interval_of(text) == ends
