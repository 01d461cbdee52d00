"""How far a value stands from its limit, as positions on a short line: the limit in the middle, far away at the ends.

The line is compressed towards its ends, so that "just" and "by far" look different and nothing ever falls off. One
unit of the scale is the width of the near band where the criterion has one, else a quarter of the limit (a choice of
this drawing, no published source); the drawing decides nothing.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from registry.targets.grammar import Condition

#: A value one unit beyond the limit stands this share of the way to the end of the line.
SHARE_AT_ONE_UNIT = 1.0 / 3.0
_NUMBER = r"[-+]?\d+(?:\.\d+)?(?:e[-+]?\d+)?"
_BOUND = re.compile(rf"([<>]) ({_NUMBER})")
_SPAN = re.compile(rf"({_NUMBER}) to ({_NUMBER}|inf)")


@dataclass(frozen=True)
class Margin:
    """Positions from -1 (far below) to 1 (far above). ``dot`` is None where only an interval is known.

    ``met_from`` and ``met_to`` bound the side on which the criterion is met; ``ticks`` are its limits.
    """

    ticks: tuple[float, ...]
    met_from: float
    met_to: float
    dot: float | None = None
    low: float | None = None
    high: float | None = None


def interval_of(text: str) -> tuple[float, float] | None:
    """The ends of an interval written as ``< 5``, ``> 16``, ``1.2 to 4.3`` or ``16 to inf``; None for other text."""
    if bound := _BOUND.fullmatch(text):
        value = float(bound.group(2))
        return (0.0, value) if bound.group(1) == "<" else (value, math.inf)
    if span := _SPAN.fullmatch(text):
        return float(span.group(1)), float(span.group(2))
    return None


def margin(
    test: Condition, near: Condition | None, value: float | None, limit: float | None, text: str = ""
) -> Margin | None:
    """The drawing of one outcome; None for word tests and where neither value nor interval is known.

    ``limit`` is the limit that applied to this sample (it can depend on the sample); ``text`` may hold an interval.
    """
    ends = interval_of(text) if value is None else (value, value)
    if test.is_text or limit is None or ends is None:
        return None
    ticks: tuple[float, ...]
    if test.sign == "between":
        centre, unit = 0.5 * (test.constant + test.upper), 0.5 * (test.upper - test.constant)
        met = (_place(-1.0), _place(1.0))
        ticks = met
    else:
        centre, unit = limit, _unit(test, near, limit)
        ticks = (0.0,)
        met = (0.0, 1.0) if test.sign[0] == ">" else (-1.0, 0.0)
    low, high = (_place((end - centre) / unit) for end in ends)
    return Margin(
        ticks,
        met[0],
        met[1],
        dot=low if value is not None else None,
        low=None if value is not None else low,
        high=None if value is not None else high,
    )


def _unit(test: Condition, near: Condition | None, limit: float) -> float:
    if near is not None and test.of is None and near.constant != test.constant:
        return abs(test.constant - near.constant)
    if near is not None and test.of is not None and test.constant == 0.0 and test.slope and near.slope != test.slope:
        return abs(limit * (1.0 - near.slope / test.slope)) or 1.0
    return 0.25 * abs(limit) or 1.0


def _place(units: float) -> float:
    if math.isinf(units):
        return math.copysign(1.0, units)
    rest = 1.0 / SHARE_AT_ONE_UNIT - 1.0
    return units / (abs(units) + rest)
