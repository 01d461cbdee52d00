"""The page of the map: positions, groups and numbers, what is left out, grids, links, files, faults.

The registry is invented (conftest), its positions too; what is expected of them is recomputed with pyproj or by plain
trigonometry. DH-1 heads 090 at a dip of -60 from 500 000 E, 6 100 000 N on the central meridian of zone 33, so that a
sample at depth d lies d/2 east of its collar.
"""

from __future__ import annotations

import json
import re
import sqlite3
from collections.abc import Callable, Iterator
from html import unescape
from pathlib import Path
from urllib.parse import parse_qs, unquote, urlsplit

import pyproj
import pytest
from flask.testing import FlaskClient

from tests.web.placed_registry import placed
from web import create_app, map_sheet
from web.security import CONTENT_SECURITY_POLICY

HOSTILE = '<script>alert("x")</script>&amp;'
POINT = re.compile(r'<a href="([^"]+)" tabindex="-1"><title>([^<]*)</title><use href="#s-([^"]+)" x="([\d.]+)%" y="([\d.]+)%"/>(.*?)</a>')  # fmt: skip  # noqa: E501
SITE = re.compile(r'<a class="site-(\w+)" href="([^"]+)" tabindex="-1"><title>([^<]*)</title>.*?x="([\d.]+)%" y="([\d.]+)%"')  # fmt: skip  # noqa: E501
GEOGRAPHIC = (
    "UPDATE area SET epsg = NULL",
    "UPDATE site SET easting = NULL, northing = NULL, epsg = NULL",
    "UPDATE site SET longitude = 15.2, latitude = 55.1 WHERE code = 'OC-7'",
)


