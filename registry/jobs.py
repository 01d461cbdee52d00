"""Long pieces of work of the serving process: one at a time, each with a record that a reload and a restart outlive.

A job is one folder of the user's own: ``job.json`` says what it is, how far it is and what came of it. While a process
works on a job it holds a lock in that folder, which ends with the process: nothing half done is ever told as running.
"""

from __future__ import annotations

import logging
import queue
import threading
import time
from collections.abc import Callable
from contextlib import suppress

from registry import auditing
from registry.clock import now
from registry.errors import PlutonbookError
from registry.job_folder import FAILED, WAITING, Job, JobFolder
from registry.progress import Progress
from registry.store.engine import Registry

#: Seconds between two saves of the progress.
SAVE_EVERY_S = 0.5
_log = logging.getLogger(__name__)


class Jobs:
    """The work on one registry: start it, find it again, ask how far it is and what it waits for."""

    def __init__(self, registry: Registry, folder: JobFolder) -> None:
        self.registry, self.folder = registry, folder
        self._queue: queue.Queue[tuple[Job, Callable[[], None]]] = queue.Queue()
        self._live: dict[str, Job] = {}
        self._lock = threading.Lock()
        self._thread: threading.Thread | None = None
        self._at_work: Job | None = None
        self._changed = threading.Condition()

    def start(self, job: Job, work: Callable[[], None]) -> bool:
        """Let ``work`` be done as soon as what was started before is through; False if the job is under way already.

        ``work`` ends the job with ``end``, once; where it raises, the job fails with the sentence of the fault.
        """
        with self._lock:
            if job.job_id in self._live or not self.folder.hold(job.job_id):
                return False
            job.state, job.sentence, job.done, job.total = WAITING, "", 0, 0
            job.started_at = job.ended_at = None
            job.account = auditing.acting_account()
            try:
                self.folder.save(job)
            except BaseException:
                self.folder.release(job.job_id)
                raise
            self._live[job.job_id] = job
            if self._thread is None or not self._thread.is_alive():
                self._thread = threading.Thread(target=self._work, name="jobs", daemon=True)
                self._thread.start()
        self._queue.put((job, work))
        return True

    def find(self, job_id: str) -> Job | None:
        """The job as it stands now; None where there is none. Work that a stopped program left is told as failed."""
        with self._lock:
            if (live := self._live.get(job_id)) is not None:
                return live
        job = self.folder.load(job_id)
        return self._left(job_id) if job is not None and job.under_way else job

    def _left(self, job_id: str) -> Job | None:
        """A job that was under way when it was looked up; failed where nobody works on it, and nobody can begin now."""
        with self._lock:
            if (live := self._live.get(job_id)) is not None:
                return live
            alone = self.folder.hold(job_id)
            try:
                job = self.folder.load(job_id)
                if alone and job is not None and job.under_way:
                    job.state, job.sentence, job.ended_at = FAILED, job.left_undone, now()
                    self.folder.save(job)
            finally:
                if alone:
                    self.folder.release(job_id)
            return job

    def all(self) -> list[Job]:
        """Every job as it stands now, newest first."""
        return [found for job in self.folder.all() if (found := self.find(job.job_id)) is not None]

    @property
    def at_work(self) -> Job | None:
        """What this process works on now."""
        return self._at_work

    def live(self) -> list[Job]:
        """What this process works on and what waits for it."""
        with self._lock:
            return list(self._live.values())

    def sentence_of(self, job: Job) -> str:
        """How far a job is, or what it waits for, or what came of it, in a sentence."""
        busy = self._at_work
        if job.state != WAITING or busy is None or busy is job:
            return job.sentence
        started = "" if busy.started_at is None else f", started {busy.started_at[11:19]} UTC,"
        return f"Waits until {busy.what()}{started} is through."

    def wait(self, job_id: str, seconds: float) -> Job | None:
        """The job as soon as it is no longer under way, at the latest after so many seconds."""
        until = time.monotonic() + seconds
        with self._changed:
            while (job := self.find(job_id)) is not None and job.under_way:
                left = until - time.monotonic()
                if left <= 0:
                    break
                self._changed.wait(min(left, 0.2))
        return job

    def _work(self) -> None:
        while True:
            job, work = self._queue.get()
            job.started_at = now()
            self._at_work = job
            try:
                with auditing.acting_for(job.account):
                    work()
            except PlutonbookError as fault:
                self.end(job, FAILED, _said(job, str(fault)))
            except Exception:
                _log.exception("%s failed", job.what())
                self.end(
                    job,
                    FAILED,
                    f"{job.nothing_done}, because of a fault in the program and not in your data. The terminal that "
                    "serves this site holds the details.",
                )
            finally:
                self._at_work = None
                with self._changed:
                    self._changed.notify_all()

    def end(self, job: Job, state: str, sentence: str) -> None:
        """Say what came of a job. Whoever sees that it has ended can begin it anew at once."""
        with self._lock:
            job.sentence, job.ended_at = sentence, now()
            job.state = state
            try:
                self._save(job)
            finally:
                self.folder.release(job.job_id)
                self._live.pop(job.job_id, None)

    def watched(self, job: Job, say: Callable[[str, int, int], tuple[str, str]]) -> Progress:
        """What writes the progress of a job down, now and then; ``say`` gives (state, sentence) of a step."""
        saved_at = 0.0

        def progress(what: str, done: int, total: int) -> None:
            nonlocal saved_at
            state, job.sentence = say(what, done, total)
            job.done, job.total = done, total
            job.state = state
            if time.monotonic() - saved_at >= SAVE_EVERY_S:
                saved_at = time.monotonic()
                self._save(job)

        return progress

    def told(self, job: Job) -> Callable[[str], None]:
        """What writes down that a job waits for another program, which a sentence names."""

        def tell(sentence: str) -> None:
            job.state, job.sentence = WAITING, sentence[:1].upper() + sentence[1:]
            self._save(job)

        return tell

    def _save(self, job: Job) -> None:
        """Write the job down where that can be done: its folder may be gone meanwhile, and the work is what counts."""
        with suppress(OSError):
            self.folder.save(job)


def _said(job: Job, sentence: str) -> str:
    """What is told of a fault: that nothing was done, unless the sentence says so itself."""
    if "nothing was changed" in sentence.casefold():
        return sentence[:1].upper() + sentence[1:]
    return f"{job.nothing_done}: {sentence}"
