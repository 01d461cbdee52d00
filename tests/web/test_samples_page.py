"""The list of samples: its sentence, its conditions, its pages and its CSV. The registry is invented (conftest)."""

from __future__ import annotations

import csv
import io
import re
from html import unescape

import pytest
from flask.testing import FlaskClient

HOSTILE = '<script>alert("x")</script>&amp;'


def codes(page: str) -> list[str]:
    """Codes of the rows, in order."""
    return [unescape(code) for code in re.findall(r'<th scope="row"><a href="[^"]+">([^<]+)</a>', page)]


def total(page: str) -> str:
    found = re.search(r'<span class="count">([^<]+)</span>', page)
    assert found is not None
    return found.group(1)


def get(client: FlaskClient, address: str, status: int = 200) -> str:
    answer = client.get(address)
    assert answer.status_code == status, answer.text[:400]
    return answer.text


def link(page: str, rel: str) -> str | None:
    found = re.search(rf'<a rel="{rel}" href="([^"]+)"', page)
    return unescape(found.group(1)) if found else None


def every_page(client: FlaskClient, address: str) -> list[str]:
    found: list[str] = []
    step: str | None = address
    while step:
        page = get(client, step)
        found += codes(page)
        step = link(page, "next")
    return found


def test_samples_page_without_conditions_lists_every_sample(client: FlaskClient) -> None:
    page = get(client, "/samples")
    assert total(page) == "122"
    assert "PB-001" in codes(page)


def test_samples_text_lists_what_matches_and_nothing_else(client: FlaskClient) -> None:
    assert codes(get(client, "/samples?text=PB-007")) == ["PB-007"]
    assert every_page(client, "/samples?text=pb-00") == [f"PB-00{n}" for n in range(1, 10)]
    assert codes(get(client, "/samples?text=50%25_x")) == ["no results/1"]
    assert "PB-" not in get(client, "/samples?text=nothing-like-it")


def test_samples_condition_by_place_and_kind_keeps_only_those(client: FlaskClient) -> None:
    assert total(get(client, "/samples?site=DH-1")) == "84"
    assert total(get(client, "/samples?area=North+Block")) == "84"
    assert total(get(client, "/samples?intrusion=Brock+gabbro&kind=outcrop")) == "10"
    assert total(get(client, "/samples?kind=blank&kind=float")) == "7"


def test_samples_condition_by_range_includes_both_ends(client: FlaskClient) -> None:
    page = get(client, "/samples?from_m_min=11&from_m_max=13")
    assert codes(page) == ["PB-002", "PB-003", "PB-004"]
    assert "from 11 to 13" in page


def test_samples_condition_by_target_and_verdict_shows_verdict_and_score(client: FlaskClient) -> None:
    page = get(client, "/samples?target=porphyry_copper&verdict=favourable&sort=-score")
    assert total(page) == "20"
    assert 'class="verdict verdict-favourable"' in page
    scores = [int(number) for number in re.findall(r'data-label="score, of 100" class="number">(\d+)', page)]
    assert scores == sorted(scores, reverse=True) and 80 <= scores[-1] <= scores[0] <= 100
    assert "porphyry copper favourable" in page


def test_samples_controls_get_no_rock_name(client: FlaskClient) -> None:
    """The invented blanks are quartz sand; their analyses would fall into a field of plutonic rocks."""
    page = get(client, "/samples?kind=blank&columns=site_code,tas_plutonic,sio2_wt")
    assert 'class="number">' in page
    assert re.findall(r'data-label="(?:TAS|tas)[^"]*"[^>]*>([^<]+)<', page) == []
    page = get(client, "/samples?kind=core&columns=site_code,tas_plutonic,sio2_wt")
    assert re.findall(r'data-label="(?:TAS|tas)[^"]*"[^>]*>([^<]+)<', page) != []


def test_samples_sentence_says_every_condition(client: FlaskClient) -> None:
    page = get(client, "/samples?kind=core&kind=outcrop&area=North+Block&sr_y_min=20&sort=-sr_y&text=granodiorite")
    words = re.findall(r"<summary>([^<]+)</summary>", page)
    for expected in (
        "core and outcrop",
        "North Block",
        "with “granodiorite”",
        "Sr/Y at least 20",
        "Sr/Y, highest first",
    ):
        assert expected in [unescape(part) for part in words]


@pytest.mark.parametrize("sort", ["sr_y", "-sr_y", "from_m", "-from_m", "lithology", "-tas_plutonic", "-sample_code"])
def test_samples_paging_in_any_order_gives_each_row_once_and_blanks_last(client: FlaskClient, sort: str) -> None:
    address = f"/samples?sort={sort}"
    found = every_page(client, address)
    assert len(found) == len(set(found)) == 122
    rows = csv.DictReader(io.StringIO(client.get(address.replace("/samples", "/samples.csv")).text))
    column = sort.lstrip("-")
    values = [row[column] for row in rows]
    present = [value for value in values if value != ""]
    assert values[: len(present)] == present
    assert present == sorted(present, key=float if column in ("sr_y", "from_m") else str, reverse=sort.startswith("-"))


def test_samples_paging_back_leads_to_the_same_rows(client: FlaskClient) -> None:
    first = get(client, "/samples?sort=-from_m")
    second = get(client, link(first, "next") or "")
    third = get(client, link(second, "next") or "")
    assert link(third, "next") is None
    assert len(codes(third)) == 22
    back = get(client, link(third, "prev") or "")
    assert codes(back) == codes(second)
    again = get(client, link(back, "prev") or "")
    assert codes(again) == codes(first)
    assert link(again, "prev") is None


