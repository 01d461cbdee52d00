"""Wide results files in every layout. All tables are invented; laboratories, codes and numbers stand for none."""

from __future__ import annotations

import time

import numpy as np
import pytest

from registry.intake import ReadingOptions, read_file

PLAIN = "Sample ID,SiO2 (%),Al2O3 (%),Zr (ppm)\nA-1,60.1,15.2,180\nA-2,48.3,<0.01,90.5\n"


def read(text, **options):
    data = text if isinstance(text, bytes) else text.encode()
    return read_file("lab.csv", data, options=ReadingOptions(**options))


def table_of(reading):
    assert reading.ok, [problem.sentence() for problem in reading.problems]
    assert reading.kind == "results"
    return reading.results


def said(reading, words):
    return any(words in sentence for sentence in reading.understood)


def sentences(reading, severity="problem"):
    return [problem.sentence() for problem in reading.problems if problem.severity == severity]


def test_table_with_units_in_the_headings_reads_values_and_qualifiers():
    table = table_of(read(PLAIN))
    assert table.sample_codes == ["A-1", "A-2"]
    assert [(c.analyte, c.unit, c.position) for c in table.columns] == [
        ("SiO2", "wt%", 1),
        ("Al2O3", "wt%", 2),
        ("Zr", "ppm", 3),
    ]
    np.testing.assert_array_equal(table.values, [[60.1, 15.2, 180], [48.3, 0.01, 90.5]])
    np.testing.assert_array_equal(table.qualifiers, [[0, 0, 0], [0, 1, 0]])
    assert table.line_no.tolist() == [2, 3]
    assert table.values.dtype == np.float64
    assert table.qualifiers.dtype == np.uint8


@pytest.mark.parametrize(
    "headings",
    [
        ["Sample,SiO2,Zr", ",%,ppm"],
        ["Sample,SiO2,Zr", "Units,wt.%,mg/kg"],
        ["Sample,SiO2,Zr", "Method,Lithium borate fusion,Lithium borate fusion", "Unit,%,ppm"],
        ["Method,Lithium borate fusion,Lithium borate fusion", "Sample,SiO2,Zr", "Unit,%,ppm"],
        ["Unit,%,ppm", "Sample,SiO2,Zr", "Method,LiBO2,LiBO2", "LOD,0.01,2"],
        ["Detection limit,0.01,2", "Unit,%,ppm", "Sample,SiO2,Zr"],
        ["Sample,SiO2,Zr", "Unit,%,ppm", "Lower limit,0.01,2", "Upper limit,100,10000"],
        ["Analyte,SiO2,Zr", "Unit,%,ppm", "Method,FUS,FUS", "LLD,0.01,2", "Upper limit,100,10000", "Sample ID,,"],
        [",SiO2,Zr", ",0.01,2", ",%,ppm", ",FUS,FUS"],
    ],
)  # fmt: skip
def test_heading_rows_in_any_order_give_the_same_columns(headings):
    table = table_of(read("\n".join([*headings, "A-1,60.1,180", "A-2,48.3,<2"]) + "\n"))
    assert [(c.analyte, c.unit) for c in table.columns] == [("SiO2", "wt%"), ("Zr", "ppm")]
    assert table.sample_codes == ["A-1", "A-2"]
    np.testing.assert_array_equal(table.values, [[60.1, 180], [48.3, 2]])
    whole = "\n".join(headings)
    with_limits = "0.01,2" in whole
    assert [c.detection_limit for c in table.columns] == ([0.01, 2.0] if with_limits else [None, None])
    assert [c.upper_limit for c in table.columns] == ([100.0, 10000.0] if "Upper" in whole else [None, None])
    fused = "FUS" in whole or "LiBO2" in whole or "borate" in whole
    assert {c.digestion for c in table.columns} == {"fusion" if fused else "unknown"}


