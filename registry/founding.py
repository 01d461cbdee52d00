"""Making registries: a new one with the shipped targets, an older one brought up to date, and the demo."""

from __future__ import annotations

import shutil
from contextlib import suppress
from pathlib import Path
from typing import Any

from registry.clock import now
from registry.controlling import ship_reference_values
from registry.errors import NotFound, PlutonbookError, UsageError
from registry.judging import install_shipped_definitions
from registry.refresh import refresh_registry
from registry.store import batches, schema, target_rows
from registry.store.engine import HEAD_REVISION, Registry, open_registry, place_of, reading
from registry.targets.definition import load_definitions

DEMO_MARK = "demo"


def found(path_or_url: str | Path, demo: bool = False) -> Registry:
    """A new registry at head with the shipped target definitions copied in; marked if it is a demo."""

    def fill(connection: Any) -> None:
        install_shipped_definitions(connection, tuple(load_definitions().values()))
        ship_reference_values(connection)
        target_rows.write_setting(connection, "created_at", now())
        if demo:
            target_rows.write_setting(connection, DEMO_MARK, "1")

    return schema.create(path_or_url, fill)


def bring_up_to_date(path_or_url: str | Path) -> dict[str, Any]:
    """Migrate, install newer shipped definitions, recompute everything; a report with the backup's path."""
    changed: list[str] = []

    def fill(connection: Any) -> None:
        changed.extend(install_shipped_definitions(connection, tuple(load_definitions().values())))
        ship_reference_values(connection)

    before, saved = schema.upgrade(path_or_url, fill)
    registry = open_registry(path_or_url)
    recomputed = refresh_registry(registry, everything=True, cause="upgrade")
    return {
        "before": before,
        "revision": schema.revision(registry),
        "backup": None if saved is None else str(saved),
        "new_target_versions": changed,
        "recomputed": recomputed,
    }


def is_demo(registry: Registry) -> bool:
    """Whether a registry was made by ``plutonbook demo``."""
    with reading(registry) as connection:
        return target_rows.read_settings(connection).get(DEMO_MARK) == "1"


def _has_batches(registry: Registry) -> bool:
    """Whether the demo's import went through: a demo that was stopped while it was built holds none."""
    with reading(registry) as connection:
        return bool(batches.list_batches(connection))


def build_demo(path_or_url: str) -> list[str]:
    """The demo registry at that place, built from ``seed_demo`` by the ordinary import, or used again; what was done.

    Refuses a registry that is not marked as a demo, so that no real data are mixed with invented ones.
    """
    import seed_demo
    from registry.importing import ImportOptions, import_files

    _, path = place_of(path_or_url)
    place = path or "on PostgreSQL"
    brought = []
    try:
        registry = open_registry(path_or_url, any_revision=True)
    except NotFound:
        registry = found(path_or_url, demo=True)
    else:
        if not is_demo(registry):
            registry.close()
            raise PlutonbookError(
                f"the registry {place} holds real data and is not a demo; give the demo a place of its own with "
                "--registry"
            )
        if (schema.revision(registry) or "") < HEAD_REVISION:
            registry.close()
            bring_up_to_date(path_or_url)
            brought = ["It was made by an earlier version and was brought up to date."]
        registry.close()
        registry = open_registry(path_or_url)
        if _has_batches(registry):
            registry.close()
            remedy = "delete the file" if path is not None else "name an empty database"
            return [f"Using the demo registry {place} again ({remedy} to build it anew).", *brought]
    try:
        report = import_files(registry, seed_demo.files(), ImportOptions(lab="Invented laboratory"))
    except BaseException:
        registry.close()
        if path is not None:
            path.unlink(missing_ok=True)
        raise
    registry.close()
    return [
        f"Built the demo registry {place}: every name and number in it is invented.",
        *report.summary(),
    ]


def put_back(path_or_url: str | Path, saved: Path) -> Path | None:
    """Put a backup in a registry's place; where the registry that stood there was moved to, None if none did.

    The backup is looked at first: raises what ``open_registry`` raises where it is no registry. UsageError on
    PostgreSQL, whose own tools do this.
    """
    _, path = place_of(path_or_url)
    if path is None:
        raise UsageError("a PostgreSQL registry is restored with the server's own pg_restore")
    open_registry(saved, any_revision=True).close()
    fresh = path.with_name(f"{path.name}-coming")
    try:
        shutil.copyfile(saved, fresh)
    except OSError as error:
        with suppress(OSError):
            fresh.unlink(missing_ok=True)
        raise PlutonbookError(
            f"the backup {saved} could not be copied to {path.parent}: {error.strerror}; nothing was changed"
        ) from error
    kept = None
    if path.exists():
        stamp = now().replace(":", "").replace("-", "")
        kept = path.with_name(f"{path.stem}-replaced-{stamp}{path.suffix}")
        for ending in ("", "-wal", "-shm"):
            part = path.with_name(path.name + ending)
            if part.exists():
                part.rename(kept.with_name(kept.name + ending))
    fresh.rename(path)
    return kept
