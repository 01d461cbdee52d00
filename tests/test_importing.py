"""The whole way from CSV files to the views, and what stands after anything goes wrong on it."""

from __future__ import annotations

import shutil
import sqlite3
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from registry import lab_files
from registry.batching import set_state
from registry.errors import InputProblems, NotFound, PlutonbookError, UsageError
from registry.importing import ImportOptions, import_files
from registry.intake import spooled
from registry.refresh import refresh_registry
from registry.store import engine as store_engine
from registry.store.engine import Registry, open_registry, reading

#: Average basalt, andesite and granite of Le Maitre (1976, J. Petrol. 17, 589-637), wt%, from memory.
AVERAGES = """Sample,SiO2 (%),TiO2 (%),Al2O3 (%),Fe2O3 (%),FeO (%),MnO (%),MgO (%),CaO (%),Na2O (%),K2O (%),P2O5 (%)
BAS,49.20,1.84,15.74,3.79,7.13,0.20,6.73,9.47,2.91,1.10,0.35
AND,57.94,0.87,17.02,3.27,4.04,0.14,3.33,6.79,3.48,1.62,0.21
GRA,71.30,0.31,14.32,1.21,1.64,0.05,0.71,1.84,3.68,4.07,0.12
"""
#: Invented: a layout test.
SAMPLES = """sample_code,sample_kind,lithology,texture,alteration
BAS,outcrop,basalt lava,aphyric,
AND,outcrop,andesite lava,aphyric,
GRA,outcrop,granite,equigranular,
"""


def write(folder: Path, name: str, text: str) -> Path:
    path = folder / name
    path.write_text(text)
    return path


@pytest.fixture
def averages(tmp_path: Path) -> list[Path]:
    return [write(tmp_path, "averages.csv", AVERAGES), write(tmp_path, "samples.csv", SAMPLES)]


def rows(registry: Registry, query: str) -> list[dict[str, Any]]:
    with reading(registry) as connection:
        return [dict(row._mapping) for row in connection.exec_driver_sql(query)]


def counts(path: Path) -> dict[str, int]:
    """Rows of every table that an import may write."""
    connection = sqlite3.connect(path)
    names = [
        name
        for (name,) in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")
        if not name.startswith("sqlite_")
    ]
    found = {name: connection.execute(f"SELECT count(*) FROM {name}").fetchone()[0] for name in names}
    connection.close()
    return found


def test_import_of_averages_gives_their_published_norms(founded_registry: Registry, averages: list[Path]) -> None:
    """Norms of Le Maitre 1976 averages, recomputed in the methods sheet on raw wt%; the stored norm is closed to 100.

    Tolerance: half the last printed decimal, scaled by the closing.
    """
    import_files(founded_registry, averages)

    printed = {
        "BAS": {"or_wt": 6.50, "ab_wt": 24.62, "an_wt": 26.64, "di_wt": 14.57, "hy_wt": 14.52, "ol_wt": 1.81},
        "AND": {"q_wt": 12.32, "or_wt": 9.57, "ab_wt": 29.45, "an_wt": 26.03, "di_wt": 5.06, "hy_wt": 9.39},
        "GRA": {"q_wt": 28.93, "c_wt": 0.80, "or_wt": 24.05, "ab_wt": 31.14, "an_wt": 8.34, "hy_wt": 3.36},
    }
    totals = {"BAS": 98.46, "AND": 98.71, "GRA": 99.25}
    norms = {row["sample_code"]: row for row in rows(founded_registry, "SELECT * FROM norm_sheet")}
    for code, minerals in printed.items():
        scale = 100.0 / totals[code]
        assert abs(norms[code]["norm_total_wt"] - 100.0) < 0.01
        for mineral, value in minerals.items():
            assert norms[code][mineral] == pytest.approx(value * scale, abs=0.005 * scale + 1e-9), (code, mineral)


def test_import_stores_what_was_reported_and_says_which_iron_was_measured(
    founded_registry: Registry, averages: list[Path]
) -> None:
    """FeOt = FeO + 0.8998 Fe2O3: 10.540 for the basalt (methods sheet, recomputed)."""
    import_files(founded_registry, averages)

    row = rows(founded_registry, "SELECT * FROM composition_sheet WHERE sample_code = 'BAS'")[0]
    assert row["sio2_wt"] == 49.20
    assert row["feo_titrated_wt"] == 7.13
    assert row["feot_wt"] == pytest.approx(10.540, abs=5e-4)
    assert row["fe2o3_wt"] == pytest.approx(3.79, abs=5e-4)
    assert "titrat" in row["iron_basis"]
    assert row["is_stale"] == 0


