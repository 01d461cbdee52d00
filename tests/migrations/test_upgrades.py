"""Registries of earlier releases are brought up to date with every row they hold.

``data/registry_<revision>.sqlite.gz`` was made by the release that had this schema: one invented certificate of two
lines with its file.
"""

from __future__ import annotations

import gzip
import shutil
from pathlib import Path

import pytest
import sqlalchemy as sa

from registry.cli import main
from registry.founding import bring_up_to_date, build_demo
from registry.store import batch_files, batches, integrity, schema
from registry.store.engine import HEAD_REVISION, Registry, open_registry, reading

DATA = Path(__file__).parent / "data"
RELEASED = sorted(path.name.removeprefix("registry_").removesuffix(".sqlite.gz") for path in DATA.glob("*.gz"))
CERTIFICATE = (DATA / "fx_0001.csv").read_bytes()


def earlier(revision: str, tmp_path: Path) -> Path:
    path = tmp_path / "earlier.sqlite"
    with gzip.open(DATA / f"registry_{revision}.sqlite.gz") as packed, path.open("wb") as plain:
        shutil.copyfileobj(packed, plain)
    return path


def test_a_registry_of_every_earlier_schema_is_kept() -> None:
    assert [f"{number:04d}" for number in range(1, int(HEAD_REVISION))] == RELEASED


@pytest.mark.parametrize("revision", RELEASED)
def test_earlier_registry_is_refused_with_the_command_that_helps(
    revision: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = earlier(revision, tmp_path)
    with pytest.raises(SystemExit, match="1"):
        main(["--registry", str(path), "batches"])
    assert f"has schema {revision}, this Plutonbook needs {HEAD_REVISION}: run 'plutonbook upgrade'" in (
        capsys.readouterr().err
    )


@pytest.mark.parametrize("revision", RELEASED)
def test_earlier_registry_keeps_its_results_and_its_file(revision: str, tmp_path: Path) -> None:
    path = earlier(revision, tmp_path)
    report = bring_up_to_date(path)
    assert (report["before"], report["revision"], report["recomputed"]) == (revision, HEAD_REVISION, 2)
    assert Path(report["backup"]).is_file()
    registry = open_registry(path)
    with reading(registry) as connection:
        assert integrity.findings(connection) == []
        batch = batches.find_batch(connection, "FX-0001")
        assert batch is not None
        assert batch_files.file_of(connection, batch["batch_id"]) == CERTIFICATE
        rows = connection.exec_driver_sql(
            "SELECT sample_code, analyte, value, qualifier FROM result_sheet WHERE analyte IN ('SiO2', 'Sn') "
            "ORDER BY sample_code, analyte"
        )
        assert [tuple(row) for row in rows] == [
            ("FX1", "SiO2", 68.21, None),
            ("FX1", "Sn", 5.0, "<"),
            ("FX2", "SiO2", 71.05, None),
            ("FX2", "Sn", 7.0, None),
        ]
        assert connection.exec_driver_sql("SELECT count(*) FROM verdict_sheet").scalar() == 14
    registry.close()


def test_file_of_a_batch_survives_the_way_down_and_up(any_registry: Registry) -> None:
    data = bytes(range(256)) * 20_000  # invented: the bytes of no table
    engine = any_registry.engine(foreign_keys=False, query_only=False)
    with engine.connect() as connection:
        batches.insert_batch(connection, code="K1", imported_at="2026-01-01T00:00:00Z", data=data)
        batches.insert_batch(connection, code="K2", imported_at="2026-01-01T00:00:00Z")
        schema.drop(connection)
        schema.migrate(connection, "0001")
        stored = connection.exec_driver_sql("SELECT code, file_bytes FROM batch ORDER BY code").fetchall()
        assert [row[0] for row in stored] == ["K1", "K2"]
        assert bytes(stored[0][1]) == batch_files.compress(data)
        assert stored[1][1] is None
        assert not sa.inspect(connection).has_table("batch_file")
        schema.migrate(connection, "head")
        assert batch_files.file_of(connection, 1) == data
        assert batch_files.file_of(connection, 2) is None
        connection.rollback()
    engine.dispose()


def test_demo_of_an_earlier_version_is_brought_up_to_date(tmp_path: Path) -> None:
    path = earlier(RELEASED[0], tmp_path)
    engine = sa.create_engine(f"sqlite:///{path}")
    with engine.begin() as connection:
        connection.exec_driver_sql("INSERT INTO setting (name, value) VALUES ('demo', '1')")
    engine.dispose()
    assert any("brought up to date" in line for line in build_demo(str(path)))
    registry = open_registry(path)
    with reading(registry) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM sample").scalar() == 2
    registry.close()
