"""Indices of differentiation: Mg-numbers and the indices read from majors or from the CIPW norm.

Every function takes what it is given: none normalises or splits iron. The catalogue gives oxides as analysed (raw
wt%) to all of them; those that read norm minerals get the stored norm, which stands on the volatile-free analysis.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import molar_mass
from registry.petrology.quotients import Floats, floats, quotient

#: Weight of Mg-diopside per weight of its enstatite, CaMgSi2O6 / MgSiO3 [poldervaart1964].
DIOPSIDE_FROM_ENSTATITE = 2.157003
#: Weight of forsterite per weight of enstatite at equal Mg, Mg2SiO4 / 2 MgSiO3 [poldervaart1964].
FORSTERITE_FROM_ENSTATITE = 0.700837
#: Weight of spinel per weight of corundum, MgAl2O4 / Al2O3.
SPINEL_FROM_CORUNDUM = (molar_mass("MgO") + molar_mass("Al2O3")) / molar_mass("Al2O3")
ULTRABASIC_BELOW_SIO2_WT = 45.0
RITTMANN_SIO2_WT = 43.0


def mg_number(mgo_wt: ArrayLike, feo_wt: ArrayLike) -> Floats:
    """Mg-number, 100 Mg/(Mg + Fe2+), molar; FeO of the split used. Raw wt%, shape (n,); NaN where both are zero.

    With ``feot_wt`` for FeO it is the Mg-number with total iron. Sulphide ties iron: above 0.5 % S it is too low.
    Source: common practice, no source for the definition. Example: average basalt [lemaitre1976b] 62.7.
    """
    magnesium, iron = floats(np.divide(mgo_wt, molar_mass("MgO")), np.divide(feo_wt, molar_mass("FeO")))
    return 100.0 * quotient(magnesium, magnesium + iron)


def differentiation_index(
    q_wt: ArrayLike, or_wt: ArrayLike, ab_wt: ArrayLike, ne_wt: ArrayLike, lc_wt: ArrayLike, kp_wt: ArrayLike
) -> Floats:
    """Differentiation index Q + Or + Ab + Ne + Lc + Kp of the CIPW weight norm, wt%, shape (n,).

    Acmite is not counted (original definition): low for peralkaline rocks. Typical basalt below 35, granite above 75.
    Source [thornton1960].
    """
    q, orthoclase, ab, ne, lc, kp = floats(q_wt, or_wt, ab_wt, ne_wt, lc_wt, kp_wt)
    return q + orthoclase + ab + ne + lc + kp


def solidification_index(
    mgo_wt: ArrayLike, feo_wt: ArrayLike, fe2o3_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike
) -> Floats:
    """Solidification index 100 MgO/(MgO + FeO + Fe2O3 + Na2O + K2O), raw wt%, shape (n,). Primary basalt about 40.

    Source [kuno1959]. With FeOt for FeO and zero Fe2O3 it is the variant on total iron.
    """
    mgo, feo, fe2o3, na2o, k2o = floats(mgo_wt, feo_wt, fe2o3_wt, na2o_wt, k2o_wt)
    return 100.0 * quotient(mgo, mgo + feo + fe2o3 + na2o + k2o)


def larsen_index(
    sio2_wt: ArrayLike, k2o_wt: ArrayLike, feot_wt: ArrayLike, mgo_wt: ArrayLike, cao_wt: ArrayLike
) -> Floats:
    """Larsen's index SiO2/3 + K2O - FeOt - MgO - CaO, raw wt%, shape (n,). Source [larsen1938]."""
    sio2, k2o, feot, mgo, cao = floats(sio2_wt, k2o_wt, feot_wt, mgo_wt, cao_wt)
    return sio2 / 3.0 + k2o - feot - mgo - cao


def crystallization_index(
    an_wt: ArrayLike,
    di_en_wt: ArrayLike,
    ol_fo_wt: ArrayLike,
    hy_en_wt: ArrayLike,
    c_wt: ArrayLike,
    sio2_vf_wt: ArrayLike,
) -> Floats:
    """Crystallization index An + Mg-diopside + forsterite + Mg-spinel of the CIPW norm, wt%, shape (n,).

    Mg-diopside is 2.157003 times the enstatite part of diopside; the forsterite takes in 0.700837 times the enstatite
    of hypersthene; spinel is made of corundum only in ultrabasic rocks (SiO2 below 45). From 0 (quartz and alkali
    feldspar) to 60-100 (anorthite, diopside, forsterite). Source [poldervaart1964].
    """
    an, diopside, forsterite, enstatite, corundum, sio2 = floats(an_wt, di_en_wt, ol_fo_wt, hy_en_wt, c_wt, sio2_vf_wt)
    spinel = np.where(sio2 < ULTRABASIC_BELOW_SIO2_WT, SPINEL_FROM_CORUNDUM * corundum, 0.0)
    return an + DIOPSIDE_FROM_ENSTATITE * diopside + forsterite + FORSTERITE_FROM_ENSTATITE * enstatite + spinel


