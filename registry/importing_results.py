"""Lab results into the registry: batch, columns, aliquots, results, and the compositions from the arrays in hand."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from concurrent.futures import Future
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from registry.choice import Block, ColumnUse
from registry.clock import now
from registry.errors import Problem
from registry.intake import ResultTable
from registry.pipeline import CHUNK_SIZE
from registry.refresh import recompute
from registry.store import batches, bulk, loading, masters, stale

if TYPE_CHECKING:
    from registry.importing import ImportOptions

#: Lines of results stored between two reports of progress.
LINES_AT_A_TIME = 8192
CONTROL_KINDS = ("reference_material", "blank", "duplicate")


@dataclass
class ResultsReport:
    """What was stored of one file of results."""

    batch: str
    aliquots: int
    results: int
    censored: int
    new_samples: int
    repeats: int

    def lines(self) -> list[str]:
        text = f"batch {self.batch}: {self.aliquots:,} lines, {self.results:,} results ({self.censored:,} censored)"
        if self.repeats:
            text += f", {self.repeats:,} repeated lines"
        lines = [text]
        if self.new_samples:
            lines.append(f"{self.new_samples:,} samples were added with the kind 'unknown'")
        return lines


def store_results(
    connection: Any,
    file: str,
    table: ResultTable,
    data: bytes,
    compressed: Future[bytes],
    options: ImportOptions,
    progress: Callable[[str, int, int], None],
) -> tuple[ResultsReport, int, list[Problem]]:
    """Store one table of results and compute its samples; a report, how many were computed, and the problems.

    Samples without other results are composed, derived and judged from the arrays in hand; those that had results
    are marked stale, and the caller's drain computes them from all of theirs.
    """
    place, problems = _place_of(connection, file, table, hashlib.sha256(data).hexdigest(), options)
    code = place.code
    codes = [f"{options.code_prefix}{sample}" for sample in table.sample_codes]
    known = masters.sample_ids(connection, set(codes))
    missing = [sample for sample in dict.fromkeys(codes) if sample not in known]
    empty = ResultsReport(code, 0, 0, 0, 0, 0)
    if missing and not options.create_samples:
        problems += _unknown_codes(connection, file, table, codes, known)
    if problems:
        return empty, 0, problems
    if missing:
        known.update(masters.add_samples(connection, missing, "unknown"))
    sample_ids = np.array([known[sample] for sample in codes], dtype=np.int64)
    fresh_ids = _without_results(connection, sample_ids)
    batch_id, column_ids = _store_batch(connection, file, table, data, compressed.result(), place, options)
    repeat_no = _repeat_numbers(sample_ids)
    with bulk.guarded(connection):
        aliquot_ids = bulk.insert_aliquots(
            connection,
            sample_ids,
            batch_id,
            table.line_no,
            _aliquot_kinds(connection, sample_ids, repeat_no),
            repeat_no,
        )
        results = 0
        for start in range(0, len(aliquot_ids), LINES_AT_A_TIME):
            progress("storing", start, len(aliquot_ids))
            part = slice(start, start + LINES_AT_A_TIME)
            values, qualifiers = table.values[part], table.qualifiers[part]
            results += bulk.insert_results(connection, aliquot_ids[part], column_ids, values, qualifiers)
        computed = _compute_fresh(connection, table, sample_ids, repeat_no, fresh_ids, progress)
    if place.supersedes is not None:
        batches.supersede(connection, place.supersedes, batch_id)
    stale.mark(connection, np.setdiff1d(sample_ids, fresh_ids).tolist(), stale.DERIVE)
    censored = int((table.qualifiers > 0).sum())
    report = ResultsReport(code, len(table), results, censored, len(missing), int((repeat_no > 0).sum()))
    return report, computed, []


@dataclass(frozen=True)
class _Place:
    """Where a file of results goes: the code of its batch, the batch it is a part of, the batch it supersedes."""

    code: str
    part_of: int | None = None
    supersedes: int | None = None


def _place_of(
    connection: Any, file: str, table: ResultTable, sha256: str, options: ImportOptions
) -> tuple[_Place, list[Problem]]:
    """The place of a file among the batches, or the problems that keep it out."""
    code = options.batch or table.certificate or Path(file).stem
    same = batches.find_by_hash(connection, sha256)
    if same is not None:
        remedy = (
            f"use 'plutonbook restore-batch {same['batch']}' to let it count again"
            if same["state"] == "withdrawn"
            else "nothing needs to be done"
        )
        what = f"the same bytes were imported before, as batch '{same['batch']}' ({same['state']})"
        return _Place(code), [Problem(file, what, remedy=remedy)]
    if options.add_to:
        return _part(connection, file, options)
    by_certificate = batches.find_by_certificate(connection, table.certificate) if table.certificate else None
    other = batches.find_batch(connection, code) or by_certificate
    if options.supersede:
        return _successor(connection, file, code, other, options)
    if other is None:
        return _Place(code), []
    problem = Problem(
        file,
        f"certificate or batch '{code}' is in the registry already, from another file ({other['file_name']})",
        remedy="if this is a corrected certificate use --supersede, if it is another part of the same one use "
        f"--add-to {other['batch']}, else give it a code of its own with --batch",
    )
    return _Place(code), [problem]


def _part(connection: Any, file: str, options: ImportOptions) -> tuple[_Place, list[Problem]]:
    parent = batches.find_batch(connection, options.add_to or "")
    if parent is None or parent["state"] != "active":
        what = f"--add-to names batch '{options.add_to}', which is " + (
            "not in the registry" if parent is None else parent["state"]
        )
        return _Place(""), [Problem(file, what, remedy="'plutonbook batches' lists the batches; name an active one")]
    code = options.batch or batches.free_code(connection, parent["batch"], "/")
    return _Place(code, part_of=parent["part_of"] or parent["batch_id"]), []


def _successor(
    connection: Any, file: str, code: str, other: dict[str, Any] | None, options: ImportOptions
) -> tuple[_Place, list[Problem]]:
    while other is not None and other["state"] == "superseded" and other["superseded_by"]:
        other = batches.find_by_id(connection, other["superseded_by"])
    if other is None:
        what = f"--supersede: no batch has the code or certificate number '{code}'"
        remedy = "name the batch that this file corrects with --batch, or import it without --supersede"
        return _Place(code), [Problem(file, what, remedy=remedy)]
    return _Place(batches.free_code(connection, code, " corrected "), supersedes=other["batch_id"]), []


def _unknown_codes(
    connection: Any, file: str, table: ResultTable, codes: list[str], known: dict[str, int]
) -> list[Problem]:
    listed = 20
    rows = [position for position, code in enumerate(codes) if code not in known]
    near = masters.near_codes(connection, [codes[position] for position in rows[:listed]])
    problems = []
    for position in rows[:listed]:
        suggestion = near.get(codes[position])
        hint = f"did you mean '{suggestion}'? " if suggestion else ""
        problems.append(
            Problem(
                file,
                "this sample is not in the registry",
                row=int(table.line_no[position]),
                column=table.sample_header or None,
                found=codes[position],
                expected="the code of a registered sample",
                remedy=hint + "import the sample list first, or use --create-samples to add it with the kind 'unknown'",
            )
        )
    if len(rows) > listed:
        problems.append(
            Problem(
                file,
                f"{len(rows) - listed:,} more lines have sample codes that are not in the registry",
                remedy="import the sample list first, or use --create-samples",
            )
        )
    return problems


def _store_batch(
    connection: Any,
    file: str,
    table: ResultTable,
    data: bytes,
    compressed: bytes,
    place: _Place,
    options: ImportOptions,
) -> tuple[int, np.ndarray]:
    batch_id = batches.insert_batch(
        connection,
        code=place.code,
        lab=options.lab or table.lab,
        certificate=table.certificate,
        part_of=place.part_of,
        file_name=file,
        data=data,
        compressed=compressed,
        imported_at=now(),
    )
    column_ids = batches.insert_columns(
        connection,
        batch_id,
        [
            {
                "position": column.position,
                "header": column.header,
                "analyte": column.analyte,
                "unit": column.unit,
                "method": column.method,
                "digestion": column.digestion,
                "detection_limit": column.detection_limit,
            }
            for column in table.columns
        ],
    )
    return batch_id, np.asarray(column_ids, dtype=np.int64)


def _without_results(connection: Any, sample_ids: np.ndarray) -> np.ndarray:
    """Those of the samples that have no aliquot yet, each once, in order."""
    unique = np.unique(sample_ids)
    return np.setdiff1d(unique, loading.samples_with_aliquots(connection, unique))


def _repeat_numbers(sample_ids: np.ndarray) -> np.ndarray:
    """How often each line's sample stood before in the table: 0 for the first line, 1 for the second."""
    order = np.argsort(sample_ids, kind="stable")
    ordered = sample_ids[order]
    starts = np.flatnonzero(np.r_[True, ordered[1:] != ordered[:-1]]) if len(ordered) else np.array([], dtype=int)
    group = np.repeat(starts, np.diff(np.r_[starts, len(ordered)]))
    numbers = np.empty(len(ordered), dtype=np.int64)
    numbers[order] = np.arange(len(ordered)) - group
    return numbers


