"""Where the samples of a filter and their sites lie: coordinates as entered and in degrees, what a position rests on.

As for the diagrams, one statement reads what every sample needs, and a second one the words of the few that are drawn
one by one.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from sqlalchemy import Connection, text

from registry.store.reading.columns import Column
from registry.store.reading.diagrams import KEYS_PER_READ, MOST_SAMPLES, Group
from registry.store.reading.filters import Filter
from registry.store.reading.samples import _bind_list, _conditions, _is_postgresql, _joins
from registry.store.sheets import CONTROL_KINDS

#: Columns of a row of ``map_rows``.
KEY, CONTROL, GROUP, SITE, EASTING, NORTHING, EPSG, LONGITUDE, LATITUDE, BASIS, VALUE = range(11)
_CONTROLS = ", ".join(f"'{kind}'" for kind in CONTROL_KINDS)
_SHOWN_VERDICT = (
    "LEFT JOIN verdict AS shown ON shown.sample_id = sample.sample_id AND shown.target_id = "
    "(SELECT target_id FROM target WHERE target.code = :shown_target)"
)


def map_rows(connection: Connection, asked: Filter, group: Group, quantity: Column | None) -> list[Any]:
    """``sample_id is_control group site_id easting northing epsg longitude latitude position_basis value`` by key of
    every sample of the filter; ``value`` is that of ``quantity``, the group is None where there is one."""
    bound: dict[str, Any] = {}
    expression, table = group.sql if quantity is None else ("NULL", "")
    clauses, tables = _conditions(asked, "ILIKE" if _is_postgresql(connection) else "LIKE", bound)
    tables |= {table} | ({quantity.table} if quantity else set())
    if "verdict" in tables:
        bound["target"] = asked.target
    joins = _joins(tables - {"sample", ""})
    if group.target and quantity is None:
        joins += f" {_SHOWN_VERDICT}"
        bound["shown_target"] = group.target
    where = f" WHERE {' AND '.join(clauses)}" if clauses else ""
    statement = (
        f"SELECT sample.sample_id, CASE WHEN sample.kind IN ({_CONTROLS}) THEN 1 ELSE 0 END, {expression}, "
        "sample.site_id, sample.easting, sample.northing, sample.epsg, sample.longitude, sample.latitude, "
        f"sample.position_basis, {quantity.sql if quantity else 'NULL'} "
        f"FROM {joins}{where} ORDER BY sample.sample_id LIMIT {MOST_SAMPLES}"
    )
    result = connection.execute(text(statement), bound)
    rows: list[Any] = list(result.cursor.fetchall())  # the driver's own tuples: 100,000 rows in two thirds of the time
    result.close()
    return rows


def place_details(connection: Connection, keys: Sequence[int]) -> dict[int, dict[str, Any]]:
    """By key: ``code kind from_m to_m lithology site intrusion position_basis longitude latitude is_stale``."""
    found: dict[int, dict[str, Any]] = {}
    joins = _joins({"site", "intrusion", "stale"})
    for start in range(0, len(keys), KEYS_PER_READ):
        bound: dict[str, Any] = {}
        listed = _bind_list([int(key) for key in keys[start : start + KEYS_PER_READ]], "key", bound)
        rows = connection.execute(
            text(
                "SELECT sample.sample_id, sample.code, sample.kind, sample.from_m, sample.to_m, sample.lithology, "
                "site.code AS site, intrusion.name AS intrusion, sample.position_basis, sample.longitude, "
                "sample.latitude, CASE WHEN stale.sample_id IS NULL THEN 0 ELSE 1 END AS is_stale "
                f"FROM {joins} WHERE sample.sample_id IN ({listed})"
            ),
            bound,
        )
        found |= {row["sample_id"]: dict(row) for row in rows.mappings()}
    return found


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
