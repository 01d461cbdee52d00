"""The way of large imports: rows computed and made ready in a child process, the same as those of the plain way."""

from __future__ import annotations

import shutil
import sqlite3
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from registry import importing_results, lab_files
from registry.computing import Computations
from registry.errors import InputProblems, PlutonbookError
from registry.importing import ImportOptions, import_files
from registry.intake import spooled
from registry.judging import read_rules
from registry.pipeline import empty_chunk
from registry.store import batch_files, ready_rows
from registry.store.engine import Registry, open_registry, reading, writing

#: Invented: two files of a few samples, with a censored value, a repeat, an incomplete and a control sample.
SAMPLES = """sample_code,sample_kind,lithology
A,outcrop,basalt lava
B,core,granite
C,outcrop,andesite lava
D,blank,
E,core,granite
"""
FIRST = """Sample,SiO2 (%),TiO2 (%),Al2O3 (%),Fe2O3T (%),MgO (%),CaO (%),Na2O (%),K2O (%),Zr (ppm),Sr (ppm),Y (ppm)
A,49.2,1.8,15.7,11.7,6.7,9.5,2.9,1.1,140,460,25
B,71.3,0.3,14.3,3.0,0.7,1.8,3.7,4.1,<20,110,12
A,49.3,1.8,15.6,11.6,6.8,9.4,2.9,1.1,141,455,25
D,99.0,0.1,,,,,,,<1,<1,<1
"""
SECOND = "Sample,SiO2 (%),Sr (ppm),Y (ppm)\nC,58.0,500,12\nE,70.1,90,<2\n"
TABLES = ("composition", "derived", "verdict", "stale", "stale_group", "result")


def imported(file: Path, to: Path, folder: Path) -> dict[str, list[Any]]:
    """The rows of the tables after both imports into a copy of a registry."""
    registry = open_registry(shutil.copy(file, to))
    for name, text in (("samples", SAMPLES), ("first", FIRST), ("second", SECOND)):
        (folder / f"{name}.csv").write_text(text)
    import_files(registry, [folder / "samples.csv", folder / "first.csv"], ImportOptions(batch="1"))
    import_files(registry, [folder / "second.csv"], ImportOptions(batch="2"))
    with reading(registry) as connection:
        found = {table: list(connection.exec_driver_sql(f"SELECT * FROM {table} ORDER BY 1, 2")) for table in TABLES}
    registry.close()
    return found


@pytest.mark.parametrize("large_bytes", [1, 1_000_000])
def test_import_with_a_child_process_writes_the_rows_of_the_plain_way(
    founded_registry_file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, large_bytes: int
) -> None:
    """Read as a stream, two rows a block, or whole; with results stored line by line."""
    plain = imported(founded_registry_file, tmp_path / "plain.sqlite", tmp_path)
    monkeypatch.setattr(lab_files, "LARGE_BYTES", large_bytes)
    monkeypatch.setattr(spooled, "BLOCK_ROWS", 2)
    monkeypatch.setattr(importing_results, "LINES_AT_A_TIME", 1)
    monkeypatch.setattr(importing_results, "WORTH_A_CHILD", 1)
    monkeypatch.setattr(importing_results, "CHILDS_CHUNK_SIZE", 1)

    by_child = imported(founded_registry_file, tmp_path / "child.sqlite", tmp_path)

    assert len(plain["derived"]) == 5
    for table in TABLES:
        assert by_child[table] == plain[table], table
    connection = sqlite3.connect(tmp_path / "child.sqlite")
    assert connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)]
    assert connection.execute("PRAGMA foreign_key_check").fetchall() == []
    connection.close()


def test_import_whose_ready_rows_cannot_be_taken_over_leaves_nothing_behind(
    founded_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(importing_results, "WORTH_A_CHILD", 1)
    monkeypatch.setattr(importing_results, "CHILDS_CHUNK_SIZE", 1)
    for name, text in (("samples", SAMPLES), ("first", FIRST)):
        (tmp_path / f"{name}.csv").write_text(text)
    import_files(founded_registry, [tmp_path / "samples.csv"])
    real, calls = ready_rows.take_over, []

    def fails_late(connection: Any, ready: bytes) -> None:
        real(connection, ready)
        calls.append(len(ready))
        if len(calls) == 2:
            raise sqlite3.OperationalError("planted")

    monkeypatch.setattr(ready_rows, "take_over", fails_late)
    with pytest.raises(Exception, match="planted"):
        import_files(founded_registry, [tmp_path / "first.csv"])
    with reading(founded_registry) as connection:
        for table in (*TABLES, "aliquot", "batch"):
            assert connection.exec_driver_sql(f"SELECT count(*) FROM {table}").scalar() == 0, table

    monkeypatch.setattr(ready_rows, "take_over", real)
    import_files(founded_registry, [tmp_path / "first.csv"])
    with reading(founded_registry) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM derived").scalar() == 3


def test_computations_hand_an_error_of_the_child_to_the_parent(founded_registry: Registry) -> None:
    with writing(founded_registry) as connection:
        rules = read_rules(connection)
        tables = ready_rows.statements_of(connection)
    broken = empty_chunk(2)
    broken.values = np.zeros((1, 2))
    with (
        pytest.raises(IndexError, match="out of bounds"),
        Computations(iter([broken]), rules, True, tables) as computations,
    ):
        list(computations)


def test_import_of_a_large_file_reports_its_bytes_and_keeps_them(
    founded_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(lab_files, "LARGE_BYTES", 1)
    path = tmp_path / "first.csv"
    path.write_text(FIRST)
    told: list[tuple[str, int, int]] = []

    import_files(founded_registry, [path], ImportOptions(create_samples=True), progress=lambda *what: told.append(what))

    size = path.stat().st_size
    assert ("reading bytes", size, size) in told
    with reading(founded_registry) as connection:
        assert batch_files.file_of(connection, 1) == path.read_bytes()
    with pytest.raises(InputProblems, match="same bytes"):
        import_files(founded_registry, [path], ImportOptions(create_samples=True, batch="2"))


@pytest.mark.parametrize("encoding", ["utf-8", "utf-16"])
def test_import_of_a_large_file_that_changes_meanwhile_is_refused(
    founded_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, encoding: str
) -> None:
    """Read as a stream (UTF-8) or whole (UTF-16): what is hashed and kept must be what was read."""
    monkeypatch.setattr(lab_files, "LARGE_BYTES", 1)
    path = tmp_path / "first.csv"
    path.write_text(FIRST, encoding)

    with pytest.raises(PlutonbookError, match=r"first\.csv was changed while it was read; nothing was written"):
        import_files(
            founded_registry,
            [path],
            ImportOptions(create_samples=True),
            on_read=lambda *_: path.write_text(FIRST + "Z,60,,,,,,,,,\n", encoding),
        )
    with reading(founded_registry) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM sample").scalar() == 0


def test_import_of_a_large_file_that_is_no_plain_text_is_read_whole(
    founded_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(lab_files, "LARGE_BYTES", 1)
    path = tmp_path / "first.csv"
    path.write_bytes(FIRST.replace("A,", "\xc4,").encode("cp1252"))

    import_files(founded_registry, [path], ImportOptions(create_samples=True))

    with reading(founded_registry) as connection:
        codes = connection.exec_driver_sql("SELECT code FROM sample ORDER BY sample_id").scalars().all()
        assert codes == ["\xc4", "B", "D"]
