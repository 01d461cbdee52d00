"""Who changed what and when, in words: one entry of ``audit_entry`` for each change made through a page."""

from __future__ import annotations

import getpass
from typing import Any

from registry.clock import now
from registry.store import edits


def who() -> str:
    """The account of the person at this machine: there are no others."""
    try:
        return getpass.getuser()
    except (KeyError, OSError):
        return "unknown"


def note(connection: Any, action: str, subject: str, detail: str) -> None:
    """Write an entry inside the caller's transaction."""
    edits.write_audit_entry(connection, now(), who(), action, subject, detail)
