"""Controls of whole imports: patterns, parts of one certificate, own certificates. The data are invented."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from registry.batching import set_state
from registry.control_history import trends
from registry.importing import ImportOptions, ImportReport, import_files
from registry.refresh import refresh_registry
from registry.store.engine import Registry, reading, writing
from registry.store.reading.controls import analyte_states, batch_state

CERTIFICATES = """reference_material,analyte,value,unit,uncertainty,uncertainty_type,status,source
XM-1,Zr,100,ppm,5,SD,certified,invented
"""


def bring(registry: Registry, folder: Path, files: dict[str, str], **options: Any) -> ImportReport:
    for name, text in files.items():
        (folder / name).write_text(text)
    return import_files(registry, [folder / name for name in files], ImportOptions(**options))


def sheet(registry: Registry, query: str) -> list[tuple[Any, ...]]:
    with reading(registry) as connection:
        return [tuple(row) for row in connection.exec_driver_sql(query)]


def told(report: ImportReport) -> list[str]:
    (results,) = [file.results for file in report.files if file.results is not None]
    return results.controls


def patterns(registry: Registry, **said: str) -> None:
    with writing(registry) as connection:
        for name, value in said.items():
            connection.exec_driver_sql(
                f"INSERT INTO setting (name, value) VALUES ('control_pattern.{name}', '\"{value}\"')"
            )
    refresh_registry(registry)


SHEET = "SELECT sample_code, kind, expected, found, state FROM control_sheet WHERE analyte = 'Zr' ORDER BY line_no"


def test_code_patterns_call_samples_of_the_same_import(any_registry: Registry, tmp_path: Path) -> None:
    """The sample list leaves the kind open; the results come in with it. A blank gets no verdict."""
    patterns(any_registry, blank="^BL", pulp_duplicate="-PD$", reference_material="^STD")
    files = {
        "certificates.csv": CERTIFICATES,
        "samples.csv": "sample_code,sample_kind\nR1,core\nBL1,\nR1-PD,\nSTD-XM-1,unknown\n",
        "K1.csv": "Sample,Zr fusion (ppm)\nR1,120\nBL1,<2\nR1-PD,118\nSTD-XM-1,101\n",
    }
    report = bring(any_registry, tmp_path, files)
    assert sheet(any_registry, "SELECT code, kind FROM sample ORDER BY sample_id") == [
        ("R1", "core"), ("BL1", "blank"), ("R1-PD", "duplicate"), ("STD-XM-1", "reference_material"),
    ]  # fmt: skip
    assert sheet(any_registry, SHEET) == [
        ("BL1", "blank", 0.0, 2.0, "passed"),
        ("R1-PD", "duplicate", 120.0, 118.0, "passed"),
        ("STD-XM-1", "reference_material", 100.0, 101.0, "passed"),
    ]
    assert told(report)[0] == "controls: 1 reference material, 1 duplicate, 1 blank"
    assert sheet(any_registry, "SELECT DISTINCT sample_code FROM verdict_sheet WHERE sample_code <> 'R1'") == []
    before = sheet(any_registry, "SELECT * FROM control_sheet")
    refresh_registry(any_registry, everything=True)
    assert sheet(any_registry, "SELECT * FROM control_sheet") == before


PAIRS = "sample_code,sample_kind,duplicate_of\nR1,core,\nR2,core,\nD1,duplicate,R1\n"


@pytest.mark.parametrize("duplicate_first", [True, False])
def test_duplicate_finds_its_original_in_another_part_of_the_certificate(
    any_registry: Registry, tmp_path: Path, duplicate_first: bool
) -> None:
    """As where --keep-going set one of them aside: z = (90 - 120)/(sqrt(2) 0.15 x 105), no detection limit known."""
    files = {"samples.csv": PAIRS, "K1.csv": "Sample,Zr fusion (ppm),Cu (ppm)\nR1,120,5\nR2,50,6\n"}
    rest = {"rest.csv": "Sample,Cu (ppm),Zr fusion (ppm)\nD1,7,90\n"}
    if duplicate_first:
        files["K1.csv"], rest["rest.csv"] = (
            files["K1.csv"].replace("R1,120,5", "D1,90,7"),
            "Sample,Zr fusion (ppm)\nR1,120\n",
        )
    bring(any_registry, tmp_path, files)
    bring(any_registry, tmp_path, rest, add_to="K1")
    assert sheet(any_registry, SHEET) == [("D1", "duplicate", 120.0, 90.0, "passed")]
    ((z,),) = sheet(any_registry, "SELECT z FROM control_sheet WHERE z IS NOT NULL AND analyte = 'Zr'")
    np.testing.assert_allclose(-30.0 / (np.sqrt(2.0) * 0.15 * 105.0), z)
    set_state(any_registry, "K1/2", "withdrawn")
    ((rule,),) = sheet(any_registry, "SELECT rule FROM control_sheet WHERE sample_code = 'D1' AND analyte = 'Zr'")
    assert duplicate_first is (rule == "its original has no result in this certificate")
    set_state(any_registry, "K1/2", "active")
    assert sheet(any_registry, SHEET) == [("D1", "duplicate", 120.0, 90.0, "passed")]


def test_own_certificate_counts_whatever_way_the_material_is_spelled(any_registry: Registry, tmp_path: Path) -> None:
    files = {
        "first.csv": CERTIFICATES,
        "own.csv": CERTIFICATES.replace("XM-1,Zr,100,ppm,5", "xm 1,Zr,105,ppm,4").replace("invented", "our bottle"),
        "samples.csv": "sample_code,sample_kind,reference_material\nC1,reference_material,XM 1\n",
        "K1.csv": "Sample,Zr fusion (ppm)\nC1,109\n",
    }
    report = bring(any_registry, tmp_path, files)
    assert sheet(any_registry, "SELECT sample_code, expected, z FROM control_sheet") == [("C1", 105.0, 1.0)]
    (own,) = [file for file in report.files if file.file == "own.csv"]
    assert own.remarks[0].startswith(
        "own.csv: 'xm 1' is taken for the registered material 'XM-1'; if it is another one"
    )


def test_certificate_that_looks_like_a_slip_is_stored_with_a_remark(any_registry: Registry, tmp_path: Path) -> None:
    """5 % at 100 ppm is Horwitz' 8 % about; 50 ppm is six times it, and 0 says nothing."""
    bring(any_registry, tmp_path, {"first.csv": CERTIFICATES})
    rows = "XM-1,Zr,10,ppm,0.5,SD,certified,b\nXM-1,Sr,100,ppm,50,SD,certified,b\nXM-1,Rb,100,ppm,0,SD,certified,b\n"
    report = bring(any_registry, tmp_path, {"own.csv": CERTIFICATES.splitlines()[0] + "\n" + rows})
    assert [(said.row, said.column, said.found) for said in report.files[0].on_storing] == [
        (2, "value", "10"), (3, "uncertainty", "50"), (4, "uncertainty", "0"),
    ]  # fmt: skip
    assert "far from another value of the material" in report.files[0].remarks[0]
    assert "is the decimal point right?" in report.files[0].remarks[1]
    assert report.files[0].added == 3


