"""The door for writers: waiting for the registry, and saying who holds it and since when.

On SQLite the holder writes a small side file ``<registry>-writer.json`` beside the registry; on PostgreSQL the server
knows. The side file informs only: the lock itself is SQLite's.
"""

from __future__ import annotations

import json
import os
import socket
import time
from collections.abc import Callable
from contextlib import suppress
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

import sqlalchemy as sa

from registry.errors import PlutonbookError, RegistryBusy

if TYPE_CHECKING:
    from registry.store.engine import Registry

#: Key of the advisory lock that serialises writers on PostgreSQL ("PLUT").
WRITER_LOCK = 0x504C5554
#: Seconds until a waiting writer is told, and between two looks at a busy PostgreSQL.
TOLD_AFTER_S = 2.0
LOOK_EVERY_S = 0.05


def side_file(path: Path) -> Path:
    """Where the writer of a registry file says what it does."""
    return path.with_name(path.name + "-writer.json")


def enter(
    registry: Registry, connection: sa.Connection, what: str, wait_s: float, tell: Callable[[str], Any] | None
) -> None:
    """Begin the one writing transaction; RegistryBusy after ``wait_s``, ``tell`` once after two seconds."""
    started = time.monotonic()
    told = False
    while not _try_to_begin(registry, connection, min(wait_s, TOLD_AFTER_S)):
        waited = time.monotonic() - started
        if waited >= wait_s:
            raise RegistryBusy(f"{sentence(registry, connection)}. Nothing was changed; try again when it is done.")
        if tell is not None and not told and waited >= TOLD_AFTER_S:
            tell(sentence(registry, connection) + "; waiting.")
            told = True
    _sign(registry, connection, what)


def leave(registry: Registry) -> None:
    """Take the sign off the door."""
    if registry.path is not None:
        with suppress(OSError):
            side_file(registry.path).unlink()


def _try_to_begin(registry: Registry, connection: sa.Connection, wait_s: float) -> bool:
    if registry.path is not None:
        driver: Any = connection.connection.driver_connection
        driver.execute(f"PRAGMA busy_timeout={int(wait_s * 1000)}")
        try:
            connection.begin()
        except sa.exc.OperationalError as error:
            connection.rollback()
            text = str(error.orig)
            if "locked" in text or "busy" in text:
                return False
            raise PlutonbookError(f"the registry {registry.path} cannot be written: {text}") from error
        return True
    connection.begin()
    until = time.monotonic() + wait_s
    while not connection.scalar(sa.text("SELECT pg_try_advisory_xact_lock(:key)"), {"key": WRITER_LOCK}):
        if time.monotonic() >= until:
            connection.rollback()
            return False
        time.sleep(LOOK_EVERY_S)
    return True


def _sign(registry: Registry, connection: sa.Connection, what: str) -> None:
    if registry.path is None:
        connection.execute(
            sa.text("SELECT set_config('application_name', :name, true)"), {"name": f"plutonbook: {what}"[:60]}
        )
        return
    since = datetime.now(UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
    note = {"what": what, "since": since, "process": os.getpid(), "host": socket.gethostname()}
    with suppress(OSError):
        side_file(registry.path).write_text(json.dumps(note), encoding="utf-8")


def sentence(registry: Registry, connection: sa.Connection | None = None) -> str:
    """What holds the registry and since when, in words."""
    if registry.path is None:
        return _server_sentence(connection)
    name = registry.path.name
    try:
        note = json.loads(side_file(registry.path).read_text(encoding="utf-8"))
        what, since, process, host = note["what"], note["since"], int(note["process"]), note["host"]
    except (OSError, ValueError, KeyError):
        return f"the registry {name} is being written by another program, which does not say what it does"
    if host == socket.gethostname() and not _lives(process):
        return f"the registry {name} is being written by another program, which does not say what it does"
    return f"the registry {name} is held by {what} since {since} (process {process} on {host})"


def _server_sentence(connection: sa.Connection | None) -> str:
    row = None
    if connection is not None:
        row = connection.execute(
            sa.text(
                "SELECT a.application_name AS name, a.pid AS pid, to_char(a.xact_start AT TIME ZONE 'UTC', "
                '\'YYYY-MM-DD"T"HH24:MI:SS"Z"\') AS since FROM pg_locks AS l JOIN pg_stat_activity AS a '
                "ON a.pid = l.pid WHERE l.locktype = 'advisory' AND l.granted AND l.objid = :key"
            ),
            {"key": WRITER_LOCK},
        ).first()
        connection.rollback()
    if row is None:
        return "the registry is being written by another program, which does not say what it does"
    what = str(row.name).removeprefix("plutonbook: ")
    return f"the registry is held by {what} since {row.since} (server process {row.pid})"


def _lives(process: int) -> bool:
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    except OSError:
        return True
    return True
