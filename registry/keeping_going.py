"""``--keep-going``: store the good rows, set the bad ones aside with their reasons in a file beside the input."""

from __future__ import annotations

from collections.abc import Iterable
from contextlib import suppress
from dataclasses import dataclass, field
from pathlib import Path

from registry.errors import InputProblems, PlutonbookError, Problem
from registry.intake import Reading
from registry.intake.refused import without_lines, write_refused


@dataclass
class SetAside:
    """The rows of one file that are not stored, by file line, with the reasons in sentences."""

    path: Path
    #: its bytes where they are at hand, None where it is read from its place again
    data: bytes | None
    reading: Reading
    first_data_line: int
    reasons: dict[int, list[str]] = field(default_factory=dict)

    @classmethod
    def of(cls, path: Path, data: bytes | None, reading: Reading) -> SetAside:
        """Begin with what the intake refused. Raises InputProblems where the file itself is faulty."""
        table = reading.results or reading.master
        if reading.whole_file_refused or table is None:
            raise InputProblems(reading.problems)
        lines = [*(table.line_no[:1].tolist() if len(table) else ()), *reading.refused_lines]
        aside = cls(path, data, reading, min(lines, default=1))
        faults = [problem for problem in reading.problems if problem.severity == "problem"]
        general = [problem for problem in faults if problem.row is None]
        aside.add(faults)
        if general and not reading.refused_lines:
            raise InputProblems(reading.problems)
        for line in reading.refused_lines - set(aside.reasons):
            aside.reasons[line] = ["refused: see the problems of this file"]
        without_lines(reading, frozenset(reading.refused_lines))
        return aside

    @classmethod
    def of_all(cls, files: Iterable[tuple[Path, bytes | None, Reading]]) -> list[SetAside | None]:
        """Begin with several files; None for each that is faulty itself, which its reading goes on to say."""
        found: list[SetAside | None] = []
        for path, data, reading in files:
            try:
                found.append(cls.of(path, data, reading))
            except InputProblems:
                found.append(None)
        return found

    def add(self, problems: Iterable[Problem]) -> list[Problem]:
        """Set the rows of these problems aside; those that concern no row are given back."""
        whole = []
        for problem in problems:
            if problem.row is None:
                whole.append(problem)
            else:
                where = f"column '{problem.column}': " if problem.column else ""
                found = f", found '{problem.found}'" if problem.found else ""
                wanted = f", expected {problem.expected}" if problem.expected else ""
                remedy = f"; {problem.remedy}" if problem.remedy else ""  # with it: "did you mean 'S1'?"
                self.reasons.setdefault(problem.row, []).append(f"{where}{problem.what}{found}{wanted}{remedy}")
        return whole

    def drop(self) -> None:
        """Take the rows that were set aside out of the reading."""
        without_lines(self.reading, frozenset(self.reasons))

    def save(self) -> Path | None:
        """Write the rows beside the input; None where there are none."""
        if not self.reasons:
            return None
        first = self.first_data_line
        reasons = {line: "; ".join(said) for line, said in self.reasons.items()}
        target = self.path.with_name(f"{self.path.stem}.refused.csv")
        number = 2
        while target.exists():
            target = self.path.with_name(f"{self.path.stem}.refused-{number}.csv")
            number += 1
        try:
            with target.open("w", encoding="utf-8-sig", newline="") as out:
                write_refused(out, self.path if self.data is None else self.data, self.reading, reasons, first)
        except OSError as error:
            with suppress(OSError):
                target.unlink(missing_ok=True)
            raise PlutonbookError(
                f"the refused rows cannot be saved in {target}: {error.strerror}; nothing was written"
            ) from error
        return target
