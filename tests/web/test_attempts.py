"""How often a password may be tried, and how the site is served where it is. Names and addresses are invented."""

from __future__ import annotations

import re
import shutil
import subprocess
import sys
from collections.abc import Iterator
from http.client import HTTPConnection
from pathlib import Path
from typing import Any
from urllib.parse import urlencode

import pytest

from registry import accounts
from registry.cli import main
from registry.store.engine import open_registry
from web import create_app
from web.attempts import MOST_KEPT, MOST_OF_ADDRESS, MOST_OF_BOTH, MOST_OF_NAME, WINDOW_S, Attempts

ROOT = Path(__file__).resolve().parents[2]
PASSWORD = "seven grey pebbles"
pytestmark = pytest.mark.usefixtures("cheap_hashes")


class Clock:
    def __init__(self) -> None:
        self.now = 1000.0

    def __call__(self) -> float:
        return self.now


@pytest.fixture
def clock() -> Clock:
    return Clock()


@pytest.fixture
def attempts(clock: Clock) -> Attempts:
    return Attempts(clock)


def test_attempts_of_a_name_from_an_address_wait_until_the_first_is_forgotten(attempts: Attempts, clock: Clock) -> None:
    for _ in range(MOST_OF_BOTH):
        assert attempts.begin("anna", "192.0.2.1") == 0
        clock.now += 10
    assert attempts.begin("anna", "192.0.2.1") == WINDOW_S - 10 * MOST_OF_BOTH
    assert attempts.begin(" ANNA ", "192.0.2.1") > 0, "the same name"
    assert attempts.begin("berit", "192.0.2.1") == 0
    assert attempts.begin("anna", "192.0.2.2") == 0
    clock.now += WINDOW_S - 10 * MOST_OF_BOTH
    assert attempts.begin("anna", "192.0.2.1") == 0
    assert 0 < attempts.begin("anna", "192.0.2.1") <= 10


def test_attempts_that_are_refused_do_not_lengthen_the_wait(attempts: Attempts, clock: Clock) -> None:
    for _ in range(MOST_OF_BOTH):
        attempts.begin("anna", "192.0.2.1")
    for _ in range(100):
        assert attempts.begin("anna", "192.0.2.1") > 0
    clock.now += WINDOW_S
    assert attempts.begin("anna", "192.0.2.1") == 0


def test_attempts_of_many_names_from_an_address_and_of_a_name_from_many_are_bounded(clock: Clock) -> None:
    one = Attempts(clock)
    assert [one.begin(f"name {n}", "192.0.2.1") > 0 for n in range(MOST_OF_ADDRESS + 1)].index(True) == MOST_OF_ADDRESS
    many = Attempts(clock)
    assert [many.begin("anna", f"192.0.2.{n}") > 0 for n in range(MOST_OF_NAME + 1)].index(True) == MOST_OF_NAME


def test_attempt_that_succeeded_does_not_count_and_clears_those_before(attempts: Attempts) -> None:
    for _ in range(200):
        assert attempts.begin("anna", "192.0.2.1") == 0
        attempts.succeeded("anna", "192.0.2.1")
    for _ in range(MOST_OF_BOTH - 1):
        attempts.begin("anna", "192.0.2.1")
    assert attempts.begin("anna", "192.0.2.1") == 0
    attempts.succeeded("anna", "192.0.2.1")
    assert attempts.begin("anna", "192.0.2.1") == 0


def test_attempts_remember_no_more_than_they_have_room_for(attempts: Attempts) -> None:
    for n in range(MOST_KEPT):
        attempts.begin("\ud800" * 1000 + str(n), f"192.0.{n // 250}.{n % 250}")
    assert len(attempts._failed) == MOST_KEPT


@pytest.fixture
def path(invented_registry: Path, tmp_path: Path) -> Path:
    copied = Path(shutil.copy(invented_registry, tmp_path / "site.sqlite"))
    registry = open_registry(copied)
    accounts.add(registry, "anna", PASSWORD)
    registry.close()
    return copied


