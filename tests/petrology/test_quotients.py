"""Division with holes, and labels by code; the rules are the project's own."""

import numpy as np
import pytest

from registry.petrology.quotients import floats, labels, log10_positive, quotient


def test_quotient_denominator_not_above_zero_gives_nan_never_infinity():
    result = quotient([1.0, 1.0, 1.0, np.nan, 4.0], [0.0, -1.0, np.nan, 2.0, 2.0])

    np.testing.assert_array_equal(result, [np.nan, np.nan, np.nan, np.nan, 2.0])


def test_quotient_scalar_broadcasts_over_rows():
    np.testing.assert_array_equal(quotient(6.0, [1.0, 2.0, 3.0]), [6.0, 3.0, 2.0])


def test_floats_shapes_that_do_not_fit_are_refused():
    with pytest.raises(ValueError, match=r"shapes \(2,\), \(3,\) do not go together"):
        floats([1.0, 2.0], [1.0, 2.0, 3.0])


def test_log10_positive_zero_and_negative_are_nan():
    np.testing.assert_array_equal(log10_positive([100.0, 0.0, -1.0]), [2.0, np.nan, np.nan])


def test_labels_code_minus_one_is_none():
    assert labels([1, -1, 0], ("first", "second")).tolist() == ["second", None, "first"]
