"""Granite indices. Printed and recomputed values stand in ``published/indices_granites.csv``."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.granite_indices import (
    a_cnk,
    a_nk,
    agpaitic_index,
    alkalinity_index_frost,
    asi,
    ferroan_boundary,
    mali_boundaries,
    silicate_calcium_moles,
)

AMOUNT = st.floats(0.01, 40.0)


def test_mali_boundaries_average_granite_agree_with_recomputed_lines():
    """Frost et al. 2001, coefficients from memory; recomputed by hand for SiO2 71.30: 8.35, 6.49, 4.54."""
    np.testing.assert_allclose(mali_boundaries(71.30), [8.35, 6.49, 4.54], atol=0.005)


@given(st.floats(48.0, 80.0))
def test_mali_boundaries_lines_never_cross_in_range(silica):
    alkalic, alkali_calcic, calc_alkalic = mali_boundaries(silica)

    assert alkalic > alkali_calcic > calc_alkalic


@given(AMOUNT, AMOUNT, AMOUNT, AMOUNT)
def test_asi_without_phosphorus_is_a_cnk(al2o3, cao, na2o, k2o):
    np.testing.assert_allclose(asi(al2o3, cao, na2o, k2o, 0.0), a_cnk(al2o3, cao, na2o, k2o), rtol=1e-12)


@given(AMOUNT, AMOUNT, AMOUNT, AMOUNT, st.floats(0.0, 5.0))
def test_asi_lies_between_a_cnk_and_a_nk(al2o3, cao, na2o, k2o, p2o5):
    value = asi(al2o3, cao, na2o, k2o, p2o5)

    assert a_cnk(al2o3, cao, na2o, k2o) * (1 - 1e-12) <= value <= a_nk(al2o3, na2o, k2o) * (1 + 1e-12)


@given(AMOUNT, AMOUNT, AMOUNT)
def test_agpaitic_index_is_the_inverse_of_a_nk(al2o3, na2o, k2o):
    np.testing.assert_allclose(agpaitic_index(al2o3, na2o, k2o) * a_nk(al2o3, na2o, k2o), 1.0, rtol=1e-12)


@given(AMOUNT, AMOUNT, AMOUNT)
def test_alkalinity_index_is_negative_exactly_for_peralkaline_rocks(al2o3, na2o, k2o):
    ratio = a_nk(al2o3, na2o, k2o)
    if abs(ratio - 1.0) > 1e-9:
        assert (alkalinity_index_frost(al2o3, na2o, k2o) < 0.0) == (ratio < 1.0)


def test_silicate_calcium_pure_apatite_has_none_left():
    """Apatite takes 10/3 CaO a P2O5: 10 CaO weigh 560.77 g beside 3 P2O5 of 425.83 g (stoichiometry)."""
    assert silicate_calcium_moles(560.77, 425.829) == pytest.approx(0.0, abs=1e-4)


def test_ferroan_boundary_rises_with_silica():
    assert np.all(np.diff(ferroan_boundary(np.arange(48.0, 81.0))) > 0.0)
