"""``plutonbook batches``, ``withdraw`` and ``restore-batch``."""

from __future__ import annotations

import click

from registry.commands.options import json_option, registry_named, registry_option, say


@click.command()
@registry_option
@json_option
def batches(registry_path: str | None, as_json: bool) -> None:
    """List the batches: code, laboratory, state, lines, results, file."""
    from registry.batching import list_batches
    from registry.store.engine import open_registry

    rows = list_batches(open_registry(registry_named(registry_path)))
    lines = [
        f"{row['batch']}  {row['state']}  {row['lines']:,} lines, {row['results']:,} results"
        f"  {row['lab'] or 'laboratory not given'}  {row['file_name'] or ''}"
        for row in rows
    ]
    say({"batches": rows}, lines or ["No batches yet; bring one in with: plutonbook import FILE"], as_json)


@click.command()
@click.argument("batch")
@registry_option
@json_option
def withdraw(registry_path: str | None, batch: str, as_json: bool) -> None:
    """Take the results of BATCH out of every composition; nothing is deleted."""
    _set_state(registry_path, batch, "withdrawn", as_json)


@click.command("restore-batch")
@click.argument("batch")
@registry_option
@json_option
def restore_batch(registry_path: str | None, batch: str, as_json: bool) -> None:
    """Let the results of a withdrawn BATCH count again."""
    _set_state(registry_path, batch, "active", as_json)


def _set_state(registry_path: str | None, batch: str, state: str, as_json: bool) -> None:
    from registry.batching import set_state
    from registry.store.engine import open_registry

    report = set_state(open_registry(registry_named(registry_path)), batch, state)
    changed = report["verdicts_changed"]
    done = "withdrawn" if state == "withdrawn" else "restored"
    line = (
        f"Batch {batch} {done}: {report['recomputed']:,} samples recomputed, "
        f"{changed:,} {'verdict' if changed == 1 else 'verdicts'} changed."
    )
    say(report, [line], as_json)
