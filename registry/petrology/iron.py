"""Ferrous and ferric iron: conversion, the published splits of total iron, and the split that a sample gets.

Masses are wt%; every function broadcasts and keeps NaN where NaN came in. Redox models stand in ``redox``.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.constants import FE2O3_FROM_FEO, FEO_FROM_FE2O3
from registry.petrology.conventions import Conventions
from registry.petrology.redox import buffer_log_fo2, ratio_kress
from registry.petrology.tas import FIELDS, tas_field

Array = NDArray[np.float64]

#: Le Maitre 1976, FeO/(FeO + Fe2O3) = constant + silica SiO2 + alkalis (Na2O + K2O), all wt%.
LE_MAITRE_VOLCANIC = (0.93, -0.0042, -0.022)
LE_MAITRE_PLUTONIC = (0.88, -0.0016, -0.027)
#: Where the regression still gives a ratio that a rock can have; outside it the split is missing, never clamped.
LE_MAITRE_LIMITS = (0.05, 1.0)
#: Fe2O3/FeO by weight of the TAS fields without excess alkalis (Middlemost 1989).
MIDDLEMOST_RATIOS = {"Pc": 0.15, "B": 0.20, "O1": 0.30, "O2": 0.35, "O3": 0.40, "R": 0.50}
_RATIO_OF_FIELD = np.array([MIDDLEMOST_RATIOS.get(field, np.nan) for field in FIELDS] + [np.nan])
#: The oxides beside iron that a convention may look at, and those of them that count as zero where not reported.
CONVENTION_OXIDES = (
    "sio2_wt", "tio2_wt", "al2o3_wt", "mno_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt", "p2o5_wt",
)  # fmt: skip
UNREPORTED_AS_ZERO = frozenset({"tio2_wt", "mno_wt", "p2o5_wt"})
#: Temperature of the split by Kress and Carmichael: along a buffer the ratio hardly depends on it.
KRESS_SPLIT_C = 1200.0
#: Differences smaller than this are rounding, wt%.
ROUNDING_WT = 1e-9


def total_iron_as_feo(feo_wt: ArrayLike, fe2o3_wt: ArrayLike) -> Array:
    """Total iron as FeO, wt%: FeO + 0.89981 Fe2O3 (masses from the atomic weights) [prohaska2022]."""
    return np.asarray(feo_wt, dtype=np.float64) + FEO_FROM_FE2O3 * np.asarray(fe2o3_wt, dtype=np.float64)


def total_iron_as_fe2o3(feo_wt: ArrayLike, fe2o3_wt: ArrayLike) -> Array:
    """Total iron as Fe2O3, wt%: Fe2O3 + 1.11135 FeO (masses from the atomic weights) [prohaska2022]."""
    return np.asarray(fe2o3_wt, dtype=np.float64) + FE2O3_FROM_FEO * np.asarray(feo_wt, dtype=np.float64)


def split_by_ratio(feot_wt: ArrayLike, fe2o3_feo: ArrayLike) -> dict[str, Array]:
    """``feo_wt`` and ``fe2o3_wt`` of total iron as FeO split with the ratio Fe2O3/FeO by weight.

    A ratio below zero gives NaN. The total is kept to rounding.
    """
    ratio = np.asarray(fe2o3_feo, dtype=np.float64)
    ratio = np.where(ratio >= 0.0, ratio, np.nan)
    feo = np.asarray(feot_wt, dtype=np.float64) / (1.0 + FEO_FROM_FE2O3 * ratio)
    return {"feo_wt": feo, "fe2o3_wt": ratio * feo}


def ferrous_fraction_le_maitre(
    sio2_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike, is_plutonic: ArrayLike
) -> Array:
    """FeO/(FeO + Fe2O3) by weight from silica and alkalis, regressions of volcanic and of plutonic rocks.

    Silica and alkalis as analysed, wt%. The scatter about the regressions is large, the standard error is not
    stated; values outside (0.05, 1) come out as they are (``split_le_maitre`` leaves them out).
    Source: [lemaitre1976a], regressions of the abstract and p. 185 (coefficients from memory).
    """
    alkalis = np.asarray(na2o_wt, dtype=np.float64) + np.asarray(k2o_wt, dtype=np.float64)
    silica = np.asarray(sio2_wt, dtype=np.float64)
    plutonic = np.asarray(is_plutonic, dtype=bool)
    constant, by_silica, by_alkalis = (
        np.where(plutonic, of_plutonic, of_volcanic)
        for of_plutonic, of_volcanic in zip(LE_MAITRE_PLUTONIC, LE_MAITRE_VOLCANIC, strict=True)
    )
    return constant + by_silica * silica + by_alkalis * alkalis


def split_le_maitre(
    feot_wt: ArrayLike, sio2_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike, is_plutonic: ArrayLike
) -> dict[str, Array]:
    """``feo_wt`` and ``fe2o3_wt`` by the regressions of ``ferrous_fraction_le_maitre``; NaN outside (0.05, 1)."""
    fraction = ferrous_fraction_le_maitre(sio2_wt, na2o_wt, k2o_wt, is_plutonic)
    inside = (fraction > LE_MAITRE_LIMITS[0]) & (fraction < LE_MAITRE_LIMITS[1])
    fraction = np.where(inside, fraction, np.nan)
    return split_by_ratio(feot_wt, (1.0 - fraction) / fraction)


def ratio_middlemost(sio2_wt: ArrayLike, alkalis_wt: ArrayLike) -> Array:
    """Fe2O3/FeO by weight from the place in the TAS diagram; NaN in the alkaline fields and outside the fields.

    Silica and Na2O + K2O of the analysis closed to 100 without volatiles, all iron as FeO, wt%. Only the ratios of
    the fields without excess alkalis are held (picrobasalt 0.15 to rhyolite 0.50); those of the alkaline fields differ
    between reprints. Source: [middlemost1989], table of ratios (from memory, provisional).
    """
    return _RATIO_OF_FIELD[tas_field(sio2_wt, alkalis_wt)]


def resolve_total_iron(
    fe2o3t_reported_wt: ArrayLike, feo_titrated_wt: ArrayLike, fe2o3_ferric_wt: ArrayLike
) -> dict[str, Array]:
    """``fe2o3t_wt`` and ``feot_wt``: the reported total, else the sum of reported ferric and titrated ferrous iron."""
    reported = np.asarray(fe2o3t_reported_wt, dtype=np.float64)
    total = np.where(np.isnan(reported), total_iron_as_fe2o3(feo_titrated_wt, fe2o3_ferric_wt), reported)
    return {"fe2o3t_wt": total, "feot_wt": FEO_FROM_FE2O3 * total}


def measured_split(
    total_fe2o3_wt: ArrayLike, feo_titrated_wt: ArrayLike, fe2o3_ferric_wt: ArrayLike
) -> dict[str, Array]:
    """``feo_wt`` and ``fe2o3_wt`` from a measurement: titrated FeO, else ferric iron, against the total as Fe2O3.

    The other one is the difference from the total. A difference below zero (beyond rounding, 1e-9 wt%) means that
    the two measurements exclude each other: it comes out negative, and ``iron_split`` makes no split of it.
    """
    total = np.asarray(total_fe2o3_wt, dtype=np.float64)
    ferrous = np.asarray(feo_titrated_wt, dtype=np.float64)
    ferric = np.asarray(fe2o3_ferric_wt, dtype=np.float64)
    feo = np.where(np.isnan(ferrous), _without_rounding(FEO_FROM_FE2O3 * (total - ferric)), ferrous)
    fe2o3 = np.where(np.isnan(ferrous), ferric, _without_rounding(total - FE2O3_FROM_FEO * ferrous))
    return {"feo_wt": feo, "fe2o3_wt": fe2o3}


def _without_rounding(difference: Array) -> Array:
    return np.where(np.abs(difference) < ROUNDING_WT, 0.0, difference)


def iron_split(
    oxides: Mapping[str, ArrayLike],
    is_plutonic: ArrayLike,
    conventions: Conventions,
) -> dict[str, NDArray]:
    """The iron that every later method uses: ``fe2o3t_wt feot_wt fe2o3_wt feo_wt iron_basis``.

    ``oxides`` as analysed, wt%: ``fe2o3t_reported_wt feo_titrated_wt fe2o3_ferric_wt`` and ``CONVENTION_OXIDES``;
    what is left out counts as missing. Titrated FeO (or reported ferric iron) decides; without it the convention
    ``iron_split`` does: ``le_maitre`` (by ``is_plutonic``), ``middlemost``, ``fixed_ratio`` or ``kress_carmichael``
    (at 1200 C, 1 bar and the convention's buffer). Where no split can be made (measurements that exclude each other,
    a regression outside its limits, no silica) the split is NaN and the basis None; the total stands.
    ValueError for an unknown convention.
    """
    if conventions.iron_split not in SPLITS:
        raise ValueError(f"unknown iron_split '{conventions.iron_split}'; known are {sorted(SPLITS)}")
    names = ("fe2o3t_reported_wt", "feo_titrated_wt", "fe2o3_ferric_wt", *CONVENTION_OXIDES)
    arrays = np.broadcast_arrays(is_plutonic, *(np.asarray(oxides.get(name, np.nan), float) for name in names))
    plutonic = arrays[0].astype(bool)
    given = dict(zip(names, arrays[1:], strict=True))
    reported, ferrous, ferric = (given[name] for name in names[:3])

    total = resolve_total_iron(reported, ferrous, ferric)
    measured = measured_split(total["fe2o3t_wt"], ferrous, ferric)
    modelled = SPLITS[conventions.iron_split](given, total["feot_wt"], plutonic, conventions)
    is_measured = ~np.isnan(ferrous) | ~np.isnan(ferric)
    feo = np.where(is_measured, measured["feo_wt"], modelled["feo_wt"])
    fe2o3 = np.where(is_measured, measured["fe2o3_wt"], modelled["fe2o3_wt"])
    possible = (feo >= 0.0) & (fe2o3 >= 0.0)
    basis = np.full(feo.shape, None, dtype=object)
    for mask, text in _bases(conventions, plutonic, ferrous, is_measured):
        basis[mask & possible] = text
    return {
        **total,
        "fe2o3_wt": np.where(possible, fe2o3, np.nan),
        "feo_wt": np.where(possible, feo, np.nan),
        "iron_basis": basis,
    }


def _bases(
    conventions: Conventions, plutonic: NDArray, ferrous: NDArray, is_measured: NDArray
) -> list[tuple[NDArray, str]]:
    titrated = ~np.isnan(ferrous)
    bases = [(titrated, "titrated FeO"), (is_measured & ~titrated, "reported Fe2O3 beside total iron")]
    if conventions.iron_split == "le_maitre":
        return [
            *bases,
            (~is_measured & plutonic, "Le Maitre 1976, plutonic"),
            (~is_measured & ~plutonic, "Le Maitre 1976, volcanic"),
        ]
    return [*bases, (~is_measured, _BASIS_TEXT[conventions.iron_split](conventions))]


def _by_le_maitre(given: Mapping[str, Array], feot: Array, plutonic: NDArray, _: Conventions) -> dict[str, Array]:
    return split_le_maitre(feot, given["sio2_wt"], given["na2o_wt"], given["k2o_wt"], plutonic)


def _by_fixed_ratio(_: Mapping[str, Array], feot: Array, __: NDArray, conventions: Conventions) -> dict[str, Array]:
    return split_by_ratio(feot, conventions.iron_fixed_ratio)


def _melt(given: Mapping[str, Array], feot: Array) -> dict[str, Array]:
    """The oxides of the anhydrous melt; TiO2, MnO and P2O5 that were not reported count as zero."""
    melt = {
        name: np.where(np.isnan(given[name]), 0.0, given[name]) if name in UNREPORTED_AS_ZERO else given[name]
        for name in CONVENTION_OXIDES
    }
    return {**melt, "feot_wt": feot}


def _by_middlemost(given: Mapping[str, Array], feot: Array, _: NDArray, __: Conventions) -> dict[str, Array]:
    melt = _melt(given, feot)
    total = sum(melt.values())
    with np.errstate(invalid="ignore", divide="ignore"):
        closing = 100.0 / np.asarray(total)
        ratio = ratio_middlemost(melt["sio2_wt"] * closing, (melt["na2o_wt"] + melt["k2o_wt"]) * closing)
    return split_by_ratio(feot, ratio)


def _by_kress(given: Mapping[str, Array], feot: Array, _: NDArray, conventions: Conventions) -> dict[str, Array]:
    log_fo2 = buffer_log_fo2(conventions.iron_buffer, KRESS_SPLIT_C) + conventions.iron_buffer_shift
    return split_by_ratio(feot, ratio_kress(_melt(given, feot), KRESS_SPLIT_C, log_fo2))


#: The conventions for a sample whose ferrous iron was not measured.
SPLITS: dict[str, Callable[[Mapping[str, Array], Array, NDArray, Conventions], dict[str, Array]]] = {
    "le_maitre": _by_le_maitre,
    "middlemost": _by_middlemost,
    "fixed_ratio": _by_fixed_ratio,
    "kress_carmichael": _by_kress,
}
_BASIS_TEXT: dict[str, Callable[[Conventions], str]] = {
    "middlemost": lambda _: "Middlemost 1989 (provisional)",
    "fixed_ratio": lambda conventions: f"Fe2O3/FeO {conventions.iron_fixed_ratio:g} by weight",
    "kress_carmichael": lambda conventions: (
        f"Kress and Carmichael 1991 at {KRESS_SPLIT_C:g} C, 1 bar, "
        f"{conventions.iron_buffer}{conventions.iron_buffer_shift:+g} (Frost 1991)"
    ),
}
