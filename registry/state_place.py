"""Where the program keeps what is a user's own: a folder of the XDG Base Directory Specification 0.8."""

from __future__ import annotations

import os
from pathlib import Path


def state_place() -> Path:
    """The folder, in XDG_STATE_HOME or ~/.local/state; RuntimeError for a user without a home."""
    return Path(os.environ.get("XDG_STATE_HOME") or Path.home() / ".local" / "state") / "plutonbook"


def whole_url(registry_url: str) -> str:
    """The URL with the whole path of a file, so that two files of one name are told apart."""
    if registry_url.startswith("sqlite:///"):
        return f"sqlite:///{Path(registry_url.removeprefix('sqlite:///')).resolve()}"
    return registry_url
