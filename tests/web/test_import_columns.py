"""Columns corrected on the import page: unknown ones made results, signs said, all saved. All data are invented."""

from __future__ import annotations

import json
import sqlite3
from typing import Any

import pytest

from registry import reading_recipes
from tests.web.import_site import Site

TEXT = "Sample;SiO2 (%);Zirconia;Blue (ppm);;Note\nKD-1;61,5;0,02;1.234;7;a\nKD-2;60,5;0,03;-5;8;b\n"


def press(site: Site, address: str, button: str, columns: dict[str, dict[str, str]], **changes: str) -> Any:
    """Press a button after the fields of some columns were filled in."""
    form = site.form(address)
    headers = form.getlist("header-0")
    for header, fields in columns.items():
        for field, value in fields.items():
            if field == "ignore":
                which = form.getlist("which-0")[headers.index(header)]
                form.setlist(f"ignore-0-{which}", ["on"])
                continue
            values = form.getlist(f"{field}-0")
            values[headers.index(header)] = value
            form.setlist(f"{field}-0", values)
    for name, value in changes.items():
        form.setlist(name.replace("__", "-"), [value])
    form.setlist("do", [button])
    answer = site.client.post(address, data=form)
    site.settled(address)
    return answer


UNKNOWN = {
    "Zirconia": {"analyte": "ZrO2", "unit_of": "wt%", "method": "Fused bead XRF"},
    "Blue (ppm)": {"analyte": "Zn", "digestion": "aqua_regia"},
    "#5": {"analyte": "Cu", "unit_of": "ppm", "digestion": "four_acid"},
}


def stored(site: Site, batch: str) -> list[tuple[Any, ...]]:
    connection = sqlite3.connect(site.path)
    query = (
        "SELECT header, analyte, unit, digestion FROM batch_column JOIN batch USING (batch_id) WHERE code = ? "
        "ORDER BY position"
    )
    found = connection.execute(query, (batch,)).fetchall()
    connection.close()
    return found


def test_import_page_unknown_columns_are_made_results_saved_and_proposed(site: Site) -> None:
    address = site.send(("one.csv", TEXT.replace("-5", "5")))
    page = site.client.get(address).text
    assert "4 columns not read as results" in page and "column 5, without heading" in page
    form = site.form(address)
    assert form.getlist("header-0") == ["SiO2 (%)", "Zirconia", "Blue (ppm)", "#5", "Note"]
    assert form.getlist("unit_of-0") == ["wt%", "", "ppm", "", ""], "a unit in the heading is filled in"
    assert len(set(form.getlist("which-0"))) == 5

    press(site, address, "read", UNKNOWN, decimal__0=",", thousands__0="point")
    page = site.client.get(address).text
    assert "1 column not read as results" in page and "nothing is stored yet" in page
    draft = site.jobs.find(address.rsplit("/", 1)[-1])
    columns = {column["header"]: column for column in draft.files[0].looked[0]["columns"]}
    assert columns["Zirconia"]["digestion"] == "xrf", "the digestion is read from the method that was said"
    assert columns["Blue (ppm)"]["analyte"] == "Zn"

    answer = press(site, address, "save:0", {}, name__0="odd headings")
    assert "is saved" in answer.text
    recipe = reading_recipes.find_recipe(site.jobs.registry, "odd headings")
    assert (recipe.decimal, recipe.thousands) == (",", ".")
    assert set(recipe.columns) == {"SiO2 (%)", "Zirconia", "Blue (ppm)", "#5"}
    site.press(address, "store")
    assert stored(site, "one") == [
        ("SiO2 (%)", "SiO2", "wt%", "unknown"),
        ("Zirconia", "ZrO2", "wt%", "xrf"),
        ("Blue (ppm)", "Zn", "ppm", "aqua_regia"),
        ("#5", "Cu", "ppm", "four_acid"),
    ]

    later = site.send(("two.csv", TEXT.replace("-5", "6")))
    assert "made for files with exactly these headings" in site.client.get(later).text
    site.press(later, "use:0")
    site.press(later, "store")
    assert [row[1] for row in stored(site, "two")] == ["SiO2", "ZrO2", "Zn", "Cu"]


def test_import_page_column_made_a_result_is_given_up_again(site: Site) -> None:
    address = site.send(("one.csv", TEXT.replace("-5", "5")))
    press(site, address, "read", {"Zirconia": {"analyte": "ZrO2", "unit_of": "wt%"}})
    assert "3 columns not read as results" in site.client.get(address).text
    press(site, address, "read", {"Zirconia": {"analyte": ""}})
    page = site.client.get(address).text
    assert "4 columns not read as results" in page and "nothing is stored yet" in page


def test_import_page_unknown_analyte_is_a_problem_and_the_column_can_be_corrected(site: Site) -> None:
    address = site.send(("one.csv", TEXT.replace("-5", "5")))
    press(site, address, "read", {"Zirconia": {"analyte": "Zyx", "unit_of": "wt%"}})
    assert "names an unknown analyte" in site.client.get(address).text
    assert "Zyx" in site.form(address).getlist("analyte-0")
    press(site, address, "read", {"Zirconia": {"analyte": "ZrO2"}})
    assert "nothing is stored yet" in site.client.get(address).text


