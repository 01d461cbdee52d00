"""The pages say how often a verdict survives analytical error, and that this is no chance of ore. Data are invented."""

from __future__ import annotations

import re
from html import unescape
from typing import Any

import pytest
from flask.testing import FlaskClient

from registry.store.engine import Registry, reading, writing
from registry.surviving import draw_probabilities

SENTENCE = re.compile(r"Survives analytical error in ([a-z ]*\d+)\s% of (\d+) draws([^;]*); not a chance of ore\.")


def page_of(client: FlaskClient, address: str) -> str:
    """The words of a page without its tags."""
    text = re.sub(r"\s+", " ", re.sub(r"<[^>]*>", "", client.get(address).text))
    return unescape(text).replace("\N{NO-BREAK SPACE}", " ")


@pytest.fixture
def drawn(changed: tuple[Registry, FlaskClient]) -> Any:
    """The invented registry with its probabilities drawn, twenty times a sample, and one judged sample of it."""
    registry, client = changed
    with writing(registry) as connection:
        connection.exec_driver_sql("INSERT INTO setting (name, value) VALUES ('convention.probability_draws', '20')")
        connection.exec_driver_sql("DELETE FROM stale")
        connection.exec_driver_sql("UPDATE convention_set SET conventions = replace(conventions, '200.0', '20')")
    assert draw_probabilities(registry) > 0
    with reading(registry) as connection:
        query = (
            "SELECT s.code, i.name FROM sample AS s JOIN verdict AS v ON v.sample_id = s.sample_id "
            "JOIN intrusion AS i ON i.intrusion_id = s.intrusion_id WHERE v.verdict IN (0, 1) ORDER BY 1"
        )
        code, intrusion = connection.exec_driver_sql(query).fetchall()[0]
    return registry, client, code, intrusion


def test_sample_page_says_of_each_verdict_how_often_it_survives(drawn: Any) -> None:
    registry, client, code, _ = drawn
    with reading(registry) as connection:
        shares = connection.exec_driver_sql(
            "SELECT probability FROM verdict_sheet WHERE sample_code = ?", (code,)
        ).scalars()
        expected = sorted(round(100 * share) for share in shares)
    said = SENTENCE.findall(page_of(client, f"/samples/{code}"))
    assert sorted(int(percent) for percent, *_ in said) == expected
    assert {(draws, rest) for _, draws, rest in said} == {("20", "")}
    assert "/methods#probability" in client.get(f"/samples/{code}").text
    assert 'id="probability"' in client.get("/methods").text


def test_sample_page_says_that_it_was_drawn_before_a_change(drawn: Any) -> None:
    """Somebody writes meanwhile, so that the page cannot bring the sample up to date by itself."""
    registry, client, code, _ = drawn
    with writing(registry) as connection:
        connection.exec_driver_sql(f"UPDATE sample SET texture = 'fine' WHERE code = '{code}'")
    with writing(registry):
        said = SENTENCE.findall(page_of(client, f"/samples/{code}"))
    assert said and {rest for _, _, rest in said} == {", drawn before the last change"}


def test_intrusion_page_says_it_of_the_best_sample(drawn: Any) -> None:
    _, client, _, intrusion = drawn
    assert SENTENCE.search(page_of(client, f"/intrusions/{intrusion}"))


def test_target_page_counts_the_verdicts_that_survive(drawn: Any) -> None:
    registry, client, *_ = drawn
    with reading(registry) as connection:
        target, word, number, surviving = connection.exec_driver_sql(
            "SELECT target, verdict, count(*), sum(probability >= 0.9) FROM verdict_sheet "
            "WHERE verdict IN ('favourable', 'possible') GROUP BY 1, 2 ORDER BY 3 DESC"
        ).fetchall()[0]
    page = page_of(client, f"/targets/{target}")
    assert f"of {number} {word} verdict" in page and "That is not a chance of ore." in page
    assert re.search(rf"{word} verdicts? {surviving} survives? in nine draws of ten or more", page)


def test_pages_say_what_to_do_where_nothing_was_drawn(client: FlaskClient) -> None:
    page = page_of(client, "/targets/tin")
    assert "plutonbook refresh --probability" in page and "It is not a chance of ore." in page
    assert not SENTENCE.search(page_of(client, "/samples/PB-001"))
