"""Making a registry, bringing an older one to the newest schema, and asking which schema it has.

Views and triggers are no part of the migrations: they are dropped, the migrations run, the catalogue's rows are
written anew and views and triggers are built again, all in one transaction. A failure leaves the earlier registry
whole.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import sqlalchemy as sa
from alembic import command
from alembic.config import Config
from alembic.runtime.migration import MigrationContext
from alembic.util import CommandError

from registry.errors import PlutonbookError
from registry.store import dialect_postgresql, dialect_sqlite, holder, views
from registry.store.engine import APPLICATION_ID, HEAD_REVISION, Registry, open_registry, place_of
from registry.store.reference_rows import sync_catalogue

Fill = Callable[[sa.Connection], Any]
#: Derived rows take about 2 kB: in SQLite's usual 4 kB pages hardly two fit, and an import takes a tenth longer.
PAGE_BYTES = 16_384


def create(path_or_url: str | Path, fill: Fill | None = None) -> Registry:
    """A new registry at the newest schema, with the catalogue's rows; ``fill(connection)`` adds more in the same
    transaction (the shipped targets, the conventions).

    Raises PlutonbookError where a file or a registry stands already; nothing is left behind on failure.
    """
    url, path = place_of(path_or_url)
    registry = Registry(url, path)
    if path is not None:
        _new_file(path)
    try:
        with _migrating(registry, "creating the registry") as connection:
            if path is None and sa.inspect(connection).has_table("alembic_version"):
                raise PlutonbookError("the database holds a registry already; nothing was changed")
            _run(connection, "head")
            build(connection)
            if fill is not None:
                fill(connection)
    except BaseException:
        if path is not None:
            for leftover in (path, *(path.with_name(path.name + end) for end in ("-wal", "-shm", "-journal"))):
                leftover.unlink(missing_ok=True)
        raise
    return registry


def upgrade(path_or_url: str | Path | Registry, fill: Fill | None = None) -> tuple[str, Path | None]:
    """Bring an older registry to the newest schema; returns the revision it had and the path of the backup.

    The backup (SQLite, ``<name>-before-<revision>-<time>.sqlite`` beside it) is made first where a migration has to
    run. Views, triggers and the catalogue's rows are rewritten in any case, so that they are those of this version.
    """
    registry = path_or_url if isinstance(path_or_url, Registry) else open_registry(path_or_url, any_revision=True)
    before = revision(registry) or ""
    if before > HEAD_REVISION:
        raise PlutonbookError(
            f"the registry has schema {before}, made by a newer Plutonbook; this one knows up to {HEAD_REVISION}"
        )
    with registry.reader.connect() as connection:
        _check_foreign_keys(connection)
    saved = None
    if registry.path is not None and before != HEAD_REVISION:
        now = datetime.now(UTC).strftime("%Y%m%dT%H%M%SZ")
        saved = registry.path.with_name(f"{registry.path.stem}-before-{HEAD_REVISION}-{now}.sqlite")
        backup(registry, saved)
    with _migrating(registry, "an upgrade") as connection:
        drop(connection)
        _run(connection, "head")
        build(connection)
        if fill is not None:
            fill(connection)
    return before, saved


def backup(registry: Registry, to: Path) -> None:
    """A clean copy of a registry file, made while others may write (VACUUM INTO)."""
    if registry.path is None:
        raise PlutonbookError("a PostgreSQL registry is backed up with the server's own pg_dump")
    if to.exists():
        raise PlutonbookError(f"{to} exists; name a file that does not, so that no earlier backup is lost")
    connection = sqlite3.connect(registry.path)
    try:
        connection.execute("VACUUM INTO ?", (str(to),))
    except sqlite3.Error as error:
        with suppress(OSError):
            to.unlink(missing_ok=True)
        raise PlutonbookError(f"the backup {to} could not be written: {error}; nothing else was changed") from error
    finally:
        connection.close()


def revision(registry: Registry) -> str | None:
    """The schema revision a registry has, None where it has none."""
    with registry.reader.connect() as connection:
        return MigrationContext.configure(connection).get_current_revision()


def build(connection: sa.Connection) -> None:
    """Write the catalogue's rows, then the views and triggers of this version (they must not be there yet)."""
    sync_catalogue(connection)
    for statement in (*views.statements(connection), *_dialect(connection).trigger_statements()):
        connection.exec_driver_sql(statement)


