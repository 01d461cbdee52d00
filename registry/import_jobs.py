"""Imports as jobs: look at a draft (read it and try it out), store it."""

from __future__ import annotations

from contextlib import suppress
from pathlib import Path

from registry.errors import InputProblems
from registry.import_drafts import Draft, draft_paths, drop_files
from registry.importing import ImportOptions, import_files
from registry.intake import Reading
from registry.intake_choices import describe_reading
from registry.job_folder import DONE, READ, READING, REFUSED, STORING
from registry.jobs import Jobs
from registry.progress import words


def look(jobs: Jobs, draft: Draft) -> bool:
    """Read the files and try the import out, writing nothing; False if the draft is under way already."""
    return _start(jobs, draft, storing=False)


def store(jobs: Jobs, draft: Draft) -> bool:
    """Import the files; False if the draft is under way already."""
    return _start(jobs, draft, storing=True)


def _start(jobs: Jobs, draft: Draft, storing: bool) -> bool:
    def work() -> None:
        draft.storing, draft.problems, draft.report = storing, [], None
        try:
            _run(jobs, draft)
        except InputProblems as fault:
            draft.problems = [problem.as_dict() for problem in fault.problems]
            jobs.end(draft, REFUSED, "Nothing was stored: the problems below have to be settled first.")

    return jobs.start(draft, work)


def _run(jobs: Jobs, draft: Draft) -> None:
    paths = draft_paths(jobs.folder, draft)
    number_of = {path: number for number, path in enumerate(paths)}
    begun: set[Path] = set()

    def say(what: str, done: int, total: int) -> tuple[str, str]:
        file = draft.files[done].name if what == "reading" else ""
        state = STORING if draft.storing and not what.startswith("reading") else READING
        return state, words(what, done, total, file=file, trial=not draft.storing)

    def on_read(path: Path, reading: Reading) -> None:
        file = draft.files[number_of[path]]
        if path not in begun:
            begun.add(path)
            file.looked = []
            file.parts = [] if file.sheet is None else file.parts
        file.looked.append(describe_reading(reading))
        if file.sheet is None and reading.part is not None:
            file.parts.append(reading.part)

    choices = {path: file.choice() for path, file in zip(paths, draft.files, strict=True)}
    options = ImportOptions(**{**draft.options, "dry_run": not draft.storing})
    progress, tell = jobs.watched(draft, say), jobs.told(draft)
    report = import_files(jobs.registry, paths, options, choices=choices, progress=progress, tell=tell, on_read=on_read)
    draft.report = report.as_dict()
    if draft.storing:
        with suppress(OSError):  # it is stored, whatever becomes of the copies
            drop_files(jobs.folder, draft)
        jobs.end(draft, DONE, "Stored.")
    else:
        jobs.end(draft, READ, "Read and tried out; nothing is stored yet.")
