"""What a dry run tells: conversions, which result goes before which, verdicts that would change; all faults at once.

Every file is invented and tests a branch.
"""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import pytest

from registry.errors import InputProblems
from registry.importing import ImportOptions, ImportReport, import_files
from registry.store.engine import Registry, reading

SAMPLES = "sample_code,sample_kind\nS-001,core\nS-002,core\nS-003,core\n"
FIRST = "Sample,Zr (ppm) four-acid,Cu (ppm) four-acid\nS-001,90,120\nS-002,80,>10000\nS-003,85,<5\n"

Bring = Callable[..., ImportReport]


@pytest.fixture
def bring(founded_registry: Registry, tmp_path: Path) -> Bring:
    def imported(name: str, text: str, **options: object) -> ImportReport:
        path = tmp_path / name
        path.write_text(text)
        return import_files(founded_registry, [path], ImportOptions(**options))  # type: ignore[arg-type]

    imported("samples.csv", SAMPLES)
    return imported


def replaced(report: ImportReport) -> list[tuple[str, str, str, bool, int]]:
    return [
        (one.column, one.earlier, one.later, one.replaced, one.samples) for one in report.files[0].precedence
    ]  # fmt: skip


def test_preview_tells_which_earlier_result_is_replaced_and_which_stays(bring: Bring) -> None:
    bring("first.csv", FIRST)
    better = "Sample,Zr (ppm) fusion,Cu (ppm) aqua regia\nS-001,180,110\nS-002,170,20000\nS-003,,4\n"
    report = bring("second.csv", better, dry_run=True)
    fusion, four_acid = "second (lithium borate fusion)", "first (four-acid digestion)"
    aqua_regia = "second (aqua regia)"
    assert replaced(report) == [
        ("zr_ppm", four_acid, fusion, True, 2),
        ("cu_ppm", four_acid, aqua_regia, True, 1),  # the result above a range gives way to one with a number
        ("cu_ppm", four_acid, aqua_regia, False, 2),
    ]
    told = "\n".join(report.lines())
    assert f"{fusion} replaces {four_acid}: zr_ppm (2 samples); such as zr_ppm of S-001: 90 -> 180" in told
    assert f"{four_acid} stays before {aqua_regia}: cu_ppm (2 samples)" in told


def test_preview_tells_what_a_corrected_certificate_no_longer_holds(bring: Bring) -> None:
    bring("first.csv", FIRST)
    shorter = "Sample,Cu (ppm) four-acid\nS-001,125\nS-002,11000\nS-003,<5\n"
    report = bring("again.csv", shorter, batch="first", supersede=True, dry_run=True)
    assert ("zr_ppm", "first (four-acid digestion)", "nothing", True, 3) in replaced(report)


def test_later_method_in_the_same_file_takes_the_place_of_a_result_above_a_range(
    bring: Bring, founded_registry: Registry
) -> None:
    text = (
        "Sample,Zn (ppm) four-acid,Zn (%) over-range,Au (ppm) fire assay,Au-over-range (g/t)\n"
        "S-001,>10000,2.35,>10,34.5\nS-002,4500,,0.5,\nS-003,>10000,,>10,\n"
    )
    tried = bring("zinc.csv", text, dry_run=True)
    assert [(one.column, list(one.taken.values())) for one in tried.files[0].alternatives] == [
        ("zn_ppm", [2, 1]),
        ("au_ppm", [2, 1]),
    ]
    bring("zinc.csv", text)
    with reading(founded_registry) as connection:
        query = "SELECT sample_code, zn_ppm, au_ppm FROM composition_sheet ORDER BY sample_code"
        rows = [tuple(row) for row in connection.exec_driver_sql(query)]
    assert [row[0] for row in rows] == ["S-001", "S-002", "S-003"]
    assert rows[0][1:] == pytest.approx((23500.0, 34.5))
    assert rows[1][1:] == pytest.approx((4500.0, 0.5))


def test_columns_are_told_in_groups_with_what_is_converted_or_not_used(bring: Bring) -> None:
    text = "Sample,SiO2 (%) XRF,MgO (%) XRF,Zn (%) XRF,Zr (ppm) aqua regia,LOI (%)\nS-001,66,2,0.1,80,1\n"
    lines = bring("mixed.csv", text, dry_run=True).lines()
    assert (
        "  understood: SiO2, MgO, Zn in wt%, XRF (xrf)" in lines or "  understood: SiO2, MgO, Zn in wt%, xrf" in lines
    )
    assert "  understood: converted: Zn (%) XRF to zn_ppm (\N{MULTIPLICATION SIGN} 10000)" in lines
    assert "  understood: not used: Zr (ppm) aqua regia (aqua regia does not carry it)" in lines
    assert not any("column 'MgO" in line for line in lines)
    assert any("column 'MgO (%) XRF' is MgO in wt%" in line for line in bring("m.csv", text).lines(verbose=True))


def test_loss_on_ignition_and_totals_are_no_columns_without_a_digestion(bring: Bring) -> None:
    report = bring("loi.csv", "Sample,SiO2 (%) XRF,MgO (%),LOI (%),Total (%)\nS-001,66,2,1,99\n", dry_run=True)
    assert any("the digestion is not told for 1 of 2 columns (MgO (%))" in remark for remark in report.files[0].remarks)
    assert "  understood: LOI, Total in wt%, weighed or summed" in report.files[0].lines()


def test_import_of_master_data_says_that_nothing_was_to_be_computed(bring: Bring) -> None:
    lines = bring("samples.csv", SAMPLES.replace("S-003", "S-004")).lines()
    assert lines[-2:] == ["No sample with results was touched: nothing was computed or judged.", "Stored."]


def test_faults_of_the_file_and_of_its_codes_are_told_at_once(bring: Bring) -> None:
    with pytest.raises(InputProblems, match="more than the whole rock") as refused:
        bring("faults.csv", "Sample,SiO2 (%)\nS-001,166\nS-1,65\n")
    codes = [problem for problem in refused.value.problems if problem.what == "this sample is not in the registry"]
    assert [(problem.row, problem.found) for problem in codes] == [(3, "S-1")]
    assert (codes[0].remedy or "").startswith("did you mean 'S-001'?")


def test_new_sample_almost_like_a_registered_one_is_remarked_on_where_it_is_added(bring: Bring) -> None:
    report = bring("near.csv", "Sample,SiO2 (%)\ns-001,65\nT-9,64\n", create_samples=True, dry_run=True)
    assert any("found 's-001', expected perhaps 'S-001'" in remark for remark in report.files[0].remarks)
    assert not any("T-9" in remark for remark in report.files[0].remarks)


def test_report_as_a_dictionary_holds_columns_precedence_and_changes_as_json(bring: Bring) -> None:
    bring("first.csv", FIRST)
    report = bring("second.csv", "Sample,Zr (ppm) fusion,Zr (ppm) XRF\nS-001,180,175\n", dry_run=True).as_dict()
    held = json.loads(json.dumps(report, default=str))["files"][0]
    assert [column["analyte"] for column in held["columns"]] == ["Zr", "Zr"]
    assert held["precedence"][0]["column"] == "zr_ppm"
    assert held["alternatives"][0]["taken"] == {"Zr (ppm) fusion": 1, "Zr (ppm) XRF": 0}
