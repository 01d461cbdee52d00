"""Total alkali-silica classification, on the volatile-free analysis closed to 100 wt%.

Fields of [lebas1986] with the corners of [lemaitre2002] (from memory; 15 fields, straight lines); plutonic names of
[middlemost1994]. A point on a vertical edge belongs to the field of higher SiO2 (52.0 is basaltic andesite), on any
other edge to the field of higher alkalis. Below 41 % SiO2 with less than 3 % alkalis nothing is drawn: 'unclassified
ultrabasic'.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.broken_lines import broken_line, first_code
from registry.petrology.quotients import Floats, floats, labels, quotient

#: Field codes in order; the letters of [lebas1986]. U is the undrawn corner.
FIELDS = ("F", "Pc", "B", "O1", "O2", "O3", "R", "S1", "S2", "S3", "T", "U1", "U2", "U3", "Ph", "U")
#: Corners (SiO2, Na2O + K2O) in wt%; 30 % alkalis stand for an open top. The undrawn corner is the last.
POLYGONS: dict[str, tuple[tuple[float, float], ...]] = {
    "F": ((0, 3), (41, 3), (41, 7), (45, 9.4), (48.4, 11.5), (52.5, 14), (52.5, 30), (0, 30)),
    "Pc": ((41, 0), (41, 3), (45, 3), (45, 0)),
    "B": ((45, 0), (45, 5), (52, 5), (52, 0)),
    "O1": ((52, 0), (52, 5), (57, 5.9), (57, 0)),
    "O2": ((57, 0), (57, 5.9), (63, 7), (63, 0)),
    "O3": ((63, 0), (63, 7), (69, 8), (77, 0)),
    "R": ((77, 0), (69, 8), (69, 30), (100, 30), (100, 0)),
    "S1": ((45, 5), (49.4, 7.3), (52, 5)),
    "S2": ((52, 5), (49.4, 7.3), (53, 9.3), (57, 5.9)),
    "S3": ((57, 5.9), (53, 9.3), (57.6, 11.7), (63, 7)),
    "T": ((63, 7), (57.6, 11.7), (61, 13.5), (61, 30), (69, 30), (69, 8)),
    "U1": ((41, 3), (41, 7), (45, 9.4), (49.4, 7.3), (45, 5), (45, 3)),
    "U2": ((49.4, 7.3), (45, 9.4), (48.4, 11.5), (53, 9.3)),
    "U3": ((53, 9.3), (48.4, 11.5), (52.5, 14), (57.6, 11.7)),
    "Ph": ((57.6, 11.7), (52.5, 14), (52.5, 30), (61, 30), (61, 13.5)),
    "U": ((0, 0), (0, 3), (41, 3), (41, 0)),
}

#: By field; None where the norm decides (T by q, U1 by olivine).
VOLCANIC_NAMES = (
    "foidite", "picrobasalt", "basalt", "basaltic andesite", "andesite", "dacite", "rhyolite", "trachybasalt",
    "basaltic trachyandesite", "trachyandesite", "trachyte or trachydacite", "tephrite or basanite", "phonotephrite",
    "tephriphonolite", "phonolite", "unclassified ultrabasic",
    "trachyte", "trachydacite", "tephrite", "basanite", "komatiite", "meimechite", "picrite", "boninite",
)  # fmt: skip
PLUTONIC_NAMES = (
    "foidolite", "peridotgabbro", "gabbro", "gabbroic diorite", "diorite", "granodiorite", "granite", "monzogabbro",
    "monzodiorite", "monzonite", "syenite or quartz monzonite", "foid gabbro", "foid monzodiorite",
    "foid monzosyenite", "foid syenite", "unclassified ultrabasic",
    "syenite", "quartz monzonite", "peridotite",
)  # fmt: skip
SUBNAMES = (
    "alkali basalt", "subalkali basalt", "hawaiite", "potassic trachybasalt", "mugearite", "shoshonite",
    "benmoreite", "latite",
)  # fmt: skip
_F, _PC, _B, _O1, _O2, _O3, _R, _S1, _S2, _S3, _T, _U1, _U2, _U3, _PH, _U = range(16)
_TRACHYTE, _TRACHYDACITE, _TEPHRITE, _BASANITE, _KOMATIITE, _MEIMECHITE, _PICRITE, _BONINITE = range(16, 24)
_SYENITE, _QUARTZ_MONZONITE, _PERIDOTITE = range(16, 19)

#: wt%: a point this near to an edge lies on it; analyses have two decimals.
EDGE_WT = 1e-9
QUARTZ_DIVIDES_T = 20.0  # per cent of Q + Or + Ab + An
OLIVINE_DIVIDES_U1 = 10.0  # wt% of the norm

#: Broken lines (SiO2, alkalis), each with the open part beyond its last corner left out.
_FOIDITE_TOP = ((41.0, 45.0, 48.4, 52.5), (7.0, 9.4, 11.5, 14.0))
_UNDERSATURATED = ((45.0, 49.4, 53.0, 57.6, 61.0), (5.0, 7.3, 9.3, 11.7, 13.5))
_ALKALINE = ((45.0, 52.0, 57.0, 63.0, 69.0), (5.0, 5.0, 5.9, 7.0, 8.0))
#: Straight lines that part S1 | S2 | S3 | T and, further up, U1 | U2 | U3 | Ph: two corners each.
_S_PARTS = (((52.0, 5.0), (49.4, 7.3)), ((57.0, 5.9), (53.0, 9.3)), ((63.0, 7.0), (57.6, 11.7)))
_U_PARTS = (((49.4, 7.3), (45.0, 9.4)), ((53.0, 9.3), (48.4, 11.5)), ((57.6, 11.7), (52.5, 14.0)))


def _line(silica: Floats, corners: tuple[tuple[float, float], tuple[float, float]]) -> Floats:
    (x1, y1), (x2, y2) = corners
    return y1 + (silica - x1) * ((y2 - y1) / (x2 - x1))


def _steps(
    silica: Floats, alkalis: Floats, parts: tuple[tuple[tuple[float, float], tuple[float, float]], ...]
) -> NDArray[np.int8]:
    """How many of the parting lines a point has reached or passed."""
    steps = np.zeros(silica.shape, dtype=np.int8)
    for corners in parts:
        steps += alkalis >= _line(silica, corners)
    return steps


def tas_field(sio2_vf_wt: ArrayLike, alkalis_vf_wt: ArrayLike) -> NDArray[np.int8]:
    """Code of the field (index into ``FIELDS``), shape (n,); -1 where a value is missing or impossible.

    ``alkalis_vf_wt`` is Na2O + K2O; both wt% of the volatile-free analysis. Source [lebas1986].
    """
    silica, total = floats(sio2_vf_wt, alkalis_vf_wt)
    s, a = silica + EDGE_WT, total + EDGE_WT
    below = first_code(
        [s < 41.0, s < 45.0, s < 52.0, s < 57.0, s < 63.0, (s < 69.0) | (a < 77.0 - s + EDGE_WT)],
        [_U, _PC, _B, _O1, _O2, _O3],
        _R,
    )
    s_field = _S1 + _steps(s, a, _S_PARTS)
    u_field = _U1 + _steps(s, a, _U_PARTS)
    is_foidite = np.where(s < 41.0, a >= 3.0, (s < 52.5) & (a >= broken_line(s, *_FOIDITE_TOP)))
    is_u = np.where(s < 45.0, a >= 3.0, (s < 61.0) & (a >= broken_line(s, *_UNDERSATURATED)))
    is_s = (s >= 45.0) & (s < 69.0) & (a >= broken_line(s, *_ALKALINE))
    field = first_code([is_foidite, is_u, is_s], [_F, u_field, s_field], below)
    sane = (silica >= 0.0) & (silica <= 100.0) & (total >= 0.0) & (total <= 100.0)
    return np.where(sane, field, np.int8(-1))


def high_magnesium_code(silica: Floats, alkalis: Floats, mgo: Floats, tio2: Floats) -> NDArray[np.int8]:
    """Code of komatiite, meimechite, picrite or boninite in ``VOLCANIC_NAMES``, -1 for none. [lemaitre2002].

    SiO2 30-52: MgO above 18 and alkalis below 2 give komatiite (TiO2 below 1) or meimechite (above 1), else MgO above
    12 and alkalis below 3 give picrite; SiO2 above 52 with MgO above 8 and TiO2 below 0.5 gives boninite.
    """
    low_silica = (silica >= 30.0) & (silica < 52.0)
    very_magnesian = low_silica & (mgo > 18.0) & (alkalis < 2.0)
    return first_code(
        [
            very_magnesian & (tio2 < 1.0),
            very_magnesian & (tio2 > 1.0),
            low_silica & (mgo > 12.0) & (alkalis < 3.0),
            (silica > 52.0) & (mgo > 8.0) & (tio2 < 0.5),
        ],
        [_KOMATIITE, _MEIMECHITE, _PICRITE, _BONINITE],
        -1,
    )


def _subname_code(field: NDArray[np.int8], na2o: Floats, k2o: Floats, nepheline: Floats) -> NDArray[np.int8]:
    sodic = na2o - 2.0 >= k2o - EDGE_WT
    known_nepheline = np.isfinite(nepheline)
    return first_code(
        [
            (field == _B) & known_nepheline & (nepheline > 0.0),
            (field == _B) & known_nepheline,
            (field >= _S1) & (field <= _S3) & sodic,
            (field >= _S1) & (field <= _S3),
        ],
        [0, 1, 2 + 2 * (field - _S1), 3 + 2 * (field - _S1)],
        -1,
    )


def tas_names(
    sio2_vf_wt: ArrayLike,
    na2o_vf_wt: ArrayLike,
    k2o_vf_wt: ArrayLike,
    mgo_vf_wt: ArrayLike,
    tio2_vf_wt: ArrayLike,
    q_wt: ArrayLike,
    or_wt: ArrayLike,
    ab_wt: ArrayLike,
    an_wt: ArrayLike,
    ne_wt: ArrayLike,
    ol_wt: ArrayLike,
    is_plutonic: ArrayLike,
    logged_cumulate: ArrayLike,
) -> dict[str, Any]:
    """``tas_volcanic``, ``tas_plutonic`` and ``tas_subname``: object arrays of names, shape (n,), None for missing.

    Oxides wt% of the volatile-free analysis; norm minerals wt%. Both names are given to every rock. Field T parts at
    q = 100 Q/(Q + Or + Ab + An) = 20, field U1 at 10 % normative olivine; without a norm both names stand. Names of
    high-Mg lavas come first, but never for a plutonic rock or a cumulate. The plutonic name of a rock with more than
    18 % MgO and less than 2 % alkalis (SiO2 30-52) is peridotite [middlemost1994]. Sub-names: S1, S2 and S3 are sodic
    (hawaiite, mugearite, benmoreite) where Na2O - 2 >= K2O, else potassic (potassic trachybasalt, shoshonite,
    latite); basalt is alkali basalt where the norm has nepheline. Sources [lebas1986], [lemaitre2002].
    """
    silica, na2o, k2o, mgo, tio2 = floats(sio2_vf_wt, na2o_vf_wt, k2o_vf_wt, mgo_vf_wt, tio2_vf_wt)
    alkalis = na2o + k2o
    field = tas_field(silica, alkalis)
    quartz = 100.0 * quotient(q_wt, np.asarray(q_wt, dtype=np.float64) + np.add(np.add(or_wt, ab_wt), an_wt))
    olivine = np.asarray(ol_wt, dtype=np.float64)
    is_t, is_u1 = field == _T, field == _U1
    poor, rich = quartz < QUARTZ_DIVIDES_T, quartz >= QUARTZ_DIVIDES_T
    volcanic = first_code(
        [
            is_t & poor,
            is_t & rich,
            is_u1 & (olivine < OLIVINE_DIVIDES_U1),
            is_u1 & (olivine >= OLIVINE_DIVIDES_U1),
        ],
        [_TRACHYTE, _TRACHYDACITE, _TEPHRITE, _BASANITE],
        field,
    )
    high_magnesium = high_magnesium_code(silica, alkalis, mgo, tio2)
    is_lava = ~(np.asarray(is_plutonic, dtype=bool) | np.asarray(logged_cumulate, dtype=bool))
    volcanic = np.where(is_lava & (high_magnesium >= 0) & (field >= 0), high_magnesium, volcanic)
    peridotite = (silica >= 30.0) & (silica < 52.0) & (mgo > 18.0) & (alkalis < 2.0) & (field >= 0)
    plutonic = first_code([peridotite, is_t & poor, is_t & rich], [_PERIDOTITE, _SYENITE, _QUARTZ_MONZONITE], field)
    nepheline = np.asarray(ne_wt, dtype=np.float64)
    return {
        "tas_volcanic": labels(volcanic, VOLCANIC_NAMES),
        "tas_plutonic": labels(plutonic, PLUTONIC_NAMES),
        "tas_subname": labels(_subname_code(field, na2o, k2o, nepheline), SUBNAMES),
    }
