"""The controls of a batch out of the store, as the quality functions take them: which lines, what each repeats."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from registry.quality import recognising
from registry.quality.assessment import DUPLICATE, LAB_REPEAT, Column, Controls
from registry.quality.recognising import Patterns, Spoken, material_of, read_control_text
from registry.quality.shipped import ReferenceValue
from registry.store import masters, quality_rows, reference_values
from registry.store.quality_rows import StoredColumn, StoredLine


def load_controls(connection: Any, batch_id: int, patterns: Patterns) -> Controls:
    """What the store holds of the controls of a batch; originals may stand in another part of its certificate."""
    stored = quality_rows.control_lines(connection, batch_id)
    spoken = [read_control_text(line.control_text) for line in stored]
    named = [said.duplicate_of or _by_form(line, patterns) for line, said in zip(stored, spoken, strict=True)]
    known = masters.sample_ids(connection, {code for code in named if code}) if any(named) else {}
    kept: list[tuple[StoredLine, str, Spoken, int | None]] = []
    for line, said, code in zip(stored, spoken, named, strict=True):
        kind, original = _kind_and_original(line, said, known.get(code) if code else None)
        if kind is not None:
            kept.append((line, kind, said, original))
    materials = reference_values.material_names(connection)
    stored_columns = quality_rows.batch_columns(connection, batch_id)
    columns = [Column(c.column_id, c.analyte, c.unit, c.digestion, c.detection_limit) for c in stored_columns]
    column_ids = [column.column_id for column in columns]
    aliquots = np.array([line.aliquot_id for line, *_ in kept], dtype=np.int64)
    line_no = np.array([line.line_no for line, *_ in kept], dtype=np.int64)
    kinds = np.array([kind for _, kind, *_ in kept], dtype=object)
    stages = [
        stage_of_pair(kind, line.duplicate_stage, line.code, line.control_text, patterns) for line, kind, *_ in kept
    ]
    values, signs = quality_rows.results_of(connection, aliquots, column_ids)
    originals = np.array([original or 0 for *_, original in kept], dtype=np.int64)
    partner, partner_signs = _partners(connection, batch_id, stored_columns, originals, aliquots)
    before = np.zeros(len(kept), dtype=np.int64)
    blank = kinds == recognising.BLANK
    if blank.any():
        before[blank] = quality_rows.lines_before(connection, batch_id, line_no[blank])
    preceding, _ = quality_rows.results_of(connection, before, column_ids)
    return Controls(
        columns,
        aliquots,
        line_no,
        kinds,
        np.array([_material(line, kind, materials, patterns) for line, kind, *_ in kept], dtype=object),
        np.array(stages, dtype=object),
        values,
        signs,
        partner,
        partner_signs,
        preceding,
        originals > 0,
    )


def _partners(
    connection: Any,
    batch_id: int,
    columns: Sequence[StoredColumn],
    originals: np.ndarray,
    aliquots: np.ndarray,
) -> tuple[np.ndarray, np.ndarray]:
    """Results of the first lines of the originals (ids, 0 none), (n, m), from this part of the certificate or another.

    A column of another part is the same where analyte, unit and digestion are.
    """
    partner = np.full((len(originals), len(columns)), np.nan)
    signs = np.zeros(partner.shape, dtype=np.uint8)
    wanted = set(originals[originals > 0].tolist())
    if not wanted:
        return partner, signs
    own = column_places(columns)
    for part in (batch_id, *quality_rows.parts_beside(connection, batch_id)):
        first = quality_rows.first_lines(connection, part, wanted)
        lines = np.array([first.get(original, 0) for original in originals.tolist()], dtype=np.int64)
        lines[lines == aliquots] = 0
        if not lines.any():
            continue
        theirs = columns if part == batch_id else quality_rows.batch_columns(connection, part)
        values, qualifiers = quality_rows.results_of(connection, lines, [column.column_id for column in theirs])
        for key, place in column_places(theirs).items():
            if key in own:
                open_rows = np.isnan(partner[:, own[key]])
                partner[open_rows, own[key]] = values[open_rows, place]
                signs[open_rows, own[key]] = qualifiers[open_rows, place]
    return partner, signs


def column_places(columns: Sequence[StoredColumn | Column]) -> dict[tuple[Any, ...], int]:
    """Where each column stands, by what it is; a second one of the same kind is told by its number."""
    found: dict[tuple[Any, ...], int] = {}
    for place, column in enumerate(columns):
        number = 0
        while (key := (column.analyte, column.unit, column.digestion, number)) in found:
            number += 1
        found[key] = place
    return found


def _by_form(line: StoredLine, patterns: Patterns) -> str | None:
    """The code of the original that the form of a duplicate's own code tells, where nothing else does."""
    return patterns.original_of(line.code) if line.kind == DUPLICATE and line.duplicate_of is None else None


def _kind_and_original(line: StoredLine, said: Spoken, named: int | None) -> tuple[str | None, int | None]:
    if line.kind in (recognising.BLANK, recognising.REFERENCE_MATERIAL):
        return line.kind, None
    if line.kind == DUPLICATE:
        return DUPLICATE, line.duplicate_of or named
    if line.repeat_no > 0:
        return LAB_REPEAT, line.sample_id
    if said.kind == DUPLICATE and named is not None:
        return DUPLICATE, named
    return None, None


def _material(line: StoredLine, kind: str, materials: Sequence[str], patterns: Patterns) -> str | None:
    if kind not in (recognising.BLANK, recognising.REFERENCE_MATERIAL):
        return None
    if line.reference_material or kind == recognising.BLANK:
        return material_of(line.reference_material, "", materials)
    pattern = patterns.compiled.get(recognising.REFERENCE_MATERIAL)
    match = pattern.search(line.code) if pattern is not None else None
    if match is not None and match.lastindex:
        return material_of(match["material"] if "material" in match.groupdict() else match[1], line.code, materials)
    return material_of(None, line.code, materials)


def stage_of_pair(kind: str, declared: str | None, code: str, control_text: str | None, patterns: Patterns) -> str:
    """The stage of a judged pair, from its kind, the sample list, the certificate's word, and the form of its code."""
    if kind == LAB_REPEAT:
        return "lab"
    if declared is not None:
        return declared
    stage = read_control_text(control_text).stage
    return stage if stage != "unknown" else patterns.stage_of(code)


def values_of(connection: Any, controls: Controls) -> dict[str, list[ReferenceValue]]:
    """The registered reference values of the materials among the controls, by material."""
    names = {name for name in controls.materials.tolist() if name is not None}
    stored = reference_values.values_of(connection, names) if names else {}
    return {
        name: [
            ReferenceValue(
                name, row.analyte, row.value, row.unit, row.uncertainty, row.uncertainty_type, row.status, row.source
            )
            for row in rows
        ]
        for name, rows in stored.items()
    }
