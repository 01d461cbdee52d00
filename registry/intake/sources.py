"""Rows of text cells with their line numbers, whatever the file was: the one shape that every layout is read from."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from itertools import islice

import numpy as np
from numpy.typing import NDArray

from registry.intake.encodings import Encoding

#: Rows a chunk: about 10 MB of cells at 55 columns.
CHUNK_ROWS = 2048
#: A row that swallows so many lines is an unclosed quotation mark.
LONGEST_ROW_LINES = 60

Chunk = tuple[list[list[str]], NDArray[np.int64]]


class BrokenTable(Exception):
    """The file cannot be cut into cells; ``line`` is where it stopped."""

    def __init__(self, what: str, line: int, remedy: str) -> None:
        super().__init__(what)
        self.what, self.line, self.remedy = what, line, remedy


class Source:
    """Rows of cells. ``chunks`` may be called again and starts from the top each time."""

    #: in the last chunks ``<`` stood as ``-`` (see DelimitedSource); only then may a reader take the sign for it
    marks_below = False

    def chunks(self, fast: bool = False) -> Iterator[Chunk]:
        raise NotImplementedError

    def preview(self, count: int = 200) -> tuple[list[list[str]], NDArray[np.int64]]:
        """The first rows of the file."""
        rows: list[list[str]] = []
        lines: list[NDArray[np.int64]] = []
        for some, numbers in self.chunks():
            rows += some
            lines.append(numbers)
            if len(rows) >= count:
                break
        joined = np.concatenate(lines) if lines else np.empty(0, np.int64)
        return rows[:count], joined[:count]


@dataclass
class GridSource(Source):
    """Rows that are in memory already (a sheet of a workbook, a turned table)."""

    rows: list[list[str]]
    lines: NDArray[np.int64]

    def chunks(self, fast: bool = False) -> Iterator[Chunk]:
        for start in range(0, len(self.rows), CHUNK_ROWS):
            yield self.rows[start : start + CHUNK_ROWS], self.lines[start : start + CHUNK_ROWS]


class DelimitedSource(Source):
    """A delimited text file, read as a stream.

    A cell that begins with ``<`` costs an exception in the fast conversion. Where no cell of the whole file begins
    with ``-``, ``fast`` hands ``<0.5`` out as ``-0.5`` (``marks_below``): the sign bit then is the qualifier.
    """

    def __init__(self, data: bytes, encoding: Encoding, separator: str) -> None:
        self.data, self.encoding, self.separator = data, encoding, separator
        codec = encoding.codec.removesuffix("-sig") if encoding.codec.startswith("utf-8") else encoding.codec
        self._minus_free = codec in ("utf-8", "cp1252", "mac_roman") and (separator + "-").encode(codec) not in data

    def lines(self) -> io.TextIOWrapper:
        return io.TextIOWrapper(
            io.BytesIO(self.data), encoding=self.encoding.codec, errors=self.encoding.errors, newline=""
        )

    def chunks(self, fast: bool = False) -> Iterator[Chunk]:
        stream = self.lines()
        self.marks_below = fast and self._minus_free
        source: Iterable[str] = _marked(stream, self.separator) if self.marks_below else stream
        reader = csv.reader(source, delimiter=self.separator)
        while True:
            before = reader.line_num
            try:
                rows = list(islice(reader, CHUNK_ROWS))
            except csv.Error as fault:
                raise BrokenTable(
                    f"the table cannot be cut into cells ({fault})",
                    reader.line_num,
                    "look for a quotation mark that is opened and never closed before this line",
                ) from fault
            if not rows:
                return
            lines = np.arange(before + 1, before + 1 + len(rows), dtype=np.int64)
            if reader.line_num - before != len(rows):  # a cell holds a line break
                spans = np.array([1 + sum(map(_breaks, row)) for row in rows], np.int64)
                lines = before + 1 + np.concatenate(([0], np.cumsum(spans)[:-1]))
                longest = int(np.argmax(spans))
                if spans[longest] > LONGEST_ROW_LINES:
                    raise BrokenTable(
                        f"one row takes {spans[longest]} lines",
                        int(lines[longest]),
                        "a quotation mark is opened in this row and not closed; close or remove it",
                    )
            yield rows, lines


def _breaks(cell: str) -> int:
    return cell.replace("\r\n", "\n").replace("\r", "\n").count("\n") if "\n" in cell or "\r" in cell else 0


def _marked(stream: io.TextIOWrapper, separator: str) -> Iterator[str]:
    before, after = separator + "<", separator + "-"
    while block := stream.readlines(1 << 20):
        yield from io.StringIO("".join(block).replace(before, after), newline="")


def tell_separator(data: bytes, encoding: Encoding, score: Callable[[list[list[str]]], int]) -> str:
    """The separator of a delimited file: the one under which most headings are known, then most rows of one width."""
    best, choice = (-1.0, -1.0), ","
    for separator in (",", ";", "\t", "|"):
        try:
            rows, _ = DelimitedSource(data, encoding, separator).preview(60)
        except BrokenTable:
            continue
        widths = [len(row) for row in rows if any(row)]
        common = max(set(widths), key=lambda width: (widths.count(width), width), default=1)
        regular = widths.count(common) / len(widths) * np.log2(common) if widths else 0.0
        found = (float(score(rows)), float(regular))
        if found > best:
            best, choice = found, separator
    return choice
