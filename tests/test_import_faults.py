"""An import that is refused tells the faults of all its files at once. The data are invented: layout tests."""

from __future__ import annotations

import random
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from registry import cli
from registry.errors import InputProblems, Problem
from registry.importing import ImportOptions, import_files
from registry.intake.codes import is_code_heading
from registry.store import batches
from registry.store.engine import Registry, reading, writing
from registry.store.reading.sample import chosen_values

SITES = "site_code,site_kind,easting,northing,epsg,depth_m,area\nKD1,drill_hole,450000,7350000,32633,100,{area}\n"
SURVEYS = "site_code,depth_m,azimuth_deg,dip_deg\nKD1,{depth},0,-60\n"
INTERVALS = "site_code,from_m,to_m,lithology\nKD1,0,{end},granite\n"
INTRUSIONS = "intrusion,shape\nBig Stock,sphere\n"
SAMPLES = "sample_code,sample_kind,site_code,from_m,to_m,intrusion\nK-1,core,KD1,1,2,{intrusion}\n"
RESULTS = "Sample,SiO2 (%)\nK-1,65\n{other},66\n"

Faults = Callable[..., list[Problem]]


def files_of(folder: Path, **words: str) -> list[Path]:
    said = {"area": "", "depth": "50", "end": "90", "intrusion": "Big Stock", "other": "K-1", **words}
    texts = {"sites": SITES, "surveys": SURVEYS, "intervals": INTERVALS, "intrusions": INTRUSIONS,
             "samples": SAMPLES, "results": RESULTS}  # fmt: skip
    paths = []
    for name, text in texts.items():
        path = folder / f"{name}.csv"
        path.write_text(text.format(**said))
        paths.append(path)
    return paths


@pytest.fixture
def faults(sqlite_registry: Registry, tmp_path: Path) -> Faults:
    def refused(**words: str) -> list[Problem]:
        with pytest.raises(InputProblems, match="csv") as error:
            import_files(sqlite_registry, files_of(tmp_path, **words))
        return [problem for problem in error.value.problems if problem.severity == "problem"]

    return refused


def test_faults_of_four_master_files_and_the_results_are_told_in_one_run(faults: Faults) -> None:
    told = faults(depth="150", end="120", intrusion="Big Stokc", other="Q-7")
    assert [(problem.file, problem.found) for problem in told] == [
        ("surveys.csv", "150"), ("intervals.csv", "120"), ("samples.csv", "Big Stokc"), ("results.csv", "Q-7"),
    ]  # fmt: skip


def test_hole_of_a_faulty_row_is_no_fault_of_the_files_that_name_it(faults: Faults) -> None:
    told = faults(area="Nowhere", end="120")
    assert [(problem.file, problem.found) for problem in told] == [("sites.csv", "Nowhere"), ("intervals.csv", "120")]


def test_row_that_the_reading_refuses_is_still_known_to_what_names_it(
    sqlite_registry: Registry, tmp_path: Path
) -> None:
    paths = files_of(tmp_path, intrusion="Big Stokc")
    paths[0].write_text(SITES.replace("100", "deep").format(area=""))
    with pytest.raises(InputProblems, match="deep") as error:
        import_files(sqlite_registry, paths)
    told = [problem for problem in error.value.problems if problem.severity == "problem"]
    assert [(problem.file, problem.found) for problem in told] == [("sites.csv", "deep"), ("samples.csv", "Big Stokc")]


def test_file_that_cannot_be_read_leaves_the_following_ones_unjudged_where_they_may_name_it(
    sqlite_registry: Registry, tmp_path: Path
) -> None:
    paths = files_of(tmp_path, intrusion="Big Stokc", end="-5")
    paths[0].write_text("nothing,known\n1,2\n")
    with pytest.raises(InputProblems, match=r"sites\.csv") as error:
        import_files(sqlite_registry, paths)
    assert {problem.file for problem in error.value.problems} == {"sites.csv", "intervals.csv"}


