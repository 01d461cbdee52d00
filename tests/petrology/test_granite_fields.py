"""Granite fields of Pearce et al. 1984; coordinates from memory, boundary values recomputed."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology import granite_fields as fields
from registry.petrology.catalogue import METHOD_BY_KEY

PPM = st.floats(1.0, 2000.0)


@pytest.mark.parametrize(
    ("x", "line", "expected", "half_last_decimal"),
    [
        (30.0, fields.RB_Y_NB_SYN_ARC, 235.6, 0.05),
        (100.0, fields.RB_Y_NB_DIVIDE, 531.3, 0.05),
        (100.0, fields.RB_Y_NB_PLATE_RIDGE, 16.3, 0.05),
        (30.0, fields.NB_Y_PLATE, 20.0, 0.05),
        (100.0, fields.NB_Y_PLATE, 17.0, 0.05),
    ],
)
def test_line_height_agrees_with_recomputed_values(x, line, expected, half_last_decimal):
    np.testing.assert_allclose(fields.line_height(x, line), expected, atol=half_last_decimal, rtol=0)


@pytest.mark.parametrize(
    ("rb", "y_nb", "expected"),
    [
        (300.0, 54.0, "syn-collision granite"), (10.0, 50.0, "volcanic-arc granite"),
        (10.0, 52.5, "within-plate granite"), (4.0, 50.0, "volcanic-arc granite"), (4.0, 51.5, "ocean-ridge granite"),
        (1530.0, 300.0, "syn-collision granite"), (1510.0, 300.0, "within-plate granite"),
        (80.0, 2.0, "syn-collision granite"), (79.0, 2.0, "volcanic-arc granite"), (100.0, 1.9, None),
        (2001.0, 50.0, None), (0.5, 50.0, None), (np.nan, 50.0, None),
    ],
)  # fmt: skip
def test_granite_field_rb_y_nb_beside_each_line(rb, y_nb, expected):
    assert fields.granite_field_rb_y_nb(rb, y_nb - 1.0, 1.0) == expected


@given(st.lists(st.tuples(PPM, PPM), min_size=1, max_size=8))
def test_granite_field_many_rows_equal_single_rows(points):
    first, second = np.array(points).T
    for function in (fields.granite_field_nb_y, fields.granite_field_ta_yb):
        together = function(first, second)
        assert together.tolist() == [function(a, b) for a, b in points]


@pytest.mark.parametrize(
    ("rb", "yb_ta", "expected"),
    [(201.0, 5.9, "syn-collision granite"), (190.0, 5.9, "volcanic-arc granite"), (190.0, 6.1, "within-plate granite"),
     (7.0, 6.1, "ocean-ridge granite"), (100.0, 0.4, None)],
)  # fmt: skip
def test_granite_field_rb_yb_ta_beside_each_line(rb, yb_ta, expected):
    assert fields.granite_field_rb_yb_ta(rb, yb_ta - 0.1, 0.1) == expected


@pytest.mark.parametrize(
    ("ta", "yb", "expected"),
    [
        (1.0, 1.0, "volcanic-arc or syn-collision granite"), (0.1, 4.9, "volcanic-arc or syn-collision granite"),
        (0.1, 5.1, "ocean-ridge granite"), (15.0, 10.0, "within-plate granite"),
        (3.0, 10.0, "within-plate or ocean-ridge granite"), (1.0, 20.0, "ocean-ridge granite"), (200.0, 3.0, None),
    ],
)  # fmt: skip
def test_granite_field_ta_yb_beside_each_line(ta, yb, expected):
    assert fields.granite_field_ta_yb(ta, yb) == expected


def test_granite_field_of_a_rock_without_quartz_is_none():
    assert fields.granite_field([200.0] * 3, 20.0, 10.0, [30.0, 5.0, np.nan]).tolist() == [
        "volcanic-arc granite", None, None,
    ]  # fmt: skip


def test_granite_field_off_the_diagram_has_its_cause():
    cause = METHOD_BY_KEY["granite_field"].causes[1]

    assert cause.code == "off_diagram"
    columns = (np.array([3000.0, 200.0, np.nan]), np.full(3, 20.0), np.full(3, 10.0))
    assert cause.mask(*columns).tolist() == [True, False, False]
