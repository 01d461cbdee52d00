"""Digestions: what each one brings wholly, at least or not at all into the measurement.

A value of a partial digestion is a minimum: what stayed in the residue (zircon, cassiterite, rutile, barite, chromite)
was not measured. A value that the digestion cannot carry is refused: it never enters the composition. The table is
common practice of laboratories, no single source; the grounds stand beside each row.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from registry.petrology.analytes import CHOSEN_COLUMNS, CHOSEN_INDEX, IRON_COLUMNS, OXIDE_COLUMNS

#: By code; index 0 is no value. The last two are one word to the user, ``unknown``: ``settle_unknown`` divides it by
#: whether the batch reports SiO2 (then the analysis is whole-rock and counts as total; else it counts as four-acid).
DIGESTIONS = (
    "", "fusion", "peroxide_fusion", "xrf", "four_acid", "aqua_regia", "inaa", "portable_xrf", "titration",
    "combustion", "fire_assay", "unknown", "unknown_without_silica",
)  # fmt: skip
#: One letter each, by code, for packed strings (``composition.digestions``); '.' is none.
DIGESTION_LETTERS = ".fpxarnhtcgui"
DIGESTION_CODE = {name: code for code, name in enumerate(DIGESTIONS)}
#: How a digestion is called in a sentence, by code.
DIGESTION_WORDS = (
    "no digestion", "lithium borate fusion", "peroxide fusion", "XRF", "four-acid digestion", "aqua regia", "INAA",
    "portable XRF", "titration", "combustion", "fire assay", "an unknown digestion", "an unknown digestion",
)  # fmt: skip
#: What a person can say of a column.
DIGESTION_NAMES = tuple(name for name in DIGESTIONS if name and name != "unknown_without_silica")
#: Analytes that are weighed or summed, not dissolved: a digestion stated for every column is not meant for these.
WEIGHED = ("Total", "LOI", "H2O", "H2O+", "H2O-")
NONE, FUSION, PEROXIDE_FUSION, XRF, FOUR_ACID, AQUA_REGIA, INAA, PORTABLE_XRF = range(8)
TITRATION, COMBUSTION, FIRE_ASSAY, UNKNOWN, UNKNOWN_WITHOUT_SILICA = range(8, 13)

#: Preference where two digestions give the same analyte, by code; 0 is best. Order of methods: fusion, XRF, INAA,
#: titration, combustion, fire assay > peroxide fusion > four-acid > unknown > portable > aqua regia.
_RANK = {PEROXIDE_FUSION: 1, FOUR_ACID: 2, UNKNOWN: 3, UNKNOWN_WITHOUT_SILICA: 3, PORTABLE_XRF: 4, AQUA_REGIA: 5}
DIGESTION_RANKS: NDArray[np.uint8] = np.array(
    [255 if code == NONE else _RANK.get(code, 0) for code in range(len(DIGESTIONS))], dtype=np.uint8
)

REFUSED, MINIMUM, TOTAL = 0, 1, 2
CARRIED_WORDS = ("refused", "minimum", "total")

#: Weighed, not dissolved: the digestion of the rest of the file says nothing about them.
_GRAVIMETRIC = ("loi_wt", "h2o_plus_wt", "h2o_minus_wt", "total_reported_wt")
#: Resistate-hosted: zircon, columbite, cassiterite, wolframite, chromite, rutile, barite, xenotime.
_RESISTATE = [
    "zr_ppm",
    "hf_ppm",
    "nb_ppm",
    "ta_ppm",
    "sn_ppm",
    "w_ppm",
    "cr_ppm",
    "ba_ppm",
    "y_ppm",
    "gd_ppm",
    "tb_ppm",
    "dy_ppm",
    "ho_ppm",
    "er_ppm",
    "tm_ppm",
    "yb_ppm",
    "lu_ppm",
    "tio2_wt",
    "cr2o3_wt",
    "zro2_wt",
    "bao_wt",
]
#: Lost from hydrofluoric acid as SiF4, BF3, HF, HCl or CO2.
_LOST_WITH_ACID = ("sio2_wt", "b_ppm", "f_wt", "cl_wt", "co2_wt")
#: What aqua regia frees from sulphides, selenides, carbonates and native metal: chalcophile and siderophile elements.
#: Even these are minimum values, for silicates and oxides hold their share (Ni in olivine, Cu and Co in biotite).
#: Tl (in K-feldspar), Ga and Ge (in feldspar), Sn (cassiterite), W, V, Sc, Cr and Fe are refused with the lithophiles.
_AQUA_REGIA_CARRIES = [
    "ag_ppm",
    "as_ppm",
    "au_ppm",
    "bi_ppm",
    "cd_ppm",
    "co_ppm",
    "cu_ppm",
    "in_ppm",
    "mo_ppm",
    "ni_ppm",
    "pb_ppm",
    "pd_ppm",
    "pt_ppm",
    "re_ppm",
    "sb_ppm",
    "te_ppm",
    "zn_ppm",
    "s_wt",
]
#: Over the range of the instruments they are titrated.
_TITRATED_ORE = ("cu_ppm", "pb_ppm", "zn_ppm")
#: Volatile at the heat of a borate fusion: partly lost.
_LOST_FROM_FUSION = ["s_wt", "so3_wt", "cl_wt", "as_ppm", "cd_ppm", "sb_ppm", "te_ppm", "tl_ppm", "re_ppm"]
#: Too light for X-rays in air or from a bead, or a constituent of the bead itself.
_BELOW_XRF = ("li2o_wt", "li_ppm", "be_ppm", "b_ppm")


def _carries() -> NDArray[np.uint8]:
    table = np.full((len(DIGESTIONS), len(CHOSEN_COLUMNS)), TOTAL, dtype=np.uint8)

    def mark(code: int, columns: Any, state: int) -> None:
        table[code, [CHOSEN_INDEX[column] for column in columns]] = state

    mark(FUSION, _LOST_FROM_FUSION, MINIMUM)
    mark(FUSION, ("li2o_wt", "li_ppm", "b_ppm", "co2_wt"), REFUSED)  # Li and B are the flux, CO2 is driven off
    mark(PEROXIDE_FUSION, ("na2o_wt", "co2_wt"), REFUSED)  # Na is the flux
    mark(XRF, _BELOW_XRF, REFUSED)
    mark(PORTABLE_XRF, (*_BELOW_XRF, "na2o_wt", "f_wt", "co2_wt"), REFUSED)
    for code in (FOUR_ACID, UNKNOWN_WITHOUT_SILICA):
        mark(code, (*_RESISTATE, "s_wt", "so3_wt"), MINIMUM)  # S: barite
        # what is not known to have seen acid enters the composition all the same, as a minimum
        mark(code, _LOST_WITH_ACID, REFUSED if code == FOUR_ACID else MINIMUM)
    table[AQUA_REGIA] = REFUSED
    mark(AQUA_REGIA, _AQUA_REGIA_CARRIES, MINIMUM)
    table[TITRATION] = REFUSED  # wet chemistry determines majors and metals of ore grade, never traces
    mark(TITRATION, (*OXIDE_COLUMNS, *IRON_COLUMNS, *_TITRATED_ORE), TOTAL)
    table[COMBUSTION] = REFUSED  # infrared or pyrohydrolysis after burning
    mark(COMBUSTION, ("s_wt", "so3_wt", "co2_wt", "f_wt", "cl_wt"), TOTAL)
    table[FIRE_ASSAY] = REFUSED
    mark(FIRE_ASSAY, ("au_ppm", "pt_ppm", "pd_ppm", "ag_ppm"), TOTAL)
    for code in range(1, len(DIGESTIONS)):
        mark(code, _GRAVIMETRIC, TOTAL)
    table[NONE] = REFUSED
    table.setflags(write=False)
    return table


#: ``CARRIES[digestion code, chosen column]``: REFUSED 0, MINIMUM 1, TOTAL 2; shape (len(DIGESTIONS), 81).
CARRIES: NDArray[np.uint8] = _carries()


def carries(digestion: int | str, column: str) -> str:
    """What ``digestion`` (code or name) brings of a chosen column: ``total``, ``minimum`` or ``refused``."""
    code = DIGESTION_CODE[digestion] if isinstance(digestion, str) else int(digestion)
    return CARRIED_WORDS[CARRIES[code, CHOSEN_INDEX[column]]]


def settle_unknown(digestion: Any, batch_reports_silica: Any) -> NDArray[np.uint8]:
    """Codes with ``unknown`` turned into ``unknown_without_silica`` where the batch reports no SiO2.

    ``digestion`` uint8 codes and ``batch_reports_silica`` booleans broadcast. A batch that reports SiO2 is a whole-rock
    analysis: its unknown columns count as total; any other unknown column counts as four-acid.
    """
    codes = np.asarray(digestion, dtype=np.uint8)
    partial = (codes == UNKNOWN) & ~np.asarray(batch_reports_silica, dtype=bool)
    return np.where(partial, np.uint8(UNKNOWN_WITHOUT_SILICA), codes).astype(np.uint8)


def pack_letters(digestions: NDArray[np.uint8]) -> list[str]:
    """One string a sample from codes of shape (81, n), for ``composition.digestions``."""
    letters = np.frombuffer(DIGESTION_LETTERS.encode(), dtype=np.uint8)
    text = letters[np.ascontiguousarray(digestions.T)].tobytes().decode()
    width = digestions.shape[0]
    return [text[start : start + width] for start in range(0, len(text), width)]


def unpack_letters(texts: list[str]) -> NDArray[np.uint8]:
    """Codes of shape (81, n) from packed strings; the inverse of ``pack_letters``."""
    code_of_byte = np.zeros(256, dtype=np.uint8)
    code_of_byte[np.frombuffer(DIGESTION_LETTERS.encode(), dtype=np.uint8)] = np.arange(len(DIGESTIONS))
    packed = np.frombuffer("".join(texts).encode(), dtype=np.uint8).reshape(len(texts), -1)
    return np.ascontiguousarray(code_of_byte[packed].T)


assert len(DIGESTION_LETTERS) == len(DIGESTIONS) == len(DIGESTION_WORDS) == len(set(DIGESTION_LETTERS))
