"""What an analysis is of, as far as chemistry tells: a rock that was a melt, a single mineral, a cumulate, a spot.

A mineral is told by its formula: cations on the oxygens of the formula unit, all iron as FeO. A rock of one mineral
(dunite, anorthosite, chromitite, a quartz vein) has the same chemistry, so every remark says "or". Formulas after
[deer2013], from memory; how far an analysis may stray from them is common practice, no source.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.constants import formula_atoms, molar_mass
from registry.petrology.melt_composition import Array, positive

Flags = NDArray[np.bool_]
#: Column -> least and greatest.
Windows = Mapping[str, tuple[float, float]]

#: The oxides that formulas are made of, volatile-free, all iron as FeO.
FORMULA_OXIDES = {
    "sio2_vf_wt": "SiO2", "tio2_vf_wt": "TiO2", "al2o3_vf_wt": "Al2O3", "feot_vf_wt": "FeO", "mno_vf_wt": "MnO",
    "mgo_vf_wt": "MgO", "cao_vf_wt": "CaO", "na2o_vf_wt": "Na2O", "k2o_vf_wt": "K2O", "p2o5_vf_wt": "P2O5",
    "cr2o3_vf_wt": "Cr2O3", "nio_vf_wt": "NiO", "zro2_vf_wt": "ZrO2",
}  # fmt: skip
#: Shortest name of each cation.
_CATIONS = {
    "sio2_vf_wt": "si", "tio2_vf_wt": "ti", "al2o3_vf_wt": "al", "feot_vf_wt": "fe", "mno_vf_wt": "mn",
    "mgo_vf_wt": "mg", "cao_vf_wt": "ca", "na2o_vf_wt": "na", "k2o_vf_wt": "k", "p2o5_vf_wt": "p",
    "cr2o3_vf_wt": "cr", "nio_vf_wt": "ni", "zro2_vf_wt": "zr",
}  # fmt: skip
_PER_MASS = {
    column: (atoms[next(iter(atoms))] / molar_mass(oxide), atoms["O"] / molar_mass(oxide))
    for column, oxide, atoms in ((column, oxide, formula_atoms(oxide)) for column, oxide in FORMULA_OXIDES.items())
}


def cations_per_oxygen(oxides: Mapping[str, ArrayLike]) -> dict[str, Array]:
    """Cations per oxygen by short names (``si``, ``al``, ...) and their ``sum``, arrays as broadcast.

    ``oxides`` by the names of ``FORMULA_OXIDES``, wt%; NaN stays in its row. Arithmetic of formulas.
    """
    oxygen = sum(np.asarray(oxides[column], dtype=np.float64) * _PER_MASS[column][1] for column in FORMULA_OXIDES)
    scale = 1.0 / positive(oxygen)
    cations = {
        _CATIONS[column]: np.asarray(oxides[column], dtype=np.float64) * (_PER_MASS[column][0] * scale)
        for column in FORMULA_OXIDES
    }
    return {**cations, "sum": np.asarray(sum(cations.values()))}


def _near(value: Array, target: float, distance: float) -> Flags:
    return np.abs(value - target) <= distance


def _olivine(c: Mapping[str, Array]) -> Flags:
    octahedral = c["mg"] + c["fe"] + c["mn"] + c["ni"] + c["ca"]
    return _near(4.0 * c["si"], 1.0, 0.03) & _near(4.0 * octahedral, 2.0, 0.05) & (4.0 * c["ca"] < 0.05)


def _pyroxene(c: Mapping[str, Array]) -> Flags:
    si, al = 6.0 * c["si"], 6.0 * c["al"]
    return _near(6.0 * c["sum"], 4.0, 0.05) & (si >= 1.75) & (si <= 2.03) & (al <= 0.30) & (6.0 * c["k"] <= 0.01)


def _feldspar(c: Mapping[str, Array]) -> Flags:
    tetrahedral, large = 8.0 * (c["si"] + c["al"]), 8.0 * (c["ca"] + c["na"] + c["k"])
    return _near(tetrahedral, 4.0, 0.05) & _near(large, 1.0, 0.06) & (8.0 * (c["fe"] + c["mg"]) <= 0.06)


def _nepheline_or_leucite(c: Mapping[str, Array]) -> Flags:
    """Na3K Al4Si4O16 to K AlSi2O6: as many alkalis as aluminium, Si + Al half the oxygens."""
    alkalis = c["na"] + c["k"]
    framework = _near(2.0 * (c["si"] + c["al"]), 1.0, 0.02) & (np.abs(alkalis / positive(c["al"]) - 1.0) <= 0.08)
    return framework & (c["si"] <= 2.2 * c["al"]) & (c["fe"] + c["mg"] <= 0.01)


def _garnet(c: Mapping[str, Array]) -> Flags:
    whole = _near(12.0 * c["sum"], 8.0, 0.08) & _near(12.0 * c["si"], 3.0, 0.08)
    return whole & (12.0 * (c["al"] + c["cr"]) >= 1.7) & (12.0 * (c["na"] + c["k"]) <= 0.05)


def _dark_mica(c: Mapping[str, Array]) -> Flags:
    large, sheet = 11.0 * (c["na"] + c["k"]), 11.0 * (c["sum"] - c["na"] - c["k"] - c["ca"])
    return (large >= 0.75) & (large <= 1.05) & _near(sheet, 6.9, 0.2) & (11.0 * c["al"] >= 1.0)


def _white_mica(c: Mapping[str, Array]) -> Flags:
    large, sheet = 11.0 * (c["na"] + c["k"]), 11.0 * (c["sum"] - c["na"] - c["k"] - c["ca"])
    return (large >= 0.75) & (large <= 1.05) & _near(sheet, 6.05, 0.15) & (11.0 * c["al"] >= 2.0)


#: Silicates told by their formula, each within windows of oxides (volatile-free wt%) that all of its kind keep.
SILICATES: Mapping[str, tuple[Windows, Callable[[Mapping[str, Array]], Flags]]] = {
    "olivine": ({"sio2_vf_wt": (28.0, 44.0), "al2o3_vf_wt": (0.0, 1.5)}, _olivine),
    "pyroxene": ({"sio2_vf_wt": (42.0, 62.0), "al2o3_vf_wt": (0.0, 10.0), "k2o_vf_wt": (0.0, 0.1)}, _pyroxene),
    "feldspar": ({"al2o3_vf_wt": (17.0, 38.0), "mgo_vf_wt": (0.0, 1.0), "feot_vf_wt": (0.0, 2.0)}, _feldspar),
    "feldspathoid": ({"al2o3_vf_wt": (20.0, 38.0), "mgo_vf_wt": (0.0, 1.0)}, _nepheline_or_leucite),
    "garnet": ({"sio2_vf_wt": (33.0, 46.0), "al2o3_vf_wt": (10.0, 27.0), "na2o_vf_wt": (0.0, 0.5)}, _garnet),
    "dark mica": ({"sio2_vf_wt": (32.0, 50.0), "k2o_vf_wt": (6.0, 13.0)}, _dark_mica),
    "white mica": ({"sio2_vf_wt": (40.0, 60.0), "al2o3_vf_wt": (20.0, 45.0)}, _white_mica),
}
#: Minerals told by the oxides they are nearly wholly made of: their least sum, and the most SiO2, wt%.
OTHER_MINERALS: Mapping[str, tuple[tuple[str, ...], float, float]] = {
    "quartz": (("sio2_vf_wt",), 95.0, 100.0),
    "ore oxide": (("tio2_vf_wt", "feot_vf_wt", "cr2o3_vf_wt"), 50.0, 5.0),
    "apatite": (("cao_vf_wt", "p2o5_vf_wt"), 90.0, 5.0),
    "zircon": (("zro2_vf_wt", "sio2_vf_wt"), 95.0, 40.0),
}
MINERALS = (*SILICATES, *OTHER_MINERALS)


def has_formula_of(mineral: str, *oxides: ArrayLike) -> Flags:
    """Whether volatile-free analyses have the formula of a mineral of ``MINERALS``, shape (n,).

    ``oxides`` in the order of ``FORMULA_OXIDES``, wt%; False where one is missing. A rock made of that mineral
    (dunite, anorthosite, chromitite, vein quartz) has it too. ValueError for an unknown mineral. Source [deer2013].
    """
    if mineral not in MINERALS:
        raise ValueError(f"no formula of '{mineral}'; there are {list(MINERALS)}")
    given = dict(zip(FORMULA_OXIDES, (np.atleast_1d(np.asarray(each, float)) for each in oxides), strict=True))
    if mineral in OTHER_MINERALS:
        columns, least, silica = OTHER_MINERALS[mineral]
        amount = np.add.reduce([given[column] for column in columns])
        return (amount >= least) & (given["sio2_vf_wt"] <= silica)
    windows, is_formula = SILICATES[mineral]
    result = np.logical_and.reduce(
        [(given[column] >= low) & (given[column] <= high) for column, (low, high) in windows.items()]
    )
    rows = np.flatnonzero(result)  # few: only these are worth a formula
    if rows.size:
        result[rows] = is_formula(cations_per_oxygen({column: values[rows] for column, values in given.items()}))
    return result
