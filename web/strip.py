"""The down-hole strip: depth, logged rocks, chosen values and verdicts beside one another, as numbers to draw.

Every part has the height of the hole in pixels and a width in per cent, so that it needs no inline style and fits a
telephone. A rock is told by its label first, then by hatching, then by colour.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

LEAST_HEIGHT, GREATEST_HEIGHT, PIXELS_PER_METRE = 320, 960, 2.0
#: A mark is 12 pixels high in its box of 14: at 13 it touches no other.
TICK_PIXELS, LABEL_PIXELS, LINE_PIXELS, MARK_PIXELS = 48, 13, 14, 13
#: Letters of a label, and of each line of it on a telephone.
LONGEST_LABEL, LONGEST_LINE = 23, 11
#: Values that spread over more than this ratio are drawn on a logarithmic scale.
LOGARITHMIC_FROM = 100.0
#: Room above the first and below the last depth, so that marks are not cut.
EDGE = 8

#: Families of rocks by words of their names, the first that fits: (words, colour, pattern).
FAMILIES = (
    (("vein", "breccia", "fault", "gouge"), "black", "dots"),
    (("pegmat", "aplit"), "pink", "rise"),
    (("granodior", "tonal", "adamell", "trondhj"), "orange", "cross"),
    (("pyroxenit", "hornblendit", "websterit"), "blue", "rise"),
    (("dunit", "peridot", "harzburg", "lherzol", "wehrl", "serpent", "komati"), "blue", ""),
    (("gabbro", "norit", "troctol", "anorthos", "doler", "diabas"), "green", "cross"),
    (("basalt", "picrit", "amphibol", "greenst"), "green", "upright"),
    (("monzon", "syenit", "monzo"), "vermilion", "rise"),
    (("diorit",), "orange", "rise"),
    (("granit", "leucogran"), "vermilion", "cross"),
    (("rhyol", "dacit", "ignimb", "obsid"), "yellow", "dots"),
    (("andesit", "trachy", "latit", "phonol", "volcan", "tuff", "lava", "porphyr"), "yellow", "rise"),
    (("limest", "marble", "dolom", "carbon", "skarn", "calc"), "sky", "level"),
    (("schist", "gneiss", "slate", "phyll", "hornfels", "quartzite", "migmat"), "paper", "fall"),
    (("sandst", "shale", "silts", "mudst", "conglom", "greywacke", "argill", "chert"), "paper", "dots"),
    (("overburden", "soil", "till", "gravel", "alluv", "saprol", "no core", "lost"), "paper", "level"),
)
OTHER = ("paper", "upright")
PATTERNS = {
    "rise": "M-1,1 l2,-2 M0,8 l8,-8 M7,9 l2,-2", "fall": "M-1,7 l2,2 M0,0 l8,8 M7,-1 l2,2",
    "upright": "M2.5,0 v8 M6.5,0 v8",
    "level": "M0,2.5 h8 M0,6.5 h8", "cross": "M4.5,1 v7 M1,4.5 h7", "dots": "",
}  # fmt: skip
STROKES = {"black": "black", "paper": "soft", "blue": "light"}


@dataclass(frozen=True)
class Block:
    """One logged interval: where it stands, how it is filled, its label (empty where there is no room) and words.

    ``lines`` are the label broken for a narrow window, each with its place.
    """

    y: float
    height: float
    fill: str
    colour: str
    label: str
    label_y: float
    lines: tuple[tuple[float, str], ...]
    words: str


@dataclass(frozen=True)
class Point:
    """One value: its depth and place in pixels and per cent, its interval, the words, and where its line begins."""

    x: float
    y: float
    top: float
    bottom: float
    words: str
    code: str
    from_x: float | None = None
    from_y: float | None = None


@dataclass(frozen=True)
class Track:
    """One value down the hole. ``low`` and ``high`` are the ends of its scale."""

    column: Any
    low: float
    high: float
    logarithmic: bool
    points: tuple[Point, ...]
    missing: int


@dataclass(frozen=True)
class Mark:
    """One sample at its depth, or the best of some that lie too close to be drawn apart; ``code`` is that sample's."""

    y: float
    word: str
    words: str
    code: str


