"""Coordinates between systems and down surveyed holes.

Minimum curvature is checked against the closed form of a circular arc (geometry, no source needed), against the
two-station formula of Taylor and Mason 1972 (from memory) worked with other means, and for straight holes against
plain trigonometry; coordinates against the published definition of UTM.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from registry.store import positions
from registry.store.desurvey import directions, offsets
from registry.store.engine import Registry, writing


def test_straight_hole_follows_trigonometry() -> None:
    found = offsets(np.array([0.0]), np.array([90.0]), np.array([-60.0]), np.array([0.0, 50.0, 200.0]))
    expected = [[0, 0, 0], [25.0, 0, -50 * math.sin(math.radians(60))], [100.0, 0, -200 * math.sin(math.radians(60))]]
    np.testing.assert_allclose(found, expected, atol=1e-9)


def test_hole_that_bends_through_a_quarter_circle_follows_it() -> None:
    """From straight down to level north over a quarter of a circle of radius 100 m."""
    radius, length = 100.0, 50.0 * math.pi
    share = np.linspace(0.0, 1.0, 11)
    found = offsets(np.array([0.0, length]), np.zeros(2), np.array([-90.0, 0.0]), share * length)
    angle = share * math.pi / 2
    expected = np.stack([np.zeros(11), radius * (1 - np.cos(angle)), -radius * np.sin(angle)], axis=1)
    np.testing.assert_allclose(found, expected, atol=1e-9)


def test_station_to_station_agrees_with_the_two_station_formula() -> None:
    """Inclinations from the vertical 20 and 35 degrees, azimuths 40 and 75, 100 m; formula worked with math."""
    inc1, inc2, az1, az2 = (math.radians(x) for x in (20.0, 35.0, 40.0, 75.0))
    dogleg = math.acos(math.cos(inc2 - inc1) - math.sin(inc1) * math.sin(inc2) * (1 - math.cos(az2 - az1)))
    factor = 2 / dogleg * math.tan(dogleg / 2)
    east = 50 * (math.sin(inc1) * math.sin(az1) + math.sin(inc2) * math.sin(az2)) * factor
    north = 50 * (math.sin(inc1) * math.cos(az1) + math.sin(inc2) * math.cos(az2)) * factor
    down = 50 * (math.cos(inc1) + math.cos(inc2)) * factor
    found = offsets(np.array([0.0, 100.0]), np.array([40.0, 75.0]), np.array([-70.0, -55.0]), np.array([100.0]))
    np.testing.assert_allclose(found, [[east, north, -down]], rtol=1e-12)


def test_hole_goes_straight_on_beyond_its_last_station_and_above_its_first() -> None:
    stations, azimuth, dip = np.array([20.0, 80.0]), np.array([10.0, 30.0]), np.array([-80.0, -70.0])
    found = offsets(stations, azimuth, dip, np.array([0.0, 20.0, 80.0, 100.0]))
    heading = directions(azimuth, dip)
    np.testing.assert_allclose(found[1] - found[0], 20.0 * heading[0], atol=1e-9)
    np.testing.assert_allclose(found[3] - found[2], 20.0 * heading[1], atol=1e-9)


@given(
    st.lists(st.tuples(st.floats(0, 360), st.floats(-90, 60), st.floats(1, 50)), min_size=1, max_size=8),
    st.floats(0.0, 0.99),
)
@settings(deadline=None, max_examples=80, derandomize=True)
def test_path_is_as_long_as_the_hole_and_has_no_jump(stations: list[tuple[float, float, float]], share: float) -> None:
    azimuth, dip, steps = (np.array(column) for column in zip(*stations, strict=True))
    depths = np.cumsum(steps) - steps[0]
    end = depths[-1] + 10.0
    at = np.linspace(0.0, end, 400)
    path = offsets(depths, azimuth, dip, at)
    pieces = np.linalg.norm(np.diff(path, axis=0), axis=1)
    assert (pieces <= np.diff(at) * (1 + 1e-9)).all()
    assert pieces.sum() == pytest.approx(end, rel=2e-2)
    one = offsets(depths, azimuth, dip, np.array([share * end]))
    near = offsets(depths, azimuth, dip, np.array([share * end + 1e-6]))
    assert np.linalg.norm(near - one) == pytest.approx(1e-6, rel=1e-3)


def test_survey_with_falling_depths_is_refused() -> None:
    with pytest.raises(ValueError, match="at least one station, with ascending depths"):
        offsets(np.array([10.0, 5.0]), np.zeros(2), np.zeros(2), np.array([1.0]))


def test_longitude_latitude_of_the_utm_origin_and_of_gaps() -> None:
    """UTM zone 33 has its origin (500000, 0) at 15 E on the equator by definition (EPSG:32633)."""
    east, north = np.array([500000.0, 500000.0, np.nan, 1e12]), np.array([0.0, 0.0, 0.0, 1e12])
    longitude, latitude = positions.longitude_latitude(east, north, np.array([32633, np.nan, 32633, 32633]))
    np.testing.assert_allclose(longitude[0], 15.0, atol=1e-9)
    np.testing.assert_allclose(latitude[0], 0.0, atol=1e-9)
    assert np.isnan(longitude[1:]).all()
    assert np.isnan(latitude[1:]).all()


def test_known_epsg_tells_a_system_from_a_number() -> None:
    assert positions.known_epsg(4326)
    assert not positions.known_epsg(29999)


PLACES = """
INSERT INTO site (code, kind, easting, northing, elevation_m, epsg, longitude, latitude, azimuth_reference) VALUES
 ('GRID', 'drill_hole', 600000, 5500000, 300, 32633, 16.386, 49.644, 'grid'),
 ('TRUE', 'drill_hole', 600000, 5500000, 300, 32633, 16.386, 49.644, 'true'),
 ('MAGN', 'drill_hole', 600000, 5500000, 300, 32633, 16.386, 49.644, 'magnetic'),
 ('BARE', 'drill_hole', 600000, 5500000, 300, 32633, 16.386, 49.644, 'true'),
 ('ROCK', 'outcrop', 600000, 5500000, 300, 32633, 16.386, 49.644, NULL),
 ('DEGR', 'drill_hole', NULL, NULL, 300, NULL, 16.386, 49.644, 'true'),
 ('VOID', 'drill_hole', NULL, NULL, NULL, NULL, NULL, NULL, NULL);
