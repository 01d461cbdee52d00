"""Target definitions: what is asked of a rock, with which weight and on whose authority. Data (TOML), not code.

A definition is a screening rule written by geologists; its verdicts are screening aids, never resource statements.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Collection, Mapping
from dataclasses import dataclass, field
from functools import cache
from importlib import resources
from typing import Any

from registry.targets.grammar import Condition, parse_conditions, parse_near, parse_test

#: The order of the targets everywhere.
TARGET_CODES = (
    "porphyry_copper", "tin", "tungsten", "rare_metal", "nickel_copper", "magmatic_heat", "radiogenic_heat",
)  # fmt: skip


class DefinitionError(ValueError):
    """A definition that cannot be used; the message lists every fault with what to write instead."""


@dataclass(frozen=True)
class Gate:
    """A rule that must hold; failed: unfavourable, unknown: no favourable or possible verdict."""

    code: str
    label: str
    test: Condition
    provisional: bool
    source: str


@dataclass(frozen=True)
class Criterion:
    """One weighed question. ``otherwise`` replaces ``test`` where its quantity is not known."""

    code: str
    label: str
    group: str
    test: Condition
    weight: int
    provisional: bool
    source: str
    near: Condition | None = None
    only_if: tuple[Condition, ...] = ()
    otherwise: Condition | None = None
    otherwise_near: Condition | None = None


@dataclass(frozen=True)
class Need:
    """What must be known before a sample can be judged: one of ``any_of``. ``strict`` False: exclusion may stand."""

    any_of: tuple[str, ...]
    reason: str
    strict: bool = True


@dataclass(frozen=True)
class Contradiction:
    """Evidence against, shown and not weighed: all of ``tests`` met."""

    label: str
    tests: tuple[Condition, ...]


@dataclass(frozen=True)
class Phrase:
    """Words of the argument that depend on the outcome of ``criteria`` (all met, not all met, or unknown).

    ``part`` stands where some are met and others are not, and may name them by ``{met}`` and ``{not_met}``; without it
    ``not_met`` stands there too.
    """

    criteria: tuple[str, ...]
    met: str
    not_met: str
    unknown: str
    part: str | None = None


@dataclass(frozen=True)
class TargetDefinition:
    code: str
    name: str
    version: int
    applies_to: str
    favourable: float
    possible: float
    gates: tuple[Gate, ...]
    criteria: tuple[Criterion, ...]
    needs: tuple[Need, ...] = ()
    contradictions: tuple[Contradiction, ...] = ()
    supply: Mapping[str, str] = field(default_factory=dict)
    argument: str = ""
    phrases: Mapping[str, Phrase] = field(default_factory=dict)
    cautions: tuple[str, ...] = ()
    #: Cautions that concern some samples only: text -> what must hold of a sample.
    caution_tests: Mapping[str, tuple[Condition, ...]] = field(default_factory=dict)
    text: str = field(default="", repr=False)

    @property
    def tests(self) -> tuple[Gate | Criterion, ...]:
        """Gates first, then criteria: the order of stored outcomes, values and thresholds."""
        return (*self.gates, *self.criteria)

    def quantities(self) -> tuple[str, ...]:
        """Every quantity a test reads, each once."""
        read: dict[str, None] = {}
        for test in self.conditions():
            read.setdefault(test.quantity)
            if test.of:
                read.setdefault(test.of)
        return tuple(read)

    def conditions(self) -> list[Condition]:
        found = [item.test for item in self.tests]
        for criterion in self.criteria:
            found += [t for t in (criterion.near, criterion.otherwise, criterion.otherwise_near) if t is not None]
            found += criterion.only_if
        found += [test for contradiction in self.contradictions for test in contradiction.tests]
        return found + [test for tests in self.caution_tests.values() for test in tests]


_KEYS: dict[str, tuple[set[str], set[str]]] = {
    "definition": (
        {"code", "name", "version", "applies_to", "favourable", "possible", "argument", "cautions", "criterion"},
        {"gate", "need", "contradiction", "supply", "phrase"},
    ),
    "gate": ({"code", "label", "quantity", "test", "provisional", "source"}, set()),
    "criterion": (
        {"code", "label", "group", "quantity", "test", "weight", "provisional", "source"},
        {"near", "only_if", "otherwise"},
    ),
    "otherwise": ({"quantity", "test"}, {"near"}),
    "need": ({"any_of", "reason"}, {"strict"}),
    "contradiction": ({"label", "test"}, set()),
    "caution": ({"text", "only_if"}, set()),
    "phrase": ({"criteria", "met", "not_met", "unknown"}, {"part"}),
}


#: Anything in braces, and a brace alone.
_BRACED = re.compile(r"\{[^{}]*\}|[{}]")
#: A part of the argument that is said only where every quantity in it is known.
OPTIONAL_PART = re.compile(r"\[([^\[\]]*)\]")


class _Reader:
    """Reads one TOML definition and gathers every fault before it complains."""

    def __init__(self, name: str) -> None:
        self.name = name
        self.faults: list[str] = []

    def keys(self, kind: str, table: Mapping[str, Any], where: str) -> bool:
        required, optional = _KEYS[kind]
        for key in sorted(required - table.keys()):
            self.faults.append(f"{where}: '{key}' is missing; every {kind} needs {', '.join(sorted(required))}")
        for key in sorted(table.keys() - required - optional):
            self.faults.append(f"{where}: '{key}' is not known; a {kind} may hold {sorted(required | optional)}")
        return required <= table.keys()

    def attempt(self, where: str, make: Any, *arguments: Any) -> Any:
        try:
            return make(*arguments)
        except ValueError as fault:
            self.faults.append(f"{where}: {fault}")
            return None

    def gate(self, table: Mapping[str, Any], where: str) -> Gate | None:
        if not self.keys("gate", table, where):
            return None
        test = self.attempt(where, parse_test, table["quantity"], table["test"])
        return test and Gate(table["code"], table["label"], test, table["provisional"], table["source"])

    def criterion(self, table: Mapping[str, Any], where: str) -> Criterion | None:
        if not self.keys("criterion", table, where):
            return None
        test, near = self._pair(table, where)
        other, other_near = None, None
        if "otherwise" in table and self.keys("otherwise", table["otherwise"], f"{where}, otherwise"):
            other, other_near = self._pair(table["otherwise"], f"{where}, otherwise")
        only_if = self.attempt(where, parse_conditions, table["only_if"]) if "only_if" in table else ()
        weight = table["weight"]
        if not isinstance(weight, int) or weight <= 0:
            self.faults.append(f"{where}: weight {weight!r} must be a whole number of hundredths above 0")
        if not str(table["source"]).strip():
            self.faults.append(f"{where}: source is empty; name the paper, or write 'common practice, no source'")
        if test is None or only_if is None:
            return None
        return Criterion(
            table["code"], table["label"], table["group"], test, weight, table["provisional"], table["source"],
            near, only_if, other, other_near,
        )  # fmt: skip

    def caution(self, entry: str | Mapping[str, Any], where: str) -> tuple[str, tuple[Condition, ...]]:
        if isinstance(entry, str):
            return entry, ()
        if not self.keys("caution", entry, where):
            return "", ()
        return entry["text"], self.attempt(where, parse_conditions, entry["only_if"]) or ()

    def _pair(self, table: Mapping[str, Any], where: str) -> tuple[Condition | None, Condition | None]:
        test = self.attempt(where, parse_test, table["quantity"], table["test"])
        near = self.attempt(where, parse_near, test, table["near"]) if test is not None and "near" in table else None
        return test, near


def parse_definition(text: str, name: str = "definition", known: Collection[str] | None = None) -> TargetDefinition:
    """The definition written in TOML ``text``; ``name`` stands in faults.

    ``known``: the quantities that exist; a test on any other is a fault (None: not checked).
    Raises DefinitionError that lists every fault.
    """
    try:
        table = tomllib.loads(text)
    except tomllib.TOMLDecodeError as fault:
        raise DefinitionError(f"{name} is not TOML: {fault}; mend that line first") from fault
    reader = _Reader(name)
    complete = reader.keys("definition", table, name)
    gates = [reader.gate(t, f"gate {i} '{t.get('code')}'") for i, t in enumerate(table.get("gate", []), 1)]
    criteria = [
        reader.criterion(t, f"criterion {i} '{t.get('code')}'") for i, t in enumerate(table.get("criterion", []), 1)
    ]
    needs = [
        Need(tuple(t["any_of"]), t["reason"], t.get("strict", True))
        for i, t in enumerate(table.get("need", []), 1)
        if reader.keys("need", t, f"need {i}")
    ]
    contradictions = []
    for position, entry in enumerate(table.get("contradiction", []), 1):
        if reader.keys("contradiction", entry, f"contradiction {position}"):
            tests = reader.attempt(f"contradiction {position}", parse_conditions, entry["test"])
            contradictions.append(Contradiction(entry["label"], tests or ()))
    phrases = {
        key: Phrase(tuple(t["criteria"]), t["met"], t["not_met"], t["unknown"], t.get("part"))
        for key, t in table.get("phrase", {}).items()
        if reader.keys("phrase", t, f"phrase '{key}'")
    }
    cautions = dict(reader.caution(entry, f"caution {i}") for i, entry in enumerate(table.get("cautions", []), 1))
    if not complete or reader.faults:
        _complain(reader)
    definition = TargetDefinition(
        table["code"], table["name"], table["version"], table["applies_to"], table["favourable"], table["possible"],
        tuple(g for g in gates if g), tuple(c for c in criteria if c), tuple(needs), tuple(contradictions),
        dict(table.get("supply", {})), table["argument"].strip(), phrases, tuple(cautions),
        {words: tests for words, tests in cautions.items() if tests}, text,
    )  # fmt: skip
    reader.faults += faults_of(definition, known)
    _complain(reader)
    return definition


def _complain(reader: _Reader) -> None:
    if reader.faults:
        raise DefinitionError(f"the definition {reader.name} cannot be used:\n" + "\n".join(reader.faults))


def faults_of(definition: TargetDefinition, known: Collection[str] | None = None) -> list[str]:
    """What is wrong with a definition as a whole: weights, limits, codes and names."""
    faults = []
    total = sum(criterion.weight for criterion in definition.criteria)
    if total != 100:
        faults.append(f"the weights sum to {total}, expected 100; they are hundredths of the score")
    if not 0.0 < definition.possible < definition.favourable <= 1.0:
        faults.append(
            f"favourable {definition.favourable} and possible {definition.possible}: expected 0 < possible <"
            " favourable <= 1"
        )
    if set("[]") & set(OPTIONAL_PART.sub("", definition.argument)):
        faults.append(
            "the argument holds a '[' or ']' alone; between the two stands what is said only where it is known"
        )
    codes = [item.code for item in definition.tests]
    faults += [f"the code '{code}' stands twice" for code in sorted({c for c in codes if codes.count(c) > 1})]
    for key, phrase in definition.phrases.items():
        strangers = sorted(set(phrase.criteria) - set(codes))
        if strangers:
            faults.append(f"phrase '{key}' names {strangers}, which are no gates or criteria; known are {codes}")
        strange = sorted(set(_BRACED.findall(phrase.part or "")) - {"{met}", "{not_met}"})
        if strange:
            faults.append(f"phrase '{key}': part holds {strange}; it may hold {{met}} and {{not_met}} only")
    if known is not None:
        read = [*definition.quantities(), *(name for need in definition.needs for name in need.any_of)]
        faults += [f"the quantity '{name}' does not exist; see `plutonbook methods`" for name in read
                   if name not in known]  # fmt: skip
    return faults


def definition_text(code: str) -> str:
    """The TOML text of a shipped definition; KeyError-like DefinitionError where there is none."""
    if code not in TARGET_CODES:
        raise DefinitionError(f"there is no target '{code}'; the targets are {', '.join(TARGET_CODES)}")
    return (resources.files("registry.targets") / "definitions" / f"{code}.toml").read_text(encoding="utf-8")


@cache
def load_definition(code: str) -> TargetDefinition:
    """A shipped definition by its code."""
    return parse_definition(definition_text(code), f"{code}.toml")


def load_definitions() -> dict[str, TargetDefinition]:
    """The shipped definitions in the order of ``TARGET_CODES``."""
    folder = resources.files("registry.targets") / "definitions"
    return {code: load_definition(code) for code in TARGET_CODES if (folder / f"{code}.toml").is_file()}
