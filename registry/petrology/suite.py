"""How far the rocks of one intrusion are fractionated or what part of a source they melted from.

A suite is a small set of samples (rows). Concentrations are keyed by column name; NaN is missing.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.melt_composition import Array, positive
from registry.petrology.melting import batch_melt_fraction, rayleigh_liquid_fraction

#: Elements taken as incompatible (D near zero) in basic to intermediate suites, common practice, no source.
INCOMPATIBLE_COLUMNS = (
    "th_ppm",
    "nb_ppm",
    "la_ppm",
    "zr_ppm",
    "u_ppm",
    "ta_ppm",
    "hf_ppm",
    "ce_ppm",
    "rb_ppm",
    "k2o_wt",
)
#: The best of them: how many elements that rise most steadily are used.
_BEST_ELEMENTS = 4
_FEWEST_SAMPLES = 4


def most_primitive_sample(mgo_wt: ArrayLike, sio2_wt: ArrayLike, not_a_liquid: ArrayLike) -> int | None:
    """Row of the most primitive liquid of a suite: greatest MgO, then least SiO2; None where there is none.

    Arrays (n,): anhydrous wt%, and whether a sample is no liquid (cumulates never are parents). Common practice.
    """
    mgo = np.where(np.asarray(not_a_liquid, dtype=bool), np.nan, np.asarray(mgo_wt, dtype=np.float64))
    sio2 = np.asarray(sio2_wt, dtype=np.float64)
    known = np.flatnonzero(~np.isnan(mgo) & ~np.isnan(sio2))
    if known.size == 0:
        return None
    order = np.lexsort((sio2[known], -mgo[known]))
    return int(known[order[0]])


@dataclass(frozen=True)
class LiquidFractions:
    """Liquid left in each sample by fractional crystallisation of the parent, with the spread of the elements."""

    fraction: Array
    low: Array
    high: Array
    elements: tuple[str, ...]


def rayleigh_fractions(
    concentrations: Mapping[str, ArrayLike],
    parent: int,
    partition_coefficients: Mapping[str, float] | None = None,
    columns: Sequence[str] = INCOMPATIBLE_COLUMNS,
) -> LiquidFractions:
    """Rayleigh liquid fraction of every sample of a suite against its parent row, median, least and greatest.

    ``concentrations`` arrays (n,) by column; bulk ``partition_coefficients`` default to 0 (then F is a minimum of
    crystallisation). The elements used are at most four of ``columns``, those whose logarithms rise together best:
    the highest median correlation with the others. NaN where an element is below the parent's or missing.
    Source [rayleigh1896]; the choice of elements is common practice.
    """
    chosen = best_incompatible(concentrations, columns)
    coefficients = partition_coefficients or {}
    n = len(next(iter(concentrations.values()))) if concentrations else 0  # type: ignore[arg-type]
    if not chosen:
        empty = np.full(n, np.nan)
        return LiquidFractions(empty, empty.copy(), empty.copy(), ())
    rows = []
    for column in chosen:
        values = positive(concentrations[column])
        rows.append(rayleigh_liquid_fraction(values / values[parent], coefficients.get(column, 0.0)))
    return LiquidFractions(*_median_and_ends(np.array(rows)), chosen)


def best_incompatible(
    concentrations: Mapping[str, ArrayLike], columns: Sequence[str] = INCOMPATIBLE_COLUMNS
) -> tuple[str, ...]:
    """At most four columns whose logarithms rise together best (highest median correlation), best first.

    Columns with fewer than four numbers or without spread are left out; with one usable column it is that one.
    """
    usable = []
    for column in columns:
        if column in concentrations:
            logs = np.log(positive(concentrations[column]))
            known = logs[~np.isnan(logs)]
            if known.size >= _FEWEST_SAMPLES and np.ptp(known) > 0.0:
                usable.append((column, logs))
    if len(usable) < 2:
        return tuple(column for column, _ in usable)
    scores = []
    for column, logs in usable:
        others = [_correlation(logs, other) for name, other in usable if name != column]
        scores.append(float(np.median(others)))
    order = sorted(range(len(usable)), key=lambda position: -scores[position])
    return tuple(usable[position][0] for position in order[:_BEST_ELEMENTS] if scores[position] > 0.0)


def batch_melt_fractions(
    melt: Mapping[str, ArrayLike], source: Mapping[str, float], partition_coefficients: Mapping[str, float]
) -> LiquidFractions:
    """Fraction of a stated source that melted, from several elements, as median, least and greatest.

    ``melt`` arrays (n,), ``source`` concentrations and bulk ``partition_coefficients`` by the same columns in the
    same units; columns missing from any of them are not used. Source [shaw1970].
    """
    columns = tuple(column for column in melt if column in source and column in partition_coefficients)
    if not columns:
        raise ValueError(
            f"batch melting: no element is in all of melt {sorted(melt)}, source {sorted(source)} and coefficients "
            f"{sorted(partition_coefficients)}; give at least one to all three"
        )
    rows = [
        batch_melt_fraction(positive(melt[column]) / source[column], partition_coefficients[column])
        for column in columns
    ]
    return LiquidFractions(*_median_and_ends(np.array(rows)), columns)


@dataclass(frozen=True)
class TrendQuality:
    """How well a suite lies on one line of descent: squared correlation of log elements with silica, and n."""

    r_squared: float
    samples: int
    word: str


def trend_quality(sio2_wt: ArrayLike, fraction: ArrayLike) -> TrendQuality:
    """Quality of a suite's trend: squared correlation of ln F (liquid left) with SiO2.

    ``good`` from 0.8, ``fair`` from 0.5, ``poor`` below, ``too_few_samples`` under four (common practice).
    """
    logs, sio2 = np.log(positive(fraction)), np.asarray(sio2_wt, dtype=np.float64)
    known = ~np.isnan(logs) & ~np.isnan(sio2)
    count = int(known.sum())
    if count < _FEWEST_SAMPLES:
        return TrendQuality(float("nan"), count, "too_few_samples")
    r_squared = _correlation(logs, sio2) ** 2
    return TrendQuality(r_squared, count, "good" if r_squared >= 0.8 else "fair" if r_squared >= 0.5 else "poor")


def _median_and_ends(rows: Array) -> tuple[Array, Array, Array]:
    ordered = np.sort(rows, axis=0)
    count = np.sum(~np.isnan(rows), axis=0)
    last = np.maximum(count - 1, 0)
    at = np.arange(rows.shape[1])
    return 0.5 * (ordered[last // 2, at] + ordered[(last + 1) // 2, at]), ordered[0], ordered[last, at]


def _correlation(first: Array, second: Array) -> float:
    known = ~np.isnan(first) & ~np.isnan(second)
    if known.sum() < 3 or np.ptp(first[known]) == 0.0 or np.ptp(second[known]) == 0.0:
        return 0.0
    return float(np.corrcoef(first[known], second[known])[0, 1])
