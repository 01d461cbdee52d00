"""Control-chart constants against handbook tables, and the run rules on series made to break one each."""

from __future__ import annotations

import math

import numpy as np
import pytest

from registry.quality.run_rules import (
    D2_OF_TWO,
    broken_rules,
    judge_run,
    limits_of_individuals,
    unbiased_deviation_factor,
    z_scores,
)
from registry.quality.states import FAILED, NOT_JUDGED, PASSED, WARNED

#: c4 for n = 2..10 as in every table of control-chart constants (ASTM Manual on presentation of data and control chart
#: analysis, MNL 7; Montgomery, Introduction to statistical quality control, appendix VI). Published, from memory.
C4 = {2: 0.7979, 3: 0.8862, 4: 0.9213, 5: 0.9400, 6: 0.9515, 7: 0.9594, 8: 0.9650, 9: 0.9693, 10: 0.9727}


@pytest.mark.parametrize(("n", "printed"), C4.items())
def test_unbiased_deviation_factor_equals_the_printed_c4(n: int, printed: float) -> None:
    np.testing.assert_allclose(printed, unbiased_deviation_factor(n), atol=5e-5, rtol=0)


def test_d2_of_two_equals_the_printed_constant() -> None:
    """d2 = 1.128 for n = 2 and 2.66 = 3/d2, the factor of the moving-range chart; the tables named above."""
    assert round(D2_OF_TWO, 3) == 1.128
    assert round(3.0 / D2_OF_TWO, 2) == 2.66


def test_unbiased_deviation_factor_of_one_result_is_refused() -> None:
    with pytest.raises(ValueError, match="needs two results or more, not 1"):
        unbiased_deviation_factor(1)


def test_limits_of_individuals_find_the_deviation_of_a_simulated_process() -> None:
    """Simulated: 20,000 normal results of deviation 2 about 50, seed 7."""
    values = np.random.default_rng(7).normal(50.0, 2.0, 20_000)
    mean, deviation = limits_of_individuals(values)
    np.testing.assert_allclose([50.0, 2.0], [mean, deviation], rtol=0.02)


def test_limits_of_individuals_of_one_result_are_missing() -> None:
    assert all(math.isnan(value) for value in limits_of_individuals([1.0, np.nan]))


#: Series that break one rule at the last result, in the words of Westgard et al. 1981, Clin. Chem. 27, 493-501.
ONE_RULE = {
    "1-3s": [0.1, -0.2, 3.1],
    "2-2s": [0.1, 2.1, 2.2],
    "R-4s": [0.1, -2.1, 2.2],
    "4-1s": [-0.5, 1.1, 1.2, 1.3, 1.4],
    "10-x": [-0.1, *[0.2, 0.3] * 5],
}


@pytest.mark.parametrize(("rule", "series"), ONE_RULE.items())
def test_judge_run_rejects_the_result_that_completes_a_run(rule: str, series: list[float]) -> None:
    states, rules = judge_run(series)
    assert (states[-1], rules[-1]) == (FAILED, rule)
    assert set(states[:-2].tolist()) == {PASSED}


def test_judge_run_warns_of_a_single_result_beyond_two_deviations() -> None:
    states, rules = judge_run([0.0, 2.5, -0.3])
    assert states.tolist() == [PASSED, WARNED, PASSED]
    assert rules.tolist() == [None, "1-2s", None]


def test_judge_run_one_short_of_each_run_passes() -> None:
    for series in ([1.1, 1.2, 1.3, 0.9], [0.5] * 9 + [-0.5], [2.1, -1.9]):
        assert FAILED not in judge_run(series)[0]


def test_judge_run_leaves_missing_results_out_of_the_runs() -> None:
    states, _ = judge_run([2.1, np.nan, 2.2])
    assert states.tolist() == [WARNED, NOT_JUDGED, FAILED]


def test_broken_rules_reject_good_batches_as_often_as_published() -> None:
    """Beyond 2 s 4.55 %, beyond 3 s 0.27 % of normal results: printed tables of the normal distribution. Simulated."""
    z = np.random.default_rng(11).normal(size=400_000)
    broken = broken_rules(z)
    np.testing.assert_allclose([0.0455, 0.0027], [broken["1-2s"].mean(), broken["1-3s"].mean()], rtol=0.06)


def test_z_scores_without_a_deviation_are_missing() -> None:
    np.testing.assert_array_equal([2.0, np.nan, np.nan], z_scores([12.0, 12.0, np.nan], 10.0, [1.0, 0.0, 1.0]))
