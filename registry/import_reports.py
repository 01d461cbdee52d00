"""What an import did, or would do: for a person in lines, for a program as a dictionary."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import asdict, dataclass, field
from itertools import groupby
from typing import Any

from registry.errors import Problem
from registry.importing_results import ResultsReport, counted
from registry.intake import Reading
from registry.intake_choices import TIMES, described_columns, is_of_column
from registry.petrology.digestion import WEIGHED
from registry.precedence import Alternative, Replacement

#: Lines of one sort that are printed before the rest is counted.
SHOWN = 20
#: Names that a sentence lists before it counts the rest, and equal remarks that are told one by one.
NAMES_SHOWN, ALIKE_SHOWN = 12, 3


@dataclass
class FileReport:
    """What became of one file.

    ``warnings`` are those of the reading, ``on_storing`` those that the registry gave rise to.
    ``columns`` are the columns of a file of results and how each enters the composition; ``precedence`` and
    ``alternatives`` (of a dry run) say which results go before which.
    """

    file: str
    kind: str
    rows: int
    understood: list[str]
    warnings: list[Problem]
    on_storing: list[Problem] = field(default_factory=list)
    added: int = 0
    changes: list[str] = field(default_factory=list)
    results: ResultsReport | None = None
    columns: list[dict[str, Any]] = field(default_factory=list)
    precedence: list[Replacement] = field(default_factory=list)
    alternatives: list[Alternative] = field(default_factory=list)
    refused: int = 0
    refused_file: str | None = None

    @property
    def remarks(self) -> list[str]:
        return [problem.sentence() for problem in [*self.warnings, *self.on_storing]]

    def reading_lines(self, verbose: bool = False) -> list[str]:
        """What was understood of the file and what the reading remarks."""
        lines = [f"{self.file}: {self.kind}, {counted(self.rows, 'row')}"]
        lines += [f"  understood: {sentence}" for sentence in self._understood(verbose)]
        remarks = self.remarks if verbose else remarks_in_short([*self.warnings, *self.on_storing])
        return [*lines, *(f"  remark: {sentence}" for sentence in remarks)]

    def lines(self, verbose: bool = False) -> list[str]:
        lines = self.reading_lines(verbose)
        if self.refused:
            lines.append(f"  refused: {counted(self.refused, 'row')}" + self._where_refused())
        if self.results is not None:
            lines += [f"  {sentence}" for sentence in self.results.lines()]
            lines += _cut([f"  {sentence}" for sentence in self._precedence()], verbose)
        else:
            lines.append(f"  {self.added:,} new, {len(self.changes):,} changed")
            lines += _cut([f"  changed: {change}" for change in self.changes], verbose)
        return lines

    def _understood(self, verbose: bool) -> list[str]:
        if verbose or not self.columns:
            return self.understood
        others = [_shortened(sentence) for sentence in self.understood if not is_of_column(sentence)]
        first = next((place for place, text in enumerate(self.understood) if is_of_column(text)), len(others))
        return [*others[:first], *columns_in_short(self.columns), *others[first:]]

    def _precedence(self) -> list[str]:
        lines = []
        for one in self.alternatives:
            taken = ", ".join(f"'{header}' in {counted(number, 'line')}" for header, number in one.taken.items())
            lines.append(f"several columns for {one.column}: taken from {taken}")
        for replaced, earlier, later, alike in _alike(self.precedence):
            names = _listed([f"{one.column} ({counted(one.samples, 'sample')})" for one in alike])
            said = f"{later} replaces {earlier}" if replaced else f"{earlier} stays before {later}"
            lines.append(f"{said}: {names}; such as {alike[0].column} of {alike[0].example}")
        return lines

    def _where_refused(self) -> str:
        if self.refused_file is None:
            return ""
        text = f", saved with the reasons in {self.refused_file}; correct them there and import that file"
        return (
            text
            if self.results is None
            else f"{text} with --add-to '{self.results.batch}', and with the options that said how this one is read"
        )

    def noted(self) -> tuple[str, str] | None:
        """What the log of changes says of it, as (subject, detail); None where nothing was stored."""
        if self.results is not None:
            return f"batch {self.results.batch}", f"{self.file}: {counted(self.results.results, 'result')}"
        if not self.added and not self.changes:
            return None
        return self.kind, f"{self.file}: {self.added:,} new, {len(self.changes):,} changed"

    def as_dict(self) -> dict[str, Any]:
        made = asdict(self)
        del made["warnings"]
        return {**made, "remarks": self.remarks, "on_storing": [problem.as_dict() for problem in self.on_storing]}


@dataclass
class ImportReport:
    """What an import did, or in a dry run would do; ``changes`` are the first of the verdicts that changed."""

    files: list[FileReport]
    recomputed: int
    verdicts_changed: int
    verdicts: dict[str, dict[str, int]]
    dry_run: bool
    changes: list[dict[str, Any]] = field(default_factory=list)

    def lines(self, verbose: bool = False) -> list[str]:
        return [*(line for file in self.files for line in file.lines(verbose)), *self._ending(verbose)]

    def summary(self) -> list[str]:
        """One line a file and the verdicts, without what was understood."""
        return [*(f"{file.file}: {file.kind}, {counted(file.rows, 'row')}" for file in self.files), *self._ending()]

    def _ending(self, verbose: bool = False) -> list[str]:
        if not self.recomputed:
            lines = ["No sample with results was touched: nothing was computed or judged."]
        else:
            lines = [f"Computed and judged {counted(self.recomputed, 'sample')}; the whole registry's verdicts:"]
            for target, counts in self.verdicts.items():
                lines.append(f"  {target}: " + ", ".join(f"{count:,} {word}" for word, count in counts.items()))
        if self.verdicts_changed:
            verb = "would change" if self.dry_run else "changed"
            lines.append(f"{counted(self.verdicts_changed, 'earlier verdict')} {verb}:")
            told = [
                f"  {change['sample']}, {change['target']}: {change['before'] or 'none'} -> {change['after'] or 'none'}"
                for change in self.changes
            ]
            lines += told if verbose else told[:SHOWN]
            left = self.verdicts_changed - (len(told) if verbose else len(told[:SHOWN]))
            if left:
                lines.append(f"  ... and {left:,} more" + ("" if self.dry_run else "; change_sheet holds them all"))
        lines.append("Dry run: nothing was written." if self.dry_run else "Stored.")
        return lines

    def as_dict(self) -> dict[str, Any]:
        return {**asdict(self), "files": [file.as_dict() for file in self.files]}


def understood_of(readings: Sequence[Reading]) -> list[str]:
    """What was understood of the files of an import that is refused, in lines; remarks of files that can be stored."""
    lines = []
    for reading in readings:
        table = reading.results or reading.master
        if table is None:
            continue
        warnings = reading.warnings if reading.ok else []
        report = FileReport(reading.place, reading.kind or "", len(table), reading.understood, warnings)
        report.columns = [] if reading.results is None else described_columns(reading.results)
        lines += report.reading_lines()
    return lines


def columns_in_short(columns: Sequence[Mapping[str, Any]]) -> list[str]:
    """The columns of a file of results by unit, method and digestion; then what is converted, a minimum or not used."""
    groups: dict[tuple[str, str], list[str]] = {}
    for column in columns:
        how = column["digestion"].replace("_", " ")
        told = column["method"] if column["method"].casefold().replace("-", " ") == how else ""
        words = how if column["digestion"] != "unknown" else "digestion not told"
        if column["digestion"] == "unknown" and column["analyte"] in WEIGHED:
            words = "weighed or summed"
        if column["method"] and not told:
            words = f"{column['method']} ({words})"
        groups.setdefault((column["unit"] or "no known unit", words), []).append(column["analyte"])
    lines = [f"{', '.join(names)} in {unit}, {words}" for (unit, words), names in groups.items()]
    uses = [(column["analyte"], column["header"], column["use"]) for column in columns]
    converted = [
        f"{header} to {use.split(' = ')[0]} ({TIMES} {use.split(TIMES)[1].split(';')[0].strip()})"
        for _, header, use in uses
        if f" = value {TIMES}" in use
    ]
    minimum = [name for name, _, use in uses if "; a minimum" in use]
    unused = [f"{header} ({use.removeprefix('not used: ')})" for _, header, use in uses if use.startswith("not used")]
    for words, names in (("converted", converted), ("counted as minima", minimum), ("not used", unused)):
        if names:
            lines.append(f"{words}: {_listed(names)}")
    return lines


def remarks_in_short(warnings: Sequence[Problem]) -> list[str]:
    """Remarks in sentences; of many alike the first few places and the number of the rest."""
    groups: dict[tuple[str, str, str | None], list[Problem]] = {}
    for problem in warnings:
        groups.setdefault((problem.file, problem.what, problem.remedy), []).append(problem)
    lines = []
    for alike in groups.values():
        lines += [problem.sentence() for problem in alike[:ALIKE_SHOWN]]
        if len(alike) > ALIKE_SHOWN:
            lines.append(f"... and {len(alike) - ALIKE_SHOWN:,} more like it (--verbose lists them)")
    return lines


def _alike(precedence: Sequence[Replacement]) -> list[tuple[bool, str, str, list[Replacement]]]:
    ordered = sorted(precedence, key=lambda one: (not one.replaced, one.earlier, one.later, -one.samples))
    grouped = groupby(ordered, key=lambda one: (one.replaced, one.earlier, one.later))
    return [(*key, list(alike)) for key, alike in grouped]


def _shortened(sentence: str) -> str:
    """A sentence that ends in a long list of names, with the list cut short."""
    head, colon, names = sentence.partition(": ")
    parts = names.split(", ")
    return f"{head}: {_listed(parts)}" if colon and len(parts) > 2 * NAMES_SHOWN else sentence


def _listed(names: Sequence[str]) -> str:
    if len(names) <= NAMES_SHOWN:
        return ", ".join(names)
    return ", ".join(names[:NAMES_SHOWN]) + f" and {len(names) - NAMES_SHOWN:,} more"


def _cut(lines: list[str], verbose: bool) -> list[str]:
    if verbose or len(lines) <= SHOWN:
        return lines
    return [*lines[:SHOWN], f"  ... and {len(lines) - SHOWN:,} more (--verbose lists them)"]