@dataclass(frozen=True)
class Strip:
    """Everything beside everything, ``height`` pixels high, from depth 0 to ``depth_m``."""

    height: float
    depth_m: float
    ticks: tuple[tuple[float, str], ...]
    blocks: tuple[Block, ...]
    tracks: tuple[Track, ...]
    marks: tuple[Mark, ...]
    patterns: tuple[tuple[str, str, str, str], ...]
    fine: bool


def rock_fill(lithology: str | None) -> tuple[str, str]:
    """Colour and pattern of a rock name."""
    plain = (lithology or "").casefold()
    for words, colour, pattern in FAMILIES:
        if any(word in plain for word in words):
            return colour, pattern
    return OTHER


def build_strip(
    depth_m: float | None,
    intervals: Sequence[Mapping[str, Any]],
    samples: Sequence[Mapping[str, Any]],
    columns: Sequence[Any],
) -> Strip | None:
    """The strip of a hole; None where nothing of it has a depth.

    ``samples`` as ``strip_samples`` gives them, ``columns`` those of ``value_0`` and on.
    """
    depths = [depth_m or 0.0, *(row["to_m"] for row in intervals)]
    depths += [_bottom(row) for row in samples]
    deepest = max(depths)
    if deepest <= 0.0:
        return None
    inner = min(GREATEST_HEIGHT, max(LEAST_HEIGHT, PIXELS_PER_METRE * deepest))
    scale = inner / deepest

    def at(depth: float) -> float:
        return round(EDGE + depth * scale, 2)

    fills = dict.fromkeys(rock_fill(row["lithology"]) for row in intervals)
    return Strip(
        height=inner + 2 * EDGE,
        depth_m=deepest,
        ticks=tuple((at(depth), f"{depth:g}") for depth in _ticks(deepest, TICK_PIXELS / scale)),
        blocks=tuple(_block(row, at) for row in intervals),
        tracks=tuple(_track(place, column, samples, at) for place, column in enumerate(columns)),
        marks=_marks(samples, at),
        patterns=tuple(
            (colour, pattern, PATTERNS[pattern], STROKES.get(colour, "ink")) for colour, pattern in fills if pattern
        ),
        fine=len(samples) > inner / 6,
    )


def _top(row: Mapping[str, Any]) -> float:
    return float(row["to_m"] if row["from_m"] is None else row["from_m"])


def _bottom(row: Mapping[str, Any]) -> float:
    return float(row["from_m"] if row["to_m"] is None else row["to_m"])


def _ticks(deepest: float, least_step: float) -> list[float]:
    """Round depths from 0, at least that many metres apart."""
    power = 10.0 ** math.floor(math.log10(least_step))
    step = next(factor * power for factor in (1, 2, 5, 10) if factor * power >= least_step * 0.999)
    return [number * step for number in range(int(deepest / step) + 1)]


