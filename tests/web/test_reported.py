"""The cells of a certificate as the laboratory wrote them. Invented cells: a layout test."""

from __future__ import annotations

from pathlib import Path

import pytest

from registry import reported
from registry.importing import ImportOptions, import_files
from registry.intake import Reading
from registry.reported import reported_lines
from registry.store import batch_files
from registry.store.engine import Registry, reading
from web import create_app

FILE = "Certificate: X-1;;;\nSample;SiO2 (%);Zr (ppm);Sn (ppm)\nA;65,10;0180,0;<1,0\nB;;12;> 500\n"


def imported(registry: Registry, folder: Path) -> None:
    path = folder / "X-1.csv"
    path.write_text(FILE)
    import_files(registry, [path], ImportOptions(create_samples=True, batch="X-1"))


def test_reported_cells_stand_letter_by_letter(founded_registry: Registry, tmp_path: Path) -> None:
    imported(founded_registry, tmp_path)

    with reading(founded_registry) as connection:
        lines = {
            code: reported_lines(connection, sample_id)
            for code, sample_id in connection.exec_driver_sql("SELECT code, sample_id FROM sample")
        }
    assert lines["A"][0]["line_no"] == 3
    assert [(cell["analyte"], cell["text"]) for cell in lines["A"][0]["cells"]] == [
        ("SiO2", "65,10"), ("Zr", "0180,0"), ("Sn", "<1,0"),
    ]  # fmt: skip
    assert [cell["text"] for cell in lines["B"][0]["cells"]] == ["12", "> 500"]


def test_reported_cells_of_a_large_file_are_read_from_disk(
    founded_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    imported(founded_registry, tmp_path)
    monkeypatch.setattr(batch_files, "HELD_BYTES", 1)
    seen: list[bytes | Path] = []
    read = reported.source_of

    def watched(file: bytes | Path, told: Reading) -> object:
        seen.append(file)
        return read(file, told)

    monkeypatch.setattr(reported, "source_of", watched)
    with reading(founded_registry) as connection:
        sample_id = connection.exec_driver_sql("SELECT sample_id FROM sample WHERE code = 'A'").scalar()
        line = reported_lines(connection, sample_id)[0]
    assert line["has_file"] and [cell["text"] for cell in line["cells"]] == ["65,10", "0180,0", "<1,0"]
    assert [isinstance(file, Path) for file in seen] == [True]
    assert not seen[0].exists()  # type: ignore[union-attr]


def test_reported_page_shows_the_text_beside_what_was_read(founded_registry: Registry, tmp_path: Path) -> None:
    imported(founded_registry, tmp_path)
    assert founded_registry.path is not None
    client = create_app(str(founded_registry.path)).test_client()

    page = client.get("/reported/A").get_data(as_text=True)
    assert "65,10" in page and "&lt;1,0" in page and "X-1" in page
    assert client.get("/reported/AA").status_code == 404
    assert 'SiO2 (%) <span class="soft">column B (2)</span>' in page
    assert 'href="/batch/file/X-1" download>X-1.csv</a>, as it was sent; line 3 of it' in page
    assert client.get("/batch/file/X-1").data == FILE.encode()
