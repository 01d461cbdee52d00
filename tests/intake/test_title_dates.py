"""Dates of a certificate in the lines above its table; the lines are invented in the trade's usual words."""

from __future__ import annotations

import pytest

from registry.intake import read_all
from registry.intake.titles import read_titles


@pytest.mark.parametrize(
    ("line", "received", "reported"),
    [
        ("Date reported: 2026-03-15", None, "2026-03-15"),
        ("Date Received: 5-Mar-2026, Date Finalised: 15-MAR-2026", "2026-03-05", "2026-03-15"),
        ("Received,28/02/2026", "2026-02-28", None),
        ("Report date = March 15, 2026", None, "2026-03-15"),
        ("Date of issue: 15.03.2026", None, "2026-03-15"),
        ("Samples received on 2026/03/05", "2026-03-05", None),
        ("Reported in ppm: 12 elements", None, None),
        ("Sampling date: 2026-01-02", None, None),
    ],
)
def test_title_lines_tell_when_samples_came_and_results_were_reported(
    line: str, received: str | None, reported: str | None
) -> None:
    titles = read_titles([line])
    assert (titles.received_on, titles.reported_on, titles.unclear_days) == (received, reported, ())


def test_date_that_can_be_read_in_two_ways_is_left_out_and_told() -> None:
    text = b"Certificate: Q-7\nDate reported: 03/04/2026\nDate received: 2026-03-01\nSample,Zr (ppm)\nA1,100\n"
    (reading,) = read_all("a.csv", text)
    assert reading.results is not None
    assert (reading.results.received_on, reading.results.reported_on) == ("2026-03-01", None)
    assert "stated above the table: Q-7, received on 2026-03-01" in reading.understood
    assert "the date '03/04/2026' above the table can be read in two ways and is left out" in reading.understood
