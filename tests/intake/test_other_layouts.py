"""Long tables, samples as columns, workbooks and archives. All tables are invented."""

from __future__ import annotations

import datetime as dt
import gzip
import io
import time
import zipfile

import numpy as np
import openpyxl
import pytest

from registry.intake import ReadingOptions, read_all, read_file
from registry.intake.reading import read_path

WIDE = "Sample ID,SiO2 (%),Zr (ppm)\nA-1,60.1,180\nA-2,48.3,<2\n"
LONG = (
    "Invented Assays\nCertificate No: NW7\n\n"
    "Sample ID,Analyte,Result,Unit,Method,Detection limit\n"
    "A-1,SiO2,60.1,%,Lithium borate fusion,0.01\n"
    "A-1,Zr,180,ppm,Lithium borate fusion,2\n"
    "A-2,SiO2,48.3,%,Lithium borate fusion,0.01\n"
    "A-2,Zr,<2,ppm,Lithium borate fusion,2\n"
    "A-2,Au,n.d.,ppb,Fire assay,1\n"
    "A-1,Zr,182,ppm,Lithium borate fusion,2\n"
)


def problems(reading):
    return [problem for problem in reading.problems if problem.severity == "problem"]


def test_long_table_gathers_one_row_a_sample_and_one_more_for_a_repeat():
    reading = read_file("long.csv", LONG.encode())
    assert reading.ok, [problem.sentence() for problem in reading.problems]
    assert reading.kind == "results"
    table = reading.results
    assert table.certificate == "NW7"
    assert table.sample_codes == ["A-1", "A-2", "A-1"]
    assert table.line_no.tolist() == [5, 7, 10]
    assert [(c.analyte, c.unit, c.digestion, c.detection_limit) for c in table.columns] == [
        ("SiO2", "wt%", "fusion", 0.01),
        ("Zr", "ppm", "fusion", 2.0),
        ("Au", "ppb", "fire_assay", 1.0),
    ]
    nan = np.nan
    np.testing.assert_array_equal(table.values, [[60.1, 180, nan], [48.3, 2, 1], [nan, 182, nan]])
    assert table.qualifiers.tolist() == [[0, 0, 0], [0, 1, 1], [0, 0, 0]]
    assert any("a long table" in sentence for sentence in reading.understood)


def test_long_table_with_qualifier_column_and_unit_in_the_name():
    text = "sample_code;parameter;qualifier;value\nA;Zr_ppm;<;5\nA;Au_ppb;=;1,5\nB;Zr_ppm;;180,5\nB;Xq_ppm;;1\n"
    reading = read_file("long.csv", text.encode())
    assert reading.ok
    table = reading.results
    assert [(c.analyte, c.unit) for c in table.columns] == [("Zr", "ppm"), ("Au", "ppb")]
    np.testing.assert_array_equal(table.values, [[5, 1.5], [180.5, np.nan]])
    assert table.qualifiers.tolist() == [[1, 0], [0, 0]]
    assert [warning.found for warning in reading.warnings if "not known" in warning.what] == ["Xq_ppm"]


def test_fault_in_a_long_table_is_told_with_its_own_line():
    text = LONG.replace("A-2,SiO2,48.3", "A-2,SiO2,348.3").replace("A-1,Zr,182", "A-1,Zr,bad")
    first, second = problems(read_file("long.csv", text.encode()))
    assert (first.row, first.found) == (7, "348.3 wt%")
    assert (second.row, second.found) == (10, "bad")


def test_long_table_line_without_a_code_is_a_problem():
    (problem,) = problems(read_file("long.csv", (LONG + ",Zr,5,ppm,x,2\n").encode()))
    assert problem.row == 11


TURNED = (
    "Certificate: NW8,,,,\nSample ID,,,A-1,A-2\nMethod,,,,\n"
    "SiO2,%,XRF,60.1,48.3\nAl2O3,%,XRF,15,14\nMgO,%,XRF,2,8\nZr,ppm,Lithium borate fusion,180,<2\n"
)


