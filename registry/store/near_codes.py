"""Codes that are almost the same: what a refused code may have been meant to be."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Callable, Iterable, Mapping, Sequence
from difflib import get_close_matches

import numpy as np


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


def written_twice(codes: Iterable[str]) -> dict[str, str]:
    """For each code that differs from an earlier one only in what people vary, that one; in order."""
    alike: dict[str, list[str]] = {}
    for code in dict.fromkeys(codes):
        alike.setdefault(_coarse(code), []).append(code)
    twice: dict[str, str] = {}
    for group in (group for group in alike.values() if len(group) > 1):
        first: dict[str, str] = {}
        for code in group:
            if (before := first.setdefault(loose_code(code), code)) != code:
                twice[code] = before
    return twice


class KnownCodes:
    """Known codes in a few bytes each, to look many new ones up by: ``codes()`` goes through them, again and again."""

    def __init__(self, codes: Callable[[], Iterable[str]]) -> None:
        self._codes = codes
        exact = np.fromiter(map(hash, codes()), np.int64)
        coarse = np.fromiter((hash(_coarse(code)) for code in codes()), np.int64, len(exact))
        self._exact, self._coarse = np.sort(exact), np.sort(coarse)

    def __len__(self) -> int:
        return len(self._exact)

    def near_misses(self, codes: Sequence[str]) -> dict[str, list[str]]:
        """As ``near_misses``; the known codes are gone through only where there may be one."""
        unknown = _outside([hash(code) for code in codes], self._exact)
        new = [codes[place] for place in np.flatnonzero(unknown).tolist()]
        strange = _outside([hash(_coarse(code)) for code in new], self._coarse)
        perhaps = [new[place] for place in np.flatnonzero(~strange).tolist()]
        return near_misses(perhaps, self._codes()) if perhaps else {}


def _outside(hashes: list[int], known: np.ndarray) -> np.ndarray:
    """Which of the hashes are not among the known ones (ascending)."""
    wanted = np.array(hashes, dtype=np.int64)
    place = np.minimum(np.searchsorted(known, wanted), max(0, len(known) - 1))
    return known[place] != wanted if len(known) else np.ones(len(wanted), dtype=bool)


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
    found |= _read_alike([code for code in codes if code not in found and code not in exact], everything)
    by_fold: dict[str, str] = {}
    for code in everything:
        by_fold.setdefault(code.casefold(), code)
    folded = list(by_fold)
    for code in codes:
        if code in found or code in exact:
            continue
        if (shorter := _one_digit_less(code, by_fold)) is not None:
            found[code] = shorter
            continue
        like = get_close_matches(code.casefold(), folded, n=1, cutoff=0.75)
        if like and not (_numbers(code) != _numbers(like[0]) and _letters(code) == _letters(like[0])):
            found[code] = by_fold[like[0]]
    return found


#: Letters that are read or typed for digits.
_ALIKE = str.maketrans("oil", "011")


def _read_alike(codes: Sequence[str], known: Sequence[str]) -> dict[str, str]:
    """The known codes that differ only in O for 0 and I or L for 1 (and in case)."""
    wanted = {code.casefold().translate(_ALIKE): code for code in codes}
    found: dict[str, str] = {}
    for code in known if wanted else ():
        meant = wanted.get(code.casefold().translate(_ALIKE))
        if meant is not None:
            found.setdefault(meant, code)
    return {code: found[same] for code in codes if (same := wanted[code.casefold().translate(_ALIKE)]) in found}


def _one_digit_less(code: str, by_fold: Mapping[str, str]) -> str | None:
    """The known code that is left when one digit is taken out; a doubled digit, or the last one, before the others."""
    folded = code.casefold()
    places = [place for place, sign in enumerate(folded) if sign.isdigit()]
    places.sort(key=lambda place: (folded[place] != folded[place - 1 : place], -place))
    shorter = (folded[:place] + folded[place + 1 :] for place in places)
    return next((by_fold[one] for one in shorter if one in by_fold), None)


def pattern_of(codes: Iterable[str]) -> tuple[str, int]:
    """How most of the codes look, digits as ``#``: ``Q### (Q001 to Q240)``, and how many look otherwise; their number.

    At least one code; only one of each look, the least and the greatest, is held.
    """
    looks: dict[str, tuple[int, str, str]] = {}
    for code in codes:
        shape = re.sub(r"\d", "#", code)
        number, least, greatest = looks.get(shape, (0, code, code))
        looks[shape] = number + 1, min(least, code), max(greatest, code)
    shape, (number, least, greatest) = max(looks.items(), key=lambda look: look[1][0])
    said = least if least == greatest else f"{least} to {greatest}"
    text = said if shape == least else f"{shape} ({said})"
    total = sum(look[0] for look in looks.values())
    return text if number == total else f"{text} and {total - number:,} of other forms", total


def _numbers(code: str) -> list[str]:
    return re.findall(r"\d+", code)


def _letters(code: str) -> str:
    return re.sub(r"[\W\d_]+", "", code.casefold())