def test_import_reports_every_problem_of_a_file_and_writes_nothing(founded_registry: Registry, tmp_path: Path) -> None:
    samples = write(tmp_path, "samples.csv", "sample_code,sample_kind\nA,outcrop\nB,outcrop\n")
    bad = write(
        tmp_path, "bad.csv", "Sample,SiO2 (%),MnO (%),Zr (ppm)\nA,65.1,3002,180\nB,sixty,0.1,\nC,64.0,0.1,150\n"
    )
    assert founded_registry.path is not None
    before = counts(founded_registry.path)

    with pytest.raises(InputProblems, match="3002") as caught:
        import_files(founded_registry, [samples, bad])

    text = str(caught.value)
    assert "row 2" in text and "MnO" in text
    assert "row 3" in text and "sixty" in text
    assert counts(founded_registry.path) == before


def test_import_of_unknown_sample_codes_names_them_and_the_near_ones(
    founded_registry: Registry, tmp_path: Path
) -> None:
    samples = write(tmp_path, "samples.csv", "sample_code,sample_kind\nKD-001,outcrop\nKD-002,outcrop\n")
    results = write(tmp_path, "r.csv", "Sample,SiO2 (%)\nKD-001,60.0\nKD 002,61.0\n")

    with pytest.raises(InputProblems, match="KD 002") as caught:
        import_files(founded_registry, [samples, results])

    assert "did you mean 'KD-002'" in str(caught.value)
    assert "--create-samples" in str(caught.value)


def test_import_with_create_samples_judges_them_like_any_rock(founded_registry: Registry, averages: list[Path]) -> None:
    import_files(founded_registry, averages[:1], ImportOptions(create_samples=True))

    kinds = rows(founded_registry, "SELECT DISTINCT sample_kind FROM sample_sheet")
    verdicts = rows(founded_registry, "SELECT count(*) AS n FROM verdict_sheet")
    targets = rows(founded_registry, "SELECT count(*) AS n FROM target")
    assert kinds == [{"sample_kind": "unknown"}]
    assert verdicts[0]["n"] == 3 * targets[0]["n"]


def test_import_dry_run_shows_the_counts_and_writes_nothing(founded_registry: Registry, averages: list[Path]) -> None:
    assert founded_registry.path is not None
    before = counts(founded_registry.path)

    report = import_files(founded_registry, averages, ImportOptions(dry_run=True))

    assert report.recomputed == 3
    assert "nothing was written" in "\n".join(report.lines())
    assert counts(founded_registry.path) == before


def test_import_of_the_same_bytes_is_refused_and_names_the_way_back(
    founded_registry: Registry, averages: list[Path]
) -> None:
    import_files(founded_registry, averages, ImportOptions(batch="B1"))
    with pytest.raises(InputProblems, match="same bytes"):
        import_files(founded_registry, averages[:1], ImportOptions(batch="B2"))

    set_state(founded_registry, "B1", "withdrawn")
    with pytest.raises(InputProblems, match="restore-batch B1"):
        import_files(founded_registry, averages[:1], ImportOptions(batch="B2"))


def test_import_of_an_absent_file_says_so(founded_registry: Registry, tmp_path: Path) -> None:
    with pytest.raises(NotFound, match=r"there is no file .*gone\.csv"):
        import_files(founded_registry, [tmp_path / "gone.csv"])


def test_import_of_two_result_files_under_one_batch_code_is_refused(
    founded_registry: Registry, averages: list[Path], tmp_path: Path
) -> None:
    other = write(tmp_path, "other.csv", "Sample,Zr (ppm)\nGRA,150\n")
    with pytest.raises(UsageError, match="--batch names one batch"):
        import_files(founded_registry, [*averages, other], ImportOptions(batch="B1"))


def test_second_batch_recomputes_samples_from_all_their_results(
    founded_registry: Registry, averages: list[Path], tmp_path: Path
) -> None:
    """Majors in one file, traces in another; withdrawing and restoring goes there and back."""
    import_files(founded_registry, averages)
    alone = rows(founded_registry, "SELECT * FROM norm_sheet")
    traces = write(tmp_path, "traces.csv", "Sample,Zr (ppm),Sr (ppm),Y (ppm)\nGRA,150,400,10\n")
    import_files(founded_registry, [traces], ImportOptions(batch="T"))

    query = "SELECT sr_y FROM index_sheet WHERE sample_code = 'GRA'"
    assert rows(founded_registry, query) == [{"sr_y": 40.0}]

    report = set_state(founded_registry, "T", "withdrawn")
    assert report["recomputed"] == 1
    assert rows(founded_registry, query) == [{"sr_y": None}]
    assert rows(founded_registry, "SELECT * FROM norm_sheet") == alone
    set_state(founded_registry, "T", "active")
    assert rows(founded_registry, query) == [{"sr_y": 40.0}]
    with pytest.raises(PlutonbookError, match="active already"):
        set_state(founded_registry, "T", "active")


