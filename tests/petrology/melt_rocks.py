"""Average rocks and a ridge-basalt glass for the melt tests, wt%.

Averages of Le Maitre 1976 (Journal of Petrology 17, 589-637), from memory; the glass is made up within the range of
ridge basalt.
"""

from __future__ import annotations

import numpy as np

from registry.petrology.constants import FEO_FROM_FE2O3
from registry.petrology.melt_composition import MELT_OXIDES

_SPLIT = (
    "sio2_wt", "tio2_wt", "al2o3_wt", "fe2o3_wt", "feo_wt", "mno_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt",
    "p2o5_wt",
)  # fmt: skip


def _rock(text: str) -> dict[str, float]:
    rock = dict(zip(_SPLIT, map(float, text.split()), strict=True))
    rock["feot_wt"] = rock["feo_wt"] + FEO_FROM_FE2O3 * rock["fe2o3_wt"]
    return rock


BASALT = _rock("49.20 1.84 15.74 3.79 7.13 .20 6.73 9.47 2.91 1.10 .35")
ANDESITE = _rock("57.94 .87 17.02 3.27 4.04 .14 3.33 6.79 3.48 1.62 .21")
GRANITE = _rock("71.30 .31 14.32 1.21 1.64 .05 .71 1.84 3.68 4.07 .12")
GLASS = _rock("50.50 1.60 14.80 0 10.20 .18 7.00 11.50 2.80 .20 .16")


def melt(rock: dict[str, float]) -> dict[str, float]:
    """The ten oxides of the thermometers, all iron as FeO."""
    return {column: rock[column] for column in MELT_OXIDES}


def table(*rocks: dict[str, float]) -> dict[str, np.ndarray]:
    """Rocks as columns of arrays."""
    return {column: np.array([rock[column] for rock in rocks]) for column in MELT_OXIDES}