def test_samples_page_beyond_the_last_says_so(client: FlaskClient) -> None:
    last = get(client, "/samples?text=PB-00")
    assert link(last, "next") is None
    token = "WyJ-fn4iLDk5OTk5XQ"  # ["~~~", 99999]: after every code
    page = get(client, f"/samples?after={token}")
    assert "no rows beyond this place" in page


def test_samples_numbers_stand_on_their_points(client: FlaskClient) -> None:
    page = get(client, "/samples?text=PB-00&columns=mgo_wt")
    cells = re.findall(r'<td data-label="MgO, wt%" class="number">([^<]+)</td>', page)
    assert len(cells) == 9
    assert (
        len({len(cell) - (cell.index(".") if "." in cell else len(cell.rstrip("\u2007\u2008"))) for cell in cells}) == 1
    )


@pytest.mark.parametrize(
    ("query", "sentence"),
    [
        ("sio2_wt_min=abc", "“abc” is not a number; write it like 20 or 0.35."),
        ("sio2_wt_min=50,5", "write 50.5 with a point"),
        ("sio2_wt_min=nan", "“nan” is no limit"),
        ("sio2_wt_min=1e999", "is no limit"),
        ("sio2_wt_min=60&sio2_wt_max=50", "The lower limit 60 is above the upper limit 50"),
        ("magic_min=3", "There is no column “magic”"),
        ("lithology_min=3", "“lithology” holds words"),
        ("kind=cor", "“cor” is no kind of sample"),
        ("verdict=good", "“good” is no verdict"),
        ("target=gold", "“gold” is no target"),
        ("target=tin&target=tungsten", "One target at a time"),
        ("area=Nowhere", "The registry holds no area “Nowhere”."),
        ("site=DH-99", "The registry holds no site “DH-99”."),
        ("sort=-magic", "There is no column “magic”"),
        ("sort=score", "An order by score needs a target"),
        ("columns=sio2_wt,magic", "There is no column “magic”"),
        ("add_column=sr_y", "Give a lower limit, an upper limit or both."),
        ("add_min=3", "Choose the column that these limits belong to."),
        ("after=!!", "The address names no place in this list"),
        ("after=W10", "The address names no place in this list"),
        ("lithologie=granite", "There is no condition called “lithologie”"),
        ("text=a&text=b", "“text” was given 2 times"),
        ("text=" + "x" * 300, "search for at most 200"),
        ("text=a%00b", "a character that no code or name can hold"),
        ("site=a%00b", "a character that no code or name can hold"),
    ],
)
def test_samples_bad_condition_gets_a_sentence_and_status_400(client: FlaskClient, query: str, sentence: str) -> None:
    page = unescape(get(client, f"/samples?{query}", 400))
    assert sentence in page
    assert codes(page) == []
    answer = client.get(f"/samples.csv?{query}")
    if "after=" not in query and "add_" not in query:
        assert answer.status_code == 400
        assert sentence in answer.text


def test_samples_bad_number_is_told_under_its_field(client: FlaskClient) -> None:
    page = get(client, "/samples?sr_y_min=abc", 400)
    assert re.search(r'name="sr_y_min" value="abc" aria-invalid="true" aria-describedby="fault-sr_y_min"', page)
    assert 'id="fault-sr_y_min"' in page


def test_samples_form_address_is_settled_to_a_short_one(client: FlaskClient) -> None:
    query = "text=&target=&area=North+Block&add_column=sr_y&add_min=20&add_max=&sort=sr_y&descending=1"
    answer = client.get(f"/samples?{query}&columns=sr_y&columns=q_wt")
    assert answer.status_code == 302
    expected = "/samples?area=North+Block&sr_y_min=20&sort=-sr_y&columns=sr_y,q_wt"
    assert answer.headers["Location"].replace("%2C", ",").replace("%20", "+") == expected
    assert client.get(answer.headers["Location"]).status_code == 200


def test_samples_hostile_name_comes_out_escaped(client: FlaskClient) -> None:
    page = get(client, "/samples?kind=float")
    assert "<script>alert" not in page
    assert codes(page) == [HOSTILE]
    assert "&#39;; DROP TABLE sample; --" in page


def test_samples_without_any_says_what_to_do(empty_client: FlaskClient) -> None:
    assert "The registry holds no samples yet" in get(empty_client, "/samples")
    assert "No sample meets all of these conditions" in get(empty_client, "/samples?text=x")


def test_samples_csv_holds_the_whole_filtered_set_with_contract_names(client: FlaskClient) -> None:
    answer = client.get("/samples.csv?kind=core&columns=sr_y,intrusion,best_verdict&target=tin&sort=-sr_y")
    assert answer.mimetype == "text/csv"
    rows = list(csv.DictReader(io.StringIO(answer.text)))
    assert len(rows) == 84
    assert list(rows[0]) == [
        "sample_code", "verdict", "score_min", "score_max", "sr_y", "intrusion", "best_verdict", "is_stale",
    ]  # fmt: skip
    assert rows[0]["best_verdict"] in ("favourable", "possible", "undecided", "unfavourable")
    ratios = [float(row["sr_y"]) for row in rows if row["sr_y"]]
    assert ratios == sorted(ratios, reverse=True)
    assert {row["is_stale"] for row in rows} == {"0"}


def test_samples_csv_text_that_looks_like_a_formula_is_held_back(client: FlaskClient) -> None:
    from registry.exporting import without_formula

    assert [without_formula(cell) for cell in ("=1+1", "@x", "granite", -3.5, None)] == [
        "'=1+1",
        "'@x",
        "granite",
        -3.5,
        None,
    ]
    assert client.get("/samples.csv?text=zzz").text.count("\n") == 1
