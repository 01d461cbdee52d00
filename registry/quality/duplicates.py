"""Duplicates: relative difference of pairs, and Thompson and Howarth's relation of precision to concentration.

The standard deviation of a result grows in a straight line with concentration, s_c = s_0 + k c; the precision is
P_c = 200 s_c / c per cent and the detection limit, where P_c = 100, is c_d = 2 s_0 / (1 - 2 k). Half the absolute
difference of normal pairs: |a - b| is distributed as sqrt(2) s_c |N(0, 1)|, so that its median is 0.9539 s_c, its 90th
percentile 2.326 s_c and its 99th 3.643 s_c. Thompson & Howarth 1973, Analyst 98, 153-160 (the short method); 1976,
Analyst 101, 690-709; 1978, J. Geochem. Explor. 9, 23-30. Formulas published; the percentiles are recomputed.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from statistics import NormalDist

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.quotients import Floats, floats, quotient
from registry.quality.trends import Line, least_squares

_NORMAL = NormalDist()
#: |a - b| over s_c at its median, 90th and 99th percentile.
MEDIAN_OF_DIFFERENCE = math.sqrt(2.0) * _NORMAL.inv_cdf(0.75)
NINETIETH, NINETY_NINTH = (math.sqrt(2.0) * _NORMAL.inv_cdf(0.5 + p / 2.0) for p in (0.90, 0.99))
#: Pairs in a group, and pairs needed, for the fit.
GROUP, NEEDED_PAIRS = 11, 50

#: Relative standard deviation asked of each stage of duplicate; doubled it is the precision: 10 % for pulps and repeats
#: of the laboratory, 20 % for crushed rock, 30 % in the field and where the stage is not known. Common practice, no
#: source.
ASKED_K = {"lab": 0.05, "pulp": 0.05, "crush": 0.10, "field": 0.15, "unknown": 0.15}


def half_relative_difference(a: ArrayLike, b: ArrayLike) -> Floats:
    """Half absolute relative difference in per cent, 100 |a - b|/(a + b), shape (n,); NaN where the sum is not > 0."""
    first, second = floats(a, b)
    total = first + second
    return 100.0 * quotient(np.abs(first - second), np.where(total > 0.0, total, np.nan))


def detection_limit_of(s_0: float, k: float) -> float:
    """c_d = 2 s_0/(1 - 2 k), in the unit of ``s_0``; NaN where k is 0.5 or more (never that precise)."""
    return 2.0 * s_0 / (1.0 - 2.0 * k) if k < 0.5 else float("nan")


def precision_percent(concentration: ArrayLike, s_0: float, k: float) -> Floats:
    """P_c = 200 (s_0 + k c)/c per cent, shape (n,)."""
    (c,) = floats(concentration)
    return 200.0 * quotient(s_0 + k * c, c)


@dataclass(frozen=True)
class PrecisionFit:
    """s_c = s_0 + k c (s_0 in the unit of the results) over ``pairs`` pairs in ``groups`` groups."""

    s_0: float
    k: float
    pairs: int
    groups: int
    line: Line


def fit_precision(a: ArrayLike, b: ArrayLike) -> PrecisionFit | None:
    """Thompson and Howarth's fit for 50 pairs or more, None below.

    Pairs in the order of their means, in groups of eleven (what is left at the upper end makes no group); the median
    difference of each group over 0.9539 is its s_c, regressed on the mean of its means.
    """
    first, second = floats(a, b)
    there = ~(np.isnan(first) | np.isnan(second))
    first, second = first[there], second[there]
    if len(first) < NEEDED_PAIRS:
        return None
    mean, difference = (first + second) / 2.0, np.abs(first - second)
    order = np.argsort(mean, kind="stable")
    groups = len(order) // GROUP
    rows = order[: groups * GROUP].reshape(groups, GROUP)
    line = least_squares(mean[rows].mean(axis=1), np.median(difference[rows], axis=1) / MEDIAN_OF_DIFFERENCE)
    return PrecisionFit(line.intercept, line.slope, len(first), groups, line)


@dataclass(frozen=True)
class PairResult:
    """Pairs (n,): their mean, signed difference over its standard deviation, and which exceed the percentile lines."""

    mean: Floats
    z: Floats
    half_difference: Floats
    above_ninetieth: NDArray[np.bool_]
    above_ninety_ninth: NDArray[np.bool_]


def judge_pairs(original: ArrayLike, duplicate: ArrayLike, detection_limit: float, k: ArrayLike) -> PairResult:
    """The short method: pairs against the 90th and 99th percentile lines of the precision asked for.

    ``k`` (n,) is the relative standard deviation asked of each pair (see ``ASKED_K``).
    """
    first, second = floats(original, duplicate)
    mean = (first + second) / 2.0
    asked = np.asarray(k, dtype=np.float64)
    limit = detection_limit if detection_limit > 0.0 else 0.0
    spread = limit * (1.0 - 2.0 * asked) / 2.0 + asked * mean
    z = quotient(second - first, math.sqrt(2.0) * spread)
    distance = np.abs(z) * math.sqrt(2.0)
    return PairResult(mean, z, half_relative_difference(first, second), distance > NINETIETH, distance > NINETY_NINTH)


def too_many(above: int, pairs: int, share: float, risk: float = 0.01) -> bool:
    """Whether ``above`` of ``pairs`` lie beyond a line that a ``share`` of good pairs crosses (binomial, one-sided).

    True where so many or more would come by chance in less than ``risk`` of batches that keep the precision.
    """
    chance = sum(math.comb(pairs, i) * share**i * (1.0 - share) ** (pairs - i) for i in range(above, pairs + 1))
    return above > 0 and chance < risk
