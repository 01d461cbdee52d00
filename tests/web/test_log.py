"""The log of changes: order, narrowing, pages, an empty one, hostile texts. The entries are invented."""

from __future__ import annotations

import re
from typing import Any

import pytest
from flask.testing import FlaskClient
from markupsafe import escape

HOSTILE = '"><script>alert(1)</script>'


def entry(site: Any, account: str, action: str, subject: str | None, detail: str | None) -> None:
    site.sql(
        "INSERT INTO audit_entry (at, account, action, subject, detail) VALUES ('2026-03-04T09:12:00Z', ?, ?, ?, ?)",
        account, action, subject, detail,
    )  # fmt: skip


def test_log_shows_who_changed_what_newest_first(writable: Any) -> None:
    entry(writable, "berit", "import", "batch C-1", "c1.csv: 12 results")
    entry(writable, "anna", "edit", "sample PB-002", "lithology gabbro -> norite")
    page = writable.client.get("/log").text
    assert "2 changes, newest first." in page
    assert page.index("lithology gabbro → norite") < page.index("c1.csv: 12 results")
    assert page.count("2026-03-04 09:12") == 2


def test_log_is_narrowed_to_a_thing_a_person_or_a_sort(writable: Any) -> None:
    entry(writable, "berit", "edit", "sample PB-002", "from berit")
    entry(writable, "anna", "edit", "sample PB-0021", "from anna")
    entry(writable, "anna", "setting", "loi_warn_wt", "3 -> 2.5")
    for query, told, there, not_there in (
        ({"subject": "sample PB-002"}, "1 change of sample PB-002, newest first", "from berit", "from anna"),
        ({"account": "anna"}, "2 changes by anna, newest first", "from anna", "from berit"),
        ({"action": "setting"}, "1 change, of the sort “setting”, newest first", "3 → 2.5", "from anna"),
    ):
        page = writable.client.get("/log", query_string=query).text
        assert told in page
        assert there in page and not_there not in page


def test_log_of_many_changes_has_pages_and_ends(writable: Any) -> None:
    for number in range(101):
        entry(writable, "anna", "edit", "sample PB-002", f"edit number {number}.")
    first, second = (writable.client.get(f"/log?account=anna&page={page}").text for page in (1, 2))
    assert "edit number 100." in first and "edit number 0." not in first
    assert "edit number 0." in second and "edit number 1." not in second
    assert 'href="/log?page=2&amp;account=anna"' in first
    beyond = writable.client.get("/log?account=anna&page=3")
    assert beyond.status_code == 200
    assert "The log ends before this page." in beyond.text
    assert 'href="/log?page=2&amp;account=anna">Later' in beyond.text


@pytest.mark.parametrize("page", ["0", "-5", "x", "1.5", "9" * 40, ""])
def test_log_page_that_is_no_number_of_one_is_the_nearest(writable: Any, page: str) -> None:
    entry(writable, "anna", "edit", "sample PB-002", "the one")
    answer = writable.client.get("/log", query_string={"page": page})
    assert answer.status_code == 200
    assert ("the one" in answer.text) == (page != "9" * 40)


def test_log_without_entries_says_what_will_stand_there(client: FlaskClient) -> None:
    assert "Nothing was changed yet." in client.get("/log").text
    assert "The log holds no such change." in client.get("/log?subject=sample none").text


def test_log_of_hostile_texts_comes_out_escaped_and_cut(writable: Any) -> None:
    entry(writable, HOSTILE, HOSTILE, HOSTILE, HOSTILE + "x" * 2000)
    entry(writable, "anna", "edit", None, None)
    for query in ({}, dict.fromkeys(("subject", "account", "action"), HOSTILE), {"subject": "a\0b' OR 1=1"}):
        answer = writable.client.get("/log", query_string=query)
        assert answer.status_code == 200
        assert "<script>alert" not in answer.text
    assert str(escape(HOSTILE)) in writable.client.get("/log").text
    assert len(max(re.findall("x+", writable.client.get("/log").text), key=len)) < 600


@pytest.mark.parametrize(
    ("address", "link"),
    [
        ("/samples/PB-001", "/log?subject=sample+PB-001"),
        ("/sites/DH-1", "/log?subject=site+DH-1"),
        ("/intrusions/Aster stock", "/log?subject=intrusion+Aster+stock"),
        ("/batches/Q-2041", "/log?subject=batch+Q-2041"),
        ("/settings", "/log?action=setting"),
        ("/edit/area/North Block", "/log?subject=area+North+Block"),
        ("/", "/log"),
    ],
)
def test_log_is_linked_from_what_can_be_changed(writable: Any, address: str, link: str) -> None:
    assert f'href="{link}"' in writable.client.get(address).text.replace("%20", "+")
