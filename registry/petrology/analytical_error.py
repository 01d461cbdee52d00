"""Analytical error of an analysis, and analyses drawn within it.

The standard deviation of a result grows in a straight line with concentration, s = s0 + k c (Thompson and Howarth 1973,
1976). Where the controls of a batch do not tell s0 and k, k is a convention by kind of analyte and s0 follows from the
detection limit L: it is where the precision 200 s/c is 100 per cent, so that s0 = L (1 - 2 k)/2. Errors are normal and
independent of each other: of one sample, the error of one analyte says nothing of that of another (two columns that
one result fills share its error). What is common to a batch, its bias, is not drawn.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from registry.petrology.analytes import (
    CHOSEN_COLUMNS,
    CHOSEN_INDEX,
    OXIDE_BESIDE_ELEMENT,
    QUALIFIER_BELOW,
    QUALIFIER_NONE,
)
from registry.petrology.constants import FE2O3_FROM_FEO
from registry.petrology.conventions import Conventions
from registry.petrology.counted_normals import UInts, normal_pair

Floats = NDArray[np.float64]

#: Weighed or driven off; sums and differences of what else was determined are not drawn.
VOLATILES = ("loi_wt", "h2o_plus_wt", "h2o_minus_wt", "co2_wt", "s_wt", "so3_wt", "f_wt", "cl_wt")
MAJORS = (
    "sio2_wt", "tio2_wt", "al2o3_wt", "mno_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt", "p2o5_wt",
    "fe2o3t_reported_wt", "fe2o3_ferric_wt",
)  # fmt: skip
NOT_DRAWN = ("total_reported_wt",)
#: May be negative: iron takes up oxygen on ignition.
SIGNED = ("loi_wt",)
_BESIDE = tuple(
    (CHOSEN_INDEX[oxide.lower() + "_wt"], CHOSEN_INDEX[element.lower() + "_ppm"])
    for element, oxide in OXIDE_BESIDE_ELEMENT.items()
)
_TOTAL_IRON, _FEO, _FERRIC = (
    CHOSEN_INDEX[name] for name in ("fe2o3t_reported_wt", "feo_titrated_wt", "fe2o3_ferric_wt")
)


@dataclass(frozen=True)
class ErrorModel:
    """What is known of the error of n analyses, arrays (81, n) in the unit of the column, NaN where nothing is.

    ``s0`` and ``k`` as fitted to pairs of duplicates of the batch; ``spread`` the relative standard deviation of its
    reference materials; ``limit`` the detection limit. ``one_result`` (81, n) tells apart which result fills a column:
    columns of the same number share its error (-1: none).
    """

    s0: Floats
    k: Floats
    spread: Floats
    limit: Floats
    one_result: NDArray[np.int64]

    def part(self, start: int, stop: int) -> ErrorModel:
        """That of samples start to stop."""
        part = slice(start, stop)
        return ErrorModel(
            self.s0[:, part], self.k[:, part], self.spread[:, part], self.limit[:, part], self.one_result[:, part]
        )


def conventional_k(conventions: Conventions) -> Floats:
    """Relative standard deviation by column (81,) where no control tells it. Common practice, no source."""
    percent = np.full(len(CHOSEN_COLUMNS), conventions.error_trace_percent)
    for names, value in (
        (MAJORS, conventions.error_major_percent),
        (VOLATILES, conventions.error_volatile_percent),
        (("feo_titrated_wt",), conventions.error_feo_percent),
    ):
        percent[[CHOSEN_INDEX[name] for name in names]] = value
    return percent / 100.0


def standard_deviations(values: Floats, model: ErrorModel, conventions: Conventions) -> Floats:
    """Standard deviation of each value, (81, n) in the unit of its column; NaN where there is no value.

    The line fitted to the pairs of the batch comes first; where it gives no positive number at this concentration, the
    spread of the reference materials, then the convention, each with the term of the detection limit (none where no
    limit is known or k is 0.5 or more).
    """
    size = np.abs(values)
    with np.errstate(invalid="ignore"):
        fitted = model.s0 + model.k * size
        k = np.where(model.spread > 0.0, model.spread, conventional_k(conventions)[:, None])
        at_limit = np.where((model.limit > 0.0) & (k < 0.5), model.limit * (1.0 - 2.0 * k) / 2.0, 0.0)
        return np.where(fitted > 0.0, fitted, at_limit + k * size)


def drawn(
    values: Floats,
    qualifiers: NDArray[np.uint8],
    model: ErrorModel,
    conventions: Conventions,
    keys: UInts,
    draws: int,
) -> tuple[Floats, NDArray[np.uint8]]:
    """Values and qualifiers (81, n draws) of ``draws`` analyses of each of n samples, all draws of the first one first.

    Censored values keep their limit: they are intervals to every verdict. A drawn value below the detection limit
    becomes "less than" the limit, as the laboratory would report it, unless the value itself was reported below it;
    one that would not be positive becomes "less than" the value reported. Values of 0 or less are not drawn, but for
    the loss on ignition. The reported total is not drawn: the total that is judged is summed from the drawn oxides.
    Ferric iron beside total and ferrous iron is their difference and follows them.
    """
    n = len(keys)
    sigma = standard_deviations(values, model, conventions)
    signed = np.isin(CHOSEN_COLUMNS, SIGNED)[:, None]
    moves = (qualifiers == QUALIFIER_NONE) & (sigma > 0.0) & ((values > 0.0) | signed)
    moves[[CHOSEN_INDEX[name] for name in NOT_DRAWN]] = False
    difference = moves[[_TOTAL_IRON, _FEO, _FERRIC]].all(axis=0)
    moves[_FERRIC] &= ~difference
    changed = np.repeat(values, draws, axis=1)
    signs = np.repeat(qualifiers, draws, axis=1)
    errors = _errors(moves, model.one_result, keys, draws)
    limits = np.where(model.limit <= values, model.limit, np.nan)
    for column, error in errors.items():
        rows = np.flatnonzero(moves[column])
        value = values[column, rows, None]
        found = value + sigma[column, rows, None] * error[rows]
        if not signed[column, 0]:
            limit = limits[column, rows, None]
            below = np.where(np.isnan(limit), found <= 0.0, found < limit)
            where_below = np.where(np.isnan(limit), value, limit)
            found = np.where(below, where_below, found)
            signs.reshape(-1, n, draws)[column, rows] = np.where(below, QUALIFIER_BELOW, QUALIFIER_NONE)
        changed.reshape(-1, n, draws)[column, rows] = found
    if difference.any():
        _follow(changed.reshape(-1, n, draws), values, np.flatnonzero(difference))
    return changed, signs


def _errors(moves: NDArray[np.bool_], one_result: NDArray[np.int64], keys: UInts, draws: int) -> Mapping[int, Floats]:
    """Standard normal numbers (n, draws) by column, for the columns of which some value is drawn."""
    wanted = np.asarray(moves.any(axis=1), dtype=bool)
    for oxide, element in _BESIDE:
        wanted[oxide] |= wanted[element]
    errors: dict[int, Floats] = {}
    for pair in range((len(wanted) + 1) // 2):
        columns = [column for column in (2 * pair, 2 * pair + 1) if column < len(wanted)]
        if wanted[columns].any():
            errors.update(zip(columns, normal_pair(keys, pair, draws), strict=False))
    for oxide, element in _BESIDE:
        if wanted[element]:
            same = (one_result[oxide] == one_result[element]) & (one_result[element] >= 0)
            errors[element] = np.where(same[:, None], errors[oxide], errors[element])
    return {column: error for column, error in errors.items() if moves[column].any()}


def _follow(changed: Floats, values: Floats, rows: NDArray[np.intp]) -> None:
    """Ferric iron changes with total iron and against ferrous iron; it stays where it would fall to 0 or below."""
    by = (changed[_TOTAL_IRON, rows] - values[_TOTAL_IRON, rows, None]) - FE2O3_FROM_FEO * (
        changed[_FEO, rows] - values[_FEO, rows, None]
    )
    ferric = values[_FERRIC, rows, None] + by
    changed[_FERRIC, rows] = np.where(ferric > 0.0, ferric, values[_FERRIC, rows, None])
