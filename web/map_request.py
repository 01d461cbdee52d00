"""What the address of the map asks beside the filter: how samples are told apart, which part is shown."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from registry.store.reading.columns import Column, Columns
from registry.store.reading.drawn_samples import Group
from registry.store.reading.filters import Filter
from web.diagram_request import ENDS, GROUP_WORDS

OWN = ("by", "number", "grid", "table", *ENDS)
#: The least and the most that a map may be asked to show along one side, m.
LEAST_SIDE_M, MOST_SIDE_M = 1.0, 5e7


class MapChoice:
    """What the address asks beside the filter; ``problems`` by argument name.

    ``ends`` are x from, x to, y from, y to (m) in the grid of the key ``grid``, or None for all of it. A number, where
    one is chosen, takes the place of the groups.
    """

    def __init__(
        self, arguments: Mapping[str, Sequence[str]], asked: Filter, targets: Mapping[str, str], columns: Columns
    ) -> None:
        self.problems: dict[str, str] = {}
        typed = {name: next((v.strip() for v in reversed(arguments.get(name, ())) if v.strip()), "") for name in OWN}
        usual = "verdict" if asked.target else "best_verdict"
        self.by = typed["by"] or usual
        if self.by not in {**GROUP_WORDS, **targets, "verdict": ""}:
            known = ", ".join((*GROUP_WORDS, *targets))
            self.problems["by"] = f"There is no way to tell samples apart “{self.by}”; choose one of {known}."
            self.by = usual
        self.by_asked = self.by != usual
        if self.by == "verdict":
            self.by = asked.target or "best_verdict"
        self.group = Group("verdict", self.by) if self.by in targets else Group(self.by)
        self.number: Column | None = columns.get(typed["number"])
        if typed["number"] and (self.number is None or not self.number.numeric):
            self.problems["number"] = (
                f"“{typed['number']}” is no number of the sample views; choose one from the list or take it out."
            )
            self.number = None
        self.table = bool(typed["table"])
        self.grid = typed["grid"][:60]
        self.ends = self._ends([typed[name] for name in ENDS])

    def _ends(self, typed: Sequence[str]) -> tuple[float, float, float, float] | None:
        if not any(typed):
            return None
        ends: list[float] = []
        for name, value in zip(ENDS, typed, strict=True):
            try:
                number = float(value.replace("\N{MINUS SIGN}", "-"))
            except ValueError:
                number = float("nan")
            if not abs(number) <= MOST_SIDE_M:
                said = f"“{value}” is no place of the grid" if value else f"{name} is missing"
                self.problems[name] = f"{said}; a part of the map needs all four ends in metres, or none of them."
            ends.append(number)
        if self.problems.keys() & set(ENDS):
            return None
        for low, high in ((0, 1), (2, 3)):
            if not LEAST_SIDE_M <= ends[high] - ends[low] <= MOST_SIDE_M:
                self.problems[ENDS[low]] = (
                    f"The map would begin at {ends[low]:.12g} and end at {ends[high]:.12g} m; the end must lie at "
                    f"least {LEAST_SIDE_M:g} m beyond the beginning."
                )
                return None
        return ends[0], ends[1], ends[2], ends[3]

    def pairs(self, **changed: str) -> list[tuple[str, str]]:
        """The arguments of an address with these changes; what is as usual is left out."""
        found = {"by": self.by if self.by_asked and not self.number else ""}
        found |= {"number": self.number.name if self.number else "", "grid": self.grid if self.ends else ""}
        found |= {name: f"{end:.12g}" for name, end in zip(ENDS, self.ends or (), strict=False)}
        found |= {"table": "1" if self.table else ""} | changed
        return [(name, value) for name, value in found.items() if value]


#: Changes of :meth:`MapChoice.pairs` that show all of the map.
WHOLE = {"grid": "", **dict.fromkeys(ENDS, "")}
