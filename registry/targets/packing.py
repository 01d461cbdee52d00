"""Reasons of many samples as JSON texts: whole arrays are written once and cut apart, never row by row."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import orjson
from numpy.typing import NDArray

from registry.targets.evaluation import Outcome
from registry.targets.intervals import Floats, Words

SIGNIFICANT_DIGITS = 6


def round_significant(values: Floats, digits: int = SIGNIFICANT_DIGITS) -> Floats:
    """Values rounded to so many significant digits; NaN stays, infinite becomes NaN."""
    with np.errstate(divide="ignore", invalid="ignore"):
        exponent = np.floor(np.log10(np.abs(values)))
        shift = np.where(np.isfinite(exponent), digits - 1 - exponent, 0.0)
        up, down = np.power(10.0, np.maximum(shift, 0.0)), np.power(10.0, np.maximum(-shift, 0.0))
        rounded = np.round(values * up / down) / up * down
    return np.where(np.isinf(rounded), np.nan, rounded)


def _rows(matrix: Floats) -> list[str]:
    """One JSON list a row; NaN is null."""
    if matrix.shape[0] == 0:
        return []
    text = orjson.dumps(np.ascontiguousarray(matrix), option=orjson.OPT_SERIALIZE_NUMPY).decode()
    return text[2:-2].split("],[")


def _text_objects(texts: Sequence[Words], cause: Words) -> list[str]:
    """The ``texts`` object of each sample; each distinct combination is written once."""
    columns = [(f'"{position}":', words) for position, words in enumerate(texts)] + [('"cause":', cause)]
    n = cause.codes.shape[0]
    key, size = np.zeros(n, dtype=np.int64), 1
    used = []
    for name, words in columns:
        if not words.codes.any():
            continue
        used.append((name, words))
        if size > 2**40 or len(words.labels) > 2**20:
            _, key = np.unique(key, return_inverse=True)
            size = int(key.max(initial=0)) + 1
        key = key * len(words.labels) + words.codes
        size *= len(words.labels)
    if not used:
        return ["{}"] * n
    _, first, inverse = np.unique(key, return_index=True, return_inverse=True)
    fragments = []
    for name, words in used:
        pieces = ["", *(name + orjson.dumps(label).decode() for label in words.labels[1:])]
        pieces = [piece if label else "" for piece, label in zip(pieces, words.labels, strict=True)]
        fragments.append([pieces[code] for code in words.codes[first].tolist()])
    objects = ["{" + ",".join(filter(None, row)) + "}" for row in zip(*fragments, strict=True)]
    return [objects[position] for position in inverse.tolist()]


def pack_reasons(letters: NDArray[np.uint8], outcomes: Sequence[Outcome], cause: Words) -> list[str]:
    """``{"outcomes":...,"values":[...],"thresholds":[...],"texts":{...}}`` for each sample, in the order of the tests.

    ``letters`` (n, tests). Numbers have six significant digits; null, never NaN. ``texts`` is keyed by position and
    holds intervals, words and what is missing; ``cause`` says why a sample cannot be judged.
    """
    n, width = letters.shape
    spelled = np.ascontiguousarray(letters).tobytes().decode("ascii")
    values = _rows(round_significant(np.stack([outcome.values for outcome in outcomes], axis=1)))
    limits = np.stack([outcome.limits for outcome in outcomes], axis=1)
    if n and np.array_equal(limits, np.broadcast_to(limits[:1], limits.shape), equal_nan=True):
        thresholds = _rows(round_significant(limits[:1])) * n
    else:
        thresholds = _rows(round_significant(limits))
    texts = _text_objects([outcome.texts for outcome in outcomes], cause)
    starts = range(0, n * width, width)
    return [
        f'{{"outcomes":"{spelled[start : start + width]}","values":[{value}],"thresholds":[{limit}],"texts":{text}}}'
        for start, value, limit, text in zip(starts, values, thresholds, texts, strict=True)
    ]
