"""``read_file``: the one door of the intake."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from registry.intake import kinds
from registry.intake.arrangement import LONG, TURNED, tell_arrangement
from registry.intake.columns import UNIT
from registry.intake.containers import BadContainer, Part, foreign_file, unpack
from registry.intake.encodings import Encoding, tell_encoding
from registry.intake.findings import Findings
from registry.intake.layout import find_header_row, find_wide_layout
from registry.intake.master import header_row, read_master
from registry.intake.readings import KINDS, Reading, ReadingOptions
from registry.intake.results import read_results
from registry.intake.scanning import scan
from registry.intake.sources import BrokenTable, DelimitedSource, GridSource, Source, tell_separator
from registry.intake.workbook import read_sheets

_SEPARATOR_WORDS = {",": "comma", ";": "semicolon", "\t": "tab", "|": "vertical bar"}


def read_file(name: str, data: bytes, kind: str | None = None, options: ReadingOptions | None = None) -> Reading:
    """Read one file into a checked table; never raises for what stands in the file, all faults are in ``problems``.

    ``kind`` is one of ``KINDS``; None: told from the headings. A workbook or archive must hold one table, or
    ``options.sheet`` must name one (``read_all`` reads them all). Raises ValueError for an unknown kind.
    """
    options = options or ReadingOptions()
    readings = read_all(name, data, kind, options)
    if len(readings) == 1:
        return readings[0]
    findings = Findings(name, options.listed)
    findings.add(
        "the file holds several tables", found=", ".join(reading.part or "" for reading in readings),
        expected="one table", remedy="name the one to read, or save each as a file of its own",
    )  # fmt: skip
    return Reading(name, kind, findings.problems(), whole_file_refused=True)


def read_all(
    name: str,
    file: bytes | Path,
    kind: str | None = None,
    options: ReadingOptions | None = None,
    *,
    watch: Callable[[int, int], object] | None = None,
) -> list[Reading]:
    """Every table of a file: one reading a sheet of a workbook and a member of an archive, else a list of one.

    ``file``: its bytes, or the path of an archive. A large text in an archive is unpacked to disk and read as a stream
    (``read_path``); ``watch`` is told how many of its bytes have been read, and of how many.
    Sheets and members without any table are left out and named in ``understood`` of the first reading.
    """
    if kind is not None and kind not in KINDS:
        raise ValueError(f"unknown kind of file '{kind}'; known are {', '.join(KINDS)}")
    options = options or ReadingOptions()
    refused = Findings(name, options.listed)
    readings: list[Reading] = []
    passed_over: list[str] = []
    try:
        for part in unpack(file, options.unpacked_limit_bytes, options.sheet):
            if not part.is_workbook:
                readings.append(_text_of(name, part, kind, options, watch))
                continue
            sheets = read_sheets(part.content(), options.sheet)
            tables = [(sheet, source) for sheet, source in sheets if len(sheets) == 1 or _holds_a_table(source)]
            passed_over += [sheet for sheet, source in sheets if (sheet, source) not in tables]
            for sheet, source in tables:
                place = f"{part.member}/{sheet}" if part.member else sheet
                readings.append(_one(name, place, b"", source, kind, options))
    except BadContainer as fault:
        refused.add(fault.what, remedy=fault.remedy)
        return [Reading(name, kind, refused.problems(), whole_file_refused=True)]
    if not readings:
        refused.add(
            "the workbook holds no table", expected="a sheet with headings", remedy="see whether it is the right file"
        )
        return [Reading(name, kind, refused.problems(), whole_file_refused=True)]
    if passed_over:
        readings[0].understood.append("sheets without a table are left out: " + ", ".join(passed_over))
    return readings


def _text_of(
    name: str,
    part: Part,
    kind: str | None,
    options: ReadingOptions,
    watch: Callable[[int, int], object] | None,
) -> Reading:
    """A text out of a container: as a stream where it waits on disk and can be read so, else in memory."""
    if part.path is not None:
        size = part.path.stat().st_size
        seen_by = None if watch is None else lambda done: watch(done, size)
        streamed = _streamed(part.path, name, part.member, kind, options, seen_by)
        if streamed is not None:
            return streamed
    return _one(name, part.member, part.content(), None, kind, options)


def read_path(
    path: Path,
    kind: str | None = None,
    options: ReadingOptions | None = None,
    *,
    watch: Callable[[int], object] | None = None,
) -> Reading | None:
    """``read_file`` for a large file on disk, at a memory that does not grow with it; None: read it the other way.

    Only plain text in ASCII or UTF-8 is read like this. The reading is the same, except that its table of results
    keeps its numbers in a scratch file. ``watch`` is told how many bytes have been read. Raises ValueError for an
    unknown kind.
    """
    if kind is not None and kind not in KINDS:
        raise ValueError(f"unknown kind of file '{kind}'; known are {', '.join(KINDS)}")
    return _streamed(path, path.name, None, kind, options or ReadingOptions(), watch)


def _streamed(
    path: Path,
    name: str,
    part: str | None,
    kind: str | None,
    options: ReadingOptions,
    watch: Callable[[int], object] | None,
) -> Reading | None:
    seen = scan(path)
    if seen is None:
        return None

    def read(reading: Reading, findings: Findings) -> None:
        separator = separator_of(path, seen.encoding, options, seen.quoted)
        _say_encoding(reading, seen.encoding, separator)
        source = DelimitedSource(path, seen.encoding, separator, seen.quoted, watch)
        _read_table(reading, source, options, findings, seen.line_ends + 2, seen.underscores)

    findings = Findings(name if part is None else f"{name} [{part}]", options.listed)
    return _read(Reading(name, kind, part=part), findings, read)


def _holds_a_table(source: Source) -> bool:
    rows, _ = source.preview(100)
    return _tell_kind(rows) != [] and len(rows) > 1


def _one(
    name: str, part: str | None, data: bytes, source: Source | None, kind: str | None, options: ReadingOptions
) -> Reading:
    def read(reading: Reading, findings: Findings) -> None:
        if isinstance(source, GridSource):
            reading.understood.append(f"sheet '{part}' of a workbook")
            _read_table(reading, source, options, findings, len(source.grid) + 1, 1 << 60)
        else:
            _read_text(reading, data, options, findings)

    findings = Findings(name if part is None else f"{name} [{part}]", options.listed)
    return _read(Reading(name, kind, part=part), findings, read)


def _read(reading: Reading, findings: Findings, read: Callable[[Reading, Findings], None]) -> Reading:
    """Let ``read`` fill the reading; what it found becomes the reading's problems."""
    try:
        read(reading, findings)
    except BrokenTable as fault:
        findings.add(fault.what, row=fault.line, remedy=fault.remedy)
        findings.whole_file_refused = True
        reading.master = reading.results = None
    reading.problems = findings.problems()
    reading.refused_lines = frozenset(findings.refused_lines)
    reading.whole_file_refused = findings.whole_file_refused
    return reading


