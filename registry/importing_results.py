"""Lab results into the registry: batch, columns, aliquots, results, and the compositions from the arrays in hand."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from registry import auditing, controlling
from registry.batch_places import Place, place_of
from registry.choice import Block, ColumnUse
from registry.clock import now
from registry.computing import CHILDS_CHUNK_SIZE, WORTH_A_CHILD, Computations
from registry.errors import Problem
from registry.importing_codes import first_of, unknown_codes
from registry.importing_controls import called_otherwise, columns_that_disagree, limit_reported
from registry.importing_lines import Lines, raw_parts, resolve
from registry.intake import Reading, ResultTable
from registry.intake.spooled import SpooledArray
from registry.judging import read_rules
from registry.lab_files import LabFile, Packed
from registry.pipeline import CHUNK_SIZE, Chunk, Computed
from registry.refresh import chunk_of, composed, write_fresh
from registry.store import batches, bulk, loading, ready_rows, stale

if TYPE_CHECKING:
    from registry.importing import ImportOptions

#: Lines of results stored between two reports of progress.
LINES_AT_A_TIME = 8192


@dataclass(frozen=True)
class StoredBatch:
    """The batch that a table of results was stored as; the ids of the whole certificate that it is a part of, and of
    the batch that its file corrects.
    """

    batch_id: int
    code: str
    whole: int
    supersedes: int | None = None


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
        text = f"batch {self.batch}: {counted(self.aliquots, 'line')}, {counted(self.results, 'result')}"
        text += f" ({self.censored:,} censored)"
        if self.repeats:
            text += f", {counted(self.repeats, 'repeated line')}"
        lines = [text]
        plain = self.new_samples - self.new_controls
        if plain:
            lines.append(f"{counted(plain, 'sample')} {'was' if plain == 1 else 'were'} added with the kind 'unknown'")
        if self.new_controls:
            verb = "was" if self.new_controls == 1 else "were"
            lines.append(
                f"{counted(self.new_controls, 'control sample')} {verb} added, as the certificate or a code calls them"
            )
        return [*lines, *(f"remark: {remark}" for remark in self.remarks), *self.controls]


def store_results(
    connection: Any,
    reading: Reading,
    file: LabFile,
    options: ImportOptions,
    progress: Callable[[str, int, int], None],
    within: StoredBatch | None = None,
) -> tuple[ResultsReport, np.ndarray, list[Problem]]:
    """Store one table of results and compute its samples; a report, ids of those computed (int64), and the problems.

    Samples without other results are composed, derived and judged from the arrays in hand; those that had results
    are marked stale, and the caller's drain computes them from all of theirs. ``within``: the batch of an earlier
    table of the same file (another sheet), which this one becomes a part of.
    """
    table = reading.results
    assert table is not None
    packed = file.packed()
    if within is None:
        place, problems = place_of(connection, reading.file, table, packed.sha256, options)
    else:
        place, problems = Place(f"{within.code}/{reading.part}", part_of=within.whole), []
    lines = resolve(connection, table, options.code_prefix, add=options.create_samples)
    if lines.any_missing and not options.create_samples:
        problems += first_of(unknown_codes(connection, reading.file, table, options.code_prefix), reading.file)
    if problems:
        return ResultsReport(place.code, 0, 0, 0, 0, 0), np.zeros(0, dtype=np.int64), problems
    lines.settle_controls(connection)
    fresh_ids = _without_results(connection, lines.sample_ids)
    rules = read_rules(connection)
    if (lines.controlled or place.part_of is not None) and rules.conventions.failed_control == "hold":
        fresh_ids = fresh_ids[:0]  # what is held back is known once the controls are judged: the drain computes all
    by_child = len(fresh_ids) >= WORTH_A_CHILD
    at_a_time = CHILDS_CHUNK_SIZE if by_child else CHUNK_SIZE
    chunks = _fresh_chunks(connection, table, lines, fresh_ids, at_a_time)
    tables = ready_rows.statements_of(connection)
    report = ResultsReport(place.code, len(table), 0, 0, lines.added, lines.repeats, lines.new_controls)
    done = 0

    def write(chunk: Chunk, outcome: Computed | bytes) -> None:
        nonlocal done
        progress("computing", done, len(fresh_ids))
        write_fresh(connection, chunk, outcome, rules)
        stale.clear(connection, chunk.sample_id.tolist())
        done += len(chunk)

    with (
        bulk.guarded(connection),
        Computations(chunks, rules, by_child, tables) as computations,
    ):
        batch_id, column_ids = _store_batch(connection, reading, packed if within is None else None, place, options)
        for start in range(0, len(table), LINES_AT_A_TIME):
            progress("storing", start, len(table))
            part = slice(start, start + LINES_AT_A_TIME)
            values, qualifiers = table.values[part], table.qualifiers[part]
            aliquot_ids = bulk.insert_aliquots(
                connection, lines.sample_ids[part], batch_id, table.line_no[part], lines.kinds(part),
                lines.repeat_no[part], table.control_text[part] if lines.said else None,
            )  # fmt: skip
            report.results += bulk.insert_results(connection, aliquot_ids, column_ids, values, qualifiers)
            report.censored += int((qualifiers > 0).sum())
            for chunk, outcome in computations.finished():
                write(chunk, outcome)
        for chunk, outcome in computations:
            write(chunk, outcome)
        ready_rows.let_go(connection)
    supersedes = place.supersedes if within is None else within.supersedes
    gone: list[str] = []
    if place.supersedes is not None:  # first, so that its controls judge nothing any more
        gone = batches.supersede(connection, place.supersedes, batch_id)
    elif supersedes is not None:
        gone = batches.supersede_parts(connection, supersedes, batch_id)
    report.controls = controlling.assess_imported(connection, batch_id, lines.controlled)
    for ids in raw_parts(np.setdiff1d(lines.sample_ids, fresh_ids)):
        stale.mark(connection, ids.tolist(), stale.DERIVE)
    report.remarks = [
        *_place_taken(place, gone),
        *_laboratories(table, options.lab, place),
        *columns_that_disagree(table),
        *called_otherwise(connection, table, options.code_prefix, lines.said),
    ]
    report.stored = StoredBatch(batch_id, place.code, place.part_of or batch_id, supersedes)
    return report, fresh_ids, []


def counted(number: int, word: str) -> str:
    """``1 sample``, ``2,000 samples``."""
    return f"{number:,} {word}" if number == 1 else f"{number:,} {word}s"


def _place_taken(place: Place, parts: Sequence[str]) -> list[str]:
    """Sentences on the batch that a table takes the place of, and on its parts that go with it."""
    told = [place.told] if place.told else []
    if parts:
        report = "reports" if len(parts) == 1 else "report"
        named = ", ".join(f"'{code}'" for code in parts)
        told.append(f"takes the place of {named} as well, which {report} the same analytes")
    return told


def on_parts_left(connection: Any, stored: StoredBatch) -> list[str]:
    """Sentences on the parts of a corrected certificate that the correction does not touch."""
    if stored.supersedes is None:
        return []
    own = {stored.batch_id, *batches.further_tables(connection, stored.batch_id)}
    left = [code for batch_id, code in batches.parts_in_use(connection, stored.supersedes) if batch_id not in own]
    if not left:
        return []
    named = f"'{left[0]}'" if len(left) == 1 else ", ".join(f"'{code}'" for code in left[:-1]) + f" and '{left[-1]}'"
    one = len(left) == 1
    return [
        f"{named}, {'a part' if one else 'parts'} of the corrected certificate, {'reports' if one else 'report'} other "
        f"analytes than this file and {'stays' if one else 'stay'} in use; if {'it is' if one else 'they are'} wrong "
        "too, withdraw or supersede by code"
    ]


def _laboratories(table: ResultTable, lab: str | None, place: Place) -> list[str]:
    """Sentences on a laboratory that the file and ``--lab`` name differently, or that the superseded batch gave."""
    if lab and table.lab and lab.strip().casefold() != table.lab.strip().casefold():
        return [f"the file names the laboratory '{table.lab}', --lab says '{lab}': kept as '{lab}'"]
    if place.lab and not (lab or table.lab):
        return [f"the laboratory '{place.lab}' is taken from the batch that this one supersedes"]
    return []


def _store_batch(
    connection: Any,
    reading: Reading,
    packed: Packed | None,
    place: Place,
    options: ImportOptions,
) -> tuple[int, np.ndarray]:
    table = reading.results
    assert table is not None
    batch_id = batches.insert_batch(
        connection,
        code=place.code,
        lab=options.lab or table.lab or place.lab,
        certificate=table.certificate,
        received_on=table.received_on or place.received_on,
        reported_on=table.reported_on or place.reported_on,
        part_of=place.part_of,
        file_name=reading.file,
        sha256=None if packed is None else packed.sha256,
        parts=() if packed is None else packed.parts(),
        imported_at=now(),
        imported_by=auditing.who(),
        file_part=reading.part,
        reading=None if reading.recipe is None else reading.recipe.to_json(),
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
    found = [loading.samples_with_aliquots(connection, ids) for ids in raw_parts(unique)]
    return np.setdiff1d(unique, np.concatenate(found)) if found else unique


def _fresh_chunks(
    connection: Any, table: ResultTable, lines: Lines, fresh_ids: np.ndarray, at_a_time: int
) -> Iterator[Chunk]:
    """The samples that have these results only, composed from the arrays in hand, a chunk at a time."""
    uses = [ColumnUse(column.analyte, column.unit, column.digestion) for column in table.columns]
    for ids in lines.groups(fresh_ids, at_a_time, by_line=isinstance(table.values, SpooledArray)):
        rows, position = lines.rows_of(ids)
        values, qualifiers, repeats = table.values[rows], table.qualifiers[rows], lines.repeat_no[rows]
        blocks = []
        for repeat in range(int(repeats.max(initial=-1)) + 1):
            here = repeats == repeat
            blocks.append(Block(uses, position[here], values[here], qualifiers[here], 0, repeat))
        yield chunk_of(connection, composed(ids, blocks))
