"""Computing beside writing: a large import derives and judges in a child process while its parent stores.

The child is this module run by the same interpreter (not ``multiprocessing``, which would run the caller's own script
again): it takes pickled chunks on its standard input and gives on its standard output what they came to, as rows
ready to be taken over (``store.ready_rows``) where the registry can take them, else as pickled arrays.
"""

from __future__ import annotations

import os
import pickle
import signal
import subprocess
import sys
from collections import deque
from collections.abc import Callable, Iterable, Iterator, Sequence
from concurrent.futures import Future, ThreadPoolExecutor
from contextlib import contextmanager, suppress
from types import TracebackType
from typing import Any, BinaryIO

from registry.judging import Rules
from registry.pipeline import CHUNK_SIZE, Chunk, Computed, compute
from registry.refresh import write_computed
from registry.store import ready_rows

#: Below so many samples a child process would take longer to start than it saves.
WORTH_A_CHILD = 2 * CHUNK_SIZE
#: Samples a chunk with a child: the ready rows of one take 18 MB.
CHILDS_CHUNK_SIZE = CHUNK_SIZE // 4
#: Chunks computed ahead of the writer.
AHEAD = 2


#: Argument of a child that runs functions.
_FUNCTIONS = "functions"
#: Children that are started and wait for their rules.
_SPARE: deque[subprocess.Popen[bytes]] = deque(maxlen=1)


def _start(*arguments: str) -> subprocess.Popen[bytes]:
    path = os.pathsep.join(entry for entry in sys.path if entry)
    return subprocess.Popen(
        [sys.executable, "-m", "registry.computing", *arguments],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        env={**os.environ, "PYTHONPATH": path},
    )


def _end(child: subprocess.Popen[bytes]) -> None:
    """Close the pipes, which ends the child, and wait for it."""
    for stream in (child.stdin, child.stdout):
        if stream is not None:
            with suppress(BrokenPipeError):
                stream.close()
    child.wait()


@contextmanager
def child_at_hand(wanted: bool) -> Iterator[None]:
    """Start a child before it is needed: while a large file is read it imports what it computes with."""
    if wanted and not _SPARE:
        _SPARE.append(_start())
    try:
        yield
    finally:
        while wanted and _SPARE:
            _end(_SPARE.pop())


class Computations:
    """Computes chunks in order. With ``child`` they are computed ahead in a process of their own.

    ``with Computations(chunks, ...) as computations:`` begins at once; iterating gives ``(chunk, outcome)``, the
    outcome being ``Computed``, or bytes of ready rows where there is a child and ``tables`` says how to make them.
    The chunks are drawn from their iterable in the calling process, at most ``AHEAD`` before they are needed.
    """

    def __init__(self, chunks: Iterable[Chunk], rules: Rules, child: bool, tables: Sequence[str] = ()) -> None:
        self._chunks = iter(chunks)
        self._rules, self._tables = rules, tuple(tables)
        self._wanted = child
        self._child: subprocess.Popen[bytes] | None = None
        self._pool: ThreadPoolExecutor | None = None
        self._waiting: deque[tuple[Chunk, Future[Computed | bytes]]] = deque()

    def __enter__(self) -> Computations:
        if self._wanted:
            self._child = _SPARE.pop() if _SPARE else _start()
            self._pool = ThreadPoolExecutor(1)
            self._pool.submit(_tell, self._child, (self._rules, self._tables))
            self._fill()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        if self._child is not None and kind is not None:
            self._child.kill()
        if self._pool is not None:
            self._pool.shutdown(wait=True, cancel_futures=True)
        if self._child is not None:
            _end(self._child)

    def __iter__(self) -> Iterator[tuple[Chunk, Computed | bytes]]:
        if self._pool is None:
            for chunk in self._chunks:
                yield chunk, compute(chunk, self._rules.definitions, self._rules.conventions)
            return
        while self._waiting:
            yield self._next()

    def finished(self) -> Iterator[tuple[Chunk, Computed | bytes]]:
        """Those next in order that the child has done by now: to be written before more is stored."""
        while self._waiting and self._waiting[0][1].done():
            yield self._next()

    def _next(self) -> tuple[Chunk, Computed | bytes]:
        chunk, future = self._waiting.popleft()
        outcome = future.result()
        self._fill()
        return chunk, outcome

    def _fill(self) -> None:
        while self._pool is not None and len(self._waiting) < AHEAD:
            chunk = next(self._chunks, None)
            if chunk is None:
                return
            self._waiting.append((chunk, self._pool.submit(self._ask, chunk)))

    def _ask(self, chunk: Chunk) -> Computed | bytes:
        assert self._child is not None
        answer = _asked(self._child, chunk)
        if isinstance(answer, Exception):
            raise answer
        return answer