def test_title_lines_above_the_table_are_passed_over_and_read():
    text = (
        "Invented Assays of Nowhere\n12 Example Lane\nCertificate No: NW24001\nLaboratory: Invented Assays\n"
        "Method: lithium borate fusion and ICP-MS\n\n" + PLAIN
    )
    reading = read(text)
    table = table_of(reading)
    assert (table.certificate, table.lab) == ("NW24001", "Invented Assays")
    assert {column.digestion for column in table.columns} == {"fusion"}
    assert table.line_no.tolist() == [8, 9]
    assert said(reading, "title lines above the table")


def test_unit_stated_once_above_the_table_serves_columns_without_one():
    table = table_of(read("All results in ppm\n\nSample,Cu,Au,Ni\nA,50,0.01,20\nB,60,0.02,30\n"))
    assert [column.unit for column in table.columns] == ["ppm"] * 3


def test_merged_method_cells_serve_the_columns_to_their_right():
    text = "Method,XRF,,Four acid,\nSample,SiO2,MgO,Cu,Ni\nUnit,%,%,ppm,ppm\nA,60,2,50,20\nB,61,3,51,21\n"
    assert [c.digestion for c in table_of(read(text)).columns] == ["xrf", "xrf", "four_acid", "four_acid"]


def test_heading_with_its_method_gives_the_digestion_per_column():
    text = "Sample,SiO2_XRF_%,Zr_FUS_ppm,Cu_4A_ppm,FeO titration (%),S combustion %\n"
    text += "A,60,180,50,2.1,0.1\nB,61,181,51,2.2,0.2\n"
    table = table_of(read(text))
    assert [c.digestion for c in table.columns] == ["xrf", "fusion", "four_acid", "titration", "combustion"]


def test_analyte_reported_by_two_methods_stays_twice():
    text = "Sample,Au_FA (ppm),Au_AR-ICP (ppm)\nA,0.01,<0.02\nB,0.13,0.11\n"
    table = table_of(read(text))
    assert [(c.analyte, c.digestion) for c in table.columns] == [("Au", "fire_assay"), ("Au", "aqua_regia")]


@pytest.mark.parametrize("separator", [",", ";", "\t", "|"])
@pytest.mark.parametrize("ending", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "cp1252", "utf-16", "utf-16-le", "mac_roman"])
def test_separators_endings_and_encodings_give_the_same_table(separator, ending, encoding):
    text = PLAIN.replace("A-1", "Ågård é\u20131").replace(",", separator).replace("\n", ending)
    reading = read(text.encode(encoding))
    table = table_of(reading)
    assert table.sample_codes == ["Ågård é\u20131", "A-2"]
    np.testing.assert_array_equal(table.values, [[60.1, 15.2, 180], [48.3, 0.01, 90.5]])
    assert table.line_no.tolist() == [2, 3]


@pytest.mark.parametrize("separator", [";", "\t"])
def test_decimal_comma_with_another_separator_is_read(separator):
    text = PLAIN.replace(",", separator).replace(".", ",")
    table = table_of(read(text))
    np.testing.assert_array_equal(table.values, [[60.1, 15.2, 180], [48.3, 0.01, 90.5]])


def test_quoted_decimal_comma_between_commas_is_read():
    text = 'Sample,SiO2 (%),Zr (ppm)\nA,"60,1","180,25"\nB,"48,3","<0,5"\n'
    table = table_of(read(text))
    np.testing.assert_array_equal(table.values, [[60.1, 180.25], [48.3, 0.5]])
    assert table.qualifiers.tolist() == [[0, 0], [0, 1]]


def test_point_in_a_file_of_decimal_commas_groups_thousands():
    text = "Sample;Cu (ppm);Zr (ppm)\nA;1.234;1,5\nB;2.000,5;2,5\nC;30,1;3,5\n"
    reading = read(text)
    np.testing.assert_array_equal(table_of(reading).values[:, 0], [1234, 2000.5, 30.1])
    assert any("mark of thousands" in line for line in sentences(reading, "warning"))


