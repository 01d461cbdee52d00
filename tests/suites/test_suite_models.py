"""The rows of a suite from arrays alone: what is told of odd suites, and why a number is not given (all invented)."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from registry.petrology.conventions import Conventions
from registry.store.suite_rows import CHOSEN_NUMBERS, DERIVED_NUMBERS, Suite
from registry.suite_models import Row, members, models, symbol

N = 6
#: Six basaltic liquids, volatile-free wt%, each a little more evolved than the one before.
MAJORS = {
    "sio2_vf_wt": np.linspace(49.0, 62.0, N), "tio2_vf_wt": np.linspace(1.0, 0.8, N),
    "al2o3_vf_wt": np.linspace(15.0, 16.5, N), "feot_vf_wt": np.linspace(9.0, 6.0, N),
    "mno_vf_wt": np.full(N, 0.15), "mgo_vf_wt": np.linspace(10.5, 2.5, N), "cao_vf_wt": np.linspace(11.5, 6.0, N),
    "na2o_vf_wt": np.linspace(2.2, 4.2, N), "k2o_vf_wt": np.linspace(0.4, 2.0, N), "p2o5_vf_wt": np.full(N, 0.15),
}  # fmt: skip
LEFT = np.linspace(1.0, 0.4, N)


def suite(n: int = N, **changes: Any) -> Suite:
    """A suite of the first n liquids; ``changes`` replace columns."""
    numbers = {name: np.full(N, np.nan) for name in (*DERIVED_NUMBERS, *CHOSEN_NUMBERS)}
    numbers.update(MAJORS)
    numbers["mg_number_total_iron"] = np.linspace(67.5, 42.0, N)
    numbers["differentiation_index"] = np.linspace(20.0, 55.0, N)
    numbers["not_a_liquid"] = np.zeros(N)
    for name, start in (("th_ppm", 0.5), ("nb_ppm", 4.0), ("la_ppm", 5.0), ("zr_ppm", 70.0)):
        numbers[name] = start / LEFT
    numbers["y_ppm"] = np.full(N, 20.0)
    numbers.update(changes)
    return Suite(
        np.arange(1, n + 1),
        [f"S{number}" for number in range(n)],
        {name: np.asarray(column, dtype=np.float64)[:n] for name, column in numbers.items()},
        np.full(n, "fit", dtype=object),
        np.full(n, None, dtype=object),
    )


def row(of: Suite, model: str, quantity: str, parent: str | None = None) -> Row:
    found, _ = models(of, members(of, Conventions()), parent)
    (one,) = [each for each in found if (each.model, each.quantity) == (model, quantity)]
    return one


def test_mantle_melt_as_parent_gives_a_melt_fraction_of_primitive_mantle() -> None:
    """By hand for Nb: (0.658/4.0 - 0.0034)/(1 - 0.0034) = 0.1617 (McDonough and Sun 1995, D from memory)."""
    found = row(suite(), "batch_melting", "melt_fraction_high")
    nb = (0.658 / 4.0 - 0.0034) / (1.0 - 0.0034)

    assert found.value >= nb - 1e-9 and found.cause is None
    assert row(suite(), "batch_melting", "melt_fraction_low").value <= nb + 1e-9
    said = row(suite(), "batch_melting", "melt_fraction").quality
    assert said is not None and "Mg-number 68" in said and said.endswith("makes this a minimum")


def test_parent_with_less_than_the_source_has_no_melt_fraction() -> None:
    poor = {name: np.full(N, 0.01) for name in ("th_ppm", "nb_ppm", "la_ppm", "zr_ppm")}

    assert row(suite(**poor), "batch_melting", "melt_fraction").cause == "no_element_between_source_and_melt"


def test_evolved_parent_is_no_mantle_melt() -> None:
    evolved = suite(mg_number_total_iron=np.linspace(55.0, 40.0, N))

    assert row(evolved, "batch_melting", "melt_fraction").cause == "parent_is_no_mantle_melt"


def test_suite_in_which_nothing_rises_has_no_liquid_fraction() -> None:
    falling = {name: LEFT for name in ("th_ppm", "nb_ppm", "la_ppm", "zr_ppm")}
    cause = row(suite(**falling), "fractionation", "liquid_fraction_most_evolved").cause

    assert cause == "no_element_rises_with_differentiation"


def test_most_evolved_sample_below_its_parent_says_so() -> None:
    elements = {name: np.array([1.0, 2.0, 3.0, 4.0, 5.0, 4.5]) for name in ("th_ppm", "nb_ppm", "la_ppm", "zr_ppm")}
    found = row(suite(**elements), "fractionation", "liquid_fraction_most_evolved", "S4")

    assert found.cause == "most_evolved_sample_has_no_more_of_them_than_the_parent" and np.isnan(found.value)


def test_named_parent_in_a_small_suite_still_gives_its_mass_balance_only() -> None:
    two = suite(2)

    assert row(two, "fractionation", "liquid_fraction_most_evolved", "S0").cause == "fewer_than_4_samples"
    assert not np.isnan(row(two, "fractionation", "parent_mg_number", "S0").value)
    assert row(suite(1), "mass_balance", "liquid_fraction", "S0").cause == "no_other_sample"


def test_named_parent_that_is_a_cumulate_is_used_and_said_to_be() -> None:
    cumulate = suite(not_a_liquid=[1, 0, 0, 0, 0, 0])
    found = row(cumulate, "fractionation", "parent_mg_number", "S0")

    assert found.quality == (
        "sample S0, named as the parent, though it is altered, unfit, a cumulate or far from the rest"
    )


@pytest.mark.parametrize("missing", ["al2o3_vf_wt", "mg_number_total_iron"])
def test_mass_balance_of_incomplete_rocks_gives_the_cause(missing: str) -> None:
    column = (MAJORS | {"mg_number_total_iron": np.linspace(67.5, 42.0, N)})[missing].copy()
    column[-1] = np.nan

    assert row(suite(**{missing: column}), "mass_balance", "liquid_fraction").cause == "missing_input"


def test_granite_that_minerals_alone_make_has_no_mass_balance() -> None:
    """A haplogranite from one a little less evolved, with quartz and feldspars offered (above 72 wt% SiO2)."""
    granite = {
        "sio2_vf_wt": 74.0, "tio2_vf_wt": 0.1, "al2o3_vf_wt": 14.0, "feot_vf_wt": 1.2, "mno_vf_wt": 0.03,
        "mgo_vf_wt": 0.3, "cao_vf_wt": 1.3, "na2o_vf_wt": 3.8, "k2o_vf_wt": 4.6, "p2o5_vf_wt": 0.05,
    }  # fmt: skip
    of = suite(**{name: np.full(N, amount) for name, amount in granite.items()})

    assert row(of, "mass_balance", "liquid_fraction").cause == "minerals_alone_make_the_daughter"


def test_mass_balance_that_does_not_end_is_a_cause_and_no_fault(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("registry.petrology.mass_balance._ROUNDS_PER_COLUMN", 0)

    assert row(suite(), "mass_balance", "liquid_fraction").cause == "least_squares_did_not_end"


def test_mass_balance_leaves_out_an_oxide_that_one_rock_lacks() -> None:
    without = suite(p2o5_vf_wt=np.full(N, np.nan))
    said = row(without, "mass_balance", "liquid_fraction").quality

    assert said is not None and "over 9 oxides" in said


def test_parent_without_an_mg_number_cannot_be_chosen() -> None:
    nothing = suite(mg_number_total_iron=np.full(N, np.nan))

    assert row(nothing, "fractionation", "parent_mg_number").cause == "missing_input"


def test_series_is_told_where_lime_and_alkalis_cross() -> None:
    """Lime falls from 11.5 to 6, alkalis rise from 2.6 to 6.2: they meet inside the suite."""
    found = row(suite(), "series", "alkali_lime_index")

    assert 60.0 < found.value < 62.0 and found.quality in ("calc-alkalic", "calcic")


def test_suite_without_spread_says_so() -> None:
    same = suite(mgo_vf_wt=np.full(N, 5.0))

    assert row(same, "trend", "rank_correlation_mgo_sio2").cause == "no_spread"


def test_two_rocks_in_one_body_are_told_in_the_population_row() -> None:
    of = suite()
    twice = Suite(
        np.arange(60),
        [f"S{number}" for number in range(60)],
        {name: np.tile(column, 10) for name, column in of.numbers.items()},
        np.full(60, "fit", dtype=object),
        np.full(60, None, dtype=object),
    )
    for name in ("mgo_vf_wt", "cao_vf_wt"):
        twice.numbers[name][:40] = 8.0
        twice.numbers[name][40:] = 0.5
    found = row(twice, "population", "far_samples")

    assert found.value == 0.0 and found.quality is not None and "the body is not one population" in found.quality


def test_serpentinised_rock_is_not_called_altered_for_its_loss_on_ignition() -> None:
    of = suite(loi_wt=[8.0, 8.0, 0.5, 0.5, 0.5, 0.5], mgo_vf_wt=[35.0, 9.0, 8.0, 6.0, 4.0, 2.0])

    assert members(of, Conventions()).altered.tolist() == [False, True, False, False, False, False]


@pytest.mark.parametrize(
    ("column", "word"), [("k2o_wt", "K2O"), ("zr_ppm", "Zr"), ("feot_vf_wt", "FeOt"), ("fe2o3t_wt", "Fe2O3T")]
)
def test_symbols_are_the_trades(column: str, word: str) -> None:
    assert symbol(column) == word
