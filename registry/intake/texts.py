"""Texts in analyte columns: misplaced columns, words of control samples, and faults with their likely cause."""

from __future__ import annotations

import re

import numpy as np

from registry.intake.cells import NUMBER, parse_cell
from registry.intake.findings import Findings
from registry.intake.readings import ResultColumn
from registry.intake.spooled import column_parts
from registry.intake.wide import WideBody

#: Words by which a text says that its line is a control sample.
CONTROL_WORD = re.compile(r"(?i)\b(blanks?|blk|dupl?\w*|triplicate|standards?|std|crm|reference material|qa/?qc)\b")


def judge_texts(
    columns: list[ResultColumn], body: WideBody, decimal: str, findings: Findings
) -> tuple[list[ResultColumn], WideBody]:
    """Texts in analyte columns: a column of texts is misplaced (warning), a text among numbers is a problem."""
    dropped = []
    for index, texts in sorted(body.texts.items()):
        column = columns[index]
        numbers = sum(int(np.isfinite(part).sum()) for _, part in column_parts(body.values, index))
        pairs = texts.pairs()
        first_line, first_text = pairs[0]
        if len(pairs) > 4 * numbers:
            findings.warn(
                "texts stand where numbers are expected; they are not taken as results",
                row=first_line, column=column.header,
                found=f"{first_text.strip()} ({len(pairs)} texts, {numbers} numbers)", expected="numbers",
                remedy="move the texts to a column of their own, or leave the column out with --column",
            )  # fmt: skip
            _take_control_words(body, pairs)
            if numbers == 0:
                dropped.append(index)
            continue
        for line, text in pairs:
            findings.add(
                "a text stands where a number is expected", row=line, column=column.header, found=text.strip(),
                expected="a number, <number, >number, or a word for no result", remedy=_text_cause(text, decimal),
            )  # fmt: skip
    if not dropped:
        return columns, body
    kept = [index for index in range(len(columns)) if index not in dropped]
    body.values, body.qualifiers = body.values[:, kept], body.qualifiers[:, kept]
    return [columns[index] for index in kept], body


def _take_control_words(body: WideBody, pairs: list[tuple[int, str]]) -> None:
    """A misplaced text that names a control sample (``Blank Sample``) still says so of its line."""
    said = {line: text.strip() for line, text in pairs if CONTROL_WORD.search(text)}
    if not said:
        return
    control = body.control or [None] * len(body.lines)
    body.control = [
        "; ".join(filter(None, (one, said.get(line)))) or None
        for one, line in zip(control, body.lines.tolist(), strict=True)
    ]


def _text_cause(text: str, decimal: str) -> str:
    other = "," if decimal == "." else "."
    if parse_cell(text, other).state == NUMBER:
        return f"the rest of the file has the decimal sign '{decimal}'; write this number with it"
    if re.search(r"(?i)\b(jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec)[a-z]*\b|\d{4}-\d\d-\d\d", text):
        return "a spreadsheet seems to have turned a number into a date; take it from the laboratory's original"
    return "correct the cell or leave it blank"
