"""How often a verdict survives analytical error: analyses drawn within it, derived and judged as the real one is.

The probability of a verdict is the share of draws that give it again. It is the chance that the verdict survives
analytical error, not the chance of ore. Everything else is held: what is known around the sample (intrusion, area,
log), the bias of the batch, which result was chosen for a column. The error model is
``registry.petrology.analytical_error``; a sample's draws follow from its id and the conventions alone.
"""

from __future__ import annotations

import hashlib
import itertools
import json
import os
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from registry.choice import TracedChoice, trace_choice
from registry.computing import Helpers
from registry.controlling import held_columns
from registry.errors import PlutonbookError, UsageError
from registry.judging import Rules, read_rules
from registry.petrology.analytical_error import ErrorModel, drawn
from registry.petrology.conventions import Conventions
from registry.petrology.counted_normals import keys_of
from registry.pipeline import CHUNK_SIZE, Chunk, judged_only
from registry.progress import Progress
from registry.refresh import as_blocks
from registry.store import loading, survival_rows
from registry.store.bulk import verdicts_of
from registry.store.engine import Registry, reading, writing
from registry.store.verdict_rows import NO_VERDICT

#: Draws judged between two commits: some seconds of work are lost to an interruption.
DRAWS_A_COMMIT = 400_000
#: Below so many draws child processes would take longer to start than they save; with more of them than this the one
#: that reads and writes would be waited for.
WORTH_HELPERS, MOST_PROCESSES = 400_000, 8
#: Reference results needed before their spread is taken: that of ten is known to a quarter of itself, 1/sqrt(2 (n - 1))
#: for normal errors (recomputed).
NEEDED_REFERENCES = 10


@dataclass(frozen=True)
class Inputs:
    """All that the probabilities of n samples hang on; ``stored``: their verdict codes, uint8 (targets, n)."""

    chunk: Chunk
    model: ErrorModel
    stored: np.ndarray

    def part(self, start: int, stop: int) -> Inputs:
        """Those of samples start to stop."""
        return Inputs(self.chunk.part(start, stop), self.model.part(start, stop), self.stored[:, start:stop])


