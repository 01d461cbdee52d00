"""Reading a file from disk as a stream gives what reading its bytes gives. Invented tables: layouts and branches."""

from __future__ import annotations

import random
from pathlib import Path

import numpy as np
import pytest

from registry.intake import Reading, ReadingOptions, read_file, read_path, spooled
from registry.intake.checks import median_of_parts
from registry.intake.codes import tidy_codes
from registry.intake.spooled import PackedTexts, SpooledArray, repeated


@pytest.fixture(autouse=True)
def small_blocks(monkeypatch: pytest.MonkeyPatch) -> None:
    """Several blocks and a part of one from few rows."""
    monkeypatch.setattr(spooled, "BLOCK_ROWS", 7)


def table(rows: int, seed: int, codes: str = "K{:03d}") -> str:
    """Numbers, limits, blanks, words, a text here and there, notes and a summary below."""
    source = random.Random(seed)
    lines = ["Certificate,AB-77", "Sample,SiO2 (%),MnO (%),Zr ppm,Zr_ppm,Type,Sn (ppm)"]
    for number in range(rows):
        cells = [f"{source.uniform(40, 75):.2f}", f"{source.uniform(0, 1):.3f}"]
        cells += [source.choice(["<5", "120", "", "NA", "1e2", "> 900", "1,5 "]).replace(",", ".") for _ in range(2)]
        cells += [source.choice(["", "", "BLANK", "DUPL OF K001"]), ""]
        lines.append(",".join([codes.format(number % 29), *cells]))
    return "\n".join([*lines, "", "Mean,60,0.5,100,100,,", ",a note,,,,,"]) + "\n"


def assert_same(streamed: Reading | None, whole: Reading) -> None:
    assert streamed is not None
    assert [one.sentence() for one in streamed.problems] == [one.sentence() for one in whole.problems]
    assert streamed.understood == whole.understood
    assert streamed.refused_lines == whole.refused_lines
    assert streamed.recipe == whole.recipe
    assert (streamed.results is None) == (whole.results is None)
    if whole.results is None or streamed.results is None:
        return
    one, other = streamed.results, whole.results
    assert list(one.sample_codes) == list(other.sample_codes)
    assert one.columns == other.columns and one.control_text == other.control_text
    assert (one.certificate, one.lab, one.ignored, one.sample_header) == (
        other.certificate, other.lab, other.ignored, other.sample_header,
    )  # fmt: skip
    np.testing.assert_array_equal(one.line_no[:], other.line_no)
    assert one.line_no.tolist() == other.line_no.tolist()
    np.testing.assert_array_equal(one.values[:], other.values)
    np.testing.assert_array_equal(one.qualifiers[:], other.qualifiers)


CASES = {
    "plain": table(40, 1),
    "float codes": table(40, 2, "{}.0"),
    "quoted": table(40, 3).replace("BLANK", '"BLANK, coarse"'),
    "decimal comma": table(40, 4).replace(",", ";").replace(".", ","),
    "byte-order mark and accents": "\ufeff" + table(40, 5, "Kä{}"),
    "impossible values": table(40, 6).replace("0.5", "3002"),
    "texts among numbers": table(40, 7).replace("120", "much"),
    "carriage returns": table(40, 8).replace("\n", "\r\n"),
    "headings only": "Sample,SiO2 (%)\n",
    "nothing known": "a,b\n1,2\n",
}


@pytest.mark.parametrize("name", CASES)
def test_read_path_of_any_table_reads_what_read_file_reads(name: str, tmp_path: Path) -> None:
    path = tmp_path / "r.csv"
    path.write_bytes(CASES[name].encode())
    options = ReadingOptions(listed=3)
    watched: list[int] = []

    streamed = read_path(path, None, options, watch=watched.append)

    assert_same(streamed, read_file("r.csv", path.read_bytes(), None, options))
    assert watched and max(watched) == path.stat().st_size


def test_read_path_of_master_data_reads_what_read_file_reads(tmp_path: Path) -> None:
    path = tmp_path / "samples.csv"
    path.write_text("sample_code,sample_kind,lithology\nA,outcrop,granite\nB,core,tonalite\n")
    streamed, whole = read_path(path), read_file("samples.csv", path.read_bytes())
    assert streamed is not None and streamed.master is not None and whole.master is not None
    assert streamed.master.rows == whole.master.rows and streamed.kind == whole.kind == "samples"


