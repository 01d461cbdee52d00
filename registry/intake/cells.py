"""One cell of a results table: a number with its qualifier, a word for no result, or something that does not belong."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass

from registry.intake.units import canonical_unit

NUMBER, MISSING, BELOW, ABOVE, INSUFFICIENT, SPREADSHEET_ERROR, TEXT = range(7)


@dataclass(frozen=True)
class Cell:
    """``state`` is one of the constants above; ``value`` counts only with NUMBER; ``unit`` stood in the cell itself."""

    state: int
    value: float = float("nan")
    qualifier: int = 0
    unit: str | None = None
    #: the cell can be read in two ways (``1,234``): which one was taken
    doubt: str | None = None


_BELOW_WORDS = frozenset(
    [
        "nd",
        "n.d",
        "lod",
        "<lod",
        "<dl",
        "<mdl",
        "<lld",
        "<llod",
        "bdl",
        "b.d.l",
        "bd",
        "b.d",
        "bld",
        "lld",
        "<bdl",
        "<loq",
        "<lor",
        "<rl",
        "<ldl",
        "bloq",
        "tr",
        "trace",
        "<",
        "dl",
        "mdl",
        "below",
        "below_dl",
        "below_lod",
        "belowdetection",
        "belowdetectionlimit",
        "belowlimit",
        "notdetected",
        "nil",
    ]
)
_MISSING_WORDS = frozenset(
    [
        "na",
        "n.a",
        "n/a",
        "nan",
        "n.an",
        "nr",
        "n.r",
        "null",
        "none",
        "-",
        "--",
        "---",
        "*",
        ".",
        "notanalysed",
        "notanalyzed",
        "notreported",
        "notdetermined",
        "notassayed",
        "n.det",
        "blank?",
        "pending",
        "?",
        "nodata",
        "#n/a",
    ]
)
_INSUFFICIENT_WORDS = frozenset(
    [
        "is",
        "i.s",
        "i/s",
        "ins",
        "insf",
        "n.s.s",
        "nss",
        "insufficient",
        "insufficientsample",
        "insufficientsamplematerial",
        "insufficientmaterial",
        "samplenotreceived",
        "snr",
        "notreceived",
        "lnr",
        "l.n.r",
        "listednotreceived",
        "listed,notreceived",
        "listednotpresent",
        "listedbutnotreceived",
        "nosample",
        "ns",
        "n.s",
        "missing",
        "lost",
        "destroyed",
    ]
)
_ABOVE_WORDS = frozenset([">", ">dl", ">uol", ">udl", "overrange", "over-range", "o/r", "abovelimit", "saturated"])
#: Numbers by which exports mark a missing value. Common practice, no source.
NO_DATA_MARKS = (-99.0, -999.0, -9999.0, -99999.0)
#: Words of a qualifier column: 1 below, 2 above.
QUALIFIER_CODES = {"<": 1, "<=": 1, "bdl": 1, "lt": 1, "nd": 1, "u": 1, ">": 2, ">=": 2, "gt": 2}
NO_QUALIFIER = {"", "=", "-", ".", "n", "na", "~"}
#: Words with more to them, in lower case without spaces: what is tried before a cell is called a text.
_PHRASES = (
    (
        INSUFFICIENT,
        re.compile(
            r"iss|(sample)?(is)?insuff?(icient)?([,;:/-]?(sample|pulp|material|mass|weight|quantity|for|to)[a-z]*)?"
            r"|listed[,;:/-]*(but|and)?[,;:/-]*not(present|received|submitted|supplied|found)"
            r"|(sample)?not(present|received|submitted|supplied|found)|sample(is)?(missing|lost|damaged|destroyed|empty)"
            r"|(sample)?lostintransit|empty(bag)?"
        ),
    ),
    (
        BELOW,
        re.compile(
            r"(<|(is)?(below|under|lessthan))(the)?(lod|loq|lor|dl|rl|mdl|lld|(lowerlimit|limit)of(detection|quantification)"
            r"|(lower)?(det|detection|reporting|quantification)(lim|limits?|level)?)"
        ),
    ),
    (
        ABOVE,
        re.compile(
            r"(>|(is)?(above|over))(the)?(udl|uol|uld|ul|range|lim|limit|upperlimit|(upper)?(detection|reporting)limit)|over"
        ),
    ),
    (MISSING, re.compile(r"not(requested|required|applicable|available|measured|assigned)|tofollow|[-.]*-[-.]*")),
)
_ERRORS = re.compile(r"#(div/0|value|ref|name|num|null|spill|calc|error)[!?]?|err:\d+")
_DASHES = str.maketrans(
    dict.fromkeys(
        "\u2010\u2011\u2012\u2013\u2014\u2015\u2212\ufe63\uff0d\u00ad\u02d7\u058a\u2043\u23af\u2500\u2501\u2796\u2e3a\u2e3b",
        "-",
    )
)
_INVISIBLE = re.compile("[\u200b-\u200f\u2060\ufeff]")
_SIGN = re.compile(r"(<=|=<|>=|=>|<|>|≤|≥|&lt;|&gt;|less than|greater than)\s*")
_BELOW_SIGNS = ("<", "<=", "=<", "≤", "&lt;", "less than")
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?")
_POWER = re.compile(r"\s*[x\u00d7*\u00b7]\s*10\s*\^?\s*\(?([+-]?\d+)\)?")
#: What groups digits beside point and comma, by the sign that is allowed to.
_SPACES = {
    sign: re.compile(rf"(?<=\d)[{signs}](?=\d{{3}}(\D|$))")
    for sign, signs in ((None, r"\s'\u2019"), (" ", r"\s"), ("'", r"'\u2019"))
}


def parse_cell(text: str, decimal: str = ".", thousands: str | None = None) -> Cell:
    """Read one cell. ``decimal`` is the file's decimal sign.

    ``thousands`` is the sign that groups digits, empty for none; None: the other of point and comma, a space or an
    apostrophe, with a doubt where it could be the decimal sign as well.
    """
    plain = unicodedata.normalize("NFKC", text).strip()
    if not plain.isascii():
        plain = _INVISIBLE.sub("", plain).translate(_DASHES).strip()
    plain = plain.removeprefix("'")  # by which a spreadsheet marks a text
    if not plain:
        return Cell(MISSING)
    folded = plain.casefold()
    word = re.sub(r"\s+", "", folded).rstrip(".") or "."
    if word in _MISSING_WORDS or set(word) == {"-"}:
        return Cell(MISSING)
    if word in _BELOW_WORDS:
        return Cell(BELOW)
    if word in _INSUFFICIENT_WORDS:
        return Cell(INSUFFICIENT)
    if word in _ABOVE_WORDS:
        return Cell(ABOVE)
    if _ERRORS.fullmatch(word):
        return Cell(SPREADSHEET_ERROR)
    sign = _SIGN.match(folded)
    qualifier = 0
    if sign:
        qualifier = 1 if sign.group(1) in _BELOW_SIGNS else 2
        folded = folded[sign.end() :]
    number, rest = _number(folded, decimal, thousands)
    if number is None:
        bare = re.sub(r"(?<=[a-z])\.(?=[a-z])", "", word).replace("&lt;", "<").replace("&gt;", ">")
        return Cell(next((state for state, phrase in _PHRASES if phrase.fullmatch(bare)), TEXT))
    value, doubt = number
    unit = None
    if rest:
        unit = canonical_unit(rest)
        if unit is None:
            return Cell(TEXT)
    return Cell(NUMBER, value, qualifier, unit, doubt)


def _number(text: str, decimal: str, allowed: str | None) -> tuple[tuple[float, str | None] | None, str]:
    """The number at the start of a text, with a doubt if it has one, and what follows it."""
    text = _SPACES[allowed].sub("", text) if allowed in _SPACES else text
    body = re.match(r"[+-]?\s?[\d.,]*\d[.,]?", text)
    if body is None:
        return None, text
    digits, rest = body.group().replace(" ", ""), text[body.end() :]
    power = re.match(r"e[+-]?\d+", rest)
    exponent = 0
    if power:
        exponent, rest = int(power.group()[1:]), rest[power.end() :]
    else:
        power = _POWER.match(rest)
        if power:
            exponent, rest = int(power.group(1)), rest[power.end() :]
    thousands = "," if decimal == "." else "."
    doubt = None
    if thousands in digits:
        if allowed not in (None, thousands):
            return None, text
        grouped = re.fullmatch(rf"[+-]?\d{{1,3}}(\{thousands}\d{{3}})+(\{decimal}\d*)?", digits)
        if not grouped or digits.lstrip("+-").startswith("0"):
            return None, text
        if allowed is None and digits.count(thousands) == 1 and decimal not in digits:
            doubt = "thousands"
        digits = digits.replace(thousands, "")
    digits = digits.replace(decimal, ".")
    if not _NUMBER.fullmatch(digits) or abs(exponent) > 300:
        return None, text
    return (float(f"{digits}e{exponent}"), doubt), rest.strip()


def decimal_sign(texts: list[str]) -> tuple[str, bool]:
    """The decimal sign that a sample of cells uses, and whether they settle it.

    A comma not followed by exactly three digits, or after a leading zero, is a decimal comma; a point likewise.
    """
    comma = point = grouped_comma = grouped_point = 0
    for text in texts:
        found = re.fullmatch(r"[<>≤≥=\s]*[+-]?(\d[\d.,]*|[.,]\d+)\s*%?([eE][+-]?\d+)?", text.strip().translate(_DASHES))
        if not found:
            continue
        digits = found.group(1)
        if "," in digits and "." in digits:
            if digits.rindex(",") > digits.rindex("."):
                comma += 1
            else:
                point += 1
        elif "," in digits:
            if re.fullmatch(r"[1-9]\d{0,2}(,\d{3})+", digits):
                grouped_comma += 1
            elif digits.count(",") == 1:
                comma += 1
        elif "." in digits:
            if re.fullmatch(r"[1-9]\d{0,2}(\.\d{3})+", digits):
                grouped_point += 1
            elif digits.count(".") == 1:
                point += 1
    if comma > point:
        return ",", True
    if point or not grouped_comma:
        return ".", bool(point or grouped_point) or not comma
    return ".", False
