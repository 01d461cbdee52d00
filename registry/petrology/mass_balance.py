"""Mass balance of fractional crystallisation: parent = liquid left + minerals taken out, by least squares."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.melt_composition import Array
from registry.petrology.minerals import BALANCED_OXIDES, mineral_composition_wt

_ENTRY_TOLERANCE = 1e-10
#: Rounds of the active-set iteration allowed for each column.
_ROUNDS_PER_COLUMN = 30
#: Residual sums of squares below which a fit is good, and fair (common practice, no source).
GOOD_MISFIT_WT2, FAIR_MISFIT_WT2 = 1.0, 4.0


@dataclass(frozen=True)
class MassBalance:
    """Liquid left (fraction of the parent's mass), minerals taken out (fractions), and the misfit.

    ``residuals`` by oxide in wt% (parent less model); ``residual_sum_of_squares`` in wt%2. ``decided`` False where
    the minerals alone make the daughter with a good fit: then any share of liquid fits and the fraction says nothing.
    """

    liquid_fraction: float
    minerals: Mapping[str, float]
    residuals: Mapping[str, float]
    residual_sum_of_squares: float
    decided: bool

    @property
    def quality(self) -> str:
        """``good`` below 1 wt%2, ``fair`` below 4, else ``poor`` (common practice, no source)."""
        misfit = self.residual_sum_of_squares
        return "good" if misfit < GOOD_MISFIT_WT2 else "fair" if misfit < FAIR_MISFIT_WT2 else "poor"


def balance_fractionation(
    parent_wt: Mapping[str, float],
    daughter_wt: Mapping[str, float],
    minerals: Sequence[str] | Mapping[str, Mapping[str, float]],
) -> MassBalance:
    """Fit parent = F daughter + sum of minerals with no negative amount, by least squares over the balanced oxides.

    ``minerals`` are names of the table of minerals, or compositions (wt% by oxide, closed to 100) by name.

    Parent and daughter are closed to 100 here (all iron as FeO) before the fit; MnO, TiO2 and P2O5 may be left out of
    both. Source [bryan1969]; non-negative least squares [lawson1974] chapter 23. ValueError where an oxide is missing
    from one of the two or is NaN.
    """
    oxides = [oxide for oxide in BALANCED_OXIDES if oxide in parent_wt or oxide in daughter_wt]
    parent, daughter = (
        _closed(rock, oxides, name) for rock, name in ((parent_wt, "parent"), (daughter_wt, "daughter"))
    )
    phases = minerals if isinstance(minerals, Mapping) else {name: mineral_composition_wt(name) for name in minerals}
    columns = [daughter, *(np.array([phase[oxide] for oxide in oxides]) for phase in phases.values())]
    matrix = np.column_stack(columns)
    amounts = non_negative_least_squares(matrix, parent)
    residual = parent - matrix @ amounts
    alone = daughter - matrix[:, 1:] @ non_negative_least_squares(matrix[:, 1:], daughter)
    return MassBalance(
        liquid_fraction=float(amounts[0]),
        minerals=dict(zip(phases, amounts[1:].tolist(), strict=True)),
        residuals=dict(zip(oxides, residual.tolist(), strict=True)),
        residual_sum_of_squares=float(residual @ residual),
        decided=float(alone @ alone) >= GOOD_MISFIT_WT2,
    )


def non_negative_least_squares(matrix: ArrayLike, target: ArrayLike) -> Array:
    """x >= 0 that minimises |matrix x - target|, by the active-set method. Source [lawson1974] chapter 23.

    ``matrix`` (m, k), ``target`` (m,), result (k,). ValueError where shapes disagree or a value
    is not finite; ArithmeticError where the iteration does not end (it does for columns that are independent).
    """
    a, b = np.asarray(matrix, dtype=np.float64), np.asarray(target, dtype=np.float64)
    if a.ndim != 2 or b.shape != (a.shape[0],):
        raise ValueError(f"least squares: a matrix {a.shape} does not go with a target {b.shape}")
    if not (np.isfinite(a).all() and np.isfinite(b).all()):
        raise ValueError("least squares: a value is missing or infinite; give finite numbers only")
    x = np.zeros(a.shape[1])
    if x.size == 0:
        return x
    free = np.zeros(a.shape[1], dtype=bool)
    scale = _ENTRY_TOLERANCE * max(1.0, float(np.abs(a.T @ b).max(initial=0.0)))
    for _ in range(_ROUNDS_PER_COLUMN * a.shape[1]):
        gradient = a.T @ (b - a @ x)
        waiting = ~free & (gradient > scale)
        if not waiting.any():
            return x
        free[int(np.argmax(np.where(waiting, gradient, -np.inf)))] = True
        trial = _solve_free(a, b, free)
        while (trial[free] <= 0.0).any():
            blocked = free & (trial <= 0.0)
            step = float(np.min(x[blocked] / (x[blocked] - trial[blocked])))
            x = x + step * (trial - x)
            free &= x > _ENTRY_TOLERANCE
            x[~free] = 0.0
            trial = _solve_free(a, b, free)
        x = trial
    raise ArithmeticError("least squares: the active-set iteration did not end; are two columns the same?")


def _solve_free(a: Array, b: Array, free: np.ndarray) -> Array:
    solution = np.zeros(a.shape[1])
    solution[free] = np.linalg.lstsq(a[:, free], b, rcond=None)[0]
    return solution


def _closed(rock_wt: Mapping[str, float], oxides: Sequence[str], name: str) -> Array:
    missing = [oxide for oxide in oxides if oxide not in rock_wt or np.isnan(rock_wt[oxide])]
    if missing:
        raise ValueError(f"mass balance: the {name} lacks {missing}; give them or leave them out of both rocks")
    values = np.array([rock_wt[oxide] for oxide in oxides], dtype=np.float64)
    return 100.0 * values / values.sum()
