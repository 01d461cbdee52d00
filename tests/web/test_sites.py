"""Sites: the page of a hole and of an outcrop, and the strip as numbers. Rocks, depths and values are invented."""

from __future__ import annotations

import re
from itertools import pairwise
from types import SimpleNamespace
from typing import Any

import pytest
from flask.testing import FlaskClient

from web.strip import EDGE, FAMILIES, MARK_PIXELS, OTHER, PATTERNS, Mark, build_strip, rock_fill

SR_Y = SimpleNamespace(label="Sr/Y", unit="1", name="sr_y")


def sample(start: float, value: float | None, verdict: str | None = "favourable", code: str = "X") -> dict[str, Any]:
    return {"code": code, "from_m": start, "to_m": start + 2, "verdict": verdict, "value_0": value}


def interval(start: float, end: float, rock: str | None) -> dict[str, Any]:
    return {"from_m": start, "to_m": end, "lithology": rock, "description": None}


def test_site_page_of_a_hole_shows_strip_log_survey_and_samples(writable: Any) -> None:
    page = writable.client.get("/sites/DH-1").text
    order = [
        page.index(words) for words in ("What its samples show", "Down the hole", "Log: 3", "Survey: 1", "<h2>Samples<")
    ]
    assert order == sorted(order)
    assert page.count('class="value"') == 2 * 84
    assert "8 to 60 m: granodiorite" in page
    assert page.count("<tspan") >= 3 and "gabbronorite" in page
    assert 'href="/samples/PB-002"' in page
    assert "EPSG:32633" in page and "220 m" in page


def test_site_page_of_an_outcrop_has_no_strip(client: FlaskClient) -> None:
    page = client.get("/sites/OC-7").text
    assert "Station" in page and "Down the hole" not in page
    assert 'class="strip' not in page


def test_site_page_values_and_target_are_chosen_in_the_address(writable: Any) -> None:
    page = writable.client.get("/sites/DH-1?value=mg_number&value=none&value=none&target=tin").text
    assert page.count('class="value"') == 84
    assert 'value="mg_number" selected' in page
    assert 'value="tin" selected' in page
    marks = re.findall(r'class="strip-mark mark-(\w+)"', page)
    expected = writable.sql(
        "SELECT v.verdict FROM verdict_sheet AS v JOIN sample_sheet AS s ON s.sample_id = v.sample_id "
        "WHERE s.site_code = 'DH-1' AND v.target = 'tin'"
    )
    assert {row[0] for row in expected} >= set(marks) != set()


def test_site_page_values_that_cannot_be_drawn_are_told(writable: Any) -> None:
    page = writable.client.get(
        "/sites/DH-1?value=lithology&value=mg_number&value=sr_y&value=la_yb&value=asi&target=gold"
    ).text
    assert "“lithology” is no number of the sample views" in page
    assert "At most 3 values are drawn" in page
    assert "There is no target “gold”" in page
    assert page.count('class="value"') > 2 * 84


def test_site_page_of_an_absent_code_is_404_with_near_ones(client: FlaskClient) -> None:
    answer = client.get("/sites/dh-1")
    assert answer.status_code == 404
    assert 'href="/sites/DH-1"' in answer.text


def test_site_page_best_samples_count_as_the_verdict_view_says(writable: Any) -> None:
    page = re.sub(r"<[^>]+>", "", writable.client.get("/sites/DH-1").text)
    counted = dict(
        writable.sql(
            "SELECT v.verdict, count(*) FROM verdict_sheet AS v JOIN sample_sheet AS s ON s.sample_id = v.sample_id "
            "WHERE s.site_code = 'DH-1' AND v.target = 'porphyry_copper' GROUP BY v.verdict"
        )
    )
    assert counted["favourable"] > 0
    part = page[page.index("Porphyry copper") :][:400]
    for word, number in counted.items():
        assert f"{number} {word}" in part


def test_strip_places_depths_in_proportion() -> None:
    strip = build_strip(200.0, [interval(0, 50, "gabbro")], [sample(99, 10.0), sample(149, 20.0)], [SR_Y])
    assert strip is not None
    scale = (strip.height - 2 * EDGE) / 200.0
    first, second = strip.tracks[0].points
    assert first.y == pytest.approx(EDGE + 100 * scale, abs=0.01)
    assert second.y == pytest.approx(EDGE + 150 * scale, abs=0.01)
    assert (second.from_x, second.from_y) == (first.x, first.y)
    assert (first.x, second.x) == (4.0, 96.0)
    assert strip.blocks[0].height == pytest.approx(50 * scale, abs=0.02)


def test_strip_ticks_are_round_depths_that_do_not_crowd() -> None:
    for depth in (0.7, 9.0, 34.0, 220.0, 1234.0, 6500.0):
        strip = build_strip(depth, [], [], [])
        assert strip is not None
        places = [y for y, _ in strip.ticks]
        assert min(b - a for a, b in pairwise(places)) >= 47.9
        assert all(float(words) <= depth for _, words in strip.ticks)
        assert len(places) >= 3


def test_strip_values_over_decades_are_logarithmic() -> None:
    strip = build_strip(100.0, [], [sample(10, 1.0), sample(20, 10.0), sample(30, 1000.0)], [SR_Y])
    assert strip is not None
    track = strip.tracks[0]
    assert (track.low, track.high, track.logarithmic) == (1.0, 1000.0, True)
    assert [point.x for point in track.points] == pytest.approx([4.0, 4.0 + 92 / 3, 96.0], abs=0.01)


