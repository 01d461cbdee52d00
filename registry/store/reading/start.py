"""The start page: what came in, what needs attention, and what the registry holds."""

from __future__ import annotations

from typing import Any

from sqlalchemy import Connection, text

from registry.store import raw_rows
from registry.store.reading.outliers import FAR, suspected_swaps
from registry.store.sheets import ANALYTE_STATE_WORDS, CONTROL_KINDS

BATCHES_SHOWN = 5
REMARKS_SHOWN = 5
#: Undecided verdicts looked through for what they lack, of each target.
UNDECIDED_READ = 5000
_CONTROLS = ", ".join(f"'{kind}'" for kind in CONTROL_KINDS)


def _rows(connection: Connection, sql: str, **bound: Any) -> list[dict[str, Any]]:
    return [dict(row) for row in connection.execute(text(sql), bound).mappings()]


def totals(connection: Connection) -> dict[str, int]:
    """How many samples (controls apart), sites, intrusions, areas and batches there are."""
    row = (
        connection.execute(
            text(
                f"SELECT (SELECT count(*) FROM sample WHERE kind NOT IN ({_CONTROLS})) AS samples, "
                f"(SELECT count(*) FROM sample WHERE kind IN ({_CONTROLS})) AS controls, "
                "(SELECT count(*) FROM site) AS sites, (SELECT count(*) FROM intrusion) AS intrusions, "
                "(SELECT count(*) FROM area) AS areas, (SELECT count(*) FROM batch) AS batches"
            )
        )
        .mappings()
        .one()
    )
    return dict(row)


def is_demo(connection: Connection) -> bool:
    """Whether the registry is the demo, in which everything is invented."""
    return connection.execute(text("SELECT value FROM setting WHERE name = 'demo'")).scalar() == "1"


def last_batches(connection: Connection, limit: int = BATCHES_SHOWN) -> list[dict[str, Any]]:
    """The newest batches: ``code lab imported_at file_name state lines controls``, the last a word or None."""
    rows = _rows(
        connection,
        """
        SELECT batch.batch_id, batch.code, batch.lab, batch.imported_at, batch.file_name, batch.state,
            (SELECT count(*) FROM aliquot WHERE aliquot.batch_id = batch.batch_id) AS lines,
            (SELECT max(state) FROM control_state WHERE control_state.batch_id = batch.batch_id) AS controls
        FROM batch ORDER BY batch.batch_id DESC LIMIT :n
        """,
        n=limit,
    )
    for row in rows:
        row["controls"] = None if row["controls"] is None else ANALYTE_STATE_WORDS[row["controls"]]
    return rows


def failed_controls(connection: Connection) -> list[dict[str, Any]]:
    """Active batches with analytes that fail their controls: ``code failing``, the newest first."""
    rows = connection.execute(
        text(
            "SELECT batch.code, batch_column.analyte FROM control_state JOIN batch ON batch.batch_id = "
            "control_state.batch_id AND batch.state = 'active' JOIN batch_column ON batch_column.batch_column_id = "
            "control_state.column_id WHERE control_state.state = 2 ORDER BY batch.batch_id DESC, batch_column.position"
        )
    )
    found: dict[str, list[str]] = {}
    for code, analyte in rows:
        found.setdefault(code, []).append(analyte)
    return [{"code": code, "failing": analytes} for code, analytes in found.items()]


def waiting(connection: Connection) -> dict[str, int]:
    """How many samples are to be computed anew, and how many have no results at all."""
    stale = connection.execute(text("SELECT count(*) FROM stale")).scalar_one()
    bare = connection.execute(
        text(
            f"SELECT count(*) FROM sample WHERE kind NOT IN ({_CONTROLS}) AND NOT EXISTS "
            "(SELECT 1 FROM aliquot WHERE aliquot.sample_id = sample.sample_id)"
        )
    ).scalar_one()
    return {"stale": stale, "without_results": bare}


def unfit_samples(connection: Connection) -> list[dict[str, Any]]:
    """Samples whose analysis is not fit, by cause in words, the most frequent first: ``cause samples``."""
    return _rows(
        connection,
        "SELECT coalesce(derived.fitness_cause, 'no cause given') AS cause, count(*) AS samples FROM derived "
        "JOIN sample ON sample.sample_id = derived.sample_id WHERE derived.fitness = 'unfit' "
        f"AND sample.kind NOT IN ({_CONTROLS}) GROUP BY derived.fitness_cause ORDER BY samples DESC, cause",
    )


def undecided_reasons(connection: Connection, target_id: int, limit: int = UNDECIDED_READ) -> list[str]:
    """The packed reasons of the first undecided verdicts on a target, at most ``limit``, by sample."""
    rows = raw_rows.select(
        connection,
        f"SELECT reasons FROM verdict WHERE target_id = {int(target_id)} AND verdict = 3 "
        f"ORDER BY sample_id LIMIT {int(limit)}",
    )
    return [row[0] for row in rows]


def remarks(connection: Connection, shown: int = REMARKS_SHOWN) -> tuple[int, int, list[dict[str, Any]]]:
    """Samples to look at again: how many far from their intrusion, how many against their log, the first of them."""
    found = suspected_swaps(connection)
    far = sum(FAR in row["codes"] for row in found)
    return far, sum(len(row["codes"]) - (FAR in row["codes"]) for row in found), found[:shown]
