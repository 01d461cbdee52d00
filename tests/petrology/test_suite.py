"""Fractionation, melting and trend of a suite: suites made forward, then recovered (invented)."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.suite import (
    LHERZOLITE_D,
    batch_melt_fractions,
    best_incompatible,
    most_primitive_sample,
    rayleigh_fractions,
)
from registry.petrology.suite_trend import (
    alkali_lime_index,
    alkali_lime_word,
    rank_correlation,
    ranks,
    suite_trend,
)

_LEFT = np.array([1.0, 0.8, 0.6, 0.45, 0.3])


def _suite() -> dict[str, np.ndarray]:
    """Five liquids made from a parent by Rayleigh fractionation, elements with D = 0; Rb was moved afterwards."""
    return {
        "th_ppm": 2.0 / _LEFT,
        "nb_ppm": 5.0 / _LEFT,
        "la_ppm": 10.0 / _LEFT,
        "zr_ppm": 90.0 / _LEFT,
        "rb_ppm": np.array([20.0, 90.0, 10.0, 60.0, 15.0]),
    }


def test_rayleigh_suite_made_forward_is_recovered() -> None:
    fractions = rayleigh_fractions(_suite(), parent=0)

    np.testing.assert_allclose(fractions.fraction, _LEFT, rtol=1e-12)
    np.testing.assert_allclose(fractions.high - fractions.low, 0.0, atol=1e-12)
    assert set(fractions.elements) == {"th_ppm", "nb_ppm", "la_ppm", "zr_ppm"}


def test_rayleigh_suite_with_a_partition_coefficient_is_recovered() -> None:
    suite = {"zr_ppm": 90.0 * _LEFT ** (0.2 - 1.0)}

    np.testing.assert_allclose(rayleigh_fractions(suite, 0, {"zr_ppm": 0.2}).fraction, _LEFT, rtol=1e-12)


def test_rayleigh_suite_without_usable_elements_is_missing() -> None:
    fractions = rayleigh_fractions({"zr_ppm": np.array([100.0, np.nan, 100.0])}, 0)

    assert np.isnan(fractions.fraction).all() and fractions.elements == ()


def test_rayleigh_of_nothing_is_empty() -> None:
    assert rayleigh_fractions({}, 0).fraction.size == 0


def test_best_incompatible_leaves_the_moved_element_out() -> None:
    assert "rb_ppm" not in best_incompatible(_suite())


def test_best_incompatible_few_shared_samples_agree_on_nothing() -> None:
    nan = np.nan
    suite = {
        "th_ppm": np.array([1.0, 2.0, 3.0, 4.0, nan, nan]),
        "nb_ppm": np.array([nan, nan, 3.0, 4.0, 5.0, 6.0]),
    }

    assert best_incompatible(suite) == ()


def test_best_incompatible_prefers_slope_one() -> None:
    """Three elements with D = 0 and one with D = 0.6, which rises just as steadily but not one for one."""
    suite = {**{name: _suite()[name] for name in ("th_ppm", "nb_ppm", "la_ppm")}, "zr_ppm": 90.0 * _LEFT**-0.4}

    assert best_incompatible(suite)[-1] == "zr_ppm"
    assert set(best_incompatible(suite)[:3]) == {"th_ppm", "nb_ppm", "la_ppm"}


def test_best_incompatible_elements_that_fall_with_differentiation_are_left_out() -> None:
    """A granite whose zircon and monazite crystallise: Zr, La and Th fall together, Rb and Nb rise."""
    falling = {"zr_ppm": 200.0 * _LEFT, "la_ppm": 60.0 * _LEFT, "th_ppm": 30.0 * _LEFT}
    suite = {**falling, "rb_ppm": 150.0 / _LEFT, "nb_ppm": 10.0 / _LEFT}

    assert set(best_incompatible(suite, rises_with=1.0 - _LEFT)) == {"rb_ppm", "nb_ppm"}
    assert best_incompatible(falling, rises_with=1.0 - _LEFT) == ()


def test_rayleigh_element_missing_in_the_parent_is_not_used() -> None:
    suite = _suite()
    suite["th_ppm"][0] = np.nan

    assert "th_ppm" not in rayleigh_fractions(suite, 0).elements


@given(st.integers(0, 2**32 - 1), st.floats(0.15, 0.8))
def test_rayleigh_suite_with_analytical_noise_is_recovered_within_it(seed: int, end: float) -> None:
    """5 % noise on every element of 30 samples: the last liquid's median F is right within four of its errors."""
    generator = np.random.default_rng(seed)
    left = np.linspace(1.0, end, 30)
    suite = {
        name: start / left * generator.lognormal(0.0, 0.05, 30)
        for name, start in (("th_ppm", 2.0), ("nb_ppm", 5.0), ("la_ppm", 10.0), ("zr_ppm", 90.0), ("u_ppm", 0.5))
    }
    suite["rb_ppm"] = 20.0 * generator.lognormal(0.0, 0.6, 30)
    found = rayleigh_fractions(suite, 0, rises_with=1.0 - left)

    assert found.fraction[-1] == pytest.approx(end, rel=0.28)
    assert found.low[-1] <= found.fraction[-1] <= found.high[-1]


