"""What a user says of single columns, signs and codes, in every layout. Invented tables: layouts and branches."""

from __future__ import annotations

import dataclasses
from typing import Any

import numpy as np
import pytest

from registry.intake import ColumnChoice, Reading, ReadingOptions, Recipe, read_file
from registry.intake.corrections import NO_SUCH_COLUMN, place_of
from registry.intake.recipes import ColumnCorrection

WIDE = "Lab ID,Field ID,SiO2 (%),Zirconia,,a=b,Cu (ppm),Cu (ppm)\nL1,F1,60,0.02,5,7,1,2\nL2,F2,61,0.03,6,8,3,4\n"
LONG = "Lab No,Client Sample,Analyte,Value,Unit\n1,A,SiO2,60,%\n1,A,Zirc,180,ppm\n2,B,SiO2,61,%\n2,B,Zirc,181,ppm\n"


def read(text: str, kind: str | None = None, **options: Any) -> Reading:
    return read_file("r.csv", text.encode(), kind, ReadingOptions(**options))


def say(column: str, **choice: Any) -> ColumnCorrection:
    return ColumnCorrection(column, ColumnChoice(**choice))


def columns(reading: Reading) -> list[tuple[str, str, str, str]]:
    assert reading.ok, [problem.sentence() for problem in reading.problems]
    assert reading.results is not None
    return [(one.header, one.analyte, one.unit, one.digestion) for one in reading.results.columns]


def faults(reading: Reading) -> list[str]:
    return [problem.sentence() for problem in reading.problems if problem.severity == "problem"]


@pytest.mark.parametrize(
    ("wanted", "place"),
    [("Cu (ppm)", 6), ("Cu (ppm) (2)", 7), ("cu  (PPM)", 6), ("#5", 4), ("#8", 7), ("a=b", 5), (" Zirconia ", 3),
     ("Zirconium", None), ("#9", None), ("#0", None), ("#", None), ("", None), ("5", None)],
)  # fmt: skip
def test_place_of_a_column_goes_by_heading_then_by_number(wanted: str, place: int | None) -> None:
    labels = ["Lab ID", "Field ID", "SiO2 (%)", "Zirconia", "", "a=b", "Cu (ppm)", "Cu (ppm) (2)"]
    assert place_of(wanted, labels) == place


def test_place_of_a_number_that_is_a_heading_as_well_is_that_heading() -> None:
    assert place_of("#1", ["Sample", "#1", "x"]) == 1
    assert place_of("au", ["Au", "AU"]) is None, "two headings are meant alike"


def test_correction_takes_an_unknown_column_in_and_leaves_another_out() -> None:
    said = (
        say("Zirconia", analyte="ZrO2", unit="wt%", method="Fused bead XRF"),
        say("#5", analyte="Sn", unit="ppm", digestion="four_acid"),
        say("a=b", analyte="Zn", unit="ppb"),
        say("Cu (ppm) (2)", ignore=True),
        say("Cu (ppm)", digestion="aqua_regia"),
    )
    assert columns(read(WIDE, columns=said)) == [
        ("SiO2 (%)", "SiO2", "wt%", "unknown"),
        ("Zirconia", "ZrO2", "wt%", "xrf"),
        ("#5", "Sn", "ppm", "four_acid"),
        ("a=b", "Zn", "ppb", "unknown"),
        ("Cu (ppm)", "Cu", "ppm", "aqua_regia"),
    ]


def test_unknown_columns_are_listed_by_heading_or_number_so_that_they_can_be_taken_in() -> None:
    table = read(WIDE).results
    assert table is not None
    assert table.ignored == ("Lab ID", "Zirconia", "#5", "a=b")


def test_correction_names_the_column_of_sample_codes() -> None:
    for wanted, codes in (("Lab ID", ["L1", "L2"]), ("field id", ["F1", "F2"]), ("#1", ["L1", "L2"])):
        reading = read(WIDE, columns=(ColumnCorrection(wanted, None),))
        assert reading.results is not None and reading.results.sample_codes == codes
    reading = read("Sample,Cu (ppm),Zn (ppm)\nA,5,6\nB,7,8\n", columns=(ColumnCorrection("Cu (ppm)", None),))
    assert [one[0] for one in columns(reading)] == ["Zn (ppm)"], "a column of codes holds no results"


