"""The grid, frame and traces of the map. Control points are published where a source stands beside them; the rest is
recomputed with pyproj called separately, or plain geometry. Coordinates without a source are invented.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pyproj
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from registry.map_grids import Grid, Places, choose_grid, middle_of, places_of, to_grid, true_north_deg
from registry.mapping import (
    LEAST_WIDTH_M,
    SHAPES,
    TRACE_POINTS,
    classes_in_cells,
    classes_of,
    finite,
    frame_about,
    frame_of,
    grid_lines,
    round_length,
    stacked,
    traces,
)
from registry.store import schema
from registry.store.engine import reading

NAN = float("nan")


def entered(epsg: int, *pairs: tuple[float, float]) -> Places:
    """Places entered in one system, with degrees by pyproj."""
    east, north = np.array(pairs).T
    lon, lat = pyproj.Transformer.from_crs(epsg, 4326, always_xy=True).transform(east, north)
    return Places(east, north, np.full(len(pairs), float(epsg)), np.asarray(lon), np.asarray(lat))


def degrees(*pairs: tuple[float, float]) -> Places:
    """Places given as longitude and latitude alone."""
    lon, lat = np.array(pairs, dtype=float).T
    none = np.full(len(pairs), NAN)
    return Places(none, none, none, lon, lat)


def both(first: Places, second: Places) -> Places:
    return Places(*(np.r_[getattr(first, n), getattr(second, n)] for n in Places.__dataclass_fields__))


def chosen(places: Places, areas: set[int] | None = None) -> Grid:
    grid = choose_grid(places, areas or set())
    assert grid is not None
    return grid


def test_to_grid_of_degrees_gives_the_published_control_point() -> None:
    """ETRS89-extended / LAEA Europe (EPSG:3035), 50 N 5 E: 3 962 799.45 E, 2 999 718.85 N. IOGP Publication 373-7-2
    (EPSG Guidance Note 7 part 2), example of the Lambert azimuthal equal-area projection; from memory."""
    places = degrees((5.0, 50.0))
    grid = chosen(places, {3035})
    assert grid.epsg == 3035
    assert grid.why == "the system of the area"
    x, y = to_grid(grid, places)
    assert [x[0], y[0]] == pytest.approx([3962799.45, 2999718.85], abs=0.01)


@pytest.mark.parametrize(("lat", "code"), [(0.0, 32631), (-0.001, 32731)])
def test_utm_grid_has_its_origin_where_the_definition_puts_it(lat: float, code: int) -> None:
    """A central meridian has easting 500 000; the equator northing 0, in the south 10 000 000 (definition of UTM,
    published: NGA.SIG.0012, 2014). One thousandth of a degree of latitude is 110.574 m there (WGS 84), times 0.9996."""
    grid = chosen(degrees((3.0, lat)))
    assert grid.epsg == code
    x, y = to_grid(grid, degrees((3.0, lat)))
    assert x[0] == pytest.approx(500000.0, abs=0.001)
    assert y[0] == pytest.approx(0.0 if lat == 0 else 1e7 - 110.574 * 0.9996, abs=0.01)


def test_grid_of_one_system_keeps_coordinates_as_entered() -> None:
    places = entered(32633, (500000.0, 6.1e6), (503210.5, 6099000.25))
    grid = chosen(places, {32632})
    assert grid.epsg == 32633
    assert "entered" in grid.why
    x, y = to_grid(grid, places)
    assert x.tolist() == [500000.0, 503210.5]
    assert y.tolist() == [6.1e6, 6099000.25]


def test_grid_of_two_systems_is_the_zone_of_the_middle_recomputed_with_pyproj() -> None:
    places = both(entered(32632, (700000.0, 6.1e6)), entered(32633, (410000.0, 6.1e6)))
    grid = chosen(places, {32632, 32633})
    assert grid.epsg in (32632, 32633)
    assert "several systems" in grid.why
    x, y = to_grid(grid, places)
    again = pyproj.Transformer.from_crs(4326, grid.epsg, always_xy=True)
    east, north = again.transform(places.longitude, places.latitude)
    assert x == pytest.approx(np.asarray(east), abs=1e-3)
    assert y == pytest.approx(np.asarray(north), abs=1e-3)


@pytest.mark.parametrize(
    ("code", "lonlat", "why"),
    [
        (2263, (-74.0, 40.7), "foot"),  # New York Long Island in feet
        (3857, (15.0, 60.0), "not a metre on this ground"),  # the web's Mercator: twice too long at 60 degrees
        (3031, (20.0, -75.0), "do not run east and north"),  # Antarctic polar stereographic
        (2048, (19.2, -33.0), "do not run east and north"),  # counts west and south
        (4326, (15.0, 55.0), "degrees"),
        (999999, (15.0, 55.0), "not known"),
    ],
)
def test_system_unfit_for_a_map_gives_way_to_a_utm_zone_with_the_reason(
    code: int, lonlat: tuple[float, float], why: str
) -> None:
    grid = chosen(degrees(lonlat), {code})
    assert why in grid.why
    assert f"EPSG:{code}" in grid.why
    assert grid.epsg is not None
    assert 32601 <= grid.epsg <= 32760


def test_wide_extent_takes_an_equal_area_grid_about_the_middle() -> None:
    """Areas are kept: a square degree at 60 N has half the area of one on the equator within 1 % (sphere: cos 60 = 0.5;
    ellipsoid by pyproj.Geod, recomputed)."""
    corners = degrees((-60.0, 0.0), (60.0, 0.0), (0.0, 65.0), (0.0, -5.0))
    grid = chosen(corners)
    assert grid.epsg is None
    assert "equal-area" in grid.name
    assert "no UTM zone" in grid.why
    geod = pyproj.Geod(ellps="WGS84")
    for lon, lat in ((40.0, 0.0), (20.0, 60.0)):
        step = np.linspace(0.0, 1.0, 51)
        lons = np.r_[lon + step, np.full(51, lon + 1), lon + 1 - step, np.full(51, lon)]
        lats = np.r_[np.full(51, lat), lat + step, np.full(51, lat + 1), lat + 1 - step]
        x, y = to_grid(grid, degrees(*zip(lons.tolist(), lats.tolist(), strict=True)))
        area = 0.5 * abs(float(np.dot(x, np.roll(y, 1)) - np.dot(y, np.roll(x, 1))))
        assert area == pytest.approx(abs(geod.polygon_area_perimeter(lons, lats)[0]), rel=1e-3)


def test_places_about_a_pole_take_an_equal_area_grid() -> None:
    assert chosen(degrees((10.0, 86.0), (10.5, 86.1))).epsg is None


def test_places_across_the_date_line_have_their_middle_there() -> None:
    middle, latitude, width = middle_of(np.array([179.0, -179.0]), np.array([-17.0, -18.0]))
    assert abs(middle) == pytest.approx(180.0)
    assert (latitude, width) == (-17.5, pytest.approx(2.0))
    grid = chosen(degrees((179.0, -17.0), (-179.0, -18.0)))
    assert grid.epsg in (32701, 32760)
    x, _ = to_grid(grid, degrees((179.0, -17.0), (-179.0, -18.0)))
    assert x[1] - x[0] == pytest.approx(212_000, rel=0.02)  # 2 degrees at 17.5 S: 2 x 111.32 km x cos 17.5


def test_no_place_has_no_grid_and_unknown_places_stay_unknown() -> None:
    nowhere = places_of([[None] * 5, [1.0, 2.0, None, None, None]])
    assert choose_grid(nowhere, {32633}) is None
    assert choose_grid(places_of([]), set()) is None
    mixed = both(degrees((15.0, 55.0)), nowhere)
    x, y = to_grid(chosen(mixed), mixed)
    assert np.isfinite(x).tolist() == [True, False, False]
    assert finite(x, y) == 1


@pytest.mark.parametrize("lon", [1.0, 3.0, 5.0])
def test_true_north_follows_the_convergence_of_the_meridians(lon: float) -> None:
    """tan(convergence) = tan(longitude from the meridian) sin(latitude), on the sphere (Snyder, J.P. 1987, USGS
    Professional Paper 1395; from memory). East of the meridian true north lies west of grid north."""
    grid = chosen(degrees((3.0, 60.0)))
    x, y = to_grid(grid, degrees((lon, 60.0)))
    expected = -math.degrees(math.atan(math.tan(math.radians(lon - 3.0)) * math.sin(math.radians(60.0))))
    assert true_north_deg(grid, float(x[0]), float(y[0])) == pytest.approx(expected, abs=0.01)


_COORDINATES = st.lists(
    st.tuples(st.floats(-9e6, 9e6), st.floats(-9e6, 9e6)), min_size=1, max_size=30
)  # fmt: skip


@settings(deadline=None)
@given(_COORDINATES)
def test_frame_holds_every_place_with_one_scale_for_both_axes(pairs: list[tuple[float, float]]) -> None:
    x, y = np.array(pairs).T
    frame = frame_of(x, y)
    (west, east), (south, north) = frame.window.x, frame.window.y
    assert (east - west) / (north - south) == pytest.approx(SHAPES[frame.shape], rel=1e-6)
    assert east - west >= LEAST_WIDTH_M * SHAPES["tall"] / SHAPES["wide"] - 1e-6
    assert ((x > west) & (x < east) & (y > south) & (y < north)).all()
    step, eastings, northings = grid_lines(frame)
    assert len(eastings) + 1 >= 4 and len(eastings) <= 11
    for line in (*eastings, *northings):
        assert line / step == pytest.approx(round(line / step), abs=1e-6)


def test_frame_of_no_place_is_refused() -> None:
    with pytest.raises(ValueError, match="needs a place"):
        frame_of(np.array([NAN]), np.array([NAN]))


@pytest.mark.parametrize(("most", "length"), [(1.0, 1.0), (4.9, 2.0), (5.0, 5.0), (999.0, 500.0), (123456.0, 1e5)])
def test_round_length_is_the_largest_of_one_two_five(most: float, length: float) -> None:
    assert round_length(most) == length


def test_samples_on_one_place_are_one_stack_with_the_first_group_on_top() -> None:
    x = np.array([0.0, 0.0, 0.0, 1000.0, 500.0])
    y = np.zeros(5)
    frame = frame_of(x, y)
    found = stacked(frame, x, y, np.array([2, 1, 2, 0, 0]), np.array([7.0, 7.0, 7.0, 8.0, NAN]))
    by_count = {int(c): n for n, c in enumerate(found.count.tolist())}
    assert sorted(found.count.tolist()) == [1, 1, 3]
    three = by_count[3]
    assert found.leader[three] == 1
    assert found.tally[three] == [(1, 1), (2, 2)]
    assert found.one_site[three]
    assert found.spread_m[three] == 0.0
    largest = stacked(frame, x, y, np.array([2, 1, 2, 0, 0]), np.full(5, NAN), by_most=True)
    assert largest.leader[three] == 0
    assert not largest.one_site.any()
    highest = stacked(frame, x, y, np.zeros(5, dtype=int), np.full(5, 1.0), highest_of=np.array([NAN, 3.0, 9.0, 1, 1]))
    assert highest.leader[three] == 2


def test_stacks_of_nothing_are_none() -> None:
    frame = frame_of(np.array([0.0]), np.array([0.0]))
    none = np.empty(0)
    assert len(stacked(frame, none, none, none.astype(np.intp), none)) == 0


@settings(deadline=None)
@given(st.lists(st.one_of(st.floats(-1e6, 1e6), st.just(NAN)), max_size=80))
def test_classes_hold_every_value_in_ascending_order(values: list[float]) -> None:
    array = np.array(values, dtype=float)
    found = classes_of(array)
    assert sum(found.counts) == np.count_nonzero(np.isfinite(array))
    assert ((found.number >= 0) == np.isfinite(array)).all()
    for place, (least, most) in enumerate(found.ends):
        assert least <= most
        assert place == 0 or found.ends[place - 1][1] < least
        assert found.counts[place] == np.count_nonzero(found.number == place) > 0


def test_classes_hold_about_as_many_each() -> None:
    found = classes_of(np.arange(700.0) ** 3)
    assert len(found.counts) == 7
    assert min(found.counts) >= 99 and max(found.counts) <= 101


def test_cells_show_the_class_of_their_middle_sample() -> None:
    across, up = np.array([0.1, 0.1, 0.1, 0.9]), np.array([0.1, 0.1, 0.1, 0.9])
    filled, most = classes_in_cells(across, up, np.array([0, 5, 6, -1]), 10, 10)
    assert filled == [(1, 9, 5)] or filled == [(1, 8, 5)]
    assert most == 3


def test_trace_of_a_straight_hole_reaches_as_far_as_its_dip_says(tmp_path: Path) -> None:
    """Plain trigonometry: 200 m at a dip of -60 reach 100 m; heading 090 from grid north, all of it east."""

    def fill(connection: Any) -> None:
        for statement in (
            "INSERT INTO site (site_id, code, kind, easting, northing, elevation_m, epsg, longitude, latitude, depth_m,"
            " azimuth_reference) VALUES (1, 'A', 'drill_hole', 500000, 6100000, 100, 32633, 15, 55.04, 200, 'grid'), "
            "(2, 'B', 'drill_hole', 500000, 6100000, 100, 32633, 15, 55.04, 200, 'magnetic'), "
            "(3, 'C', 'drill_hole', 500000, 6100000, 100, 32633, 15, 55.04, 200, 'grid')",
            "INSERT INTO survey (site_id, depth_m, azimuth_deg, dip_deg) VALUES (1, 0, 90, -60), (2, 0, 90, -60)",
        ):
            connection.exec_driver_sql(statement)

    registry = schema.create(tmp_path / "holes.sqlite", fill)
    holes = [
        {"site_id": 1, "depth_m": 200.0, "last_m": 0.0, "stations": 1},
        {"site_id": 2, "depth_m": 200.0, "last_m": 0.0, "stations": 1},
        {"site_id": 3, "depth_m": 200.0, "last_m": None, "stations": 0},
    ]
    with reading(registry) as connection:
        sites, places = traces(connection, holes)
        none = traces(connection, ())
    registry.close()
    assert sites.tolist() == [1] * TRACE_POINTS
    assert places.easting[[0, -1]].tolist() == pytest.approx([500000.0, 500100.0])
    assert places.northing == pytest.approx(np.full(TRACE_POINTS, 6.1e6))
    assert len(none[0]) == 0
    assert len(none[1].easting) == 0
    assert frame_about((places.easting, np.empty(0)), (places.northing, np.empty(0))).shape == "wide"
