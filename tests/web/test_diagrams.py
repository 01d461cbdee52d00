"""The page of diagrams: points, filter, what is left out, sources, faults. The registry is invented (conftest)."""

from __future__ import annotations

import csv
import io
import re
from html import unescape
from urllib.parse import quote, urlencode

import pytest
from flask.testing import FlaskClient

from registry.diagrams import DIAGRAMS, PANELS
from registry.petrology.field_lines import DIAGRAMS as FIELD_LINES
from registry.petrology.references import REFERENCES
from registry.store.engine import Registry
from registry.store.reading.drawn_samples import Group
from web import diagrams as page_module
from web.diagram_drawing import legend_of
from web.security import CONTENT_SECURITY_POLICY
from web.wording import formula

HOSTILE = '<script>alert("x")</script>&amp;'
LINK = re.compile(r'<a href="/samples/([^"]+)" tabindex="-1"><title>([^<]*)</title><use href="#s-([^"]+)" x="([\d.]+)%" y="([\d.]+)%"/>(.*?)</a>')  # fmt: skip  # noqa: E501


def get(client: FlaskClient, address: str, status: int = 200) -> str:
    answer = client.get(address)
    assert answer.status_code == status, answer.text[:400]
    return answer.text


def points(page: str) -> dict[str, tuple[float, float]]:
    """Place of every point in per cent from the left and from the top, by code."""
    return {unescape(code): (float(x), float(y)) for code, _, _, x, y, _ in LINK.findall(page)}


def numbers(client: FlaskClient, columns: str, **filter_: str) -> dict[str, list[float | None]]:
    """What the CSV of the same samples holds."""
    query = urlencode({**filter_, "columns": columns}, safe=",")
    rows = csv.DictReader(io.StringIO(client.get(f"/samples.csv?{query}").text))
    names = columns.split(",")
    return {row["sample_code"]: [float(row[name]) if row[name] else None for name in names] for row in rows}


def test_points_of_tas_stand_where_the_numbers_of_the_views_say(client: FlaskClient) -> None:
    found = points(get(client, "/diagrams?diagram=tas"))
    expected = numbers(client, "sio2_vf_wt,na2o_vf_wt,k2o_vf_wt")
    assert len(found) == 114  # 120 analysed samples without the 6 blanks
    for code, (left, top) in found.items():
        silica, soda, potash = expected[code]
        assert silica is not None and soda is not None and potash is not None
        assert left == pytest.approx(100 * (silica - 37) / 43, abs=0.001)
        assert top == pytest.approx(100 * (1 - (soda + potash) / 16), abs=0.001)


def test_points_of_afm_stand_in_the_triangle(client: FlaskClient) -> None:
    found = points(get(client, "/diagrams?diagram=afm&kind=core"))
    expected = numbers(client, "na2o_wt,k2o_wt,feot_wt,mgo_wt", kind="core")
    assert len(found) == len(expected) == 84
    for code, (left, top) in found.items():
        soda, potash, iron, magnesia = (value or 0.0 for value in expected[code])
        total = soda + potash + iron + magnesia
        assert left == pytest.approx(100 * (magnesia + iron / 2) / total, abs=0.001)
        assert top == pytest.approx(100 * (1 - iron / total), abs=0.001)


@pytest.mark.parametrize("key", [*DIAGRAMS, *PANELS])
def test_every_diagram_answers_under_the_strict_policy_without_inline_style(client: FlaskClient, key: str) -> None:
    answer = client.get(f"/diagrams?diagram={key}")
    assert answer.status_code == 200
    assert answer.headers["Content-Security-Policy"] == CONTENT_SECURITY_POLICY
    assert " style=" not in answer.text and "<style" not in answer.text
    assert "NaN" not in answer.text and ">nan" not in answer.text


