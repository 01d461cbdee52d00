"""Intrusions and sites: the lists with counts of samples and verdicts, and one of each."""

from __future__ import annotations

from typing import Any

from sqlalchemy import Connection, text

from registry.store.sheets import VERDICT_WORDS

_COUNTED = ", ".join(
    f"sum(CASE WHEN derived.best_verdict = {code} THEN 1 ELSE 0 END) AS {word}"
    for code, word in enumerate(VERDICT_WORDS)
)


def _rows(connection: Connection, sql: str, **bound: Any) -> list[dict[str, Any]]:
    return [dict(row) for row in connection.execute(text(sql), bound).mappings()]


def intrusion_list(connection: Connection) -> list[dict[str, Any]]:
    """Every intrusion with its shape, age, number of samples and the best verdicts on them."""
    return _rows(
        connection,
        f"""
        SELECT intrusion.name, area.name AS area, intrusion.shape, intrusion.half_width_m, intrusion.volume_km3,
            intrusion.depth_to_top_m, intrusion.age_ma, intrusion.age_sigma_ma, intrusion.mapped,
            coalesce(counted.samples, 0) AS samples, counted.favourable, counted.possible, counted.unfavourable,
            counted.undecided
        FROM intrusion LEFT JOIN area ON area.area_id = intrusion.area_id
        LEFT JOIN (
            SELECT sample.intrusion_id, count(*) AS samples, {_COUNTED}
            FROM sample LEFT JOIN derived ON derived.sample_id = sample.sample_id
            WHERE sample.intrusion_id IS NOT NULL GROUP BY sample.intrusion_id
        ) AS counted ON counted.intrusion_id = intrusion.intrusion_id
        ORDER BY intrusion.name
        """,
    )


def site_list(connection: Connection) -> list[dict[str, Any]]:
    """Every site with its position, depth, number of samples and the best verdicts on them."""
    return _rows(
        connection,
        f"""
        SELECT site.code, site.kind, area.name AS area, site.longitude, site.latitude, site.elevation_m, site.depth_m,
            coalesce(counted.samples, 0) AS samples, counted.favourable, counted.possible, counted.unfavourable,
            counted.undecided
        FROM site LEFT JOIN area ON area.area_id = site.area_id
        LEFT JOIN (
            SELECT sample.site_id, count(*) AS samples, {_COUNTED}
            FROM sample LEFT JOIN derived ON derived.sample_id = sample.sample_id
            WHERE sample.site_id IS NOT NULL GROUP BY sample.site_id
        ) AS counted ON counted.site_id = site.site_id
        ORDER BY site.code
        """,
    )


def verdicts_by_target(connection: Connection, table: str, name: str) -> list[dict[str, Any]]:
    """Counts of verdicts by target over the samples of one intrusion (``table`` 'intrusion') or site ('site')."""
    key, column = {"intrusion": ("intrusion_id", "name"), "site": ("site_id", "code")}[table]
    rows = _rows(
        connection,
        f"""
        SELECT target.code, target.name, verdict.verdict, count(*) AS samples, max(verdict.score_min) AS best_score
        FROM {table} JOIN sample ON sample.{key} = {table}.{key}
        JOIN verdict ON verdict.sample_id = sample.sample_id JOIN target ON target.target_id = verdict.target_id
        WHERE {table}.{column} = :name
        GROUP BY target.target_id, target.code, target.name, verdict.verdict ORDER BY target.target_id
        """,
        name=name,
    )
    found: dict[str, dict[str, Any]] = {}
    for row in rows:
        entry = found.setdefault(
            row["code"], {"code": row["code"], "name": row["name"], "counts": dict.fromkeys(VERDICT_WORDS, 0)}
        )
        entry["counts"][VERDICT_WORDS[row["verdict"]]] = row["samples"]
        entry["best_score"] = max(entry.get("best_score") or 0.0, row["best_score"] or 0.0)
    return list(found.values())
