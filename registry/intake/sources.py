"""Rows of text cells with their line numbers, whatever the file was: the one shape that every layout is read from."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from functools import cached_property
from itertools import chain, islice
from pathlib import Path
from typing import BinaryIO

import numpy as np
from numpy.typing import NDArray

from registry.intake.encodings import Encoding

#: Rows a chunk: at 55 columns the text of one chunk stays in the cache of the processor.
CHUNK_ROWS = 1024
#: A row that swallows so many lines is an unclosed quotation mark.
LONGEST_ROW_LINES = 60


class BrokenTable(Exception):
    """The file cannot be cut into cells; ``line`` is where it stopped."""

    def __init__(self, what: str, line: int, remedy: str) -> None:
        super().__init__(what)
        self.what, self.line, self.remedy = what, line, remedy


class Chunk:
    """Some rows of a table with the file's line numbers, (k,) of the rows."""

    def __init__(self, rows: list[list[str]] | None, lines: NDArray[np.int64]) -> None:
        self._rows, self.lines = rows, lines

    def __len__(self) -> int:
        return len(self.lines)

    @property
    def rows(self) -> list[list[str]]:
        return self._rows or []

    def column(self, position: int) -> list[str]:
        """The cells of one column, blank where a row is too short."""
        try:
            return [row[position] for row in self.rows]
        except IndexError:
            return [row[position] if position < len(row) else "" for row in self.rows]

    def rows_beyond(self, width: int) -> list[int]:
        """The rows with more than ``width`` cells."""
        return [place for place, row in enumerate(self.rows) if len(row) > width]

    def after(self, count: int) -> Chunk:
        """This chunk without its first ``count`` rows."""
        return Chunk(self.rows[count:], self.lines[count:])


class PlainChunk(Chunk):
    """Lines of a delimited file without any quotation mark, cut into cells only when somebody asks."""

    def __init__(self, texts: list[str], lines: NDArray[np.int64], separator: str) -> None:
        super().__init__(None, lines)
        self.texts, self.separator = texts, separator

    @property
    def rows(self) -> list[list[str]]:
        if self._rows is None:
            try:
                self._rows = list(csv.reader(self.texts, delimiter=self.separator))
            except csv.Error as fault:
                raise BrokenTable(
                    f"the table cannot be cut into cells ({fault})",
                    int(self.lines[0]),
                    "see whether this is a delimited text file, and look at the lines from here on",
                ) from fault
        return self._rows

    def column(self, position: int) -> list[str]:
        if self._rows is None and position < 12:
            separator, pieces = self.separator, position + 1
            try:
                return [text.split(separator, pieces)[position].rstrip("\r\n") for text in self.texts]
            except IndexError:
                pass
        return super().column(position)

    def rows_beyond(self, width: int) -> list[int]:
        return [place for place, text in enumerate(self.texts) if text.count(self.separator) >= width]

    def after(self, count: int) -> PlainChunk:
        return PlainChunk(self.texts[count:], self.lines[count:], self.separator)


#: Follows the last line: a cell that swallows it was opened by a quotation mark that nothing closes.
_END = "\x03"


class Source:
    """Rows of cells. ``chunks`` may be called again and starts from the top each time."""

    #: whether it is too large to be held in memory whole
    on_disk: bool = False

    def chunks(self) -> Iterator[Chunk]:
        raise NotImplementedError

    def preview(self, count: int = 200) -> tuple[list[list[str]], NDArray[np.int64]]:
        """The first rows of the file."""
        rows: list[list[str]] = []
        lines: list[NDArray[np.int64]] = []
        for chunk in self.chunks():
            rows += chunk.rows[:count]
            lines.append(chunk.lines)
            if len(rows) >= count:
                break
        joined = np.concatenate(lines) if lines else np.empty(0, np.int64)
        return rows[:count], joined[:count]


@dataclass
class GridSource(Source):
    """Rows that are in memory already (a sheet of a workbook, a turned table)."""

    grid: list[list[str]]
    lines: NDArray[np.int64]

    def chunks(self) -> Iterator[Chunk]:
        for start in range(0, len(self.grid), CHUNK_ROWS):
            yield Chunk(self.grid[start : start + CHUNK_ROWS], self.lines[start : start + CHUNK_ROWS])


