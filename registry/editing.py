"""Editing one sample, site, intrusion or area: the checks of an import, an optimistic lock, a note of what changed.

A field that is emptied is emptied in the registry (an import never does that). Codes and names stay as they are: they
are what files and other rows refer to.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from registry import auditing
from registry.errors import NotFound, PlutonbookError, Problem
from registry.intake import fields as readers
from registry.intake import kinds
from registry.intake.findings import Findings
from registry.intake.kinds import NUMBER, TRUTH, WORD, Field
from registry.intake.master_checks import check_rows
from registry.intake.readings import ReadingOptions
from registry.recomputing import Consequence, consequence_of
from registry.store import edits, masters
from registry.store.engine import Registry, writing

__all__ = [
    "KEY_FIELDS",
    "KINDS",
    "NEEDED",
    "NUMBER",
    "TRUTH",
    "WORD",
    "ChangedMeanwhile",
    "Edited",
    "Field",
    "Record",
    "Refused",
    "change",
    "fields_of",
    "find",
    "read_typed",
    "spelled",
]

#: What can be edited -> the kind of file that brings it in.
KINDS = {"sample": "samples", "site": "sites", "intrusion": "intrusions", "area": "areas"}
#: The field that names the thing; it is not edited.
KEY_FIELDS = {"sample": "sample_code", "site": "site_code", "intrusion": "intrusion", "area": "area"}
#: Fields that may not be emptied.
NEEDED = {"sample": ("sample_kind",), "site": ("site_kind",), "intrusion": (), "area": ()}
#: Fields that hold the code of a sample which is stored as a text.
_NAMED_SAMPLES = ("parent_sample", "fresh_sample")
_PLACING = frozenset({*edits.COORDINATES, "site_code", "from_m", "to_m", "site_kind", "azimuth_reference"})
CAUSE = "edited"


@dataclass(frozen=True)
class Record:
    """One thing as it stands: its fields by contract name (typed values, None blank) and the version of its row."""

    kind: str
    code: str
    row_version: int
    values: Mapping[str, Any]


@dataclass(frozen=True)
class Edited:
    """What was changed, in words; remarks on it; what became of the verdicts. No changes: nothing was written."""

    changes: tuple[str, ...] = ()
    remarks: tuple[str, ...] = ()
    consequence: Consequence = field(default_factory=lambda: Consequence((), 0))


class Refused(PlutonbookError):
    """What was typed cannot be taken; ``faults`` holds a sentence by field name, '' for what no field shows."""

    def __init__(self, faults: Mapping[str, str]) -> None:
        self.faults = dict(faults)
        super().__init__("; ".join(self.faults.values()))


class ChangedMeanwhile(PlutonbookError):
    """Another changed it since the form was shown; ``record`` is what it says now."""

    def __init__(self, record: Record) -> None:
        self.record = record
        super().__init__(f"the {record.kind} {record.code} was changed meanwhile by another")


def fields_of(kind: str) -> tuple[Field, ...]:
    """The fields of a kind that can be edited, in the contract's order."""
    return tuple(one for one in kinds.FIELDS[KINDS[kind]] if one.name != KEY_FIELDS[kind])


def find(connection: Any, kind: str, code: str) -> Record:
    """What is recorded of a thing; NotFound where there is none."""
    row = edits.read_row(connection, KINDS[kind], code)
    if row is None:
        raise NotFound(f"the registry holds no {kind} '{code}'")
    return _record(kind, code, row)


def _record(kind: str, code: str, row: Mapping[str, Any]) -> Record:
    values = {one.name: row.get(one.name) for one in fields_of(kind)}
    for one in fields_of(kind):
        if one.holds == TRUTH and values[one.name] is not None:
            values[one.name] = bool(values[one.name])
    return Record(kind, code, int(row["row_version"]), values)


def change(registry: Registry, kind: str, code: str, row_version: int, typed: Mapping[str, str]) -> Edited:
    """Store what was typed into the fields of a thing (those left out stay) and compute what it touches.

    Where that is more than ``recomputing.AT_ONCE`` samples they are left stale, for the caller to refresh.

    Raises Refused with a sentence by field, ChangedMeanwhile where the row is no longer of ``row_version``, NotFound
    where the thing is gone; nothing is changed then.
    """
    with writing(registry, what=f"an edit of {kind} {code}") as connection:
        row = edits.read_row(connection, KINDS[kind], code)
        if row is None:
            raise NotFound(f"the registry holds no {kind} '{code}'; it was deleted meanwhile")
        before = _record(kind, code, row)
        if before.row_version != row_version:
            raise ChangedMeanwhile(before)
        values, faults = read_typed(kind, typed)
        changed = {name: value for name, value in values.items() if value != before.values[name]}
        if not faults and not changed:
            return Edited()
        remarks: list[str] = []

        def apply(inside: Any) -> None:
            # every fault is told at once, whichever check finds it; with any of them nothing is kept
            found, told = _checked(inside, before, changed, row["row_id"])
            found = {**_stored(inside, before, changed, row["row_id"], told), **found, **faults}
            if found:
                raise Refused(found)
            remarks.extend(told)

        told = consequence_of(connection, apply, CAUSE)
        words = [f"{name} {spelled(before.values[name])} -> {spelled(value)}" for name, value in changed.items()]
        auditing.note(connection, "edit", f"{kind} {code}", "; ".join(words))
    return Edited(tuple(words), tuple(remarks), told)


def spelled(value: Any) -> str:
    """A value as a person types it: ``yes``, ``12.5``; ``(blank)`` for none."""
    if value is None:
        return "(blank)"
    if isinstance(value, bool):
        return "yes" if value else "no"
    return f"{value:.15g}" if isinstance(value, float) else str(value)


