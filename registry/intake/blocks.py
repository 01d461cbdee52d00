"""Many cells to numbers at once: the C conversion runs over whole chunks, only the cells it refuses are looked at."""

from __future__ import annotations

from array import array
from collections.abc import Iterator
from itertools import chain, repeat
from operator import itemgetter

import numpy as np
from numpy.typing import NDArray

from registry.intake.cells import TEXT, Cell, parse_cell

#: In a file of decimal commas a point groups thousands: it is made unreadable here, so that the cell is looked at.
_COMMA = str.maketrans({",": ".", ".": "\x00"})
_REMEMBERED = 50_000


class BlockReader:
    """Turns chunks of rows into numbers. ``positions`` are the columns of analytes in the file, m of them."""

    def __init__(self, positions: list[int], decimal: str) -> None:
        self.positions, self.decimal = positions, decimal
        self.width = len(positions)
        if self.width == 1:
            only = positions[0]
            self._pick = lambda row: (row[only],)
        else:
            self._pick = itemgetter(*positions)  # type: ignore[assignment]
        self._known: dict[str, Cell] = {}

    def read(
        self, rows: list[list[str]], marks_below: bool, watch_underscores: bool
    ) -> tuple[NDArray[np.float64], NDArray[np.uint8], list[tuple[int, int, str]]]:
        """Values (k, m) with NaN, qualifiers (k, m), and the cells that are no plain number as (row, column, text).

        ``marks_below``: the source wrote ``<`` as ``-``. Every row must reach past the last position.
        """
        cells: Iterator[str] = chain.from_iterable(map(self._pick, rows))
        if self.decimal == ",":
            cells = map(str.translate, cells, repeat(_COMMA))
        numbers = map(float, cells)
        buffer = array("d")
        refused: list[int] = []
        missing = float("nan")
        while True:
            try:
                buffer.extend(numbers)
                break
            except ValueError:
                refused.append(len(buffer))
                buffer.append(missing)
        values = np.frombuffer(buffer, dtype=np.float64).reshape(len(rows), self.width)
        if marks_below:
            qualifiers = np.signbit(values).astype(np.uint8)
            qualifiers[np.isnan(values)] = 0
            values = np.abs(values)
        else:
            qualifiers = np.zeros(values.shape, np.uint8)
            values = values.copy()
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
            qualifiers[row, column] = 0
            odd.append((row, column, "<" + text[1:] if marks_below and text[0] == "-" else text))
        return values, qualifiers, odd

    def cell(self, text: str) -> Cell:
        """``parse_cell`` with a memory: the same few limits and words come back thousands of times."""
        known = self._known.get(text)
        if known is None:
            known = parse_cell(text, self.decimal)
            if "_" in text and known.state != TEXT and known.value == known.value:
                known = Cell(TEXT)
            if len(self._known) < _REMEMBERED:
                self._known[text] = known
        return known
