"""The composition of a sample: one value a column, chosen from all its active results by a stated precedence.

Precedence: the first line of a certificate before its repeats; the rank of the digestion; a digestion that carries the
analyte wholly before one that carries it at least; an analyte reported as such before one converted; the newest batch.
A value that is only known to lie above a limit gives way to any other. What a digestion does not carry is refused.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from registry.petrology.analytes import (
    ANALYTES,
    CHOSEN_COLUMNS,
    CHOSEN_INDEX,
    OXIDE_BESIDE_ELEMENT,
    QUALIFIER_ABOVE,
    WT_PERCENT_PER_UNIT,
)
from registry.petrology.constants import oxide_from_element
from registry.petrology.digestion import CARRIES, DIGESTION_CODE, DIGESTION_RANKS, REFUSED, settle_unknown

_ELEMENT_OF_OXIDE = {oxide: symbol for symbol, oxide in OXIDE_BESIDE_ELEMENT.items()}


@dataclass(frozen=True)
class ColumnUse:
    """What a batch column says: analyte symbol, unit (canonical words) and digestion."""

    analyte: str
    unit: str
    digestion: str


@dataclass
class Block:
    """The results of one batch (one line a sample): ``values`` (n, m) in the columns' units, NaN where none.

    ``sample`` (n,) are positions among the samples to be composed, each at most once; ``newness`` ranks batches.
    """

    columns: Sequence[ColumnUse]
    sample: np.ndarray
    values: np.ndarray
    qualifiers: np.ndarray
    newness: int = 0
    repeat: int = 0


@dataclass(frozen=True)
class _Candidate:
    target: int
    priority: tuple[float, ...]
    factor: float
    digestion: int
    refused: bool
    block: Block
    column: int


def choose(n: int, blocks: Sequence[Block]) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Values float64, qualifier and digestion codes uint8, each (81, n), for n samples.

    Where every candidate was refused the value stays NaN and the digestion is kept, which tells why.
    """
    chosen = trace_choice(n, blocks)
    return chosen.values, chosen.qualifiers, chosen.digestions


@dataclass(frozen=True)
class TracedChoice:
    """A choice and where it came from: ``source`` int32 (81, n), a position in ``origins``, -1 where no value is.

    ``origins``: block and column position of each candidate; ``factors``: from the block's unit to the column's.
    """

    values: np.ndarray
    qualifiers: np.ndarray
    digestions: np.ndarray
    source: np.ndarray
    origins: list[tuple[Block, int]]
    factors: list[float]


def trace_choice(n: int, blocks: Sequence[Block]) -> TracedChoice:
    """What ``choose`` chooses, and from which block and column each value came."""
    shape = (len(CHOSEN_COLUMNS), n)
    values = np.full(shape, np.nan)
    qualifiers = np.zeros(shape, dtype=np.uint8)
    digestions = np.zeros(shape, dtype=np.uint8)
    source = np.full(shape, -1, dtype=np.int32)
    candidates = [candidate for block in blocks for candidate in _candidates(block)]
    candidates.sort(key=lambda candidate: candidate.priority)
    taken = [(number, c) for number, c in enumerate(candidates) if not c.refused]
    for only_above in (False, True):
        for number, candidate in taken:
            where = _take(candidate, only_above, values, qualifiers, digestions)
            source[candidate.target, where] = number
    for candidate in candidates:
        if candidate.refused:
            _mark_refused(candidate, values, digestions)
    origins, factors = [(c.block, c.column) for c in candidates], [c.factor for c in candidates]
    return TracedChoice(values, qualifiers, digestions, source, origins, factors)


def _candidates(block: Block) -> list[_Candidate]:
    reports_silica = any(column.analyte == "SiO2" for column in block.columns)
    found = []
    for position, column in enumerate(block.columns):
        analyte = ANALYTES.get(column.analyte)
        if analyte is None or analyte.column is None:
            continue
        factor = WT_PERCENT_PER_UNIT[column.unit] / WT_PERCENT_PER_UNIT[analyte.unit] * analyte.factor
        uses = [(analyte.column, factor, analyte.factor != 1.0)]
        element = _ELEMENT_OF_OXIDE.get(column.analyte)
        if element is not None:
            as_ppm = WT_PERCENT_PER_UNIT[column.unit] / WT_PERCENT_PER_UNIT["ppm"]
            uses.append((f"{element.lower()}_ppm", as_ppm / oxide_from_element(column.analyte), True))
        for name, scale, converted in uses:
            target = CHOSEN_INDEX[name]
            digestion = int(settle_unknown(DIGESTION_CODE[column.digestion], reports_silica))
            carriage = int(CARRIES[digestion, target])
            priority = (
                block.repeat,
                float(DIGESTION_RANKS[digestion]),
                -carriage,
                float(converted),
                -block.newness,
                position,
            )
            found.append(_Candidate(target, priority, scale, digestion, carriage == REFUSED, block, position))
    return found


def _take(
    candidate: _Candidate, only_above: bool, values: np.ndarray, qualifiers: np.ndarray, digestions: np.ndarray
) -> np.ndarray:
    """Fill what is still open from one candidate; the positions of the samples that were filled."""
    block, target = candidate.block, candidate.target
    column, signs = block.values[:, candidate.column], block.qualifiers[:, candidate.column]
    usable = np.isnan(values[target, block.sample]) & ~np.isnan(column) & ((signs == QUALIFIER_ABOVE) == only_above)
    where = block.sample[usable]
    if not len(where):
        return where
    values[target, where] = column[usable] * candidate.factor
    qualifiers[target, where] = signs[usable]
    digestions[target, where] = candidate.digestion
    return where


def _mark_refused(candidate: _Candidate, values: np.ndarray, digestions: np.ndarray) -> None:
    block, target = candidate.block, candidate.target
    refused = np.isnan(values[target, block.sample]) & ~np.isnan(block.values[:, candidate.column])
    refused &= digestions[target, block.sample] == 0
    digestions[target, block.sample[refused]] = candidate.digestion