@pytest.mark.parametrize("key", list(DIAGRAMS))
def test_field_lines_drawn_are_those_of_the_tables_and_their_sources_stand_below(client: FlaskClient, key: str) -> None:
    page = get(client, f"/diagrams?diagram={key}")
    diagram = DIAGRAMS[key]
    drawn = re.findall(r'class="field-line[^"]*" d="M([^"]*)"', page)
    lines = [line for layer in diagram.layers for line in layer.lines]
    assert [path.count(",") for path in drawn] == [len(line) for line in lines]
    for layer in diagram.layers:
        assert formula(layer.source).replace("&", "&amp;") in page
    if key in FIELD_LINES:
        assert formula(REFERENCES[FIELD_LINES[key].source]) in page


def test_field_line_of_tas_has_its_corner_where_the_source_puts_it(client: FlaskClient) -> None:
    """SiO2 69, alkalis 8 is a corner of Le Bas et al. 1986 (from memory): 744.2 and 500.0 of 1000 in the frame."""
    page = get(client, "/diagrams?diagram=tas_volcanic")
    assert "744.2,500.0" in page


def test_filter_of_the_samples_page_holds_for_the_diagram(client: FlaskClient) -> None:
    page = get(client, "/diagrams?diagram=sr_y&intrusion=Brock+gabbro&kind=core")
    found = points(page)
    expected = numbers(client, "sr_y,y_ppm", intrusion="Brock gabbro", kind="core")
    assert set(found) == set(expected)
    assert "the intrusion Brock gabbro" in page
    assert re.search(r'class="count">(\d+)', page)[1] == str(len(expected))  # type: ignore[index]
    assert f"{len(expected)} of {len(expected)} samples drawn" in page
    assert 'href="/samples?kind=core&amp;intrusion=Brock+gabbro"' in page


def test_left_out_samples_are_counted_with_their_reasons(client: FlaskClient) -> None:
    page = get(client, "/diagrams?diagram=tas&x_from=60&x_to=70")
    drawn = len(points(page))
    assert f"{drawn} of 122 samples drawn" in page
    assert "6 controls of the laboratory" in page
    assert "2 without SiO₂ volatile-free" in page
    assert f"{114 - drawn} beyond the ends of the axes" in page
    whole = points(get(client, "/diagrams?diagram=tas&whole=1"))
    assert len(whole) == 114


def test_controls_are_drawn_where_the_sentence_asks_for_them(client: FlaskClient) -> None:
    assert len(points(get(client, "/diagrams?diagram=tas&kind=blank"))) == 6
    assert "controls of the laboratory" not in get(client, "/diagrams?diagram=tas&kind=blank")


def test_log_axis_leaves_out_what_has_no_logarithm_and_refuses_zero_as_an_end(client: FlaskClient) -> None:
    assert "A logarithmic axis has no zero" in get(client, "/diagrams?diagram=granite_rb_y_nb&x_from=0", 400)
    page = get(client, "/diagrams?diagram=granite_rb_y_nb&x_from=1")
    assert ">1000</text>" in page


def test_groups_differ_by_shape_as_well_as_colour(client: FlaskClient) -> None:
    page = get(client, "/diagrams?diagram=tas&by=intrusion")
    shapes = dict(re.findall(r'<g id="s-(\w+)" class="s-\w+"><path class="[^"]+" d="([^"]+)"', page))
    assert set(shapes) == {"0", "1"}
    assert len(set(shapes.values())) == 2
    assert re.findall(r'draw these alone">([^<]+)</a>', page) == ["Aster stock", "Brock gabbro"]


@pytest.mark.parametrize(
    "query", ["diagram=tas", "diagram=sr_y", "diagram=tas&intrusion=Brock+gabbro", "diagram=harker"]
)
def test_an_intrusion_keeps_its_symbol_in_every_diagram_and_filter(client: FlaskClient, query: str) -> None:
    page = get(client, f"/diagrams?{query}")
    legend = re.findall(r'<g class="s-(\w+)">.{0,400}?draw these alone">Brock gabbro</a>', page, re.DOTALL)
    assert legend[-1] == "orange"


