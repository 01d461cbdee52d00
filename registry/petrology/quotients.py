"""Division that leaves a hole where there is nothing to divide by, and labels taken by code."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]


def floats(*columns: ArrayLike) -> list[Floats]:
    """The columns as float arrays of one common shape; ValueError where the shapes do not go together."""
    arrays = [np.asarray(column, dtype=np.float64) for column in columns]
    try:
        return list(np.broadcast_arrays(*arrays))
    except ValueError:
        shapes = ", ".join(str(array.shape) for array in arrays)
        raise ValueError(f"columns of shapes {shapes} do not go together; give one value a sample in each") from None


def quotient(numerator: ArrayLike, denominator: ArrayLike) -> Floats:
    """numerator / denominator, shape as broadcast; NaN where the denominator is not above zero, never infinite."""
    above, below = floats(numerator, denominator)
    return above / np.where(below > 0.0, below, np.nan)


def log10_positive(values: ArrayLike) -> Floats:
    """Decimal logarithm; NaN where the value is not above zero."""
    (column,) = floats(values)
    return np.log10(np.where(column > 0.0, column, np.nan))


def is_absent(words: Any) -> NDArray[np.bool_]:
    """True where an object array holds None, shape kept: told by address, which is many times faster than comparing."""
    column = np.ascontiguousarray(words, dtype=object)
    return np.ndarray(column.shape, np.intp, buffer=column) == id(None)


def labels(codes: ArrayLike, names: Sequence[str]) -> Any:
    """Object array of ``names[code]``; None where the code is -1."""
    table = np.array([*names, None], dtype=object)
    return table[np.asarray(codes, dtype=np.intp)]
