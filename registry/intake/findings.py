"""Collects the problems of one file: equal faults are listed up to a number and then counted."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

from registry.errors import Problem

#: Equal faults of one column that are listed where there are more of them than ``Findings.listed``.
ALIKE_LISTED = 3


@dataclass
class Findings:
    """The faults found so far. ``column`` and ``found`` may differ within a group; ``what`` names the group."""

    file: str
    listed: int = 20
    refused_lines: set[int] = field(default_factory=set)
    whole_file_refused: bool = False
    #: turns (row, column) of a table that was turned or gathered into the place in the file, for the reader only
    place: Callable[[int | None, str | None], tuple[int | None, str | None]] | None = None
    _problems: list[Problem] = field(default_factory=list)
    _counts: dict[tuple[str, str], int] = field(default_factory=dict)
    _last: dict[tuple[str, str], Problem] = field(default_factory=dict)

    def add(
        self,
        what: str,
        *,
        row: int | None = None,
        column: str | None = None,
        found: str | None = None,
        expected: str | None = None,
        remedy: str | None = None,
        severity: str = "problem",
    ) -> None:
        """Record one fault; past the limit of its kind it is only counted (its line is still remembered)."""
        if severity == "problem":
            if row is None:
                self.whole_file_refused = True
            else:
                self.refused_lines.add(row)
        group = (severity, what)
        self._counts[group] = count = self._counts.get(group, 0) + 1
        if self.place is not None:
            row, column = self.place(row, column)
        if found is not None and len(found) > 80:
            found = found[:77] + "..."
        problem = Problem(self.file, what, row, column, found, expected, remedy, severity)
        if count <= self.listed:
            self._problems.append(problem)
        else:
            self._last[group] = problem

    def warn(self, what: str, **places: object) -> None:
        self.add(what, severity="warning", **places)  # type: ignore[arg-type]

    def problems(self) -> list[Problem]:
        """All faults: those of the whole file first, then by row, then the counts of the groups cut short."""
        ordered = sorted(self._problems, key=lambda one: (one.row is not None, one.row or 0))
        for (severity, what), last in self._last.items():
            alike = [one for one in ordered if (one.severity, one.what) == (severity, what)]
            in_one_column = last.column is not None and {one.column for one in alike} == {last.column}
            surplus = alike[ALIKE_LISTED:] if in_one_column else []
            ordered = [one for one in ordered if not any(one is other for other in surplus)]
            more = self._counts[severity, what] - len(alike) + len(surplus)
            ordered.append(
                Problem(
                    self.file,
                    f"{more:,} more of the same kind ({what})"
                    + ("" if last.row is None else f", the last at row {last.row}"),
                    column=last.column,
                    found=last.found,
                    expected=last.expected,
                    remedy=last.remedy,
                    severity=severity,
                )
            )
        return ordered