def draw_probabilities(
    registry: Registry,
    intrusions: Sequence[str] = (),
    progress: Progress | None = None,
    tell: Callable[[str], Any] | None = None,
) -> int:
    """Compute the probability of every verdict that has none; of how many samples.

    ``intrusions``: of their samples only (UsageError names those that are not there). Committed every few seconds, so
    that an interrupted run goes on where it stopped; the registry is locked only while shares are written. Samples
    that wait to be derived anew are left out, and so are those that change meanwhile.
    """
    with writing(registry, what="drawing probabilities", tell=tell) as connection:
        rules = read_rules(connection)
    with reading(registry) as connection:
        wanted = _intrusion_ids(connection, intrusions) if intrusions else None
        total = survival_rows.count_waiting(connection, wanted)
    size = max(1, DRAWS_A_COMMIT // draws_of(rules.conventions))
    done = seen = last = 0
    with Helpers(_helpers_for(total, rules.conventions)) as helpers:
        while True:
            if progress is not None:
                progress("drawing within analytical error", seen, total)
            with reading(registry) as connection:
                ids = survival_rows.waiting(connection, last, size, wanted)
                if not len(ids):
                    return done
                before = inputs_of(connection, ids, rules)
            shares = _shared(helpers, before, rules)
            with writing(registry, what="writing probabilities", tell=tell) as connection:
                done += _write(connection, before, shares, rules)
            seen, last = seen + len(ids), int(ids[-1])


def _helpers_for(samples: int, conventions: Conventions) -> int:
    """Child processes beside this one: a processor each, none where little is to be done."""
    if samples * draws_of(conventions) < WORTH_HELPERS:
        return 0
    return max(0, min(MOST_PROCESSES, os.cpu_count() or 1) - 1)


def _shared(helpers: Helpers, inputs: Inputs, rules: Rules) -> np.ndarray:
    """``shares_of`` with the samples dealt out to this process and its helpers."""
    bounds = np.linspace(0, len(inputs.chunk), helpers.count + 2).astype(int).tolist()
    parts = [inputs.part(start, stop) for start, stop in itertools.pairwise(bounds)]
    return np.concatenate(helpers.share(shares_of, [(part, rules) for part in parts]), axis=1)


def draws_of(conventions: Conventions) -> int:
    """Draws of each sample."""
    return int(conventions.probability_draws)


def _intrusion_ids(connection: Any, names: Sequence[str]) -> list[int]:
    found = survival_rows.intrusion_ids(connection, names)
    absent = [name for name in names if name not in found]
    if absent:
        listed = ", ".join(repr(name) for name in absent)
        raise UsageError(f"there is no intrusion {listed}; write its name as it is recorded")
    return list(found.values())


def inputs_of(connection: Any, ids: np.ndarray, rules: Rules) -> Inputs:
    """What the probabilities of samples (ids ascending) are computed from, as the registry holds it now."""
    stored = loading.load_blocks(connection, ids, held_columns(connection, rules.conventions))
    blocks = as_blocks(stored)
    traced = trace_choice(len(ids), blocks)
    number_of = {id(block): number for number, block in enumerate(blocks)}
    origins = [(number_of[id(block)], column) for block, column in traced.origins]
    column_ids = np.array([stored[block].columns[column].column_id for block, column in origins], dtype=np.int64)
    context = loading.load_context(connection, ids)
    return Inputs(
        Chunk(ids, traced.values, traced.qualifiers, traced.digestions, context),
        _model_of(connection, traced, origins, column_ids),
        verdicts_of(connection, ids, [rules.target_ids[item.code] for item in rules.definitions]),
    )


def _model_of(
    connection: Any, traced: TracedChoice, origins: Sequence[tuple[int, int]], column_ids: np.ndarray
) -> ErrorModel:
    """What the controls of each value's batch say of its error, in the unit of the composition's column."""
    unique, of_candidate = np.unique(column_ids, return_inverse=True)
    limit, s0, k, bias_error, references = survival_rows.column_errors(connection, unique)[of_candidate.reshape(-1)].T
    factor = np.array(traced.factors)
    spread = np.where(references >= NEEDED_REFERENCES, bias_error / 100.0 * np.sqrt(references), np.nan)
    result = np.array([block * 100_000 + column for block, column in origins], dtype=np.int64)
    nowhere = traced.source < 0

    def of(candidates: np.ndarray) -> np.ndarray:
        return np.where(nowhere, np.nan, np.append(candidates, np.nan)[traced.source])

    one_result = np.where(nowhere, -1, np.append(result, -1)[traced.source])
    return ErrorModel(of(s0 * factor), of(k), of(spread), of(limit * factor), one_result)


def seed_of(conventions: Conventions) -> int:
    """The seed of all draws under a set of conventions."""
    text = json.dumps(conventions.as_dict(), sort_keys=True)
    return int.from_bytes(hashlib.sha256(text.encode()).digest()[:8], "big")


def shares_of(inputs: Inputs, rules: Rules) -> np.ndarray:
    """The share of draws that give the stored verdict, float64 (targets, n); NaN where there is no verdict."""
    draws, n = draws_of(rules.conventions), len(inputs.chunk)
    shares = np.full(inputs.stored.shape, np.nan)
    seed, at_once = seed_of(rules.conventions), max(1, CHUNK_SIZE // draws)
    for start in range(0, n, at_once):
        part = slice(start, start + at_once)
        many = _drawn(inputs.part(start, start + at_once), rules.conventions, draws, seed)
        codes = judged_only(many, rules.definitions, rules.conventions)
        for row, definition in enumerate(rules.definitions):
            again = codes[definition.code].reshape(-1, draws) == inputs.stored[row, part, None]
            shares[row, part] = again.mean(axis=1)
    return np.where(inputs.stored == NO_VERDICT, np.nan, shares)


def _drawn(inputs: Inputs, conventions: Conventions, draws: int, seed: int) -> Chunk:
    """The draws of some samples as a chunk of their own, all of the first sample first."""
    chunk = inputs.chunk
    keys = keys_of(seed, chunk.sample_id)
    values, qualifiers = drawn(chunk.values, chunk.qualifiers, inputs.model, conventions, keys, draws)
    return Chunk(
        np.repeat(chunk.sample_id, draws),
        values,
        qualifiers,
        np.repeat(chunk.digestions, draws, axis=1),
        {name: np.repeat(column, draws) for name, column in chunk.context.items()},
    )


def _write(connection: Any, before: Inputs, shares: np.ndarray, rules: Rules) -> int:
    """Write the shares of those samples of which nothing changed since; how many samples."""
    now = read_rules(connection)
    if now.conventions != rules.conventions or now.version_ids != rules.version_ids:
        raise PlutonbookError(
            "conventions or targets changed while probabilities were drawn; those written before were set back with "
            "their verdicts. Run refresh --probability again"
        )
    all_ids = before.chunk.sample_id
    ids = survival_rows.still_waiting(connection, all_ids)
    place = np.searchsorted(all_ids, ids)
    kept = _unchanged(before, inputs_of(connection, ids, rules), place)
    targets = [rules.target_ids[item.code] for item in rules.definitions]
    survival_rows.write_probabilities(connection, ids[kept], targets, shares[:, place[kept]])
    return int(kept.sum())


def _unchanged(before: Inputs, after: Inputs, place: np.ndarray) -> np.ndarray:
    """Where the samples of ``after`` are as they were at ``place`` in ``before``: bool (n,)."""
    pairs = [(_arrays(before)[number][..., place], array) for number, array in enumerate(_arrays(after))]
    same = np.ones(len(place), dtype=bool)
    for was, is_now in pairs:
        equal = was == is_now
        if was.dtype.kind == "f":
            equal |= np.isnan(was) & np.isnan(is_now)
        same &= np.asarray(equal, dtype=bool).reshape(-1, len(place)).all(axis=0)
    return same


def _arrays(inputs: Inputs) -> list[np.ndarray]:
    chunk, model = inputs.chunk, inputs.model
    context = [chunk.context[name] for name in sorted(chunk.context)]
    return [
        chunk.values, chunk.qualifiers, chunk.digestions, *context,
        model.s0, model.k, model.spread, model.limit, inputs.stored,
    ]  # fmt: skip
