"""Files for other programs: read back by openpyxl, pyarrow, the json module and Debian's ogrinfo."""

from __future__ import annotations

import csv
import json
import shutil
import subprocess
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
import sqlalchemy as sa

from registry.errors import UsageError
from registry.exporting import export_sheet
from registry.store.engine import Registry, open_registry, writing
from registry.store.sheets import SHEETS


@pytest.fixture(scope="module")
def demo(demo_file: Path, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Registry]:
    registry = open_registry(shutil.copy(demo_file, tmp_path_factory.mktemp("export") / "demo.sqlite"))
    yield registry
    registry.close()


def test_export_to_xlsx_is_read_back_with_numbers_as_numbers(demo: Registry, tmp_path: Path) -> None:
    from openpyxl import load_workbook

    target = tmp_path / "out.xlsx"
    count = export_sheet(demo, "index_sheet", target, ["sr_y >= 20"])

    rows = list(load_workbook(target)["index_sheet"].values)
    assert rows[0] == SHEETS["index_sheet"]
    assert len(rows) - 1 == count > 0
    place = SHEETS["index_sheet"].index("sr_y")
    assert all(isinstance(row[place], int | float) and row[place] >= 20 for row in rows[1:])


def test_export_to_parquet_is_read_back_by_pyarrow(demo: Registry, tmp_path: Path) -> None:
    parquet = pytest.importorskip("pyarrow.parquet", reason="pyarrow is an extra")
    target = tmp_path / "out.parquet"
    count = export_sheet(demo, "verdict_sheet", target)

    table = parquet.read_table(target)
    assert table.num_rows == count and tuple(table.column_names) == SHEETS["verdict_sheet"]


def test_export_to_geojson_holds_points_of_samples(demo: Registry, tmp_path: Path) -> None:
    """RFC 7946: longitude first, WGS 84."""
    target = tmp_path / "out.geojson"
    count = export_sheet(demo, "sample_sheet", target)

    features = json.loads(target.read_text())["features"]
    assert len(features) == count > 100
    for feature in features:
        longitude, latitude = feature["geometry"]["coordinates"]
        assert longitude == pytest.approx(feature["properties"]["longitude"])
        assert latitude == pytest.approx(feature["properties"]["latitude"])


def test_export_to_geopackage_is_understood_by_ogrinfo(
    demo: Registry, tmp_path: Path, client_program: Callable[[str], str]
) -> None:
    target = tmp_path / "out.gpkg"
    count = export_sheet(demo, "class_sheet", target)

    said = subprocess.run(
        [client_program("ogrinfo"), "-so", str(target), "class_sheet"], capture_output=True, text=True, check=True
    ).stdout
    assert f"Feature Count: {count}" in said
    assert "Geometry: Point" in said and "WGS 84" in said
    assert "tas_plutonic: String" in said


def test_export_of_a_sheet_without_samples_to_a_map_is_refused(demo: Registry, tmp_path: Path) -> None:
    with pytest.raises(UsageError, match="no samples to put on a map"):
        export_sheet(demo, "column_guide", tmp_path / "out.gpkg")


def test_export_to_an_unknown_suffix_names_the_known_ones(demo: Registry, tmp_path: Path) -> None:
    with pytest.raises(UsageError, match=r"choose one of \.csv, \.xlsx"):
        export_sheet(demo, "sample_sheet", tmp_path / "out.doc")


@pytest.mark.parametrize("suffix", [".csv", ".xlsx"])
def test_export_for_spreadsheets_holds_no_text_that_they_would_run_as_a_formula(
    founded_registry: Registry, tmp_path: Path, suffix: str
) -> None:
    """Common practice against formulas smuggled in as texts, no source."""
    codes = ["=1+2", "@SUM(A1)", "+1", "-2-3", "plain", "007"]
    with writing(founded_registry) as connection:
        for code in codes:
            connection.execute(
                sa.text("INSERT INTO sample (code, kind, from_m) VALUES (:code, 'core', -1.5)"), {"code": code}
            )
    target = tmp_path / f"out{suffix}"
    assert export_sheet(founded_registry, "sample_sheet", target) == len(codes)
    if suffix == ".csv":
        rows = list(csv.reader(target.read_text(encoding="utf-8-sig").splitlines()))
    else:
        from openpyxl import load_workbook

        sheet = load_workbook(target)["sample_sheet"]
        assert all(cell.data_type != "f" for row in sheet for cell in row)
        rows = [list(row) for row in sheet.values]
    place = rows[0].index("from_m")
    assert {row[1] for row in rows[1:]} == {"'=1+2", "'@SUM(A1)", "'+1", "'-2-3", "plain", "007"}
    assert {float(row[place]) for row in rows[1:]} == {-1.5}  # numbers stay numbers


@pytest.mark.parametrize("suffix", [".csv", ".xlsx", ".geojson"])
def test_export_to_a_disk_that_is_full_is_told_and_leaves_no_file(
    demo: Registry, tmp_path: Path, suffix: str, capfd: pytest.CaptureFixture
) -> None:
    """Linux's /dev/full stands for the disk."""
    target = tmp_path / f"out{suffix}"
    (tmp_path / f".out.part{suffix}").symlink_to("/dev/full")
    with pytest.raises(UsageError, match="cannot be written: No space left on device"):
        export_sheet(demo, "sample_sheet", target)
    assert list(tmp_path.iterdir()) == [] and "Traceback" not in capfd.readouterr().err
