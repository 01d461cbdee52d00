"""Fractionation and melting of a suite, and the mass balance: suites made forward, then recovered (invented)."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.mass_balance import (
    BALANCED_OXIDES,
    MINERALS,
    balance_fractionation,
    mineral_composition_wt,
    non_negative_least_squares,
)
from registry.petrology.suite import (
    batch_melt_fractions,
    best_incompatible,
    most_primitive_sample,
    rayleigh_fractions,
    trend_quality,
)
from tests.petrology.melt_rocks import ANDESITE, BASALT, melt

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


def test_best_incompatible_few_pairs_correlate_as_nothing() -> None:
    nan = np.nan
    suite = {
        "th_ppm": np.array([1.0, 2.0, 3.0, 4.0, nan, nan]),
        "nb_ppm": np.array([nan, nan, 3.0, 4.0, 5.0, 6.0]),
    }

    assert best_incompatible(suite) == ()


def test_most_primitive_sample_is_never_a_cumulate() -> None:
    mgo, sio2 = [30.0, 9.0, 9.0, np.nan], [42.0, 50.0, 49.0, 48.0]

    assert most_primitive_sample(mgo, sio2, [True, False, False, False]) == 2
    assert most_primitive_sample([np.nan], [50.0], [False]) is None


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


@pytest.mark.parametrize(
    ("noise", "word"), [([0, 0, 0, 0, 0], "good"), ([0, 4, -3, 4, -3], "fair"), ([0, 18, -8, 12, -20], "poor")]
)
def test_trend_quality_falls_with_scatter(noise: list[float], word: str) -> None:
    sio2 = 50.0 - 15.0 * np.log(_LEFT) + np.array(noise)

    assert trend_quality(sio2, _LEFT).word == word


def test_trend_quality_of_three_samples_is_not_told() -> None:
    quality = trend_quality([50.0, 55.0, 60.0, np.nan], [1.0, 0.8, 0.6, 0.4])

    assert quality.word == "too_few_samples" and quality.samples == 3


def test_minerals_close_to_a_hundred() -> None:
    for name in MINERALS:
        assert sum(mineral_composition_wt(name).values()) == pytest.approx(100.0)


def test_olivine_composition_by_its_formula() -> None:
    """Fo80 by atomic weights: MgO 1.6 x 40.304 of 153.31 g/mol."""
    assert mineral_composition_wt("olivine_fo80")["mgo_wt"] == pytest.approx(100 * 1.6 * 40.304 / 153.307, abs=0.005)


def test_mineral_of_another_name_is_refused() -> None:
    with pytest.raises(ValueError, match="no mineral 'unobtainium'; the table holds \\['alkali_feldspar'"):
        mineral_composition_wt("unobtainium")


@given(st.floats(0.3, 0.9), st.floats(0.1, 0.9), st.floats(0.1, 0.9))
def test_mass_balance_made_forward_is_recovered(left: float, first: float, second: float) -> None:
    minerals = ["olivine_fo80", "plagioclase_an70", "clinopyroxene"]
    shares = np.array([first * second, first * (1 - second), 1 - first]) * (1 - left)
    daughter = {name: value for name, value in melt(ANDESITE).items()}
    total = sum(daughter.values())
    parent = {
        oxide: left * 100.0 * daughter[oxide] / total
        + sum(share * mineral_composition_wt(name)[oxide] for share, name in zip(shares, minerals, strict=True))
        for oxide in BALANCED_OXIDES
    }
    fit = balance_fractionation(parent, daughter, minerals)

    assert fit.liquid_fraction == pytest.approx(left, abs=1e-8)
    np.testing.assert_allclose(list(fit.minerals.values()), shares, atol=1e-8)
    assert fit.residual_sum_of_squares < 1e-12


def test_mass_balance_average_andesite_from_average_basalt_fits() -> None:
    """About half of the basalt crystallises (plagioclase, pyroxene, olivine, oxides): common practice, r2 below 1."""
    minerals = ["olivine_fo80", "clinopyroxene", "plagioclase_an70", "magnetite", "ilmenite", "quartz"]
    fit = balance_fractionation(melt(BASALT), melt(ANDESITE), minerals)

    assert 0.4 < fit.liquid_fraction < 0.6 and fit.residual_sum_of_squares < 1.0
    assert fit.minerals["quartz"] == 0.0
    assert sum(fit.minerals.values()) + fit.liquid_fraction == pytest.approx(1.0, abs=0.02)


def test_mass_balance_oxide_in_one_rock_only_is_refused() -> None:
    with pytest.raises(ValueError, match="the daughter lacks \\['p2o5_wt'\\]"):
        balance_fractionation(melt(BASALT), {k: v for k, v in melt(ANDESITE).items() if k != "p2o5_wt"}, ["quartz"])


@given(st.integers(0, 2**32 - 1))
def test_least_squares_meets_the_conditions_of_an_optimum(seed: int) -> None:
    """No amount is negative, and no absent column could still lower the misfit (Karush-Kuhn-Tucker conditions)."""
    generator = np.random.default_rng(seed)
    matrix, target = generator.normal(size=(9, 5)), generator.normal(size=9)
    x = non_negative_least_squares(matrix, target)
    gradient = matrix.T @ (target - matrix @ x)

    assert (x >= 0.0).all()
    assert (gradient <= 1e-8).all()
    np.testing.assert_allclose(gradient[x > 0.0], 0.0, atol=1e-8)


def test_least_squares_shapes_that_disagree_are_refused() -> None:
    with pytest.raises(ValueError, match="a matrix \\(3, 2\\) does not go with a target \\(2,\\)"):
        non_negative_least_squares(np.ones((3, 2)), np.ones(2))


def test_least_squares_missing_value_is_refused() -> None:
    with pytest.raises(ValueError, match="a value is missing or infinite"):
        non_negative_least_squares(np.array([[np.nan, 1.0], [1.0, 1.0]]), np.array([1.0, 1.0]))


def test_least_squares_that_does_not_end_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("registry.petrology.mass_balance._ROUNDS_PER_COLUMN", 0)

    with pytest.raises(ArithmeticError, match="the active-set iteration did not end"):
        non_negative_least_squares(np.eye(2), np.ones(2))
