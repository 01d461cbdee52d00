"""The other pages: success, absent id, empty registry; headers and methods on every route."""

from __future__ import annotations

import re
import subprocess
import sys
from html import unescape
from html.parser import HTMLParser
from http.client import HTTPConnection
from pathlib import Path

import pytest
from flask import Flask
from flask.testing import FlaskClient

from registry.store.engine import Registry, reading, writing
from web.security import HEADERS

ROOT = Path(__file__).resolve().parents[2]
PAGES = (
    "/", "/samples", "/samples.csv", "/samples/PB-001", "/samples/PB-003", "/samples/PB-020", "/batches",
    "/controls", "/controls?analyte=Zr",
    "/batches/Q-2041", "/targets", "/targets/porphyry_copper", "/targets/radiogenic_heat", "/methods", "/intrusions",
    "/sites", "/samples?sio2_wt_min=abc", "/samples/none", "/batches/none", "/targets/none", "/nowhere",
    "/intrusions/Aster stock", "/intrusions?target=tin", "/intrusions/none", "/sites/DH-1", "/sites/OC-7",
    "/sites/DH-1?value=sr_y&value=mg_number&target=tin", "/sites/none", "/settings", "/edit/sample/PB-001",
    "/static/site.css", "/static/site.js", "/static/favicon.svg", "/import", "/import/none", "/import/none/state.json",
    "/import/none/refused/0",
    "/work", "/work/none", "/work/none/state.json",
    "/batch/file/Q-2041", "/batch/withdraw/Q-2041", "/reported/PB-001", "/reported/none", "/diagrams", "/sign-in",
    "/map", "/map.geojson", "/map.gpkg",
    "/log", "/log?subject=sample PB-001&page=99",
)  # fmt: skip


