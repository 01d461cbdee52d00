"""Results that come one by one, gathered into rows: in memory while they are few, else in a scratch file.

Rows are kept in buckets of some thousands. What belongs to a bucket is written in pieces as it comes, whatever the
order of the results in the file, and put together when the bucket is read. In memory stay, a row, its code, its first
line and one bit a column.
"""

from __future__ import annotations

import marshal
from array import array
from bisect import bisect_left
from collections.abc import Iterator

import numpy as np

from registry.intake.sources import CHUNK_ROWS, Chunk, Source
from registry.intake.spooled import Scratch

#: Rows a bucket, and results that wait in memory at most.
BUCKET_ROWS, WAITING_RESULTS = 4096, 32_768
#: row, column, line and text of a result; column -2: the code of the row, -1: what a control column says of it
_Record = tuple[int, int, int, str]
_CODE, _SAID = -2, -1
_BITS = 64


class GatheredRows(Source):
    """Rows [code, control text, a cell a column ...], filled by ``add``; read like any table once ``width`` is set."""

    def __init__(self, on_disk: bool) -> None:
        self.on_disk = on_disk
        self.width = 2
        self.lines: array[int] = array("q")
        self.results = 0
        self._first: dict[str, int] = {}
        self._more: dict[str, list[int]] = {}
        self._filled: list[array[int]] = []
        self._waiting: dict[int, list[_Record]] = {}
        self._waiting_count = 0
        self._segments: dict[int, list[tuple[int, int]]] = {}
        self._scratch: Scratch | None = None
        self._last: tuple[int, dict[tuple[int, int], int]] = (-1, {})

    def __len__(self) -> int:
        return len(self.lines)

    def add(self, code: str, said: str, column: int, text: str, line: int) -> None:
        """One result; a second one of a code in the same column opens a second row of that code."""
        row = self._row_for(code, column)
        if row is None:
            row = self._open(code, line)
            self._keep((row, _CODE, line, code))
            if said:
                self._keep((row, _SAID, line, said))
        block, bit = divmod(column, _BITS)
        while block >= len(self._filled):
            self._filled.append(array("Q", bytes(8 * len(self.lines))))
        self._filled[block][row] |= 1 << bit
        self.results += 1
        self._keep((row, column, line, text))

    def _row_for(self, code: str, column: int) -> int | None:
        """The first row of the code whose cell is free; None where there is none."""
        first = self._first.get(code)
        if first is None:
            return None
        block, bit = divmod(column, _BITS)
        if block >= len(self._filled):
            return first
        filled = self._filled[block]
        if not filled[first] >> bit & 1:
            return first
        more = self._more.get(code, [])  # those with a free cell are the last: each result takes the first free one
        place = bisect_left(more, True, key=lambda row: not filled[row] >> bit & 1)
        return more[place] if place < len(more) else None

    def _open(self, code: str, line: int) -> int:
        row = len(self.lines)
        if code in self._first:
            self._more.setdefault(code, []).append(row)
        else:
            self._first[code] = row
        self.lines.append(line)
        for filled in self._filled:
            filled.append(0)
        return row

    def _keep(self, record: _Record) -> None:
        bucket = record[0] // BUCKET_ROWS
        waiting = self._waiting.get(bucket)
        if waiting is None:
            waiting = self._waiting[bucket] = []
        waiting.append(record)
        self._waiting_count += 1
        if self._waiting_count >= WAITING_RESULTS:
            self._scratch = self._scratch or Scratch()
            for bucket, records in self._waiting.items():
                self._segments.setdefault(bucket, []).append(self._scratch.append(marshal.dumps(records)))
            self._waiting, self._waiting_count = {}, 0

    def _records(self, bucket: int) -> Iterator[_Record]:
        for offset, size in self._segments.get(bucket, ()):
            assert self._scratch is not None
            yield from marshal.loads(self._scratch.read(offset, size))
        yield from self._waiting.get(bucket, ())

    def chunks(self) -> Iterator[Chunk]:
        for start in range(0, len(self.lines), BUCKET_ROWS):
            lines = np.array(self.lines[start : start + BUCKET_ROWS], np.int64)
            rows = [[""] * self.width for _ in range(len(lines))]
            for row, column, _, text in self._records(start // BUCKET_ROWS):
                rows[row - start][column + 2] = text
            for place in range(0, len(rows), CHUNK_ROWS):
                yield Chunk(rows[place : place + CHUNK_ROWS], lines[place : place + CHUNK_ROWS])

    def line_of(self, first_line: int, column: int) -> int:
        """The line of the result in a column of the row that begins on ``first_line``; that line where none is."""
        row = bisect_left(self.lines, first_line)
        if row == len(self.lines) or self.lines[row] != first_line:
            return first_line
        bucket = row // BUCKET_ROWS
        if self._last[0] != bucket:
            self._last = bucket, {(at, of): line for at, of, line, _ in self._records(bucket)}
        return self._last[1].get((row, column), first_line)