def test_stray_decimal_comma_among_points_is_a_problem_that_says_so():
    reading = read('Sample,SiO2 (%)\nA,60.1\nB,"48,35"\nC,50.2\n')
    assert len(sentences(reading)) == 1
    assert "row 3, column 'SiO2 (%)'" in sentences(reading)[0]
    assert "decimal sign '.'" in sentences(reading)[0]
    assert reading.refused_lines == {3}


def test_trailing_blank_rows_and_columns_vanish():
    table = table_of(read("Sample,SiO2 (%),Zr (ppm),,\nA,60,180,,\nB,61,181,,\n,,,,\n\n,,,,\n"))
    assert table.sample_codes == ["A", "B"]
    assert [column.analyte for column in table.columns] == ["SiO2", "Zr"]


def test_rows_too_short_or_with_a_remark_behind_keep_their_cells():
    reading = read("Sample,SiO2 (%),Zr (ppm)\nA,60\nB,61,181,fresh,\n")
    np.testing.assert_array_equal(table_of(reading).values, [[60, np.nan], [61, 181]])
    assert any("surplus is not read" in line for line in sentences(reading, "warning"))


def test_unquoted_decimal_comma_is_a_problem_and_not_a_smaller_number():
    reading = read("Sample,Cu (ppm)\nA,1,25\nB,2,5\n")
    assert [problem.row for problem in reading.problems if problem.severity == "problem"] == [2, 3]
    assert all("not in quotation marks" in line for line in sentences(reading))


def test_embedded_line_breaks_keep_the_editors_line_numbers():
    text = 'Sample,SiO2 (%),Note\nA,60,"two\nlines"\nB,61,x\nC,bad,y\n'
    reading = read(text)
    assert reading.results.line_no.tolist() == [2, 4, 5]
    assert [problem.row for problem in reading.problems if problem.severity == "problem"] == [5]


def test_junk_columns_are_named_as_ignored():
    text = "Serial No,Sample ID,From,To,SiO2 (%),Zr (ppm),Comment\n1,A,0,1,60,180,fresh\n2,B,1,2,61,181,dyke\n"
    reading = read(text)
    assert table_of(reading).ignored == ("Serial No", "From", "To", "Comment")
    assert said(reading, "'Comment'")


def test_heading_with_a_unit_but_no_known_analyte_warns_and_is_ignored():
    reading = read("Sample,SiO2 (%),Xq (ppm)\nA,60,1\nB,61,2\n")
    assert table_of(reading).ignored == ("Xq (ppm)",)
    assert any("names no analyte" in line for line in sentences(reading, "warning"))


def test_group_headings_notes_and_totals_below_are_no_samples():
    text = (
        "Sample,SiO2 (%),Zr (ppm)\nNorth ridge,,\nA,60,180\nB,62,182\nSouth ridge,,\nC,64,184\nMean,62,182\n"
        "Std. dev.,2,2\n\n* results relate to the samples as received,,\n,62,182\n"
    )
    reading = read(text)
    assert reading.results.sample_codes == ["A", "B", "C"]
    assert said(reading, "row 7 ('Mean') is a summary")
    assert said(reading, "row 2 ('North ridge') is a group heading")
    assert ["without a sample code" in line for line in sentences(reading)] == [True]


def test_headings_repeated_within_the_table_are_passed_over():
    table = table_of(read(PLAIN + "Sample ID,SiO2 (%),Al2O3 (%),Zr (ppm)\nA-3,50,14,70\n"))
    assert table.sample_codes == ["A-1", "A-2", "A-3"]


def test_qualifier_in_its_own_column_is_joined_to_its_number():
    text = "Sample,,Zr (ppm),Au (ppb),Au_flag\nA,<,5,3,\nB,,180,1,<\nC,>,900,7,>\n"
    table = table_of(read(text))
    assert table.qualifiers.tolist() == [[1, 0], [0, 1], [2, 2]]


