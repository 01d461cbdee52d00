"""Contents that no ordinary rock has: what lies outside is a unit or a decimal sign gone wrong before it is a rock.

Bounds are wide and meant for slips of a factor of a thousand. Common practice, no source.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from registry.petrology.quotients import Floats, floats

#: Lowest and highest ppm of the element in silicate rocks, from depleted basalt to pegmatite and ore-bearing syenite or
#: carbonatite. Chalcophile and precious metals are left out: rocks and ores hold anything of them.
PLAUSIBLE_PPM: dict[str, tuple[float, float]] = {
    "Li": (0.3, 50_000.0), "Be": (0.02, 50_000.0), "Sc": (0.05, 1_000.0), "V": (0.3, 30_000.0), "Ga": (0.3, 2_000.0),
    "Rb": (0.03, 20_000.0), "Sr": (0.5, 100_000.0), "Y": (0.3, 3_000.0), "Zr": (0.5, 50_000.0), "Nb": (0.03, 30_000.0),
    "Cs": (0.001, 50_000.0), "Ba": (0.3, 600_000.0), "La": (0.05, 100_000.0), "Ce": (0.1, 200_000.0),
    "Pr": (0.02, 20_000.0), "Nd": (0.1, 70_000.0), "Sm": (0.05, 10_000.0), "Eu": (0.005, 3_000.0),
    "Gd": (0.05, 5_000.0), "Tb": (0.01, 1_000.0), "Dy": (0.05, 5_000.0), "Ho": (0.01, 1_000.0), "Er": (0.03, 3_000.0),
    "Tm": (0.005, 500.0), "Yb": (0.03, 1_000.0), "Lu": (0.004, 300.0), "Hf": (0.02, 2_000.0), "Ta": (0.003, 30_000.0),
    "Th": (0.005, 100_000.0), "U": (0.002, 300_000.0),
}  # fmt: skip
#: The least of a major oxide, wt%, that half of the samples of a batch hold in all but ores and carbonate rocks.
LEAST_MAJOR_WT = {
    "SiO2": 2.0, "Al2O3": 0.05, "Fe2O3T": 0.02, "MgO": 0.003, "CaO": 0.003, "Na2O": 0.003, "K2O": 0.001, "TiO2": 0.001,
}  # fmt: skip
#: The traces that verdicts rest on: each has a remark of its own on the sample.
JUDGED_BY_TRACES = ("Sr", "Y", "La", "Yb", "Rb", "Nb", "Ta", "Zr", "Hf", "Th", "U", "V", "Sc")

#: The lower bounds hold for silicate rocks: not for peridotite, nor for vein quartz, limestone or massive ore.
HIGHEST_MGO_WT = 25.0
SILICA_WT = (20.0, 85.0)


def is_implausible(ppm: Floats, symbol: str, mgo_wt: Floats, sio2_wt: Floats) -> NDArray[np.bool_]:
    """True where a content, shape (n,), lies outside what rocks hold; NaN is passed over, and so is a plain 0.

    The lower bound holds where neither MgO nor SiO2 (wt%, NaN where unknown) says peridotite, vein quartz or ore.
    """
    content, mgo, sio2 = floats(ppm, mgo_wt, sio2_wt)
    low, high = PLAUSIBLE_PPM[symbol]
    no_silicate = (mgo > HIGHEST_MGO_WT) | (sio2 < SILICA_WT[0]) | (sio2 > SILICA_WT[1])
    return (content > high) | ((content > 0.0) & (content < low) & ~no_silicate)
