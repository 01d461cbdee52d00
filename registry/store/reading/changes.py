"""The log of verdict changes: what changed after a point of the log, sample by sample."""

from __future__ import annotations

from typing import Any

from sqlalchemy import Connection, text

VERDICTS = ("favourable", "possible", "unfavourable", "undecided")
CHANGES_SHOWN = 50


def verdict_changes(connection: Connection, after_id: int, limit: int = CHANGES_SHOWN) -> list[dict[str, Any]]:
    """The first ``limit`` changes logged after that id: ``sample``, ``target``, ``before`` and ``after`` in words.

    ``before`` or ``after`` is None where there was no verdict.
    """
    rows = connection.execute(
        text(
            """
            SELECT sample.code AS sample, target.name AS target, change.verdict_from, change.verdict_to
            FROM verdict_change AS change
            JOIN sample ON sample.sample_id = change.sample_id
            JOIN target ON target.target_id = change.target_id
            WHERE change.verdict_change_id > :after_id
            ORDER BY change.verdict_change_id LIMIT :limit
            """
        ),
        {"after_id": after_id, "limit": limit},
    )
    return [
        {
            "sample": row.sample,
            "target": row.target,
            "before": _word(row.verdict_from),
            "after": _word(row.verdict_to),
        }
        for row in rows
    ]


def _word(stored: int | None) -> str | None:
    return None if stored is None else VERDICTS[stored]


def changes_by_kind(connection: Connection, after_id: int) -> list[tuple[str, str | None, str | None, int]]:
    """(target's name, verdict before, verdict after, how many) of the changes after that id, targets in their order."""
    rows = connection.execute(
        text(
            "SELECT target.name, change.verdict_from, change.verdict_to, count(*) AS n FROM verdict_change AS change "
            "JOIN target ON target.target_id = change.target_id WHERE change.verdict_change_id > :after_id "
            "GROUP BY target.target_id, target.name, change.verdict_from, change.verdict_to "
            "ORDER BY target.target_id, n DESC"
        ),
        {"after_id": after_id},
    )
    return [(row[0], _word(row[1]), _word(row[2]), row[3]) for row in rows]