def test_batch_without_controls_says_that_nothing_vouches_for_it(any_registry: Registry, tmp_path: Path) -> None:
    report = bring(any_registry, tmp_path, {"K1.csv": "Sample,Zr (ppm)\nA1,120\n"}, create_samples=True)
    assert told(report)[0].startswith("controls: none. No reference material, blank, duplicate or repeat is on this")
    with reading(any_registry) as connection:
        assert batch_state(connection, 1) == "no controls"


def test_failed_analytes_are_told_before_those_with_remarks(any_registry: Registry, tmp_path: Path) -> None:
    """Fourteen elements at six detection limits in the blank (warned), the fifteenth at twenty (failed)."""
    elements = ["Li", "Be", "Sc", "V", "Cr", "Co", "Ni", "Cu", "Zn", "Ga", "Ge", "As", "Rb", "Sr", "Y"]
    heading = ",".join(f"{element} fusion (ppm)" for element in elements)
    rows = [["A1", *["<1"] * 15], ["B1", *["6"] * 14, "20"]]
    text = f"Sample,{heading}\n" + "\n".join(map(",".join, rows)) + "\n"
    files = {"samples.csv": "sample_code,sample_kind\nA1,core\nB1,blank\n", "K1.csv": text}
    lines = told(bring(any_registry, tmp_path, files))
    assert lines[1] == "batch fails for 1 of 15 analytes; passes with remarks for 14 of 15 analytes"
    assert lines[2].startswith("Y fails: blank failed on line 3: found 20 for 0 ppm (20 times the detection limit")
    assert lines[-1] == "... and 5 more analytes: the page of the batch and control_sheet hold them all"


def test_censored_control_fails_its_batch_and_stays_out_of_the_history(any_registry: Registry, tmp_path: Path) -> None:
    listed = "sample_code,sample_kind,reference_material\nR1,core,\nR2,core,\n"
    listed += "".join(f"C{number},reference_material,XM-1\n" for number in range(4))
    text = "Sample,Zr fusion (ppm)\nR1,<1\nR2,<1\nC0,102\nC1,<50\nC2,>60\nC3,98\n"
    bring(any_registry, tmp_path, {"certificates.csv": CERTIFICATES, "samples.csv": listed, "K1.csv": text})
    assert [row[4] for row in sheet(any_registry, SHEET)] == ["passed", "failed", "not judged", "passed"]
    signs = sheet(any_registry, "SELECT qualifier FROM control_sheet ORDER BY line_no")
    assert signs == [(None,), ("<",), (">",), (None,)]
    with reading(any_registry) as connection:
        (zr,) = trends(connection, ["XM-1"])
    assert (zr["results"], zr["bias_percent"]) == (2, 0.0)


