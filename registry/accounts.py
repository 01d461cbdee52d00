"""Accounts: who may change the registry through its site. Reading needs none.

Passwords are kept as scrypt hashes (RFC 7914) with a salt of their own. Lengths and normalisation follow NIST SP
800-63B, section 5.1.1.2 (from memory): a minimum length, no rule on what a password is made of, long ones taken whole.
"""

from __future__ import annotations

import hashlib
import hmac
import unicodedata
from dataclasses import dataclass
from typing import Any

from registry import auditing
from registry.clock import now
from registry.errors import NotFound, PlutonbookError
from registry.store import account_rows
from registry.store.engine import Registry, reading, writing

#: scrypt with N = 2**15, r = 8, p = 1: 32 MiB and some 0.1 s for one guess.
METHOD = "scrypt:32768:8:1"
SALT_LETTERS = 16
SHORTEST_PASSWORD, LONGEST_PASSWORD = 10, 1000
LONGEST_NAME = 60
#: All accounts may do the same.
ROLE = "writer"
#: Compared where no such account is, so that the answer takes as long; no password has this hash.
_NOBODYS_HASH = f"{METHOD}${'0' * SALT_LETTERS}${'0' * 128}"


@dataclass(frozen=True)
class Account:
    """An account that signed in. ``stamp`` changes with the password: a session that holds another is over."""

    account_id: int
    name: str
    stamp: str


def checked_name(name: str) -> str:
    """The name as it is kept: NFC, single spaces; PlutonbookError for one that cannot be taken."""
    kept = " ".join(unicodedata.normalize("NFC", name).split())
    if not kept or len(kept) > LONGEST_NAME or not kept.isprintable():
        raise PlutonbookError(
            f"the name of an account has 1 to {LONGEST_NAME} printable letters; "
            f"{'none was' if not kept else f'{len(kept)} were'} given"
            + ("" if kept.isprintable() else ", some of them not printable")
        )
    return kept


def add(registry: Registry, name: str, password: str) -> dict[str, Any]:
    """Add an account; ``account created_at first`` (whether it is the only one).

    PlutonbookError for a name that is taken (also in other case) or a password that is too short.
    """
    kept, password_hash, created_at = checked_name(name), _hashed(password), now()
    with writing(registry, what="a change of the accounts") as connection:
        known = account_rows.list_accounts(connection)
        same = _named(known, kept)
        if same is not None:
            raise PlutonbookError(
                f"there is an account '{same['name']}' already; 'plutonbook account password' changes its password"
            )
        account_rows.insert_account(
            connection, name=kept, password_hash=password_hash, role=ROLE, created_at=created_at
        )
        auditing.note(connection, "account", kept, "added")
    return {"account": kept, "created_at": created_at, "first": not known}


def change_password(registry: Registry, name: str, password: str) -> dict[str, Any]:
    """Give an account another password, which ends its sessions; NotFound, or PlutonbookError for a short password."""
    password_hash = _hashed(password)
    with writing(registry, what="a change of the accounts") as connection:
        row = _known(connection, name)
        account_rows.set_password_hash(connection, row["account_id"], password_hash)
        auditing.note(connection, "account", row["name"], "password changed")
    return {"account": row["name"]}


def remove(registry: Registry, name: str) -> dict[str, Any]:
    """Remove an account, which ends its sessions; ``account last`` (whether none is left). NotFound for none."""
    with writing(registry, what="a change of the accounts") as connection:
        row = _known(connection, name)
        account_rows.delete_account(connection, row["account_id"])
        auditing.note(connection, "account", row["name"], "removed")
        left = account_rows.any_account(connection)
    return {"account": row["name"], "last": not left}


def list_accounts(registry: Registry) -> list[dict[str, Any]]:
    """``account`` and ``created_at`` of every account, oldest first."""
    with reading(registry) as connection:
        rows = account_rows.list_accounts(connection)
    return [{"account": row["name"], "created_at": row["created_at"]} for row in rows]


def any_accounts(registry: Registry) -> bool:
    """Whether the registry holds an account: from the first on, its site takes changes of signed-in accounts only."""
    with reading(registry) as connection:
        return account_rows.any_account(connection)


def sign_in(registry: Registry, name: str, password: str) -> Account | None:
    """The account of that name and password; None, after the same work, where either is wrong."""
    from werkzeug.security import check_password_hash

    with reading(registry) as connection:
        row = _named(account_rows.list_accounts(connection), name)
    typed = _normal(password)
    fits = len(typed) <= LONGEST_PASSWORD
    stored = _NOBODYS_HASH if row is None or not fits else row["password_hash"]
    right = check_password_hash(stored, typed[:LONGEST_PASSWORD])
    return _account(row) if row is not None and right and fits else None


def of_session(registry: Registry, account_id: int, stamp: str) -> Account | None:
    """The account a session was opened for; None where it was removed or its password changed since."""
    with reading(registry) as connection:
        row = account_rows.find_account(connection, account_id)
    if row is None:
        return None
    account = _account(row)
    return account if hmac.compare_digest(account.stamp.encode(), stamp.encode()) else None


def _account(row: dict[str, Any]) -> Account:
    stamp = hmac.new(row["password_hash"].encode(), b"session", hashlib.sha256).hexdigest()[:32]
    return Account(row["account_id"], row["name"], stamp)


def _normal(password: str) -> str:
    return unicodedata.normalize("NFKC", password)


def _hashed(password: str) -> str:
    from werkzeug.security import generate_password_hash

    password = _normal(password)
    if not SHORTEST_PASSWORD <= len(password) <= LONGEST_PASSWORD:
        raise PlutonbookError(
            f"the password has {len(password):,} letters; {SHORTEST_PASSWORD} to {LONGEST_PASSWORD:,} are taken, of "
            "any kind (a few words make a good one)"
        )
    if not password.isprintable():
        raise PlutonbookError("the password holds a letter that cannot be typed in a form, such as a tab")
    return generate_password_hash(password, method=METHOD, salt_length=SALT_LETTERS)


def _folded(name: str) -> str:
    return " ".join(unicodedata.normalize("NFC", name).split()).casefold()


def _named(rows: list[dict[str, Any]], name: str) -> dict[str, Any] | None:
    """The account of that name in any case: two that differ in case alone cannot be."""
    folded = _folded(name)
    return next((row for row in rows if _folded(row["name"]) == folded), None)


def _known(connection: Any, name: str) -> dict[str, Any]:
    rows = account_rows.list_accounts(connection)
    row = _named(rows, name)
    if row is None:
        known = ", ".join(each["name"] for each in rows)
        raise NotFound(f"there is no account '{name}'; the registry holds {known or 'none'}")
    return row
