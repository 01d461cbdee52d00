"""One test on what is known: met, near, not met or unknown, with the value, the limit and the words for it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from registry.targets.definition import Criterion, Gate
from registry.targets.grammar import Condition
from registry.targets.intervals import Booleans, Floats, Interval, Known, Words, interval_text

MET, NEAR, NOT_MET, UNKNOWN = (ord(letter) for letter in "mrnu")


@dataclass(frozen=True)
class Outcome:
    """``letters`` uint8; ``values`` NaN where not a point; ``limits`` NaN for text tests; ``texts`` what to show."""

    letters: NDArray[np.uint8]
    values: Floats
    limits: Floats
    texts: Words


def evaluate(known: Known, condition: Condition) -> tuple[Booleans, Booleans]:
    """Where a condition surely holds and where it surely fails; neither: unknown."""
    if condition.is_text:
        words = known.words(condition.quantity)
        holds = np.array([label in condition.words for label in words.labels])[words.codes] & ~words.missing
        return holds, ~holds & ~words.missing
    value = known.number(condition.quantity)
    if condition.sign == "between":
        above = _compare(value, _constant(condition.constant, known), ">=")
        under = _compare(value, _constant(condition.upper, known), "<=")
        return above[0] & under[0], above[1] | under[1]
    return _compare(value, limit_of(known, condition), condition.sign)


def limit_of(known: Known, condition: Condition) -> Interval:
    """The limit as an interval: ``constant + slope * of``."""
    if condition.of is None:
        return _constant(condition.constant, known)
    other = known.number(condition.of)
    first, last = (other.low, other.high) if condition.slope >= 0.0 else (other.high, other.low)
    low = condition.constant + condition.slope * first
    if other.exact:
        return Interval(low, low)
    open_low, open_high = other.ends() if condition.slope >= 0.0 else other.ends()[::-1]
    return Interval(low, condition.constant + condition.slope * last, open_low, open_high)


def _constant(number: float, known: Known) -> Interval:
    values = np.full(known.n, number)
    return Interval(values, values)


def _compare(value: Interval, limit: Interval, sign: str) -> tuple[Booleans, Booleans]:
    if sign in ("<=", "<"):
        value, limit = limit, value
        # v <= t is t >= v
    strict = sign in ("<", ">")
    if value.exact and limit.exact:
        holds = value.low > limit.low if strict else value.low >= limit.low
        return holds, ~holds & ~np.isnan(value.low) & ~np.isnan(limit.low)
    value_open_low, value_open_high = value.ends()
    limit_open_low, limit_open_high = limit.ends()
    touching_ends_open = value_open_low | limit_open_high
    if strict:
        holds = (value.low > limit.high) | ((value.low == limit.high) & touching_ends_open)
        fails = value.high <= limit.low
    else:
        holds = value.low >= limit.high
        fails = (value.high < limit.low) | ((value.high == limit.low) & (value_open_high | limit_open_low))
    return holds, fails


def gate_letters(known: Known, gate: Gate) -> NDArray[np.uint8]:
    """Outcome letters (n,) of a gate."""
    met, failed = evaluate(known, gate.test)
    return np.where(met, MET, np.where(failed, NOT_MET, UNKNOWN)).astype(np.uint8)


def evaluate_gate(known: Known, gate: Gate) -> Outcome:
    return Outcome(gate_letters(known, gate), *_shown(known, gate.test))


def criterion_letters(known: Known, criterion: Criterion) -> NDArray[np.uint8]:
    """Outcome letters (n,) of a criterion with its alternative, its precondition and its near band."""
    letters = _letters_of_tests(known, criterion)
    if criterion.only_if:
        fails, open_question = _precondition(known, criterion, letters)
        letters = _under_precondition(letters, fails, open_question)
    return letters


def evaluate_criterion(known: Known, criterion: Criterion) -> Outcome:
    """The outcome of a criterion with its alternative, its precondition and its near band."""
    letters = _letters_of_tests(known, criterion)
    values, limits, texts = _shown(known, criterion.test)
    if criterion.otherwise is not None:
        instead = _instead(known, criterion)
        other_values, other_limits, other_texts = _shown(known, criterion.otherwise)
        values, limits = np.where(instead, other_values, values), np.where(instead, other_limits, limits)
        merged = np.where(instead, other_texts.codes + len(texts.labels), texts.codes)
        texts = Words(np.where(instead & (other_texts.codes == 0), 0, merged), (*texts.labels, *other_texts.labels))
    if criterion.only_if:
        fails, open_question = _precondition(known, criterion, letters)
        letters = _under_precondition(letters, fails, open_question)
        texts = _precondition_texts(criterion, fails, open_question, texts)
    return Outcome(letters, values, limits, texts)


def _letters_of_tests(known: Known, criterion: Criterion) -> NDArray[np.uint8]:
    """The letters of the test, or of the other one where that takes its place."""
    letters = _letters(known, criterion.test, criterion.near)
    if criterion.otherwise is None:
        return letters
    other = _letters(known, criterion.otherwise, criterion.otherwise_near)
    return np.where(_instead(known, criterion), other, letters)


def _instead(known: Known, criterion: Criterion) -> Booleans:
    """Where the quantity of a criterion is not known and that of its alternative is."""
    assert criterion.otherwise is not None
    return known.number(criterion.test.quantity).missing & ~known.number(criterion.otherwise.quantity).missing


def _letters(known: Known, test: Condition, near: Condition | None) -> NDArray[np.uint8]:
    met, failed = evaluate(known, test)
    letters = np.where(met, MET, np.where(failed, NOT_MET, UNKNOWN)).astype(np.uint8)
    if near is not None:
        letters[failed & evaluate(known, near)[0]] = NEAR
    return letters


def _precondition(known: Known, criterion: Criterion, letters: NDArray[np.uint8]) -> tuple[Booleans, Booleans]:
    """Where the precondition fails, and where it is not known while the test is met."""
    holds, fails = np.ones(known.n, dtype=bool), np.zeros(known.n, dtype=bool)
    for condition in criterion.only_if:
        this_holds, this_fails = evaluate(known, condition)
        holds &= this_holds
        fails |= this_fails
    return fails, ~holds & ~fails & (letters == MET)


def _under_precondition(letters: NDArray[np.uint8], fails: Booleans, open_question: Booleans) -> NDArray[np.uint8]:
    """False precondition: not met. Unknown precondition: unknown unless the test already fails."""
    return np.where(fails, NOT_MET, np.where(open_question, UNKNOWN, letters)).astype(np.uint8)


def _precondition_texts(criterion: Criterion, fails: Booleans, open_question: Booleans, texts: Words) -> Words:
    spelled = " and ".join(f"{c.quantity} {c.text}" for c in criterion.only_if)
    labels = (*texts.labels, f"counts only if {spelled}", f"counts only if {spelled}, which is not known")
    return Words(np.where(fails, len(labels) - 2, np.where(open_question, len(labels) - 1, texts.codes)), labels)


def _shown(known: Known, test: Condition) -> tuple[Floats, Floats, Words]:
    nothing = np.full(known.n, np.nan)
    if test.is_text:
        words, why = known.words(test.quantity), known.why_unknown(test.quantity)
        first = len(words.labels)
        absent = np.where(why.codes == 0, first, first + why.codes)
        codes = np.where(words.missing, absent, words.codes)
        return nothing, nothing, Words(codes, (*words.labels, f"missing: {test.quantity}", *why.labels[1:]))
    value = known.number(test.quantity)
    if test.sign == "between":
        centre = 0.5 * (test.constant + test.upper)
        limits = np.where(value.point > centre, test.upper, test.constant)
    else:
        limits = limit_of(known, test).point
    return value.point, limits, _texts(known, test, value)


def _texts(known: Known, test: Condition, value: Interval) -> Words:
    """Intervals in words, and the names of what is missing where nothing is known."""
    names = [*known.inputs(test.quantity), *(known.inputs(test.of) if test.of else ())]
    codes, labels = np.zeros(known.n, dtype=np.intp), [""]
    other_missing = known.number(test.of).missing if test.of else np.zeros(known.n, dtype=bool)
    blank = value.missing | other_missing
    if blank.any():
        mask = np.zeros(known.n, dtype=np.intp)
        for bit, name in enumerate(names):
            mask |= np.where(_is_missing(known, name), 1 << bit, 0)
        for combination in np.unique(mask[blank]).tolist():
            absent = [name for bit, name in enumerate(names) if combination >> bit & 1]
            labels.append("missing: " + ", ".join(absent or [test.quantity]))
            codes[blank & (mask == combination)] = len(labels) - 1
    straddling = np.flatnonzero(value.straddles())
    if straddling.size:
        open_low, open_high = value.ends()
        seen: dict[str, int] = {}
        ends = zip(
            value.low[straddling].tolist(), value.high[straddling].tolist(),
            open_low[straddling].tolist(), open_high[straddling].tolist(), strict=True,
        )  # fmt: skip
        first = len(labels)
        codes[straddling] = [first + seen.setdefault(interval_text(*end), len(seen)) for end in ends]
        labels += list(seen)
    return Words(codes, tuple(labels))


def _is_missing(known: Known, name: str) -> Booleans:
    if name == "intrusion_shape":
        return known.words(name).missing
    return known.number(name).missing