def test_drift_over_time_goes_by_the_dates_that_the_certificates_state(any_registry: Registry, tmp_path: Path) -> None:
    """Zr 100, 102, 104 at the turn of three years: 2 % a year; a superseded and a withdrawn one do not count."""
    listed = "sample_code,sample_kind,reference_material\n" + "".join(
        f"C{n},reference_material,XM-1\n" for n in range(5)
    )
    bring(any_registry, tmp_path, {"certificates.csv": CERTIFICATES, "samples.csv": listed})
    text = "Certificate: Q-{n}\nDate reported: {day}\nSample,Zr fusion (ppm)\nC{n},{zr}\n"
    days = ("2024-01-01", "2025-01-01", "2026-01-01", "2027-01-01", "2027-01-01")
    for number, day in enumerate(days):
        bring(any_registry, tmp_path, {f"{number}.csv": text.format(n=number, day=day, zr=100 + 2 * number)})
    assert sheet(any_registry, "SELECT reported_on FROM batch ORDER BY batch_id") == [(day,) for day in days]
    set_state(any_registry, "Q-3", "withdrawn")
    corrected = text.format(n=4, day="2026-07-02", zr=104).replace("C4", "C3")
    bring(any_registry, tmp_path, {"again.csv": corrected}, supersede=True)
    set_state(any_registry, "Q-4 corrected 2", "withdrawn")
    with reading(any_registry) as connection:
        (zr,) = trends(connection, ["XM-1"])
    assert (zr["results"], zr["first_on"], zr["last_on"]) == (3, "2024-01-01", "2026-01-01")
    np.testing.assert_allclose([2.0, 2.0], [zr["bias_percent"], zr["drift_percent_per_year"]], rtol=2e-3)
    set_state(any_registry, "Q-4", "active")
    with reading(any_registry) as connection:
        assert trends(connection, ["XM-1"])[0]["results"] == 4


def test_mark_of_a_failed_control_goes_with_the_reassay_that_replaces_its_value(
    any_registry: Registry, tmp_path: Path
) -> None:
    """R1 is analysed again and passes; R2 is not, and stays marked. Withdrawing the second brings the mark back."""
    listed = "sample_code,sample_kind,reference_material\nR1,core,\nR2,core,\nC1,reference_material,XM-1\n"
    first = {"K1.csv": "Sample,Zr fusion (ppm)\nR1,300\nR2,250\nC1,150\n"}
    bring(any_registry, tmp_path, {"certificates.csv": CERTIFICATES, "samples.csv": listed, **first})
    marked = "SELECT sample_code, value FROM warning_sheet WHERE code = 'failed_control' ORDER BY 1"
    assert sheet(any_registry, marked) == [("R1", 300.0), ("R2", 250.0)]
    bring(any_registry, tmp_path, {"K2.csv": "Sample,Zr fusion (ppm),Y (ppm)\nR1,200,9\nR2,,9\nC1,101,9\n"})
    assert sheet(any_registry, marked) == [("R2", 250.0)]
    set_state(any_registry, "K2", "withdrawn")
    assert sheet(any_registry, marked) == [("R1", 300.0), ("R2", 250.0)]


def test_columns_without_a_judged_control_are_counted_beside_the_state(any_registry: Registry, tmp_path: Path) -> None:
    """A batch that passes for one analyte of three says so."""
    listed = "sample_code,sample_kind,reference_material\nR1,core,\nC1,reference_material,XM-1\n"
    text = "Sample,Zr fusion (ppm),Y (ppm),Cu fusion (ppm)\nR1,120,9,8\nC1,101,9,7\n"
    report = bring(any_registry, tmp_path, {"certificates.csv": CERTIFICATES, "samples.csv": listed, "K1.csv": text})
    assert told(report)[1] == "batch passes for its one analyte judged; 2 columns have no control that could be judged"


LISTED = "sample_code,sample_kind,reference_material\nR1,core,\nR2,core,\nC1,reference_material,XM-1\n"
ROCKS, CHECKS = "Sample,Zr fusion (ppm),Cu (ppm)\nR1,120,9\nR2,130,8\n", "Sample,Zr fusion (ppm)\nC1,150\n"
ZR = "SELECT sample_code, zr_ppm FROM composition_sheet WHERE sample_code IN ('R1', 'R2') ORDER BY 1"


