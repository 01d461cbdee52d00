"""From placed samples to what the page draws: symbols, a legend, points, counted cells, field lines, tick marks.

Positions are per cent of the frame, so that text and symbols keep their size at any width and nothing but attributes is
needed: no inline style, no script. Symbols differ by shape as well as by colour (Okabe-Ito).
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any
from urllib.parse import quote

from flask import url_for
from markupsafe import Markup, escape

from registry.diagrams import Diagram
from registry.plotting import Cells, Placed, Window, count_steps, fractions, line_places, ticks, triangle_place
from registry.store.reading.drawn_samples import Group
from registry.store.reading.filters import VERDICTS
from web.numbers import reported
from web.wording import formula

#: Shades of counted cells, from few to many; the stylesheet gives them the colours of viridis.
SHADES = 7
#: Side of a symbol from its middle, px.
RADIUS, SMALL_RADIUS = 4.5, 3.0
LINE_BREAK_CHARACTERS = 11


@dataclass(frozen=True)
class Symbol:
    """One symbol: its parts as (class of the stylesheet, path relative to the middle) and the class of its colour."""

    name: str
    colour: str
    parts: tuple[tuple[str, str], ...]


def _ring(r: float) -> str:
    return f"m{-r:g} 0a{r:g} {r:g} 0 1 0 {2 * r:g} 0a{r:g} {r:g} 0 1 0 {-2 * r:g} 0z"


def _lozenge(r: float) -> str:
    return f"m0 {-1.2 * r:g}l{r:g} {1.2 * r:g}l{-r:g} {1.2 * r:g}l{-r:g} {-1.2 * r:g}z"


def _half(r: float) -> str:
    return f"m0 {-1.2 * r:g}v{2.4 * r:g}l{-r:g} {-1.2 * r:g}z"


def _square(r: float) -> str:
    return f"m{-0.85 * r:g} {-0.85 * r:g}h{1.7 * r:g}v{1.7 * r:g}h{-1.7 * r:g}z"


def _triangle(r: float) -> str:
    return f"m0 {-1.1 * r:g}l{1.1 * r:g} {1.9 * r:g}h{-2.2 * r:g}z"


def _down(r: float) -> str:
    return f"m0 {1.1 * r:g}l{1.1 * r:g} {-1.9 * r:g}h{-2.2 * r:g}z"


def _cross(r: float) -> str:
    a, b = 0.4 * r, 0.7 * r
    return f"m{-a:g} {-a - b:g}h{2 * a:g}v{b:g}h{b:g}v{2 * a:g}h{-b:g}v{b:g}h{-2 * a:g}v{-b:g}h{-b:g}v{-2 * a:g}h{b:g}z"


def _hourglass(r: float) -> str:
    return f"m{-r:g} {-r:g}h{2 * r:g}l{-2 * r:g} {2 * r:g}h{2 * r:g}z"


def _hexagon(r: float) -> str:
    a, b = 0.55 * r, 1.05 * r
    return f"m{-a:g} {-r:g}h{2 * a:g}l{b - a:g} {r:g}l{a - b:g} {r:g}h{-2 * a:g}l{a - b:g} {-r:g}z"


def _plus(r: float) -> str:
    return f"m{-0.8 * r:g} 0h{1.6 * r:g}m{-0.8 * r:g} {-0.8 * r:g}v{1.6 * r:g}"


_ORDINARY = (
    ("blue", _ring), ("orange", _square), ("green", _triangle), ("vermilion", _lozenge), ("sky", _down),
    ("pink", _cross), ("yellow", _hexagon), ("black", _hourglass),
)  # fmt: skip
_VERDICT_LOOKS: dict[str, tuple[str, tuple[tuple[str, Any], ...]]] = {
    "favourable": ("blue", (("s-full", _lozenge),)),
    "possible": ("orange", (("s-open", _lozenge), ("s-half", _half))),
    "undecided": ("soft", (("s-open s-dotted", _lozenge),)),
    "unfavourable": ("vermilion", (("s-open", _lozenge),)),
}
MOST_GROUPS = len(_ORDINARY)
NONE, OTHERS = "none", "others"


def _symbol(name: str, r: float) -> Symbol:
    if name in _VERDICT_LOOKS:
        colour, looks = _VERDICT_LOOKS[name]
        return Symbol(name, colour, tuple((kind, path(r)) for kind, path in looks))
    if name == NONE:
        return Symbol(name, "soft", (("s-line", _plus(r)),))
    if name == OTHERS:
        return Symbol(name, "soft", (("s-open", _ring(0.75 * r)),))
    colour, path = _ORDINARY[int(name)]
    return Symbol(name, colour, (("s-full", path(r)),))


@dataclass
class Entry:
    """One line of the legend. ``address`` leads to the samples of this group alone, where a condition says so; what
    has more ``depth`` is drawn first, beneath the others."""

    name: str
    words: str
    count: int
    depth: int = 0
    address: str = ""

    @property
    def symbol(self) -> Symbol:
        return _symbol(self.name, RADIUS)

    @property
    def small_symbol(self) -> Symbol:
        return _symbol(self.name, SMALL_RADIUS)


def legend_of(
    group: Group, every: Sequence[Any], drawn: Sequence[Any], nothing: str, fixed: Sequence[str] = ()
) -> tuple[list[Entry], list[str]]:
    """(legend, symbol name of each point drawn) from the stored group values of every sample and of those drawn.

    A group has the same symbol in every diagram: by its place among ``fixed`` names where these are few, otherwise by
    how many samples it has, the smallest together. Verdicts have their own symbols and lie on one another in their
    order; of other groups the smaller lies on top.
    """
    counts = Counter(drawn)
    names: dict[Any, str] = {None: NONE}
    if group.is_verdict:
        names |= {VERDICTS.index(word): word for word in _VERDICT_LOOKS}
        words = {stored: word for stored, word in names.items() if stored is not None}
    else:
        ranked = list(fixed)
        if not 0 < len(fixed) <= MOST_GROUPS:
            size = Counter(every)
            ranked = sorted((value for value in size if value is not None), key=lambda value: (-size[value], value))
        names |= {value: str(place) for place, value in enumerate(ranked[:MOST_GROUPS])}
        words = {value: str(value).replace("_", " ") for value in ranked[:MOST_GROUPS]}
        names |= dict.fromkeys(ranked[MOST_GROUPS:], OTHERS)
    entries = [Entry(names[value], word, counts[value]) for value, word in words.items() if counts[value]]
    others = [value for value, name in names.items() if name == OTHERS and counts[value]]
    if others:
        spoken = "1 other" if len(others) == 1 else f"{len(others)} others"
        entries.append(Entry(OTHERS, spoken, sum(counts[value] for value in others)))
    if counts[None]:
        entries.append(Entry(NONE, nothing, counts[None]))
    for place, entry in enumerate(entries):
        entry.depth = place if group.is_verdict else entry.count
    return entries, [names[value] for value in drawn]


@dataclass(frozen=True)
class Point:
    """One sample drawn: its place in per cent from the left and from the top, and what is said of it."""

    code: str
    symbol: str
    left: str
    top: str
    title: str
    is_doubtful: bool = False
    is_stale: bool = False


def percent(across: float, up: float) -> tuple[str, str]:
    """A place of the frame as per cent from the left and from the top."""
    return f"{100 * across:.3f}%", f"{100 * (1 - up):.3f}%"


def points_svg(points: Sequence[Point], entries: Sequence[Entry]) -> Markup:
    """Links to the samples, each a symbol."""
    depth = {entry.name: entry.depth for entry in entries}
    base = url_for("sample.page", code="x")[:-1]
    parts = []
    for point in sorted(points, key=lambda point: -depth.get(point.symbol, 0)):
        place = f'x="{point.left}" y="{point.top}"'
        doubt = f'<use href="#d-limit" {place}/>' if point.is_doubtful else ""
        stale = f'<use href="#d-stale" {place}/>' if point.is_stale else ""
        parts.append(
            f'<a href="{escape(base + quote(point.code, safe="/"))}" tabindex="-1"><title>{escape(point.title)}</title>'
            f'<use href="#s-{point.symbol}" {place}/>{doubt}{stale}</a>'
        )
    return Markup("\n".join(parts))


def panel_paths(placed: Placed, symbols: Sequence[str], entries: Sequence[Entry], width: int, height: int) -> Markup:
    """All points of a small diagram as one path for each part of each symbol."""
    across, up = placed.across.tolist(), placed.up.tolist()
    members: dict[str, list[str]] = {}
    for place, name in enumerate(symbols):
        if name:
            members.setdefault(name, []).append(f"M{across[place] * width:.1f} {(1 - up[place]) * height:.1f}")
    parts = []
    for entry in sorted(entries, key=lambda entry: -entry.depth):
        symbol = entry.small_symbol
        for kind, path in symbol.parts:
            drawn = "".join(move + path for move in members.get(entry.name, ()))
            if drawn:
                parts.append(f'<path class="s-{symbol.colour} {kind}" d="{drawn}"/>')
    return Markup("".join(parts))


def cells_svg(cells: Cells) -> tuple[Markup, list[dict[str, Any]]]:
    """(the filled cells as one path a shade, the key of the shades: ``shade least most``)."""
    least = count_steps(cells.most, SHADES)
    first = SHADES - len(least)
    paths: dict[int, list[str]] = {}
    for column, row, count in cells.filled:
        step = max(place for place, number in enumerate(least) if count >= number)
        paths.setdefault(step, []).append(f"M{column} {row}h1v1h-1z")
    drawn = Markup("".join(f'<path class="v{first + step}" d="{"".join(paths[step])}"/>' for step in sorted(paths)))
    ends = [number - 1 for number in least[1:]] + [cells.most]
    key = [
        {"shade": first + step, "least": low, "most": high}
        for step, (low, high) in enumerate(zip(least, ends, strict=True))
    ]
    return drawn, key


def field_paths(diagram: Diagram, window: Window) -> list[dict[str, Any]]:
    """Field lines in a frame of 1000 by 1000 from the upper left: ``d`` and ``dashed``."""
    found = []
    for layer in diagram.layers:
        for line in layer.lines:
            places = line_places(diagram, window, line)
            corners = " ".join(f"{1000 * across:.1f},{1000 * (1 - up):.1f}" for across, up in places)
            found.append({"d": f"M{corners}", "dashed": layer.is_dashed})
    return found


def _broken(words: str) -> list[str]:
    """A name of a field on lines of about the same length."""
    lines: list[str] = []
    for word in words.split():
        if lines and len(lines[-1]) + len(word) < LINE_BREAK_CHARACTERS:
            lines[-1] += f" {word}"
        else:
            lines.append(word)
    return lines


def field_names(diagram: Diagram, window: Window) -> list[dict[str, Any]]:
    """Names of fields whose place lies in the frame: ``number words lines left top``."""
    found: list[dict[str, Any]] = []
    for layer in diagram.layers:
        for words, x, y in layer.labels:
            across, up = line_places(diagram, window, ((x, y),))[0]
            if 0.0 <= across <= 1.0 and 0.0 <= up <= 1.0:
                left, top = percent(across, up)
                spelled = {"words": words, "lines": _broken(words), "left": left, "top": top}
                found.append({"number": len(found) + 1, **spelled})
    return found


def axis_ticks(window: Window, most: int = 8) -> dict[str, list[dict[str, str]]]:
    """Tick marks of both axes: ``at`` (per cent from the left or from the top) and ``text``."""
    sides: dict[str, list[dict[str, str]]] = {}
    for side, (low, high), is_log in (("x", window.x, window.x_log), ("y", window.y, window.y_log)):
        marks = []
        for value, numbered in ticks(low, high, is_log=is_log, most=most):
            across, up = _place_on(window, side, value)
            marks.append({"at": percent(across, up)[side == "y"], "text": reported(value) if numbered else ""})
        sides[side] = marks
    return sides


def _place_on(window: Window, side: str, value: float) -> tuple[float, float]:
    x, y = (value, window.y[0]) if side == "x" else (window.x[0], value)
    across, up = fractions(window, x, y)
    return float(across), float(up)


def triangle_frame() -> dict[str, Any]:
    """Grid and numbers of a triangle: ``grid_lines`` in a frame of 1000 by 1000, ``grid_texts`` in per cent."""
    lines, texts = [], []

    def corner(f: float, m: float) -> str:
        across, up = triangle_place(f, m)
        return f"{1000 * float(across):.1f},{1000 * (1 - float(up)):.1f}"

    for part in (20, 40, 60, 80):
        rest = 100 - part
        lines += [f"M{corner(part, 0)} {corner(part, rest)}", f"M{corner(0, part)} {corner(rest, part)}"]
        lines.append(f"M{corner(rest, 0)} {corner(0, rest)}")
        for side, f, m in (("left", rest, 0), ("right", part, rest), ("bottom", 0, part)):
            across, up = triangle_place(f, m)
            left, top = percent(float(across), float(up))
            texts.append({"side": side, "text": str(part), "left": left, "top": top})
    return {"grid_lines": lines, "grid_texts": texts}


def axis_words(diagram: Diagram) -> dict[str, str]:
    """Titles of the axes with formulae in print; the corners of a triangle have no unit."""
    if diagram.apex_a is not None:
        corners = zip("xya", diagram.axes, strict=True)
        return {side: formula(axis.label) for side, axis in corners}
    return {"x": formula(diagram.x.words), "y": formula(diagram.y.words)}


def used_symbols(entries: Iterable[Entry], marked: Iterable[str]) -> list[Symbol]:
    """Symbols to be defined in the drawing, each once."""
    names: Mapping[str, None] = dict.fromkeys([*(entry.name for entry in entries), *marked])
    return [_symbol(name, RADIUS) for name in names]