def read_typed(kind: str, typed: Mapping[str, str]) -> tuple[dict[str, Any], dict[str, str]]:
    """(values by field, a sentence by field for what cannot be read) of what was typed; blanks are None."""
    values: dict[str, Any] = {}
    faults: dict[str, str] = {}
    for one in fields_of(kind):
        if one.name not in typed:
            continue
        text = unicodedata.normalize("NFC", typed[one.name]).strip()
        values[one.name] = None
        if text:
            values[one.name] = _value(one, text, faults)
        elif one.name in NEEDED[kind]:
            faults[one.name] = f"It may not be empty; choose one of {_listed(one.words)}."
    return {name: value for name, value in values.items() if name not in faults}, faults


def _value(one: Field, text: str, faults: dict[str, str]) -> Any:
    if one.holds == NUMBER:
        return _number(one, text, faults)
    if one.holds == WORD:
        value: Any = readers.word(text, one.words)
        expected = f"one of {_listed(one.words)}"
    elif one.holds == kinds.DATE:
        value, expected = readers.iso_date(text), "a date such as 2024-05-31"
    elif one.holds == TRUTH:
        value, expected = readers.truth(text), "yes or no"
    else:
        return text
    if value is None:
        faults[one.name] = f"“{text}” was found, {expected} is expected."
    return value


def _number(one: Field, text: str, faults: dict[str, str]) -> float | int | None:
    value = readers.number(text.replace("\N{MINUS SIGN}", "-"), ".")
    low, high = float(one.low or 0.0), float(one.high or 0.0)
    if value is None:
        hint = f": write {text.replace(',', '.')} with a point" if text.count(",") == 1 else ""
        faults[one.name] = f"“{text}” is not a number{hint}; one from {low:g} to {high:g} is expected."
        return None
    if not low <= value <= high:
        faults[one.name] = f"{text} is out of range; a number from {low:g} to {high:g} is expected."
        return None
    if one.name == "epsg":
        if value != int(value):
            faults[one.name] = f"{text} is no whole number; an EPSG code such as 32633 is expected."
            return None
        return int(value)
    return value


def _listed(words: tuple[str, ...]) -> str:
    return ", ".join(word.replace("_", " ") for word in words)


def _checked(
    connection: Any, before: Record, changed: Mapping[str, Any], row_id: int
) -> tuple[dict[str, str], list[str]]:
    """(a sentence by field where cells do not go together, remarks) of the row as it would be."""
    after = {**before.values, **changed}
    plural = KINDS[before.kind]
    table = {KEY_FIELDS[before.kind]: [before.code], **{name: [value] for name, value in after.items()}}
    findings = Findings("form")
    check_rows(plural, table, np.array([1]), {name: name for name in table}, ReadingOptions(), findings, [])
    faults, remarks = _sorted(findings.problems(), changed)
    for name in _NAMED_SAMPLES:
        if changed.get(name) and not masters.sample_ids(connection, [changed[name]]):
            faults[name] = f"The registry holds no sample “{changed[name]}”."
    if before.kind == "site" and changed.get("depth_m") is not None:
        deepest = edits.deepest_m(connection, row_id)
        if deepest is not None and deepest > changed["depth_m"]:
            faults["depth_m"] = (
                f"A sample, interval or survey of it reaches {deepest:g} m, more than {changed['depth_m']:g} m; "
                "correct the length, or those depths first."
            )
    return faults, remarks


def _sorted(problems: Iterable[Problem], changed: Mapping[str, Any]) -> tuple[dict[str, str], list[str]]:
    """Problems as (a sentence by field, the first of each), warnings as remarks."""
    faults: dict[str, str] = {}
    remarks = []
    for problem in problems:
        if problem.severity == "problem":
            faults.setdefault(_shown_at(problem, changed), problem_words(problem))
        else:
            remarks.append(problem_words(problem))
    return faults, remarks


def _shown_at(problem: Problem, changed: Mapping[str, Any]) -> str:
    """The field under which a fault stands: its own, else the first that was changed."""
    return problem.column if problem.column else next(iter(changed), "")


def problem_words(problem: Problem) -> str:
    """A problem as it stands under its field."""
    text = problem.what[:1].upper() + problem.what[1:]
    if problem.found:
        text += f": “{problem.found}” was found"
    if problem.expected:
        text += f", {problem.expected} is expected" if problem.found else f"; expected is {problem.expected}"
    return f"{text}; {problem.remedy}." if problem.remedy else f"{text}."


def _stored(
    connection: Any, before: Record, changed: Mapping[str, Any], row_id: int, remarks: list[str]
) -> dict[str, str]:
    """Write the changed cells as an import does; a sentence by field where its checks refuse them."""
    plural = KINDS[before.kind]
    edits.empty_cells(connection, plural, row_id, [name for name, value in changed.items() if value is None])
    given = {name: value for name, value in changed.items() if value is not None}
    after = {**before.values, **changed}
    # a pair of coordinates and its system go together: half of them would be transformed alone
    for group in (("easting", "northing", "epsg"), ("longitude", "latitude")):
        if before.kind in ("sample", "site") and any(name in given for name in group):
            given |= {name: after[name] for name in group if after.get(name) is not None}
    if given:
        rows = {KEY_FIELDS[before.kind]: [before.code], **{name: [value] for name, value in given.items()}}
        faults, told = _sorted(masters.upsert(connection, plural, rows, [1], "form").problems, changed)
        if faults:
            return faults
        remarks += told
    if _PLACING & set(changed):
        edits.place_samples(connection, plural, row_id)
    return {}