def test_guarded_bulk_route_writes_the_same_rows_as_the_stale_route(
    founded_registry_file: Path, averages: list[Path], tmp_path: Path
) -> None:
    """The import computes from the arrays in hand; recomputing everything from the stored results changes nothing."""
    registry = open_registry(shutil.copy(founded_registry_file, tmp_path / "both.sqlite"))
    import_files(registry, averages)
    tables = ("composition", "derived", "verdict")
    first = {table: rows(registry, f"SELECT * FROM {table} ORDER BY 1, 2") for table in tables}

    assert refresh_registry(registry, everything=True) == 3

    for table in tables:
        assert rows(registry, f"SELECT * FROM {table} ORDER BY 1, 2") == first[table], table
    assert rows(registry, "SELECT count(*) AS n FROM verdict_change") == [{"n": 0}]
    registry.close()


class _Fault(sqlite3.OperationalError):
    """The planted fault."""


class _Counter:
    """Counts writing statements and raises at the one that is due."""

    def __init__(self) -> None:
        self.count, self.due = 0, -1

    def meet(self, statement: str) -> None:
        if statement.lstrip()[:6].upper() in ("INSERT", "UPDATE", "DELETE", "COMMIT"):
            self.count += 1
            if self.count == self.due:
                raise _Fault(f"planted at write {self.count}")


@pytest.fixture
def counter(monkeypatch: pytest.MonkeyPatch) -> Iterator[_Counter]:
    """Every connection of the store counts its writes, commits included."""
    counting = _Counter()

    class Cursor(sqlite3.Cursor):
        def execute(self, statement: str, *parameters: Any) -> Any:
            counting.meet(statement)
            return super().execute(statement, *parameters)

        def executemany(self, statement: str, *parameters: Any) -> Any:
            counting.meet(statement)
            return super().executemany(statement, *parameters)

    class Connection(sqlite3.Connection):
        def cursor(self, *arguments: Any, **named: Any) -> Any:
            return super().cursor(Cursor, *arguments, **named)

        def execute(self, statement: str, *parameters: Any) -> Any:
            counting.meet(statement)
            return super().execute(statement, *parameters)

        def executemany(self, statement: str, *parameters: Any) -> Any:
            counting.meet(statement)
            return super().executemany(statement, *parameters)

        def commit(self) -> None:
            counting.meet("COMMIT")
            super().commit()

    real = sqlite3.connect
    monkeypatch.setattr(
        store_engine.sqlite3, "connect", lambda *arguments, **named: real(*arguments, factory=Connection, **named)
    )
    yield counting


def test_import_that_fails_at_any_write_leaves_nothing_behind(
    founded_registry_file: Path, averages: list[Path], tmp_path: Path, counter: _Counter
) -> None:
    """A fault at the n-th write, for every n: no row of the import remains, and the next import goes through."""
    path = Path(shutil.copy(founded_registry_file, tmp_path / "whole.sqlite"))
    registry = open_registry(path)
    import_files(registry, averages)
    registry.close()
    writes = counter.count
    whole = counts(path)
    assert writes > 10
    for n in range(1, writes + 1):
        path = Path(shutil.copy(founded_registry_file, tmp_path / f"fault{n}.sqlite"))
        before = counts(path)
        counter.count, counter.due = 0, n
        registry = open_registry(path)
        with pytest.raises(Exception, match=f"planted at write {n}"):
            import_files(registry, averages)
        counter.due = -1
        assert counts(path) == before, f"write {n}"
        import_files(registry, averages)
        registry.close()
        assert counts(path) == whole, f"import after the fault at write {n}"


@pytest.mark.postgresql
def test_import_on_postgresql_gives_the_numbers_of_sqlite(
    founded_registry: Registry, postgresql_server: Any, averages: list[Path]
) -> None:
    from registry.founding import found

    server = found(postgresql_server.new_database())
    for registry in (founded_registry, server):
        import_files(registry, averages)
    for sheet in ("norm_sheet", "index_sheet", "melt_sheet", "volatile_free_sheet"):
        query = f"SELECT * FROM {sheet} ORDER BY sample_code"
        for left, right in zip(rows(founded_registry, query), rows(server, query), strict=True):
            for name, value in left.items():
                if name == "sample_id":
                    continue
                if isinstance(value, float):
                    np.testing.assert_allclose(right[name], value, rtol=1e-12, err_msg=name)
                else:
                    assert right[name] == value, name
    query = "SELECT sample_code, target, verdict, score_min, score_max FROM verdict_sheet ORDER BY 1, 2"
    assert rows(founded_registry, query) == rows(server, query)
    server.close()