def test_many_groups_keep_the_largest_and_join_the_rest() -> None:
    stored = [name for place, name in enumerate("abcdefghijk") for _ in range(20 - place)] + [None]
    entries, symbols = legend_of(Group("lithology"), stored, stored, "no lithology logged")
    assert [entry.words for entry in entries] == [*"abcdefgh", "3 others", "no lithology logged"]
    assert sum(entry.count for entry in entries) == len(stored) == len(symbols)
    assert symbols[0] == "0" and symbols[-1] == "none" and symbols[-2] == "others"


def test_groups_by_verdict_of_a_target_equal_the_list(client: FlaskClient) -> None:
    page = get(client, "/diagrams?diagram=sr_y&by=porphyry_copper")
    symbols = {unescape(code): symbol for code, _, symbol, _, _, _ in LINK.findall(page)}
    for word in ("favourable", "unfavourable", "undecided"):
        listed = numbers(client, "sr_y", target="porphyry_copper", verdict=word)
        assert {code for code, symbol in symbols.items() if symbol == word} == set(listed) & set(symbols)
    assert "told apart by" in page and "verdict for porphyry copper" in page
    assert 'href="/diagrams?target=porphyry_copper&amp;verdict=favourable&amp;diagram=sr_y"' in page


@pytest.mark.parametrize("by", ["intrusion", "area", "site_kind", "sample_kind", "lithology", "best_verdict", "tin"])
def test_every_way_to_tell_apart_draws_all_points(client: FlaskClient, by: str) -> None:
    assert len(points(get(client, f"/diagrams?diagram=tas&by={by}&target=tin"))) == 114


def test_censored_values_and_minima_are_marked_on_the_point(client: FlaskClient) -> None:
    page = get(client, "/diagrams?diagram=granite_nb_y")
    marked = {unescape(code) for code, _, _, _, _, rest in LINK.findall(page) if "#d-limit" in rest}
    rows = csv.DictReader(io.StringIO(client.get("/samples.csv?columns=censored").text))
    censored = {row["sample_code"] for row in rows if "nb_ppm<" in row["censored"]}
    drawn = points(page)
    assert marked == censored & set(drawn) and marked
    assert "Nb below the limit of detection" in page
    minima = get(client, "/diagrams?diagram=harker_zr")
    assert "Zr by a partial digestion, a minimum" in minima


