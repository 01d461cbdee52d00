"""The controls of one batch judged: every result of a reference material, blank and duplicate, then every analyte.

Pure: arrays in, arrays out. ``judge_batch`` takes what the store holds of the controls of a batch.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from registry.petrology.analytes import ANALYTES, CHOSEN_INDEX, QUALIFIER_ABOVE, QUALIFIER_BELOW
from registry.petrology.digestion import CARRIES, DIGESTION_CODE, TOTAL, settle_unknown
from registry.petrology.quotients import Floats
from registry.quality import blanks, duplicates
from registry.quality.certificates import allowed_deviation
from registry.quality.run_rules import RULE_TEXTS, judge_run, z_scores
from registry.quality.shipped import INFORMATION, ReferenceValue, status_rank
from registry.quality.states import NOT_JUDGED, PASSED, WARNED
from registry.quality.substances import conversion

REFERENCE, BLANK, DUPLICATE, LAB_REPEAT = "reference_material", "blank", "duplicate", "lab_repeat"
#: Majors of a rock used as a blank are no contamination; sulphur is judged.
_JUDGED_IN_WT = {"S", "SO3"}
#: A certified value below so many detection limits is too close to them to be judged, unless the result is as far off.
#: Common practice, no source.
CLOSE_TO_LIMIT = 5.0


@dataclass(frozen=True)
class Column:
    """One column of a batch; ``column_id`` is the store's."""

    column_id: int
    analyte: str
    unit: str
    digestion: str
    detection_limit: float | None


@dataclass
class Controls:
    """The control lines of a batch in the order of their line numbers; arrays (n,), results (n, m) as reported.

    ``kinds`` one of the four above; ``materials`` the registered material or None; ``stages`` of duplicates;
    ``partner`` and ``before`` are the results of the original and of the line before, NaN where there is none;
    ``original_known`` is False for duplicates of which nobody said what they repeat.
    """

    columns: Sequence[Column]
    aliquot_ids: NDArray[np.int64]
    line_no: NDArray[np.int64]
    kinds: NDArray[np.object_]
    materials: NDArray[np.object_]
    stages: NDArray[np.object_]
    values: Floats
    qualifiers: NDArray[np.uint8]
    partner: Floats
    partner_qualifiers: NDArray[np.uint8]
    before: Floats
    original_known: NDArray[np.bool_] | None = None

    def __len__(self) -> int:
        return len(self.aliquot_ids)


@dataclass(frozen=True)
class Outcome:
    """One column judged: arrays (n,) over the control lines; ``there`` marks those with a result, ``signs`` are their
    qualifier codes."""

    column: Column
    there: NDArray[np.bool_]
    signs: NDArray[np.uint8]
    found: Floats
    expected: Floats
    z: Floats
    low: Floats
    high: Floats
    states: NDArray[np.uint8]
    rules: NDArray[np.object_]
    sources: NDArray[np.object_]
    pairs_above_ninetieth: int = 0
    pairs_judged: int = 0
    precision: duplicates.PrecisionFit | None = field(default=None)


@dataclass(frozen=True)
class Expectation:
    """The value a material should give in a column, in its unit, with the deviation allowed and the source.

    ``informative``: given for information only, which is no ground for a failure.
    """

    value: float
    deviation: float
    source: str
    informative: bool = False


def judge_batch(controls: Controls, values: Mapping[str, Sequence[ReferenceValue]]) -> list[Outcome]:
    """Judge every column of a batch; ``values`` are the registered reference values by material."""
    reports_silica = any(column.analyte == "SiO2" for column in controls.columns)
    return [
        _judge_column(controls, place, column, values, reports_silica) for place, column in enumerate(controls.columns)
    ]


def expectation(column: Column, values: Sequence[ReferenceValue]) -> Expectation | None:
    """The best registered value of one material for a column, converted; None where there is none."""
    best: tuple[int, ReferenceValue, float] | None = None
    for value in values:
        factor = conversion(value.analyte, value.unit, column.analyte, column.unit)
        if factor is None:
            continue
        rank = status_rank(value.status)
        if best is None or rank <= best[0]:
            best = rank, value, factor
    if best is None:
        return None
    rank, value, factor = best
    deviation, basis = allowed_deviation(value.value, value.unit, value.uncertainty, value.uncertainty_type)
    source = f"{value.status}: {value.source}; {basis}"
    return Expectation(value.value * factor, deviation * factor, source, rank == INFORMATION)


