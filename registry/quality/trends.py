"""Bias and drift: the mean difference from the expected value and its slope over time or along a certificate.

Ordinary least squares of a straight line; standard errors from the scatter about it (textbook formulas, as Draper &
Smith 1998, Applied regression analysis, section 1.4; published).
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike


@dataclass(frozen=True)
class Line:
    """y = intercept + slope x over n points, with standard errors; NaN where n or the spread of x is too small."""

    n: int
    intercept: float
    slope: float
    intercept_error: float
    slope_error: float
    residual_deviation: float


@dataclass(frozen=True)
class Bias:
    """Mean of n differences and its standard error, in their unit (NaN for the error of one)."""

    n: int
    mean: float
    error: float


def least_squares(x: ArrayLike, y: ArrayLike) -> Line:
    """The line through points (n,); slope NaN for fewer than two distinct x, errors NaN for fewer than three points."""
    across, up = np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)
    there = ~(np.isnan(across) | np.isnan(up))
    across, up = across[there], up[there]
    n, missing = len(across), float("nan")
    if n == 0:
        return Line(0, missing, missing, missing, missing, missing)
    centre, height = float(across.mean()), float(up.mean())
    spread = float(((across - centre) ** 2).sum())
    if n < 2 or spread == 0.0:
        return Line(n, missing, missing, missing, missing, missing)
    slope = float(((across - centre) * (up - height)).sum()) / spread
    intercept = height - slope * centre
    if n < 3:
        return Line(n, intercept, slope, missing, missing, missing)
    deviation = math.sqrt(float(((up - intercept - slope * across) ** 2).sum()) / (n - 2))
    return Line(
        n,
        intercept,
        slope,
        deviation * math.sqrt(1.0 / n + centre * centre / spread),
        deviation / math.sqrt(spread),
        deviation,
    )


def bias(differences: ArrayLike) -> Bias:
    """Mean difference from the expected value, with the standard error of the mean."""
    there = np.asarray(differences, dtype=np.float64)
    there = there[~np.isnan(there)]
    if not len(there):
        return Bias(0, float("nan"), float("nan"))
    error = float(there.std(ddof=1)) / math.sqrt(len(there)) if len(there) > 1 else float("nan")
    return Bias(len(there), float(there.mean()), error)