def _read_text(reading: Reading, data: bytes, options: ReadingOptions, findings: Findings) -> None:
    if not data.strip():
        findings.add(
            "the file is empty", expected="a table with headings", remedy="see whether the right file was chosen"
        )
        return
    foreign = foreign_file(data)
    encoding = None if foreign is not None else tell_encoding(data)
    if foreign is not None or encoding is None:
        what, remedy = foreign or ("not a text file", "save the table as CSV and read that file")
        findings.add(f"the file is {what}", expected="a table as delimited text (CSV) or .xlsx", remedy=remedy)
        return
    separator = separator_of(data, encoding, options)
    _say_encoding(reading, encoding, separator)
    if encoding.errors == "replace":
        findings.warn(
            f"some bytes have no meaning in {encoding.words}", remedy="see whether names with accents came out right"
        )
    source = DelimitedSource(data, encoding, separator)
    bound = data.count(b"\n") + data.count(b"\r") + 2
    _read_table(reading, source, options, findings, bound, data.count(b"_"))


def _say_encoding(reading: Reading, encoding: Encoding, separator: str) -> None:
    reading.understood.append(f"encoding {encoding.words}; separator {_SEPARATOR_WORDS.get(separator, separator)}")


def separator_of(data: bytes | Path, encoding: Encoding, options: ReadingOptions, quoted: bool | None = None) -> str:
    """What parts the cells of a text file: the user's word, then the recipe's, else told from the headings."""
    given = options.separator or (options.recipe and options.recipe.separator)
    return given or tell_separator(data, encoding, _known_headings, quoted)


def _read_table(
    reading: Reading, source: Source, options: ReadingOptions, findings: Findings, bound: int, underscores: int
) -> None:
    kind = reading.kind or _settle_kind(source, options, findings)
    reading.kind = kind
    if kind is None:
        return
    if kind == "results":
        told = read_results(source, options, findings, reading.understood, bound, underscores)
        reading.results, reading.recipe = told.table, told.recipe
    else:
        reading.master = read_master(kind, source, options, findings, reading.understood)


def _known_headings(rows: list[list[str]]) -> int:
    """How many headings are known in the best row: what the separator is told by."""
    best = len(find_header_row(rows)[1])
    for row in rows[:20]:
        if len(row) > 1:
            best = max(best, *(len(kinds.columns_of(kind, row)) for kind in kinds.FIELDS))
    return best


def _tell_kind(rows: list[list[str]]) -> list[str]:
    """The kinds that the headings fit: one where it is clear, none where nothing is known."""
    index, analytes = find_header_row(rows)
    with_unit = sum(heading.unit is not None for heading in analytes.values())
    found: list[str] = []
    for row in rows[:20]:
        if sum(bool(cell.strip()) for cell in row) > 1:
            found = kinds.possible_kinds(row, len(analytes) if row is rows[index] else 0)
            if found:
                break
    if found == ["reference-materials"]:
        return found
    arrangement = tell_arrangement(rows)
    if len(analytes) == 2 and found and not with_unit:
        layout = find_wide_layout(rows)
        with_unit = layout is not None and UNIT in layout.roles.values()
    if arrangement in (LONG, TURNED) or len(analytes) >= 3 or (analytes and (with_unit or not found)):
        return ["results"]
    return found


def _settle_kind(source: Source, options: ReadingOptions, findings: Findings) -> str | None:
    rows, _ = source.preview(100)
    found = _tell_kind(rows)
    if len(found) == 1:
        return found[0]
    if not found and (options.columns or (options.recipe and options.recipe.columns)):
        return "results"  # of which alone columns are said
    headings = rows[max(header_row(rows, "samples"), 0)] if rows else []
    findings.add(
        "the headings fit more than one kind of file" if found else "the kind of file cannot be told from its headings",
        found=", ".join(cell.strip() for cell in headings if cell.strip())[:200],
        expected="; ".join(f"{one}: {kinds.NEEDS[one]}" for one in found or KINDS),
        remedy="name the kind when importing the file, or correct the headings",
    )  # fmt: skip
    return None
