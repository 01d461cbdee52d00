"""Import of master data and lab results: read, check, store, compute and judge in one transaction."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor
from contextlib import ExitStack
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np

from registry import auditing
from registry.computing import child_at_hand
from registry.errors import InputProblems, Problem, UsageError
from registry.import_reports import FileReport, ImportReport, understood_of
from registry.importing_certificates import store_certificates
from registry.importing_codes import (
    almost_known,
    on_named_like_materials,
    rocks_named_like_materials,
    unknown_codes,
)
from registry.importing_faults import Rest, prefixed
from registry.importing_lines import resolve
from registry.importing_results import StoredBatch, counted, on_parts_left, store_results
from registry.intake import KINDS, MasterTable, Reading, ReadingOptions
from registry.intake_choices import described_columns
from registry.keeping_going import SetAside
from registry.lab_files import LabFile
from registry.precedence import Earlier, alternatives_within, look_after, look_before
from registry.progress import Progress, unwatched
from registry.refresh import changes_since, drained_samples, last_change
from registry.store import masters
from registry.store.engine import Registry, writing
from registry.store.reading.changes import verdict_changes


@dataclass(frozen=True)
class ImportOptions:
    """The choices of ``plutonbook import`` (see its help).

    ``corrects``: the batch whose place a file with ``supersede`` takes; None: that of its code or certificate number.
    """

    kind: str | None = None
    dry_run: bool = False
    batch: str | None = None
    lab: str | None = None
    create_samples: bool = False
    keep_going: bool = False
    supersede: bool = False
    corrects: str | None = None
    add_to: str | None = None
    code_prefix: str = ""


@dataclass(frozen=True)
class FileChoice:
    """How one file is read: its kind (None: told from the headings) and the choices of the user."""

    kind: str | None = None
    reading: ReadingOptions | None = None


@dataclass
class _File:
    """A file, and the batch of its first table of results once stored."""

    file: LabFile
    batch: StoredBatch | None = None

    @property
    def path(self) -> Path:
        return self.file.path


#: Certificates of reference materials go before the results that they judge.
_ORDER = sorted(KINDS, key=lambda kind: kind == "results")


_NOTHING_COMPUTED = np.zeros(0, dtype=np.int64)


def import_files(
    registry: Registry,
    paths: Sequence[Path],
    options: ImportOptions | None = None,
    *,
    choices: Mapping[Path, FileChoice] | None = None,
    progress: Progress = unwatched,
    tell: Callable[[str], Any] | None = None,
    on_read: Callable[[Path, Reading], Any] | None = None,
) -> ImportReport:
    """Import files in the order areas, sites, surveys, intervals, intrusions, samples, results; one transaction.

    ``choices`` says how single files are read; ``on_read`` is given each reading before anything is stored;
    ``tell`` makes the import wait for a busy registry and gets the sentence that says what holds it.
    Raises InputProblems with every problem of every file (then nothing was written), NotFound for a missing file.
    """
    options = options or ImportOptions()
    with ThreadPoolExecutor(1) as pool, ExitStack() as at_the_end:
        files: list[_File] = []
        for path in paths:
            files.append(_File(LabFile(path, pool)))
            at_the_end.callback(files[-1].file.close)
        at_the_end.enter_context(child_at_hand(any(file.file.is_large for file in files)))
        return _import(registry, files, options, choices or {}, progress, tell, on_read)


def _import(
    registry: Registry,
    files: Sequence[_File],
    options: ImportOptions,
    choices: Mapping[Path, FileChoice],
    progress: Progress,
    tell: Callable[[str], Any] | None,
    on_read: Callable[[Path, Reading], Any] | None,
) -> ImportReport:
    readings: list[tuple[Reading, _File]] = []
    for number, file in enumerate(files):
        progress("reading", number, len(files))
        choice = choices.get(file.path, FileChoice())
        how = choice.reading or ReadingOptions()
        if options.keep_going:
            how = replace(how, listed=file.file.size)  # every row is told its own reason
        for reading in file.file.readings(choice.kind or options.kind, how, progress):
            if on_read is not None:
                on_read(file.path, reading)
            readings.append((reading, file))
    readings.sort(key=lambda pair: _ORDER.index(pair[0].kind) if pair[0].kind in _ORDER else len(_ORDER))
    asides: list[SetAside | None] = [None] * len(readings)
    if options.keep_going:
        asides = SetAside.of_all((file.path, file.file.data, reading) for reading, file in readings)
    unreadable = [problem for reading, _ in readings for problem in reading.problems if not reading.ok]
    what = f"an import of {counted(len(files), 'file')}"
    with writing(registry, what=what, tell=tell, bulk=True, trial=options.dry_run) as connection:
        report = _store(connection, readings, asides, options, unreadable, progress)
        progress("writing", 0, 0)
    return report


def _store(
    connection: Any,
    readings: Sequence[tuple[Reading, _File]],
    asides: Sequence[SetAside | None],
    options: ImportOptions,
    problems: list[Problem],
    progress: Progress,
) -> ImportReport:
    before = last_change(connection)
    reports: list[FileReport] = []
    earlier: list[Earlier | None] = []
    rest = Rest.of(reading for reading, _ in readings)
    computed = np.zeros(0, dtype=np.int64)
    results = len({file.path for reading, file in readings if reading.kind == "results"})
    if options.corrects and results > 1:
        several = f"{results} files hold results, and one batch, '{options.corrects}', is named that they correct"
        raise UsageError(f"{several}; import them one by one")
    if options.batch and results > 1:
        raise UsageError(f"--batch names one batch, but {results} files hold results; import them one by one")
    for (reading, contents), aside in zip(readings, asides, strict=True):
        if problems or not reading.ok:
            more = rest.more_faults(connection, reading, contents.file, options, contents.batch is not None)
            problems = [*problems, *more]
            continue
        earlier.append(_before(connection, reading, options) if options.dry_run else None)
        report, done, faults = _store_one(connection, reading, contents, aside, options, progress)
        reports.append(report)
        computed = np.union1d(computed, done)
        if faults:
            told = rest.more_faults(connection, reading, contents.file, options, contents.batch is not None)
            faults = told or faults
        problems = [*problems, *faults]
    if problems:
        raise InputProblems(problems, understood_of([reading for reading, _ in readings]) if options.dry_run else ())
    computed = np.union1d(computed, drained_samples(connection, cause=_cause(reports), progress=progress))
    for report, one in zip(reports, earlier, strict=True):
        if one is not None and report.results is not None:
            report.precedence = look_after(connection, one, [report.results.batch])
    for report in reports:
        if report.results is not None and report.results.stored is not None:
            report.results.remarks += on_parts_left(connection, report.results.stored)
    for report, aside in zip(reports, asides, strict=True):
        if aside is not None and aside.reasons:
            report.refused = len(aside.reasons)
            report.refused_file = None if options.dry_run else str(aside.save())
    for noted in filter(None, (report.noted() for report in reports)):
        auditing.note(connection, "import", *noted)
    return ImportReport(
        reports,
        len(computed),
        changes_since(connection, before),
        masters.verdict_counts(connection),
        options.dry_run,
        verdict_changes(connection, before),
    )


def _store_one(
    connection: Any,
    reading: Reading,
    contents: _File,
    aside: SetAside | None,
    options: ImportOptions,
    progress: Progress,
) -> tuple[FileReport, np.ndarray, list[Problem]]:
    """Store one good reading; its report, ids of the samples computed, and the problems met on the way."""
    kind = reading.kind or ""
    if reading.results is not None:
        if aside is not None and not options.create_samples:
            aside.add(unknown_codes(connection, reading.file, reading.results, options.code_prefix))
            aside.drop()
        report = FileReport(reading.place, kind, len(reading.results), reading.understood, reading.warnings)
        report.columns = described_columns(reading.results)
        if options.dry_run:
            report.alternatives = alternatives_within(reading.results)
        if options.create_samples:
            report.on_storing += almost_known(connection, reading, options.code_prefix)
        rocks_before = rocks_named_like_materials(connection) if options.create_samples else set()
        report.results, done, faults = store_results(
            connection, reading, contents.file, options, progress, contents.batch
        )
        contents.batch = contents.batch or report.results.stored
        if not faults:
            added = rocks_named_like_materials(connection) - rocks_before if options.create_samples else ()
            report.on_storing += on_named_like_materials(reading.file, added)
        return report, done, faults
    table = reading.master
    assert table is not None
    report = FileReport(reading.place, kind, len(table), reading.understood, reading.warnings)
    if kind == "reference-materials":
        changed, told = store_certificates(connection, table, reading.file)
        report.added, report.changes = changed.added, changed.changes
        faults = [problem for problem in told if problem.severity == "problem"]
        report.on_storing += [problem for problem in told if problem.severity != "problem"]
        return report, _NOTHING_COMPUTED, faults
    outcome = _upserted(connection, kind, table, reading.file, aside, options)
    report.added, report.changes = outcome.added, outcome.changes
    faults = [problem for problem in outcome.problems if problem.severity == "problem"]
    report.on_storing += [problem for problem in outcome.problems if problem.severity != "problem"]
    return report, _NOTHING_COMPUTED, faults


def _before(connection: Any, reading: Reading, options: ImportOptions) -> Earlier | None:
    """Where the values of the samples of a file of results come from before it is stored."""
    if reading.results is None:
        return None
    return look_before(connection, resolve(connection, reading.results, options.code_prefix).sample_ids)


def _upserted(
    connection: Any, kind: str, table: MasterTable, file: str, aside: SetAside | None, options: ImportOptions
) -> masters.Outcome:
    """Bring master data in; with ``aside`` the rows that have problems are set aside until the rest goes through."""
    while True:
        rows = prefixed(table.rows, options.code_prefix)
        outcome = masters.upsert(connection, kind, rows, table.line_no, file)
        faults = [problem for problem in outcome.problems if problem.severity == "problem"]
        if aside is None or not faults or aside.add(faults):
            return outcome
        aside.drop()


def _cause(reports: Sequence[FileReport]) -> str:
    batches = [report.results.batch for report in reports if report.results is not None]
    if batches:
        return f"batch {', '.join(batches)} imported"
    return f"{', '.join(report.file for report in reports)} imported"
