"""Coordinates outside the area of use of their system, gaps down a hole, codes that are almost known.

Sites and codes are invented. The bounds of the areas of use are those of the EPSG registry, as pyproj ships it:
EPSG:32719 (WGS 84 / UTM zone 19S) is used from 72 to 66 degrees west between 80 degrees south and the equator.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from registry.errors import Problem
from registry.store import masters, positions
from registry.store.engine import Registry, writing
from registry.store.near_codes import nearest


def bring(connection: Any, kind: str, rows: dict[str, list[Any]]) -> masters.Outcome:
    count = len(next(iter(rows.values())))
    return masters.upsert(connection, kind, rows, np.arange(2, count + 2), f"{kind}.csv")


def site(easting: float, northing: float, **more: Any) -> dict[str, list[Any]]:
    cells = {"site_code": "P1", "site_kind": "outcrop", "epsg": 32719, "easting": easting, "northing": northing}
    return {name: [value] for name, value in {**cells, **more}.items()}


@pytest.fixture
def problems_of(sqlite_registry: Registry) -> Any:
    def look(kind: str, rows: dict[str, list[Any]]) -> list[Problem]:
        with writing(sqlite_registry) as connection:
            return bring(connection, kind, rows).problems

    return look


def test_coordinates_within_the_area_of_use_are_taken_without_a_word(problems_of: Any) -> None:
    assert problems_of("sites", site(450000.0, 7350000.0)) == []


def test_exchanged_coordinates_are_refused_and_called_exchanged(problems_of: Any) -> None:
    (problem,) = problems_of("sites", site(7350000.0, 450000.0))
    assert problem.severity == "problem"
    assert "outside the area of use" in problem.what
    assert "easting and northing are probably exchanged" in (problem.remedy or "")


def test_coordinates_of_lost_digits_are_refused_with_the_bounds_of_the_system(problems_of: Any) -> None:
    (problem,) = problems_of("sites", site(45000.0, 735000.0))
    assert problem.severity == "problem"
    assert "EPSG:32719, WGS 84 / UTM zone 19S: -72 to -66 degrees of longitude" in (problem.expected or "")
    assert "check the EPSG code (zone, hemisphere)" in (problem.remedy or "")


def test_map_carried_a_little_beyond_its_zone_is_remarked_on_and_taken(problems_of: Any) -> None:
    (problem,) = problems_of("sites", site(850000.0, 7350000.0))
    assert problem.severity == "warning"
    assert "carried on beyond its zone" in (problem.remedy or "")


def test_sample_with_coordinates_of_its_own_is_checked_as_a_site_is(problems_of: Any) -> None:
    rows = {"sample_code": ["F1"], "easting": [7350000.0], "northing": [450000.0], "epsg": [32719]}
    (problem,) = problems_of("samples", rows)
    assert "probably exchanged" in (problem.remedy or "")


def test_site_in_another_zone_than_its_area_is_remarked_on(problems_of: Any) -> None:
    assert problems_of("areas", {"area": ["North Block"], "epsg": [32719]}) == []
    (problem,) = problems_of("sites", site(450000.0, 7350000.0, epsg=32721, area="North Block"))
    assert problem.severity == "warning"
    assert "the coordinate system of its area is not used" in problem.what


def test_longitude_and_latitude_of_another_place_are_remarked_on(problems_of: Any) -> None:
    (problem,) = problems_of("sites", site(450000.0, 7350000.0, longitude=-68.0, latitude=-23.961))
    assert problem.severity == "warning"
    assert "another place than easting and northing" in problem.what


def test_area_of_use_across_180_degrees_holds_places_on_both_sides() -> None:
    # EPSG:3832 (WGS 84 / PDC Mercator): 98.69 east to 68 west, across 180 degrees
    outside = positions.degrees_outside([179.0, -179.0, 10.0], [0.0, 0.0, 0.0], [3832, 3832, 3832])
    assert outside[:2].tolist() == [0.0, 0.0]
    assert outside[2] > 60.0


def test_gap_between_intervals_is_remarked_on_and_joined_ones_are_not(problems_of: Any) -> None:
    problems_of("sites", {"site_code": ["H1"], "site_kind": ["drill_hole"]})
    joined = {"site_code": ["H1"] * 3, "from_m": [0.0, 5.0, 20.0], "to_m": [20.0, 8.0, 30.0]}
    assert [problem.what for problem in problems_of("intervals", joined)] == []
    (gap,) = problems_of("intervals", {"site_code": ["H1"], "from_m": [42.0], "to_m": [50.0]})
    assert (gap.severity, gap.row, gap.found) == ("warning", 2, "nothing from 30 to 42 m")


def test_new_code_that_is_almost_a_registered_one_is_remarked_on(problems_of: Any) -> None:
    problems_of("samples", {"sample_code": ["BH1-001"]})
    (problem,) = problems_of("samples", {"sample_code": ["BH1-1", "BH1-002"]})
    assert (problem.severity, problem.row, problem.expected) == ("warning", 2, "perhaps 'BH1-001'")


def test_changes_of_coordinates_are_told_with_all_their_digits(sqlite_registry: Registry) -> None:
    with writing(sqlite_registry) as connection:
        bring(connection, "sites", site(450123.25, 7350000.0))
        changes = bring(connection, "sites", site(450123.5, 7350001.0)).changes
    assert "site P1: easting 450123.25 -> 450123.5" in changes
    assert "site P1: northing 7350000 -> 7350001" in changes


def test_nearest_code_is_one_written_otherwise_before_one_of_like_letters() -> None:
    known = ["S-001", "S-012", "Big Stock"]
    assert nearest(["S-1", "S-013", "Big Stokc", "X99"], known) == {"S-1": "S-001", "Big Stokc": "Big Stock"}
