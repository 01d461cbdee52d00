"""Lab results into the registry: batch, columns, aliquots, results, and the compositions from the arrays in hand."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Iterator
from concurrent.futures import Future
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from registry import controlling
from registry.batch_places import Place, place_of
from registry.choice import Block, ColumnUse
from registry.clock import now
from registry.computing import CHILDS_CHUNK_SIZE, WORTH_A_CHILD, Computations
from registry.errors import Problem
from registry.importing_controls import (
    add_samples,
    call_known_controls,
    columns_that_disagree,
    limit_reported,
    spoken_of,
)
from registry.intake import Reading, ResultTable
from registry.judging import read_rules
from registry.pipeline import CHUNK_SIZE, Chunk
from registry.quality.recognising import Spoken
from registry.refresh import chunk_of, composed, write_fresh
from registry.store import batches, bulk, loading, masters, ready_rows, stale

if TYPE_CHECKING:
    from registry.importing import ImportOptions

#: Lines of results stored between two reports of progress.
LINES_AT_A_TIME = 8192
#: Unknown sample codes that are listed one by one.
LISTED_CODES = 20
CONTROL_KINDS = ("reference_material", "blank", "duplicate")


@dataclass(frozen=True)
class StoredBatch:
    """The batch that a table of results was stored as."""

    batch_id: int
    code: str


@dataclass
class ResultsReport:
    """What was stored of one file of results."""

    batch: str
    aliquots: int
    results: int
    censored: int
    new_samples: int
    repeats: int
    new_controls: int = 0
    controls: list[str] = field(default_factory=list)
    remarks: list[str] = field(default_factory=list)
    stored: StoredBatch | None = None

    def lines(self) -> list[str]:
        text = f"batch {self.batch}: {self.aliquots:,} lines, {self.results:,} results ({self.censored:,} censored)"
        if self.repeats:
            text += f", {self.repeats:,} repeated lines"
        lines = [text]
        if self.new_samples > self.new_controls:
            lines.append(f"{self.new_samples - self.new_controls:,} samples were added with the kind 'unknown'")
        if self.new_controls:
            lines.append(
                f"{self.new_controls:,} control samples were added, as the certificate or their code calls them"
            )
        return [*lines, *(f"remark: {remark}" for remark in self.remarks), *self.controls]


def store_results(
    connection: Any,
    reading: Reading,
    data: bytes,
    compressed: Future[bytes],
    options: ImportOptions,
    progress: Callable[[str, int, int], None],
    within: StoredBatch | None = None,
) -> tuple[ResultsReport, np.ndarray, list[Problem]]:
    """Store one table of results and compute its samples; a report, ids of those computed (int64), and the problems.

    Samples without other results are composed, derived and judged from the arrays in hand; those that had results
    are marked stale, and the caller's drain computes them from all of theirs. ``within``: the batch of an earlier
    table of the same file (another sheet), which this one becomes a part of.
    """
    table, file = reading.results, reading.file
    assert table is not None
    if within is None:
        place, problems = place_of(connection, file, table, hashlib.sha256(data).hexdigest(), options)
    else:
        place, problems = Place(f"{within.code}/{reading.part}", part_of=within.batch_id), []
    code = place.code
    codes = [f"{options.code_prefix}{sample}" for sample in table.sample_codes]
    known = masters.sample_ids(connection, set(codes))
    missing = [sample for sample in dict.fromkeys(codes) if sample not in known]
    empty = ResultsReport(code, 0, 0, 0, 0, 0)
    if missing and not options.create_samples:
        problems += _first_of(unknown_codes(connection, file, table, options.code_prefix), file)
    if problems:
        return empty, np.zeros(0, dtype=np.int64), problems
    said = spoken_of(codes, table, options.code_prefix)
    new_controls = add_samples(connection, missing, said, known) if missing else 0
    call_known_controls(connection, said, known, set(missing))
    sample_ids = np.array([known[sample] for sample in codes], dtype=np.int64)
    fresh_ids = _without_results(connection, sample_ids)
    repeat_no = _repeat_numbers(sample_ids)
    kinds = _aliquot_kinds(connection, sample_ids, repeat_no, codes, said)
    controlled = "control" in kinds or bool((repeat_no > 0).any())
    rules = read_rules(connection)
    if controlled and rules.conventions.failed_control == "hold":
        fresh_ids = fresh_ids[:0]  # what is held back is known once the controls are judged: the drain computes all
    worth_a_child = len(fresh_ids) >= WORTH_A_CHILD
    at_a_time = CHILDS_CHUNK_SIZE if worth_a_child else CHUNK_SIZE
    chunks = _fresh_chunks(connection, table, sample_ids, repeat_no, fresh_ids, at_a_time)
    tables = ready_rows.statements_of(connection)
    with (
        bulk.guarded(connection),
        Computations(chunks, rules, worth_a_child, tables) as computations,
    ):
        batch_id, column_ids = _store_batch(
            connection, file, table, (data, compressed.result()) if within is None else None, place, options
        )
        aliquot_ids = bulk.insert_aliquots(
            connection, sample_ids, batch_id, table.line_no, kinds, repeat_no, table.control_text if said else None
        )
        results = 0
        for start in range(0, len(aliquot_ids), LINES_AT_A_TIME):
            progress("storing", start, len(aliquot_ids))
            part = slice(start, start + LINES_AT_A_TIME)
            values, qualifiers = table.values[part], table.qualifiers[part]
            results += bulk.insert_results(connection, aliquot_ids[part], column_ids, values, qualifiers)
        done = 0
        for chunk, outcome in computations:
            progress("computing", done, len(fresh_ids))
            write_fresh(connection, chunk, outcome, rules)
            stale.clear(connection, chunk.sample_id.tolist())
            done += len(chunk)
        ready_rows.let_go(connection)
    if controlled:
        controlling.assess(connection, batch_id)
    if place.supersedes is not None:
        batches.supersede(connection, place.supersedes, batch_id)
    stale.mark(connection, np.setdiff1d(sample_ids, fresh_ids).tolist(), stale.DERIVE)
    censored = int((table.qualifiers > 0).sum())
    report = ResultsReport(code, len(table), results, censored, len(missing), int((repeat_no > 0).sum()), new_controls)
    report.remarks = columns_that_disagree(table)
    report.stored = StoredBatch(batch_id, code)
    if controlled:
        report.controls = controlling.state_of_batch(connection, batch_id)
    return report, fresh_ids, []


def unknown_codes(connection: Any, file: str, table: ResultTable, prefix: str = "") -> list[Problem]:
    """One problem a line whose sample code is not in the registry, with a near code where there is one."""
    codes = [f"{prefix}{code}" for code in table.sample_codes]
    known = masters.sample_ids(connection, set(codes))
    rows = [position for position, code in enumerate(codes) if code not in known]
    near = masters.near_codes(connection, [codes[position] for position in rows[:LISTED_CODES]])
    problems = []
    for position in rows:
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
    return problems


def _first_of(problems: list[Problem], file: str) -> list[Problem]:
    """The first problems of many alike, and one that counts the rest."""
    if len(problems) <= LISTED_CODES:
        return problems
    rest = Problem(
        file,
        f"{len(problems) - LISTED_CODES:,} more lines have sample codes that are not in the registry",
        remedy="import the sample list first, or use --create-samples",
    )
    return [*problems[:LISTED_CODES], rest]


def _store_batch(
    connection: Any,
    file: str,
    table: ResultTable,
    contents: tuple[bytes, bytes] | None,
    place: Place,
    options: ImportOptions,
) -> tuple[int, np.ndarray]:
    batch_id = batches.insert_batch(
        connection,
        code=place.code,
        lab=options.lab or table.lab,
        certificate=table.certificate,
        part_of=place.part_of,
        file_name=file,
        data=None if contents is None else contents[0],
        compressed=None if contents is None else contents[1],
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
                "detection_limit": column.detection_limit
                if column.detection_limit is not None
                else limit_reported(table.values[:, place], table.qualifiers[:, place]),
            }
            for place, column in enumerate(table.columns)
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


def _aliquot_kinds(
    connection: Any, sample_ids: np.ndarray, repeat_no: np.ndarray, codes: list[str], said: dict[str, Spoken]
) -> list[str]:
    controls = set(masters.samples_of_kinds(connection, CONTROL_KINDS).tolist())
    if said:
        controls |= {sample_id for sample_id, code in zip(sample_ids.tolist(), codes, strict=True) if code in said}
    return [
        "control" if sample_id in controls else ("repeat" if repeat else "original")
        for sample_id, repeat in zip(sample_ids.tolist(), repeat_no.tolist(), strict=True)
    ]


def _fresh_chunks(
    connection: Any,
    table: ResultTable,
    sample_ids: np.ndarray,
    repeat_no: np.ndarray,
    fresh_ids: np.ndarray,
    at_a_time: int,
) -> Iterator[Chunk]:
    """The samples that have these results only, composed from the arrays in hand, a chunk at a time."""
    uses = [ColumnUse(column.analyte, column.unit, column.digestion) for column in table.columns]
    for start in range(0, len(fresh_ids), at_a_time):
        ids = fresh_ids[start : start + at_a_time]
        position = np.searchsorted(ids, sample_ids)
        inside = (position < len(ids)) & (ids[np.minimum(position, len(ids) - 1)] == sample_ids)
        blocks = []
        for repeat in range(int(repeat_no[inside].max(initial=-1)) + 1):
            rows = np.flatnonzero(inside & (repeat_no == repeat))
            blocks.append(Block(uses, position[rows], table.values[rows], table.qualifiers[rows], 0, repeat))
        yield chunk_of(connection, composed(ids, blocks))
