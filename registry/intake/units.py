"""Units as laboratories write them, and their one canonical word."""

from __future__ import annotations

import re
import unicodedata

from registry.petrology.analytes import WT_PERCENT_PER_UNIT

CANONICAL_UNITS = tuple(WT_PERCENT_PER_UNIT)

_SPELLINGS = {
    "wt%": "% wt% %wt wtpct pct wt wtpercent percent percentage weight% weightpercent weightpct mass% masspercent m%"
    " m/m% %m/m w/w% %w/w %(m/m) %(w/w) g/100g percentwt gew-% gew% masse-% masse% ma-%",
    "ppm": "ppm ppmw ppmwt ppms mg/kg mgkg-1 mgkg^-1 ug/g ugg-1 ugg^-1 mcg/g g/t gpt g/tonne g/metrictonne grams/tonne"
    " gramspertonne g/mt gt-1 partspermillion",
    "ppb": "ppb ppbw ug/kg ugkg-1 mcg/kg mg/t ng/g ngg-1 ngg^-1 partsperbillion mg/tonne",
    "ppt": "ppt pptw ng/kg pg/g partspertrillion",
    "oz/t": "oz/t opt oz/ton ozpt oz/st ozt/t ozt/ton troyoz/ton oz/shortton ouncesperton",
}
_CANONICAL = {spelling: unit for unit, words in _SPELLINGS.items() for spelling in words.split()}
#: Looks like a unit of something, though not one of a mass fraction that the register takes.
_FOREIGN = re.compile(
    r"(mg|ug|ng|g|mol|mmol|umol)/(l|ml|cm3|m3|kg|g|mol)|mol%|at%|vol%|v%|[kmg]?cps|k?counts?(persecond)?|k?cpm|bq/kg|permil|‰|m|cm|mm|ft|si"
    r"|kg|g|lbs?|degc|°c|atom%|pg/l"
)

#: Spelt like the unit of a content, whatever it may mean.
_LIKE_A_UNIT = re.compile(
    r"pp[a-z]\w*|.*[%‰‱].*|(wt|mass|weight|vol|volume|mole?|atom)([ .-]*(pct|percent|parts|fraction))?"
    r"|(parts|percent|percentage|grams?|ounces?|pounds?)\b.*"
    r"|\D*/(t|kg|g|mg|ug|l|ml|tonne|tonnes|ton|tons|st|mt|lb|cm3|m3)"
)


def _squeezed(text: str) -> str:
    text = unicodedata.normalize("NFKC", text).casefold()
    text = text.replace("μ", "u").replace("µ", "u").replace("\u2212", "-").replace("per cent", "percent")
    return re.sub(r"[\s._\[\](){}]+", "", text)


def canonical_unit(text: str) -> str | None:
    """The canonical word (wt%, ppm, ppb, ppt, oz/t) for a unit as written, or None."""
    return _CANONICAL.get(_squeezed(text))


def foreign_unit(text: str) -> bool:
    """Whether the text is a unit, but none that a result can have here (mg/L, at%, counts)."""
    squeezed = _squeezed(text)
    return squeezed not in _CANONICAL and bool(_FOREIGN.fullmatch(squeezed))


def spelt_like_a_unit(text: str) -> bool:
    """Whether a text that is no known unit is spelt like one: ``ppmv``, ``kg/t``, ``mass parts``."""
    plain = unicodedata.normalize("NFKC", text).casefold().strip()
    return canonical_unit(text) is None and bool(_LIKE_A_UNIT.fullmatch(re.sub(r"\s*/\s*", "/", plain)))


def split_unit(text: str) -> tuple[str, str | None]:
    """Take the unit out of a heading: ``SiO2 (%)`` -> (``SiO2``, ``wt%``); no unit -> (heading, None)."""
    text = unicodedata.normalize("NFKC", text).strip()
    for bracketed in re.finditer(r"[(\[{]([^()\[\]{}]*)[)\]}]", text):
        unit = canonical_unit(bracketed.group(1))
        if unit is not None:
            return (text[: bracketed.start()] + " " + text[bracketed.end() :]).strip(" _-,;:"), unit
    pieces = re.split(r"([\s_,;:]+|(?<=[A-Za-z0-9+*)])-(?=[A-Za-z%]))", text)
    words, gaps = pieces[0::2], pieces[1::2]
    # the longest run of words that makes a unit, the last one first ("wt. %", "mg / kg", "ppm")
    for length in (4, 3, 2, 1):
        for start in range(len(words) - length, -1, -1):
            if length == len(words):
                continue
            run = "".join(words[start : start + length])
            unit = canonical_unit(run) if run else None
            if unit is None and length == 2 and gaps[start] == "_":
                unit = canonical_unit("/".join(words[start : start + 2]))  # Ag_g_t, Ni_mg_kg: names without a slash
            if unit is not None and _is_unit_word(run, start):
                rest = words[:start] + words[start + length :]
                joints = gaps[: max(start - 1, 0)] + gaps[start + length - 1 :] if start else gaps[length:]
                return _joined(rest, joints), unit
    glued = re.fullmatch(r"(.*?[A-Za-z0-9+*)])((?i:wt\.?%|%|ppm|ppb|pct))", text)
    if glued:
        return glued.group(1).strip(" _-,;:"), canonical_unit(glued.group(2))
    return text, None


def _is_unit_word(run: str, start: int) -> bool:
    return start > 0 or run.casefold() not in ("wt", "opt")


def _joined(words: list[str], gaps: list[str]) -> str:
    text = words[0] if words else ""
    for word, gap in zip(words[1:], gaps, strict=False):
        text += (gap or " ") + word
    return text.strip(" _-,;:")
