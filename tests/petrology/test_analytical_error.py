"""Errors of analyses and the numbers they are drawn with, against what is known of them outside the project.

Status: the SplitMix64 numbers are from memory (the first of seed 1234567, widely used to check the generator); moments
and shares follow from the normal distribution (``statistics.NormalDist``, recomputed); analyses are invented.
"""

from __future__ import annotations

import math
from statistics import NormalDist
from typing import Any

import numpy as np
import pytest

from registry.petrology.analytes import CHOSEN_COLUMNS, CHOSEN_INDEX, QUALIFIER_BELOW
from registry.petrology.analytical_error import ErrorModel, conventional_k, drawn, standard_deviations
from registry.petrology.constants import FE2O3_FROM_FEO, oxide_from_element
from registry.petrology.conventions import Conventions
from registry.petrology.counted_normals import MOST_DRAWS, keys_of, normal_pair, splitmix64

NORMAL = NormalDist()
DRAWS = 20_000
#: Five standard errors of a share of so many draws: a test fails by chance once in a million.
FIVE = 5.0 * 0.5 / math.sqrt(DRAWS)


def model_of(n: int = 1, **known: dict[str, float]) -> ErrorModel:
    """What is known by field and column; nothing else is."""
    shape = (len(CHOSEN_COLUMNS), n)
    fields: dict[str, Any] = {name: np.full(shape, np.nan) for name in ("s0", "k", "spread", "limit")}
    for field, columns in known.items():
        for column, value in columns.items():
            fields[field][CHOSEN_INDEX[column]] = value
    return ErrorModel(**fields, one_result=np.full(shape, -1, dtype=np.int64))


def values_of(**values: float) -> np.ndarray:
    found = np.full((len(CHOSEN_COLUMNS), 1), np.nan)
    for column, value in values.items():
        found[CHOSEN_INDEX[column]] = value
    return found


def drawn_of(values: np.ndarray, model: ErrorModel, qualifiers: np.ndarray | None = None) -> tuple[Any, Any]:
    signs = np.zeros(values.shape, dtype=np.uint8) if qualifiers is None else qualifiers
    return drawn(values, signs, model, Conventions(), keys_of(7, np.arange(1, values.shape[1] + 1)), DRAWS)


def test_splitmix64_gives_the_known_numbers_of_its_seed() -> None:
    known = [
        6457827717110365317, 3203168211198807973, 9817491932198370423, 4593380528125082431, 16408922859458223821,
    ]  # fmt: skip
    assert splitmix64(1234567, np.arange(1, 6)).tolist() == known


def test_drawn_numbers_are_standard_normal_and_independent() -> None:
    first, second = normal_pair(keys_of(1, np.arange(50)), 3, DRAWS)
    n = first.size
    for numbers in (first, second):
        assert abs(numbers.mean()) < 5.0 / math.sqrt(n)
        assert abs(numbers.var() - 1.0) < 5.0 * math.sqrt(2.0 / n)
        for z in (-2.0, -1.0, 0.0, 1.0, 2.0):
            assert abs((numbers < z).mean() - NORMAL.cdf(z)) < 5.0 * 0.5 / math.sqrt(n)
    assert abs((first * second).mean()) < 5.0 / math.sqrt(n)
    assert abs((first[1:] * first[:-1]).mean()) < 5.0 / math.sqrt(n)
    assert abs((first[:, 1:] * first[:, :-1]).mean()) < 5.0 / math.sqrt(n)


def test_drawn_numbers_beyond_what_a_pair_holds_are_refused() -> None:
    with pytest.raises(ValueError, match=f"expected 1 to {MOST_DRAWS}"):
        normal_pair(keys_of(1, np.arange(2)), 0, MOST_DRAWS + 1)


