"""Control samples: which lines they are, how they came out, and what that does to a batch and to the composition.

One mechanism: an import judges the controls of its batch before it computes the rocks; every other change marks the
control samples stale (or their batch, where a line vanished), and the drain settles those batches first.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from registry.control_lines import column_places, load_controls, values_of
from registry.errors import PlutonbookError
from registry.petrology.conventions import Conventions
from registry.quality.assessment import Column, Controls, Outcome, judge_batch
from registry.quality.recognising import Patterns, Spoken
from registry.quality.shipped import shipped_values
from registry.quality.states import STATE_WORDS
from registry.quality.verdicts import AnalyteState, joined, state_of_analyte
from registry.store import batches, quality_rows, reference_values, stale, target_rows

#: Analytes that fail or were remarked on, told one by one after an import.
ANALYTES_TOLD = 10
NO_CONTROLS = (
    "controls: none. No reference material, blank, duplicate or repeat is on this batch, so nothing here says how far "
    "its numbers can be trusted; name controls in the sample list, or set how their codes look "
    "(plutonbook settings control_pattern.blank=^BLK)"
)


def settle(connection: Any) -> int:
    """Judge anew the batches whose controls may have changed, before anything is derived; how many.

    Samples of the kind ``unknown`` whose code fits a pattern of the user become controls. Where other analytes fail
    now than before and the convention holds failed ones back, the samples of the batch are marked stale.
    """
    patterns = read_patterns(connection)
    call_by_patterns(connection, patterns)
    touched = quality_rows.with_their_parts(connection, quality_rows.touched_batches(connection))
    if not touched:
        return 0
    hold = _holds(connection)
    judged: set[int] = set()
    for batch_id in touched:
        if batch_id in judged:
            continue
        parts, changed = assess(connection, batch_id, patterns)
        judged.update(parts)
        for part in changed if hold else ():
            stale.mark(connection, quality_rows.samples_of_batch(connection, part), stale.DERIVE)
    quality_rows.clear_batches(connection)
    return len(touched)


def assess_imported(connection: Any, batch_id: int, controlled: bool) -> list[str]:
    """Judge a batch that has just been stored, with the other parts of its certificate, and say what came out.

    Where failed analytes are held back, the samples of the other parts are marked stale if other ones fail now.
    """
    if controlled or len(quality_rows.with_their_parts(connection, [batch_id])) > 1:
        _, changed = assess(connection, batch_id)
        for part in changed - {batch_id} if _holds(connection) else ():
            stale.mark(connection, quality_rows.samples_of_batch(connection, part), stale.DERIVE)
    return state_of_batch(connection, batch_id)


def assess(connection: Any, batch_id: int, patterns: Patterns | None = None) -> tuple[list[int], set[int]]:
    """Judge the controls of a batch and of all parts of its certificate and store what came out.

    The controls of one part judge the same analytes of the others. All those batches, and those of which other
    columns fail than before.
    """
    patterns = read_patterns(connection) if patterns is None else patterns
    parts = quality_rows.with_their_parts(connection, [batch_id])
    own = {part: _own_states(connection, part, patterns) for part in parts}
    changed = set()
    for part in parts:
        beside = {other: own[other] for other in quality_rows.parts_beside(connection, part)}
        states = _with_other_parts(connection, own[part], beside)
        rows = [_state_row(column, state) for column, state in states if state is not None]
        if quality_rows.replace_states(connection, part, rows):
            changed.add(part)
    return parts, changed


#: The columns of a batch, each with the state that its own controls give it.
_States = list[tuple[Column, AnalyteState | None]]


def _own_states(connection: Any, batch_id: int, patterns: Patterns) -> _States:
    """Judge the control lines of one batch and store every result of them."""
    controls = load_controls(connection, batch_id, patterns)
    outcomes = judge_batch(controls, values_of(connection, controls)) if len(controls) else []
    quality_rows.replace_outcomes(connection, batch_id, _outcome_columns(controls, outcomes))
    if not outcomes:
        return [(column, None) for column in controls.columns]
    return [(outcome.column, state_of_analyte(controls, outcome)) for outcome in outcomes]


def _with_other_parts(connection: Any, own: _States, beside: Mapping[int, _States]) -> _States:
    """The states of a part with what the controls of the other parts say of the same columns."""
    if not any(state is not None for states in beside.values() for _, state in states):
        return own
    said: list[list[tuple[str, AnalyteState]]] = [[] for _ in own]
    places = column_places([column for column, _ in own])
    for batch_id, states in beside.items():
        batch = batches.find_by_id(connection, batch_id)
        for key, place in column_places([column for column, _ in states]).items():
            state = states[place][1]
            if key in places and state is not None and batch is not None:
                said[places[key]].append((batch["batch"], state))
    return [(column, joined(state, others)) for (column, state), others in zip(own, said, strict=True)]


def _outcome_columns(controls: Controls, outcomes: Sequence[Outcome]) -> dict[str, Any]:
    """Every judged result as rows of ``control_outcome``, in key order."""
    if not outcomes:
        return {"aliquot_id": np.zeros(0, dtype=np.int64)}
    there = np.stack([outcome.there for outcome in outcomes], axis=1)
    line, place = np.nonzero(there)
    order = np.argsort(controls.aliquot_ids[line], kind="stable")
    line, place = line[order], place[order]

    def taken(name: str) -> Any:
        return np.stack([getattr(outcome, name) for outcome in outcomes], axis=1)[line, place]

    column_ids = np.array([outcome.column.column_id for outcome in outcomes], dtype=np.int64)
    return {
        "aliquot_id": controls.aliquot_ids[line],
        "column_id": column_ids[place],
        "kind": controls.kinds[line],
        "material": controls.materials[line],
        "expected": taken("expected"),
        "found": taken("found"),
        "z": taken("z"),
        "limit_low": taken("low"),
        "limit_high": taken("high"),
        "state": taken("states"),
        "rule": taken("rules"),
        "source": taken("sources"),
    }


def _state_row(column: Column, state: AnalyteState) -> dict[str, Any]:
    numbers = {
        "bias_percent": state.bias_percent,
        "bias_error_percent": state.bias_error_percent,
        "drift_percent": state.drift_percent,
        "drift_error_percent": state.drift_error_percent,
        "precision_s0": state.precision_s0,
        "precision_k": state.precision_k,
    }
    return {
        "column_id": column.column_id,
        "state": state.state,
        "remarks": state.remarks,
        "reference_results": state.references,
        "blank_results": state.blanks,
        "pairs": state.pairs,
        **{name: None if np.isnan(value) else value for name, value in numbers.items()},
    }


def read_patterns(connection: Any) -> Patterns:
    """The user's code patterns; PlutonbookError names a setting that cannot be used."""
    try:
        return Patterns(target_rows.read_settings(connection))
    except ValueError as fault:
        raise PlutonbookError(str(fault)) from fault


