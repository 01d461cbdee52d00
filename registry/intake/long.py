"""Long (tidy) results: one result a line, gathered into the same wide table as every other layout gives."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import lru_cache

from registry.intake.cells import NO_QUALIFIER, QUALIFIER_CODES
from registry.intake.codes import heading_score
from registry.intake.columns import AnalyteColumn, unknown_unit
from registry.intake.corrections import place_of
from registry.intake.findings import Findings
from registry.intake.gathering import GatheredRows
from registry.intake.layout import SEARCH_ROWS
from registry.intake.names import Heading, read_heading
from registry.intake.sources import Source
from registry.intake.units import canonical_unit

_ROLES = {
    "analyte": r"(chemical )?(analytes?|elements?|parameters?|oxides?|determinands?"
    r"|constituents?|components?|variables?)"
    r"( (name|code|symbol))?",
    "value": r"(reported |result |numeric |assay )?(values?|results?|concentrations?|assays?|amounts?|readings?)",
    "unit": r"(result |value )?(units?|uom|unit of measure|measurement unit)",
    "qualifier": r"(result |value )?(qualifiers?|qual|flags?|signs?|prefix|censor(ed|ing)?|comparator|operator)",
    "method": r"(analysis |analytical |lab |laboratory |test )?(methods?|technique|procedure)( (code|name))?",
    "digestion": r"(digestion|digest|preparation|decomposition|attack)( method)?",
    "lower": r"(lower )?(detection|reporting)( limit)?|l\.?o\.?[drq]|lld|ldl|[mp]ql|mdl|dl|m?rl|lower limit"
    r"|detection limit value",
    "upper": r"upper (detection |reporting )?limit|u\.?d\.?l|u\.?o\.?[dl]|u\.?l\.?(o\.?)?[dq]",
    "control": r"qa ?/?qc|qc( type)?|sample type|control|check type",
}
_COMPILED = {role: re.compile(pattern) for role, pattern in _ROLES.items()}


@dataclass
class LongLayout:
    """The heading row and the position of each role; ``sample``, ``analyte`` and ``value`` are always there."""

    header: int
    roles: dict[str, int]
    labels: list[str]
    value_unit: str | None = None
    #: what stands in the place of a unit in the heading of the values and is none
    foreign_unit: str | None = None


@dataclass
class Gathered:
    """A long table turned wide: its ``rows``, what its analyte columns are, and names that are no known analytes."""

    rows: GatheredRows
    columns: list[AnalyteColumn] = field(default_factory=list)
    unread: list[str] = field(default_factory=list)

    def place_of_cells(self) -> Callable[[int | None, str | None], tuple[int | None, str | None]]:
        """A function that turns (first line of the row, column) into the line on which that very result stands."""
        position_of = {column.header: place for place, column in enumerate(self.columns)}

        def place(row: int | None, column: str | None) -> tuple[int | None, str | None]:
            if row is None or column not in position_of:
                return row, column
            return self.rows.line_of(row, position_of[column]), column

        return place


def _folded(text: str) -> str:
    return re.sub(r"[\s_\-]+", " ", text.strip().strip("\ufeff").casefold())


def find_long_layout(rows: list[list[str]], sample_header: str | None = None) -> LongLayout | None:
    """The headings of a long table within the first rows: a sample code, an analyte and a value column.

    ``sample_header`` names the column of the sample codes, where somebody says it.
    """
    for index, row in enumerate(rows[:SEARCH_ROWS]):
        told = [_role(cell) if cell and not cell[0].isdigit() else None for cell in row]
        if "analyte" not in told or "value" not in told:
            continue
        roles = {role: told.index(role) for role in _ROLES if role in told}
        scores = [0.0 if role else heading_score(cell) for role, cell in zip(told, row, strict=True)]
        if max(scores) <= 0:
            continue
        said = None if sample_header is None else place_of(sample_header, [cell.strip() for cell in row])
        if said in (roles["analyte"], roles["value"]):
            said = None
        roles = {role: place for role, place in roles.items() if place != said}
        roles["sample"] = scores.index(max(scores)) if said is None else said
        bracket = re.search(r"[(\[]([^()\[\]]*)[)\]]", row[roles["value"]])
        unit = canonical_unit(bracket.group(1)) if bracket else None
        foreign = unknown_unit(row[roles["value"]]) if bracket and unit is None else None
        return LongLayout(index, roles, [cell.strip() for cell in row], unit, foreign)
    return None


@lru_cache(maxsize=4096)
def _role(cell: str) -> str | None:
    """What a heading of a long table says its column holds."""
    bare = re.sub(r"\s*[(\[][^()\[\]]*[)\]]\s*$", "", _folded(cell))
    return next((role for role, pattern in _COMPILED.items() if bare and pattern.fullmatch(bare)), None)


def gather(source: Source, layout: LongLayout, findings: Findings, named: Callable[[str], bool]) -> Gathered:
    """Walk the lines once; a second result of one analyte, unit and method for a code opens a second row of it.

    ``named`` says of a name (analyte, unit, method) that is not known whether the user makes a column of it.
    """
    gathered = Gathered(GatheredRows(source.on_disk))
    at = layout.roles
    columns: dict[tuple[str, ...], int | None] = {}
    skip = layout.header + 1
    keys = [role for role in ("analyte", "unit", "method", "digestion", "lower", "upper") if role in at]
    for chunk in source.chunks():
        if skip:
            dropped = min(skip, len(chunk))
            chunk, skip = chunk.after(dropped), skip - dropped
            if not len(chunk):
                continue
        parts = zip(*(map(str.strip, chunk.column(at[role])) for role in keys), strict=True)
        blank = [""] * len(chunk)
        signs = chunk.column(at["qualifier"]) if "qualifier" in at else blank
        control = chunk.column(at["control"]) if "control" in at else blank
        cells = zip(
            chunk.lines.tolist(), map(str.strip, chunk.column(at["sample"])), chunk.column(at["value"]), signs, control,
            parts, strict=True,
        )  # fmt: skip
        for line, code, text, sign, said, key in cells:
            if not code:
                if text.strip() or key[0]:
                    findings.add(
                        "a result without a sample code", row=line, column=layout.labels[at["sample"]], found="",
                        expected="a sample code", remedy="write the code, or delete the line",
                    )  # fmt: skip
                continue
            if key not in columns:
                columns[key] = _new_column(dict(zip(keys, key, strict=True)), layout, line, gathered, named, findings)
            column = columns[key]
            if column is None:
                continue
            sign = sign.strip()
            if sign:
                text = _joined(sign, text, line, layout.labels[at["qualifier"]], findings)
            gathered.rows.add(code, said.strip(), column, text, line)
    gathered.rows.width = len(gathered.columns) + 2
    return gathered


def _joined(sign: str, text: str, line: int, heading: str, findings: Findings) -> str:
    """The qualifier before its number, as a wide table would have it."""
    code = QUALIFIER_CODES.get(sign.casefold())
    if code is not None:
        return ("<" if code == 1 else ">") + text.strip().lstrip("<>") if text.strip() else text
    if sign.casefold() not in NO_QUALIFIER:
        findings.warn(
            "an unknown qualifier", row=line, column=heading, found=sign, expected="< or >",
            remedy="the value is taken as it stands",
        )  # fmt: skip
    return text


def _new_column(
    key: dict[str, str],
    layout: LongLayout,
    line: int,
    gathered: Gathered,
    named: Callable[[str], bool],
    findings: Findings,
) -> int | None:
    heading = read_heading(key["analyte"])
    said = heading.method if heading.analyte is not None else None
    method = " ".join(filter(None, (key.get("method"), key.get("digestion"), said))) or None
    unit_text = key.get("unit", "")
    unit = canonical_unit(unit_text) if unit_text else heading.unit or layout.value_unit
    name = key["analyte"] + (f" ({unit_text})" if unit_text else "") + (f" {method}" if method else "")
    if heading.analyte is None and not named(name):
        if key["analyte"] and name not in gathered.unread:
            gathered.unread.append(name)
            findings.warn(
                "the analyte is not known; its results are not read", row=line,
                column=layout.labels[layout.roles["analyte"]], found=name,
                expected="an oxide or element, or a total",
                remedy="correct the name, say with --column what it is, or leave it if it is not needed",
            )  # fmt: skip
        return None
    taken = {column.header for column in gathered.columns}
    header, number = name, 1
    while header in taken:
        number += 1
        header = f"{name} ({number})"
    column = AnalyteColumn(len(gathered.columns) + 2, header, Heading(heading.analyte, unit, method), unit, method)
    column.lower, column.upper = _limit(key.get("lower", "")), _limit(key.get("upper", ""))
    if unit is None:
        column.foreign_unit = unit_text or unknown_unit(key["analyte"]) or layout.foreign_unit
    gathered.columns.append(column)
    return column.position - 2


def _limit(text: str) -> float | None:
    try:
        value = float(text.replace(",", ".").lstrip("<> "))
    except ValueError:
        return None
    return value if value > 0 else None
