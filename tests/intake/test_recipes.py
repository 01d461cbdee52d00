"""Reading recipes: saved, read again, applied. Invented tables."""

from __future__ import annotations

import pytest

from registry.intake import ColumnChoice, ReadingOptions, Recipe, read_file
from registry.intake.recipes import RecipeFault

TEXT = b"No,Lab ID,Field ID,Au,SiO2 (%),Cu (ppm)\n1,L1,F1,5,60,50\n2,L2,F2,6,61,51\n"


def test_recipe_corrects_columns_and_is_the_same_after_saving(tmp_path):
    recipe = Recipe(
        name="invented",
        columns={
            "Au": ColumnChoice(unit="ppb", method="FA30", digestion="fire_assay"),
            "Cu (ppm)": ColumnChoice(ignore=True),
            "SiO2 (%)": ColumnChoice(digestion="xrf"),
        },
        sample_header="Lab ID",
    )
    recipe.save(tmp_path / "recipe.json")
    saved = Recipe.load(tmp_path / "recipe.json")
    assert saved == recipe
    reading = read_file("a.csv", TEXT, options=ReadingOptions(recipe=saved))
    assert reading.ok
    table = reading.results
    assert table.sample_codes == ["L1", "L2"]
    assert [(c.analyte, c.unit, c.method, c.digestion) for c in table.columns] == [
        ("Au", "ppb", "FA30", "fire_assay"),
        ("SiO2", "wt%", None, "xrf"),
    ]
    assert "Cu (ppm)" in table.ignored


def test_recipe_of_a_reading_fits_the_same_shape_and_reads_the_same():
    first = read_file("a.csv", TEXT, options=ReadingOptions(unit="ppm"))
    again = Recipe.from_json(first.recipe.to_json())
    assert again.fits(first.recipe.shape)
    assert not again.fits((*first.recipe.shape, "more"))
    second = read_file("b.csv", TEXT, options=ReadingOptions(recipe=again))
    assert second.ok
    assert second.results.columns == first.results.columns
    assert second.results.sample_codes == first.results.sample_codes


@pytest.mark.parametrize(
    ("choice", "words"),
    [
        (ColumnChoice(analyte="Xq"), "unknown analyte"),
        (ColumnChoice(unit="lb"), "unknown unit"),
        (ColumnChoice(digestion="boiling"), "unknown digestion"),
    ],
)
def test_recipe_with_an_unknown_word_is_a_problem(choice, words):
    reading = read_file("a.csv", TEXT, options=ReadingOptions(recipe=Recipe(columns={"Au": choice}), unit="ppm"))
    assert any(words in problem.what for problem in reading.problems if problem.severity == "problem")


@pytest.mark.parametrize("text", ["", "[]", "{", '{"columns": {"a": {"colour": 1}}}', '{"taste": 1}', "null"])
def test_text_that_is_no_recipe_is_refused_with_a_sentence(text):
    with pytest.raises(RecipeFault, match="not a reading recipe"):
        Recipe.from_json(text)
