"""Many cells to numbers at once: the C conversion runs over whole chunks, only the cells it refuses are looked at."""

from __future__ import annotations

import re
from array import array
from collections.abc import Iterator
from itertools import chain, repeat
from operator import itemgetter
from typing import Any

import numpy as np
from numpy.typing import NDArray

from registry.intake.cells import TEXT, Cell, parse_cell
from registry.intake.sources import Chunk, PlainChunk

#: In a file of decimal commas a point groups thousands: it is made unreadable here, so that the cell is looked at.
_COMMA = str.maketrans({",": ".", ".": "\x00"})
#: Words for no result that are common enough to be worth a pass over the text.
_BLANK_WORDS = ("NA", "-", "N/A", "na", "n/a", "n.a.", "--", " ")
_REMEMBERED = 50_000

Numbers = NDArray[np.float64]
Marks = NDArray[np.uint8]


class BlockReader:
    """Turns chunks of rows into numbers. ``positions`` are the columns of analytes in the file, m of them."""

    def __init__(self, positions: list[int], decimal: str, thousands: str | None = None) -> None:
        self.positions, self.decimal, self.thousands = positions, decimal, thousands
        self.width = len(positions)
        self._pick: Any = (
            itemgetter(*positions) if self.width > 1 else itemgetter(slice(positions[0], positions[0] + 1))
        )
        self._known: dict[str, Cell] = {}

    def read(self, chunk: Chunk, watch_underscores: bool) -> tuple[Numbers, Marks, list[tuple[int, int, str]]]:
        """Values (k, m) with NaN, qualifiers (k, m), and the cells that are no plain number as (row, column, text)."""
        if isinstance(chunk, PlainChunk):
            fast = self._read_text(chunk)
            if fast is not None:
                return *fast, []
        return self._read_cells(chunk, watch_underscores)

    def _read_text(self, chunk: PlainChunk) -> tuple[Numbers, Marks] | None:
        """Numbers and ``<`` straight from the text; None where some cell needs a look."""
        separator = chunk.separator
        text = "".join(chunk.texts)
        if "\r" in text:
            text = text.replace("\r\n", "\n").replace("\r", "\n")
        if not text.endswith("\n"):
            text += "\n"
        if text.startswith("\n") or "\n\n" in text or text.isspace():
            return None
        if self.decimal == ",":
            if "." in text or separator == ",":
                return None
            text = text.replace(",", ".")
        below_sign = separator + "<"
        below: NDArray[np.bool_] | None = None
        by_sign = False
        if below_sign in text:
            by_sign = separator + "-" not in text
            if by_sign:
                text = text.replace(below_sign, separator + "-")
            else:
                below = self._places_below(text, separator, len(chunk))
                if below is None:
                    return None
                text = text.replace(below_sign, separator)
        values = self._load(text, separator, len(chunk))
        if values is None and not by_sign:
            for word in _BLANK_WORDS:
                if separator + word + separator in text or separator + word + "\n" in text:
                    text = _filled(text.replace(separator + word + "\n", separator + "\n"), separator, word)
            values = self._load(text, separator, len(chunk))
        if values is None:
            return None
        if by_sign:
            qualifiers = (np.signbit(values) & ~np.isnan(values)).astype(np.uint8)
            np.abs(values, out=values)
        elif below is not None:
            qualifiers = (below & ~np.isnan(values)).astype(np.uint8)
        else:
            qualifiers = np.zeros(values.shape, np.uint8)
        return values, qualifiers

    def _load(self, text: str, separator: str, count: int) -> Numbers | None:
        """The numbers of a text in which only blank cells are no numbers; None if that is not so."""
        if separator + separator in text or separator + "\n" in text:
            text = _filled(text.replace(separator + "\n", separator + "nan\n"), separator, "")
        try:
            values = np.loadtxt(
                text.split("\n")[:-1], delimiter=separator, usecols=self.positions, comments=None, ndmin=2
            )
        except (ValueError, IndexError):
            return None
        return None if values.shape != (count, self.width) or np.isinf(values).any() else values

    def _places_below(self, text: str, separator: str, count: int) -> NDArray[np.bool_] | None:
        """Which analyte cells (k, m) begin with ``<``."""
        lines = text.split("\n")[:-1]
        if len(lines) != count:
            return None
        ends = np.cumsum(np.fromiter(map(len, lines), np.int64, count) + 1)
        found = np.fromiter((match.start() for match in re.finditer(re.escape(separator + "<"), text)), np.int64)
        rows = np.searchsorted(ends, found, side="right")
        starts = found - (ends[rows] - np.fromiter(map(len, lines), np.int64, count)[rows] - 1)
        index = {position: column for column, position in enumerate(self.positions)}
        below = np.zeros((count, self.width), bool)
        for row, offset in zip(rows.tolist(), starts.tolist(), strict=True):
            column = index.get(lines[row].count(separator, 0, offset) + 1)
            if column is not None:
                below[row, column] = True
        return below

    def _read_cells(self, chunk: Chunk, watch_underscores: bool) -> tuple[Numbers, Marks, list[tuple[int, int, str]]]:
        reach = max(self.positions) + 1
        rows = chunk.rows
        if min(map(len, rows)) < reach:
            rows = [row if len(row) >= reach else row + [""] * (reach - len(row)) for row in rows]
        cells: Iterator[str] = chain.from_iterable(map(self._pick, rows))
        if self.decimal == ",":
            cells = map(str.translate, cells, repeat(_COMMA))
        numbers = map(float, cells)
        buffer = array("d")
        refused: list[int] = []
        missing = float("nan")
        while True:
            try:
                buffer.extend(numbers)  # keeps what came before the refused cell; the iterator stands behind it
                break
            except ValueError:
                refused.append(len(buffer))
                buffer.append(missing)
        values = np.frombuffer(buffer, dtype=np.float64).reshape(len(rows), self.width).copy()
        qualifiers = np.zeros(values.shape, np.uint8)
        if np.isinf(values).any():
            refused += np.flatnonzero(np.isinf(values).ravel()).tolist()
        if watch_underscores and "_" in "".join(chain.from_iterable(map(self._pick, rows))):
            flat = list(chain.from_iterable(map(self._pick, rows)))
            refused += [place for place, cell in enumerate(flat) if "_" in cell]
        odd = []
        for place in sorted(set(refused)):
            row, column = divmod(place, self.width)
            text = rows[row][self.positions[column]]
            if text == "":
                continue
            values[row, column] = missing
            odd.append((row, column, text))
        return values, qualifiers, odd

    def cell(self, text: str) -> Cell:
        """``parse_cell`` with a memory: the same few limits and words come back thousands of times."""
        known = self._known.get(text)
        if known is None:
            known = parse_cell(text, self.decimal, self.thousands)
            if "_" in text and known.value == known.value:
                known = Cell(TEXT)
            if len(self._known) < _REMEMBERED:
                self._known[text] = known
        return known


def _filled(text: str, separator: str, word: str) -> str:
    """Write ``nan`` into cells that hold just the word; neighbours share a separator, so twice."""
    before, after = separator + word + separator, separator + "nan" + separator
    return text.replace(before, after).replace(before, after)
