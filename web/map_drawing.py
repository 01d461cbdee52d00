"""From placed samples to what the map draws: stacks, sites, traces, grid numbers, labels that keep off each other.

Places are per cent of the frame, as in the diagrams; lengths in pixels are judged for a frame of two widths, that of a
desk and that of a hand.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from markupsafe import Markup, escape

from registry.mapping import SHAPES, Classes, Frame, grid_lines, round_length
from registry.plotting import fractions
from web.diagram_drawing import NONE, Symbol, _plus, _ring, percent
from web.numbers import MINUS, derived, grouped

#: Widths of the frame for which labels are laid out, px; those that fit the first alone are not shown on the second.
WIDTHS_PX = {"wide": (800, 330), "square": (700, 330), "tall": (600, 330)}
LETTER_PX, LINE_PX = 8.5, 14.0
#: Sides of the symbols of a number's classes from the first to the last, px: more is larger, too.
LEAST_RADIUS, MOST_RADIUS = 3.2, 6.2
SHADES = 7
MOST_LABELS, MOST_TRIED = 150, 1500
SQUARE_PX, INSET_PX = 48.0, 5.0
#: With more grid lines than this every second number is left out in the hand.
MOST_NUMBERED_NARROW = 4
Box = tuple[float, float, float, float]


def metres(value: float) -> str:
    """A coordinate of the grid in whole metres, thousands set apart."""
    rounded = round(value)
    return (MINUS if rounded < 0 else "") + grouped(abs(rounded))


def length_words(length_m: float) -> str:
    """``500 m``, ``2 km``."""
    kilo = length_m >= 1000.0
    return f"{grouped(round(length_m / 1000.0)) if kilo else f'{length_m:g}'}\N{NO-BREAK SPACE}{'km' if kilo else 'm'}"


@dataclass
class ClassEntry:
    """A line of the legend of a number: one class, or the samples without a value."""

    name: str
    words: str
    count: int
    symbol: Symbol
    depth: int = 0
    address: str = ""


def class_entries(classes: Classes, unit: str, without: int) -> list[ClassEntry]:
    """The classes of a number from the highest to the lowest; the highest lies on top."""
    many = len(classes.ends)
    entries: list[ClassEntry] = []
    for place in reversed(range(many)):
        least, most = classes.ends[place]
        part = place / (many - 1) if many > 1 else 0.5
        shade = shade_of(place, many)
        radius = LEAST_RADIUS + part * (MOST_RADIUS - LEAST_RADIUS)
        low, high = derived(least, unit), derived(most, unit)
        words = low if low == high else f"{low} to {high}"
        symbol = Symbol(f"c{place}", f"v{shade}", (("s-full s-edged", _ring(radius)),))
        entries.append(ClassEntry(symbol.name, words, classes.counts[place], symbol, len(entries)))
    if without:
        none = Symbol(NONE, "soft", (("s-line", _plus(4.5)),))
        entries.append(ClassEntry(NONE, "without a value", without, none, len(entries)))
    return entries


def shade_of(place: int, many: int) -> int:
    """The shade of class ``place`` of ``many``."""
    return round(place / (many - 1) * (SHADES - 1)) if many > 1 else SHADES // 2


def frame_marks(frame: Frame) -> dict[str, Any]:
    """Grid lines with their numbers, and the scale bar: ``x y`` (``at text``), ``step bar bar_words``."""
    step, eastings, northings = grid_lines(frame)
    bar = round_length(frame.width_m * 0.3)
    found: dict[str, Any] = {
        "step": length_words(step),
        "bar": f"{100 * bar / frame.width_m:.3f}%",
        "half": f"{50 * bar / frame.width_m:.3f}%",
        "bar_words": length_words(bar),
        "half_words": length_words(bar / 2) if bar >= 2 else "",
    }
    marks: dict[str, list[dict[str, Any]]] = {"x": [], "y": []}
    for side, values in (("x", eastings), ("y", northings)):
        for value in values:
            low, high = getattr(frame.window, side)
            at = (value - low) / (high - low)
            at_percent = f"{100 * (at if side == 'x' else 1 - at):.3f}%"
            edge = 0.06 if side == "x" else 0.06 * SHAPES[frame.shape]
            thinned = len(eastings) > MOST_NUMBERED_NARROW and round(value / step) % 2 == 1
            text = metres(value) if edge < at < 1 - edge else ""
            marks[side].append({"at": at_percent, "text": text, "wide_only": thinned})
    return found | marks


@dataclass(frozen=True)
class Drawn:
    """One stack or single sample drawn: where, as what, what is said of it, where it leads."""

    across: float
    up: float
    symbol: str
    title: str
    address: str
    count: int = 1
    is_stale: bool = False


class Labels:
    """Room for labels on the frame: a label that would lie on an earlier one or beyond the edge is not written."""

    def __init__(self, frame: Frame) -> None:
        self.shape = frame.shape
        self.taken: list[dict[tuple[int, int], list[Box]]] = [{}, {}]
        self.tried = 0

    def _squares(self, box: Box) -> Iterable[tuple[int, int]]:
        for across in range(int(box[0] // SQUARE_PX), int(box[2] // SQUARE_PX) + 1):
            for down in range(int(box[1] // SQUARE_PX), int(box[3] // SQUARE_PX) + 1):
                yield across, down

    def _take(self, place: int, box: Box) -> None:
        for square in self._squares(box):
            self.taken[place].setdefault(square, []).append(box)

    def _is_free(self, place: int, box: Box) -> bool:
        return not any(
            box[0] < other[2] and other[0] < box[2] and box[1] < other[3] and other[1] < box[3]
            for square in self._squares(box)
            for other in self.taken[place].get(square, ())
        )

    def keep_off(self, across: float, up: float, radius_px: float = 6.0) -> None:
        """A symbol stands here; labels lie elsewhere."""
        for place, width in enumerate(WIDTHS_PX[self.shape]):
            x, y = across * width, (1 - up) * width / SHAPES[self.shape]
            self._take(place, (x - radius_px, y - radius_px, x + radius_px, y + radius_px))

    def fits(self, across: float, up: float, dx: float, dy: float, words: str, to_left: bool = False) -> str:
        """Where a label beside a place has room: ``all``, ``wide`` (at a desk alone) or nothing."""
        self.tried += 1
        if self.tried > MOST_TRIED:
            return ""
        room: list[bool] = []
        for place, width in enumerate(WIDTHS_PX[self.shape]):
            long, high = len(words) * LETTER_PX, width / SHAPES[self.shape]
            left = across * width + dx - (long if to_left else 0.0)
            base = (1 - up) * high + dy
            box = (left, base - LINE_PX + 3, left + long, base + 3)
            inside = box[0] >= INSET_PX and box[2] <= width - INSET_PX and box[1] >= 0 and box[3] <= high
            room.append(inside and self._is_free(place, box) and all(room))
            if room[-1]:
                self._take(place, box)
        return "all" if all(room) else "wide" if room[0] else ""


def samples_svg(drawn: Sequence[Drawn], depth: Mapping[str, int], labels: Labels) -> Markup:
    """Links to samples, and to the lists of those that lie on each other, each a symbol; stacks carry their number."""
    parts = []
    for one in sorted(drawn, key=lambda one: (-depth.get(one.symbol, 0), one.count)):
        left, top = percent(one.across, one.up)
        place = f'x="{left}" y="{top}"'
        more = '<use href="#d-stale" ' + place + "/>" if one.is_stale else ""
        if one.count > 1:
            more += f'<use href="#d-stack" {place}/>'
            words = grouped(one.count)
            for dx, dy, to_left in ((8, -5, False), (-8, -5, True), (8, 14, False), (-8, 14, True)):
                room = labels.fits(one.across, one.up, dx, dy, words, to_left)
                if room:
                    kind = "map-count" + (" wide-only" if room == "wide" else "")
                    anchor = ' text-anchor="end"' if to_left else ""
                    more += f'<text class="{kind}" {place} dx="{dx}" dy="{dy}"{anchor}>{words}</text>'
                    break
        parts.append(
            f'<a href="{escape(one.address)}" tabindex="-1"><title>{escape(one.title)}</title>'
            f'<use href="#s-{one.symbol}" {place}/>{more}</a>'
        )
    return Markup("\n".join(parts))


def sites_svg(sites: Sequence[Mapping[str, Any]]) -> Markup:
    """Links to the pages of the sites that have a sign: ``across up kind title address is_signed`` of each."""
    parts = []
    for site in sites:
        if not site["is_signed"]:
            continue
        left, top = percent(site["across"], site["up"])
        parts.append(
            f'<a class="site-{site["kind"]}" href="{escape(site["address"])}" tabindex="-1">'
            f'<title>{escape(site["title"])}</title><use href="#m-{site["kind"]}" x="{left}" y="{top}"/></a>'
        )
    return Markup("\n".join(parts))


def site_names(sites: Iterable[Mapping[str, Any]], labels: Labels) -> list[dict[str, Any]]:
    """Codes beside their sites where they have room: ``code left top dx dy to_left wide_only``; holes first."""
    found = []
    for site in sorted(sites, key=lambda site: (site["kind"] != "drill_hole", site["code"]))[:MOST_LABELS]:
        for dx, dy, to_left in ((9, 4, False), (-9, 4, True), (9, -6, False), (9, 14, False), (-9, -6, True)):
            room = labels.fits(site["across"], site["up"], dx, dy, site["code"], to_left)
            if room:
                left, top = percent(site["across"], site["up"])
                found.append({"code": site["code"], "left": left, "top": top, "dx": dx, "dy": dy,
                              "to_left": to_left, "wide_only": room == "wide", "address": site["address"]})  # fmt: skip
                break
    return found


def trace_paths(frame: Frame, sites: Any, x: Any, y: Any) -> list[str]:
    """One path a hole in a frame of 1000 by 1000 from the upper left; what lies beyond is cut off by the drawing."""
    across, up = fractions(frame.window, x, y)
    lines: dict[int, list[str]] = {}
    for site, right, high in zip(sites.tolist(), across.tolist(), up.tolist(), strict=True):
        if right == right and high == high:
            lines.setdefault(site, []).append(f"{1000 * right:.1f},{1000 * (1 - high):.1f}")
    return ["M" + " ".join(points) for points in lines.values()]


def class_cells_svg(filled: Sequence[tuple[int, int, int]], many: int) -> Markup:
    """Cells in the shade of the class of their middle sample."""
    paths: dict[int, list[str]] = {}
    for column, row, place in filled:
        paths.setdefault(shade_of(place, many), []).append(f"M{column} {row}h1v1h-1z")
    return Markup("".join(f'<path class="v{shade}" d="{"".join(paths[shade])}"/>' for shade in sorted(paths)))
