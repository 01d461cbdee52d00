"""The filter of the samples list: from URL arguments and back, and the SQL that nothing typed gets into."""

from __future__ import annotations

from collections.abc import Sequence

import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.store.reading.columns import Column, Columns
from registry.store.reading.filters import DEFAULT_COLUMNS, VERDICTS, Filter, number_text, parse_filter, sort_column
from registry.store.reading.samples import BadPlace, Place, _found_sql, read_place

TARGETS = ("porphyry_copper", "tin")
COLUMNS = Columns(
    {
        "sio2_wt": Column("sio2_wt", "SiO2", "composition_sheet", "wt%", "silica", "composition", "sio2_wt", True),
        "sr_y": Column("sr_y", "Sr/Y", "index_sheet", "1", "ratio", "derived", "sr_y", True),
        "lithology": Column(
            "lithology", "lithology", "sample_sheet", "text", "as logged", "sample", "lithology", False
        ),
    }
)


def parse(arguments: dict[str, Sequence[str]]) -> Filter:
    return parse_filter(arguments, COLUMNS, TARGETS)


def regrouped(pairs: list[tuple[str, str]]) -> dict[str, list[str]]:
    found: dict[str, list[str]] = {}
    for name, value in pairs:
        found.setdefault(name, []).append(value)
    return found


names = st.text(st.characters(exclude_characters="\x00", exclude_categories=("Cs",)), min_size=1, max_size=20).map(
    lambda typed: typed.strip() or "x"
)
limits = st.floats(allow_nan=False, allow_infinity=False)


@given(
    text=names,
    area=st.lists(names, unique=True, max_size=3),
    kind=st.lists(st.sampled_from(("core", "outcrop", "blank")), unique=True),
    verdict=st.lists(st.sampled_from(VERDICTS), unique=True),
    target=st.sampled_from((None, *TARGETS)),
    ends=st.tuples(limits, limits),
    order=st.sampled_from(("", "sio2_wt", "-sr_y", "-sample_code", "lithology")),
)
def test_filter_written_to_an_address_and_read_again_is_the_same(
    text: str,
    area: list[str],
    kind: list[str],
    verdict: list[str],
    target: str | None,
    ends: tuple[float, float],
    order: str,
) -> None:
    low, high = sorted(ends)
    asked = parse(
        {
            "text": [text], "area": area, "kind": kind, "verdict": verdict, "target": [target or ""], "sort": [order],
            "sr_y_min": [repr(low)], "sr_y_max": [repr(high)], "columns": ["sr_y,lithology"],
        }
    )  # fmt: skip
    assert asked.problems == {}
    assert parse(regrouped(asked.arguments())) == asked


def test_filter_without_arguments_shows_everything_by_code() -> None:
    asked = parse({})
    assert (asked.sort, asked.descending, asked.columns) == ("sample_code", False, DEFAULT_COLUMNS)
    assert not asked.narrows
    assert asked.arguments() == []


def test_filter_target_alone_narrows_nothing() -> None:
    assert not parse({"target": ["tin"]}).narrows
    assert parse({"target": ["tin"], "verdict": ["possible"]}).narrows


@pytest.mark.parametrize(
    ("arguments", "name", "sentence"),
    [
        ({"sr_y_min": ["x"]}, "sr_y_min", "not a number"),
        ({"sr_y_max": ["-inf"]}, "sr_y_max", "no limit"),
        ({"nosuch_max": ["1"]}, "nosuch_max", "no column “nosuch”"),
        ({"sr_max": ["1"]}, "sr_max", "near it are sr_y"),
        ({"lithology_min": ["1"]}, "lithology_min", "holds words"),
        ({"sr_y_min": ["3", "4"]}, "sr_y_min", "given 2 times"),
        ({"sort": ["nosuch"]}, "sort", "no column “nosuch”"),
        ({"descending": ["yes"]}, "descending", "give 0 for lowest first"),
        ({"columns": [",".join(["sr_y", "nosuch"])]}, "columns", "no column “nosuch”"),
        ({"page": ["2"]}, "page", "no condition called “page”"),
    ],
)
def test_filter_fault_is_told_under_its_argument(arguments: dict[str, list[str]], name: str, sentence: str) -> None:
    problems = parse(arguments).problems
    assert list(problems) == [name]
    assert sentence in problems[name]


def test_filter_minus_sign_of_print_is_understood() -> None:
    assert parse({"sr_y_min": ["\N{MINUS SIGN}2.5"]}).ranges[0].low == -2.5


@given(typed=names, column=names)
def test_filter_sql_holds_no_word_that_was_typed(typed: str, column: str) -> None:
    """Values are bound; a column name that is not offered never gets through."""
    marked = f"zqx{typed}"
    asked = parse(
        {
            "text": [marked], "area": [marked], "site": [marked], "intrusion": [marked], "sort": [column],
            f"{column}_min": ["1"], "sr_y_min": ["2"],
        }
    )  # fmt: skip
    bound: dict[str, object] = {}
    sql = _found_sql(asked, sort_column(asked, COLUMNS), "LIKE", bound)
    assert "zqx" not in sql
    assert f'"{column}"' not in sql or column in COLUMNS
    assert bound["area_0"] == marked.strip()


@given(
    value=st.one_of(st.none(), st.text(max_size=20), limits), sample_id=st.integers(0, 2**50), backwards=st.booleans()
)
def test_place_written_and_read_is_the_same(value: str | float | None, sample_id: int, backwards: bool) -> None:
    place = Place(value, sample_id, backwards)
    assert read_place(place.token(), backwards=backwards) == place


@pytest.mark.parametrize(
    "token", ["", "!", "e30", "W10", "WzFd", "WzEsWzJdXQ", "WzEsMS41XQ", "WzEsdHJ1ZV0", "/w", "ééé"]
)
def test_place_that_no_page_wrote_is_refused(token: str) -> None:
    with pytest.raises(BadPlace, match="names no place in this list"):
        read_place(token, backwards=False)


@pytest.mark.parametrize(("value", "typed"), [(20.0, "20"), (0.35, "0.35"), (-3.0, "-3"), (1e300, "1e+300")])
def test_number_text_is_what_a_person_types(value: float, typed: str) -> None:
    assert number_text(value) == typed
