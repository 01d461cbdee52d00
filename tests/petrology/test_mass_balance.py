"""The mass balance and the table of minerals: mixtures made forward, then recovered (invented)."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.mass_balance import balance_fractionation, non_negative_least_squares
from registry.petrology.minerals import (
    ASSEMBLAGES,
    BALANCED_OXIDES,
    MINERALS,
    SOLID_SOLUTIONS,
    fractionating_minerals,
    mineral_composition_wt,
    solid_solution_wt,
)
from tests.petrology.melt_rocks import ANDESITE, BASALT, melt


def test_minerals_close_to_a_hundred() -> None:
    for name in MINERALS:
        assert sum(mineral_composition_wt(name).values()) == pytest.approx(100.0)


def test_olivine_composition_by_its_formula() -> None:
    """Fo80 by atomic weights: MgO 1.6 x 40.304 of 153.31 g/mol."""
    assert mineral_composition_wt("olivine_fo80")["mgo_wt"] == pytest.approx(100 * 1.6 * 40.304 / 153.307, abs=0.005)


def test_mineral_of_another_name_is_refused() -> None:
    with pytest.raises(ValueError, match="no mineral 'unobtainium'; the table holds \\['albite', 'alkali_feldspar'"):
        mineral_composition_wt("unobtainium")


@given(st.floats(0.3, 0.9), st.floats(0.1, 0.9), st.floats(0.1, 0.9))
def test_mass_balance_made_forward_is_recovered(left: float, first: float, second: float) -> None:
    minerals = ["olivine_fo80", "plagioclase_an70", "clinopyroxene"]
    shares = np.array([first * second, first * (1 - second), 1 - first]) * (1 - left)
    daughter = {name: value for name, value in melt(ANDESITE).items()}
    total = sum(daughter.values())
    parent = {
        oxide: left * 100.0 * daughter[oxide] / total
        + sum(share * mineral_composition_wt(name)[oxide] for share, name in zip(shares, minerals, strict=True))
        for oxide in BALANCED_OXIDES
    }
    fit = balance_fractionation(parent, daughter, minerals)

    assert fit.liquid_fraction == pytest.approx(left, abs=1e-8)
    np.testing.assert_allclose(list(fit.minerals.values()), shares, atol=1e-8)
    assert fit.residual_sum_of_squares < 1e-12


def test_mass_balance_average_andesite_from_average_basalt_fits() -> None:
    """About half of the basalt crystallises (plagioclase, pyroxene, olivine, oxides): common practice, r2 below 1."""
    minerals = ["olivine_fo80", "clinopyroxene", "plagioclase_an70", "magnetite", "ilmenite", "quartz"]
    fit = balance_fractionation(melt(BASALT), melt(ANDESITE), minerals)

    assert 0.4 < fit.liquid_fraction < 0.6 and fit.residual_sum_of_squares < 1.0
    assert fit.minerals["quartz"] == 0.0
    assert sum(fit.minerals.values()) + fit.liquid_fraction == pytest.approx(1.0, abs=0.02)


def test_mass_balance_oxide_in_one_rock_only_is_refused() -> None:
    with pytest.raises(ValueError, match="the daughter lacks \\['p2o5_wt'\\]"):
        balance_fractionation(melt(BASALT), {k: v for k, v in melt(ANDESITE).items() if k != "p2o5_wt"}, ["quartz"])


@given(st.integers(0, 2**32 - 1))
def test_least_squares_meets_the_conditions_of_an_optimum(seed: int) -> None:
    """No amount is negative, and no absent column could still lower the misfit (Karush-Kuhn-Tucker conditions)."""
    generator = np.random.default_rng(seed)
    matrix, target = generator.normal(size=(9, 5)), generator.normal(size=9)
    x = non_negative_least_squares(matrix, target)
    gradient = matrix.T @ (target - matrix @ x)

    assert (x >= 0.0).all()
    assert (gradient <= 1e-8).all()
    np.testing.assert_allclose(gradient[x > 0.0], 0.0, atol=1e-8)


def test_least_squares_shapes_that_disagree_are_refused() -> None:
    with pytest.raises(ValueError, match="a matrix \\(3, 2\\) does not go with a target \\(2,\\)"):
        non_negative_least_squares(np.ones((3, 2)), np.ones(2))


def test_least_squares_missing_value_is_refused() -> None:
    with pytest.raises(ValueError, match="a value is missing or infinite"):
        non_negative_least_squares(np.array([[np.nan, 1.0], [1.0, 1.0]]), np.array([1.0, 1.0]))


def test_least_squares_that_does_not_end_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("registry.petrology.mass_balance._ROUNDS_PER_COLUMN", 0)

    with pytest.raises(ArithmeticError, match="the active-set iteration did not end"):
        non_negative_least_squares(np.eye(2), np.ones(2))


def test_least_squares_without_columns_is_empty() -> None:
    assert non_negative_least_squares(np.zeros((3, 0)), np.ones(3)).size == 0


@pytest.mark.parametrize(
    ("mineral", "oxide", "printed"),
    [
        ("forsterite", "mgo_wt", 57.29),
        ("fayalite", "feot_wt", 70.51),
        ("diopside", "cao_wt", 25.90),
        ("hedenbergite", "feot_wt", 28.96),
        ("anorthite", "al2o3_wt", 36.65),
        ("albite", "na2o_wt", 11.82),
        ("orthoclase", "k2o_wt", 16.92),
        ("ilmenite", "tio2_wt", 52.65),
    ],
)
def test_end_members_against_handbook_percentages(mineral: str, oxide: str, printed: float) -> None:
    """Ideal percentages as mineral handbooks print them (from memory)."""
    assert mineral_composition_wt(mineral)[oxide] == pytest.approx(printed, abs=0.01)


def test_solid_solutions_end_in_their_end_members_and_refuse_the_rest() -> None:
    for name, (magnesian, ferrous) in SOLID_SOLUTIONS.items():
        assert solid_solution_wt(name, 1.0) == pytest.approx(mineral_composition_wt(magnesian))
        assert solid_solution_wt(name, 0.0) == pytest.approx(mineral_composition_wt(ferrous))
    with pytest.raises(ValueError, match="'quartz' is no solid solution"):
        solid_solution_wt("quartz", 0.5)
    with pytest.raises(ValueError, match=r"magnesian share 1.2 of olivine; expected 0 to 1"):
        solid_solution_wt("olivine", 1.2)


def test_fractionating_olivine_of_a_mantle_melt_is_mantle_olivine() -> None:
    """A melt of Mg-number 72 is in equilibrium with Fo 89.6 (exchange 0.30, Roeder and Emslie 1970)."""
    olivine = fractionating_minerals(49.0, 72.0)["olivine"]
    share = (olivine["mgo_wt"] / 40.304) / (olivine["mgo_wt"] / 40.304 + olivine["feot_wt"] / 71.844)

    assert share == pytest.approx(0.8955, abs=0.0005)


@pytest.mark.parametrize(("silica", "place"), [(45.0, 0), (51.99, 0), (52.0, 1), (63.0, 2), (72.0, 3), (100.0, 3)])
def test_fractionating_minerals_follow_the_silica_of_the_parent(silica: float, place: int) -> None:
    assert tuple(fractionating_minerals(silica, 50.0)) == ASSEMBLAGES[place][1]


def test_fractionating_minerals_of_no_rock_are_refused() -> None:
    with pytest.raises(ValueError, match=r"SiO2 nan wt% and Mg-number 50\.0; expected wt% up to 100"):
        fractionating_minerals(float("nan"), 50.0)
    with pytest.raises(ValueError, match=r"Mg-number 150\.0"):
        fractionating_minerals(50.0, 150.0)


@given(st.floats(0.3, 0.9), st.floats(0.1, 0.9), st.integers(0, 2))
def test_mass_balance_of_its_own_assemblages_is_recovered(left: float, split: float, place: int) -> None:
    """Two minerals of each assemblage are added to a liquid; the fit finds liquid and minerals again."""
    silica = (50.0, 58.0, 67.0)[place]
    phases = fractionating_minerals(silica, 45.0)
    names = list(phases)[:2]
    daughter = melt(ANDESITE)
    total = sum(daughter.values())
    parent = {
        oxide: left * 100.0 * daughter[oxide] / total
        + (1.0 - left) * (split * phases[names[0]][oxide] + (1.0 - split) * phases[names[1]][oxide])
        for oxide in BALANCED_OXIDES
    }
    fit = balance_fractionation(parent, daughter, phases)

    assert fit.quality == "good" and fit.residual_sum_of_squares < 1e-10
    assert fit.liquid_fraction + sum(fit.minerals.values()) == pytest.approx(1.0, abs=1e-6)


def test_mass_balance_that_minerals_alone_could_make_is_not_decided() -> None:
    """A haplogranite is quartz and feldspars: with those minerals offered any share of liquid fits."""
    names = ["quartz", "albite", "orthoclase", "biotite"]
    granite = {oxide: sum(mineral_composition_wt(name)[oxide] for name in names[:3]) / 3.0 for oxide in BALANCED_OXIDES}
    parent = {oxide: 0.9 * granite[oxide] + 0.1 * mineral_composition_wt("biotite")[oxide] for oxide in BALANCED_OXIDES}

    assert not balance_fractionation(parent, granite, names).decided
    assert balance_fractionation(parent, granite, ["biotite"]).decided


@pytest.mark.parametrize(("error", "quality"), [(0.2, "good"), (1.2, "fair"), (4.0, "poor")])
def test_mass_balance_quality_follows_the_misfit(error: float, quality: str) -> None:
    """P2O5 that no mineral offered and no liquid holds is misfit alone."""
    daughter = melt(ANDESITE) | {"p2o5_wt": 0.0}
    parent = melt(ANDESITE) | {"p2o5_wt": error}

    assert balance_fractionation(parent, daughter, ["quartz"]).quality == quality
