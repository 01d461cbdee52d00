"""Where the table stands in a wide results file: heading rows, sample codes, analyte columns, first row of data."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from registry.intake.cells import BELOW, MISSING, NUMBER, parse_cell
from registry.intake.codes import CodeColumn, is_code_heading
from registry.intake.columns import ANALYTE, LABELS, LOWER, METHOD, RANGE, UNIT, UPPER, AnalyteColumn, take
from registry.intake.methods import speaks_of_method
from registry.intake.names import Heading, read_heading
from registry.intake.units import canonical_unit, foreign_unit, split_unit

#: Title lines looked through for the headings.
SEARCH_ROWS = 80
#: So much of the results below a row of limits must lie on the right side of them. Common practice, no source.
LIMITS_HOLD = 0.9
_LOWER_LIMIT = re.compile(
    r"(?i)\b(l\.?o\.?[drq]|ll?d|ldl|d\.?l|mdl|lod|loq|(lower )?(detection|reporting)([ _]limits?)?"
    r"|lower limits?|det\.? ?lim\w*)\b"
)
_UPPER_LIMIT = re.compile(
    r"(?i)\b(upper ?(detection|reporting)?[ _]?limits?|u\.?d\.?l|u\.?o\.?[dl]|u\.?l\.?(o\.?)?[dq]"
    r"|max(imum)?\.?[ _]*(detection|reporting|limits?)|upper)\b"
)
_RANGE_LABEL = re.compile(r"(?i)\b(ranges?|limits?)\b")
_LOWER_ONLY = re.compile(r"(?i)\b(lower|l\.?o\.?[drq]|ll?d|ldl|mdl)\b")
#: Letters, then a number: a sample code, though its letters may be those of a detection limit.
_CODE_LIKE = re.compile(r"[A-Za-z]+[\s\-_/.]*\d[\w\-./]*")
#: A title line that states a method or a unit once.
_STATEMENT = re.compile(r"(?i)\W*[\w ]*\b(methods?|digestion|analysis|units?|results?|technique)\b[\w ]*[:=]\s*\S")
_UNIT_LABEL = re.compile(r"(?i)^\W*units?\b")
_METHOD_LABEL = re.compile(r"(?i)\b(method|analys\w+|technique|digest\w*|scheme|procedure|analytical|prep\w*)\b")
_FILLER = re.compile(r"(?i)unnamed:? ?\d+(_level_\d+)?")
#: Headings of a column that holds the sign of another column's numbers.
QUALIFIER_WORD = re.compile(r"(?i)(qualifiers?|qual|flags?|sign|censor(ed)?|q|lt|(lod|dl)[ _]flag)")
#: No name of an analyte begins so.
_NO_NAME = frozenset("0123456789<>-.")
#: What stands beside the analytes of a row and names the row.
_ROW_LABELS = {METHOD: _METHOD_LABEL, UNIT: _UNIT_LABEL, LOWER: _LOWER_LIMIT, UPPER: _UPPER_LIMIT}
#: "Analyte" does so as well, where another row names the columns beside the analytes.
_NAMES_ROW = _ROW_LABELS | {ANALYTE: re.compile(r"(?i)\W*(analyte|element|symbol|parameter|oxide|determinand)s?\W*")}


@dataclass
class WideLayout:
    """``roles`` maps the index of each heading row to what it holds; ``first_row`` is the first row of data."""

    width: int
    roles: dict[int, str]
    first_row: int
    columns: list[AnalyteColumn]
    labels: list[str]
    code: CodeColumn | None = None
    titles: list[str] = field(default_factory=list)
    #: unknown analytes of a long table: no columns, though a recipe could make them some
    unread: list[str] = field(default_factory=list)
    #: the headings as they are without any word of the user, where his words change ``labels`` (of a long table)
    own_labels: list[str] | None = None
    #: the columns of a long table, of which one holds the sample codes
    code_labels: list[str] = field(default_factory=list)

    @property
    def shape(self) -> tuple[str, ...]:
        return tuple(self.labels if self.own_labels is None else self.own_labels)


def _clean(cell: str) -> str:
    cell = cell.strip().strip("\ufeff").strip()
    return "" if _FILLER.fullmatch(cell) else cell


def _analytes_in(row: list[str]) -> dict[int, Heading]:
    """The analyte headings of a row by position; coordinates (x beside y, E beside N) are none."""
    found = {}
    texts = ["" if cell[:1] in _NO_NAME else _clean(cell) for cell in row]
    folded = [text.casefold() for text in texts]
    for position, text in enumerate(texts):
        if not text or len(text) > 60:
            continue
        heading = read_heading(text)
        if heading.analyte is None or (heading.method and QUALIFIER_WORD.fullmatch(heading.method)):
            continue
        beside = {folded[other] for other in (position - 1, position + 1) if 0 <= other < len(folded)}
        if (folded[position] == "y" and "x" in beside) or (folded[position] == "n" and "e" in beside):
            continue
        found[position] = heading
    if not any(len(heading.analyte or "") > 1 or heading.unit for heading in found.values()):
        # nothing but single letters: "b" or "y" beside them is hardly boron or yttrium
        found = {position: heading for position, heading in found.items() if texts[position].isupper()}
    return found


def _are_others(headings: dict[int, Heading], below: dict[int, Heading]) -> bool:
    """Whether half the headings or more of one row name other analytes than the row below it at the same places."""
    shared = [place for place in headings if place in below]
    return 0 < len(shared) <= 2 * sum(headings[place].analyte != below[place].analyte for place in shared)


def find_header_row(rows: list[list[str]]) -> tuple[int, dict[int, Heading]]:
    """The row with most analyte headings, the first of equals; (-1, {}) if there is none.

    A row right below it that names other analytes at the same places stands for it.
    """
    best: tuple[int, dict[int, Heading]] = (-1, {})
    for index, row in enumerate(rows[:SEARCH_ROWS]):
        found = _analytes_in(row)
        if len(found) > len(best[1]) and (len(found) > 1 or len([cell for cell in row if cell.strip()]) > 1):
            best = index, found
    index, found = best
    for later in range(index + 1, min(len(rows), index + 9) if found else 0):
        below = _analytes_in(rows[later])
        if len(below) > 1 and _are_others(found, below):
            return later, below  # what stood above was a sentence or a list: "Elements requested:, Au, Ag, Cu"
        if any(place < len(rows[later]) and _number(_clean(rows[later][place])) is not None for place in found):
            break
    return best


def _role(row: list[str], analytes: dict[int, Heading], below: bool) -> str | None:
    """What a row above or below the analyte row holds, None if it is no heading row."""
    inside = [text for position in analytes if position < len(row) and (text := _clean(row[position]))]
    outside = [
        text
        for position, cell in enumerate(row)
        if position not in analytes and (text := _clean(cell)) and position < 40
    ]
    if not inside:
        return None
    short = len(inside) < max(2, len(analytes))
    if not below and short and any(_STATEMENT.match(text) for text in outside[:1]):
        return None  # a sentence for the whole table, such as "Method: four-acid digestion, ICP-MS", cut at its commas
    label = " ".join(outside)
    units = sum(canonical_unit(text) is not None or foreign_unit(text) for text in inside)
    states = [parse_cell(text, "." if "," not in text else ",").state for text in inside]
    numbers = sum(state in (NUMBER, BELOW, MISSING) for state in states)
    ranges = sum(RANGE.fullmatch(text) is not None for text in inside)
    if ranges > 0.5 * len(inside) and _RANGE_LABEL.search(label) and not any(map(_CODE_LIKE.fullmatch, outside)):
        return LOWER
    named = sum(read_heading(text).analyte is not None for text in inside)
    if numbers >= 0.5 * len(inside):
        if any(_CODE_LIKE.fullmatch(text) for text in outside):
            return None  # a sample called DL-12 or LOD-3 is a sample
        if _UPPER_LIMIT.search(label) and not _LOWER_ONLY.search(label):
            return UPPER  # an "Upper detection limit" as well
        if _LOWER_LIMIT.search(label) and len(outside) <= 2:
            return LOWER
        return None
    if units >= 0.5 * len(inside) or (_UNIT_LABEL.search(label) and units):
        return UNIT
    if named > 0.5 * len(inside):
        return ANALYTE
    if _METHOD_LABEL.search(label):
        return METHOD
    beside_codes = below and outside and not any(is_code_heading(text) for text in outside)
    spoken = sum(speaks_of_method(text) for text in inside)
    if 2 * spoken > len(inside) or (not beside_codes and (spoken or len(inside) >= max(2, 0.3 * len(analytes)))):
        return METHOD
    return None


def _unlabelled_limits(row: list[str], analytes: dict[int, Heading], beneath: list[list[str]]) -> int:
    """Numbers only, under analytes only, nothing beside them: detection limits without a label, told by what is below.

    -1 where nearly all results below are greater (lower limits), 1 where nearly all are smaller (upper limits), 0 else:
    then it is a line of results without a code.
    """
    outside = [cell for position, cell in enumerate(row) if position not in analytes and _clean(cell)]
    inside = {position: text for position in analytes if position < len(row) and (text := _clean(row[position]))}
    limits = {position: value for position, text in inside.items() if (value := _number(text)) is not None}
    if outside or len(inside) < max(1, 0.5 * len(analytes)) or len(limits) < len(inside):
        return 0
    pairs = [
        (value, limit)
        for line in beneath
        for position, limit in limits.items()
        if position < len(line) and (value := _number(_clean(line[position]))) is not None
    ]
    if not pairs or sum(value > limit for value, limit in pairs) >= LIMITS_HOLD * len(pairs):
        return -1
    return 1 if sum(value < limit for value, limit in pairs) >= LIMITS_HOLD * len(pairs) else 0


def _number(text: str) -> float | None:
    cell = parse_cell(text, "." if "," not in text else ",")
    return cell.value if cell.state == NUMBER and not cell.qualifier else None


def find_wide_layout(rows: list[list[str]], told: tuple[int, dict[int, Heading]] | None = None) -> WideLayout | None:
    """Understand the headings of a wide table from its first rows; None where no row names an analyte.

    ``told``: the row of headings and the columns that could be analytes, where none names itself.
    """
    index, analytes = find_header_row(rows)
    if index < 0 and told is not None:
        index, analytes = told
    if index < 0:
        return None
    roles = {index: ANALYTE}
    for above in range(index - 1, max(-1, index - 9), -1):
        role = _role(rows[above], analytes, below=False)
        if role is not None and not (role == ANALYTE and _are_others(_analytes_in(rows[above]), analytes)):
            roles[above] = role
    below = index + 1
    first_row = below
    while below < min(len(rows), index + 9):
        row = rows[below]
        if not any(_clean(cell) for cell in row):
            below += 1
            continue
        role = _role(row, analytes, below=True)
        if role is None and (side := _unlabelled_limits(row, analytes, rows[below + 1 : below + 1 + SEARCH_ROWS])):
            role = LOWER if side < 0 else UPPER
        if role is None and LABELS not in roles.values() and _sub_labels(row, analytes):
            role = LABELS
        if role is None:
            break
        if role == METHOD and LABELS not in roles.values() and _looks_like_data(row):
            break
        roles[below] = role
        below += 1
        first_row = below
    return _assemble(rows, roles, first_row)


def _sub_labels(row: list[str], analytes: dict[int, Heading]) -> bool:
    """A second heading row that names only the columns beside the analytes (Lab ID, From, To)."""
    texts = [_clean(cell) for position, cell in enumerate(row) if position not in analytes]
    texts = [text for text in texts if text]
    if any(position < len(row) and row[position].strip() for position in analytes):
        texts = texts[:1] * 2  # a first line of results may call its kind "Sample"; a heading begins with it
    return len(texts) > 1 and any(is_code_heading(text) for text in texts)


def _looks_like_data(row: list[str]) -> bool:
    """A row of texts where numbers were expected (a column of remarks under an analyte) is still a row of data."""
    texts = [text for cell in row if (text := _clean(cell))]
    return sum(parse_cell(text).state == NUMBER for text in texts) >= 0.5 * len(texts)


def _assemble(rows: list[list[str]], roles: dict[int, str], first_row: int) -> WideLayout:
    width = max(len(rows[index]) for index in roles)
    order = sorted(roles)
    pieces: list[list[str]] = [[] for _ in range(width)]
    columns: dict[int, AnalyteColumn] = {}
    for index in order:
        if roles[index] == ANALYTE:
            for position, heading in _analytes_in(rows[index]).items():
                columns[position] = AnalyteColumn(position, "", heading, heading.unit, heading.method)
    for index in order:  # analytes that stand in another heading row only ("Au" over a column of the method row)
        if roles[index] in (METHOD, LABELS):
            for position, heading in _analytes_in(rows[index]).items():
                columns.setdefault(position, AnalyteColumn(position, "", heading, heading.unit, heading.method))
    for index in order:
        row = _spread(rows[index], columns) if roles[index] in (METHOD, UNIT) else rows[index]
        for position, cell in enumerate(row):
            text = _clean(cell)
            if not text:
                continue
            column = columns.get(position)
            names_row = _NAMES_ROW if LABELS in roles.values() else _ROW_LABELS
            if column is None and (word := names_row.get(roles[index])) and word.fullmatch(text):
                continue  # "Method" and "Unit" beside the analytes name their rows and not the column
            if roles[index] not in (LOWER, UPPER) or (column is None and is_code_heading(text)):
                pieces[position].append(re.sub(r"\s+", " ", text))
            if column is not None:
                take(column, roles[index], text)
    labels = _made_unique([" ".join(dict.fromkeys(texts)) for texts in pieces])
    for position, column in columns.items():
        column.header = labels[position]
    top = min(order)
    titles = [
        ", ".join(text for cell in row if (text := _clean(cell)))
        for row in [*rows[:top], *(rows[i] for i in range(top, first_row) if i not in roles)]
    ]
    return WideLayout(
        width, roles, first_row, [columns[key] for key in sorted(columns)], labels, None, [t for t in titles if t]
    )


def _made_unique(labels: list[str]) -> list[str]:
    """Number equal headings from the second on, so that a recipe can name each column."""
    seen: dict[str, int] = {}
    unique = []
    for label in labels:
        seen[label] = count = seen.get(label, 0) + 1
        unique.append(f"{label} ({count})" if label and count > 1 else label)
    return unique


def _spread(row: list[str], columns: dict[int, AnalyteColumn]) -> list[str]:
    """Carry a heading that stands once over several columns (merged cells) on to the right."""
    filled = [position for position in columns if position < len(row) and _clean(row[position])]
    spoken = [text for position in filled if speaks_of_method(text := _clean(row[position])) or split_unit(text)[1]]
    if len(filled) > 0.5 * len(columns) or len(spoken) < len(filled) or not filled:
        return row
    row = row + [""] * (max(columns) + 1 - len(row))
    last = ""
    spread = list(row)
    for position in sorted(columns):
        last = _clean(row[position]) or last
        spread[position] = last
    return spread
