"""Control charts as positions for the template to draw: one small chart an analyte, deviations by line of the file.

A reference material stands at its z-score, a duplicate at its difference over what is allowed for, a blank at its
distance from what its material holds, drawn so that it is warned at two and fails at three: so the lines at two and
three mean the same for all three kinds. Values by line with limits at two and three deviations are Shewhart's chart
(1931).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

WIDTH, HEIGHT = 320, 132
LEFT, RIGHT, TOP, BOTTOM = 24.0, 312.0, 10.0, 114.0
#: Deviations drawn; what lies beyond stands at the edge with an arrow.
REACH = 4.0
MOST_POINTS = 150
#: A blank fails at ten detection limits and is warned at five (``registry.quality.blanks``).
BLANK_WARNED_BEFORE = 5.0
SHAPES = {"reference_material": "circle", "blank": "square", "duplicate": "triangle"}
ORDER = ("fails", "passes with remarks", "passes", None)


def deviation(point: Mapping[str, Any], detection_limit: float | None = None) -> float | None:
    """How far a control lies from what was expected, in standard deviations; None where that is not known.

    A blank is warned ``BLANK_WARNED_BEFORE`` detection limits below the limit at which it fails.
    """
    if point["z"] is not None:
        return float(point["z"])
    found, expected, limit = point["found"], point["expected"], point["limit_high"]
    if found is None or limit is None:
        return None
    expected = 0.0 if expected is None else expected
    if limit <= expected:
        return None
    warned = limit - BLANK_WARNED_BEFORE * (detection_limit or 0.0)
    if point["kind"] != "blank" or not expected < warned < limit:
        return 3.0 * (found - expected) / (limit - expected)
    if found <= warned:
        return 2.0 * (found - expected) / (warned - expected)
    return 2.0 + (found - warned) / (limit - warned)


def height_of(deviations: float) -> float:
    """Where a deviation stands in the chart, from the top."""
    held = max(-REACH, min(REACH, deviations))
    return TOP + (REACH - held) / (2 * REACH) * (BOTTOM - TOP)


def chart(analyte: Mapping[str, Any]) -> dict[str, Any]:
    """One analyte with its ``points``: x, y, shape, state, word, title; ``left_out`` counts points not drawn."""
    limit = analyte.get("detection_limit")
    series = [point for point in analyte["series"] if deviation(point, limit) is not None]
    drawn = _thinned(series)
    lines = [point["line_no"] for point in series]
    first, last = (min(lines), max(lines)) if lines else (0, 0)
    points = []
    for point in drawn:
        value = deviation(point, limit) or 0.0
        place = 0.5 if last == first else (point["line_no"] - first) / (last - first)
        points.append(
            {
                "x": LEFT + 8 + place * (RIGHT - LEFT - 16),
                "y": height_of(value),
                "beyond": "up" if value > REACH else "down" if value < -REACH else "",
                "shape": SHAPES.get(point["kind"], "circle"),
                "state": point["state"],
                "word": point["state"] if point["state"] in ("warned", "failed") else "",
                "title": _title(point, value),
            }
        )
    return {
        **{name: value for name, value in analyte.items() if name != "series"},
        "points": points,
        "first": first,
        "last": last,
        "left_out": len(series) - len(drawn),
    }


def _thinned(series: Sequence[Mapping[str, Any]]) -> list[Mapping[str, Any]]:
    """Every point that was not passed, and evenly spaced ones of those that were."""
    passed = [point for point in series if point["state"] == "passed"]
    room = max(0, MOST_POINTS - (len(series) - len(passed)))
    step = 1 if len(passed) <= room else -(-len(passed) // max(room, 1))
    kept = {id(point) for point in passed[::step]}
    return [point for point in series if point["state"] != "passed" or id(point) in kept]


def _title(point: Mapping[str, Any], value: float) -> str:
    what = point["material"] or point["kind"].replace("_", " ")
    text = f"line {point['line_no']}, {point['sample_code']}, {what}: found {point.get('sign', '')}{point['found']:g}"
    if point["expected"] is not None:
        text += f", expected {point['expected']:g}"
    return f"{text}, deviation {value:+.2f}, {point['state']}"


def charts(controls: Mapping[str, Any]) -> dict[str, list[dict[str, Any]]]:
    """The charts of a batch by the state of the analyte, the worst first; states without an analyte are left out."""
    groups: dict[str, list[dict[str, Any]]] = {}
    for state in ORDER:
        drawn = [chart(analyte) for analyte in controls["analytes"] if analyte["state"] == state]
        if drawn:
            groups[state or "not judged"] = drawn
    return groups


def conspicuous(controls: Mapping[str, Any], limit: int = 200) -> tuple[int, list[dict[str, Any]]]:
    """How many controls were warned or failed, and the first of them, failed ones first."""
    found = [
        {**point, "analyte": analyte["analyte"], "unit": analyte["unit"]}
        for analyte in controls["analytes"]
        for point in analyte["series"]
        if point["state"] in ("warned", "failed")
    ]
    found.sort(key=lambda point: (point["state"] != "failed", point["line_no"]))
    return len(found), found[:limit]
