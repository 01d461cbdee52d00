"""What a norm could not place: oxides without a partner, oxygen set free, silica that the minerals lack."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.constants import ATOMIC_WEIGHT, OXYGEN_FOR_CHLORINE, OXYGEN_FOR_FLUORINE, molar_mass
from registry.petrology.norm import cipw_norm, norm_inputs, norm_moles
from registry.petrology.norm_sequence import Moles, allot_accessories

Array = NDArray[np.float64]

#: Smaller amounts are rounding, wt%.
SMALLEST_WT = 1e-6
#: What each code says, for the reader of a norm.
NORM_WARNING_TEXTS = {
    "co2_exceeds_cao": "more CO2 than calcium can bind in calcite",
    "p2o5_exceeds_cao": "more P2O5 than calcium can bind in apatite",
    "f_exceeds_cao": "more F than calcium can bind in apatite and fluorite",
    "cl_exceeds_na2o": "more Cl than sodium can bind in halite",
    "so3_exceeds_na2o": "more SO3 than sodium can bind in thenardite",
    "s_exceeds_feo": "more S than ferrous iron can bind in pyrite",
    "cr2o3_exceeds_feo": "more Cr2O3 than ferrous iron can bind in chromite",
    "zro2_exceeds_sio2": "more ZrO2 than silica can bind in zircon",
    "oxygen_set_free": "F, Cl or S take the place of oxygen, which is in no mineral",
    "silica_deficit": "too little silica even without any saturated mineral: the minerals hold more than was analysed",
}


def norm_shortfalls(oxides: Mapping[str, ArrayLike], norm: Mapping[str, ArrayLike] | None = None) -> dict[str, Array]:
    """What makes up the residual of a norm, wt% by warning code (``NORM_WARNING_TEXTS``), zero or more.

    ``oxides`` as for ``cipw_norm``; ``norm`` its result for them, computed here where it is not given. All but
    ``silica_deficit`` are positive parts of ``norm_residual_wt``, the deficit is its negative part. NaN rows stay NaN.
    Source: mass balance; caps of ``norm_sequence``.
    """
    wt = norm_inputs(oxides)
    norm = cipw_norm(oxides) if norm is None else norm
    shape = wt["sio2_wt"].shape
    moles, _ = norm_moles(wt, lambda: np.empty(shape))
    early = allot_accessories(moles, lambda: np.empty(shape))
    zero = np.zeros(shape)
    left = {code: zero for code in NORM_WARNING_TEXTS}
    left["p2o5_exceeds_cao"] = (moles.p - early.ap) * molar_mass("P2O5")
    for code, given, bound, mass in (
        ("co2_exceeds_cao", moles.co2, early.cc, molar_mass("CO2")),
        ("f_exceeds_cao", moles.f, _fluorine_bound(early.f_in_ap, early.fr), ATOMIC_WEIGHT["F"]),
        ("cl_exceeds_na2o", moles.cl, early.hl, ATOMIC_WEIGHT["Cl"]),
        ("so3_exceeds_na2o", moles.so3, early.th, molar_mass("SO3")),
        ("s_exceeds_feo", moles.s, None if early.pr is None else 2.0 * early.pr, ATOMIC_WEIGHT["S"]),
        ("cr2o3_exceeds_feo", moles.cr, early.cm, molar_mass("Cr2O3")),
        ("zro2_exceeds_sio2", moles.zr, early.z, molar_mass("ZrO2")),
    ):
        if given is not None and bound is not None:
            left[code] = np.maximum(given - bound, 0.0) * mass
    left["oxygen_set_free"] = zero + _oxygen_set_free(moles, left)
    residual = np.asarray(norm["norm_residual_wt"], dtype=np.float64)
    deficit = sum(left.values()) - residual
    left["silica_deficit"] = np.where(deficit > SMALLEST_WT, deficit, 0.0 * deficit)
    bad = np.isnan(residual)
    return {code: np.where(bad, np.nan, amount) for code, amount in left.items()}


def norm_warnings(
    oxides: Mapping[str, ArrayLike], norm: Mapping[str, ArrayLike] | None = None
) -> dict[str, NDArray[np.bool_]]:
    """True by warning code where ``norm_shortfalls`` is above 1e-6 wt%; False in rows without a norm."""
    return {code: amount > SMALLEST_WT for code, amount in norm_shortfalls(oxides, norm).items()}


def _fluorine_bound(in_apatite: Array | None, fluorite: Array | None) -> Array | None:
    return None if in_apatite is None or fluorite is None else in_apatite + 2.0 * fluorite


def _oxygen_set_free(moles: Moles, left: Mapping[str, Array]) -> Array | float:
    """Oxygen of the oxides replaced by the F, Cl and S that found a place, wt%."""
    free: Array | float = 0.0
    if moles.f is not None:
        free = free + (moles.f * ATOMIC_WEIGHT["F"] - left["f_exceeds_cao"]) * OXYGEN_FOR_FLUORINE
    if moles.cl is not None:
        free = free + (moles.cl * ATOMIC_WEIGHT["Cl"] - left["cl_exceeds_na2o"]) * OXYGEN_FOR_CHLORINE
    if moles.s is not None:
        bound = moles.s * ATOMIC_WEIGHT["S"] - left["s_exceeds_feo"]
        free = free + bound * ATOMIC_WEIGHT["O"] / (2.0 * ATOMIC_WEIGHT["S"])
    return free