def test_stale_sample_is_marked(changed: tuple[Registry, FlaskClient], monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("web.reading.refresh_a_few", lambda registry: None)
    page = get(changed[1], "/diagrams?diagram=tas")
    stale = {code for code, _, _, _, _, rest in LINK.findall(page) if "#d-stale" in rest}
    assert stale == {"PB-003"}
    assert "changed after it was computed" in page


def test_marked_sample_is_ringed_also_outside_the_filter_or_said_to_be_absent(client: FlaskClient) -> None:
    page = get(client, "/diagrams?diagram=tas&intrusion=Brock+gabbro&mark=PB-001&mark=nobody&mark=no+results/1")
    expected = points(get(client, "/diagrams?diagram=tas"))["PB-001"]
    ring = re.search(r'class="marked" href="/samples/PB-001"><svg x="([\d.]+)%" y="([\d.]+)%"', page)
    assert ring is not None and (float(ring[1]), float(ring[2])) == expected
    assert "the registry holds no sample of this code" in page
    assert re.search(r"no results/1</a> is not drawn: it has no SiO₂ volatile-free", page)


def test_table_on_demand_holds_the_points_and_their_numbers(client: FlaskClient) -> None:
    assert "<tbody>" not in get(client, "/diagrams?diagram=sr_y&kind=outcrop")
    page = get(client, "/diagrams?diagram=sr_y&kind=outcrop&table=1")
    rows = re.findall(r'<th scope="row"><a href="/samples/([^"]+)">.*?</tr>', page)
    assert rows == sorted(points(page))
    assert re.search(r'<td class="number" data-label="Y">[\d.]+</td>', page)


def test_panels_draw_each_oxide_against_silica(client: FlaskClient) -> None:
    page = get(client, "/diagrams?diagram=harker")
    assert len(re.findall("<figure", page)) == len(PANELS["harker"].members)
    first = re.search(r"<figure.*?</figure>", page, re.DOTALL)
    assert first is not None
    assert len(re.findall(r"M[\d.]+ [\d.]+m", first[0])) == 114
    assert "diagram=harker_mgo" in page


def test_many_points_are_counted_in_cells_and_the_counts_add_up(
    client: FlaskClient, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(page_module, "MOST_POINTS", 50)
    page = get(client, "/diagrams?diagram=tas")
    assert points(page) == {}
    cells = re.search(r'<svg class="cells".*?</svg>', page, re.DOTALL)
    assert cells is not None
    assert len(re.findall(r"h1v1h-1z", cells[0])) >= 3
    assert "114 of 122 samples drawn" in page
    assert "samples in a cell" in page
    assert len(points(get(client, "/diagrams?diagram=tas&intrusion=Brock+gabbro"))) == 38


def test_empty_sets_say_what_to_do(client: FlaskClient, empty_client: FlaskClient) -> None:
    assert "The registry holds no samples yet" in get(empty_client, "/diagrams")
    assert "No sample meets all of these conditions" in get(client, "/diagrams?text=zzz")
    page = get(client, "/diagrams?text=no+results")
    assert "None of these samples has a place here" in page
    assert "1 without SiO₂ volatile-free" in page
    assert "None of these" in get(client, "/diagrams?diagram=granite_ta_yb")


@pytest.mark.parametrize(
    ("address", "sentence"),
    [
        ("/diagrams?diagram=xyz", "There is no diagram “xyz”"),
        ("/diagrams?by=xyz", "There is no way to tell samples apart “xyz”"),
        ("/diagrams?x_from=abc", "“abc” is no place on an axis"),
        ("/diagrams?x_from=inf", "“inf” is no place on an axis"),
        ("/diagrams?y_from=9&y_to=3", "The axis would begin at 9 and end at 3"),
        ("/diagrams?intrusion=Nobody", "The registry holds no intrusion “Nobody”"),
        ("/diagrams?sr_y_min=abc", "“abc” is not a number"),
        ("/diagrams?nonsense=1", "There is no condition called “nonsense”"),
        (f"/diagrams?diagram={quote(HOSTILE)}", "There is no diagram “&lt;script&gt;"),
    ],
)
def test_faults_are_told_and_nothing_is_drawn(client: FlaskClient, address: str, sentence: str) -> None:
    page = get(client, address, 400)
    assert sentence in page
    assert "Nothing is drawn until" in page
    assert "<script>alert" not in page


def test_hostile_code_and_lithology_are_escaped(client: FlaskClient) -> None:
    page = get(client, f"/diagrams?diagram=tas&by=lithology&mark={quote(HOSTILE)}&table=1")
    assert "<script>alert" not in page
    assert "&lt;script&gt;alert" in page


def test_form_address_is_settled_and_keeps_the_diagram(client: FlaskClient) -> None:
    answer = client.get("/diagrams?diagram=sr_y&by=verdict&text=&x_from=&add_column=sr_y&add_min=20&add_max=")
    assert answer.status_code == 302
    assert answer.headers["Location"] == "/diagrams?sr_y_min=20&diagram=sr_y&by=best_verdict"


def test_sample_page_leads_to_the_diagrams_with_itself_marked(client: FlaskClient) -> None:
    page = get(client, "/samples/PB-001")
    link = re.search(r'href="(/diagrams\?intrusion=Aster\+stock&amp;diagram=tas_plutonic&amp;mark=PB-001)"', page)
    assert link is not None
    assert 'class="marked"' in get(client, unescape(link[1]))
    assert "diagram=granite_ta_yb" not in page
    assert "where-it-plots" not in get(client, f"/samples/{quote('no results/1')}")
