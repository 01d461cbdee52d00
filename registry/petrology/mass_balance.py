"""Mass balance of fractional crystallisation: parent = liquid left + minerals taken out, by least squares."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import molar_mass
from registry.petrology.melt_composition import Array

#: Oxides that are balanced, all iron as FeO.
BALANCED_OXIDES = (
    "sio2_wt", "tio2_wt", "al2o3_wt", "feot_wt", "mno_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt", "p2o5_wt",
)  # fmt: skip
_FORMULA = {
    "sio2_wt": "SiO2", "tio2_wt": "TiO2", "al2o3_wt": "Al2O3", "feot_wt": "FeO", "mno_wt": "MnO", "mgo_wt": "MgO",
    "cao_wt": "CaO", "na2o_wt": "Na2O", "k2o_wt": "K2O", "p2o5_wt": "P2O5",
}  # fmt: skip
#: Stoichiometric minerals by mol of oxide a formula unit (OH left out); compositions common in magmas, by formula.
MINERALS: Mapping[str, Mapping[str, float]] = {
    "olivine_fo80": {"mgo_wt": 1.6, "feot_wt": 0.4, "sio2_wt": 1.0},
    "clinopyroxene": {"cao_wt": 0.9, "mgo_wt": 0.8, "feot_wt": 0.25, "al2o3_wt": 0.05, "sio2_wt": 1.95},
    "orthopyroxene_en75": {"mgo_wt": 1.5, "feot_wt": 0.5, "sio2_wt": 2.0},
    "plagioclase_an70": {"cao_wt": 0.7, "na2o_wt": 0.15, "al2o3_wt": 0.85, "sio2_wt": 2.3},
    "plagioclase_an30": {"cao_wt": 0.3, "na2o_wt": 0.35, "al2o3_wt": 0.65, "sio2_wt": 2.7},
    "alkali_feldspar": {"k2o_wt": 0.35, "na2o_wt": 0.15, "al2o3_wt": 0.5, "sio2_wt": 3.0},
    "quartz": {"sio2_wt": 1.0},
    "hornblende": {
        "cao_wt": 1.8,
        "na2o_wt": 0.3,
        "mgo_wt": 3.0,
        "feot_wt": 1.6,
        "al2o3_wt": 1.0,
        "tio2_wt": 0.2,
        "sio2_wt": 6.4,
    },
    "biotite": {"k2o_wt": 0.5, "mgo_wt": 1.5, "feot_wt": 1.2, "al2o3_wt": 0.65, "tio2_wt": 0.2, "sio2_wt": 2.75},
    "magnetite": {"feot_wt": 3.0},
    "ilmenite": {"feot_wt": 1.0, "tio2_wt": 1.0},
    "apatite": {"cao_wt": 10.0 / 3.0, "p2o5_wt": 1.0},
}
_ENTRY_TOLERANCE = 1e-10
#: Rounds of the active-set iteration allowed for each column.
_ROUNDS_PER_COLUMN = 30


@dataclass(frozen=True)
class MassBalance:
    """Liquid left (fraction of the parent's mass), minerals taken out (fractions), and the misfit.

    ``residuals`` by oxide in wt% (parent less model); ``residual_sum_of_squares`` in wt%2: below about 1 the fit is
    usually taken as good (common practice).
    """

    liquid_fraction: float
    minerals: Mapping[str, float]
    residuals: Mapping[str, float]
    residual_sum_of_squares: float


def mineral_composition_wt(name: str) -> dict[str, float]:
    """wt% of the balanced oxides in a mineral of the table, closed to 100. ValueError for a name not in it."""
    if name not in MINERALS:
        raise ValueError(f"mass balance: no mineral '{name}'; the table holds {sorted(MINERALS)}")
    masses = {oxide: moles * molar_mass(_FORMULA[oxide]) for oxide, moles in MINERALS[name].items()}
    total = sum(masses.values())
    return {oxide: 100.0 * masses.get(oxide, 0.0) / total for oxide in BALANCED_OXIDES}


def balance_fractionation(
    parent_wt: Mapping[str, float], daughter_wt: Mapping[str, float], minerals: Sequence[str]
) -> MassBalance:
    """Fit parent = F daughter + sum of minerals with no negative amount, by least squares over the balanced oxides.

    Parent and daughter are closed to 100 here (all iron as FeO) before the fit; MnO, TiO2 and P2O5 may be left out of
    both. Source [bryan1969]; non-negative least squares [lawson1974] chapter 23. ValueError where an oxide is missing
    from one of the two or is NaN.
    """
    oxides = [oxide for oxide in BALANCED_OXIDES if oxide in parent_wt or oxide in daughter_wt]
    parent, daughter = (
        _closed(rock, oxides, name) for rock, name in ((parent_wt, "parent"), (daughter_wt, "daughter"))
    )
    columns = [daughter, *(np.array([mineral_composition_wt(name)[oxide] for oxide in oxides]) for name in minerals)]
    matrix = np.column_stack(columns)
    amounts = non_negative_least_squares(matrix, parent)
    residual = parent - matrix @ amounts
    return MassBalance(
        liquid_fraction=float(amounts[0]),
        minerals=dict(zip(minerals, amounts[1:].tolist(), strict=True)),
        residuals=dict(zip(oxides, residual.tolist(), strict=True)),
        residual_sum_of_squares=float(residual @ residual),
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