def _aliquot_kinds(connection: Any, sample_ids: np.ndarray, repeat_no: np.ndarray) -> list[str]:
    controls = set(masters.samples_of_kinds(connection, CONTROL_KINDS))
    return [
        "control" if sample_id in controls else ("repeat" if repeat else "original")
        for sample_id, repeat in zip(sample_ids.tolist(), repeat_no.tolist(), strict=True)
    ]


def _compute_fresh(
    connection: Any,
    table: ResultTable,
    sample_ids: np.ndarray,
    repeat_no: np.ndarray,
    fresh_ids: np.ndarray,
    progress: Callable[[str, int, int], None],
) -> int:
    """Compose, derive and judge the samples that have these results only."""
    from registry.judging import read_rules
    from registry.refresh import composed

    rules = read_rules(connection)
    uses = [ColumnUse(column.analyte, column.unit, column.digestion) for column in table.columns]
    for start in range(0, len(fresh_ids), CHUNK_SIZE):
        progress("computing", start, len(fresh_ids))
        ids = fresh_ids[start : start + CHUNK_SIZE]
        position = np.searchsorted(ids, sample_ids)
        inside = (position < len(ids)) & (ids[np.minimum(position, len(ids) - 1)] == sample_ids)
        blocks = []
        for repeat in range(int(repeat_no[inside].max(initial=-1)) + 1):
            rows = np.flatnonzero(inside & (repeat_no == repeat))
            blocks.append(Block(uses, position[rows], table.values[rows], table.qualifiers[rows], 0, repeat))
        recompute(connection, composed(ids, blocks), rules, "", rewrite_composition=True, log_changes=False)
        stale.clear(connection, ids.tolist())
    return len(fresh_ids)
