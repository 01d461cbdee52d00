"""Coordinates of master data: systems, what sites lack and can have computed, samples with positions of their own."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
import sqlalchemy as sa

from registry.errors import Problem
from registry.store import master_outlying, positions, tables
from registry.store.current_values import current

Rows = dict[str, list[Any]]
Known = Mapping[tuple[Any, ...], Mapping[str, Any]]
#: Equal faults are listed up to this number.
LISTED = 20
#: A map is often used a little beyond its zone; so many degrees are remarked on, more are refused. Common practice,
#: no source.
DEGREES_BEYOND = 1.5
#: Degrees by which longitude and latitude may differ from those of easting and northing (about a kilometre).
DEGREES_APART = 0.01


def complete_sites(connection: sa.Connection, stored: Rows, known: Known) -> None:
    """Fill the coordinate system from the area where it is blank, and longitude and latitude from the coordinates."""
    n = len(stored["code"])
    blank = [None] * n
    systems = {
        row.area_id: row.epsg for row in connection.execute(sa.select(tables.area.c.area_id, tables.area.c.epsg))
    }
    easting, northing, own, areas = (
        current(stored, known, name) for name in ("easting", "northing", "epsg", "area_id")
    )
    epsg = [
        code if code is not None else (systems.get(area) if east is not None else None)
        for code, area, east in zip(own, areas, easting, strict=True)
    ]
    longitude, latitude = positions.longitude_latitude(
        np.array(easting, dtype=float), np.array(northing, dtype=float), np.array(epsg, dtype=float)
    )
    for name, computed in (("longitude", longitude), ("latitude", latitude)):
        entered = stored.get(name, blank)
        stored[name] = [
            value if value is not None else new
            for value, new in zip(entered, positions.plain_position(name, computed), strict=True)
        ]
    stored["epsg"] = epsg


def check_systems(codes: Sequence[Any], lines: Sequence[int], file: str) -> list[Problem]:
    """A problem for each EPSG code that pyproj does not know."""
    unknown = {code for code in set(codes) if code is not None and not positions.known_epsg(code)}
    return [
        Problem(
            file,
            "this coordinate system is not known",
            lines[row],
            "epsg",
            str(code),
            "an EPSG code of a coordinate system",
            "look the code up on the map or in the survey report",
        )
        for row, code in enumerate(codes)
        if code in unknown
    ][:LISTED]


def check_sites(given: Rows, stored: Rows, known: Known, lines: Sequence[int], file: str) -> list[Problem]:
    """A new site without its kind; coordinates without a system, or outside it (those in degrees are told of by
    ``check_places``)."""
    problems = []
    blank = [None] * len(lines)
    degrees = master_outlying.look_like_degrees(
        *(_column(rows, name, len(lines)) for rows, name in ((given, "easting"), (given, "northing"), (stored, "epsg")))
    )
    for row, code in enumerate(stored["code"]):
        before = known.get((code,), {})
        if stored.get("kind", blank)[row] is None and not before:
            problems.append(
                Problem(
                    file,
                    "a new site needs its kind",
                    lines[row],
                    "site_kind",
                    expected="drill_hole or outcrop",
                    remedy="add the kind",
                )
            )
        if given.get("easting", blank)[row] is None or degrees[row]:
            continue
        if stored["epsg"][row] is None:
            problems.append(
                Problem(
                    file,
                    "easting and northing say nothing without their coordinate system",
                    lines[row],
                    "epsg",
                    expected="an EPSG code here or in the area",
                    remedy="add the code",
                )
            )
        elif stored["longitude"][row] is None and positions.known_epsg(stored["epsg"][row]):
            east, north = given["easting"][row], given.get("northing", blank)[row]
            problems.append(
                Problem(
                    file,
                    f"the coordinates lie outside the system EPSG:{stored['epsg'][row]}",
                    lines[row],
                    "easting",
                    f"{east:.10g}, {north if north is None else format(north, '.10g')}",
                    "coordinates within it",
                    "check the order of easting and northing and the EPSG code",
                )
            )
    return problems


def _column(rows: Rows, name: str, n: int) -> np.ndarray:
    return np.array(rows.get(name, [None] * n), dtype=float)


def check_places(
    connection: sa.Connection,
    noun: str,
    given: Rows,
    stored: Rows,
    known: Known,
    lines: Sequence[int],
    file: str,
) -> list[Problem]:
    """Coordinates outside the area of use of their system or of their area's, two that name different places, degrees
    in place of metres, and places very far from the others of their area.

    ``noun``: site or sample. ``stored`` may lack ``longitude`` and ``latitude`` (samples); they are then computed.
    """
    n = len(lines)

    def column(rows: Rows, name: str) -> np.ndarray:
        return _column(rows, name, n)

    east, north, epsg = column(given, "easting"), column(given, "northing"), column(stored, "epsg")
    degrees = master_outlying.look_like_degrees(east, north, epsg)
    told_degrees = master_outlying.degrees_problems(east, north, degrees, lines, file)
    east, north = np.where(degrees, np.nan, east), np.where(degrees, np.nan, north)
    lon, lat = positions.longitude_latitude(east, north, epsg)
    beyond = positions.degrees_outside(lon, lat, epsg)
    turned = positions.degrees_outside(*positions.longitude_latitude(north, east, epsg), epsg)
    problems = told_degrees
    for row in np.flatnonzero(beyond > 0.0)[:LISTED].tolist():
        far = beyond[row] > DEGREES_BEYOND
        remedy = "check the EPSG code (zone, hemisphere) and the digits of the coordinates"
        if turned[row] == 0.0:
            remedy = "easting and northing are probably exchanged: the other way round they lie within it"
        elif not far:
            remedy = "nothing to do if the map was carried on beyond its zone; else check the EPSG code"
        problems.append(
            Problem(
                file,
                f"the coordinates lie {beyond[row]:.3g} degrees outside the area of use of their system",
                lines[row],
                "easting",
                f"{east[row]:.10g}, {north[row]:.10g} (longitude {lon[row]:.4f}, latitude {lat[row]:.4f})",
                f"a place within {positions.name_of_system(int(epsg[row]))}",
                remedy,
                "problem" if far else "warning",
            )
        )
    problems += _counted(int((beyond > 0.0).sum()), "lie outside the area of use of their system", file)
    own_lon, own_lat = column(given, "longitude"), column(given, "latitude")
    apart = np.fmax(np.abs((own_lon - lon + 180.0) % 360.0 - 180.0), np.abs(own_lat - lat))
    for row in np.flatnonzero((apart > DEGREES_APART) & ~(beyond > 0.0))[:LISTED].tolist():
        problems.append(
            Problem(
                file,
                "longitude and latitude name another place than easting and northing",
                lines[row],
                "longitude",
                f"{own_lon[row]:.5f}, {own_lat[row]:.5f}",
                f"about {lon[row]:.5f}, {lat[row]:.5f} by EPSG:{int(epsg[row])}",
                "check the EPSG code and both pairs; give one pair only if in doubt",
                "warning",
            )
        )
    refused = beyond > DEGREES_BEYOND
    placed = master_outlying.Placed(
        east,
        north,
        epsg,
        np.where(refused, np.nan, np.where(np.isnan(own_lon), lon, own_lon)),
        np.where(refused, np.nan, np.where(np.isnan(own_lat), lat, own_lat)),
    )
    far = np.zeros(n, dtype=bool)
    if not np.isnan(placed.longitude).all():
        areas, codes = _areas_of(connection, noun, stored, known)
        far, told_far = master_outlying.far_from_area(connection, noun, placed, areas, codes, lines, file)
        problems += told_far
    return problems + _outside_their_area(connection, stored, epsg, (lon, lat), (own_lon, own_lat), far, lines, file)


def _areas_of(connection: sa.Connection, noun: str, stored: Rows, known: Known) -> tuple[list[Any], list[Any]]:
    """The area (id or None) of each row, and the codes of the rows that are sites."""
    if noun == "site":
        return current(stored, known, "area_id"), stored["code"]
    sites, intrusions = (current(stored, known, name) for name in ("site_id", "intrusion_id"))
    return master_outlying.areas_of_samples(connection, sites, intrusions), [None] * len(stored["code"])


def _outside_their_area(
    connection: sa.Connection,
    stored: Rows,
    epsg: np.ndarray,
    computed: tuple[np.ndarray, np.ndarray],
    entered: tuple[np.ndarray, np.ndarray],
    told: np.ndarray,
    lines: Sequence[int],
    file: str,
) -> list[Problem]:
    """Sites of another system than their area's that lie where the area's system is not used: a wrong zone, perhaps.

    Rows of ``told`` (bool, (n,)) are remarked on already."""
    if not any(area is not None for area in stored.get("area_id", ())):
        return []
    systems = {
        row.area_id: row.epsg for row in connection.execute(sa.select(tables.area.c.area_id, tables.area.c.epsg))
    }
    own = np.array([systems.get(area) for area in stored["area_id"]], dtype=float)
    lon = np.where(np.isnan(entered[0]), computed[0], entered[0])
    lat = np.where(np.isnan(entered[1]), computed[1], entered[1])
    far = (positions.degrees_outside(lon, lat, own) > DEGREES_BEYOND) & ~(epsg == own) & ~told
    return [
        Problem(
            file,
            "the site lies where the coordinate system of its area is not used",
            lines[row],
            "epsg" if not np.isnan(epsg[row]) else "longitude",
            f"longitude {lon[row]:.4f}, latitude {lat[row]:.4f}",
            f"a place within {positions.name_of_system(int(own[row]))}",
            "check the zone that the EPSG code names, or whether longitude and latitude are exchanged, and the area",
            "warning",
        )
        for row in np.flatnonzero(far)[:LISTED].tolist()
    ]


def _counted(number: int, what: str, file: str) -> list[Problem]:
    """One problem for those beyond the listed ones."""
    return [Problem(file, f"{number - LISTED:,} more rows {what}")] if number > LISTED else []


def mark_own_positions(connection: sa.Connection, codes: Sequence[str], stored: Rows) -> None:
    """Samples entered with coordinates of their own: transform them, and say so in ``position_basis``."""
    names = ("easting", "northing", "longitude", "latitude")
    rows = {
        code: row
        for row, code in enumerate(stored["code"])
        if any(stored[name][row] is not None for name in names if name in stored)
    }
    wanted = [rows[code] for code in codes if code in rows]
    if not wanted:
        return
    blank = [None] * len(stored["code"])

    def column(name: str) -> np.ndarray:
        return np.array([stored.get(name, blank)[row] for row in wanted], dtype=float)

    longitude, latitude = positions.longitude_latitude(column("easting"), column("northing"), column("epsg"))
    longitude = np.where(np.isnan(column("longitude")), longitude, column("longitude"))
    latitude = np.where(np.isnan(column("latitude")), latitude, column("latitude"))
    values = zip(
        (stored["code"][row] for row in wanted),
        positions.plain_position("longitude", longitude),
        positions.plain_position("latitude", latitude),
        strict=True,
    )
    connection.execute(
        sa.text("UPDATE sample SET longitude = :lon, latitude = :lat, position_basis = :basis WHERE code = :code"),
        [{"code": code, "lon": lon, "lat": lat, "basis": positions.OWN} for code, lon, lat in values],
    )
