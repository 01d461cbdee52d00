"""What the body of a wide results table holds, and the two places where its rows are kept while it is read."""

from __future__ import annotations

from array import array
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from registry.intake.spooled import PackedTexts, SpooledArray, SpooledNumbers


@dataclass
class Texts:
    """Texts found in one analyte column: the line of each and, by number, which of the distinct texts it is."""

    lines: array[int] = field(default_factory=lambda: array("q"))
    words: dict[str, int] = field(default_factory=dict)
    which: array[int] = field(default_factory=lambda: array("q"))

    def add(self, line: int, text: str) -> None:
        self.lines.append(line)
        self.which.append(self.words.setdefault(text, len(self.words)))

    def pairs(self) -> list[tuple[int, str]]:
        """(line, text) of every one."""
        texts = list(self.words)
        return [(line, texts[number]) for line, number in zip(self.lines, self.which, strict=True)]


@dataclass
class WideBody:
    """What the rows held: arrays of the kept rows, codes as written, and the texts set aside.

    Of a file on disk they are SpooledArrays, SpooledNumbers (``lines``) and PackedTexts (``codes``).
    """

    codes: Sequence[str]
    lines: Any
    values: Any
    qualifiers: Any
    control: list[str | None]
    texts: dict[int, Texts]
    passed_over: list[str]


class RowsInMemory:
    """Rows of a small file, in arrays."""

    def __init__(self, width: int, row_bound: int) -> None:
        self.values = np.empty((row_bound, width))
        self.qualifiers = np.empty((row_bound, width), np.uint8)
        self.lines = np.empty(row_bound, np.int64)
        self.codes: list[str] = []

    def add(
        self, values: NDArray[np.float64], qualifiers: NDArray[np.uint8], lines: NDArray[np.int64], codes: list[str]
    ) -> None:
        start, stop = len(self.codes), len(self.codes) + len(codes)
        self.values[start:stop], self.qualifiers[start:stop], self.lines[start:stop] = values, qualifiers, lines
        self.codes += codes

    def body(self, control: list[str | None], texts: dict[int, Texts], passed_over: list[str]) -> WideBody:
        count = len(self.codes)
        kept = (self.lines[:count], self.values[:count], self.qualifiers[:count])
        return WideBody(self.codes, *kept, control, texts, passed_over)


class SpooledRows:
    """Rows of a large file, on disk."""

    def __init__(self, width: int) -> None:
        self.values, self.qualifiers = SpooledArray(width, np.float64), SpooledArray(width, np.uint8)
        self.lines = SpooledNumbers()
        self.codes = PackedTexts()

    def add(
        self, values: NDArray[np.float64], qualifiers: NDArray[np.uint8], lines: NDArray[np.int64], codes: list[str]
    ) -> None:
        self.values.append(values)
        self.qualifiers.append(qualifiers)
        self.lines.append(lines)
        self.codes.extend(codes)

    def body(self, control: list[str | None], texts: dict[int, Texts], passed_over: list[str]) -> WideBody:
        return WideBody(self.codes, self.lines, self.values, self.qualifiers, control, texts, passed_over)
