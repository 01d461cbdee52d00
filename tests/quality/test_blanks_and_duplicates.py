"""Blanks against the limits of common practice; duplicates against Thompson and Howarth's published relations."""

from __future__ import annotations

import numpy as np
import pytest

from registry.quality.blanks import judge_blanks
from registry.quality.duplicates import (
    MEDIAN_OF_DIFFERENCE,
    NINETIETH,
    NINETY_NINTH,
    detection_limit_of,
    fit_precision,
    half_relative_difference,
    judge_duplicates,
    judge_pairs,
    precision_percent,
    too_many,
)
from registry.quality.states import FAILED, NOT_JUDGED, PASSED, WARNED
from registry.quality.trends import bias, least_squares


def test_blanks_at_the_limits_of_common_practice() -> None:
    """Above five detection limits a warning, above ten a failure: common practice, no source."""
    result = judge_blanks([0.5, 2.5, 2.6, 5.0, 5.1, np.nan], [1, 0, 0, 0, 0, 0], 0.5, np.nan)
    assert result.states.tolist() == [PASSED, PASSED, WARNED, WARNED, FAILED, NOT_JUDGED]


def test_blanks_below_the_limit_pass_unless_that_limit_says_nothing() -> None:
    """``<2.5`` is five detection limits of 0.5; ``<100``, of a diluted solution, may hide two hundred."""
    result = judge_blanks([0.5, 2.5, 100.0], [1, 1, 1], 0.5, np.nan)
    assert result.states.tolist() == [PASSED, PASSED, NOT_JUDGED]
    assert result.limit_too_high.tolist() == [False, False, True]


def test_blanks_without_a_detection_limit_are_not_judged() -> None:
    assert judge_blanks([3.0], [0], np.nan, np.nan).states.tolist() == [NOT_JUDGED]


def test_blanks_of_known_content_are_judged_by_the_excess() -> None:
    result = judge_blanks([14.0, 16.0, 30.0], [0, 0, 0], 1.0, np.nan, 14.0, 0.5)
    assert result.states.tolist() == [PASSED, PASSED, FAILED]
    alone = judge_blanks([14.0, 16.0], [0, 0], np.nan, np.nan, 14.0, 0.5)
    assert alone.states.tolist() == [PASSED, WARNED]


def test_blanks_after_a_rich_sample_are_called_carry_over() -> None:
    """40 ppm after 5,000 ppm is 0.8 % of it; after 60 ppm it is no carry-over."""
    result = judge_blanks([40.0, 40.0], [0, 0], 1.0, [5000.0, 60.0])
    np.testing.assert_allclose([0.8, 66.6667], result.carry_over_percent, rtol=1e-4)
    assert result.carried.tolist() == [True, False]
    assert result.states.tolist() == [FAILED, FAILED]


def test_half_relative_difference_of_a_pair() -> None:
    np.testing.assert_allclose([10.0, 0.0, np.nan], half_relative_difference([9.0, 5.0, 0.0], [11.0, 5.0, 0.0]))


def test_percentiles_of_differences_equal_the_published_factors() -> None:
    """Thompson & Howarth 1976, Analyst 101, 690-709: s_c = 1.048 x the median difference; recomputed from the normal
    quantiles 0.6745, 1.6449 and 2.5758 of printed tables."""
    np.testing.assert_allclose(1.048, 1.0 / MEDIAN_OF_DIFFERENCE, atol=5e-4)
    root = np.sqrt(2.0)
    np.testing.assert_allclose([1.6449 * root, 2.5758 * root], [NINETIETH, NINETY_NINTH], rtol=1e-4)


def test_detection_limit_is_where_the_precision_reaches_100_percent() -> None:
    """P_c = 200 s_c / c, c_d = 2 s_0/(1 - 2 k): Thompson & Howarth 1978."""
    s_0, k = 0.4, 0.03
    limit = detection_limit_of(s_0, k)
    np.testing.assert_allclose(100.0, precision_percent(limit, s_0, k), rtol=1e-12)
    assert np.isnan(detection_limit_of(1.0, 0.5))


def test_fit_precision_finds_the_line_of_simulated_pairs() -> None:
    """Simulated with s_c = 2 + 0.05 c, 20,000 pairs between 5 and 500, seed 3."""
    rng = np.random.default_rng(3)
    true = rng.uniform(5.0, 500.0, 20_000)
    a, b = (true + (2.0 + 0.05 * true) * rng.normal(size=true.size) for _ in range(2))
    fit = fit_precision(a, b)
    assert fit is not None
    assert abs(fit.s_0 - 2.0) < 4 * fit.line.intercept_error
    np.testing.assert_allclose(0.05, fit.k, rtol=0.05)
    assert (fit.pairs, fit.groups) == (20_000, 1818)


def test_fit_precision_needs_fifty_pairs() -> None:
    """Thompson & Howarth 1978 ask for 50 duplicates or more."""
    values = np.linspace(1.0, 50.0, 50)
    assert fit_precision(values[:49], values[:49]) is None
    assert fit_precision(values, values * 1.01) is not None


