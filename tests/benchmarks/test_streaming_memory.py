"""The memory that a large file takes: ten times the rows, the same memory within 20 %.

Invented wide files of 20 columns. Each reading and each import runs in a process of its own; its highest resident
memory is compared with that of the file a tenth as large. The import's registry takes 6 kB a row on disk, and as much
again while it is written: the everyday numbers of rows are moderate, and may be set from outside.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

ROOT = Path(__file__).resolve().parents[2]
ROWS = tuple(map(int, os.environ.get("PLUTONBOOK_MEMORY_ROWS", "10000,100000,1000000").split(",")))
ROWS_IMPORTED = tuple(map(int, os.environ.get("PLUTONBOOK_MEMORY_ROWS_IMPORTED", "40000,400000").split(",")))
LONG_ROWS, LONG_BYTES_A_LINE = (5_000, 50_000), 40
MOST_GROWTH = 1.2
HEADINGS = (
    "SiO2 (%),TiO2 (%),Al2O3 (%),MgO (%),CaO (%),Na2O (%),K2O (%),Rb (ppm),Sr (ppm),Y (ppm),Zr (ppm),Nb (ppm),Ba (ppm),"
    "La (ppm),Ce (ppm),Nd (ppm),Hf (ppm),Th (ppm),Ni (ppm),Cr (ppm)"
)
TYPICAL = np.array([55, 0.7, 16, 2.4, 4.6, 3.8, 2.6, *[15] * 13])

#: The highest memory of the process itself (``ru_maxrss`` begins with that of the process that started it).
PEAK = """
from pathlib import Path
def peak():
    lines = Path("/proc/self/status").read_text().splitlines()
    return next(int(line.split()[1]) * 1024 for line in lines if line.startswith("VmHWM"))
"""
READ = """
import json, sys
from registry.intake import read_path
reading = read_path(Path(sys.argv[1]))
assert reading is not None and reading.ok and len(reading.results) == int(sys.argv[2]), reading.problems[:3]
print(json.dumps(peak()))
"""

IMPORT = """
import json, sys
from registry import lab_files
from registry.founding import found
from registry.importing import ImportOptions, import_files
lab_files.LARGE_BYTES = 1
registry = found(sys.argv[1] + ".sqlite")
report = import_files(registry, [Path(sys.argv[1])], ImportOptions(batch="B1", create_samples=True))
assert report.recomputed == int(sys.argv[2])
print(json.dumps(peak()))
"""


def write(path: Path, rows: int) -> Path:
    random = np.random.default_rng(20261201)
    with path.open("w") as file:
        file.write(f"Sample,{HEADINGS}\n")
        for start in range(0, rows, 10_000):
            values = np.round(TYPICAL * random.lognormal(0.0, 0.08, (min(10_000, rows - start), len(TYPICAL))), 3)
            below = random.random(values.shape) < 0.02
            below[:, :7] = False
            for place, (row, marks) in enumerate(zip(values.tolist(), below.tolist(), strict=True)):
                cells = [f"<{value}" if mark else str(value) for value, mark in zip(row, marks, strict=True)]
                file.write(f"BM{start + place:07d},{','.join(cells)}\n")
    return path


def run(code: str, path: Path, rows: int) -> float:
    done = subprocess.run(
        [sys.executable, "-c", PEAK + code, str(path), str(rows)], capture_output=True, text=True, cwd=ROOT, check=False
    )
    assert done.returncode == 0, done.stderr
    return float(json.loads(done.stdout.splitlines()[-1]))


@pytest.mark.benchmark
@pytest.mark.skipif(not Path("/proc/self/status").exists(), reason="the kernel does not tell a process its peak")
def test_reading_ten_times_the_rows_takes_the_same_memory(tmp_path: Path) -> None:
    peaks = [run(READ, write(tmp_path / f"{rows}.csv", rows), rows) for rows in ROWS]
    print(", ".join(f"{rows:,} rows {peak / 1e6:.0f} MB" for rows, peak in zip(ROWS, peaks, strict=True)))
    assert peaks[-1] <= MOST_GROWTH * peaks[-2]


def write_long(path: Path, rows: int) -> Path:
    """The wide file's numbers, one a line: every analyte of the first samples, then every one of the next."""
    names = [heading.strip(")").split(" (") for heading in HEADINGS.split(",")]
    random = np.random.default_rng(20261201)
    with path.open("w") as file:
        file.write("Sample,Analyte,Value,Unit\n")
        for start in range(0, rows, 10_000):
            values = np.round(TYPICAL * random.lognormal(0.0, 0.08, (min(10_000, rows - start), len(TYPICAL))), 3)
            for place, (analyte, unit) in enumerate(names):
                column = values[:, place].tolist()
                file.writelines(f"BM{start + at:07d},{analyte},{value},{unit}\n" for at, value in enumerate(column))
    return path


@pytest.mark.benchmark
@pytest.mark.skipif(not Path("/proc/self/status").exists(), reason="the kernel does not tell a process its peak")
def test_reading_a_long_table_takes_a_few_bytes_a_line_more(tmp_path: Path) -> None:
    """Its lines may come in any order, so that of each sample the code, its first line and a bit a column are held."""
    peaks = [run(READ, write_long(tmp_path / f"{rows}.csv", rows), rows) for rows in LONG_ROWS]
    lines = [rows * len(TYPICAL) for rows in LONG_ROWS]
    grown = (peaks[-1] - peaks[-2]) / (lines[-1] - lines[-2])
    told = ", ".join(f"{count:,} lines {peak / 1e6:.0f} MB" for count, peak in zip(lines, peaks, strict=True))
    print(f"{told}: {grown:.0f} bytes a line (limit {LONG_BYTES_A_LINE})")
    assert grown <= LONG_BYTES_A_LINE


@pytest.mark.benchmark
@pytest.mark.skipif(not Path("/proc/self/status").exists(), reason="the kernel does not tell a process its peak")
def test_importing_ten_times_the_rows_takes_the_same_memory(tmp_path: Path) -> None:
    peaks = []
    for rows in ROWS_IMPORTED:
        path = write(tmp_path / f"{rows}.csv", rows)
        peaks.append(run(IMPORT, path, rows))
        for file in tmp_path.iterdir():
            file.unlink()
    print(
        ", ".join(f"{rows:,} rows {peak / 1e6:.0f} MB" for rows, peak in zip(ROWS_IMPORTED, peaks, strict=True))
        + f": {peaks[-1] / peaks[-2]:.2f}x (limit {MOST_GROWTH})"
    )
    assert peaks[-1] <= MOST_GROWTH * peaks[-2]
