"""Classes. Limits and values stand in ``published/classification.csv``; here what holds over the whole range."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.catalogue import METHOD_BY_KEY
from registry.petrology.classification import a_type, alumina_class, fe_class, mali_class, silica_class
from registry.petrology.granite_indices import a_cnk, a_nk, fe_number, ferroan_boundary, mali_boundaries


@given(st.lists(st.floats(0.0, 100.0), min_size=2, max_size=20))
def test_silica_class_rises_with_silica(silica):
    order = ["ultrabasic", "basic", "intermediate", "acid"]
    ranks = [order.index(name) for name in silica_class(np.sort(silica))]

    assert ranks == sorted(ranks)


def test_silica_class_missing_or_impossible_silica_is_none():
    assert silica_class([np.nan, -1.0, 100.1, 50.0]).tolist() == [None, None, None, "basic"]


@given(st.floats(1.0, 30.0), st.floats(0.0, 20.0), st.floats(0.1, 15.0), st.floats(0.1, 15.0))
def test_alumina_class_agrees_with_its_definition(al2o3, cao, na2o, k2o):
    """Shand 1943, in words: alkalis beyond alumina, alumina beyond all three, or between."""
    alumina, alkalis = al2o3 / 101.961, na2o / 61.979 + k2o / 94.195
    lime = cao / 56.077
    found = str(alumina_class(a_cnk(al2o3, cao, na2o, k2o), a_nk(al2o3, na2o, k2o)))
    if min(abs(alumina - alkalis), abs(alumina - alkalis - lime)) > 1e-6:
        expected = (
            "peralkaline" if alkalis > alumina else "peraluminous" if alumina > alkalis + lime else "metaluminous"
        )
        assert found == expected


def test_alumina_class_exactly_one_is_metaluminous():
    assert alumina_class([1.0, 0.8], [1.5, 1.0]).tolist() == ["metaluminous", "metaluminous"]


@given(st.floats(48.0, 80.0), st.floats(0.1, 20.0), st.floats(0.1, 20.0))
def test_fe_class_parts_at_the_line(silica, feot, mgo):
    number = fe_number(feot, mgo)
    expected = "ferroan" if number > ferroan_boundary(silica) else "magnesian"

    assert fe_class(number, silica) == expected


def test_mali_class_on_a_line_belongs_to_the_more_alkalic_side():
    alkalic, alkali_calcic, calc_alkalic = mali_boundaries(65.0)

    classes = mali_class(np.array([alkalic, alkali_calcic, calc_alkalic, calc_alkalic - 0.01]), 65.0)

    assert classes.tolist() == ["alkalic", "alkali-calcic", "calc-alkalic", "calcic"]


@pytest.mark.parametrize("function", [alumina_class, fe_class, mali_class])
def test_class_missing_input_is_none_in_its_row_only(function):
    result = function(np.array([1.1, np.nan, 1.1]), np.array([60.0, 60.0, np.nan]))

    assert [word is None for word in result] == [False, True, True]


def test_a_type_unknown_sum_leaves_it_open_only_where_gallium_passes():
    result = a_type([3.0, 2.0, 3.0, np.nan], [np.nan, np.nan, 351.0, 300.0], 30.0)

    assert result.tolist() == [None, "not A-type", "A-type", "not A-type"]


@pytest.mark.parametrize("key", ["a_type", "granite_field"])
def test_granite_class_quartz_at_most_five_has_its_cause(key):
    cause = METHOD_BY_KEY[key].causes[0]

    assert cause.code == "not_granitic"
    assert cause.mask(np.array([5.0, 5.1, np.nan])).tolist() == [True, False, False]
