"""The rows of a file that were refused, as a table that can be corrected and imported again (``--keep-going``)."""

from __future__ import annotations

import csv
import io
from collections.abc import Mapping

from registry.errors import PlutonbookError
from registry.intake.arrangement import TURNED, tell_arrangement
from registry.intake.containers import is_workbook, unpack
from registry.intake.encodings import tell_encoding
from registry.intake.reading import separator_of
from registry.intake.readings import Reading, ReadingOptions
from registry.intake.sources import DelimitedSource, Source
from registry.intake.workbook import read_sheets

#: The heading of the column that says why a row was refused; the intake passes over it.
REASON_HEADING = "why refused"


def without_lines(reading: Reading, lines: frozenset[int]) -> Reading:
    """The reading with the rows of these file lines left out, in place; its problems of those lines are gone."""
    table = reading.results or reading.master
    assert table is not None
    keep = [position for position, line in enumerate(table.line_no.tolist()) if line not in lines]
    if reading.master is not None:
        reading.master.rows = {name: [column[row] for row in keep] for name, column in reading.master.rows.items()}
    if reading.results is not None:
        results = reading.results
        results.sample_codes = [results.sample_codes[row] for row in keep]
        results.values, results.qualifiers = results.values[keep], results.qualifiers[keep]
        if results.control_text:
            results.control_text = [results.control_text[row] for row in keep]
    table.line_no = table.line_no[keep]
    reading.problems = [problem for problem in reading.problems if problem.severity != "problem"]
    return reading


def refused_rows(data: bytes, reading: Reading, reasons: Mapping[int, str], first_data_line: int) -> str:
    """CSV text: the heading rows of the file, then each refused row as it stood with its reason in a last column.

    ``reasons`` by file line. Raises PlutonbookError for a table turned on its side, whose lines are columns.
    """
    source = source_of(data, reading)
    rows, _ = source.preview(200)
    if reading.results is not None and tell_arrangement(rows) == TURNED:
        raise PlutonbookError(
            f"{reading.file}: the samples of this table stand in columns, so that single ones cannot be set aside; "
            "turn it so that a row is a sample, or correct it whole"
        )
    headings: list[list[str]] = []
    refused: list[list[str]] = []
    for chunk in source.chunks():
        for row, line in zip(chunk.rows, chunk.lines.tolist(), strict=True):
            if line < first_data_line:
                headings.append(row)
            elif line in reasons:
                refused.append([*row, reasons[line]])
    width = max(map(len, [*headings, *(row[:-1] for row in refused)]), default=0)
    fullest = max(range(len(headings)), key=lambda place: sum(map(bool, headings[place])), default=-1)
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    for place, row in enumerate(headings):
        writer.writerow([*row, *[""] * (width - len(row)), REASON_HEADING if place == fullest else ""])
    for row in refused:
        writer.writerow([*row[:-1], *[""] * (width - len(row) + 1), row[-1]])
    return out.getvalue()


def source_of(data: bytes, reading: Reading) -> Source:
    """The rows of cells that a reading was made from, to be gone through again."""
    options = ReadingOptions(recipe=reading.recipe)
    for part in unpack(data, options.unpacked_limit_bytes):
        if is_workbook(part.data):
            for sheet, source in read_sheets(part.data):
                if reading.part in (None, sheet, f"{part.member}/{sheet}"):
                    return source
        elif reading.part in (None, part.member):
            encoding = tell_encoding(part.data)
            assert encoding is not None, "a file that was read has an encoding"
            return DelimitedSource(part.data, encoding, separator_of(part.data, encoding, options))
    raise PlutonbookError(f"{reading.file}: '{reading.part}' is not in the file any more")
