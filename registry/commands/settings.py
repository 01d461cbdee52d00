"""``plutonbook settings``: the conventions and the code patterns of control samples."""

from __future__ import annotations

import click

from registry.commands.options import json_option, registry_named, registry_option, say
from registry.commands.progress import shown as progress_shown


@click.command()
@click.argument("wishes", nargs=-1, metavar="[NAME=VALUE]...")
@registry_option
@click.option("--dry-run", is_flag=True, help="Show what would change, write nothing.")
@json_option
def settings(registry_path: str | None, wishes: tuple[str, ...], dry_run: bool, as_json: bool) -> None:
    """List the settings, or put NAME=VALUE in force and compute all that hangs on it.

    failed_control=hold leaves failed analytes of a batch out; control_pattern.blank='^BLK' tells blanks by their code:
    registered samples of unknown kind whose code fits become controls at once and are judged no more, so try a pattern
    with --dry-run first. NAME= alone gives the default back.
    """
    from registry.commands.batches import changes_in_lines
    from registry.setting_changes import change_settings, controls_in_lines, list_settings, shown
    from registry.store.engine import open_registry

    registry = open_registry(registry_named(registry_path))
    if not wishes:
        rows = list_settings(registry)
        say({"settings": rows}, shown(rows), as_json)
        return
    with progress_shown(trial=dry_run) as progress:
        report = change_settings(registry, wishes, dry_run, progress=progress, tell=progress.tell)
    lines = [f"{name}: {was or 'none'} -> {now or 'none'}" for name, (was, now) in report["settings"].items()]
    lines += controls_in_lines(report, dry_run)
    say({**report, "dry_run": dry_run}, [*lines, *changes_in_lines(report, dry_run)], as_json)
