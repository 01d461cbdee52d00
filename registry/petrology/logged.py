"""What the geologist's words say of a sample: cumulate, plutonic, extrusive, porphyritic, magnetite destroyed, glass.

The lists are rock names as the trade uses them (common practice, no source); the cumulate words are the decision of
the liquidus route (which rock is not a liquid). Words are compared whole, in lower case, with their plurals; hyphens,
slashes and punctuation part words. A word after ``non``, ``not``, ``no``, ``without`` or ``sub`` does not count
(``non-porphyritic``, ``sub-volcanic``, ``no sericite``).

Decisions:

* ``gabbronorite`` is a plutonic rock that may well be a frozen liquid: it is not read as ``norite``, hence no cumulate
  unless it is also logged cumulate or layered. The kinds of peridotite and pyroxenite (harzburgite, lherzolite,
  wehrlite, websterite, ...) count as those.
* A lava's name beside dyke, sill, stock, plug, intrusion or porphyry (``dacite porphyry``, ``basalt dyke``) names a
  shallow intrusion: not extrusive, and not plutonic either. Words of eruption (lava, tuff, ignimbrite, ...) stay
  extrusive in any company.
* Dolerite, diabase, lamprophyre, carbonatite and kimberlite are neither plutonic nor extrusive words.
* ``porphyr`` counts wherever it stands in a word (``microporphyritic``), but not in porphyroblast or porphyroclast.
"""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Hashable, Iterable, Sequence
from itertools import count
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

Key = TypeVar("Key", bound=Hashable)

LOGGED_NAMES = (
    "logged_cumulate",
    "logged_plutonic",
    "logged_extrusive",
    "logged_porphyritic",
    "logged_destroyed_magnetite",
    "logged_glass",
    "logged_blank",
)


def _words(*lines: str) -> tuple[str, ...]:
    return tuple(" ".join(lines).split())


PERIDOTITES_AND_PYROXENITES = _words(
    "peridotite pyroxenite dunite harzburgite lherzolite wehrlite websterite orthopyroxenite clinopyroxenite",
    "bronzitite chromitite",
)
CUMULATE_WORDS = (
    *_words("cumulate adcumulate mesocumulate orthocumulate heteradcumulate cumulus layered"),
    *_words("anorthosite troctolite norite leuconorite melanorite"),
    *PERIDOTITES_AND_PYROXENITES,
)
PLUTONIC_WORDS = (
    *_words("plutonic pluton batholith granite granitoid granitic granodiorite granodioritic tonalite tonalitic"),
    *_words("trondhjemite monzogranite syenogranite leucogranite alaskite aplite pegmatite charnockite enderbite"),
    *_words("mangerite rapakivi diorite dioritic monzodiorite monzonite monzonitic syenite syenitic monzosyenite"),
    *_words("gabbro gabbroic gabbronorite gabbrodiorite monzogabbro ferrogabbro ferrodiorite essexite theralite"),
    *_words("teschenite ijolite urtite melteigite foyaite foidolite hornblendite anorthosite troctolite norite"),
    *_words("leuconorite melanorite greisen"),
    *PERIDOTITES_AND_PYROXENITES,
)
LAVA_NAMES = (
    *_words("basalt basaltic andesite andesitic dacite dacitic rhyolite rhyolitic rhyodacite trachyte trachydacite"),
    *_words("trachyandesite trachybasalt latite phonolite phonotephrite tephriphonolite tephrite basanite"),
    *_words("nephelinite leucitite melilitite foidite picrobasalt hawaiite mugearite benmoreite shoshonite"),
    *_words("icelandite boninite komatiite meimechite picrite spilite keratophyre"),
)
ERUPTION_WORDS = (
    *_words("lava volcanic extrusive tuff tuffaceous ignimbrite ignimbritic pyroclastic volcaniclastic"),
    *_words("hyaloclastite agglomerate lapilli ash pumice scoria obsidian perlite pitchstone pillow"),
)
SHALLOW_INTRUSION_WORDS = _words("dyke dike sill stock plug intrusion intrusive porphyry porphyries")
DESTROYED_MAGNETITE_WORDS = (
    *_words("phyllic argillic sericite sericitic sericitised sericitized sericitisation sericitization qsp"),
    *_words("greisen greisenised greisenized greisenisation greisenization"),
)
#: Rocks that are quenched liquid.
GLASS_WORDS = _words("glass obsidian perlite pitchstone tachylite")
#: Prefixes that leave a rock what it is, written together or apart (``leucogranite``, ``meta-basalt``).
PREFIXES = "meta|micro|leuco|mela|alkali"

