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
from registry.petrology.norm_sequence import CAO_PER_P2O5, Minerals, Moles, Scratch, Take, allot_minerals

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
#: Added to the sum as they are written; di, hy and ol follow when their end members are.
_IN_TOTAL = frozenset(NORM_MINERALS) - {"di_wt", "hy_wt", "ol_wt"}
_ROW = {name: position for position, name in enumerate(NORM_COLUMNS)}
#: Rows computed at a time, so that the arrays of a step stay in the processor's cache.
CHUNK_ROWS = 16_384

_PER_MASS = {column: 1.0 / molar_mass(oxide) for column, oxide in NORM_OXIDES.items()}
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
    Source: [cross1902], [washington1917]; steps of [kelsey1965] and [cox1979] appendix 3; mean masses [verma2003],
    weights of apatite, pyrite and fluorite that close [pruseth2009] (steps from memory).
    """
    arrays = norm_inputs(oxides)
    shape = arrays["sio2_wt"].shape
    flat = {name: array.reshape(-1) for name, array in arrays.items()}
    rows = flat["sio2_wt"].shape[0]
    result = np.empty((len(NORM_COLUMNS), rows))
    scratch = Scratch(min(rows, CHUNK_ROWS))
    for start in range(0, rows, CHUNK_ROWS):
        out = result[:, start : start + CHUNK_ROWS]
        chunk = {name: array[start : start + CHUNK_ROWS] for name, array in flat.items()}
        _norm_of_chunk(chunk, out, scratch.rows(out.shape[1]))
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


def norm_moles(wt: Mapping[str, Array], take: Take) -> tuple[Moles, dict[str, Any]]:
    """Moles per 100 g for ``norm_sequence``, and the mean masses (g/mol) of the groups ``fe2 ca na fe3``.

    ``take`` gives memory; the moles are the caller's own.
    """
    return _grouped(wt, {name: np.multiply(array, _PER_MASS[name], take()) for name, array in wt.items()}, take)


def _grouped(wt: Mapping[str, Array], moles: Mapping[str, Array], take: Take) -> tuple[Moles, dict[str, Any]]:
    fe2_mass = _gather(wt, moles, take, "feo_wt", "mno_wt", "nio_wt")
    ca_mass = _gather(wt, moles, take, "cao_wt", "sro_wt", "bao_wt")
    na_mass = _gather(wt, moles, take, "na2o_wt", "li2o_wt")
    fe3_mass = _gather(wt, moles, take, "fe2o3_wt", "v2o3_wt")
    grouped = Moles(
        si=moles["sio2_wt"], ti=moles["tio2_wt"], al=moles["al2o3_wt"], fe3=moles["fe2o3_wt"], fe2=moles["feo_wt"],
        mg=moles["mgo_wt"], ca=moles["cao_wt"], na=moles["na2o_wt"], k=moles["k2o_wt"], p=moles["p2o5_wt"],
        cr=moles.get("cr2o3_wt"), zr=moles.get("zro2_wt"), co2=moles.get("co2_wt"), s=moles.get("s_wt"),
        so3=moles.get("so3_wt"), f=moles.get("f_wt"), cl=moles.get("cl_wt"),
    )  # fmt: skip
    return grouped, {"fe2": fe2_mass, "ca": ca_mass, "na": na_mass, "fe3": fe3_mass}


def _gather(wt: Mapping[str, Array], moles: Mapping[str, Array], take: Take, first: str, *others: str) -> Any:
    """Add the moles of a group to those of its first oxide; its mean mass is the sum of masses over that of moles."""
    present = [name for name in others if name in wt]
    if not present:
        return molar_mass(NORM_OXIDES[first])
    mass, spare = np.add(wt[first], wt[present[0]], take()), take()
    for name in present[1:]:
        mass += wt[name]
    for name in present:
        amount = moles[first]
        amount += moles[name]
    return np.divide(mass, np.maximum(moles[first], 1e-300, out=spare), mass)


def _norm_of_chunk(wt: Mapping[str, Array], out: Array, take: Take) -> None:
    """Fill ``out``, shape (columns, rows), with the norm of the chunk."""
    used, lowest, moles = take(), take(), {}
    np.copyto(used, wt["sio2_wt"])
    np.copyto(lowest, used)
    with np.errstate(invalid="ignore"):  # infinities of both signs; such rows have no norm
        for name, array in wt.items():  # one oxide at a time, while it is in the cache
            moles[name] = np.multiply(array, _PER_MASS[name], take())
            if name != "sio2_wt":
                used += array
                np.minimum(lowest, array, out=lowest)
    possible = (lowest >= 0.0) & (used < np.inf)
    if not possible.all():
        wt = {name: np.where(possible, array, 0.0) for name, array in wt.items()}
        for name, array in wt.items():
            np.multiply(array, _PER_MASS[name], moles[name])

    grouped, mass = _grouped(wt, moles, take)
    minerals = allot_minerals(grouped, take)
    _weigh(minerals, mass, out, take)
    np.subtract(used, out[_ROW["norm_total_wt"]], out[_ROW["norm_residual_wt"]])
    if not possible.all():
        out[:, ~possible] = np.nan


def _weigh(minerals: Minerals, mass: Mapping[str, Any], out: Array, take: Take) -> None:
    """Moles times molar masses, and their sum; the masses are made of the oxides with the mean masses of the groups."""
    m, fe2, ca, na, fe3 = minerals, mass["fe2"], mass["ca"], mass["na"], mass["fe3"]
    spare, total = take(), out[_ROW["norm_total_wt"]]
    total[...] = 0.0

    def put(name: str, amount: Array | None, constant: float, *groups: Any, times: float = 1.0) -> None:
        """``amount`` times (``constant`` + ``times`` x the groups' masses) into the column."""
        row = out[_ROW[name]]
        if amount is None:
            row[...] = 0.0
            return
        molar: Any = constant
        for group in groups:
            part = group if times == 1.0 else np.multiply(group, times, spare) if np.ndim(group) else group * times
            molar = np.add(part, molar, spare) if np.ndim(part) or np.ndim(molar) else part + molar
        np.multiply(amount, molar, row)
        if name in _IN_TOTAL:
            np.add(total, row, total)

    put("q_wt", m.q, _SIO2)
    put("c_wt", m.c, _AL2O3)
    put("z_wt", m.z, molar_mass("ZrO2") + _SIO2)
    put("or_wt", m.or_, _K2O + _AL2O3 + 6.0 * _SIO2)
    put("lc_wt", m.lc, _K2O + _AL2O3 + 4.0 * _SIO2)
    put("kp_wt", m.kp, _K2O + _AL2O3 + 2.0 * _SIO2)
    put("ab_wt", m.ab, _AL2O3 + 6.0 * _SIO2, na)
    put("ne_wt", m.ne, _AL2O3 + 2.0 * _SIO2, na)
    put("an_wt", m.an, _AL2O3 + 2.0 * _SIO2, ca)
    put("hl_wt", m.hl, ATOMIC_WEIGHT["Cl"] - _HALF_OXYGEN, na, times=0.5)
    put("th_wt", m.th, molar_mass("SO3"), na)
    put("ac_wt", m.ac, 4.0 * _SIO2, na, fe3)
    put("ns_wt", m.ns, _SIO2, na)
    put("ks_wt", m.ks, _K2O + _SIO2)
    put("cs_wt", m.cs, _SIO2, ca, times=2.0)
    put("mt_wt", m.mt, 0.0, fe2, fe3)
    put("cm_wt", m.cm, molar_mass("Cr2O3"), fe2)
    put("hm_wt", m.hm, 0.0, fe3)
    put("il_wt", m.il, molar_mass("TiO2"), fe2)
    put("tn_wt", m.tn, molar_mass("TiO2") + _SIO2, ca)
    put("pf_wt", m.pf, molar_mass("TiO2"), ca)
    put("ru_wt", m.ru, molar_mass("TiO2"))
    put("ap_wt", m.ap, molar_mass("P2O5"), ca, times=CAO_PER_P2O5)
    if m.f_in_ap is not None:
        apatite = out[_ROW["ap_wt"]]
        apatite += np.multiply(m.f_in_ap, ATOMIC_WEIGHT["F"] - _HALF_OXYGEN, spare)
        total += spare
    put("fr_wt", m.fr, 2.0 * (ATOMIC_WEIGHT["F"] - _HALF_OXYGEN), ca)
    put("pr_wt", m.pr, 2.0 * ATOMIC_WEIGHT["S"] - ATOMIC_WEIGHT["O"], fe2)
    put("cc_wt", m.cc, molar_mass("CO2"), ca)

    put("wo_wt", m.wo, _SIO2, ca)
    put("di_wo_wt", m.di, _SIO2, ca)
    of_mg = take()
    for group, amount, magnesian, ferrous, times in (
        ("di", m.di, "di_en_wt", "di_fs_wt", 1.0),
        ("hy", m.hy, "hy_en_wt", "hy_fs_wt", 1.0),
        ("ol", m.ol, "ol_fo_wt", "ol_fa_wt", 2.0),
    ):
        np.multiply(amount, m.mg_share, of_mg)
        put(magnesian, of_mg, times * _MGO + _SIO2)
        put(ferrous, np.subtract(amount, of_mg, of_mg), _SIO2, fe2, times=times)
        row = out[_ROW[f"{group}_wt"]]
        np.add(out[_ROW[magnesian]], out[_ROW[ferrous]], row)
        if group == "di":
            row += out[_ROW["di_wo_wt"]]
        total += row
