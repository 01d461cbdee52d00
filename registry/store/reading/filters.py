"""The filter of a list of samples: read from the arguments of a URL, written back to them, turned into SQL.

Nothing a reader types gets into the text of a query: column names are looked up in ``Columns``, values are bound.
"""

from __future__ import annotations

import math
import unicodedata
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field

from registry.store.reading.columns import CODE, Column, Columns
from registry.store.sheets import VERDICT_WORDS

KINDS = ("core", "chips", "outcrop", "float", "unknown", "reference_material", "blank", "duplicate")
#: By the number that ``verdict.verdict`` and ``derived.best_verdict`` store.
VERDICTS = VERDICT_WORDS
DEFAULT_COLUMNS = (
    "best_verdict", "best_target", "site_code", "from_m", "to_m", "intrusion", "lithology", "sio2_wt", "mgo_wt",
    "differentiation_index", "tas_plutonic",
)  # fmt: skip
#: The order by a target's score, which exists once a target is chosen.
SCORE = "score"
NAMED = ("area", "site", "intrusion")
PAGE_ARGUMENTS = ("after", "before")
ADDING_ARGUMENTS = ("add_column", "add_min", "add_max", "descending")
MOST_COLUMNS = 40
LONGEST_TEXT = 200


@dataclass(frozen=True)
class Range:
    """Samples whose ``column`` lies from ``low`` to ``high``, ends included; None leaves an end open.

    Both are None only where what was typed is told in the filter's ``problems``.
    """

    column: Column
    low: float | None
    high: float | None


@dataclass(frozen=True)
class Filter:
    """What a list shows, and in which order. ``problems`` holds a sentence by the name of the faulty argument."""

    text: str = ""
    area: tuple[str, ...] = ()
    site: tuple[str, ...] = ()
    intrusion: tuple[str, ...] = ()
    kind: tuple[str, ...] = ()
    target: str | None = None
    verdict: tuple[str, ...] = ()
    ranges: tuple[Range, ...] = ()
    sort: str = "sample_code"
    descending: bool = False
    columns: tuple[str, ...] = DEFAULT_COLUMNS
    problems: Mapping[str, str] = field(default_factory=dict)

    @property
    def narrows(self) -> bool:
        """True where some condition leaves samples out; a target alone does not."""
        named = self.area or self.site or self.intrusion
        return bool(self.text or named or self.kind or self.verdict or self.ranges)

    def arguments(self) -> list[tuple[str, str]]:
        """The filter as URL arguments, each given once in a fixed order, defaults left out."""
        pairs = [("text", self.text)] if self.text else []
        for name in ("kind", *NAMED):
            pairs += [(name, value) for value in getattr(self, name)]
        if self.target:
            pairs.append(("target", self.target))
        pairs += [("verdict", word) for word in self.verdict]
        for limit in self.ranges:
            if limit.low is not None:
                pairs.append((f"{limit.column.name}_min", number_text(limit.low)))
            if limit.high is not None:
                pairs.append((f"{limit.column.name}_max", number_text(limit.high)))
        if self.sort != "sample_code" or self.descending:
            pairs.append(("sort", ("-" if self.descending else "") + self.sort))
        if self.columns != DEFAULT_COLUMNS:
            pairs.append(("columns", ",".join(self.columns)))
        return pairs


def number_text(value: float) -> str:
    """A limit as a person would type it: ``20``, not ``20.0``."""
    return str(int(value)) if value == int(value) and abs(value) < 1e15 else repr(value)


def _number(typed: str, name: str, problems: dict[str, str]) -> float | None:
    typed = typed.strip()
    if not typed:
        return None
    try:
        value = float(typed.replace("\N{MINUS SIGN}", "-"))
    except ValueError:
        hint = f"write {typed.replace(',', '.')} with a point" if typed.count(",") == 1 else "write it like 20 or 0.35"
        problems[name] = f"“{typed}” is not a number; {hint}."
        return None
    if not math.isfinite(value):
        problems[name] = f"“{typed}” is no limit; leave the field empty for an open end."
        return None
    return value


def _one(arguments: Mapping[str, Sequence[str]], name: str, problems: dict[str, str]) -> str:
    values = [value for value in dict.fromkeys(value.strip() for value in arguments.get(name, ())) if value]
    if len(values) > 1:
        problems[name] = f"“{name}” was given {len(values)} times; give it once."
    return values[0] if values else ""


def _words(
    arguments: Mapping[str, Sequence[str]], name: str, known: Sequence[str], what: str, problems: dict[str, str]
) -> tuple[str, ...]:
    values = tuple(dict.fromkeys(value.strip() for value in arguments.get(name, ()) if value.strip()))
    for value in values:
        if value not in known:
            problems[name] = f"“{value}” is no {what}; choose from {', '.join(known)}."
    return tuple(value for value in values if value in known)


#: What is said of the character NUL, which no text of PostgreSQL can hold.
_UNTYPEABLE = "The words hold a character that no code or name can hold; type them again."


def _unknown_column(name: str, columns: Columns) -> str:
    near = [column for column in columns if name and (name in column or column in name)][:3]
    hint = f"; near it are {', '.join(near)}" if near else "; the page Methods lists them"
    return f"There is no column “{name}” in the sample views{hint}."


