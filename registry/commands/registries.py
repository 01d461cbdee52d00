"""``plutonbook create``, ``upgrade``, ``check``, ``backup`` and ``recover``."""

from __future__ import annotations

from pathlib import Path

import click

from registry.commands.options import json_option, registry_named, registry_option, say, without_password


@click.command()
@registry_option
@json_option
def create(registry_path: str | None, as_json: bool) -> None:
    """Make a new, empty registry."""
    from registry.founding import found
    from registry.store.engine import HEAD_REVISION

    path = registry_named(registry_path)
    found(path).close()
    shown = without_password(path)
    say(
        {"registry": shown, "revision": HEAD_REVISION},
        [f"Created {shown} at revision {HEAD_REVISION}.", "Bring data in with: plutonbook import FILE..."],
        as_json,
    )


@click.command()
@registry_option
@json_option
def upgrade(registry_path: str | None, as_json: bool) -> None:
    """Bring an older registry to this version's schema, after an automatic backup, and recompute what changed."""
    from registry.founding import bring_up_to_date

    report = bring_up_to_date(registry_named(registry_path))
    lines = [f"The registry stands at revision {report['revision']} (before: {report['before']})."]
    if report["backup"]:
        lines.append(f"The registry as it was lies in {report['backup']}.")
    lines.append(f"Recomputed {report['recomputed']:,} samples.")
    say(report, lines, as_json)


@click.command()
@registry_option
@json_option
@click.pass_context
def check(ctx: click.Context, registry_path: str | None, as_json: bool) -> int:
    """Look for damage: integrity, foreign keys, orphans, schema, stale rows, file hashes and the methods."""
    from registry.checking import check_registry
    from registry.store.engine import open_registry

    findings = check_registry(open_registry(registry_named(registry_path), any_revision=True))
    lines = [f"{finding['subject']}: {finding['found']}; {finding['remedy']}" for finding in findings]
    say({"findings": findings}, lines or ["Nothing to complain of."], as_json)
    return 1 if findings else 0


@click.command()
@click.argument("file", type=click.Path(path_type=Path))
@registry_option
@json_option
def backup(registry_path: str | None, file: Path, as_json: bool) -> None:
    """Write a clean copy of the registry to FILE, also while others work in it."""
    from registry.store import schema
    from registry.store.engine import open_registry

    schema.backup(open_registry(registry_named(registry_path), any_revision=True), file)
    say({"backup": str(file)}, [f"The registry is copied to {file}."], as_json)


@click.command()
@click.argument("file", type=click.Path(path_type=Path))
@registry_option
@json_option
def recover(registry_path: str | None, file: Path, as_json: bool) -> None:
    """Put the backup FILE in the registry's place; what stood there is kept beside it."""
    from registry.founding import put_back

    path = registry_named(registry_path)
    kept = put_back(path, file)
    lines = [f"{path} is the backup {file} again."]
    if kept is not None:
        lines.append(f"What stood there before lies in {kept}.")
    say({"registry": path, "kept": None if kept is None else str(kept)}, lines, as_json)
