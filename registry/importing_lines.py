"""Whose the lines of a table of results are: the sample of each, how often it stood before, which are controls.

Everything here is held in arrays of numbers, so that a table of a million lines takes some megabytes.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from registry.controlling import kinds_of_new, read_patterns
from registry.importing_controls import call_known_controls, link_duplicates, spoken_of
from registry.intake import ResultTable
from registry.intake.spooled import parts_of
from registry.quality.recognising import Patterns, Spoken
from registry.store import masters
from registry.store.sheets import CONTROL_KINDS

#: Ids handed to the store in one query.
IDS_AT_A_TIME = 65_536
_KINDS = np.array(["original", "repeat", "control"], dtype=object)


@dataclass
class Lines:
    """The lines of a table, (n,): sample ids int64 (0 where the code is not registered) and, later, the rest."""

    sample_ids: np.ndarray
    #: what the certificate says of samples that it calls controls, by code
    said: dict[str, Spoken]
    #: samples that were added, and how many of them as controls
    added: int = 0
    new_controls: int = 0
    repeat_no: np.ndarray = field(default_factory=lambda: np.zeros(0, dtype=np.int32))
    is_control: np.ndarray = field(default_factory=lambda: np.zeros(0, dtype=bool))
    _new_said: set[str] = field(default_factory=set)
    _order: np.ndarray = field(default_factory=lambda: np.zeros(0, dtype=np.int64))

    @property
    def any_missing(self) -> bool:
        """Whether there are codes that the registry lacks."""
        return not self.sample_ids.all()

    @property
    def repeats(self) -> int:
        return int((self.repeat_no > 0).sum())

    @property
    def controlled(self) -> bool:
        """Whether there is something to judge the batch by."""
        return bool(self.is_control.any() or (self.repeat_no > 0).any())

    def settle_controls(self, connection: Any) -> None:
        """Settle which lines are controls and repeats, once every sample is registered."""
        known = masters.sample_ids(connection, self.said)
        link_duplicates(connection, self._new_said, self.said, known)
        call_known_controls(connection, self.said, known, self._new_said)
        controls = masters.samples_of_kinds(connection, CONTROL_KINDS)
        # a rock that the certificate calls a blank stays a rock; its second line is a repeat
        copies = [code for code, spoken in self.said.items() if spoken.duplicate_of not in (None, code)]
        spoken = np.array([known[code] for code in copies], dtype=np.int64)
        self.is_control = np.isin(self.sample_ids, np.union1d(controls, spoken))
        self._order = np.argsort(self.sample_ids, kind="stable")
        self.repeat_no = _repeat_numbers(self.sample_ids, self._order)

    def add(self, connection: Any, codes: list[str], patterns: Patterns) -> dict[str, int]:
        """Add samples that the registry lacks, each code once; their ids by code."""
        kinds = kinds_of_new(codes, self.said, patterns)
        known: dict[str, int] = {}
        for kind, alike in kinds.items():
            known |= masters.add_samples(connection, alike, kind)
        self.added += len(codes)
        self.new_controls += len(codes) - len(kinds.get("unknown", ()))
        self._new_said.update(self.said.keys() & known.keys())
        return known

    def kinds(self, part: slice) -> np.ndarray:
        """``original``, ``repeat`` or ``control`` of some lines."""
        return _KINDS[np.where(self.is_control[part], 2, self.repeat_no[part] > 0)]

    def groups(self, ids: np.ndarray, size: int, by_line: bool) -> Iterator[np.ndarray]:
        """These samples in groups, each ascending: in the order of their ids, or of their first lines.

        The first keeps the tables compact, the second reads a table on disk once from end to end; mostly they agree.
        """
        if by_line:
            first = self._order[np.searchsorted(self.sample_ids[self._order], ids)]
            ids = ids[np.argsort(first, kind="stable")]
        for start in range(0, len(ids), size):
            yield np.sort(ids[start : start + size])

    def rows_of(self, ids: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """The lines of these samples (ascending), and which of the samples each is of."""
        low = np.searchsorted(self.sample_ids, ids, side="left", sorter=self._order)
        counts = np.searchsorted(self.sample_ids, ids, side="right", sorter=self._order) - low
        position = np.repeat(np.arange(len(ids)), counts)
        within = np.arange(len(position)) - np.repeat(np.cumsum(counts) - counts, counts)
        return self._order[np.repeat(low, counts) + within], position


def resolve(connection: Any, table: ResultTable, prefix: str, add: bool = False) -> Lines:
    """Look the sample codes up, part by part; with ``add`` those that the registry lacks are added."""
    said = spoken_of((f"{prefix}{code}" for code in table.sample_codes), table, prefix)
    lines = Lines(np.zeros(len(table), dtype=np.int64), said)
    patterns = read_patterns(connection)
    start = 0
    for part in parts_of(table.sample_codes):
        codes = [f"{prefix}{code}" for code in part]
        known = masters.sample_ids(connection, set(codes))
        if add and len(known) < len(codes):
            missing = [code for code in dict.fromkeys(codes) if code not in known]
            known |= lines.add(connection, missing, patterns) if missing else {}
        lines.sample_ids[start : start + len(codes)] = [known.get(code, 0) for code in codes]
        start += len(codes)
    return lines


def raw_parts(ids: np.ndarray) -> Iterator[np.ndarray]:
    """Ids, some thousands at a time."""
    for start in range(0, len(ids), IDS_AT_A_TIME):
        yield ids[start : start + IDS_AT_A_TIME]


def _repeat_numbers(sample_ids: np.ndarray, order: np.ndarray) -> np.ndarray:
    """How often each line's sample stood before in the table: 0 for the first line, 1 for the second; int32."""
    ordered = sample_ids[order]
    same = np.r_[False, ordered[1:] == ordered[:-1]]
    numbers = np.zeros(len(ordered), dtype=np.int32)
    if same.any():
        places = np.arange(len(ordered), dtype=np.int32)
        numbers[order] = places - np.maximum.accumulate(np.where(same, 0, places))
    return numbers