def _block(row: Mapping[str, Any], at: Any) -> Block:
    colour, pattern = rock_fill(row["lithology"])
    top, bottom = at(row["from_m"]), at(row["to_m"])
    name = row["lithology"] or "not named"
    middle = (top + bottom) / 2 + 4
    lines = _lines(name, max(1, int((bottom - top) // LINE_PIXELS))) if bottom - top >= LABEL_PIXELS else []
    first = middle - LINE_PIXELS * (len(lines) - 1) / 2
    words = f"{row['from_m']:g} to {row['to_m']:g} m: {name}" + (
        f", {row['description']}" if row["description"] else ""
    )
    return Block(
        y=top,
        height=round(bottom - top, 2),
        fill=f"url(#rock-{colour}-{pattern})" if pattern else "",
        colour=colour,
        label=_shortened(name, LONGEST_LABEL) if lines else "",
        label_y=round(middle, 2),
        lines=tuple((round(first + LINE_PIXELS * number, 2), line) for number, line in enumerate(lines)),
        words=words,
    )


def _shortened(words: str, longest: int) -> str:
    return words if len(words) <= longest else words[: longest - 1].rstrip() + "…"


def _lines(name: str, most: int) -> list[str]:
    """A name in at most three lines for a narrow window; what does not fit ends in an ellipsis."""
    lines: list[str] = []
    for word in name.split():
        if lines and len(lines[-1]) + 1 + len(word) <= LONGEST_LINE:
            lines[-1] += f" {word}"
        else:
            lines.append(word)
    most = min(3, most)
    if len(lines) > most:
        lines[most - 1] = " ".join(lines[most - 1 :])
    return [_shortened(line, LONGEST_LINE) for line in lines[:most]]


def _track(place: int, column: Any, samples: Sequence[Mapping[str, Any]], at: Any) -> Track:
    known = [row for row in samples if row[f"value_{place}"] is not None]
    values = [float(row[f"value_{place}"]) for row in known]
    if not values:
        return Track(column, 0.0, 0.0, False, (), len(samples))
    low, high, logarithmic = _scale(min(values), max(values))

    def across(value: float) -> float:
        share = math.log(value / low) / math.log(high / low) if logarithmic else (value - low) / (high - low)
        return round(4.0 + 92.0 * share, 2)

    points: list[Point] = []
    for row, value in zip(known, values, strict=True):
        top, bottom = at(_top(row)), at(_bottom(row))
        before = points[-1] if points else None
        span = f"{_top(row):g} to {_bottom(row):g} m" if bottom > top else f"{_top(row):g} m"
        points.append(
            Point(
                x=across(value),
                y=round((top + bottom) / 2, 2),
                top=top,
                bottom=bottom,
                words=f"{row['code']}, {span}: {value:.4g}",
                code=row["code"],
                from_x=before.x if before else None,
                from_y=before.y if before else None,
            )
        )
    return Track(column, low, high, logarithmic, tuple(points), len(samples) - len(known))


def _scale(least: float, greatest: float) -> tuple[float, float, bool]:
    """Round ends around the values, and whether the scale is logarithmic."""
    if least > 0.0 and greatest / least > LOGARITHMIC_FROM:
        return 10.0 ** math.floor(math.log10(least)), 10.0 ** math.ceil(math.log10(greatest)), True
    if least == greatest:
        room = abs(least) * 0.1 or 1.0
        least, greatest = least - room, greatest + room
    power = 10.0 ** math.floor(math.log10(greatest - least))
    step = next(f * power for f in (0.1, 0.2, 0.25, 0.5, 1.0, 2.0) if (greatest - least) / (f * power) <= 6.0)
    low, high = math.floor(least / step + 1e-9) * step, math.ceil(greatest / step - 1e-9) * step
    return float(f"{low:.6g}"), float(f"{high:.6g}"), False


def _marks(samples: Sequence[Mapping[str, Any]], at: Any) -> tuple[Mark, ...]:
    """Marks at least ``MARK_PIXELS`` apart, each at the depth of a sample that has that verdict.

    The best verdicts are placed first; a sample without room for a mark of its own goes with the nearest one, whose
    verdict is as good or better.
    """
    order = ("favourable", "possible", "undecided", "unfavourable")
    judged = [((at(_top(row)) + at(_bottom(row))) / 2, row) for row in samples if row["verdict"] is not None]
    groups: list[list[tuple[float, Mapping[str, Any]]]] = []
    for y, row in sorted(judged, key=lambda pair: (order.index(pair[1]["verdict"]), pair[0])):
        nearest = min(groups, key=lambda group: abs(group[0][0] - y), default=None)
        if nearest is not None and abs(nearest[0][0] - y) < MARK_PIXELS:
            nearest.append((y, row))
        else:
            groups.append([(y, row)])
    return tuple(_mark(group, order) for group in sorted(groups, key=lambda group: group[0][0]))


def _mark(group: Sequence[tuple[float, Mapping[str, Any]]], order: Sequence[str]) -> Mark:
    """The mark of some samples; the first of them is the best and gives its place."""
    y, best = group[0]
    own = f"{best['code']}, {_top(best):g} to {_bottom(best):g} m"
    if len(group) == 1:
        return Mark(round(y, 2), best["verdict"], f"{own}: {best['verdict']}", best["code"])
    counted = {word: sum(row["verdict"] == word for _, row in group) for word in order}
    told = ", ".join(f"{number} {name}" for name, number in counted.items() if number)
    first, last = min(_top(row) for _, row in group), max(_bottom(row) for _, row in group)
    words = f"{first:g} to {last:g} m: {told}; drawn at {own}: {best['verdict']}"
    return Mark(round(y, 2), best["verdict"], words, best["code"])