_NEGATED = re.compile(r"\b(?:non|not|no|without|sub)[\s\-]+[a-z]+")
_PORPHYRITIC = re.compile(r"porphyr(?!o(?:blast|clast))")


def _whole_words(words: Iterable[str]) -> re.Pattern[str]:
    stems = sorted(set(words), key=lambda word: (-len(word), word))
    return re.compile(rf"\b(?:{PREFIXES})?(?:{'|'.join(stems)})(?:s|es)?\b")


_CUMULATE = _whole_words(CUMULATE_WORDS)
_PLUTONIC = _whole_words(PLUTONIC_WORDS)
_LAVA = _whole_words(LAVA_NAMES)
_ERUPTION = _whole_words(ERUPTION_WORDS)
_SHALLOW = _whole_words(SHALLOW_INTRUSION_WORDS)
_GLASS = _whole_words(GLASS_WORDS)
_DESTROYED = _whole_words(DESTROYED_MAGNETITE_WORDS)


def plain_text(text: object) -> str:
    """Lower case, negated words taken out; an empty text for anything that is not a text."""
    if not isinstance(text, str):
        return ""
    return _NEGATED.sub(" ", text.lower().replace("_", " ")).strip()


def _read_rock(lithology: object, texture: object) -> tuple[bool, ...]:
    text = f"{plain_text(lithology)} ; {plain_text(texture)}"
    extrusive = bool(_ERUPTION.search(text)) or (bool(_LAVA.search(text)) and not _SHALLOW.search(text))
    blank = not any(isinstance(word, str) and word.strip() for word in (lithology, texture))
    return (
        bool(_CUMULATE.search(text)),
        bool(_PLUTONIC.search(text)),
        extrusive,
        bool(_PORPHYRITIC.search(text)),
        bool(_DESTROYED.search(text)),
        bool(_GLASS.search(text)),
        blank,
    )


def distinct_codes(keys: Iterable[Key]) -> tuple[NDArray[np.intp], list[Key]]:
    """Integer code of each key by first appearance, and the distinct keys. Without a step of Python a key."""
    seen: defaultdict[Key, int] = defaultdict(count().__next__)
    codes = np.fromiter(map(seen.__getitem__, keys), dtype=np.intp)
    return codes, list(seen)


def logged_words(
    lithology: Sequence[object] | NDArray[np.object_],
    texture: Sequence[object] | NDArray[np.object_],
    alteration: Sequence[object] | NDArray[np.object_],
) -> dict[str, NDArray[np.bool_]]:
    """Read the log: seven boolean arrays of shape (n,) by the names of ``LOGGED_NAMES``.

    ``lithology``, ``texture`` and ``alteration`` hold free text, shape (n,), None for missing. Each distinct text is
    read once. ``logged_blank`` is true where lithology and texture are both empty. ``logged_destroyed_magnetite``
    looks at the alteration first and also takes such a word from lithology or texture (``greisen``).
    ValueError where the three differ in length. Source: the trade's words, common practice, no source.
    """
    lengths = (len(lithology), len(texture), len(alteration))
    if len(set(lengths)) != 1:
        raise ValueError(
            f"lithology, texture and alteration have {lengths[0]}, {lengths[1]} and {lengths[2]} rows; "
            "give one text (or None) a sample in each"
        )
    rock_codes, rocks = distinct_codes(zip(lithology, texture, strict=True))
    flags = np.array([_read_rock(*pair) for pair in rocks], dtype=np.bool_).reshape(-1, len(LOGGED_NAMES))
    result = dict(zip(LOGGED_NAMES, flags[rock_codes].T, strict=True))
    alteration_codes, alterations = distinct_codes(alteration)
    destroyed = np.array([bool(_DESTROYED.search(plain_text(text))) for text in alterations], dtype=np.bool_)
    result["logged_destroyed_magnetite"] = result["logged_destroyed_magnetite"] | destroyed[alteration_codes]
    return result
