"""Bring derived values and verdicts up to date: whatever stands in ``stale`` is computed before the commit."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np

from registry.choice import Block, ColumnUse, choose
from registry.clock import now
from registry.controlling import held_columns, settle
from registry.judging import Rules, read_rules
from registry.pipeline import CHUNK_SIZE, METHOD_VERSION, Chunk, Computed, compute
from registry.progress import Progress
from registry.store import bulk, loading, quality_rows, ready_rows, sample_context, stale, stale_groups
from registry.store.engine import Registry, reading, writing
from registry.store.sheets import DERIVED_COLUMNS
from registry.suites import refresh_groups

#: A reading page refreshes at most this many samples by itself.
SMALL_REFRESH = 200
DERIVE, JUDGE = 1, 2


def drain(
    connection: Any,
    cause: str = "edited",
    limit: int | None = None,
    progress: Progress | None = None,
    trial: bool = False,
) -> int:
    """Compute what is stale, inside the caller's transaction; how many samples were computed or judged.

    See ``drained_samples``.
    """
    return len(drained_samples(connection, cause, limit, progress, trial))


def drained_samples(
    connection: Any,
    cause: str = "edited",
    limit: int | None = None,
    progress: Progress | None = None,
    trial: bool = False,
) -> np.ndarray:
    """Compute what is stale, inside the caller's transaction; ids of the samples computed or judged, int64.

    At most ``limit`` stale samples are dealt with; those that were never analysed have nothing to compute and are not
    among the ids. ``cause`` is written beside each verdict that changes; ``progress("computing", done, all)`` is called
    by chunks. ``trial``: only the log of verdict changes is written, for a caller who rolls everything back; what is
    computed for samples and intrusions is not.
    """
    settle(connection)
    rules: Rules | None = None
    done, computed = 0, [np.zeros(0, dtype=np.int64)]
    total = stale.count(connection) if progress is not None else 0
    while limit is None or done < limit:
        size = CHUNK_SIZE if limit is None else min(CHUNK_SIZE, limit - done)
        pending = stale.pending(connection, size)
        if not pending:
            break
        if progress is not None:
            progress("computing", done, total)
        rules = rules or read_rules(connection)
        analysed = set(_ever_analysed(connection, [sample_id for sample_id, _ in pending]))
        derive = [sample_id for sample_id, level in pending if level == DERIVE and sample_id in analysed]
        judge = [sample_id for sample_id, level in pending if level != DERIVE and sample_id in analysed]
        computed.append(np.array(sorted(analysed), dtype=np.int64))
        if derive:
            held = held_columns(connection, rules.conventions)
            composition = recompose(connection, derive, held)
            recompute(connection, composition, rules, cause, rewrite_composition=True, trial=trial)
        if judge:
            recompute(connection, loading.load_composition(connection, judge), rules, cause, trial=trial)
        stale.clear(connection, [sample_id for sample_id, _ in pending])
        done += len(pending)
    if not trial and (limit is None or not stale.pending(connection, 1)):
        refresh_groups(connection)
    return np.concatenate(computed)


def _ever_analysed(connection: Any, sample_ids: Sequence[int]) -> list[int]:
    """Those of the samples that have results or once had; the others have nothing to derive or judge yet."""
    ids = np.asarray(sample_ids, dtype=np.int64)
    analysed = np.union1d(loading.samples_with_aliquots(connection, ids), loading.samples_with_derived(connection, ids))
    return analysed.astype(np.int64).tolist()


def refresh_registry(
    registry: Registry,
    everything: bool = False,
    cause: str = "refresh",
    progress: Progress | None = None,
    tell: Callable[[str], Any] | None = None,
) -> int:
    """Recompute what is stale, or every sample; how many were done. Nothing stale: the registry is not even locked.

    ``tell`` makes it wait for a busy registry and gets the sentence that says what holds it.
    """
    with reading(registry) as connection:
        waiting = bool(stale.pending(connection, 1)) or stale_groups.any_pending(connection)
        if not everything and not waiting and not quality_rows.any_batch_named(connection):
            return 0
    with writing(registry, what="a refresh", tell=tell) as connection:
        if everything:
            stale.mark_all(connection)
            stale_groups.mark_all(connection)
        return drain(connection, cause, progress=progress)


def last_change(connection: Any) -> int:
    """The id of the newest logged verdict change, 0 where there is none."""
    return bulk.last_verdict_change(connection)


def changes_since(connection: Any, change_id: int) -> int:
    """How many verdict changes were logged after that one."""
    return bulk.count_verdict_changes(connection, change_id)


def recompose(connection: Any, sample_ids: Sequence[int], held: np.ndarray | None = None) -> loading.Composition:
    """The composition of samples, chosen anew from their active results, without those of ``held`` batch columns."""
    ids = np.asarray(sorted(sample_ids), dtype=np.int64)
    return composed(ids, stored_blocks(connection, ids, held))


def stored_blocks(connection: Any, ids: np.ndarray, held: np.ndarray | None = None) -> list[Block]:
    """The active results of the samples ``ids`` (ascending) as the choice takes them, without ``held`` columns."""
    return as_blocks(loading.load_blocks(connection, ids, held))


def as_blocks(blocks: Sequence[loading.StoredBlock]) -> list[Block]:
    """Stored blocks of results as the choice takes them, in their order."""
    return [
        Block(
            [ColumnUse(column.analyte, column.unit, column.digestion) for column in block.columns],
            block.sample,
            block.values,
            block.qualifiers,
            block.newness,
            block.repeat,
        )
        for block in blocks
    ]


def composed(ids: np.ndarray, blocks: Sequence[Block]) -> loading.Composition:
    """The composition of the samples ``ids`` (ascending) from blocks of results."""
    values, qualifiers, digestions = choose(len(ids), blocks)
    return loading.Composition(ids, values, qualifiers, digestions)


def chunk_of(connection: Any, composition: loading.Composition) -> Chunk:
    """The chunk of samples that the pipeline takes: their composition and what is known around them."""
    ids = composition.sample_ids
    context = sample_context.load_context(connection, ids)
    return Chunk(ids, composition.values, composition.qualifiers, composition.digestions, context)


def recompute(
    connection: Any,
    composition: loading.Composition,
    rules: Rules,
    cause: str,
    *,
    rewrite_composition: bool = False,
    trial: bool = False,
) -> None:
    """Derive and judge one chunk of samples, write all of it and log the verdicts that changed.

    ``trial``: log the changes and write nothing else; the chunk then reads the same rows and gives the same verdicts.
    """
    chunk = chunk_of(connection, composition)
    computed = compute(chunk, rules.definitions, rules.conventions)
    if rewrite_composition and not trial:
        bulk.write_composition(connection, chunk.sample_id, chunk.values, chunk.qualifiers, chunk.digestions)
        stale_groups.mark_of_samples(connection, chunk.sample_id)
    targets = [rules.target_ids[code] for code in computed.verdicts]
    before = bulk.verdicts_of(connection, chunk.sample_id, targets)
    after = bulk.codes_of(list(computed.verdicts.values()), len(chunk.sample_id))
    if not trial:
        write_computed(connection, chunk.sample_id, computed, rules)
    bulk.log_verdict_changes(connection, chunk.sample_id, targets, before, after, cause, now())


def write_fresh(connection: Any, chunk: Chunk, outcome: Computed | bytes, rules: Rules) -> None:
    """Write composition, derived rows and verdicts of samples that had none: first verdicts are no changes.

    ``outcome``: what was computed, or the rows of it made ready in another process.
    """
    ids = chunk.sample_id
    bulk.write_composition(connection, ids, chunk.values, chunk.qualifiers, chunk.digestions, fresh=True)
    if isinstance(outcome, bytes):
        ready_rows.take_over(connection, outcome)
    else:
        write_computed(connection, ids, outcome, rules, fresh=True)
    stale_groups.mark_of_samples(connection, ids)


def write_computed(connection: Any, ids: np.ndarray, computed: Computed, rules: Rules, fresh: bool = False) -> None:
    """Write derived rows and verdicts; ``fresh``: there are none yet."""
    bulk.write_derived(
        connection,
        ids,
        {name: computed.derived[name] for name in DERIVED_COLUMNS},
        computed.causes,
        computed.warnings,
        rules.convention_set_id,
        str(METHOD_VERSION),
        best_target=computed.best_target,
        best_verdict=computed.best_verdict,
        fresh=fresh,
    )
    judged = [(rules.target_ids[code], rules.version_ids[code], part) for code, part in computed.verdicts.items()]
    bulk.write_verdicts(connection, ids, judged, fresh=fresh)
