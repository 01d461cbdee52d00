"""Digestion read from the text of a method, a heading or a note: the trade's words only, no laboratory's codes."""

from __future__ import annotations

import re
from functools import lru_cache

#: In order: the first that matches decides. Names are those of ``petrology.digestion.DIGESTIONS``; common practice.
_RULES = (
    ("portable_xrf", r"\bp[- ]?xrf\b|\bfp[- ]?xrf\b|portable|hand[- ]?held"),
    ("xrf", r"\bxrf|x[- ]?ray fluor|pressed p(ellet|owder)"),
    ("inaa", r"\bi?naa\b|neutron activation"),
    ("titration", r"titrat|\btitr\b|titrimetr|volumetric"),
    (
        "combustion",
        r"combust|\bir[- ]?furnace|induction furnace|infrared (absorption|detection|spectro)|\bir detection",
    ),
    ("fire_assay", r"fire[- ]?assay|\bfa\b|\bfa[- ]?\d{1,2}\b|\bfa[- ]?(aas?|icp|ms|grav\w*)\b|lead collection|cupell"),
    ("peroxide_fusion", r"peroxide|\bna2o2\b"),
    ("fusion", r"borate|\blibo2\b|\bli2b4o7\b|\bfus(ion|ed|)\b|fused|\bfus[- ]?icp|\bfus[- ]?ms"),
    ("aqua_regia", r"aqua[- ]?regia|\bar[- ](icp|ms|aas?|digest\w*)|\bhcl ?[-+/] ?hno3\b(?!.*hf)|\b3 ?: ?1 hcl"),
    (
        "four_acid",
        r"(four|4|multi)[- ]?acids?\b|\b4a[- ]|\b4ad\b|near[- ]total|\bhf\b.*(hclo4|perchloric|hno3)|hydrofluoric",
    ),
)
_COMPILED = tuple((name, re.compile(pattern)) for name, pattern in _RULES)
_SPOKEN = re.compile(r"(?i)\b(icp|aas?|ms|oes|aes|xrf|naa|inaa|grav\w*|titr\w*|ise|fus\w*|fa|acid|digest\w*)\b")


@lru_cache(maxsize=1024)
def digestion_in(text: str) -> str | None:
    """The digestion that a text names, or None: ``Lithium borate fusion, ICP-MS`` -> ``fusion``."""
    folded = re.sub(r"[_\s]+", " ", text.casefold())
    for name, pattern in _COMPILED:
        if pattern.search(folded):
            return name
    return None


def speaks_of_method(text: str) -> bool:
    """Whether a text names a digestion or an instrument of the trade."""
    return digestion_in(text) is not None or bool(_SPOKEN.search(text.replace("_", " ")))
