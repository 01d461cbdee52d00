"""A results file as a table: headings understood, body read, texts and values judged."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from registry.intake.arrangement import arrange
from registry.intake.cells import decimal_sign
from registry.intake.checks import check_units, check_values
from registry.intake.codes import LONGEST_CODE, CodeColumn, choose_code_column, tidy_codes, unfit_codes
from registry.intake.columns import measured
from registry.intake.corrections import column_keys, corrected, listed, take_in
from registry.intake.findings import Findings
from registry.intake.layout import WideLayout
from registry.intake.names import analyte_symbol, read_heading
from registry.intake.qualifiers import qualifier_columns
from registry.intake.readings import ReadingOptions, ResultColumn, ResultTable
from registry.intake.recipes import ColumnChoice, Recipe
from registry.intake.settling import settle_columns
from registry.intake.sources import Source
from registry.intake.spooled import repeated, row_parts
from registry.intake.texts import CONTROL_WORD, judge_texts
from registry.intake.titles import Titles, read_titles
from registry.intake.units import canonical_unit, split_unit
from registry.intake.wide import WideBody, WideReader

_CONTROL = re.compile(r"(?i)\W*(qa ?[/&-]? ?qc|qc|control|sample[ _]?(type|kind|class)|type|qc[ _]?type|check type)\W*")


@dataclass
class Understanding:
    """What the reading of a results file adds to a Reading; a recipe without a table knows the headings alone."""

    table: ResultTable | None
    recipe: Recipe | None


def read_results(
    source: Source, options: ReadingOptions, findings: Findings, understood: list[str], row_bound: int, underscores: int
) -> Understanding:
    """Read a wide results table. ``row_bound``: at least the number of rows; ``underscores`` of the whole file."""
    arranged = arrange(source, row_bound, underscores > 0, findings, understood, options.recipe, options.columns)
    if arranged is None:
        return _say_no_headings([], findings)
    given, source, layout = source, arranged.source, arranged.layout
    preview, preview_lines = source.preview()
    recipe = corrected(options.recipe or Recipe(), options.columns, layout, findings)
    take_in(layout, recipe, findings)
    if not layout.columns:
        return _say_no_headings(layout.labels, findings)
    body_rows = preview[layout.first_row :]
    layout.code = layout.code or _code_column(layout, body_rows, recipe)
    if layout.code is None:
        findings.add(
            "no column of sample codes was found",
            expected="a column headed sample code, Sample ID, Field ID or Lab ID",
            remedy="give the column of sample codes a heading, or name it with --column",
        )  # fmt: skip
        return Understanding(None, Recipe(shape=layout.shape))
    beside = [column for column in layout.columns if column.position != layout.code.position]
    layout.columns = measured(beside, recipe.columns, findings)
    taken = {column.position for column in layout.columns}
    _say_layout(layout, preview_lines.tolist(), understood)
    titles = read_titles(layout.titles)
    stated = options.unit or recipe.unit or titles.unit
    if titles.unit:
        understood.append(f"the lines above the table state {titles.unit} for columns without a unit of their own")
    overruled = options.digestion is not None and titles.digestion not in (None, options.digestion)
    if overruled:
        said_before = f"{str(options.digestion).replace('_', ' ')}, as was said, goes before it"
        understood.append(f"the lines above the table state the method {titles.method}; {said_before}")
    elif titles.digestion:
        understood.append(f"the lines above the table state the method for all columns that name none: {titles.method}")
    columns = settle_columns(
        layout.columns, findings, understood, stated_unit=canonical_unit(stated) if stated else None,
        stated_digestion=options.digestion or titles.digestion or recipe.digestion,
        stated_method=None if overruled else titles.method, recipe=recipe,
    )  # fmt: skip
    if not columns:
        findings.add("every analyte column is ignored", remedy="keep at least one, see --column")
        return Understanding(None, Recipe(shape=layout.shape))
    given_sign = options.decimal or recipe.decimal
    thousands = recipe.thousands if options.thousands is None else options.thousands
    decimal, sure = _settle_decimal(body_rows, columns, given_sign, thousands, findings, understood)
    below = options.negative_means_below or recipe.negative_means_below
    if below:
        understood.append("negative numbers mean below the limit of that size")
    others = [
        position for position in range(layout.width) if position not in taken and position != layout.code.position
    ]
    qualifier_positions = qualifier_columns(layout, columns, others, body_rows)
    control = arranged.control_position
    if control is None:
        control = next((place for place in others if _CONTROL.fullmatch(layout.labels[place])), None)
    reader = WideReader(
        columns, decimal, findings, code_position=layout.code.position, control_position=control,
        qualifier_positions=qualifier_positions,
        width=layout.width, negative_means_below=below, thousands=thousands,
        code_heading=layout.labels[layout.code.position],
    )  # fmt: skip
    in_headings = sum(cell.count("_") for row in preview[: layout.first_row] for cell in row)
    watch = arranged.underscores and (source is not given or underscores > in_headings)
    body = reader.read(source, layout.first_row, arranged.row_bound, watch)
    if control is not None and not re.search(r"(?i)q[ac]|control|check", layout.labels[control]):
        body.control = [said if said and CONTROL_WORD.search(said) else None for said in body.control]
    columns, body = judge_texts(columns, body, decimal, findings)
    columns, body = _drop_empty(columns, body, understood)
    used = {column.position for column in columns} | {layout.code.position} | set(qualifier_positions)
    keys = column_keys(layout.labels)
    holds = {place for row in body_rows for place, cell in enumerate(row[: len(keys)]) if cell and not cell.isspace()}
    ignored = [key for place, key in enumerate(keys) if place not in used and (layout.labels[place] or place in holds)]
    ignored += layout.unread
    _say_ignored(layout, used, control, findings, understood)
    table = _table(layout, columns, body, titles, tuple(ignored), findings, understood)
    said = {key: recipe.columns[key] for key in keys if key in recipe.columns}
    said |= {one.header: ColumnChoice(one.analyte, one.unit or None, one.method, one.digestion) for one in columns}
    made = Recipe(
        shape=layout.shape,
        columns=said,
        sample_header=keys[layout.code.position],
        separator=options.separator or recipe.separator,
        decimal=decimal if sure else None,
        unit=options.unit or recipe.unit,
        digestion=options.digestion or recipe.digestion,
        thousands=thousands,
        negative_means_below=below,
    )
    return Understanding(table, made)


def _say_no_headings(labels: list[str], findings: Findings) -> Understanding:
    """No analyte is named; the headings that are there are told, so that a user can say what they are."""
    findings.add(
        "no row of headings with analytes was found",
        expected="a row such as: Sample, SiO2 (%), Al2O3 (%), Zr (ppm)",
        remedy="see that the headings stand within the first 80 lines and name analytes and units"
        + (f", or say with --column what these columns are: {listed(labels)}" if labels else ""),
    )  # fmt: skip
    return Understanding(None, Recipe(shape=tuple(labels)) if labels else None)


def _code_column(layout: WideLayout, rows: list[list[str]], recipe: Recipe) -> CodeColumn | None:
    """The column of sample codes: the recipe's word, else told from headings and cells."""
    keys = column_keys(layout.labels)
    if recipe.sample_header in keys:
        place = keys.index(recipe.sample_header)
        return CodeColumn(place, layout.labels[place])
    return choose_code_column(layout.labels, rows, {column.position for column in layout.columns})


