"""Controls from a file of results to the sheets, on both engines. Files and numbers are invented, to test branches."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from registry.batching import set_state
from registry.control_history import precisions, trends
from registry.controlling import ship_reference_values
from registry.errors import InputProblems, PlutonbookError
from registry.importing import ImportOptions, ImportReport, import_files
from registry.refresh import refresh_registry
from registry.store.engine import Registry, reading, writing
from registry.store.reading.controls import batch_controls, batch_state, batch_states

SAMPLES = """sample_code,sample_kind,duplicate_of,reference_material
R1,core,,
R2,core,,
C1,reference_material,,XM-1
C2,reference_material,,xm 1
B1,blank,,
D1,duplicate,R1,
"""
CERTIFICATES = """reference_material,analyte,value,unit,uncertainty,status,source
XM-1,SiO2,60,wt%,0.5,certified,invented
XM-1,Zr,100,ppm,5,certified,invented
XM-1,Mn,775,ppm,20,certified,invented
"""
MAJORS = "SiO2 (%) XRF,Al2O3 (%) XRF,Fe2O3T (%) XRF,MnO (%) XRF,MgO (%) XRF,CaO (%) XRF,Na2O (%) XRF,K2O (%) XRF"
ROCK = "65,16,5,0.1,2,4.5,4,2"
RESULTS = f"""Sample,{MAJORS},Zr fusion (ppm),Cu four-acid (ppm)
R1,{ROCK},120,900
B1,98,0.5,0.2,0.01,0.1,0.1,0.1,0.1,<2,<1
C1,60.2,16,5,0.1,2,4.5,4,2,{{zr}},50
R2,{ROCK},150,40
D1,{ROCK},{{pair}},880
C2,59.8,16,5,0.101,2,4.5,4,2,98,51
"""


def bring(registry: Registry, folder: Path, zr: str = "102", pair: str = "118", **options: Any) -> ImportReport:
    (folder / "samples.csv").write_text(SAMPLES)
    (folder / "certificates.csv").write_text(CERTIFICATES)
    (folder / "K1.csv").write_text(RESULTS.format(zr=zr, pair=pair))
    names = ["K1.csv", "samples.csv", "certificates.csv"]
    return import_files(registry, [folder / name for name in names], ImportOptions(**options))


def sheet(registry: Registry, query: str) -> list[tuple[Any, ...]]:
    with reading(registry) as connection:
        return [tuple(row) for row in connection.exec_driver_sql(query)]


def convention(registry: Registry, word: str) -> None:
    with writing(registry) as connection:
        connection.exec_driver_sql(
            f"INSERT INTO setting (name, value) VALUES ('convention.failed_control', '\"{word}\"')"
        )


def states(registry: Registry) -> dict[str, str]:
    with reading(registry) as connection:
        return {each["analyte"]: each["state"] for each in batch_controls(connection, 1)["analytes"]}


ZR = "SELECT sample_code, kind, expected, found, z, state FROM control_sheet WHERE analyte = 'Zr' ORDER BY line_no"


def test_control_sheet_holds_every_control_of_a_good_batch(any_registry: Registry, tmp_path: Path) -> None:
    """z = (102 - 100)/5; the pair 120, 118 with s_0 = 2 (1 - 0.3)/2 = 0.7, k = 0.15: -2/(sqrt 2 18.55)."""
    report = bring(any_registry, tmp_path)
    rows = sheet(any_registry, ZR)
    assert [(row[0], row[1], row[5]) for row in rows] == [
        ("B1", "blank", "passed"),
        ("C1", "reference_material", "passed"),
        ("D1", "duplicate", "passed"),
        ("C2", "reference_material", "passed"),
    ]
    assert [row[2] for row in rows] == [0.0, 100.0, 120.0, 100.0]
    assert [round(row[4], 4) for row in rows if row[4] is not None] == [0.4, -0.0762, -0.4]
    with reading(any_registry) as connection:
        assert batch_state(connection, 1) == "passes"
        assert batch_states(connection) == {1: {"state": "passes", "failing": 0}}
    (results,) = [file.results for file in report.files if file.results is not None]
    assert results.controls[0] == "controls: 2 reference materials, 1 duplicate, 1 blank"


def test_certified_element_is_compared_with_the_reported_oxide(any_registry: Registry, tmp_path: Path) -> None:
    """775 ppm Mn is 0.1001 wt% MnO."""
    bring(any_registry, tmp_path)
    ((expected,), _) = sheet(any_registry, "SELECT expected FROM control_sheet WHERE analyte = 'MnO' AND z IS NOT NULL "
                                           "AND kind = 'reference_material'")  # fmt: skip
    assert round(expected, 4) == 0.1001


MARKED = "SELECT sample_code, value, text FROM warning_sheet WHERE code = 'failed_control' ORDER BY sample_code"
ZR_OF_ROCKS = "SELECT zr_ppm FROM composition_sheet WHERE sample_code IN ('R1', 'R2') ORDER BY sample_code"


def test_failed_analyte_marks_the_rocks_of_its_batch(any_registry: Registry, tmp_path: Path) -> None:
    bring(any_registry, tmp_path, zr="130")
    assert states(any_registry)["Zr"] == "fails"
    rows = sheet(any_registry, MARKED)
    assert [row[:2] for row in rows] == [("R1", 120.0), ("R2", 150.0)]
    assert rows[0][2].startswith(
        "Zr failed its control in batch K1: reference material XM-1 failed on line 4: found 130 for 100 ppm, z +6.00 "
        "(1-3s: "
    )
    assert sheet(any_registry, ZR_OF_ROCKS) == [(120.0,), (150.0,)]


def test_failed_analyte_is_held_out_of_the_composition_by_convention(any_registry: Registry, tmp_path: Path) -> None:
    """The same rows whether the convention stood before the import or came after it."""
    convention(any_registry, "hold")
    bring(any_registry, tmp_path, zr="130")
    assert sheet(any_registry, ZR_OF_ROCKS) == [(None,), (None,)]
    assert "and is held out of the composition" in sheet(any_registry, MARKED)[0][2]
    before = sheet(any_registry, "SELECT * FROM composition_sheet ORDER BY sample_id")
    assert refresh_registry(any_registry, everything=True) > 0
    assert sheet(any_registry, "SELECT * FROM composition_sheet ORDER BY sample_id") == before
    with writing(any_registry) as connection:
        connection.exec_driver_sql("UPDATE setting SET value = '\"mark\"' WHERE name = 'convention.failed_control'")
    refresh_registry(any_registry)
    assert sheet(any_registry, ZR_OF_ROCKS) == [(120.0,), (150.0,)]


def test_failed_analyte_is_not_spoken_of_where_the_convention_ignores_it(
    any_registry: Registry, tmp_path: Path
) -> None:
    bring(any_registry, tmp_path, zr="130")
    convention(any_registry, "ignore")
    refresh_registry(any_registry)
    assert sheet(any_registry, MARKED) == []
    assert states(any_registry)["Zr"] == "fails"


def test_corrected_certificate_value_changes_states_and_what_is_held(any_registry: Registry, tmp_path: Path) -> None:
    convention(any_registry, "hold")
    bring(any_registry, tmp_path, zr="130")
    (tmp_path / "corrected.csv").write_text(CERTIFICATES.replace("Zr,100,ppm,5,", "Zr,115,ppm,8,"))
    report = import_files(any_registry, [tmp_path / "corrected.csv"], ImportOptions(kind="reference-materials"))
    assert report.files[0].changes == ["XM-1 Zr: value 100 -> 115", "XM-1 Zr: uncertainty 5 -> 8"]
    assert states(any_registry)["Zr"] == "passes with remarks"
    assert sheet(any_registry, ZR_OF_ROCKS) == [(120.0,), (150.0,)]


@pytest.mark.parametrize(
    ("edit", "left"),
    [
        ("UPDATE sample SET kind = 'core' WHERE code IN ('C1', 'C2')", ["B1", "D1"]),
        ("DELETE FROM sample WHERE code = 'C1'", ["B1", "D1", "C2"]),
        ("UPDATE sample SET duplicate_of = NULL, kind = 'core' WHERE code = 'D1'", ["B1", "C1", "C2"]),
        ("DELETE FROM batch WHERE code = 'K1'", []),
    ],
)
def test_edit_of_a_control_by_sql_is_judged_anew_at_the_refresh(
    any_registry: Registry, tmp_path: Path, edit: str, left: list[str]
) -> None:
    bring(any_registry, tmp_path, zr="130")
    with writing(any_registry) as connection:
        connection.exec_driver_sql(edit)
    refresh_registry(any_registry)
    assert [row[0] for row in sheet(any_registry, ZR)] == left
    assert states(any_registry).get("Zr") == (None if not left else "fails" if "C1" in left else "passes")
    assert sheet(any_registry, "SELECT count(*) FROM stale_batch") == [(0,)]


def test_withdrawn_batch_marks_nothing_and_leaves_the_history(any_registry: Registry, tmp_path: Path) -> None:
    bring(any_registry, tmp_path, zr="130")
    set_state(any_registry, "K1", "withdrawn")
    assert sheet(any_registry, MARKED) == []
    with reading(any_registry) as connection:
        assert trends(connection, ["XM-1"]) == []
    set_state(any_registry, "K1", "active")
    assert len(sheet(any_registry, MARKED)) == 2
    with reading(any_registry) as connection:
        (zr,) = [trend for trend in trends(connection, ["XM-1"]) if trend["analyte"] == "Zr"]
        assert (zr["results"], round(zr["bias_percent"], 6)) == (2, 14.0)
        assert zr["drift_percent_per_year"] is None  # all on one day
        (pair,) = [each for each in precisions(connection) if each["analyte"] == "Zr"]
        assert (pair["pairs"], pair["k"]) == (1, None)
        assert round(pair["mean_half_difference_percent"], 4) == round(100 * 2 / 238, 4)


def test_bad_pair_is_a_remark_with_its_numbers(any_registry: Registry, tmp_path: Path) -> None:
    """s = 0.7 + 0.15 x 210 = 32.2; z = 180/(sqrt 2 32.2) = 3.95; half difference 180/420."""
    bring(any_registry, tmp_path, pair="300")
    assert states(any_registry)["Zr"] == "passes with remarks"
    with reading(any_registry) as connection:
        remarks = batch_controls(connection, 1)["remarks"]
    assert remarks == [
        "Zr passes with remarks: duplicate warned on line 6: found 300 for 120 ppm, z +3.95 (half relative difference "
        "42.9 %: beyond the line that 99 % of pairs keep at a precision of 30 %)"
    ]


SPOKEN = """Sample,QA/QC,Zr fusion (ppm),Cu four-acid (ppm)
A1,,120,9000
A2,BLANK,<2,60
A3,Duplicate of A1,121,8900
A4-STD,,55,12
A1,,119,9100
"""


def test_create_samples_makes_controls_of_what_the_certificate_calls_so(any_registry: Registry, tmp_path: Path) -> None:
    with writing(any_registry) as connection:
        connection.exec_driver_sql(
            "INSERT INTO setting (name, value) VALUES ('control_pattern.reference_material', '-STD$')"
        )
    (tmp_path / "spoken.csv").write_text(SPOKEN.replace("<2,60", "<2,60\nA5,,<2,<1"))
    report = import_files(any_registry, [tmp_path / "spoken.csv"], ImportOptions(create_samples=True))
    assert sheet(any_registry, "SELECT code, kind FROM sample ORDER BY code") == [
        ("A1", "unknown"),
        ("A2", "blank"),
        ("A3", "duplicate"),
        ("A4-STD", "reference_material"),
        ("A5", "unknown"),
    ]
    assert sheet(
        any_registry,
        "SELECT sample_code, kind, expected, state FROM control_sheet WHERE analyte = 'Cu' ORDER BY line_no",
    ) == [
        ("A2", "blank", 0.0, "failed"),
        ("A3", "duplicate", 9000.0, "passed"),
        ("A4-STD", "reference_material", None, "not judged"),
        ("A1", "lab_repeat", 9000.0, "passed"),
    ]
    ((rule,),) = sheet(any_registry, "SELECT rule FROM control_sheet WHERE sample_code = 'A2' AND analyte = 'Cu'")
    assert "60 times the detection limit" in rule and "0.67 % of the line before it: carry-over" in rule
    (results,) = [file.results for file in report.files if file.results is not None]
    assert (results.new_samples, results.new_controls) == (5, 3)


def test_code_pattern_set_later_turns_unknown_samples_into_controls(any_registry: Registry, tmp_path: Path) -> None:
    (tmp_path / "plain.csv").write_text("Sample,Zr fusion (ppm),Cu fusion (ppm)\nA1,100,20\nBL1,<2,<1\n")
    import_files(any_registry, [tmp_path / "plain.csv"], ImportOptions(create_samples=True))
    with writing(any_registry) as connection:
        connection.exec_driver_sql("INSERT INTO setting (name, value) VALUES ('control_pattern.blank', '^BL')")
    refresh_registry(any_registry)
    assert sheet(any_registry, "SELECT code, kind FROM sample ORDER BY code") == [("A1", "unknown"), ("BL1", "blank")]
    assert sheet(any_registry, "SELECT DISTINCT sample_code, state FROM control_sheet") == [("BL1", "passed")]
    with writing(any_registry) as connection:
        connection.exec_driver_sql("UPDATE setting SET value = '(' WHERE name = 'control_pattern.blank'")
    with pytest.raises(PlutonbookError, match=r"setting 'control_pattern.blank': '\(' is no regular expression"):
        refresh_registry(any_registry)


def test_columns_of_one_metal_that_disagree_are_told(sqlite_registry: Registry, tmp_path: Path) -> None:
    (tmp_path / "two.csv").write_text("Sample,MnO (%) XRF,Mn (ppm) XRF\nA1,0.100,775\nA2,0.100,950\n")
    report = import_files(sqlite_registry, [tmp_path / "two.csv"], ImportOptions(create_samples=True))
    (results,) = [file.results for file in report.files if file.results is not None]
    assert results.remarks == [
        "MnO and Mn differ by more than 10 % in 1 of 2 lines (line 3: 0.1 wt% against 0.1227 from Mn, 20.4 %): check "
        "the units and the columns"
    ]


def test_certificates_with_faults_are_refused_all_at_once(any_registry: Registry, tmp_path: Path) -> None:
    heading = "reference_material,analyte,value,unit,uncertainty_type\n"
    (tmp_path / "unread.csv").write_text(heading + "XM,Zirconiun,100,ppm,\nXM,Hf,3,mol,\n")
    with pytest.raises(InputProblems, match="the analyte is not known; found 'Zirconiun'") as unread:
        import_files(any_registry, [tmp_path / "unread.csv"], ImportOptions(kind="reference-materials"))
    assert len(unread.value.problems) == 2
    (tmp_path / "bad.csv").write_text(heading + "XM,Zr,0,ppm,\nXM,Hf,3,ppm,guess\n")
    with pytest.raises(InputProblems, match="a certified value must be above zero; found '0'") as caught:
        import_files(any_registry, [tmp_path / "bad.csv"], ImportOptions(kind="reference-materials"))
    told = [problem.what for problem in caught.value.problems]
    assert told == ["a certified value must be above zero", "this kind of uncertainty is not known"]
    assert sheet(any_registry, "SELECT count(*) FROM reference_value") == [(0,)]


def test_shipped_values_come_in_once_and_give_way_to_the_own_certificate(
    any_registry: Registry, tmp_path: Path
) -> None:
    with writing(any_registry) as connection:
        assert ship_reference_values(connection) > 700
        assert ship_reference_values(connection) == 0
    (tmp_path / "own.csv").write_text(
        "reference_material,analyte,value,unit,uncertainty,status,source\n"
        "BHVO-2,Zr,170,ppm,4,certified,our own bottle\n"
    )
    (tmp_path / "samples.csv").write_text("sample_code,sample_kind,reference_material\nC1,reference_material,BHVO-2\n")
    (tmp_path / "K2.csv").write_text("Sample,Zr fusion (ppm),Y fusion (ppm)\nC1,174,26\n")
    import_files(any_registry, [tmp_path / name for name in ("own.csv", "samples.csv", "K2.csv")])
    rows = sheet(any_registry, "SELECT analyte, expected, z, source FROM control_sheet ORDER BY analyte DESC")
    assert rows[0][:3] == ("Zr", 170.0, 1.0) and rows[0][3].startswith("certified: our own bottle")
    assert rows[1][3].startswith("published: Jochum et al. 2016")


def test_partial_digestion_of_a_reference_material_is_not_judged(sqlite_registry: Registry, tmp_path: Path) -> None:
    (tmp_path / "certificates.csv").write_text(CERTIFICATES)
    (tmp_path / "samples.csv").write_text("sample_code,sample_kind,reference_material\nC1,reference_material,XM-1\n")
    (tmp_path / "K3.csv").write_text("Sample,Zr four-acid (ppm),Cu four-acid (ppm)\nC1,40,26\n")
    import_files(sqlite_registry, [tmp_path / name for name in ("certificates.csv", "samples.csv", "K3.csv")])
    ((state, rule),) = sheet(sqlite_registry, "SELECT state, rule FROM control_sheet WHERE analyte = 'Zr'")
    assert (state, rule[:36]) == ("not judged", "the digestion leaves part of it behi")
