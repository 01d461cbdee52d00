"""One cell of master data to a typed value: numbers in the contract's unit, dates, truth values, words of a list."""

from __future__ import annotations

import re
from datetime import date

from registry.intake.cells import NUMBER, parse_cell

#: Factors from a unit stated in a heading to the unit of the contract's column name.
_FACTORS: dict[str, dict[str, float]] = {
    "_m": {"m": 1, "metres": 1, "meters": 1, "metre": 1, "ft": 0.3048, "feet": 0.3048, "km": 1000, "cm": 0.01},
    "_deg": {"deg": 1, "degrees": 1, "°": 1, "degree": 1},
    "_c": {"c": 1, "°c": 1, "deg c": 1},
    "_km3": {"km3": 1, "m3": 1e-9},
    "_ma": {"ma": 1, "myr": 1, "ka": 1e-3, "ga": 1e3, "kyr": 1e-3},
    "_kg_m3": {"kg/m3": 1, "kg m3": 1, "g/cm3": 1000, "g cm3": 1000, "t/m3": 1000, "g/cc": 1000, "kg/m^3": 1,
               "g/cm^3": 1000},
    "_si": {"si": 1, "10 3 si": 1e-3, "10^ 3 si": 1e-3, "x10^ 3 si": 1e-3, "x10 3 si": 1e-3, "10 5 si": 1e-5,
            "x10^ 5 si": 1e-5, "10^ 5 si": 1e-5, "msi": 1e-3},
    "_mw_m2": {"mw/m2": 1, "mw m2": 1, "w/m2": 1000},
    "_uw_m3": {"uw/m3": 1, "uw m3": 1},
    "_w_m_k": {"w/m/k": 1, "w/mk": 1, "w m k": 1, "w/(m k)": 1, "w/m k": 1},
}  # fmt: skip
_TRUE = frozenset(["y", "yes", "true", "t", "1", "x", "kept", "available", "mapped", "ja", "oui", "si"])
_FALSE = frozenset(["n", "no", "false", "f", "0", "inferred", "none", "nein", "non"])
_BLANK = frozenset({"", "-", "--", "\u2014", "\u2013", "na", "n/a", "n.a.", "nan", "null", "none"})
_MONTHS = ["jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec"]
#: Other words of the trade for the contract's words.
_WORDS = {
    "drill_hole": "drill hole|drillhole|dh|ddh|hole|borehole|rc|rab|diamond|core hole|dd|collar|well",
    "outcrop": "outcrop sample|rock sample|rock chip sample|grab sample|oc|surface|station|rock chip|grab|exposure",
    "core": "drill core|core sample|drill core sample|half core|quarter core|ddh|hc|qc core",
    "chips": "chip|chip sample|rc|rc chips|drill chips|cuttings|ch",
    "float": "boulder|float boulder",
    "reference_material": "crm|standard|std|reference material|srm|reference|certified reference material",
    "blank": "blk|bl|blank sample",
    "duplicate": "dup|repeat|duplicate sample|field duplicate|field dup|core duplicate|quarter core duplicate"
    "|crush duplicate|crush dup|coarse duplicate|coarse reject duplicate|reject duplicate|prep duplicate"
    "|pulp duplicate|pulp dup|lab duplicate|laboratory duplicate|lab repeat",
    "field": "core|quarter core|field duplicate", "crush": "crushed|coarse|coarse reject|reject|prep|crush duplicate",
    "pulp": "pulps|pulp duplicate", "lab": "laboratory|repeat|lab repeat",
    "unknown": "not known|unspecified",
    "sphere": "spherical|stock|ball", "slab": "sheet|sill|dyke|dike|tabular|laccolith",
    "cylinder": "pipe|plug|cylindrical",
    "true": "true north|tn|t|geographic", "grid": "grid north|gn|g|utm", "magnetic": "magnetic north|mn|mag|m",
}  # fmt: skip


def stage_in(text: str) -> str | None:
    """The stage of a duplicate that its kind names: ``pulp duplicate`` -> ``pulp``; None where it names none."""
    words = re.sub(r"[\s_-]+", " ", text).strip().casefold()
    found = re.fullmatch(r"(.+?) (?:duplicate|dup|repeat)", words)
    stage = word(found[1], ("field", "crush", "pulp", "lab")) if found else None
    return stage if word(text, ("duplicate",)) else None


def unit_factor(field_name: str, unit: str) -> float | None:
    """The factor from a unit stated in a heading to the column's unit; None if it does not belong to it."""
    for ending in sorted(_FACTORS, key=len, reverse=True):
        if field_name.endswith(ending):
            return _FACTORS[ending].get(unit.strip())
    if field_name in ("easting", "northing"):
        return _FACTORS["_m"].get(unit.strip())
    if field_name in ("longitude", "latitude"):
        return _FACTORS["_deg"].get(unit.strip())
    return None


def is_blank(text: str) -> bool:
    return text.strip().casefold() in _BLANK


def number(text: str, decimal: str) -> float | None:
    """A plain number, or None if the text is not one (a qualifier or a unit in the cell is not plain)."""
    cell = parse_cell(text, decimal)
    return cell.value if cell.state == NUMBER and cell.qualifier == 0 and cell.unit is None else None


def epsg_number(text: str, decimal: str) -> float | None:
    """The number of a coordinate system, with or without ``EPSG`` before it."""
    return number(re.sub(r"(?i)^\s*epsg\s*[:.#]*\s*", "", text), decimal)


def truth(text: str) -> bool | None:
    folded = text.strip().casefold()
    return True if folded in _TRUE else False if folded in _FALSE else None


def word(text: str, allowed: tuple[str, ...]) -> str | None:
    """The contract's word that a text means, or None."""
    plain = re.sub(r"[\s_\-]+", " ", text.strip().casefold())
    for one in allowed:
        if plain == one.replace("_", " ") or plain in _WORDS.get(one, "").split("|"):
            return one
    return None


def iso_date(text: str) -> str | None:
    """An ISO date from a date that can be read in one way only; None for the rest (03/04/2021)."""
    plain = text.strip()
    found = re.fullmatch(r"(\d{4})[-/.](\d{1,2})[-/.](\d{1,2})(?:[T ]\d\d:\d\d(?::\d\d(?:\.\d+)?)?Z?)?", plain)
    if found:
        return _date(int(found[1]), int(found[2]), int(found[3]))
    found = re.fullmatch(r"(\d{4})(\d\d)(\d\d)", plain)
    if found:
        return _date(int(found[1]), int(found[2]), int(found[3]))
    found = re.fullmatch(r"(\d{1,2})[\s\-./]+([A-Za-z]{3,9})\.?[\s\-./,]+(\d{4})", plain)
    if found and found[2][:3].casefold() in _MONTHS:
        return _date(int(found[3]), _MONTHS.index(found[2][:3].casefold()) + 1, int(found[1]))
    found = re.fullmatch(r"([A-Za-z]{3,9})\.?\s+(\d{1,2}),?\s+(\d{4})", plain)
    if found and found[1][:3].casefold() in _MONTHS:
        return _date(int(found[3]), _MONTHS.index(found[1][:3].casefold()) + 1, int(found[2]))
    found = re.fullmatch(r"(\d{1,2})[-/.](\d{1,2})[-/.](\d{4})", plain)
    if found:
        first, second, year = int(found[1]), int(found[2]), int(found[3])
        if first == second or first > 12:
            return _date(year, second, first)
        if second > 12:
            return _date(year, first, second)
    return None


def _date(year: int, month: int, day: int) -> str | None:
    try:
        return date(year, month, day).isoformat()
    except ValueError:
        return None