def test_code_column_is_chosen_by_heading_then_by_repeats():
    text = "Serial No,Lab ID,Feild ID,Cu (ppm)\n1.0,543.0,Q001,5\n2.0,544.0,Q002 ,6\n3.0,545.0,Q003,7\n"
    reading = read(text)
    assert table_of(reading).sample_codes == ["Q001", "Q002", "Q003"]
    assert said(reading, "doubtful: 'Lab ID' could be meant")
    repeats = "Lab ID,Field ID,Cu (ppm)\nP1/001,S1,5\nP1/002,S2,6\nP2/001,S1,7\nP2/002,S2,8\n"
    assert table_of(read(repeats)).sample_codes == ["P1/001", "P1/002", "P2/001", "P2/002"]


def test_code_column_without_a_heading_is_said_to_be_doubtful():
    reading = read(",Cu (ppm),Zn (ppm)\nA1,5,6\nA2,7,8\n")
    assert table_of(reading).sample_codes == ["A1", "A2"]
    assert said(reading, "doubtful: its heading does not say so")


def test_float_noise_is_taken_off_codes_only_where_all_carry_it():
    assert table_of(read("Sample,Cu (ppm)\n16.0,5\n17.0,6\n")).sample_codes == ["16", "17"]
    assert table_of(read("Sample,Cu (ppm)\n16.0,5\n16.5,6\n")).sample_codes == ["16.0", "16.5"]


def test_codes_that_a_spreadsheet_made_dates_of_are_questioned():
    reading = read("Sample,Cu (ppm)\nA-1,5\n01-Sep,6\n1.2E+05,7\n2024-03-01 00:00:00,8\n")
    table_of(reading)
    assert sum("made by a spreadsheet" in line for line in sentences(reading, "warning")) == 3


def test_repeated_codes_are_kept_and_listed():
    reading = read("Sample,Cu (ppm)\nA,5\nB,6\nA,7\n")
    assert table_of(reading).sample_codes == ["A", "B", "A"]
    assert any("A (2 times)" in line for line in sentences(reading, "warning"))


def test_control_column_is_handed_on_by_line():
    table = table_of(read("Sample,QA/QC,Cu (ppm)\nA,,5\nB,BLANK,0.1\nC,DUPL OF A,5.1\n"))
    assert table.control_text == [None, "BLANK", "DUPL OF A"]
    table = table_of(read("Sample,Type,Cu (ppm)\nA,granite,5\nB,Blank,0.1\n"))
    assert table.control_text == [None, "Blank"]


def test_words_for_no_result_use_a_known_detection_limit():
    reading = read("Sample,Zr,Cu\nUnit,ppm,ppm\nLOD,2,1\nA,n.d.,bdl\nB,180,NA\nC,181,I.S.\n")
    table = table_of(reading)
    np.testing.assert_array_equal(table.values, [[2, 1], [180, np.nan], [181, np.nan]])
    assert table.qualifiers.tolist() == [[1, 1], [0, 0], [0, 0]]
    assert any("no result: I.S." in line for line in sentences(reading, "warning"))


def test_words_for_below_detection_without_a_limit_are_missing_with_a_warning():
    reading = read("Sample,Zr (ppm)\nA,n.d.\nB,180\n")
    assert np.isnan(table_of(reading).values[0, 0])
    assert any("limit that is not known" in line for line in sentences(reading, "warning"))


def test_column_of_texts_under_an_analyte_is_set_aside_with_a_warning():
    text = "Sample,Au (ppm),Cu (ppm)\nA,Ch,5\nB,Ch,6\nC,Blank Sample,0.1\n"
    reading = read(text)
    table = table_of(reading)
    assert [column.analyte for column in table.columns] == ["Cu"]
    assert table.ignored == ("Au (ppm)",)
    assert table.control_text == [None, None, "Blank Sample"]
    assert any("texts stand where numbers are expected" in line for line in sentences(reading, "warning"))


def test_text_among_numbers_is_a_problem_with_place_and_remedy():
    reading = read("Sample,Cu (ppm)\nA,5\nB,Sep-12\nC,6\nD,7\n")
    (problem,) = [one for one in reading.problems if one.severity == "problem"]
    assert (problem.row, problem.column, problem.found) == (3, "Cu (ppm)", "Sep-12")
    assert "date" in problem.remedy


