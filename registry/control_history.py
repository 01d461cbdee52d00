"""Controls over all active batches: bias and drift of each material over time, precision of each analyte from pairs."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from registry.quality import duplicates
from registry.quality.trends import bias, least_squares
from registry.store import quality_rows

DAYS_PER_YEAR = 365.25


def trends(connection: Any, materials: Sequence[str]) -> list[dict[str, Any]]:
    """Bias and drift over time, one dict a material, analyte, unit and laboratory, over all active batches.

    ``bias_percent`` is the mean of 100 (found - expected)/expected with its standard error, ``drift_percent_per_year``
    the least-squares slope over the dates with its own (None where there are too few); ``points`` are the results.
    """
    groups: dict[tuple[Any, ...], list[tuple[Any, ...]]] = {}
    for row in quality_rows.history(connection, materials):
        groups.setdefault(row[:4], []).append(row)
    return [_trend(key, rows) for key, rows in groups.items()]


def _trend(key: tuple[Any, ...], rows: Sequence[tuple[Any, ...]]) -> dict[str, Any]:
    difference = np.array([100.0 * (row[7] - row[8]) / row[8] for row in rows])
    days = np.array([np.datetime64(row[4]) for row in rows], dtype="datetime64[D]")
    line = least_squares((days - days.min()).astype(np.float64) / DAYS_PER_YEAR, difference)
    mean = bias(difference)
    material, analyte, unit, lab = key
    return {
        "material": material,
        "analyte": analyte,
        "unit": unit,
        "lab": lab,
        "results": mean.n,
        "first_on": str(days.min()),
        "last_on": str(days.max()),
        "bias_percent": _known(mean.mean),
        "bias_error_percent": _known(mean.error),
        "drift_percent_per_year": _known(line.slope),
        "drift_error_percent_per_year": _known(line.slope_error),
        "points": [
            {"day": row[4], "batch": row[5], "line_no": row[6], "found": row[7], "expected": row[8], "z": row[9]}
            for row in rows
        ],
    }


def precisions(connection: Any) -> list[dict[str, Any]]:
    """Precision by analyte, unit, laboratory and kind of pair over all active batches.

    Thompson and Howarth's s_0, k and detection limit where there are 50 pairs or more, else None for these; the mean
    half relative difference in any case.
    """
    groups: dict[tuple[Any, ...], list[tuple[float, float]]] = {}
    for *key, original, duplicate in quality_rows.pairs(connection):
        groups.setdefault(tuple(key), []).append((original, duplicate))
    found = []
    for (analyte, unit, lab, kind), values in groups.items():
        first, second = np.array(values, dtype=np.float64).T
        fit = duplicates.fit_precision(first, second)
        half = duplicates.half_relative_difference(first, second)
        found.append(
            {
                "analyte": analyte,
                "unit": unit,
                "lab": lab,
                "kind": kind,
                "pairs": len(values),
                "mean_half_difference_percent": _known(float(np.nanmean(half))) if (~np.isnan(half)).any() else None,
                "s_0": None if fit is None else fit.s_0,
                "k": None if fit is None else fit.k,
                "detection_limit": None if fit is None else _known(duplicates.detection_limit_of(fit.s_0, fit.k)),
            }
        )
    return found


def _known(value: float) -> float | None:
    return None if np.isnan(value) else float(value)
