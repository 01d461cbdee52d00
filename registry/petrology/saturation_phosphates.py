"""Saturation temperatures of apatite and monazite from the rock taken as a liquid, in degrees Celsius."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import ATOMIC_WEIGHT, ZERO_CELSIUS_K, molar_mass
from registry.petrology.melt_composition import (
    Array,
    cation_fractions,
    exponential,
    not_negative,
    positive,
)

#: P2O5 in apatite, wt%: 42 as usually taken; 41 is in print too (+2.6 C on an average granite).
P2O5_IN_APATITE_WT = 42.0
#: Share of monazite made of the six elements counted, taken for both monazite models (published: 0.83 to 1).
LREE_SHARE_OF_MONAZITE = 0.83
#: Elements counted by the two models.
MONTEL_ELEMENTS = ("La", "Ce", "Pr", "Nd", "Sm", "Gd")


def apatite_saturation_harrison_watson(
    sio2_wt: ArrayLike, p2o5_wt: ArrayLike, p2o5_in_apatite_wt: float = P2O5_IN_APATITE_WT
) -> Array:
    """Apatite saturation temperature (C) from SiO2 and P2O5 of the anhydrous melt, wt%.

    ln D = (8400 + 26400 (S - 0.5))/T - (3.1 + 12.4 (S - 0.5)), S the weight fraction of SiO2.
    Calibration: SiO2 45-75 wt%, 850-1500 C, H2O 0-10 wt%, A/CNK <= 1.1; low for felsic melts.
    Source [harrison1984]. Example: average granite, P2O5 0.12 -> 935.8.
    """
    s = np.asarray(sio2_wt, dtype=np.float64) * 0.01 - 0.5
    log_d = np.log(p2o5_in_apatite_wt / positive(p2o5_wt))
    return (8400.0 + 26400.0 * s) / positive(log_d + 3.1 + 12.4 * s) - ZERO_CELSIUS_K


def p2o5_at_apatite_saturation(
    temperature_c: ArrayLike, sio2_wt: ArrayLike, p2o5_in_apatite_wt: float = P2O5_IN_APATITE_WT
) -> Array:
    """P2O5 (wt%) that a melt holds at apatite saturation [harrison1984]; 850 C, SiO2 71.30 -> 0.0495."""
    t = positive(np.asarray(temperature_c) + ZERO_CELSIUS_K)
    s = np.asarray(sio2_wt, dtype=np.float64) * 0.01 - 0.5
    return p2o5_in_apatite_wt / exponential((8400.0 + 26400.0 * s) / t - 3.1 - 12.4 * s)


def p2o5_peraluminous_bea(p2o5_wt: ArrayLike, a_cnk: ArrayLike, temperature_c: ArrayLike) -> Array:
    """P2O5 (wt%) at apatite saturation of a peraluminous melt, from that of [harrison1984].

    P x exp(6429 (A/CNK - 1)/T), T in degrees Celsius as published; for A/CNK > 1. Source [bea1992], from memory.
    """
    return np.asarray(p2o5_wt) * exponential(6429.0 * (np.asarray(a_cnk) - 1.0) / positive(temperature_c))


def p2o5_peraluminous_pichavant(
    p2o5_wt: ArrayLike, a_cnk: ArrayLike, temperature_c: ArrayLike, sio2_wt: ArrayLike
) -> Array:
    """P2O5 (wt%) at apatite saturation of a peraluminous melt, from that of [harrison1984].

    P + (A/CNK - 1) exp(-5900/T - 3.22 S + 9.31), T in K, S the weight fraction of SiO2; for A/CNK > 1.
    Source [pichavant1992], from memory.
    """
    t = positive(np.asarray(temperature_c) + ZERO_CELSIUS_K)
    excess = exponential(-5900.0 / t - 0.0322 * np.asarray(sio2_wt) + 9.31)
    return np.asarray(p2o5_wt) + (np.asarray(a_cnk) - 1.0) * excess


def monazite_d(
    sio2_wt: ArrayLike,
    tio2_wt: ArrayLike,
    al2o3_wt: ArrayLike,
    feot_wt: ArrayLike,
    mno_wt: ArrayLike,
    mgo_wt: ArrayLike,
    cao_wt: ArrayLike,
    na2o_wt: ArrayLike,
    k2o_wt: ArrayLike,
    p2o5_wt: ArrayLike,
    li_ppm: ArrayLike = 0.0,
) -> Array:
    """Melt parameter D = (Na + K + Li + 2 Ca)/(Al (Al + Si)), cation fractions, pure number.

    Oxides wt% anhydrous, all iron as FeO; Li in ppm is added to the alkalis, not to the sum of cations (its share
    stays below 0.5 % up to 1000 ppm). Source [montel1993]. Example: average granite -> 1.1610.
    """
    c = cation_fractions({
        "sio2_wt": sio2_wt, "tio2_wt": tio2_wt, "al2o3_wt": al2o3_wt, "feot_wt": feot_wt, "mno_wt": mno_wt,
        "mgo_wt": mgo_wt, "cao_wt": cao_wt, "na2o_wt": na2o_wt, "k2o_wt": k2o_wt, "p2o5_wt": p2o5_wt,
    })  # fmt: skip
    si, al = c["sio2_wt"], c["al2o3_wt"]
    # moles of Li per 100 g over moles of Si per 100 g gives Li on the scale of the fractions
    li_fraction = (
        not_negative(li_ppm) * (1e-4 / ATOMIC_WEIGHT["Li"]) * si / positive(np.asarray(sio2_wt) / molar_mass("SiO2"))
    )
    alkalis = c["na2o_wt"] + c["k2o_wt"] + li_fraction
    return (alkalis + 2.0 * c["cao_wt"]) / positive(al * (al + si))


def monazite_saturation_montel(
    la_ppm: ArrayLike,
    ce_ppm: ArrayLike,
    pr_ppm: ArrayLike,
    nd_ppm: ArrayLike,
    sm_ppm: ArrayLike,
    gd_ppm: ArrayLike,
    d: ArrayLike,
    h2o_wt: ArrayLike,
    share: float = LREE_SHARE_OF_MONAZITE,
) -> Array:
    """Monazite saturation temperature (C) from the light rare earths (ppm), D and water in the melt (wt%).

    ln REE = 9.50 + 2.34 D + 0.3879 sqrt(H2O) - 13318/T with REE = sum(ppm/atomic weight)/share.
    Source [montel1993], from memory. Example: average granite with La 35 Ce 70 Pr 8 Nd 28 Sm 5.5 Gd 4.5, H2O 3,
    share 0.83 -> 780.8 (share 1 -> 765.4).
    """
    elements = zip(MONTEL_ELEMENTS, (la_ppm, ce_ppm, pr_ppm, nd_ppm, sm_ppm, gd_ppm), strict=True)
    ree: Array | float = 0.0
    for symbol, ppm in elements:
        ree = ree + np.asarray(ppm, dtype=np.float64) * (1.0 / ATOMIC_WEIGHT[symbol])
    water = np.sqrt(not_negative(h2o_wt))
    log_ree = np.log(positive(ree) / share)
    return 13318.0 / positive(9.50 + 2.34 * np.asarray(d) + 0.3879 * water - log_ree) - ZERO_CELSIUS_K


def monazite_saturation_maimaiti(
    la_ppm: ArrayLike,
    ce_ppm: ArrayLike,
    pr_ppm: ArrayLike,
    nd_ppm: ArrayLike,
    sm_ppm: ArrayLike,
    d: ArrayLike,
    h2o_wt: ArrayLike,
    pressure_gpa: ArrayLike,
    share: float = LREE_SHARE_OF_MONAZITE,
) -> Array:
    """Monazite saturation temperature (C) from La to Sm (ppm), D, water (wt%) and pressure (GPa).

    ln LREE = 12.77 + 1.52 D + 0.44 sqrt(H2O) - 9934/T - 36.79 P/T + ln share, P in kbar.
    Source [maimaiti2019] abstract. Example: the granite above at 0.2 GPa -> 715.
    """
    lree = np.add(np.add(np.add(np.add(la_ppm, ce_ppm), pr_ppm), nd_ppm), sm_ppm)
    water = np.sqrt(not_negative(h2o_wt))
    pressure_kbar = 10.0 * np.asarray(pressure_gpa, dtype=np.float64)
    constant = 12.77 + 1.52 * np.asarray(d) + 0.44 * water + np.log(share)
    return (9934.0 + 36.79 * pressure_kbar) / positive(constant - np.log(positive(lree))) - ZERO_CELSIUS_K
