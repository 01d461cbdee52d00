"""Places far from the others of their area, and degrees typed in place of metres.

Sites and codes are invented. Coordinates are those of EPSG:32633 (WGS 84 / UTM zone 33N), checked by hand: easting
500000 is its central meridian, 15 degrees east, and a degree of latitude is about 111 km. From where on a place is far
is common practice, no source.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from registry.errors import Problem
from registry.store import master_outlying, masters
from registry.store.engine import Registry, writing

EAST = [512_000.0, 513_500.0, 511_200.0, 514_100.0]
NORTH = [6_710_900.0, 6_712_040.0, 6_713_300.0, 6_711_500.0]  # about 60.5 degrees north


def bring(connection: Any, kind: str, rows: dict[str, list[Any]]) -> masters.Outcome:
    count = len(next(iter(rows.values())))
    return masters.upsert(connection, kind, rows, np.arange(2, count + 2), f"{kind}.csv")


def sites(east: list[float], north: list[float], first: int = 1, **more: Any) -> dict[str, list[Any]]:
    count = len(east)
    codes = [f"P{number}" for number in range(first, first + count)]
    rows = {"site_code": codes, "site_kind": ["outcrop"] * count, "area": ["Grey Hill"] * count}
    return {**rows, "easting": east, "northing": north, **{name: [value] * count for name, value in more.items()}}


@pytest.fixture
def looked(any_registry: Registry) -> Any:
    """Brings rows into a registry that holds the area Grey Hill and four sites of it; the problems."""

    def look(kind: str, rows: dict[str, list[Any]]) -> list[Problem]:
        with writing(any_registry) as connection:
            return bring(connection, kind, rows).problems

    assert look("areas", {"area": ["Grey Hill"], "epsg": [32633]}) == []
    assert look("sites", sites(EAST, NORTH)) == []
    return look


def test_northing_one_digit_short_is_remarked_with_both_distances_and_the_lost_digit(looked: Any) -> None:
    (problem,) = looked("sites", sites([513_000.0], [671_204.0], first=9))
    assert (problem.severity, problem.row, problem.column) == ("warning", 2, "northing")
    assert problem.what == "the site lies very far from the others of its area"
    assert "latitude 6.07" in (problem.found or "") and "km from the median of area Grey Hill" in (problem.found or "")
    distance = float((problem.found or "").split(": ")[1].split(" km")[0].replace(",", ""))
    assert distance == pytest.approx(54.47 * 111.1, rel=0.01)
    assert (problem.expected or "").startswith("a place among the 5, of which half lie within 1.")
    assert problem.remedy == (
        "a digit is probably lost: the northing has 6 digits before the decimal sign, there it has 7"
    )


def test_faulty_site_is_found_among_those_of_its_own_file(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        bring(connection, "areas", {"area": ["Grey Hill"], "epsg": [32633]})
        (problem,) = bring(connection, "sites", sites(EAST, [*NORTH[:3], 671_150.0])).problems
    assert (problem.row, problem.column) == (5, "northing")


@pytest.mark.parametrize(
    ("east", "north", "more", "column", "words"),
    [
        (513_000.0, 6_712_000.0, {"epsg": 32634}, "epsg", "by EPSG:32633 it lies among them"),
        (513_000.0, 4_712_000.0, {}, "easting", "a digit is wrong, lost or too many"),
    ],
)
def test_likely_cause_is_what_brings_the_place_near_the_others(
    looked: Any, east: float, north: float, more: dict[str, Any], column: str, words: str
) -> None:
    (problem,) = [one for one in looked("sites", sites([east], [north], first=9, **more)) if "very far" in one.what]
    assert problem.column == column
    assert words in (problem.remedy or "")


def test_digit_too_many_is_told(looked: Any) -> None:
    looked("areas", {"area": ["Low Ridge"], "epsg": [32633]})
    looked("sites", {**sites(EAST, [67_120.0] * 4, first=50), "area": ["Low Ridge"] * 4})
    (problem,) = looked("sites", {**sites([512_000.0], [671_204.0], first=60), "area": ["Low Ridge"]})
    assert problem.column == "northing"
    assert problem.remedy == (
        "there is probably a digit too many: the northing has 6 digits before the decimal sign, there it has 5"
    )


def test_wrong_zone_is_remarked_on_once(looked: Any) -> None:
    assert len(looked("sites", sites([513_000.0], [6_712_000.0], first=9, epsg=32634))) == 1


@pytest.mark.parametrize(
    ("longitude", "latitude", "words"),
    [(60.5, 15.2, "longitude and latitude are probably exchanged"), (-15.2, 60.5, "the sign of the longitude")],
)
def test_degrees_exchanged_or_without_their_sign_are_told(
    looked: Any, longitude: float, latitude: float, words: str
) -> None:
    rows = {"site_code": ["P9"], "site_kind": ["outcrop"], "area": ["Grey Hill"]}
    (problem,) = looked("sites", {**rows, "longitude": [longitude], "latitude": [latitude]})
    assert "very far" in problem.what and problem.column == "longitude"
    assert words in (problem.remedy or "")


def test_sites_of_a_wide_area_are_taken_without_a_word(looked: Any) -> None:
    """Ten times the spread goes before 100 km: sites 20 km apart, one 150 km off."""
    looked("areas", {"area": ["Wide Plain"], "epsg": [32633]})
    east = [500_000.0, 520_000.0, 480_000.0, 540_000.0, 460_000.0, 650_000.0]
    assert looked("sites", {**sites(east, [6_700_000.0] * 6, first=20), "area": ["Wide Plain"] * 6}) == []


def test_new_coordinates_of_a_registered_site_are_compared_with_the_others_only(looked: Any) -> None:
    (problem,) = looked("sites", sites([512_000.0], [671_090.0]))
    assert "a place among the 4," in (problem.expected or "")
    assert looked("sites", {"site_code": ["P1"], "depth_m": [None], "elevation_m": [250.0]}) == []


def test_of_two_places_nothing_is_said(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        bring(connection, "areas", {"area": ["Grey Hill"], "epsg": [32633]})
        assert bring(connection, "sites", sites(EAST[:2], [NORTH[0], 671_204.0])).problems == []


def test_rows_without_an_area_are_remarked_on_where_few_lie_far_off(any_registry: Registry) -> None:
    without = {"area": [None] * 6, "epsg": [32633] * 6}
    with writing(any_registry) as connection:
        one_far = bring(connection, "sites", {**sites([512_000.0] * 6, [*([6_712_000.0] * 5), 671_200.0]), **without})
        clusters = sites([512_000.0] * 6, [*([6_712_000.0] * 4), 5_712_000.0, 5_712_000.0], first=30)
        two_clusters = bring(connection, "sites", {**clusters, **without})
    assert [problem.row for problem in one_far.problems] == [7]
    assert "the rows of the file that name no area" in (one_far.problems[0].found or "")
    assert two_clusters.problems == []


def test_sample_with_coordinates_of_its_own_is_compared_with_the_sites_of_its_area(looked: Any) -> None:
    rows = {"sample_code": ["F1", "F2"], "site_code": ["P1", "P2"], "easting": [512_100.0, 513_000.0],
            "northing": [6_711_000.0, 671_300.0], "epsg": [32633, 32633]}  # fmt: skip
    (problem,) = looked("samples", rows)
    assert (problem.row, problem.what) == (3, "the sample lies very far from the others of its area")


def test_many_far_sites_are_listed_up_to_a_number_and_counted(looked: Any) -> None:
    looked("sites", sites([512_000.0] * 60, [6_712_000.0] * 60, first=100))
    problems = looked("sites", sites([512_000.0] * 25, [671_200.0] * 25, first=200))
    assert len(problems) == master_outlying.LISTED + 1
    assert problems[-1].what == "5 more sites lie very far from the others of their area"
    assert problems[-1].severity == "warning"


@pytest.mark.parametrize(("easting", "northing"), [(60.54, 15.22), (15.22, 60.54), (150.1, -33.2)])
def test_degrees_in_easting_and_northing_are_refused_and_called_degrees(
    looked: Any, easting: float, northing: float
) -> None:
    (problem,) = looked("sites", sites([easting], [northing], first=9))
    assert (problem.severity, problem.row, problem.what) == ("problem", 2, "easting and northing look like degrees")
    assert "these look like degrees: give them as longitude and latitude" in (problem.remedy or "")


def test_degrees_without_a_system_are_called_degrees_for_samples_too(looked: Any) -> None:
    rows = {"sample_code": ["F1"], "easting": [15.22], "northing": [60.54]}
    (problem,) = looked("samples", rows)
    assert problem.what == "easting and northing look like degrees"


def test_degrees_in_a_system_of_degrees_are_taken(looked: Any) -> None:
    assert looked("sites", sites([15.22], [60.54], first=9, epsg=4326)) == []
