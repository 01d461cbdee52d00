"""The two real laboratory files of the shared data; skipped where that folder is absent."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

from registry.intake import read_file

FOLDER = Path(__file__).resolve().parents[3] / "shared" / "data" / "lab_files"
pytestmark = pytest.mark.skipif(not FOLDER.is_dir(), reason="the shared laboratory files are not on this machine")


def read(name):
    return read_file(name, (FOLDER / name).read_bytes())


def test_chip_file_with_the_method_row_first_is_read():
    reading = read("An6_Chip.csv")
    assert reading.ok
    table = reading.results
    assert table.values.shape == (192, 36)
    assert table.sample_codes[0] == "Q001"
    assert table.sample_codes[-1] == "Q192"
    first = table.columns[0]
    assert (first.analyte, first.unit, first.method, first.digestion) == ("Au", "ppm", "OG44", "unknown")
    by_analyte = {column.analyte: column for column in table.columns}
    assert by_analyte["Al"].unit == "wt%"
    assert by_analyte["Al"].method == "ME-ICP41"
    assert table.values[0, :4].tolist() == [0.001, 0.2, 0.01, 2]
    assert table.qualifiers[0, :4].tolist() == [0, 1, 0, 1]
    assert np.isfinite(table.values).all()
    misplaced = [warning.column for warning in reading.warnings if "texts stand" in warning.what]
    assert misplaced == ["Au ppm", "Au Check ppm"]
    assert "Au ppm" in table.ignored
    controls = {code: text for code, text in zip(table.sample_codes, table.control_text, strict=True) if text}
    assert controls == dict.fromkeys(("Q024", "Q030", "Q067", "Q072"), "QA/QC; Blank Sample")
    assert any("doubtful" in sentence for sentence in reading.understood)
    assert 178 not in table.line_no  # the blank row


def test_core_file_with_repeated_gold_and_control_rows_is_read():
    reading = read("An7_Cores_DD.csv")
    assert reading.ok
    table = reading.results
    assert table.values.shape == (135, 52)
    assert table.sample_header == "Sample Discription Lab ID"
    assert len(set(table.sample_codes)) == 135
    gold = [position for position, column in enumerate(table.columns) if column.analyte == "Au"]
    assert len(gold) == 2
    assert table.values[0, gold].tolist() == [0.01, 0.02]
    assert table.qualifiers[0, gold].tolist() == [0, 1]
    controls = [text for text in table.control_text if text]
    assert controls.count("BLANK") == 5
    assert sum(text.startswith("DUPL OF") for text in controls) == 6
    assert "Interval (m) From" in table.ignored


@pytest.mark.parametrize("name", ["An6_Chip.csv", "An7_Cores_DD.csv"])
def test_every_number_of_the_file_is_the_number_read(name):
    """Against a plain look at every cell by the csv module and float()."""
    table = read(name).results
    with (FOLDER / name).open(encoding="utf-8", newline="") as stream:
        rows = list(csv.reader(stream))
    for row, line in enumerate(table.line_no.tolist()):
        cells = rows[line - 1]
        for column, about in enumerate(table.columns):
            text = cells[about.position]
            assert table.values[row, column] == float(text.lstrip("<>"))
            assert table.qualifiers[row, column] == (1 if text[0] == "<" else 2 if text[0] == ">" else 0)