CORRECTED = "Sample,Zr (ppm),Sr (ppm),Y (ppm)\nGRA,150,400,20\n"


def test_corrected_certificate_supersedes_and_can_be_undone(
    founded_registry: Registry, averages: list[Path], tmp_path: Path
) -> None:
    query = "SELECT sr_y FROM index_sheet WHERE sample_code = 'GRA'"
    first = write(tmp_path, "T.csv", CORRECTED.replace("400,20", "400,10"))
    import_files(founded_registry, [*averages, first])
    second = write(tmp_path, "again.csv", CORRECTED)

    with pytest.raises(InputProblems, match=r"--supersede.*--add-to T"):
        import_files(founded_registry, [second], ImportOptions(batch="T"))
    report = import_files(founded_registry, [second], ImportOptions(batch="T", supersede=True))

    assert rows(founded_registry, query) == [{"sr_y": 20.0}]
    assert report.files[0].results is not None and report.files[0].results.batch == "T corrected 2"
    states = rows(founded_registry, "SELECT batch, state FROM batch_sheet WHERE batch LIKE 'T%' ORDER BY 1")
    assert states == [{"batch": "T", "state": "superseded"}, {"batch": "T corrected 2", "state": "active"}]
    with pytest.raises(PlutonbookError, match="withdraw 'T corrected 2' first"):
        set_state(founded_registry, "T", "active")
    set_state(founded_registry, "T corrected 2", "withdrawn")
    assert rows(founded_registry, query) == [{"sr_y": None}]
    set_state(founded_registry, "T", "active")
    assert rows(founded_registry, query) == [{"sr_y": 40.0}]


def test_second_file_of_a_certificate_is_added_to_it_and_goes_with_it(
    founded_registry: Registry, averages: list[Path], tmp_path: Path
) -> None:
    import_files(founded_registry, averages, ImportOptions(batch="C-7"))
    traces = write(tmp_path, "traces.csv", CORRECTED)
    import_files(founded_registry, [traces], ImportOptions(add_to="C-7"))

    query = "SELECT sr_y, mg_number FROM index_sheet WHERE sample_code = 'GRA'"
    assert rows(founded_registry, query)[0]["sr_y"] == 20.0
    set_state(founded_registry, "C-7", "withdrawn")
    assert rows(founded_registry, query) == [{"sr_y": None, "mg_number": None}]
    assert {row["state"] for row in rows(founded_registry, "SELECT state FROM batch_sheet")} == {"withdrawn"}
    with pytest.raises(InputProblems, match="C-8', which is not in the registry"):
        import_files(founded_registry, [write(tmp_path, "more.csv", CORRECTED + "\n")], ImportOptions(add_to="C-8"))


def test_supersede_without_an_earlier_certificate_says_so(founded_registry: Registry, averages: list[Path]) -> None:
    with pytest.raises(InputProblems, match="no batch has the code or certificate number 'averages'"):
        import_files(founded_registry, averages, ImportOptions(supersede=True))


def test_keep_going_stores_good_rows_and_saves_bad_ones_to_be_corrected(
    founded_registry: Registry, tmp_path: Path
) -> None:
    """Invented rows: an unknown area and an unknown site, an impossible value and an unknown code."""
    samples = write(
        tmp_path, "samples.csv", "sample_code,sample_kind,site_code\nA,outcrop,\nB,outcrop,NOWHERE\nC,core,\n"
    )
    results = write(tmp_path, "T.csv", "Sample,SiO2 (%),MnO (%)\nA,65.1,0.1\nC,64.0,3002\nZ,50.0,0.2\n")

    report = import_files(founded_registry, [samples, results], ImportOptions(keep_going=True))

    refused = {file.file: (file.refused, file.refused_file) for file in report.files}
    assert refused["samples.csv"][0] == 1 and refused["T.csv"][0] == 2
    codes = rows(founded_registry, "SELECT sample_code FROM sample_sheet ORDER BY 1")
    assert codes == [{"sample_code": "A"}, {"sample_code": "C"}]
    saved = (tmp_path / "T.refused.csv").read_text(encoding="utf-8-sig")
    assert saved.splitlines()[0] == "Sample,SiO2 (%),MnO (%),why refused"
    assert "C,64.0,3002," in saved and "Z,50.0,0.2," in saved and "not in the registry" in saved
    assert "correct the unit or the value" in saved and "import the sample list first" in saved
    assert "NOWHERE" in (tmp_path / "samples.refused.csv").read_text(encoding="utf-8-sig")

    corrected = write(tmp_path, "T.refused.csv", saved.replace("3002", "0.3").replace("Z,", "A,"))
    import_files(founded_registry, [corrected], ImportOptions(add_to="T"))
    composed = rows(founded_registry, "SELECT sample_code, sio2_wt, mno_wt FROM composition_sheet ORDER BY 1")
    assert composed[1] == {"sample_code": "C", "sio2_wt": 64.0, "mno_wt": 0.3}


