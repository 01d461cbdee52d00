"""Where the samples of a filter and their sites lie: coordinates as entered and in degrees, and on what they rest."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from sqlalchemy import Connection, text

from registry.store.reading.columns import Column
from registry.store.reading.drawn_samples import Group, details, drawn_rows
from registry.store.reading.filters import Filter

#: Columns of a row of ``map_rows``.
KEY, CONTROL, GROUP, SITE, EASTING, NORTHING, EPSG, LONGITUDE, LATITUDE, BASIS, VALUE = range(11)
_PLACE = "site_id easting northing epsg longitude latitude position_basis"


def map_rows(connection: Connection, asked: Filter, group: Group, quantity: Column | None) -> list[Any]:
    """``sample_id is_control group site_id easting northing epsg longitude latitude position_basis value`` by key of
    every sample of the filter; ``value`` is that of ``quantity``, the group is None where there is one."""
    place = [f"sample.{name}" for name in _PLACE.split()]
    if quantity is None:
        return drawn_rows(connection, asked, [*place, "NULL"], set(), group)
    return drawn_rows(connection, asked, [*place, quantity.sql], {quantity.table}, None)


def place_details(connection: Connection, keys: Sequence[int]) -> dict[int, dict[str, Any]]:
    """By key: ``code kind from_m to_m lithology site intrusion position_basis longitude latitude is_stale``."""
    columns = (
        "sample.code, sample.kind, sample.from_m, sample.to_m, sample.lithology, site.code AS site, "
        "intrusion.name AS intrusion, sample.position_basis, sample.longitude, sample.latitude"
    )
    return details(connection, keys, columns, {"site", "intrusion"})


def map_sites(connection: Connection) -> dict[int, dict[str, Any]]:
    """Every site by key: its code, kind, area with the area's EPSG code, coordinates, length, and of its survey the
    ``stations`` (number) and the depth of the last one, ``last_m``."""
    rows = connection.execute(
        text(
            "SELECT site.site_id, site.code, site.kind, area.name AS area, area.epsg AS area_epsg, site.easting, "
            "site.northing, site.epsg, site.longitude, site.latitude, site.depth_m, site.azimuth_reference, "
            "coalesce(surveyed.stations, 0) AS stations, surveyed.last_m "
            "FROM site LEFT JOIN area ON area.area_id = site.area_id LEFT JOIN "
            "(SELECT site_id, count(*) AS stations, max(depth_m) AS last_m FROM survey GROUP BY site_id) AS surveyed "
            "ON surveyed.site_id = site.site_id ORDER BY site.code"
        )
    )
    return {row["site_id"]: dict(row) for row in rows.mappings()}