def test_samples_as_columns_are_turned():
    reading = read_file("turned.csv", TURNED.encode())
    assert reading.ok, [problem.sentence() for problem in reading.problems]
    table = reading.results
    assert table.sample_codes == ["A-1", "A-2"]
    assert table.certificate == "NW8"
    assert [(c.analyte, c.unit, c.digestion) for c in table.columns] == [
        ("SiO2", "wt%", "xrf"),
        ("Al2O3", "wt%", "xrf"),
        ("MgO", "wt%", "xrf"),
        ("Zr", "ppm", "fusion"),
    ]
    np.testing.assert_array_equal(table.values, [[60.1, 15, 2, 180], [48.3, 14, 8, 2]])
    assert table.qualifiers[1].tolist() == [0, 0, 0, 1]
    assert table.line_no.tolist() == [4, 5]
    assert any("the table is turned" in sentence for sentence in reading.understood)


def test_fault_in_a_turned_table_names_the_files_row_and_the_sample():
    (problem,) = problems(read_file("turned.csv", TURNED.replace("48.3", "148.3").encode()))
    assert (problem.row, problem.column) == (4, "A-2 (column 5)")


def workbook(**sheets):
    book = openpyxl.Workbook()
    book.remove(book.active)
    for name, rows in sheets.items():
        sheet = book.create_sheet(name)
        for row in rows:
            sheet.append(row)
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


MAJORS = [
    ["Invented Assays"],
    [],
    ["Sample ID", "SiO2", "MgO"],
    [None, "%", "%"],
    ["A-1", 60.1, 2],
    ["A-2", 48.3, "<0.01"],
]
TRACES = [["Sample ID", "Zr (ppm)", "Au (ppb)"], ["A-1", 180, 1.5], ["A-2", 90, "<1"]]


def test_workbook_with_one_table_is_read_like_a_text_file():
    reading = read_file("book.xlsx", workbook(Notes=[["About this file"]], Majors=MAJORS))
    assert reading.ok, [problem.sentence() for problem in reading.problems]
    table = reading.results
    assert reading.part == "Majors"
    assert table.sample_codes == ["A-1", "A-2"]
    np.testing.assert_array_equal(table.values, [[60.1, 2], [48.3, 0.01]])
    assert table.line_no.tolist() == [5, 6]
    assert any("left out: Notes" in sentence for sentence in reading.understood)


def test_workbook_with_several_tables_gives_them_all_or_asks():
    data = workbook(Majors=MAJORS, Traces=TRACES)
    first, second = read_all("book.xlsx", data)
    assert [column.analyte for column in first.results.columns] == ["SiO2", "MgO"]
    assert [column.analyte for column in second.results.columns] == ["Zr", "Au"]
    (problem,) = problems(read_file("book.xlsx", data))
    assert problem.found == "Majors, Traces"
    named = read_file("book.xlsx", data, options=ReadingOptions(sheet="Traces"))
    assert named.ok
    assert named.results.sample_codes == ["A-1", "A-2"]
    (problem,) = problems(read_file("book.xlsx", data, options=ReadingOptions(sheet="Gold")))
    assert "no sheet 'Gold'" in problem.what


def test_workbook_cells_of_other_types_become_text():
    rows = [
        ["sample_code", "site_code", "collected_on", "pulp_available", "density_kg_m3"],
        ["S1", "A", dt.datetime(2024, 5, 31), True, 2650],
        ["S2", "A", dt.date(2024, 6, 1), False, 2700.5],
    ]
    reading = read_file("samples.xlsx", workbook(Samples=rows))
    assert reading.ok, [problem.sentence() for problem in reading.problems]
    assert reading.kind == "samples"
    assert reading.master.rows["collected_on"] == ["2024-05-31", "2024-06-01"]
    assert reading.master.rows["pulp_available"] == [True, False]
    assert reading.master.rows["density_kg_m3"] == [2650, 2700.5]


