"""Coordinates of master data: systems, what sites lack and can have computed, samples with positions of their own."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
import sqlalchemy as sa

from registry.errors import Problem
from registry.store import positions, tables

Rows = dict[str, list[Any]]
Known = Mapping[tuple[Any, ...], Mapping[str, Any]]
#: Equal faults are listed up to this number.
LISTED = 20


def complete_sites(connection: sa.Connection, stored: Rows, known: Known) -> None:
    """Fill the coordinate system from the area where it is blank, and longitude and latitude from the coordinates."""
    n = len(stored["code"])
    blank = [None] * n
    before = [known.get((code,), {}) for code in stored["code"]]

    def current(name: str) -> list[Any]:
        column = stored.get(name, blank)
        return [value if value is not None else row.get(name) for value, row in zip(column, before, strict=True)]

    systems = {
        row.area_id: row.epsg for row in connection.execute(sa.select(tables.area.c.area_id, tables.area.c.epsg))
    }
    easting, northing = current("easting"), current("northing")
    epsg = [
        code if code is not None else (systems.get(area) if east is not None else None)
        for code, area, east in zip(current("epsg"), current("area_id"), easting, strict=True)
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
    """A new site without its kind; coordinates without a system, or outside it."""
    problems = []
    blank = [None] * len(lines)
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
        if given.get("easting", blank)[row] is None:
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
            problems.append(
                Problem(
                    file,
                    f"the coordinates lie outside the system EPSG:{stored['epsg'][row]}",
                    lines[row],
                    "easting",
                    f"{given['easting'][row]:g}, {given.get('northing', blank)[row]}",
                    "coordinates within it",
                    "check the order of easting and northing and the EPSG code",
                )
            )
    return problems


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