class DelimitedSource(Source):
    """A delimited text file, read as a stream; without quotation marks a row is a line.

    ``data``: its bytes, or its path; then it never lies in memory whole, and ``watch`` is told after each chunk how
    many bytes of it were read.
    """

    def __init__(
        self,
        data: bytes | Path,
        encoding: Encoding,
        separator: str,
        quoted: bool | None = None,
        watch: Callable[[int], object] | None = None,
    ) -> None:
        self.data, self.encoding, self.separator = data, encoding, separator
        self._known_quoted, self.watch = quoted, watch
        self.on_disk = isinstance(data, Path)
        #: what must live as long as the file is read
        self.container: object = None

    @cached_property
    def quoted(self) -> bool:
        """Whether a quotation mark stands anywhere."""
        if self._known_quoted is not None:
            return self._known_quoted
        data = self.data.read_bytes() if isinstance(self.data, Path) else self.data
        return b'"' in data

    def binary(self) -> BinaryIO:
        return self.data.open("rb") if isinstance(self.data, Path) else io.BytesIO(self.data)

    def chunks(self) -> Iterator[Chunk]:
        with self.binary() as binary:
            stream = io.TextIOWrapper(binary, encoding=self.encoding.codec, errors=self.encoding.errors, newline="")
            for chunk in self._quoted(stream) if self.quoted else self._plain(stream):
                if self.watch is not None:
                    self.watch(binary.tell())
                yield chunk

    def _plain(self, stream: Iterable[str]) -> Iterator[Chunk]:
        stream, count = iter(stream), 0
        while texts := list(islice(stream, CHUNK_ROWS)):
            yield PlainChunk(texts, np.arange(count + 1, count + 1 + len(texts), dtype=np.int64), self.separator)
            count += len(texts)

    def _quoted(self, stream: Iterable[str]) -> Iterator[Chunk]:
        reader = csv.reader(chain(stream, [_END]), delimiter=self.separator)
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
            taken = reader.line_num - before
            if rows and rows[-1] == [_END]:
                rows.pop()
                taken -= 1
            if not rows:
                return
            lines = np.arange(before + 1, before + 1 + len(rows), dtype=np.int64)
            if taken != len(rows):  # a cell holds a line break
                spans = np.array([1 + sum(map(_breaks, row)) for row in rows], np.int64)
                lines = before + 1 + np.concatenate(([0], np.cumsum(spans)[:-1]))
                longest = int(np.argmax(spans))
                if spans[longest] > LONGEST_ROW_LINES:
                    raise BrokenTable(
                        f"one row takes {spans[longest]} lines",
                        int(lines[longest]),
                        "a quotation mark is opened in this row and not closed; close or remove it",
                    )
            if rows[-1] and rows[-1][-1].endswith(_END):
                raise BrokenTable(
                    "a quotation mark is opened and not closed before the file ends",
                    int(lines[-1]),
                    "close or remove the quotation mark in this row",
                )
            yield Chunk(rows, lines)


def _breaks(cell: str) -> int:
    return cell.replace("\r\n", "\n").replace("\r", "\n").count("\n") if "\n" in cell or "\r" in cell else 0


def _first_row(data: bytes | Path, encoding: Encoding, separator: str) -> list[list[str]]:
    """The headings of a table that breaks further down, so that its separator can be told and the break be reported."""
    source = DelimitedSource(data, encoding, separator)
    with source.binary() as binary, io.TextIOWrapper(binary, encoding.codec, encoding.errors, newline="") as stream:
        line = stream.readline(1 << 20)
    return [line.rstrip("\r\n").split(separator)] if line else []


def tell_separator(
    data: bytes | Path, encoding: Encoding, score: Callable[[list[list[str]]], int], quoted: bool | None = None
) -> str:
    """The separator of a delimited file: the one under which most headings are known, then most rows of one width."""
    best, choice = (-1.0, -1.0), ","
    for separator in (",", ";", "\t", "|"):
        try:
            rows, _ = DelimitedSource(data, encoding, separator, quoted).preview(60)
        except BrokenTable:
            rows = _first_row(data, encoding, separator)
        widths = [len(row) for row in rows if any(row)]
        common = max(set(widths), key=lambda width: (widths.count(width), width), default=1)
        regular = widths.count(common) / len(widths) * np.log2(common) if widths else 0.0
        found = (float(score(rows)), float(regular))
        if found > best:
            best, choice = found, separator
    return choice
