"""Columns of a large file while it is read: numbers in a scratch file, codes packed small; used like array and list.

A file ten times larger then takes ten times the disk, not ten times the memory. The scratch file has no name: it is
gone with the object, whatever happens.
"""

from __future__ import annotations

import json
import tempfile
import zlib
from collections.abc import Iterable, Iterator, Sequence
from itertools import compress, islice
from typing import Any, overload

import numpy as np
from numpy.typing import NDArray

#: Rows written together; each column of a block lies in one piece, so that columns are read as fast as rows.
BLOCK_ROWS = 16_384
_HASH_BITS = 0xFFFFFFFF


class Scratch:
    """A nameless file that is closed, and so gone, with its last user."""

    def __init__(self) -> None:
        self._file: Any = tempfile.TemporaryFile(buffering=0)  # noqa: SIM115 - lives as long as its arrays

    def __del__(self) -> None:
        self._file.close()

    def append(self, data: bytes) -> tuple[int, int]:
        """Write bytes at the end; where they begin and how many they are."""
        begin = self._file.seek(0, 2)
        view = memoryview(data)
        while view:
            view = view[self._file.write(view) :]
        return begin, len(data)

    def read(self, offset: int, size: int) -> bytes:
        """``size`` bytes from ``offset`` on."""
        self._file.seek(offset)
        pieces = []
        while size:
            pieces.append(self._file.read(size))
            if not pieces[-1]:
                raise OSError("the scratch file of a large table is shorter than what was written to it")
            size -= len(pieces[-1])
        return pieces[0] if len(pieces) == 1 else b"".join(pieces)


class SpooledArray:
    """An array (n, m) in a scratch file, filled by ``append``.

    Read as an array: ``[a:b]`` and ``[rows]`` give rows, ``[:, j]`` a column, each as an ordinary array; ``[:, list]``
    gives a SpooledArray of these columns on the same file.
    """

    ndim = 2

    def __init__(self, width: int, dtype: Any) -> None:
        self.dtype = np.dtype(dtype)
        self._scratch = Scratch()
        self._width = width
        self._columns = list(range(width))
        self._filling: NDArray[Any] = np.empty((width, BLOCK_ROWS), self.dtype)
        self._filled = self._written = 0

    @property
    def shape(self) -> tuple[int, int]:
        return self._written + self._filled, len(self._columns)

    def __len__(self) -> int:
        return self.shape[0]

    @property
    def size(self) -> int:
        return self.shape[0] * self.shape[1]

    def append(self, rows: NDArray[Any]) -> None:
        """Add rows (k, m)."""
        start = 0
        while start < len(rows):
            taken = min(len(rows) - start, BLOCK_ROWS - self._filled)
            self._filling[:, self._filled : self._filled + taken] = rows[start : start + taken].T
            self._filled += taken
            start += taken
            if self._filled == BLOCK_ROWS:
                self._scratch.append(self._filling.tobytes())
                self._written, self._filled = self._written + BLOCK_ROWS, 0

    def __getitem__(self, key: Any) -> Any:
        rows, columns = key if isinstance(key, tuple) else (key, None)
        if columns is None:
            return self._rows(rows)
        if not isinstance(rows, slice) or rows != slice(None):
            raise IndexError("a spooled array is read by rows, or by whole columns")
        if isinstance(columns, int | np.integer):
            return np.concatenate([part for _, part in self.column_parts(int(columns))])
        part = SpooledArray.__new__(SpooledArray)
        part.__dict__.update(self.__dict__, _columns=[self._columns[column] for column in columns])
        return part

    def column_parts(self, column: int) -> Iterator[tuple[int, NDArray[Any]]]:
        """(first row, values) of a column, some thousands at a time."""
        place = self._columns[column]
        for start in range(0, self._written, BLOCK_ROWS):
            yield start, self._read(start, place, 1)[0]
        if self._filled or not self._written:
            yield self._written, self._filling[place, : self._filled]

    def _rows(self, rows: Any) -> NDArray[Any]:
        if isinstance(rows, slice):
            start, stop, step = rows.indices(len(self))
            rows = np.arange(start, stop, step)
        rows = np.asarray(rows)
        if rows.dtype == bool:
            rows = np.flatnonzero(rows)
        found = np.empty((len(rows), len(self._columns)), self.dtype)
        block_of = rows // BLOCK_ROWS
        for block in np.unique(block_of).tolist():
            here = np.flatnonzero(block_of == block)
            start = block * BLOCK_ROWS
            whole = self._filling if start >= self._written else self._read(start, 0, self._width)
            found[here] = whole[np.ix_(self._columns, rows[here] - start)].T
        return found

    def _read(self, start: int, place: int, count: int) -> NDArray[Any]:
        """Columns from ``place`` on of the block that begins at row ``start``."""
        column_bytes = BLOCK_ROWS * self.dtype.itemsize
        offset = start * self._width * self.dtype.itemsize + place * column_bytes
        read = self._scratch.read(offset, count * column_bytes)
        return np.frombuffer(read, self.dtype).reshape(count, BLOCK_ROWS)


