"""Oxygen buffers, and the ferric iron of a silicate melt at a given oxygen fugacity.

Oxides are wt%, temperatures degrees Celsius, pressures bar; log fO2 is log10 of bar. Functions broadcast; NaN stays.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.constants import ZERO_CELSIUS_K, molar_mass

Array = NDArray[np.float64]

#: log10 fO2 = A/T + B + C (P - 1)/T, T in K, P in bar (Frost 1991, table 1); from the temperature in C upwards.
FROST_BUFFERS = {
    "QFM": ((400.0, -26455.3, 10.344, 0.092), (573.0, -25096.3, 8.735, 0.110)),
    "NNO": ((600.0, -24930.0, 9.36, 0.046),),
    "IW": ((565.0, -27489.0, 6.702, 0.055),),
    "WM": ((565.0, -32807.0, 13.012, 0.083),),
}
#: log10 fO2 = A/T + B at 1 bar (Myers and Eugster 1983, abstract).
MYERS_BUFFERS = {
    "QFM": (-24441.9, 8.290),
    "IW": (-26834.7, 6.471),
    "WM": (-36951.3, 16.092),
    "MH": (-23847.6, 13.480),
}

#: Kress and Carmichael 1991, eq. 7 and table 7.
KRESS_A, KRESS_B, KRESS_C = 0.196, 1.1492e4, -6.675
KRESS_D = {"al2o3_wt": -2.243, "feot_wt": -1.828, "cao_wt": 3.201, "na2o_wt": 5.854, "k2o_wt": 6.215}
KRESS_E, KRESS_F, KRESS_G, KRESS_H = -3.36, -7.01e-7, -1.54e-10, 3.85e-17
KRESS_T0_K = 1673.0

#: Borisov et al. 2018, eq. 13: coefficients of the mole fractions.
BORISOV_D = {
    "sio2_wt": -0.445, "tio2_wt": -0.900, "mgo_wt": 1.532, "cao_wt": 0.314, "na2o_wt": 2.030, "k2o_wt": 3.355,
    "p2o5_wt": -4.851,
}  # fmt: skip
BORISOV_SI_AL, BORISOV_SI_MG = -3.081, -4.370

_MASS = {
    "sio2_wt": molar_mass("SiO2"), "tio2_wt": molar_mass("TiO2"), "al2o3_wt": molar_mass("Al2O3"),
    "feot_wt": molar_mass("FeO"), "mno_wt": molar_mass("MnO"), "mgo_wt": molar_mass("MgO"),
    "cao_wt": molar_mass("CaO"), "na2o_wt": molar_mass("Na2O"), "k2o_wt": molar_mass("K2O"),
    "p2o5_wt": molar_mass("P2O5"),
}  # fmt: skip
#: The oxides that the mole fractions are made of, all iron as FeO.
MELT_OXIDES = tuple(_MASS)


def buffer_log_fo2(
    buffer: str, temperature_c: ArrayLike, pressure_bar: ArrayLike = 1.0, calibration: str = "frost1991"
) -> Array:
    """log10 fO2 (bar) of an oxygen buffer: QFM, NNO, IW, WM by Frost 1991; QFM, IW, WM, MH by Myers and Eugster 1983.

    Frost: QFM from 400 C (alpha quartz to 573 C), NNO from 600 C, IW and WM from 565 C, all to 1200 C, with a term of
    pressure. Myers and Eugster: 1 bar, the pressure is not used. Beyond the range the equation is extrapolated;
    below the first row of QFM its coefficients are used as they stand.
    ValueError for an unknown buffer or calibration.
    Source: [frost1991] table 1 (from memory), [myers1983] abstract.
    """
    kelvin = np.asarray(temperature_c, dtype=np.float64) + ZERO_CELSIUS_K
    tables: Mapping[str, object] = {"frost1991": FROST_BUFFERS, "myers1983": MYERS_BUFFERS}
    if calibration not in tables:
        raise ValueError(f"unknown calibration '{calibration}' of oxygen buffers; known are {sorted(tables)}")
    if calibration == "myers1983":
        if buffer not in MYERS_BUFFERS:
            raise ValueError(f"myers1983 has no buffer '{buffer}'; it has {sorted(MYERS_BUFFERS)}")
        slope, constant = MYERS_BUFFERS[buffer]
        return slope / kelvin + constant
    if buffer not in FROST_BUFFERS:
        raise ValueError(f"frost1991 has no buffer '{buffer}'; it has {sorted(FROST_BUFFERS)}")
    pressure = np.asarray(pressure_bar, dtype=np.float64)
    rows = [a / kelvin + b + c * (pressure - 1.0) / kelvin for _, a, b, c in FROST_BUFFERS[buffer]]
    result = rows[0]
    for (start, *_), row in zip(FROST_BUFFERS[buffer][1:], rows[1:], strict=True):
        result = np.where(np.asarray(temperature_c) >= start, row, result)
    return result


def mole_fractions(oxides: Mapping[str, ArrayLike]) -> dict[str, Array]:
    """Oxide mole fractions of the anhydrous melt, all iron as FeO, from ``MELT_OXIDES`` in wt% (closing not needed).

    Oxides left out count as zero; ValueError for one that is not known.
    """
    unknown = sorted(set(oxides) - set(_MASS))
    if unknown:
        raise ValueError(f"unknown oxides {unknown}; mole fractions take {list(MELT_OXIDES)}")
    moles = {name: np.asarray(oxides.get(name, 0.0), dtype=np.float64) / mass for name, mass in _MASS.items()}
    total = sum(moles.values())
    with np.errstate(invalid="ignore", divide="ignore"):
        return {name: amount / total for name, amount in moles.items()}


def log_ferric_ferrous_kress(
    oxides: Mapping[str, ArrayLike], temperature_c: ArrayLike, log_fo2: ArrayLike, pressure_bar: ArrayLike = 1.0
) -> Array:
    """ln(X_Fe2O3/X_FeO) of a silicate melt by Kress and Carmichael 1991.

    ``oxides`` in wt% with all iron as ``feot_wt``; log10 fO2 in bar. Calibration: natural liquids, 1200 to 1630 C;
    standard error about 0.2 of the logarithm. Source: [kress1991] eq. 7, table 7 (from memory).
    """
    x = mole_fractions(oxides)
    kelvin = np.asarray(temperature_c, dtype=np.float64) + ZERO_CELSIUS_K
    pascal = np.asarray(pressure_bar, dtype=np.float64) * 1e5
    composition = sum(coefficient * x[name] for name, coefficient in KRESS_D.items())
    cooling = 1.0 - KRESS_T0_K / kelvin - np.log(kelvin / KRESS_T0_K)
    squeezing = (
        KRESS_F * pascal / kelvin + KRESS_G * (kelvin - KRESS_T0_K) * pascal / kelvin + KRESS_H * pascal**2 / kelvin
    )
    ln_fo2 = np.asarray(log_fo2, dtype=np.float64) * np.log(10.0)
    return KRESS_A * ln_fo2 + KRESS_B / kelvin + KRESS_C + composition + KRESS_E * cooling + squeezing


def ferric_fraction_kress(
    oxides: Mapping[str, ArrayLike], temperature_c: ArrayLike, log_fo2: ArrayLike, pressure_bar: ArrayLike = 1.0
) -> Array:
    """Fe3+/(Fe2+ + Fe3+), atomic, from ``log_ferric_ferrous_kress``."""
    ratio = np.exp(log_ferric_ferrous_kress(oxides, temperature_c, log_fo2, pressure_bar))
    return 2.0 * ratio / (1.0 + 2.0 * ratio)


def ratio_kress(
    oxides: Mapping[str, ArrayLike], temperature_c: ArrayLike, log_fo2: ArrayLike, pressure_bar: ArrayLike = 1.0
) -> Array:
    """Fe2O3/FeO by weight from ``log_ferric_ferrous_kress``."""
    ratio = np.exp(log_ferric_ferrous_kress(oxides, temperature_c, log_fo2, pressure_bar))
    return ratio * molar_mass("Fe2O3") / molar_mass("FeO")


def ferric_fraction_borisov(oxides: Mapping[str, ArrayLike], temperature_c: ArrayLike, log_fo2: ArrayLike) -> Array:
    """Fe3+/(Fe2+ + Fe3+), atomic, of a silicate melt at 1 bar by Borisov et al. 2018.

    ``oxides`` in wt% with all iron as ``feot_wt``; mole fractions with all iron as FeO.
    Source: [borisov2018] (coefficients from memory).
    """
    x = mole_fractions(oxides)
    kelvin = np.asarray(temperature_c, dtype=np.float64) + ZERO_CELSIUS_K
    log_ratio = 0.207 * np.asarray(log_fo2, dtype=np.float64) + 4633.3 / kelvin - 1.852
    log_ratio = log_ratio + sum(coefficient * x[name] for name, coefficient in BORISOV_D.items())
    log_ratio = log_ratio + BORISOV_SI_AL * x["sio2_wt"] * x["al2o3_wt"] + BORISOV_SI_MG * x["sio2_wt"] * x["mgo_wt"]
    ratio = 10.0**log_ratio
    return ratio / (1.0 + ratio)
