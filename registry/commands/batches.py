"""``plutonbook batches``, ``digestion``, ``withdraw`` and ``restore-batch``."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import click

from registry.commands.options import json_option, registry_named, registry_option, say
from registry.commands.progress import shown

#: Lines of one sort that are printed before the rest is counted.
LINES_SHOWN = 20


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
@click.option("--dry-run", is_flag=True, help="Show what would change, write nothing.")
@json_option
def withdraw(registry_path: str | None, batch: str, dry_run: bool, as_json: bool) -> None:
    """Take the results of BATCH out of every composition; nothing is deleted."""
    _set_state(registry_path, batch, "withdrawn", dry_run, as_json)


@click.command("restore-batch")
@click.argument("batch")
@registry_option
@click.option("--dry-run", is_flag=True, help="Show what would change, write nothing.")
@json_option
def restore_batch(registry_path: str | None, batch: str, dry_run: bool, as_json: bool) -> None:
    """Let the results of a withdrawn BATCH count again."""
    _set_state(registry_path, batch, "active", dry_run, as_json)


@click.command()
@click.argument("batch")
@click.argument("wishes", nargs=-1, metavar="[COLUMN=DIGESTION]...")
@registry_option
@click.option("--dry-run", is_flag=True, help="Show what would change, write nothing.")
@json_option
def digestion(registry_path: str | None, batch: str, wishes: tuple[str, ...], dry_run: bool, as_json: bool) -> None:
    """List the columns of BATCH with their digestions, or state them: COLUMN=four_acid.

    COLUMN is a heading or an analyte; 'unknown' stands for every column that tells none, 'all' for every column.
    """
    from registry.batching import columns_of, digestions_from_words, set_digestions
    from registry.store.engine import open_registry

    registry = open_registry(registry_named(registry_path))
    columns = columns_of(registry, batch)
    if not wishes:
        lines = [
            f"{row['header'] or row['analyte']}: {row['analyte']} in {row['unit']}, "
            f"{row['digestion'].replace('_', ' ')}" + (f", method {row['method']}" if row["method"] else "")
            for row in columns
        ]
        say({"batch": batch, "columns": columns}, lines, as_json)
        return
    stated = digestions_from_words(columns, wishes)
    with shown(trial=dry_run) as progress:
        report = set_digestions(registry, batch, stated, dry_run, progress=progress, tell=progress.tell)
    said = [
        f"{row['header'] or row['analyte']}: {row['digestion'].replace('_', ' ')} -> "
        f"{stated[row['position']].replace('_', ' ')}"
        for row in columns
        if stated.get(row["position"], row["digestion"]) != row["digestion"]
    ]
    if len(said) > LINES_SHOWN:
        said = [*said[:LINES_SHOWN], f"... and {len(said) - LINES_SHOWN:,} more columns"]
    say({**report, "dry_run": dry_run}, [*said, *changes_in_lines(report, dry_run)], as_json)


def changes_in_lines(report: Mapping[str, Any], dry_run: bool) -> list[str]:
    """What a change made of samples and verdicts."""
    samples, verdicts = report["recomputed"], report["verdicts_changed"]
    lines = [
        f"{samples:,} {'sample' if samples == 1 else 'samples'} recomputed, "
        f"{verdicts:,} {'verdict' if verdicts == 1 else 'verdicts'} changed."
    ]
    lines += [
        f"  {change['sample']}, {change['target']}: {change['before'] or 'none'} -> {change['after'] or 'none'}"
        for change in report["changes"][:LINES_SHOWN]
    ]
    if verdicts > LINES_SHOWN:
        held = "" if dry_run else "; change_sheet holds them all"
        lines.append(f"  ... and {verdicts - LINES_SHOWN:,} more{held}")
    if dry_run:
        lines.append("Dry run: nothing was written.")
    return lines


def _set_state(registry_path: str | None, batch: str, state: str, dry_run: bool, as_json: bool) -> None:
    from registry.batching import set_state
    from registry.store.engine import open_registry

    registry = open_registry(registry_named(registry_path))
    with shown(trial=dry_run) as progress:
        report = set_state(registry, batch, state, dry_run, progress=progress, tell=progress.tell)
    first, *others = changes_in_lines(report, dry_run)
    done = "withdrawn" if state == "withdrawn" else "restored"
    parts = report["parts"]
    with_it = f" with {'its part' if len(parts) == 1 else 'its parts'} {', '.join(parts)}" if parts else ""
    say({**report, "dry_run": dry_run}, [f"Batch {batch}{with_it} {done}: {first}", *others], as_json)
