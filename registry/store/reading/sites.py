"""One site: its collar or station, its survey, the logged intervals, and its samples down the hole."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from sqlalchemy import Connection, text

from registry.store.reading.columns import Column
from registry.store.sheets import CONTROL_KINDS, VERDICT_WORDS


def _rows(connection: Connection, sql: str, **bound: Any) -> list[dict[str, Any]]:
    return [dict(row) for row in connection.execute(text(sql), bound).mappings()]


def find_site(connection: Connection, code: str) -> dict[str, Any] | None:
    """The site of this code with its area; None where there is none."""
    rows = _rows(
        connection,
        "SELECT site.*, area.name AS area FROM site LEFT JOIN area ON area.area_id = site.area_id "
        "WHERE site.code = :code",
        code=code,
    )
    return rows[0] if rows else None


def near_sites(connection: Connection, code: str, limit: int = 6) -> list[str]:
    """Codes that someone who typed ``code`` may have meant: the same in other case, then its neighbours in order."""
    same = _rows(connection, "SELECT code FROM site WHERE lower(code) = lower(:code) LIMIT 3", code=code)
    before = _rows(
        connection, "SELECT code FROM site WHERE code < :code ORDER BY code DESC LIMIT :n", code=code, n=limit // 2
    )
    after = _rows(
        connection, "SELECT code FROM site WHERE code > :code ORDER BY code LIMIT :n", code=code, n=limit // 2
    )
    return list(dict.fromkeys(row["code"] for row in (*same, *reversed(before), *after)))[:limit]


def survey_rows(connection: Connection, site_id: int) -> list[dict[str, Any]]:
    """The survey of a hole by depth: ``depth_m azimuth_deg dip_deg``."""
    return _rows(
        connection,
        "SELECT depth_m, azimuth_deg, dip_deg FROM survey WHERE site_id = :site ORDER BY depth_m",
        site=site_id,
    )


def interval_rows(connection: Connection, site_id: int) -> list[dict[str, Any]]:
    """The logged intervals by depth: ``from_m to_m lithology description``."""
    return _rows(
        connection,
        "SELECT from_m, to_m, lithology, description FROM lithology_interval WHERE site_id = :site "
        "ORDER BY from_m, to_m",
        site=site_id,
    )


def position_bases(connection: Connection, site_id: int) -> list[tuple[str, int]]:
    """(how positions of its samples were had, how many) in words as stored, the most frequent first."""
    rows = connection.execute(
        text(
            "SELECT position_basis, count(*) AS n FROM sample WHERE site_id = :site AND position_basis IS NOT NULL "
            "GROUP BY position_basis ORDER BY n DESC, position_basis"
        ),
        {"site": site_id},
    )
    return [(row[0], row[1]) for row in rows]


def strip_samples(
    connection: Connection, site_id: int, shown: Sequence[Column], target_id: int | None
) -> list[dict[str, Any]]:
    """The samples with a depth, from the top: ``code from_m to_m verdict value_0 value_1 ...``, ordered as ``shown``.

    ``verdict`` is the word for the target, or the best of all where it is None; None where none was given. Control
    samples are left out.
    """
    controls = ", ".join(f"'{kind}'" for kind in CONTROL_KINDS)
    values = "".join(f', {column.sql} AS "value_{place}"' for place, column in enumerate(shown))
    verdict = "derived.best_verdict" if target_id is None else "verdict.verdict"
    judged = (
        ""
        if target_id is None
        else "LEFT JOIN verdict ON verdict.sample_id = sample.sample_id AND verdict.target_id = :target"
    )
    rows = connection.execute(
        text(
            f"SELECT sample.code, sample.from_m, sample.to_m, {verdict} AS verdict{values} FROM sample "
            "LEFT JOIN derived ON derived.sample_id = sample.sample_id "
            f"LEFT JOIN composition ON composition.sample_id = sample.sample_id {judged} "
            "WHERE sample.site_id = :site AND coalesce(sample.from_m, sample.to_m) IS NOT NULL "
            f"AND sample.kind NOT IN ({controls}) ORDER BY coalesce(sample.from_m, sample.to_m), sample.code"
        ),
        {"site": site_id} if target_id is None else {"site": site_id, "target": target_id},
    )
    found = [dict(row) for row in rows.mappings()]
    for row in found:
        row["verdict"] = None if row["verdict"] is None else VERDICT_WORDS[row["verdict"]]
    return found
