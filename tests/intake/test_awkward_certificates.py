"""Certificates that were once misread: headings, notes and codes. All tables are invented."""

from __future__ import annotations

import pytest

from registry.intake import ReadingOptions, read_file


def read(text, **options):
    data = text if isinstance(text, bytes) else text.encode()
    return read_file("lab.csv", data, options=ReadingOptions(**options))


def results(reading):
    """Every result: (code, analyte, unit) -> qualifier and number."""
    assert reading.ok, [problem.sentence() for problem in reading.problems]
    table = reading.results
    return {
        (code, column.analyte, column.unit): ("", "<", ">")[sign] + f"{value:g}"
        for code, values, signs in zip(table.sample_codes, table.values, table.qualifiers, strict=True)
        for column, value, sign in zip(table.columns, values, signs, strict=True)
        if value == value
    }


def remarks(reading):
    """The warnings but for the one on digestions."""
    return [p.sentence() for p in reading.warnings if "the digestion is not told" not in p.sentence()]


def test_first_line_of_results_whose_kind_is_sample_is_no_heading_row():
    reading = read("Sample,Type,SiO2 (%),Zr (ppm)\nS1,Sample,61,100\nS2,Sample,62,101\n")
    assert reading.results.sample_codes == ["S1", "S2"]
    assert results(reading)["S1", "Zr", "ppm"] == "100"


def test_names_of_the_columns_beside_the_analytes_may_stand_below_all_heading_rows():
    reading = read(
        "Analyte,,SiO2,MgO,Zr\nUnit,,%,%,ppm\nLower limit,,0.01,0.01,1\nUpper limit,,100,100,9000\nSample,Type,,,\n"
        "K-1,Rock,61,2,LOD\nK-2,Blank,0.1,LOD,>9000\n"
    )
    assert results(reading)["K-1", "Zr", "ppm"] == "<1"
    assert reading.results.sample_header == "Sample"
    assert reading.results.control_text == [None, "Blank"]
    assert remarks(reading) == []


@pytest.mark.parametrize(
    "label", ["ULD", "UOD", "U.D.L.", "ULOQ", "UDL", "UOL", "Upper limit", "Upper reporting limit"]
)
def test_upper_limits_are_known_by_every_usual_label(label):
    reading = read(f"Sample,SiO2,Zr\nUnit,%,ppm\nLLD,<0.01,<1\n{label},>100,>9000\nX1,61,bdl\nX2,62,>9000\n")
    assert reading.results.sample_codes == ["X1", "X2"]
    assert [column.upper_limit for column in reading.results.columns] == [100, 9000]


def test_second_row_of_methods_under_the_analytes_is_a_heading_row():
    reading = read(
        "Element,SiO2,Zr\nUnit,%,ppm\nAttack,Lithium borate fusion,Lithium borate fusion\nFinish,ICP-OES,ICP-MS\n"
        "Detection limit,0.01,1\nUpper detection limit,100,9000\nSample,,\nX1,61,<1\n"
    )
    assert results(reading) == {("X1", "SiO2", "wt%"): "61", ("X1", "Zr", "ppm"): "<1"}
    assert [(c.digestion, c.detection_limit, c.upper_limit) for c in reading.results.columns] == [
        ("fusion", 0.01, 100.0),
        ("fusion", 1.0, 9000.0),
    ]


@pytest.mark.parametrize(
    ("heading", "unit"), [("Ag_g_t", "ppm"), ("Ni_mg_kg", "ppm"), ("Zr_ug_g", "ppm"), ("Au_oz_t", "oz/t")]
)
def test_unit_of_a_quotient_may_be_written_without_its_stroke(heading, unit):
    (column,) = read(f"Sample,{heading}\nS1,2\n").results.columns
    assert (column.analyte, column.unit) == (heading.split("_")[0], unit)


