"""What the address of a diagram asks beside the filter: which diagram, how samples are told apart, ends of the axes."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from typing import Any, Protocol

from registry.diagrams import ALIASES, DIAGRAMS, FIRST, PANELS, Diagram, Panels
from registry.store.reading.drawn_samples import Group
from registry.store.reading.filters import Filter
from registry.store.reading.samples import names_not_found
from web import wording
from web.sentence import address

MOST_MARKED = 20
#: Diagrams that the page of a sample leads to.
BESIDE_A_SAMPLE = (
    "tas_plutonic",
    "tas_volcanic",
    "k2o_sio2",
    "afm",
    "alumina",
    "granite_rb_y_nb",
    "sr_y",
    "harker_mgo",
)
ENDS = ("x_from", "x_to", "y_from", "y_to")
OWN = ("diagram", "by", "mark", "whole", "table", *ENDS)
GROUP_WORDS = {
    "intrusion": "intrusion", "area": "area", "site_kind": "kind of site", "sample_kind": "kind of sample",
    "lithology": "logged lithology", "best_verdict": "best verdict",
}  # fmt: skip
NOTHING_WORDS = {
    "intrusion": "no intrusion recorded", "area": "no area recorded", "site_kind": "no site recorded",
    "lithology": "no lithology logged", "sample_kind": "no kind", "best_verdict": "not judged",
}  # fmt: skip


class Choice:
    """What the address asks beside the filter; ``problems`` by argument name."""

    def __init__(self, arguments: Mapping[str, Sequence[str]], asked: Filter, targets: Mapping[str, str]) -> None:
        self.problems: dict[str, str] = {}
        typed = {name: [v.strip() for v in arguments.get(name, ()) if v.strip()] for name in OWN}
        self.key = self._one_of("diagram", typed, {**DIAGRAMS, **PANELS, **ALIASES}, FIRST, "diagram")
        self.key = ALIASES.get(self.key, self.key)
        known = {**GROUP_WORDS, **targets, "verdict": ""}
        usual = "verdict" if asked.target else "intrusion"
        self.by = self._one_of("by", typed, known, usual, "way to tell samples apart")
        self.by_asked = self.by != usual
        if self.by == "verdict":
            self.by = asked.target or "best_verdict"
        self.mark = tuple(dict.fromkeys(typed["mark"]))[:MOST_MARKED]
        self.whole, self.table = bool(typed["whole"]), bool(typed["table"])
        self.ends = tuple(self._number(name, typed[name]) for name in ENDS)
        for low, high in ((0, 1), (2, 3)):
            least, most = self.ends[low], self.ends[high]
            if least is not None and most is not None and least >= most:
                self.problems[ENDS[low]] = f"The axis would begin at {least:g} and end at {most:g}; exchange them."
        diagram = DIAGRAMS.get(self.key)
        for name, end in zip(ENDS, self.ends, strict=True):
            is_log = diagram is not None and (diagram.x if name[0] == "x" else diagram.y).is_log
            if end is not None and is_log and end <= 0:
                self.problems[name] = "A logarithmic axis has no zero; begin above it, say at 0.1."
        self.group = Group("verdict", self.by) if self.by in targets else Group(self.by)

    def _one_of(self, name: str, typed: Any, known: Mapping[str, Any], usual: str, what: str) -> str:
        value = typed[name][-1] if typed[name] else usual
        if value in known:
            return value
        self.problems[name] = f"There is no {what} “{value}”; choose one of {', '.join(known)}."
        return usual

    def _number(self, name: str, values: list[str]) -> float | None:
        if not values:
            return None
        try:
            value = float(values[-1].replace("\N{MINUS SIGN}", "-"))
        except ValueError:
            value = float("nan")
        if abs(value) <= 1e12:
            return value
        self.problems[name] = f"“{values[-1]}” is no place on an axis; write a number like 20 or 0.35."
        return None

    def pairs(self, **changed: str) -> list[tuple[str, str]]:
        """Arguments of the page in a fixed order, defaults left out; ``changed`` ones are replaced, "" leaves out."""
        found = {"diagram": self.key, "by": self.by if self.by_asked else "", "whole": "1" if self.whole else ""}
        found |= {
            name: "" if end is None else f"{end:.12g}" for name, end in zip(ENDS, self.ends, strict=True)
        }  # fmt: skip
        found |= {"table": "1" if self.table else ""} | changed
        return [(name, value) for name, value in found.items() if value] + [("mark", code) for code in self.mark]


class Grouped(Protocol):
    """What a page asks of how samples are told apart."""

    by: str
    group: Group


def by_choices(targets: Mapping[str, str]) -> dict[str, str]:
    """What samples can be told apart by, in words."""
    return GROUP_WORDS | {code: f"verdict for {wording.lower_first(name)}" for code, name in targets.items()}


def by_words(choice: Grouped, targets: Mapping[str, str]) -> str:
    """What samples are told apart by, in words."""
    return by_choices(targets)[choice.by]


def narrowed_to(asked: Filter, choice: Grouped, value: Any) -> Filter | None:
    """The filter with the condition that leaves one group alone; None where the sentence has no such condition."""
    changed: dict[str, Any] = {}
    if choice.by in ("intrusion", "area"):
        changed = {choice.by: (value,)}
    elif choice.by == "sample_kind":
        changed = {"kind": (value,)}
    elif choice.group.is_verdict and (choice.group.target == asked.target or not asked.verdict):
        changed = {"verdict": (choice.group.word(value),), "target": choice.group.target}
    return Filter(**{**vars(asked), **changed}) if changed else None


def checked(connection: Any, asked: Filter, own: dict[str, str]) -> Filter:
    """The filter with every problem of the address: its own, names that are not there, and those of the page."""
    problems = dict(asked.problems) | names_not_found(connection, asked) | own
    return Filter(**{**vars(asked), "problems": problems}) if problems else asked


def picker(asked: Filter, choice: Choice) -> list[tuple[str, list[dict[str, Any]]]]:
    """Diagrams by group as plain links that keep the samples; those of a panel are reached from it."""
    groups: dict[str, list[dict[str, Any]]] = {}
    own = {name: "" for name in (*ENDS, "whole")}
    members = {key for panels in PANELS.values() for key in panels.members}
    entries: list[Diagram | Panels] = [*DIAGRAMS.values(), *PANELS.values()]
    for drawn in entries:
        if drawn.key in members and drawn.key != choice.key:
            continue
        where = address([*asked.arguments(), *choice.pairs(diagram=drawn.key, **own)], "diagrams.page")
        entry = {"words": wording.formula(drawn.short), "title": drawn.title, "address": where,
                 "current": drawn.key == choice.key}  # fmt: skip
        groups.setdefault(drawn.group, []).append(entry)
    return list(groups.items())


def where_it_plots(code: str, intrusion: str | None, known: Collection[str]) -> list[tuple[str, str]]:
    """(words, address) of the diagrams that can show a sample whose ``known`` columns have values."""
    among = [("intrusion", intrusion)] if intrusion else []
    return [
        (
            wording.formula(diagram.short),
            address([*among, ("diagram", diagram.key), ("mark", code)], "diagrams.page"),
        )
        for diagram in (DIAGRAMS[key] for key in BESIDE_A_SAMPLE)
        if all(column in known for column in diagram.columns)
    ]
