"""Codes that are almost the same: what a refused code may have been meant to be."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable


def loose_code(code: str) -> str:
    """A code without what people vary: case, spaces, dashes, slashes, dots, leading zeros of its numbers."""
    plain = unicodedata.normalize("NFKC", code).casefold()
    plain = re.sub(r"[\s\-_/\\.\u2010-\u2015\u2212]+", " ", plain)
    plain = re.sub(r"(?<=\D)(?=\d)|(?<=\d)(?=\D)", " ", plain)
    return "".join(part.lstrip("0") or "0" if part.isdigit() else part for part in plain.split()) + _shape(plain)


def _shape(plain: str) -> str:
    """Where the numbers part, so that ``A1-12`` and ``A11-2`` stay two codes."""
    return ":" + ",".join(str(len(number.lstrip("0") or "0")) for number in re.findall(r"\d+", plain))


def near_misses(codes: Iterable[str], known: Iterable[str]) -> dict[str, list[str]]:
    """For each code that is not known as written, the known codes that differ only in what people vary; in order."""
    exact = set(known)
    loose: dict[str, list[str]] = {}
    for code in sorted(exact):
        loose.setdefault(loose_code(code), []).append(code)
    found = {}
    for code in dict.fromkeys(codes):
        if code not in exact:
            close = loose.get(loose_code(code))
            if close:
                found[code] = close
    return found
