"""README.md holds the table of quantities that the catalogue gives: nothing is missing, nothing is out of date."""

from __future__ import annotations

from pathlib import Path

import pytest

from registry.cli import main
from registry.methods_table import BEGIN, END, NO_VIEW, methods_table, short_citation, view_of
from registry.petrology.catalogue import METHOD_BY_KEY, QUANTITIES
from registry.store.sheets import ON_THE_WAY_COLUMNS

README = (Path(__file__).resolve().parents[2] / "README.md").read_text(encoding="utf-8")


def test_readme_table_is_what_the_catalogue_gives() -> None:
    assert README.count(BEGIN) == README.count(END) == 1
    found = README.split(BEGIN)[1].split(END)[0].strip()

    assert found == methods_table(), "renew it with: plutonbook methods --markdown"


def test_methods_table_names_every_quantity_once() -> None:
    words = methods_table().replace("|", " ").split()
    for quantity in QUANTITIES:
        assert words.count(f"`{quantity.name}`") == 1, quantity.name


def test_methods_table_says_of_what_is_in_no_view_that_it_is_on_the_way() -> None:
    assert {quantity.name for quantity in QUANTITIES if view_of(quantity.name) == NO_VIEW} == set(ON_THE_WAY_COLUMNS)
    assert view_of("feot_wt") == "composition_sheet" and view_of("theta_centre") == "intrusion_sheet"
    assert "| `zircon_m` | on the way, in no view | 1 |" in methods_table()


def test_methods_markdown_prints_the_table(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit, match=r"^0$"):
        main(["methods", "--markdown"])

    assert capsys.readouterr().out == methods_table() + "\n"


def test_short_citation_gives_authors_and_year_or_the_opening_words() -> None:
    assert short_citation(METHOD_BY_KEY["liquidus_beattie"].source) == "Beattie, P. 1993"
    assert short_citation("convention") == "Convention of this register"
