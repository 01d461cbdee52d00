"""The targets with their active definitions, and how the registry's samples stand to them."""

from __future__ import annotations

from typing import Any

from sqlalchemy import Connection, text

from registry.store.sheets import VERDICT_WORDS


def target_list(connection: Connection) -> list[dict[str, Any]]:
    """Every target with its active version, the number of samples by verdict word, and the text of its definition."""
    rows = connection.execute(
        text(
            """
            SELECT target.target_id, target.code, target.name, target_version.target_version_id,
                target_version.version, target_version.created_at, target_version.definition
            FROM target LEFT JOIN target_version
                ON target_version.target_id = target.target_id AND target_version.active = 1
            ORDER BY target.target_id
            """
        )
    )
    targets = [dict(row) for row in rows.mappings()]
    counts: dict[int, dict[str, int]] = {}
    for row in connection.execute(
        text("SELECT target_id, verdict, count(*) AS samples FROM verdict GROUP BY target_id, verdict")
    ):
        counts.setdefault(row.target_id, {})[VERDICT_WORDS[row.verdict]] = row.samples
    for target in targets:
        target["counts"] = {word: counts.get(target["target_id"], {}).get(word, 0) for word in VERDICT_WORDS}
    return targets


def surviving_counts(connection: Connection, target_id: int) -> dict[str, Any]:
    """How many ``samples`` have a probability that the verdict survives analytical error, and by verdict word, of the
    favourable and possible ones, their ``number`` and how many are ``surviving`` in nine draws of ten or more."""
    rows = connection.execute(
        text(
            "SELECT verdict, count(*) AS number, sum(CASE WHEN probability >= 0.9 THEN 1 ELSE 0 END) AS surviving "
            "FROM verdict WHERE target_id = :target_id AND probability IS NOT NULL GROUP BY verdict ORDER BY verdict"
        ),
        {"target_id": target_id},
    ).all()
    shown = {VERDICT_WORDS[row.verdict]: {"number": row.number, "surviving": row.surviving} for row in rows}
    return {
        "samples": sum(row.number for row in rows),
        "verdicts": {word: shown[word] for word in ("favourable", "possible") if word in shown},
    }


def target_names(connection: Connection) -> dict[str, str]:
    """Names of the targets by code, in their own order."""
    return {row.code: row.name for row in connection.execute(text("SELECT code, name FROM target ORDER BY target_id"))}


def criteria(connection: Connection, target_version_id: int) -> list[dict[str, Any]]:
    """Fitness needs, gates and weighed criteria of a version, in their own order."""
    rows = connection.execute(
        text(
            """
            SELECT kind, code, label, column_name, comparison, threshold, weight, unit, provisional, source, note
            FROM criterion WHERE target_version_id = :version ORDER BY position
            """
        ),
        {"version": target_version_id},
    )
    return [dict(row) for row in rows.mappings()]


def active_targets(connection: Connection) -> list[dict[str, Any]]:
    """Targets with the text of their active definition: ``target_id code name version definition``, in their order."""
    rows = connection.execute(
        text(
            "SELECT target.target_id, target.code, target.name, target_version.version, target_version.definition "
            "FROM target JOIN target_version ON target_version.target_id = target.target_id "
            "AND target_version.active = 1 ORDER BY target.target_id"
        )
    )
    return [dict(row) for row in rows.mappings()]
