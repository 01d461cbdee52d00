"""How far the rocks of one intrusion are fractionated and what part of a source they melted from.

A suite is a small set of samples (rows). Concentrations are keyed by column name; NaN is missing.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.melt_composition import Array, positive
from registry.petrology.melting import batch_melt_fraction, rayleigh_liquid_fraction
from registry.petrology.suite_trend import FEWEST_SAMPLES, rank_correlation

#: Elements that may be incompatible (D near zero); each suite shows which of them are. Common practice, no source.
INCOMPATIBLE_COLUMNS = (
    "th_ppm", "nb_ppm", "la_ppm", "zr_ppm", "u_ppm", "ta_ppm", "hf_ppm", "ce_ppm", "nd_ppm", "rb_ppm", "k2o_wt",
)  # fmt: skip
#: The best of them: how many elements that rise most steadily are used.
_BEST_ELEMENTS = 4
#: Least rank correlation with the index of differentiation of an element that rises (common practice, no source).
_LEAST_RISE = 0.3
#: Bulk partition coefficients of melting spinel lherzolite [workman2005], from memory.
LHERZOLITE_D = {
    "th_ppm": 0.001, "u_ppm": 0.0011, "nb_ppm": 0.0034, "ta_ppm": 0.0034, "la_ppm": 0.01, "ce_ppm": 0.022,
    "nd_ppm": 0.031, "zr_ppm": 0.033, "hf_ppm": 0.035,
}  # fmt: skip


def most_primitive_sample(
    mg_number: ArrayLike, mgo_wt: ArrayLike, sio2_wt: ArrayLike, may_be_parent: ArrayLike
) -> int | None:
    """Row of the most primitive liquid of a suite, None where there is none; arrays (n,), oxides volatile-free wt%.

    Greatest Mg-number (all iron as FeO), then greatest MgO, then least SiO2, among the rows that ``may_be_parent``
    (fit, unaltered, no cumulate, no control). Common practice, no source.
    """
    mg, mgo, sio2 = (np.asarray(values, dtype=np.float64) for values in (mg_number, mgo_wt, sio2_wt))
    known = np.flatnonzero(np.asarray(may_be_parent, dtype=bool) & ~np.isnan(mg) & ~np.isnan(mgo) & ~np.isnan(sio2))
    if known.size == 0:
        return None
    order = np.lexsort((sio2[known], -mgo[known], -mg[known]))
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
    rises_with: ArrayLike | None = None,
) -> LiquidFractions:
    """Rayleigh liquid fraction of every sample of a suite against its parent row, median, least and greatest.

    ``concentrations`` arrays (n,) by column; bulk ``partition_coefficients`` default to 0 (then F is a maximum, and
    1 - F the least that crystallised). The elements are those of ``best_incompatible`` that the parent has. NaN where
    an element is below the parent's or missing. Source [rayleigh1896].
    """
    n = len(next(iter(concentrations.values()))) if concentrations else 0  # type: ignore[arg-type]
    chosen = tuple(
        column
        for column in best_incompatible(concentrations, columns, rises_with)
        if not np.isnan(positive(concentrations[column])[parent])
    )
    coefficients = partition_coefficients or {}
    if not chosen:
        empty = np.full(n, np.nan)
        return LiquidFractions(empty, empty.copy(), empty.copy(), ())
    rows = []
    for column in chosen:
        values = positive(concentrations[column])
        rows.append(rayleigh_liquid_fraction(values / values[parent], coefficients.get(column, 0.0)))
    return LiquidFractions(*_median_and_ends(np.array(rows)), chosen)


def best_incompatible(
    concentrations: Mapping[str, ArrayLike],
    columns: Sequence[str] = INCOMPATIBLE_COLUMNS,
    rises_with: ArrayLike | None = None,
) -> tuple[str, ...]:
    """At most four columns whose logarithms rise together one for one, best first.

    Wholly incompatible elements rise alike: against each other their logarithms have slope 1. Each pair scores its
    correlation less how far the slope (ratio of the standard deviations) is from 1, |ln slope|; an element scores the
    median over the others and is used above 0. Columns with fewer than four numbers or without spread are left out,
    and, where ``rises_with`` (n,) is given (an index of differentiation), those whose rank correlation with it is
    below 0.3: what falls is no incompatible element in this suite. With one usable column it is that one.
    Common practice, no source.
    """
    usable = []
    for column in columns:
        if column in concentrations:
            logs = np.log(positive(concentrations[column]))
            known = logs[~np.isnan(logs)]
            if known.size < FEWEST_SAMPLES or np.ptp(known) == 0.0:
                continue
            if rises_with is not None and not rank_correlation(logs, rises_with) >= _LEAST_RISE:
                continue
            usable.append((column, logs))
    if len(usable) < 2:
        return tuple(column for column, _ in usable)
    scores = []
    for column, logs in usable:
        others = [_agreement(logs, other) for name, other in usable if name != column]
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


def _median_and_ends(rows: Array) -> tuple[Array, Array, Array]:
    ordered = np.sort(rows, axis=0)
    count = np.sum(~np.isnan(rows), axis=0)
    last = np.maximum(count - 1, 0)
    at = np.arange(rows.shape[1])
    return 0.5 * (ordered[last // 2, at] + ordered[(last + 1) // 2, at]), ordered[0], ordered[last, at]


def _agreement(first: Array, second: Array) -> float:
    """Correlation less the distance of the slope from 1; -1 where the two share too few numbers or have no spread."""
    known = ~np.isnan(first) & ~np.isnan(second)
    if known.sum() < FEWEST_SAMPLES or np.ptp(first[known]) == 0.0 or np.ptp(second[known]) == 0.0:
        return -1.0
    one, two = first[known], second[known]
    return float(np.corrcoef(one, two)[0, 1] - abs(np.log(np.std(one) / np.std(two))))