def test_correction_of_a_column_that_is_not_there_lists_those_that_are() -> None:
    (sentence,) = faults(read(WIDE, columns=(say("Zircona", analyte="ZrO2"),)))
    assert NO_SUCH_COLUMN in sentence and "found 'Zircona', expected one of 'Zirconia', 'Lab ID'" in sentence
    assert "'#5'" in sentence
    wide = "Sample," + ",".join(f"Cu run {number} (ppm)" for number in range(99)) + "\nA" + ",1" * 99 + "\n"
    (sentence,) = faults(read(wide, columns=(say("Zn", unit="ppm"),)))
    assert "and 60 more" in sentence


def test_correction_that_names_no_analyte_for_an_unknown_heading_is_a_problem() -> None:
    (sentence,) = faults(read(WIDE, columns=(say("Zirconia", unit="wt%"),)))
    assert "column 'Zirconia': the heading names no analyte, and none is said" in sentence


def test_correction_goes_before_the_recipe_and_keeps_what_it_leaves_open() -> None:
    recipe = Recipe(columns={"Zirconia": ColumnChoice("ZrO2", "wt%", "M1", "xrf"), "a=b": ColumnChoice(ignore=True)})
    reading = read(WIDE, recipe=recipe, columns=(say("Zirconia", unit="ppm"), say("a=b", analyte="Zn", unit="ppm")))
    assert ("Zirconia", "ZrO2", "ppm", "xrf") in columns(reading)
    assert ("a=b", "Zn", "ppm", "unknown") in columns(reading)
    other = read(WIDE, recipe=recipe, columns=(say("Zirconia", analyte="Zr", unit="ppm"),))
    assert ("Zirconia", "Zr", "ppm", "unknown") in columns(other), "of another analyte nothing of the old one stays"


NOTHING_KNOWN = "Report 7\nBag,Var1,Var2\nUnit,%,ppm\n1,60,180\n2,61,181\n"


def test_table_whose_headings_name_no_analyte_lists_them_for_the_user() -> None:
    reading = read(NOTHING_KNOWN, "results")
    (sentence,) = faults(reading)
    assert "say with --column what these columns are: 'Bag', 'Var1 %', 'Var2 ppm'" in sentence
    assert reading.results is None
    assert reading.recipe is not None and reading.recipe.shape == ("Bag", "Var1 %", "Var2 ppm")
    assert read("just a note\n\n", "results").recipe is None


def test_table_whose_headings_name_no_analyte_is_read_as_the_user_says() -> None:
    first = read(NOTHING_KNOWN, columns=(say("Var1 %", analyte="SiO2"), say("#3", analyte="Zr", digestion="fusion")))
    assert first.kind == "results", "of nothing else are columns said"
    assert columns(first) == [("Var1 %", "SiO2", "wt%", "unknown"), ("Var2 ppm", "Zr", "ppm", "fusion")]
    assert first.results is not None and first.results.sample_codes == ["1", "2"]
    assert first.recipe is not None
    again = read(NOTHING_KNOWN, recipe=Recipe.from_json(first.recipe.to_json()))
    assert columns(again) == columns(first)
    assert again.recipe is not None and first.recipe.fits(again.recipe.shape)


@pytest.mark.parametrize(
    "text", ["Bag,Var1 (%)\nA,60\n", "Bag,SiO2 (%)\nA,60\n"], ids=["no analyte", "the only one ignored"]
)
def test_table_that_cannot_be_read_still_tells_its_headings(text: str) -> None:
    reading = read(text, "results", recipe=Recipe(columns={"SiO2 (%)": ColumnChoice(ignore=True)}))
    assert reading.results is None and reading.recipe is not None and reading.recipe.shape[0] == "Bag"


def test_column_of_sample_codes_without_a_heading_is_remembered_by_its_number() -> None:
    text = "No,,Cu (ppm)\n1,A,5\n2,B,6\n"
    first = read(text, columns=(ColumnCorrection("#2", None),))
    assert first.results is not None and first.recipe is not None
    assert (first.results.sample_codes, first.recipe.sample_header) == (["A", "B"], "#2")
    again = read(text, recipe=first.recipe)
    assert again.results is not None and again.results.sample_codes == ["A", "B"]


