"""Reads the body of a wide results table: a stream of rows into arrays; every cell that does not belong is reported."""

from __future__ import annotations

import re
from itertools import compress
from sys import intern

import numpy as np
from numpy.typing import NDArray

from registry.intake.blocks import BlockReader
from registry.intake.cells import (
    ABOVE,
    BELOW,
    INSUFFICIENT,
    MISSING,
    NO_DATA_MARKS,
    NO_QUALIFIER,
    NUMBER,
    QUALIFIER_CODES,
    SPREADSHEET_ERROR,
    TEXT,
)
from registry.intake.findings import Findings
from registry.intake.names import read_heading
from registry.intake.readings import ResultColumn
from registry.intake.sources import Chunk, Source
from registry.intake.units import canonical_unit
from registry.intake.wide_body import RowsInMemory, SpooledRows, Texts, WideBody
from registry.petrology.analytes import WT_PERCENT_PER_UNIT

_SUMMARY_ROW = re.compile(
    r"(?i)\s*(means?|averages?|avg\.?|ave\.?|totals?|sums?|n ?=|std?\.? ?dev\.?\w*|%? ?rsd\.? ?\(?%?\)?"
    r"|cv ?\(?%?\)?|standard deviation|minimum|maximum|min\.?|max\.?"
    r"|medians?|counts?|(lower |upper )?(detection|reporting) ?limits?|l\.?o\.?[drq]\.?|lld|ldl|mdl|udl"
    r"|units?|methods?|analytes?|number of (samples|results)|percentiles?|\d+(th|st|nd|rd) percentile|end( of .*)?"
    r"|.*end of (report|file|certificate).*)"
    r"\s*[:%]?\s*"
)
#: How a note begins that its own commas cut into cells: a word of its own, a mark, or a sentence.
_NOTE = re.compile(
    r"(?i)\W*(notes?|remarks?|comments?|legend|key|results|approved|authori[sz]ed|certified|signed|prepared|reported|the"
    r"|these|this|page|disclaimer|footnotes?|abbreviations?)\b\W*.*|[*\u2020\u2021\u00a7#].*|\(?\d{1,2}\)\s*\D.*"
    r"|(\S+\s+){4,}\S+",
    re.DOTALL,
)
_RULE = re.compile(r"[-=_*~.\u2500\u2501\u2550]{2,}")
_LETTER_AT_END = re.compile(r"(?m)\D$")


