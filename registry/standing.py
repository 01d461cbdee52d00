"""How the samples of an intrusion or site stand to each target: counts, the best of them, what to assay next."""

from __future__ import annotations

import re
import statistics
from collections import Counter
from collections.abc import Collection, Iterable, Sequence
from dataclasses import dataclass
from heapq import nlargest
from typing import Any

from registry.explain import MISSING, Conclusion, explain_chosen, read_definition
from registry.store.reading import intrusions as reading
from registry.store.reading import targets as targets_reading
from registry.store.reading.doubts import doubted_samples
from registry.store.sheets import VERDICT_WORDS
from registry.targets.definition import Criterion, TargetDefinition
from registry.targets.redox_words import REMEDIES

#: Best samples named for each target.
BEST_NAMED = 3
#: Favourable samples come before possible ones, and those before all others, which only their scores tell apart.
_RANK = {0: 0, 1: 1, 2: 2, 3: 2}
_LACKING = re.compile(rf'"(\d+)":"(?:{MISSING}([^"]*)|({"|".join(map(re.escape, REMEDIES))}))"')
_CAUSE = re.compile(r'"cause":"([^"]*)"')


@dataclass(frozen=True)
class Lacking:
    """What undecided samples lack: its name and remedy in words, in how many it is open, the points it opens in all."""

    name: str
    remedy: str
    samples: int
    points: int


@dataclass(frozen=True)
class Best:
    """One of the best samples: its code, verdict in words and score as shares of the points."""

    sample_id: int
    code: str
    verdict: str
    score_min: float | None
    score_max: float | None


@dataclass(frozen=True)
class Standing:
    """The samples of one place against one target. ``conclusion`` is that of the best sample.

    ``doubted`` counts those among ``counts`` whose chemistry stands against their intrusion or their log; none of them
    is a best sample.
    """

    target: str
    name: str
    counts: dict[str, int]
    samples: int
    median_score: float | None
    best_score: float | None
    best: tuple[Best, ...]
    lacking: tuple[Lacking, ...]
    causes: tuple[tuple[str, int], ...]
    cautions: tuple[str, ...]
    doubted: dict[str, int]
    conclusion: Conclusion | None = None

    @property
    def shares(self) -> tuple[float, float]:
        """Shares of favourable and of possible samples, those of doubted identity left out."""
        return reading.shares_of(self.counts, self.doubted)

    @property
    def leading(self) -> str | None:
        """The word for all samples: the best verdict, undecided only where most of them are; None: no sample.

        A sample of doubted identity lends its verdict to no place.
        """
        if not self.samples:
            return None
        word = next((word for word in ("favourable", "possible") if self.counts[word] > self.doubted[word]), None)
        return word or ("undecided" if 2 * self.counts["undecided"] > self.samples else "unfavourable")


def standings(connection: Any, column: str, key: int, explained: Collection[str] = VERDICT_WORDS) -> list[Standing]:
    """The standing for every target of the samples with that ``intrusion_id`` or ``site_id`` (``column``).

    The target with the greatest share of favourable samples comes first, then of possible ones, then by median score;
    samples of doubted identity are left out of the shares and never called best. The best sample's conclusion is
    worked out where its verdict is one of ``explained``.
    """
    targets = targets_reading.active_targets(connection)
    rows = reading.judged_samples(connection, column, key)
    by_target: dict[int, list[tuple[Any, ...]]] = {target["target_id"]: [] for target in targets}
    for row in rows:
        if row[0] in by_target:
            by_target[row[0]].append(row)
    doubted = doubted_samples(connection, column, key)
    leaders = {
        target_id: _best_of([row for row in part if row[4] not in doubted]) for target_id, part in by_target.items()
    }
    codes = reading.sample_codes(connection, sorted({row[4] for part in leaders.values() for row in part}))
    firsts = [(leaders[target["target_id"]][0], target["code"]) for target in targets if leaders[target["target_id"]]]
    conclusions = explain_chosen(
        connection, [(row[4], code) for row, code in firsts if VERDICT_WORDS[row[1]] in explained]
    )
    found = [
        _standing(target, by_target[target["target_id"]], leaders[target["target_id"]], codes, conclusions, doubted)
        for target in targets
    ]
    order = {"favourable": 0, "possible": 1, "undecided": 2, "unfavourable": 3, None: 4}
    return sorted(
        found,
        key=lambda one: (-one.shares[0], -one.shares[1], order[one.leading], -(one.median_score or 0.0)),
    )