def _ranges(arguments: Mapping[str, Sequence[str]], columns: Columns, problems: dict[str, str]) -> tuple[Range, ...]:
    names: dict[str, None] = {}
    for argument in arguments:
        stem, _, end = argument.rpartition("_")
        if end in ("min", "max") and stem and stem != "add":
            names[stem] = None
    limits: dict[str, tuple[str, str, str, str]] = {
        name: (
            _one(arguments, f"{name}_min", problems),
            _one(arguments, f"{name}_max", problems),
            f"{name}_min",
            f"{name}_max",
        )
        for name in names
    }
    added = _one(arguments, "add_column", problems)
    low, high = _one(arguments, "add_min", problems), _one(arguments, "add_max", problems)
    if added:
        if low or high:
            limits[added] = (low, high, "add_min", "add_max")
        else:
            problems["add_min"] = "Give a lower limit, an upper limit or both."
    elif low or high:
        problems["add_column"] = "Choose the column that these limits belong to."
    found = []
    for name, (low, high, low_name, high_name) in limits.items():
        if not (low or high):
            continue
        column = columns.get(name)
        if column is None or not column.numeric:
            where = "add_column" if low_name == "add_min" else low_name if low else high_name
            problems[where] = (
                _unknown_column(name, columns) if column is None else f"“{name}” holds words; a range needs a number."
            )
            continue
        least, greatest = _number(low, low_name, problems), _number(high, high_name, problems)
        if least is not None and greatest is not None and least > greatest:
            problems[low_name] = (
                f"The lower limit {number_text(least)} is above the upper limit {number_text(greatest)}; exchange them."
            )
        found.append(Range(column, least, greatest))
    return tuple(found)


def _sort(
    arguments: Mapping[str, Sequence[str]], columns: Columns, target: str | None, problems: dict[str, str]
) -> tuple[str, bool]:
    typed = _one(arguments, "sort", problems)
    descending = typed.startswith("-")
    name = typed[1:] if descending else typed
    turned = _one(arguments, "descending", problems)
    if turned in ("0", "1"):
        descending = turned == "1"
    elif turned:
        problems["descending"] = f"“{turned}” is no order; give 0 for lowest first or 1 for highest first."
    if name == SCORE and target is None:
        problems["sort"] = "An order by score needs a target; choose one, or order by another column."
    elif name and name not in (SCORE, "sample_code") and name not in columns:
        problems["sort"] = _unknown_column(name, columns)
    else:
        return name or "sample_code", descending
    return "sample_code", False


def _columns(arguments: Mapping[str, Sequence[str]], columns: Columns, problems: dict[str, str]) -> tuple[str, ...]:
    names = [name.strip() for value in arguments.get("columns", ()) for name in value.split(",")]
    names = [name for name in dict.fromkeys(names) if name]
    for name in names:
        if name not in columns:
            problems["columns"] = _unknown_column(name, columns)
    chosen = tuple(name for name in names if name in columns)
    if len(chosen) > MOST_COLUMNS:
        problems["columns"] = f"{len(chosen)} columns are too many for a page; choose at most {MOST_COLUMNS}."
        chosen = chosen[:MOST_COLUMNS]
    default = tuple(name for name in DEFAULT_COLUMNS if name in columns)
    # a form gives its ticks in the order of the views
    return DEFAULT_COLUMNS if not chosen or set(chosen) == set(default) else chosen


def parse_filter(
    arguments: Mapping[str, Sequence[str]], columns: Columns, targets: Sequence[str], *, also: Iterable[str] = ()
) -> Filter:
    """The filter that URL ``arguments`` (name -> its values) ask for.

    ``targets`` are the codes of the registry's targets; ``also`` names arguments that belong to the page. What
    cannot be understood is left out and told in ``problems``, a sentence by argument name.
    """
    problems: dict[str, str] = {}
    words = unicodedata.normalize("NFC", _one(arguments, "text", problems))
    if len(words) > LONGEST_TEXT:
        problems["text"] = f"The words are {len(words)} characters long; search for at most {LONGEST_TEXT}."
        words = ""
    if "\x00" in words:
        problems["text"] = _UNTYPEABLE
        words = ""
    targets_asked = _words(arguments, "target", targets, "target", problems)
    if len(targets_asked) > 1:
        problems["target"] = "One target at a time: choose " + " or ".join(targets_asked) + "."
    target = targets_asked[0] if targets_asked else None
    sort, descending = _sort(arguments, columns, target, problems)
    known = {"text", "kind", *NAMED, "target", "verdict", "sort", "columns", *PAGE_ARGUMENTS, *ADDING_ARGUMENTS, *also}
    for name in arguments:
        stem, _, end = name.rpartition("_")
        if name not in known and not (end in ("min", "max") and stem):
            problems[name] = f"There is no condition called “{name}”; take it out of the address."
    named = {
        name: tuple(dict.fromkeys(value.strip() for value in arguments.get(name, ()) if value.strip()))
        for name in NAMED
    }
    for name in [name for name, values in named.items() if any("\x00" in value for value in values)]:
        problems[name], named[name] = _UNTYPEABLE, ()
    return Filter(
        text=words,
        **named,
        kind=_words(arguments, "kind", KINDS, "kind of sample", problems),
        target=target,
        verdict=_words(arguments, "verdict", VERDICTS, "verdict", problems),
        ranges=_ranges(arguments, columns, problems),
        sort=sort,
        descending=descending,
        columns=_columns(arguments, columns, problems),
        problems=problems,
    )


def sort_column(asked: Filter, columns: Columns) -> Column:
    """The column a filter orders by; the score of a target lies in ``verdict``."""
    if asked.sort == SCORE:
        return Column(SCORE, "score", "verdict_sheet", "1", "least score of the target", "verdict", "score_min", True)
    return CODE if asked.sort == "sample_code" else columns[asked.sort]
