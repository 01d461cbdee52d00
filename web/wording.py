"""The filter as words: what each editable part of the sentence above a list says."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

from flask import Flask
from markupsafe import Markup

from registry.store.reading.columns import Columns
from registry.store.reading.filters import SCORE, Filter, Range, number_text

KIND_WORDS = {
    "core": "core",
    "chips": "chip",
    "outcrop": "outcrop",
    "float": "float",
    "unknown": "unspecified",
    "reference_material": "reference-material",
    "blank": "blank",
    "duplicate": "duplicate",
}
VIEW_WORDS = {
    "sample_sheet": "Sample",
    "composition_sheet": "Composition as analysed",
    "volatile_free_sheet": "Volatile-free analysis",
    "norm_sheet": "CIPW weight norm",
    "cation_norm_sheet": "Cation norm",
    "index_sheet": "Indices and ratios",
    "class_sheet": "Names and classes",
    "melt_sheet": "Temperatures, melt, heat",
}
#: Oxides whose figures are set below the line.
_OXIDE = re.compile(r"\b(?:SiO2|TiO2|Al2O3|Fe2O3T?|Na2O|K2O|P2O5|Cr2O3|V2O3|V2O5|ZrO2|Li2O|CO2|SO3|H2O)(?![a-z0-9])")
_LOWERED = str.maketrans("0123456789", "₀₁₂₃₄₅₆₇₈₉")
_RAISED = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")
_EXPONENT = re.compile(r"(?<![\w.])(?<!\w-)(?P<mantissa>\d+(?:\.\d+)?)e(?P<exponent>[-+]?\d+)\b")
_COLUMN = re.compile(r"\b[a-z][a-z0-9]*(?:_[a-z0-9]+)+\b")
_SPELLINGS = {
    "sio2": "SiO2", "tio2": "TiO2", "al2o3": "Al2O3", "fe2o3": "Fe2O3", "fe2o3t": "total Fe2O3", "feo": "FeO",
    "feot": "total FeO", "mno": "MnO", "mgo": "MgO", "cao": "CaO", "na2o": "Na2O", "k2o": "K2O", "p2o5": "P2O5",
    "co2": "CO2", "loi": "LOI", "h2o": "H2O",
}  # fmt: skip
_NAMES = {
    "half_width_m": "half-width", "heat_flow_mw_m2": "heat flow of the area", "volume_km3": "volume", "sr_y": "Sr/Y",
    "v_sc": "V/Sc", "rb_sr": "Rb/Sr", "k_rb": "K/Rb", "la_yb": "La/Yb", "nb_ta": "Nb/Ta", "zr_hf": "Zr/Hf",
    "cu_zr": "Cu/Zr", "pd_pt": "Pd/Pt", "a_nk": "A/NK", "a_cnk": "A/CNK",
    "heat_production_uw_m3": "heat production", "th_u": "Th/U", "th_nb": "Th/Nb",
    "heat_x_thickness_mw_m2": "heat production times thickness", "theta_centre": "heat left at the centre",
    "eu_anomaly": "Eu/Eu*", "fe_number": "Fe-number", "mg_number": "Mg-number", "asi": "ASI",
    "mg_number_total_iron": "Mg-number (total iron)", "zircon_saturation_wh83_c": "temperature of zircon saturation",
    "zircon_model_applies": "rock within the zircon model", "intrusion_shape": "shape of the body",
    "intrusion_recorded": "the intrusion it belongs to", "arrived": "arrival of the body", "altered": "alteration",
}  # fmt: skip
_UNIT_ENDS = ("_wt", "_ppm", "_ma", "_m", "_km3", "_mw_m2", "_uw_m3", "_kg_m3", "_si", "_c")
#: In this order: the longer ends first.
_UNITS_BY_END = {
    "_kg_m3": "kg/m3", "_mw_m2": "mW/m2", "_uw_m3": "uW/m3", "_km3": "km3", "_ppm": "ppm", "_wt": "wt%", "_ma": "Ma",
    "_si": "SI", "_c": "C", "_m": "m",
}  # fmt: skip
_UNITS = {
    "C": "°C", "degC": "°C", "uW/m3": "µW/m³", "kg/m3": "kg/m³", "mW/m2": "mW/m²", "km3": "km³",
    "log10(Pa s)": "log₁₀ Pa s", "log10": "log₁₀", "m2/s": "m²/s",
}  # fmt: skip
_PRINTED = (
    ("+-", "±"), (">=", "≥"), ("<=", "≤"), (" - ", " \N{MINUS SIGN} "), ("uW/m3", "µW/m³"), ("mW/m2", "mW/m²"),
    ("kg/m3", "kg/m³"), (" to inf", " or more"),
)  # fmt: skip
_CITED = re.compile(r"(?P<authors>[^()]+?),? (?:\(eds?\.\),? )?\(?(?P<year>(?:18|19|20)\d\d)\b")
#: ``S.-s.`` and ``E-an`` are given names, ``Lord`` is a title.
_INITIALS = re.compile(r"(?:[A-Za-z]\.[- ]?)+(?:,? (?:Jr|II)\.?)?|E-an|Lord")


def formula(text: str) -> str:
    """Oxides with their figures below the line."""
    return _OXIDE.sub(lambda found: found.group().translate(_LOWERED), text)


def column_words(name: str) -> str:
    """A column name as a person says it: ``feo_titrated_wt`` is ``FeO titrated``, ``sn_ppm`` is ``Sn``."""
    if name in _NAMES:
        return _NAMES[name]
    element = name.endswith("_ppm") or name in ("f_wt", "s_wt", "cl_wt")
    stem = next((name.removesuffix(end) for end in _UNIT_ENDS if name.endswith(end)), name)
    closed = stem.endswith("_vf")
    words = stem.removesuffix("_vf").split("_")
    spelled = " ".join(_SPELLINGS.get(word, word.capitalize() if element else word) for word in words)
    return formula(spelled) + (" volatile-free" if closed else "")


def powers_of_ten(text: str) -> str:
    """Numbers such as ``2.215e-05`` as a person writes them, with at most three digits before the sign of times."""

    def spelled(found: re.Match[str]) -> str:
        value, exponent = float(found["mantissa"]), int(found["exponent"])
        power = f"10{str(exponent).translate(_RAISED)}"
        return power if found["mantissa"] == "1" else f"{value:.3g} \N{MULTIPLICATION SIGN} {power}"

    return _EXPONENT.sub(spelled, text)


def marked(text: str) -> Markup:
    """A text of the dictionary as HTML: column names and code words set as code, formulas and powers in print."""
    printed = powers_of_ten(formula(text))
    parts = re.split(r"(\w*[A-Za-z0-9]_\w+)", printed)
    return Markup("").join(Markup("<code>{}</code>").format(part) if n % 2 else part for n, part in enumerate(parts))


def readable(text: str) -> str:
    """A test or sentence in print: ``≥ 35``, ``≤ 0.5 La``, ``from 40 to 88``, ``is magnetite``; no column names."""
    if text.startswith("between "):
        return "from " + text.removeprefix("between ").replace(" and ", " to ")
    if text == "= yes":
        return "yes"
    if text.startswith("= "):
        return "is " + text.removeprefix("= ").replace(", ", " or ")
    for written, printed in _PRINTED:
        text = text.replace(written, printed)
    text = powers_of_ten(text)
    text = re.sub(r"([≥≤<>]) (?=[\d-])", "\\1\N{NO-BREAK SPACE}", text)
    return formula(_COLUMN.sub(lambda found: column_words(found.group()), text))


def unit_words(unit: str) -> str:
    """A unit in print; nothing for pure numbers and words."""
    return "" if unit in ("1", "text") else _UNITS.get(unit, unit)


def unit_of_column(name: str, units: Mapping[str, str] | None = None) -> str:
    """The unit of a quantity as it follows a number: from ``units`` by name, else from the end of its column name."""
    if units and name in units:
        return unit_after(units[name])
    return next((unit_after(unit) for end, unit in _UNITS_BY_END.items() if name.endswith(end)), "")


def column_letters(position: int) -> str:
    """The letters that a sheet gives its column ``position``, counted from 0: ``A``, ``Z``, ``AA``."""
    letters, rest = "", position + 1
    while rest:
        rest, letter = divmod(rest - 1, 26)
        letters = chr(ord("A") + letter) + letters
    return letters


def short_source(source: str) -> str:
    """A citation as it stands in running text: ``Frost et al. 2001``; the first words where nobody is cited."""
    cited = _CITED.match(source)
    if cited is None or source.lower().startswith(("common practice", "convention")):
        return re.split(r"[:;.]", source, maxsplit=1)[0]
    authors, *others = re.split(r" et al\.?", cited["authors"].strip())
    parts = re.split(r", | and | & ", authors)
    names = [part for part in parts if not _INITIALS.fullmatch(part) and part]
    several = bool(others) or len(names) > 2
    who = f"{names[0]} et al." if several else " and ".join(names)
    return f"{who} {cited['year']}"


def digestion_words(code: str) -> str:
    """A stored digestion as it is said: ``four-acid``, ``portable XRF``."""
    known = {"xrf": "XRF", "portable_xrf": "portable XRF", "inaa": "INAA", "four_acid": "four-acid"}
    return known.get(code, code.replace("_", " "))


def lower_first(words: str) -> str:
    """Words as they stand within a sentence: the first letter small, symbols further on as they are."""
    return words[:1].lower() + words[1:]


def register(app: Flask) -> None:
    """Make the spellings known to the templates."""
    app.jinja_env.filters.update(
        formula=formula,
        marked=marked,
        column_words=column_words,
        readable=readable,
        unit_words=unit_words,
        unit_of_column=unit_of_column,
        column_letters=column_letters,
        short_source=short_source,
        digestion_words=digestion_words,
        lower_first=lower_first,
    )


def joined(words: Sequence[str], last: str = "and") -> str:
    """``a``, ``a and b``, ``a, b and c``."""
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} {last} {words[-1]}"


def unit_after(unit: str) -> str:
    """A unit as it follows a number; nothing for pure numbers and words."""
    words = unit_words(unit)
    return f"\N{NO-BREAK SPACE}{words}" if words else ""


def kind_words(asked: Filter) -> str:
    """Before the noun: ``core and outcrop``; after it, where every kind is shown: ``of every kind``."""
    return joined([KIND_WORDS[kind] for kind in asked.kind]) if asked.kind else "of every kind"


def place_words(asked: Filter) -> str:
    """``North Block or South Block, in Aster stock, at DH-1``."""
    parts = []
    if asked.area:
        parts.append(joined(asked.area, "or"))
    if asked.intrusion:
        parts.append(("the intrusion " if not parts else "in the intrusion ") + joined(asked.intrusion, "or"))
    if asked.site:
        parts.append(("site " if not parts else "at site ") + joined(asked.site, "or"))
    return ", ".join(parts) or "everywhere"


def verdict_words(asked: Filter, targets: Mapping[str, str]) -> str:
    """``porphyry copper favourable or possible``."""
    words = joined(asked.verdict, "or") if asked.verdict else ""
    if asked.target:
        name = lower_first(targets[asked.target])
        return f"{name} {words}" if words else f"judged for {name}"
    return f"{words} as best verdict"


def range_words(limit: Range) -> str:
    """``Sr/Y at least 20``, ``SiO2 from 50 to 60 wt%``."""
    unit, name = unit_after(limit.column.unit), limit.column.label
    if limit.low is not None and limit.high is not None:
        return f"{name} from {number_text(limit.low)} to {number_text(limit.high)}{unit}"
    if limit.low is not None:
        return f"{name} at least {number_text(limit.low)}{unit}"
    if limit.high is not None:
        return f"{name} at most {number_text(limit.high)}{unit}"
    return f"{name} of what size?"


def sort_words(asked: Filter, columns: Columns) -> str:
    """``code``, ``Sr/Y, highest first``."""
    if asked.sort == "sample_code":
        return "code, last first" if asked.descending else "code"
    numeric = asked.sort == SCORE or columns[asked.sort].numeric
    name = "score" if asked.sort == SCORE else columns[asked.sort].label
    first = ("highest" if asked.descending else "lowest") if numeric else ("last" if asked.descending else "first")
    return f"{name}, {first} first" if numeric else f"{name}, {'Z to A' if asked.descending else 'A to Z'}"