def call_by_patterns(connection: Any, patterns: Patterns | None = None) -> dict[str, list[str]]:
    """Stale samples of the kind ``unknown`` become the controls that the user's patterns call them: codes by kind."""
    patterns = read_patterns(connection) if patterns is None else patterns
    kinds: dict[str, list[int]] = {}
    called: dict[str, list[str]] = {}
    for sample_id, code in quality_rows.stale_unknown_samples(connection) if patterns else ():
        kind = patterns.kind_of(code)
        if kind is not None:
            kinds.setdefault(kind, []).append(sample_id)
            called.setdefault(kind, []).append(code)
    quality_rows.set_kinds(connection, kinds)
    return called


def kinds_of_new(codes: Sequence[str], said: Mapping[str, Spoken], patterns: Patterns) -> dict[str, list[str]]:
    """New sample codes by the kind to create them with: what the certificate says, else a pattern, else ``unknown``."""
    kinds: dict[str, list[str]] = {}
    for code in codes:
        spoken = said.get(code)
        kind = (spoken.kind if spoken is not None else None) or (patterns.kind_of(code) if patterns else None)
        kinds.setdefault(kind or "unknown", []).append(code)
    return kinds


def _holds(connection: Any) -> bool:
    from registry.judging import read_conventions

    return read_conventions(connection).failed_control == "hold"


def held_columns(connection: Any, conventions: Conventions, batch_id: int | None = None) -> np.ndarray:
    """Ids of the batch columns that stay out of the composition, int64: the failed ones where the convention holds."""
    if conventions.failed_control != "hold":
        return np.zeros(0, dtype=np.int64)
    return quality_rows.failed_columns(connection, batch_id)


def ship_reference_values(connection: Any) -> int:
    """Bring the shipped reference values in; how many were new. A second call changes nothing."""
    rows = [vars(value) for value in shipped_values()]
    return reference_values.upsert_values(connection, rows).added


def state_of_batch(connection: Any, batch_id: int) -> list[str]:
    """Sentences on the controls of a batch: how many, its state, and what failed or was remarked, failures first."""
    from registry.store.reading.controls import analyte_states, control_counts, without_certificate

    counts = control_counts(connection, batch_id)
    states = analyte_states(connection, batch_id)
    if not counts and not states:
        return [NO_CONTROLS]
    words = {"reference_material": "reference material", "lab_repeat": "laboratory repeat"}
    listed = ", ".join(
        f"{number:,} {words.get(kind, kind)}{'' if number == 1 else 's'}" for kind, number in counts.items()
    )
    lines = [f"controls: {listed or 'none on this part; those of the other parts of the certificate count for it'}"]
    for material in without_certificate(connection, batch_id):
        named = (
            f"'{material['material']}'" if material["material"] else f"of sample {material['sample_code']}, not named,"
        )
        number = f"{material['lines']:,} {'line' if material['lines'] == 1 else 'lines'}"
        lines.append(
            f"reference material {named} has no certificate here ({number} not judged): import its values as "
            "reference-materials, or name it in the sample list"
        )
    if not states:
        return [*lines, "none of them could be judged (no reference values, detection limits, originals or digestions)"]
    tally = Counter(state["state"] for state in states)
    told = "; ".join(_of_analytes(word, tally[word], len(states)) for word in STATE_WORDS[::-1] if tally[word])
    others = len(quality_rows.batch_columns(connection, batch_id)) - len(states)
    if others:
        told += f"; {others:,} {'column has' if others == 1 else 'columns have'} no control that could be judged"
    lines.append(f"batch {told}")
    remarked = [state for state in states if state["state"] != STATE_WORDS[0]]
    remarked.sort(key=lambda state: -STATE_WORDS.index(state["state"]))
    lines += [f"{state['analyte']} {state['state']}: {state['remarks']}" for state in remarked[:ANALYTES_TOLD]]
    if len(remarked) > ANALYTES_TOLD:
        fails = sum(state["state"] == STATE_WORDS[-1] for state in remarked[ANALYTES_TOLD:])
        lines.append(
            f"... and {len(remarked) - ANALYTES_TOLD:,} more analytes{f', {fails:,} of which fail' if fails else ''}: "
            "the page of the batch and control_sheet hold them all"
        )
    return lines


def _of_analytes(word: str, number: int, all_of_them: int) -> str:
    """``fails for 1 of 49 analytes``; where it is so for each: ``passes for all 49 analytes``."""
    if number == all_of_them:
        return f"{word} for {'its one analyte' if number == 1 else f'all {number:,} analytes'} judged"
    return f"{word} for {number:,} of {all_of_them:,} analytes"
