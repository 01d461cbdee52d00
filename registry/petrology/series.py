"""Magma series: K2O against SiO2, the AFM divide, alkaline or subalkaline. On the volatile-free analysis."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.broken_lines import broken_line
from registry.petrology.quotients import Floats, floats, labels, quotient

Points = tuple[tuple[float, ...], tuple[float, ...]]

#: Corners (SiO2, K2O) of the lines of [peccerillo1976], volatile-free wt%, from memory.
K2O_LOW_MEDIUM: Points = ((48.0, 52.0, 56.0, 63.0, 70.0), (0.3, 0.5, 0.7, 1.0, 1.3))
K2O_MEDIUM_HIGH: Points = ((48.0, 52.0, 56.0, 63.0, 70.0), (1.2, 1.5, 1.8, 2.4, 3.0))
K2O_HIGH_SHOSHONITIC: Points = ((48.0, 52.0, 56.0, 63.0), (1.6, 2.4, 3.2, 4.0))
#: The two straight lines of [lemaitre2002], which [rickwood1989] shows to be bands.
K2O_LOW_MEDIUM_IUGS: Points = ((48.0, 68.0), (0.3, 1.2))
K2O_MEDIUM_HIGH_IUGS: Points = ((48.0, 68.0), (1.2, 3.1))
K2O_SERIES = ("low-K tholeiitic", "medium-K calc-alkaline", "high-K calc-alkaline", "shoshonitic")
K2O_SERIES_IUGS = ("low-K", "medium-K", "high-K")
K2O_SIO2_FROM_WT, K2O_SIO2_DRAWN_TO_WT = 48.0, 70.0

#: Corners (A, F, M) of the AFM divides, per cent of Na2O + K2O, FeOt and MgO; from memory, each sums to 100.
AFM_IRVINE = (
    (58.8, 36.2, 5.0), (47.6, 42.4, 10.0), (29.8, 52.6, 17.6), (25.4, 54.6, 20.0), (21.4, 54.6, 24.0),
    (19.4, 52.8, 27.8), (18.9, 51.1, 30.0), (16.6, 43.4, 40.0),
)  # fmt: skip
AFM_KUNO = (
    (72.0, 24.0, 4.0), (50.0, 39.5, 10.5), (34.5, 50.0, 15.5), (21.5, 57.0, 21.5), (16.5, 58.0, 25.5),
    (12.5, 55.5, 32.0),
)  # fmt: skip
AFM_DIVIDES = {"irvine1971": AFM_IRVINE, "kuno1968": AFM_KUNO}
AFM_SERIES = ("calc-alkaline", "tholeiitic")

#: SiO2 of the alkaline/subalkaline divide as a polynomial in A = Na2O + K2O, A^6 first [irvine1971], from memory.
ALKALINE_DIVIDE = (-3.3539e-4, 1.2030e-2, -1.5188e-1, 8.6096e-1, -2.1111, 3.9492, 39.0)
ALKALINE_DIVIDE_USABLE_TO_WT = 9.5
ALKALINITY = ("subalkaline", "alkaline")


def _extended(silica: Floats, points: Points) -> Floats:
    """A broken line, carried on straight beyond its last corner."""
    return broken_line(silica, *points, extended=True)


def k2o_series(sio2_vf_wt: ArrayLike, k2o_vf_wt: ArrayLike) -> Any:
    """Series by K2O and SiO2, names of ``K2O_SERIES``, shape (n,), None where missing or below 48 % SiO2.

    Volatile-free wt%. A point on a line belongs to the field above. The lines are drawn to 70 % SiO2 (the uppermost to
    63) and carried on straight beyond, with a warning in the catalogue. Source [peccerillo1976].
    """
    silica, k2o = floats(sio2_vf_wt, k2o_vf_wt)
    code = sum((k2o >= _extended(silica, line)).astype(np.intp) for line in _PECCERILLO)
    usable = (silica >= K2O_SIO2_FROM_WT) & np.isfinite(k2o)
    return labels(np.where(usable, code, -1), K2O_SERIES)


_PECCERILLO = (K2O_LOW_MEDIUM, K2O_MEDIUM_HIGH, K2O_HIGH_SHOSHONITIC)


def k2o_series_iugs(sio2_vf_wt: ArrayLike, k2o_vf_wt: ArrayLike) -> Any:
    """low-K, medium-K or high-K by the two straight lines, SiO2 48-68 only, shape (n,). Source [lemaitre2002]."""
    silica, k2o = floats(sio2_vf_wt, k2o_vf_wt)
    lines = (K2O_LOW_MEDIUM_IUGS, K2O_MEDIUM_HIGH_IUGS)
    code = sum((k2o >= broken_line(silica, *line)).astype(np.intp) for line in lines)
    usable = (silica >= 48.0) & (silica <= 68.0) & np.isfinite(k2o)
    return labels(np.where(usable, code, -1), K2O_SERIES_IUGS)


def afm_coordinates(na2o_wt: ArrayLike, k2o_wt: ArrayLike, feot_wt: ArrayLike, mgo_wt: ArrayLike) -> dict[str, Floats]:
    """``a``, ``f`` and ``m``: Na2O + K2O, FeOt and MgO in per cent of their sum, shape (n,)."""
    na2o, k2o, feot, mgo = floats(na2o_wt, k2o_wt, feot_wt, mgo_wt)
    total = na2o + k2o + feot + mgo
    return {
        "a": 100.0 * quotient(na2o + k2o, total),
        "f": 100.0 * quotient(feot, total),
        "m": 100.0 * quotient(mgo, total),
    }


def afm_divide_f(m_percent: ArrayLike, divide: str = "irvine1971") -> Floats:
    """F of a divide at a given M, per cent, shape (n,); NaN where the divide is not drawn.

    ``divide`` is ``irvine1971`` (M 5-40) or ``kuno1968`` (M 4-32); ValueError for another.
    """
    if divide not in AFM_DIVIDES:
        raise ValueError(f"no AFM divide '{divide}'; there are {sorted(AFM_DIVIDES)}")
    (m,) = floats(m_percent)
    corners = AFM_DIVIDES[divide]
    drawn_m, drawn_f = [corner[2] for corner in corners], [corner[1] for corner in corners]
    inside = (m >= drawn_m[0]) & (m <= drawn_m[-1])
    return np.where(inside, broken_line(m, drawn_m, drawn_f), np.nan)


def afm_series(
    na2o_wt: ArrayLike,
    k2o_wt: ArrayLike,
    feot_wt: ArrayLike,
    mgo_wt: ArrayLike,
    divide: str = "irvine1971",
) -> Any:
    """'tholeiitic' on the F side of the divide, else 'calc-alkaline', shape (n,); None where it is not drawn.

    wt%. The divide is meant for subalkaline rocks. Source [irvine1971] or [kuno1968].
    """
    coordinates = afm_coordinates(na2o_wt, k2o_wt, feot_wt, mgo_wt)
    line = afm_divide_f(coordinates["m"], divide)
    return labels(np.where(np.isnan(line), -1, coordinates["f"] > line), AFM_SERIES)


def alkaline_divide_sio2(alkalis_vf_wt: ArrayLike) -> Floats:
    """SiO2 of the alkaline/subalkaline divide at Na2O + K2O (wt%), shape (n,); NaN above 9.5, where it fails.

    Source [irvine1971], appendix.
    """
    (alkalis,) = floats(alkalis_vf_wt)
    usable = (alkalis >= 0.0) & (alkalis <= ALKALINE_DIVIDE_USABLE_TO_WT)
    return np.where(usable, np.polyval(ALKALINE_DIVIDE, np.where(usable, alkalis, 0.0)), np.nan)


def alkalinity(sio2_vf_wt: ArrayLike, na2o_vf_wt: ArrayLike, k2o_vf_wt: ArrayLike) -> Any:
    """'alkaline' where SiO2 lies below the divide, else 'subalkaline', shape (n,); None above 9.5 % alkalis.

    Volatile-free wt%. Source [irvine1971].
    """
    silica, na2o, k2o = floats(sio2_vf_wt, na2o_vf_wt, k2o_vf_wt)
    divide = alkaline_divide_sio2(na2o + k2o)
    known = np.isfinite(divide) & np.isfinite(silica)
    return labels(np.where(known, silica < divide, -1), ALKALINITY)


def is_alkaline_hawaiian(sio2_vf_wt: ArrayLike, na2o_vf_wt: ArrayLike, k2o_vf_wt: ArrayLike) -> np.ndarray:
    """Na2O + K2O above 0.37 SiO2 - 14.43: alkaline by the line of Hawaii, booleans. Source [macdonald1964]."""
    silica, na2o, k2o = floats(sio2_vf_wt, na2o_vf_wt, k2o_vf_wt)
    return na2o + k2o > 0.37 * silica - 14.43
