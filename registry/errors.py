"""What can go wrong, said so that the reader knows what to do next."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict, dataclass

#: So many characters of what was found are shown in a sentence.
MOST_SHOWN = 200


@dataclass(frozen=True)
class Problem:
    """One fault of an input: where it stands, what was found, what was expected and what to do.

    ``row`` counts the lines of the file from 1, as an editor shows them; None means the whole file.
    ``severity`` is ``problem`` (refused) or ``warning`` (taken, with this remark).
    """

    file: str
    what: str
    row: int | None = None
    column: str | None = None
    found: str | None = None
    expected: str | None = None
    remedy: str | None = None
    severity: str = "problem"

    def sentence(self) -> str:
        place = self.file
        if self.row is not None:
            place += f", row {self.row}"
        if self.column is not None:
            place += f", column '{self.column}'"
        text = f"{place}: {self.what}"
        if self.found is not None:
            found = self.found if len(self.found) <= MOST_SHOWN else f"{self.found[: MOST_SHOWN - 3]}..."
            text += f"; found '{found}'"
        if self.expected is not None:
            text += f", expected {self.expected}" if self.found is not None else f"; expected {self.expected}"
        if self.remedy is not None:
            text += f"; {self.remedy}"
        return text + "."

    def as_dict(self) -> dict[str, object]:
        return asdict(self)


class PlutonbookError(Exception):
    """Base of every error that is told to the user in a sentence; ends a command with exit code 1."""

    exit_code = 1


class UsageError(PlutonbookError):
    """The command or call itself was wrong; exit code 2."""

    exit_code = 2


class NotFound(PlutonbookError):
    """A named thing is not in the registry."""


class RegistryBusy(PlutonbookError):
    """Another writer holds the registry."""


class InputProblems(PlutonbookError):
    """The input has problems; nothing of it was written.

    ``understood``: lines on what was understood of it nevertheless, where somebody asked for that (a dry run).
    """

    def __init__(self, problems: Sequence[Problem], understood: Sequence[str] = ()) -> None:
        self.problems = list(problems)
        self.understood = list(understood)
        super().__init__("\n".join(problem.sentence() for problem in self.problems))
