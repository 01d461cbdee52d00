"""The CIPW weight norm, complete: the normative minerals of an analysis in wt%.

The sequence in moles stands in ``norm_sequence``, remarks on a norm in ``norm_warnings``, the cation norm in
``norm_cation``.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.constants import ATOMIC_WEIGHT, molar_mass
from registry.petrology.norm_sequence import CAO_PER_P2O5, Moles, allot_minerals

Array = NDArray[np.float64]

#: The oxides that the norm uses, with their formulas; the order is that of the sum.
NORM_OXIDES = {
    "sio2_wt": "SiO2", "tio2_wt": "TiO2", "al2o3_wt": "Al2O3", "fe2o3_wt": "Fe2O3", "feo_wt": "FeO", "mno_wt": "MnO",
    "mgo_wt": "MgO", "cao_wt": "CaO", "na2o_wt": "Na2O", "k2o_wt": "K2O", "p2o5_wt": "P2O5", "cr2o3_wt": "Cr2O3",
    "nio_wt": "NiO", "zro2_wt": "ZrO2", "v2o3_wt": "V2O3", "bao_wt": "BaO", "sro_wt": "SrO", "li2o_wt": "Li2O",
    "co2_wt": "CO2", "s_wt": "S", "f_wt": "F", "cl_wt": "Cl", "so3_wt": "SO3",
}  # fmt: skip
_MAJORS = ("sio2_wt", "tio2_wt", "al2o3_wt", "fe2o3_wt", "feo_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt", "p2o5_wt")
#: Columns of ``norm_sheet`` in its order.
NORM_MINERALS = tuple(
    f"{symbol}_wt"
    for symbol in (
        "q", "c", "z", "or", "ab", "an", "lc", "ne", "kp", "hl", "th", "ac", "ns", "ks", "di", "wo", "hy", "ol", "cs",
        "mt", "cm", "hm", "il", "tn", "pf", "ru", "ap", "fr", "pr", "cc",
    )
)  # fmt: skip
NORM_END_MEMBERS = ("di_wo_wt", "di_en_wt", "di_fs_wt", "hy_en_wt", "hy_fs_wt", "ol_fo_wt", "ol_fa_wt")
NORM_COLUMNS = (*NORM_MINERALS, *NORM_END_MEMBERS, "norm_total_wt", "norm_residual_wt")
_ROW = {name: position for position, name in enumerate(NORM_COLUMNS)}
#: Rows computed at a time, so that the arrays of a step stay in the processor's cache.
CHUNK_ROWS = 16_384

_SIO2, _AL2O3, _MGO, _K2O = (molar_mass(oxide) for oxide in ("SiO2", "Al2O3", "MgO", "K2O"))
_HALF_OXYGEN = 0.5 * ATOMIC_WEIGHT["O"]


def cipw_norm(oxides: Mapping[str, ArrayLike]) -> dict[str, Array]:
    """The CIPW norm in wt% of the analyses as given: neither closed to 100 nor split for iron.

    ``oxides``: wt% by the names of ``NORM_OXIDES``, arrays that broadcast together, or scalars. Missing names count as
    zero; other columns of a composition are left aside. CO2 makes calcite, F fluorapatite and fluorite, Cl
    halite, S pyrite, SO3 thenardite where they are given. Mn and Ni go with ferrous iron, Sr and Ba with calcium, Li
    with sodium, V with ferric iron: the minerals carry the mean mass of each group, and so sum to the oxides.

    Returns the columns of ``NORM_COLUMNS``, float64 of the broadcast shape: 30 minerals, end members of di, hy and ol,
    ``norm_total_wt`` (sum of the minerals) and ``norm_residual_wt`` (oxides used less that sum: what found no partner
    and the oxygen set free by F, Cl and S count positive, a silica deficit negative; ``norm_warnings`` names them).
    A row with NaN, an infinite or a negative value gives NaN in that row only.

    Raises ValueError for a name that no composition has, for total iron without a split and for shapes that do not
    broadcast.

    Range: igneous rocks; the norm exists for any oxide analysis and is then a mere recasting.
    Source: [kelsey1965]; [cox1979] appendix 3; mean masses [verma2003] (steps from memory).
    """
    arrays = norm_inputs(oxides)
    shape = arrays["sio2_wt"].shape
    flat = {name: array.reshape(-1) for name, array in arrays.items()}
    rows = flat["sio2_wt"].shape[0]
    result = np.empty((len(NORM_COLUMNS), rows))
    for start in range(0, rows, CHUNK_ROWS):
        chunk = slice(start, start + CHUNK_ROWS)
        _norm_of_chunk({name: array[chunk] for name, array in flat.items()}, result[:, chunk])
    return {name: result[position].reshape(shape) for name, position in _ROW.items()}


def norm_inputs(oxides: Mapping[str, ArrayLike]) -> dict[str, Array]:
    """The oxides that the norm uses, as arrays of one shape: the majors always, the others where they are given.

    ValueError as ``cipw_norm`` says.
    """
    unknown = sorted(set(oxides) - set(NORM_OXIDES) - set(CHOSEN_INDEX) - {"fe2o3t_wt", "feot_wt", "total_wt"})
    if unknown:
        raise ValueError(f"the norm knows no oxides {unknown}; expected names such as {list(NORM_OXIDES)[:3]}")
    totals = sorted({"fe2o3t_wt", "feot_wt", "fe2o3t_reported_wt"} & set(oxides))
    if totals and not {"fe2o3_wt", "feo_wt"} & set(oxides):
        raise ValueError(
            f"the norm needs ferrous and ferric iron apart; found only {totals}, expected 'feo_wt' and 'fe2o3_wt'; "
            "split the iron first (registry.petrology.iron)"
        )
    used = {name: np.asarray(oxides[name], dtype=np.float64) for name in NORM_OXIDES if name in oxides}
    for name in _MAJORS:
        used.setdefault(name, np.zeros(()))
    try:
        shape = np.broadcast_shapes(*(array.shape for array in used.values()))
    except ValueError as error:
        found = {name: array.shape for name, array in used.items()}
        raise ValueError(f"the oxides of a norm must have one shape or broadcast to one; found {found}") from error
    return {name: np.broadcast_to(array, shape) for name, array in used.items()}


def norm_moles(wt: Mapping[str, Array]) -> tuple[Moles, dict[str, Any]]:
    """Moles per 100 g for ``norm_sequence``, and the mean masses (g/mol) of the groups ``fe2 ca na fe3``."""
    moles = {name: wt[name] * (1.0 / molar_mass(NORM_OXIDES[name])) for name in wt}
    fe2, fe2_mass = _group(wt, moles, "feo_wt", "mno_wt", "nio_wt")
    ca, ca_mass = _group(wt, moles, "cao_wt", "sro_wt", "bao_wt")
    na, na_mass = _group(wt, moles, "na2o_wt", "li2o_wt")
    fe3, fe3_mass = _group(wt, moles, "fe2o3_wt", "v2o3_wt")
    grouped = Moles(
        si=moles["sio2_wt"], ti=moles["tio2_wt"], al=moles["al2o3_wt"], fe3=fe3, fe2=fe2, mg=moles["mgo_wt"], ca=ca,
        na=na, k=moles["k2o_wt"], p=moles["p2o5_wt"], cr=moles.get("cr2o3_wt"), zr=moles.get("zro2_wt"),
        co2=moles.get("co2_wt"), s=moles.get("s_wt"), so3=moles.get("so3_wt"), f=moles.get("f_wt"),
        cl=moles.get("cl_wt"),
    )  # fmt: skip
    return grouped, {"fe2": fe2_mass, "ca": ca_mass, "na": na_mass, "fe3": fe3_mass}


def _group(wt: Mapping[str, Array], moles: Mapping[str, Array], *names: str) -> tuple[Array, Any]:
    """Moles of a group and its mean mass, sum of the masses over sum of the moles; 0 where the group is absent."""
    present = [name for name in names if name in wt]
    if len(present) == 1:
        return moles[present[0]], molar_mass(NORM_OXIDES[present[0]])
    mass, amount = wt[present[0]], moles[present[0]]
    for name in present[1:]:
        mass, amount = mass + wt[name], amount + moles[name]
    return amount, mass / np.maximum(amount, 1e-300)


def _norm_of_chunk(wt: Mapping[str, Array], out: Array) -> None:
    """Fill ``out``, shape (columns, rows), with the norm of the chunk."""
    used, lowest = wt["sio2_wt"], wt["sio2_wt"]
    for name, array in wt.items():
        if name != "sio2_wt":
            used, lowest = used + array, np.minimum(lowest, array)
    possible = (lowest >= 0.0) & (used < np.inf)
    if not possible.all():
        wt = {name: np.where(possible, array, 0.0) for name, array in wt.items()}

    moles, mass = norm_moles(wt)
    minerals = allot_minerals(moles)
    _weigh(minerals, mass, out)
    total = out[_ROW["norm_total_wt"]]
    np.add(out[0], out[1], out=total)
    for position in range(2, len(NORM_MINERALS)):
        if getattr(minerals, _FIELDS[position]) is not None:
            total += out[position]
    np.subtract(used, total, out=out[_ROW["norm_residual_wt"]])
    if not possible.all():
        out[:, ~possible] = np.nan


_FIELDS = tuple({"or_wt": "or_"}.get(name, name.removesuffix("_wt")) for name in NORM_MINERALS)


def _weigh(minerals: Any, mass: Mapping[str, Any], out: Array) -> None:
    """Moles times molar masses; the masses are composed of the oxides with the mean masses of the groups."""
    m, fe2, ca, na, fe3 = minerals, mass["fe2"], mass["ca"], mass["na"], mass["fe3"]

    def put(name: str, amount: Array | None, molar: Any) -> None:
        row = out[_ROW[name]]
        if amount is None:
            row[...] = 0.0
        else:
            np.multiply(amount, molar, out=row)

    put("q_wt", m.q, _SIO2)
    put("c_wt", m.c, _AL2O3)
    put("z_wt", m.z, molar_mass("ZrO2") + _SIO2)
    put("or_wt", m.or_, _K2O + _AL2O3 + 6.0 * _SIO2)
    put("lc_wt", m.lc, _K2O + _AL2O3 + 4.0 * _SIO2)
    put("kp_wt", m.kp, _K2O + _AL2O3 + 2.0 * _SIO2)
    put("ab_wt", m.ab, na + (_AL2O3 + 6.0 * _SIO2))
    put("ne_wt", m.ne, na + (_AL2O3 + 2.0 * _SIO2))
    put("an_wt", m.an, ca + (_AL2O3 + 2.0 * _SIO2))
    put("hl_wt", m.hl, 0.5 * na + (ATOMIC_WEIGHT["Cl"] - _HALF_OXYGEN))
    put("th_wt", m.th, na + molar_mass("SO3"))
    put("ac_wt", m.ac, na + fe3 + 4.0 * _SIO2)
    put("ns_wt", m.ns, na + _SIO2)
    put("ks_wt", m.ks, _K2O + _SIO2)
    put("cs_wt", m.cs, 2.0 * ca + _SIO2)
    put("mt_wt", m.mt, fe2 + fe3)
    put("cm_wt", m.cm, fe2 + molar_mass("Cr2O3"))
    put("hm_wt", m.hm, fe3)
    put("il_wt", m.il, fe2 + molar_mass("TiO2"))
    put("tn_wt", m.tn, ca + (molar_mass("TiO2") + _SIO2))
    put("pf_wt", m.pf, ca + molar_mass("TiO2"))
    put("ru_wt", m.ru, molar_mass("TiO2"))
    put("ap_wt", m.ap, CAO_PER_P2O5 * ca + molar_mass("P2O5"))
    if m.f_in_ap is not None:
        out[_ROW["ap_wt"]] += m.f_in_ap * (ATOMIC_WEIGHT["F"] - _HALF_OXYGEN)
    put("fr_wt", m.fr, ca + 2.0 * (ATOMIC_WEIGHT["F"] - _HALF_OXYGEN))
    put("pr_wt", m.pr, fe2 + (2.0 * ATOMIC_WEIGHT["S"] - ATOMIC_WEIGHT["O"]))
    put("cc_wt", m.cc, ca + molar_mass("CO2"))

    wollastonite, ferrosilite = ca + _SIO2, fe2 + _SIO2
    di_mg, hy_mg, ol_mg = m.di * m.mg_share, m.hy * m.mg_share, m.ol * m.mg_share
    put("wo_wt", m.wo, wollastonite)
    put("di_wo_wt", m.di, wollastonite)
    put("di_en_wt", di_mg, _MGO + _SIO2)
    put("di_fs_wt", m.di - di_mg, ferrosilite)
    put("hy_en_wt", hy_mg, _MGO + _SIO2)
    put("hy_fs_wt", m.hy - hy_mg, ferrosilite)
    put("ol_fo_wt", ol_mg, 2.0 * _MGO + _SIO2)
    put("ol_fa_wt", m.ol - ol_mg, 2.0 * fe2 + _SIO2)
    for group, parts in _PARTS.items():
        row = out[_ROW[group]]
        np.add(out[_ROW[parts[0]]], out[_ROW[parts[1]]], out=row)
        for part in parts[2:]:
            row += out[_ROW[part]]


_PARTS = {
    "di_wt": ("di_wo_wt", "di_en_wt", "di_fs_wt"),
    "hy_wt": ("hy_en_wt", "hy_fs_wt"),
    "ol_wt": ("ol_fo_wt", "ol_fa_wt"),
}
