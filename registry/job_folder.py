"""What is kept of jobs: a folder each, private to the user, for a day; and who works on one, by a lock on a file."""

from __future__ import annotations

import contextlib
import fcntl
import hashlib
import json
import os
import re
import secrets
import shutil
import tempfile
import threading
import time
from collections.abc import Iterator
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import Any, ClassVar, Self

from registry.state_place import state_place, whole_url

#: What becomes of a job: it waits, is at work; then one of the ends. An import reads, has read and stores.
WAITING, READING, READ, STORING, WORKING, TRIED, DONE, REFUSED, FAILED = (
    "waiting", "reading", "read", "storing", "working", "tried", "done", "refused", "failed",
)  # fmt: skip
UNDER_WAY = (WAITING, READING, STORING, WORKING)
KEPT_S = 24 * 3600
_ID = re.compile(r"[A-Za-z0-9_-]{16}")


@dataclass
class Job:
    """One piece of work: what it is (its class), how far it is, what came of it. ``account`` is who asked for it."""

    job_id: str
    created_at: str
    state: str = WAITING
    sentence: str = ""
    done: int = 0
    total: int = 0
    started_at: str | None = None
    ended_at: str | None = None
    account: str | None = None

    #: The classes by the name under which their records are kept.
    kinds: ClassVar[dict[str, type[Job]]] = {}
    kind: ClassVar[str] = ""
    #: How the sentence of a fault begins, and what is said of work that a stopped program left.
    nothing_done: ClassVar[str] = "Nothing was changed"
    left_undone: ClassVar[str] = (
        "Nothing was changed: the program was stopped while it worked on this. A change is made whole or not at all; "
        "ask for it again."
    )

    def __init_subclass__(cls, kind: str, **more: Any) -> None:
        super().__init_subclass__(**more)
        cls.kind = kind
        Job.kinds[kind] = cls

    @property
    def under_way(self) -> bool:
        return self.state in UNDER_WAY

    def what(self) -> str:
        """What is done, to be put into a sentence: ``the import of r.csv``."""
        raise NotImplementedError

    @classmethod
    def from_record(cls, record: dict[str, Any]) -> Self:
        """The job that was kept as ``record``."""
        return cls(**record)


def state_folder(registry_url: str) -> Path:
    """Where the jobs of a registry are kept."""
    own = hashlib.sha256(whole_url(registry_url).encode()).hexdigest()[:16]
    return state_place() / "imports" / own


class JobFolder:
    """The jobs of one registry, as they are kept."""

    def __init__(self, place: Path) -> None:
        self.place = place
        self._held: dict[str, int] = {}
        self._lock = threading.Lock()

    def new_id(self) -> str:
        """The id of a new job; its folder is made."""
        self.clean()
        try:
            self.place.mkdir(mode=0o700, parents=True, exist_ok=True)
        except OSError:  # a home that cannot be written: the system's place for such files
            self.place = Path(tempfile.mkdtemp(prefix="plutonbook-jobs-"))
        job_id = secrets.token_urlsafe(12)
        (self.place / job_id).mkdir(mode=0o700)
        return job_id

    def load(self, job_id: str) -> Job | None:
        """The job as last saved; None where there is none (or none any more)."""
        if not _ID.fullmatch(job_id):
            return None
        try:
            record = json.loads((self.place / job_id / "job.json").read_text(encoding="utf-8"))
            return Job.kinds[record.pop("kind")].from_record(record)
        except (OSError, ValueError, TypeError, KeyError):
            return None

    def save(self, job: Job) -> None:
        """Write the job; whoever reads meanwhile sees the earlier or the new one, whole."""
        path = self.place / job.job_id / "job.json"
        partial = path.with_suffix(f".{threading.get_ident()}.part")
        record = {"kind": job.kind, **asdict(job)}
        partial.write_text(json.dumps(record, ensure_ascii=False, default=str), encoding="utf-8")
        partial.chmod(0o600)
        partial.replace(path)

    def delete(self, job_id: str) -> None:
        """Delete a job with its files."""
        if _ID.fullmatch(job_id):
            shutil.rmtree(self.place / job_id, ignore_errors=True)

    def all(self) -> list[Job]:
        """Every job, newest first."""
        ids = [path.name for path in self.place.iterdir()] if self.place.is_dir() else []
        found = [job for job_id in ids if (job := self.load(job_id)) is not None]
        return sorted(found, key=lambda job: (job.created_at, job.job_id), reverse=True)

    def clean(self, older_than_s: float = KEPT_S) -> int:
        """Delete what was not touched for that long and is not at work; how many jobs."""
        deleted = 0
        before = time.time() - older_than_s
        for path in self.place.iterdir() if self.place.is_dir() else ():
            with contextlib.suppress(OSError):
                mark = path / "job.json"
                touched = (mark if mark.exists() else path).stat().st_mtime
                if _ID.fullmatch(path.name) and touched < before and not self.is_held(path.name):
                    shutil.rmtree(path, ignore_errors=True)
                    deleted += 1
        return deleted

    def hold(self, job_id: str) -> bool:
        """Take a job for this process until ``release`` or its end; False where another process holds it."""
        with self._lock, self._opened(job_id, os.O_CREAT) as descriptor:
            if descriptor is None or job_id in self._held or not _taken(descriptor, fcntl.LOCK_EX):
                return False
            self._held[job_id] = os.dup(descriptor)  # the lock is the open file's, and lives on with this one
            return True

    def release(self, job_id: str) -> None:
        """Give a job free."""
        with self._lock:
            descriptor = self._held.pop(job_id, None)
        if descriptor is not None:
            os.close(descriptor)

    def is_held(self, job_id: str) -> bool:
        """Whether a living process works on the job."""
        with self._opened(job_id) as descriptor:
            return descriptor is not None and not _taken(descriptor, fcntl.LOCK_SH)

    @contextlib.contextmanager
    def _opened(self, job_id: str, flags: int = 0) -> Iterator[int | None]:
        """The descriptor of the file that is locked; None where there is none."""
        descriptor = None
        if _ID.fullmatch(job_id):
            with contextlib.suppress(OSError):
                descriptor = os.open(self.place / job_id / "at-work", os.O_RDWR | flags, 0o600)
        try:
            yield descriptor
        finally:
            if descriptor is not None:
                os.close(descriptor)


def _taken(descriptor: int, how: int) -> bool:
    for wait_s in (0.0, 0.01, 0.02):  # another may just be looking whether it is held
        time.sleep(wait_s)
        with contextlib.suppress(OSError):
            fcntl.flock(descriptor, how | fcntl.LOCK_NB)
            return True
        if how == fcntl.LOCK_SH:
            break
    return False
