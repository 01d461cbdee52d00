"""Accounts on the site: who may write, signing in and out, who did what. Names and passwords are invented."""

from __future__ import annotations

import io
import re
import shutil
import sqlite3
from collections.abc import Iterator
from html import unescape
from pathlib import Path
from typing import Any
from urllib.parse import parse_qs, urlsplit

import pytest
from flask import Flask
from flask.testing import FlaskClient

from registry import accounts, auditing
from registry.errors import RegistryBusy
from registry.store.engine import open_registry
from web import create_app, writing
from web.accounts import own_address
from web.security import HEADERS

PASSWORD = "seven grey pebbles"
pytestmark = pytest.mark.usefixtures("cheap_hashes")
HOSTILE = '"><script>alert(1)</script>'


class Site:
    """A site over a copy of the invented registry, with the accounts anna and berit; ``client`` has not signed in."""

    def __init__(self, path: Path, *, writable: bool = True) -> None:
        self.path = path
        self.app = create_app(str(path), writable=writable, drafts=path.parent / "drafts")
        self.client = self.app.test_client()

    @property
    def registry(self) -> Any:
        return self.app.extensions["registry"]

    def sign_in(self, name: str = "anna", password: str = PASSWORD, **more: str) -> Any:
        sent = {"name": name, "password": password, "csrf_token": token(self.client), **more}
        return self.client.post("/sign-in", data=sent)

    def sql(self, query: str, *bound: Any) -> list[tuple[Any, ...]]:
        connection = sqlite3.connect(self.path)
        try:
            found = connection.execute(query, bound).fetchall()
            connection.commit()
            return found
        finally:
            connection.close()

    def edit(self, **fields: str) -> Any:
        page = self.client.get("/edit/sample/PB-002").text
        known = {name: field(page, name) for name in ("csrf_token", "row_version")}
        return self.client.post("/edit/sample/PB-002", data=known | fields)


def token(client: FlaskClient, address: str = "/sign-in") -> str:
    return field(client.get(address).text, "csrf_token")


def field(page: str, name: str) -> str:
    found = re.search(rf'name="{name}" value="([^"]*)"', page)
    assert found is not None, f"no field {name}"
    return unescape(found[1])


