"""The lists of intrusions and sites, with counts of samples and verdicts."""

from __future__ import annotations

from typing import Any

from sqlalchemy import Connection, text

from registry.store.sheets import VERDICT_WORDS


def _rows(connection: Connection, sql: str, **bound: Any) -> list[dict[str, Any]]:
    return [dict(row) for row in connection.execute(text(sql), bound).mappings()]


def intrusion_list(connection: Connection) -> list[dict[str, Any]]:
    """Every intrusion with its shape, size and age, and how many samples are named after it."""
    return _rows(
        connection,
        """
        SELECT intrusion.intrusion_id, intrusion.name, area.name AS area, intrusion.shape, intrusion.half_width_m,
            intrusion.volume_km3, intrusion.depth_to_top_m, intrusion.age_ma, intrusion.age_sigma_ma,
            intrusion.mapped, coalesce(counted.samples, 0) AS samples
        FROM intrusion LEFT JOIN area ON area.area_id = intrusion.area_id
        LEFT JOIN (
            SELECT intrusion_id, count(*) AS samples FROM sample WHERE intrusion_id IS NOT NULL GROUP BY intrusion_id
        ) AS counted ON counted.intrusion_id = intrusion.intrusion_id
        ORDER BY intrusion.name
        """,
    )


def site_list(connection: Connection) -> list[dict[str, Any]]:
    """Every site with its position, depth and how many samples come from it."""
    return _rows(
        connection,
        """
        SELECT site.site_id, site.code, site.kind, area.name AS area, site.longitude, site.latitude, site.elevation_m,
            site.depth_m, coalesce(counted.samples, 0) AS samples
        FROM site LEFT JOIN area ON area.area_id = site.area_id
        LEFT JOIN (SELECT site_id, count(*) AS samples FROM sample WHERE site_id IS NOT NULL GROUP BY site_id)
            AS counted ON counted.site_id = site.site_id
        ORDER BY site.code
        """,
    )


def best_verdicts_by_site(connection: Connection) -> dict[int, dict[str, int]]:
    """How many samples of each site have which best verdict. Reads every derived row: keep the answer."""
    found: dict[int, dict[str, int]] = {}
    rows = connection.execute(
        text(
            "SELECT sample.site_id, derived.best_verdict, count(*) AS n FROM sample JOIN derived ON "
            "derived.sample_id = sample.sample_id WHERE sample.site_id IS NOT NULL "
            "AND derived.best_verdict IS NOT NULL "
            "GROUP BY sample.site_id, derived.best_verdict"
        )
    )
    for site_id, verdict, number in rows:
        found.setdefault(site_id, {})[VERDICT_WORDS[verdict]] = number
    return found
