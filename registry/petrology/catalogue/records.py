"""The records of the catalogue: one per published method, with the quantities it gives.

The catalogue is the single list from which the derived table's columns, the views, ``column_guide``, the methods
page, the command ``plutonbook methods`` and the README table are made. A topic module of this package holds the
records of one petrology module in ``METHODS`` and the remarks on them in ``WARNINGS``.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

STATUSES = ("published", "from memory", "provisional", "common practice")


@dataclass(frozen=True)
class Range:
    """Where a model was calibrated: ``low <= column <= high`` (None: open), in the column's unit."""

    column: str
    low: float | None = None
    high: float | None = None


@dataclass(frozen=True)
class Quantity:
    """One derived column. ``unit`` is ``text`` for words and ``1`` for pure numbers, never empty."""

    name: str
    sheet: str
    label: str
    unit: str
    meaning: str
    low: float | None = None
    high: float | None = None


@dataclass(frozen=True)
class Cause:
    """Why an output is NULL: where ``mask(*inputs)`` is true and the value is missing. First match wins."""

    code: str
    text: str
    mask: Callable[..., Any]
    inputs: tuple[str, ...]


@dataclass(frozen=True)
class Method:
    """One published model.

    ``function`` takes the columns named in ``inputs`` as keyword-free positional arrays, shape (n,), and returns an
    array when there is one output, else a mapping by output name. Text outputs are object arrays with None for
    missing. ``function`` None: the column stands NULL with the cause ``not_yet_computed``.
    ``optional`` names those inputs whose absence does not make the outputs missing.
    ``source`` is a key of ``registry.petrology.references``; ``equation`` says which equation, table or page.
    ``calibration`` ranges give the warning ``<key>_outside_range`` on the first output, by themselves.
    """

    key: str
    label: str
    function: Callable[..., Any] | None
    inputs: tuple[str, ...]
    outputs: tuple[Quantity, ...]
    source: str
    equation: str
    status: str
    optional: tuple[str, ...] = ()
    calibration: tuple[Range, ...] = ()
    standard_error: str = "not stated"
    note: str = ""
    causes: tuple[Cause, ...] = ()


@dataclass(frozen=True)
class Warning:
    """A remark on a value that stands: true where ``mask(*inputs)``. ``text`` may hold ``{value}`` and stored columns.

    The value and each column in braces are put in where the remark is read.
    """

    code: str
    column: str
    value_column: str | None
    text: str
    mask: Callable[..., Any]
    inputs: tuple[str, ...]


@dataclass(frozen=True)
class Convention:
    """A choice that changes numbers; stored in the registry's settings and stamped on each derived row."""

    name: str
    default: float | str | bool
    unit: str
    meaning: str
    choices: tuple[str, ...] = field(default=())
    low: float | None = None
    high: float | None = None


Columns = Mapping[str, Any]
