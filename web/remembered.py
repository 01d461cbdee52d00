"""Summaries over the whole registry, kept until somebody changes it: nobody waits twice for the same answer."""

from __future__ import annotations

from collections.abc import Callable, Hashable
from typing import TypeVar

from flask import current_app

from registry.store.reading.session import change_mark

Found = TypeVar("Found")
#: Answers kept at most; the oldest goes first.
MOST_KEPT = 200


def remembered(key: Hashable, find: Callable[[], Found]) -> Found:
    """What ``find`` gives, from memory where the registry is as it was when that was found.

    The mark is taken before the search: a change during it makes the answer be found anew next time.
    """
    kept = current_app.extensions.setdefault("remembered", {})
    mark = change_mark(current_app.extensions["registry"])
    known = kept.get(key)
    if known is not None and known[0] == mark:
        found: Found = known[1]
        return found
    found = find()
    kept[key] = (mark, found)
    while len(kept) > MOST_KEPT:
        kept.pop(next(iter(kept)), None)
    return found
