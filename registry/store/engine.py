"""Opening a registry, and the two ways into it: ``reading()`` and ``writing()``. Nothing else opens a transaction.

A registry is one SQLite file, or a PostgreSQL database named by a URL. Readers get a query-only connection with one
unchanging picture; writers take the registry at once (BEGIN IMMEDIATE, an advisory lock on PostgreSQL), so that a
second writer waits at its door and is told who is inside.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import Any
from urllib.parse import quote

import sqlalchemy as sa

from registry.errors import NotFound, PlutonbookError, RegistryBusy, UsageError
from registry.store import faults, holder

#: The schema this code reads and writes; the newest revision of ``migrations`` (a test compares both).
HEAD_REVISION = "0002"
#: Marks the file as a registry ("PLUT"), for the command ``file`` and for :func:`open_registry`.
APPLICATION_ID = 0x504C5554
#: A writer that waits longer than this is told what holds the registry.
PATIENCE_S = 2.0

Drain = Callable[[sa.Connection], Any]


@dataclass(frozen=True)
class Registry:
    """A registry that was found and looks like one. ``path`` is None on PostgreSQL."""

    url: str
    path: Path | None

    @property
    def dialect(self) -> str:
        return "postgresql" if self.path is None else "sqlite"

    @cached_property
    def writer(self) -> sa.Engine:
        return self.engine(foreign_keys=True, query_only=False)

    @cached_property
    def bulk_writer(self) -> sa.Engine:
        return self.engine(foreign_keys=False, query_only=False)

    @cached_property
    def reader(self) -> sa.Engine:
        return self.engine(foreign_keys=True, query_only=True)

    @cached_property
    def watcher(self) -> sa.Engine:
        """One connection of its own, always the same: it tells whether others have changed the registry."""
        if self.path is None:
            return self.reader
        return _sqlite_engine(self.path, foreign_keys=True, query_only=True, pool_size=1, max_overflow=0)

    def engine(self, foreign_keys: bool, query_only: bool) -> sa.Engine:
        """A new engine on this registry; the store alone calls it."""
        if self.path is None:
            return _postgresql_engine(self.url, query_only)
        return _sqlite_engine(self.path, foreign_keys, query_only)

    def close(self) -> None:
        """Give back every connection (a file may then be moved or deleted)."""
        for name in ("writer", "bulk_writer", "reader", "watcher"):
            engine = self.__dict__.pop(name, None)
            if engine is not None:
                engine.dispose()


def place_of(path_or_url: str | Path) -> tuple[str, Path | None]:
    """(SQLAlchemy URL, path or None) of a registry named by a path or a URL; UsageError for another database."""
    text = str(path_or_url)
    if "://" not in text:
        return f"sqlite:///{text}", Path(text)
    try:
        url = sa.make_url(text)
    except (sa.exc.ArgumentError, ValueError) as error:
        raise UsageError(
            f"'{text}' is no URL of a database; give the path of a file or postgresql://user@host/database"
        ) from error
    if url.get_backend_name() == "sqlite":
        if not url.database or url.database == ":memory:":
            raise UsageError(f"'{text}' names no file; a registry is a file or a PostgreSQL database")
        return text, Path(url.database)
    if url.get_backend_name() not in ("postgresql", "postgres"):
        raise UsageError(
            f"'{url.get_backend_name()}' databases are not supported; give the path of a file or a postgresql:// URL"
        )
    return url.set(drivername="postgresql+psycopg").render_as_string(hide_password=False), None


def open_registry(path_or_url: str | Path, *, any_revision: bool = False) -> Registry:
    """The registry at a path or SQLAlchemy URL.

    Raises NotFound if there is none, PlutonbookError if what is there is no registry or has another schema than this
    version (``any_revision`` skips the last, for upgrade and check).
    """
    url, path = place_of(path_or_url)
    registry = Registry(url, path)
    revision = _file_revision(path) if path is not None else _server_revision(registry)
    if not any_revision and revision != HEAD_REVISION:
        registry.close()
        name = path if path is not None else sa.make_url(url).render_as_string()
        if revision > HEAD_REVISION:
            raise PlutonbookError(
                f"the registry {name} has schema {revision}, made by a newer Plutonbook; this one knows up to "
                f"{HEAD_REVISION}: install the newer version"
            )
        raise PlutonbookError(
            f"the registry {name} has schema {revision}, this Plutonbook needs {HEAD_REVISION}: run 'plutonbook "
            "upgrade' (it makes a backup first)"
        )
    return registry


def _file_revision(path: Path) -> str:
    """Schema revision of a registry file; raises where the file is missing or is something else."""
    if path.is_dir():
        raise PlutonbookError(f"{path} is a folder; name the registry file in it")
    if not path.exists():
        raise NotFound(f"there is no registry at {path}: 'plutonbook create' makes a new one there")
    # SQLite alone may open the file: closing any other descriptor of it drops this process's locks on it
    if path.stat().st_size == 0:
        raise PlutonbookError(f"{path} is empty, so it is not a registry; name another file or create one elsewhere")
    try:
        connection = _connect_file(path)
    except sqlite3.Error as error:
        raise PlutonbookError(f"{path} cannot be opened: {error}; check that you may read and write it") from error
    try:
        tables = {row[0] for row in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")}
        if not {"alembic_version", "sample", "batch"} <= tables:
            raise PlutonbookError(
                f"{path} is an SQLite file of something else (it has no tables sample and batch); nothing was changed"
            )
        row = connection.execute("SELECT version_num FROM alembic_version").fetchone()
    except sqlite3.DatabaseError as error:
        if getattr(error, "sqlite_errorcode", None) == sqlite3.SQLITE_NOTADB:
            raise PlutonbookError(
                f"{path} is not an SQLite file, or its first page is damaged: name another file, create a registry "
                "elsewhere, or put a backup back with 'plutonbook recover'"
            ) from error
        told = faults.told(error, path)
        raise PlutonbookError(
            told or f"{path} is damaged or unreadable: {error}; restore a backup with 'plutonbook recover'"
        ) from error
    finally:
        connection.close()
    return str(row[0]) if row else ""


def _server_revision(registry: Registry) -> str:
    name = sa.make_url(registry.url).render_as_string()
    try:
        with registry.reader.connect() as connection:
            if not sa.inspect(connection).has_table("alembic_version"):
                raise NotFound(f"the database {name} holds no registry: 'plutonbook create' makes one in it")
            return str(connection.exec_driver_sql("SELECT version_num FROM alembic_version").scalar() or "")
    except sa.exc.OperationalError as error:
        registry.close()
        reason = str(error.orig).strip().splitlines()[0]
        raise PlutonbookError(f"the database {name} cannot be reached: {reason}; is the server running?") from error
    except BaseException:
        registry.close()
        raise


def _connect_file(path: Path) -> sqlite3.Connection:
    return sqlite3.connect(
        f"file:{quote(str(path))}?mode=rw", uri=True, isolation_level=None, check_same_thread=False, timeout=PATIENCE_S
    )


def _sqlite_engine(path: Path, foreign_keys: bool, query_only: bool, **pool: int) -> sa.Engine:
    engine = sa.create_engine("sqlite://", creator=lambda: _connect_file(path), poolclass=sa.pool.QueuePool, **pool)

    @sa.event.listens_for(engine, "connect")
    def _prepare(connection: sqlite3.Connection, _record: Any) -> None:
        connection.execute(f"PRAGMA foreign_keys={'ON' if foreign_keys else 'OFF'}")
        connection.execute("PRAGMA cache_size=-65536")
        if query_only:
            connection.execute("PRAGMA query_only=ON")
        else:
            connection.execute("PRAGMA synchronous=NORMAL")

    @sa.event.listens_for(engine, "begin")
    def _begin(connection: sa.Connection) -> None:
        connection.exec_driver_sql("BEGIN" if query_only else "BEGIN IMMEDIATE")

    return engine


def _postgresql_engine(url: str, query_only: bool) -> sa.Engine:
    try:
        engine = sa.create_engine(url)
    except ModuleNotFoundError as error:
        raise PlutonbookError(
            "PostgreSQL needs the driver psycopg: pip install 'plutonbook[postgresql]' puts it in place"
        ) from error
    if query_only:
        return engine.execution_options(postgresql_readonly=True, isolation_level="REPEATABLE READ")
    return engine


@contextmanager
def reading(registry: Registry) -> Iterator[sa.Connection]:
    """A connection that cannot write and sees one unchanging picture of the registry. It never waits for a writer."""
    with registry.reader.connect() as connection, connection.begin() as transaction:
        try:
            yield connection
        finally:
            transaction.rollback()


@contextmanager
def writing(
    registry: Registry,
    drain: Drain | None = None,
    *,
    what: str = "a change",
    wait_s: float | None = None,
    tell: Callable[[str], Any] | None = None,
    bulk: bool = False,
    trial: bool = False,
) -> Iterator[sa.Connection]:
    """A connection in a transaction of its own that ends with a commit, or with a rollback if anything is raised.

    ``drain(connection)`` runs before the commit: it recomputes what the ``stale`` table names. ``what`` says what is
    being done, for whoever has to wait. A busy registry: after two seconds ``tell`` is called with a sentence that
    says what holds it and since when; after ``wait_s`` seconds in all (2; with ``tell`` given, 600) RegistryBusy is
    raised with that sentence. ``wait_s=0`` does not wait at all.

    ``bulk``: for imports, which make every id they refer to in the same transaction. On SQLite foreign keys are then
    not looked up row by row (a third of the time of an import); the test of the import runs ``foreign_key_check``.
    ``trial``: everything is rolled back at the end, for a dry run.
    """
    if wait_s is None:
        wait_s = PATIENCE_S if tell is None else 600.0
    with (registry.bulk_writer if bulk else registry.writer).connect() as connection:
        holder.enter(registry, connection, what, wait_s, tell)
        try:
            yield connection
            if drain is not None:
                drain(connection)
            if trial:
                connection.rollback()
            else:
                connection.commit()
        except (sa.exc.DBAPIError, sqlite3.Error) as error:
            _roll_back(connection)
            told = faults.told(error, registry.path or "")
            if told is None:
                raise
            raise PlutonbookError(f"{told}. Nothing was changed.") from error
        except BaseException:
            connection.rollback()
            raise
        finally:
            holder.leave(registry)


def _roll_back(connection: sa.Connection) -> None:
    """Roll back what may be rolled back already: SQLite does so by itself where the disk is full."""
    with suppress(sa.exc.DBAPIError, sqlite3.Error):
        connection.rollback()


__all__ = [
    "APPLICATION_ID",
    "HEAD_REVISION",
    "NotFound",
    "Registry",
    "RegistryBusy",
    "open_registry",
    "place_of",
    "reading",
    "writing",
]
