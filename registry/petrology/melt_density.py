"""Density of a silicate melt from the partial molar volumes of its oxides, with water, temperature and pressure."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import ZERO_CELSIUS_K, molar_mass
from registry.petrology.melt_composition import Array, not_negative, positive, wet_wt

BAR_PER_GPA = 1e4
#: Oxides that carry volume; MnO, P2O5 and CO2 are left out of both mass and volume.
DENSITY_OXIDES = {
    "sio2_wt": "SiO2", "tio2_wt": "TiO2", "al2o3_wt": "Al2O3", "fe2o3_wt": "Fe2O3", "feo_wt": "FeO",
    "mgo_wt": "MgO", "cao_wt": "CaO", "na2o_wt": "Na2O", "k2o_wt": "K2O",
}  # fmt: skip


@dataclass(frozen=True)
class PartialVolume:
    """Partial molar volume: cm3/mol at ``reference_k`` and 1 bar, its slopes per K and per bar."""

    volume: float
    per_k: float
    per_bar: float
    reference_k: float

    def at(self, temperature_k: Array, pressure_bar: Array) -> Array:
        """cm3/mol at a temperature (K) and pressure (bar); arrays broadcast."""
        return self.volume + self.per_k * (temperature_k - self.reference_k) + self.per_bar * (pressure_bar - 1.0)


def _lange_carmichael(volume: float, per_k_e3: float, per_bar_e4: float) -> PartialVolume:
    return PartialVolume(volume, per_k_e3 * 1e-3, per_bar_e4 * 1e-4, 1673.0)


def _lange_1997(volume: float, per_k_e3: float, per_bar_e4: float) -> PartialVolume:
    return PartialVolume(volume, per_k_e3 * 1e-3, per_bar_e4 * 1e-4, 1773.0)


#: [lange1987] as revised in [lange1990]; compressibilities of [kress1991]. From memory; the 2.62 of Al2O3 and MgO
#: are less sure.
VOLUMES_LANGE_CARMICHAEL = {
    "sio2_wt": _lange_carmichael(26.90, 0.0, -1.89),
    "tio2_wt": _lange_carmichael(23.16, 7.24, -2.31),
    "al2o3_wt": _lange_carmichael(37.11, 2.62, -2.26),
    "fe2o3_wt": _lange_carmichael(42.13, 9.09, -2.53),
    "feo_wt": _lange_carmichael(13.65, 2.92, -0.45),
    "mgo_wt": _lange_carmichael(11.45, 2.62, 0.27),
    "cao_wt": _lange_carmichael(16.57, 2.92, 0.34),
    "na2o_wt": _lange_carmichael(28.78, 7.41, -2.40),
    "k2o_wt": _lange_carmichael(45.84, 11.91, -6.75),
}
#: The default: [lange1997] with the TiO2, Fe2O3 and FeO of the set above. From memory.
VOLUMES_LANGE_1997 = {
    **VOLUMES_LANGE_CARMICHAEL,
    "sio2_wt": _lange_1997(26.86, 0.0, -1.89),
    "al2o3_wt": _lange_1997(37.42, 0.0, -2.26),
    "mgo_wt": _lange_1997(12.02, 3.27, 0.27),
    "cao_wt": _lange_1997(16.90, 3.74, 0.34),
    "na2o_wt": _lange_1997(29.65, 7.68, -2.40),
    "k2o_wt": _lange_1997(47.28, 12.08, -6.75),
}
#: Water in silicate melts: 22.9 +- 0.6, (9.5 +- 0.8)e-3, (-3.2 +- 0.6)e-4 [ochs1999].
VOLUME_H2O = PartialVolume(22.9, 9.5e-3, -3.2e-4, 1273.0)


def melt_density_lange(
    oxides: Mapping[str, ArrayLike],
    temperature_c: ArrayLike,
    pressure_gpa: ArrayLike = 1e-4,
    h2o_wt: ArrayLike = 0.0,
    volumes: Mapping[str, PartialVolume] | None = None,
) -> Array:
    """Density of a melt in kg/m3, shape of the broadcast inputs.

    ``oxides`` holds the columns of ``DENSITY_OXIDES`` in wt%, iron split into Fe2O3 and FeO; other columns and
    missing ones are left out of mass and volume. The anhydrous oxides are scaled to 100 - ``h2o_wt`` (wt% of the
    melt). ``volumes`` defaults to ``VOLUMES_LANGE_1997``; water by [ochs1999]. A temperature below absolute zero or
    a negative amount gives NaN.

    Calibration: 1 bar to 2 GPa, 1573-1873 K (extrapolated below); relative standard error 0.32 % at 1673 K.
    Source [lange1997], [lange1987], [kress1991], [ochs1999]. Example: Le Maitre's average basalt at 1200 C, 1 bar
    -> 2658.6; with 1 wt% H2O 2589.8.
    """
    table = VOLUMES_LANGE_1997 if volumes is None else volumes
    temperature_k = positive(np.asarray(temperature_c, dtype=np.float64) + ZERO_CELSIUS_K)
    pressure_bar = np.asarray(pressure_gpa, dtype=np.float64) * BAR_PER_GPA
    wet = wet_wt({column: not_negative(oxides[column]) for column in DENSITY_OXIDES if column in oxides}, h2o_wt)
    water_moles = np.asarray(h2o_wt, dtype=np.float64) * (1.0 / molar_mass("H2O"))
    mass: Array | float = np.asarray(h2o_wt, dtype=np.float64)
    volume = water_moles * VOLUME_H2O.at(temperature_k, pressure_bar)
    for column, wt in wet.items():
        mass = mass + wt
        volume = volume + wt * (1.0 / molar_mass(DENSITY_OXIDES[column])) * table[column].at(
            temperature_k, pressure_bar
        )
    return 1000.0 * mass / positive(volume)
