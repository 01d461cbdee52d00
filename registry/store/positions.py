"""Where sites and samples lie: coordinates between systems by pyproj, and down surveyed holes."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from functools import cache
from typing import Any

import numpy as np
import pyproj
import sqlalchemy as sa

from registry.store import raw_rows
from registry.store.desurvey import offsets

POSITION_COLUMNS = ("easting", "northing", "elevation_m", "epsg", "longitude", "latitude", "position_basis")
OWN = "own coordinates"
STATION = "station"
COLLAR_NO_SURVEY = "collar: no survey"
COLLAR_NO_DEPTH = "collar: no depths"
COLLAR_MAGNETIC = "collar: azimuths are magnetic, declination not known"
DESURVEYED = "desurveyed, middle of the interval"
BEYOND = "desurveyed, straight on beyond the last station"
_WGS84 = 4326


def known_epsg(code: int) -> bool:
    """Whether pyproj knows a coordinate system by this EPSG code."""
    return _crs(int(code)) is not None


@cache
def _crs(code: int) -> pyproj.CRS | None:
    try:
        return pyproj.CRS.from_epsg(code)
    except pyproj.exceptions.CRSError:
        return None


@cache
def _transformer(from_epsg: int, to_epsg: int) -> pyproj.Transformer:
    return pyproj.Transformer.from_crs(from_epsg, to_epsg, always_xy=True)


def longitude_latitude(easting: Any, northing: Any, epsg: Any) -> tuple[np.ndarray, np.ndarray]:
    """Longitude and latitude (degrees, WGS 84) of coordinates in their systems, all (n,); NaN where any is missing,
    the system is unknown or the point lies outside it."""
    east, north = np.asarray(easting, dtype=np.float64), np.asarray(northing, dtype=np.float64)
    systems = np.asarray(epsg, dtype=np.float64)
    longitude, latitude = np.full(east.shape, np.nan), np.full(east.shape, np.nan)
    given = ~(np.isnan(east) | np.isnan(north) | np.isnan(systems))
    for code in np.unique(systems[given]).astype(int).tolist():
        if not known_epsg(code):
            continue
        rows = given & (systems == code)
        lon, lat = _transformer(code, _WGS84).transform(east[rows], north[rows])
        inside = np.isfinite(lon) & np.isfinite(lat) & (np.abs(lat) <= 90.0)
        longitude[rows], latitude[rows] = np.where(inside, lon, np.nan), np.where(inside, lat, np.nan)
    return longitude, latitude


def easting_northing(longitude: float, latitude: float, epsg: int) -> tuple[float, float]:
    """Easting and northing, in the unit of a system that pyproj knows, of a place in degrees (WGS 84); infinite where
    the system does not reach."""
    east, north = _transformer(_WGS84, epsg).transform(longitude, latitude)
    return float(east), float(north)


def in_degrees(epsg: Any) -> np.ndarray:
    """Whether each coordinate system (n,) is in degrees of longitude and latitude; False where it is not known."""
    systems = np.asarray(epsg, dtype=np.float64)
    angular = np.zeros(systems.shape, dtype=bool)
    for code in np.unique(systems[~np.isnan(systems)]).astype(int).tolist():
        crs = _crs(code)
        if crs is not None and crs.is_geographic:
            angular[systems == code] = True
    return angular


def degrees_outside(longitude: Any, latitude: Any, epsg: Any) -> np.ndarray:
    """How far each place (degrees, WGS 84, all (n,)) lies outside the area of use of its system (EPSG registry).

    In degrees of longitude or latitude, whichever is more; 0 inside, NaN where a number is missing or the system has no
    area of use.
    """
    lon, lat = np.asarray(longitude, dtype=np.float64), np.asarray(latitude, dtype=np.float64)
    systems = np.asarray(epsg, dtype=np.float64)
    beyond = np.full(lon.shape, np.nan)
    given = ~(np.isnan(lon) | np.isnan(lat) | np.isnan(systems))
    for code in np.unique(systems[given]).astype(int).tolist():
        crs = _crs(code)
        area = None if crs is None else crs.area_of_use
        if area is None:
            continue
        rows = given & (systems == code)
        width = (area.east - area.west) % 360.0 or 360.0  # an area may lie across 180 degrees
        middle = area.west + 0.5 * width
        across = np.abs((lon[rows] - middle + 180.0) % 360.0 - 180.0) - 0.5 * width
        along = np.maximum(area.south - lat[rows], lat[rows] - area.north)
        beyond[rows] = np.maximum(0.0, np.maximum(across, along))
    return beyond


def name_of_system(code: int) -> str:
    """The name of a coordinate system and the bounds of its area of use, in words."""
    crs = _crs(int(code))
    if crs is None:
        return f"EPSG:{int(code)}"
    area = crs.area_of_use
    if area is None:
        return f"EPSG:{int(code)}, {crs.name}"
    bounds = f"{area.west:g} to {area.east:g} degrees of longitude, {area.south:g} to {area.north:g} of latitude"
    return f"EPSG:{int(code)}, {crs.name}: {bounds}"


def locate(connection: sa.Connection, site_ids: Sequence[int | None], from_m: Any, to_m: Any) -> dict[str, np.ndarray]:
    """Positions of n samples from their sites and depths: ``POSITION_COLUMNS`` as arrays (n,), NaN or None unknown.

    An outcrop gives the station. A hole gives the middle of the interval, desurveyed by minimum curvature; without a
    survey, without depths or with magnetic azimuths it gives the collar, and ``position_basis`` says so.
    """
    n = len(site_ids)
    found: dict[str, np.ndarray] = {
        name: np.full(n, None, dtype=object) if name == "position_basis" else np.full(n, np.nan)
        for name in POSITION_COLUMNS
    }
    rows_of: dict[int, list[int]] = defaultdict(list)
    for row, site_id in enumerate(site_ids):
        if site_id is not None:
            rows_of[site_id].append(row)
    if not rows_of:
        return found
    start, end = np.asarray(from_m, dtype=np.float64), np.asarray(to_m, dtype=np.float64)
    middle = np.where(np.isnan(start) | np.isnan(end), np.where(np.isnan(start), end, start), 0.5 * (start + end))
    surveys = _surveys(connection, rows_of)
    sites = raw_rows.select(
        connection,
        "SELECT site_id, kind, azimuth_reference, easting, northing, elevation_m, epsg, longitude, latitude FROM site "
        "WHERE site_id {ids}",
        rows_of,
    )
    for site_id, kind, reference, *place in sites:
        rows = np.array(rows_of[site_id])
        collar = np.array(place, dtype=np.float64)
        if np.isnan(collar[[0, 4]]).all():
            continue
        for name, value in zip(POSITION_COLUMNS, collar.tolist(), strict=False):
            found[name][rows] = value
        if kind != "drill_hole":
            found["position_basis"][rows] = STATION
            continue
        found["position_basis"][rows] = _down_hole(found, rows, collar, middle[rows], surveys.get(site_id), reference)
    return found


def _down_hole(
    found: dict[str, np.ndarray],
    rows: np.ndarray,
    collar: np.ndarray,
    depths: np.ndarray,
    survey: np.ndarray | None,
    reference: str | None,
) -> np.ndarray:
    """Move rows from the collar down the hole, in place; the basis of each."""
    if survey is None:
        return np.full(len(rows), COLLAR_NO_SURVEY, dtype=object)
    if reference == "magnetic":
        return np.full(len(rows), COLLAR_MAGNETIC, dtype=object)
    basis = np.full(len(rows), COLLAR_NO_DEPTH, dtype=object)
    deep = ~np.isnan(depths)
    if not deep.any():
        return basis
    at = rows[deep]
    easting, northing, elevation, epsg, longitude, latitude = collar.tolist()
    crs = None if np.isnan(epsg) else _crs(int(epsg))
    projected = crs is not None and crs.is_projected and not np.isnan(easting)
    turned = survey[:, 1]
    if projected and reference != "grid":  # true north, also where nothing is said
        turned = turned + _grid_bearing_of_true_north(longitude, latitude, int(epsg))
    shift = offsets(survey[:, 0], turned, survey[:, 2], depths[deep])
    found["elevation_m"][at] = elevation + shift[:, 2]
    if projected and crs is not None:
        metres = crs.axis_info[0].unit_conversion_factor
        found["easting"][at] = easting + shift[:, 0] / metres
        found["northing"][at] = northing + shift[:, 1] / metres
        lon, lat = longitude_latitude(found["easting"][at], found["northing"][at], np.full(len(at), epsg))
    else:
        bearing = np.degrees(np.arctan2(shift[:, 0], shift[:, 1]))
        away = np.hypot(shift[:, 0], shift[:, 1])
        lon, lat, _ = pyproj.Geod(ellps="WGS84").fwd(
            np.full(len(at), longitude), np.full(len(at), latitude), bearing, away
        )
        if not np.isnan(easting):
            found["easting"][at], found["northing"][at] = _transformer(_WGS84, int(epsg)).transform(lon, lat)
    found["longitude"][at], found["latitude"][at] = lon, lat
    basis[deep] = np.where(depths[deep] > survey[-1, 0], BEYOND, DESURVEYED)
    return basis


def _grid_bearing_of_true_north(longitude: float, latitude: float, epsg: int) -> float:
    """Degrees clockwise from grid north to true north at a point."""
    step = 1e-4
    east, north = _transformer(_WGS84, epsg).transform([longitude, longitude], [latitude - step, latitude + step])
    return float(np.degrees(np.arctan2(east[1] - east[0], north[1] - north[0])))


def _surveys(connection: sa.Connection, site_ids: Any) -> dict[int, np.ndarray]:
    rows = raw_rows.select(
        connection,
        "SELECT site_id, depth_m, azimuth_deg, dip_deg FROM survey WHERE site_id {ids} ORDER BY site_id, depth_m",
        site_ids,
    )
    if not rows:
        return {}
    table = raw_rows.numbers_of(rows, 4)
    starts = np.flatnonzero(np.r_[True, table[1:, 0] != table[:-1, 0]])
    return {int(part[0, 0]): part[:, 1:] for part in np.split(table, starts[1:])}


def replace_positions(connection: sa.Connection, site_ids: Sequence[int]) -> int:
    """Locate every sample of these sites anew and store what moved; how many. Samples with own coordinates stay."""
    if not len(site_ids):
        return 0
    stored = raw_rows.select(
        connection,
        f"SELECT sample_id, site_id, from_m, to_m, {', '.join(POSITION_COLUMNS)} FROM sample WHERE site_id {{ids}}",
        site_ids,
    )
    stored = [row for row in stored if row[-1] != OWN]
    if not stored:
        return 0
    ids, sites, from_m, to_m, *before = zip(*stored, strict=True)
    found = locate(connection, sites, from_m, to_m)
    after = [plain_position(name, found[name]) for name in POSITION_COLUMNS]
    moved = [
        {"_id": sample_id, **dict(zip(POSITION_COLUMNS, new, strict=True))}
        for sample_id, old, new in zip(ids, zip(*before, strict=True), zip(*after, strict=True), strict=True)
        if old != new
    ]
    if moved:
        sets = ", ".join(f"{name} = :{name}" for name in POSITION_COLUMNS)
        connection.execute(sa.text(f"UPDATE sample SET {sets} WHERE sample_id = :_id"), moved)
    return len(moved)


def plain_position(name: str, column: np.ndarray) -> list[Any]:
    """A column of :func:`locate` as it is stored: None for NaN, EPSG codes whole."""
    if column.dtype.kind != "f":
        return column.tolist()
    values = column.tolist()
    if name == "epsg":
        return [None if value != value else int(value) for value in values]
    return [None if value != value else value for value in values]
