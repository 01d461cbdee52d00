"""Whether an analysis agrees with itself: smooth rare earths, ratios that nature does not leave, oxide against element.

Every function takes ppm or wt% columns, shape (n,), and leaves NaN where something is missing.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import FE2O3_FROM_FEO, oxide_from_element
from registry.petrology.normalising import CHONDRITE_MCDONOUGH
from registry.petrology.quotients import Floats, floats, log10_positive, quotient

#: Rare earths by atomic number, without Ce and Eu, whose other valence sets them apart.
SMOOTH_RARE_EARTHS = {
    "La": 57, "Pr": 59, "Nd": 60, "Sm": 62, "Gd": 64, "Tb": 65, "Dy": 66, "Ho": 67, "Er": 68, "Tm": 69, "Yb": 70,
    "Lu": 71,
}  # fmt: skip
#: A neighbour off the line between the next ones by more than this factor is warned of. Common practice, no source;
#: the published values of reference materials stay within 1.25 (Jochum et al. 2006, 2016; Imai et al. 1996).
ROUGH_FACTOR = 1.4

#: Nb/Ta and Zr/Hf that igneous processes reach, most of the way: CHARAC ranges are Zr/Hf 26-46 (Bau 1996); evolved
#: granites and pegmatites go down to about 5 and 1-2 (Ballouard et al. 2016; Bau 1996), so that what lies outside these
#: is a matter of the laboratory before it is one of the rock. Common practice, no source for the outer limits.
ZR_HF_LIMITS, NB_TA_LIMITS = (8.0, 90.0), (0.5, 40.0)

#: O2 that iron takes up on ignition, by mass of FeO: 4 FeO + O2 -> 2 Fe2O3.
OXYGEN_PER_FEO = FE2O3_FROM_FEO - 1.0

#: A total may differ from the sum of the analysis by this much. Common practice, no source.
TOTALS_DIFFER_WT = 1.5

#: Two reports of one metal may differ by this share. Common practice, no source.
DUPLICATE_PERCENT = 10.0
#: element column -> (oxide column, formula): both stand in the composition, each as it was reported.
OXIDE_AND_ELEMENT = {
    "cr_ppm": ("cr2o3_wt", "Cr2O3"),
    "ni_ppm": ("nio_wt", "NiO"),
    "v_ppm": ("v2o3_wt", "V2O3"),
    "ba_ppm": ("bao_wt", "BaO"),
    "sr_ppm": ("sro_wt", "SrO"),
    "zr_ppm": ("zro2_wt", "ZrO2"),
    "li_ppm": ("li2o_wt", "Li2O"),
}


def neighbours_of(symbol: str) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """The lighter and the heavier rare earths, nearest first, that can judge one: at most two each way.

    Ce and Eu are left out; both are empty for the ends of the row, La and Lu, and for Ce and Eu themselves.
    """
    order = list(SMOOTH_RARE_EARTHS)
    if symbol not in order[1:-1]:
        return (), ()
    place = order.index(symbol)
    return tuple(reversed(order[max(0, place - 2) : place])), tuple(order[place + 1 : place + 3])


def rare_earth_residual(symbol: str, ppm: Mapping[str, ArrayLike]) -> Floats:
    """log10 of how far a rare earth lies off the straight line between its neighbours, shape (n,).

    ``ppm`` maps symbols to (n,): the element and its ``neighbours_of``. Chondrite-normalised [mcdonough1995],
    logarithms, linear in the atomic number between the nearest lighter and heavier neighbour reported in that row; NaN
    where one is missing or not above 0, and where they are more than four atomic numbers apart.
    """
    lighter, heavier = neighbours_of(symbol)
    own = log10_positive(np.asarray(ppm[symbol], dtype=np.float64) / CHONDRITE_MCDONOUGH[symbol])
    below, number_below = _nearest(lighter, ppm, own)
    above, number_above = _nearest(heavier, ppm, own)
    gap = number_above - number_below
    share = quotient(SMOOTH_RARE_EARTHS[symbol] - number_below, gap)
    residual = own - (1.0 - share) * below - share * above
    return np.where(gap <= 4.0, residual, np.nan)


def _nearest(symbols: tuple[str, ...], ppm: Mapping[str, ArrayLike], like: Floats) -> tuple[Floats, Floats]:
    """Logarithm and atomic number of the first of the symbols that is there, NaN where none is."""
    value, number = np.full(like.shape, np.nan), np.full(like.shape, np.nan)
    for symbol in symbols:
        open_rows = np.isnan(value)
        if not open_rows.any():
            break
        logs = log10_positive(np.asarray(ppm[symbol], dtype=np.float64) / CHONDRITE_MCDONOUGH[symbol])
        number = np.where(open_rows & ~np.isnan(logs), SMOOTH_RARE_EARTHS[symbol], number)
        value = np.where(open_rows, logs, value)
    return value, number


def element_from_oxide(oxide_wt: ArrayLike, formula: str) -> Floats:
    """ppm of the element in wt% of its oxide."""
    (column,) = floats(oxide_wt)
    return column * 1e4 / oxide_from_element(formula)


def disagreement_percent(first: ArrayLike, second: ArrayLike) -> Floats:
    """100 |a - b| over their mean, shape (n,)."""
    a, b = floats(first, second)
    return 100.0 * quotient(np.abs(a - b), (a + b) / 2.0)


def outside(values: ArrayLike, limits: tuple[float, float]) -> Any:
    """True where a value is there and lies outside the limits."""
    (column,) = floats(values)
    return (column < limits[0]) | (column > limits[1])
