"""Alteration indices. Printed and recomputed values stand in ``published/alteration.csv``."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.alteration import (
    alteration_index,
    ccpi,
    cia,
    cia_sediment,
    hughes_x,
    loss_on_ignition_volatiles,
)
from registry.petrology.constants import ATOMIC_WEIGHT, molar_mass

AMOUNT = st.floats(0.0, 40.0)


@pytest.mark.parametrize(
    ("oxides", "expected"),
    [
        ((101.961, 56.077, 0.0, 0.0, 0.0), 50.0),
        ((101.961, 0.0, 61.979, 0.0, 0.0), 50.0),
        ((101.961, 0.0, 0.0, 94.195, 0.0), 50.0),
        ((39.5, 0.0, 0.0, 0.0, 0.0), 100.0),
    ],
    ids=["anorthite", "albite", "potassium feldspar", "kaolinite"],
)
def test_cia_ideal_minerals_give_their_known_values(oxides, expected):
    """Nesbitt and Young 1982: feldspars 50, kaolinite 100; from their formulas."""
    assert cia(*oxides) == pytest.approx(expected, abs=1e-3)


@given(st.floats(0.1, 40.0), AMOUNT, AMOUNT, AMOUNT, st.floats(0.0, 5.0))
def test_cia_sediment_rule_never_lowers_it(al2o3, cao, na2o, k2o, p2o5):
    uncapped, capped = cia(al2o3, cao, na2o, k2o, p2o5), cia_sediment(al2o3, cao, na2o, k2o, p2o5)

    assert 0.0 < uncapped <= capped * (1 + 1e-12) <= 100.0 + 1e-9


@given(st.lists(AMOUNT, min_size=4, max_size=4))
def test_box_plot_indices_lie_between_0_and_100_or_are_missing(oxides):
    for value in (alteration_index(*oxides), ccpi(*oxides), hughes_x(*oxides[:2])):
        assert np.isnan(value) or 0.0 <= value <= 100.0


def test_alteration_index_sericite_and_albite_are_its_ends():
    """Large et al. 2001: sericite 100, albite 0; from their formulas (wt% of the four oxides)."""
    assert alteration_index(11.8, 0.0, 0.0, 0.0) == 100.0
    assert alteration_index(0.0, 0.0, 11.8, 0.0) == 0.0


def test_loss_on_ignition_volatiles_oxygen_uptake_is_stoichiometric():
    assert pytest.approx(ATOMIC_WEIGHT["O"] / (2.0 * molar_mass("FeO")), abs=5e-4) == 0.111
    np.testing.assert_allclose(loss_on_ignition_volatiles([-0.2, 1.0], [9.0, 0.0]), [0.799, 1.0])
