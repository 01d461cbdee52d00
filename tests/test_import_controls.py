"""Controls that an import tells of: no certificate for a material, a rock called a blank. Every file is invented."""

from __future__ import annotations

from pathlib import Path

import pytest
import sqlalchemy as sa

from registry.importing import ImportOptions, ImportReport, import_files
from registry.store.engine import Registry, reading, writing
from registry.store.integrity import findings
from registry.store.reading.controls import without_certificate

SAMPLES = (
    "sample_code,sample_kind,reference_material\nK-1,core,\nK-2,core,\nK-3,core,\n"
    "IH-1,reference_material,OURGRANITE\nIH-2,reference_material,\nCRM-1,reference_material,BHVO-2\n"
)
RESULTS = (
    "Sample,QC,SiO2 (%) XRF,Zr (ppm) XRF\nK-1,,66,180\nK-2,BLANK,65,170\nIH-1,STANDARD,70,210\nIH-2,STD,71,215\n"
    "CRM-1,CRM,49.6,171\nBLK-9,BLANK,0.1,<1\nK-3,,65,169\nK-3,REPEAT,65.1,170\n"
)


@pytest.fixture
def report(founded_registry: Registry, tmp_path: Path) -> ImportReport:
    samples, results = tmp_path / "samples.csv", tmp_path / "C-9.csv"
    samples.write_text(SAMPLES)
    results.write_text(RESULTS)
    return import_files(founded_registry, [samples, results], ImportOptions(create_samples=True))


def test_registered_rock_that_the_certificate_calls_a_blank_is_remarked_on_and_stays_a_rock(
    report: ImportReport, founded_registry: Registry
) -> None:
    results = report.files[1].results
    assert results is not None
    called = [remark for remark in results.remarks if "the certificate calls" in remark]
    assert called == [
        "line 3: the certificate calls K-2 a blank, the sample list says core; it stays what the list says: correct "
        "the list if the laboratory is right"
    ]
    with reading(founded_registry) as connection:
        kind = connection.exec_driver_sql("SELECT kind FROM sample WHERE code = 'K-2'").scalar()
    assert kind == "core"


def test_materials_without_certificate_are_told_and_one_with_a_certificate_is_not(
    report: ImportReport, founded_registry: Registry
) -> None:
    results = report.files[1].results
    assert results is not None
    told = "\n".join(results.controls)
    assert "reference material 'OURGRANITE' has no certificate here (1 line not judged)" in told
    assert "reference material of sample IH-2, not named, has no certificate here" in told
    assert "BHVO-2" not in told
    with reading(founded_registry) as connection:
        batch_id = connection.exec_driver_sql("SELECT batch_id FROM batch WHERE code = 'C-9'").scalar()
        found = without_certificate(connection, batch_id)
    assert [(one["material"], one["lines"], one["sample_code"]) for one in found] == [
        (None, 1, "IH-2"),
        ("OURGRANITE", 1, "IH-1"),
    ]


def test_material_whose_values_come_later_is_no_longer_told(
    report: ImportReport, founded_registry: Registry, tmp_path: Path
) -> None:
    own = tmp_path / "own.csv"
    own.write_text("reference_material,analyte,value,unit,uncertainty\nOURGRANITE,SiO2,70.2,wt%,0.3\n")
    import_files(founded_registry, [own], ImportOptions(kind="reference-materials"))
    with reading(founded_registry) as connection:
        batch_id = connection.exec_driver_sql("SELECT batch_id FROM batch WHERE code = 'C-9'").scalar()
        assert [one["material"] for one in without_certificate(connection, batch_id)] == [None]


@pytest.mark.parametrize(
    ("damage", "subject", "words"),
    [
        ("UPDATE control_outcome SET aliquot_id = aliquot_id + 9000", "table control_outcome", "line of its batch"),
        ("UPDATE control_outcome SET column_id = column_id + 9000", "table control_outcome", "column of its batch"),
        ("UPDATE control_state SET column_id = column_id + 9000", "table control_state", "column of its batch"),
    ],
)
def test_check_finds_control_rows_without_their_line_or_column(
    report: ImportReport, founded_registry: Registry, damage: str, subject: str, words: str
) -> None:
    del report
    with reading(founded_registry) as connection:
        assert [one for one in findings(connection) if "control" in one["subject"]] == []
    with writing(founded_registry) as connection:
        connection.execute(sa.text(damage))
    with reading(founded_registry) as connection:
        found = [one for one in findings(connection) if one["subject"] == subject]
    assert len(found) == 1
    assert words in found[0]["found"]


def test_new_rock_with_the_name_of_a_reference_material_is_remarked_on_once(
    founded_registry: Registry, tmp_path: Path
) -> None:
    """BHVO-2 ships with the registry; the numbers are invented."""
    text = "Sample,SiO2 (%),MgO (%)\nA1,60,2\nBHVO-2,49.9,7.2\n"
    for number in (1, 2):
        (tmp_path / f"{number}.csv").write_text(text.replace("60", f"6{number}"))
        report = import_files(founded_registry, [tmp_path / f"{number}.csv"], ImportOptions(create_samples=True))
        told = [remark for remark in report.files[0].on_storing if "name of a reference material" in remark.what]
        assert [remark.found for remark in told] == (["BHVO-2"] if number == 1 else [])
