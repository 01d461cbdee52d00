"""Compositions of rock-forming minerals from their formulas, and which of them a magma of given silica may drop.

Water of hydroxyl is left out; all iron is FeO. Amounts are moles of oxide a formula unit.
"""

from __future__ import annotations

from collections.abc import Mapping

from registry.petrology.constants import molar_mass

#: Oxides that are balanced, all iron as FeO.
BALANCED_OXIDES = (
    "sio2_wt", "tio2_wt", "al2o3_wt", "feot_wt", "mno_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt", "p2o5_wt",
)  # fmt: skip
_FORMULA = {
    "sio2_wt": "SiO2", "tio2_wt": "TiO2", "al2o3_wt": "Al2O3", "feot_wt": "FeO", "mno_wt": "MnO", "mgo_wt": "MgO",
    "cao_wt": "CaO", "na2o_wt": "Na2O", "k2o_wt": "K2O", "p2o5_wt": "P2O5",
}  # fmt: skip
#: Ideal end members, by formula.
END_MEMBERS: Mapping[str, Mapping[str, float]] = {
    "forsterite": {"mgo_wt": 2.0, "sio2_wt": 1.0},
    "fayalite": {"feot_wt": 2.0, "sio2_wt": 1.0},
    "diopside": {"cao_wt": 1.0, "mgo_wt": 1.0, "sio2_wt": 2.0},
    "hedenbergite": {"cao_wt": 1.0, "feot_wt": 1.0, "sio2_wt": 2.0},
    "enstatite": {"mgo_wt": 2.0, "sio2_wt": 2.0},
    "ferrosilite": {"feot_wt": 2.0, "sio2_wt": 2.0},
    "anorthite": {"cao_wt": 1.0, "al2o3_wt": 1.0, "sio2_wt": 2.0},
    "albite": {"na2o_wt": 0.5, "al2o3_wt": 0.5, "sio2_wt": 3.0},
    "orthoclase": {"k2o_wt": 0.5, "al2o3_wt": 0.5, "sio2_wt": 3.0},
    "quartz": {"sio2_wt": 1.0},
    "magnesiohornblende": {"cao_wt": 2.0, "mgo_wt": 4.0, "al2o3_wt": 1.0, "sio2_wt": 7.0},
    "ferrohornblende": {"cao_wt": 2.0, "feot_wt": 4.0, "al2o3_wt": 1.0, "sio2_wt": 7.0},
    "phlogopite": {"k2o_wt": 0.5, "mgo_wt": 3.0, "al2o3_wt": 0.5, "sio2_wt": 3.0},
    "annite": {"k2o_wt": 0.5, "feot_wt": 3.0, "al2o3_wt": 0.5, "sio2_wt": 3.0},
    "magnetite": {"feot_wt": 3.0},
    "ilmenite": {"feot_wt": 1.0, "tio2_wt": 1.0},
    "apatite": {"cao_wt": 10.0 / 3.0, "p2o5_wt": 1.0},
}
#: Compositions common in magmas, by formula (common practice, no source).
COMMON_MINERALS: Mapping[str, Mapping[str, float]] = {
    "olivine_fo80": {"mgo_wt": 1.6, "feot_wt": 0.4, "sio2_wt": 1.0},
    "clinopyroxene": {"cao_wt": 0.9, "mgo_wt": 0.8, "feot_wt": 0.25, "al2o3_wt": 0.05, "sio2_wt": 1.95},
    "orthopyroxene_en75": {"mgo_wt": 1.5, "feot_wt": 0.5, "sio2_wt": 2.0},
    "plagioclase_an70": {"cao_wt": 0.7, "na2o_wt": 0.15, "al2o3_wt": 0.85, "sio2_wt": 2.3},
    "plagioclase_an30": {"cao_wt": 0.3, "na2o_wt": 0.35, "al2o3_wt": 0.65, "sio2_wt": 2.7},
    "alkali_feldspar": {"k2o_wt": 0.35, "na2o_wt": 0.15, "al2o3_wt": 0.5, "sio2_wt": 3.0},
    "hornblende": {
        "cao_wt": 1.8, "na2o_wt": 0.3, "mgo_wt": 3.0, "feot_wt": 1.6, "al2o3_wt": 1.0, "tio2_wt": 0.2, "sio2_wt": 6.4,
    },
    "biotite": {"k2o_wt": 0.5, "mgo_wt": 1.5, "feot_wt": 1.2, "al2o3_wt": 0.65, "tio2_wt": 0.2, "sio2_wt": 2.75},
}  # fmt: skip
MINERALS: Mapping[str, Mapping[str, float]] = {**END_MEMBERS, **COMMON_MINERALS}

