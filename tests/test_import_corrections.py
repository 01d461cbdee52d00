"""Corrected certificates that came in several files: what is corrected, and what stays. The data are invented."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from openpyxl import Workbook

from registry.errors import InputProblems
from registry.importing import ImportOptions, import_files
from registry.store.engine import Registry, reading

MAJORS = "Sample,SiO2 (%),MgO (%),K2O (%)\nA,{a},2,3\nB,61,2.5,2.8\n"
TRACES = "Sample,Zr (ppm),Nb (ppm),Rb (ppm)\nA,150,10,100\nB,140,{b},90\n"


def test_correction_of_the_majors_leaves_the_traces_of_the_certificate_in_use(
    founded_registry: Registry, tmp_path: Path
) -> None:
    """Invented: the majors are corrected, then the traces as well, then the first correction is taken back."""

    def bring(name: str, text: str, **options: Any) -> Any:
        (tmp_path / name).write_text(text)
        return import_files(founded_registry, [tmp_path / name], ImportOptions(**options))

    bring("majors.csv", MAJORS.format(a=60), batch="C-1", create_samples=True)
    bring("traces.csv", TRACES.format(b=9), add_to="C-1")
    report = bring("majors2.csv", MAJORS.format(a=65), batch="C-1", supersede=True)
    assert states(founded_registry) == {"C-1": "superseded", "C-1/2": "active", "C-1 corrected 2": "active"}
    assert any(
        "'C-1/2', a part of the corrected certificate, reports other analytes" in line for line in report.lines()
    )
    assert analysis(founded_registry, "A") == (65.0, 150.0) and analysis(founded_registry, "B") == (61.0, 140.0)

    bring("all.csv", "Sample,SiO2 (%),MgO (%),K2O (%),Zr (ppm),Nb (ppm),Rb (ppm)\nA,66,2,3,155,10,100\n",
          batch="C-1", supersede=True)  # fmt: skip
    assert states(founded_registry)["C-1 corrected 2"] == "superseded"
    assert analysis(founded_registry, "A") == (66.0, 155.0)


def test_workbook_that_corrects_a_certificate_takes_the_place_of_the_parts_of_both_sheets(
    founded_registry: Registry, tmp_path: Path
) -> None:
    for name, text, options in (
        ("majors.csv", MAJORS.format(a=60), {"batch": "C-1", "create_samples": True}),
        ("traces.csv", TRACES.format(b=9), {"add_to": "C-1"}),
    ):
        (tmp_path / name).write_text(text)
        import_files(founded_registry, [tmp_path / name], ImportOptions(**options))
    book = Workbook()
    book.remove(book.active)
    for title, text in (("Majors", MAJORS.format(a=65)), ("Traces", TRACES.format(b=8))):
        sheet = book.create_sheet(title)
        for line in text.splitlines():
            sheet.append([float(cell) if cell.replace(".", "").isdigit() else cell for cell in line.split(",")])
    book.save(tmp_path / "both.xlsx")
    report = import_files(founded_registry, [tmp_path / "both.xlsx"], ImportOptions(batch="C-1", supersede=True))
    assert {code for code, state in states(founded_registry).items() if state == "active"} == {
        "C-1 corrected 2", "C-1 corrected 2/Traces",
    }  # fmt: skip
    assert not any("stays in use" in line for line in report.lines())


def states(registry: Registry) -> dict[str, str]:
    with reading(registry) as connection:
        return {row[0]: row[1] for row in connection.exec_driver_sql("SELECT code, state FROM batch")}


def analysis(registry: Registry, code: str) -> tuple[float, float]:
    with reading(registry) as connection:
        row = connection.exec_driver_sql(
            f"SELECT sio2_wt, zr_ppm FROM composition_sheet WHERE sample_code = '{code}'"
        ).one()
    return row[0], row[1]


def test_correction_says_which_batch_and_which_of_its_parts_it_takes_the_place_of(
    founded_registry: Registry, tmp_path: Path
) -> None:
    """Invented: the correction names another certificate, and brings the majors and the traces together."""
    (tmp_path / "majors.csv").write_text(MAJORS.format(a=60))
    (tmp_path / "traces.csv").write_text(TRACES.format(b=9))
    (tmp_path / "all.csv").write_text("Sample,SiO2 (%),MgO (%),Zr (ppm),Nb (ppm)\nA,66,2,155,10\n")
    import_files(founded_registry, [tmp_path / "majors.csv"], ImportOptions(batch="C-1", create_samples=True))
    import_files(founded_registry, [tmp_path / "traces.csv"], ImportOptions(add_to="C-1"))
    named = ImportOptions(supersede=True, corrects="C-1", dry_run=True)
    report = import_files(founded_registry, [tmp_path / "all.csv"], named)
    (results,) = [file.results for file in report.files]
    assert results is not None and results.batch == "C-1 corrected 2"
    assert results.remarks == [
        "takes the place of batch 'C-1' (majors.csv), which is kept and no longer used",
        "takes the place of 'C-1/2' as well, which reports the same analytes",
    ]


def test_correction_of_a_batch_that_is_not_there_is_refused_with_its_name(
    founded_registry: Registry, tmp_path: Path
) -> None:
    (tmp_path / "all.csv").write_text("Certificate: C-9\nSample,SiO2 (%),MgO (%)\nA,66,2\n")
    options = ImportOptions(supersede=True, corrects="C-1", create_samples=True)
    with pytest.raises(InputProblems, match="no batch has the code or certificate number 'C-1'"):
        import_files(founded_registry, [tmp_path / "all.csv"], options)
