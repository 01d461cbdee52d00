"""Whole columns of controls judged; the numbers are invented, to test branches."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from registry.quality.assessment import Column, Controls, Outcome, expectation, judge_batch
from registry.quality.columns import disagreeing_columns
from registry.quality.shipped import ReferenceValue
from registry.quality.states import FAILED, FAILS, NOT_JUDGED, PASSED, PASSES, REMARKS, WARNED
from registry.quality.verdicts import AnalyteState, joined, state_of_analyte


def controls(kinds: list[str], found: list[float], *, analyte: str = "Zr", unit: str = "ppm", limit: float | None = 1.0,
             partner: list[float] | None = None, signs: list[int] | None = None) -> Controls:  # fmt: skip
    n = len(kinds)
    empty = np.full((n, 1), np.nan)
    return Controls(
        [Column(7, analyte, unit, "fusion", limit)],
        np.arange(n, dtype=np.int64) + 1,
        np.arange(n, dtype=np.int64) * 10 + 5,
        np.array(kinds, dtype=object),
        np.array(["XM" if kind == "reference_material" else None for kind in kinds], dtype=object),
        np.array(["pulp"] * n, dtype=object),
        np.array(found, dtype=np.float64)[:, None],
        np.array(signs or [0] * n, dtype=np.uint8)[:, None],
        empty if partner is None else np.array(partner, dtype=np.float64)[:, None],
        np.zeros((n, 1), dtype=np.uint8),
        empty,
    )


VALUES = {"XM": [ReferenceValue("XM", "Zr", 100.0, "ppm", 5.0, "SD", "certified", "invented")]}


def judged(given: Controls, values: Any = VALUES) -> tuple[Outcome, Any]:
    (outcome,) = judge_batch(given, values)
    return outcome, state_of_analyte(given, outcome)


def test_analyte_of_good_controls_passes_with_its_counts() -> None:
    _, state = judged(
        controls(["reference_material", "blank", "duplicate"], [101, 0.5, 100], partner=[np.nan, np.nan, 98])
    )
    assert (state.state, state.remarks) == (PASSES, "")
    assert (state.references, state.blanks, state.pairs) == (1, 1, 1)


def test_two_references_beyond_the_same_limit_fail_the_analyte() -> None:
    _, state = judged(controls(["reference_material"] * 2, [111, 112]))
    assert state.state == FAILS
    assert "reference material XM failed on line 15: found 112 for 100 ppm, z +2.40 (2-2s" in state.remarks


def test_reference_below_the_laboratory_limit_is_judged_only_where_that_decides() -> None:
    outcome, state = judged(controls(["reference_material"], [120.0], signs=[1]))
    assert (outcome.states.tolist(), state) == ([NOT_JUDGED], None)
    outcome, state = judged(controls(["reference_material"], [50.0], signs=[1]))
    assert (outcome.states.tolist(), state.state) == ([FAILED], FAILS)


def test_reference_close_to_the_detection_limit_is_not_judged() -> None:
    outcome, state = judged(controls(["reference_material"], [160.0], limit=30.0))
    assert (outcome.states.tolist(), state) == ([NOT_JUDGED], None)
    assert outcome.rules[0] == "expected below 5 detection limits"


@pytest.mark.parametrize("status", ["information", "Information value", "indicative"])
def test_value_for_information_never_fails_an_analyte(status: str) -> None:
    """z would be 20 and 0.2; ten in succession above it are no failure either."""
    values = {"XM": [ReferenceValue("XM", "Zr", 100.0, "ppm", 5.0, "SD", status, "invented")]}
    outcome, state = judged(controls(["reference_material"] * 2, [200.0, 101.0]), values)
    assert outcome.states.tolist() == [WARNED, NOT_JUDGED]
    assert state.state == REMARKS and "no ground for a failure" in state.remarks
    assert np.isnan(outcome.z).all() and np.isnan(state.bias_percent)
    outcome, state = judged(controls(["reference_material"] * 12, [101.0] * 12), values)
    assert (set(outcome.states.tolist()), state) == ({NOT_JUDGED}, None)


def test_certified_material_of_the_same_batch_is_judged_beside_one_for_information() -> None:
    given = controls(["reference_material"] * 3, [120.0, 101.0, 99.0])
    given.materials[0] = "XI"
    values = {**VALUES, "XI": [ReferenceValue("XI", "Zr", 100.0, "ppm", 5.0, "SD", "information", "invented")]}
    outcome, state = judged(given, values)
    assert outcome.states.tolist() == [WARNED, PASSED, PASSED]
    assert (state.state, state.bias_percent) == (REMARKS, 0.0)


def test_censored_reference_takes_no_part_in_the_bias() -> None:
    """<50 for 100 fails; the mean of 102 and 98 has no bias."""
    _, state = judged(controls(["reference_material"] * 3, [102.0, 98.0, 50.0], signs=[0, 0, 1]))
    assert (state.state, state.bias_percent) == (FAILS, 0.0)


def test_reference_in_a_column_of_unknown_digestion_is_told_to_lack_it() -> None:
    given = controls(["reference_material"], [101.0])
    given.columns = [Column(7, "Zr", "ppm", "unknown", 1.0)]
    outcome, state = judged(given)
    assert (outcome.rules[0][:28], state) == ("the digestion is not told, s", None)


def test_blank_of_a_metal_in_per_cent_is_judged() -> None:
    """Copper in per cent is no major of the rock a blank is made of."""
    outcome, _ = judged(controls(["blank"], [0.5], analyte="Cu", unit="wt%", limit=0.001))
    assert outcome.states.tolist() == [FAILED]
    outcome, _ = judged(controls(["blank"], [5.0], analyte="Al", unit="wt%", limit=0.01))
    assert outcome.states.tolist() == [NOT_JUDGED]


def test_duplicate_that_names_no_original_is_told_so() -> None:
    given = controls(["duplicate"] * 2, [100.0, 90.0])
    given.original_known = np.array([False, True])
    outcome, _ = judged(given)
    assert outcome.rules.tolist() == [
        "nothing says which sample it repeats", "its original has no result in this certificate",
    ]  # fmt: skip


def test_blanks_that_agree_are_taken_for_their_own_content_in_the_remark() -> None:
    _, state = judged(controls(["blank"] * 3, [48.1, 47.4, 50.2]))
    assert state.state == FAILS
    assert "all 3 blanks hold 47.4 to 50.2 ppm: if that is their own content" in state.remarks
    _, state = judged(controls(["blank"] * 3, [48.1, 7.4, 50.2]))
    assert "their own content" not in state.remarks


def test_major_of_a_blank_is_not_judged() -> None:
    outcome, state = judged(controls(["blank"], [99.0], analyte="SiO2", unit="wt%", limit=0.01))
    assert (outcome.states.tolist(), state) == ([NOT_JUDGED], None)
    assert np.isnan(outcome.expected[0])


def test_major_of_a_blank_below_its_limit_passes() -> None:
    """<0.01 % fluorine is no contamination, whatever the blank is made of."""
    outcome, state = judged(controls(["blank"], [0.01], analyte="F", unit="wt%", limit=0.01, signs=[1]))
    assert (outcome.states.tolist(), state.state) == ([PASSED], PASSES)


def test_too_many_poor_pairs_fail_the_analyte() -> None:
    """Ten of twenty pulp pairs 15 % apart where 10 % (two deviations) is asked for."""
    partner = [100.0] * 20
    _, state = judged(controls(["duplicate"] * 20, [100.0] * 10 + [115.0] * 10, partner=partner))
    assert state.state == FAILS
    assert state.remarks.startswith("10 of 20 pairs exceed the line that nine in ten keep")


def test_bias_and_drift_are_named_with_their_errors() -> None:
    """Simulated: a bias of 8 % and a drift of 1 % a line on 20 results, deviation 0.2 %, seed 1."""
    noise = np.random.default_rng(1).normal(0.0, 0.2, 20)
    wide = {"XM": [ReferenceValue("XM", "Zr", 100.0, "ppm", 60.0, "SD", "certified", "invented")]}
    steady = controls(["reference_material"] * 20, (108.0 + noise).tolist(), limit=None)
    _, state = judged(steady, wide)
    assert state.remarks.split("; ")[-1].startswith("bias +8 % (standard error 0.0")
    drifting = controls(["reference_material"] * 20, (90.0 + np.arange(20) + noise).tolist(), limit=None)
    _, state = judged(drifting, wide)
    assert (
        state.state == FAILS and "drift +" in state.remarks and "% a hundred lines (standard error 0.0" in state.remarks
    )
    np.testing.assert_allclose(10.0, state.drift_percent, rtol=0.05)


def test_expectation_takes_the_best_status_and_converts() -> None:
    column = Column(1, "MnO", "wt%", "xrf", None)
    values = [
        ReferenceValue("XM", "MnO", 0.2, "wt%", None, None, "information", "a"),
        ReferenceValue("XM", "Mn", 774.5, "ppm", 7.745, "SD", "published", "b"),
        ReferenceValue("XM", "FeO", 5.0, "wt%", None, None, "certified", "c"),
    ]
    best = expectation(column, values)
    assert best is not None
    np.testing.assert_allclose([0.1, 0.001], [best.value, best.deviation], rtol=1e-3)
    assert best.source.startswith("published: b; standard deviation of the certificate")
    assert expectation(column, values[2:]) is None


def test_columns_of_one_metal_are_compared_above_ten_detection_limits_only() -> None:
    columns = [
        Column(1, "Fe2O3T", "wt%", "xrf", 0.01),
        Column(2, "Fe", "wt%", "xrf", 0.01),
        Column(3, "FeO", "wt%", "titration", None),
    ]
    values = np.array([[10.0, 6.994, 4.0], [10.0, 8.5, 4.0], [0.05, 0.09, 0.1]])
    told = disagreeing_columns(columns, values, np.zeros(values.shape, dtype=np.uint8), np.array([2, 3, 4]))
    assert told == [
        "Fe2O3T and Fe differ by more than 10 % in 1 of 2 lines (line 3: 10 wt% against 12.15 from Fe, 19.4 %): check "
        "the units and the columns"
    ]


def test_columns_by_a_partial_digestion_are_not_compared() -> None:
    columns = [Column(1, "Zr", "ppm", "fusion", 1.0), Column(2, "Zr", "ppm", "four_acid", 1.0)]
    values = np.array([[100.0, 40.0]])
    assert disagreeing_columns(columns, values, np.zeros((1, 2), dtype=np.uint8), np.array([2])) == []


def test_many_columns_of_one_metal_are_compared_at_once_and_told_in_one_sentence() -> None:
    columns = [Column(number, "Zr", "ppm", "fusion", 1.0) for number in range(2000)]
    values = np.full((3, 2000), 150.0)
    values[1, 1200] = 180.0
    values[2, :] = 5.0
    values[2, 7] = 9.0  # below ten detection limits
    told = disagreeing_columns(columns, values, np.zeros(values.shape, dtype=np.uint8), np.array([2, 3, 4]))
    assert told == [
        "2,000 columns of Zr differ by more than 10 % in 1 of 2 lines (line 3: 150 against 180 ppm, 18.2 %): check the "
        "units and the columns"
    ]
    values[1, 1200] = 150.0
    assert disagreeing_columns(columns, values, np.zeros(values.shape, dtype=np.uint8), np.array([2, 3, 4])) == []


def test_reference_off_by_a_thousand_is_asked_for_its_unit() -> None:
    _, state = judged(controls(["reference_material"], [0.097], limit=0.001))
    assert "off by a factor of about 1,000: is the unit right?" in state.remarks
    _, state = judged(controls(["reference_material"], [150.0]))
    assert "is the unit right" not in state.remarks


def _state(references: int, bias: float, error: float, s0: float = np.nan) -> AnalyteState:
    return AnalyteState(0, "", references, 0, 0, bias, error, np.nan, np.nan, s0, s0 / 10.0)


def test_states_of_two_parts_joined_give_the_bias_and_spread_of_all_their_results() -> None:
    """4 results of mean 2 and 16 of mean -1, deviations of 2 both: mean -0.4, error 2/sqrt(20). Recomputed by hand."""
    state = joined(_state(4, 2.0, 1.0), [("K1/2", _state(16, -1.0, 0.5))])
    assert state is not None and state.references == 20
    np.testing.assert_allclose([-0.4, 2.0 / np.sqrt(20.0)], [state.bias_percent, state.bias_error_percent])


def test_states_joined_take_what_only_another_part_knows() -> None:
    """One result has no deviation of its own, and a part with nothing but a blank has no bias and no precision."""
    state = joined(_state(1, 3.0, np.nan), [("K1/2", _state(9, -2.0, 1.0, 0.5)), ("K1/3", _state(0, np.nan, np.nan))])
    assert state is not None and state.references == 10
    np.testing.assert_allclose([-1.5, 3.0 / np.sqrt(10.0)], [state.bias_percent, state.bias_error_percent])
    assert (state.precision_s0, state.precision_k) == (0.5, 0.05)
    nothing = joined(None, [("K1/2", _state(0, np.nan, np.nan))])
    assert nothing is not None and np.isnan([nothing.bias_percent, nothing.bias_error_percent]).all()
