"""Digestion read from the text of a method, a heading or a note: the trade's words only, no laboratory's codes."""

from __future__ import annotations

import re
from functools import lru_cache

from registry.intake.units import foreign_unit, spelt_like_a_unit

#: Hydrofluoric acid, which is no hafnium (``digestion_in`` writes HF so), and hydrochloric beside nitric acid.
_FLUORIC = r"\bhfacid\b|\bhf ?[-+/] ?h|[34l] ?[-+/] ?hf\b|hydrofluoric"
_REGIA = r"\bhcl ?[-+/,: ] ?hno3\b|\bhno3 ?[-+/,: ] ?hcl\b|\b3 ?: ?1 hcl"

#: In order: the first that matches decides. Names are those of ``petrology.digestion.DIGESTIONS``; common practice.
_RULES = (
    ("portable_xrf", r"\bp[- ]?xrf\b|\bfp[- ]?xrf\b|portable|hand[- ]?held"),
    ("xrf", r"\b(wd|ed)?xrf|x[- ]?ray fluor|pressed p(ellet|owder)"),
    ("inaa", r"\bi?naa\b|neutron activation"),
    ("titration", r"titrat|\btitr\b|titrimetr|volumetric"),
    (
        "combustion",
        r"combust|\bir[- ]?furnace|induction furnace|infrared (absorption|detection|spectro)|\bir detection",
    ),
    (
        "fire_assay",
        r"fire[- ]?assay|\bfa\b|\bfa[- ]?\d{1,2}\b|\bfa[- ]?(aas?|icp|ms|grav\w*)\b|lead collection|cupell"
        r"|\bnis (fire|collection)",
    ),
    ("peroxide_fusion", r"peroxide|\bna2o2\b|\b(naoh|sodium hydroxide)\b"),
    ("fusion", r"borate|\blibo2\b|\bli2b4o7\b|\bfus(ion|ed|)\b|fused|\bfus[- ]?icp|\bfus[- ]?ms"),
    (
        "aqua_regia",
        rf"aqua[- ]?regia|\bar[-/ ](icp|ms|aas?|digest\w*)|^(?!.*({_FLUORIC}|hclo4|perchloric)).*({_REGIA})",
    ),
    (
        "four_acid",
        r"(four|4|multi)[- ]?acids?\b|\b4a[-/ ]|\b4ad\b|near[- ]total|hydrofluoric"
        rf"|^(?=.*({_FLUORIC})).*(hclo4|perchloric|hno3|nitric|hcl\b)",
    ),
)
_COMPILED = tuple((name, re.compile(pattern)) for name, pattern in _RULES)
_SPOKEN = re.compile(r"(?i)\b(icp|aas?|ms|oes|aes|xrf|naa|inaa|grav\w*|titr\w*|ise|fus\w*|fa|acid|digest\w*)\b")

#: Words that are said of a result beside its unit. Common practice, no source.
_REMARK = re.compile(
    r"(?i)tot(al)?|calc(ulated|\.)?|recalc(ulated)?|norm(ali[sz]ed)?|anhydrous|dry|wet|raw|re-?run|rep(eat|licate)?|rpt"
    r"|dup(licate)?|check|corr(ected)?|final|best|majors?|traces?|average|avg|mean|ignited|oxides?|lab|labs|reported"
    r"|method|by|as|whole|rock|of|low|high|ore|grade|over|range|[a-z]"
)


@lru_cache(maxsize=1024)
def digestion_in(text: str) -> str | None:
    """The digestion that a text names, or None: ``Lithium borate fusion, ICP-MS`` -> ``fusion``."""
    text = re.sub(r"\bHF\b", "hfacid", text)  # Hf is hafnium
    folded = re.sub(r"[_\s]+", " ", text.casefold())
    for name, pattern in _COMPILED:
        if pattern.search(folded):
            return name
    return None


def speaks_of_method(text: str) -> bool:
    """Whether a text names a digestion or an instrument of the trade."""
    return digestion_in(text) is not None or bool(_SPOKEN.search(text.replace("_", " ")))


def may_be_method(text: str) -> bool:
    """Whether a word in the place of a unit, itself none that is known, can be a method or a remark on the result.

    It can with a word of the trade (``XRF``, ``fusion``), a digit (``ME-xx81``, ``30g``), capitals alone (a code) or a
    usual remark (``total``, ``repeat``). What is spelt like a unit (``kg/t``, ``ppmv``) and any other word cannot: a
    unit that is not known must not pass for a method, for the numbers would be taken in a unit by custom.
    """
    if foreign_unit(text) or spelt_like_a_unit(text):
        return False
    if speaks_of_method(text) or any(map(str.isdigit, text)):
        return True
    words = [word for word in re.split(r"[\s_/,;.\-]+", text) if word]
    return all((word.isupper() and word.isascii()) or _REMARK.fullmatch(word) for word in words)
