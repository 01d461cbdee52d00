"""Controls over all active batches: bias and drift of each material over time, precision of each analyte from pairs."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from registry.control_lines import stage_of_pair
from registry.controlling import read_patterns
from registry.quality import duplicates
from registry.quality.trends import Bias, Line, bias, least_squares
from registry.quality.verdicts import ERRORS_TO_NAME, PERCENT_TO_NAME, RESULTS_FOR_BIAS, RESULTS_FOR_DRIFT
from registry.store import quality_rows

DAYS_PER_YEAR = 365.25
#: What a row of the history is told apart by: results of two digestions are not one record.
TREND_KEY = ("material", "analyte", "unit", "digestion", "lab")
PAIR_KEY = ("analyte", "unit", "digestion", "lab", "stage")


def trends(connection: Any, materials: Sequence[str] | None = None) -> list[dict[str, Any]]:
    """Bias and drift over time, one dict a material, analyte, unit, digestion and laboratory, over all active batches.

    ``bias_percent`` is the mean of 100 (found - expected)/expected with its standard error, ``drift_percent_per_year``
    the least-squares slope over the dates with its own (None where there are too few); ``remark`` names what is beyond
    the limits of ``registry.quality.verdicts``; ``points`` are the results. ``materials`` None: all of them.
    """
    groups: dict[tuple[Any, ...], list[tuple[Any, ...]]] = {}
    width = len(TREND_KEY)
    for row in quality_rows.history(connection, materials):
        groups.setdefault(row[:width], []).append(row[width:])
    found = [_trend(dict(zip(TREND_KEY, key, strict=True)), rows) for key, rows in groups.items()]
    return sorted(
        found, key=lambda one: (one["analyte"], one["unit"], one["digestion"], one["lab"] or "", one["material"])
    )


def _trend(key: dict[str, Any], rows: Sequence[tuple[Any, ...]]) -> dict[str, Any]:
    days, codes, line_nos, found, expected, z = zip(*rows, strict=True)
    difference = 100.0 * (np.array(found) - np.array(expected)) / np.array(expected)
    dates = np.array(days, dtype="datetime64[D]")
    years = (dates - dates.min()).astype(np.float64) / DAYS_PER_YEAR
    line, mean = least_squares(years, difference), bias(difference)
    return {
        **key,
        "results": mean.n,
        "first_on": str(dates.min()),
        "last_on": str(dates.max()),
        "bias_percent": _known(mean.mean),
        "bias_error_percent": _known(mean.error),
        "drift_percent_per_year": _known(line.slope),
        "drift_error_percent_per_year": _known(line.slope_error),
        "remark": _remark(mean, line, float(years.max())),
        "points": [
            {"day": day, "batch": code, "line_no": line_no, "found": one, "expected": wanted, "z": score}
            for day, code, line_no, one, wanted, score in zip(days, codes, line_nos, found, expected, z, strict=True)
        ],
    }


def _remark(mean: Bias, line: Line, span_years: float) -> str:
    """Bias, drift or both where they exceed their errors and what may be overlooked; empty else."""
    said = []
    if mean.n >= RESULTS_FOR_BIAS and abs(mean.mean) > max(PERCENT_TO_NAME, ERRORS_TO_NAME * mean.error):
        said.append("bias")
    if line.n >= RESULTS_FOR_DRIFT and abs(line.slope) > ERRORS_TO_NAME * line.slope_error:
        said += ["drift"] if abs(line.slope) * span_years > PERCENT_TO_NAME else []
    return " and ".join(said)


def precisions(connection: Any) -> list[dict[str, Any]]:
    """Precision by analyte, unit, digestion, laboratory and stage of pair over all active batches.

    Thompson and Howarth's s_0, k and detection limit where there are 50 pairs or more, else None for these; the mean
    half relative difference in any case.
    """
    patterns = read_patterns(connection)
    groups: dict[tuple[Any, ...], list[tuple[float, float]]] = {}
    for *column, kind, code, declared, text, original, duplicate in quality_rows.pairs(connection):
        stage = stage_of_pair(kind, declared, code, text, patterns)
        groups.setdefault((*column, stage), []).append((original, duplicate))
    found = []
    for key, values in sorted(groups.items(), key=lambda item: tuple(word or "" for word in item[0])):
        first, second = np.array(values, dtype=np.float64).T
        fit = duplicates.fit_precision(first, second)
        half = duplicates.half_relative_difference(first, second)
        found.append(
            {
                **dict(zip(PAIR_KEY, key, strict=True)),
                "pairs": len(values),
                "mean_half_difference_percent": _known(float(np.nanmean(half))) if (~np.isnan(half)).any() else None,
                "asked_percent": 200.0 * duplicates.ASKED_K[key[-1]],
                "s_0": None if fit is None else fit.s_0,
                "k": None if fit is None else fit.k,
                "detection_limit": None if fit is None else _known(duplicates.detection_limit_of(fit.s_0, fit.k)),
            }
        )
    return found


def _known(value: float) -> float | None:
    return None if np.isnan(value) else float(value)