def felsic_index(na2o_wt: ArrayLike, k2o_wt: ArrayLike, cao_wt: ArrayLike) -> Floats:
    """Felsic index 100 (Na2O + K2O)/(Na2O + K2O + CaO), raw wt%, shape (n,). Source [simpson1954]."""
    alkalis, cao = floats(np.add(na2o_wt, k2o_wt), cao_wt)
    return 100.0 * quotient(alkalis, alkalis + cao)


def mafic_index(feo_wt: ArrayLike, fe2o3_wt: ArrayLike, mgo_wt: ArrayLike) -> Floats:
    """Mafic index 100 (FeO + Fe2O3)/(FeO + Fe2O3 + MgO), raw wt%, shape (n,). Source [wager1939]."""
    iron, mgo = floats(np.add(feo_wt, fe2o3_wt), mgo_wt)
    return 100.0 * quotient(iron, iron + mgo)


def r1_r2(
    sio2_wt: ArrayLike,
    na2o_wt: ArrayLike,
    k2o_wt: ArrayLike,
    feot_wt: ArrayLike,
    tio2_wt: ArrayLike,
    cao_wt: ArrayLike,
    mgo_wt: ArrayLike,
    al2o3_wt: ArrayLike,
) -> dict[str, Floats]:
    """R1 = 4 Si - 11 (Na + K) - 2 (Fe + Ti) and R2 = 6 Ca + 2 Mg + Al in millications a 100 g of rock, raw wt%.

    Returns ``r1`` and ``r2``, shape (n,). The fields of the published figure are not reproduced.
    Source [delaroche1980].
    """

    def millications(oxide_wt: ArrayLike, formula: str, atoms: int) -> Floats:
        return np.asarray(oxide_wt, dtype=np.float64) * (1000.0 * atoms / molar_mass(formula))

    si, ti = millications(sio2_wt, "SiO2", 1), millications(tio2_wt, "TiO2", 1)
    na, k = millications(na2o_wt, "Na2O", 2), millications(k2o_wt, "K2O", 2)
    fe, mg = millications(feot_wt, "FeO", 1), millications(mgo_wt, "MgO", 1)
    ca, al = millications(cao_wt, "CaO", 1), millications(al2o3_wt, "Al2O3", 2)
    return {"r1": 4.0 * si - 11.0 * (na + k) - 2.0 * (fe + ti), "r2": 6.0 * ca + 2.0 * mg + al}


def streckeisen_coordinates(
    q_wt: ArrayLike,
    or_wt: ArrayLike,
    ab_wt: ArrayLike,
    an_wt: ArrayLike,
    ne_wt: ArrayLike,
    lc_wt: ArrayLike,
    kp_wt: ArrayLike,
) -> dict[str, Floats]:
    """Coordinates of the normative diagram: ``q_prime``, ``f_prime`` and ``anor``, per cent, shape (n,).

    Q' = 100 Q/(Q + Or + Ab + An), F' = 100 (Ne + Lc + Kp)/(Ne + Lc + Kp + Or + Ab + An), ANOR = 100 An/(Or + An), here
    from the CIPW weight norm (the original takes a molecular norm). Coordinates only: the slanted field lines are not
    reproduced. NaN where a sum is zero. Source [streckeisen1979].
    """
    q, orthoclase, ab, an = floats(q_wt, or_wt, ab_wt, an_wt)
    foids = np.add(np.add(ne_wt, lc_wt), kp_wt)
    feldspar = orthoclase + ab + an
    return {
        "q_prime": 100.0 * quotient(q, q + feldspar),
        "f_prime": 100.0 * quotient(foids, foids + feldspar),
        "anor": 100.0 * quotient(an, orthoclase + an),
    }


def rittmann_index(sio2_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike) -> Floats:
    """Rittmann's serial index (Na2O + K2O)^2/(SiO2 - 43), raw wt%, shape (n,); NaN where SiO2 is at most 43.

    Usage from memory: below 1.8 calcic, 1.8-3.3 calc-alkaline, 3.3-9 alkaline, above 9 peralkaline.
    Source [rittmann1957].
    """
    sio2, na2o, k2o = floats(sio2_wt, na2o_wt, k2o_wt)
    return quotient((na2o + k2o) ** 2, sio2 - RITTMANN_SIO2_WT)


def alkali_lime_index(sio2_wt: ArrayLike, cao_wt: ArrayLike, alkalis_wt: ArrayLike) -> float:
    """Peacock's alkali-lime index of a suite: SiO2 (wt%) at which CaO = Na2O + K2O, by a straight-line fit.

    Arrays of the suite's samples, shape (n,); NaN samples are left out. NaN where fewer than two samples are left,
    where SiO2 does not vary or where alkalis do not rise against lime. Below 51 alkalic, 51-56 alkali-calcic, 56-61
    calc-alkalic, above 61 calcic. Not defined for one sample. Source [peacock1931].
    """
    sio2, excess = floats(sio2_wt, np.subtract(alkalis_wt, cao_wt))
    known = np.isfinite(sio2) & np.isfinite(excess)
    x, y = sio2[known], excess[known]
    if len(x) < 2 or np.ptp(x) == 0.0:
        return float("nan")
    deviation = x - x.mean()
    slope = float(np.sum(deviation * y) / np.sum(deviation**2))
    return float(x.mean() - y.mean() / slope) if slope > 0.0 else float("nan")
