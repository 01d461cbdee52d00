"""What plain iron headings mean beside each other (the project's decision on definitions). Invented tables."""

from __future__ import annotations

import pytest

from registry.intake import ColumnChoice, ReadingOptions, Recipe, read_file


def analytes(headings, recipe=None):
    names = headings.split(",")
    text = "Sample," + headings + "\nA" + ",5" * len(names) + "\nB" + ",6" * len(names) + "\n"
    reading = read_file("iron.csv", text.encode(), "results", ReadingOptions(recipe=recipe))
    assert reading.ok
    warned = [problem.column for problem in reading.warnings if "total iron" in problem.what]
    return [column.analyte for column in reading.results.columns], warned


@pytest.mark.parametrize(
    ("headings", "expected", "warned"),
    [
        ("Fe2O3 (%)", ["Fe2O3T"], ["Fe2O3 (%)"]),
        ("FeO (%)", ["FeOT"], ["FeO (%)"]),
        ("FeO (%),Fe2O3 (%)", ["FeO", "Fe2O3"], []),
        ("Fe2O3T (%),FeO (%)", ["Fe2O3T", "FeO"], []),
        ("FeO (%),TFe2O3 (%)", ["FeO", "Fe2O3T"], []),
        ("FeO* (%),Fe2O3 (%)", ["FeOT", "Fe2O3"], []),
        ("FeO (%),Fe2O3 (%),Fe2O3(T) (%)", ["FeO", "Fe2O3", "Fe2O3T"], []),
        ("FeO titration (%),SiO2 (%)", ["FeO", "SiO2"], []),
        ("FeO (%),Fe (%)", ["FeO", "Fe"], []),
        ("Fe2O3 (%),Fe (%)", ["Fe2O3T", "Fe"], ["Fe2O3 (%)"]),
        ("Fe2O3 XRF (%),Fe2O3 ICP (%)", ["Fe2O3T", "Fe2O3T"], ["Fe2O3 XRF (%)", "Fe2O3 ICP (%)"]),
    ],
)
def test_iron_headings_together_settle_total_ferric_and_titrated(headings, expected, warned):
    assert analytes(headings) == (expected, warned)


def test_recipe_that_names_ferric_iron_is_not_overruled():
    recipe = Recipe(columns={"Fe2O3 (%)": ColumnChoice(analyte="Fe2O3")})
    assert analytes("Fe2O3 (%)", recipe) == (["Fe2O3"], [])
