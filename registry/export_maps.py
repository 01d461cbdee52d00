"""Samples as points for geographic information systems: GeoJSON (RFC 7946) and OGC GeoPackage 1.3.

Positions are longitude and latitude in WGS 84. A GeoPackage is always a new file: the registry itself is never opened
by another library.
"""

from __future__ import annotations

import sqlite3
import struct
from collections.abc import Iterable, Sequence
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import orjson

#: (longitude, latitude, row of the sheet)
PlacedRows = Iterable[list[Any]]
#: "GPKG" and version 1.3 as the standard asks for (OGC 12-128r18, requirement 2).
GPKG_APPLICATION_ID, GPKG_USER_VERSION = 0x47504B47, 10300
WGS84_DEFINITION = (
    'GEOGCS["WGS 84",DATUM["World Geodetic System 1984",SPHEROID["WGS 84",6378137,298.257223563]],'
    'PRIMEM["Greenwich",0],UNIT["degree",0.0174532925199433],AUTHORITY["EPSG","4326"]]'
)


def write_geojson(columns: Sequence[str], rows: PlacedRows, target: Path) -> int:
    """Write a FeatureCollection of points (RFC 7946, section 3); how many."""
    count = 0
    with target.open("wb") as file:
        file.write(b'{"type":"FeatureCollection","features":[')
        for part in rows:
            for longitude, latitude, row in part:
                feature = {
                    "type": "Feature",
                    "id": count + 1,
                    "geometry": {"type": "Point", "coordinates": [longitude, latitude]},
                    "properties": dict(zip(columns, row, strict=True)),
                }
                file.write((b",\n" if count else b"\n") + orjson.dumps(feature))
                count += 1
        file.write(b"\n]}\n")
    return count


def write_gpkg(layer: str, columns: Sequence[str], rows: PlacedRows, target: Path) -> int:
    """Write a GeoPackage with one layer of points named as the sheet (OGC 12-128r18); how many."""
    target.unlink(missing_ok=True)
    placed = [entry for part in rows for entry in part]
    connection = sqlite3.connect(target)
    try:
        connection.execute(f"PRAGMA application_id = {GPKG_APPLICATION_ID}")
        connection.execute(f"PRAGMA user_version = {GPKG_USER_VERSION}")
        for statement in _TABLES:
            connection.execute(statement)
        connection.executemany("INSERT INTO gpkg_spatial_ref_sys VALUES (?, ?, ?, ?, ?, ?)", _REFERENCE_SYSTEMS)
        listed = ", ".join(f'"{name}" {_type_of(placed, place)}' for place, name in enumerate(columns))
        connection.execute(f'CREATE TABLE "{layer}" (fid INTEGER PRIMARY KEY AUTOINCREMENT, geom POINT, {listed})')
        extent = (
            min((entry[0] for entry in placed), default=None),
            min((entry[1] for entry in placed), default=None),
            max((entry[0] for entry in placed), default=None),
            max((entry[1] for entry in placed), default=None),
        )
        written = datetime.now(UTC).strftime("%Y-%m-%dT%H:%M:%S.000Z")
        connection.execute(
            "INSERT INTO gpkg_contents VALUES (?, 'features', ?, 'samples as points', ?, ?, ?, ?, ?, 4326)",
            (layer, layer, written, *extent),
        )
        connection.execute("INSERT INTO gpkg_geometry_columns VALUES (?, 'geom', 'POINT', 4326, 0, 0)", (layer,))
        places = ", ".join("?" * (len(columns) + 1))
        names = ", ".join(f'"{name}"' for name in ("geom", *columns))
        connection.executemany(
            f'INSERT INTO "{layer}" ({names}) VALUES ({places})',
            ((_point(longitude, latitude), *row) for longitude, latitude, row in placed),
        )
        connection.commit()
    finally:
        connection.close()
    return len(placed)


def _point(longitude: float, latitude: float) -> bytes:
    """A point as GeoPackage binary: header without envelope, then little-endian well-known binary."""
    return b"GP" + struct.pack("<BBi", 0, 1, 4326) + struct.pack("<BIdd", 1, 1, longitude, latitude)


def _type_of(placed: Sequence[Any], place: int) -> str:
    """The column's type in the words of the standard, from its values."""
    kinds = {type(entry[2][place]) for entry in placed} - {type(None)}
    if kinds == {int}:
        return "INTEGER"
    return "REAL" if kinds and kinds <= {int, float} else "TEXT"


_TABLES = (
    "CREATE TABLE gpkg_spatial_ref_sys (srs_name TEXT NOT NULL, srs_id INTEGER NOT NULL PRIMARY KEY, organization "
    "TEXT NOT NULL, organization_coordsys_id INTEGER NOT NULL, definition TEXT NOT NULL, description TEXT)",
    "CREATE TABLE gpkg_contents (table_name TEXT NOT NULL PRIMARY KEY, data_type TEXT NOT NULL, "
    "identifier TEXT UNIQUE, description TEXT DEFAULT '', last_change DATETIME NOT NULL, min_x DOUBLE, "
    "min_y DOUBLE, max_x DOUBLE, max_y DOUBLE, srs_id INTEGER REFERENCES gpkg_spatial_ref_sys(srs_id))",
    "CREATE TABLE gpkg_geometry_columns (table_name TEXT NOT NULL, column_name TEXT NOT NULL, "
    "geometry_type_name TEXT NOT NULL, srs_id INTEGER NOT NULL REFERENCES gpkg_spatial_ref_sys(srs_id), "
    "z TINYINT NOT NULL, m TINYINT NOT NULL, PRIMARY KEY (table_name, column_name), UNIQUE (table_name), "
    "FOREIGN KEY (table_name) REFERENCES gpkg_contents(table_name))",
)
_REFERENCE_SYSTEMS = (
    ("Undefined cartesian SRS", -1, "NONE", -1, "undefined", "undefined cartesian coordinate reference system"),
    ("Undefined geographic SRS", 0, "NONE", 0, "undefined", "undefined geographic coordinate reference system"),
    ("WGS 84 geodetic", 4326, "EPSG", 4326, WGS84_DEFINITION, "longitude/latitude coordinates in decimal degrees"),
)
