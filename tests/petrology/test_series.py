"""Series. Lines and values stand in ``published/classification_tas.csv``."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology import series
from registry.petrology.catalogue import METHOD_BY_KEY, WARNINGS


@pytest.mark.parametrize("divide", [series.AFM_IRVINE, series.AFM_KUNO], ids=["Irvine", "Kuno"])
def test_afm_divide_corners_sum_to_a_hundred_and_rise_in_magnesia(divide):
    corners = np.array(divide)

    np.testing.assert_allclose(corners.sum(axis=1), 100.0, atol=1e-9)
    assert np.all(np.diff(corners[:, 2]) > 0.0)


@given(st.floats(0.01, 15.0), st.floats(0.01, 15.0), st.floats(0.01, 30.0), st.floats(0.01, 40.0))
def test_afm_coordinates_sum_to_a_hundred(na2o, k2o, feot, mgo):
    assert sum(series.afm_coordinates(na2o, k2o, feot, mgo).values()) == pytest.approx(100.0)


@given(st.floats(0.1, 10.0), st.floats(0.1, 30.0), st.floats(0.1, 30.0), st.floats(0.1, 10.0))
def test_afm_series_common_factor_changes_nothing(alkalis, feot, mgo, factor):
    assert series.afm_series(alkalis, 0.0, feot, mgo) == series.afm_series(
        factor * alkalis, 0.0, factor * feot, factor * mgo
    )


def test_afm_series_on_either_side_of_a_corner():
    """Corner (25.4, 54.6, 20.0) of Irvine and Baragar 1971, from memory."""
    assert series.afm_series(25.0, 0.0, 55.0, 20.0) == "tholeiitic"
    assert series.afm_series(26.0, 0.0, 54.0, 20.0) == "calc-alkaline"
    assert series.afm_series(22.0, 0.0, 56.5, 21.5, "kuno1968") == "calc-alkaline"


def test_afm_divide_unknown_name_is_refused():
    with pytest.raises(ValueError, match="no AFM divide 'mine'; there are"):
        series.afm_divide_f(20.0, "mine")


def test_afm_series_outside_the_drawn_divide_is_none_with_its_cause():
    columns = [np.array([value, 2.0]) for value in (8.0, 0.0, 1.0, 0.1)]
    columns[3] = np.array([0.1, 3.0])
    cause = METHOD_BY_KEY["afm_series"].causes[0]

    assert [word is None for word in series.afm_series(*columns)] == [True, False]
    assert cause.code == "afm_divide_not_drawn"
    assert cause.mask(*columns).tolist() == [True, False]


def test_alkaline_divide_rises_and_stays_within_half_a_per_cent_of_the_tabulated_points():
    """Irvine and Baragar 1971: points 43.2/2, 48/4, 53.7/6, 60/8, 65/8.8; both from memory."""
    points = np.array([(43.2, 2.0), (48.0, 4.0), (53.7, 6.0), (60.0, 8.0), (65.0, 8.8)])

    assert np.all(np.abs(series.alkaline_divide_sio2(points[:, 1]) - points[:, 0]) < 0.5)
    assert np.all(np.diff(series.alkaline_divide_sio2(np.linspace(0.5, 9.5, 50))) > 0.0)


def test_alkalinity_below_the_divide_in_silica_is_alkaline():
    assert series.alkalinity([48.0, 48.3, 60.0], [3.0, 3.0, 6.0], [1.0, 1.0, 4.0]).tolist() == [
        "alkaline", "subalkaline", None,
    ]  # fmt: skip


def test_alkalinity_beyond_the_polynomial_has_its_cause():
    cause = METHOD_BY_KEY["alkalinity"].causes[0]

    assert cause.code == "alkalis_beyond_divide"
    assert cause.mask(np.array([6.0, 6.0]), np.array([3.5, 3.6])).tolist() == [False, True]


@given(st.floats(48.0, 80.0))
def test_k2o_series_rises_with_potash(silica):
    order = list(series.K2O_SERIES)
    ranks = [order.index(name) for name in series.k2o_series(silica, np.linspace(0.0, 12.0, 60))]

    assert ranks == sorted(ranks)
    assert ranks[0] == 0 and ranks[-1] == 3


@pytest.mark.parametrize(
    ("silica", "k2o", "expected"),
    [
        (56.0, 0.69, "low-K tholeiitic"), (56.0, 0.7, "medium-K calc-alkaline"), (56.0, 1.8, "high-K calc-alkaline"),
        (56.0, 3.2, "shoshonitic"), (48.0, 1.6, "shoshonitic"), (77.0, 3.59, "medium-K calc-alkaline"),
        (77.0, 3.61, "high-K calc-alkaline"), (47.99, 1.0, None), (60.0, np.nan, None), (np.nan, 1.0, None),
    ],
)  # fmt: skip
def test_k2o_series_corners_belong_to_the_field_above(silica, k2o, expected):
    """Peccerillo and Taylor 1976, from memory; at 77 % the line 2.4-3.0 is carried on to 3.6."""
    assert series.k2o_series(silica, k2o) == expected


def test_k2o_series_iugs_is_for_48_to_68_only():
    found = series.k2o_series_iugs([47.0, 58.0, 58.0, 58.0, 69.0], [1.0, 0.7, 1.0, 2.2, 1.0])

    assert found.tolist() == [None, "low-K", "medium-K", "high-K", None]


def test_is_alkaline_hawaiian_line_of_macdonald_and_katsura():
    """A = 0.37 S - 14.43: 4.07 at 50 %; from memory."""
    assert series.is_alkaline_hawaiian([50.0, 50.0], [3.0, 3.0], [1.06, 1.08]).tolist() == [False, True]


def test_series_warnings_name_extended_lines_and_alkaline_rocks():
    by_code = {warning.code: warning for warning in WARNINGS}
    words = np.array(["high-K calc-alkaline", "high-K calc-alkaline", None], dtype=object)
    extended = by_code["k2o_series_line_extended"].mask(words, np.array([70.0, 70.1, 75.0]))
    alkalinity = np.array(["alkaline", "subalkaline", None], dtype=object)
    sides = np.array(["tholeiitic"] * 3, dtype=object)
    alkaline = by_code["afm_series_alkaline"].mask(sides, alkalinity, np.array([3.0, 3.0, 8.0]), np.full(3, 2.0))

    assert extended.tolist() == [False, True, False]
    assert alkaline.tolist() == [True, False, True]