def test_spreadsheet_error_is_a_problem():
    assert any("spreadsheet's error" in line for line in sentences(read("Sample,Cu (ppm)\nA,#DIV/0!\nB,5\n")))


@pytest.mark.parametrize("text", ["inf", "1_000", "-inf"])
def test_text_that_python_would_take_for_a_number_is_refused(text):
    reading = read(f"Sample,Cu (ppm)\nA,{text}\nB,5\nC,6\n")
    assert any("a text stands where a number" in line and text in line for line in sentences(reading))


def test_impossible_values_are_problems_with_the_likely_cause():
    reading = read("Sample,SiO2 (%),MnO (%),Zr (ppm)\nA,60,3002,180\nB,61,0.1,-5\nC,62,0.1,181\n")
    first, second = (one for one in reading.problems if one.severity == "problem")
    assert (first.row, first.column) == (2, "MnO (%)")
    assert "3002 ppm = 0.3002 wt%" in first.remedy
    assert (second.row, second.column) == (3, "Zr (ppm)")
    assert "below the detection limit" in second.remedy


def test_negative_loss_on_ignition_is_taken():
    table_of(read("Sample,SiO2 (%),LOI (%)\nA,60,-0.4\nB,61,1\n"))


def test_negative_numbers_mean_below_only_on_the_users_word():
    text = "Sample,Zr (ppm),Cu (ppm)\nA,-5,7\nB,180,-1\n"
    assert not read(text).ok
    table = table_of(read(text, negative_means_below=True))
    assert table.values.tolist() == [[5, 7], [180, 1]]
    assert table.qualifiers.tolist() == [[1, 0], [0, 1]]


def test_value_far_from_its_column_is_a_warning_not_a_refusal():
    rows = "".join(f"S{n},{180 + n},60\n" for n in range(8))
    reading = read("Sample,Zr (ppm),SiO2 (%)\n" + rows + "S9,0.02,60\n")
    table_of(reading)
    (warning,) = [one for one in reading.problems if "far from the rest" in one.what]
    assert (warning.row, warning.found) == (10, "0.02 ppm")


def test_cell_with_another_unit_is_converted_with_a_warning():
    reading = read("Sample,Cu (ppm),Zn (ppm)\nA,1.2%,5\nB,50,6\n")
    assert table_of(reading).values[0, 0] == pytest.approx(12000)
    assert any("the cell states wt%" in line for line in sentences(reading, "warning"))


def test_missing_unit_is_taken_by_custom_with_a_warning_or_refused():
    reading = read("Sample,SiO2,Zr\nA,60,180\nB,61,181\n")
    assert [column.unit for column in table_of(reading).columns] == ["wt%", "ppm"]
    assert sum("by custom" in line for line in sentences(reading, "warning")) == 2
    refused = read("Sample,SiO2,Au\nA,60,5\nB,61,6\n")
    assert any("no unit is stated" in line and "'Au'" in line for line in sentences(refused))
    assert read("Sample,SiO2,Au\nA,60,5\nB,61,6\n", unit="ppm").ok


def test_unit_of_no_mass_fraction_is_a_problem():
    assert any(
        "not one of a mass fraction" in line for line in sentences(read("Sample,SiO2 (%),Cu (mg/L)\nA,60,5\nB,61,6\n"))
    )


def test_coordinates_are_not_yttrium():
    table = table_of(read("Sample,x,y,Zr (ppm),Y (ppm)\nA,499025,2102599,180,20\nB,499026,2102600,181,21\n"))
    assert [(c.analyte, c.position) for c in table.columns] == [("Zr", 3), ("Y", 4)]


