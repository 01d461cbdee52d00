"""What tells a rock from a mineral, a cumulate, a glass, an altered or a carbonated rock."""

from __future__ import annotations

import csv
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from registry.petrology.catalogue import WARNINGS
from registry.petrology.constants import molar_mass
from registry.petrology.conventions import Conventions
from registry.petrology.kinds_of_analysis import FORMULA_OXIDES, MINERALS, cations_per_oxygen, has_formula_of
from tests.petrology.melt_rocks import ANDESITE, BASALT, GRANITE

LAVAS = Path(__file__).resolve().parents[3] / "shared" / "data" / "igneous_analyses" / "Uekietal_SMR_input.csv"
#: Moles of oxide of ideal formulas [deer2013]; names as in MINERALS.
FORMULAS = [
    ("olivine", {"MgO": 2.0, "SiO2": 1.0}),
    ("olivine", {"FeO": 2.0, "SiO2": 1.0}),
    ("olivine", {"MgO": 1.8, "FeO": 0.19, "NiO": 0.01, "SiO2": 1.0}),
    ("pyroxene", {"CaO": 1.0, "MgO": 1.0, "SiO2": 2.0}),
    ("pyroxene", {"MgO": 1.5, "FeO": 0.5, "SiO2": 2.0}),
    ("pyroxene", {"CaO": 0.8, "MgO": 0.9, "FeO": 0.3, "SiO2": 2.0}),
    ("feldspar", {"CaO": 1.0, "Al2O3": 1.0, "SiO2": 2.0}),
    ("feldspar", {"Na2O": 0.5, "Al2O3": 0.5, "SiO2": 3.0}),
    ("feldspar", {"K2O": 0.35, "Na2O": 0.15, "Al2O3": 0.5, "SiO2": 3.0}),
    ("feldspathoid", {"Na2O": 1.5, "K2O": 0.5, "Al2O3": 2.0, "SiO2": 4.0}),
    ("feldspathoid", {"K2O": 0.5, "Al2O3": 0.5, "SiO2": 2.0}),
    ("garnet", {"FeO": 3.0, "Al2O3": 1.0, "SiO2": 3.0}),
    ("garnet", {"MgO": 2.0, "CaO": 0.5, "FeO": 0.5, "Al2O3": 1.0, "SiO2": 3.0}),
    ("dark mica", {"K2O": 0.5, "MgO": 3.0, "Al2O3": 0.5, "SiO2": 3.0}),
    ("dark mica", {"K2O": 0.5, "MgO": 1.5, "FeO": 1.2, "TiO2": 0.15, "Al2O3": 0.65, "SiO2": 2.75}),
    ("white mica", {"K2O": 0.5, "Al2O3": 1.5, "SiO2": 3.0}),
    ("quartz", {"SiO2": 1.0}),
    ("ore oxide", {"FeO": 3.0}),
    ("ore oxide", {"FeO": 1.0, "TiO2": 1.0}),
    ("ore oxide", {"FeO": 0.5, "MgO": 0.5, "Cr2O3": 0.8, "Al2O3": 0.2}),
    ("apatite", {"CaO": 10.0, "P2O5": 3.0}),
    ("zircon", {"ZrO2": 1.0, "SiO2": 1.0}),
]  # fmt: skip
COLUMN_OF = {oxide: column for column, oxide in FORMULA_OXIDES.items()}


def _oxides(formula: dict[str, float]) -> list[np.ndarray]:
    """The formula as an analysis closed to 100 wt%, in the order of the function."""
    mass = {COLUMN_OF[oxide]: amount * molar_mass(oxide) for oxide, amount in formula.items()}
    total = sum(mass.values())
    return [np.array([100.0 * mass.get(column, 0.0) / total]) for column in FORMULA_OXIDES]


def _of_rock(rock: dict[str, float]) -> list[np.ndarray]:
    total = sum(rock.values())
    return [np.array([100.0 * rock.get(column.replace("_vf", ""), 0.0) / total]) for column in FORMULA_OXIDES]


def _mask(code: str, **columns: Any) -> Any:
    warning = next(each for each in WARNINGS if each.code == code)
    values = {name: np.atleast_1d(value) for name, value in columns.items() if name != "conventions"}
    values["conventions"] = columns.get("conventions", Conventions())
    return warning.mask(*(values.get(name, np.array([np.nan])) for name in warning.inputs)).tolist()


@pytest.mark.parametrize(("mineral", "formula"), FORMULAS)
def test_ideal_formula_is_told_for_its_mineral_and_for_no_other(mineral: str, formula: dict[str, float]) -> None:
    oxides = _oxides(formula)

    assert [name for name in MINERALS if has_formula_of(name, *oxides)[0]] == [mineral]


@pytest.mark.parametrize("rock", [BASALT, ANDESITE, GRANITE], ids=["basalt", "andesite", "granite"])
def test_average_rock_has_the_formula_of_no_mineral(rock: dict[str, float]) -> None:
    """Averages of Le Maitre 1976 [lemaitre1976b], from memory."""
    assert [name for name in MINERALS if has_formula_of(name, *_of_rock(rock))[0]] == []


