"""What a database says when the disk, the folder or the server fails, as a sentence that says what to do."""

from __future__ import annotations

import sqlite3
from pathlib import Path

import sqlalchemy as sa

#: Primary result codes of SQLite (the low byte of the extended ones).
_FULL = {sqlite3.SQLITE_FULL}
_NOT_WRITABLE = {sqlite3.SQLITE_READONLY, sqlite3.SQLITE_CANTOPEN, sqlite3.SQLITE_PERM}
_DISK = {sqlite3.SQLITE_IOERR}
_DAMAGED = {sqlite3.SQLITE_CORRUPT, sqlite3.SQLITE_NOTADB}
_BUSY = {sqlite3.SQLITE_BUSY, sqlite3.SQLITE_LOCKED}


def told(error: BaseException, place: Path | str) -> str | None:
    """The sentence for a fault that lies outside the program; None for any other (a broken rule, a wrong statement).

    ``place`` is the registry as the user named it. ``error`` may be SQLAlchemy's or the driver's own.
    """
    inner = error.orig if isinstance(error, sa.exc.DBAPIError) else error
    if isinstance(inner, sqlite3.Error):
        return _of_sqlite(inner, place)
    if isinstance(error, sa.exc.OperationalError):
        reason = (str(inner).strip().splitlines() or ["no reason given"])[0]
        return f"the database server failed in the middle of the work: {reason}; see whether it runs, then repeat this"
    return None


def _of_sqlite(error: sqlite3.Error, place: Path | str) -> str | None:
    code = getattr(error, "sqlite_errorcode", None)
    if code is None:
        return None
    primary = code & 0xFF
    if primary in _FULL:
        return f"the disk of the registry {place} is full; make room or move the registry, then repeat this"
    if primary in _NOT_WRITABLE:
        return (
            f"the registry {place} cannot be opened ({error}): its file and its folder must be writable, also for "
            "reading; copy it to a folder where you may write, or ask for the right to"
        )
    if primary in _DISK:
        return (
            f"the disk of the registry {place} failed ({error}): it may be full, disconnected or a network folder; see "
            "to the disk, then repeat this and run 'plutonbook check'"
        )
    if primary in _DAMAGED:
        return f"{place} is damaged or unreadable: {error}; restore a backup with 'plutonbook recover'"
    if primary in _BUSY:
        return f"the registry {place} is being written by another program; repeat this when that is done"
    return None
