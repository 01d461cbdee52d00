"""Places that can hardly be meant: degrees where metres belong, and sites very far from the others of their area."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import pyproj
import sqlalchemy as sa

from registry.errors import Problem
from registry.store import positions, raw_rows

Rows = dict[str, list[Any]]
#: Equal remarks are listed up to this number, then counted.
LISTED = 20
#: A place is remarked on where it lies farther than both from the median of its area: so many kilometres, and so many
#: times the median distance of the places of the area from it. Common practice, no source.
FAR_KM = 100.0
FAR_SPREADS = 10.0
#: Easting and northing that are both within so much of zero are degrees: a projected system has its false origin far
#: from where it is used. Common practice, no source.
LARGEST_DEGREES = 180.0
_NO_AREA = -1
#: Rows that name no area may well lie in several: they are remarked on only where so few of them lie far off.
FEW_SHARE = 0.1
_CHECK = (
    "see whether a digit is wrong, lost or too many, easting and northing are exchanged, or the EPSG code is another "
    "zone's"
)


def look_like_degrees(easting: np.ndarray, northing: np.ndarray, epsg: np.ndarray) -> np.ndarray:
    """Whether each pair (all (n,), NaN missing) can only be degrees: small numbers, in no system of degrees."""
    small = (np.abs(easting) <= LARGEST_DEGREES) & (np.abs(northing) <= LARGEST_DEGREES)
    small &= (easting != 0.0) | (northing != 0.0)
    return small & ~positions.in_degrees(epsg)


def degrees_problems(
    easting: np.ndarray, northing: np.ndarray, degrees: np.ndarray, lines: Sequence[int], file: str
) -> list[Problem]:
    """A problem for each pair of ``degrees`` (bool, (n,))."""
    rows = np.flatnonzero(degrees).tolist()
    problems = [
        Problem(
            file,
            "easting and northing look like degrees",
            lines[row],
            "easting",
            f"{easting[row]:.10g}, {northing[row]:.10g}",
            "metres of a projected coordinate system",
            "these look like degrees: give them as longitude and latitude, each in its column",
        )
        for row in rows[:LISTED]
    ]
    if len(rows) > LISTED:
        problems.append(Problem(file, f"{len(rows) - LISTED:,} more pairs of easting and northing look like degrees"))
    return problems


def areas_of_samples(connection: sa.Connection, sites: Sequence[Any], intrusions: Sequence[Any]) -> list[Any]:
    """The area of each sample: that of its site, else that of its intrusion, else None; ids."""
    found: list[dict[int, int]] = []
    for table, ids in (("site", sites), ("intrusion", intrusions)):
        wanted = {one for one in ids if one is not None}
        query = f"SELECT {table}_id, area_id FROM {table} WHERE {table}_id {{ids}} AND area_id IS NOT NULL"
        found.append(dict(raw_rows.select(connection, query, wanted)) if wanted else {})
    of_site, of_intrusion = found
    return [of_site.get(site, of_intrusion.get(body)) for site, body in zip(sites, intrusions, strict=True)]


@dataclass(frozen=True)
class Placed:
    """The places of the rows of one file, each (n,), NaN missing: as entered, and in degrees on WGS 84."""

    easting: np.ndarray
    northing: np.ndarray
    epsg: np.ndarray
    longitude: np.ndarray
    latitude: np.ndarray


def far_from_area(
    connection: sa.Connection,
    noun: str,
    placed: Placed,
    areas: Sequence[Any],
    codes: Sequence[Any],
    lines: Sequence[int],
    file: str,
) -> tuple[np.ndarray, list[Problem]]:
    """Which rows lie very far from the other places of their area (bool, (n,)), and a warning for each.

    The others are the registered sites of the area and the places of the same file; rows that name no area are
    compared with each other. ``codes`` are the codes of sites of this file (None: no site), whose registered places
    count no more.
    """
    group = np.array([_NO_AREA if area is None else area for area in areas], dtype=np.int64)
    there = ~np.isnan(placed.longitude) & ~np.isnan(placed.latitude)
    far = np.zeros(len(lines), dtype=bool)
    problems: list[Problem] = []
    if not there.any():
        return far, problems
    own = {codes[row] for row in np.flatnonzero(there).tolist() if codes[row] is not None}
    wanted = set(group[there].tolist()) - {_NO_AREA}
    named, others = _registered(connection, wanted, own) if wanted else ({}, {})
    for area in np.unique(group[there]).tolist():
        rows = np.flatnonzero(there & (group == area))
        around = others.get(area, np.zeros((0, 3)))
        middle = _Middle.of(
            np.concatenate([around[:, 0], placed.longitude[rows]]),
            np.concatenate([around[:, 1], placed.latitude[rows]]),
            f"area {named[area][0]}" if area in named else "the rows of the file that name no area",
        )
        if middle is None:
            continue
        distances = middle.distance_km[len(around) :]
        beyond = distances > middle.limit_km
        if area == _NO_AREA and beyond.sum() > max(1.0, FEW_SHARE * len(rows)):
            continue
        far[rows] = beyond
        systems = {*around[:, 2].tolist(), *placed.epsg[rows].tolist()}
        if area in named:
            systems.add(named[area][1])
        for row, distance in zip(rows[beyond].tolist(), distances[beyond].tolist(), strict=True):
            if len(problems) < LISTED:
                problems.append(_remark(noun, placed, row, distance, middle, systems, lines[row], file))
    if far.sum() > LISTED:
        more = f"{int(far.sum()) - LISTED:,} more {noun}s lie very far from the others of their area"
        problems.append(Problem(file, more, severity="warning"))
    return far, problems


def _registered(
    connection: sa.Connection, areas: set[int], own: set[str]
) -> tuple[dict[int, tuple[str, float]], dict[int, np.ndarray]]:
    """Names and EPSG codes of areas; (longitude, latitude, EPSG code or NaN) of their sites but those of ``own``."""
    rows = raw_rows.select(connection, "SELECT area_id, name, epsg FROM area WHERE area_id {ids}", areas)
    named = {area: (name, np.nan if epsg is None else float(epsg)) for area, name, epsg in rows}
    query = (
        "SELECT code, area_id, longitude, latitude, epsg FROM site WHERE area_id {ids} AND longitude IS NOT NULL "
        "AND latitude IS NOT NULL"
    )
    sites: dict[int, list[tuple[Any, ...]]] = {}
    for code, area, *place in raw_rows.select(connection, query, areas):
        if code not in own:
            sites.setdefault(area, []).append(tuple(place))
    return named, {area: np.array(rows, dtype=np.float64) for area, rows in sites.items()}


@dataclass(frozen=True)
class _Middle:
    """The median place of a group, how far each of its places lies from it, and from where on that is far."""

    longitude: float
    latitude: float
    distance_km: np.ndarray
    spread_km: float
    limit_km: float
    words: str

    @classmethod
    def of(cls, longitude: np.ndarray, latitude: np.ndarray, words: str) -> _Middle | None:
        """None for fewer than three places: of two, nothing says which is wrong."""
        if len(longitude) < 3:
            return None
        around = float(np.degrees(np.angle(np.exp(1j * np.radians(longitude)).mean())))  # medians across 180 degrees
        middle = around + float(np.median((longitude - around + 180.0) % 360.0 - 180.0))
        middle = (middle + 180.0) % 360.0 - 180.0
        distance = _distance_km(middle, float(np.median(latitude)), longitude, latitude)
        spread = float(np.median(distance))
        limit = max(FAR_KM, FAR_SPREADS * spread)
        return cls(middle, float(np.median(latitude)), distance, spread, limit, words)

    def is_near(self, longitude: Any, latitude: Any) -> bool:
        """Whether a place would not be remarked on."""
        if np.isnan(longitude) or np.isnan(latitude) or abs(latitude) > 90.0:
            return False
        away = _distance_km(self.longitude, self.latitude, np.array([longitude]), np.array([latitude]))
        return bool(away[0] <= self.limit_km)


def _distance_km(longitude: float, latitude: float, to_longitude: np.ndarray, to_latitude: np.ndarray) -> np.ndarray:
    start = np.full(len(to_longitude), longitude), np.full(len(to_longitude), latitude)
    return np.asarray(pyproj.Geod(ellps="WGS84").inv(*start, to_longitude, to_latitude)[2]) / 1000.0


def _remark(
    noun: str,
    placed: Placed,
    row: int,
    distance_km: float,
    middle: _Middle,
    systems: set[float],
    line: int,
    file: str,
) -> Problem:
    column, cause = _cause(placed, row, middle, systems)
    return Problem(
        file,
        f"the {noun} lies very far from the others of its area",
        line,
        column,
        f"longitude {placed.longitude[row]:.4f}, latitude {placed.latitude[row]:.4f}: {distance_km:,.0f} km from the "
        f"median of {middle.words}",
        f"a place among the {len(middle.distance_km):,}, of which half lie within {middle.spread_km:,.3g} km of that "
        "median",
        cause,
        "warning",
    )


def _cause(placed: Placed, row: int, middle: _Middle, systems: set[float]) -> tuple[str, str]:
    """The column that is probably wrong, and what is probably wrong with it: what brings the place near the others."""
    east, north, epsg = float(placed.easting[row]), float(placed.northing[row]), float(placed.epsg[row])
    if np.isnan([east, north, epsg]).any():
        return "longitude", _cause_of_degrees(float(placed.longitude[row]), float(placed.latitude[row]), middle)
    if middle.is_near(*_degrees_of(north, east, epsg)):
        return "easting", "easting and northing are probably exchanged: the other way round it lies among them"
    for other in sorted(code for code in systems if code == code and code != epsg):
        if middle.is_near(*_degrees_of(east, north, other)):
            return "epsg", f"the EPSG code is probably another zone's: by EPSG:{int(other)} it lies among them"
    usual = positions.easting_northing(middle.longitude, middle.latitude, int(epsg))
    given = (east, north)
    for place, column in ((1, "northing"), (0, "easting")):
        tried = (east, usual[1]) if place == 1 else (usual[0], north)
        more = _digits(given[place]) - _digits(usual[place])
        if more and middle.is_near(*_degrees_of(*tried, epsg)):
            lost = "a digit is probably lost" if more < 0 else "there is probably a digit too many"
            return column, (
                f"{lost}: the {column} has {_digits(given[place])} digits before the decimal sign, there it has "
                f"{_digits(usual[place])}"
            )
    return "easting", f"{_CHECK}; else the area is wrong"


def _cause_of_degrees(longitude: float, latitude: float, middle: _Middle) -> str:
    if middle.is_near(latitude, longitude):
        return "longitude and latitude are probably exchanged: the other way round it lies among them"
    for turned, name in (((-longitude, latitude), "longitude"), ((longitude, -latitude), "latitude")):
        if middle.is_near(*turned):
            return f"the sign of the {name} is probably wrong (west and south are negative)"
    return "see whether a digit is wrong or lost, or longitude and latitude are exchanged; else the area is wrong"


def _degrees_of(easting: float, northing: float, epsg: float) -> tuple[float, float]:
    longitude, latitude = positions.longitude_latitude([easting], [northing], [epsg])
    return float(longitude[0]), float(latitude[0])


def _digits(number: float) -> int:
    """Digits before the decimal sign; 0 for what is no number."""
    return len(str(int(abs(number)))) if np.isfinite(number) else 0