def test_most_primitive_sample_is_never_one_that_may_not_be() -> None:
    mg, mgo, sio2 = [88.0, 62.0, 62.0, 70.0], [30.0, 9.0, 9.0, np.nan], [42.0, 50.0, 49.0, 48.0]

    assert most_primitive_sample(mg, mgo, sio2, [False, True, True, True]) == 2
    assert most_primitive_sample([60.0, 65.0], [8.0, 7.0], [50.0, 50.0], [True, True]) == 1
    assert most_primitive_sample([np.nan], [9.0], [50.0], [True]) is None


def test_batch_melting_made_forward_is_recovered() -> None:
    coefficients, source = {"la_ppm": 0.01, "zr_ppm": 0.05}, {"la_ppm": 0.7, "zr_ppm": 10.0}
    f = np.array([0.05, 0.2])
    made = {name: source[name] / (d + f * (1 - d)) for name, d in coefficients.items()}
    fractions = batch_melt_fractions({**made, "nb_ppm": f}, source, coefficients)

    np.testing.assert_allclose(fractions.fraction, f, rtol=1e-12)
    assert fractions.elements == ("la_ppm", "zr_ppm")


def test_batch_melting_without_a_common_element_is_refused() -> None:
    with pytest.raises(ValueError, match="no element is in all of melt \\['la_ppm'\\]"):
        batch_melt_fractions({"la_ppm": [1.0]}, {"zr_ppm": 10.0}, {"la_ppm": 0.1})


def test_batch_melting_of_lherzolite_keeps_incompatible_order() -> None:
    """The less compatible in lherzolite, the smaller D: Th < Nb < La < Ce < Nd < Zr < Hf (common practice)."""
    assert list(LHERZOLITE_D.values()) == sorted(LHERZOLITE_D.values())


def test_ranks_share_ties_and_leave_gaps() -> None:
    np.testing.assert_array_equal(ranks([3.0, np.nan, 1.0, 3.0, 2.0]), [3.5, np.nan, 1.0, 3.5, 2.0])


def test_rank_correlation_printed_example() -> None:
    """Textbook example of ten pairs without ties, sum of d2 194: 1 - 6 x 194/990 = -0.1758 (recomputed)."""
    iq = [106, 100, 86, 101, 99, 103, 97, 113, 112, 110]
    hours = [7, 27, 2, 50, 28, 29, 20, 12, 6, 17]

    assert rank_correlation(iq, hours) == pytest.approx(1.0 - 6.0 * 194.0 / 990.0, abs=1e-12)


def test_rank_correlation_without_spread_or_samples_is_missing() -> None:
    assert np.isnan(rank_correlation([1.0, 2.0, 3.0], [1.0, 2.0, 3.0]))
    assert np.isnan(rank_correlation([1.0, 2.0, 3.0, 4.0], [5.0, 5.0, 5.0, 5.0]))