def test_strip_one_value_alone_and_none_are_drawn_without_a_fault() -> None:
    strip = build_strip(100.0, [], [sample(10, 5.0), sample(20, None)], [SR_Y])
    assert strip is not None
    assert strip.tracks[0].missing == 1
    assert 4.0 < strip.tracks[0].points[0].x < 96.0
    empty = build_strip(100.0, [], [sample(20, None)], [SR_Y])
    assert empty is not None and empty.tracks[0].points == ()
    assert build_strip(None, [], [], []) is None


def marks_of(depth: float, samples: list[dict[str, Any]]) -> tuple[Mark, ...]:
    strip = build_strip(depth, [], samples, [SR_Y])
    assert strip is not None
    scale = (strip.height - 2 * EDGE) / depth
    for mark in strip.marks:  # each stands at the depth of the sample it leads to, with that sample's verdict
        (own,) = (row for row in samples if row["code"] == mark.code)
        assert (mark.word, mark.y) == (own["verdict"], pytest.approx(EDGE + (own["from_m"] + 1) * scale, abs=0.02))
    assert all(after.y - before.y >= MARK_PIXELS for before, after in pairwise(strip.marks))
    return strip.marks


def test_strip_marks_of_samples_too_close_stand_at_the_depth_of_the_best_of_them() -> None:
    crowded = [sample(10 + n / 100, 1.0, "unfavourable", f"U{n}") for n in range(50)]
    crowded.append(sample(10.6, 1.0, "possible", "BEST"))
    marks = marks_of(400.0, [*crowded, sample(300, 1.0, "undecided", "ALONE")])
    assert [(mark.word, mark.code) for mark in marks] == [("possible", "BEST"), ("undecided", "ALONE")]
    assert "1 possible, 50 unfavourable; drawn at BEST, 10.6 to 12.6 m: possible" in marks[0].words


def test_strip_favourable_sample_below_a_possible_one_is_not_drawn_at_the_depth_of_the_other() -> None:
    """Two samples 7 m apart: a mark each where there is room; in a longer hole one, at the favourable rock."""
    pair = [sample(127, 1.0, "possible", "UPPER"), sample(134, 1.0, "favourable", "LOWER")]
    assert [(mark.word, mark.code) for mark in marks_of(240.0, pair)] == [
        ("possible", "UPPER"),
        ("favourable", "LOWER"),
    ]
    (mark,) = marks_of(900.0, pair)
    assert (mark.word, mark.code) == ("favourable", "LOWER")
    assert mark.words == "127 to 136 m: 1 favourable, 1 possible; drawn at LOWER, 134 to 136 m: favourable"


def test_strip_marks_of_a_densely_sampled_hole_count_every_sample_once() -> None:
    words = ("unfavourable", "undecided", "possible", "favourable")
    many = [sample(n, 1.0, words[n * n % 7 % 4], f"S{n}") for n in range(0, 600, 2)]
    told = " ".join(mark.words.split(";")[0] for mark in marks_of(602.0, many))
    counted = [int(number) for number in re.findall(r"(\d+) (?:un)?(?:favourable|possible|decided)", told)]
    assert len(counted) > 40 and sum(counted) == len(many)


def test_strip_labels_are_broken_and_shortened_and_left_out_where_there_is_no_room() -> None:
    strip = build_strip(
        300.0,
        [interval(0, 1, "dyke"), interval(1, 150, "coarse leucogabbronoritic anorthosite"), interval(150, 300, None)],
        [],
        [],
    )
    assert strip is not None
    thin, long, bare = strip.blocks
    assert (thin.label, thin.lines) == ("", ())
    assert long.label.endswith("…") and len(long.label) <= 23
    assert len(long.lines) == 3 and all(len(line) <= 11 for _, line in long.lines)
    assert bare.label == "not named"
    assert "0 to 1 m: dyke" in thin.words


@pytest.mark.parametrize(
    ("rock", "like"),
    [("Granodiorite", "tonalite"), ("hornblende gabbro", "norite"), ("dacite", "rhyolite"), ("mica schist", "gneiss")],
)
def test_rock_fill_is_one_for_rocks_of_a_family(rock: str, like: str) -> None:
    assert rock_fill(rock) == rock_fill(like) != OTHER


def test_rock_fills_differ_between_families_and_are_known_patterns() -> None:
    fills = [(colour, pattern) for _, colour, pattern in FAMILIES]
    assert len(set(fills)) == len(fills)
    assert {pattern for _, pattern in fills} <= {*PATTERNS, ""}
    assert rock_fill("granodiorite") != rock_fill("granite") != rock_fill("diorite")
    assert rock_fill(None) == rock_fill("unheard of") == OTHER


def test_site_strip_opens_with_what_the_leading_target_weighs(client: FlaskClient) -> None:
    """The granodiorites of DH-1 lead for porphyry copper, whose first criteria are Sr/Y and La/Yb."""
    page = client.get("/sites/DH-1").text
    assert re.findall(r'<option value="([a-z_]+)" selected', page) == ["sr_y", "la_yb"]