def drop(connection: sa.Connection) -> None:
    """Drop every view and trigger of ours, whatever version made them."""
    for statement in _dialect(connection).drop_statements(connection):
        connection.exec_driver_sql(statement)


def migrate(connection: sa.Connection, to: str, config: Config | None = None) -> None:
    """Run the migrations up or down to a revision on a connection in a transaction; for upgrade and the tests."""
    config = config or alembic_config()
    config.attributes["connection"] = connection
    context = MigrationContext.configure(connection)
    now = context.get_current_revision() or ""
    try:
        if to != "head" and (to == "base" or to < now):
            command.downgrade(config, to)
        else:
            command.upgrade(config, to)
    except CommandError as error:
        raise PlutonbookError(
            f"the registry has schema '{now}', which no version of Plutonbook made ({error}); nothing was changed. "
            "Restore a backup with 'plutonbook recover'"
        ) from error


def alembic_config() -> Config:
    """Alembic's configuration, built here since pyproject.toml is not in a wheel."""
    config = Config()
    config.set_main_option("script_location", "migrations:")
    config.set_main_option("path_separator", "os")
    return config


def _run(connection: sa.Connection, to: str) -> None:
    migrate(connection, to)


def _dialect(connection: sa.Connection) -> Any:
    return dialect_sqlite if connection.dialect.name == "sqlite" else dialect_postgresql


@contextmanager
def _migrating(registry: Registry, what: str) -> Iterator[sa.Connection]:
    """A writing connection with foreign keys off (SQLite cannot switch them inside a transaction)."""
    engine = registry.engine(foreign_keys=False, query_only=False)
    try:
        with engine.connect() as connection:
            holder.enter(registry, connection, what, holder.TOLD_AFTER_S, None)
            try:
                yield connection
                _check_foreign_keys(connection)
                connection.commit()
            except BaseException:
                connection.rollback()
                raise
            finally:
                holder.leave(registry)
    finally:
        engine.dispose()


def _check_foreign_keys(connection: sa.Connection) -> None:
    if connection.dialect.name != "sqlite":
        return
    broken = connection.exec_driver_sql("PRAGMA foreign_key_check").fetchall()
    if broken:
        places = ", ".join(sorted({f"{row[0]} -> {row[2]}" for row in broken}))
        raise PlutonbookError(
            f"{len(broken):,} rows point at rows that are not there ({places}); nothing was changed. "
            "'plutonbook check' names them and what to do; such damage comes from INSERT OR REPLACE or DELETE in "
            "another program"
        )


def _new_file(path: Path) -> None:
    if path.exists():
        raise PlutonbookError(f"{path} exists already; a new registry needs a path where nothing is")
    if not path.parent.is_dir():
        raise PlutonbookError(f"the folder {path.parent} does not exist; make it first")
    try:
        connection = sqlite3.connect(path)
        try:
            connection.execute(f"PRAGMA page_size={PAGE_BYTES}")  # before WAL: it cannot change afterwards
            connection.execute("PRAGMA journal_mode=WAL")
            connection.execute(f"PRAGMA application_id={APPLICATION_ID}")
        finally:
            connection.close()
    except sqlite3.Error as error:
        with suppress(OSError):
            path.unlink(missing_ok=True)
        raise PlutonbookError(
            f"{path} cannot be created: {error}; see whether you may write in the folder and the disk has room"
        ) from error
