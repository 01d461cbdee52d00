"""The argument of one verdict in words: the sentences, what would turn it, what contradicts it, what is missing."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
import orjson

from registry.petrology.analytes import QUALIFIER_BELOW
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_WORDS
from registry.petrology.intrusion_heat import ASSUMED_AGE_SIGMA
from registry.targets import redox_words
from registry.targets.definition import OPTIONAL_PART, Criterion, Gate, Phrase, TargetDefinition
from registry.targets.engine import (
    POSSIBLE,
    TEXT_QUANTITIES,
    UNDECIDED,
    VERDICT_WORDS,
    is_known,
    judge,
    verdicts_of_outcomes,
)
from registry.targets.evaluation import evaluate
from registry.targets.grammar import Condition
from registry.targets.intervals import Known, interval_text
from registry.targets.quantities import known_of
from registry.targets.stored_sample import workspace_of_sample

NOT_KNOWN = "not known"
#: ``{name}``, ``{name unit}`` (the unit only where something is known) or ``{points.met}`` and the like.
_PLACEHOLDER = re.compile(r"\{([a-z0-9_]+)(?:\.([a-z0-9_]+))?( [^}]+)?\}")


def number_text(value: float) -> str:
    """Three significant digits without an exponent where the number is of ordinary size."""
    if value == 0.0 or not np.isfinite(value):
        return f"{value:g}"
    if not 1e-4 <= abs(value) < 1e7:
        return f"{value:.3g}"
    rounded = float(f"{value:.2e}")
    return f"{rounded:.{max(0, 2 - int(np.floor(np.log10(abs(rounded)))))}f}"


def argue(
    definition: TargetDefinition,
    sample: Mapping[str, Any],
    reasons: str | Mapping[str, Any] | None = None,
    conventions: Conventions | None = None,
) -> dict[str, Any]:
    """The argument of one sample's verdict on one target.

    ``sample``: its stored row (composition, derived, context) by column name; ``reasons``: the stored JSON, else it is
    judged here. Returns plain texts: ``verdict argument cause`` (texts, cause may be None) and the lists
    ``would_turn failed_rules near_misses contradictions missing cautions`` (would_turn: what alone would give another
    verdict; missing: worth most first, with what supplies it; cautions: without those that surely do not concern
    it). ``instead`` lists the codes of the criteria that were judged by their other quantity.
    """
    workspace = workspace_of_sample(sample, conventions)
    known = known_of(workspace, 1)
    verdicts = judge(definition, workspace, 1, known)
    stored = orjson.loads(verdicts.reasons[0] or "{}") if reasons is None else reasons
    if isinstance(stored, str | bytes):
        stored = orjson.loads(stored)
    page = _Argument(definition, sample, known, stored)
    code = int(verdicts.verdict[0])
    return {
        "verdict": VERDICT_WORDS[code] if code < len(VERDICT_WORDS) else "not judged",
        "argument": page.sentences(),
        "cause": stored.get("texts", {}).get("cause"),
        **page.turning(),
        "instead": [criterion.code for criterion in definition.criteria if page.by_other(criterion)],
        "contradictions": page.contradictions(),
        "missing": page.missing(),
        "cautions": page.cautions(),
    }


class _Argument:
    """One sample's reasons, read criterion by criterion."""

    def __init__(
        self, definition: TargetDefinition, sample: Mapping[str, Any], known: Known, reasons: Mapping[str, Any]
    ) -> None:
        self.definition = definition
        self.sample = sample
        self.known = known
        letters = reasons.get("outcomes", "u" * len(definition.tests))
        self.outcomes = {item.code: letter for item, letter in zip(definition.tests, letters, strict=True)}
        limits = reasons.get("thresholds", [None] * len(definition.tests))
        self.limits = {item.code: limit for item, limit in zip(definition.tests, limits, strict=True)}

    def points(self, letter: str) -> int:
        return sum(c.weight for c in self.definition.criteria if self.outcomes[c.code] == letter)

    def provisional_points(self) -> int:
        criteria = self.definition.criteria
        return sum(c.weight for c in criteria if self.outcomes[c.code] == "m" and c.provisional)

    # sentences

    def sentences(self) -> str:
        text = OPTIONAL_PART.sub(lambda part: part[1] if self._is_told(part[1]) else "", self.definition.argument)
        return _PLACEHOLDER.sub(self._fill, text)

    def _is_told(self, part: str) -> bool:
        return NOT_KNOWN not in map(self._fill, _PLACEHOLDER.finditer(part))

    def _fill(self, match: re.Match[str]) -> str:
        name, part, unit = match.groups()
        text = self._fill_value(name) if part is None else self._fill_part(name, part)
        return text if unit is None or text == NOT_KNOWN else text + unit

    def _fill_value(self, name: str) -> str:
        special = {
            "redox_series": lambda: redox_words.state_of(self.known, NOT_KNOWN),
            "redox_source": lambda: redox_words.source_of(self.known, self.sample.get("redox_evidence")),
            "density_basis": self._density_basis,
            "two_sigma": self._two_sigma,
            "because_missing": self._because_missing,
        }.get(name)
        return special() if special else self.value_text(name)

    def _fill_part(self, name: str, part: str) -> str:
        if name == "points":
            values = {"met": self.points("m"), "unknown": self.points("u"), "provisional": self.provisional_points()}
            return str(values[part])
        if name == "threshold":
            limit = self.limits[part]
            return NOT_KNOWN if limit is None else number_text(limit)
        if name == "digestion":
            code = int(np.asarray(self.known.workspace.get(f"digestion:{part}", [0]))[0])
            return DIGESTION_WORDS[code]
        if name == "phrase":
            return self._fill_phrase(self.definition.phrases[part])
        raise KeyError(f"the argument of {self.definition.code} asks for '{name}.{part}', which is not known")

    def _fill_phrase(self, phrase: Phrase) -> str:
        met = [code for code in phrase.criteria if self.outcomes[code] == "m"]
        failed = [code for code in phrase.criteria if self.outcomes[code] in "nr"]
        if not failed:
            return phrase.met if len(met) == len(phrase.criteria) else phrase.unknown
        if not met or phrase.part is None:
            return phrase.not_met
        labels = {item.code: item.label for item in self.definition.tests}
        named = [" and ".join(labels[code] for code in codes) for codes in (met, failed)]
        return phrase.part.format(met=named[0], not_met=named[1])

    def value_text(self, name: str) -> str:
        """A quantity as it is known: three digits, an interval, a word, or 'not known'."""
        if name in TEXT_QUANTITIES:
            words = self.known.words(name)
            return words.labels[int(words.codes[0])] or NOT_KNOWN
        value = self.known.number(name)
        if value.missing[0]:
            return NOT_KNOWN
        low, high = float(value.low[0]), float(value.high[0])
        open_low, open_high = value.ends()
        return interval_text(low, high, bool(open_low[0]), bool(open_high[0])) or number_text(low)

    def _density_basis(self) -> str:
        return "the default of its silica class" if self.sample.get("density_kg_m3") is None else "measured"

    def _two_sigma(self) -> str:
        sigma, age = self.sample.get("age_sigma_ma"), self.sample.get("age_ma")
        if sigma is None and age is None:
            return NOT_KNOWN
        spread = sigma if sigma is not None else ASSUMED_AGE_SIGMA * float(age or 0)
        return f"{number_text(2.0 * spread)} (2 sigma)"

    def _because_missing(self) -> str:
        names = [words.split(" by ")[0] for words, _ in self._missing_inputs()]
        return f"; open because of {', '.join(names)}" if names else ""

    # what would turn it, what contradicts it, what is missing

    def turning(self) -> dict[str, list[str]]:
        """Failed rules and near misses, the heaviest first: ``would_turn`` holds those that alone change the verdict.

        The others stand in ``failed_rules`` and ``near_misses``.
        """
        told: dict[str, list[str]] = {"would_turn": [], "failed_rules": [], "near_misses": []}
        failed = [gate for gate in self.definition.gates if self.outcomes[gate.code] == "n"]
        near = [c for c in self.definition.criteria if self.outcomes[c.code] == "r"]
        items: list[Gate | Criterion] = [*failed, *sorted(near, key=lambda c: -c.weight)]
        for item, word in zip(items, self._verdicts_if_met(items), strict=True):
            text = f"{item.label}: {self._against(item)}"
            if isinstance(item, Criterion):
                text += f", a near miss worth {item.weight} points" if word else f", worth {item.weight} points"
            else:
                text += "; while this rule fails the verdict is unfavourable"
            if word:
                told["would_turn"].append(f"{text}; if it were met: {word}")
            else:
                told["near_misses" if isinstance(item, Criterion) else "failed_rules"].append(text)
        return told

    def _verdicts_if_met(self, items: Sequence[Gate | Criterion]) -> list[str | None]:
        """The verdict in words that each item, met alone, would give; None where it is the verdict as it stands."""
        codes = [item.code for item in self.definition.tests]
        rows = np.array([[ord(self.outcomes[code]) for code in codes]] * (len(items) + 1), dtype=np.uint8)
        for row, item in enumerate(items, start=1):
            rows[row, codes.index(item.code)] = ord("m")
        now, *then = verdicts_of_outcomes(self.definition, self.known, rows).tolist()
        same = {now, UNDECIDED} if now == POSSIBLE else {now}  # a possible sample that is left open has gained nothing
        return [None if code in same else VERDICT_WORDS[code] for code in then]

    def by_other(self, item: Gate | Criterion) -> bool:
        """Whether a criterion was judged by its other quantity, its own being unknown."""
        if not isinstance(item, Criterion) or item.otherwise is None:
            return False
        own, other = (self.known.number(test.quantity).missing[0] for test in (item.test, item.otherwise))
        return bool(own and not other)

    def _against(self, item: Gate | Criterion) -> str:
        test, name = item.test, ""
        if isinstance(item, Criterion) and item.otherwise is not None and self.by_other(item):
            test, name = item.otherwise, f"{item.otherwise.quantity} "
        limit = self.limits[item.code]
        asked = test.text if limit is None else f"{test.sign} {number_text(limit)}"
        if test.sign == "between":
            asked = test.text
        return f"{name}{self.value_text(test.quantity)}, asked for {asked}"

    def contradictions(self) -> list[str]:
        return [
            contradiction.label
            for contradiction in self.definition.contradictions
            if all(evaluate(self.known, test)[0][0] for test in contradiction.tests)
        ]

    def cautions(self) -> list[str]:
        tests = self.definition.caution_tests
        return [
            text
            for text in self.definition.cautions
            if not any(evaluate(self.known, test)[1][0] for test in tests.get(text, ()))
        ]

    def missing(self) -> list[str]:
        """What to determine, worth most first, with the digestion or reading that supplies it."""
        return [
            f"{words} (opens {weight} of 100 points)" if weight else f"{words} (needed before it can be judged)"
            for words, weight in self._missing_inputs()
        ]

    def _missing_inputs(self) -> list[tuple[str, int]]:
        weights: dict[str, int] = {}
        for need in self.definition.needs:
            if not any(is_known(self.known, name)[0] for name in need.any_of):
                weights |= {name: weights.get(name, 0) for name in self._open_parts(need.any_of[0])}
        for item in self.definition.tests:
            if self.outcomes[item.code] != "u":
                continue
            weight = item.weight if isinstance(item, Criterion) else 0
            for name in self._open_inputs(item):
                weights[name] = weights.get(name, 0) + weight
        told: dict[str, int] = {}
        for name, weight in sorted(weights.items(), key=lambda pair: -pair[1]):
            words = self._remedy(name)
            told[words] = max(told.get(words, 0), weight)
        return list(told.items())

    def _remedy(self, name: str) -> str:
        words = self.definition.supply.get(name, name)
        if name in TEXT_QUANTITIES:
            why = self.known.why_unknown(name)
            ground = why.labels[int(why.codes[0])]
            return redox_words.REMEDIES.get(ground, words)
        below = np.asarray(self.known.workspace.get(f"qualifier:{name}", [0]))[0] == QUALIFIER_BELOW
        return f"{words}, with a lower detection limit" if below else words

    def _open_inputs(self, item: Gate | Criterion) -> list[str]:
        conditions: list[Condition] = [item.test, *(item.only_if if isinstance(item, Criterion) else ())]
        names: dict[str, None] = {}
        for condition in conditions:
            for quantity in filter(None, (condition.quantity, condition.of)):
                names |= dict.fromkeys(self._open_parts(quantity))
        return list(names)

    def _open_parts(self, quantity: str) -> list[str]:
        """The inputs that keep a quantity open; itself where none of them can be named."""
        if not self._is_open(quantity):
            return []
        return [name for name in self.known.inputs(quantity) if self._is_open(name)] or [quantity]

    def _is_open(self, name: str) -> bool:
        if name in TEXT_QUANTITIES:
            return bool(self.known.words(name).missing[0])
        value = self.known.number(name)
        return bool(value.missing[0] or value.straddles()[0])
