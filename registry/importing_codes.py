"""Sample codes of a file of results that the registry lacks, or that it has in another spelling.

A file of a million lines is gone through part by part; what is told of it is a few sentences.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from itertools import chain, islice
from typing import Any

from registry.errors import Problem
from registry.intake import Reading, ResultTable
from registry.intake.spooled import parts_of
from registry.store import masters, quality_rows, reference_values
from registry.store.near_codes import KnownCodes, pattern_of

#: Remarks on almost equal sample codes that are listed one by one; unknown codes, before the rest is counted.
LISTED_CODES, UNKNOWN_LISTED = 20, 5


def unknown_codes(connection: Any, file: str, table: ResultTable, prefix: str = "") -> Iterator[Problem]:
    """One problem a line whose sample code is not in the registry, with a near code where there is one.

    Near codes are looked for the first few of them, those that are listed one by one.
    """
    lines = _unknown_lines(connection, table, prefix)
    first = list(islice(lines, UNKNOWN_LISTED + 1))
    near = masters.near_codes(connection, [code for _, code in first])
    for position, code in chain(first, lines):
        yield Problem(
            file,
            "this sample is not in the registry",
            row=int(table.line_no[position]),
            column=table.sample_header or None,
            found=code,
            expected="the code of a registered sample",
            remedy=_hint(code, near.get(code))
            + "import the sample list first, or use --create-samples to add it with the kind 'unknown'",
        )


def first_of(problems: Iterable[Problem], file: str) -> list[Problem]:
    """The first problems of many unknown codes, and one that counts the rest and says how their codes look."""
    problems = iter(problems)
    first = list(islice(problems, UNKNOWN_LISTED + 2))
    if len(first) <= UNKNOWN_LISTED + 1:
        return first
    look, count = pattern_of(problem.found or "" for problem in chain(first[UNKNOWN_LISTED:], problems))
    more = Problem(
        file,
        f"{count:,} more lines have sample codes that are not in the registry",
        column=first[0].column,
        found=look,
        expected="the codes of registered samples",
        remedy="import the sample list first, or use --create-samples",
    )
    return [*first[:UNKNOWN_LISTED], more]


def almost_known(connection: Any, reading: Reading, prefix: str) -> list[Problem]:
    """Remarks on new sample codes that registered ones differ from only in case, spaces, dashes or leading zeros."""
    table = reading.results
    assert table is not None
    known = KnownCodes(lambda: masters.all_sample_codes(connection))
    remarks: list[Problem] = []
    start = 0
    for part in parts_of(table.sample_codes) if known else ():
        codes = [f"{prefix}{code}" for code in part]
        close = known.near_misses(codes)
        rows = {code: start + row for row, code in reversed(list(enumerate(codes))) if code in close}
        start += len(codes)
        remarks += [
            Problem(
                reading.file, "a registered sample is written almost the same; this one is added beside it",
                row=int(table.line_no[rows[code]]), column=table.sample_header or None, found=code,
                expected=f"perhaps '{alike[0]}'", remedy="correct the code if they are the same", severity="warning",
            )
            for code, alike in close.items()
        ]  # fmt: skip
        if len(remarks) >= LISTED_CODES:
            break
    return remarks[:LISTED_CODES]


def rocks_named_like_materials(connection: Any) -> set[str]:
    """Codes of samples of the kind 'unknown' that are names of reference materials of the registry."""
    kinds = quality_rows.kinds_of(connection, reference_values.material_names(connection))
    return {code for code, kind in kinds.items() if kind == "unknown"}


def on_named_like_materials(file: str, codes: Iterable[str]) -> list[Problem]:
    """Remarks on samples that were just added as rocks although they have the names of reference materials."""
    return [
        Problem(
            file,
            "a sample with the name of a reference material was added as a rock of the kind 'unknown'",
            found=code,
            expected="the kind reference_material",
            remedy="give it that kind in the sample list, or name such codes with 'plutonbook settings "
            "control_pattern.reference_material=...'",
            severity="warning",
        )
        for code in sorted(codes)
    ]


def _unknown_lines(connection: Any, table: ResultTable, prefix: str) -> Iterator[tuple[int, str]]:
    """Position and code of each line whose sample is not registered."""
    start = 0
    for part in parts_of(table.sample_codes):
        codes = [f"{prefix}{code}" for code in part]
        known = masters.sample_ids(connection, set(codes))
        if len(known) < len(codes):
            yield from ((start + place, code) for place, code in enumerate(codes) if code not in known)
        start += len(codes)


def _hint(code: str, near: str | None) -> str:
    """A registered code that only has a letter more or less at its end is like this one, and perhaps another sample."""
    if near is None:
        return ""
    short, long = sorted((code.casefold(), near.casefold()), key=len)
    if long.startswith(short) and long[len(short) :].isalpha():
        return f"the nearest code is '{near}', perhaps of another sample; "
    return f"did you mean '{near}'? "