def test_long_table_takes_in_an_unknown_analyte_and_other_sample_codes() -> None:
    plain = read(LONG)
    assert columns(plain) == [("SiO2 (%)", "SiO2", "wt%", "unknown")]
    assert plain.results is not None and plain.results.ignored == ("Zirc (ppm)",)
    assert plain.recipe is not None
    said = (say("Zirc (ppm)", analyte="Zr", digestion="fusion"), ColumnCorrection("Client Sample", None))
    reading = read(LONG, columns=said)
    assert columns(reading) == [("SiO2 (%)", "SiO2", "wt%", "unknown"), ("Zirc (ppm)", "Zr", "ppm", "fusion")]
    assert reading.results is not None and reading.results.sample_codes == ["A", "B"]
    assert reading.recipe is not None
    again = read(LONG, recipe=Recipe.from_json(reading.recipe.to_json()))
    assert columns(again) == columns(reading)
    assert again.results is not None and again.results.sample_codes == ["A", "B"]
    assert reading.results.code_headings == ("Lab No", "Client Sample", "Analyte", "Value", "Unit")
    assert reading.recipe.shape == plain.recipe.shape, "it is proposed for the next file, which says nothing of it"
    assert NO_SUCH_COLUMN in faults(read(LONG, columns=(ColumnCorrection("Bag", None),)))[0]
    assert "'Zirc (ppm)'" in faults(read(LONG, columns=(say("Zr", unit="ppm"),)))[0]


def test_turned_table_is_corrected_by_the_names_of_its_lines() -> None:
    text = "Sample,A,B\nSiO2 (%),60,61\nAl2O3 (%),14,15\nMgO (%),1,2\nBlue (ppm),180,181\n"
    reading = read(text, columns=(say("Blue (ppm)", analyte="Zr"), say("#4", ignore=True)))
    assert [one[1:3] for one in columns(reading)] == [("SiO2", "wt%"), ("Al2O3", "wt%"), ("Zr", "ppm")]


@pytest.mark.parametrize(
    ("decimal", "thousands", "cells", "values"),
    [
        (",", None, ["1,234", "0,5"], [1.234, 0.5]),
        (".", None, ["1,234", "0.5"], [1234, 0.5]),
        (None, ".", ["1.234", "2.000"], [1234, 2000]),
        (None, ",", ["1,234", "2.5"], [1234, 2.5]),
        (".", " ", ["1 234", "2.5"], [1234, 2.5]),
        (".", "'", ["1'234", "2.5"], [1234, 2.5]),
        (None, "", ["1234", "2.5"], [1234, 2.5]),
    ],
)
def test_signs_that_the_user_says_decide_how_numbers_are_read(
    decimal: str | None, thousands: str | None, cells: list[str], values: list[float]
) -> None:
    text = "Sample;Cu (ppm)\n" + "".join(f"A{number};{cell}\n" for number, cell in enumerate(cells))
    reading = read(text, decimal=decimal, thousands=thousands)
    columns(reading)
    assert reading.results is not None
    np.testing.assert_array_equal(reading.results.values[:, 0], values)
    told = [problem.what for problem in reading.warnings]
    assert thousands is None or not any("mark of thousands" in what for what in told), "it was said: no doubt is left"


@pytest.mark.parametrize(
    ("thousands", "cell"), [("", "1,234.5"), ("", "1 234"), (" ", "1,234"), (",", "1'234"), ("'", "1 234")]
)
def test_number_with_another_sign_of_thousands_than_the_user_says_is_a_problem(thousands: str, cell: str) -> None:
    reading = read(f"Sample;Cu (ppm)\nA;{cell}\nB;0.5\nC;7\nD;8\n", thousands=thousands, decimal=".")
    assert any("a text stands where a number is expected" in sentence for sentence in faults(reading))


def test_separator_that_the_user_says_goes_before_the_guess() -> None:
    text = "Sample;SiO2 (%);Cu (ppm)\nA;60;5\n"
    assert len(columns(read(text, separator=";"))) == 2
    assert read(text, separator="\t").results is None