def test_sign_in_tried_too_often_says_when_to_try_again_and_takes_no_password(
    path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    app = create_app(str(path))
    clock = Clock()
    app.extensions["sign_in_attempts"] = Attempts(clock)
    client = app.test_client()

    def tried(password: str) -> Any:
        found = re.search(r'name="csrf_token" value="([^"]+)"', client.get("/sign-in").text)
        assert found is not None
        return client.post("/sign-in", data={"csrf_token": found[1], "name": "anna", "password": password})

    for _ in range(MOST_OF_BOTH):
        assert tried("wrong password").status_code == 403
    answer = tried(PASSWORD)
    assert answer.status_code == 429
    assert answer.headers["Retry-After"] == str(WINDOW_S)
    assert re.search(r"Too many attempts failed\. Try again in 15 minutes, at \d\d:\d\d UTC\.", answer.text)
    clock.now += WINDOW_S - 30
    assert "Try again in 1 minute, at" in tried(PASSWORD).text
    clock.now += 30
    assert tried(PASSWORD).status_code == 303
    app.extensions["registry"].close()


# How it is served


@pytest.fixture
def served(monkeypatch: pytest.MonkeyPatch) -> list[tuple[Any, ...]]:
    """What the command would serve."""
    calls: list[tuple[Any, ...]] = []

    def serve(path: str, host: str, port: int, announce: Any, https_name: str | None) -> None:
        calls.append((host, port, https_name))

    monkeypatch.setattr("web.serving.serve", serve)
    return calls


def run(*arguments: object) -> int:
    with pytest.raises(SystemExit) as ended:
        main([str(argument) for argument in arguments])
    return int(ended.value.code or 0)


@pytest.mark.parametrize(
    ("options", "warned"),
    [
        (("--host", "0.0.0.0"), True),
        ((), False),
        (("--host", "localhost"), False),
        (("--https-name", "register.example"), False),
        (("--host", "0.0.0.0", "--https-name", "register.example:8443"), False),
    ],
)
def test_serve_with_accounts_warns_once_of_passwords_over_plain_http(
    path: Path, served: list[tuple[Any, ...]], options: tuple[str, ...], warned: bool, capsys: pytest.CaptureFixture
) -> None:
    assert run("serve", "--registry", path, *options) == 0
    assert len(served) == 1
    assert capsys.readouterr().err.count("passwords and cookies can be read on the way") == int(warned)


def test_serve_without_accounts_to_other_machines_needs_no_warning(
    invented_registry: Path, served: list[tuple[Any, ...]], capsys: pytest.CaptureFixture
) -> None:
    assert run("serve", "--registry", invented_registry, "--host", "0.0.0.0") == 0
    assert capsys.readouterr().err == ""


@pytest.mark.parametrize("name", ["https://register.example", "a b", "", "register.example/x", "-x", "a:b", "a\nb"])
def test_serve_with_what_is_no_host_name_exits_2(
    path: Path, served: list[tuple[Any, ...]], name: str, capsys: pytest.CaptureFixture
) -> None:
    assert run("serve", "--registry", path, f"--https-name={name}") == 2
    assert "is no name of a host" in capsys.readouterr().err
    assert not served


@pytest.fixture
def proxied(path: Path) -> Iterator[str]:
    """The address of the site as a proxy of this machine asks it."""
    program = (
        "import sys; from web.serving import serve; "
        "serve(sys.argv[1], '127.0.0.1', 0, lambda a: print(a, flush=True), 'register.example')"
    )
    server = subprocess.Popen([sys.executable, "-c", program, str(path)], stdout=subprocess.PIPE, text=True, cwd=ROOT)
    assert server.stdout is not None
    yield server.stdout.readline().strip().rstrip("/").removeprefix("http://")
    server.terminate()
    server.wait(timeout=30)
    server.stdout.close()


def test_serve_behind_a_proxy_keeps_cookies_to_https_and_counts_by_who_asked_the_proxy(proxied: str) -> None:
    cookie = ""

    def asked(method: str, address: str, client: str, **sent: str) -> Any:
        connection = HTTPConnection(proxied, timeout=30)
        headers = {"Cookie": cookie, "X-Forwarded-For": client, "Referer": "https://register.example/sign-in"}
        body = urlencode(sent) if sent else None
        if body:
            headers["Content-Type"] = "application/x-www-form-urlencoded"
        connection.request(method, address, body=body, headers=headers)
        answer = connection.getresponse()
        answer.text = answer.read().decode()  # type: ignore[attr-defined]
        connection.close()
        return answer

    page = asked("GET", "/sign-in", "192.0.2.1")
    flags = page.getheader("Set-Cookie").split("; ")
    assert {"Secure", "HttpOnly", "SameSite=Lax"} <= set(flags)
    cookie = flags[0]
    token = re.search(r'name="csrf_token" value="([^"]+)"', page.text)
    assert token is not None
    wrong = {"csrf_token": token[1], "name": "anna", "password": "wrong password"}
    seen = [asked("POST", "/sign-in", "192.0.2.1", **wrong).status for _ in range(MOST_OF_BOTH + 1)]
    assert seen == [403] * MOST_OF_BOTH + [429]
    assert asked("POST", "/sign-in", "192.0.2.2", **{**wrong, "password": PASSWORD}).status == 303
    assert asked("POST", "/settings", "192.0.2.1", csrf_token=token[1]).status == 403
