"""The rows of a file that were refused, as a table that can be corrected and imported again (``--keep-going``)."""

from __future__ import annotations

import csv
from collections.abc import Iterator, Mapping
from itertools import compress
from pathlib import Path
from typing import TextIO

import numpy as np

from registry.errors import PlutonbookError
from registry.intake.arrangement import TURNED, tell_arrangement
from registry.intake.containers import unpack
from registry.intake.encodings import tell_encoding
from registry.intake.reading import separator_of
from registry.intake.readings import Reading, ReadingOptions
from registry.intake.scanning import scan
from registry.intake.sources import DelimitedSource, Source
from registry.intake.spooled import kept_rows, kept_texts
from registry.intake.workbook import read_sheets

#: The heading of the column that says why a row was refused; the intake passes over it.
REASON_HEADING = "why refused"


def without_lines(reading: Reading, lines: frozenset[int]) -> Reading:
    """The reading with the rows of these file lines left out, in place; its problems of those lines are gone."""
    table = reading.results or reading.master
    assert table is not None
    reading.problems = [problem for problem in reading.problems if problem.severity != "problem"]
    line_no = np.asarray(table.line_no[:])
    keep = ~np.isin(line_no, np.fromiter(lines, np.int64, len(lines)))
    if keep.all():
        return reading
    if reading.master is not None:
        reading.master.rows = {name: list(compress(column, keep)) for name, column in reading.master.rows.items()}
    if reading.results is not None:
        results = reading.results
        results.sample_codes = kept_texts(results.sample_codes, keep)
        results.values, results.qualifiers = kept_rows(results.values, keep), kept_rows(results.qualifiers, keep)
        if results.control_text:
            results.control_text = list(compress(results.control_text, keep))
    table.line_no = line_no[keep]
    return reading


def write_refused(
    out: TextIO, file: bytes | Path, reading: Reading, reasons: Mapping[int, str], first_data_line: int
) -> None:
    """CSV text: the heading rows of the file, then each refused row as it stood with its reason in a last column.

    ``file``: its bytes or where it lies; ``reasons`` by file line. Raises PlutonbookError for a table turned on its
    side, whose lines are columns.
    """
    source = source_of(file, reading)
    rows, _ = source.preview(200)
    if reading.results is not None and tell_arrangement(rows) == TURNED:
        raise PlutonbookError(
            f"{reading.file}: the samples of this table stand in columns, so that single ones cannot be set aside; "
            "turn it so that a row is a sample, or correct it whole"
        )
    headings: list[list[str]] = []
    width = 0
    for line, row in _rows(source, first_data_line, reasons):
        width = max(width, len(row))
        if line < first_data_line:
            headings.append(row)
    fullest = max(range(len(headings)), key=lambda place: sum(map(bool, headings[place])), default=-1)
    writer = csv.writer(out, lineterminator="\n")
    for place, row in enumerate(headings):
        writer.writerow([*row, *[""] * (width - len(row)), REASON_HEADING if place == fullest else ""])
    for line, row in _rows(source, first_data_line, reasons):
        if line >= first_data_line:
            writer.writerow([*row, *[""] * (width - len(row)), reasons[line]])


def _rows(source: Source, first_data_line: int, reasons: Mapping[int, str]) -> Iterator[tuple[int, list[str]]]:
    """The heading rows and the refused ones, with their lines."""
    wanted = np.fromiter(reasons, np.int64, len(reasons))
    for chunk in source.chunks():
        here = (chunk.lines < first_data_line) | np.isin(chunk.lines, wanted)
        for place in np.flatnonzero(here).tolist():
            yield int(chunk.lines[place]), chunk.rows[place]


def source_of(file: bytes | Path, reading: Reading) -> Source:
    """The rows of cells that a reading was made from, to be gone through again."""
    options = ReadingOptions(recipe=reading.recipe)
    parts = unpack(file, options.unpacked_limit_bytes)
    for part in parts:
        if part.is_workbook:
            for sheet, sheet_source in read_sheets(part.content()):
                if reading.part in (None, sheet, f"{part.member}/{sheet}"):
                    return sheet_source
        elif reading.part in (None, part.member):
            seen = None if part.path is None else scan(part.path)
            if seen is not None and part.path is not None:
                separator = separator_of(part.path, seen.encoding, options, seen.quoted)
                source = DelimitedSource(part.path, seen.encoding, separator, seen.quoted)
                source.container = parts  # what keeps the unpacked file in its place
                return source
            data = part.content()
            encoding = tell_encoding(data)
            assert encoding is not None, "a file that was read has an encoding"
            return DelimitedSource(data, encoding, separator_of(data, encoding, options))
    raise PlutonbookError(f"{reading.file}: '{reading.part}' is not in the file any more")