def test_workbook_cell_shown_as_per_cent_is_read_as_shown():
    book = openpyxl.Workbook()
    book.active.append(["Sample", "SiO2 (%)"])
    book.active.append(["A", 0.601])
    book.active["B2"].number_format = "0.0%"
    stream = io.BytesIO()
    book.save(stream)
    assert read_file("p.xlsx", stream.getvalue()).results.values.tolist() == [[60.1]]


def test_damaged_workbook_is_a_problem():
    data = bytearray(workbook(Majors=MAJORS))
    for place in range(200, 900):
        data[place] ^= 0x5A
    (problem,) = problems(read_file("book.xlsx", bytes(data)))
    assert problem.remedy


def zipped(**files):
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in files.items():
            archive.writestr(name.replace("_csv", ".csv"), content)
    return stream.getvalue()


def test_gzip_and_zip_of_one_table_are_read():
    for data in (gzip.compress(WIDE.encode(), mtime=0), zipped(lab_csv=WIDE, readme="text")):
        reading = read_file("lab", data)
        assert reading.ok
        assert reading.results.sample_codes == ["A-1", "A-2"]


def test_zip_of_several_tables_gives_them_all():
    readings = read_all("lab.zip", zipped(one_csv=WIDE, two_csv=LONG))
    assert [reading.part for reading in readings] == ["one.csv", "two.csv"]
    assert [len(reading.results) for reading in readings] == [2, 3]


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (gzip.compress(b"a" * 200_000), "unpacks to more than 100,000 bytes"),
        (zipped(a_csv=b"a" * 60_000, b_csv=b"b" * 60_000), "unpacks to more than 100,000 bytes"),
        (gzip.compress(WIDE.encode(), mtime=0)[:-12], "the gzip file is damaged"),
        (zipped(a_csv=WIDE)[:60] + b"\x00" * 60, "the zip file is damaged"),
        (zipped(readme="x"), "holds no table"),
        (zipped(a_csv=zipped(a_csv=zipped(a_csv=zipped(a_csv=WIDE)))), "archives lie within archives"),
        (b"\xd0\xcf\x11\xe0" + bytes(600), "an old binary workbook"),
        (b"%PDF-1.7 x", "a PDF"),
    ],
)
def test_container_that_cannot_be_read_is_a_problem_with_a_remedy(data, words):
    (problem,) = problems(read_file("lab", data, options=ReadingOptions(unpacked_limit_bytes=100_000)))
    assert words in problem.what
    assert problem.remedy


def test_method_stated_once_above_the_table_is_no_heading_row_though_it_holds_commas() -> None:
    text = "All results in ppm\nMethod: four-acid digestion, ICP-MS\nSample,Zr,Cu,SiO2 (%)\nA1,180,20,66\n"
    reading = read_file("certificate.csv", text.encode())
    assert reading.results is not None
    assert [(column.analyte, column.unit, column.digestion) for column in reading.results.columns] == [
        ("Zr", "ppm", "four_acid"),
        ("Cu", "ppm", "four_acid"),
        ("SiO2", "wt%", "four_acid"),
    ]
    assert reading.results.sample_header == "Sample"


def test_title_that_its_comma_cuts_over_a_single_analyte_is_a_title():
    reading = read_file("au.csv", b"Method: fire assay, AAS finish\nSample,Au (ppb)\nA1,5\nA2,7\n", None)
    assert reading.results is not None and reading.problems == []
    (gold,) = reading.results.columns
    assert (gold.header, gold.unit, gold.digestion) == ("Au (ppb)", "ppb", "fire_assay")
    assert gold.method == "fire assay, AAS finish"


@pytest.mark.parametrize("pack", [bytes, gzip.compress])
def test_endless_first_line_is_refused_before_it_is_cut_into_cells(pack, tmp_path):
    data = pack(b"0," * 3_000_000)
    started = time.perf_counter()
    (problem,) = problems(read_file("lab.csv", data))
    assert problem.what == "the file is one line of more than 2,000,000 bytes"
    assert time.perf_counter() - started < 3.0
    path = tmp_path / "lab.csv"
    path.write_bytes(b"0," * 3_000_000)
    assert read_path(path) is None  # not as a stream: read_file tells what is wrong
