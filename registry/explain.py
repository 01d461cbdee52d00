"""Why a sample was judged as it was: the verdicts with their reasons in words and numbers, ready to be shown.

The stored reasons are read with the definition that made them, never computed again: what a page says is what was
decided.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from registry.margins import Margin, margin
from registry.store.reading import sample as reading
from registry.targets.definition import Criterion, Gate, TargetDefinition, parse_definition

OUTCOME_WORDS = {"m": "met", "r": "near", "n": "not met", "u": "unknown"}
MISSING = "missing: "


@dataclass(frozen=True)
class Reason:
    """One gate or criterion as it came out. ``value`` is the number, ``text`` what is to be said beside or instead."""

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


@dataclass(frozen=True)
class Missing:
    """Something that was not measured: what it would open in points, and how it is best had."""

    names: tuple[str, ...]
    points: int
    gate: bool
    supply: str


@dataclass(frozen=True)
class Conclusion:
    """The verdict on one sample for one target, with everything that stands behind it."""

    target: str
    name: str
    version: str
    verdict: str
    score_min: float | None
    score_max: float | None
    coverage: float | None
    provisional: bool
    cause: str
    sentences: tuple[str, ...]
    reasons: tuple[Reason, ...]
    missing: tuple[Missing, ...]
    cautions: tuple[str, ...]


@lru_cache(maxsize=64)
def read_definition(text: str) -> TargetDefinition:
    """The definition of a stored text; parsed once."""
    return parse_definition(text)


def explain_sample(connection: Any, sample_id: int) -> list[Conclusion]:
    """The conclusions on a sample, favourable ones first; empty for control samples."""
    return [_conclusion(row) for row in reading.verdict_rows(connection, sample_id)]


def _conclusion(row: dict[str, Any]) -> Conclusion:
    definition = read_definition(row["definition"])
    packed = json.loads(row["reasons"])
    texts = packed.get("texts", {})
    reasons = tuple(
        _reason(test, letter, value, limit, texts.get(str(position), ""))
        for position, (test, letter, value, limit) in enumerate(
            zip(definition.tests, packed["outcomes"], packed["values"], packed["thresholds"], strict=True)
        )
    )
    cause = texts.get("cause", "")
    return Conclusion(
        target=row["target"],
        name=row["target_name"],
        version=row["version"],
        verdict=row["verdict"],
        score_min=row["score_min"],
        score_max=row["score_max"],
        coverage=row["coverage"],
        provisional=bool(row["provisional"]),
        cause=cause,
        sentences=(_summary(definition, row, reasons, cause),),
        reasons=reasons,
        missing=_missing(definition, reasons),
        cautions=definition.cautions,
    )


def _reason(test: Gate | Criterion, letter: str, value: float | None, limit: float | None, text: str) -> Reason:
    criterion = test if isinstance(test, Criterion) else None
    names = tuple(text.removeprefix(MISSING).split(", ")) if text.startswith(MISSING) else ()
    return Reason(
        code=test.code,
        label=test.label,
        quantity=test.test.quantity,
        test=test.test.text,
        gate=criterion is None,
        weight=criterion.weight if criterion else 0,
        outcome=OUTCOME_WORDS[letter],
        value=value,
        limit=limit,
        text="" if names else text,
        missing=names,
        provisional=test.provisional,
        source=test.source,
        margin=margin(test.test, criterion.near if criterion else None, value, limit, text),
    )


def _missing(definition: TargetDefinition, reasons: tuple[Reason, ...]) -> tuple[Missing, ...]:
    """What was not measured, dearest first: gates before weights, then by the points it would open."""
    points: dict[tuple[str, ...], int] = {}
    gates: set[tuple[str, ...]] = set()
    for reason in reasons:
        if reason.outcome == "unknown" and reason.missing:
            points[reason.missing] = points.get(reason.missing, 0) + reason.weight
            if reason.gate:
                gates.add(reason.missing)
    found = []
    for names, weight in points.items():
        supply = dict.fromkeys(definition.supply[name] for name in names if name in definition.supply)
        found.append(Missing(names, weight, names in gates, "; ".join(supply)))
    return tuple(sorted(found, key=lambda lacking: (not lacking.gate, -lacking.points)))


def _summary(definition: TargetDefinition, row: dict[str, Any], reasons: tuple[Reason, ...], cause: str) -> str:
    """One sentence: how the score stands to the limits of the target, or why nothing could be judged."""
    if cause and row["verdict"] == "undecided":
        return f"It cannot be judged: {cause}."
    failed = [reason for reason in reasons if reason.gate and reason.outcome == "not met"]
    if failed and row["verdict"] == "unfavourable":
        return "Ruled out: " + "; ".join(f"{r.label} fails the rule {r.quantity} {r.test}" for r in failed) + "."
    met = round(100 * (row["score_min"] or 0.0))
    unknown = round(100 * ((row["score_max"] or 0.0) - (row["score_min"] or 0.0)))
    return (
        f"{met} of 100 points are met and {unknown} unknown; favourable begins at {100 * definition.favourable:.0f}, "
        f"unfavourable lies below {100 * definition.possible:.0f}."
    )
