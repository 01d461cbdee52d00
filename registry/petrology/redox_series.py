"""Redox of the magma from what was measured: titrated FeO or magnetic susceptibility. A computed split decides nothing.

Magnetite series: susceptibility at or above the convention's limit (3e-3 SI), or an oxidation index above zero from
titrated FeO; ilmenite series below. Both judge only fresh rock: LOI at or below the convention's warning limit (3 wt%;
LOI not reported does not block, and is warned). Low susceptibility of a rock logged phyllic, argillic, sericitic or
greisen says nothing: its magnetite may have been destroyed. Two witnesses that disagree decide nothing.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.constants import FE2O3_FROM_FEO
from registry.petrology.conventions import Conventions
from registry.petrology.quotients import Floats, floats, labels, log10_positive, quotient

REDOX_SERIES = ("ilmenite", "magnetite")
REDOX_EVIDENCE = ("titrated FeO", "susceptibility", "titrated FeO and susceptibility")
#: wt%: titrated FeO may exceed total iron by this much before the two exclude each other.
ROUNDING_WT = 0.005
#: What a witness says: nothing, ilmenite or magnetite series.
_SILENT, _ILMENITE, _MAGNETITE = -1, 0, 1


def ferric_iron_wt(fe2o3t_wt: ArrayLike, feo_titrated_wt: ArrayLike) -> Floats:
    """Fe2O3 left of the total when titrated FeO is taken off, wt%, shape (n,).

    NaN where FeO exceeds the total by more than rounding; within it, zero.
    """
    total, ferrous = floats(fe2o3t_wt, feo_titrated_wt)
    ferric = total - FE2O3_FROM_FEO * ferrous
    return np.where(ferric < -ROUNDING_WT, np.nan, np.maximum(ferric, 0.0))


def fe2o3_feo(fe2o3t_wt: ArrayLike, feo_titrated_wt: ArrayLike) -> Floats:
    """Fe2O3/FeO by weight from titrated FeO, shape (n,); NaN without it or where it is zero.

    About 0.5 parts the magnetite from the ilmenite series in granites above 70 % SiO2, from memory. [ishihara1977].
    """
    return quotient(ferric_iron_wt(fe2o3t_wt, feo_titrated_wt), feo_titrated_wt)


def delta_ox(fe2o3_feo: ArrayLike, feot_wt: ArrayLike) -> Floats:
    """Oxidation index log10(Fe2O3/FeO) + 0.3 + 0.03 FeOt, raw wt%, shape (n,); above 0 oxidised.

    From titrated FeO only. Provisional: from memory. Source [blevin2004].
    """
    ratio, feot = floats(fe2o3_feo, feot_wt)
    return log10_positive(ratio) + 0.3 + 0.03 * feot


def _witnesses(
    delta_ox: ArrayLike, susceptibility_si: ArrayLike, loi_wt: ArrayLike, logged_destroyed: ArrayLike, conventions: Any
) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """What titrated FeO says and what susceptibility says, each _SILENT, _ILMENITE or _MAGNETITE."""
    index, susceptibility, loi = floats(delta_ox, susceptibility_si, loi_wt)
    fresh = ~(loi > conventions.loi_warn_wt)
    iron = np.where(fresh & np.isfinite(index), (index > 0.0).astype(np.intp), _SILENT)
    is_high = (susceptibility >= conventions.magnetite_series_si).astype(np.intp)
    tells = fresh & np.isfinite(susceptibility) & ((is_high == _MAGNETITE) | ~np.asarray(logged_destroyed, dtype=bool))
    return iron, np.where(tells, is_high, _SILENT)


def redox_series(
    delta_ox: ArrayLike,
    susceptibility_si: ArrayLike,
    loi_wt: ArrayLike,
    logged_destroyed: ArrayLike,
    conventions: Conventions,
) -> dict[str, Any]:
    """``redox_series`` ('magnetite', 'ilmenite' or None) and ``redox_evidence`` (what it rests on), shape (n,).

    ``delta_ox`` from titrated FeO (NaN without), magnetic susceptibility in SI units, LOI in raw wt%,
    ``logged_destroyed`` booleans. Sources [ishihara1977], [blevin2004] (provisional).
    """
    iron, magnetic = _witnesses(delta_ox, susceptibility_si, loi_wt, logged_destroyed, conventions)
    agreed = np.where(iron == _SILENT, magnetic, iron)
    conflict = (iron != _SILENT) & (magnetic != _SILENT) & (iron != magnetic)
    series = np.where(conflict, _SILENT, agreed)
    evidence = np.where(magnetic == _SILENT, 0, np.where(iron == _SILENT, 1, 2))
    return {
        "redox_series": labels(series, REDOX_SERIES),
        "redox_evidence": labels(np.where(series == _SILENT, -1, evidence), REDOX_EVIDENCE),
    }


def is_redox_conflict(
    delta_ox: Floats, susceptibility_si: Floats, loi_wt: Floats, logged_destroyed: Any, conventions: Any
) -> NDArray[np.bool_]:
    """Titrated FeO and susceptibility say different series."""
    iron, magnetic = _witnesses(delta_ox, susceptibility_si, loi_wt, logged_destroyed, conventions)
    return (iron != _SILENT) & (magnetic != _SILENT) & (iron != magnetic)


def is_magnetite_destroyed(
    delta_ox: Floats, susceptibility_si: Floats, loi_wt: Floats, logged_destroyed: Any, conventions: Any
) -> NDArray[np.bool_]:
    """Susceptibility is low, but LOI or the logged alteration lets magnetite be destroyed; FeO does not judge."""
    iron, magnetic = _witnesses(delta_ox, susceptibility_si, loi_wt, logged_destroyed, conventions)
    altered = np.asarray(logged_destroyed, dtype=bool) | (loi_wt > conventions.loi_warn_wt)
    return (iron == _SILENT) & (magnetic == _SILENT) & altered & (susceptibility_si < conventions.magnetite_series_si)


def is_loi_too_high(
    delta_ox: Floats, susceptibility_si: Floats, loi_wt: Floats, logged_destroyed: Any, conventions: Any
) -> NDArray[np.bool_]:
    """There is a measurement, but LOI is above the limit."""
    measured = np.isfinite(delta_ox) | np.isfinite(susceptibility_si)
    return measured & (loi_wt > conventions.loi_warn_wt)