def test_notes_below_the_data_that_commas_cut_into_cells_are_no_samples():
    reading = read(
        "Sample,SiO2 (%),Zr (ppm)\nS1,61,100\nS2,60,101\n"
        "Note: SiO2 by fusion, Zr by XRF, all as received\n"
        "* LOI at 1000 C, corrected for moisture\n"
        "1) results, unless stated, on dry basis\n"
        "Approved by: the chief chemist, Bureau of Tests\n"
        "These results relate to the samples received, and shall be reproduced whole, or not at all\n"
    )
    assert reading.results.sample_codes == ["S1", "S2"]
    assert remarks(reading) == []
    assert any("row 5 ('* LOI at 1000 C') is a note" in line for line in reading.understood)


def test_texts_beside_a_plain_code_stay_problems():
    reading = read("Sample,SiO2 (%),Zr (ppm)\nS1,61,100\nS2,pale,green\n")
    assert len([p for p in reading.problems if "a text stands where a number is expected" in p.what]) == 2


def test_legend_below_the_data_is_no_sample():
    reading = read(
        "Sample,SiO2 (%),Zr (ppm)\nS1,61,100\nS2,60,IS\n\nLegend:,,\nIS,insufficient sample,\n"
        "LNR,listed not received,\n<,below detection limit,\nn.a.,not analysed,\n"
    )
    assert reading.results.sample_codes == ["S1", "S2"]
    assert len(remarks(reading)) == 1  # that of S2


def test_rule_of_dashes_is_no_sample():
    reading = read("Sample,SiO2 (%),Zr (ppm)\n------,------,------\nS1,61,100\n======,======,======\n")
    assert reading.results.sample_codes == ["S1"]
    assert remarks(reading) == []


@pytest.mark.parametrize("mark", [-9, -99, -999, -9999, -99999])
def test_mark_for_no_data_is_never_a_limit_though_negative_means_below(mark):
    reading = read(f"Sample,SiO2 (%),Zr (ppm)\nS1,61,{mark}\nS2,{mark},-5\n", negative_means_below=True)
    if mark == -9:
        assert results(reading)["S1", "Zr", "ppm"] == "<9"
        return
    assert results(reading) == {("S1", "SiO2", "wt%"): "61", ("S2", "Zr", "ppm"): "<5"}
    assert len(remarks(reading)) == 2
    assert [(p.row, p.column, p.found) for p in reading.warnings if p.row] == [
        (2, "Zr (ppm)", str(mark)),
        (3, "SiO2 (%)", str(mark)),
    ]


def test_mark_for_no_data_is_named_as_the_likely_cause_of_a_negative_number():
    (problem,) = [p for p in read("Sample,SiO2 (%),Zr (ppm)\nS1,61,-999\nS2,62,5\n").problems if p.row]
    assert problem.severity == "problem"
    assert "mark for no data" in problem.remedy


@pytest.mark.parametrize("codec", ["utf-16-le", "utf-16-be"])
def test_utf16_without_a_mark_is_read_without_a_remark(codec):
    reading = read("Sample,SiO2 (%),Zr (µg/g)\nÄ-1,61,100\n".encode(codec))
    assert reading.results.sample_codes == ["Ä-1"]
    assert remarks(reading) == []


@pytest.mark.parametrize("code", ["05/04/2019", "2/4/19", "01.05.2019", "2019/05/04", "1-May", "Jun-03", "1.2E+10"])
def test_code_that_a_spreadsheet_made_a_date_of_is_questioned_however_it_writes_dates(code):
    said = remarks(read(f"Sample,SiO2 (%),Zr (ppm)\n{code},61,100\nS2,60,101\n"))
    assert len(said) == 1
    assert "looks like a date or number made by a spreadsheet" in said[0]
    assert code in said[0]


def test_weight_column_is_no_unknown_analyte():
    reading = read("Sample,Recvd Wt. (kg),Weight (g),SiO2 (%),Zr (ppm)\nS1,2.31,100,61,120\n")
    assert remarks(reading) == []
    assert any("'Recvd Wt. (kg)'" in line for line in reading.understood)


def test_impossible_value_is_a_problem_and_no_remark_beside_it():
    rows = "".join(f"S{number},6{number},0.1{number}\n" for number in range(8))
    reading = read(f"Sample,SiO2 (%),MnO (%)\n{rows}S9,61,3002\n")
    assert [p.what for p in reading.problems if p.severity == "problem"] == ["MnO is more than the whole rock"]
    assert remarks(reading) == []