def test_import_page_saved_reading_sets_negative_and_unit_and_is_left_by_plain(site: Site) -> None:
    text = "Sample,Cu,Zn (ppm)\nKD-1,-5,7\n"
    address = site.send(("one.csv", text))
    assert "negative" in site.client.get(address).text
    form = site.form(address)
    form.setlist("negative-0", ["on"])
    form.setlist("unit-0", ["ppb"])
    form.setlist("unit_of-0", ["", "ppm"])
    form.setlist("name-0", ["below"])
    form.setlist("do", ["save:0"])
    assert "is saved" in site.client.post(address, data=form).text
    recipe = reading_recipes.find_recipe(site.jobs.registry, "below")
    assert recipe.negative_means_below and recipe.unit == "ppb"

    later = site.send(("two.csv", text.replace("7", "8")))
    site.press(later, "use:0")
    form = site.form(later)
    assert form.get("negative-0") == "on" and form.get("unit-0") == "ppb"
    assert "nothing is stored yet" in site.client.get(later).text
    form.poplist("negative-0")
    form.setlist("do", ["read"])
    site.client.post(later, data=form)
    site.settled(later)
    assert "is negative" in site.client.get(later).text, "the box goes before the saved reading"
    site.press(later, "plain:0")
    assert site.form(later).get("unit-0") == ""


def test_import_page_reading_saved_by_the_release_before_is_still_used(site: Site) -> None:
    """The recipe text is one of the first release: it knows nothing of thousands, digestion or negatives."""
    text = "Sample,Cu,Zn (ppm)\nKD-1,5,7\n"
    old = {
        "columns": {"Cu": {"analyte": "Cu", "digestion": "fusion", "ignore": False, "method": None, "unit": "ppm"}},
        "decimal": None, "name": "old", "sample_header": "Sample", "separator": None,
        "shape": ["Sample", "Cu", "Zn (ppm)"], "unit": None,
    }  # fmt: skip
    connection = sqlite3.connect(site.path)
    connection.execute(
        "INSERT INTO reading_recipe (name, kind, shape, recipe, created_at) VALUES ('old', 'results', ?, ?, ?)",
        (json.dumps(old["shape"]), json.dumps(old), "2026-01-01T00:00:00Z"),
    )
    connection.commit()
    connection.close()
    address = site.send(("one.csv", text))
    site.press(address, "use:0")
    assert "Read with “old”" in site.client.get(address).text
    site.press(address, "store")
    assert stored(site, "one")[0] == ("Cu", "Cu", "ppm", "fusion")


def test_import_page_unknown_analyte_of_a_long_table_is_taken_in(site: Site) -> None:
    text = "Sample,Analyte,Value,Unit\nKD-1,SiO2,60,%\nKD-1,Zirc,180,ppm\n"
    address = site.send(("long.csv", text))
    assert site.form(address).getlist("header-0") == ["SiO2 (%)", "Zirc (ppm)"]
    press(site, address, "save:0", {"Zirc (ppm)": {"analyte": "Zr", "digestion": "fusion"}}, name__0="long")
    site.press(address, "store")
    assert [row[1:] for row in stored(site, "long")] == [("SiO2", "wt%", "unknown"), ("Zr", "ppm", "fusion")]
    later = site.send(("more.csv", text.replace("180", "181")))
    assert "made for files with exactly these headings" in site.client.get(later).text
    choice = site.form(later)
    assert choice.get("sample_header-0") == "Sample"


def test_import_page_codes_of_a_long_table_are_taken_from_another_column(site: Site) -> None:
    text = "Lab No,Client Sample,Analyte,Value,Unit\nKD-1,KD-2,SiO2,60,%\n"
    address = site.send(("long.csv", text))
    taken = site.form(address).get("sample_header-0")
    other = {"Lab No": "Client Sample", "Client Sample": "Lab No"}[taken or ""]
    site.press(address, "read", sample_header__0=other)
    assert site.form(address).get("sample_header-0") == other
    assert "nothing is stored yet" in site.client.get(address).text


def test_import_page_table_whose_headings_name_nothing_is_read_as_the_user_says(site: Site) -> None:
    text = "Bag,Var1,Var2\nKD-1,60,180\nKD-2,61,181\n"
    address = site.send(("odd.csv", text))
    assert "The kind of file cannot be told" in site.client.get(address).text
    site.press(address, "read", kind__0="results")
    page = site.client.get(address).text
    assert "say in the columns below what these columns are" in page and "as understood" in page
    assert site.form(address).getlist("header-0") == ["Bag", "Var1", "Var2"]
    said = {"Var1": {"analyte": "SiO2", "unit_of": "wt%"}, "Var2": {"analyte": "Zr", "unit_of": "ppm"}}
    press(site, address, "read", said)
    page = site.client.get(address).text
    assert "2 rows of results in 2 columns" in page and "nothing is stored yet" in page
    press(site, address, "save:0", {}, name__0="nothing named")
    later = site.send(("more.csv", text.replace("180", "182")), kind="results")
    assert "made for files with exactly these headings" in site.client.get(later).text
    site.press(later, "use:0")
    site.press(later, "store")
    assert [row[1] for row in stored(site, "more")] == ["SiO2", "Zr"]


@pytest.mark.parametrize("field", ["kind", "separator", "decimal", "thousands", "unit", "dips", "sheet"])
def test_import_form_with_a_choice_that_is_not_offered_is_no_fault_of_the_program(site: Site, field: str) -> None:
    address = site.send(("r.csv", "Sample,Zr fusion (ppm)\nKD-1,150\n"))
    site.press(address, "read", **{f"{field}__0": "no such choice"})
    (draft,) = site.jobs.all()
    assert draft.state in ("read", "refused"), draft.sentence
