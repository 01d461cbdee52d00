"""Controls over time: bias and drift of every reference material, precision of every kind of pair, drawn an analyte."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import date
from typing import Any

from flask import Blueprint, render_template, request

from registry import control_history
from web import control_charts
from web.reading import registry_connection

blueprint = Blueprint("control_history", __name__)
#: Points of one chart; more are thinned out, those beyond two deviations stay.
MOST_POINTS = 300
STAGE_WORDS = {"lab": "laboratory repeats", "pulp": "pulp duplicates", "crush": "duplicates of crushed rock",
               "field": "field duplicates", "unknown": "duplicates, stage not told"}  # fmt: skip


@blueprint.get("/controls")
def page() -> Any:
    """The record of the controls of all certificates in use; ``?analyte=Zr`` shows one analyte, drawn."""
    with registry_connection() as connection:
        trends = control_history.trends(connection)
        pairs = control_history.precisions(connection)
    analytes = sorted({row["analyte"] for row in (*trends, *pairs)})
    analyte = request.args.get("analyte", "")
    if analyte:
        trends = [row for row in trends if row["analyte"] == analyte]
        pairs = [row for row in pairs if row["analyte"] == analyte]
    return render_template(
        "control_history.html",
        section="Batches",
        analytes=analytes,
        analyte=analyte,
        trends=trends,
        pairs=pairs,
        charts=[chart(row) for row in trends] if analyte else [],
        stages=STAGE_WORDS,
        shape=control_charts,
    )


def chart(trend: Mapping[str, Any]) -> dict[str, Any]:
    """One material and analyte with its ``points`` by day: x, y, word, title; ``left_out`` counts those not drawn."""
    points = _thinned(trend["points"])
    days = [date.fromisoformat(point["day"]).toordinal() for point in trend["points"]]
    first, last = min(days), max(days)
    drawn = []
    for point in points:
        day = date.fromisoformat(point["day"]).toordinal()
        place = 0.5 if first == last else (day - first) / (last - first)
        beyond = abs(point["z"])
        drawn.append(
            {
                "x": control_charts.LEFT + 8 + place * (control_charts.RIGHT - control_charts.LEFT - 16),
                "y": control_charts.height_of(point["z"]),
                "state": "failed" if beyond > 3.0 else "warned" if beyond > 2.0 else "passed",
                "title": f"{point['day']}, {point['batch']}, line {point['line_no']}: found {point['found']:g}, "
                f"expected {point['expected']:g}, deviation {point['z']:+.2f}",
            }
        )
    return {**trend, "points": drawn, "left_out": len(trend["points"]) - len(points)}


def _thinned(points: Sequence[Mapping[str, Any]]) -> list[Mapping[str, Any]]:
    far = [point for point in points if abs(point["z"]) > 2.0]
    step = max(1, -(-len(points) // max(1, MOST_POINTS - len(far))))
    return [point for place, point in enumerate(points) if place % step == 0 or abs(point["z"]) > 2.0]
