"""Judging: fitness, then rule gates, then the score; whole batches at once.

Fitness failed or unknown: undecided. A gate failed: unfavourable, even with gaps. A gate unknown: favourable and
possible become undecided; unfavourable by score stands. The score is an interval: what is met over all, and what is
met or unknown over all. A verdict is a screening aid, never a resource statement.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from registry.targets.definition import Criterion, Need, TargetDefinition
from registry.targets.evaluation import Outcome, criterion_letters, evaluate_criterion, evaluate_gate, gate_letters
from registry.targets.intervals import Booleans, Floats, Known, Words
from registry.targets.packing import pack_reasons
from registry.targets.quantities import TEXT_RULES, known_of

FAVOURABLE, POSSIBLE, UNFAVOURABLE, UNDECIDED = range(4)
NOT_JUDGED = 255
VERDICT_WORDS = ("favourable", "possible", "unfavourable", "undecided")
#: Samples of these kinds test the laboratory; they get no verdict.
CONTROL_KINDS = ("reference_material", "blank", "duplicate")
TEXT_QUANTITIES = (*TEXT_RULES, "redox_series", "intrusion_shape", "ascent_outcome")


@dataclass
class Verdicts:
    """The verdicts of one target on n samples.

    ``verdict`` uint8 codes into VERDICT_WORDS, 255 for control samples; ``judged`` false there. ``score_min``,
    ``score_max`` and ``coverage`` 0..1, NaN for control samples. ``provisional``: a limit that is not settled took
    part. ``outcomes`` uint8 letters (n, tests), gates first. ``reasons``: JSON texts, empty for control samples.
    """

    verdict: NDArray[np.uint8]
    score_min: Floats
    score_max: Floats
    coverage: Floats
    provisional: Booleans
    judged: Booleans
    outcomes: NDArray[np.uint8]
    reasons: list[str]


def judge(definition: TargetDefinition, workspace: Mapping[str, Any], n: int, known: Known | None = None) -> Verdicts:
    """Judge n samples against one definition.

    ``workspace`` maps names to arrays of shape (n,); a quantity absent from it counts as unknown. ``known``: what
    ``known_of(workspace, n)`` gave, to be shared between targets.
    """
    known = known or known_of(workspace, n)
    outcomes = [evaluate_gate(known, gate) for gate in definition.gates]
    outcomes += [evaluate_criterion(known, criterion) for criterion in definition.criteria]
    fit, cause = _fitness(known)
    letters = np.empty((n, len(outcomes)), dtype=np.uint8)
    for position, outcome in enumerate(outcomes):
        letters[:, position] = np.where(fit, outcome.letters, _U)
    gates, criteria = letters[:, : len(definition.gates)], letters[:, len(definition.gates) :]
    score_min, score_max, coverage = _scores(criteria, definition.criteria)
    allowed, exclusion_only, cause = _needs(known, definition.needs, fit, cause)
    verdict = _decide(definition, gates, score_min, score_max, allowed, exclusion_only)
    provisional = _provisional(definition, gates, criteria, verdict)
    judged = ~_controls(known)
    reasons = pack_reasons(letters, outcomes, cause)
    if not judged.all():
        verdict = np.where(judged, verdict, np.uint8(NOT_JUDGED))
        score_min, score_max, coverage = (np.where(judged, s, np.nan) for s in (score_min, score_max, coverage))
        provisional &= judged
        reasons = [text if keep else "" for text, keep in zip(reasons, judged.tolist(), strict=True)]
    return Verdicts(verdict, score_min, score_max, coverage, provisional, judged, letters, reasons)


def judge_all(definitions: Iterable[TargetDefinition], workspace: Mapping[str, Any], n: int) -> dict[str, Verdicts]:
    """Judge n samples against several definitions by code; each quantity is worked out once for all of them."""
    known = known_of(workspace, n)
    return {definition.code: judge(definition, workspace, n, known) for definition in definitions}


def best(verdicts: Mapping[str, Verdicts], n: int) -> tuple[NDArray[np.object_], NDArray[np.object_]]:
    """The best target and its verdict word by sample, object arrays; None for control samples and without targets.

    Order: favourable, possible, undecided, unfavourable; then the higher least score; then the order of the targets.
    """
    best_target, best_verdict = np.full(n, None, dtype=object), np.full(n, None, dtype=object)
    leading = np.full(n, -np.inf)
    merit = np.full(256, -np.inf)
    merit[[FAVOURABLE, POSSIBLE, UNDECIDED, UNFAVOURABLE]] = (6.0, 4.0, 2.0, 0.0)
    for code, judged in verdicts.items():
        rank = merit[judged.verdict] + np.where(judged.judged, judged.score_min, 0.0)
        better = rank > leading
        leading = np.where(better, rank, leading)
        best_target[better] = code
        best_verdict[better] = np.array(VERDICT_WORDS, dtype=object)[judged.verdict[better]]
    return best_target, best_verdict


def verdict_codes(
    definitions: Iterable[TargetDefinition], workspace: Mapping[str, Any], n: int
) -> dict[str, NDArray[np.uint8]]:
    """What ``judge_all`` gives as ``verdict``, by code, without the reasons, which take most of its time."""
    known = known_of(workspace, n)
    judged, (fit, cause) = ~_controls(known), _fitness(known)
    codes = {}
    for definition in definitions:
        letters = [gate_letters(known, gate) for gate in definition.gates]
        letters += [criterion_letters(known, criterion) for criterion in definition.criteria]
        answered = np.where(fit[:, None], np.stack(letters, axis=1), np.uint8(_U))
        verdict = _verdict_of_letters(definition, known, answered, fit, cause)
        codes[definition.code] = np.where(judged, verdict, np.uint8(NOT_JUDGED))
    return codes


def verdicts_of_outcomes(definition: TargetDefinition, known: Known, letters: NDArray[np.uint8]) -> NDArray[np.uint8]:
    """The verdict codes (k,) that k rows of outcome letters (k, tests) would give one sample, ``known`` with n = 1."""
    return _verdict_of_letters(definition, known, letters, *_fitness(known))


def _verdict_of_letters(
    definition: TargetDefinition, known: Known, letters: NDArray[np.uint8], fit: Booleans, cause: Words
) -> NDArray[np.uint8]:
    gates, criteria = letters[:, : len(definition.gates)], letters[:, len(definition.gates) :]
    score_min, score_max, _ = _scores(criteria, definition.criteria)
    allowed, exclusion_only, _ = _needs(known, definition.needs, fit, cause)
    return _decide(definition, gates, score_min, score_max, allowed, exclusion_only)


_M, _N, _U = (ord(letter) for letter in "mnu")


def _fitness(known: Known) -> tuple[Booleans, Words]:
    """Whether the analysis can be judged, and in which words it cannot."""
    state = known.words("fitness")
    usable = np.array([label in ("fit", "fit with remarks") for label in state.labels])
    fit = usable[state.codes]
    if fit.all():
        return fit, Words(np.zeros(known.n, dtype=np.intp), ("",))
    cause = known.words("fitness_cause")
    labels = (*cause.labels, "the fitness of the analysis is not known")
    codes = np.where(fit, 0, np.where(cause.codes == 0, len(cause.labels), cause.codes))
    return fit, Words(codes, labels)


def is_known(known: Known, name: str) -> Booleans:
    """Where anything at all is known of a quantity, number or text."""
    if name in TEXT_QUANTITIES:
        return ~known.words(name).missing
    return ~known.number(name).missing


def _needs(known: Known, needs: tuple[Need, ...], fit: Booleans, cause: Words) -> tuple[Booleans, Booleans, Words]:
    """Where the sample can be judged, where only an exclusion may stand, and the cause in words."""
    allowed, exclusion_only = fit.copy(), np.zeros(known.n, dtype=bool)
    codes, labels = cause.codes, cause.labels
    for need in needs:
        lacking = ~np.logical_or.reduce([is_known(known, name) for name in need.any_of])
        if need.strict:
            allowed &= ~lacking
        else:
            exclusion_only |= lacking
        codes = np.where(lacking & (codes == 0), len(labels), codes)
        labels = (*labels, need.reason)
    return allowed, exclusion_only, Words(codes, labels)


def _scores(criteria: NDArray[np.uint8], definitions: tuple[Criterion, ...]) -> tuple[Floats, Floats, Floats]:
    weights = np.array([criterion.weight for criterion in definitions], dtype=np.int32)
    met = (criteria == _M) @ weights
    unknown = (criteria == _U) @ weights
    total = int(weights.sum())
    return met / total, (met + unknown) / total, (total - unknown) / total


def _decide(
    definition: TargetDefinition,
    gates: NDArray[np.uint8],
    score_min: Floats,
    score_max: Floats,
    allowed: Booleans,
    exclusion_only: Booleans,
) -> NDArray[np.uint8]:
    failed, unknown = (gates == _N).any(axis=1), (gates == _U).any(axis=1) | exclusion_only
    excluded = failed | (score_max < definition.possible)
    favourable = (score_min >= definition.favourable) & ~unknown
    possible = (score_min >= definition.possible) & (score_max < definition.favourable) & ~unknown
    codes = [UNDECIDED, UNFAVOURABLE, FAVOURABLE, POSSIBLE]
    return np.select([~allowed, excluded, favourable, possible], codes, UNDECIDED).astype(np.uint8)


def _provisional(
    definition: TargetDefinition, gates: NDArray[np.uint8], criteria: NDArray[np.uint8], verdict: NDArray[np.uint8]
) -> Booleans:
    """Whether a provisional limit took part: the failed gates of an exclusion, else every answered test."""
    loose_gates = np.array([gate.provisional for gate in definition.gates], dtype=bool)
    loose = np.array([criterion.provisional for criterion in definition.criteria], dtype=bool)
    failed = gates == _N
    by_gate = failed.any(axis=1) & (verdict == UNFAVOURABLE)
    every_failed_gate_loose = (~failed | loose_gates).all(axis=1)
    answered = ((gates != _U) & loose_gates).any(axis=1) | ((criteria != _U) & loose).any(axis=1)
    return np.where(by_gate, every_failed_gate_loose, answered)


def _controls(known: Known) -> Booleans:
    if "is_control" in known.workspace:
        return known.flag("is_control")
    kind = known.words("sample_kind")
    return np.array([label in CONTROL_KINDS for label in kind.labels])[kind.codes]


__all__ = [
    "CONTROL_KINDS",
    "FAVOURABLE",
    "NOT_JUDGED",
    "POSSIBLE",
    "TEXT_QUANTITIES",
    "UNDECIDED",
    "UNFAVOURABLE",
    "VERDICT_WORDS",
    "Outcome",
    "Verdicts",
    "best",
    "is_known",
    "judge",
    "judge_all",
    "verdict_codes",
    "verdicts_of_outcomes",
]  # fmt: skip
