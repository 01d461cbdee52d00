"""Why a sample was judged as it was: the verdicts with their reasons in words and numbers, ready to be shown.

The stored reasons are read with the definition that made them: what a page says is what was decided. Only quantities
that no table keeps (heat left in the body, how redox was told) are worked out again for the sentences.
"""

from __future__ import annotations

import json
import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np

from registry.margins import Margin, margin
from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.petrology.conventions import Conventions
from registry.petrology.heat import effective_half_width_m
from registry.pipeline import Chunk, compute
from registry.store import loading
from registry.store.reading import sample as reading
from registry.store.sheets import OUTCOME_WORDS
from registry.targets.argument import argue
from registry.targets.definition import Criterion, Gate, TargetDefinition, parse_definition

MISSING = "missing: "


@dataclass(frozen=True)
class Reason:
    """One gate or criterion as it came out. ``value`` is the number, ``text`` what is to be said beside or instead.

    Where the quantity of a criterion is not known and another took its place, ``quantity``, ``test``, ``limit`` and
    ``margin`` are those of the other, and ``instead_of`` names the one it replaces; else it is empty. ``limit_moves``:
    the limit depends on another quantity of the sample.
    """

    code: str
    label: str
    quantity: str
    test: str
    gate: bool
    weight: int
    outcome: str
    value: float | None
    limit: float | None
    text: str
    missing: tuple[str, ...]
    provisional: bool
    source: str
    margin: Margin | None
    instead_of: str
    limit_moves: bool


@dataclass(frozen=True)
class Conclusion:
    """The verdict on one sample for one target, with everything that stands behind it.

    ``probability`` that it survives analytical error (never a chance of ore), of ``draws``; None where not computed.
    """

    target: str
    name: str
    version: str
    verdict: str
    score_min: float | None
    score_max: float | None
    coverage: float | None
    probability: float | None
    draws: int
    provisional: bool
    cause: str
    argument: str
    would_turn: tuple[str, ...]
    failed_rules: tuple[str, ...]
    near_misses: tuple[str, ...]
    contradictions: tuple[str, ...]
    reasons: tuple[Reason, ...]
    missing: tuple[str, ...]
    favourable: float
    possible: float
    cautions: tuple[str, ...]


@lru_cache(maxsize=64)
def read_definition(text: str) -> TargetDefinition:
    """The definition of a stored text; parsed once."""
    return parse_definition(text)


def explain_sample(connection: Any, sample_id: int) -> list[Conclusion]:
    """The conclusions on a sample, favourable ones first; empty for control samples and where nothing is computed."""
    rows = reading.verdict_rows(connection, sample_id)
    if not rows:
        return []
    sample, conventions = _known_of(connection, sample_id)
    return [_conclusion(row, sample, conventions) for row in rows]


def explain_chosen(connection: Any, chosen: Sequence[tuple[int, str]]) -> dict[tuple[int, str], Conclusion]:
    """The conclusions on some (sample id, target code), worked out together; pairs without a verdict are left out."""
    known = _known_of_several(connection, sorted({sample_id for sample_id, _ in chosen}))
    found = {}
    for sample_id in known:
        wanted = {target for other, target in chosen if other == sample_id}
        for row in reading.verdict_rows(connection, sample_id):
            if row["target"] in wanted:
                found[sample_id, row["target"]] = _conclusion(row, *known[sample_id])
    return found


def _known_of(connection: Any, sample_id: int) -> tuple[dict[str, Any], Conventions]:
    return _known_of_several(connection, [sample_id])[sample_id]


def _known_of_several(connection: Any, sample_ids: Sequence[int]) -> dict[int, tuple[dict[str, Any], Conventions]]:
    """Everything known of samples by name, None for missing, and the conventions each was computed under."""
    stored = {sample_id: reading.derived_row(connection, sample_id) for sample_id in sample_ids}
    groups: dict[str, list[int]] = {}
    for sample_id, row in stored.items():
        groups.setdefault(row.pop("conventions", None) or "{}", []).append(sample_id)
    found = {}
    for text, ids in groups.items():
        conventions = Conventions.from_dict(json.loads(text))
        composition = loading.load_composition(connection, ids)
        context = loading.load_context(connection, ids)
        packed = (composition.values, composition.qualifiers, composition.digestions)
        computed = compute(Chunk(composition.sample_ids, *packed, context), (), conventions)
        columns = {
            **dict(zip(CHOSEN_COLUMNS, composition.values, strict=True)),
            **computed.derived,
            **context,
            "half_width_m": effective_half_width_m(
                context["intrusion_shape"], context["half_width_m"], context["volume_km3"]
            ),
        }
        for place, sample_id in enumerate(composition.sample_ids.tolist()):
            known = {name: _plain(column[place]) for name, column in columns.items()}
            known.update({name: value for name, value in stored[sample_id].items() if value is not None})
            found[sample_id] = known, conventions
    return found


def _plain(value: Any) -> Any:
    value = value.item() if hasattr(value, "item") else value
    return None if isinstance(value, float) and math.isnan(value) else value


def _conclusion(row: dict[str, Any], sample: dict[str, Any], conventions: Conventions) -> Conclusion:
    definition = read_definition(row["definition"])
    packed = json.loads(row["reasons"])
    texts = packed.get("texts", {})
    with np.errstate(all="ignore"):  # as in the pipeline: a quotient by zero is a missing value, not a fault
        told = argue(definition, sample, packed, conventions)
    outcomes = zip(definition.tests, packed["outcomes"], packed["values"], packed["thresholds"], strict=True)
    return Conclusion(
        target=row["target"],
        name=row["target_name"],
        version=row["version"],
        verdict=row["verdict"],
        score_min=row["score_min"],
        score_max=row["score_max"],
        coverage=row["coverage"],
        probability=row["probability"],
        draws=int(conventions.probability_draws),
        provisional=bool(row["provisional"]),
        cause=(texts.get("cause") or "") if row["verdict"] == "undecided" else "",
        argument=told["argument"],
        would_turn=tuple(told["would_turn"]),
        failed_rules=tuple(told["failed_rules"]),
        near_misses=tuple(told["near_misses"]),
        contradictions=tuple(told["contradictions"]),
        reasons=tuple(
            _reason(test, letter, value, limit, texts.get(str(position), ""), test.code in told["instead"])
            for position, (test, letter, value, limit) in enumerate(outcomes)
        ),
        missing=tuple(told["missing"]),
        favourable=definition.favourable,
        possible=definition.possible,
        cautions=tuple(told["cautions"]),
    )


def _reason(
    test: Gate | Criterion, letter: str, value: float | None, limit: float | None, text: str, by_other: bool
) -> Reason:
    criterion = test if isinstance(test, Criterion) else None
    asked, near = test.test, criterion.near if criterion else None
    if by_other and criterion is not None and criterion.otherwise is not None:
        asked, near = criterion.otherwise, criterion.otherwise_near
    names = tuple(text.removeprefix(MISSING).split(", ")) if text.startswith(MISSING) else ()
    return Reason(
        code=test.code,
        label=test.label,
        quantity=asked.quantity,
        test=asked.text,
        gate=criterion is None,
        weight=criterion.weight if criterion else 0,
        outcome=OUTCOME_WORDS[letter],
        value=value,
        limit=limit,
        text="" if names else text,
        missing=names,
        provisional=test.provisional,
        source=test.source,
        margin=margin(asked, near, value, limit, text),
        instead_of=test.test.quantity if by_other else "",
        limit_moves=asked.of is not None,
    )
