"""What the page of the map says beside it: holes without a trace, north, what positions rest on; where links lead."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from typing import Any

from registry.map_grids import Grid, true_north_deg
from registry.mapping import Frame
from registry.store.reading.filters import Filter
from web import numbers
from web.diagram_request import ENDS
from web.map_request import MapChoice
from web.sentence import address


def surveys_said(sites: Sequence[Mapping[str, Any]], traced: set[int], most_traces: int, too_many: bool) -> list[str]:
    """What is said of holes without a trace."""
    holes = [site for site in sites if site["kind"] == "drill_hole" and site["site_id"] not in traced]
    without = [site["code"] for site in holes if not site["stations"]]
    magnetic = [site["code"] for site in holes if site["stations"] and site["azimuth_reference"] == "magnetic"]
    said = []
    if without:
        said.append(f"{_some(without)}: no survey, so that only the collar is drawn and every sample stands there.")
    if magnetic:
        said.append(f"{_some(magnetic)}: surveyed from magnetic north without a declination, so that only the collar "
                    "is drawn and every sample stands there.")  # fmt: skip
    if too_many:
        said.append(f"Traces are drawn of up to {most_traces} holes; narrow the sentence to see them.")
    return said


def _some(codes: Sequence[str], most: int = 8) -> str:
    more = f" and {numbers.grouped(len(codes) - most)} others" if len(codes) > most else ""
    return f"{', '.join(codes[:most])}{more}"


def north_said(grid: Grid, frame: Frame) -> str:
    """How true north lies to the top of the map."""
    turned = true_north_deg(grid, *frame.middle)
    if turned != turned:
        return "The top of the map is grid north."
    if abs(turned) < 0.05:
        return "The top of the map is grid north; at its middle true north is the same within 0.05°."
    side = "east" if turned > 0 else "west"
    return f"The top of the map is grid north; at its middle true north lies {abs(turned):.1f}° {side} of it."


def moves(frame: Frame, grid: Grid, asked: Filter, choice: MapChoice, whole: str) -> list[tuple[str, str]]:
    """(words, address) of links that close up, draw back and move the part shown."""
    (west, east), (south, north) = frame.window.x, frame.window.y
    wide, high = east - west, north - south
    found = []
    for words, left, right, down, over in (
        ("closer", 0.25, -0.25, 0.25, -0.25), ("farther", -0.5, 0.5, -0.5, 0.5), ("west", -0.5, -0.5, 0, 0),
        ("east", 0.5, 0.5, 0, 0), ("north", 0, 0, 0.5, 0.5), ("south", 0, 0, -0.5, -0.5),
    ):  # fmt: skip
        ends = (west + left * wide, east + right * wide, south + down * high, north + over * high)
        if max(map(abs, ends)) > 5e7 or ends[1] - ends[0] < 10:
            continue
        changed = {"grid": grid.key, **{n: f"{round(end, 1):.12g}" for n, end in zip(ENDS, ends, strict=True)}}
        found.append((words, address([*asked.arguments(), *choice.pairs(**changed)], "map.page")))
    return [*found, ("all of it", whole)] if whole else found


def bases(stored: Sequence[str | None]) -> list[tuple[str, int]]:
    """(what the positions rest on, how many samples), most first."""
    counts = Counter(stored)
    return sorted(((basis or "not said", many) for basis, many in counts.items()), key=lambda item: (-item[1], item[0]))
