"""How much silica a logged rock name allows, and which analyses lie outside: a swapped sample or a wrong log.

The limits are the silica limits of the fields that bear the name in the total alkali-silica diagram [lebas1986],
[lemaitre2002], widened where field geologists use the word more freely (granite for granodiorite, diorite for quartz
diorite; common practice, no source). Several names in one log allow what any of them allows. Names without a silica
of their own (lamprophyre, carbonatite, kimberlite, breccia) say nothing.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.logged import PREFIXES, distinct_codes, plain_text
from registry.petrology.melt_composition import Array

#: Rock name -> least and greatest volatile-free SiO2, wt%.
SILICA_OF_NAME: Mapping[str, tuple[float, float]] = {
    **dict.fromkeys(("basaltic andesite", "icelandite"), (52.0, 57.0)),
    **dict.fromkeys(("basalt", "basaltic", "dolerite", "diabase", "tholeiite", "spilite", "hawaiite"), (45.0, 54.0)),
    **dict.fromkeys(("picrite", "komatiite", "picrobasalt", "meimechite"), (30.0, 53.0)),
    **dict.fromkeys(("trachybasalt", "shoshonite"), (45.0, 57.0)),
    **dict.fromkeys(("basanite", "tephrite", "nephelinite", "foidite"), (35.0, 49.5)),
    **dict.fromkeys(("andesite", "andesitic"), (55.0, 65.0)),
    **dict.fromkeys(("trachyandesite", "latite", "mugearite", "benmoreite"), (49.0, 64.0)),
    **dict.fromkeys(("phonolite",), (50.0, 64.0)),
    **dict.fromkeys(("trachyte",), (57.0, 70.0)),
    **dict.fromkeys(("trachydacite",), (60.0, 72.0)),
    **dict.fromkeys(("dacite", "dacitic", "rhyodacite"), (62.0, 77.0)),
    **dict.fromkeys(("rhyolite", "rhyolitic", "obsidian", "pitchstone"), (68.0, 80.0)),
    **dict.fromkeys(("dunite", "peridotite", "harzburgite", "lherzolite", "wehrlite", "serpentinite"), (30.0, 50.0)),
    **dict.fromkeys(("pyroxenite", "websterite", "clinopyroxenite", "orthopyroxenite", "hornblendite"), (40.0, 57.0)),
    **dict.fromkeys(("gabbro", "gabbroic", "gabbronorite", "norite", "troctolite", "ferrogabbro"), (40.0, 54.0)),
    **dict.fromkeys(("anorthosite",), (42.0, 57.0)),
    **dict.fromkeys(("gabbrodiorite", "monzogabbro", "essexite"), (45.0, 57.0)),
    **dict.fromkeys(("diorite", "dioritic", "quartz diorite"), (52.0, 66.0)),
    **dict.fromkeys(("monzodiorite",), (49.0, 63.0)),
    **dict.fromkeys(("monzonite", "monzonitic"), (52.0, 66.0)),
    **dict.fromkeys(("quartz monzonite", "quartz monzodiorite"), (55.0, 72.0)),
    **dict.fromkeys(("syenite", "syenitic", "quartz syenite"), (52.0, 70.0)),
    **dict.fromkeys(("tonalite", "tonalitic"), (57.0, 77.0)),
    **dict.fromkeys(("granodiorite", "granodioritic", "charnockite"), (60.0, 77.0)),
    **dict.fromkeys(("trondhjemite",), (63.0, 77.0)),
    **dict.fromkeys(("granite", "granitic", "monzogranite", "syenogranite", "leucogranite", "rapakivi"), (63.0, 80.0)),
    **dict.fromkeys(("aplite", "alaskite", "pegmatite"), (65.0, 82.0)),
}
#: How far outside (wt%) an analysis must lie, fresh and with a loss on ignition that warns (common practice).
MARGIN_WT, MARGIN_ALTERED_WT = 3.0, 6.0
#: Words after which silica says nothing about the rock that was.
_SILICA_MOVED = re.compile(r"silicif|silicified|vein|stockwork|skarn|greisen|breccia|xenolith|listwanit|carbonatite")
_NAME = re.compile(rf"\b(?:{PREFIXES})?({'|'.join(sorted(SILICA_OF_NAME, key=lambda name: -len(name)))})(?:s|es)?\b")


def logged_silica_window(
    lithology: Sequence[object] | NDArray[np.object_], alteration: Sequence[object] | NDArray[np.object_]
) -> tuple[Array, Array]:
    """Least and greatest SiO2 (wt%, volatile-free) that the logged names allow, shape (n,); NaN where they say nothing.

    Texts or None; each distinct pair is read once.
    """
    codes, pairs = distinct_codes(zip(lithology, alteration, strict=True))
    windows = np.array([_window(*pair) for pair in pairs], dtype=np.float64).reshape(-1, 2)
    return windows[codes, 0], windows[codes, 1]


def disagrees_with_log(
    sio2_vf_wt: ArrayLike,
    loi_wt: ArrayLike,
    lithology: NDArray[np.object_],
    alteration: NDArray[np.object_],
    loi_warn_wt: float,
) -> NDArray[np.bool_]:
    """Whether volatile-free SiO2 (wt%) lies more than 3 wt% outside what the logged names allow, shape (n,).

    6 wt% where the loss on ignition (wt%) exceeds ``loi_warn_wt``; texts or None; False where anything is missing.
    """
    low, high = logged_silica_window(lithology, alteration)
    margin = np.where(np.asarray(loi_wt, dtype=np.float64) > loi_warn_wt, MARGIN_ALTERED_WT, MARGIN_WT)
    silica = np.asarray(sio2_vf_wt, dtype=np.float64)
    return (silica < low - margin) | (silica > high + margin)


def _window(lithology: object, alteration: object) -> tuple[float, float]:
    text = plain_text(lithology)
    if not text or _SILICA_MOVED.search(f"{text} {plain_text(alteration)}"):
        return float("nan"), float("nan")
    found = [SILICA_OF_NAME[name] for name in _NAME.findall(text)]
    if not found:
        return float("nan"), float("nan")
    return min(low for low, _ in found), max(high for _, high in found)