def test_keep_going_with_a_file_read_as_a_stream_keeps_and_refuses_the_same_rows(
    founded_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Invented: every third line has an impossible value, more lines than are held at once."""
    lines = [f"S{row},{50 + row % 20},{3002 if row % 3 == 0 else 0.1}" for row in range(20)]
    text = "Certificate: K-1\nSample,SiO2 (%),MnO (%)\n" + "\n".join(lines) + "\n"
    options = ImportOptions(keep_going=True, create_samples=True)
    import_files(founded_registry, [write(tmp_path, "small.csv", text)], options)

    monkeypatch.setattr(lab_files, "LARGE_BYTES", 1)
    monkeypatch.setattr(spooled, "BLOCK_ROWS", 4)
    large = write(tmp_path, "large.csv", text.replace("K-1", "K-2"))
    report = import_files(founded_registry, [large], options)

    assert report.files[0].refused == 7
    saved = (tmp_path / "large.refused.csv").read_text(encoding="utf-8-sig")
    assert saved.replace("K-2", "K-1") == (tmp_path / "small.refused.csv").read_text(encoding="utf-8-sig")
    query = "SELECT sample_code, analyte, value, line_no FROM result_sheet WHERE batch = '{}' ORDER BY 1, 2"
    kept = rows(founded_registry, query.format("K-2"))
    assert kept == rows(founded_registry, query.format("K-1")) and len(kept) == 26


def test_keep_going_in_a_dry_run_saves_nothing(founded_registry: Registry, tmp_path: Path) -> None:
    samples = write(tmp_path, "samples.csv", "sample_code,sample_kind\nA,outcrop\nB,meteorite\n")

    report = import_files(founded_registry, [samples], ImportOptions(keep_going=True, dry_run=True))

    assert report.files[0].refused == 1
    assert not (tmp_path / "samples.refused.csv").exists()
    assert rows(founded_registry, "SELECT count(*) AS n FROM sample_sheet") == [{"n": 0}]


def test_keep_going_cannot_save_a_file_that_is_faulty_as_a_whole(founded_registry: Registry, tmp_path: Path) -> None:
    with pytest.raises(InputProblems, match="empty"):
        import_files(founded_registry, [write(tmp_path, "e.csv", "")], ImportOptions(keep_going=True))


def test_workbook_with_two_sheets_of_results_becomes_one_batch_with_a_part(
    founded_registry: Registry, tmp_path: Path
) -> None:
    """Invented: majors on one sheet, traces on the other, the sample list on a third."""
    from openpyxl import Workbook

    book = Workbook()
    book.active.title = "Majors"
    for row in (["Sample", "SiO2 (%)", "K2O (%)", "MgO (%)"], ["A", 70.1, 4.0, 0.5], ["B", 69.0, 4.2, 0.7]):
        book.active.append(row)
    traces = book.create_sheet("Traces")
    for row in (["Sample", "Rb (ppm)", "Sr (ppm)", "Y (ppm)"], ["A", 200, 100, 25], ["B", "<5", 300, 20]):
        traces.append(row)
    listed = book.create_sheet("List")
    for row in (["sample_code", "sample_kind"], ["A", "outcrop"], ["B", "outcrop"]):
        listed.append(row)
    path = tmp_path / "C-5.xlsx"
    book.save(path)

    import_files(founded_registry, [path])

    found = rows(founded_registry, "SELECT sample_code, rb_sr FROM index_sheet ORDER BY 1")
    assert found[0] == {"sample_code": "A", "rb_sr": 2.0}
    batches = rows(founded_registry, "SELECT batch FROM batch_sheet ORDER BY 1")
    assert batches == [{"batch": "C-5"}, {"batch": "C-5/Traces"}]
    set_state(founded_registry, "C-5", "withdrawn")
    assert rows(founded_registry, "SELECT rb_sr FROM index_sheet") == [{"rb_sr": None}] * 2
    with pytest.raises(InputProblems, match="same bytes"):
        import_files(founded_registry, [path])
