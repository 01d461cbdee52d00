"""Control charts: limits at two and three standard deviations, and rules on runs of results in the order measured.

Shewhart 1931, Economic control of quality of manufactured product: three-sigma limits. Westgard, Barry, Hunt & Groth
1981, Clin. Chem. 27, 493-501: the rules 1-2s (a warning) and 1-3s, 2-2s, R-4s, 4-1s, 10-x (rejection). Both published.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.quotients import Floats, floats, quotient
from registry.quality.states import FAILED, PASSED, WARNED

#: In the order in which a broken one is named: the strongest evidence first.
RULES = ("1-3s", "2-2s", "R-4s", "4-1s", "10-x", "1-2s")
RULE_TEXTS = {
    "1-3s": "beyond three standard deviations",
    "2-2s": "two in succession beyond the same limit of two standard deviations",
    "R-4s": "two in succession more than four standard deviations apart, each beyond two",
    "4-1s": "four in succession beyond the same limit of one standard deviation",
    "10-x": "ten in succession on the same side of the expected value",
    "1-2s": "beyond two standard deviations",
}
#: Mean range of two normal results over their standard deviation, 2/sqrt(pi): the constant d2 for n = 2.
D2_OF_TWO = 2.0 / math.sqrt(math.pi)


def z_scores(found: ArrayLike, expected: ArrayLike, deviation: ArrayLike) -> Floats:
    """(found - expected)/deviation, shape (n,), NaN where one is missing or the deviation is not above 0."""
    value, centre, spread = floats(found, expected, deviation)
    return quotient(value - centre, spread)


def broken_rules(z: ArrayLike) -> dict[str, NDArray[np.bool_]]:
    """For z-scores (n,) in the order measured: which results complete a run that breaks each rule, (n,) a rule.

    A result that is missing (NaN) is left out of the runs. A run of more than one marks its last results from the
    one that completes it on.
    """
    values = np.asarray(z, dtype=np.float64)
    there = np.flatnonzero(~np.isnan(values))
    z = values[there]
    high, low = z > 2.0, z < -2.0
    single = {
        "1-3s": np.abs(z) > 3.0,
        "2-2s": _run(high, 2) | _run(low, 2),
        "R-4s": _follows(low, high) | _follows(high, low),
        "4-1s": _run(z > 1.0, 4) | _run(z < -1.0, 4),
        "10-x": _run(z > 0.0, 10) | _run(z < 0.0, 10),
        "1-2s": high | low,
    }
    broken = {}
    for name in RULES:
        marks = np.zeros(values.shape, dtype=bool)
        marks[there] = single[name]
        broken[name] = marks
    return broken


def judge_run(z: ArrayLike) -> tuple[NDArray[np.uint8], NDArray[np.object_]]:
    """State codes (n,) of results in the order measured and the rule each breaks (None: none); NaN is not judged."""
    values = np.asarray(z, dtype=np.float64)
    states = np.where(np.isnan(values), 0, PASSED).astype(np.uint8)
    rules = np.full(values.shape, None, dtype=object)
    broken = broken_rules(values)
    for name in reversed(RULES):
        states[broken[name]] = WARNED if name == "1-2s" else FAILED
        rules[broken[name]] = name
    return states, rules


def _run(mark: NDArray[np.bool_], length: int) -> NDArray[np.bool_]:
    """True where this and the ``length - 1`` marks before it are all true."""
    total = np.concatenate(([0], np.cumsum(mark)))
    ends = np.zeros(mark.shape, dtype=bool)
    if len(mark) >= length:
        ends[length - 1 :] = total[length:] - total[:-length] == length
    return ends


def _follows(before: NDArray[np.bool_], now: NDArray[np.bool_]) -> NDArray[np.bool_]:
    marks = np.zeros(now.shape, dtype=bool)
    marks[1:] = before[:-1] & now[1:]
    return marks


def unbiased_deviation_factor(n: int) -> float:
    """c4: mean of the standard deviation of n normal results over their true one; 0.9400 for n = 5."""
    if n < 2:
        raise ValueError(f"a standard deviation needs two results or more, not {n}")
    return math.sqrt(2.0 / (n - 1)) * math.exp(math.lgamma(n / 2) - math.lgamma((n - 1) / 2))


def limits_of_individuals(values: ArrayLike) -> tuple[float, float]:
    """Mean and standard deviation of single results from their moving range of two, mean |step|/1.128.

    For a material without a certified value: its own record sets the limits, as Shewhart's charts do. NaN for less
    than two results.
    """
    there = np.asarray(values, dtype=np.float64)
    there = there[~np.isnan(there)]
    if len(there) < 2:
        return float("nan"), float("nan")
    return float(there.mean()), float(np.abs(np.diff(there)).mean() / D2_OF_TWO)
