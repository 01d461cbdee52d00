"""What the intake hands over: the checked tables, what was understood, and every problem of the file."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from registry.errors import Problem
from registry.intake.recipes import ColumnCorrection, Recipe

KINDS = ("areas", "sites", "surveys", "intervals", "intrusions", "samples", "results", "reference-materials")


@dataclass(frozen=True)
class ReadingOptions:
    """Choices of the user that change how a file is read.

    ``recipe`` corrects what was understood; ``sheet`` names one sheet of a workbook or one member of an archive;
    ``negative_means_below`` reads ``-x`` as below the limit x (only on the user's word);
    ``positive_dips`` says of a file of positive dips only that they point ``down`` (they are turned) or
    ``up``; ``unit`` and ``digestion`` are those of every result column that states none; ``columns`` are corrections
    of single columns; ``decimal`` and ``thousands`` the signs in numbers of results (``thousands`` empty: none is
    allowed); ``separator`` parts the cells of a text. All these go before what the recipe says.
    ``listed`` is how many equal faults are listed one by one; ``unpacked_limit_bytes`` bounds what an archive may
    unpack to.
    """

    recipe: Recipe | None = None
    sheet: str | None = None
    negative_means_below: bool = False
    positive_dips: str | None = None
    unit: str | None = None
    digestion: str | None = None
    columns: tuple[ColumnCorrection, ...] = ()
    decimal: str | None = None
    thousands: str | None = None
    separator: str | None = None
    listed: int = 20
    unpacked_limit_bytes: int = 2_000_000_000


@dataclass
class MasterTable:
    """Rows of master data: ``rows`` maps each contract column that stood in the file to its values, None for blank.

    Numbers are float in the unit of the column's name (``epsg`` int); dates ISO text; truth values bool; the rest text.
    Rows with a problem are here as well, with None in the faulty cell: ``Reading.refused_lines`` names them.
    """

    kind: str
    columns: tuple[str, ...]
    rows: dict[str, list[Any]]
    line_no: NDArray[np.int64]
    ignored: tuple[str, ...] = ()

    def __len__(self) -> int:
        return len(self.line_no)


@dataclass
class ResultColumn:
    """One column of results: ``position`` from 0 in the file (in a long table: order of first appearance)."""

    position: int
    header: str
    analyte: str
    unit: str
    method: str | None = None
    digestion: str = "unknown"
    detection_limit: float | None = None
    upper_limit: float | None = None


@dataclass
class ResultTable:
    """Results of one file. ``values`` float64 (n, m), NaN missing, in each column's unit as reported.

    Of a large file on disk (``read_path``) ``values`` and ``qualifiers`` are SpooledArrays, ``line_no`` are
    SpooledNumbers and ``sample_codes`` PackedTexts: read them by rows or by columns.
    ``qualifiers`` uint8 (n, m): 0 none, 1 below the value, 2 above it (``analytes.QUALIFIER_*``). ``control_text`` is
    what a QA/QC or sample-type column said of the line (``BLANK``, ``DUPL OF ...``), None where it said nothing.
    """

    columns: list[ResultColumn]
    sample_codes: Sequence[str]
    line_no: Any
    values: Any
    qualifiers: Any
    certificate: str | None = None
    lab: str | None = None
    ignored: tuple[str, ...] = ()
    control_text: list[str | None] = field(default_factory=list)
    sample_header: str = ""
    received_on: str | None = None
    reported_on: str | None = None
    #: the columns that could hold the sample codes, where they are others than those of the table (of a long one)
    code_headings: tuple[str, ...] = ()

    def __len__(self) -> int:
        return len(self.sample_codes)


@dataclass
class Reading:
    """One file as read. ``problems`` holds all of it; the file may be stored only if ``ok``.

    ``refused_lines`` are all lines with a problem of their own, grouped or not: what ``--keep-going`` leaves out;
    ``whole_file_refused`` says that a problem concerns the file itself, so that no row of it can be kept.
    ``recipe`` is this reading as a recipe that can be saved, corrected and applied again.
    """

    file: str
    kind: str | None = None
    problems: list[Problem] = field(default_factory=list)
    understood: list[str] = field(default_factory=list)
    master: MasterTable | None = None
    results: ResultTable | None = None
    refused_lines: frozenset[int] = frozenset()
    whole_file_refused: bool = False
    recipe: Recipe | None = None
    #: the sheet of a workbook or the member of an archive, None for a file of its own
    part: str | None = None

    @property
    def place(self) -> str:
        """The file, and the sheet or member where it holds several tables."""
        return self.file if self.part is None else f"{self.file} [{self.part}]"

    @property
    def ok(self) -> bool:
        return not any(problem.severity == "problem" for problem in self.problems)

    @property
    def warnings(self) -> list[Problem]:
        return [problem for problem in self.problems if problem.severity == "warning"]
