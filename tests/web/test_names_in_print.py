"""No page shows a column's raw name where a person reads. The demo and its numbers are invented.

Names stand where they are meant: as ``code`` in the dictionary of the methods page, and as batches and files, which a
person named.
"""

from __future__ import annotations

import re
import shutil
import sqlite3
from collections.abc import Iterator
from html.parser import HTMLParser
from pathlib import Path

import pytest
from flask.testing import FlaskClient

from registry.petrology.catalogue import QUANTITIES
from registry.targets.definition import TARGET_CODES, load_definition
from web import create_app
from web.wording import column_words, readable

_RAW_NAME = re.compile(r"\w*[A-Za-z]_\w+|\b(?:sio2|tio2|al2o3|na2o|k2o|p2o5|feot|mgo|cao)\b")
_POWER_OF_TEN = re.compile(r"\d(?:\.\d+)?e[-+]?\d")
_ATTRIBUTES = ("title", "aria-label", "alt", "placeholder")


class _Read(HTMLParser):
    """What is read on a page, with titles and labels; ``code`` and the like are left out."""

    def __init__(self) -> None:
        super().__init__()
        self.texts: list[str] = []
        self.links: list[str] = []
        self._hidden = 0

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self._hidden += tag in ("script", "style", "code")
        known = dict(attrs)
        self.texts += [known[name] or "" for name in _ATTRIBUTES if name in known]
        if tag == "a":
            self.links.append((known.get("href") or "").split("#")[0])

    def handle_endtag(self, tag: str) -> None:
        self._hidden -= tag in ("script", "style", "code")

    def handle_data(self, data: str) -> None:
        if not self._hidden:
            self.texts.append(data)


def read(client: FlaskClient, address: str) -> _Read:
    answer = client.get(address)
    assert answer.status_code == 200, address
    page = _Read()
    page.feed(answer.text)
    return page


@pytest.fixture(scope="module")
def demo(demo_file: Path, tmp_path_factory: pytest.TempPathFactory) -> Iterator[tuple[FlaskClient, sqlite3.Connection]]:
    path = Path(shutil.copy(demo_file, tmp_path_factory.mktemp("names") / "demo.sqlite"))
    application = create_app(str(path))
    rows = sqlite3.connect(path)
    yield application.test_client(), rows
    rows.close()
    application.extensions["registry"].close()


def _one_of_each_kind(rows: sqlite3.Connection) -> list[str]:
    """One sample for every set of outcomes that occurs with a verdict."""
    found = rows.execute(
        "SELECT min(s.code) FROM verdict AS v JOIN sample AS s ON s.sample_id = v.sample_id "
        "GROUP BY v.target_id, v.verdict, json_extract(v.reasons, '$.outcomes')"
    ).fetchall()
    return sorted({code for (code,) in found})


@pytest.mark.slow
def test_demo_pages_show_no_raw_name_and_no_computer_spelling_of_powers(
    demo: tuple[FlaskClient, sqlite3.Connection],
) -> None:
    client, rows = demo
    addresses = ["/", "/samples", "/intrusions", "/sites", "/targets", "/methods", "/settings", "/batches", "/controls"]
    addresses += [f"/targets/{code}" for code in TARGET_CODES]
    addresses += [f"/intrusions?target={code}" for code in TARGET_CODES]
    addresses += [f"/intrusions/{name}" for (name,) in rows.execute("SELECT name FROM intrusion")]
    addresses += [
        f"/sites/{code}" for (code,) in rows.execute("SELECT code FROM site WHERE kind = 'drill_hole' LIMIT 4")
    ]
    samples = _one_of_each_kind(rows)
    assert len(samples) > 20
    addresses += [f"/samples/{code}" for code in samples]
    own = {
        word for row in rows.execute("SELECT code, file_name FROM batch") for word in re.findall(r"\w+", " ".join(row))
    }
    found: dict[str, str] = {}
    for address in addresses:
        for text in read(client, address).texts:
            names = set(_RAW_NAME.findall(text)) - own
            found |= {name: f"{address}: {text.strip()[:120]}" for name in (*names, *_POWER_OF_TEN.findall(text))}
    assert found == {}


@pytest.mark.parametrize("code", TARGET_CODES)
def test_every_quantity_of_a_definition_has_words(code: str) -> None:
    definition = load_definition(code)
    labels = {quantity.name: quantity.label for quantity in QUANTITIES}
    needed = [name for need in definition.needs for name in need.any_of]
    for name in {*definition.quantities(), *needed, *definition.supply}:
        for words in (column_words(name), labels.get(name, "")):
            assert not _RAW_NAME.search(words), (name, words)
    for condition in definition.conditions():
        assert not _RAW_NAME.search(readable(condition.text)), condition.text