class Page(HTMLParser):
    """Collects what must never or always stand on a page."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.headings: list[int] = []
        self.faults: list[str] = []
        self.labelled: set[str] = set()
        self.fields: list[tuple[str, str | None]] = []
        self.inside_label = 0
        self.feed(text)

    def handle_starttag(self, tag: str, attributes: list[tuple[str, str | None]]) -> None:
        given = dict(attributes)
        for name in given:
            if name == "style" or name.startswith("on"):
                self.faults.append(f"<{tag} {name}>")
        if tag == "style" or (tag == "script" and not given.get("src")):
            self.faults.append(f"<{tag}> inline")
        for name in ("src", "href", "action"):
            if (given.get(name) or "").startswith(("http:", "https:", "//", "javascript:")):
                self.faults.append(f"<{tag} {name}={given[name]}>")
        if re.fullmatch(r"h[1-6]", tag):
            self.headings.append(int(tag[1]))
        if tag == "label":
            self.inside_label += 1
            if given.get("for"):
                self.labelled.add(given["for"] or "")
        seen = given.get("type") != "hidden"  # what nobody sees needs no label
        if seen and tag in ("input", "select", "textarea") and not self.inside_label:
            self.fields.append((tag, given.get("id")))

    def handle_endtag(self, tag: str) -> None:
        if tag == "label":
            self.inside_label -= 1


def test_pages_every_route_is_among_the_walked_ones(app: Flask) -> None:
    walked = {app.url_map.bind("localhost").match(page.partition("?")[0])[0] for page in PAGES if page != "/nowhere"}
    assert walked == {rule.endpoint for rule in app.url_map.iter_rules() if "GET" in (rule.methods or ())}


@pytest.mark.parametrize("address", PAGES)
def test_pages_every_answer_carries_the_headers(client: FlaskClient, address: str) -> None:
    with client.get(address) as answer:
        for name, value in HEADERS.items():
            assert answer.headers.get(name) == value
        assert "unsafe" not in answer.headers["Content-Security-Policy"]
        assert answer.headers["Cache-Control"]
        assert "Set-Cookie" not in answer.headers


def test_pages_writing_to_a_reading_route_is_refused_with_headers(app: Flask) -> None:
    client = app.test_client()
    writing = {rule.rule for rule in app.url_map.iter_rules() if "POST" in (rule.methods or ())}
    for rule in (rule for rule in app.url_map.iter_rules() if rule.rule not in writing):
        with app.test_request_context():
            address = rule.build({name: "PB-001" for name in rule.arguments}, append_unknown=False)
        assert address is not None
        for method in ("POST", "PUT", "DELETE", "PATCH"):
            answer = client.open(address[1], method=method)
            assert answer.status_code == 405
            assert "GET" in answer.headers["Allow"]
            assert answer.headers["X-Frame-Options"] == "DENY"


NOT_PAGES = ("/static", "/samples.csv", "/map.", "/import/none/state", "/work/none/state")


@pytest.mark.parametrize("address", [page for page in PAGES if not page.startswith(NOT_PAGES)])
def test_pages_hold_nothing_inline_or_foreign_and_ordered_headings(client: FlaskClient, address: str) -> None:
    page = Page(client.get(address).text)
    assert page.faults == []
    assert page.headings[0] == 1
    assert page.headings.count(1) == 1
    assert all(later - earlier <= 1 for earlier, later in zip(page.headings, page.headings[1:], strict=False))
    assert [field for field in page.fields if field[1] not in page.labelled] == []


@pytest.mark.parametrize(
    ("address", "sentence", "near"),
    [
        ("/samples/PB-0011", "The registry holds no sample “PB-0011”.", "/samples/PB-001"),
        ("/samples/pb-007", "The registry holds no sample “pb-007”.", "/samples/PB-007"),
        ("/batches/Q-9", "The registry holds no batch “Q-9”.", "/batches/Q-2041"),
        ("/targets/gold", "The registry holds no target “gold”.", "/targets/tin"),
        ("/nowhere", "This site has no page at /nowhere.", "/samples"),
    ],
)
def test_pages_absent_name_gets_404_with_a_sentence_and_what_is_near(
    client: FlaskClient, address: str, sentence: str, near: str
) -> None:
    answer = client.get(address)
    assert answer.status_code == 404
    assert sentence in answer.text
    assert f'href="{near}"' in answer.text


def test_sample_page_opens_with_the_conclusion_then_reasons_and_evidence(client: FlaskClient) -> None:
    page = client.get("/samples/PB-001").text
    order = [page.index(words) for words in ("What it could be a source of", "Reasons:", ">Norm<", ">Composition<")]
    assert order == sorted(order)
    first = page[page.index('class="conclusion"') :]
    assert first.index("favourable") < first.index("Porphyry copper") < first.index("Sr/Y")
    assert "Before anything is decided on it" in page
    assert 'class="tick"' in page and 'class="dot"' in page


def test_sample_page_shows_censored_and_minimum_values_as_such(client: FlaskClient) -> None:
    page = client.get("/samples/PB-001").text
    assert re.search(r'class="element-value censored">&lt;5', page)
    assert "a minimum by four-acid digestion" in page
    assert 'href="/batches/Q-2041"' in page


def test_sample_page_says_why_values_are_missing(client: FlaskClient) -> None:
    page = unescape(client.get("/samples/PB-001").text)
    assert "an analyte it needs was not reported" in page
    assert "not_yet_computed" not in page


def test_pages_show_a_stale_sample_marked_while_another_writes(changed: tuple[Registry, FlaskClient]) -> None:
    registry, client = changed
    with writing(registry):
        assert "changed after these numbers were computed" in client.get("/samples/PB-003").text
        assert "changed after these numbers were computed" not in client.get("/samples/PB-004").text
        listed = client.get("/samples?text=PB-00").text
        assert listed.count('<tr class="stale">') == 1
        assert "numbers and verdict follow" in listed
        assert ",1\r\n" in client.get("/samples.csv?text=PB-003").text


def test_pages_bring_a_few_stale_samples_up_to_date_by_themselves(changed: tuple[Registry, FlaskClient]) -> None:
    registry, client = changed
    assert 'class="stale"' not in client.get("/samples?text=PB-00").text
    with reading(registry) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM stale").scalar() == 0
    assert ",0\r\n" in client.get("/samples.csv?text=PB-003").text


def test_sample_page_of_a_control_is_never_judged(client: FlaskClient) -> None:
    page = client.get("/samples/PB-020").text
    assert "A control sample tests the laboratory; it is never judged." in page
    assert 'class="conclusion"' not in page


def test_sample_page_with_a_slash_in_its_code_is_found(client: FlaskClient) -> None:
    page = client.get("/samples/no results/1").text
    assert "<h1>no results/1</h1>" in page
    assert "Nothing was reported for this sample yet" in page


def test_sample_page_hostile_name_comes_out_escaped(client: FlaskClient) -> None:
    listed = client.get("/samples?kind=float").text
    address = unescape(re.search(r'<th scope="row"><a href="([^"]+)"', listed).group(1))  # type: ignore[union-attr]
    page = client.get(address).text
    assert "&lt;script&gt;alert" in page
    assert "<script>alert" not in page


def test_sample_page_norm_list_sums_to_the_norm_total(client: FlaskClient) -> None:
    page = client.get("/samples/PB-001").text
    shown = [float(number) for number in re.findall(r'class="norm-wt">([0-9.]+)<', page)]
    total = re.search(r"it sums to ([0-9.]+), oxides", page)
    assert total is not None
    assert abs(sum(shown) - float(total.group(1))) < 0.005 * len(shown) + 0.01


def test_batch_page_shows_columns_with_digestion_and_lines(client: FlaskClient) -> None:
    page = client.get("/batches/Q-2041").text
    assert "four-acid" in page and "XRF" in page
    assert "120 lines" in page and 'href="/samples/PB-001"' in page


def test_target_page_weights_sum_to_100_and_name_sources(client: FlaskClient) -> None:
    page = client.get("/targets/porphyry_copper").text
    assert sum(int(points) for points in re.findall(r'data-label="Points" class="number">(\d+)<', page)) == 100
    assert "Loucks 2014" in page and "provisional limit" in page
    assert "A verdict is a screening aid" in page


def test_methods_page_names_unit_method_and_source_of_a_quantity(client: FlaskClient) -> None:
    page = client.get("/methods").text
    row = page[page.index('<tr id="differentiation_index"') :].split("</tr>")[0]
    assert "wt%" in row and "Thornton" in row and "1960" in row


def test_methods_page_anchors_stand_once(client: FlaskClient) -> None:
    anchors = re.findall(r' id="([^"]+)"', client.get("/methods").text)
    assert len(anchors) == len(set(anchors))


def test_sample_page_links_lead_to_anchors_of_the_methods_page(client: FlaskClient) -> None:
    wanted = set(re.findall(r'href="/methods#([^"]+)"', client.get("/samples/PB-001").text))
    anchors = set(re.findall(r' id="([^"]+)"', client.get("/methods").text))
    assert len(wanted) > 30
    assert wanted <= anchors


def test_places_pages_count_samples_and_verdicts(client: FlaskClient) -> None:
    page = client.get("/intrusions").text
    assert "Aster stock" in page and "20 favourable" in page
    assert re.search(r"DH-1.*?data-label=\"Samples\" class=\"number\"><a [^>]*>84<", client.get("/sites").text, re.S)


@pytest.mark.parametrize("address", ["/batches", "/intrusions", "/sites", "/targets"])
def test_pages_of_an_empty_registry_say_what_to_do(empty_client: FlaskClient, address: str) -> None:
    answer = empty_client.get(address)
    assert answer.status_code == 200
    assert re.search(r"The registry holds no [a-z ]+\. |The registry holds no [a-z ]+ yet\.", answer.text)


def test_pages_fault_in_the_program_is_told_without_a_traceback(app: Flask, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(*_: object) -> None:
        raise RuntimeError("secret detail")

    monkeypatch.setattr("web.batches.reading.batch_list", broken)
    monkeypatch.setattr(app, "testing", False)
    monkeypatch.setitem(app.config, "PROPAGATE_EXCEPTIONS", False)
    answer = app.test_client().get("/batches")
    assert answer.status_code == 500
    assert "fault in the program" in answer.text
    assert "secret detail" not in answer.text and "Traceback" not in answer.text


def test_serving_on_this_machine_refuses_a_foreign_host_name(invented_registry: Path) -> None:
    program = (
        "import sys; from web.serving import serve; serve(sys.argv[1], '127.0.0.1', 0, lambda a: print(a, flush=True))"
    )
    server = subprocess.Popen(
        [sys.executable, "-c", program, str(invented_registry)], stdout=subprocess.PIPE, text=True, cwd=ROOT
    )
    try:
        assert server.stdout is not None
        address = server.stdout.readline().strip().rstrip("/")
        for host, status in (("127.0.0.1", 200), ("localhost:8000", 200), ("elsewhere.example", 400)):
            connection = HTTPConnection(address.removeprefix("http://"), timeout=30)
            connection.request("GET", "/batches", headers={"Host": host})
            answer = connection.getresponse()
            assert (host, answer.status) == (host, status)
            assert b"Traceback" not in answer.read()
            connection.close()
    finally:
        server.terminate()
        server.wait(timeout=30)
        server.stdout.close() if server.stdout else None
