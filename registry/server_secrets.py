"""The secret that signs the cookies of the site: in the user's state folder, never in the registry, which is shared."""

from __future__ import annotations

import hashlib
import hmac
import os
import secrets
import stat
from contextlib import suppress
from pathlib import Path

from registry.state_place import state_place, whole_url

_LENGTH_BYTES = 32


def secret_file() -> Path:
    """Where the secret is kept."""
    return state_place() / "secret"


def signing_key(registry_url: str, place: Path | None = None) -> bytes:
    """The key of one registry's site, 32 bytes, the same after a restart.

    The secret is made at the first call, mode 0600. One that others may read, that is another user's or too short is
    replaced, which ends every session. Where the folder cannot be written, the key holds for this process only.
    """
    try:
        secret = _kept(place or secret_file())
    except (OSError, RuntimeError):  # RuntimeError: a user without a home
        secret = secrets.token_bytes(_LENGTH_BYTES)
    return hmac.new(secret, whole_url(registry_url).encode(), hashlib.sha256).digest()


def _kept(place: Path) -> bytes:
    known = _read(place)
    if known is not None:
        return known
    place.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
    fresh = place.with_name(f"{place.name}.{secrets.token_hex(8)}")
    descriptor = os.open(fresh, os.O_CREAT | os.O_EXCL | os.O_WRONLY, 0o600)
    try:
        with os.fdopen(descriptor, "wb") as file:
            file.write(secrets.token_bytes(_LENGTH_BYTES))
        if place.is_symlink() or place.exists():
            known = _read(place)  # perhaps another process was quicker
            if known is not None:
                return known
            place.unlink()
        with suppress(FileExistsError):  # another process was first: its secret counts
            os.link(fresh, place)
    finally:
        fresh.unlink(missing_ok=True)
    made = _read(place)
    if made is None:
        raise OSError(f"{place} does not keep what is written to it")
    return made


def _read(place: Path) -> bytes | None:
    """The secret, None where there is none that is of use."""
    try:
        descriptor = os.open(place, os.O_RDONLY | os.O_NOFOLLOW)
    except OSError:
        return None
    with os.fdopen(descriptor, "rb") as file:
        about = os.fstat(file.fileno())
        private = stat.S_ISREG(about.st_mode) and not about.st_mode & 0o077 and about.st_uid == os.geteuid()
        secret = file.read(_LENGTH_BYTES + 1)
    return secret if private and len(secret) == _LENGTH_BYTES else None
