"""Normalising values: chondrite and primitive mantle, ppm. One set must be kept to within one figure.

La/Yb normalised of 35 and 2.5 ppm is 9.51 with ``CHONDRITE_MCDONOUGH`` and 10.04 with ``CHONDRITE_SUN``.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.quotients import Floats

#: CI chondrite [mcdonough1995], published (Lu and Y from memory).
CHONDRITE_MCDONOUGH = {
    "La": 0.237, "Ce": 0.613, "Pr": 0.0928, "Nd": 0.457, "Sm": 0.148, "Eu": 0.0563, "Gd": 0.199, "Tb": 0.0361,
    "Dy": 0.246, "Ho": 0.0546, "Er": 0.160, "Tm": 0.0247, "Yb": 0.161, "Lu": 0.0246, "Y": 1.57,
}  # fmt: skip
#: C1 chondrite [sun1989], from memory.
CHONDRITE_SUN = {
    "La": 0.237, "Ce": 0.612, "Pr": 0.095, "Nd": 0.467, "Sm": 0.153, "Eu": 0.058, "Gd": 0.2055, "Tb": 0.0374,
    "Dy": 0.254, "Ho": 0.0566, "Er": 0.1655, "Tm": 0.0255, "Yb": 0.170, "Lu": 0.0254,
}  # fmt: skip
#: Primitive mantle [mcdonough1995], from memory.
PRIMITIVE_MANTLE_MCDONOUGH = {
    "Cs": 0.021, "Rb": 0.600, "Ba": 6.60, "Th": 0.0795, "U": 0.0203, "Nb": 0.658, "Ta": 0.037, "K": 240.0,
    "La": 0.648, "Ce": 1.675, "Pb": 0.150, "Pr": 0.254, "Sr": 19.9, "P": 90.0, "Nd": 1.25, "Zr": 10.5, "Hf": 0.283,
    "Sm": 0.406, "Eu": 0.154, "Ti": 1205.0, "Gd": 0.544, "Tb": 0.099, "Dy": 0.674, "Y": 4.30, "Ho": 0.149,
    "Er": 0.438, "Tm": 0.068, "Yb": 0.441, "Lu": 0.0675, "Ni": 1960.0, "Cr": 2625.0, "Co": 105.0, "V": 82.0,
    "Sc": 16.2, "Cu": 30.0, "Zn": 55.0, "Ga": 4.0, "Pd": 0.0039, "Pt": 0.0071,
}  # fmt: skip
#: Primitive mantle [sun1989], from memory (Cs 0.032 and Pb 0.071 are printed too).
PRIMITIVE_MANTLE_SUN = {
    "Cs": 0.0079, "Rb": 0.635, "Ba": 6.989, "Th": 0.085, "U": 0.021, "Nb": 0.713, "Ta": 0.041, "K": 250.0,
    "La": 0.687, "Ce": 1.775, "Pb": 0.185, "Pr": 0.276, "Sr": 21.1, "P": 95.0, "Nd": 1.354, "Zr": 11.2, "Hf": 0.309,
    "Sm": 0.444, "Eu": 0.168, "Ti": 1300.0, "Gd": 0.596, "Tb": 0.108, "Dy": 0.737, "Y": 4.55, "Ho": 0.164,
    "Er": 0.480, "Tm": 0.074, "Yb": 0.493, "Lu": 0.074,
}  # fmt: skip
NORMALISING_SETS = {
    "chondrite_mcdonough": CHONDRITE_MCDONOUGH,
    "chondrite_sun": CHONDRITE_SUN,
    "primitive_mantle_mcdonough": PRIMITIVE_MANTLE_MCDONOUGH,
    "primitive_mantle_sun": PRIMITIVE_MANTLE_SUN,
}


def normalised(element_ppm: ArrayLike, symbol: str, normalising_set: str = "chondrite_mcdonough") -> Floats:
    """ppm over the set's ppm, shape (n,). ValueError for a set or an element that is not there."""
    if normalising_set not in NORMALISING_SETS:
        raise ValueError(f"no normalising set '{normalising_set}'; there are {sorted(NORMALISING_SETS)}")
    values = NORMALISING_SETS[normalising_set]
    if symbol not in values:
        raise ValueError(f"'{normalising_set}' has no value for '{symbol}'; it has {', '.join(values)}")
    return np.asarray(element_ppm, dtype=np.float64) / values[symbol]
