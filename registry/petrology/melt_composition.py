"""What the thermometers and melt models share: fractions of cations and oxides, silica classes, possible values.

Nothing here normalises an analysis to 100 wt%; fractions are normalised to 1 by their definition.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.constants import formula_atoms, molar_mass

Array = NDArray[np.float64]

#: The oxides of a natural melt as the thermometers take them, all iron as FeO, in the order of their arguments.
MELT_OXIDES = {
    "sio2_wt": "SiO2", "tio2_wt": "TiO2", "al2o3_wt": "Al2O3", "feot_wt": "FeO", "mno_wt": "MnO",
    "mgo_wt": "MgO", "cao_wt": "CaO", "na2o_wt": "Na2O", "k2o_wt": "K2O", "p2o5_wt": "P2O5",
}  # fmt: skip
#: g of oxide per mol of its cation (Al2O3: 50.98).
MASS_PER_CATION = {
    column: molar_mass(oxide) / next(iter(formula_atoms(oxide).values())) for column, oxide in MELT_OXIDES.items()
}
#: Lower bounds in wt% SiO2 of basic and intermediate rocks; acid is above the third [lemaitre2002].
SILICA_CLASS_LIMITS_WT = (45.0, 52.0, 63.0)


def positive(values: ArrayLike) -> Array:
    """The values that are above zero; NaN for the others, so that a logarithm of the impossible is NaN, shape kept."""
    array = np.asarray(values, dtype=np.float64)
    return np.where(array > 0.0, array, np.nan)


def not_negative(values: ArrayLike) -> Array:
    """The values from zero upwards; NaN for the others (an impossible amount), shape kept."""
    array = np.asarray(values, dtype=np.float64)
    return np.where(array >= 0.0, array, np.nan)


def exponential(values: ArrayLike) -> Array:
    """exp of the values; NaN where it leaves the range of numbers (an impossible temperature or composition)."""
    array = np.asarray(values, dtype=np.float64)
    return np.exp(np.where(np.abs(array) < 700.0, array, np.nan))


def by_silica_class(
    sio2_wt: ArrayLike, ultrabasic: ArrayLike, basic: ArrayLike, intermediate: ArrayLike, acid: ArrayLike
) -> Array:
    """One of four values by the silica class of an anhydrous analysis; NaN where SiO2 is NaN.

    ``sio2_wt`` (n,) wt%, anhydrous. Ultrabasic < 45 <= basic < 52 <= intermediate <= 63 < acid.
    Source [lemaitre2002], from memory.
    """
    sio2 = np.asarray(sio2_wt, dtype=np.float64)
    low, middle, high = SILICA_CLASS_LIMITS_WT
    chosen = np.where(
        sio2 < low, ultrabasic, np.where(sio2 < middle, basic, np.where(sio2 <= high, intermediate, acid))
    )
    return np.where(np.isnan(sio2), np.nan, chosen)


def cation_fractions(oxides: Mapping[str, ArrayLike]) -> dict[str, Array]:
    """Cation fractions (sum 1) of an anhydrous melt, keyed by the oxide column.

    ``oxides`` holds the columns of ``MELT_OXIDES`` in wt% (shapes broadcast); iron counts as Fe2+ whatever its
    state, since a cation is a cation. A missing column counts as absent. NaN in one oxide makes that row NaN.
    """
    unknown = sorted(set(oxides) - set(MELT_OXIDES))
    if unknown:
        raise ValueError(f"cation_fractions: unknown oxides {unknown}; it takes {list(MELT_OXIDES)}")
    moles = {
        column: np.asarray(wt, dtype=np.float64) * (1.0 / MASS_PER_CATION[column]) for column, wt in oxides.items()
    }
    scale = 1.0 / positive(_sum(moles))
    return {column: amount * scale for column, amount in moles.items()}


def oxide_mole_fractions(oxides_wt: Mapping[str, ArrayLike], formula: Mapping[str, str]) -> dict[str, Array]:
    """Mole fractions (sum 1) of the oxides given, keyed as given.

    ``formula`` names the oxide of every key (``{"feot_wt": "FeO"}``); both mappings have the same keys.
    """
    moles = {
        column: np.asarray(wt, dtype=np.float64) * (1.0 / molar_mass(formula[column]))
        for column, wt in oxides_wt.items()
    }
    scale = 1.0 / positive(_sum(moles))
    return {column: amount * scale for column, amount in moles.items()}


def wet_wt(anhydrous_wt: Mapping[str, ArrayLike], h2o_wt: ArrayLike) -> dict[str, Array]:
    """Anhydrous oxides scaled to 100 - H2O wt%, the way the melt models take water as wt% of the melt.

    Shapes broadcast; H2O outside 0-100 gives NaN. Water itself is not among the keys returned.
    """
    water = np.asarray(h2o_wt, dtype=np.float64)
    room = np.where((water >= 0.0) & (water < 100.0), 100.0 - water, np.nan)
    amounts = {column: np.asarray(wt, dtype=np.float64) for column, wt in anhydrous_wt.items()}
    scale = room / positive(_sum(amounts))
    return {column: amount * scale for column, amount in amounts.items()}


def mg_fraction(mgo_wt: ArrayLike, feo_wt: ArrayLike) -> Array:
    """Molar Mg/(Mg + Fe2+) as a fraction, from MgO and FeO in wt%; NaN where both are zero."""
    magnesium = np.asarray(mgo_wt, dtype=np.float64) * (1.0 / molar_mass("MgO"))
    iron = np.asarray(feo_wt, dtype=np.float64) * (1.0 / molar_mass("FeO"))
    return magnesium / positive(magnesium + iron)


def equilibrium_forsterite(mgo_wt: ArrayLike, feo_wt: ArrayLike, kd: float = 0.30) -> Array:
    """Forsterite content (mol %) of the olivine in equilibrium with a liquid.

    ``mgo_wt``, ``feo_wt`` (n,) wt%; ``kd`` = (Fe2+/Mg)olivine / (Fe2+/Mg)liquid, 0.30 +- 0.03.
    Calibration: basaltic liquids, 1 bar. Source [roeder1970]; as quoted by later papers. Example: typical ridge
    basalt glass with MgO 7.00 and FeO 10.20 -> 80.3.
    """
    mg = mg_fraction(mgo_wt, feo_wt)
    return 100.0 * mg / (mg + kd * (1.0 - mg))


def _sum(amounts: Mapping[str, Array]) -> Array:
    total: Array | float = 0.0
    for amount in amounts.values():
        total = total + amount
    return np.asarray(total)