def _best_of(rows: Sequence[tuple[Any, ...]]) -> list[tuple[Any, ...]]:
    """The best few verdicts: by verdict, then least and greatest score, then the older sample."""
    best: list[tuple[Any, ...]] = []
    for rank in sorted({_RANK[row[1]] for row in rows}):
        equals = [row for row in rows if _RANK[row[1]] == rank]
        best += nlargest(BEST_NAMED - len(best), equals, key=lambda row: (row[2] or 0.0, row[3] or 0.0, -row[4]))
        if len(best) == BEST_NAMED:
            break
    return best


def shared_cautions(found: Sequence[Standing]) -> tuple[str, ...]:
    """Cautions that every target has, in the order of the first: they need not be said of each."""
    if not found:
        return ()
    common = set.intersection(*(set(one.cautions) for one in found))
    return tuple(caution for caution in found[0].cautions if caution in common)


def _standing(
    target: dict[str, Any],
    rows: Sequence[tuple[Any, ...]],
    leaders: Sequence[tuple[Any, ...]],
    codes: dict[int, str],
    conclusions: dict[tuple[int, str], Conclusion],
    doubted: Collection[int],
) -> Standing:
    definition = read_definition(target["definition"])
    counted = Counter(row[1] for row in rows)
    unsure = Counter(row[1] for row in rows if row[4] in doubted)
    scores = [row[2] for row in rows if row[2] is not None]
    best_scores = [row[2] for row in rows if row[2] is not None and row[4] not in doubted]
    lacking, causes = lacking_of(definition, (row[5] for row in rows if row[5] is not None))
    return Standing(
        target=target["code"],
        name=target["name"],
        counts={word: counted.get(code, 0) for code, word in enumerate(VERDICT_WORDS)},
        samples=len(rows),
        median_score=statistics.median(scores) if scores else None,
        best_score=max(best_scores) if best_scores else None,
        best=tuple(Best(row[4], codes[row[4]], VERDICT_WORDS[row[1]], row[2], row[3]) for row in leaders),
        lacking=lacking,
        causes=causes,
        cautions=definition.cautions,
        doubted={word: unsure.get(code, 0) for code, word in enumerate(VERDICT_WORDS)},
        conclusion=conclusions.get((leaders[0][4], target["code"])) if leaders else None,
    )


def lacking_of(
    definition: TargetDefinition, reasons: Iterable[str]
) -> tuple[tuple[Lacking, ...], tuple[tuple[str, int], ...]]:
    """What the samples of these packed reasons lack, worth most first, and the causes of not being judged with counts.

    The points of a criterion count once for each thing it lacks in a sample, as on the page of the sample itself.
    Where something was measured and does not tell, it is named by the ground, with the remedy for that.
    """
    weights = {
        position: item.weight if isinstance(item, Criterion) else 0 for position, item in enumerate(definition.tests)
    }
    points: Counter[str] = Counter()
    samples: Counter[str] = Counter()
    causes: Counter[str] = Counter()
    for packed in reasons:
        named: set[str] = set()
        for position, names, ground in _LACKING.findall(packed):
            for name in (ground,) if ground else names.split(", "):
                points[name] += weights.get(int(position), 0)
                named.add(name)
        samples.update(named)
        if cause := _CAUSE.search(packed):
            causes[cause.group(1)] += 1
    lacking = [
        Lacking(name, REMEDIES.get(name) or definition.supply.get(name, ""), samples[name], points[name])
        for name in samples
    ]
    lacking.sort(key=lambda one: (-one.points, -one.samples, one.name))
    return tuple(lacking), tuple(causes.most_common())


@dataclass(frozen=True)
class Open:
    """What opens most undecided verdicts of the registry: in how many verdicts, worth how many points, for whom."""

    name: str
    remedy: str
    verdicts: int
    points: int
    targets: tuple[str, ...]


def dearest_lacking(parts: Iterable[tuple[str, TargetDefinition, Sequence[str]]]) -> list[Open]:
    """What the undecided verdicts lack over all targets, worth most first; ``parts``: (name, definition, reasons).

    Samples that cannot be judged at all are left out: what they need first is an analysis that can.
    """
    points: Counter[str] = Counter()
    verdicts: Counter[str] = Counter()
    named: dict[str, list[str]] = {}
    remedies: dict[str, str] = {}
    for target, definition, reasons in parts:
        fit = (packed for packed in reasons if _CAUSE.search(packed) is None)
        for one in lacking_of(definition, fit)[0]:
            points[one.name] += one.points
            verdicts[one.name] += one.samples
            named.setdefault(one.name, []).append(target)
            remedies.setdefault(one.name, one.remedy)
    found = [Open(name, remedies[name], verdicts[name], points[name], tuple(named[name])) for name in verdicts]
    return sorted(found, key=lambda one: (-one.points, -one.verdicts, one.name))