class WideReader:
    """One pass over a source. ``settings``: positions of the code column, of a QA/QC column, of qualifier columns."""

    def __init__(
        self,
        columns: list[ResultColumn],
        decimal: str,
        findings: Findings,
        *,
        code_position: int,
        control_position: int | None = None,
        qualifier_positions: dict[int, int] | None = None,
        width: int,
        negative_means_below: bool = False,
        thousands: str | None = None,
        code_heading: str = "",
    ) -> None:
        self.columns, self.findings, self.decimal = columns, findings, decimal
        self.code_position, self.control_position = code_position, control_position
        self.code_heading = code_heading or "sample code"
        self.qualifier_positions = qualifier_positions or {}
        self.negative_means_below, self.width = negative_means_below, width
        self.block = BlockReader([column.position for column in columns], decimal, thousands)
        self.texts: dict[int, Texts] = {}
        self.passed_over: list[str] = []

    def read(self, source: Source, first_row: int, row_bound: int, watch_underscores: bool) -> WideBody:
        """Read everything from ``first_row`` on; ``row_bound`` is at least the number of rows."""
        kept_rows = SpooledRows(len(self.columns)) if source.on_disk else RowsInMemory(len(self.columns), row_bound)
        control: list[str | None] = []
        skip = first_row
        for chunk in source.chunks():
            if skip:
                dropped = min(skip, len(chunk))
                chunk, skip = chunk.after(dropped), skip - dropped
                if not len(chunk):
                    continue
            block, marks, said, keep = self._chunk(chunk, watch_underscores)
            if keep.all():
                kept_rows.add(block, marks, chunk.lines, said)
            else:
                kept_rows.add(block[keep], marks[keep], chunk.lines[keep], list(compress(said, keep)))
            if self.control_position is not None:
                spoken = (intern(text.strip()) or None for text in chunk.column(self.control_position))
                control += compress(spoken, keep)
        return kept_rows.body(control, self.texts, self.passed_over)

    def _chunk(
        self, chunk: Chunk, watch_underscores: bool
    ) -> tuple[NDArray[np.float64], NDArray[np.uint8], list[str], NDArray[np.bool_]]:
        """Values, qualifiers, codes and which rows are kept."""
        lines = chunk.lines
        values, qualifiers, odd = self.block.read(chunk, watch_underscores)
        texts: dict[int, list[tuple[int, str]]] = {}
        spoken: set[int] = set()
        for row, column, text in odd:
            cell = self.block.cell(text)
            if cell.state == NUMBER:
                value = cell.value
                if cell.unit is not None or cell.doubt is not None:
                    value = self._converted(cell.value, cell.unit, cell.doubt, column, int(lines[row]), text)
                values[row, column] = value
                qualifiers[row, column] = cell.qualifier
            elif cell.state != MISSING:
                texts.setdefault(row, []).append((column, text))
                spoken.add(row)
        if self.negative_means_below:
            negative = (values < 0) & np.array([column.analyte != "LOI" for column in self.columns])
            if negative.any():
                negative &= ~self._unmarked(values, lines)
            qualifiers[negative] = 1
            values[negative] *= -1
        for position, column in self.qualifier_positions.items():
            self._apply_qualifiers(chunk, position, column, values, qualifiers)
        for row in chunk.rows_beyond(self.width):
            self._say_beyond(chunk.rows[row][self.width :], int(lines[row]))
        codes = chunk.column(self.code_position)
        keep: NDArray[np.bool_] = np.ones(len(chunk), bool)
        numberless: NDArray[np.bool_] = np.asarray(np.isnan(values).all(axis=1))
        bare: set[int] = set()
        if "" in codes or any(map(str.isspace, codes)):
            bare = {row for row, code in enumerate(codes) if not code.strip()}
        for row in sorted(set(np.flatnonzero(numberless).tolist()) | bare | spoken):
            keep[row] = self._row_stays(
                chunk.rows[row], codes[row], int(lines[row]), bool(numberless[row]), texts.get(row, [])
            )
        keep &= ~self._summary_rows(codes, lines, keep)
        for row in sorted(spoken):
            if keep[row]:
                self._take_words(texts[row], row, int(lines[row]), values, qualifiers)
        return values, qualifiers, codes, keep

    def _unmarked(self, values: NDArray[np.float64], lines: NDArray[np.int64]) -> NDArray[np.bool_]:
        """Marks for no data (-999) made missing, with a remark each; where they stood."""
        marks = np.isin(values, NO_DATA_MARKS)
        for row, index in np.argwhere(marks).tolist():
            self.findings.warn(
                "a mark for no data, not a limit; taken as missing", row=int(lines[row]),
                column=self.columns[index].header, found=f"{values[row, index]:g}",
                expected="a number below 0 that stands for a limit", remedy="write the limit if it is one",
            )  # fmt: skip
        values[marks] = np.nan
        return marks

    def _say_beyond(self, cells: list[str], line: int) -> None:
        filled = [cell.strip() for cell in cells if cell.strip()]
        if not filled:
            return
        numbers = all(self.block.cell(text).state == NUMBER for text in filled)
        self.findings.add(
            "the row has more cells than the table has headings", row=line, found=", ".join(filled),
            expected=f"{self.width} cells",
            remedy="see whether a decimal comma or a comma in a text is not in quotation marks"
            if numbers else "the surplus is not read; give it a heading if it is needed",
            severity="problem" if numbers else "warning",
        )  # fmt: skip

    def _summary_rows(self, codes: list[str], lines: NDArray[np.int64], keep: NDArray[np.bool_]) -> NDArray[np.bool_]:
        """Rows of means, totals or limits under the data, told by what stands in the code column."""
        found = np.zeros(len(codes), bool)
        if not _LETTER_AT_END.search("\n".join(codes)):
            return found
        for row in (row for row, code in enumerate(codes) if code and not code[-1].isdigit()):
            code = codes[row]
            if keep[row] and _SUMMARY_ROW.fullmatch(code):
                found[row] = True
                self.passed_over.append(f"row {lines[row]} ('{code.strip()}') is a summary and not a sample")
        return found

    def _row_stays(self, row: list[str], code: str, line: int, numberless: bool, texts: list[tuple[int, str]]) -> bool:
        if not any(cell.strip() for cell in row):
            return False
        if len(texts) >= max(2, 0.5 * len(self.columns)) and all(_is_heading(text) for _, text in texts):
            self._say_headings(texts, line)
            return False
        if numberless and self._is_no_sample(code.strip(), texts):
            self.passed_over.append(
                f"row {line} ('{code.strip()[:40]}') is a note, a rule or a legend and not a sample"
            )
            return False
        if not code.strip():
            said = next((cell.strip() for cell in row if cell.strip()), "")
            if numberless or _SUMMARY_ROW.fullmatch(said):
                self.passed_over.append(f"row {line} ('{said[:40]}') has no sample code and is a note or a summary")
                return False
            self.findings.add(
                "results without a sample code", row=line, column=self.code_heading, found="",
                expected="a sample code", remedy="write the code, or delete the row if it is no sample",
            )  # fmt: skip
            return False
        if numberless and not texts:
            others = [cell for cell in row if cell.strip()]
            if len(others) == 1:
                self.passed_over.append(f"row {line} ('{code.strip()[:40]}') is a group heading or a note")
            else:
                self.findings.warn(
                    "the sample has no results", row=line, found=code.strip(),
                    remedy="nothing is stored for it; ask the laboratory if results were expected",
                )  # fmt: skip
            return False
        return True

    def _say_headings(self, texts: list[tuple[int, str]], line: int) -> None:
        """Headings within the data: the same ones again, or those of another table, which nobody reads."""
        for index, text in texts:
            heading, column = read_heading(text), self.columns[index]
            unit = heading.unit or canonical_unit(text)
            another = heading.analyte is not None and heading.analyte not in (column.analyte, column.analyte[:-1])
            if another or (unit is not None and unit != column.unit):
                self.findings.add(
                    "another table with other headings begins below this one", row=line, column=column.header,
                    found=text.strip(), expected=f"{column.analyte} in {column.unit}, or the end of the table",
                    remedy="save each table as a file of its own and import the second with --add-to",
                )  # fmt: skip
                self.findings.whole_file_refused = True
                return
        self.passed_over.append(f"row {line} repeats the headings")

    def _is_no_sample(self, code: str, texts: list[tuple[int, str]]) -> bool:
        """Of a row without any number: a rule, a word for no result explained, or a note cut at its commas."""
        if _RULE.fullmatch(code) or (code and self.block.cell(code).state not in (NUMBER, TEXT)):
            return True
        return any(self.block.cell(text).state == TEXT for _, text in texts) and bool(_NOTE.fullmatch(code))

    def _take_words(
        self,
        words: list[tuple[int, str]],
        row: int,
        line: int,
        values: NDArray[np.float64],
        qualifiers: NDArray[np.uint8],
    ) -> None:
        for index, text in words:
            state = self.block.cell(text).state
            column = self.columns[index]
            limit = column.detection_limit if state == BELOW else column.upper_limit if state == ABOVE else None
            if limit is not None:
                values[row, index] = limit
                qualifiers[row, index] = 1 if state == BELOW else 2
            elif state in (BELOW, ABOVE):
                self.findings.warn(
                    f"below or above a limit that is not known ({text.strip()}); taken as missing",
                    row=line, column=column.header, found=text.strip(),
                    expected="a detection limit in a heading row, or '<' with the limit in the cell",
                    remedy="add a row of detection limits, or write the limit into the cell",
                )  # fmt: skip
            elif state == INSUFFICIENT:
                self.findings.warn(
                    f"no result: {text.strip()}", row=line, column=column.header, found=text.strip(),
                    remedy="the cell is stored as missing",
                )  # fmt: skip
            elif state == SPREADSHEET_ERROR:
                self.findings.add(
                    "a spreadsheet's error stands in place of a result", row=line, column=column.header, found=text,
                    expected="a number", remedy="export the original values of the laboratory, not formulas",
                )  # fmt: skip
            elif state == TEXT:
                self.texts.setdefault(index, Texts()).add(line, text)

    def _converted(self, value: float, unit: str | None, doubt: str | None, index: int, line: int, text: str) -> float:
        column = self.columns[index]
        if doubt == "thousands":
            mark = "," if self.decimal == "." else "."
            self.findings.warn(
                f"'{mark}' before three digits is read as a mark of thousands", row=line, column=column.header,
                found=text, expected=f"{value:g}", remedy="if it is a decimal sign, write all numbers with it",
            )  # fmt: skip
        if unit is not None and column.unit and unit != column.unit:
            self.findings.warn(
                f"the cell states {unit} in a column of {column.unit}; converted", row=line, column=column.header,
                found=text, remedy="check that the cell's own unit is right",
            )  # fmt: skip
            value *= WT_PERCENT_PER_UNIT[unit] / WT_PERCENT_PER_UNIT[column.unit]
        return value

    def _apply_qualifiers(
        self,
        chunk: Chunk,
        position: int,
        column: int,
        values: NDArray[np.float64],
        qualifiers: NDArray[np.uint8],
    ) -> None:
        for row, text in enumerate(chunk.column(position)):
            text = text.strip().casefold()
            if text in NO_QUALIFIER:
                continue
            code = QUALIFIER_CODES.get(text)
            if code is None:
                self.findings.warn(
                    "an unknown qualifier", row=int(chunk.lines[row]), column=self.columns[column].header, found=text,
                    expected="< or >", remedy="the value is taken as it stands",
                )  # fmt: skip
            elif not np.isnan(values[row, column]):
                qualifiers[row, column] = code


def _is_heading(text: str) -> bool:
    return read_heading(text).analyte is not None or canonical_unit(text) is not None
