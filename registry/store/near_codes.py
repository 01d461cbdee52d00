"""Codes that are almost the same: what a refused code may have been meant to be."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable, Sequence
from difflib import get_close_matches


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
    unknown = [code for code in dict.fromkeys(codes) if code not in exact]
    coarse = {_coarse(code) for code in unknown}
    loose: dict[str, list[str]] = {}
    for code in sorted(code for code in exact if _coarse(code) in coarse):
        loose.setdefault(loose_code(code), []).append(code)
    return {code: close for code in unknown if (close := loose.get(loose_code(code)))}


_LEFT_OUT = str.maketrans("", "", "0 -_/\\.\t\u00a0" + "".join(map(chr, range(0x2010, 0x2016))) + "\u2212")


def _coarse(code: str) -> str:
    """The same for all codes of one loose form, and made quickly."""
    return (code if code.isascii() else unicodedata.normalize("NFKC", code)).casefold().translate(_LEFT_OUT)


def nearest(codes: Sequence[str], known: Iterable[str]) -> dict[str, str]:
    """The one known code that each may have been meant to be: one written otherwise, else the most like it in letters.

    Codes without such a neighbour are left out; so are codes that are known as written.
    """
    everything = list(known)
    exact = set(everything)
    found = {code: close[0] for code, close in near_misses(codes, everything).items()}
    by_fold: dict[str, str] = {}
    for code in everything:
        by_fold.setdefault(code.casefold(), code)
    folded = list(by_fold)
    for code in codes:
        if code in found or code in exact:
            continue
        like = get_close_matches(code.casefold(), folded, n=1, cutoff=0.75)
        if like and not (_numbers(code) != _numbers(like[0]) and _letters(code) == _letters(like[0])):
            found[code] = by_fold[like[0]]
    return found


def _numbers(code: str) -> list[str]:
    return re.findall(r"\d+", code)


def _letters(code: str) -> str:
    return re.sub(r"[\W\d_]+", "", code.casefold())