def test_pairs_of_a_result_and_a_limit_are_judged_where_the_limit_decides() -> None:
    """500 against <1 and >1000 against 50 are far apart; <600 and >400 may hide the same, and so may <1 beside <50."""
    original = np.array([500.0, 1000.0, 500.0, 500.0, 1.0, 5.0, 500.0])
    found = np.array([1.0, 50.0, 600.0, 400.0, 50.0, 900.0, 502.0])
    signs = np.array([[0, 1], [2, 0], [0, 1], [0, 2], [1, 1], [1, 2], [0, 0]], dtype=np.uint8)
    result = judge_duplicates(original, signs[:, 0], found, signs[:, 1], 1.0, ["pulp"] * 7)
    assert result.states.tolist() == [WARNED, WARNED, NOT_JUDGED, NOT_JUDGED, NOT_JUDGED, WARNED, PASSED]
    assert "or more, beyond the laboratory's limit" in result.rules[0]
    assert result.rules[2] == "outside the laboratory's limits"
    assert (result.judged, result.above_ninetieth) == (1, 0)
    assert np.isnan(result.z[:6]).all()


def test_limits_of_a_pair_stand_where_99_of_100_pairs_lie_even_of_an_equal_pair() -> None:
    """s = 1 (1 - 0.1)/2 + 0.05 x 100 = 5.45, times sqrt(2) 2.5758 = 3.643: recomputed by hand."""
    one = np.array([100.0])
    none = np.zeros(1, dtype=np.uint8)
    result = judge_duplicates(one, none, one, none, 1.0, ["lab"])
    np.testing.assert_allclose([100 - 19.853, 100 + 19.853], [result.low[0], result.high[0]], atol=2e-3)


def test_precision_is_fitted_to_the_pairs_of_one_stage() -> None:
    """Simulated: 110 laboratory repeats at k = 0.02 beside 60 field duplicates at k = 0.3, seed 11."""
    rng = np.random.default_rng(11)
    true = rng.uniform(50.0, 500.0, 170)
    k = np.r_[np.full(110, 0.02), np.full(60, 0.3)]
    a, b = (true * (1.0 + k * rng.normal(size=170)) for _ in range(2))
    none = np.zeros(170, dtype=np.uint8)
    fit = judge_duplicates(a, none, b, none, 1.0, ["lab"] * 110 + ["field"] * 60).precision
    assert fit is not None and fit.pairs == 110
    np.testing.assert_allclose(4.0, precision_percent(200.0, fit.s_0, fit.k), rtol=0.5)


def test_judge_pairs_that_keep_the_precision_cross_the_lines_as_often_as_said() -> None:
    """Simulated: 50,000 pairs at exactly the precision asked for, seed 5; 10 % and 1 % lie above the lines."""
    rng = np.random.default_rng(5)
    true = rng.uniform(1.0, 1000.0, 50_000)
    spread = 1.0 * (1 - 0.1) / 2 + 0.05 * true
    result = judge_pairs(*(true + spread * rng.normal(size=true.size) for _ in range(2)), 1.0, np.full(true.size, 0.05))
    np.testing.assert_allclose(0.10, result.above_ninetieth.mean(), rtol=0.05)
    np.testing.assert_allclose(0.01, result.above_ninety_ninth.mean(), rtol=0.2)


@pytest.mark.parametrize(("above", "pairs", "expected"), [(0, 5, False), (2, 5, False), (3, 5, True), (5, 30, False),
                                                          (9, 30, True)])  # fmt: skip
def test_too_many_follows_the_binomial_tables(above: int, pairs: int, expected: bool) -> None:
    """P(X >= 2) = 0.0815, P(X >= 3) = 0.0086 for n 5, p 0.1; P(X >= 5) = 0.175, P(X >= 9) = 0.002 for n 30: printed
    binomial tables."""
    assert too_many(above, pairs, 0.10) is expected


def test_least_squares_equals_a_textbook_line() -> None:
    """Anscombe 1973, Am. Stat. 27, 17-21, first set: y = 3.00 + 0.500 x, standard error of the slope 0.118."""
    x = [10, 8, 13, 9, 11, 14, 6, 4, 12, 7, 5]
    y = [8.04, 6.95, 7.58, 8.81, 8.33, 9.96, 7.24, 4.26, 10.84, 4.82, 5.68]
    line = least_squares(x, y)
    np.testing.assert_allclose([3.00, 0.500], [line.intercept, line.slope], atol=5e-3)
    np.testing.assert_allclose([0.118, 1.12], [line.slope_error, line.intercept_error], atol=6e-3)


def test_least_squares_of_too_few_points_is_missing() -> None:
    assert np.isnan(least_squares([1.0, 1.0], [2.0, 3.0]).slope)
    assert np.isnan(least_squares([1.0, 2.0], [2.0, 3.0]).slope_error)
    assert least_squares([np.nan], [1.0]).n == 0


def test_bias_is_the_mean_with_its_standard_error() -> None:
    """2, 4, 6: mean 4, deviation 2, error 2/sqrt(3)."""
    found = bias([2.0, 4.0, 6.0, np.nan])
    np.testing.assert_allclose([4.0, 2.0 / np.sqrt(3.0)], [found.mean, found.error])
    assert np.isnan(bias([1.0]).error)


def test_pair_grossly_apart_asks_whether_samples_were_exchanged() -> None:
    """Invented copper results of field duplicates: 20 against 26 is poor, 20 against 8450 is no matter of precision."""
    plain = np.zeros(3, dtype=np.uint8)
    found = judge_duplicates(
        np.array([20.0, 20.0, 20.0]), plain, np.array([21.0, 45.0, 8450.0]), plain, 1.0, ["field"] * 3
    )
    asked = ["exchanged" in (rule or "") for rule in found.rules]
    assert asked == [False, False, True]
    assert found.states.tolist() == [PASSED, WARNED, WARNED]