@pytest.fixture(scope="module")
def placed_file(writable_file: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    return placed(writable_file, tmp_path_factory.mktemp("placed") / "placed.sqlite")


@pytest.fixture(scope="module")
def client(placed_file: Path) -> Iterator[FlaskClient]:
    app = create_app(str(placed_file))
    yield app.test_client()
    app.extensions["registry"].close()


@pytest.fixture
def client_after(placed_file: Path, tmp_path: Path) -> Iterator[Callable[..., FlaskClient]]:
    """A client of a copy of the registry, changed by SQL before the samples follow their sites."""
    apps = []

    def make(*statements: str) -> FlaskClient:
        app = create_app(str(placed(placed_file, tmp_path / f"{len(apps)}.sqlite", statements)))
        apps.append(app)
        return app.test_client()

    yield make
    for app in apps:
        app.extensions["registry"].close()


def get(client: FlaskClient, address: str, status: int = 200) -> str:
    answer = client.get(address)
    assert answer.status_code == status, answer.text[:400]
    return answer.text


def window(page: str) -> tuple[float, float, float, float]:
    found = re.search(r'data-x="([-\d.e]+) ([-\d.e]+)" data-y="([-\d.e]+) ([-\d.e]+)"', page)
    assert found is not None
    west, east, south, north = map(float, found.groups())
    return west, east, south, north


def points(page: str) -> dict[str, tuple[float, float]]:
    """Easting and northing of every sample drawn alone, read back from its place in the frame."""
    west, east, south, north = window(page)
    return {
        unescape(unquote(address)).removeprefix("/samples/"): (
            west + float(x) / 100 * (east - west), north - float(y) / 100 * (north - south),
        )
        for address, _, _, x, y, _ in POINT.findall(page)
        if address.startswith("/samples/")
    }  # fmt: skip


def stacks(page: str) -> list[tuple[str, str]]:
    """(address, words) of every stack of samples."""
    return [
        (unescape(address), unescape(words)) for address, words, *_ in POINT.findall(page) if "on one place" in words
    ]


def test_samples_lie_along_their_hole_where_the_survey_puts_them(client: FlaskClient) -> None:
    page = get(client, "/map?kind=core")
    found = points(page)
    assert "84 of 84 samples and 1 site shown." in page
    assert "EPSG:32633" in page
    west, east, *_ = window(page)
    for code, (x, y) in found.items():
        n = int(code.removeprefix("PB-")) - 1
        assert x == pytest.approx(500000.0 + (10.5 + n) / 2, abs=1e-5 * (east - west))
        assert y == pytest.approx(6.1e6, abs=0.02)
    assert len(found) + sum(int(words.split()[0]) for _, words in stacks(page)) == 84


def test_collar_and_trace_stand_where_they_were_entered(client: FlaskClient) -> None:
    page = get(client, "/map?site=DH-1")
    west, east, south, north = window(page)
    (kind, address, words, x, y), *others = SITE.findall(page)
    assert (kind, address, others) == ("drill_hole", "/sites/DH-1", [])
    assert words.startswith("DH-1, collar\n500\u202f000 E, 6\u202f100\u202f000 N\n1 survey station, 220 m long")
    assert west + float(x) / 100 * (east - west) == pytest.approx(500000.0, abs=0.01)
    assert north - float(y) / 100 * (north - south) == pytest.approx(6.1e6, abs=0.01)
    line = re.search(r'class="trace-line" d="M([^"]+)"/></svg>\s*<g', page)
    assert line is not None
    first, *_, last = ([float(part) / 1000 for part in pair.split(",")] for pair in line[1].split())
    assert west + first[0] * (east - west) == pytest.approx(500000.0, abs=0.1)
    assert west + last[0] * (east - west) == pytest.approx(500110.0, abs=0.1)
    assert (east - west) / (north - south) == pytest.approx(1.5)


def test_grid_lines_and_scale_bar_agree_with_the_frame(client: FlaskClient) -> None:
    page = get(client, "/map?site=DH-1")
    west, east, *_ = window(page)
    marks = re.findall(r'class="tick-text[^"]*" x="([\d.]+)%" y="100%"[^>]*>([^<]+)<', page)
    assert len(marks) >= 3
    for at, words in marks:
        assert west + float(at) / 100 * (east - west) == pytest.approx(float(words.replace("\u202f", "")), abs=0.01)
    bar = re.search(r'class="bar-full" x="0" y="6" width="([\d.]+)%"', page)
    assert bar is not None
    assert float(bar[1]) / 100 * (east - west) == pytest.approx(100.0, abs=0.01)
    assert "Scale bar of 100\xa0m; the top of the map is grid north" in page
    assert "at its middle true north is the same within 0.05°" in page


def test_samples_on_one_place_are_counted_and_lead_to_their_list(client: FlaskClient) -> None:
    page = get(client, "/map?kind=outcrop&by=intrusion")
    ((address, words),) = stacks(page)
    assert words.startswith("30 samples on one place, OC-7: ")
    assert "20 Aster stock" in words and "10 Brock gabbro" in words
    assert re.search(r'class="map-count"[^>]*>30<', page)
    assert urlsplit(address).path == "/samples"
    assert parse_qs(urlsplit(address).query) == {"kind": ["outcrop"], "site": ["OC-7"], "sort": ["from_m"]}
    assert client.get(address).status_code == 200


def test_all_points_equal_still_have_a_map_and_one_alone_has_surroundings(client: FlaskClient) -> None:
    for address in ("/map?kind=outcrop", "/map?text=PB-001"):
        west, east, south, north = window(get(client, address))
        assert (east - west, north - south) == pytest.approx((400.0, 400.0 / 1.5))
        assert (west + east) / 2 == pytest.approx(500001.0)
    assert list(points(get(client, "/map?text=PB-001"))) == ["PB-001"]


def test_samples_without_coordinates_are_counted_and_linked(client: FlaskClient) -> None:
    page = get(client, "/map")
    assert "2 samples without coordinates" in page
    assert 'href="/samples/no%20results/1">no results/1</a>' in page
    assert HOSTILE not in page
    assert "6 controls of the laboratory (blanks, reference materials, duplicates)" in page
    assert "114 of 122 samples and 2 sites shown" in page


def test_nothing_with_coordinates_is_said_and_draws_no_frame(client_after: Callable[..., FlaskClient]) -> None:
    client = client_after(
        "UPDATE site SET easting = NULL, northing = NULL, epsg = NULL, longitude = NULL, latitude = NULL",
        "UPDATE sample SET easting = NULL, northing = NULL, epsg = NULL, longitude = NULL, latitude = NULL",
    )
    page = get(client, "/map")
    assert "None of this has coordinates yet" in page
    assert "116 samples without coordinates" in page
    assert "2 sites without coordinates" in page
    assert 'id="plot"' not in page


def test_empty_registry_says_what_to_import(empty_client: FlaskClient) -> None:
    page = get(empty_client, "/map")
    assert "The registry holds no sites and samples yet" in page
    assert 'id="plot"' not in page
    assert json.loads(empty_client.get("/map.geojson").text)["features"] == []


def test_hole_without_a_survey_shows_its_collar_and_says_so(client_after: Callable[..., FlaskClient]) -> None:
    page = get(client_after("DELETE FROM survey"), "/map?site=DH-1")
    assert "DH-1: no survey, so that only the collar is drawn and every sample stands there." in page
    assert "collar: no survey (84)" in page
    assert "trace-line" not in page
    assert stacks(page)[0][1].startswith("84 samples on one place, DH-1: ")


def test_magnetic_azimuths_show_the_collar_and_are_said(client_after: Callable[..., FlaskClient]) -> None:
    page = get(client_after("UPDATE site SET azimuth_reference = 'magnetic'"), "/map?site=DH-1")
    assert "DH-1: surveyed from magnetic north without a declination" in page
    assert "trace-line" not in page


def test_degrees_alone_are_drawn_in_the_utm_zone_recomputed_with_pyproj(
    client_after: Callable[..., FlaskClient],
) -> None:
    page = get(client_after(*GEOGRAPHIC), "/map")
    assert "EPSG:32633, WGS 84 / UTM zone 33N; the UTM zone of the middle" in page
    assert "entered in degrees" in page
    east, north = pyproj.Transformer.from_crs(4326, 32633, always_xy=True).transform(15.2, 55.1)
    west, right, south, top = window(page)
    place = next((x, y) for _, words, _, x, y, _ in POINT.findall(page) if "OC-7" in words)
    assert west + float(place[0]) / 100 * (right - west) == pytest.approx(east, abs=0.5)
    assert top - float(place[1]) / 100 * (top - south) == pytest.approx(north, abs=0.5)


def test_two_areas_in_different_systems_share_a_grid_that_is_told(client_after: Callable[..., FlaskClient]) -> None:
    east, north = pyproj.Transformer.from_crs(4326, 32632, always_xy=True).transform(14.9, 55.04)
    client = client_after(
        "UPDATE area SET epsg = 32632 WHERE name = 'South Block'",
        f"UPDATE site SET epsg = 32632, easting = {east}, northing = {north}, longitude = 14.9 WHERE code = 'OC-7'",
    )
    page = get(client, "/map")
    assert "because what is shown was entered in several systems" in page
    assert "EPSG:32633" in page
    outcrop = next((x, y) for _, words, _, x, y, _ in POINT.findall(page) if "OC-7" in words)
    again, _ = pyproj.Transformer.from_crs(4326, 32633, always_xy=True).transform(14.9, 55.04)
    west, right, *_ = window(page)
    assert west + float(outcrop[0]) / 100 * (right - west) == pytest.approx(again, abs=1.0)
    assert "the system in which all that is shown was entered" in get(client, "/map?area=South+Block")
    assert "EPSG:32632" in get(client, "/map?area=South+Block")


def test_hostile_codes_are_words_and_nothing_else(client_after: Callable[..., FlaskClient]) -> None:
    client = client_after(
        f"UPDATE site SET code = '{HOSTILE}' WHERE code = 'DH-1'",
        f"UPDATE sample SET longitude = 15.001, latitude = 55.041, position_basis = '{HOSTILE}' "
        f"WHERE code = '{HOSTILE}'",
    )
    for address in ("/map", "/map?table=1", "/map?number=sr_y&table=1"):
        page = get(client, address)
        assert "<script>alert" not in page
        assert "&lt;script&gt;alert" in page
    answer = client.get("/map.geojson")
    assert HOSTILE in [each["properties"]["sample_code"] for each in answer.json["features"]]  # type: ignore[index]


def test_number_is_drawn_in_classes_with_its_unit(client: FlaskClient) -> None:
    page = get(client, "/map?number=sr_ppm&kind=core&table=1")
    assert "shown by" in page and ">Sr</summary>" in page
    assert '<p class="small legend-head">Sr, ppm</p>' in page
    legend = page[page.index('aria-label="Symbols"') :]
    counts = [int(n) for n in re.findall(r'<span class="soft">(\d+)</span></li>', legend[: legend.index("</ul>")])]
    assert sum(counts) == 84
    assert re.search(r'id="s-c\d" class="s-v6"', page)
    assert "Sr 620\xa0ppm" in unescape(page)
    part = get(client, "/map?number=sr_ppm&kind=core&grid=32633&x_from=500000&x_to=500030&y_from=6099990&y_to=6100010")
    classes = r"</svg>([\d.]+(?: to [\d.]+)?) <span"
    assert len(re.findall(classes, page)) >= 2
    assert re.findall(classes, part) == re.findall(classes, page)  # the same colours mean the same in every part
    assert ">by=" not in page


def test_verdict_of_a_target_has_the_marks_of_verdicts(client: FlaskClient) -> None:
    page = get(client, "/map?target=porphyry_copper")
    symbols = {symbol for _, _, symbol, *_ in POINT.findall(page)}
    assert symbols <= {"favourable", "possible", "undecided", "unfavourable", "none"}
    assert len(symbols) >= 2
    assert "verdict for porphyry copper" in page


def test_part_of_the_map_counts_what_lies_beyond_it(client: FlaskClient) -> None:
    page = get(client, "/map?kind=core&grid=32633&x_from=500000&x_to=500030&y_from=6099990&y_to=6100010")
    west, east, south, north = window(page)
    assert (west, east, south, north) == pytest.approx((500000, 500030, 6099990, 6100010))
    shown = [n for n in range(120) if n % 4 and n % 20 != 19 and (10.5 + n) / 2 <= 30]
    assert f"{len(shown)} of 84 samples" in page
    assert f"{84 - len(shown)} beyond the edges of this part" in page
    assert 'href="/map?kind=core">show all of the map</a>' in page
    assert set(points(page)) <= {f"PB-{n + 1:03d}" for n in shown}


def test_part_of_another_grid_is_not_taken_for_one_of_this(client: FlaskClient) -> None:
    page = get(client, "/map?grid=32632&x_from=500000&x_to=500030&y_from=6099990&y_to=6100010")
    assert "asked for a part of the map in another grid; all of it is shown" in page
    assert "114 of 122 samples" in page


def test_every_link_of_the_map_leads_somewhere(client: FlaskClient) -> None:
    page = get(client, "/map?site=DH-1&x_from=500000&x_to=500030&y_from=6099990&y_to=6100010&grid=32633&table=1")
    main = page[page.index("<main") : page.index("</main>")]
    addresses = {unescape(address) for address in re.findall(r'href="(/[^"#]+)', main)}
    assert len(addresses) > 30
    for address in addresses:
        with client.get(address) as answer:
            assert answer.status_code == 200, address


@pytest.mark.parametrize(
    ("query", "said"),
    [
        ("by=nothing", "There is no way to tell samples apart “nothing”"),
        ("number=lithology", "“lithology” is no number of the sample views"),
        ("number=1%3BDROP", "“1;DROP” is no number"),
        ("x_from=1", "x_to is missing"),
        ("x_from=a&x_to=2&y_from=3&y_to=4", "“a” is no place of the grid"),
        ("x_from=9&x_to=2&y_from=3&y_to=14", "The map would begin at 9 and end at 2 m"),
        ("x_from=nan&x_to=2&y_from=3&y_to=14", "“nan” is no place of the grid"),
        ("x_from=1e9&x_to=2&y_from=3&y_to=14", "“1e9” is no place of the grid"),
        ("area=Nowhere", "The registry holds no area “Nowhere”"),
        ("colour=red", "colour"),
    ],
)
def test_faults_are_told_and_draw_nothing(client: FlaskClient, query: str, said: str) -> None:
    page = unescape(get(client, f"/map?{query}", 400))
    assert said in page
    assert "Nothing is drawn until the marked condition is mended" in page


def test_form_is_settled_into_a_plain_address(client: FlaskClient) -> None:
    answer = client.get("/map?text=&number=&by=best_verdict&site=&kind=core&add_column=sr_y&add_min=20&add_max=")
    assert answer.status_code == 302
    assert answer.headers["Location"] == "/map?kind=core&sr_y_min=20"
    answer = client.get("/map?text=&number=sr_y&by=intrusion")
    assert answer.headers["Location"] == "/map?number=sr_y"


@pytest.mark.parametrize("query", ["", "?by=lithology", "?number=sr_y", "?table=1&by=area", "?target=tin&kind=core"])
def test_map_answers_under_the_strict_policy_without_inline_style(client: FlaskClient, query: str) -> None:
    answer = client.get(f"/map{query}")
    assert answer.headers["Content-Security-Policy"] == CONTENT_SECURITY_POLICY
    assert " style=" not in answer.text and "<style" not in answer.text
    assert "nan" not in re.sub(r"[a-z]+nan|nan[a-z]+", "", answer.text.lower())


def test_many_places_are_counted_in_cells(client: FlaskClient, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(map_sheet, "MOST_POINTS", 10)
    page = get(client, "/map")
    assert not POINT.findall(page)
    assert "samples in a cell" in page
    assert re.search(r'<path class="v6" d="M', page)
    page = get(client, "/map?number=sr_ppm")
    assert "A cell has the shade of its middle sample" in page
    assert re.search(r'class="cells".*?<path class="v\d" d="M', page)


def test_many_holes_draw_no_trace_and_say_so(client: FlaskClient, monkeypatch: pytest.MonkeyPatch) -> None:
    client.application.extensions.pop("remembered", None)
    monkeypatch.setattr(map_sheet, "MOST_TRACES", 0)
    monkeypatch.setattr(map_sheet, "MOST_SITES", 1)
    page = get(client, "/map")
    assert "Traces are drawn of up to 0 holes" in page
    assert "2 sites would hide each other and are not drawn" in page
    assert not SITE.findall(page)
    client.application.extensions.pop("remembered", None)


def test_table_lists_what_is_shown_for_who_reads_without_the_drawing(client: FlaskClient) -> None:
    page = get(client, "/map?kind=core&table=1")
    rows = re.findall(r'<th scope="row"><a href="/samples/(PB-\d+)">', page)
    assert len(rows) == 84
    assert rows == sorted(rows)
    assert '<td data-label="position">desurveyed, straight on beyond the last station</td>' in page
    assert '<th scope="row"><a href="/sites/DH-1">DH-1</a></th><td data-label="kind">drill hole</td>' in page


def test_files_hold_the_samples_of_the_sentence_that_have_a_place(client: FlaskClient, tmp_path: Path) -> None:
    page = get(client, "/map?kind=core&number=sr_y")
    addresses = [unescape(a) for a in re.findall(r'href="(/(?:map\.geojson|map\.gpkg|samples\.csv)\?[^"]+)"', page)]
    assert len(addresses) == 3
    features = client.get(addresses[0]).json["features"]  # type: ignore[index]
    assert len(features) == 84
    first = next(each for each in features if each["properties"]["sample_code"] == "PB-002")
    lon, lat = pyproj.Transformer.from_crs(32633, 4326, always_xy=True).transform(500000 + 11.5 / 2, 6.1e6)
    assert first["geometry"]["coordinates"] == pytest.approx([lon, lat], abs=1e-8)
    assert {"best_verdict", "easting", "sr_y"} <= first["properties"].keys()
    assert first["properties"]["best_verdict"] in ("favourable", "possible", "unfavourable", "undecided", None)
    answer = client.get(addresses[1])
    assert answer.mimetype == "application/geopackage+sqlite3"
    (tmp_path / "a.gpkg").write_bytes(answer.data)
    connection = sqlite3.connect(tmp_path / "a.gpkg")
    assert connection.execute("SELECT count(*), max(sr_y) FROM samples").fetchone()[0] == 84
    connection.close()
    assert get(client, "/map.geojson?area=Nowhere", 400).startswith("The registry holds no area")
    assert "verdict" in client.get("/map.geojson?target=tin&kind=core").json["features"][0]["properties"]  # type: ignore[index]


def test_site_and_intrusion_pages_lead_to_their_map(client: FlaskClient) -> None:
    for address, link in (
        ("/sites/DH-1", "/map?site=DH-1"),
        ("/intrusions/Aster%20stock", "/map?intrusion=Aster+stock"),
    ):
        page = get(client, address)
        assert f'<a href="{link}">on the map</a>' in page
        assert 'id="plot"' in get(client, link)


def test_caution_stands_beside_the_map(client: FlaskClient) -> None:
    page = get(client, "/map")
    assert "a licensed surveyor sets out the collar" in page
    assert 'href="/map" aria-current="page">Map</a>' in page


def test_controls_alone_are_said_to_have_no_place(client: FlaskClient) -> None:
    page = get(client, "/map")
    link = re.search(r'<a href="([^"]+)">show them alone</a>', page)
    assert link is not None
    alone = get(client, unescape(link[1]))
    assert "None of this has coordinates yet" in alone
    assert "6 samples without coordinates" in alone