def test_standard_deviation_follows_the_line_of_the_batch_then_the_materials_then_the_convention() -> None:
    values = values_of(sn_ppm=50.0, rb_ppm=300.0, sr_ppm=100.0, sio2_wt=70.0, feo_titrated_wt=2.0, loi_wt=-0.4)
    model = model_of(
        s0={"sn_ppm": 0.5, "rb_ppm": -30.0}, k={"sn_ppm": 0.02, "rb_ppm": 0.05},
        spread={"sn_ppm": 0.3, "rb_ppm": 0.04}, limit={"sn_ppm": 1.0, "sr_ppm": 2.0},
    )  # fmt: skip
    sigma = standard_deviations(values, model, Conventions(error_feo_percent=3.0))[:, 0]
    expected = {
        "sn_ppm": 0.5 + 0.02 * 50.0,  # as fitted
        "rb_ppm": 0.04 * 300.0,  # the fitted line is below 0 here: the materials
        "sr_ppm": 2.0 * (1.0 - 2.0 * 0.05) / 2.0 + 0.05 * 100.0,
        "sio2_wt": 0.35,
        "feo_titrated_wt": 0.06,
        "loi_wt": 0.02,
    }
    assert {name: sigma[CHOSEN_INDEX[name]] for name in expected} == pytest.approx(expected)
    assert np.isnan(sigma[CHOSEN_INDEX["zr_ppm"]])


def test_precision_at_the_detection_limit_is_a_hundred_per_cent() -> None:
    """Thompson & Howarth 1976: the limit is where 200 s/c is 100 per cent."""
    values = values_of(y_ppm=2.0)
    sigma = standard_deviations(values, model_of(limit={"y_ppm": 2.0}), Conventions())
    assert 200.0 * sigma[CHOSEN_INDEX["y_ppm"], 0] / 2.0 == pytest.approx(100.0)


@pytest.mark.parametrize("sigmas", [-2.0, -1.0, 0.0, 1.0, 2.0])
def test_share_of_draws_above_a_threshold_is_that_of_the_normal_distribution(sigmas: float) -> None:
    values = values_of(sn_ppm=100.0 + 2.0 * sigmas)
    found, _ = drawn_of(values, model_of(s0={"sn_ppm": 2.0}, k={"sn_ppm": 0.0}))
    share = (found[CHOSEN_INDEX["sn_ppm"]] >= 100.0).mean()
    assert abs(share - NORMAL.cdf(sigmas)) < FIVE


def test_ratio_of_two_drawn_values_errs_by_both() -> None:
    """P(a >= 5 b) of independent normal a and b is that of a - 5 b, whose variance is s_a^2 + 25 s_b^2."""
    a, s_a, b, s_b = 520.0, 20.0, 100.0, 3.0
    model = model_of(s0={"rb_ppm": s_a, "sr_ppm": s_b}, k={"rb_ppm": 0.0, "sr_ppm": 0.0})
    found, _ = drawn_of(values_of(rb_ppm=a, sr_ppm=b), model)
    share = (found[CHOSEN_INDEX["rb_ppm"]] >= 5.0 * found[CHOSEN_INDEX["sr_ppm"]]).mean()
    expected = NORMAL.cdf((a - 5.0 * b) / math.hypot(s_a, 5.0 * s_b))
    assert abs(share - expected) < FIVE


def test_draw_below_the_detection_limit_is_less_than_the_limit_as_a_laboratory_says() -> None:
    row = CHOSEN_INDEX["sn_ppm"]
    model = model_of(s0={"sn_ppm": 1.0}, k={"sn_ppm": 0.0}, limit={"sn_ppm": 5.0})
    found, signs = drawn_of(values_of(sn_ppm=5.0), model)
    below = signs[row] == QUALIFIER_BELOW
    assert abs(below.mean() - 0.5) < FIVE
    assert (found[row, below] == 5.0).all() and (found[row, ~below] >= 5.0).all()


