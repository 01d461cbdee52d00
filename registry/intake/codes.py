"""Sample codes: which column holds them, and what spreadsheets did to them."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from registry.intake.spooled import PackedTexts, parts_of

_SAMPLE = r"(samples?|smpl|smp|specimen|spec|field|feild|lab|laboratory|client|rock|station sample)"
_ID = r"(id|ids|no|no\.|nos|number|num|nr|code|codes|name|names|ref|reference|identification|identifier"
_ID += r"|ident|label|#|tag|n\u00b0|n\u00ba|n)"
_GOOD = (
    (re.compile(rf"{_SAMPLE} ?(ref )?{_ID}"), 3.0),
    (re.compile(r"(samples?|specimen|sampleid|sampleno|sample ?code|fieldid|labid|ident|smpid)"), 3.0),
    (re.compile(r"(sample (discription|description)|client (sample )?id|igsn)"), 2.0),
    (re.compile(r"(id|code|name|tag|label|number)"), 1.0),
    (re.compile(rf".*\b(samples?|feild|field|lab) ?{_ID}\b.*"), 2.5),
)
_NEVER = re.compile(r".*\b(serial|type|kind|hole|site|batch|job|order|certificate|weight|wt|date|line|row)\b.*")
_EATEN = re.compile(
    r"(?mi)^(\d{1,2}-(jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec)[a-z]*(-\d{2,4})?"
    r"|(jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec)[a-z]*-\d{1,4}"
    r"|\d{4}[-/.]\d\d?[-/.]\d\d?( 00:00:00)?"
    r"|(\d\d?/\d\d?/(\d\d|\d{4})|\d\d?\.\d\d?\.\d{4})( 0?0:00(:00)?)?|\d(\.\d+)?e\+\d{1,3})$"
)
#: A code is written on a bag; longer ones are texts that slipped into the column. Common practice, no source.
LONGEST_CODE = 100
_CONTROL = re.compile(r"[\x00-\x1f\x7f-\x9f]")
_FLOAT_NOISE = re.compile(r"(?m)^\d+\.0$")
_NUMERIC = re.compile(r"(?m)^\d+(\.\d+)?$")


@dataclass(frozen=True)
class CodeColumn:
    """The chosen column of sample codes; ``doubt`` says why the choice is not certain."""

    position: int
    header: str
    doubt: str | None = None


def _folded(heading: str) -> str:
    return re.sub(r"[\s_\-./]+", " ", heading.casefold()).strip()


def heading_score(heading: str) -> float:
    """How much a heading looks like that of sample codes, 0 to 3."""
    folded = _folded(heading)
    if not folded:
        return 0.0
    for pattern, score in _GOOD:
        if pattern.fullmatch(folded):
            return score
    return 0.0


def is_code_heading(heading: str) -> bool:
    return heading_score(heading) >= 2.0


def choose_code_column(
    labels: list[str], rows: list[list[str]], taken: set[int], wanted: str | None = None
) -> CodeColumn | None:
    """The column of sample codes among those that hold no analyte, by heading and by what stands below it.

    A Field or Lab ID heading weighs most; then being filled and without repeats. Float noise (``543.0``) speaks
    against a column, for those are serial numbers that a spreadsheet touched.
    """
    if wanted is not None:
        for position, label in enumerate(labels):
            if label == wanted:
                return CodeColumn(position, label)
    scored = []
    for position, label in enumerate(labels):
        if position in taken:
            continue
        cells = [row[position].strip() for row in rows if position < len(row)]
        filled = [cell for cell in cells if cell]
        by_heading = heading_score(label)
        if not filled:
            if not rows and by_heading:
                scored.append((by_heading, -position, by_heading, label))
            continue
        unique = len(set(filled)) / len(filled)
        noise = sum(bool(re.fullmatch(r"\d+\.0", cell)) for cell in filled) / len(filled)
        wordy = sum(bool(re.search(r"[A-Za-z]", cell) and re.search(r"\d", cell)) for cell in filled) / len(filled)
        never = 3.0 if _NEVER.fullmatch(_folded(label)) and by_heading < 2 else 0.0
        field_first = 0.1 if re.search(r"(?i)f(ie|ei)ld|sample", label) else 0.0
        score = by_heading + 1.5 * unique + len(filled) / len(cells) + 0.5 * wordy - noise - never + field_first
        scored.append((score, -position, by_heading, label))
    if not scored:
        return None
    scored.sort(reverse=True)
    score, position, by_heading, label = scored[0]
    doubt = None
    if by_heading < 1:
        doubt = "its heading does not say so; it was chosen for what stands in it"
    elif len(scored) > 1 and scored[1][2] >= 2 and score - scored[1][0] < 2.0:
        doubt = f"'{scored[1][3]}' could be meant as well"
    return CodeColumn(-position, label, doubt)


def unfit_codes(codes: Sequence[str]) -> dict[int, str]:
    """Positions of codes that nobody can have meant, with what is wrong: far too long, or with a line break in them."""
    unfit: dict[int, str] = {}
    start = 0
    for part in parts_of(codes):
        if part and (_CONTROL.search("".join(part)) or len(max(part, key=len)) > LONGEST_CODE):
            for place, code in enumerate(part, start):
                if len(code) > LONGEST_CODE:
                    unfit[place] = f"the code has {len(code):,} characters"
                elif _CONTROL.search(code):
                    unfit[place] = "the code holds a line break, a tab or another invisible control character"
        start += len(part)
    return unfit


def tidy_codes(codes: Sequence[str]) -> tuple[Sequence[str], int, list[int]]:
    """Codes trimmed and in NFC; the number freed of float noise; positions of codes that look like eaten dates.

    Float noise (``16.0`` for 16) is taken off only where every code that is a number carries it. PackedTexts come
    back as PackedTexts, and are gone through in parts.
    """
    packed = isinstance(codes, PackedTexts)
    noisy, clean = 0, True
    tidy: Any = PackedTexts() if packed else []
    for part in parts_of(codes):
        trimmed = list(map(str.strip, part))
        joined = "\n".join(trimmed)
        if not joined.isascii():
            trimmed = [unicodedata.normalize("NFC", code).replace("\u00a0", " ").strip() for code in trimmed]
            joined = "\n".join(trimmed)
        if clean and _NUMERIC.search(joined):
            numbers = [code for code in trimmed if _NUMERIC.fullmatch(code)]
            noisy += len(numbers)
            clean = all(code.endswith(".0") for code in numbers)
        tidy.extend(trimmed)
    freed = noisy if clean else 0
    if freed:
        bare: Any = PackedTexts() if packed else []
        for part in parts_of(tidy):
            bare.extend(code[:-2] if _FLOAT_NOISE.fullmatch(code) else code for code in part)
        tidy = bare
    eaten: list[int] = []
    start = 0
    for part in parts_of(tidy):
        if _EATEN.search("\n".join(part)):
            eaten += [start + position for position, code in enumerate(part) if _EATEN.match(code)]
        start += len(part)
    return tidy, freed, eaten
