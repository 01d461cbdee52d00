"""Placing samples in a diagram: places in the frame, what is left out and why, tick marks, counts in cells.

Everything here works on whole arrays. A place is a fraction of the frame, 0 to 1 from the left and from the bottom; a
triangle stands in a frame as wide as its base and as high as its height.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from registry.diagrams import Axis, Diagram, Line

Floats = NDArray[np.float64]
DRAWN, MISSING, NOT_POSITIVE, OUTSIDE = range(4)
#: A fitted axis ends this part of the spread beyond the outermost points.
FITTED_MARGIN = 0.04
#: Spread of an axis on which all points have one value.
LEAST_SPREAD = 1e-9


@dataclass(frozen=True)
class Window:
    """The ends of both axes, ``low`` below ``high``, and whether lengths stand for logarithms."""

    x: tuple[float, float]
    y: tuple[float, float]
    x_log: bool = False
    y_log: bool = False


@dataclass(frozen=True)
class Placed:
    """Places of n samples. ``state`` says what became of each; ``missing`` is the number of the first column that it
    lacks (-1: none). ``x y a`` are the numbers on the axes, ``across`` and ``up`` the place in the frame.
    """

    x: Floats
    y: Floats
    a: Floats
    across: Floats
    up: Floats
    state: NDArray[np.uint8]
    missing: NDArray[np.intp]

    def count(self, state: int) -> int:
        return int(np.count_nonzero(self.state == state))


def numbers_of(rows: Sequence[tuple[Any, ...]], first: int, count: int) -> Floats:
    """Columns ``first`` to ``first + count`` of the rows as numbers, shape (n, count); NaN for None."""
    if not rows:
        return np.empty((0, count))
    return np.array([row[first : first + count] for row in rows], dtype=np.float64)


def _axis_values(values: Floats, columns: tuple[str, ...], axis: Axis) -> Floats:
    return np.sum(values[:, [columns.index(column) for column in axis.columns]], axis=1)


def coordinates(diagram: Diagram, values: Floats) -> tuple[Floats, Floats, Floats]:
    """(x, y, a) of samples from ``values`` (n, the diagram's columns). ``a`` is NaN but for a triangle, where x, y, a
    are F, M and A in per cent of their sum."""
    x, y = (_axis_values(values, diagram.columns, axis) for axis in (diagram.x, diagram.y))
    if diagram.apex_a is None:
        return x, y, np.full_like(x, np.nan)
    a = _axis_values(values, diagram.columns, diagram.apex_a)
    total = x + y + a
    whole = np.where(total > 0.0, total, np.nan)
    return 100.0 * x / whole, 100.0 * y / whole, 100.0 * a / whole


def window_of(
    diagram: Diagram, x: Floats, y: Floats, asked: Sequence[float | None] = (None,) * 4, *, whole: bool = False
) -> Window:
    """Ends of the axes: as ``asked`` (x from, x to, y from, y to), else as the diagram has them, else by the points.

    ``whole``: every point is to be seen, though the diagram ends before. A triangle always shows all of itself.
    """
    if diagram.apex_a is not None:
        return Window((0.0, 1.0), (0.0, 1.0))
    ends = []
    for axis, found, given in ((diagram.x, x, asked[:2]), (diagram.y, y, asked[2:])):
        low, high = _ends(axis, found, whole)
        low, high = (low if given[0] is None else given[0]), (high if given[1] is None else given[1])
        ends.append((low, high) if low < high else (low, low + max(abs(low), 1.0) * 0.1))
    return Window(ends[0], ends[1], diagram.x.is_log, diagram.y.is_log)


def _ends(axis: Axis, found: Floats, whole: bool) -> tuple[float, float]:
    usable = found[np.isfinite(found) & ((found > 0.0) | (not axis.is_log))]
    low, high = axis.low, axis.high
    if usable.size and (whole or low is None or high is None):
        least, most = float(usable.min()), float(usable.max())
        if axis.is_log:
            fitted = least / 1.1, most * 1.1
        else:
            margin = FITTED_MARGIN * max(most - least, abs(most) * 0.02, LEAST_SPREAD)
            fitted = (max(least - margin, 0.0) if least >= 0.0 else least - margin), most + margin
        low = fitted[0] if low is None else min(low, fitted[0] if whole else low)
        high = fitted[1] if high is None else max(high, fitted[1] if whole else high)
    if axis.high is None and axis.reach is not None:
        high = axis.reach if high is None else max(high, axis.reach)
    return (0.0 if low is None else low), (1.0 if high is None else high)


def fractions(window: Window, x: Any, y: Any) -> tuple[Floats, Floats]:
    """Places along the axes, 0 at the low end and 1 at the high end; NaN where a logarithm is not defined."""
    out = []
    for values, (low, high), is_log in ((x, window.x, window.x_log), (y, window.y, window.y_log)):
        numbers = np.asarray(values, dtype=np.float64)
        if is_log:
            numbers = np.log10(np.where(numbers > 0.0, numbers, np.nan))
            low, high = math.log10(low), math.log10(high)
        out.append((numbers - low) / (high - low))
    return out[0], out[1]


def triangle_place(f: Any, m: Any) -> tuple[Floats, Floats]:
    """Places of F and M (per cent) in a triangle with A at the left, M at the right and F at the top."""
    top, right = np.asarray(f, dtype=np.float64) / 100.0, np.asarray(m, dtype=np.float64) / 100.0
    return right + top / 2.0, top


def place(diagram: Diagram, values: Floats, window: Window) -> Placed:
    """Where each sample stands, and why it is not drawn if it is not."""
    x, y, a = coordinates(diagram, values)
    if diagram.apex_a is None:
        across, up = fractions(window, x, y)
    else:
        across, up = triangle_place(x, y)
    lacking = np.isnan(values)
    missing = np.where(lacking.any(axis=1), lacking.argmax(axis=1), -1) if values.size else np.full(len(x), -1)
    drawable = np.isfinite(across) & np.isfinite(up)
    inside = drawable & (across >= 0.0) & (across <= 1.0) & (up >= 0.0) & (up <= 1.0)
    state = np.select([missing >= 0, ~drawable, ~inside], [MISSING, NOT_POSITIVE, OUTSIDE], default=DRAWN)
    return Placed(x, y, a, across, up, state.astype(np.uint8), missing.astype(np.intp))


def line_places(diagram: Diagram, window: Window, line: Line) -> list[tuple[float, float]]:
    """Corners of a field line, or of a label, as places; they may lie outside the frame."""
    x, y = np.array(line, dtype=np.float64).T
    across, up = fractions(window, x, y) if diagram.apex_a is None else triangle_place(x, y)
    return list(zip(across.tolist(), up.tolist(), strict=True))


def ticks(low: float, high: float, *, is_log: bool, most: int = 8) -> list[tuple[float, bool]]:
    """(value, whether it gets a number) of the tick marks of an axis. Steps of 1, 2 or 5; decades on a log axis."""
    if is_log:
        return _log_ticks(low, high)
    step = _round_step((high - low) / most)
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    return [(round(number * step, 12), True) for number in range(first, last + 1)]


def _round_step(least: float) -> float:
    power = 10.0 ** math.floor(math.log10(least))
    return next(factor * power for factor in (1.0, 2.0, 5.0, 10.0) if factor * power >= least * (1.0 - 1e-9))


def _log_ticks(low: float, high: float) -> list[tuple[float, bool]]:
    found = []
    decades = math.log10(high / low)
    for power in range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1):
        for digit in range(1, 10):
            value = digit * 10.0**power
            if low * (1 - 1e-9) <= value <= high * (1 + 1e-9):
                found.append((float(f"{value:.6g}"), digit == 1 or (decades < 1.7 and digit in (2, 5))))
    return found if sum(numbered for _, numbered in found) >= 2 else [(value, True) for value, _ in found]


@dataclass(frozen=True)
class Cells:
    """Counts of points in the cells of a grid over the frame: ``filled`` holds (column, row from the top, count)."""

    columns: int
    rows: int
    filled: list[tuple[int, int, int]]
    most: int


def in_cells(across: Floats, up: Floats, columns: int, rows: int) -> Cells:
    """How many of the places fall in each cell; a place on the upper or right edge counts in the last cell."""
    column = np.minimum((across * columns).astype(np.intp), columns - 1)
    row = np.minimum(((1.0 - up) * rows).astype(np.intp), rows - 1)
    counts = np.bincount(row * columns + column, minlength=columns * rows)
    where = np.flatnonzero(counts)
    filled = [
        (int(cell % columns), int(cell // columns), int(number))
        for cell, number in zip(where.tolist(), counts[where].tolist(), strict=True)
    ]
    return Cells(columns, rows, filled, int(counts.max(initial=0)))


def count_steps(most: int, steps: int) -> list[int]:
    """Least count of each shade, from 1 up in equal ratios, each once: for ``most`` 1 it is ``[1]``."""
    if most <= 1:
        return [1]
    found = {max(1, round(most ** (step / steps))) for step in range(steps)}
    return sorted(found)