def test_declared_blank_is_not_called_far_from_the_rest():
    rows = "".join(f"S{number},Rock,6{number},1{number}0\n" for number in range(8))
    reading = read(f"Sample,Type,SiO2 (%),Zr (ppm)\n{rows}Q1,Blank,0.01,0.01\n")
    assert remarks(reading) == []
    assert len(remarks(read(f"Sample,Type,SiO2 (%),Zr (ppm)\n{rows}Q1,Rock,0.01,0.01\n"))) == 2


@pytest.mark.parametrize(
    "beside",
    [
        "Zr error",
        "Zr err (ppm)",
        "Zr_2SE",
        "Zr 2s",
        "Zr (1 sigma)",
        "Zr +/-",
        "Zr SD",
        "Zr RSD%",
        "Zr std dev",
        "Zr unc.",
        "Zr DL (ppm)",
        "Zr_LOD",
        "Zr det. limit",
        "Zr cps",
        "Zr_1\u03c3",
    ],
)
def test_uncertainty_or_limit_in_a_column_of_its_own_is_no_second_result(beside):
    reading = read(f"Sample,Zr (ppm),{beside},Nb (ppm)\nS1,100,3,5\nS2,110,3,6\n")
    assert results(reading) == {
        ("S1", "Zr", "ppm"): "100", ("S1", "Nb", "ppm"): "5", ("S2", "Zr", "ppm"): "110", ("S2", "Nb", "ppm"): "6",
    }  # fmt: skip
    assert any(f"'{beside}'" in line for line in reading.understood)


@pytest.mark.parametrize("heading", ["Sum LREE", "Total alkalis (%)", "Total sulphides (wt%)", "Sum REE (ppm)"])
def test_sum_of_something_is_not_the_total_of_the_analysis(heading):
    reading = read(f"Sample,SiO2 (%),{heading}\nS1,60,5\nS2,61,6\n")
    assert [column.analyte for column in reading.results.columns] == ["SiO2"]


def test_other_headings_within_the_data_are_refused_and_never_read_under_the_first_ones():
    reading = read("Sample,SiO2 (%),MgO (%)\nA1,60,3\nA2,61,4\n\nSample,Zr (ppm),Nb (ppm)\nA1,99,5\nA2,98,6\n")
    (problem,) = [p for p in reading.problems if p.severity == "problem"]
    assert (problem.row, problem.column, problem.found) == (5, "SiO2 (%)", "Zr (ppm)")
    assert "another table with other headings" in problem.what
    assert reading.whole_file_refused


def test_same_headings_within_the_data_are_passed_over_though_a_unit_row_follows():
    table = "Sample,SiO2,Fe2O3,Zr\nUnit,%,%,ppm\nA{},60,3,99\n"
    reading = read(table.format(1) + table.format(2))
    assert reading.results.sample_codes == ["A1", "A2"]


def test_most_that_can_be_detected_is_no_detection_limit():
    reading = read(
        "Sample,SiO2,Zr\nUnit,%,ppm\nMin. detection,0.01,1\nMax. detection,100,9000\nA1,<LOD,100\nA2,60,over range\n"
    )
    assert results(reading)["A1", "SiO2", "wt%"] == "<0.01"
    assert results(reading)["A2", "Zr", "ppm"] == ">9000"
    assert reading.results.sample_header == "Sample"


def test_certificate_of_two_analytes_with_headings_in_rows_is_no_sample_list():
    reading = read(
        "Analyte,,Au,Ag\nUnit,,ppb,ppm\nMethod,,Fire assay,Four acid\nSample,Type,,\nA1,Rock,5,1\nA2,Rock,<1,2\n"
    )
    assert results(reading)["A2", "Au", "ppb"] == "<1"


