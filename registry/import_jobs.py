"""Imports in the background of the serving process: one at a time, with progress that a reload does not lose."""

from __future__ import annotations

import logging
import os
import queue
import socket
import threading
import time
from contextlib import suppress
from pathlib import Path

from registry import auditing
from registry.clock import now
from registry.errors import InputProblems, PlutonbookError
from registry.import_drafts import DONE, FAILED, READ, READING, REFUSED, STORING, WAITING, Draft, DraftFolder
from registry.importing import ImportOptions, import_files
from registry.intake import Reading
from registry.intake_choices import describe_reading
from registry.progress import words
from registry.store.engine import Registry

#: Seconds between two saves of the progress.
SAVE_EVERY_S = 0.5
_STOPPED = (
    "The program was stopped while it worked on this. An import is stored whole or not at all: see under Batches "
    "whether it is there, else read the files again."
)
_log = logging.getLogger(__name__)


class ImportJobs:
    """The imports of one registry. Look at a draft (read it and try it out), store it, ask how far it is."""

    def __init__(self, registry: Registry, folder: DraftFolder) -> None:
        self.registry, self.folder = registry, folder
        self._queue: queue.Queue[Draft] = queue.Queue()
        self._live: dict[str, Draft] = {}
        self._lock = threading.Lock()
        self._thread: threading.Thread | None = None
        self._at_work: Draft | None = None
        self._changed = threading.Condition()

    def look(self, draft: Draft) -> bool:
        """Read the files and try the import out, writing nothing; False if the draft is under way already."""
        return self._start(draft, storing=False)

    def store(self, draft: Draft) -> bool:
        """Import the files; False if the draft is under way already."""
        return self._start(draft, storing=True)

    def find(self, draft_id: str) -> Draft | None:
        """The draft as it stands now; None where there is none. Work that a stopped program left is told as failed."""
        with self._lock:
            if (live := self._live.get(draft_id)) is not None:
                return live
        draft = self.folder.load(draft_id)
        if draft is not None and draft.under_way and not _lives_elsewhere(draft):
            draft.state, draft.sentence, draft.ended_at = FAILED, _STOPPED, now()
            self.folder.save(draft)
        return draft

    def all(self) -> list[Draft]:
        """Every draft as it stands now, newest first."""
        return [found for draft in self.folder.all() if (found := self.find(draft.draft_id)) is not None]

    def waits_for(self, draft: Draft) -> str:
        """What a waiting draft waits for, in a sentence; empty where it waits for nothing."""
        busy = self._at_work
        if draft.state != WAITING or busy is None or busy is draft:
            return draft.sentence
        return f"Waits until the import of {busy.names()}, started {busy.started_at}, is through."

    def wait(self, draft_id: str, seconds: float) -> Draft | None:
        """The draft as soon as it is no longer under way, at the latest after so many seconds."""
        until = time.monotonic() + seconds
        with self._changed:
            while (draft := self.find(draft_id)) is not None and draft.under_way:
                left = until - time.monotonic()
                if left <= 0:
                    break
                self._changed.wait(min(left, 0.2))
        return draft

    def _start(self, draft: Draft, storing: bool) -> bool:
        with self._lock:
            if draft.draft_id in self._live:
                return False
            self._live[draft.draft_id] = draft
            draft.state, draft.storing, draft.sentence = WAITING, storing, ""
            draft.done = draft.total = 0
            draft.problems, draft.report, draft.ended_at = [], None, None
            draft.account = auditing.acting_account()
            self.folder.save(draft)
            if self._thread is None or not self._thread.is_alive():
                self._thread = threading.Thread(target=self._work, name="imports", daemon=True)
                self._thread.start()
        self._queue.put(draft)
        return True

    def _work(self) -> None:
        while True:
            draft = self._queue.get()
            self._at_work = draft
            try:
                draft.started_at = now()
                with auditing.acting_for(draft.account):
                    self._run(draft)
            except InputProblems as fault:
                draft.problems = [problem.as_dict() for problem in fault.problems]
                self._end(draft, REFUSED, "Nothing was stored: the problems below have to be settled first.")
            except PlutonbookError as fault:
                self._end(draft, FAILED, f"Nothing was stored: {fault}")
            except Exception:
                _log.exception("the import of %s failed", draft.names())
                self._end(
                    draft,
                    FAILED,
                    "Nothing was stored, because of a fault in the program and not in your data. The terminal that "
                    "serves this site holds the details.",
                )
            finally:
                self._at_work = None
                with self._changed:
                    self._changed.notify_all()

    def _end(self, draft: Draft, state: str, sentence: str) -> None:
        """Whoever sees that the work has ended can begin the next at once: both happen under the lock."""
        with self._lock:
            draft.sentence, draft.ended_at = sentence, now()
            draft.state = state
            try:
                with suppress(OSError):  # the folder may have been deleted meanwhile; the registry is what counts
                    self.folder.save(draft)
            finally:
                self._live.pop(draft.draft_id, None)

    def _run(self, draft: Draft) -> None:
        paths = self.folder.paths(draft)
        number_of = {path: number for number, path in enumerate(paths)}
        saved_at = 0.0
        begun: set[Path] = set()

        def progress(what: str, done: int, total: int) -> None:
            nonlocal saved_at
            file = draft.files[done].name if what == "reading" else ""
            draft.sentence = words(what, done, total, file=file, trial=not draft.storing)
            draft.done, draft.total = done, total
            draft.state = STORING if draft.storing and not what.startswith("reading") else READING
            if time.monotonic() - saved_at >= SAVE_EVERY_S:
                saved_at = time.monotonic()
                self.folder.save(draft)

        def tell(sentence: str) -> None:
            draft.state, draft.sentence = WAITING, sentence[:1].upper() + sentence[1:]
            self.folder.save(draft)

        def on_read(path: Path, reading: Reading) -> None:
            file = draft.files[number_of[path]]
            if path not in begun:
                begun.add(path)
                file.looked = []
                file.parts = [] if file.sheet is None else file.parts
            file.looked.append(describe_reading(reading))
            if file.sheet is None and reading.part is not None:
                file.parts.append(reading.part)

        choices = {path: file.choice() for path, file in zip(paths, draft.files, strict=True)}
        options = ImportOptions(**{**draft.options, "dry_run": not draft.storing})
        report = import_files(
            self.registry, paths, options, choices=choices, progress=progress, tell=tell, on_read=on_read
        )
        draft.report = report.as_dict()
        if draft.storing:
            with suppress(OSError):  # it is stored, whatever becomes of the copies
                self.folder.drop_files(draft)
            self._end(draft, DONE, "Stored.")
        else:
            self._end(draft, READ, "Read and tried out; nothing is stored yet.")


def _lives_elsewhere(draft: Draft) -> bool:
    """Whether another living process of this machine (or another machine) works on the draft."""
    if draft.host != socket.gethostname():
        return True
    if draft.process == os.getpid():
        return False
    try:
        os.kill(draft.process, 0)
    except ProcessLookupError:
        return False
    except OSError:
        return True
    return True
