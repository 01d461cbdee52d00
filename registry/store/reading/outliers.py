"""Samples whose chemistry disagrees with their intrusion or with the logged rock: remarks, never a change."""

from __future__ import annotations

from typing import Any

import numpy as np
from sqlalchemy import Connection, text

from registry.petrology.logged_silica import logged_silica_window

FAR, DISAGREES = "chemistry_far_from_intrusion", "chemistry_disagrees_with_lithology"
_SAMPLE = (
    "s.sample_id, s.code AS sample_code, i.name AS intrusion, k.code AS site_code, s.from_m, s.to_m, s.lithology, "
    "s.alteration, d.sio2_vf_wt, d.tas_plutonic, d.tas_volcanic"
)
_AROUND = (
    "LEFT JOIN intrusion AS i ON i.intrusion_id = s.intrusion_id LEFT JOIN site AS k ON k.site_id = s.site_id "
    "JOIN derived AS d ON d.sample_id = s.sample_id"
)


def _rows(connection: Connection, sql: str, **bound: Any) -> list[dict[str, Any]]:
    return [dict(row) for row in connection.execute(text(sql), bound).mappings()]


def far_samples(connection: Connection, intrusion: str | None = None) -> list[dict[str, Any]]:
    """Samples far from the rest of their intrusion, the farthest (in units of the limit) first.

    Each ``sample_code intrusion site_code from_m to_m lithology tas_plutonic ... distance distance_limit component
    component_value component_median text``.
    """
    where = "" if intrusion is None else "WHERE i.name = :name"
    return _rows(
        connection,
        f"SELECT {_SAMPLE}, o.distance, o.distance_limit, o.component, o.component_value, o.component_median, o.text "
        f"FROM suite_outlier AS o JOIN sample AS s ON s.sample_id = o.sample_id {_AROUND} {where} "
        "ORDER BY o.distance / o.distance_limit DESC, s.code",
        **({} if intrusion is None else {"name": intrusion}),
    )


def disagreeing_samples(connection: Connection, limit: int = 500) -> list[dict[str, Any]]:
    """Samples whose silica lies outside what the logged rock name allows, by code, at most ``limit``.

    As ``far_samples`` with ``allowed_low_wt`` and ``allowed_high_wt``, the window of the logged names.
    """
    found = _rows(
        connection,
        f"SELECT {_SAMPLE} FROM sample AS s {_AROUND} JOIN warning_kind AS w ON w.code = '{DISAGREES}' "
        "WHERE substr(d.warnings, CAST(w.position AS integer) + 1, 1) = '1' ORDER BY s.code LIMIT :n",
        n=limit,
    )
    low, high = logged_silica_window([row["lithology"] for row in found], [row["alteration"] for row in found])
    for row, least, greatest in zip(found, low.tolist(), high.tolist(), strict=True):
        row["allowed_low_wt"] = None if np.isnan(least) else least
        row["allowed_high_wt"] = None if np.isnan(greatest) else greatest
        row["text"] = (
            f"logged {row['lithology']} ({least:.0f} to {greatest:.0f} wt% SiO2 in the total alkali-silica diagram), "
            f"found {row['sio2_vf_wt']:.1f} wt%, the silica of {row['tas_plutonic'] or 'no named field'}: a swapped "
            "sample, a wrong log or a strong alteration; look at the core again"
        )
    return found


def suspected_swaps(connection: Connection, limit: int = 500) -> list[dict[str, Any]]:
    """Both lists as one, a row a sample: what stands in both comes first, then the far ones, then by code.

    ``codes`` holds the remarks' codes and ``texts`` their words.
    """
    merged: dict[int, dict[str, Any]] = {}
    for code, rows in ((FAR, far_samples(connection)), (DISAGREES, disagreeing_samples(connection, limit))):
        for row in rows:
            entry = merged.setdefault(row["sample_id"], {**row, "codes": [], "texts": []})
            entry.update({key: value for key, value in row.items() if key not in entry})
            entry["codes"].append(code)
            entry["texts"].append(row["text"])
    for entry in merged.values():
        entry.pop("text", None)
    ordered = sorted(merged.values(), key=lambda row: (-len(row["codes"]), FAR not in row["codes"], row["sample_code"]))
    return ordered[:limit]
