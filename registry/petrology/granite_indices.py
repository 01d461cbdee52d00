"""Indices by which granitic rocks are classed: alumina saturation, alkali-lime, iron, silica saturation.

Molar ratios and the iron number do not depend on closure. The alkali-lime index does: the catalogue gives it the
volatile-free analysis, on which the published lines are drawn.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import molar_mass
from registry.petrology.quotients import Floats, floats, quotient

#: Moles of CaO that apatite takes per mole of P2O5: 10/3 on oxides (1.67 per mole of the element P) [frost2001].
APATITE_CAO_PER_P2O5 = 10.0 / 3.0

#: Boundaries of the modified alkali-lime index, constant, SiO2, SiO2 squared (volatile-free wt%) [frost2001], memory.
MALI_ALKALIC = (-41.86, 1.112, -0.00572)
MALI_ALKALI_CALCIC = (-44.72, 1.094, -0.00527)
MALI_CALC_ALKALIC = (-45.36, 1.0043, -0.00427)
#: Boundary of FeOt/(FeOt + MgO): constant, SiO2 (volatile-free wt%); ferroan above [frost2001].
FERROAN_LINE = (0.486, 0.0046)


def moles(oxide_wt: ArrayLike, formula: str) -> Floats:
    """wt% over molar mass."""
    return np.asarray(oxide_wt, dtype=np.float64) / molar_mass(formula)


def silicate_calcium_moles(cao_wt: ArrayLike, p2o5_wt: ArrayLike) -> Floats:
    """CaO - 10/3 P2O5 in moles a 100 g: lime outside apatite; negative where phosphorus exceeds lime."""
    lime, phosphorus = floats(moles(cao_wt, "CaO"), moles(p2o5_wt, "P2O5"))
    return lime - APATITE_CAO_PER_P2O5 * phosphorus


def a_cnk(al2o3_wt: ArrayLike, cao_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike) -> Floats:
    """A/CNK, molar Al2O3/(CaO + Na2O + K2O), from wt%, shape (n,). Source [shand1943]."""
    alumina = moles(al2o3_wt, "Al2O3")
    return quotient(alumina, moles(cao_wt, "CaO") + moles(na2o_wt, "Na2O") + moles(k2o_wt, "K2O"))


def a_nk(al2o3_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike) -> Floats:
    """A/NK, molar Al2O3/(Na2O + K2O), from wt%, shape (n,). Source [shand1943]."""
    return quotient(moles(al2o3_wt, "Al2O3"), moles(na2o_wt, "Na2O") + moles(k2o_wt, "K2O"))


def asi(al2o3_wt: ArrayLike, cao_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike, p2o5_wt: ArrayLike) -> Floats:
    """Alumina saturation index, molar Al2O3/(CaO - 10/3 P2O5 + Na2O + K2O), from wt%, shape (n,).

    Where phosphorus exceeds lime the lime term is zero, and the catalogue warns. Source [frost2001], [zen1988].
    """
    lime = np.maximum(silicate_calcium_moles(cao_wt, p2o5_wt), 0.0)
    return quotient(moles(al2o3_wt, "Al2O3"), lime + moles(na2o_wt, "Na2O") + moles(k2o_wt, "K2O"))


def agpaitic_index(al2o3_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike) -> Floats:
    """Agpaitic index, molar (Na + K)/Al, from wt%, shape (n,). Above 1 peralkaline, above 1.2 agpaitic.

    Source [liegeois1987]: 0.87 and more for alkaline granites, from memory.
    """
    return quotient(moles(na2o_wt, "Na2O") + moles(k2o_wt, "K2O"), moles(al2o3_wt, "Al2O3"))


def alkalinity_index_frost(al2o3_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike) -> Floats:
    """Alkalinity index Al - (K + Na), moles of cations a 100 g, from wt%, shape (n,); negative is peralkaline.

    Source [frost2008], from memory.
    """
    alumina, soda, potash = floats(moles(al2o3_wt, "Al2O3"), moles(na2o_wt, "Na2O"), moles(k2o_wt, "K2O"))
    return 2.0 * (alumina - soda - potash)


def mali(na2o_vf_wt: ArrayLike, k2o_vf_wt: ArrayLike, cao_vf_wt: ArrayLike) -> Floats:
    """Modified alkali-lime index Na2O + K2O - CaO, wt%, shape (n,); volatile-free in the catalogue. [frost2001]."""
    na2o, k2o, cao = floats(na2o_vf_wt, k2o_vf_wt, cao_vf_wt)
    return na2o + k2o - cao


def mali_boundaries(sio2_vf_wt: ArrayLike) -> tuple[Floats, Floats, Floats]:
    """Index at the alkalic/alkali-calcic, alkali-calcic/calc-alkalic and calc-alkalic/calcic lines. [frost2001]."""
    (silica,) = floats(sio2_vf_wt)

    def line(coefficients: tuple[float, float, float]) -> Floats:
        constant, linear, square = coefficients
        return constant + linear * silica + square * silica**2

    return line(MALI_ALKALIC), line(MALI_ALKALI_CALCIC), line(MALI_CALC_ALKALIC)


def fe_number(feot_wt: ArrayLike, mgo_wt: ArrayLike) -> Floats:
    """FeOt/(FeOt + MgO) by weight, shape (n,); NaN where both are zero. Source [frost2001]."""
    feot, mgo = floats(feot_wt, mgo_wt)
    return quotient(feot, feot + mgo)


def ferroan_boundary(sio2_vf_wt: ArrayLike) -> Floats:
    """FeOt/(FeOt + MgO) at the line between ferroan (above) and magnesian, 0.486 + 0.0046 SiO2. [frost2001]."""
    (silica,) = floats(sio2_vf_wt)
    return FERROAN_LINE[0] + FERROAN_LINE[1] * silica


def fssi(q_wt: ArrayLike, lc_wt: ArrayLike, ne_wt: ArrayLike, kp_wt: ArrayLike) -> Floats:
    """Feldspathoid silica-saturation index (Q - [Lc + 2 (Ne + Kp)])/100 of the CIPW weight norm, shape (n,).

    Above 0 silica-saturated. Both terms are taken over 100, as the unit demands. Source [frost2008], from memory.
    """
    q, lc, ne, kp = floats(q_wt, lc_wt, ne_wt, kp_wt)
    return (q - (lc + 2.0 * (ne + kp))) / 100.0
