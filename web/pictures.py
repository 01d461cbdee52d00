"""Small drawings made of numbers: the norm as a bar. Fill classes and patterns only, so that no inline style is needed.

Colours are the Okabe-Ito set; minerals of one group share a colour and differ by pattern, and every bar has its
words beside it, so that colour is never the only sign.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from flask import Flask


@dataclass(frozen=True)
class Mineral:
    """One normative mineral: symbol, name, the group it stands in, and how it is drawn."""

    symbol: str
    name: str
    group: str
    colour: str
    pattern: str = ""

    @property
    def fill(self) -> str:
        """A class name for a plain colour, a pattern address otherwise."""
        return f"url(#fill-{self.colour}-{self.pattern})" if self.pattern else ""


#: In the order of crystallisation tables.
MINERALS = (
    Mineral("q", "quartz", "quartz", "sky"),
    Mineral("c", "corundum", "corundum", "sky", "cross"),
    Mineral("or", "orthoclase", "feldspar", "vermilion"),
    Mineral("ab", "albite", "feldspar", "orange"),
    Mineral("an", "anorthite", "feldspar", "yellow"),
    Mineral("lc", "leucite", "feldspathoid", "pink"),
    Mineral("ne", "nepheline", "feldspathoid", "pink", "rise"),
    Mineral("kp", "kaliophilite", "feldspathoid", "pink", "dots"),
    Mineral("hl", "halite", "feldspathoid", "pink", "cross"),
    Mineral("th", "thenardite", "feldspathoid", "pink", "fall"),
    Mineral("ac", "acmite", "pyroxene", "green", "cross"),
    Mineral("ns", "sodium metasilicate", "pyroxene", "green", "upright"),
    Mineral("ks", "potassium metasilicate", "pyroxene", "green", "level"),
    Mineral("di", "diopside", "pyroxene", "green"),
    Mineral("wo", "wollastonite", "pyroxene", "green", "dots"),
    Mineral("hy", "hypersthene", "pyroxene", "green", "rise"),
    Mineral("ol", "olivine", "olivine", "blue"),
    Mineral("cs", "dicalcium silicate", "olivine", "blue", "dots"),
    Mineral("mt", "magnetite", "oxide", "black"),
    Mineral("cm", "chromite", "oxide", "black", "cross"),
    Mineral("hm", "haematite", "oxide", "black", "dots"),
    Mineral("il", "ilmenite", "oxide", "black", "rise"),
    Mineral("tn", "titanite", "accessory", "paper", "rise"),
    Mineral("pf", "perovskite", "accessory", "paper", "fall"),
    Mineral("ru", "rutile", "accessory", "paper", "upright"),
    Mineral("z", "zircon", "accessory", "paper", "cross"),
    Mineral("ap", "apatite", "accessory", "paper", "dots"),
    Mineral("fr", "fluorite", "accessory", "paper", "level"),
    Mineral("pr", "pyrite", "accessory", "paper", "upright"),
    Mineral("cc", "calcite", "accessory", "paper", "level"),
)
PATTERNS = {
    "rise": "M-1,1 l2,-2 M0,6 l6,-6 M5,7 l2,-2",
    "fall": "M-1,5 l2,2 M0,0 l6,6 M5,-1 l2,2",
    "upright": "M2,0 v6 M5,0 v6",
    "level": "M0,2 h6 M0,5 h6",
    "cross": "M0,0 l6,6 M0,6 l6,-6",
    "dots": "",
}
#: Stroke of a pattern by the colour beneath it.
STROKES = {"black": "black", "paper": "soft", "blue": "light"}
BAR_WIDTH_PERCENT = 100.0
LEAST_SHOWN_WT = 0.005
#: Narrowest segment that holds its symbol, on a telephone too.
LABEL_WIDTH_PERCENT = 6.0


@dataclass(frozen=True)
class Segment:
    """One mineral of a bar: where it begins and how wide it is, in per cent of the bar."""

    mineral: Mineral
    wt: float
    x: float
    width: float

    @property
    def middle(self) -> float:
        return round(self.x + self.width / 2, 2)

    @property
    def labelled(self) -> bool:
        """True where the symbol fits over the segment."""
        return self.width >= LABEL_WIDTH_PERCENT


def norm_segments(norm: Mapping[str, float | None]) -> list[Segment]:
    """The bar of one norm (mineral symbol -> wt%), in crystallisation-table order.

    100 wt% fills the bar; a norm that sums to more, by a silica deficit, is drawn to its own sum.
    """
    amounts = [(mineral, norm.get(mineral.symbol) or 0.0) for mineral in MINERALS]
    total = sum(amount for _, amount in amounts if amount > LEAST_SHOWN_WT)
    scale = BAR_WIDTH_PERCENT / max(100.0, total)
    segments, x = [], 0.0
    for mineral, amount in amounts:
        if amount > LEAST_SHOWN_WT:
            segments.append(Segment(mineral, amount, round(x, 2), round(amount * scale, 2)))
            x += amount * scale
    return segments


def minerals_of(bars: Iterable[Iterable[Segment]]) -> list[Mineral]:
    """The minerals that stand in any of the bars, in the order of the bar."""
    present = {segment.mineral for bar in bars for segment in bar}
    return [mineral for mineral in MINERALS if mineral in present]


def pattern_kinds() -> list[tuple[str, str, str, str]]:
    """(colour, pattern, path, stroke) of every pattern that a mineral is drawn with."""
    kinds = dict.fromkeys((mineral.colour, mineral.pattern) for mineral in MINERALS if mineral.pattern)
    return [(colour, pattern, PATTERNS[pattern], STROKES.get(colour, "ink")) for colour, pattern in kinds]


def register(app: Flask) -> None:
    """Make the drawings known to the templates."""
    app.jinja_env.globals.update(norm_segments=norm_segments, pattern_kinds=pattern_kinds)
