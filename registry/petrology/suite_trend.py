"""The line of descent of a suite: how steadily it runs, over what range, and where alkalis pass lime.

A suite is the set of samples of one intrusion: arrays (n,), NaN for missing.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.melt_composition import Array, positive

#: Fewest samples that make a suite (common practice, no source).
FEWEST_SAMPLES = 4
#: A suite narrower than this in silica (wt%, volatile-free) has no trend to speak of (common practice, no source).
LEAST_SILICA_RANGE_WT = 2.0
#: Rank correlation from which a trend is good, and fair (common practice, no source).
GOOD_CORRELATION, FAIR_CORRELATION = 0.8, 0.5
#: SiO2 (wt%) at CaO = Na2O + K2O that divides the series [peacock1931].
PEACOCK_LIMITS_WT = (51.0, 56.0, 61.0)
PEACOCK_WORDS = ("alkalic", "alkali-calcic", "calc-alkalic", "calcic")


def ranks(values: ArrayLike) -> Array:
    """Ranks from 1, ties given their mean rank, shape (n,); NaN where the value is NaN."""
    numbers = np.asarray(values, dtype=np.float64)
    known = np.flatnonzero(~np.isnan(numbers))
    found = np.full(numbers.shape, np.nan)
    _, inverse, counts = np.unique(numbers[known], return_inverse=True, return_counts=True)
    last = np.cumsum(counts)
    found[known] = (last - (counts - 1) / 2.0)[inverse]
    return found


def rank_correlation(first: ArrayLike, second: ArrayLike) -> float:
    """Rank correlation of two arrays (n,) over the rows that both have; NaN under four rows or without spread.

    Ties share their mean rank. A single wild value moves it little. Source [spearman1904].
    """
    one, two = np.asarray(first, dtype=np.float64), np.asarray(second, dtype=np.float64)
    both = ~np.isnan(one) & ~np.isnan(two)
    if both.sum() < FEWEST_SAMPLES or np.ptp(one[both]) == 0.0 or np.ptp(two[both]) == 0.0:
        return float("nan")
    return float(np.corrcoef(ranks(one[both]), ranks(two[both]))[0, 1])


@dataclass(frozen=True)
class Trend:
    """How steadily a suite runs from basic to acid.

    ``correlation`` of MgO with SiO2 by ranks (a line of descent runs near -1); ranges as (least, greatest) over the
    ``samples`` that have both; ``word``: good, fair, poor, no_range or too_few_samples.
    """

    word: str
    samples: int
    correlation: float
    sio2_wt: tuple[float, float]
    mgo_wt: tuple[float, float]
    differentiation_index: tuple[float, float]

    def sentence(self) -> str:
        """The trend in words with its numbers."""
        if self.word == "too_few_samples":
            return f"too few samples: {self.samples} of the {FEWEST_SAMPLES} needed"
        head = {"no_range": "no range", "good": "good", "fair": "fair", "poor": "poor"}[self.word]
        said = f"{head}: {self.samples} samples, SiO2 {_range(self.sio2_wt)} wt%, MgO {_range(self.mgo_wt)} wt%"
        if not np.isnan(self.differentiation_index[0]):
            said += f", differentiation index {_range(self.differentiation_index)}"
        if not np.isnan(self.correlation):
            said += f", rank correlation of MgO with SiO2 {self.correlation:.2f}"
        return said


def suite_trend(sio2_wt: ArrayLike, mgo_wt: ArrayLike, differentiation_index: ArrayLike) -> Trend:
    """The trend of a suite from volatile-free SiO2 and MgO (wt%) and the differentiation index, arrays (n,).

    ``good`` where MgO falls as SiO2 rises with a rank correlation of -0.8 or less, ``fair`` to -0.5, else ``poor``;
    ``no_range`` where silica spans less than 2 wt%. Limits common practice; correlation [spearman1904].
    """
    sio2, mgo = np.asarray(sio2_wt, dtype=np.float64), np.asarray(mgo_wt, dtype=np.float64)
    index = np.asarray(differentiation_index, dtype=np.float64)
    both = ~np.isnan(sio2) & ~np.isnan(mgo)
    count = int(both.sum())
    ranges = [_ends(values[both]) for values in (sio2, mgo, index)]
    correlation = rank_correlation(mgo, sio2)
    if count < FEWEST_SAMPLES:
        word = "too_few_samples"
    elif ranges[0][1] - ranges[0][0] < LEAST_SILICA_RANGE_WT:
        word = "no_range"
    elif correlation <= -GOOD_CORRELATION:
        word = "good"
    else:
        word = "fair" if correlation <= -FAIR_CORRELATION else "poor"
    return Trend(word, count, correlation, ranges[0], ranges[1], ranges[2])


def alkali_lime_index(sio2_wt: ArrayLike, cao_wt: ArrayLike, alkalis_wt: ArrayLike) -> float:
    """SiO2 (wt%) at which a suite's CaO equals Na2O + K2O; arrays (n,), NaN where it cannot be told.

    The zero of a straight line through ln(CaO/alkalis) against SiO2 by least squares, given only where it lies within
    the suite's own silica and lime falls with silica. A property of a suite, never of one rock. Source [peacock1931].
    """
    sio2 = np.asarray(sio2_wt, dtype=np.float64)
    ratio = np.log(positive(cao_wt)) - np.log(positive(alkalis_wt))
    known = ~np.isnan(sio2) & ~np.isnan(ratio)
    if known.sum() < FEWEST_SAMPLES or np.ptp(sio2[known]) < LEAST_SILICA_RANGE_WT:
        return float("nan")
    x, y = sio2[known], ratio[known]
    slope = float(np.cov(x, y)[0, 1] / np.var(x, ddof=1))
    if slope >= 0.0:
        return float("nan")
    crossing = float(x.mean() - y.mean() / slope)
    return crossing if x.min() <= crossing <= x.max() else float("nan")


def alkali_lime_word(index_wt: float) -> str:
    """Series by the alkali-lime index (SiO2, wt%): alkalic, alkali-calcic, calc-alkalic or calcic [peacock1931]."""
    return PEACOCK_WORDS[int(np.searchsorted(PEACOCK_LIMITS_WT, index_wt, side="right"))]


def _ends(values: Array) -> tuple[float, float]:
    known = values[~np.isnan(values)]
    return (float(known.min()), float(known.max())) if known.size else (float("nan"), float("nan"))


def _range(ends: tuple[float, float]) -> str:
    return f"{ends[0]:.1f}-{ends[1]:.1f}"
