"""The cation norm of Barth and Niggli: the minerals of the CIPW sequence in per cent of cations."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.norm import CHUNK_ROWS, NORM_END_MEMBERS, NORM_MINERALS, norm_inputs, norm_moles
from registry.petrology.norm_sequence import CAO_PER_P2O5, Minerals, Scratch, Take, allot_minerals

Array = NDArray[np.float64]

CATION_COLUMNS = tuple(name.removesuffix("_wt") + "_cat" for name in (*NORM_MINERALS, *NORM_END_MEMBERS))
#: Cations per mole as counted in ``norm_sequence``: twice those of the formula unit where a mole holds an alkali
#: oxide or Al2O3 (or 10 = 2 x 5). Halogens and sulphide are anions and do not count: hl, fr and pr have one cation.
CATIONS = {
    "q": 1.0, "c": 2.0, "z": 2.0, "or": 10.0, "ab": 10.0, "an": 5.0, "lc": 8.0, "ne": 6.0, "kp": 6.0, "hl": 1.0,
    "th": 3.0, "ac": 8.0, "ns": 3.0, "ks": 3.0, "wo": 2.0, "cs": 3.0, "mt": 3.0, "cm": 3.0, "hm": 2.0, "il": 2.0,
    "tn": 3.0, "pf": 2.0, "ru": 1.0, "ap": CAO_PER_P2O5 + 2.0, "fr": 1.0, "pr": 1.0, "cc": 2.0,
}  # fmt: skip


def cation_norm(oxides: Mapping[str, ArrayLike]) -> dict[str, Array]:
    """The Barth-Niggli norm in cation per cent (sum 100) of the analyses as given, iron split.

    ``oxides`` and errors as for ``norm.cipw_norm``. Returns ``CATION_COLUMNS``, float64 of the broadcast shape: the
    same minerals and end members with ``_cat``. Cations that found no partner are outside the sum, as are those of
    silica that a deficient rock lacks (``norm_warnings``). NaN, infinite or negative values, and an analysis without
    any oxide, give NaN in that row only.
    Source: [barth1962], [niggli1936] (from memory).
    """
    arrays = norm_inputs(oxides)
    shape = arrays["sio2_wt"].shape
    flat = {name: array.reshape(-1) for name, array in arrays.items()}
    rows = flat["sio2_wt"].shape[0]
    result = np.zeros((len(CATION_COLUMNS), rows))
    scratch = Scratch(min(rows, CHUNK_ROWS))
    for start in range(0, rows, CHUNK_ROWS):
        out = result[:, start : start + CHUNK_ROWS]
        chunk = {name: array[start : start + CHUNK_ROWS] for name, array in flat.items()}
        _norm_of_chunk(chunk, out, scratch.rows(out.shape[1]))
    return {name: result[position].reshape(shape) for position, name in enumerate(CATION_COLUMNS)}


def _norm_of_chunk(wt: Mapping[str, Array], out: Array, take: Take) -> None:
    """Fill ``out``, shape (columns, rows), with the cation norm of the chunk."""
    possible = np.ones(out.shape[1], dtype=bool)
    for array in wt.values():
        possible &= (array >= 0.0) & (array < np.inf)
    if not possible.all():
        wt = {name: np.where(possible, array, 0.0) for name, array in wt.items()}
    cations = _cations(allot_minerals(norm_moles(wt, take)[0], take))
    total = sum(cations[name.removesuffix("_wt")] for name in NORM_MINERALS if name.removesuffix("_wt") in cations)
    factor = 100.0 / np.where(possible & (total > 0.0), total, np.nan)
    for position, column in enumerate(CATION_COLUMNS):
        if (amount := cations.get(column.removesuffix("_cat"))) is not None:
            np.multiply(amount, factor, out=out[position])
    impossible = np.isnan(factor)
    if impossible.any():
        out[:, impossible] = np.nan


def _cations(minerals: Minerals) -> dict[str, Array]:
    """Cations by mineral; those that were not analysed for are left out."""
    moles = {name: getattr(minerals, "or_" if name == "or" else name) for name in CATIONS}
    result = {name: amount * CATIONS[name] for name, amount in moles.items() if amount is not None}
    share = minerals.mg_share
    result |= {"di": 4.0 * minerals.di, "hy": 2.0 * minerals.hy, "ol": 3.0 * minerals.ol}
    result |= {"di_wo": 0.5 * result["di"], "di_en": 0.5 * result["di"] * share}
    result |= {"hy_en": result["hy"] * share, "ol_fo": result["ol"] * share}
    result["di_fs"] = 0.5 * result["di"] - result["di_en"]
    result["hy_fs"] = result["hy"] - result["hy_en"]
    result["ol_fa"] = result["ol"] - result["ol_fo"]
    return result
