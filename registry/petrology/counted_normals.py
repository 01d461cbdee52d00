"""Standard normal numbers by count: each follows from a key, a column and a draw alone, whatever is drawn beside it.

So a sample gets the same numbers in any order and company. The uniform numbers are those of SplitMix64 (Steele, Lea and
Flood 2014): its state advances by a constant, so that the k-th number of a key is had without the others. Normal ones
are made of pairs of them [boxmuller1958].
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

UInts = NDArray[np.uint64]

#: Step and multipliers of SplitMix64 [steele2014].
_STEP = np.uint64(0x9E3779B97F4A7C15)
_FIRST, _SECOND = np.uint64(0xBF58476D1CE4E5B9), np.uint64(0x94D049BB133111EB)
#: Counts kept for the draws of a pair of columns.
_COUNTS_A_PAIR = 2**32
MOST_DRAWS = _COUNTS_A_PAIR // 2


def splitmix64(key: UInts | int, count: UInts | int) -> UInts:
    """The ``count``-th number (1 the first) of SplitMix64 begun with ``key``; uint64, shapes broadcast."""
    with np.errstate(over="ignore"):
        z = np.asarray(key, dtype=np.uint64) + np.asarray(count, dtype=np.uint64) * _STEP
        z = (z ^ (z >> np.uint64(30))) * _FIRST
        z = (z ^ (z >> np.uint64(27))) * _SECOND
    return z ^ (z >> np.uint64(31))


def keys_of(seed: int, ids: NDArray[np.int64]) -> UInts:
    """A key for each id (n,) under one seed (taken modulo 2**64), uint64."""
    return splitmix64(splitmix64(seed % 2**64, 1), np.asarray(ids, dtype=np.int64).astype(np.uint64))


def normal_pair(keys: UInts, pair: int, draws: int) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Standard normal numbers of two columns, (n, draws) each, for n keys; ``pair`` 0, 1, ... names the two columns.

    ValueError beyond ``MOST_DRAWS``, where the numbers of one pair would be those of the next.
    """
    if not 0 < draws <= MOST_DRAWS:
        raise ValueError(f"{draws} draws cannot be had; expected 1 to {MOST_DRAWS}")
    count = np.uint64(pair * _COUNTS_A_PAIR) + np.arange(1, 2 * draws + 1, dtype=np.uint64)
    uniform = (splitmix64(keys[:, None], count) >> np.uint64(11)).astype(np.float64) * 2.0**-53
    radius = np.sqrt(-2.0 * np.log1p(-uniform[:, :draws]))
    angle = 2.0 * np.pi * uniform[:, draws:]
    return radius * np.cos(angle), radius * np.sin(angle)
