"""Atomic weights, oxide masses and factors against the molmass library and the factors in print."""

from __future__ import annotations

import molmass
import pytest

from registry.petrology.constants import (
    ATOMIC_WEIGHT,
    FE2O3_FROM_FEO,
    FEO_FROM_FE2O3,
    OXYGEN_FOR_CHLORINE,
    OXYGEN_FOR_FLUORINE,
    formula_atoms,
    molar_mass,
    oxide_from_element,
)
from registry.petrology.norm import NORM_OXIDES

OXIDES = sorted({*NORM_OXIDES.values(), "H2O", "V2O5", "CoO", "Rb2O", "Cs2O", "Nb2O5", "U3O8", "ThO2"})
#: Mass, oxide per element: arithmetic from the five-figure weights of Prohaska et al. 2022, done apart (recomputed).
FACTORS = {
    "SiO2": (60.083, 2.1393), "TiO2": (79.865, 1.6685), "Al2O3": (101.961, 1.8894), "Fe2O3": (159.687, 1.4297),
    "FeO": (71.844, 1.2865), "MnO": (70.937, 1.2912), "MgO": (40.304, 1.6583), "CaO": (56.077, 1.3992),
    "Na2O": (61.979, 1.3480), "K2O": (94.195, 1.2046), "P2O5": (141.943, 2.2913), "H2O": (18.015, 8.9360),
    "CO2": (44.009, 3.6641), "SO3": (80.057, 2.4971), "Cr2O3": (151.989, 1.4615), "V2O3": (149.881, 1.4711),
    "V2O5": (181.879, 1.7852), "NiO": (74.692, 1.2726), "CoO": (74.932, 1.2715), "BaO": (153.329, 1.1165),
    "SrO": (103.619, 1.1826), "Rb2O": (186.935, 1.0936), "Cs2O": (281.819, 1.0602), "Li2O": (29.879, 2.1527),
    "ZrO2": (123.222, 1.3508),
}  # fmt: skip


@pytest.mark.parametrize("symbol", sorted(ATOMIC_WEIGHT))
def test_atomic_weight_agrees_with_molmass(symbol: str) -> None:
    """Five figures against a library of full ones; 3e-4 covers later revisions and intervals (Li, S, Pb)."""
    assert ATOMIC_WEIGHT[symbol] == pytest.approx(molmass.ELEMENTS[symbol].mass, rel=3e-4)


@pytest.mark.parametrize("oxide", OXIDES)
def test_oxide_factor_agrees_with_molmass(oxide: str) -> None:
    composition = molmass.Formula(oxide)
    symbol = next(iter(formula_atoms(oxide)))
    fraction = composition.composition()[symbol].fraction

    assert molar_mass(oxide) == pytest.approx(composition.mass, rel=1.5e-4)
    assert oxide_from_element(oxide) == pytest.approx(1.0 / fraction, rel=1.5e-4)


@pytest.mark.parametrize("oxide", sorted(FACTORS))
def test_oxide_mass_and_factor_as_recomputed(oxide: str) -> None:
    mass, factor = FACTORS[oxide]

    assert molar_mass(oxide) == pytest.approx(mass, abs=5.01e-4)
    assert oxide_from_element(oxide) == pytest.approx(factor, abs=5.01e-5)


def test_iron_and_halogen_factors_as_recomputed() -> None:
    assert pytest.approx(0.89981, abs=5e-6) == FEO_FROM_FE2O3
    assert pytest.approx(1.11135, abs=5e-6) == FE2O3_FROM_FEO
    assert pytest.approx(0.4211, abs=5e-5) == OXYGEN_FOR_FLUORINE
    assert pytest.approx(0.2256, abs=1e-4) == OXYGEN_FOR_CHLORINE


@pytest.mark.parametrize("formula", ["", "al2o3", "Al2O3+", "H2O-", "2SiO2"])
def test_formula_that_is_none_is_refused(formula: str) -> None:
    with pytest.raises(ValueError, match="is not a plain chemical formula such as Al2O3"):
        formula_atoms(formula)


def test_formula_with_unknown_element_is_refused() -> None:
    with pytest.raises(ValueError, match="'XxO2': no atomic weight for 'Xx'"):
        formula_atoms("XxO2")


def test_formula_repeated_element_is_added_up() -> None:
    assert formula_atoms("CH3COOH") == {"C": 2, "H": 4, "O": 2}
