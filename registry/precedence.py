"""What an import would put in the place of what: results that enter a composition before others, and why.

Only a dry run or a preview asks this. It composes the samples that had results before the import and after it, and
compares where each value came from; within the new file it tells which of several columns of one analyte is taken.
"""

from __future__ import annotations

import pickle
import tempfile
from collections import Counter, defaultdict
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from registry.choice import Block, ColumnUse, TracedChoice, trace_choice
from registry.controlling import held_columns
from registry.importing_lines import raw_parts
from registry.intake import ResultTable
from registry.judging import read_conventions
from registry.petrology.analytes import CHOSEN_COLUMNS, QUALIFIER_SIGNS
from registry.petrology.digestion import DIGESTION_WORDS
from registry.refresh import stored_blocks
from registry.store import loading, masters

#: Samples composed at once.
AT_A_TIME = 4096


#: A choice, and the codes of the batches that its blocks' ``newness`` counts.
Traced = tuple[TracedChoice, list[str]]


@dataclass
class Replacement:
    """Values of one chosen column that come from elsewhere after the import, or that stay as they were.

    ``earlier`` and ``later`` say batch and digestion; ``replaced`` is False where the earlier result stays in use
    although the new file brings one too.
    """

    column: str
    earlier: str
    later: str
    replaced: bool
    samples: int = 0
    example: str = ""


@dataclass
class Earlier:
    """Where the values of some samples came from before the import; on disk, since a registry may hold a million."""

    sample_ids: np.ndarray
    _kept: Any = field(default_factory=tempfile.TemporaryFile)

    def keep(self, parts: Iterable[Traced]) -> None:
        """Remember the choices of ``AT_A_TIME`` samples after those of others."""
        for part in parts:
            pickle.dump(part, self._kept, pickle.HIGHEST_PROTOCOL)

    def parts(self) -> Iterator[Traced]:
        """What was kept, in order."""
        self._kept.seek(0)
        for _ in range(0, len(self.sample_ids), AT_A_TIME):
            yield pickle.load(self._kept)

    def __del__(self) -> None:
        self._kept.close()


def look_before(connection: Any, sample_ids: np.ndarray) -> Earlier:
    """Remember where the values of those samples (ids, 0 is none) that have results come from now."""
    known = raw_parts(np.unique(sample_ids[sample_ids > 0]))
    analysed = [loading.samples_with_aliquots(connection, ids) for ids in known]
    earlier = Earlier(np.concatenate([np.zeros(0, dtype=np.int64), *analysed]))
    earlier.keep(_traced(connection, earlier.sample_ids))
    return earlier


def look_after(connection: Any, earlier: Earlier, new_batches: Sequence[str]) -> list[Replacement]:
    """What is replaced and what stays, by column and by the batches and digestions concerned; most samples first."""
    found: dict[tuple[str, str, str, bool], Replacement] = {}
    starts = range(0, len(earlier.sample_ids), AT_A_TIME)
    parts = _traced(connection, earlier.sample_ids)
    for start, before, after in zip(starts, earlier.parts(), parts, strict=True):
        ids = earlier.sample_ids[start : start + AT_A_TIME].tolist()
        code_of = masters.sample_codes(connection, ids)
        codes = [code_of[sample_id] for sample_id in ids]
        offered = _offered(*after, set(new_batches), len(codes))
        _compare(found, before, after, (offered, after[1]), set(new_batches), codes)
    return sorted(found.values(), key=lambda one: (not one.replaced, -one.samples, one.column))


def _traced(connection: Any, ids: np.ndarray) -> Iterator[Traced]:
    held = held_columns(connection, read_conventions(connection))
    codes = loading.batches_by_newness(connection)
    for start in range(0, len(ids), AT_A_TIME):
        part = ids[start : start + AT_A_TIME]
        yield trace_choice(len(part), stored_blocks(connection, part, held)), codes


def _offered(after: TracedChoice, codes: list[str], new: set[str], n: int) -> TracedChoice:
    """What the new batches alone would give."""
    blocks = {id(block): block for block, _ in after.origins if codes[block.newness] in new}
    return trace_choice(n, list(blocks.values()))


