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
                "word": "",
                "word_x": 0.0,
                "anchor": "start",
                "title": _title(point, value),
            }
        )
    _name_marks(points)
    return {
        **{name: value for name, value in analyte.items() if name != "series"},
        "points": points,
        "first": first,
        "last": last,
        "left_out": len(series) - len(drawn),
    }


def width_of(word: str) -> float:
    """About how wide a word beside a mark is drawn."""
    return 7.0 * len(word)


def _name_marks(points: list[dict[str, Any]]) -> None:
    """Write beside each mark that did not pass what it is, where there is room: failed ones first, then from the left.

    A word that would lie on a mark or on another word shrinks to its arrow, or is left out: the mark's shape and its
    title say it too.
    """
    marks = [point for point in points if point["state"] in ("warned", "failed")]
    taken: list[tuple[float, float, float]] = []
    for point in sorted(marks, key=lambda one: (one["state"] != "failed", one["x"])):
        arrow = {"up": "↑", "down": "↓"}.get(point["beyond"], "")
        full = f"{point['state']} {arrow}".rstrip()
        for word in (full, arrow) if arrow else (full,):
            places = [(point["x"] + 7, "start"), (point["x"] - 7, "end")]
            for at, anchor in places:
                left, right = (at, at + width_of(word)) if anchor == "start" else (at - width_of(word), at)
                if left < LEFT or right > WIDTH or _is_taken(left, right, point["y"], taken, points):
                    continue
                point.update(word=word, word_x=at, anchor=anchor)
                taken.append((left, right, point["y"]))
                break
            if point["word"]:
                break


def _is_taken(
    left: float, right: float, height: float, words: list[tuple[float, float, float]], marks: list[dict[str, Any]]
) -> bool:
    boxes = [*words, *((mark["x"] - 5, mark["x"] + 5, mark["y"]) for mark in marks)]
    return any(left < end and start < right and abs(height - y) < 11 for start, end, y in boxes)


def standing(states: Sequence[Mapping[str, Any]], most_named: int = 8) -> str:
    """What the controls of a batch say, in a sentence; ``states``: ``analyte``, ``state`` of each that was judged."""
    by_state: dict[str, list[str]] = {}
    for one in states:
        by_state.setdefault(one["state"], []).append(one["analyte"])
    failing, remarked, passing = (by_state.get(state, []) for state in ORDER[:3])

    def named(analytes: list[str]) -> str:
        more = len(analytes) - most_named
        return ", ".join(analytes[:most_named]) + (f" and {more} more" if more > 0 else "")

    if not states:
        return "Its controls could not be judged."
    others = [f"{named(remarked)} {'passes' if len(remarked) == 1 else 'pass'} with remarks"] if remarked else []
    if passing:
        others.append(f"{len(passing)} {'analyte passes' if len(passing) == 1 else 'analytes pass'}")
    if failing:
        return f"Its controls fail for {named(failing)}" + (f"; {', '.join(others)}" if others else "") + "."
    return f"Its controls pass, with remarks on {named(remarked)}." if remarked else "Its controls pass."


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
