"""Blanks: against the detection limit, and against the sample measured before them.

Common practice, no source: a blank above five times the detection limit is a warning, above ten times a failure; an
excess of less than a tenth of the sample before it may be carried over from it, which is named. A blank that is a rock
(quartz sand) holds something of most elements: where the values of its material are registered, only the excess over
them counts.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.analytes import QUALIFIER_BELOW
from registry.petrology.quotients import Floats, floats, quotient
from registry.quality.states import FAILED, NOT_JUDGED, PASSED, WARNED

WARN_AT, FAIL_AT = 5.0, 10.0
#: A sample before that is not this much richer than the blank's excess does not explain it.
RICHER = 10.0


@dataclass(frozen=True)
class BlankResult:
    """Blanks (n,): state codes, excess over the material's own content in detection limits, carry-over in per cent.

    ``carried`` marks those whose excess a much richer sample before them may explain, ``limit_too_high`` those that
    were reported below a limit (of a diluted solution, say) that itself lies above what is allowed.
    """

    states: NDArray[np.uint8]
    multiples: Floats
    carry_over_percent: Floats
    carried: NDArray[np.bool_]
    limit_too_high: NDArray[np.bool_]


def judge_blanks(
    found: ArrayLike,
    qualifiers: ArrayLike,
    detection_limit: ArrayLike,
    before: ArrayLike,
    background: ArrayLike = 0.0,
    background_deviation: ArrayLike = 0.0,
) -> BlankResult:
    """Judge blanks; everything (n,) or broadcast, in one unit. ``before`` is the result of the line before (or NaN).

    The limits are the background, three of its deviations, and five or ten detection limits. A result below the
    detection limit passes; one below a limit that itself lies above what is allowed says nothing. Without a detection
    limit a blank of known content is judged by its three deviations alone (above them it is a warning), any other not
    at all.
    """
    value, limit, preceding, own, spread = floats(found, detection_limit, before, background, background_deviation)
    below = np.asarray(qualifiers) == QUALIFIER_BELOW
    value, limit, preceding, own, spread, below = np.broadcast_arrays(value, limit, preceding, own, spread, below)
    allowed = own + 3.0 * spread
    excess = np.where(below, 0.0, np.maximum(value - allowed, 0.0))
    multiples = quotient(excess, limit)
    states = np.full(value.shape, NOT_JUDGED, dtype=np.uint8)
    there = ~np.isnan(value)
    judged = there & (limit > 0.0)
    states[judged] = PASSED
    by_content = there & ~judged & (own > 0.0)
    states[by_content] = np.where(excess[by_content] > 0.0, WARNED, PASSED)
    too_high = judged & below & (value > allowed + WARN_AT * limit)
    states[too_high] = NOT_JUDGED
    states[judged & (multiples > WARN_AT)] = WARNED
    states[judged & (multiples > FAIL_AT)] = FAILED
    share = 100.0 * quotient(np.where(below, 0.0, value - own), preceding)
    carried = (states > PASSED) & (preceding > RICHER * excess) & (excess > 0.0)
    return BlankResult(states, multiples, share, carried, too_high)
