"""Indices of weathering and hydrothermal alteration from majors, raw wt%."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.granite_indices import moles, silicate_calcium_moles
from registry.petrology.quotients import Floats, floats, quotient

#: wt% of oxygen taken up per wt% of FeO when it turns into Fe2O3 on ignition: M(O)/(2 M(FeO)).
OXYGEN_UPTAKE_PER_FEO = 0.111


def cia(al2o3_wt: ArrayLike, cao_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike, p2o5_wt: ArrayLike) -> Floats:
    """Chemical index of alteration, molar 100 Al2O3/(Al2O3 + CaO* + Na2O + K2O), from wt%, shape (n,).

    CaO* is lime outside apatite, zero where phosphorus exceeds it (the catalogue warns). It is not capped at Na2O:
    that rule is for sediments. Carbonate is not taken off. Fresh granite 45-55, basalt 30-45. [nesbitt1982].
    """
    lime = np.maximum(silicate_calcium_moles(cao_wt, p2o5_wt), 0.0)
    alumina = moles(al2o3_wt, "Al2O3")
    return 100.0 * quotient(alumina, alumina + lime + moles(na2o_wt, "Na2O") + moles(k2o_wt, "K2O"))


def cia_sediment(
    al2o3_wt: ArrayLike, cao_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike, p2o5_wt: ArrayLike
) -> Floats:
    """``cia`` with CaO* held to Na2O where it is greater, the rule for sediments of [mclennan1993]; shape (n,)."""
    soda = moles(na2o_wt, "Na2O")
    lime = np.minimum(np.maximum(silicate_calcium_moles(cao_wt, p2o5_wt), 0.0), soda)
    alumina = moles(al2o3_wt, "Al2O3")
    return 100.0 * quotient(alumina, alumina + lime + soda + moles(k2o_wt, "K2O"))


def alteration_index(k2o_wt: ArrayLike, mgo_wt: ArrayLike, na2o_wt: ArrayLike, cao_wt: ArrayLike) -> Floats:
    """Alteration index 100 (K2O + MgO)/(K2O + MgO + Na2O + CaO), wt%, shape (n,). Least altered about 30-65.

    Sericite and chlorite raise it, plagioclase lowers it. Source [ishikawa1976], from memory.
    """
    gained, lost = floats(np.add(k2o_wt, mgo_wt), np.add(na2o_wt, cao_wt))
    return 100.0 * quotient(gained, gained + lost)


def ccpi(mgo_wt: ArrayLike, feot_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike) -> Floats:
    """Chlorite-carbonate-pyrite index 100 (MgO + FeOt)/(MgO + FeOt + Na2O + K2O), wt%, shape (n,).

    Fresh felsic rocks about 15-45, mafic ones higher. Source [large2001], from memory.
    """
    gained, lost = floats(np.add(mgo_wt, feot_wt), np.add(na2o_wt, k2o_wt))
    return 100.0 * quotient(gained, gained + lost)


def hughes_x(na2o_wt: ArrayLike, k2o_wt: ArrayLike) -> Floats:
    """Abscissa of the igneous spectrum, 100 K2O/(Na2O + K2O), wt%, shape (n,); the ordinate is Na2O + K2O.

    Left of the spectrum soda was gained, right of it potash; its limbs are not reproduced. Source [hughes1973].
    """
    na2o, k2o = floats(na2o_wt, k2o_wt)
    return 100.0 * quotient(k2o, na2o + k2o)


def loss_on_ignition_volatiles(loi_wt: ArrayLike, feo_wt: ArrayLike) -> Floats:
    """Volatiles driven off, LOI + 0.111 FeO, wt%, shape (n,): ferrous iron takes up oxygen on ignition.

    Upper bound: all FeO oxidised. Stoichiometry; a loss reported negative may so come out positive.
    """
    loi, feo = floats(loi_wt, feo_wt)
    return loi + OXYGEN_UPTAKE_PER_FEO * feo