def all_faults(registry: Registry, folder: Path, files: dict[str, str], **options: Any) -> list[tuple[str, Any]]:
    """(file, what) of every problem of an import that is refused; nothing of it is stored."""
    for name, text in files.items():
        (folder / name).write_text(text)
    with pytest.raises(InputProblems, match="csv") as error:
        import_files(registry, [folder / name for name in files], ImportOptions(**options))
    with reading(registry) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM sample").scalar() == 0
        assert connection.exec_driver_sql("SELECT count(*) FROM batch WHERE code <> 'Z-1'").scalar() == 0
    return [(problem.file, problem.what) for problem in error.value.problems if problem.severity == "problem"]


BAD_SITE = "site_code,site_kind,easting,northing,epsg,depth_m\nKD1,drill_hole,450000,7350000,32633,deep\n"
CERTIFICATE = "reference_material,analyte,value,unit,uncertainty_type\nXM,Zr,{value},ppm,{kind}\n"


def test_faults_of_certificates_and_of_the_places_of_results_are_told_beside_a_bad_site(
    sqlite_registry: Registry, tmp_path: Path
) -> None:
    with writing(sqlite_registry) as connection:
        batches.insert_batch(connection, code="Z-1", certificate="Z-1", imported_at="2026-01-02T03:04:05Z", data=b"x")
    files = {
        "sites.csv": BAD_SITE,
        "bad.csv": CERTIFICATE.format(value=0, kind="guess"),
        "samples.csv": "sample_code,sample_kind\nA1,core\n",
        "known.csv": "Certificate: Z-1\nSample,SiO2 (%)\nA1,60\n",
        "lost.csv": "Certificate: Z-2\nSample,SiO2 (%)\nQ1,60\n",
        "twice.csv": "Certificate: Z-2\nSample,TiO2 (%)\nA1,1\n",
    }
    told = all_faults(sqlite_registry, tmp_path, files)
    assert [file for file, _ in told] == ["sites.csv", "bad.csv", "bad.csv", "known.csv", "lost.csv", "twice.csv"]
    assert [what for _, what in told[1:3]] == [
        "a certified value must be above zero", "this kind of uncertainty is not known",
    ]  # fmt: skip
    assert told[3][1].startswith("certificate 'Z-1' is in the registry already")
    assert told[4][1] == "this sample is not in the registry"
    assert told[5][1].startswith("certificate 'Z-2' is in the registry already, from another file (lost.csv)")


def test_same_bytes_twice_in_a_refused_import_are_told(sqlite_registry: Registry, tmp_path: Path) -> None:
    text = "Sample,SiO2 (%)\nA1,60\n"
    told = all_faults(
        sqlite_registry, tmp_path, {"sites.csv": BAD_SITE, "a.csv": text, "b.csv": text}, create_samples=True
    )
    assert [file for file, _ in told] == ["sites.csv", "b.csv"]
    assert told[1][1] == "the same bytes were imported before, as batch 'a' (active)"


def test_file_of_a_told_kind_that_cannot_be_read_excuses_only_what_names_its_things(
    sqlite_registry: Registry, tmp_path: Path
) -> None:
    """An empty list of areas was to bring areas, not samples nor intrusions."""
    files = {
        "areas.csv": "area,epsg\n",
        "sites.csv": "site_code,site_kind,easting,northing,epsg,area\nKD1,drill_hole,450000,7350000,32633,Lost\n",
        "samples.csv": "sample_code,sample_kind,intrusion\nA1,core,Nowhere\n",
        "K1.csv": "Sample,SiO2 (%)\nA1,60\nQ7,61\n",
    }
    told = all_faults(sqlite_registry, tmp_path, files)
    assert [file for file, _ in told][-2:] == ["samples.csv", "K1.csv"]
    assert "sites.csv" not in [file for file, _ in told] and told[0][0] == "areas.csv"


def test_keep_going_tells_every_file_that_is_faulty_as_a_whole(sqlite_registry: Registry, tmp_path: Path) -> None:
    """Rows that would be set aside (Q7 and the intrusion Nowhere) are no reason of the refusal."""
    files = {
        "one.csv": "nothing,known\n1,2\n",
        "two.csv": "",
        "samples.csv": "sample_code,sample_kind,intrusion\nA1,core,Nowhere\n",
        "K1.csv": "Sample,SiO2 (%)\nA1,60\nQ7,61\n",
    }
    told = all_faults(sqlite_registry, tmp_path, files, keep_going=True)
    assert {file for file, _ in told} == {"one.csv", "two.csv"}
    assert not list(tmp_path.glob("*.refused*"))


