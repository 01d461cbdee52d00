"""Batches of results: list them, take one out of every composition, let it count again."""

from __future__ import annotations

import io
import tempfile
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import IO, Any

from registry import auditing
from registry.errors import NotFound, PlutonbookError, UsageError
from registry.petrology.digestion import DIGESTION_NAMES, WEIGHED
from registry.progress import Progress
from registry.recomputing import recomputed_after
from registry.store import batch_files, batches
from registry.store.engine import Registry, reading


def list_batches(registry: Registry) -> list[dict[str, Any]]:
    """Every batch with its state and how many lines and results it holds, newest last."""
    with reading(registry) as connection:
        return batches.list_batches(connection)


def set_state(
    registry: Registry,
    code: str,
    state: str,
    dry_run: bool = False,
    *,
    progress: Progress | None = None,
    tell: Callable[[str], Any] | None = None,
) -> dict[str, Any]:
    """Withdraw (``withdrawn``) or restore (``active``) a batch and recompute what it touches, in one transaction.

    ``dry_run`` tells what would happen and writes nothing. ``parts`` of the report are those that go with the batch.
    """
    verb = "withdrawn" if state == "withdrawn" else "restored"
    parts: list[str] = []

    def change(connection: Any) -> None:
        parts.extend(batches.set_state(connection, _batch_to_change(connection, code, state)["batch_id"], state))
        auditing.note(connection, "batch", f"batch {code}", verb)

    what = f"{'a trial of ' if dry_run else ''}{'withdrawing' if state == 'withdrawn' else 'restoring'} batch {code}"
    cause = f"batch {code} {verb}"
    report = recomputed_after(registry, change, what, cause, dry_run, progress=progress, tell=tell)
    return {"batch": code, "state": state, "parts": parts, **report}


def set_digestions(
    registry: Registry,
    code: str,
    digestions: Mapping[int, str],
    dry_run: bool = False,
    *,
    progress: Progress | None = None,
    tell: Callable[[str], Any] | None = None,
) -> dict[str, Any]:
    """Say how columns of a batch (by their position) were digested and recompute its samples, in one transaction.

    UsageError for a digestion or a position that is not known.
    """
    for name in digestions.values():
        if name not in DIGESTION_NAMES:
            raise UsageError(f"there is no digestion '{name}'; the digestions are {', '.join(DIGESTION_NAMES)}")

    def change(connection: Any) -> None:
        batch_id = _known(connection, code)["batch_id"]
        was = {column["position"]: column for column in batches.columns_of(connection, batch_id)}
        batches.set_digestions(connection, batch_id, digestions)
        said = [
            f"{was[position]['header'] or was[position]['analyte']} {was[position]['digestion']} -> {digestion}"
            for position, digestion in digestions.items()
        ]
        auditing.note(connection, "digestion", f"batch {code}", "; ".join(said))

    what = f"{'a trial of ' if dry_run else ''}digestions of batch {code}"
    cause = f"digestions of batch {code} stated"
    return {"batch": code, **recomputed_after(registry, change, what, cause, dry_run, progress=progress, tell=tell)}


def counting_instead(registry: Registry, code: str) -> str | None:
    """The code of the batch that counts in the place of a withdrawn or superseded one; None where none does."""
    with reading(registry) as connection:
        counting = batches.counting_for(connection, _known(connection, code)["batch_id"])
    return None if counting is None or counting["batch"] == code else counting["batch"]


def columns_of(registry: Registry, code: str) -> list[dict[str, Any]]:
    """The columns of a batch: ``position header analyte unit method digestion``; NotFound for an unknown batch."""
    with reading(registry) as connection:
        return batches.columns_of(connection, _known(connection, code)["batch_id"])


def digestions_from_words(columns: Sequence[Mapping[str, Any]], wishes: Sequence[str]) -> dict[int, str]:
    """Digestions by column position from ``COLUMN=DIGESTION``; UsageError names what cannot be told.

    COLUMN is a heading as the file has it, an analyte, ``unknown`` (every column that tells none) or ``all``; weighed
    columns (loss on ignition, totals) are never meant by the last two.
    """
    stated: dict[int, str] = {}
    for wish in wishes:
        name, sign, word = wish.rpartition("=")
        if not sign:
            raise UsageError(f"'{wish}' does not say a digestion; write COLUMN=DIGESTION, as Zr=fusion")
        digestion = digestion_named(word)
        dissolved = [column for column in columns if column["analyte"] not in WEIGHED]
        meant = [column for column in columns if column["header"] == name] or [
            column for column in columns if column["analyte"].casefold() == name.casefold()
        ]
        if name == "all":
            meant = dissolved
        elif name == "unknown":
            meant = [column for column in dissolved if column["digestion"] == "unknown"]
        if not meant:
            known = ", ".join(f"'{column['header'] or column['analyte']}'" for column in columns[:30])
            raise UsageError(f"the batch has no column '{name}'; its columns are {known}")
        stated |= {column["position"]: digestion for column in meant}
    return stated


def digestion_named(words: str) -> str:
    """The digestion that words such as ``four-acid`` or ``Four acid`` name; UsageError for none."""
    name = "_".join(words.casefold().replace("-", " ").replace("_", " ").split())
    if name not in DIGESTION_NAMES:
        raise UsageError(f"there is no digestion '{words}'; the digestions are {', '.join(DIGESTION_NAMES)}")
    return name


def stored_file(registry: Registry, code: str) -> tuple[str, IO[bytes]]:
    """Name of the file of a batch and the file as it was sent, open at its start, for the caller to close.

    Raises NotFound where none is kept.
    """
    with reading(registry) as connection, tempfile.TemporaryDirectory() as folder:
        batch = _known(connection, code)
        held = batch_files.laid_out(connection, batch["batch_id"], Path(folder))
        if held is None:
            raise NotFound(f"the registry keeps no file of batch '{code}'")
        # an open file stays readable when its folder is gone
        file: IO[bytes] = io.BytesIO(held) if isinstance(held, bytes) else held.open("rb")
    return batch["file_name"] or f"{code}.csv", file


def _known(connection: Any, code: str) -> dict[str, Any]:
    batch = batches.find_batch(connection, code)
    if batch is None:
        known = [row["batch"] for row in batches.list_batches(connection)]
        raise NotFound(f"there is no batch '{code}'; the registry holds {', '.join(known) or 'none'}")
    return batch


def _batch_to_change(connection: Any, code: str, state: str) -> dict[str, Any]:
    batch = _known(connection, code)
    if batch["state"] == state:
        raise PlutonbookError(f"batch '{code}' is {state} already; nothing was changed")
    counting = batches.counting_for(connection, batch["batch_id"])
    if state == "withdrawn" and batch["state"] == "superseded":
        whose = f"by '{counting['batch']}' " if counting is not None else ""
        raise PlutonbookError(f"batch '{code}' was superseded {whose}and counts nowhere; there is nothing to withdraw")
    if state == "active" and counting is not None:
        name = counting["batch"]
        raise PlutonbookError(
            f"batch '{code}' is {batch['state']}, and in its place '{name}' counts; withdraw '{name}' first, then "
            f"'plutonbook restore-batch {code}' lets these results count again"
        )
    return batch
