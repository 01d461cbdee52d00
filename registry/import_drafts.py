"""Files waiting to be imported: kept in a private folder of the user with what was chosen for each, for a day.

A draft is one folder: ``draft.json`` and the files as they were sent. It outlives a page reload and the serving
process; what it holds is never part of the registry.
"""

from __future__ import annotations

import contextlib
import hashlib
import json
import os
import re
import secrets
import shutil
import socket
import tempfile
import time
from collections.abc import Callable, Iterable
from dataclasses import asdict, dataclass, field
from pathlib import Path
from typing import Any

from registry.clock import now
from registry.importing import FileChoice
from registry.intake import ReadingOptions, Recipe

#: What becomes of a draft: it waits, is read (looked at), has been read, is stored; then one of the ends.
WAITING, READING, READ, STORING, DONE, REFUSED, FAILED = (
    "waiting", "reading", "read", "storing", "done", "refused", "failed",
)  # fmt: skip
UNDER_WAY = (WAITING, READING, STORING)
KEPT_S = 24 * 3600
LONGEST_NAME = 120
_ID = re.compile(r"[A-Za-z0-9_-]{16}")


@dataclass
class DraftFile:
    """One file of a draft: what the person chose for it, and what was understood when it was last read.

    ``looked`` holds one description a table; ``parts`` are the sheets of a workbook or the members of an archive that
    hold a table, where there are several (``sheet`` names the one to read, None: all of them).
    """

    name: str
    size: int
    kind: str | None = None
    recipe: str | None = None
    recipe_name: str | None = None
    sheet: str | None = None
    negative_means_below: bool = False
    positive_dips: str | None = None
    unit: str | None = None
    parts: list[str] = field(default_factory=list)
    looked: list[dict[str, Any]] = field(default_factory=list)

    def choice(self) -> FileChoice:
        """The choices as the import takes them."""
        recipe = None if self.recipe is None else Recipe.from_json(self.recipe)
        options = ReadingOptions(
            recipe=recipe,
            sheet=self.sheet,
            negative_means_below=self.negative_means_below,
            positive_dips=self.positive_dips,
            unit=self.unit,
        )
        return FileChoice(self.kind, options)


@dataclass
class Draft:
    """Some files on their way into a registry. ``options`` are fields of ``ImportOptions``, ``account`` signed in."""

    draft_id: str
    created_at: str
    files: list[DraftFile]
    options: dict[str, Any] = field(default_factory=dict)
    state: str = WAITING
    storing: bool = False
    sentence: str = ""
    done: int = 0
    total: int = 0
    started_at: str | None = None
    ended_at: str | None = None
    problems: list[dict[str, Any]] = field(default_factory=list)
    report: dict[str, Any] | None = None
    process: int = 0
    host: str = ""
    account: str | None = None

    @property
    def under_way(self) -> bool:
        return self.state in UNDER_WAY

    def names(self) -> str:
        """The files in words."""
        first = self.files[0].name
        return first if len(self.files) == 1 else f"{first} and {len(self.files) - 1} more"


def safe_name(name: str) -> str:
    """A file name without folders and unprintable characters, short enough for every file system."""
    base = "".join(letter for letter in re.split(r"[/\\]", name)[-1] if letter.isprintable()).strip()
    if base in ("", ".", ".."):
        return "file"
    stem, dot, suffix = base.rpartition(".")
    if len(base) > LONGEST_NAME and dot and len(suffix) <= 8:
        base = stem[: LONGEST_NAME - len(suffix) - 1] + "." + suffix
    while len(base.encode()) > 240:
        base = base[:-1]
    return base[:LONGEST_NAME]


def state_folder(registry_url: str) -> Path:
    """Where the drafts of a registry are kept: under XDG_STATE_HOME (XDG Base Directory Specification 0.8)."""
    home = os.environ.get("XDG_STATE_HOME") or str(Path.home() / ".local" / "state")
    own = hashlib.sha256(registry_url.encode()).hexdigest()[:16]
    return Path(home) / "plutonbook" / "imports" / own


class DraftFolder:
    """The drafts of one registry."""

    def __init__(self, place: Path) -> None:
        self.place = place

    def create(self, files: Iterable[tuple[str, Callable[[Path], Any]]]) -> Draft:
        """A new draft of files given as (name, what writes the file to a path)."""
        self.clean()
        try:
            self.place.mkdir(mode=0o700, parents=True, exist_ok=True)
        except OSError:  # a home that cannot be written: the system's place for such files
            self.place = Path(tempfile.mkdtemp(prefix="plutonbook-imports-"))
        draft_id = secrets.token_urlsafe(12)
        folder = self.place / draft_id
        folder.mkdir(mode=0o700)
        kept = []
        for number, (name, write) in enumerate(files):
            path = folder / str(number) / safe_name(name)
            path.parent.mkdir(mode=0o700)
            write(path)
            path.chmod(0o600)
            kept.append(DraftFile(path.name, path.stat().st_size))
        draft = Draft(draft_id, now(), kept)
        self.save(draft)
        return draft

    def paths(self, draft: Draft) -> list[Path]:
        """Where the files of a draft lie, in their order."""
        return [self.place / draft.draft_id / str(number) / file.name for number, file in enumerate(draft.files)]

    def load(self, draft_id: str) -> Draft | None:
        """The draft as last saved; None where there is none (or none any more)."""
        if not _ID.fullmatch(draft_id):
            return None
        try:
            found = json.loads((self.place / draft_id / "draft.json").read_text(encoding="utf-8"))
            files = [DraftFile(**file) for file in found.pop("files")]
            return Draft(files=files, **found)
        except (OSError, ValueError, TypeError, KeyError):
            return None

    def save(self, draft: Draft) -> None:
        """Write the draft; whoever reads meanwhile sees the earlier or the new one, whole."""
        draft.process, draft.host = os.getpid(), socket.gethostname()
        path = self.place / draft.draft_id / "draft.json"
        partial = path.with_suffix(".part")
        partial.write_text(json.dumps(asdict(draft), ensure_ascii=False, default=str), encoding="utf-8")
        partial.chmod(0o600)
        partial.replace(path)

    def drop_files(self, draft: Draft) -> None:
        """Delete the files sent (the registry keeps what it stored); the report and refused rows stay."""
        for path in self.paths(draft):
            path.unlink(missing_ok=True)

    def delete(self, draft_id: str) -> None:
        """Delete a draft with its files."""
        if _ID.fullmatch(draft_id):
            shutil.rmtree(self.place / draft_id, ignore_errors=True)

    def all(self) -> list[Draft]:
        """Every draft, newest first."""
        ids = [path.name for path in self.place.iterdir()] if self.place.is_dir() else []
        found = [draft for draft_id in ids if (draft := self.load(draft_id)) is not None]
        return sorted(found, key=lambda draft: (draft.created_at, draft.draft_id), reverse=True)

    def clean(self, older_than_s: float = KEPT_S) -> int:
        """Delete what was not touched for that long; how many drafts."""
        deleted = 0
        before = time.time() - older_than_s
        for path in self.place.iterdir() if self.place.is_dir() else ():
            with contextlib.suppress(OSError):
                mark = path / "draft.json"
                touched = (mark if mark.exists() else path).stat().st_mtime
                if _ID.fullmatch(path.name) and touched < before:
                    shutil.rmtree(path, ignore_errors=True)
                    deleted += 1
        return deleted
