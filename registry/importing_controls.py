"""What a file of results says of its control samples, and what its columns say of each other."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

import numpy as np

from registry.controlling import call_by_patterns
from registry.intake import ResultTable
from registry.petrology.analytes import QUALIFIER_BELOW
from registry.quality.assessment import Column
from registry.quality.columns import disagreeing_columns
from registry.quality.medians import implausible_columns
from registry.quality.recognising import Spoken, read_control_text
from registry.store import masters, quality_rows

#: Contradictions between certificate and sample list that are told one by one.
CONTRADICTIONS_SHOWN = 10


def spoken_of(codes: Iterable[str], table: ResultTable, prefix: str) -> dict[str, Spoken]:
    """What the certificate says of sample codes that it calls controls."""
    if not any(table.control_text):
        return {}
    said: dict[str, Spoken] = {}
    for code, text in zip(codes, table.control_text, strict=True):
        spoken = read_control_text(text)
        if spoken.kind is not None:
            of = f"{prefix}{spoken.duplicate_of}" if spoken.duplicate_of else None
            said.setdefault(code, Spoken(spoken.kind, of, spoken.stage))
    return said


def link_duplicates(connection: Any, new: set[str], said: dict[str, Spoken], known: dict[str, int]) -> None:
    """Link the new samples that the certificate calls duplicates with their originals, where those are registered."""
    duplicates = {code: said[code].duplicate_of for code in said if code in new and said[code].kind == "duplicate"}
    originals = masters.sample_ids(connection, {of for of in duplicates.values() if of})
    linked = {known[code]: originals[of] for code, of in duplicates.items() if of in originals and of != code}
    quality_rows.set_originals(connection, linked)


def call_known_controls(connection: Any, said: dict[str, Spoken], known: dict[str, int], new: set[str]) -> None:
    """Samples that were registered with the kind 'unknown' become the controls that the certificate calls them.

    Before that those that came in with the same import become what the user's code patterns call them.
    """
    call_by_patterns(connection)
    kinds: dict[str, list[int]] = {}
    for code, kind in quality_rows.kinds_of(connection, said.keys() - new).items():
        # a duplicate under the code of its original is a repeated line, not another sample
        called = said[code].kind
        if kind == "unknown" and called is not None and called != "duplicate":
            kinds.setdefault(called, []).append(known[code])
    quality_rows.set_kinds(connection, kinds)


def called_otherwise(connection: Any, table: ResultTable, prefix: str, said: dict[str, Spoken]) -> list[str]:
    """Sentences on registered samples that the certificate calls a control of another kind than they are registered as.

    ``said`` as ``spoken_of`` gives it. A rock's line called a duplicate is a repeat of it, and no contradiction.
    """
    if not said:
        return []
    lines: dict[str, int] = {}
    for place, (code, text) in enumerate(zip(table.sample_codes, table.control_text, strict=True)):
        if text and f"{prefix}{code}" in said and f"{prefix}{code}" not in lines:
            lines[f"{prefix}{code}"] = int(table.line_no[place])
    kinds = quality_rows.kinds_of(connection, said)
    sentences = [
        f"line {lines[code]}: the certificate calls {code} a {spoken.kind.replace('_', ' ')}, the sample list says "
        f"{kinds[code].replace('_', ' ')}; it stays what the list says: correct the list if the laboratory is right"
        for code, spoken in said.items()
        if spoken.kind is not None and spoken.kind != kinds.get(code, spoken.kind) and spoken.kind != "duplicate"
    ]
    if len(sentences) > CONTRADICTIONS_SHOWN:
        more = f"{len(sentences) - CONTRADICTIONS_SHOWN:,} more samples are controls by the certificate only"
        sentences = [*sentences[:CONTRADICTIONS_SHOWN], more]
    return sentences


def limit_reported(values: np.ndarray, qualifiers: np.ndarray) -> float | None:
    """The detection limit of a column as its own cells tell it: the limit that stands most often behind ``<``."""
    limits = values[qualifiers == QUALIFIER_BELOW]
    limits = limits[~np.isnan(limits)]
    if not len(limits):
        return None
    distinct, counts = np.unique(limits, return_counts=True)
    return float(distinct[counts.argmax()])


def columns_that_disagree(table: ResultTable) -> list[str]:
    """Sentences on columns of one metal that differ in the file (MnO beside Mn), and on medians that no rock has."""
    columns = [
        Column(
            place, column.analyte, column.unit, column.digestion,
            column.detection_limit
            if column.detection_limit is not None
            else limit_reported(table.values[:, place], table.qualifiers[:, place]),
        )
        for place, column in enumerate(table.columns)
    ]  # fmt: skip
    return [
        *disagreeing_columns(columns, table.values, table.qualifiers, table.line_no),
        *implausible_columns(columns, table.values, table.qualifiers),
    ]
