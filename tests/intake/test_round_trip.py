"""Random tables written in random wide layouts are read back the same. All tables are invented by the generator."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from registry.intake import Reading, read_file

OXIDES = ("SiO2", "TiO2", "Al2O3", "MgO", "CaO", "Na2O", "K2O", "P2O5", "LOI")
ELEMENTS = ("Zr", "Nb", "Rb", "Sr", "Y", "La", "Ce", "Yb", "Cu", "V", "Sc", "W", "Sn", "In", "As", "Au")
UNIT_WORDS = {"wt%": ("%", "wt%", "wt. %", "pct"), "ppm": ("ppm", "mg/kg", "PPM", "g/t"), "ppb": ("ppb", "ug/kg")}
DIGESTION_WORDS = {
    "fusion": "Lithium borate fusion",
    "xrf": "XRF",
    "four_acid": "Four acid",
    "aqua_regia": "Aqua regia ICP-MS",
    "unknown": "ICP-MS",
}
TITLES = ("Invented Assays of Nowhere", "Results of the samples as received", "Page 1 of 1", "Client: nobody")


@dataclass
class Table:
    analytes: list[str]
    units: list[str]
    digestions: list[str] | None
    limits: list[float] | None
    codes: list[str]
    cells: list[list[tuple[float, int] | None]]


def _number(value: float, decimal: str) -> str:
    return f"{value:.2f}".rstrip("0").rstrip(".").replace(".", decimal) or "0"


@st.composite
def tables(draw: st.DrawFn) -> Table:
    analytes = draw(st.lists(st.sampled_from(OXIDES + ELEMENTS), min_size=1, max_size=7, unique=True))
    units = [draw(st.sampled_from(("wt%", "ppm") if name in OXIDES else ("ppm", "ppb", "wt%"))) for name in analytes]
    with_methods = draw(st.booleans())
    digestions = [draw(st.sampled_from(sorted(DIGESTION_WORDS))) for _ in analytes] if with_methods else None
    limits = [draw(st.sampled_from((0.01, 0.05, 0.5, 1.0, 2.0))) for _ in analytes] if draw(st.booleans()) else None
    codes = draw(
        st.lists(st.from_regex(r"[A-Z]{1,3}-[0-9]{1,4}[A-Z]?", fullmatch=True), min_size=1, max_size=9, unique=True)
    )
    value = st.integers(0, 9999).map(lambda hundredths: hundredths / 100)
    cell = st.one_of(st.none(), st.tuples(value, st.sampled_from((0, 0, 0, 1, 2))))
    cells = [[draw(cell) for _ in analytes] for _ in codes]
    for column in range(len(analytes)):  # a column or a row without any result is left out by design
        cells[0][column] = cells[0][column] or (draw(value), 0)
    for row in cells:
        row[0] = row[0] or (draw(value), 0)
    return Table(analytes, units, digestions, limits, codes, cells)


@st.composite
def written(draw: st.DrawFn) -> tuple[Table, bytes]:
    """A table and the bytes of it in some layout."""
    table = draw(tables())
    separator = draw(st.sampled_from((",", ";", "\t", "|")))
    decimal = draw(st.sampled_from((".", ",")))
    unit_words = [draw(st.sampled_from(UNIT_WORDS[unit])) for unit in table.units]
    place = draw(st.sampled_from(("bracket", "underscore", "space", "row")))
    glue = {"bracket": "{} ({})", "underscore": "{}_{}", "space": "{} {}", "row": "{}"}[place]
    names = [draw(st.sampled_from((name, name.upper()))) for name in table.analytes]
    code_heading = draw(st.sampled_from(("Sample", "Sample ID", "sample_code", "Lab ID", "FIELD NO")))
    labels = draw(st.booleans())
    analyte_row = [code_heading, *(glue.format(name, word) for name, word in zip(names, unit_words, strict=True))]
    others = []
    if place == "row":
        others.append(["Units" if labels else "", *unit_words])
    if table.digestions:
        others.append(["Method" if labels else "", *(DIGESTION_WORDS[name] for name in table.digestions)])
    if table.limits:
        others.append(["Detection limit", *(_number(limit, decimal) for limit in table.limits)])
    heading_rows = draw(st.permutations([analyte_row, *others]))
    missing = draw(st.sampled_from(("", "NA", "-", "n.a.")))
    space = draw(st.sampled_from(("", " ")))
    signs = ("", "<" + space, ">" + space)
    body = [
        [code, *(missing if cell is None else signs[cell[1]] + _number(cell[0], decimal) for cell in row)]
        for code, row in zip(table.codes, table.cells, strict=True)
    ]
    titles = [[text] for text in draw(st.lists(st.sampled_from(TITLES), max_size=3, unique=True))]
    blanks = draw(st.integers(0, 2))
    rows = [*titles, *([[]] if titles and draw(st.booleans()) else []), *heading_rows, *body]
    rows = [row + [""] * blanks if row else row for row in rows] + [[""] * len(analyte_row)] * draw(st.integers(0, 2))
    stream = io.StringIO()
    quoting = draw(st.sampled_from((csv.QUOTE_MINIMAL, csv.QUOTE_ALL)))
    csv.writer(
        stream, delimiter=separator, quoting=quoting, lineterminator=draw(st.sampled_from(("\n", "\r\n", "\r")))
    ).writerows(rows)
    encoding = draw(st.sampled_from(("utf-8", "utf-8-sig", "cp1252", "utf-16", "utf-16-le", "utf-16-be")))
    return table, stream.getvalue().encode(encoding)


@st.composite
def written_long_or_turned(draw: st.DrawFn) -> tuple[Table, bytes, bool]:
    """A table and the bytes of it as a long table, or with its samples as columns."""
    table = draw(tables())
    turned = len(table.analytes) >= 3 and draw(st.booleans())
    decimal = draw(st.sampled_from((".", ",")))
    words = [DIGESTION_WORDS[name] for name in table.digestions or ["unknown"] * len(table.analytes)]
    table.digestions = table.digestions or ["unknown"] * len(table.analytes)
    signs = ("", "<", ">")

    def text(cell: tuple[float, int] | None) -> str:
        return "" if cell is None else signs[cell[1]] + _number(cell[0], decimal)

    if turned:
        table.limits = None
        rows = [["Sample", "Unit", "Method", *table.codes]]
        for at, name in enumerate(table.analytes):
            rows.append([name, table.units[at], words[at], *(text(row[at]) for row in table.cells)])
    else:
        limits = [_number(limit, decimal) for limit in table.limits or []] or [""] * len(table.analytes)
        rows = [["Sample ID", "Analyte", "Result", "Unit", "Method", "Detection limit"]]
        for code, row in zip(table.codes, table.cells, strict=True):
            for at, cell in enumerate(row):
                rows.append([code, table.analytes[at], text(cell), table.units[at], words[at], limits[at]])
    stream = io.StringIO()
    csv.writer(stream, delimiter=draw(st.sampled_from((",", ";", "\t")))).writerows(rows)
    return table, stream.getvalue().encode(draw(st.sampled_from(("utf-8", "utf-16")))), turned


@settings(max_examples=2 * settings.default.max_examples, deadline=None)
@given(written_long_or_turned())
def test_long_or_turned_table_reads_back_the_same(case):
    table, data, _ = case
    check_same(table, read_file("random.csv", data, "results"))


@settings(max_examples=3 * settings.default.max_examples, deadline=None)
@given(written())
def test_table_in_a_random_wide_layout_reads_back_the_same(case):
    table, data = case
    check_same(table, read_file("random.csv", data, "results"))


def check_same(table: Table, reading: Reading) -> None:
    assert reading.ok, [problem.sentence() for problem in reading.problems]
    found = reading.results
    assert [column.analyte for column in found.columns] == table.analytes
    assert [column.unit for column in found.columns] == table.units
    assert [column.digestion for column in found.columns] == (table.digestions or ["unknown"] * len(table.analytes))
    assert [column.detection_limit for column in found.columns] == (table.limits or [None] * len(table.analytes))
    assert found.sample_codes == table.codes
    values = [[np.nan if cell is None else cell[0] for cell in row] for row in table.cells]
    np.testing.assert_array_equal(found.values, values)
    assert found.qualifiers.tolist() == [[0 if cell is None else cell[1] for cell in row] for row in table.cells]
