"""The controls of a batch: every judged result by analyte, the state of each analyte, and that of the batch."""

from __future__ import annotations

from typing import Any

from sqlalchemy import Connection, text

from registry.petrology.analytes import QUALIFIER_SIGNS
from registry.store.sheets import ANALYTE_STATE_WORDS, CONTROL_STATE_WORDS

#: What a batch without judged controls is called.
NOT_CONTROLLED = "no controls"


def control_counts(connection: Connection, batch_id: int) -> dict[str, int]:
    """How many control lines a batch has, by kind."""
    rows = connection.execute(
        text(
            "SELECT kind, count(DISTINCT aliquot_id) FROM control_outcome WHERE batch_id = :batch_id "
            "GROUP BY kind ORDER BY kind DESC"
        ),
        {"batch_id": batch_id},
    )
    return {row[0]: row[1] for row in rows}


def without_certificate(connection: Connection, batch_id: int) -> list[dict[str, Any]]:
    """Reference materials of a batch that no certificate in the registry judges: ``material lines sample_code``.

    ``material`` is the name in the sample list, None where it names none; ``sample_code`` one of its samples.
    """
    rows = connection.execute(
        text(
            """
            SELECT s.reference_material AS material, count(*) AS lines, min(s.code) AS sample_code
            FROM aliquot AS a JOIN sample AS s ON s.sample_id = a.sample_id
            WHERE a.batch_id = :batch_id AND s.kind = 'reference_material' AND NOT EXISTS (
                SELECT 1 FROM control_outcome AS o WHERE o.aliquot_id = a.aliquot_id AND o.expected IS NOT NULL
            )
            GROUP BY s.reference_material ORDER BY s.reference_material
            """
        ),
        {"batch_id": batch_id},
    )
    return [dict(row) for row in rows.mappings()]


def analyte_states(connection: Connection, batch_id: int) -> list[dict[str, Any]]:
    """State of every analyte that has judged controls, in file order: ``column_id position analyte unit method
    digestion state remarks reference_results blank_results pairs bias_percent bias_error_percent drift_percent
    drift_error_percent precision_s0 precision_k``; None where a number could not be had."""
    rows = connection.execute(
        text(
            """
            SELECT c.batch_column_id AS column_id, c.position, c.analyte, c.unit, c.method, c.digestion, f.state,
                f.remarks, f.reference_results, f.blank_results, f.pairs, f.bias_percent, f.bias_error_percent,
                f.drift_percent, f.drift_error_percent, f.precision_s0, f.precision_k
            FROM control_state AS f JOIN batch_column AS c ON c.batch_column_id = f.column_id
            WHERE f.batch_id = :batch_id ORDER BY c.position
            """
        ),
        {"batch_id": batch_id},
    )
    return [{**row, "state": ANALYTE_STATE_WORDS[row["state"]]} for row in rows.mappings()]


def batch_state(connection: Connection, batch_id: int) -> str:
    """``passes``, ``passes with remarks``, ``fails`` (the worst of its analytes) or ``no controls``."""
    worst = connection.execute(
        text("SELECT max(state) FROM control_state WHERE batch_id = :batch_id"), {"batch_id": batch_id}
    ).scalar()
    return NOT_CONTROLLED if worst is None else ANALYTE_STATE_WORDS[worst]


def batch_states(connection: Connection) -> dict[int, dict[str, Any]]:
    """``state`` and how many analytes fail (``failing``), by batch id; batches without judged controls are left out."""
    rows = connection.execute(
        text(
            "SELECT batch_id, max(state), sum(CASE WHEN state = 2 THEN 1 ELSE 0 END) FROM control_state "
            "GROUP BY batch_id"
        )
    )
    return {row[0]: {"state": ANALYTE_STATE_WORDS[row[1]], "failing": row[2]} for row in rows}


def batch_controls(connection: Connection, batch_id: int) -> dict[str, Any]:
    """All of a batch's controls: ``state``, ``remarks``, ``counts`` by kind, ``analytes``.

    ``analytes`` is a list in file order, each with ``column_id analyte unit method digestion``, its ``state``,
    ``remarks`` and numbers (None where nothing of it was judged) and ``series``: the results in line order, dicts of
    ``line_no sample_code kind material found expected z limit_low limit_high state rule source sign`` (sign: ``<``,
    ``>`` or nothing before what was found).
    """
    states = {state["column_id"]: state for state in analyte_states(connection, batch_id)}
    series: dict[int, list[dict[str, Any]]] = {}
    described: dict[int, dict[str, Any]] = {}
    rows = connection.execute(
        text(
            """
            SELECT o.column_id, c.analyte, c.unit, c.method, c.digestion, c.detection_limit, a.line_no,
                s.code AS sample_code, o.kind, o.material, o.found, o.expected, o.z, o.limit_low, o.limit_high,
                o.state, o.rule, o.source, r.qualifier AS sign
            FROM control_outcome AS o JOIN batch_column AS c ON c.batch_column_id = o.column_id
            JOIN aliquot AS a ON a.aliquot_id = o.aliquot_id JOIN sample AS s ON s.sample_id = a.sample_id
            LEFT JOIN result AS r ON r.aliquot_id = o.aliquot_id AND r.column_id = o.column_id
            WHERE o.batch_id = :batch_id ORDER BY c.position, a.line_no, a.aliquot_id
            """
        ),
        {"batch_id": batch_id},
    )
    of_column = ("column_id", "analyte", "unit", "method", "digestion", "detection_limit")
    for row in rows.mappings():
        described.setdefault(row["column_id"], {name: row[name] for name in of_column})
        point = {name: value for name, value in row.items() if name not in of_column}
        point["state"] = CONTROL_STATE_WORDS[row["state"]]
        point["sign"] = QUALIFIER_SIGNS[row["sign"] or 0]
        series.setdefault(row["column_id"], []).append(point)
    nothing = {"state": None, "remarks": "", "reference_results": 0, "blank_results": 0, "pairs": 0}
    analytes = [
        {**nothing, **column, **states.get(column_id, {}), "series": series[column_id]}
        for column_id, column in described.items()
    ]
    return {
        "state": batch_state(connection, batch_id),
        "counts": control_counts(connection, batch_id),
        "analytes": analytes,
        "remarks": [f"{each['analyte']} {each['state']}: {each['remarks']}" for each in analytes if each["remarks"]],
    }
