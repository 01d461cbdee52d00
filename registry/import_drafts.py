"""Files waiting to be imported: a job that keeps them, and what was chosen for each, until they are stored.

The files lie in the folder of the job as they were sent; nothing of it is part of the registry before it is stored.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any, ClassVar, Self

from registry.clock import now
from registry.importing import FileChoice
from registry.intake import ReadingOptions, Recipe
from registry.job_folder import Job, JobFolder

LONGEST_NAME = 120


@dataclass
class DraftFile:
    """One file of a draft: what the person chose for it, and what was understood when it was last read.

    ``looked`` holds one description a table; ``parts`` are the sheets of a workbook or the members of an archive that
    hold a table, where there are several (``sheet`` names the one to read, None: all of them).
    """

    name: str
    size: int
    kind: str | None = None
    recipe: str | None = None
    recipe_name: str | None = None
    sheet: str | None = None
    negative_means_below: bool = False
    positive_dips: str | None = None
    unit: str | None = None
    parts: list[str] = field(default_factory=list)
    looked: list[dict[str, Any]] = field(default_factory=list)

    def read_with(self, recipe: Recipe | None, name: str | None) -> None:
        """Have it read with a saved recipe (or without any word of the user); what it says of the file is shown."""
        self.recipe_name, self.recipe = name, None if recipe is None else recipe.to_json()
        self.negative_means_below = recipe is not None and recipe.negative_means_below
        self.unit = None if recipe is None else recipe.unit

    def choice(self) -> FileChoice:
        """The choices as the import takes them."""
        recipe = None if self.recipe is None else Recipe.from_json(self.recipe)
        if recipe is not None:  # what the page says of the whole file goes before what was saved
            recipe = replace(recipe, unit=self.unit, negative_means_below=self.negative_means_below)
        options = ReadingOptions(
            recipe=recipe,
            sheet=self.sheet,
            negative_means_below=self.negative_means_below,
            positive_dips=self.positive_dips,
            unit=self.unit,
        )
        return FileChoice(self.kind, options)


@dataclass
class Draft(Job, kind="import"):
    """Some files on their way into a registry. ``options`` are fields of ``ImportOptions``."""

    files: list[DraftFile] = field(default_factory=list)
    options: dict[str, Any] = field(default_factory=dict)
    storing: bool = False
    problems: list[dict[str, Any]] = field(default_factory=list)
    report: dict[str, Any] | None = None

    nothing_done: ClassVar[str] = "Nothing was stored"
    left_undone: ClassVar[str] = (
        "The program was stopped while it worked on this. An import is stored whole or not at all: see under Batches "
        "whether it is there, else read the files again."
    )

    @property
    def draft_id(self) -> str:
        """The id of the job."""
        return self.job_id

    @classmethod
    def from_record(cls, record: dict[str, Any]) -> Self:
        return cls(files=[DraftFile(**file) for file in record.pop("files")], **record)

    def names(self) -> str:
        """The files in words."""
        first = self.files[0].name
        return first if len(self.files) == 1 else f"{first} and {len(self.files) - 1} more"

    def what(self) -> str:
        return f"the import of {self.names()}"


def safe_name(name: str) -> str:
    """A file name without folders and unprintable characters, short enough for every file system."""
    base = "".join(letter for letter in re.split(r"[/\\]", name)[-1] if letter.isprintable()).strip()
    if base in ("", ".", ".."):
        return "file"
    stem, dot, suffix = base.rpartition(".")
    if len(base) > LONGEST_NAME and dot and len(suffix) <= 8:
        base = stem[: LONGEST_NAME - len(suffix) - 1] + "." + suffix
    while len(base.encode()) > 240:
        base = base[:-1]
    return base[:LONGEST_NAME]


def create_draft(folder: JobFolder, files: Iterable[tuple[str, Callable[[Path], Any]]]) -> Draft:
    """A new draft of files given as (name, what writes the file to a path)."""
    job_id = folder.new_id()
    kept = []
    for number, (name, write) in enumerate(files):
        path = folder.place / job_id / str(number) / safe_name(name)
        path.parent.mkdir(mode=0o700)
        write(path)
        path.chmod(0o600)
        kept.append(DraftFile(path.name, path.stat().st_size))
    draft = Draft(job_id, now(), files=kept)
    folder.save(draft)
    return draft


def draft_paths(folder: JobFolder, draft: Draft) -> list[Path]:
    """Where the files of a draft lie, in their order."""
    return [folder.place / draft.job_id / str(number) / file.name for number, file in enumerate(draft.files)]


def drop_files(folder: JobFolder, draft: Draft) -> None:
    """Delete the files sent (the registry keeps what it stored); the report and refused rows stay."""
    for path in draft_paths(folder, draft):
        path.unlink(missing_ok=True)