def test_draw_that_is_not_positive_is_less_than_the_value_where_no_limit_holds() -> None:
    """The value was reported below the limit, so that the limit says nothing of its repeats."""
    row = CHOSEN_INDEX["sn_ppm"]
    model = model_of(s0={"sn_ppm": 3.0}, k={"sn_ppm": 0.0}, limit={"sn_ppm": 5.0})
    found, signs = drawn_of(values_of(sn_ppm=3.0), model)
    below = signs[row] == QUALIFIER_BELOW
    assert abs(below.mean() - NORMAL.cdf(-1.0)) < FIVE
    assert (found[row, below] == 3.0).all() and (found[row, ~below] > 0.0).all()


def test_censored_values_and_the_reported_total_are_not_drawn_and_a_gain_on_ignition_is() -> None:
    values = values_of(nb_ppm=10.0, total_reported_wt=99.8, loi_wt=-0.4, sn_ppm=0.0)
    signs = np.zeros(values.shape, dtype=np.uint8)
    signs[CHOSEN_INDEX["nb_ppm"]] = QUALIFIER_BELOW
    found, drawn_signs = drawn_of(values, model_of(), signs)
    for column, kept in (("nb_ppm", 10.0), ("total_reported_wt", 99.8), ("sn_ppm", 0.0)):
        assert (found[CHOSEN_INDEX[column]] == kept).all()
    assert (drawn_signs == np.repeat(signs, DRAWS, axis=1)).all()
    assert found[CHOSEN_INDEX["loi_wt"]].std() == pytest.approx(0.02, rel=0.05)


def test_columns_that_one_result_fills_share_its_error() -> None:
    factor = 1e4 / oxide_from_element("Cr2O3")
    values = values_of(cr2o3_wt=0.2, cr_ppm=0.2 * factor)
    model = model_of()
    rows = [CHOSEN_INDEX["cr2o3_wt"], CHOSEN_INDEX["cr_ppm"]]
    found, _ = drawn_of(values, model)
    assert abs(np.corrcoef(found[rows])[0, 1]) < 0.05
    model.one_result[rows] = 4
    found, _ = drawn_of(values, model)
    assert found[rows[1]] == pytest.approx(found[rows[0]] * factor)


def test_ferric_iron_stays_the_difference_of_total_and_ferrous_iron() -> None:
    total, feo = 8.0, 5.0
    values = values_of(
        fe2o3t_reported_wt=total, feo_titrated_wt=feo, fe2o3_ferric_wt=total - FE2O3_FROM_FEO * feo
    )  # fmt: skip
    found, _ = drawn_of(values, model_of())
    iron = {name: found[CHOSEN_INDEX[name]] for name in ("fe2o3t_reported_wt", "feo_titrated_wt", "fe2o3_ferric_wt")}
    assert iron["fe2o3t_reported_wt"].std() == pytest.approx(0.04, rel=0.05)
    assert iron["feo_titrated_wt"].std() == pytest.approx(0.10, rel=0.05)
    difference = iron["fe2o3t_reported_wt"] - FE2O3_FROM_FEO * iron["feo_titrated_wt"]
    assert iron["fe2o3_ferric_wt"] == pytest.approx(difference)


def test_conventional_errors_are_by_kind_of_analyte() -> None:
    k = conventional_k(Conventions(error_major_percent=1.0, error_trace_percent=5.0, error_volatile_percent=7.0))
    expected = {
        "sio2_wt": 0.01,
        "cr2o3_wt": 0.05,
        "zr_ppm": 0.05,
        "loi_wt": 0.07,
        "s_wt": 0.07,
        "feo_titrated_wt": 0.02,
    }
    assert {name: k[CHOSEN_INDEX[name]] for name in expected} == pytest.approx(expected)


def test_part_of_an_error_model_is_that_of_its_samples() -> None:
    model = model_of(3, spread={"zr_ppm": 0.05})
    model.s0[CHOSEN_INDEX["zr_ppm"]] = [1.0, 2.0, 3.0]
    part = model.part(1, 3)
    assert part.s0[CHOSEN_INDEX["zr_ppm"]].tolist() == [2.0, 3.0]
    assert {part.k.shape, part.spread.shape, part.limit.shape, part.one_result.shape} == {(len(CHOSEN_COLUMNS), 2)}