@given(st.lists(st.integers(1, 500), min_size=4, max_size=30, unique=True))
def test_rank_correlation_sees_only_the_order(values: list[int]) -> None:
    assert rank_correlation(values, np.log(values)) == pytest.approx(1.0)
    assert rank_correlation(values, -(np.array(values) ** 3)) == pytest.approx(-1.0)


@pytest.mark.parametrize(
    ("mgo", "word"),
    [
        ([8.0, 6.0, 4.5, 3.0, 2.0, 1.0], "good"),
        ([8.0, 6.0, 2.0, 4.5, 3.0, 2.5], "fair"),
        ([2.0, 6.0, 1.0, 8.0, 4.5, 3.0], "poor"),
        ([1.0, 2.0, 3.0, 4.0, 5.0, 6.0], "poor"),
    ],
)
def test_suite_trend_word_follows_the_correlation(mgo: list[float], word: str) -> None:
    trend = suite_trend([50.0, 53.0, 56.0, 59.0, 62.0, 66.0], mgo, [20.0, 30.0, 40.0, 50.0, 60.0, 70.0])

    assert trend.word == word
    assert trend.sentence().startswith(f"{word}: 6 samples, SiO2 50.0-66.0 wt%, MgO ")
    assert "differentiation index 20.0-70.0" in trend.sentence()


def test_suite_trend_narrow_or_small_suites_are_not_called_good() -> None:
    nan = np.nan

    assert suite_trend([70.0, 70.5, 71.0, 71.5], [1.0, 0.9, 0.8, 0.7], [nan] * 4).word == "no_range"
    few = suite_trend([50.0, 60.0, 70.0, nan], [8.0, 4.0, 1.0, 2.0], [nan] * 4)
    assert (few.word, few.sentence()) == ("too_few_samples", "too few samples: 3 of the 4 needed")
    assert np.isnan(suite_trend([nan], [nan], [nan]).sio2_wt[0])
    same = suite_trend([50.0, 53.0, 56.0, 60.0], [5.0] * 4, [nan] * 4)
    assert same.sentence() == "poor: 4 samples, SiO2 50.0-60.0 wt%, MgO 5.0-5.0 wt%"


@pytest.mark.parametrize(
    ("index", "word"),
    [(50.9, "alkalic"), (51.0, "alkali-calcic"), (55.9, "alkali-calcic"), (56.0, "calc-alkalic"), (61.0, "calcic")],
)
def test_alkali_lime_words_at_peacocks_limits(index: float, word: str) -> None:
    """Limits 51, 56 and 61 wt% SiO2 as printed by Peacock 1931; a limit itself belongs above (common practice)."""
    assert alkali_lime_word(index) == word


@given(st.floats(52.0, 66.0), st.floats(0.03, 0.2))
def test_alkali_lime_index_of_a_suite_made_forward_is_recovered(crossing: float, slope: float) -> None:
    sio2 = np.linspace(50.0, 68.0, 8)
    ratio = np.exp(-slope * (sio2 - crossing))

    assert alkali_lime_index(sio2, 5.0 * ratio, np.full(8, 5.0)) == pytest.approx(crossing, abs=1e-8)


def test_alkali_lime_index_outside_the_suite_or_without_fall_is_missing() -> None:
    sio2 = np.array([60.0, 62.0, 65.0, 68.0])

    assert np.isnan(alkali_lime_index(sio2, [2.0, 1.8, 1.5, 1.2], [6.0, 6.5, 7.0, 7.5]))
    assert np.isnan(alkali_lime_index(sio2, [2.0, 4.0, 6.0, 9.0], [5.0, 5.0, 5.0, 5.0]))
    assert np.isnan(alkali_lime_index(sio2[:3], [9.0, 5.0, 2.0], [5.0, 5.0, 5.0]))
