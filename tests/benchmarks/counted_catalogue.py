"""Counts the elementwise steps of the catalogue: computes one chunk on arrays that report what is done to them.

Run as a process of its own, since it lets numpy's makers of arrays give the reporting kind. Counted are the ufuncs that
give one value a sample, the others of numpy's functions that do (``where``, ``isin``, ...), and look-ups of
numbers and words in a table. Not counted are comparisons of words, copies, and what numpy does inside a function of its
own.
"""

from __future__ import annotations

import json
import sys
from collections import Counter
from typing import Any

import numpy as np

ROWS = 16_384
STEPS: Counter[str] = Counter()
MAKERS = ("asarray", "array", "empty", "zeros", "ones", "full", "broadcast_to", "atleast_1d", "ascontiguousarray")


class Reporting(np.ndarray):
    """An array that counts each elementwise step that gives one value a sample."""

    def __array_ufunc__(self, ufunc: Any, method: str, *inputs: Any, **kwargs: Any) -> Any:
        if "out" in kwargs:
            kwargs["out"] = tuple(plain(part) for part in kwargs["out"])
        result = getattr(ufunc, method)(*plain(inputs), **{name: plain(value) for name, value in kwargs.items()})
        kinds = "".join(np.asarray(part).dtype.kind for part in inputs) if method == "__call__" else "b"
        if np.shape(result) == (ROWS,) and "O" not in kinds:
            times = 1 if method == "__call__" else max(len(inputs[0]) - 1, 1)
            STEPS[f"{ufunc.__name__} {kinds}"] += times
        return reporting(result)

    def __array_function__(self, function: Any, types: Any, inputs: Any, kwargs: Any) -> Any:
        result = function(*plain(inputs), **{name: plain(value) for name, value in kwargs.items()})
        makes = function.__name__ in (*MAKERS, "copyto", "broadcast_arrays", "full_like", "zeros_like")
        if np.shape(result) == (ROWS,) and not makes:
            STEPS[function.__name__] += 1
        return reporting(result)

    def __getitem__(self, key: Any) -> Any:
        result = super().__getitem__(key)
        if isinstance(key, np.ndarray) and np.shape(result) == (ROWS,):
            STEPS["word" if result.dtype == np.dtype(object) else "look-up"] += 1
        return result


def plain(part: Any) -> Any:
    if isinstance(part, np.ndarray):
        return part.view(np.ndarray)
    return type(part)(plain(each) for each in part) if isinstance(part, list | tuple) else part


def reporting(part: Any) -> Any:
    if isinstance(part, np.ndarray):
        return part.view(Reporting)
    return type(part)(reporting(each) for each in part) if isinstance(part, list | tuple) else part


def _reporting_maker(make: Any) -> Any:
    def made(*inputs: Any, **kwargs: Any) -> Any:
        return reporting(make(*inputs, **kwargs))

    return made


def main() -> None:
    from registry.petrology.conventions import Conventions
    from registry.pipeline import compute
    from tests.benchmarks.catalogue_chunk import invented_chunk

    chunk = invented_chunk(ROWS)
    for maker in MAKERS:
        setattr(np, maker, _reporting_maker(getattr(np, maker)))
    chunk.values, chunk.qualifiers, chunk.digestions = map(
        reporting, (chunk.values, chunk.qualifiers, chunk.digestions)
    )
    chunk.context = {name: reporting(column) for name, column in chunk.context.items()}
    compute(chunk, [], Conventions())
    json.dump(STEPS, sys.stdout)


if __name__ == "__main__":
    main()
