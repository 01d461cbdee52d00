"""Sides of a comparison that take turns on a shared machine."""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable


def medians(turns: int, *sides: Callable[[], object]) -> list[float]:
    """The median time of each side over so many turns, s."""
    taken: list[list[float]] = [[] for _ in sides]
    for _ in range(turns):
        for times, side in zip(taken, sides, strict=True):
            start = time.perf_counter()
            side()
            times.append(time.perf_counter() - start)
    return [statistics.median(times) for times in taken]