@pytest.mark.parametrize("heading", ["Zr (ppm)", "Zr (furlong)"])
def test_unknown_codes_are_told_beside_the_faulty_cells_and_columns_of_the_same_lines(
    sqlite_registry: Registry, tmp_path: Path, heading: str
) -> None:
    (tmp_path / "samples.csv").write_text("sample_code,sample_kind\nK-1,core\n")
    import_files(sqlite_registry, [tmp_path / "samples.csv"])
    (tmp_path / "T.csv").write_text(f"Sample,SiO2 (%),{heading}\nK-1,sixty,100\nk-1,65,x12\nX-9,60,120\n,61,130\n")
    with pytest.raises(InputProblems, match="not in the registry") as raised:
        import_files(sqlite_registry, [tmp_path / "T.csv"])
    told = {(problem.row, problem.column) for problem in raised.value.problems if problem.severity == "problem"}
    expected = {(2, "SiO2 (%)"), (3, "Sample"), (4, "Sample"), (5, "Sample")}
    assert told >= expected
    assert told - expected == {(3, heading)} if heading == "Zr (ppm)" else {(None, heading)}
    codes = [problem for problem in raised.value.problems if "not in the registry" in problem.what]
    assert [problem.found for problem in codes] == ["k-1", "X-9"]


def test_dry_run_with_unknown_codes_tells_what_was_understood_and_counts_the_codes(
    sqlite_registry: Registry, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "foreign.csv"
    file.write_text("Sample,SiO2 (%)\n" + "".join(f"Q{number:03},65\n" for number in range(1, 31)))
    with pytest.raises(InputProblems, match="not in the registry") as error:
        import_files(sqlite_registry, [file], ImportOptions(dry_run=True))
    assert error.value.understood[0] == "foreign.csv: results, 30 rows"
    assert any("SiO2 in wt%" in line for line in error.value.understood)
    assert len(error.value.problems) == 6
    assert (
        error.value.problems[-1]
        .sentence()
        .startswith(
            "foreign.csv, column 'Sample': 25 more lines have sample codes that are not in the registry; "
            "found 'Q### (Q006 to Q030)'"
        )
    )
    with pytest.raises(SystemExit, match="1"):
        cli.main(["import", str(file), "--dry-run", "--registry", str(sqlite_registry.path)])
    said = capsys.readouterr()
    assert "understood: SiO2 in wt%" in said.err and "25 more lines" in said.err


def test_successor_of_a_batch_keeps_its_laboratory_unless_another_is_named(
    sqlite_registry: Registry, tmp_path: Path
) -> None:
    def bring(name: str, silica: int, **options: Any) -> list[str]:
        path = tmp_path / name
        path.write_text(f"Sample,SiO2 (%)\nK-1,{silica}\n")
        report = import_files(sqlite_registry, [path], ImportOptions(batch="T", create_samples=True, **options))
        assert report.files[0].results is not None
        return [remark for remark in report.files[0].results.remarks if "laboratory" in remark]

    assert bring("one.csv", 60, lab="North Lab") == []
    assert bring("two.csv", 61, supersede=True) == [
        "the laboratory 'North Lab' is taken from the batch that this one supersedes"
    ]
    assert bring("three.csv", 62, supersede=True, lab="South Lab") == []
    with reading(sqlite_registry) as connection:
        labs = connection.exec_driver_sql("SELECT lab FROM batch ORDER BY batch_id").scalars().all()
    assert labs == ["North Lab", "North Lab", "South Lab"]


def test_column_in_a_wrong_unit_is_told_in_four_lines(sqlite_registry: Registry, tmp_path: Path) -> None:
    path = tmp_path / "wrong.csv"
    path.write_text("Sample,SiO2 (%)\n" + "".join(f"K-{number},650000\n" for number in range(40)))
    with pytest.raises(InputProblems, match="more than the whole rock") as error:
        import_files(sqlite_registry, [path], ImportOptions(create_samples=True))
    told = [problem.sentence() for problem in error.value.problems if problem.severity == "problem"]
    assert len(told) == 4
    assert "37 more of the same kind" in told[3] and "the last at row 41" in told[3]


@pytest.mark.parametrize("heading", ["Sample N\u00b0", "Sample No", "Sample Nr", "SAMPLE N\u00ba", "Sample Number"])
def test_heading_of_numbered_samples_is_not_doubtful(heading: str) -> None:
    assert is_code_heading(heading)


def test_loss_on_ignition_of_a_sample_is_by_no_unknown_digestion(sqlite_registry: Registry, tmp_path: Path) -> None:
    path = tmp_path / "loi.csv"
    path.write_text("Sample,MgO (%),LOI (%),Total (%)\nK-1,2,1,99\n")
    import_files(sqlite_registry, [path], ImportOptions(create_samples=True))
    with reading(sqlite_registry) as connection:
        by = {value["column"]: value["digestion"] for value in chosen_values(connection, 1)}
    assert (by["loi_wt"], by["total_reported_wt"], by["mgo_wt"]) == ("", "", "an unknown digestion")


GOOD = {
    "areas.csv": "area,epsg\nNorth,32633\n",
    "sites.csv": "site_code,site_kind,easting,northing,epsg,depth_m,area\n"
    "KD1,drill_hole,450000,7350000,32633,100,North\nOC1,outcrop,450010,7350000,32633,,North\n",
    "surveys.csv": "site_code,depth_m,azimuth_deg,dip_deg\nKD1,50,0,-60\n",
    "intervals.csv": "site_code,from_m,to_m,lithology\nKD1,0,90,granite\n",
    "intrusions.csv": "intrusion,area,shape\nBig Stock,North,sphere\n",
    "samples.csv": "sample_code,sample_kind,site_code,intrusion\nA1,outcrop,OC1,Big Stock\nA2,outcrop,OC1,Big Stock\n",
    "certs.csv": CERTIFICATE.format(value=100, kind="SD"),
    "one.csv": "Sample,SiO2 (%)\nA1,60\n",
    "two.csv": "Certificate: Z-2\nSample,TiO2 (%)\nA2,1\n",
}
#: A fault of each file: one that the reading sees, one that only the registry sees.
SEEN_AT_ONCE = {
    "areas.csv": ("32633", "9x"), "sites.csv": ("OC1,outcrop,450010", "OC1,outcrop,east"),
    "surveys.csv": (",-60", ",-95"), "intervals.csv": ("0,90", "90,0"), "intrusions.csv": ("sphere", "dragon"),
    "samples.csv": ("A2,outcrop", "A2,dragon"), "certs.csv": ("Zr", "Dragonium"), "one.csv": ("60", "6000"),
    "two.csv": ("A2,1", "A2,1000"),
}  # fmt: skip
SEEN_LATER = {
    "sites.csv": (",North\nOC1", ",Nowhere\nOC1"), "surveys.csv": ("KD1", "KD7"), "intervals.csv": ("KD1", "KD7"),
    "intrusions.csv": ("Big Stock,North", "Big Stock,Nowhere"),
    "samples.csv": ("OC1,Big Stock\nA2", "OC1,Bog Stock\nA2"), "certs.csv": ("100", "0"),
    "one.csv": ("A1", "Q1"), "two.csv": ("Z-2", "Z-1"),
}  # fmt: skip


@pytest.mark.parametrize("seed", range(12))
def test_any_set_of_faulty_files_is_told_of_and_no_other_file(
    sqlite_registry: Registry, tmp_path: Path, seed: int
) -> None:
    chance = random.Random(seed)
    with writing(sqlite_registry) as connection:
        batches.insert_batch(connection, code="Z-1", certificate="Z-1", imported_at="2026-01-02T03:04:05Z", data=b"x")
    for number in range(6):
        files, faulty = dict(GOOD), set()
        for name in chance.sample(sorted(GOOD), chance.randint(1, len(GOOD))):
            faults = [kind[name] for kind in (SEEN_AT_ONCE, SEEN_LATER) if name in kind]
            was, becomes = chance.choice(faults)
            assert was in files[name]
            files[name] = files[name].replace(was, becomes)
            faulty.add(name)
        folder = tmp_path / str(number)
        folder.mkdir()
        told = all_faults(sqlite_registry, folder, files)
        assert {file for file, _ in told} == faulty, told
