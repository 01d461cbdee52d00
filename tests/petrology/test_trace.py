"""Trace ratios. Printed and recomputed values stand in ``published/trace.csv``."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.petrology.catalogue import METHOD_BY_KEY, WARNINGS
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_CODE
from registry.petrology.trace import (
    K_PPM_PER_K2O_WT,
    RATIOS,
    ce_anomaly,
    element_ratio,
    eu_anomaly,
    is_adakite_like,
    zr_nb_ce_y,
)

PPM = st.floats(1e-3, 1e4)


def test_k_ppm_of_one_wt_of_k2o_is_the_handbook_factor():
    """0.8302 K in K2O by mass (stoichiometry, IUPAC weights)."""
    assert pytest.approx(8302.0, abs=0.6) == K_PPM_PER_K2O_WT


@pytest.mark.parametrize("quantity", RATIOS)
def test_ratios_table_names_chosen_columns_and_agrees_with_the_catalogue(quantity):
    numerator, denominator, factor = RATIOS[quantity]

    assert {numerator, denominator} <= set(CHOSEN_COLUMNS)
    assert METHOD_BY_KEY[quantity].inputs == (numerator, denominator)
    np.testing.assert_allclose(METHOD_BY_KEY[quantity].function(np.array([3.0]), np.array([2.0])), [1.5 * factor])


@pytest.mark.parametrize("quantity", RATIOS)
def test_element_ratio_zero_denominator_is_missing_with_its_cause(quantity):
    cause = METHOD_BY_KEY[quantity].causes[0]

    np.testing.assert_array_equal(element_ratio(quantity, [1.0, 0.0], [0.0, 2.0]), [np.nan, 0.0])
    assert cause.code == "zero_denominator"
    assert cause.mask(np.array([0.0, 2.0, np.nan])).tolist() == [True, False, False]


def test_element_ratio_unknown_name_is_refused():
    with pytest.raises(ValueError, match="no ratio 'rb_zr'; there are la_yb,"):
        element_ratio("rb_zr", 1.0, 1.0)


@given(st.sampled_from(sorted(RATIOS)), PPM, PPM, st.floats(0.01, 100.0))
def test_element_ratio_common_factor_cancels(quantity, above, below, factor):
    np.testing.assert_allclose(
        element_ratio(quantity, factor * above, factor * below), element_ratio(quantity, above, below), rtol=1e-9
    )


@given(PPM, PPM, PPM, st.floats(0.01, 100.0))
def test_eu_anomaly_dilution_changes_nothing(eu, sm, gd, factor):
    np.testing.assert_allclose(eu_anomaly(factor * eu, factor * sm, factor * gd), eu_anomaly(eu, sm, gd), rtol=1e-9)


@pytest.mark.parametrize("anomaly", [eu_anomaly, ce_anomaly])
def test_anomaly_missing_or_zero_neighbour_stays_in_its_row(anomaly):
    result = anomaly([1.0, 1.0, 1.0, 1.0], [1.0, np.nan, 0.0, 1.0], [1.0, 1.0, 1.0, -1.0])

    assert np.isfinite(result).tolist() == [True, False, False, False]


def test_zr_nb_ce_y_missing_member_leaves_no_sum():
    np.testing.assert_array_equal(zr_nb_ce_y([1.0, 1.0], [2.0, 2.0], [3.0, np.nan], 4.0), [10.0, np.nan])


def test_is_adakite_like_box_edges_belong_to_it():
    """Richards and Kerrich 2007: every limit of the box exactly met, then one missed at a time."""
    inside = [56.0, 15.0, 2.99, 400.0, 18.0, 1.9, 38.0]
    outside = [55.9, 14.9, 3.0, 399.0, 18.1, 1.91, 37.9]

    assert is_adakite_like(*inside)
    for position, value in enumerate(outside):
        assert not is_adakite_like(*inside[:position], value, *inside[position + 1 :])
    assert not is_adakite_like(*inside[:6], np.nan)


def warned(code, *values):
    return next(each for each in WARNINGS if each.code == code).mask(*values).tolist()


def digestions(*names):
    return np.array([DIGESTION_CODE[name] for name in names], dtype=np.uint8)


def test_ratio_of_two_digestions_is_warned_and_total_methods_count_as_one():
    above = digestions("fusion", "fusion", "four_acid", "four_acid", "unknown", "inaa", "fusion")
    below = digestions("xrf", "four_acid", "four_acid", "aqua_regia", "unknown", "xrf", "peroxide_fusion")

    assert warned("k_rb_two_digestions", np.full(7, 150.0), above, below) == [
        False, True, False, True, False, False, True,
    ]  # fmt: skip


def test_ratio_without_a_value_or_a_digestion_is_not_warned():
    above, below = digestions("fusion", ""), digestions("four_acid", "four_acid")

    assert warned("k_rb_two_digestions", np.array([np.nan, 100.0]), above, below) == [False, False]


def test_eu_anomaly_one_of_three_from_another_digestion_is_warned():
    same, other = digestions("fusion"), digestions("four_acid")

    assert warned("eu_anomaly_two_digestions", np.array([0.6]), same, same, other) == [True]
    assert warned("eu_anomaly_two_digestions", np.array([0.6]), same, same, same) == [False]


def test_ratio_of_a_censored_member_is_warned():
    none, below = np.array([0], dtype=np.uint8), np.array([1], dtype=np.uint8)

    assert warned("nb_ta_censored", np.array([5.0]), none, below) == [True]
    assert warned("nb_ta_censored", np.array([5.0]), none, none) == [False]
    assert warned("nb_ta_censored", np.array([np.nan]), none, below) == [False]


def test_sr_y_of_altered_rock_is_warned():
    loi = np.array([3.0, 3.1, np.nan])

    assert warned("sr_y_altered", np.full(3, 40.0), loi, Conventions()) == [False, True, False]


def test_ratio_of_a_partial_digestion_is_warned_where_the_element_stays_behind():
    """Four acids leave zircon; they take Rb and Sr wholly (common practice)."""
    acid, total = digestions("four_acid", "fusion"), digestions("fusion", "fusion")

    assert warned("zr_hf_partial_digestion", np.full(2, 35.0), acid, total) == [True, False]
    assert warned("zr_hf_partial_digestion", np.full(2, np.nan), acid, total) == [False, False]
    assert "rb_sr_partial_digestion" not in {warning.code for warning in WARNINGS}