def _say_layout(layout: WideLayout, lines: list[int], understood: list[str]) -> None:
    rows = ", ".join(f"{role} in row {lines[index]}" for index, role in sorted(layout.roles.items()))
    first = lines[layout.first_row] if layout.first_row < len(lines) else "the end"
    if rows:
        understood.append(f"heading rows: {rows}; data from row {first}")
    if layout.titles:
        understood.append(f"{len(layout.titles)} title lines above the table")
    code = layout.code
    if code is not None:
        name = f"'{code.header}'" if code.header else f"number {code.position + 1}, which has no heading,"
        understood.append(
            f"sample codes come from column {name}" + (f" (doubtful: {code.doubt})" if code.doubt else "")
        )


def _settle_decimal(
    rows: list[list[str]],
    columns: list[ResultColumn],
    given: str | None,
    thousands: str | None,
    findings: Findings,
    understood: list[str],
) -> tuple[str, bool]:
    """The decimal sign, and whether somebody said it or the numbers settle it."""
    if given is not None and given == thousands:
        findings.add(
            "one sign is named for decimals and for thousands", found=given,
            expected="two signs", remedy="say another with --decimal, or none for the thousands",
        )  # fmt: skip
    if given not in (".", ",") and thousands in (".", ","):
        given = "," if thousands == "." else "."
    if given in (".", ","):
        understood.append(f"decimal sign: {'comma' if given == ',' else 'point'}, as was said")
        return given, True
    cells = {row[column.position] for row in rows for column in columns if column.position < len(row)}
    decimal, sure = decimal_sign(sorted(cells)[:: len(cells) // 2000 + 1])
    understood.append(f"decimal sign: {'comma' if decimal == ',' else 'point'}")
    if not sure:
        findings.warn(
            "the decimal sign cannot be told from the numbers",
            expected="a number such as 0.5 or 0,5",
            remedy="a comma before three digits is read as a mark of thousands; say the decimal sign with --decimal",
        )
    return decimal, sure


def _drop_empty(
    columns: list[ResultColumn], body: WideBody, understood: list[str]
) -> tuple[list[ResultColumn], WideBody]:
    filled = np.zeros(len(columns), bool)
    for _, rows in row_parts(body.values):
        filled |= ~np.isnan(rows).all(axis=0)
    if filled.all() or not filled.any():
        return columns, body
    empty = [column.header for column, some in zip(columns, filled, strict=True) if not some]
    understood.append(f"columns without any result are left out: {', '.join(empty)}")
    kept = [index for index, some in enumerate(filled) if some]
    body.values, body.qualifiers = body.values[:, kept], body.qualifiers[:, kept]
    return [columns[index] for index in kept], body


def _meant(name: str) -> str:
    """A digit 0 that was typed for the letter O: ``K20``, ``Al203``."""
    letter = re.sub(r"0(?=\d?$)", "O", name)
    symbol = analyte_symbol(letter) if letter != name else None
    return f"did you mean {symbol}, with the letter O? " if symbol else ""


def _say_ignored(
    layout: WideLayout, used: set[int], control: int | None, findings: Findings, understood: list[str]
) -> None:
    analytes = {column.position for column in layout.columns}
    plain = []
    for place, label in enumerate(layout.labels):
        if place in used or place == control or not label:
            continue
        rest, unit = split_unit(label)
        weighed = re.search(r"(?i)[(\[]\s*(k?g|lbs?)\s*[)\]]", label)  # "Recvd Wt. (kg)" is no unknown analyte
        known = place in analytes or weighed or read_heading(label).analyte is not None
        if unit is not None and not known and re.search(r"[A-Z]", rest) and len(rest) < 20:
            findings.warn(
                "the heading names no analyte that the register knows; the column is ignored", column=label,
                found=rest, expected="an oxide or element, or a total",
                remedy=_meant(rest) + "if it is one, name the analyte with --column",
            )  # fmt: skip
        plain.append(f"'{label}'")
    if plain:
        understood.append("columns not read as results: " + ", ".join(plain))
    if control is not None:
        understood.append(f"column '{layout.labels[control]}' says which lines are control samples")


def _table(
    layout: WideLayout,
    columns: list[ResultColumn],
    body: WideBody,
    titles: Titles,
    ignored: tuple[str, ...],
    findings: Findings,
    understood: list[str],
) -> ResultTable | None:
    assert layout.code is not None
    understood += body.passed_over[:20]
    if len(body.passed_over) > 20:
        understood.append(f"{len(body.passed_over) - 20} more rows are passed over as headings, notes or summaries")
    codes, freed, eaten = tidy_codes(body.codes)
    if freed:
        understood.append(
            f"{freed} sample codes such as '{body.codes[0].strip()}' are freed of the '.0' of a spreadsheet"
        )
    for place, what in unfit_codes(codes).items():
        findings.add(
            what, row=int(body.lines[place]), column=layout.code.header, found=codes[place],
            expected=f"a sample code of at most {LONGEST_CODE} characters on one line",
            remedy="see whether a quotation mark or a separator is missing, and correct the code",
        )  # fmt: skip
    for place in eaten:
        findings.warn(
            "the sample code looks like a date or number made by a spreadsheet", row=int(body.lines[place]),
            column=layout.code.header, found=codes[place],
            remedy="compare with the submitted list and correct the code",
        )  # fmt: skip
    if not codes:
        findings.add(
            "the file holds no results", expected="rows of samples below the headings",
            remedy="see whether the headings or the sample codes were misunderstood",
        )  # fmt: skip
        return None
    for code, (first, times) in repeated(codes).items():
        findings.warn(
            "the sample code stands more than once; each line is kept as a repeat",
            row=int(body.lines[first]), column=layout.code.header, found=f"{code} ({times} times)",
            remedy="if the lines are different samples, correct the codes",
        )  # fmt: skip
    check_values(columns, body.values, body.qualifiers, body.lines, findings, body.control)
    check_units(columns, body.values, findings)
    understood.append(f"{len(codes)} lines of results in {len(columns)} columns")
    stated = [
        titles.certificate,
        titles.lab,
        titles.received_on and f"received on {titles.received_on}",
        titles.reported_on and f"reported on {titles.reported_on}",
    ]
    if any(stated):
        understood.append("stated above the table: " + ", ".join(filter(None, stated)))
    understood += [
        f"the date '{day}' above the table can be read in two ways and is left out" for day in titles.unclear_days
    ]
    return ResultTable(
        columns, codes, body.lines, body.values, body.qualifiers, titles.certificate, titles.lab, ignored,
        body.control, column_keys(layout.labels)[layout.code.position], titles.received_on, titles.reported_on,
        tuple(layout.code_labels),
    )  # fmt: skip