def carried_wholly(column: Column, reports_silica: bool) -> bool:
    """Whether the column's digestion brings all of the analyte, so that a certified total can be compared."""
    analyte = ANALYTES.get(column.analyte)
    if analyte is None or analyte.column is None:
        return True
    code = int(settle_unknown(DIGESTION_CODE[column.digestion], reports_silica))
    return bool(CARRIES[code, CHOSEN_INDEX[analyte.column]] == TOTAL)


def _judge_column(
    controls: Controls,
    place: int,
    column: Column,
    values: Mapping[str, Sequence[ReferenceValue]],
    reports_silica: bool,
) -> Outcome:
    n = len(controls)
    found, signs = controls.values[:, place], controls.qualifiers[:, place]
    there = ~np.isnan(found)
    nothing = np.full(n, np.nan)
    outcome = Outcome(
        column, there, signs, found, nothing.copy(), nothing.copy(), nothing.copy(), nothing.copy(),
        np.zeros(n, dtype=np.uint8), np.full(n, None, dtype=object), np.full(n, None, dtype=object),
    )  # fmt: skip
    limit = column.detection_limit if column.detection_limit is not None else float("nan")
    whole = carried_wholly(column, reports_silica)
    known = {
        material: expectation(column, values.get(material, ()))
        for material in {m for m in controls.materials.tolist() if m is not None}
    }
    _judge_references(controls, outcome, signs, known, whole, limit)
    _judge_blanks(controls, outcome, signs, known, limit, controls.before[:, place])
    return _judge_duplicates(
        controls, outcome, signs, controls.partner[:, place], controls.partner_qualifiers[:, place], limit
    )


def _judge_references(
    controls: Controls,
    outcome: Outcome,
    signs: NDArray[np.uint8],
    known: Mapping[str, Expectation | None],
    whole: bool,
    limit: float,
) -> None:
    """z-scores in the order of the lines; the run rules over all materials and over each of its own."""
    rows = np.flatnonzero((controls.kinds == REFERENCE) & outcome.there)
    informative = np.zeros(len(controls), dtype=bool)
    for row in rows.tolist():
        material = controls.materials[row]
        expected = known.get(material) if material is not None else None
        if expected is None or not expected.value > 0.0:
            outcome.rules[row] = (
                "no registered material is named for this sample" if material is None else "no reference value"
            )
            continue
        outcome.expected[row], outcome.sources[row] = expected.value, expected.source
        informative[row] = expected.informative
        outcome.low[row] = expected.value - 3.0 * expected.deviation
        outcome.high[row] = expected.value + 3.0 * expected.deviation
        outcome.z[row] = float(z_scores(outcome.found[row], expected.value, expected.deviation))
    if not whole:
        outcome.rules[rows] = (
            "the digestion is not told, so a certified total cannot be compared; state it"
            if outcome.column.digestion == "unknown"
            else "the digestion leaves part of it behind, so a certified total cannot be compared"
        )
        outcome.z[rows] = np.nan
        return
    # a result beyond the laboratory's limits says something only where the limit itself is already too far
    open_side = ((signs == QUALIFIER_BELOW) & (outcome.z > -2.0)) | ((signs == QUALIFIER_ABOVE) & (outcome.z < 2.0))
    reach = CLOSE_TO_LIMIT * limit
    close = rows[((outcome.expected < reach) & (np.abs(outcome.found - outcome.expected) <= reach))[rows]]
    outcome.rules[close] = f"expected below {CLOSE_TO_LIMIT:g} detection limits"
    outcome.z[close] = np.nan
    undecided = rows[open_side[rows]]
    outcome.rules[undecided] = "outside the laboratory's limits, compatible with the expected value"
    outcome.z[undecided] = np.nan
    _compare_with_information(outcome, np.flatnonzero(informative & ~np.isnan(outcome.z)))
    sets = [rows, *(rows[controls.materials[rows] == name] for name in known)]
    for chosen in sets:
        states, rules = judge_run(outcome.z[chosen])
        worse = states > outcome.states[chosen]
        outcome.states[chosen[worse]] = states[worse]
        outcome.rules[chosen[worse]] = [
            None if rule is None else f"{rule}: {RULE_TEXTS[rule]}" for rule in rules[worse].tolist()
        ]