@pytest.mark.parametrize("rocks_first", [True, False])
@pytest.mark.parametrize("convention", ["mark", "hold"])
def test_controls_in_a_file_of_their_own_judge_the_rocks_of_the_certificate(
    any_registry: Registry, tmp_path: Path, rocks_first: bool, convention: str
) -> None:
    """The rocks' batch fails by the other part, and no longer once that is withdrawn; first verdicts are no changes."""
    with writing(any_registry) as connection:
        connection.exec_driver_sql(
            f"INSERT INTO setting (name, value) VALUES ('convention.failed_control', '\"{convention}\"')"
        )
    first, second = (ROCKS, CHECKS) if rocks_first else (CHECKS, ROCKS)
    bring(any_registry, tmp_path, {"certificates.csv": CERTIFICATES, "samples.csv": LISTED, "K1.csv": first})
    report = bring(any_registry, tmp_path, {"more.csv": second}, add_to="K1")
    batch_id, checks = (1, "K1/2") if rocks_first else (2, "K1")
    with reading(any_registry) as connection:
        assert batch_state(connection, batch_id) == "fails"
        (zr,) = analyte_states(connection, batch_id)
    assert zr["remarks"].startswith(f"in {checks}: reference material XM-1 failed on line 2: found 150 for 100 ppm")
    if not rocks_first:
        assert told(report)[0].startswith("controls: none on this part; those of the other parts")
    marked = "SELECT sample_code FROM warning_sheet WHERE code = 'failed_control' ORDER BY 1"
    assert sheet(any_registry, marked) == [("R1",), ("R2",)]
    held = convention == "hold"
    assert sheet(any_registry, ZR) == [("R1", None if held else 120.0), ("R2", None if held else 130.0)]
    tables = ("control_state", "composition")
    before = [sheet(any_registry, f"SELECT * FROM {name} ORDER BY 1, 2, 3") for name in tables]
    refresh_registry(any_registry, everything=True)
    assert before == [sheet(any_registry, f"SELECT * FROM {name} ORDER BY 1, 2, 3") for name in tables]
    assert sheet(any_registry, "SELECT count(*) FROM verdict_change") == [(0,)]
    set_state(any_registry, checks, "withdrawn")
    if rocks_first:  # else the rocks, a part of the checks' batch, go with it
        assert sheet(any_registry, marked) == []
        assert sheet(any_registry, ZR) == [("R1", 120.0), ("R2", 130.0)]


@pytest.mark.parametrize(
    "listed",
    [
        "sample_code,sample_kind,duplicate_of\nR1,core,\nD1,pulp duplicate,R1\nD2,Field Duplicate,R1\nD3,dup,R1\n",
        "sample_code,sample_kind,duplicate_of,stage\nR1,core,,\nD1,dup,R1,pulp\nD2,dup,R1,field\nD3,dup,R1,\n",
    ],
)
def test_sample_list_declares_the_stage_of_a_duplicate(any_registry: Registry, tmp_path: Path, listed: str) -> None:
    """148 beside 120, no limit known: 28/(k 134) is 4.2 at k 0.05 of a pulp, 1.4 in the field; 3.64 is kept."""
    text = "Sample,Zr fusion (ppm)\nR1,120\nD1,148\nD2,148\nD3,148\n"
    bring(any_registry, tmp_path, {"samples.csv": listed, "K1.csv": text})
    assert [(row[0], row[4]) for row in sheet(any_registry, SHEET)] == [
        ("D1", "warned"), ("D2", "passed"), ("D3", "passed"),
    ]  # fmt: skip
    with writing(any_registry) as connection:
        connection.exec_driver_sql("UPDATE sample SET duplicate_stage = 'pulp' WHERE code = 'D2'")
    refresh_registry(any_registry)
    assert sheet(any_registry, SHEET)[1][4] == "warned"


def test_corrected_part_of_a_certificate_is_not_judged_by_what_it_corrects(
    any_registry: Registry, tmp_path: Path
) -> None:
    """The control was read wrongly, 150 for 101; the corrected file takes the place of the faulty part."""
    bring(any_registry, tmp_path, {"certificates.csv": CERTIFICATES, "samples.csv": LISTED, "K1.csv": ROCKS})
    assert told(bring(any_registry, tmp_path, {"more.csv": CHECKS}, add_to="K1"))[1].startswith("batch fails")
    corrected = {"right.csv": CHECKS.replace("150", "101")}
    report = bring(any_registry, tmp_path, corrected, batch="K1/2", supersede=True)
    assert told(report)[1:] == ["batch passes for its one analyte judged"]
    with reading(any_registry) as connection:
        assert [batch_state(connection, batch_id) for batch_id in (1, 3)] == ["passes", "passes"]
