"""Drawing a map: its frame, the grid lines, samples that lie on each other, classes of a number, traces of holes.

Everything works on whole arrays in metres of the map's grid (``registry.map_grids``). Both axes have one scale, so a
frame has one of three shapes and what is asked for is widened to fit.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray
from sqlalchemy import Connection

from registry.map_grids import Floats, Places
from registry.plotting import Window, fractions
from registry.store.positions import BEYOND, DESURVEYED, locate

Numbers = NDArray[np.intp]
#: Width over height of a frame by its name, the widest first.
SHAPES = {"wide": 1.5, "square": 1.0, "tall": 0.8}
MARGIN = 0.06
#: A map shows this many metres at least, so that a single place has surroundings.
LEAST_WIDTH_M = 400.0
#: Samples closer than the width over this lie on each other.
CELLS_ACROSS = 120
MOST_CLASSES = 7
#: Points along the trace of a hole.
TRACE_POINTS = 33


@dataclass(frozen=True)
class Frame:
    """What a map shows (m, ``window``) and the shape of it."""

    window: Window
    shape: str

    @property
    def width_m(self) -> float:
        return self.window.x[1] - self.window.x[0]

    @property
    def middle(self) -> tuple[float, float]:
        return (sum(self.window.x) / 2.0, sum(self.window.y) / 2.0)


def frame_of(x: Floats, y: Floats, asked: Sequence[float] | None = None) -> Frame:
    """The frame about all places, or what is ``asked`` (x from, x to, y from, y to), with one scale for both axes.

    ValueError where no place is finite and nothing is asked.
    """
    if asked is not None:
        west, east, south, north = asked
        wide, high = east - west, north - south
    else:
        shown = np.isfinite(x) & np.isfinite(y)
        if not shown.any():
            raise ValueError("a map needs a place or the ends of its axes")
        west, east = float(x[shown].min()), float(x[shown].max())
        south, north = float(y[shown].min()), float(y[shown].max())
        wide = max((east - west) * (1 + 2 * MARGIN), LEAST_WIDTH_M)
        high = max((north - south) * (1 + 2 * MARGIN), LEAST_WIDTH_M / SHAPES["wide"])
    ratio = wide / high
    shape = min(SHAPES, key=lambda name: abs(math.log(ratio / SHAPES[name])))
    wide, high = max(wide, high * SHAPES[shape]), max(high, wide / SHAPES[shape])
    across, up = (west + east) / 2.0, (south + north) / 2.0
    window = Window((across - wide / 2, across + wide / 2), (up - high / 2, up + high / 2))
    return Frame(window, shape)


def frame_about(x: Sequence[Floats], y: Sequence[Floats], asked: Sequence[float] | None = None) -> Frame:
    """:func:`frame_of` several sets of places."""
    return frame_of(np.concatenate(x), np.concatenate(y), asked)


def finite(x: Floats, y: Floats) -> int:
    """How many of the places are known."""
    return int(np.count_nonzero(np.isfinite(x) & np.isfinite(y)))


def numbers_of(values: Sequence[Any]) -> Floats:
    """Numbers as an array (n,), NaN for None."""
    return np.array(values, dtype=np.float64)


def codes_of(values: Sequence[int]) -> Numbers:
    """Whole numbers as an array (n,)."""
    return np.array(values, dtype=np.intp)


def round_length(most: float) -> float:
    """The largest of 1, 2, 5 times a power of ten that is no more than ``most`` (m)."""
    power = 10.0 ** math.floor(math.log10(most) + 1e-9)
    return next(factor * power for factor in (5.0, 2.0, 1.0) if factor * power <= most * (1 + 1e-9))


def grid_lines(frame: Frame, across: int = 4) -> tuple[float, list[float], list[float]]:
    """(step, eastings, northings) of the grid lines in the frame (m): squares, ``across`` of them or up to 2.5 times
    as many along the width."""
    step = round_length(frame.width_m / across)
    sides = []
    for low, high in (frame.window.x, frame.window.y):
        first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
        sides.append([number * step for number in range(first, last + 1)])
    return step, sides[0], sides[1]


@dataclass(frozen=True)
class Stacks:
    """Samples that lie on each other, k stacks of them: place in the frame, how many, the sample that stands for it.

    ``leader`` numbers the samples given; ``spread_m`` is the longer side of what the stack covers; ``tally``
    has (code of the group, how many) of each group in each stack.
    """

    across: Floats
    up: Floats
    count: Numbers
    leader: Numbers
    one_site: NDArray[np.bool_]
    spread_m: Floats
    tally: list[list[tuple[int, int]]]

    def __len__(self) -> int:
        return len(self.count)


def stacked(
    frame: Frame, x: Floats, y: Floats, groups: Numbers, sites: Floats, *, by_most: bool = False,
    highest_of: Floats | None = None,
) -> Stacks:  # fmt: skip
    """Put samples within the frame that lie on each other (a cell of the width over ``CELLS_ACROSS``) into stacks.

    ``groups`` are codes from 0, ``sites`` NaN for none. The sample with the least code stands for its stack; with
    ``by_most`` one of its largest group, with ``highest_of`` the one with the highest number.
    """
    across, up = fractions(frame.window, x, y)
    column = np.floor(across * CELLS_ACROSS).astype(np.int64)
    row = np.floor(up * CELLS_ACROSS / SHAPES[frame.shape]).astype(np.int64)
    _, stack, count = np.unique(column * (10 * CELLS_ACROSS) + row, return_inverse=True, return_counts=True)
    number = len(count)
    codes = int(groups.max(initial=0)) + 1
    pairs, pair, several = np.unique(stack * codes + groups, return_inverse=True, return_counts=True)
    order: Any = groups
    if highest_of is not None:
        order = -highest_of  # NaN stands last
    elif by_most:
        order = codes * -several[pair] + groups
    ranked = np.lexsort((order, stack))
    starts = np.r_[0, np.cumsum(count)[:-1]].astype(np.intp) if number else np.empty(0, dtype=np.intp)

    def over(values: Floats, reduce: Any) -> Any:
        return reduce.reduceat(values[ranked], starts) if number else np.empty(0)

    spread = np.maximum(over(x, np.maximum) - over(x, np.minimum), over(y, np.maximum) - over(y, np.minimum))
    tally: list[list[tuple[int, int]]] = [[] for _ in range(number)]
    for number_of_pair, many in zip(pairs.tolist(), several.tolist(), strict=True):
        tally[number_of_pair // codes].append((number_of_pair % codes, many))
    return Stacks(
        np.bincount(stack, across, number) / count,
        np.bincount(stack, up, number) / count,
        count.astype(np.intp),
        ranked[starts],
        over(sites, np.minimum) == over(sites, np.maximum),
        spread,
        tally,
    )


@dataclass(frozen=True)
class Classes:
    """A number in classes of about as many samples each: ``number`` (n,) is the class of each, -1 without a value;
    ``ends`` (least and most of its members) and ``counts`` by class."""

    number: Numbers
    ends: list[tuple[float, float]]
    counts: list[int]

    def among(self, rows: Sequence[int]) -> Classes:
        """The same classes for some of the samples alone."""
        number = self.number[rows]
        return Classes(number, self.ends, [int(np.count_nonzero(number == place)) for place in range(len(self.ends))])


def classes_of(values: Floats) -> Classes:
    """Classes between quantiles of the values that are there; fewer than ``MOST_CLASSES`` where values repeat."""
    there = np.isfinite(values)
    number = np.full(len(values), -1, dtype=np.intp)
    if not there.any():
        return Classes(number, [], [])
    edges = np.unique(np.quantile(values[there], np.linspace(0.0, 1.0, MOST_CLASSES + 1), method="lower"))
    raw = np.searchsorted(edges, values[there], side="right") - 1
    raw = np.minimum(raw, max(len(edges) - 2, 0))
    used, number[there] = np.unique(raw, return_inverse=True)
    members = [values[number == place] for place in range(len(used))]
    return Classes(number, [(float(m.min()), float(m.max())) for m in members], [len(m) for m in members])


def classes_in_cells(
    across: Floats, up: Floats, classes: Numbers, columns: int, rows: int
) -> tuple[list[tuple[int, int, int]], int]:
    """(filled cells as (column, row from the top, class of the middle member), most samples in a cell) of the samples
    that have a class; the middle member is the lower median."""
    there = classes >= 0
    column = np.minimum((across[there] * columns).astype(np.intp), columns - 1)
    row = np.minimum(((1.0 - up[there]) * rows).astype(np.intp), rows - 1)
    cell = row * columns + column
    ranked = np.lexsort((classes[there], cell))
    found, starts, count = np.unique(cell[ranked], return_index=True, return_counts=True)
    middle = classes[there][ranked[starts + (count - 1) // 2]]
    filled = [(int(c % columns), int(c // columns), int(k)) for c, k in zip(found.tolist(), middle, strict=True)]
    return filled, int(count.max(initial=0))


def traces(connection: Connection, holes: Iterable[Mapping[str, Any]]) -> tuple[Numbers, Places]:
    """(site of each point, its place) along surveyed holes: ``TRACE_POINTS`` of each, from the collar to the end, by
    minimum curvature (``store.desurvey``). Holes without a survey, without a length or with magnetic azimuths have
    none; the rows of ``holes`` are those of ``reading.maps.map_sites``."""
    sites: list[int] = []
    depths: list[float] = []
    for hole in holes:
        length = max(hole["depth_m"] or 0.0, hole["last_m"] or 0.0)
        if hole["stations"] and length > 0.0:
            sites += [hole["site_id"]] * TRACE_POINTS
            depths += np.linspace(0.0, length, TRACE_POINTS).tolist()
    found = locate(connection, sites, depths, depths)
    good = np.array([basis in (DESURVEYED, BEYOND) for basis in found["position_basis"]], dtype=bool)
    columns = ("easting", "northing", "epsg", "longitude", "latitude")
    return np.array(sites, dtype=np.intp)[good], Places(*(found[name][good] for name in columns))