def _compare_with_information(outcome: Outcome, rows: NDArray[np.int64]) -> None:
    """Results against a value given for information only: far from it is a warning, and never more."""
    for row in rows.tolist():
        off = abs(outcome.z[row])
        outcome.states[row] = WARNED if off > 3.0 else NOT_JUDGED
        outcome.rules[row] = (
            f"{off:.3g} deviations from a value given for information only, which is no ground for a failure"
            if off > 3.0
            else "its value is given for information only: compared, not judged"
        )
    outcome.z[rows] = np.nan


def _judge_blanks(
    controls: Controls,
    outcome: Outcome,
    signs: NDArray[np.uint8],
    known: Mapping[str, Expectation | None],
    limit: float,
    before: Floats,
) -> None:
    rows = np.flatnonzero((controls.kinds == BLANK) & outcome.there)
    if not len(rows):
        return
    column = outcome.column
    own = [known.get(material) if material is not None else None for material in controls.materials[rows].tolist()]
    background = np.array([0.0 if one is None else one.value for one in own])
    deviation = np.array([0.0 if one is None else one.deviation for one in own])
    deviation = np.where(np.isnan(deviation), 0.0, deviation)
    judged = blanks.judge_blanks(outcome.found[rows], signs[rows], limit, before[rows], background, deviation)
    outcome.expected[rows] = background
    top = background + 3.0 * deviation + (blanks.FAIL_AT * limit if limit > 0.0 else 0.0)
    outcome.low[rows], outcome.high[rows] = 0.0, np.where(top > 0.0, top, np.nan)
    analyte = ANALYTES.get(column.analyte)
    if analyte is not None and analyte.column is not None:
        in_wt = analyte.column.endswith("_wt")  # copper in per cent is no major of the rock
    else:
        in_wt = column.unit == "wt%"
    is_major = in_wt and column.analyte not in _JUDGED_IN_WT
    for position, row in enumerate(rows.tolist()):
        if own[position] is None and is_major and signs[row] != QUALIFIER_BELOW:
            outcome.rules[row] = "a major of the blank's own rock; register the values of its material to judge it"
            outcome.expected[row] = outcome.low[row] = outcome.high[row] = np.nan
            continue
        if own[position] is not None:
            outcome.sources[row] = own[position].source  # type: ignore[union-attr]
        state = int(judged.states[position])
        outcome.states[row] = state
        if judged.limit_too_high[position]:
            outcome.rules[row] = (
                f"reported below a limit of more than {blanks.WARN_AT:g} detection limits, which says nothing"
            )
        elif state == NOT_JUDGED:
            outcome.rules[row] = "no detection limit is known for this column"
        elif state > PASSED and np.isnan(judged.multiples[position]):
            outcome.rules[row] = "above the content of its material by more than three deviations"
        elif state > PASSED:
            over = " over the content of its material" if own[position] is not None else ""
            text = f"{judged.multiples[position]:.3g} times the detection limit{over}, allowed "
            text += f"{blanks.WARN_AT:g} (warned) and {blanks.FAIL_AT:g} (failed)"
            if judged.carried[position]:
                text += f"; {judged.carry_over_percent[position]:.2g} % of the line before it: carry-over"
            outcome.rules[row] = text


def _judge_duplicates(
    controls: Controls,
    outcome: Outcome,
    signs: NDArray[np.uint8],
    partner: Floats,
    partner_signs: NDArray[np.uint8],
    limit: float,
) -> Outcome:
    chosen = ((controls.kinds == DUPLICATE) | (controls.kinds == LAB_REPEAT)) & outcome.there
    rows = np.flatnonzero(chosen)
    if not len(rows):
        return outcome
    outcome.expected[rows] = partner[rows]
    alone = rows[np.isnan(partner[rows])]
    outcome.rules[alone] = "its original has no result in this certificate"
    if controls.original_known is not None:
        outcome.rules[rows[~controls.original_known[rows]]] = "nothing says which sample it repeats"
    rows = rows[~np.isnan(partner[rows])]
    judged = duplicates.judge_duplicates(
        partner[rows], partner_signs[rows], outcome.found[rows], signs[rows], limit, controls.stages[rows].tolist()
    )
    outcome.z[rows], outcome.states[rows] = judged.z, judged.states
    outcome.low[rows], outcome.high[rows], outcome.rules[rows] = judged.low, judged.high, judged.rules
    return replace(
        outcome,
        pairs_judged=judged.judged,
        pairs_above_ninetieth=judged.above_ninetieth,
        precision=judged.precision,
    )
