"""Codes that are almost the same: what a refused code may have been meant to be."""

from __future__ import annotations

import re
import unicodedata
from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
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


def pattern_of(codes: Sequence[str]) -> str:
    """How most of the codes look, digits as ``#``: ``Q### (Q001 to Q240)``, and how many look otherwise."""
    shapes = Counter(re.sub(r"\d", "#", code) for code in codes)
    shape, number = shapes.most_common(1)[0]
    alike = sorted(code for code in codes if re.sub(r"\d", "#", code) == shape)
    said = alike[0] if alike[0] == alike[-1] else f"{alike[0]} to {alike[-1]}"
    text = said if shape == alike[0] else f"{shape} ({said})"
    return text if number == len(codes) else f"{text} and {len(codes) - number:,} of other forms"


def _numbers(code: str) -> list[str]:
    return re.findall(r"\d+", code)


def _letters(code: str) -> str:
    return re.sub(r"[\W\d_]+", "", code.casefold())
