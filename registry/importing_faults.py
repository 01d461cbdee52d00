"""An import that is refused is still looked through to its end, so that all of its faults are told at once.

All that is done here lies in a transaction that is rolled back: what is good goes in, so that what follows finds it.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any

from registry.batch_places import place_of
from registry.clock import now
from registry.errors import Problem
from registry.importing_certificates import store_certificates
from registry.importing_codes import first_of, unknown_codes
from registry.intake import MasterTable, Reading
from registry.intake.refused import without_lines
from registry.lab_files import LabFile
from registry.store import batches, masters
from registry.store.master_kinds import MASTER_KINDS, MasterKind

if TYPE_CHECKING:
    from registry.importing import ImportOptions

#: Times that a file is brought in anew without its faulty references, then rows; what is left then is left out whole.
PASSES = 4
#: What the store says of a reference that names nothing.
_NAMES_NOTHING = "not in the registry"


def lost_tables(reading: Reading) -> set[str]:
    """The tables that a file which could not be read may have brought rows of; any where its kind is not told."""
    if reading.kind == "results" or not (reading.whole_file_refused or reading.master is None):
        return set()
    if reading.kind is None:
        return {spec.table for spec in MASTER_KINDS.values()}
    return {MASTER_KINDS[reading.kind].table} if reading.kind in MASTER_KINDS else set()


@dataclass
class Rest:
    """What the files of a refused import were to bring and could not: its absence is no fault of what names it.

    ``promised`` holds codes by table; ``anything`` are the tables of which a file that could not be read may have
    brought any row; ``placed`` are the files whose batch is in.
    """

    promised: dict[str, set[str]] = field(default_factory=dict)
    anything: set[str] = field(default_factory=set)
    placed: set[Path] = field(default_factory=set)

    @classmethod
    def of(cls, readings: Iterable[Reading]) -> Rest:
        """Begin with what cannot be read of the files of an import."""
        return cls(anything={table for reading in readings for table in lost_tables(reading)})

    def more_faults(
        self, connection: Any, reading: Reading, file: LabFile, options: ImportOptions, within: bool = False
    ) -> list[Problem]:
        """What the registry, with what the files before brought, has against one file and its rows.

        ``within``: the batch of the file is in the registry, by an earlier table of it. With ``--keep-going`` rows are
        set aside, so that only what concerns the whole file is a fault.
        """
        table = reading.results or reading.master
        if table is None:
            return []
        if reading.results is not None:
            faults = [] if within else self._of_place(connection, reading, file, options)
            if not options.create_samples and not options.keep_going:
                faults += self._of_codes(connection, reading, options.code_prefix)
            return faults
        if reading.whole_file_refused:
            return []
        if reading.kind == "reference-materials":
            return self._of_certificates(connection, reading)
        assert reading.master is not None
        told = self._of_master(connection, reading.master, reading, options.code_prefix)
        tables = {reference.column: reference.table for reference in MASTER_KINDS[reading.master.kind].references}
        told = [fault for fault in told if not self._may_be_lost(fault, tables)]
        return [fault for fault in told if fault.row is None] if options.keep_going else told

    def _may_be_lost(self, fault: Problem, tables: Mapping[str, str]) -> bool:
        """Whether a fault is that a reference names nothing, which a file that could not be read may have brought."""
        table = tables.get(fault.column or "")
        named = set(tables.values()) if table is None else {table}
        return _NAMES_NOTHING in fault.what and bool(named & self.anything)

    def _of_place(self, connection: Any, reading: Reading, file: LabFile, options: ImportOptions) -> list[Problem]:
        """What keeps a file of results out of the batches; a good one goes in, so that the next one meets it."""
        table = reading.results
        assert table is not None
        if file.path in self.placed:
            return []
        self.placed.add(file.path)
        packed = file.packed()
        place, faults = place_of(connection, reading.file, table, packed.sha256, options)
        if not faults:
            batch_id = batches.insert_batch(
                connection,
                code=place.code,
                certificate=table.certificate,
                file_name=reading.file,
                sha256=packed.sha256,
                part_of=place.part_of,
                imported_at=now(),
            )
            if place.supersedes is not None:
                batches.supersede(connection, place.supersedes, batch_id)
        return faults

    def _of_codes(self, connection: Any, reading: Reading, prefix: str) -> list[Problem]:
        assert reading.results is not None
        if "sample" in self.anything:
            return []
        promised = self.promised.get("sample", set())
        header = reading.results.sample_header or None
        told = {fault.row for fault in reading.problems if fault.column == header and fault.severity == "problem"}
        faults = unknown_codes(connection, reading.file, reading.results, prefix)
        return first_of(
            (fault for fault in faults if fault.found not in promised and fault.found and fault.row not in told),
            reading.file,
        )

    def _of_certificates(self, connection: Any, reading: Reading) -> list[Problem]:
        without_lines(reading, frozenset(reading.refused_lines))
        assert reading.master is not None
        _, told = store_certificates(connection, reading.master, reading.file)
        return [fault for fault in told if fault.severity == "problem"]

    def _of_master(self, connection: Any, table: MasterTable, reading: Reading, prefix: str) -> list[Problem]:
        """Bring in what can be: a faulty reference is left blank, then its row left out; each row is told of once."""
        spec = MASTER_KINDS[table.kind]
        rows = {name: list(column) for name, column in prefixed(table.rows, prefix).items()}
        lines = [int(line) for line in table.line_no]
        self._promise_those_without_key(spec, rows, lines, reading.refused_lines)
        lines = self._leave_out(spec, rows, lines, set(reading.refused_lines))
        lines = self._without_promised(connection, spec, rows, lines)
        blank_first = {reference.column for reference in spec.references if reference.stored not in spec.key}
        told_rows, told_kinds, told = set[int](), set[str](), list[Problem]()
        for number in range(PASSES):
            outcome = masters.upsert(connection, table.kind, rows, lines, reading.file)
            faults = [problem for problem in outcome.problems if problem.severity == "problem"]
            if number == 0:
                told += outcome.problems
                told_kinds = {fault.what for fault in faults}
            else:
                told += [fault for fault in faults if fault.row not in told_rows and fault.what not in told_kinds]
            if not faults:
                return told
            at = {line: place for place, line in enumerate(lines)}
            left_out = set()
            for fault in faults:
                if fault.row is None:
                    continue
                if number < PASSES // 2 and fault.column in blank_first and fault.column in rows:
                    rows[fault.column][at[fault.row]] = None
                else:
                    left_out.add(fault.row)
            told_rows |= {fault.row for fault in faults if fault.row is not None}
            lines = self._leave_out(spec, rows, lines, left_out)
        self._leave_out(spec, rows, lines, set(lines))
        return told

    def _promise_those_without_key(
        self, spec: MasterKind, rows: dict[str, list[Any]], lines: list[int], refused: frozenset[int]
    ) -> None:
        """Rows whose own code could not be read may be what others name: nothing can be said of those then."""
        code = _code_column(spec)
        if code is None or not refused:
            return
        given = rows.get(code)
        if given is None or any(value is None for line, value in zip(lines, given, strict=True) if line in refused):
            self.anything.add(spec.table)

    def _without_promised(
        self, connection: Any, spec: MasterKind, rows: dict[str, list[Any]], lines: list[int]
    ) -> list[int]:
        """References to what a faulty file was to bring are left blank, or their rows left out where they are keys."""
        left_out: set[int] = set()
        for reference in spec.references:
            wanted = self.promised.get(reference.table, set()) & set(rows.get(reference.column, ()))
            missing = wanted - masters.registered(connection, reference, wanted) if wanted else set()
            if not missing:
                continue
            column = rows[reference.column]
            if reference.stored in spec.key:
                left_out |= {line for line, code in zip(lines, column, strict=True) if code in missing}
            else:
                rows[reference.column] = [None if code in missing else code for code in column]
        return self._leave_out(spec, rows, lines, left_out)

    def _leave_out(
        self, spec: MasterKind, rows: dict[str, list[Any]], lines: list[int], left_out: set[int]
    ) -> list[int]:
        """Take rows out; their codes are promised from now on. The lines that stay."""
        if not left_out:
            return lines
        code = _code_column(spec)
        if code in rows:
            gone = {value for line, value in zip(lines, rows[code], strict=True) if line in left_out}
            self.promised.setdefault(spec.table, set()).update(gone - {None})
        keep = [place for place, line in enumerate(lines) if line not in left_out]
        for name, column in rows.items():
            rows[name] = [column[place] for place in keep]
        return [lines[place] for place in keep]


def _code_column(spec: MasterKind) -> str | None:
    """The contract column of the code of a thing; None for surveys and intervals, which nothing refers to."""
    if len(spec.key) > 1:
        return None
    return next(name for name, column in spec.columns.items() if column == spec.key[0])


def prefixed(rows: Mapping[str, list[Any]], prefix: str) -> dict[str, list[Any]]:
    """Rows of master data with the prefix before every sample code."""
    if not prefix:
        return dict(rows)
    coded = ("sample_code", "duplicate_of")
    return {
        name: [value if value is None else f"{prefix}{value}" for value in column] if name in coded else column
        for name, column in rows.items()
    }
