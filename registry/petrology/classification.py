"""Classes with one or two limits: silica, alumina, iron, alkali-lime, A-type."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.granite_indices import ferroan_boundary, mali_boundaries
from registry.petrology.quotients import floats, labels

SILICA_CLASSES = ("ultrabasic", "basic", "intermediate", "acid")
ALUMINA_CLASSES = ("peralkaline", "metaluminous", "peraluminous")
FE_CLASSES = ("magnesian", "ferroan")
MALI_CLASSES = ("calcic", "calc-alkalic", "alkali-calcic", "alkalic")
A_TYPE_CLASSES = ("not A-type", "A-type")
#: Normative quartz (wt%) that stands for the 5 % modal quartz of a granite [pearce1984].
GRANITE_Q_WT = 5.0
A_TYPE_GA_AL_10000 = 2.6  # [whalen1987]
A_TYPE_ZR_NB_CE_Y_PPM = 350.0  # [whalen1987]


def silica_class(sio2_vf_wt: ArrayLike) -> Any:
    """ultrabasic below 45, basic from 45, intermediate from 52 to 63, acid above 63, volatile-free wt%, shape (n,).

    Source [lemaitre2002]; acid above 66 is in print too.
    """
    (silica,) = floats(sio2_vf_wt)
    code = (silica >= 45.0).astype(np.intp) + (silica >= 52.0) + (silica > 63.0)
    return labels(np.where((silica >= 0.0) & (silica <= 100.0), code, -1), SILICA_CLASSES)


def alumina_class(a_cnk: ArrayLike, a_nk: ArrayLike) -> Any:
    """peralkaline A/NK < 1, peraluminous A/CNK > 1, metaluminous between, shape (n,). Source [shand1943]."""
    cnk, nk = floats(a_cnk, a_nk)
    known = np.isfinite(cnk) & np.isfinite(nk)
    code = np.select([nk < 1.0, cnk > 1.0], [0, 2], default=1)
    return labels(np.where(known, code, -1), ALUMINA_CLASSES)


def fe_class(fe_number: ArrayLike, sio2_vf_wt: ArrayLike) -> Any:
    """ferroan above FeOt/(FeOt + MgO) = 0.486 + 0.0046 SiO2 (volatile-free), else magnesian, shape (n,).

    Calibration: SiO2 from 48 [frost2008]. Source [frost2001].
    """
    number, silica = floats(fe_number, sio2_vf_wt)
    known = np.isfinite(number) & np.isfinite(silica)
    return labels(np.where(known, number > ferroan_boundary(silica), -1), FE_CLASSES)


def mali_class(mali: ArrayLike, sio2_vf_wt: ArrayLike) -> Any:
    """calcic, calc-alkalic, alkali-calcic or alkalic by the modified alkali-lime index, shape (n,).

    Volatile-free wt%; a point on a line belongs to the more alkalic side. SiO2 about 52-80. Source [frost2001].
    """
    index, silica = floats(mali, sio2_vf_wt)
    known = np.isfinite(index) & np.isfinite(silica)
    code = sum((index >= line).astype(np.intp) for line in mali_boundaries(silica))
    return labels(np.where(known, code, -1), MALI_CLASSES)


def a_type(ga_al_10000: ArrayLike, zr_nb_ce_y: ArrayLike, q_wt: ArrayLike) -> Any:
    """'A-type' where 10000 Ga/Al is above 2.6 and Zr + Nb + Ce + Y above 350 ppm, else 'not A-type', shape (n,).

    Both are asked, since highly fractionated granites pass on Ga/Al alone; one that fails decides. Granites only: None
    where normative quartz is at most 5 wt% or unknown. Source [whalen1987].
    """
    gallium, total, quartz = floats(ga_al_10000, zr_nb_ce_y, q_wt)
    fails = (gallium <= A_TYPE_GA_AL_10000) | (total <= A_TYPE_ZR_NB_CE_Y_PPM)
    passes = (gallium > A_TYPE_GA_AL_10000) & (total > A_TYPE_ZR_NB_CE_Y_PPM)
    code = np.select([~(quartz > GRANITE_Q_WT), fails, passes], [-1, 0, 1], default=-1)
    return labels(code, A_TYPE_CLASSES)
