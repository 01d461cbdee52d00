"""How far a long piece of work is, in a sentence: the same words on the command line and on the site."""

from __future__ import annotations

from collections.abc import Callable

#: Called with what is being done (a key of ``words``), how much of it is done, and of how much.
Progress = Callable[[str, int, int], None]

_VERBS = {"storing": "Storing", "computing": "Computing and judging"}


def unwatched(_what: str, _done: int, _total: int) -> None:
    """Progress that nobody looks at."""


def words(what: str, done: int, total: int, *, file: str = "", trial: bool = False) -> str:
    """The sentence: ``file`` is the name of the file that is read, ``trial`` says that nothing will be kept."""
    if what == "reading":
        return f"Reading {file or 'the files'}" + (f", file {done + 1} of {total}." if total > 1 else ".")
    if what == "reading bytes":
        return f"Reading{f' {file}' if file else ''}: {done / 1e6:,.0f} of {total / 1e6:,.0f} MB."
    if what == "marking":
        return "Finding the samples it touches."
    if what == "writing":
        return "Undoing the trial." if trial else "Writing it to the registry."
    verb = _VERBS.get(what, what.capitalize())
    things = "lines of results" if what == "storing" else "samples"
    return f"{verb}{' on trial' if trial else ''}: {done:,} of {total:,} {things}."