class Helpers:
    """Child processes that run functions of the project beside this one; ``with Helpers(count) as helpers:``."""

    def __init__(self, count: int) -> None:
        self.count = count
        self.children: list[subprocess.Popen[bytes]] = []
        self._pool: ThreadPoolExecutor | None = None

    def __enter__(self) -> Helpers:
        if self.count:
            self.children = [_start(_FUNCTIONS) for _ in range(self.count)]
            self._pool = ThreadPoolExecutor(self.count)
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        for child in self.children:
            if kind is not None:
                child.kill()
        if self._pool is not None:
            self._pool.shutdown(wait=True, cancel_futures=True)
        for child in self.children:
            _end(child)

    def share(self, function: Callable[..., Any], tasks: Sequence[tuple[Any, ...]]) -> list[Any]:
        """``function(*task)`` for each task, at most one more than there are children; the last is done here.

        Function, tasks and answers must pickle. What a child raises is raised here.
        """
        *given, own = tasks
        assert len(given) <= self.count
        futures = []
        if self._pool is not None:
            pairs = zip(self.children, given, strict=False)
            futures = [self._pool.submit(_asked, child, (function, task)) for child, task in pairs]
        here = function(*own)
        answers = [future.result() for future in futures]
        for answer in answers:
            if isinstance(answer, Exception):
                raise answer
        return [*answers, here]


def _tell(child: subprocess.Popen[bytes], message: Any) -> None:
    assert child.stdin is not None
    pickle.dump(message, child.stdin, pickle.HIGHEST_PROTOCOL)
    child.stdin.flush()


def _asked(child: subprocess.Popen[bytes], message: Any) -> Any:
    _tell(child, message)
    assert child.stdout is not None
    return pickle.load(child.stdout)


def _answer(chunk: Chunk, rules: Rules, tables: Sequence[str]) -> Computed | bytes:
    computed = compute(chunk, rules.definitions, rules.conventions)
    if not tables:
        return computed
    with ready_rows.beside(tables) as connection:
        write_computed(connection, chunk.sample_id, computed, rules, fresh=True)
        return ready_rows.packed(connection)


def _serve(requests: BinaryIO, answers: BinaryIO) -> None:
    """The child of ``Computations``: rules first, then chunks."""
    with suppress(EOFError):
        rules, tables = pickle.load(requests)
        _answer_each(requests, answers, lambda chunk: _answer(chunk, rules, tables))


def _serve_functions(requests: BinaryIO, answers: BinaryIO) -> None:
    """The child of ``Helpers``: functions with their arguments."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)  # the parent is interrupted, and ends it
    with suppress(EOFError):
        _answer_each(requests, answers, lambda asked: asked[0](*asked[1]))


def _answer_each(requests: BinaryIO, answers: BinaryIO, answer_to: Callable[[Any], Any]) -> None:
    """Answer until the parent closes the pipe, which ends in EOFError."""
    while True:
        request = pickle.load(requests)
        try:
            answer = answer_to(request)
        except Exception as error:  # handed to the parent, which raises it
            answer = error
        pickle.dump(answer, answers, pickle.HIGHEST_PROTOCOL)
        answers.flush()


if __name__ == "__main__":
    serve = _serve_functions if sys.argv[1:] == [_FUNCTIONS] else _serve
    serve(sys.stdin.buffer, sys.stdout.buffer)
