"""The queries behind the map, on both engines. Every name and number is invented, to test branches only."""

from __future__ import annotations

import pytest
import sqlalchemy as sa

from registry.judging import install_shipped_definitions
from registry.map_files import map_file
from registry.map_grids import places_of
from registry.store import tables
from registry.store.engine import Registry, reading, writing
from registry.store.reading.columns import load_columns
from registry.store.reading.drawn_samples import GROUPS, Group
from registry.store.reading.filters import Filter, parse_filter
from registry.store.reading.maps import BASIS, EASTING, VALUE, map_rows, map_sites, place_details
from registry.targets.definition import load_definitions


@pytest.fixture
def registry(any_registry: Registry) -> Registry:
    """A hole with two survey stations and an outcrop without anything; two samples of the hole, one a blank."""
    with writing(any_registry) as connection:
        install_shipped_definitions(connection, tuple(load_definitions().values()))

        def insert(table: sa.Table, **values: object) -> int:
            key = connection.execute(sa.insert(table).values(**values)).inserted_primary_key
            assert key is not None
            return int(key[0])

        area = insert(tables.area, name="North", epsg=32633)
        hole = insert(tables.site, code="D-1", kind="drill_hole", area_id=area, easting=5e5, northing=6.1e6,
                      epsg=32633, longitude=15.0, latitude=55.04, depth_m=80.0)  # fmt: skip
        insert(tables.site, code="O-1", kind="outcrop")
        for depth in (0.0, 60.0):
            insert(tables.survey, site_id=hole, depth_m=depth, azimuth_deg=90.0, dip_deg=-60.0)
        insert(tables.sample, code="A-1", kind="core", site_id=hole, from_m=1.0, to_m=3.0, easting=500001.0,
               northing=6.1e6, epsg=32633, longitude=15.00002, latitude=55.04, position_basis="desurveyed")  # fmt: skip
        insert(tables.sample, code="A-2", kind="blank")
        connection.execute(sa.insert(tables.composition).values(sample_id=1, sr_ppm=300.0, qualifiers="." * 81,
                                                                digestions="." * 81))  # fmt: skip
    return any_registry


@pytest.mark.parametrize("by", [*GROUPS, "porphyry_copper"])
def test_map_rows_hold_coordinates_and_group_of_every_sample(registry: Registry, by: str) -> None:
    with reading(registry) as connection:
        rows = map_rows(connection, Filter(), Group(by) if by in GROUPS else Group("verdict", by), None)
    assert rows[0][EASTING : VALUE + 1] == (500001.0, 6.1e6, 32633, 15.00002, 55.04, "desurveyed", None)
    assert rows[1][EASTING : VALUE + 1] == (None,) * 7
    assert [row[:2] for row in rows] == [(1, 0), (2, 1)]
    assert rows[0][2] == {"area": "North", "site_kind": "drill_hole", "sample_kind": "core"}.get(by)
    assert places_of([row[EASTING:BASIS] for row in rows]).known.tolist() == [True, False]


def test_map_rows_hold_the_number_asked_for_in_place_of_the_group(registry: Registry) -> None:
    with reading(registry) as connection:
        columns = load_columns(connection)
        rows = map_rows(connection, Filter(), Group("verdict", "tin"), columns["sr_ppm"])
        assert [(row[2], row[VALUE]) for row in rows] == [(None, 300.0), (None, None)]
        some = parse_filter({"text": ["a-1"], "area": ["North"], "site": ["D-1"], "sr_ppm_min": ["10"]}, columns, [])
        assert [row[0] for row in map_rows(connection, some, Group("intrusion"), None)] == [1]
        judged = parse_filter({"target": ["tin"], "verdict": ["favourable"]}, columns, ["tin"])
        assert map_rows(connection, judged, Group("verdict", "porphyry_copper"), None) == []


def test_map_sites_hold_their_survey_and_the_system_of_their_area(registry: Registry) -> None:
    with reading(registry) as connection:
        found = list(map_sites(connection).values())
    assert [site["code"] for site in found] == ["D-1", "O-1"]
    assert {name: found[0][name] for name in ("area", "area_epsg", "stations", "last_m", "depth_m")} == {
        "area": "North", "area_epsg": 32633, "stations": 2, "last_m": 60.0, "depth_m": 80.0,
    }  # fmt: skip
    assert (found[1]["stations"], found[1]["last_m"], found[1]["area_epsg"]) == (0, None, None)


def test_place_details_and_file_hold_what_has_a_place(registry: Registry) -> None:
    with reading(registry) as connection:
        details = place_details(connection, [1, 99])
        assert list(details) == [1]
        assert (details[1]["code"], details[1]["site"], details[1]["from_m"]) == ("A-1", "D-1", 1.0)
        assert place_details(connection, []) == {}
        content = map_file(connection, Filter(), load_columns(connection), "geojson").decode()
        assert content.count('"Feature"') == 1
        assert '"coordinates":[15.00002,55.04]' in content
        assert map_file(connection, Filter(), load_columns(connection), "gpkg").startswith(b"SQLite format 3")