class SpooledNumbers:
    """One column of whole numbers in a scratch file: ``[row]`` is a number, ``[a:b]`` and ``[rows]`` arrays."""

    dtype = np.dtype(np.int64)
    ndim = 1

    def __init__(self) -> None:
        self._kept = SpooledArray(1, np.int64)
        self._block: tuple[int, NDArray[np.int64]] = (-1, np.empty(0, np.int64))

    def append(self, numbers: NDArray[np.int64]) -> None:
        self._kept.append(numbers[:, None])

    def __len__(self) -> int:
        return len(self._kept)

    def __getitem__(self, key: Any) -> Any:
        if not isinstance(key, int | np.integer):
            return self._kept[key][:, 0]
        place = range(len(self))[key]
        start = place // BLOCK_ROWS * BLOCK_ROWS
        if self._block[0] != start or place - start >= len(self._block[1]):
            self._block = start, self._kept[start : start + BLOCK_ROWS][:, 0]
        return self._block[1][place - start]

    def tolist(self) -> list[int]:
        return self[:].tolist()


def row_parts(values: Any) -> Iterator[tuple[int, NDArray[Any]]]:
    """(first row, rows) of an array, in parts where it is spooled."""
    if not isinstance(values, SpooledArray):
        yield 0, values
        return
    for start in range(0, max(len(values), 1), BLOCK_ROWS):
        yield start, values[start : start + BLOCK_ROWS]


def column_parts(values: Any, column: int) -> Iterator[tuple[int, NDArray[Any]]]:
    """(first row, values of one column) of an array, in parts where it is spooled."""
    if isinstance(values, SpooledArray):
        yield from values.column_parts(column)
    else:
        yield 0, values[:, column]


def kept_rows(values: Any, keep: NDArray[np.bool_]) -> Any:
    """The rows that are kept (n,) of an array, spooled again where it is spooled."""
    if not isinstance(values, SpooledArray):
        return values[keep]
    kept = SpooledArray(values.shape[1], values.dtype)
    for start, rows in row_parts(values):
        kept.append(rows[keep[start : start + len(rows)]])
    return kept


def kept_texts(texts: Sequence[str], keep: NDArray[np.bool_]) -> Sequence[str]:
    """The texts that are kept (n,), packed again where they are packed."""
    chosen = compress(texts, keep)
    return PackedTexts(chosen) if isinstance(texts, PackedTexts) else list(chosen)


class PackedTexts(Sequence[str]):
    """Many short texts, compressed a block at a time."""

    def __init__(self, texts: Iterable[str] = ()) -> None:
        self._blocks: list[bytes] = []
        self._filling: list[str] = []
        self._last: tuple[int, list[str]] = (-1, [])
        self.extend(texts)

    def extend(self, texts: Iterable[str]) -> None:
        coming = iter(texts)
        while taken := list(islice(coming, BLOCK_ROWS - len(self._filling))):
            self._filling += taken
            if len(self._filling) == BLOCK_ROWS:
                self._blocks.append(zlib.compress(json.dumps(self._filling).encode("ascii"), 1))
                self._filling = []

    def parts(self) -> Iterator[list[str]]:
        """All texts, some thousands at a time."""
        for number in range(len(self._blocks)):
            yield list(self._block(number))
        if self._filling:
            yield list(self._filling)

    def _block(self, number: int) -> list[str]:
        if number == len(self._blocks):
            return self._filling
        if self._last[0] != number:
            self._last = number, json.loads(zlib.decompress(self._blocks[number]))
        return self._last[1]

    def __len__(self) -> int:
        return len(self._blocks) * BLOCK_ROWS + len(self._filling)

    def __iter__(self) -> Iterator[str]:
        for part in self.parts():
            yield from part

    @overload
    def __getitem__(self, key: int) -> str: ...
    @overload
    def __getitem__(self, key: slice) -> list[str]: ...
    def __getitem__(self, key: int | slice) -> str | list[str]:
        if isinstance(key, slice):
            return [self[place] for place in range(*key.indices(len(self)))]
        place = key + len(self) if key < 0 else key
        if not 0 <= place < len(self):
            raise IndexError(f"there is no text {key} among {len(self)}")
        return self._block(place // BLOCK_ROWS)[place % BLOCK_ROWS]


def parts_of(texts: Sequence[str]) -> Iterator[Sequence[str]]:
    """The texts in parts: a list is one part."""
    if isinstance(texts, PackedTexts):
        yield from texts.parts()
    else:
        yield texts


def repeated(texts: Sequence[str]) -> dict[str, tuple[int, int]]:
    """Texts that stand more than once, in the order of their first place: (first place, times).

    Only 4 bytes a text are held: texts of equal hash are looked at in a second pass.
    """
    hashes = np.empty(len(texts), np.uint32)
    start = 0
    for part in parts_of(texts):
        whole = np.fromiter(map(hash, part), np.int64, len(part))
        hashes[start : start + len(part)] = whole & _HASH_BITS
        start += len(part)
    hashes.sort()
    doubled = set(hashes[1:][hashes[1:] == hashes[:-1]].tolist())
    del hashes
    if not doubled:
        return {}
    found: dict[str, tuple[int, int]] = {}
    for place, text in enumerate(texts):
        if hash(text) & _HASH_BITS in doubled:
            first, times = found.get(text, (place, 0))
            found[text] = (first, times + 1)
    return {text: seen for text, seen in found.items() if seen[1] > 1}
