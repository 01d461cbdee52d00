"""Far samples: bodies made by simulation (invented), with and without a swapped sample."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from registry.petrology.outliers import (
    CHI_SQUARE_50,
    CHI_SQUARE_975,
    CHI_SQUARE_999,
    COMPARED_OXIDES,
    distances_from_body,
    isometric_log_ratios,
    squared_distances,
)

#: Volatile-free dacite, rhyolite and basalt of textbook kind (invented for the test).
DACITE = np.array([66.0, 0.6, 16.0, 4.2, 1.9, 4.3, 4.1, 2.3])
RHYOLITE = np.array([72.0, 0.3, 14.5, 2.2, 0.6, 1.9, 4.0, 3.8])
BASALT = np.array([50.0, 1.4, 15.5, 10.5, 8.0, 10.8, 2.6, 0.6])


def _body(n: int, seed: int, trend: bool = True) -> np.ndarray:
    """A body of n rocks: a straight trend in log-ratios, or one point, with 4 % noise."""
    generator = np.random.default_rng(seed)
    along = generator.uniform(0.0, 1.0, n) if trend else np.zeros(n)
    logs = np.log(DACITE) + np.outer(along, np.log(RHYOLITE / DACITE))
    rocks = np.exp(logs) * generator.lognormal(0.0, 0.04, (n, 8))
    return 100.0 * rocks / rocks.sum(axis=1, keepdims=True)


def test_log_ratios_keep_distances_of_centred_log_ratios() -> None:
    """Egozcue et al. 2003: the coordinates are an isometry."""
    rocks = _body(20, 1)
    logs = np.log(rocks)
    centred = logs - logs.mean(axis=1, keepdims=True)
    coordinates = isometric_log_ratios(rocks)

    assert coordinates.shape == (20, 7)
    np.testing.assert_allclose(
        np.linalg.norm(coordinates[:, None] - coordinates[None], axis=2),
        np.linalg.norm(centred[:, None] - centred[None], axis=2),
        atol=1e-12,
    )


@given(st.floats(0.01, 100.0))
def test_log_ratios_do_not_see_closure(factor: float) -> None:
    np.testing.assert_allclose(
        isometric_log_ratios(DACITE[None] * factor), isometric_log_ratios(DACITE[None]), atol=1e-9
    )


@pytest.mark.parametrize("wild", [0.0, -1.0, np.nan])
def test_log_ratios_of_an_impossible_part_are_missing(wild: float) -> None:
    assert np.isnan(isometric_log_ratios([[50.0, wild, 10.0], [50.0, 40.0, 10.0]])[0]).all()


def test_chi_square_tables_rise_and_follow_the_cube_root_law() -> None:
    """Wilson and Hilferty 1931: p (1 - 2/9p + z sqrt(2/9p))^3 is within 2 % of chi-square from 3 degrees on."""
    for table, z in ((CHI_SQUARE_50, 0.0), (CHI_SQUARE_975, 1.95996), (CHI_SQUARE_999, 3.09023)):
        p = np.arange(1, 11)
        law = p * (1.0 - 2.0 / (9.0 * p) + z * np.sqrt(2.0 / (9.0 * p))) ** 3
        assert (np.diff(table) > 0.0).all()
        np.testing.assert_allclose(np.array(table)[2:], law[2:], rtol=0.02)


def test_chi_square_of_two_degrees_is_exponential() -> None:
    """With two degrees of freedom the quantile is -2 ln(1 - p), exactly."""
    for table, p in ((CHI_SQUARE_50, 0.5), (CHI_SQUARE_975, 0.975), (CHI_SQUARE_999, 0.999)):
        assert table[1] == pytest.approx(-2.0 * np.log(1.0 - p), abs=5e-4)


@pytest.mark.parametrize(("n", "by_component"), [(20, True), (40, True), (80, False), (3000, False)])
def test_swapped_basalt_in_a_dacite_body_is_far_and_nothing_else(n: int, by_component: bool) -> None:
    rocks = _body(n, 5)
    rocks[3] = BASALT
    found = distances_from_body(rocks)

    assert found.by_component == by_component and found.samples == n
    assert found.far[3] and found.one_population
    assert found.far.sum() <= 1 + 0.003 * n
    assert found.distance[3] == found.distance.max()
    assert found.component[3] in COMPARED_OXIDES


def test_body_without_a_stranger_has_few_far_samples() -> None:
    """At most about three in a thousand, over 200 bodies of 8 to 200 samples (simulated, seeds fixed)."""
    samples = beyond = 0
    for seed in range(200):
        n = (8, 12, 20, 35, 69, 70, 100, 200)[seed % 8]
        found = distances_from_body(_body(n, seed, trend=seed % 2 == 0))
        samples += n
        beyond += int((found.distance > found.limit).sum())

    assert beyond <= 0.003 * samples


def test_two_rocks_in_one_body_are_no_strangers() -> None:
    """A third of basalt among dacite: the body is not one population, and none of its samples is called far."""
    rocks = np.vstack([_body(60, 2), _body(30, 3) * (BASALT / DACITE)])
    found = distances_from_body(rocks)

    assert not found.one_population and not found.far.any()


def test_far_samples_need_eight_complete_analyses() -> None:
    rocks = _body(9, 4)
    rocks[:2, 0] = np.nan
    found = distances_from_body(rocks)

    assert found.samples == 7 and np.isnan(found.limit) and np.isnan(found.distance).all()
    assert not found.far.any() and found.component.tolist() == [None] * 9
    assert distances_from_body(np.zeros((0, 8))).samples == 0


def test_incomplete_analysis_among_complete_ones_has_no_distance() -> None:
    rocks = _body(30, 4)
    rocks[5, 6] = np.nan
    found = distances_from_body(rocks)

    assert np.isnan(found.distance[5]) and not found.far[5] and found.samples == 29


@settings(max_examples=20)
@given(st.integers(0, 10_000), st.sampled_from([20, 90]))
def test_distances_do_not_depend_on_the_order_of_samples(seed: int, n: int) -> None:
    rocks = _body(n, seed)
    order = np.random.default_rng(seed).permutation(n)

    np.testing.assert_allclose(distances_from_body(rocks[order]).distance, distances_from_body(rocks).distance[order])


@pytest.mark.parametrize("n", [12, 100])
def test_smooth_suite_without_noise_has_no_far_samples(n: int) -> None:
    """Deviations below the noise of analyses are none, however regular the suite."""
    logs = np.log(DACITE) + np.outer(np.linspace(0.0, 1.0, n), np.log(RHYOLITE / DACITE))

    assert not distances_from_body(100.0 * np.exp(logs) / np.exp(logs).sum(axis=1, keepdims=True)).far.any()


def test_identical_rocks_are_not_far_from_each_other() -> None:
    assert not distances_from_body(np.tile(DACITE, (100, 1))).far.any()
    assert not distances_from_body(np.tile(DACITE, (20, 1))).far.any()


def test_squared_distances_of_normal_points_follow_chi_square() -> None:
    """4000 normal points of 5 dimensions with correlation: quantiles within 6 % of the printed ones."""
    generator = np.random.default_rng(9)
    points = generator.normal(size=(4000, 5)) @ generator.normal(size=(5, 5))
    found = squared_distances(points)

    assert np.median(found) == pytest.approx(CHI_SQUARE_50[4], rel=0.02)
    assert np.quantile(found, 0.975) == pytest.approx(CHI_SQUARE_975[4], rel=0.06)


def test_squared_distances_beyond_the_table_are_refused() -> None:
    with pytest.raises(ValueError, match="11 coordinates; the table of chi-square holds 10"):
        squared_distances(np.zeros((200, 11)))


def test_squared_distances_end_even_where_the_compact_half_keeps_changing(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("registry.petrology.outliers._STEPS", 1)

    assert np.isfinite(distances_from_body(_body(90, 6)).distance).all()
