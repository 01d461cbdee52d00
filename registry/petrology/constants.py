"""Physical constants, atomic weights and the masses derived from them.

Atomic weights: IUPAC/CIAAW abridged values, five figures [prohaska2022]; oxide masses and factors are computed.
"""

from __future__ import annotations

import re
from functools import cache

GRAVITY_M_PER_S2 = 9.81  # common practice, no source
SECONDS_PER_YEAR = 3.15576e7  # Julian year, IAU
ZERO_CELSIUS_K = 273.15
#: Zr in stoichiometric zircon, ppm, as printed with the zircon saturation models [watson1983].
ZR_IN_ZIRCON_PPM = 497644.0

#: g/mol, IUPAC/CIAAW abridged to five figures [prohaska2022].
ATOMIC_WEIGHT = {
    "H": 1.0080, "Li": 6.94, "Be": 9.0122, "B": 10.81, "C": 12.011, "N": 14.007, "O": 15.999, "F": 18.998,
    "Na": 22.990, "Mg": 24.305, "Al": 26.982, "Si": 28.085, "P": 30.974, "S": 32.06, "Cl": 35.45, "K": 39.098,
    "Ca": 40.078, "Sc": 44.956, "Ti": 47.867, "V": 50.942, "Cr": 51.996, "Mn": 54.938, "Fe": 55.845, "Co": 58.933,
    "Ni": 58.693, "Cu": 63.546, "Zn": 65.38, "Ga": 69.723, "Ge": 72.630, "As": 74.922, "Se": 78.971, "Rb": 85.468,
    "Sr": 87.62, "Y": 88.906, "Zr": 91.224, "Nb": 92.906, "Mo": 95.95, "Rh": 102.91, "Pd": 106.42, "Ag": 107.87,
    "Cd": 112.41, "In": 114.82, "Sn": 118.71, "Sb": 121.76, "Te": 127.60, "Cs": 132.91, "Ba": 137.33, "La": 138.91,
    "Ce": 140.12, "Pr": 140.91, "Nd": 144.24, "Sm": 150.36, "Eu": 151.96, "Gd": 157.25, "Tb": 158.93, "Dy": 162.50,
    "Ho": 164.93, "Er": 167.26, "Tm": 168.93, "Yb": 173.05, "Lu": 174.97, "Hf": 178.49, "Ta": 180.95, "W": 183.84,
    "Re": 186.21, "Os": 190.23, "Ir": 192.22, "Pt": 195.08, "Au": 196.97, "Hg": 200.59, "Tl": 204.38, "Pb": 207.2,
    "Bi": 208.98, "Th": 232.04, "U": 238.03, "Ru": 101.07,
}  # fmt: skip

_PART = re.compile(r"([A-Z][a-z]?)(\d*)")


@cache
def formula_atoms(formula: str) -> dict[str, int]:
    """Atoms of a plain formula such as ``Al2O3``; ValueError where it holds anything else."""
    atoms: dict[str, int] = {}
    if "".join(symbol + count for symbol, count in _PART.findall(formula)) != formula or not formula:
        raise ValueError(f"'{formula}' is not a plain chemical formula such as Al2O3")
    for symbol, count in _PART.findall(formula):
        if symbol not in ATOMIC_WEIGHT:
            raise ValueError(f"'{formula}': no atomic weight for '{symbol}'")
        atoms[symbol] = atoms.get(symbol, 0) + int(count or 1)
    return atoms


@cache
def molar_mass(formula: str) -> float:
    """Molar mass in g/mol of a plain formula (``SiO2`` -> 60.083)."""
    return sum(ATOMIC_WEIGHT[symbol] * count for symbol, count in formula_atoms(formula).items())


@cache
def oxide_from_element(oxide: str) -> float:
    """Mass of oxide per mass of its element (``Al2O3`` -> 1.8894)."""
    symbol = next(iter(formula_atoms(oxide)))
    return molar_mass(oxide) / (formula_atoms(oxide)[symbol] * ATOMIC_WEIGHT[symbol])


#: FeOt = FeO + FEO_FROM_FE2O3 * Fe2O3, by mass.
FEO_FROM_FE2O3 = 2.0 * molar_mass("FeO") / molar_mass("Fe2O3")
FE2O3_FROM_FEO = 1.0 / FEO_FROM_FE2O3
#: Oxygen replaced by halogens, by mass (O=F, O=Cl).
OXYGEN_FOR_FLUORINE = ATOMIC_WEIGHT["O"] / (2.0 * ATOMIC_WEIGHT["F"])
OXYGEN_FOR_CHLORINE = ATOMIC_WEIGHT["O"] / (2.0 * ATOMIC_WEIGHT["Cl"])
