"""Which samples of a body lie far from the rest: robust distances of log-ratios of their majors.

Closed analyses are opened by isometric log-ratios; location and spread are those of the most compact half of the
samples, so that swapped samples cannot hide by pulling the mean towards themselves.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.melt_composition import Array, positive

#: Majors compared, volatile-free.
COMPARED_OXIDES = (
    "sio2_vf_wt", "tio2_vf_wt", "al2o3_vf_wt", "feot_vf_wt", "mgo_vf_wt", "cao_vf_wt", "na2o_vf_wt", "k2o_vf_wt",
)  # fmt: skip
#: Chi-square by degrees of freedom 1-10 [abramowitz1964] table 26.8: median, 97.5 % and 99.9 % points.
CHI_SQUARE_50 = (0.455, 1.386, 2.366, 3.357, 4.351, 5.348, 6.346, 7.344, 8.343, 9.342)
CHI_SQUARE_975 = (5.024, 7.378, 9.348, 11.143, 12.833, 14.449, 16.013, 17.535, 19.023, 20.483)
CHI_SQUARE_999 = (10.828, 13.816, 16.266, 18.467, 20.515, 22.458, 24.322, 26.125, 27.877, 29.588)
#: Fewest samples that show what a body is made of (common practice, no source).
FEWEST_SAMPLES = 8
#: From this many samples a dimension the compact half is sought; below, each log-ratio is looked at by itself.
SAMPLES_PER_DIMENSION = 10
#: The compact half is sought among at most about this many samples of a body, evenly taken.
MOST_SAMPLES_SEARCHED = 2000
#: Few samples scatter more than chi-square says: limits raised by simulation so that at most about 3 in 1000 samples
#: of one normal population, or of a straight trend with noise, lie beyond them (recomputed by the tests).
_LIMIT_RISE = 60.0
#: Least spread of a log-ratio that counts: what sampling and analysis alone make of majors (common practice).
LEAST_SPREAD = 0.02
_DEVIATION_LIMIT, _DEVIATION_RISE = 5.0, 50.0
#: Above this share of far samples the body is not one population, and none of them is called far.
LARGEST_FAR_SHARE = 0.10
_STEPS = 50


@dataclass(frozen=True)
class Distances:
    """How far n samples lie from the middle of their body.

    ``distance`` (n,), NaN where an oxide is missing or there are too few samples: a robust distance, or with fewer
    than 70 ``samples`` the greatest robust deviation of a log-ratio (``by_component``); ``limit`` beyond which a
    sample is ``far`` (n,); ``one_population`` False where more than a tenth lie beyond it (then none is far);
    ``component`` (n,) the oxide that departs most, object array; ``middle`` medians by oxide, wt%.
    """

    distance: Array
    limit: float
    far: NDArray[np.bool_]
    one_population: bool
    by_component: bool
    component: NDArray[np.object_]
    samples: int
    middle: dict[str, float]


def isometric_log_ratios(parts: ArrayLike) -> Array:
    """Log-ratio coordinates (n, k - 1) of positive parts (n, k), in which distances are those of centred log-ratios.

    Rows with a part that is missing or not positive are NaN. Source [egozcue2003].
    """
    logs = np.log(positive(parts))
    k = logs.shape[1]
    basis = np.zeros((k, k - 1))
    for column in range(1, k):
        basis[:column, column - 1] = 1.0 / column
        basis[column, column - 1] = -1.0
        basis[:, column - 1] *= np.sqrt(column / (column + 1.0))
    return logs @ basis


def squared_distances(points: ArrayLike) -> Array:
    """Robust squared distances (n,) of points (n, p) from their middle, scaled as chi-square with p degrees of freedom.

    Middle and spread are those of the half of the points with the least determinant of its covariance, found by
    concentration steps from two fixed starts (so that the same points always give the same answer), reweighted once
    at the 97.5 % point and scaled down to the median of chi-square. No direction counts as narrower than 0.02, the
    noise of log-ratios of majors. Meant for 10 p points or more.
    Source [rousseeuw1999]; [filzmoser2008] for log-ratios. ValueError for more than ten coordinates.
    """
    x = np.asarray(points, dtype=np.float64)
    n, p = x.shape
    if p > len(CHI_SQUARE_50):
        raise ValueError(f"robust distance: {p} coordinates; the table of chi-square holds {len(CHI_SQUARE_50)}")
    centred = x - np.median(x, axis=0)
    spread = 1.4826 * np.median(np.abs(centred), axis=0)
    searched = centred[:: max(1, n // MOST_SAMPLES_SEARCHED)]
    half = (len(searched) + p + 1) // 2
    scaled = searched / np.maximum(spread, LEAST_SPREAD)
    length = np.sqrt((scaled**2).sum(axis=1))
    signs = scaled / np.where(length > 0.0, length, 1.0)[:, None]
    starts = (length**2, _mahalanobis(scaled, np.zeros(p), np.cov(signs, rowvar=False))[0])
    _, distances = min((_concentrated(searched, start, half) for start in starts), key=lambda found: found[0])
    close = searched[_calibrated(distances, p) <= CHI_SQUARE_975[p - 1]]
    return _calibrated(_mahalanobis(centred, close.mean(axis=0), np.cov(close, rowvar=False))[0], p)


def distances_from_body(analyses: ArrayLike, components: tuple[str, ...] = COMPARED_OXIDES) -> Distances:
    """How far the analyses (n, k) of one body, wt% by ``components``, lie from the middle of the body.

    From 10 (k - 1) complete analyses on, ``squared_distances`` of their log-ratios against the 99.9 % point of
    chi-square; with fewer, the greatest deviation of a centred log-ratio in units of its median deviation (x 1.4826),
    not below 0.02, against 5 + 50/n. Under 8 nothing is far. Sources [rousseeuw1999], [filzmoser2008],
    [aitchison1986]; the limits for few samples were found by simulation.
    """
    parts = np.asarray(analyses, dtype=np.float64).reshape(-1, len(components))
    n, k = parts.shape
    coordinates = isometric_log_ratios(parts)
    complete = np.flatnonzero(~np.isnan(coordinates).any(axis=1))
    count = int(complete.size)
    distance, far = np.full(n, np.nan), np.zeros(n, dtype=bool)
    component = np.full(n, None, dtype=object)
    middle = dict.fromkeys(components, float("nan"))
    if count < FEWEST_SAMPLES:
        return Distances(distance, float("nan"), far, True, True, component, count, middle)
    known = parts[complete]
    logs = np.log(known) - np.log(known).mean(axis=1, keepdims=True)
    offset = np.abs(logs - np.median(logs, axis=0))
    scale = 1.4826 * np.median(offset, axis=0)
    deviation = offset / np.maximum(scale, LEAST_SPREAD)
    by_component = count < SAMPLES_PER_DIMENSION * (k - 1)
    if by_component:
        limit = _DEVIATION_LIMIT + _DEVIATION_RISE / count
        distance[complete] = deviation.max(axis=1)
    else:
        limit = float(np.sqrt(CHI_SQUARE_999[k - 2] * (1.0 + _LIMIT_RISE / count)))
        distance[complete] = np.sqrt(squared_distances(coordinates[complete]))
    beyond = complete[distance[complete] > limit]
    one_population = beyond.size <= max(LARGEST_FAR_SHARE * count, 1.0)
    if one_population:
        far[beyond] = True
    middle = dict(zip(components, np.median(known, axis=0).tolist(), strict=True))
    component[complete] = np.array(components, dtype=object)[np.argmax(deviation, axis=1)]
    return Distances(distance, limit, far, bool(one_population), by_component, component, count, middle)


def _concentrated(x: Array, distances: Array, half: int) -> tuple[float, Array]:
    """Determinant and distances after taking the closest half again and again until it stays the same."""
    chosen = np.zeros(len(x), dtype=bool)
    for _ in range(_STEPS):
        closest = np.zeros(len(x), dtype=bool)
        closest[np.argpartition(distances, half - 1)[:half]] = True
        distances, determinant = _mahalanobis(x, x[closest].mean(axis=0), np.cov(x[closest], rowvar=False))
        if (closest == chosen).all():
            break
        chosen = closest
    return determinant, distances


def _mahalanobis(x: Array, centre: Array, covariance: Array) -> tuple[Array, float]:
    """Squared distances and the determinant; directions without spread count by the noise."""
    values, vectors = np.linalg.eigh(np.atleast_2d(covariance))
    values = np.maximum(values, LEAST_SPREAD**2)
    turned = (x - centre) @ vectors
    return (turned**2 / values).sum(axis=1), float(np.prod(values))


def _calibrated(squared: Array, p: int) -> Array:
    """Squared distances scaled down so that their median is at most that of chi-square with p degrees of freedom."""
    middle = float(np.median(squared))
    return squared * min(1.0, CHI_SQUARE_50[p - 1] / middle) if middle > 0.0 else squared