@pytest.mark.parametrize(
    "data",
    ["Sample,SiO2 (%)\nK,60\n".encode("utf-16"), b"Sample,SiO2 (%)\nK\xe9,60\n", b"PK\x03\x04", b"\x1f\x8b", b"", b" "],
)
def test_read_path_of_anything_but_plain_text_leaves_it_to_read_all(data: bytes, tmp_path: Path) -> None:
    path = tmp_path / "r.csv"
    path.write_bytes(data)
    assert read_path(path) is None


def test_read_path_of_an_unknown_kind_says_so(tmp_path: Path) -> None:
    with pytest.raises(ValueError, match="unknown kind of file 'rocks'"):
        read_path(tmp_path / "r.csv", "rocks")


@pytest.mark.parametrize("rows", [0, 1, 6, 7, 8, 21, 40])
def test_spooled_array_is_read_like_an_array(rows: int) -> None:
    whole = np.random.default_rng(rows).random((rows, 5))
    kept = SpooledArray(5, np.float64)
    for start in range(0, rows, 3):
        kept.append(whole[start : start + 3])
    assert kept.shape == whole.shape and len(kept) == rows and kept.size == whole.size
    some = np.random.default_rng(1).integers(0, max(rows, 1), 9 if rows else 0)
    for key in (slice(None), slice(2, 9), slice(5, None, 2), some, whole[:, 0] > 0.5):
        np.testing.assert_array_equal(kept[key], whole[key])
    np.testing.assert_array_equal(kept[:, 3], whole[:, 3])
    np.testing.assert_array_equal(kept[:, [4, 1]][:], whole[:, [4, 1]])
    np.testing.assert_array_equal(kept[:, [4, 1]][:, 1], whole[:, 1])
    with pytest.raises(IndexError, match="by rows, or by whole columns"):
        kept[1:2, 0]


@pytest.mark.parametrize("count", [4, 5, 100, 1001, 5000])
@pytest.mark.parametrize("kind", ["spread", "equal", "near"])
def test_median_of_parts_is_that_of_the_whole(count: int, kind: str) -> None:
    random = np.random.default_rng(count)
    numbers = {
        "spread": random.lognormal(2.0, 8.0, count),
        "equal": np.full(count, 3.25),
        "near": 1e-300 * (1.0 + np.round(random.random(count), 2)),
    }[kind]
    found = median_of_parts(lambda: np.array_split(numbers, 13), at_once=90)
    assert found == (None if count < 5 else np.median(numbers))


def test_packed_texts_are_read_like_a_list() -> None:
    texts = [f"K{number}\n'é\"\ud800" for number in range(23)]
    packed = PackedTexts(texts)
    packed.extend(["last"])
    texts.append("last")
    assert list(packed) == texts and len(packed) == 24
    assert [packed[place] for place in (0, 6, 7, 20, -1)] == [texts[place] for place in (0, 6, 7, 20, -1)]
    assert packed[5:16:2] == texts[5:16:2]
    with pytest.raises(IndexError, match="no text 24 among 24"):
        packed[24]


def test_repeated_texts_are_told_with_their_first_place() -> None:
    texts = ["b", "a", "c", "a", "b", "a"]
    assert repeated(texts) == repeated(PackedTexts(texts)) == {"b": (0, 2), "a": (1, 3)}
    assert repeated(["a", "b"]) == {} and repeated([]) == {}


@pytest.mark.parametrize(
    ("codes", "freed"), [(["1.0", " 2.0", "A"], 2), (["1.0", "2"] * 9, 0), (["A"], 0), (["3-Mar-20", "1.0"], 1)]
)
def test_tidy_codes_of_packed_texts_is_that_of_a_list(codes: list[str], freed: int) -> None:
    tidy, count, eaten = tidy_codes(PackedTexts(codes * 5))
    assert isinstance(tidy, PackedTexts)
    assert (list(tidy), count, eaten) == tidy_codes(codes * 5)
    assert count == freed * 5
