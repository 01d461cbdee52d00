"""Ratios of trace elements, anomalies on chondrite-normalised patterns, and the sum of Whalen's four elements.

All ratios are by mass, ppm over ppm (oxides turned into the element or into ppm first). A denominator of zero gives
NaN, never infinity.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import oxide_from_element
from registry.petrology.normalising import CHONDRITE_MCDONOUGH, normalised
from registry.petrology.quotients import Floats, floats, quotient

PPM_PER_WT = 1e4
#: ppm of the element per wt% of its oxide.
K_PPM_PER_K2O_WT = PPM_PER_WT / oxide_from_element("K2O")
TI_PPM_PER_TIO2_WT = PPM_PER_WT / oxide_from_element("TiO2")
AL_PPM_PER_AL2O3_WT = PPM_PER_WT / oxide_from_element("Al2O3")

#: quantity -> (numerator column, denominator column, factor): value = numerator * factor / denominator.
RATIOS: dict[str, tuple[str, str, float]] = {
    "la_yb": ("la_ppm", "yb_ppm", 1.0),
    "la_yb_n": ("la_ppm", "yb_ppm", CHONDRITE_MCDONOUGH["Yb"] / CHONDRITE_MCDONOUGH["La"]),
    "k_rb": ("k2o_wt", "rb_ppm", K_PPM_PER_K2O_WT),
    "rb_sr": ("rb_ppm", "sr_ppm", 1.0),
    "nb_ta": ("nb_ppm", "ta_ppm", 1.0),
    "zr_hf": ("zr_ppm", "hf_ppm", 1.0),
    "sr_y": ("sr_ppm", "y_ppm", 1.0),
    "v_sc": ("v_ppm", "sc_ppm", 1.0),
    "ga_al_10000": ("ga_ppm", "al2o3_wt", 1e4 / AL_PPM_PER_AL2O3_WT),
    "cu_zr": ("cu_ppm", "zr_ppm", 1.0),
    "cu_pd": ("cu_ppm", "pd_ppm", 1.0),
    "pd_pt": ("pd_ppm", "pt_ppm", 1.0),
    "zr_tio2": ("zr_ppm", "tio2_wt", 1.0 / PPM_PER_WT),
    "nb_y": ("nb_ppm", "y_ppm", 1.0),
    "al2o3_tio2": ("al2o3_wt", "tio2_wt", 1.0),
    "ti_zr": ("tio2_wt", "zr_ppm", TI_PPM_PER_TIO2_WT),
    "th_yb": ("th_ppm", "yb_ppm", 1.0),
    "zr_y": ("zr_ppm", "y_ppm", 1.0),
    "y_nb": ("y_ppm", "nb_ppm", 1.0),
    "y_ho": ("y_ppm", "ho_ppm", 1.0),
}


def element_ratio(quantity: str, numerator: ArrayLike, denominator: ArrayLike) -> Floats:
    """One ratio of ``RATIOS`` from its two columns in their own units, shape (n,); ValueError for an unknown name."""
    if quantity not in RATIOS:
        raise ValueError(f"no ratio '{quantity}'; there are {', '.join(RATIOS)}")
    return quotient(np.multiply(numerator, RATIOS[quantity][2]), denominator)


def anomaly(element_n: ArrayLike, before_n: ArrayLike, after_n: ArrayLike) -> Floats:
    """Normalised element over the geometric mean of its two neighbours, shape (n,); NaN where one is not above 0."""
    element, before, after = floats(element_n, before_n, after_n)
    return quotient(element, np.sqrt(np.where((before > 0.0) & (after > 0.0), before * after, np.nan)))


def eu_anomaly(eu_ppm: ArrayLike, sm_ppm: ArrayLike, gd_ppm: ArrayLike) -> Floats:
    """Eu/Eu* = EuN/sqrt(SmN GdN), chondrite [mcdonough1995], shape (n,). Geometric mean [taylor1985]."""
    return anomaly(normalised(eu_ppm, "Eu"), normalised(sm_ppm, "Sm"), normalised(gd_ppm, "Gd"))


def ce_anomaly(ce_ppm: ArrayLike, la_ppm: ArrayLike, pr_ppm: ArrayLike) -> Floats:
    """Ce/Ce* = CeN/sqrt(LaN PrN), chondrite [mcdonough1995], shape (n,)."""
    return anomaly(normalised(ce_ppm, "Ce"), normalised(la_ppm, "La"), normalised(pr_ppm, "Pr"))


def zr_nb_ce_y(zr_ppm: ArrayLike, nb_ppm: ArrayLike, ce_ppm: ArrayLike, y_ppm: ArrayLike) -> Floats:
    """Zr + Nb + Ce + Y, ppm, shape (n,). Source [whalen1987]."""
    zr, nb, ce, y = floats(zr_ppm, nb_ppm, ce_ppm, y_ppm)
    return zr + nb + ce + y


def v_sc_line_loucks(sio2_vf_wt: ArrayLike) -> Floats:
    """V/Sc at Loucks' line, 32.5 - 0.385 SiO2, shape (n,). Provisional: from memory, range of SiO2 unknown.

    Source [loucks2014].
    """
    (silica,) = floats(sio2_vf_wt)
    return 32.5 - 0.385 * silica


def is_adakite_like(
    sio2_vf_wt: ArrayLike,
    al2o3_vf_wt: ArrayLike,
    mgo_vf_wt: ArrayLike,
    sr_ppm: ArrayLike,
    y_ppm: ArrayLike,
    yb_ppm: ArrayLike,
    la_ppm: ArrayLike,
) -> np.ndarray:
    """Inside the box SiO2 >= 56, Al2O3 >= 15, MgO < 3, Sr >= 400, Y <= 18, Yb <= 1.9, Sr/Y >= 20, La/Yb >= 20.

    Booleans, shape (n,); false where a value is missing. The source itself doubts the box's genetic and
    metallogenic meaning. Source [richards2007].
    """
    sio2, al2o3, mgo, sr, y, yb, la = floats(sio2_vf_wt, al2o3_vf_wt, mgo_vf_wt, sr_ppm, y_ppm, yb_ppm, la_ppm)
    majors = (sio2 >= 56.0) & (al2o3 >= 15.0) & (mgo < 3.0)
    traces = (sr >= 400.0) & (y <= 18.0) & (yb <= 1.9)
    return majors & traces & (quotient(sr, y) >= 20.0) & (quotient(la, yb) >= 20.0)