def _compare(
    found: dict[tuple[str, str, str, bool], Replacement],
    before: Traced,
    after: Traced,
    offered: Traced,
    new: set[str],
    sample_codes: Sequence[str],
) -> None:
    was, now, offer = before[0].source, after[0].source, offered[0].source
    batch_was, batch_now = _batches(*before), _batches(*after)
    is_new = np.array([code in new for code in batch_now.tolist()], dtype=bool)
    for target in np.flatnonzero((was >= 0).any(axis=1)).tolist():
        there = was[target] >= 0
        gone = there & (now[target] < 0)
        other = there & ~gone & (batch_was[was[target]] != batch_now[now[target]])
        kept = there & ~gone & ~other & (offer[target] >= 0) & ~is_new[now[target]]
        for rows, later, replaced in ((gone, None, True), (other, after, True), (kept, offered, False)):
            for place, number in _groups(rows, was[target], None if later is None else later[0].source[target]):
                first = _origin(*before, target, place)
                second = "nothing" if later is None else _origin(*later, target, place)
                key = (CHOSEN_COLUMNS[target], first, second, replaced)
                one = found.setdefault(key, Replacement(*key))
                if not one.samples:
                    values = [
                        _shown(before[0], target, place),
                        "none" if later is None else _shown(later[0], target, place),
                    ]
                    words = f"{values[0]} -> {values[1]}" if replaced else f"{values[0]} stays, not {values[1]}"
                    one.example = f"{sample_codes[place]}: {words}"
                one.samples += number


def _groups(rows: np.ndarray, first: np.ndarray, second: np.ndarray | None) -> list[tuple[int, int]]:
    """The place of the first sample, and the number of samples, of each pair of origins among ``rows``."""
    places = np.flatnonzero(rows)
    if not len(places):
        return []
    pairs = np.stack([first[places], np.zeros_like(places) if second is None else second[places]], axis=1)
    _, at, counts = np.unique(pairs, axis=0, return_index=True, return_counts=True)
    return list(zip(places[at].tolist(), counts.tolist(), strict=True))


def _batches(choice: TracedChoice, codes: list[str]) -> np.ndarray:
    """The batch of each origin; one more at the end, for position -1 (no origin)."""
    return np.array([*(codes[block.newness] for block, _ in choice.origins), ""], dtype=object)


def _origin(choice: TracedChoice, codes: list[str], target: int, sample: int) -> str:
    words = DIGESTION_WORDS[choice.digestions[target, sample]]
    return f"{codes[choice.origins[choice.source[target, sample]][0].newness]} ({words})"


def _shown(choice: TracedChoice, target: int, sample: int) -> str:
    sign = QUALIFIER_SIGNS[choice.qualifiers[target, sample]]
    return f"{sign}{choice.values[target, sample]:.5g}"


@dataclass
class Alternative:
    """Several columns of one file for one chosen column: how often each is the one that is taken."""

    column: str
    taken: dict[str, int]


def alternatives_within(table: ResultTable) -> list[Alternative]:
    """The chosen columns for which a file offers several, and how many lines take each (0: never needed)."""
    uses = [ColumnUse(column.analyte, column.unit, column.digestion) for column in table.columns]
    offers: dict[int, set[int]] = defaultdict(set)
    for column, use in enumerate(uses):
        one = Block([use], np.zeros(1, dtype=np.int64), np.ones((1, 1)), np.zeros((1, 1), dtype=np.uint8))
        for target in np.flatnonzero(trace_choice(1, [one]).source[:, 0] >= 0).tolist():
            offers[target].add(column)
    several = {target: columns for target, columns in sorted(offers.items()) if len(columns) > 1}
    taken: dict[int, Counter[int]] = {target: Counter() for target in several}
    for start in range(0, len(table), AT_A_TIME) if several else ():
        values, qualifiers = table.values[start : start + AT_A_TIME], table.qualifiers[start : start + AT_A_TIME]
        choice = trace_choice(len(values), [Block(uses, np.arange(len(values)), values, qualifiers)])
        columns_of = np.array([column for _, column in choice.origins])
        for target in several:
            source = choice.source[target]
            taken[target].update(columns_of[source[source >= 0]].tolist())
    return [
        Alternative(
            CHOSEN_COLUMNS[target], {table.columns[column].header: taken[target][column] for column in sorted(columns)}
        )
        for target, columns in several.items()
    ]
