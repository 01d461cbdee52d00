"""The start page: what stands out, what needs attention, what came in; its summaries follow every change."""

from __future__ import annotations

import re
from html import unescape
from itertools import pairwise
from typing import Any

from flask.testing import FlaskClient


def words(page: str) -> str:
    return re.sub(r"\s+", " ", unescape(re.sub(r"<[^>]+>", " ", page)))


def test_start_page_answers_and_is_linked_from_every_header(client: FlaskClient) -> None:
    page = client.get("/")
    assert page.status_code == 200
    assert '<a class="top-name" href="/" aria-current="page">' in page.text
    assert '<a class="top-name" href="/">' in client.get("/samples").text


def test_start_page_counts_what_the_registry_holds(client: FlaskClient) -> None:
    """122 invented samples, of them six blanks (conftest)."""
    text = words(client.get("/").text)
    assert "116 samples and 6 control samples from 2 sites and 2 intrusions in 2 areas" in text
    assert "reported on 1 certificate" in text


def test_start_page_leading_intrusion_is_the_first_of_the_ranking(client: FlaskClient) -> None:
    page = client.get("/").text
    row = page[page.index(">Porphyry copper</a>") :].split("</tr>")[0]
    first = re.search(
        r'class="rank">1.</span> <a href="([^"]+)"', client.get("/intrusions?target=porphyry_copper").text
    )
    assert first is not None
    assert f'href="{first.group(1)}#porphyry_copper"' in row
    assert "favourable" in row
    assert "What stands out" in page and page.count('class="cautions"') == 1


def test_start_page_tells_what_is_lacking_worth_most_first_and_what_has_no_results(client: FlaskClient) -> None:
    text = words(client.get("/").text)
    assert "2 samples that no laboratory has reported on" in text
    part = text[text.index("To determine next, worth most first") :]
    told = r": open in (\d+) undecided verdicts? for granite-related[^:]*?, (\d+) of 100 points in each"
    assert re.search(f"W by fusion ICP-MS[^:]*{told}", part)
    shown = re.findall(r": open in (\d+) undecided verdicts? for [^:]*?, (\d+) of 100 points in each", part)
    worth = [int(verdicts) * int(points) for verdicts, points in shown]
    rounding = max(int(verdicts) for verdicts, _ in shown)
    assert len(worth) > 1 and all(later <= earlier + rounding for earlier, later in pairwise(worth))


def test_start_page_shows_failed_controls_and_last_batches(writable: Any) -> None:
    column = writable.sql("SELECT batch_column_id FROM batch_column WHERE analyte = 'Sr'")[0][0]
    writable.sql("UPDATE control_state SET state = 2 WHERE column_id = ?", column)
    text = words(writable.client.get("/").text)
    assert re.search(r"Failed controls Q-2041 ?: Sr", text)
    assert "Q-2041 , Invented Laboratory 2026-03-04, 120 lines; controls: fails" in text


def test_start_page_summaries_are_kept_until_somebody_changes_the_registry(writable: Any, monkeypatch: Any) -> None:
    asked = []
    from registry.store.reading import start

    real = start.unfit_samples
    monkeypatch.setattr("web.start.reading.unfit_samples", lambda connection: (asked.append(1), real(connection))[1])
    for _ in range(3):
        writable.client.get("/")
    assert len(asked) == 1
    writable.sql("UPDATE derived SET fitness = 'unfit', fitness_cause = 'invented cause' WHERE sample_id = 1")
    assert "1 sample : invented cause" in words(writable.client.get("/").text).replace("sample:", "sample :")
    assert len(asked) == 2


def test_start_page_marks_waiting_samples(writable: Any, monkeypatch: Any) -> None:
    monkeypatch.setattr("web.reading.refresh_a_few", lambda registry: 0)
    writable.sql("UPDATE sample SET lithology = 'dunite' WHERE code IN ('PB-001', 'PB-002')")
    assert "2 samples to be computed anew" in words(writable.client.get("/").text)


def test_start_page_of_an_empty_registry_says_what_to_do(empty_client: FlaskClient) -> None:
    page = empty_client.get("/")
    assert page.status_code == 200
    assert "The registry is empty" in page.text and "plutonbook import" in page.text