def test_equal_faults_are_listed_up_to_a_number_and_then_counted():
    rows = "".join(f"S{n},{'bad' if n % 2 else 5}\n" for n in range(200))
    reading = read("Sample,Cu (ppm)\n" + rows)
    problems = [one for one in reading.problems if one.severity == "problem"]
    assert len(problems) == 4
    assert problems[-1].what.startswith("97 more of the same kind")
    assert len(reading.refused_lines) == 100


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b"", "the file is empty"),
        (b"  \n \n", "the file is empty"),
        (bytes(range(256)) * 8, "not a text file"),
        (b"a,b\n1,2\n", "the kind of file cannot be told"),
        (b"Sample,SiO2 (%)\n", "holds no results"),
        (b'Sample,SiO2 (%)\n"A,60\n' + b"B,61\n" * 200, "one row takes"),
    ],
)
def test_file_that_is_no_table_is_a_problem_in_a_sentence(data, words):
    reading = read(data)
    assert not reading.ok
    assert reading.whole_file_refused
    assert any(words in line for line in sentences(reading)), sentences(reading)


def test_names_of_heading_rows_are_no_part_of_the_code_columns_heading():
    text = "Method,XRF,Fusion\nDetection limit,0.01,2\nSample ID,SiO2,Zr\nUnits,%,ppm\nA-1,60.1,180\n"
    assert read_file("stacked.csv", text.encode()).results.sample_header == "Sample ID"


@pytest.mark.parametrize("code", ["DL-1", "LOD-3", "MDL02", "UDL-1", "Upper-1", "MEAN-1", "STD-1", "TOTAL-5", "UNIT-2"])
def test_sample_whose_code_begins_like_a_heading_row_stays_a_sample(code: str) -> None:
    reading = read_file("codes.csv", f"Sample,SiO2 (%),Zr (ppm)\n{code},66,180\nA-1,65,170\n".encode())
    assert reading.results is not None
    assert reading.results.sample_codes == [code, "A-1"]


def test_quotation_mark_never_closed_is_refused_at_its_row_however_short_the_file():
    reading = read('Sample,SiO2 (%),Zr ppm\nA1,68,150\nA2,"67,140\nA3,66,130\n')
    assert not reading.ok and reading.whole_file_refused
    assert sentences(reading) == [
        "lab.csv, row 3: a quotation mark is opened and not closed before the file ends; close or remove the quotation "
        "mark in this row."
    ]


@pytest.mark.parametrize("end", ["", "\n", "\r\n"])
def test_quoted_last_cell_is_read_whole(end):
    reading = read('Sample,SiO2 (%),Zr ppm,Remark\nA1,68,150,"a, b"\nA2,67,140,"c\nd"' + end)
    assert reading.ok
    np.testing.assert_array_equal(reading.results.values, [[68.0, 150.0], [67.0, 140.0]])
    assert reading.results.line_no.tolist() == [2, 3]


def test_line_of_results_without_a_code_is_no_row_of_detection_limits():
    reading = read("Sample,SiO2 (%),MgO (%),Zr ppm\n,68,1.2,150\nA1,67,1.3,140\nA2,69,1.1,160\n")
    assert not reading.ok
    (told,) = [line for line in sentences(reading) if "row 2" in line]
    assert "no sample code" in told or "without a sample code" in told or "blank" in told


def test_unlabelled_row_below_all_results_is_their_detection_limits():
    reading = read("Sample,SiO2 (%),MgO (%),Zr ppm\n,0.01,0.01,2\nA1,67,1.3,140\nA2,69,<0.01,160\n")
    assert reading.ok
    assert [column.detection_limit for column in reading.results.columns] == [0.01, 0.01, 2.0]


@pytest.mark.parametrize(
    ("code", "words"),
    [
        ("A" * 100_000, "the code has 100,000 characters; found 'AAAA"),
        ('"A1\nA2"', "the code holds a line break, a tab or another invisible control character"),
        ("A\x07B", "the code holds a line break, a tab or another invisible control character"),
    ],
)
def test_code_that_nobody_can_have_meant_is_refused_quickly_and_shortly(code, words):
    started = time.perf_counter()
    reading = read(f"Sample,SiO2 (%),Zr ppm\n{code},68,150\nB1,67,140\n")
    (told,) = sentences(reading)
    assert told.startswith("lab.csv, row 2, column 'Sample': " + words)
    assert len(told) < 500 and "at most 100 characters on one line" in told
    assert time.perf_counter() - started < 5.0
