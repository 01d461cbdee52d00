"""Analytes as laboratories spell them, and the symbol of ``analytes.ANALYTES`` they stand for."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from functools import lru_cache

from registry.intake.methods import may_be_method
from registry.intake.units import canonical_unit, split_unit
from registry.petrology.analytes import ANALYTES

_BY_CASE = {symbol.casefold(): symbol for symbol in ANALYTES}
_WORDS = {
    "loi": "LOI", "lossonignition": "LOI", "ignitionloss": "LOI", "loi1000": "LOI", "loi1000c": "LOI",
    "loi950": "LOI", "loi1050": "LOI", "loi975": "LOI", "lossignition": "LOI", "wtloss": "LOI",
    "sum": "Total", "total": "Total", "totals": "Total", "sumoxides": "Total", "totaloxides": "Total",
    "sumofoxides": "Total", "oxidetotal": "Total", "analyticaltotal": "Total", "sumoftheoxides": "Total",
    "h2oplus": "H2O+", "h2op": "H2O+", "h2om": "H2O-", "h2ominus": "H2O-", "boundwater": "H2O+",
    "h2ototal": "H2O", "h2otot": "H2O", "h2ot": "H2O", "moisture": "H2O-",
    "stotal": "S", "stot": "S", "tots": "S", "totalsulphur": "S", "totalsulfur": "S", "sulphur": "S",
    "sulfur": "S", "tot/s": "S", "ts": "S", "s(total)": "S",
    "ctotal": "C", "ctot": "C", "totc": "C", "tot/c": "C", "totalc": "C", "totalcarbon": "C", "carbon": "C",
    "corg": "C_organic", "toc": "C_organic", "organiccarbon": "C_organic", "corganic": "C_organic",
    "gold": "Au", "silver": "Ag", "copper": "Cu", "lead": "Pb", "zinc": "Zn", "iron": "Fe", "nickel": "Ni",
    "cobalt": "Co", "silica": "SiO2", "alumina": "Al2O3", "titania": "TiO2", "magnesia": "MgO", "lime": "CaO",
    "uranium": "U", "thorium": "Th", "zirconium": "Zr", "tungsten": "W", "tin": "Sn", "lithium": "Li",
    "platinum": "Pt", "palladium": "Pd", "molybdenum": "Mo", "arsenic": "As", "fluorine": "F", "chlorine": "Cl",
}  # fmt: skip
_IRON_FORM = {"fe2o3": "Fe2O3", "feo": "FeO", "fe": "Fe"}
_TOTAL_IRON = {"Fe2O3": "Fe2O3T", "FeO": "FeOT", "Fe": "Fe"}
_IRON = re.compile(
    r"(?P<before>tot|total|sum|all|t|\u03c3|\u2211)?(?P<word>ironas|feas|iron\(as\)|fe\(as\))?(?P<form>fe2o3|feo|fe)"
    r"(?P<after>tot|total|t|\*|all|ascalculated)?(?P<asform>as(fe2o3|feo))?"
)
#: Headings that look like an analyte and are something else in the trade's tables.
_NOT_ANALYTES = {"no", "id"}
_RATIO = re.compile(r"\(?\s*([A-Za-z]\w*?)\s*/\s*([A-Z][A-Za-z0-9]*?)(?:[*#)]|N$|$)")
#: A column beside a result that is none: its uncertainty, its limit, a count.
_NO_RESULT = re.compile(
    r"(?i)(?<=\w)[\s_.,;:/|(\[\-]+(\+/?-|\u00b1|%? ?rsd ?%?|r\.?s\.?d\.?|(rel\.? ?)?err(or)?s?|unc(ert(ainty)?)?\.?"
    r"|[123]? ?(s\.?d\.?|s\.?e\.?|std\.?( ?(dev|err)\w*\.?)?|stdev|sigma|\u03c3)|[123]s|precision"
    r"|(ll?|m)?dl|lld|lo[dqr]|lloq|cps|counts?|(det(ection)?|reporting)\.? ?lim(it)?s?\.?)[)\]]?$"
)
#: What may follow an analyte without a unit: a code with letters, not the number of a sample (``B-12``, ``C-7A``).
_CODE_WITH_LETTERS = re.compile(r".*[A-Za-z]{2}|(?i:4a|ar|fa|ir)\b")
_METHOD_WORD = re.compile(
    r"(?i)p?xrf|i?naa|icp|icpms|icpoes|icpaes|ms|oes|aes|aas|fa\d*|fus\w*|titr\w*|4a\w*|ar|aqua|regia|acid|four|fire|assay|ise|ir|comb\w*"
)


@dataclass(frozen=True)
class Heading:
    """What one heading text says: any of analyte, unit and method may be missing."""

    analyte: str | None = None
    unit: str | None = None
    method: str | None = None


def _squeezed(text: str) -> str:
    text = (
        unicodedata.normalize("NFKC", text).casefold().replace("⁺", "+").replace("\u2212", "-").replace("\u2013", "-")
    )
    return re.sub(r"[\s._'\"]+", "", text)


@lru_cache(maxsize=4096)
def analyte_symbol(text: str) -> str | None:
    """The symbol for a name as written, in any case; None if it names no analyte. Iron stays as it was spelt."""
    squeezed = _squeezed(text)
    if re.fullmatch(r"total[\s_.]s", text.strip().casefold()):
        return "S"  # squeezed, it could not be told from "totals"
    if not squeezed or squeezed in _NOT_ANALYTES:
        return None
    if squeezed in _BY_CASE:
        return _BY_CASE[squeezed]
    bare = squeezed.replace("(", "").replace(")", "").replace("[", "").replace("]", "")
    if bare in _WORDS:
        return _WORDS[bare]
    iron = _IRON.fullmatch(bare.replace("-", ""))
    if iron:
        form = _IRON_FORM[(iron["asform"] or iron["form"]).removeprefix("as")]
        is_total = any(iron[part] for part in ("before", "word", "after", "asform"))
        return _TOTAL_IRON[form] if is_total else form
    water = re.fullmatch(r"h2o([+-])(?:\d+c?)?", bare)
    if water:
        return "H2O" + water[1]
    if re.fullmatch(r"loi\d{3,4}°?c?", bare):
        return "LOI"
    return _BY_CASE.get(bare) if len(bare) > 1 or len(squeezed) == 1 else None


@lru_cache(maxsize=4096)
def read_heading(text: str) -> Heading:
    """Take a heading apart into analyte, unit and what is left (a method code)."""
    text = unicodedata.normalize("NFKC", text).strip()
    if not text or re.fullmatch(r"(?i)unnamed:? ?\d+(_level_\d+)?", text):
        return Heading()
    unit = canonical_unit(text)
    if unit is not None and analyte_symbol(text) is None:
        return Heading(unit=unit)
    whole = analyte_symbol(text)
    if whole is not None:
        return Heading(analyte=whole)
    rest, unit = split_unit(text)
    symbol = analyte_symbol(rest)
    if symbol is not None:
        return Heading(symbol, unit)
    if _NO_RESULT.search(rest):
        return Heading(unit=unit, method=rest)
    bracket = re.fullmatch(r"(\w+)\s*[(\[]\s*(\w[^()\[\]]*)[)\]]", rest)
    if bracket and (symbol := analyte_symbol(bracket[1])) is not None:
        oxide = any(map(str.isdigit, bracket[1]))  # it is meant in any case
        code = re.search(r"[A-Za-z]", bracket[2]) and len(bracket[2]) > 1 and may_be_method(bracket[2])
        if oxide or (bracket[1] == symbol and code):
            return Heading(symbol, unit, bracket[2].strip())
    found = _within(rest, unit is not None)
    if found is None:
        return Heading(unit=unit, method=rest or None)
    return Heading(found[0], unit, found[1])


def _within(text: str, with_unit: bool) -> tuple[str, str | None] | None:
    """An analyte followed by a method: ``Au-FA50``, ``Zr XRF``, ``XRF_Zr``."""
    words = [word for word in re.split(r"[\s_,;:/|\-]+", text) if word]
    duplicate = re.fullmatch(r"(.+)\.(\d{1,2})", text)  # "Au.1": a heading made unique by a spreadsheet or a program
    if duplicate and analyte_symbol(duplicate[1]) is not None:
        return str(analyte_symbol(duplicate[1])), None
    # only a heading that begins with the analyte in its own case, or one of a few method words around it
    ratio = _RATIO.match(text)
    if ratio and analyte_symbol(ratio[1]) is not None and analyte_symbol(ratio[2]) is not None:
        return None  # a ratio
    for length in range(min(4, len(words)), 0, -1):
        symbol, rest = analyte_symbol(" ".join(words[:length])), words[length:]
        if rest and not with_unit and not _CODE_WITH_LETTERS.match(" ".join(rest)):
            continue
        in_lower_case = with_unit and rest and all(_METHOD_WORD.fullmatch(word) for word in rest)
        if symbol == "Total" and not all(_METHOD_WORD.fullmatch(word) for word in rest):
            continue  # "Total alkalis", "Sum LREE"
        if symbol is not None and (in_lower_case or _written_as(words[:length], symbol, rest)) and rest != ["situ"]:
            return symbol, _bare(" ".join(rest)) or None
    if len(words) <= 4 and len(words) > 1:
        symbol = analyte_symbol(words[-1])
        if symbol is not None and words[-1] == symbol and (len(symbol) > 1 or "_" in text) and _method_like(words[:-1]):
            return symbol, " ".join(words[:-1])
    return None


def _bare(text: str) -> str:
    """A text without the brackets around all of it."""
    inside = re.fullmatch(r"[(\[]([^()\[\]]*)[)\]]", text)
    return inside[1].strip() if inside else text


def _written_as(words: list[str], symbol: str, rest: list[str]) -> bool:
    """Whether the words are the symbol in its own case or all capitals; ``in place`` is not indium.

    A name written out (``Lithium``) must be followed by method words only: ``Lithium borate`` is not lithium.
    """
    text = "".join(words)
    if text.isalpha() and len(text) > 3 and text.casefold() in _WORDS:
        return all(_METHOD_WORD.fullmatch(word) for word in rest)
    return text == symbol or text == symbol.upper() or text.casefold() != symbol.casefold()


def _method_like(words: list[str]) -> bool:
    return all(re.fullmatch(r"[A-Z]{2,}[A-Z0-9]*\d*[a-z]?|[0-9]+[A-Z]+", word) for word in words)
