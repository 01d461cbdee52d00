"""Results of a long table gathered into rows, in whatever order they come. All codes and values are invented."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.intake import gathering
from registry.intake.gathering import GatheredRows

RESULTS = st.lists(
    st.tuples(st.sampled_from("ABCDEFGH"), st.integers(0, 130), st.text("0123456789.<\n", max_size=4)), max_size=60
)


def plainly(results: list[tuple[str, int, str]]) -> tuple[list[list[str]], list[int], dict[tuple[int, int], int]]:
    """The same with nothing but lists: rows, their first lines, and the line of each cell."""
    rows: list[dict[int, str]] = []
    codes: list[str] = []
    lines: list[int] = []
    where: dict[tuple[int, int], int] = {}
    for line, (code, column, text) in enumerate(results, start=2):
        row = next((at for at in range(len(rows)) if codes[at] == code and column not in rows[at]), None)
        if row is None:
            row = len(rows)
            rows.append({})
            codes.append(code)
            lines.append(line)
        rows[row][column] = text
        where[lines[row], column] = line
    return (
        [[code, "", *(row.get(at, "") for at in range(131))] for code, row in zip(codes, rows, strict=True)],
        lines,
        where,
    )


@given(results=RESULTS, bucket=st.integers(1, 5), waiting=st.integers(1, 7))
def test_gathered_rows_are_the_same_in_memory_and_on_disk(
    results: list[tuple[str, int, str]], bucket: int, waiting: int
) -> None:
    expected, lines, where = plainly(results)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(gathering, "BUCKET_ROWS", bucket)
        patch.setattr(gathering, "WAITING_RESULTS", waiting)
        gathered = GatheredRows(on_disk=True)
        for line, (code, column, text) in enumerate(results, start=2):
            gathered.add(code, "", column, text, line)
        gathered.width = 133
        for _ in range(2):  # it can be gone through again
            found = list(gathered.chunks())
            assert [row for chunk in found for row in chunk.rows] == expected
            assert [line for chunk in found for line in chunk.lines.tolist()] == lines
        assert (len(gathered), gathered.results) == (len(expected), len(results))
        assert all(gathered.line_of(*place) == line for place, line in where.items())
        assert gathered.line_of(1, 0) == 1 and gathered.line_of(999, 0) == 999
        assert all(gathered.line_of(line, 131) == line for line in lines)


def test_gathered_rows_keep_what_the_control_column_said_first() -> None:
    gathered = GatheredRows(on_disk=False)
    gathered.add("A", "BLANK", 0, "1", 2)
    gathered.add("A", "other", 1, "2", 3)
    gathered.width = 4
    assert [chunk.rows for chunk in gathered.chunks()] == [[["A", "BLANK", "1", "2"]]]


def test_gathered_rows_of_one_code_a_hundred_thousand_times_are_as_many_rows() -> None:
    """A row is found in a few steps however many its code has; else it would be thousands of millions."""
    gathered = GatheredRows(on_disk=True)
    for line in range(100_000):
        gathered.add("A", "", line % 2, str(line), line)
    gathered.width = 4
    rows = [row for chunk in gathered.chunks() for row in chunk.rows]
    assert len(rows) == 50_000
    assert rows[0] == ["A", "", "0", "1"] and rows[-1] == ["A", "", "99998", "99999"]
