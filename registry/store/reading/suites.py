"""What was computed of one intrusion and of one area, as plain dictionaries for the pages."""

from __future__ import annotations

import json
from typing import Any

from sqlalchemy import Connection, text

from registry.petrology.mass_change import COMPONENT_COLUMNS
from registry.store.reading.outliers import far_samples

#: Headings of the models, in the order of a page.
MODEL_TITLES = {
    "samples": "Samples used",
    "population": "One population",
    "trend": "Line of descent",
    "series": "Series",
    "fractionation": "Fractional crystallisation",
    "batch_melting": "Melting of the mantle",
    "mass_balance": "Mass balance of crystallisation",
    "immobile_classification": "By immobile elements",
    "cooling": "Heat kept since emplacement",
    "heat": "Radiogenic heat",
}


def _rows(connection: Connection, sql: str, **bound: Any) -> list[dict[str, Any]]:
    return [dict(row) for row in connection.execute(text(sql), bound).mappings()]


def intrusion_suite(connection: Connection, name: str) -> dict[str, Any] | None:
    """What was computed of an intrusion; None where there is none of that name.

    ``intrusion`` its row of ``intrusion_sheet``; ``named`` the samples the user named (``parent_sample fresh_sample``);
    ``models`` [{``code title rows``}] with rows of ``suite_sheet``; ``outliers`` as ``far_samples`` gives them;
    ``mass_change`` as ``mass_changes`` gives it; ``is_stale`` whether it waits to be computed anew.
    """
    found = _rows(connection, "SELECT * FROM intrusion_sheet WHERE intrusion = :name", name=name)
    if not found:
        return None
    named = _rows(
        connection,
        "SELECT i.parent_sample, i.fresh_sample, CASE WHEN EXISTS (SELECT 1 FROM stale_group AS g WHERE "
        "g.kind = 'intrusion' AND g.group_id = i.intrusion_id) OR EXISTS (SELECT 1 FROM stale AS x JOIN sample AS s "
        "ON s.sample_id = x.sample_id WHERE s.intrusion_id = i.intrusion_id) THEN 1 ELSE 0 END AS is_stale "
        "FROM intrusion AS i WHERE i.name = :name",
        name=name,
    )[0]
    rows = _rows(
        connection,
        "SELECT r.model, r.quantity, r.value, r.unit, r.quality, r.cause FROM suite_row AS r JOIN intrusion AS i ON "
        "i.intrusion_id = r.intrusion_id WHERE i.name = :name ORDER BY r.position",
        name=name,
    )
    models = [
        {"code": code, "title": title, "rows": [row for row in rows if row["model"] == code]}
        for code, title in MODEL_TITLES.items()
    ]
    return {
        "intrusion": found[0],
        "is_stale": bool(named.pop("is_stale")),
        "named": named,
        "models": [model for model in models if model["rows"]],
        "outliers": far_samples(connection, name),
        "mass_change": mass_changes(connection, name),
    }


def mass_changes(connection: Connection, intrusion: str, limit: int = 200) -> list[dict[str, Any]]:
    """The altered samples of an intrusion against its fresh parent, at most ``limit``, by code.

    Each ``sample_code reference_sample isocon_slope mass_change_percent immobile_components cause components``, the
    last a list of ``component change_wt change_percent``.
    """
    samples = _rows(
        connection,
        "SELECT s.code AS sample_code, m.reference_sample, m.isocon_slope, m.immobile_components, m.cause, m.changes "
        "FROM mass_change AS m JOIN sample AS s ON s.sample_id = m.sample_id JOIN intrusion AS i ON "
        "i.intrusion_id = m.intrusion_id WHERE i.name = :name ORDER BY s.code LIMIT :n",
        name=intrusion,
        n=limit,
    )
    for sample in samples:
        changes = json.loads(sample.pop("changes") or '{"wt": [], "percent": []}')
        sample["components"] = [
            {"component": component, "change_wt": change, "change_percent": percent}
            for component, change, percent in zip(COMPONENT_COLUMNS, changes["wt"], changes["percent"], strict=False)
            if change is not None
        ]
        slope = sample["isocon_slope"]
        sample["mass_change_percent"] = None if slope is None else 100.0 * (1.0 / slope - 1.0)
    return samples


def sample_mass_change(connection: Connection, sample_id: int) -> list[dict[str, Any]]:
    """The rows of ``mass_change_sheet`` of one sample; empty where it is not altered or has no intrusion."""
    return _rows(connection, "SELECT * FROM mass_change_sheet WHERE sample_id = :id", id=sample_id)


def area_summary(connection: Connection, name: str) -> dict[str, Any] | None:
    """An area's row of ``area_sheet`` and its ``intrusions`` (of ``intrusion_sheet``); None where there is none."""
    found = _rows(connection, "SELECT * FROM area_sheet WHERE area = :name", name=name)
    if not found:
        return None
    intrusions = _rows(connection, "SELECT * FROM intrusion_sheet WHERE area = :name ORDER BY intrusion", name=name)
    return {**found[0], "intrusions": intrusions}


def area_summaries(connection: Connection) -> list[dict[str, Any]]:
    """The rows of ``area_sheet``, by name."""
    return _rows(connection, "SELECT * FROM area_sheet ORDER BY area")
