"""Progress of a command on standard error: one line written over on a terminal, else a line now and then."""

from __future__ import annotations

import shutil
import sys
import time
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import click

from registry.progress import words

#: Seconds between two looks of a terminal's line; until the first plain line, and between two of them.
LOOK_EVERY_S, FIRST_LINE_AFTER_S, LINE_EVERY_S = 0.1, 5.0, 10.0


class Shown:
    """Shows how far the work is; call it as ``Progress``, and ``tell`` for a sentence that must be read."""

    def __init__(self, files: Sequence[Path] = (), trial: bool = False) -> None:
        self._files, self._trial = [path.name for path in files], trial
        self._file = ""
        self._terminal = sys.stderr is not None and sys.stderr.isatty()
        self._next = time.monotonic() + (0.0 if self._terminal else FIRST_LINE_AFTER_S)
        self._line = False

    def __call__(self, what: str, done: int, total: int) -> None:
        if what == "reading" and done < len(self._files):
            self._file = self._files[done]
        now = time.monotonic()
        if now < self._next and not (self._terminal and what == "writing"):
            return
        sentence = words(what, done, total, file=self._file, trial=self._trial)
        self._next = now + (LOOK_EVERY_S if self._terminal else LINE_EVERY_S)
        if self._terminal:
            width = shutil.get_terminal_size().columns
            click.echo(f"\r\x1b[2K{sentence[: width - 1]}", err=True, nl=False)
            self._line = True
        else:
            click.echo(sentence, err=True)

    def tell(self, sentence: str) -> None:
        """Say at once what the work waits for."""
        self.wipe()
        click.echo(f"{sentence[:1].upper()}{sentence[1:]}", err=True)

    def wipe(self) -> None:
        """Take the line off the terminal."""
        if self._line:
            click.echo("\r\x1b[2K", err=True, nl=False)
            self._line = False


@contextmanager
def shown(files: Sequence[Path] = (), trial: bool = False) -> Iterator[Any]:
    """Progress of the work inside; its line is gone afterwards, whatever happened."""
    progress = Shown(files, trial)
    try:
        yield progress
    finally:
        progress.wipe()