INSERT INTO survey (site_id, depth_m, azimuth_deg, dip_deg)
 SELECT site_id, 0, 0, -45 FROM site WHERE code NOT IN ('BARE', 'ROCK')
"""


@pytest.fixture
def placed(any_registry: Registry) -> Registry:
    with writing(any_registry) as connection:
        for statement in PLACES.strip().split(";\n"):
            connection.exec_driver_sql(statement)
    return any_registry


def located(registry: Registry, code: str, from_m: float | None, to_m: float | None) -> dict[str, object]:
    with writing(registry) as connection:
        site_id = connection.exec_driver_sql(f"SELECT site_id FROM site WHERE code = '{code}'").scalar()
        found = positions.locate(connection, [None, site_id], [None, from_m], [None, to_m])
    assert found["position_basis"][0] is None
    assert np.isnan(found["longitude"][0])
    return {name: column[1] for name, column in found.items()}


def test_hole_with_grid_azimuths_moves_along_the_grid(placed: Registry) -> None:
    found = located(placed, "GRID", 99.0, 101.0)
    shift = 100.0 * math.sqrt(0.5)
    assert found["position_basis"] == positions.BEYOND
    assert found["easting"] == pytest.approx(600000.0, abs=1e-6)
    assert found["northing"] == pytest.approx(5500000.0 + shift, abs=1e-6)
    assert found["elevation_m"] == pytest.approx(300.0 - shift, abs=1e-6)


def test_hole_with_true_azimuths_is_turned_by_the_convergence(placed: Registry) -> None:
    """Convergence east of the central meridian: atan(tan(dlon) sin(lat)), the spherical formula, to 0.01 degree."""
    found = located(placed, "TRUE", 100.0, 100.0)
    shift = 100.0 * math.sqrt(0.5)
    convergence = math.atan(math.tan(math.radians(16.386 - 15.0)) * math.sin(math.radians(49.644)))
    turned = math.atan2(found["easting"] - 600000.0, found["northing"] - 5500000.0)
    assert math.degrees(turned) == pytest.approx(-math.degrees(convergence), abs=0.01)
    assert math.hypot(found["easting"] - 600000.0, found["northing"] - 5500000.0) == pytest.approx(shift, abs=1e-6)


def test_hole_in_degrees_moves_on_the_ellipsoid(placed: Registry) -> None:
    """A minute of latitude is about 1853.6 m at 49.6 N on WGS 84 (111132.95 - 559.85 cos 2p m/deg, from memory)."""
    found = located(placed, "DEGR", 100.0, 100.0)
    metres_per_degree = 111132.95 - 559.85 * math.cos(2 * math.radians(49.644))
    assert found["longitude"] == pytest.approx(16.386, abs=1e-9)
    assert (found["latitude"] - 49.644) * metres_per_degree == pytest.approx(100.0 * math.sqrt(0.5), abs=0.05)
    assert np.isnan(found["easting"])


@pytest.mark.parametrize(
    ("code", "depths", "basis"),
    [
        ("BARE", (10.0, 20.0), positions.COLLAR_NO_SURVEY),
        ("MAGN", (10.0, 20.0), positions.COLLAR_MAGNETIC),
        ("GRID", (None, None), positions.COLLAR_NO_DEPTH),
        ("ROCK", (None, None), positions.STATION),
    ],
)
def test_position_that_is_only_the_collar_says_why(
    placed: Registry, code: str, depths: tuple[float | None, float | None], basis: str
) -> None:
    found = located(placed, code, *depths)
    assert found["position_basis"] == basis
    assert (found["easting"], found["northing"], found["elevation_m"]) == (600000.0, 5500000.0, 300.0)
    assert (found["longitude"], found["latitude"], found["epsg"]) == (16.386, 49.644, 32633)


def test_site_without_coordinates_gives_no_position(placed: Registry) -> None:
    found = located(placed, "VOID", 10.0, 20.0)
    assert found["position_basis"] is None
    assert np.isnan(found["longitude"])