def test_reading_remembers_everything_that_was_said_of_it() -> None:
    text = "Sample;Cu;Blue;Notes;Zn (ppm);Sn (ppm)\nA;-0,5;1.234,5;x;3;\nB;7,25;8;y;4;\n"
    first = read(
        text, decimal=",", thousands=".", separator=";", unit="ppm", digestion="four_acid", negative_means_below=True,
        columns=(say("Blue", analyte="Ni"), say("Zn (ppm)", ignore=True), say("Sn (ppm)", digestion="fusion")),
    )  # fmt: skip
    assert first.recipe is not None and first.results is not None
    saved = Recipe.from_json(first.recipe.to_json())
    assert saved == first.recipe
    again = read(text, recipe=saved)
    assert columns(again) == columns(first) == [("Cu", "Cu", "ppm", "four_acid"), ("Blue", "Ni", "ppm", "four_acid")]
    assert again.results is not None
    np.testing.assert_array_equal(again.results.values, [[0.5, 1234.5], [7.25, 8]])
    assert again.results.qualifiers.tolist() == [[1, 0], [0, 0]]
    assert again.recipe == saved
    filled = read(text.replace("4;", "4;9"), recipe=saved)
    assert columns(filled)[-1] == ("Sn (ppm)", "Sn", "ppm", "fusion"), "a column that was empty is remembered as well"


def test_decimal_sign_that_the_numbers_do_not_settle_is_not_remembered() -> None:
    unsure = read("Sample;Cu (ppm)\nA;1,234\nB;2,500\n")
    assert any("cannot be told" in problem.what for problem in unsure.warnings)
    assert unsure.recipe is not None and unsure.recipe.decimal is None
    sure = read("Sample;Cu (ppm)\nA;1,25\nB;2,5\n")
    assert sure.recipe is not None and sure.recipe.decimal == ","


def test_recipe_of_the_first_release_is_still_read() -> None:
    """The text is one that the release before wrote: seven names, none of those that came later."""
    text = (
        '{"columns": {"Cu (ppm)": {"analyte": "Cu", "digestion": "fusion", "ignore": false, "method": null, '
        '"unit": "ppm"}}, "decimal": ".", "name": "old", "sample_header": "Sample", "separator": null, '
        '"shape": ["Sample", "Cu (ppm)"], "unit": null}'
    )
    recipe = Recipe.from_json(text)
    later = {"digestion", "thousands", "negative_means_below"}
    assert {field.name for field in dataclasses.fields(Recipe)} >= later
    assert (recipe.digestion, recipe.thousands, recipe.negative_means_below) == (None, None, False)
    reading = read("Sample,Cu (ppm)\nA,5\n", recipe=recipe)
    assert columns(reading) == [("Cu (ppm)", "Cu", "ppm", "fusion")]
    assert reading.recipe is not None and recipe.fits(reading.recipe.shape)


def test_digestion_that_the_user_states_goes_before_that_of_the_title_lines() -> None:
    """As a unit that is stated does; a column that tells its own keeps it, a saved reading gives way to the file."""
    text = b"Method: four-acid digestion\n\nSample,Zr ppm,Y ppm by aqua regia\nA,100,20\n"

    def told(**options: Any) -> list[tuple[str | None, str]]:
        table = read_file("a.csv", text, "results", ReadingOptions(**options)).results
        assert table is not None
        return [(column.method, column.digestion) for column in table.columns]

    own = ("by aqua regia", "aqua_regia")
    assert told() == [("four-acid digestion", "four_acid"), own]
    assert told(digestion="fusion") == [(None, "fusion"), own]
    assert told(recipe=Recipe(digestion="fusion")) == [("four-acid digestion", "four_acid"), own]
    said = read_file("a.csv", text, "results", ReadingOptions(digestion="fusion")).understood
    assert any("state the method four-acid digestion; fusion, as was said, goes before it" in line for line in said)


def test_column_is_found_by_a_word_that_no_other_heading_holds() -> None:
    labels = ["Sample", "ABC-12 Cu ppm", "ABC-12 Co ppm", "Zr (ppm)", "Zr fusion"]
    assert [place_of(word, labels) for word in ("Cu", "Co", "Zr", "ABC-12", "CO", "fusion")] == [
        1,
        2,
        None,
        None,
        None,
        4,
    ]
