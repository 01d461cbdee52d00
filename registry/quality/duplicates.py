"""Duplicates: relative difference of pairs, and Thompson and Howarth's relation of precision to concentration.

The standard deviation of a result grows in a straight line with concentration, s_c = s_0 + k c; the precision is
P_c = 200 s_c / c per cent and the detection limit, where P_c = 100, is c_d = 2 s_0 / (1 - 2 k). Half the absolute
difference of normal pairs: |a - b| is distributed as sqrt(2) s_c |N(0, 1)|, so that its median is 0.9539 s_c, its 90th
percentile 2.326 s_c and its 99th 3.643 s_c. Thompson & Howarth 1973, Analyst 98, 153-160 (the short method); 1976,
Analyst 101, 690-709; 1978, J. Geochem. Explor. 9, 23-30. Formulas published; the percentiles are recomputed.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from statistics import NormalDist

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.analytes import QUALIFIER_ABOVE, QUALIFIER_BELOW
from registry.petrology.quotients import Floats, floats, quotient
from registry.quality.states import NOT_JUDGED, PASSED, WARNED
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


#: A pair so many times as far apart as the 99th percentile line is no matter of precision. No source: common practice.
GROSS_LINES = 2.0
_EXCHANGED = ", and by more than twice: were two samples exchanged, or is one a nugget?"


@dataclass(frozen=True)
class PairResult:
    """Pairs (n,): their mean, signed difference over its standard deviation, and which exceed the percentile lines.

    ``spread`` is the standard deviation of one result at the mean, by the precision asked for.
    """

    mean: Floats
    spread: Floats
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
    half = half_relative_difference(first, second)
    return PairResult(mean, spread, z, half, distance > NINETIETH, distance > NINETY_NINTH)


@dataclass(frozen=True)
class PairOutcome:
    """Pairs (n,) with what is to be said of each: z, limits of the duplicate, state codes, reasons (None: none).

    ``judged`` pairs have two plain results, ``above_ninetieth`` of them exceed that line; ``precision`` is the fit to
    the pairs of the stage that has most.
    """

    z: Floats
    low: Floats
    high: Floats
    states: NDArray[np.uint8]
    rules: NDArray[np.object_]
    judged: int
    above_ninetieth: int
    precision: PrecisionFit | None


def judge_duplicates(
    original: Floats,
    original_signs: NDArray[np.uint8],
    found: Floats,
    found_signs: NDArray[np.uint8],
    detection_limit: float,
    stages: Sequence[str],
) -> PairOutcome:
    """Judge pairs of results (n,) of one column, each by the precision asked of its stage (``ASKED_K``).

    A pair beyond the 99th percentile line is a warning. A result beyond the laboratory's limits is judged only where
    even the limit lies too far from the other: 500 against ``<1``.
    """
    k = np.array([ASKED_K[stage] for stage in stages], dtype=np.float64)
    pairs = judge_pairs(original, found, detection_limit, k)
    there = ~(np.isnan(original) | np.isnan(found))
    censored = (original_signs > 0) | (found_signs > 0)
    plain = there & ~censored & ~np.isnan(pairs.z)
    states = np.where(plain, np.where(pairs.above_ninety_ninth, WARNED, PASSED), NOT_JUDGED).astype(np.uint8)
    apart = there & censored & _apart(original, original_signs, found, found_signs) & pairs.above_ninety_ninth
    states[apart] = WARNED
    grossly = np.abs(pairs.z) * math.sqrt(2.0) > GROSS_LINES * NINETY_NINTH
    rules = np.full(original.shape, None, dtype=object)
    rules[there & censored] = "outside the laboratory's limits"
    rules[there & ~censored & ~plain] = "neither a detection limit nor a result above 0 says how far apart they may lie"
    for place in np.flatnonzero(plain & pairs.above_ninety_ninth).tolist():
        rules[place] = (
            f"half relative difference {pairs.half_difference[place]:.3g} %: beyond the line that 99 % of "
            f"pairs keep at a precision of {200.0 * k[place]:g} %{_EXCHANGED if grossly[place] else ''}"
        )
    for place in np.flatnonzero(apart).tolist():
        rules[place] = (
            f"half relative difference {pairs.half_difference[place]:.3g} % or more, beyond the laboratory's limit: "
            f"beyond the line that 99 % of pairs keep at a precision of {200.0 * k[place]:g} %"
        )
    kept = [stages[place] for place in np.flatnonzero(plain).tolist()]
    allowed = np.where(plain & (pairs.spread > 0.0), NINETY_NINTH * pairs.spread, np.nan)
    return PairOutcome(
        np.where(plain, pairs.z, np.nan),
        original - allowed,
        original + allowed,
        states,
        rules,
        int(plain.sum()),
        int((pairs.above_ninetieth & plain).sum()),
        _precision_of_largest_stage(original[plain], found[plain], kept),
    )


def _apart(a: Floats, a_signs: NDArray[np.uint8], b: Floats, b_signs: NDArray[np.uint8]) -> NDArray[np.bool_]:
    """Where two results, one or both of them known as a limit only, differ by at least the numbers given."""
    a_less = (a < b) & (a_signs != QUALIFIER_ABOVE) & (b_signs != QUALIFIER_BELOW)
    b_less = (b < a) & (b_signs != QUALIFIER_ABOVE) & (a_signs != QUALIFIER_BELOW)
    return a_less | b_less


def _precision_of_largest_stage(a: Floats, b: Floats, stages: Sequence[str]) -> PrecisionFit | None:
    """The fit to the pairs of one stage: what sampling, crushing and the instrument add are not one precision."""
    if len(a) < NEEDED_PAIRS:
        return None
    ((largest, _),) = Counter(stages).most_common(1)
    chosen = np.array([stage == largest for stage in stages])
    return fit_precision(a[chosen], b[chosen])


def too_many(above: int, pairs: int, share: float, risk: float = 0.01) -> bool:
    """Whether ``above`` of ``pairs`` lie beyond a line that a ``share`` of good pairs crosses (binomial, one-sided).

    True where so many or more would come by chance in less than ``risk`` of batches that keep the precision.
    """
    chance = sum(math.comb(pairs, i) * share**i * (1.0 - share) ** (pairs - i) for i in range(above, pairs + 1))
    return above > 0 and chance < risk
