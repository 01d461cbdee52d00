"""Batches of results: list them, take one out of every composition, let it count again."""

from __future__ import annotations

from typing import Any

from registry.errors import NotFound, PlutonbookError
from registry.refresh import changes_since, drain, last_change
from registry.store import batches
from registry.store.engine import Registry, reading, writing


def list_batches(registry: Registry) -> list[dict[str, Any]]:
    """Every batch with its state and how many lines and results it holds, newest last."""
    with reading(registry) as connection:
        return batches.list_batches(connection)


def set_state(registry: Registry, code: str, state: str) -> dict[str, Any]:
    """Withdraw (``withdrawn``) or restore (``active``) a batch and recompute what it touches, in one transaction."""
    verb = "withdrawn" if state == "withdrawn" else "restored"
    with writing(registry, what=f"a change of batch {code}") as connection:
        batch = batches.find_batch(connection, code)
        if batch is None:
            known = [row["batch"] for row in batches.list_batches(connection)]
            raise NotFound(f"there is no batch '{code}'; the registry holds {', '.join(known) or 'none'}")
        if batch["state"] == state:
            raise PlutonbookError(f"batch '{code}' is {state} already; nothing was changed")
        if batch["state"] == "superseded":
            successor = batches.find_by_id(connection, batch["superseded_by"]) if batch["superseded_by"] else None
            if state == "withdrawn" or (successor is not None and successor["state"] != "withdrawn"):
                name = successor["batch"] if successor else "a corrected certificate"
                raise PlutonbookError(
                    f"batch '{code}' was superseded by '{name}' and counts nowhere; withdraw '{name}' first, then "
                    f"'plutonbook restore-batch {code}' lets the earlier results count again"
                )
        before = last_change(connection)
        batches.set_state(connection, batch["batch_id"], state)
        recomputed = drain(connection, cause=f"batch {code} {verb}")
        changed = changes_since(connection, before)
    return {"batch": code, "state": state, "recomputed": recomputed, "verdicts_changed": changed}