@pytest.fixture(scope="module")
def with_accounts(invented_registry: Path, cheap_hashes: None, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The invented registry with two accounts, made once."""
    path = tmp_path_factory.mktemp("accounts") / "accounts.sqlite"
    registry = open_registry(shutil.copy(invented_registry, path))
    for name in ("anna", "berit"):
        accounts.add(registry, name, PASSWORD)
    with registry.writer.connect() as connection:
        connection.exec_driver_sql("COMMIT")
        connection.exec_driver_sql("PRAGMA wal_checkpoint(TRUNCATE)")
    registry.close()
    return path


@pytest.fixture
def site(with_accounts: Path, tmp_path: Path) -> Iterator[Site]:
    made = Site(Path(shutil.copy(with_accounts, tmp_path / "site.sqlite")))
    yield made
    made.registry.close()


def writing_routes(app: Flask) -> list[str]:
    """An address of every route that takes a POST and changes something."""
    with app.test_request_context():
        made = [
            rule.build(dict.fromkeys(rule.arguments, "withdraw" if "change" in rule.arguments else "PB-001"))
            for rule in app.url_map.iter_rules()
            if "POST" in (rule.methods or ()) and rule.endpoint not in writing.OPEN_ENDPOINTS
        ]
    return sorted({address[1] for address in made if address is not None})


def tables(path: Path) -> dict[str, Any]:
    """Everything in the registry, to see that nothing was changed."""
    connection = sqlite3.connect(path)
    try:
        names = [row[0] for row in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")]
        return {name: sorted(map(repr, connection.execute(f'SELECT * FROM "{name}"'))) for name in names}
    finally:
        connection.close()


# Who may write


def test_accounts_every_change_of_nobody_signed_in_is_refused_and_changes_nothing(site: Site) -> None:
    before = tables(site.path)
    routes = writing_routes(site.app)
    assert len(routes) >= 6
    for address in routes:
        answer = site.client.post(address, data={"files": (io.BytesIO(b"a,b\n"), "a.csv"), "lithology": "x"})
        assert (address, answer.status_code) == (address, 403)
        assert "Nothing was changed: this needs a signed-in account." in answer.text
        assert 'name="password"' in answer.text
        for name, value in HEADERS.items():
            assert answer.headers.get(name) == value
    assert tables(site.path) == before
    assert not (site.path.parent / "drafts").exists()


def test_accounts_every_change_of_a_signed_in_account_needs_the_token_of_its_session(site: Site) -> None:
    site.sign_in()
    before = tables(site.path)
    for address in writing_routes(site.app):
        for sent in ({}, {"csrf_token": "forged"}):
            answer = site.client.post(address, data={"lithology": "x", **sent})
            assert (address, answer.status_code) == (address, 400)
            assert "The form is out of date" in answer.text
    assert tables(site.path) == before


@pytest.mark.parametrize(
    ("address", "purpose", "button"),
    [
        ("/samples/PB-001", "edit what is recorded", "/edit/sample/PB-001"),
        ("/sites/DH-1", "edit what is recorded", "/edit/site/DH-1"),
        ("/intrusions/Aster stock", "edit what is recorded", "/edit/intrusion/"),
        ("/batches/Q-2041", "withdraw or restore it, or to state a digestion", "Change the digestions"),
        ("/settings", "change settings", "See what a change would do"),
        ("/import", "import files", 'type="file"'),
        ("/", "import files", ">Import files<"),
    ],
)
def test_accounts_pages_say_to_whoever_has_not_signed_in_how_to_in_place_of_the_buttons(
    site: Site, address: str, purpose: str, button: str
) -> None:
    page = site.client.get(address).text
    link = re.search(rf'<p class="soft"><a href="([^"]+)">Sign in</a> to {re.escape(purpose)}\.</p>', page)
    assert link is not None
    assert parse_qs(urlsplit(unescape(link[1])).query)["next"] == [address.replace(" ", "%20")]
    assert button not in page
    assert "has no accounts" not in page
    site.sign_in()
    page = site.client.get(address).text
    assert button in page
    assert f"</a> to {purpose}." not in page


@pytest.mark.parametrize(
    "address",
    ["/edit/sample/PB-001", "/edit/area/North Block", "/batch/withdraw/Q-2041", "/import/AAAAAAAAAAAAAAAA"],
)
def test_accounts_page_that_changes_sends_to_the_sign_in_page_and_back(site: Site, address: str) -> None:
    answer = site.client.get(address)
    assert answer.status_code == 303
    there = urlsplit(answer.headers["Location"])
    assert there.path == "/sign-in"
    back = parse_qs(there.query)["next"][0]
    assert back == address.replace(" ", "%20")
    form = site.client.get(answer.headers["Location"]).text
    answer = site.sign_in(next=field(form, "next"))
    assert (answer.status_code, answer.headers["Location"]) == (303, back)
    assert site.client.get(back).status_code == (404 if "AAAA" in address else 200)


def test_accounts_state_of_an_import_is_told_to_writers_alone(site: Site) -> None:
    assert site.client.get("/import/AAAAAAAAAAAAAAAA/state.json").status_code == 403
    site.sign_in()
    assert site.client.get("/import/AAAAAAAAAAAAAAAA/state.json").status_code == 404


def test_accounts_first_one_closes_a_site_of_this_machine_at_once_and_the_last_opens_it(writable: Any) -> None:
    assert writable.post("/edit/sample/PB-002", lithology="norite").status_code == 303
    assert writable.sql("SELECT account FROM audit_entry") == [(auditing.who(),)]
    registry = writable.app.extensions["registry"]
    page = writable.client.get("/edit/sample/PB-002").text
    accounts.add(registry, "anna", PASSWORD)
    sent = {name: field(page, name) for name in ("csrf_token", "row_version")}
    answer = writable.client.post("/edit/sample/PB-002", data={**sent, "lithology": "dunite"})
    assert answer.status_code == 403
    assert writable.sql("SELECT lithology FROM sample WHERE code = 'PB-002'") == [("norite",)]
    accounts.remove(registry, "anna")
    assert writable.client.get("/edit/sample/PB-002").status_code == 200


def test_accounts_let_a_site_served_to_other_machines_take_changes(with_accounts: Path, tmp_path: Path) -> None:
    site = Site(Path(shutil.copy(with_accounts, tmp_path / "site.sqlite")), writable=False)
    assert site.client.get("/edit/sample/PB-002").status_code == 303
    site.sign_in("berit")
    assert site.edit(lithology="norite").status_code == 303
    assert site.sql("SELECT lithology FROM sample WHERE code = 'PB-002'") == [("norite",)]
    site.registry.close()


# Who did what


def test_accounts_name_stands_with_what_its_owner_did(site: Site) -> None:
    site.sign_in("Anna")
    assert site.edit(lithology="norite").status_code == 303
    site.client.post(
        "/settings", data={"csrf_token": token(site.client, "/settings"), "loi_warn_wt": "2.5", "do": "change",
                           "seen": "Loss on ignition, remarked above: 3 wt% → 2.5 wt%"},
    )  # fmt: skip
    ask = site.client.get("/batch/withdraw/Q-2041").text
    site.client.post("/batch/withdraw/Q-2041", data={"csrf_token": field(ask, "csrf_token"), "do": "confirmed"})
    form = token(site.client, "/import")
    file = (io.BytesIO(b"sample_code,sample_kind\nNEW-1,core\n"), "samples.csv")
    results = (io.BytesIO(b"Sample,SiO2 XRF (%)\nNEW-1,61\n"), "X-1.csv")
    address = site.client.post("/import", data={"csrf_token": form, "files": [file, results]}).headers["Location"]
    jobs = site.app.extensions["jobs"]
    jobs.wait(address.rsplit("/", 1)[-1], 60)
    site.client.post(address, data={"csrf_token": form, "do": "store"})
    jobs.wait(address.rsplit("/", 1)[-1], 60)
    assert site.sql("SELECT imported_by FROM batch WHERE code = 'X-1'") == [("anna",)]
    done = site.sql("SELECT account, action, subject FROM audit_entry WHERE audit_entry_id > 2 ORDER BY audit_entry_id")
    assert done == [
        ("anna", "edit", "sample PB-002"),
        ("anna", "setting", "loi_warn_wt"),
        ("anna", "batch", "batch Q-2041"),
        ("anna", "import", "samples"),
        ("anna", "import", "batch X-1"),
    ]
    assert "<dt>By</dt><dd>anna</dd>" in site.client.get("/batches/X-1").text
    assert auditing.acting_account() is None, "the thread that answered works for nobody any more"


# Signing in


def test_sign_in_page_without_accounts_says_how_to_add_one(client: FlaskClient, writable: Any) -> None:
    answer = client.get("/sign-in")
    assert answer.status_code == 200
    assert "plutonbook account add NAME" in answer.text and "nobody changes it through the site" in answer.text
    assert "Set-Cookie" not in answer.headers and "<form" not in answer.text
    assert ">Sign in</a>" not in client.get("/").text
    assert "whoever uses this machine changes it" in writable.client.get("/sign-in").text


def test_sign_in_sent_to_a_registry_without_accounts_signs_nobody_in(writable: Any) -> None:
    sent = {"csrf_token": token(writable.client, "/settings"), "name": "anna", "password": PASSWORD}
    answer = writable.client.post("/sign-in", data=sent)
    assert answer.status_code == 400
    assert "This registry has no accounts" in answer.text


def test_sign_in_names_the_account_in_the_header_line_until_signing_out(site: Site) -> None:
    assert '<p class="top-account"><a href="/sign-in?next=/samples?text%3DPB-00%2525">Sign in</a></p>' in (
        site.client.get("/samples?text=PB-00%25").text
    )
    answer = site.sign_in()
    assert (answer.status_code, answer.headers["Location"]) == (303, "/")
    page = site.client.get("/samples").text
    assert "Signed in as </span>anna</span>" in page
    assert "You are signed in as <strong>anna</strong>" in site.client.get("/sign-in").text
    assert site.client.get("/sign-in?next=/samples").headers["Location"] == "/samples"
    answer = site.client.post("/sign-out", data={"csrf_token": field(page, "csrf_token")})
    assert (answer.status_code, answer.headers["Location"]) == (303, "/")
    assert "anna" not in site.client.get("/samples").text
    assert site.client.get("/edit/sample/PB-001").status_code == 303


def test_sign_out_needs_a_post_with_the_token(site: Site) -> None:
    site.sign_in()
    assert site.client.get("/sign-out").status_code == 405
    assert site.client.post("/sign-out").status_code == 400
    assert site.client.post("/sign-out", data={"csrf_token": "forged"}).status_code == 400
    assert "Signed in as " in site.client.get("/").text


def test_sign_in_needs_the_token_and_gives_the_session_another(site: Site) -> None:
    assert site.client.post("/sign-in", data={"name": "anna", "password": PASSWORD}).status_code == 400
    before = token(site.client)
    assert site.sign_in().status_code == 303
    answer = site.client.post("/sign-out", data={"csrf_token": before})
    assert answer.status_code == 400, "a token from before the sign-in opens nothing"


def test_sign_in_with_an_unknown_name_and_with_a_wrong_password_answers_the_same(site: Site) -> None:
    answers = [site.sign_in("anna", "wrong password"), site.sign_in("nobody", "wrong password")]
    pages = [re.sub(r'name="csrf_token" value="[^"]+"', "", answer.text) for answer in answers]
    assert [answer.status_code for answer in answers] == [403, 403]
    assert pages[0].replace('value="anna"', "") == pages[1].replace('value="nobody"', "")
    assert "There is no account of that name and password." in pages[0]
    assert "wrong password" not in pages[0]
    assert answers[0].headers["Cache-Control"] == "no-store"
    assert "Signed in as " not in site.client.get("/").text


@pytest.mark.parametrize(
    ("name", "password", "missing"),
    [("", "", "a name and a password"), (" ", PASSWORD, "a name"), ("anna", "", "a password")],
)
def test_sign_in_with_a_field_left_out_says_which(site: Site, name: str, password: str, missing: str) -> None:
    answer = site.sign_in(name, password)
    assert answer.status_code == 400
    assert f"Signing in takes {missing}." in answer.text


@pytest.mark.parametrize(
    "name",
    [HOSTILE, "anna\0", "'; DROP TABLE account; --", "\u202eanna", "a" * 5000],
)
def test_sign_in_with_a_hostile_name_is_wrong_and_comes_out_escaped(site: Site, name: str) -> None:
    answer = site.sign_in(name, HOSTILE)
    assert answer.status_code == 403
    assert "<script>alert" not in answer.text
    assert site.sql("SELECT count(*) FROM account") == [(2,)]


def test_sign_in_form_of_many_bytes_is_refused_unread(site: Site) -> None:
    sent = {"name": "anna", "password": "p" * 200_000, "csrf_token": token(site.client)}
    answer = site.client.post("/sign-in", data=sent)
    assert answer.status_code == 413
    assert "What was sent is larger than a name and a password can be." in answer.text
    file = {**sent, "password": "p", "file": (io.BytesIO(b"x" * 200_000), "x")}
    assert site.client.post("/sign-in", data=file).status_code == 413


FOREIGN = (
    "https://elsewhere.example/", "//elsewhere.example/", "/\\elsewhere.example", "\\\\elsewhere.example",
    "/\t/elsewhere.example", " //elsewhere.example", "javascript:alert(1)", "/samples\r\nX-Injected: 1",
    "http:/elsewhere.example", "elsewhere.example", "///elsewhere.example", "", "/sign-in?next=/", "/sign-out",
    "/" + "a" * 3000, "//[/", "/\x00",
)  # fmt: skip


@pytest.mark.parametrize("back", FOREIGN)
def test_sign_in_never_sends_elsewhere(site: Site, back: str) -> None:
    with site.app.test_request_context():
        assert own_address(back) is None
    shown = site.client.get("/sign-in", query_string={"next": back}).text
    assert 'name="next"' not in shown
    answer = site.sign_in(next=back)
    assert (answer.status_code, answer.headers["Location"]) == (303, "/")
    assert site.client.get("/sign-in", query_string={"next": back}).status_code == 200


def test_sign_in_comes_back_to_an_address_with_every_kind_of_letter(site: Site) -> None:
    code = 'Å "50%2F" <b>&/1?#;'
    site.sql("INSERT INTO sample (code, kind) VALUES (?, 'float')", code)
    with site.app.test_request_context():
        from flask import url_for

        address = url_for("sample.page", code=code) + "?a=%C3%85&b=1+2"
    link = re.search(r'<p class="top-account"><a href="([^"]+)"', site.client.get(address).text)
    assert link is not None
    form = site.client.get(unescape(link[1])).text
    answer = site.sign_in(next=field(form, "next"))
    page = site.client.get(answer.headers["Location"])
    assert page.status_code == 200
    assert "<h1>Å &#34;50%2F&#34; &lt;b&gt;&amp;/1?#;</h1>" in page.text
    assert answer.headers["Location"].endswith("?a=%C3%85&b=1+2")


def test_refused_form_comes_back_to_the_page_it_was_sent_from(site: Site) -> None:
    own = {"Referer": "http://localhost/samples/PB-001?x=1"}
    assert field(site.client.post("/settings", headers=own).text, "next") == "/samples/PB-001?x=1"
    foreign = {"Referer": "http://elsewhere.example/samples/PB-001"}
    assert field(site.client.post("/settings", headers=foreign).text, "next") == "/"
    assert field(site.client.post("/settings").text, "next") == "/"


# Sessions


def test_session_cookie_is_hidden_from_scripts_and_other_sites(site: Site) -> None:
    cookie = site.sign_in().headers["Set-Cookie"]
    assert {"HttpOnly", "SameSite=Lax", "Path=/"} <= set(cookie.split("; "))
    assert "Secure" not in cookie and "Expires" not in cookie


def test_session_cookie_behind_https_is_for_https_alone(with_accounts: Path) -> None:
    app = create_app(str(with_accounts), https=True)
    answer = app.test_client().get("/sign-in", base_url="https://register.example")
    assert "Secure" in answer.headers["Set-Cookie"].split("; ")
    app.extensions["registry"].close()


@pytest.mark.parametrize("change", ["removed", "removed and added again", "password changed"])
def test_session_ends_when_its_account_does(site: Site, change: str) -> None:
    site.sign_in("berit")
    page = site.client.get("/edit/sample/PB-002").text
    if change == "password changed":
        accounts.change_password(site.registry, "berit", PASSWORD)  # the same again: still another hash
    else:
        accounts.remove(site.registry, "berit")
    if change == "removed and added again":
        accounts.add(site.registry, "berit", PASSWORD)
    sent = {name: field(page, name) for name in ("csrf_token", "row_version")}
    assert site.client.post("/edit/sample/PB-002", data={**sent, "lithology": "dunite"}).status_code == 403
    assert "Signed in as " not in site.client.get("/").text
    assert site.sql("SELECT lithology FROM sample WHERE code = 'PB-002'") == [("gabbro",)]


def test_session_outlives_the_serving_process_and_fits_no_other_registry(site: Site, tmp_path: Path) -> None:
    """The secret lies in the user's state folder; the key made of it is the registry's own."""
    site.sign_in()
    name = site.app.config["SESSION_COOKIE_NAME"]
    cookie = site.client.get_cookie(name)
    assert cookie is not None
    again = create_app(str(site.path), writable=True)
    client = again.test_client()
    client.set_cookie(name, cookie.value)
    assert "Signed in as " in client.get("/").text
    again.extensions["registry"].close()
    copied = create_app(str(shutil.copy(site.path, tmp_path / "copy.sqlite")), writable=True)
    client = copied.test_client()
    client.set_cookie(copied.config["SESSION_COOKIE_NAME"], cookie.value)
    assert "Signed in as " not in client.get("/").text
    copied.extensions["registry"].close()


@pytest.mark.parametrize("kept", ["1", "1.", ".", "1.0000", "x.y", "²." + "0" * 32, "9" * 40 + ".x", None])
def test_session_that_keeps_anything_else_is_nobodys(site: Site, kept: Any) -> None:
    with site.client.session_transaction() as session:
        session["_user_id"] = kept
    page = site.client.get("/")
    assert page.status_code == 200
    assert "Signed in as " not in page.text
    assert site.client.get("/edit/sample/PB-001").status_code == 303


def test_page_about_a_registry_that_cannot_be_asked_is_made_without_asking_it(
    site: Site, monkeypatch: pytest.MonkeyPatch
) -> None:
    def busy(_registry: Any) -> bool:
        raise RegistryBusy("an import holds the registry")

    monkeypatch.setattr("web.writing.accounts.any_accounts", busy)
    answer = site.client.get("/samples")
    assert answer.status_code == 503
    assert "An import holds the registry" in answer.text


@pytest.mark.postgresql
def test_accounts_on_postgresql_sign_in_and_leave_their_name(postgresql_server: Any, tmp_path: Path) -> None:
    url = postgresql_server.new_registry()
    app = create_app(url, writable=True, drafts=tmp_path / "drafts")
    registry = app.extensions["registry"]
    accounts.add(registry, "anna", PASSWORD)
    client = app.test_client()
    assert client.post("/settings").status_code == 403
    sent = {"csrf_token": token(client), "name": "anna", "password": PASSWORD, "next": "/settings"}
    assert client.post("/sign-in", data={**sent, "password": "wrong password"}).status_code == 403
    assert client.post("/sign-in", data=sent).headers["Location"] == "/settings"
    change = {"csrf_token": token(client, "/settings"), "loi_warn_wt": "2.5", "do": "change"}
    assert client.post("/settings", data={**change, "seen": "Loss on ignition, remarked above: 3 wt% → 2.5 wt%"})
    with registry.reader.connect() as connection:
        done = connection.exec_driver_sql("SELECT account, action FROM audit_entry ORDER BY audit_entry_id").all()
    assert [tuple(row) for row in done][1:] == [("anna", "setting")]
    accounts.remove(registry, "anna")
    assert "Signed in as " not in client.get("/").text
    registry.close()
