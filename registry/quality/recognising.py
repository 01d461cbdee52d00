"""Which lines are controls, and of which stage: words of a certificate, and code patterns that the user sets."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

BLANK, REFERENCE_MATERIAL, DUPLICATE = "blank", "reference_material", "duplicate"
#: Settings that hold a regular expression for sample codes; none is set by default. The stages are kinds of duplicate.
PATTERN_PREFIX = "control_pattern."
PATTERN_NAMES = (BLANK, REFERENCE_MATERIAL, DUPLICATE, "field_duplicate", "crush_duplicate", "pulp_duplicate")

_BLANK = re.compile(r"(?i)\b(blank|blk)s?\b")
_REFERENCE = re.compile(r"(?i)\b(crm|srm|standard|std|reference material|certified)\b")
_DUPLICATE = re.compile(r"(?i)\b(dupl?|duplicate|rep|repeat|replicate|check|split)s?\b\.?")
_OF = re.compile(r"(?i)\b(?:dupl?|duplicate|repeat|replicate|rep|check|split)s?\b\.?\s*(?:of|from|:)\s*(?P<code>[^;]+)")
_STAGES = (
    ("pulp", re.compile(r"(?i)\bpulps?\b")),
    ("crush", re.compile(r"(?i)\b(crush\w*|coarse|rejects?|prep\w*)\b")),
    ("field", re.compile(r"(?i)\b(field|core|quarter\w*|split)\b")),
    ("lab", re.compile(r"(?i)\b(lab\w*|repeat|replicate|rep|check)\b")),
)


@dataclass(frozen=True)
class Spoken:
    """What a certificate says of a line: the kind of control, the code it duplicates, and the stage."""

    kind: str | None = None
    duplicate_of: str | None = None
    stage: str = "unknown"


def read_control_text(text: str | None) -> Spoken:
    """``BLANK`` -> blank; ``DUPL OF X``, ``Duplicate of X`` -> duplicate of X; nothing known -> no kind."""
    if not text:
        return Spoken()
    of = _OF.search(text)
    if of or _DUPLICATE.search(text):
        return Spoken(DUPLICATE, of["code"].strip() if of else None, stage_of(text))
    if _BLANK.search(text):
        return Spoken(BLANK)
    if _REFERENCE.search(text):
        return Spoken(REFERENCE_MATERIAL)
    return Spoken()


def stage_of(text: str | None) -> str:
    """The stage of a duplicate that words name, else ``unknown``."""
    return next((stage for stage, words in _STAGES if text and words.search(text)), "unknown")


class Patterns:
    """The user's code patterns; ValueError names a setting whose expression cannot be used."""

    def __init__(self, settings: Mapping[str, str]) -> None:
        self.compiled: dict[str, re.Pattern[str]] = {}
        for name, value in settings.items():
            if not name.startswith(PATTERN_PREFIX) or not value.strip():
                continue
            kind = name.removeprefix(PATTERN_PREFIX)
            if kind not in PATTERN_NAMES:
                raise ValueError(f"setting '{name}': there is no such pattern; known are {', '.join(PATTERN_NAMES)}")
            try:
                self.compiled[kind] = re.compile(_unquoted(value))
            except re.error as error:
                raise ValueError(
                    f"setting '{name}': '{value}' is no regular expression ({error}); correct or delete it"
                ) from error

    def __bool__(self) -> bool:
        return bool(self.compiled)

    def kind_of(self, code: str) -> str | None:
        """The kind of control that a code's form says, None for a rock."""
        for name, pattern in self.compiled.items():
            if pattern.search(code):
                return DUPLICATE if name.endswith(DUPLICATE) else name
        return None

    def stage_of(self, code: str) -> str:
        """The stage of a duplicate that a code's form says, else ``unknown``."""
        for name, pattern in self.compiled.items():
            if name.endswith("_duplicate") and pattern.search(code):
                return name.removesuffix("_duplicate")
        return "unknown"

    def original_of(self, code: str) -> str | None:
        """The code of the original that a duplicate's code tells: a group of the pattern, else what is left of it.

        ``-PD$`` and ``A12-PD`` give ``A12``; so does ``^QC_(?P<original>.+)$`` of ``QC_A12``. None where nothing is.
        """
        for name, pattern in self.compiled.items():
            match = pattern.search(code) if name.endswith(DUPLICATE) else None
            if match is None:
                continue
            if match.lastindex:
                told = match["original"] if "original" in pattern.groupindex else match[1]
            else:
                told = code[: match.start()] + code[match.end() :]
            return (told or "").strip(" -_./") or None
        return None


def _unquoted(value: str) -> str:
    text = value.strip()
    return text[1:-1].replace("\\\\", "\\") if len(text) > 1 and text[0] == text[-1] == '"' else text


def folded_name(name: str) -> str:
    """A material's name without case, spaces and dashes, so that ``BHVO 2`` finds ``BHVO-2``."""
    return re.sub(r"[\s\-_./]+", "", name).casefold()


def material_of(named: str | None, code: str, materials: Iterable[str]) -> str | None:
    """The registered material that a control sample is of: as named, else the longest name that its code holds."""
    by_fold = {folded_name(name): name for name in materials}
    if named:
        return by_fold.get(folded_name(named))
    inside = [fold for fold in by_fold if len(fold) > 2 and fold in folded_name(code)]
    return by_fold[max(inside, key=len)] if inside else None
