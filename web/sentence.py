"""The filter sentence above a list or a diagram: read from the address, written back to it, said in words."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any
from urllib.parse import urlencode

from flask import request, url_for

from registry.store.reading.columns import Column, Columns
from registry.store.reading.filters import ADDING_ARGUMENTS, KINDS, VERDICTS, Filter, parse_filter
from web import wording


def asked_filter(
    arguments: Mapping[str, Sequence[str]], columns: Columns, targets: Mapping[str, str], also: Iterable[str] = ()
) -> Filter:
    """The filter of an address; ``also`` names the arguments that belong to the page."""
    return parse_filter(arguments, columns, list(targets), also=also)


def arguments_of_request() -> dict[str, list[str]]:
    """Every argument of the address with all its values."""
    return {name: request.args.getlist(name) for name in request.args}


def address(pairs: Iterable[tuple[str, str]], endpoint: str = "samples.list_page", **more: str) -> str:
    """The address of a page with these arguments."""
    query = urlencode([*pairs, *more.items()], safe=",")
    return url_for(endpoint) + (f"?{query}" if query else "")


def unsettled(arguments: Mapping[str, Sequence[str]]) -> bool:
    """True for an address that a form wrote: empty fields, the fields that add a condition, a list of ticks."""
    return (
        any(name in arguments for name in ADDING_ARGUMENTS)
        or any(not value for values in arguments.values() for value in values)
        or len(arguments.get("columns", ())) > 1
    )


def sentence_context(
    asked: Filter, arguments: Mapping[str, Sequence[str]], columns: Columns, targets: Mapping[str, str]
) -> dict[str, Any]:
    """What ``sentence.html`` needs beside ``page`` (with ``total``) and ``choices``."""
    return {
        "asked": asked,
        "words": _words(asked, columns, targets),
        "kinds": KINDS,
        "verdict_words": VERDICTS,
        "targets": targets,
        "typed": {name: values[-1] for name, values in arguments.items() if values},
        "numeric_groups": _numeric_groups(columns),
        "other_faults": _other_faults(asked),
    }


def _words(asked: Filter, columns: Columns, targets: Mapping[str, str]) -> dict[str, Any]:
    adding = {name for name in ("add_column", "add_min", "add_max") if name in asked.problems}
    if not asked.text:
        adding |= {"text"} & set(asked.problems)
    if not (asked.target or asked.verdict):
        adding |= {"target", "verdict"} & set(asked.problems)
    return {
        "kind": wording.kind_words(asked),
        "place": wording.place_words(asked),
        "verdict": wording.verdict_words(asked, targets) if asked.target or asked.verdict else "",
        "ranges": {limit.column.name: wording.range_words(limit) for limit in asked.ranges},
        "sort": wording.sort_words(asked, columns),
        "adding_fault": bool(adding),
    }


def _numeric_groups(columns: Columns) -> list[tuple[str, list[Column]]]:
    groups = [(wording.VIEW_WORDS[view], [c for c in members if c.numeric]) for view, members in columns.by_view()]
    return [(words, members) for words, members in groups if members]


def _other_faults(asked: Filter) -> list[str]:
    """Sentences of faults that have no field on the page."""
    fields = {"text", "area", "site", "intrusion", "kind", "target", "verdict", "sort", "descending"}
    fields |= {"add_column", "add_min", "add_max"}
    fields |= {f"{limit.column.name}_{end}" for limit in asked.ranges for end in ("min", "max")}
    return [sentence for name, sentence in asked.problems.items() if name not in fields]