def test_formula_of_missing_oxide_or_of_nothing_is_not_told() -> None:
    for name in MINERALS:
        missing, nothing = ([np.array([value])] * len(FORMULA_OXIDES) for value in (np.nan, 0.0))
        assert not has_formula_of(name, *missing)[0]
        assert not has_formula_of(name, *nothing)[0]


def test_formula_of_unknown_mineral_is_refused() -> None:
    with pytest.raises(ValueError, match="no formula of 'unobtainium'; there are"):
        has_formula_of("unobtainium", *_of_rock(BASALT))


def test_cations_per_oxygen_of_albite_are_its_formula() -> None:
    """NaAlSi3O8: 5 cations on 8 oxygens."""
    cations = cations_per_oxygen(
        dict(zip(FORMULA_OXIDES, _oxides({"Na2O": 0.5, "Al2O3": 0.5, "SiO2": 3.0}), strict=True))
    )

    assert 8.0 * cations["sum"][0] == pytest.approx(5.0)
    assert [8.0 * cations[name][0] for name in ("si", "al", "na", "k")] == pytest.approx([3.0, 1.0, 1.0, 0.0])


@pytest.mark.skipif(not LAVAS.exists(), reason=f"the open analyses are not at {LAVAS}; they are not shipped")
def test_no_real_lava_has_the_formula_of_a_mineral() -> None:
    """2,063 lavas (Ueki et al. 2022, Front. Earth Sci. 10; GPL-3.0, read where it lies)."""
    with LAVAS.open(encoding="utf-8", newline="") as lines:
        rows = list(csv.DictReader(lines))
    heads = {"feot_vf_wt": "Fe2O3"} | {
        column: oxide for column, oxide in FORMULA_OXIDES.items() if oxide in rows[0] and column != "feot_vf_wt"
    }
    oxides = [
        np.array([float(row[heads[column]]) if column in heads else 0.0 for row in rows]) for column in FORMULA_OXIDES
    ]

    assert {name: int(has_formula_of(name, *oxides).sum()) for name in MINERALS} == dict.fromkeys(MINERALS, 0)


def test_formula_warning_of_the_catalogue_names_its_mineral() -> None:
    values = dict(zip(FORMULA_OXIDES, _oxides({"MgO": 2.0, "SiO2": 1.0}), strict=True))

    assert _mask("formula_of_olivine", **values) == [True]
    assert _mask("formula_of_garnet", **values) == [False]


@pytest.mark.parametrize(
    ("code", "columns", "expected"),
    [
        ("plagioclase_accumulated", {"al2o3_vf_wt": [27.0, 27.0, 17.0, 17.0], "sio2_vf_wt": [52.0, 66.0, 52.0, 52.0],
                                     "eu_anomaly": [np.nan, np.nan, 1.3, 0.9]}, [True, False, True, False]),
        ("mafic_minerals_accumulated", {"mgo_vf_wt": [25.0, 25.0, 12.0], "is_plutonic": [True, False, True]},
         [True, False, False]),
        ("carbonate_in_norm", {"an_wt": [20.0, 20.0, np.nan], "co2_wt": [0.6, 0.4, 5.0]}, [True, False, False]),
        ("carbonate_in_norm", {"an_wt": 20.0, "co2_wt": 5.0, "conventions": Conventions(norm_co2_as_calcite=True)},
         [False]),
        ("carbonate_in_cia", {"cia": [40.0, 40.0, np.nan], "co2_wt": [0.6, 0.5, 5.0]}, [True, False, False]),
        ("carbonate_rock", {"co2_wt": [21.0, 19.0, np.nan]}, [True, False, False]),
        ("hydrous_rock", {"h2o_plus_wt": [2.1, 2.0, np.nan]}, [True, False, False]),
        ("alteration_index_not_least_altered",
         {"alteration_index": [70.0, 15.0, 40.0, 70.0], "sio2_vf_wt": [70.0, 70.0, 70.0, 48.0]},
         [True, True, False, False]),
        ("cia_weathered", {"cia": [75.0, 50.0, np.nan]}, [True, False, False]),
        ("corundum_beyond_igneous_rocks", {"c_wt": [6.0, 3.0, np.nan]}, [True, False, False]),
        ("viscosity_without_fluorine", {"melt_viscosity_log10_pa_s": [4.0, 4.0, np.nan], "f_wt": [1.0, 0.2, 1.0]},
         [True, False, False]),
        ("glass_logged", {"logged_glass": [True, False]}, [True, False]),
        ("may_be_a_spot_analysis", {"total_wt": [99.0, np.nan]}, [True, False]),
        ("may_be_a_spot_analysis", {"total_wt": 99.0, "loi_wt": 1.0}, [False]),
        ("may_be_a_spot_analysis", {"total_wt": 99.0, "sr_ppm": 300.0}, [False]),
    ],
)  # fmt: skip
def test_kind_of_rock_is_warned_where_it_is_and_nowhere_else(
    code: str, columns: dict[str, Any], expected: list[bool]
) -> None:
    rows = max(np.size(value) for name, value in columns.items() if name != "conventions")
    given = {
        name: value if name == "conventions" else np.broadcast_to(np.asarray(value), rows)
        for name, value in columns.items()
    }
    warning = next(each for each in WARNINGS if each.code == code)
    absent = {name: np.full(rows, np.nan) for name in warning.inputs if name not in given and name != "conventions"}

    assert _mask(code, **absent, **given) == expected