@pytest.mark.parametrize("value_first", [False, True])
def test_turned_table_with_the_sign_in_a_column_of_its_own_joins_them(value_first):
    order = (lambda sign, value: f"{value};{sign}") if value_first else (lambda sign, value: f"{sign};{value}")
    heads = ";".join(order("", code) if value_first else f"{code};" for code in ("S1", "S2"))
    lines = {"SiO2;%": (("", "61,5"), ("<", "0,1")), "TiO2;%": (("", "0,6"), ("<", "0,01")),
             "Zr;ppm": ((">", "1000"), ("", "120")), "Nb;ppm": (("<", "5"), ("=", "12"))}  # fmt: skip
    body = "".join(f"{name};" + ";".join(order(*cell) for cell in cells) + "\n" for name, cells in lines.items())
    reading = read(f"Parameter;Units;{heads}\n{body}")
    assert [results(reading)[code, "Zr", "ppm"] for code in ("S1", "S2")] == [">1000", "120"]
    assert [results(reading)[code, "Nb", "ppm"] for code in ("S1", "S2")] == ["<5", "12"]
    assert results(reading)["S2", "SiO2", "wt%"] == "<0.1"
    assert reading.results.sample_codes == ["S1", "S2"]


def test_long_table_with_a_column_headed_reporting_limit_uses_it():
    reading = read("Sample,Analyte,Result,Unit,RL\nS1,SiO2,61,%,0.01\nS2,SiO2,ND,%,0.01\n")
    assert results(reading)["S2", "SiO2", "wt%"] == "<0.01"


@pytest.mark.parametrize("sign", ["-", " - ", "\u2013", " to "])
def test_row_of_ranges_gives_both_limits(sign):
    reading = read(f"Sample,SiO2,Zr\nUnit,%,ppm\nRange,0.01{sign}100,1{sign}9000\nX1,61,bdl\nX2,62,over range\n")
    assert [results(reading)[code, "Zr", "ppm"] for code in ("X1", "X2")] == ["<1", ">9000"]


@pytest.mark.parametrize(
    ("typed", "meant"), [("K20", "K2O"), ("Al203", "Al2O3"), ("Si02", "SiO2"), ("P205", "P2O5"), ("Mn0", "MnO")]
)
def test_nought_typed_for_the_letter_is_told(typed, meant):
    (said,) = remarks(read(f"Sample,TiO2 (%),{typed} (%)\nS1,0.5,3\n"))
    assert f"did you mean {meant}, with the letter O?" in said


@pytest.mark.parametrize(
    "title", ["Elements requested:,Au,Ag,Cu,Pb,Zn", "Analysis of SiO2, Al2O3, Zr, Nb and Y", "Scope:,Zr,Au"]
)
def test_list_of_analytes_above_the_headings_is_a_title(title):
    reading = read(f"{title}\nSample,Au (ppb),Cu (ppm)\nS1,5,100\nS2,6,110\n")
    assert [column.header for column in reading.results.columns] == ["Au (ppb)", "Cu (ppm)"]
    assert reading.results.sample_header == "Sample"
    assert results(reading)["S2", "Cu", "ppm"] == "110"
    assert remarks(reading) == []


@pytest.mark.parametrize("code", ["% RSD", "RSD (%)", "StDev", "Ave", "N =", "CV%", "Std. Dev."])
def test_statistics_below_the_data_are_no_samples(code):
    reading = read(f"Sample,SiO2 (%),Zr (ppm)\nS1,60,100\nS2,61,110\n{code},1.1,2.2\n")
    assert reading.results.sample_codes == ["S1", "S2"]


@pytest.mark.parametrize(
    "heading", ["SiO2 norm (%)", "SiO2 anhydrous (wt%)", "SiO2 recalc. (%)", "SiO2 (%) volatile-free"]
)
def test_recalculated_column_beside_the_measured_one_is_not_read(heading):
    reading = read(f"Sample,SiO2 (%),{heading},Zr (ppm)\nS1,60,61.5,100\n")
    assert results(reading) == {("S1", "SiO2", "wt%"): "60", ("S1", "Zr", "ppm"): "100"}
    assert len(remarks(reading)) == 1
    assert "recalculated" in remarks(reading)[0]
    assert read(f"Sample,{heading},Zr (ppm)\nS1,61.5,100\n").results.columns[0].header == heading
