"""Tables in zip and gzip files: large ones are unpacked to disk and streamed, bombs refused. Invented tables."""

from __future__ import annotations

import gzip
import io
import os
import random
import subprocess
import sys
import tempfile
import zipfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from registry.intake import Reading, ReadingOptions, containers, read_all, read_file
from registry.intake.containers import BadContainer, unpack
from registry.intake.refused import source_of


def table(rows: int, seed: int = 1) -> bytes:
    source = random.Random(seed)
    lines = [f"K{n},{source.uniform(40, 75):.2f},{source.choice(['<5', '7', 'NA'])}" for n in range(rows)]
    return "\n".join(["Sample,SiO2 (%),Zr ppm", *lines]).encode() + b"\n"


def zipped(members: dict[str, bytes]) -> bytes:
    held = io.BytesIO()
    with zipfile.ZipFile(held, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in members.items():
            archive.writestr(name, content)
    return held.getvalue()


def gzipped(content: bytes) -> bytes:
    return gzip.compress(content)


@pytest.fixture
def small(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> Path:
    """Everything over 500 bytes counts as large; scratch files go where they can be counted."""
    folder = tmp_path / "scratch"
    folder.mkdir()
    monkeypatch.setattr(containers, "LARGE_BYTES", 500)
    monkeypatch.setattr(tempfile, "tempdir", str(folder))
    return folder


def problem_of(readings: list[Reading]) -> str:
    assert [reading.ok for reading in readings] == [False]
    return readings[0].problems[0].sentence()


@pytest.mark.parametrize("packed", ["zip", "gz", "gz in zip", "gz in gz"])
def test_large_table_out_of_an_archive_is_streamed_and_reads_as_it_does_by_itself(packed: str, small: Path) -> None:
    content = table(80)
    whole = read_file("r.csv", content).results
    file = {
        "zip": lambda: zipped({"r.csv": content, "readme.md": b"no table"}),
        "gz": lambda: gzipped(content),
        "gz in zip": lambda: zipped({"r.csv.gz": gzipped(content)}),
        "gz in gz": lambda: gzipped(gzipped(content)),
    }[packed]()
    watched: list[tuple[int, int]] = []
    (reading,) = read_all("a.zip", file, watch=lambda done, total: watched.append((done, total)))
    assert reading.ok and whole is not None and reading.results is not None
    assert watched[-1] == (len(content), len(content)), "it was read as a stream"
    assert list(reading.results.sample_codes) == whole.sample_codes
    np.testing.assert_array_equal(reading.results.values[:], whole.values)
    np.testing.assert_array_equal(reading.results.qualifiers[:], whole.qualifiers)
    assert list(small.iterdir()) == [], "nothing is left on disk"


def test_tables_of_an_archive_on_disk_are_read_without_loading_it(
    small: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "a.zip"
    path.write_bytes(zipped({"one.csv": table(80, 1), "two.csv": table(5, 2), "three.csv": table(90, 3)}))
    monkeypatch.setattr(Path, "read_bytes", lambda self: pytest.fail(f"{self} was read whole"))
    readings = read_all("a.zip", path)
    assert [(reading.part, len(reading.results or ())) for reading in readings] == [
        ("one.csv", 80), ("two.csv", 5), ("three.csv", 90),
    ]  # fmt: skip
    assert readings[0].place == "a.zip [one.csv]"
    assert path.exists() and list(small.iterdir()) == []


def test_large_text_in_another_encoding_is_read_in_memory_up_to_a_bound(
    small: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    content = table(80).replace(b"K1,", b"K\xe9,")
    (reading,) = read_all("a.zip", zipped({"r.csv": content}))
    assert reading.ok and reading.results is not None and reading.results.sample_codes[1] == "K\u00e9"
    monkeypatch.setattr(containers, "MOST_IN_MEMORY_BYTES", 600)
    said = problem_of(read_all("a.zip", zipped({"r.csv": content})))
    assert "r.csv is larger than 600 bytes unpacked and no plain text; save it as CSV in UTF-8" in said


def test_workbook_that_unpacks_beyond_its_bound_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(containers, "MOST_IN_MEMORY_BYTES", 600)
    said = problem_of(read_all("a.xlsx", zipped({"xl/workbook.xml": b" " * 700})))
    assert "the workbook unpacks to more than 600 bytes; save the sheets as CSV files" in said


@pytest.mark.parametrize("members", [{"a.csv": table(80)}, {"a.csv": table(30), "b.csv": table(60)}])
def test_archive_that_says_itself_to_be_too_large_is_not_unpacked(
    members: dict[str, bytes], small: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    file, options = zipped(members), ReadingOptions(unpacked_limit_bytes=900)
    monkeypatch.setattr(zipfile.ZipFile, "open", lambda *_: pytest.fail("it was unpacked"))
    assert "unpacks to more than 900 bytes" in problem_of(read_all("a.zip", file, None, options))


def test_gzip_that_is_too_large_is_given_up_on_the_way_and_leaves_nothing(small: Path) -> None:
    options = ReadingOptions(unpacked_limit_bytes=900)
    assert "unpacks to more than 900 bytes" in problem_of(read_all("a.gz", gzipped(table(800)), None, options))
    assert list(small.iterdir()) == []


@pytest.mark.parametrize("pack", [gzipped, lambda content: zipped({"a.csv": content})])
def test_archive_that_unpacks_to_more_than_any_table_does_is_refused_early(
    pack: Callable[[bytes], bytes], small: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(containers, "RATIO_FROM_BYTES", 2_000_000)
    content = b"1,2,3\n" * 5_000_000
    bomb = pack(content)
    written = 0
    write = containers._Room._write

    def counted(self: Any, out: Any, piece: bytes) -> None:
        nonlocal written
        written += len(piece)
        write(self, out, piece)

    monkeypatch.setattr(containers._Room, "_write", counted)
    assert "more than 250 times its size, as no table does" in problem_of(read_all("a", bomb))
    assert written < 252 * len(bomb) + 2_000_000 < 0.5 * len(content)
    assert list(small.iterdir()) == []


def test_full_disk_is_told_with_the_place_and_what_to_do(small: Path) -> None:
    class Full(io.BytesIO):
        def write(self, _: object) -> int:
            raise OSError(28, "No space left on device")

    with pytest.raises(BadContainer, match=r"no room to unpack the archive in .*scratch \(No space left on device\)"):
        containers._Room(100)._write(Full(), b"x")


def test_one_member_is_read_by_its_name_and_another_name_is_told(small: Path) -> None:
    file = zipped({"one.csv": table(80, 1), "in/two.csv": table(5, 2)})
    (reading,) = read_all("a.zip", file, None, ReadingOptions(sheet="in/two.csv"))
    assert reading.part is None and len(reading.results or ()) == 5
    said = problem_of(read_all("a.zip", file, None, ReadingOptions(sheet="three.csv")))
    assert "holds no table 'three.csv'; its tables are one.csv, in/two.csv" in said


def test_rows_of_a_large_member_are_gone_through_again(small: Path, tmp_path: Path) -> None:
    path = tmp_path / "a.zip"
    path.write_bytes(zipped({"one.csv": table(80, 1), "two.csv": table(90, 2)}))
    reading = read_all("a.zip", path)[1]
    source = source_of(path, reading)
    for _ in range(2):
        rows = [row for chunk in source.chunks() for row in chunk.rows]
        assert len(rows) == 91 and rows[1][0] == "K0"
    del source
    assert list(small.iterdir()) == [], "the unpacked file goes with its last reader"


def test_damaged_archives_are_told_and_leave_nothing(small: Path) -> None:
    for file in (gzipped(table(900))[:-900], zipped({"a.csv": table(900)})[:-30]):
        assert "damaged" in problem_of(read_all("a", file))
    whole = bytearray(zipped({"a.csv": table(900)}))
    whole[300] ^= 0xFF
    assert "damaged" in problem_of(read_all("a", bytes(whole)))
    assert list(small.iterdir()) == []
    with pytest.raises(BadContainer, match="archives lie within archives"):
        list(unpack(gzipped(gzipped(gzipped(gzipped(b"a")))), 10_000))


MEASURE = r"""
import re, sys
from pathlib import Path
from registry.intake import read_all
(reading,) = read_all("a", Path(sys.argv[1]))
assert reading.ok, reading.problems
print(re.search(r"VmHWM:\s*(\d+)", Path("/proc/self/status").read_text())[1], len(reading.results))
"""


@pytest.mark.slow
def test_memory_of_a_member_ten_times_larger_is_the_same_within_a_fifth(tmp_path: Path) -> None:
    """30 MB and 300 MB unpacked; the growth of a reading is some bytes a row for codes and lines."""
    source = random.Random(3)
    block = [",".join(f"{source.uniform(0, 90):.3f}" for _ in range(40)) for _ in range(1000)]
    head = "Sample," + ",".join(f"Cu run {number} (ppm)" for number in range(40))
    used = []
    for rows in (100_000, 1_000_000):
        path = tmp_path / f"{rows}.zip"
        archive = zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED, compresslevel=1)
        with archive, archive.open("r.csv", "w") as out:
            out.write(f"{head}\n".encode())
            for start in range(0, rows, 1000):
                out.write("".join(f"K{start + n},{line}\n" for n, line in enumerate(block)).encode())
        ran = subprocess.run(
            [sys.executable, "-c", MEASURE, str(path)], capture_output=True, text=True, check=True,
            env={**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)},
        )  # fmt: skip
        kilobytes, count = map(int, ran.stdout.split())
        assert count == rows
        used.append(kilobytes)
    assert used[1] < 1.2 * used[0], used
