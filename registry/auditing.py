"""Who changed what and when, in words: one entry of ``audit_entry`` for each change.

On the command line, and on a site without accounts (which takes changes from this machine alone), that is the
operating system's user; on a site with accounts it is the account that is signed in.
"""

from __future__ import annotations

import getpass
from collections.abc import Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from typing import Any

from registry.clock import now
from registry.store import edits

_account: ContextVar[str | None] = ContextVar("account that acts", default=None)


def acting_account() -> str | None:
    """The account for which this thread works; None where nobody signed in."""
    return _account.get()


def act_for(account: str | None) -> None:
    """From here on this thread works for an account; None: for the user of the operating system again."""
    _account.set(account)


@contextmanager
def acting_for(account: str | None) -> Iterator[None]:
    """Work for an account inside, and afterwards for whom it was before."""
    before = _account.set(account)
    try:
        yield
    finally:
        _account.reset(before)


def who() -> str:
    """The name that stands with what is changed now."""
    account = _account.get()
    if account is not None:
        return account
    try:
        return getpass.getuser()
    except (KeyError, OSError):
        return "unknown"


def note(connection: Any, action: str, subject: str, detail: str) -> None:
    """Write an entry inside the caller's transaction."""
    edits.write_audit_entry(connection, now(), who(), action, subject, detail)