#: (Fe/Mg) mineral over (Fe/Mg) liquid: olivine [roeder1970]; pyroxenes [putirka2008], hornblende and biotite common
#: practice, from memory.
IRON_MAGNESIUM_EXCHANGE = {
    "olivine": 0.30, "clinopyroxene": 0.28, "orthopyroxene": 0.29, "hornblende": 0.36, "biotite": 0.35,
}  # fmt: skip
#: The magnesian and the ferrous end member of each.
SOLID_SOLUTIONS = {
    "olivine": ("forsterite", "fayalite"),
    "clinopyroxene": ("diopside", "hedenbergite"),
    "orthopyroxene": ("enstatite", "ferrosilite"),
    "hornblende": ("magnesiohornblende", "ferrohornblende"),
    "biotite": ("phlogopite", "annite"),
}
#: What magmas drop, by the volatile-free SiO2 (wt%) of the parent, below the limit (common practice, no source).
#: Quartz and potassium feldspar only from 72 wt% on: with them the minerals alone make any granite.
ASSEMBLAGES = (
    (52.0, ("olivine", "clinopyroxene", "anorthite", "albite", "magnetite", "ilmenite")),
    (63.0, ("clinopyroxene", "orthopyroxene", "hornblende", "anorthite", "albite", "magnetite", "ilmenite", "apatite")),
    (72.0, ("hornblende", "biotite", "anorthite", "albite", "magnetite", "ilmenite", "apatite")),
    (100.0, ("biotite", "anorthite", "albite", "orthoclase", "quartz", "magnetite", "ilmenite", "apatite")),
)


def mineral_composition_wt(name: str) -> dict[str, float]:
    """wt% of the balanced oxides in a mineral of the table, closed to 100. ValueError for a name not in it."""
    if name not in MINERALS:
        raise ValueError(f"mass balance: no mineral '{name}'; the table holds {sorted(MINERALS)}")
    return _closed_wt(MINERALS[name])


def solid_solution_wt(mineral: str, magnesian_share: float) -> dict[str, float]:
    """wt% of the balanced oxides in a mineral of ``SOLID_SOLUTIONS`` with a molar share of its magnesian end member.

    ValueError for another mineral or a share outside 0-1.
    """
    if mineral not in SOLID_SOLUTIONS:
        raise ValueError(f"mass balance: '{mineral}' is no solid solution; there are {sorted(SOLID_SOLUTIONS)}")
    if not 0.0 <= magnesian_share <= 1.0:
        raise ValueError(f"mass balance: magnesian share {magnesian_share} of {mineral}; expected 0 to 1")
    magnesian, ferrous = (END_MEMBERS[name] for name in SOLID_SOLUTIONS[mineral])
    return _closed_wt(
        {
            oxide: magnesian_share * magnesian.get(oxide, 0.0) + (1.0 - magnesian_share) * ferrous.get(oxide, 0.0)
            for oxide in BALANCED_OXIDES
        }
    )


def fractionating_minerals(sio2_wt: float, liquid_mg_number: float) -> dict[str, dict[str, float]]:
    """Minerals (wt% by oxide) that a parent of this volatile-free SiO2 (wt%) may drop, by name.

    Iron and magnesium of mafic minerals are those in equilibrium with ``liquid_mg_number`` (molar, 0-100, all iron
    ferrous); feldspars are free mixtures of their end members. ValueError where either is not a number in range.
    """
    if not (0.0 < sio2_wt <= 100.0 and 0.0 <= liquid_mg_number <= 100.0):
        raise ValueError(
            f"mass balance: SiO2 {sio2_wt} wt% and Mg-number {liquid_mg_number}; expected wt% up to 100 and 0 to 100"
        )
    names = next(names for limit, names in ASSEMBLAGES if sio2_wt < limit or limit == 100.0)
    share = liquid_mg_number / 100.0
    return {
        name: solid_solution_wt(name, share / (share + IRON_MAGNESIUM_EXCHANGE[name] * (1.0 - share)))
        if name in SOLID_SOLUTIONS
        else mineral_composition_wt(name)
        for name in names
    }


def _closed_wt(moles: Mapping[str, float]) -> dict[str, float]:
    masses = {oxide: amount * molar_mass(_FORMULA[oxide]) for oxide, amount in moles.items()}
    total = sum(masses.values())
    return {oxide: 100.0 * masses.get(oxide, 0.0) / total for oxide in BALANCED_OXIDES}
