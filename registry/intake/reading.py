"""``read_file``: the one door of the intake."""

from __future__ import annotations

from registry.intake import kinds
from registry.intake.encodings import tell_encoding
from registry.intake.findings import Findings
from registry.intake.layout import find_header_row
from registry.intake.master import header_row, read_master
from registry.intake.readings import KINDS, Reading, ReadingOptions
from registry.intake.results import read_results
from registry.intake.sources import BrokenTable, DelimitedSource, Source, tell_separator

_SEPARATOR_WORDS = {",": "comma", ";": "semicolon", "\t": "tab", "|": "vertical bar"}


def read_file(name: str, data: bytes, kind: str | None = None, options: ReadingOptions | None = None) -> Reading:
    """Read one file into a checked table; never raises for what stands in the file, all faults are in ``problems``.

    ``kind`` is one of ``KINDS``; None: told from the headings. Raises ValueError for an unknown kind.
    """
    if kind is not None and kind not in KINDS:
        raise ValueError(f"unknown kind of file '{kind}'; known are {', '.join(KINDS)}")
    options = options or ReadingOptions()
    findings = Findings(name, options.listed)
    reading = Reading(name, kind)
    try:
        _read(reading, data, options, findings)
    except BrokenTable as fault:
        findings.add(fault.what, row=fault.line, remedy=fault.remedy)
        findings.whole_file_refused = True
        reading.master = reading.results = None
    reading.problems = findings.problems()
    reading.refused_lines = frozenset(findings.refused_lines)
    reading.whole_file_refused = findings.whole_file_refused
    return reading


def _read(reading: Reading, data: bytes, options: ReadingOptions, findings: Findings) -> None:
    if not data.strip():
        findings.add(
            "the file is empty", expected="a table with headings", remedy="see whether the right file was chosen"
        )
        return
    encoding = tell_encoding(data)
    if encoding is None:
        findings.add(
            "the file is not a text file", expected="a table as delimited text (CSV)",
            remedy="save the table as CSV and read that file",
        )  # fmt: skip
        return
    separator = (options.recipe and options.recipe.separator) or tell_separator(data, encoding, _known_headings)
    reading.understood.append(f"encoding {encoding.words}; separator {_SEPARATOR_WORDS.get(separator, separator)}")
    if encoding.errors == "replace":
        findings.warn(
            f"some bytes have no meaning in {encoding.words}", remedy="see whether names with accents came out right"
        )
    source = DelimitedSource(data, encoding, separator)
    bound = data.count(b"\n") + data.count(b"\r") + 2
    _read_table(reading, source, options, findings, bound, data.count(b"_"))


def _read_table(
    reading: Reading, source: Source, options: ReadingOptions, findings: Findings, bound: int, underscores: int
) -> None:
    kind = reading.kind or _tell_kind(source, findings)
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


def _tell_kind(source: Source, findings: Findings) -> str | None:
    rows, _ = source.preview(100)
    index, analytes = find_header_row(rows)
    with_unit = sum(heading.unit is not None for heading in analytes.values())
    found: list[str] = []
    for row in rows[:20]:
        if sum(bool(cell.strip()) for cell in row) > 1:
            found = kinds.possible_kinds(row, len(analytes) if row is rows[index] else 0)
            if found:
                break
    if len(analytes) >= 3 or (analytes and (with_unit or not found)):
        return "results"
    if len(found) == 1:
        return found[0]
    headings = rows[max(header_row(rows, "samples"), 0)] if rows else []
    findings.add(
        "the headings fit more than one kind of file" if found else "the kind of file cannot be told from its headings",
        found=", ".join(cell.strip() for cell in headings if cell.strip())[:200],
        expected="; ".join(f"{one}: {kinds.NEEDS[one]}" for one in found or KINDS),
        remedy="name the kind when importing the file, or correct the headings",
    )  # fmt: skip
    return None
