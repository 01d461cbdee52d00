"""The cells of a certificate as the laboratory wrote them. Invented cells: a layout test."""

from __future__ import annotations

from pathlib import Path

import pytest
from openpyxl import Workbook

from registry import reported
from registry.batching import set_state
from registry.importing import FileChoice, ImportOptions, import_files
from registry.intake import Reading, ReadingOptions
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


LONG = "Sample,Analyte,Value,Unit\nA,SiO2,65.10,%\nB,SiO2,60.0,%\nA,Zr,< 5,ppm\nA,MgO,2.0,%\n"
TURNED = "Sample,A,B\nSiO2 (%),65.10,60.0\nZr (ppm),< 5,12\nMgO (%),2.0,3.0\n"


@pytest.mark.parametrize(
    ("text", "laid_out", "first", "where"),
    [(LONG, "long", 2, [2, 4, 5]), (TURNED, "turned", 2, [2, 3, 4])],
)
def test_reported_cells_of_long_and_turned_tables_are_those_of_the_sample(
    founded_registry: Registry, tmp_path: Path, text: str, laid_out: str, first: int, where: list[int]
) -> None:
    (tmp_path / "T.csv").write_text(text)
    import_files(founded_registry, [tmp_path / "T.csv"], ImportOptions(create_samples=True))
    (line,) = lines_of(founded_registry, "A")
    assert (line["laid_out"], line["line_no"]) == (laid_out, first)
    assert [cell["text"] for cell in line["cells"]] == ["65.10", "< 5", "2.0"]
    assert [cell["line_no"] for cell in line["cells"]] == where
    page = create_app(str(founded_registry.path)).test_client().get("/reported/A").get_data(as_text=True)
    assert f'<span class="soft">line {where[1]}</span>' in page
    assert ("one result a line, from line 2 of it on" if laid_out == "long" else "this one in column B (2)") in page


def lines_of(registry: Registry, code: str) -> list[dict[str, object]]:
    with reading(registry) as connection:
        sample_id = connection.exec_driver_sql(f"SELECT sample_id FROM sample WHERE code = '{code}'").scalar()
        return reported_lines(connection, sample_id)


def workbook(path: Path, *sheets: tuple[str, list[list[object]]]) -> Path:
    book = Workbook()
    book.remove(book.active)
    for name, rows in sheets:
        sheet = book.create_sheet(name)
        for row in rows:
            sheet.append(row)
    book.save(path)
    return path


def test_reported_cells_come_from_the_sheet_they_were_read_from(founded_registry: Registry, tmp_path: Path) -> None:
    majors = [["Sample", "SiO2 (%)", "MgO (%)", "K2O (%)"], ["A", 70.1, 1, 2]]
    traces = [["Sample", "Rb (ppm)", "Sr (ppm)", "Y (ppm)"], ["A", 200, "<100", 25]]
    more = [["Sample", "Th (ppm)", "U (ppm)", "Pb (ppm)"], ["A", 20, 3, "<9"]]
    last = [["Sample", "Hf (ppm)", "Ta (ppm)", "W (ppm)"], ["A", 7, 1, "<2"]]
    first = workbook(tmp_path / "C-5.xlsx", ("Majors", majors), ("Traces", traces))
    import_files(founded_registry, [first], ImportOptions(create_samples=True))
    import_files(
        founded_registry, [workbook(tmp_path / "C-5b.xlsx", ("One", more), ("Two", last))], ImportOptions(add_to="C-5")
    )
    found = {line["batch"]: line for line in lines_of(founded_registry, "A")}
    texts = {batch: [cell["text"] for cell in line["cells"]] for batch, line in found.items()}  # type: ignore[attr-defined]
    assert texts == {
        "C-5": ["70.1", "1", "2"],
        "C-5/Traces": ["200", "<100", "25"],
        "C-5/2": ["20", "3", "<9"],
        "C-5/2/Two": ["7", "1", "<2"],
    }
    assert {batch: line["file_batch"] for batch, line in found.items()} == {
        "C-5": "C-5", "C-5/Traces": "C-5", "C-5/2": "C-5/2", "C-5/2/Two": "C-5/2",
    }  # fmt: skip
    assert set_state(founded_registry, "C-5/2", "withdrawn")["parts"] == ["C-5/2/Two"]
    assert set_state(founded_registry, "C-5/2", "active")["parts"] == ["C-5/2/Two"]
    assert set_state(founded_registry, "C-5", "withdrawn")["parts"] == ["C-5/Traces", "C-5/2", "C-5/2/Two"]


def test_reported_cells_are_cut_as_the_user_said(founded_registry: Registry, tmp_path: Path) -> None:
    """Invented: with commas as decimal signs and as separators of another column the file can be cut in two ways."""
    (tmp_path / "S.csv").write_text("Sample;SiO2 (%),x;MgO (%)\nA;65,1;2,0\nB;60,0;3,0\n")
    how = {tmp_path / "S.csv": FileChoice(reading=ReadingOptions(separator=";", decimal=","))}
    import_files(founded_registry, [tmp_path / "S.csv"], ImportOptions(create_samples=True), choices=how)
    (line,) = lines_of(founded_registry, "A")
    assert [cell["text"] for cell in line["cells"]][-1] == "2,0"  # type: ignore[attr-defined]
