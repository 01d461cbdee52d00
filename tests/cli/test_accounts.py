"""``plutonbook account``: who may change a registry through its site. Names and passwords are invented."""

from __future__ import annotations

import io
import json
import shutil
import sqlite3
from collections.abc import Callable
from pathlib import Path

import pytest

from registry import accounts
from registry.cli import main
from registry.errors import NotFound, PlutonbookError
from registry.store import account_rows
from registry.store.engine import Registry, reading

Run = Callable[..., tuple[int, str, str]]
METHOD, NOBODYS_HASH = accounts.METHOD, accounts._NOBODYS_HASH
PASSWORD = "seven grey pebbles"
pytestmark = pytest.mark.usefixtures("cheap_hashes")


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


@pytest.fixture
def path(founded_registry_file: Path, tmp_path: Path) -> Path:
    return Path(shutil.copy(founded_registry_file, tmp_path / "registry.sqlite"))


@pytest.fixture
def run(path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture) -> Run:
    """Call ``plutonbook account``; ``stdin`` is what is piped in, None for a terminal."""

    def called(*arguments: object, stdin: str | bytes | None = None) -> tuple[int, str, str]:
        sent = stdin.encode() if isinstance(stdin, str) else stdin
        monkeypatch.setattr("sys.stdin", Terminal() if sent is None else io.TextIOWrapper(io.BytesIO(sent)))
        with pytest.raises(SystemExit) as ended:
            main(["account", *map(str, arguments), "--registry", str(path)])
        captured = capsys.readouterr()
        return int(ended.value.code or 0), captured.out, captured.err

    return called


def rows(path: Path, query: str) -> list[tuple]:
    connection = sqlite3.connect(path)
    try:
        return connection.execute(query).fetchall()
    finally:
        connection.close()


@pytest.fixture
def shipped_hashes(monkeypatch: pytest.MonkeyPatch) -> None:
    """Hashes as they are shipped; the other tests of this file make cheaper ones."""
    monkeypatch.setattr(accounts, "METHOD", METHOD)
    monkeypatch.setattr(accounts, "_NOBODYS_HASH", NOBODYS_HASH)


@pytest.mark.usefixtures("shipped_hashes")
def test_account_added_by_standard_input_keeps_a_scrypt_hash_alone(run: Run, path: Path) -> None:
    code, printed, _ = run("add", "anna", stdin=f"{PASSWORD}\n")
    assert code == 0
    assert printed.splitlines() == [
        "The account anna was added.",
        "It is the first: from now on the site takes changes from signed-in accounts only.",
    ]
    ((name, kept, role),) = rows(path, "SELECT name, password_hash, role FROM account")
    assert (name, role) == ("anna", "writer")
    assert kept.startswith("scrypt:32768:8:1$")
    assert len(kept.split("$")[1]) == 16
    assert PASSWORD not in path.read_bytes().decode("latin-1")
    assert rows(path, "SELECT action, subject, detail FROM audit_entry") == [("account", "anna", "added")]


@pytest.mark.usefixtures("shipped_hashes")
def test_account_hash_is_that_of_scrypt(run: Run, path: Path) -> None:
    """RFC 7914 by the standard library's own scrypt, over the salt that stands in the row."""
    import hashlib

    run("add", "anna", stdin=PASSWORD)
    method, salt, digest = rows(path, "SELECT password_hash FROM account")[0][0].split("$")
    _, n, r, p = method.split(":")
    expected = hashlib.scrypt(PASSWORD.encode(), salt=salt.encode(), n=int(n), r=int(r), p=int(p), maxmem=2**27)
    assert digest == expected.hex()


def test_account_added_from_a_file_reads_its_one_line(run: Run, path: Path, tmp_path: Path) -> None:
    file = tmp_path / "password.txt"
    file.write_bytes(b"\xef\xbb\xbf" + PASSWORD.encode() + b"\r\n")
    code, printed, _ = run("add", "Berit Dahl", "--password-file", file, "--json")
    assert code == 0
    report = json.loads(printed)
    assert (report["account"], report["first"]) == ("Berit Dahl", True)
    assert report["created_at"].endswith("Z")
    assert _signs_in(path, "Berit Dahl", PASSWORD)


def _signs_in(path: Path, name: str, password: str) -> bool:
    from registry.store.engine import open_registry

    registry = open_registry(path)
    try:
        return accounts.sign_in(registry, name, password) is not None
    finally:
        registry.close()


@pytest.mark.parametrize("command", ["add", "password"])
def test_account_password_at_a_terminal_is_not_asked_for_but_told_how(run: Run, command: str, path: Path) -> None:
    code, _, said = run(command, "anna")
    assert code == 2
    assert said.startswith("plutonbook: no password was given: give the password on standard input or in a file")
    assert f"plutonbook account {command} anna --password-file FILE" in said
    assert rows(path, "SELECT count(*) FROM account") == [(0,)]


def test_account_name_in_the_told_way_can_be_copied_to_a_shell(run: Run) -> None:
    said = run("add", "Berit $(x) Dahl", stdin="")[2]
    assert "plutonbook account add 'Berit $(x) Dahl' --password-file FILE" in said


def test_account_password_cannot_stand_in_the_command(run: Run, path: Path) -> None:
    code, _, said = run("add", "anna", PASSWORD)
    assert code == 2
    assert "unexpected extra argument" in said
    assert run("add", "anna", "--password", PASSWORD)[0] == 2
    assert rows(path, "SELECT count(*) FROM account") == [(0,)]


@pytest.mark.parametrize(
    ("sent", "code", "sentence"),
    [
        ("", 2, "standard input is empty"),
        ("\n", 2, "standard input is empty"),
        ("too short", 1, "the password has 9 letters; 10 to 1,000 are taken"),
        ("x" * 1001, 1, "the password has 1,001 letters; 10 to 1,000 are taken"),
        ("y" * 30_000, 1, "10 to 1,000 are taken"),
        (f"{PASSWORD}\nanother line", 1, "standard input holds 2 lines; a password is one line"),
        ("with a\ttab inside", 1, "a letter that cannot be typed in a form"),
        (b"\xff\xfe\x00latin", 1, "not text in UTF-8"),
    ],
)  # fmt: skip
def test_account_password_that_cannot_be_taken_is_refused_with_the_reason(
    run: Run, path: Path, sent: str | bytes, code: int, sentence: str
) -> None:
    ended, _, said = run("add", "anna", stdin=sent)
    assert ended == code
    assert sentence in said
    assert PASSWORD not in said
    assert rows(path, "SELECT count(*) FROM account") == [(0,)]


def test_account_password_file_that_is_not_there_exits_2_with_the_way(run: Run, tmp_path: Path) -> None:
    code, _, said = run("add", "anna", "--password-file", tmp_path / "none.txt", stdin=PASSWORD)
    assert code == 2
    assert "cannot be read (No such file or directory)" in said


@pytest.mark.parametrize(
    ("name", "sentence"),
    [
        ("", "1 to 60 printable letters; none was given"),
        ("  ", "none was given"),
        ("n" * 61, "1 to 60 printable letters; 61 were given"),
        ("an\u202ena", "some of them not printable"),
        ("an\x07na", "some of them not printable"),
    ],
)
def test_account_name_that_cannot_be_taken_is_refused(run: Run, path: Path, name: str, sentence: str) -> None:
    code, _, said = run("add", name, stdin=PASSWORD)
    assert code == 1
    assert sentence in said
    assert rows(path, "SELECT count(*) FROM account") == [(0,)]


def test_account_name_that_is_taken_in_another_case_is_refused(run: Run, path: Path) -> None:
    assert run("add", "Anna  Berg", stdin=PASSWORD)[0] == 0
    code, _, said = run("add", "anna berg", stdin=PASSWORD)
    assert code == 1
    assert "there is an account 'Anna Berg' already; 'plutonbook account password' changes its password" in said
    assert rows(path, "SELECT name FROM account") == [("Anna Berg",)]


def test_account_password_changed_lets_only_the_new_one_in(run: Run, path: Path) -> None:
    run("add", "anna", stdin=PASSWORD)
    code, printed, _ = run("password", "ANNA", stdin="eleven green pebbles")
    assert code == 0
    assert printed == "The account anna has another password; wherever it was signed in, it is out.\n"
    assert not _signs_in(path, "anna", PASSWORD)
    assert _signs_in(path, "anna", "eleven green pebbles")
    assert rows(path, "SELECT subject, detail FROM audit_entry ORDER BY 1, 2")[-1] == ("anna", "password changed")


@pytest.mark.parametrize("command", ["password", "remove"])
def test_account_that_is_not_there_is_told_with_those_that_are(run: Run, command: str) -> None:
    code, _, said = run(command, "carl", stdin=PASSWORD)
    assert (code, said) == (1, "plutonbook: there is no account 'carl'; the registry holds none\n")
    run("add", "anna", stdin=PASSWORD)
    run("add", "berit", stdin=PASSWORD)
    code, _, said = run(command, "carl", stdin=PASSWORD)
    assert (code, said) == (1, "plutonbook: there is no account 'carl'; the registry holds anna, berit\n")


def test_account_list_names_each_with_its_day_and_no_hash(run: Run) -> None:
    assert run("list")[1] == "No accounts yet. Add one with: plutonbook account add NAME --password-file FILE\n"
    run("add", "berit", stdin=PASSWORD)
    assert len(run("add", "anna", stdin=PASSWORD)[1].splitlines()) == 1
    printed = run("list")[1]
    assert [line.split("  ")[0] for line in printed.splitlines()] == ["berit", "anna"]
    listed = json.loads(run("list", "--json")[1])["accounts"]
    assert [set(row) for row in listed] == [{"account", "created_at"}] * 2


def test_account_removed_last_says_that_the_site_is_as_without_accounts(run: Run, path: Path) -> None:
    run("add", "anna", stdin=PASSWORD)
    run("add", "berit", stdin=PASSWORD)
    assert len(run("remove", "anna")[1].splitlines()) == 1
    code, printed, _ = run("remove", "Berit")
    assert code == 0
    assert printed.splitlines()[1].startswith("No account is left: a site served to this machine alone takes changes")
    assert rows(path, "SELECT count(*) FROM account") == [(0,)]


def test_account_registry_may_be_named_before_any_word(path: Path, capsys: pytest.CaptureFixture) -> None:
    for arguments in (
        ["--registry", str(path), "account", "list"],
        ["account", "--registry", str(path), "list"],
        ["account", "list", "--registry", str(path)],
    ):
        with pytest.raises(SystemExit) as ended:
            main(arguments)
        assert not ended.value.code
        assert "No accounts yet" in capsys.readouterr().out


def test_account_without_a_subcommand_shows_what_there_is(capsys: pytest.CaptureFixture) -> None:
    with pytest.raises(SystemExit) as ended:
        main(["account"])
    assert ended.value.code == 2
    captured = capsys.readouterr()
    assert {"add", "list", "password", "remove"} <= set((captured.out + captured.err).split())


def test_accounts_are_added_signed_in_changed_and_removed_on_both_engines(any_registry: Registry) -> None:
    assert not accounts.any_accounts(any_registry)
    assert accounts.add(any_registry, "Ängla Öst", PASSWORD)["first"]
    assert not accounts.add(any_registry, "berit", PASSWORD)["first"]
    with pytest.raises(PlutonbookError, match="there is an account 'Ängla Öst' already"):
        accounts.add(any_registry, "A\u0308NGLA O\u0308ST", PASSWORD)
    angla = accounts.sign_in(any_registry, "ängla öst", PASSWORD)
    assert angla is not None and angla.name == "Ängla Öst"
    assert accounts.sign_in(any_registry, "Ängla Öst", PASSWORD + " ") is None
    assert accounts.sign_in(any_registry, "nobody", PASSWORD) is None
    assert accounts.sign_in(any_registry, "'; DROP TABLE account; --", "'; DROP TABLE account; --") is None
    assert accounts.of_session(any_registry, angla.account_id, angla.stamp) == angla
    assert accounts.of_session(any_registry, angla.account_id, "ü") is None
    accounts.change_password(any_registry, "ängla öst", "eleven green pebbles")
    assert accounts.of_session(any_registry, angla.account_id, angla.stamp) is None
    again = accounts.sign_in(any_registry, "Ängla Öst", "eleven green pebbles")
    assert again is not None
    assert accounts.remove(any_registry, "Ängla Öst") == {"account": "Ängla Öst", "last": False}
    assert accounts.of_session(any_registry, again.account_id, again.stamp) is None
    added = accounts.add(any_registry, "Ängla Öst", "eleven green pebbles")
    assert added["account"] == "Ängla Öst"
    assert accounts.of_session(any_registry, again.account_id, again.stamp) is None
    with pytest.raises(NotFound, match="the registry holds berit, Ängla Öst"):
        accounts.remove(any_registry, "carl")
    with reading(any_registry) as connection:
        ids = [row["account_id"] for row in account_rows.list_accounts(connection)]
    assert ids == [2, 3], "an id that was given once is never given again"


def test_account_password_is_the_same_however_its_letters_are_composed(any_registry: Registry) -> None:
    """NIST SP 800-63B, 5.1.1.2: passwords are normalised (NFKC or NFKD) before they are hashed; from memory."""
    accounts.add(any_registry, "anna", "blåbärssylt åtta")
    assert accounts.sign_in(any_registry, "anna", "bla\u030aba\u0308rssylt a\u030atta") is not None


def test_sign_in_with_a_very_long_password_is_wrong_and_no_fault(any_registry: Registry) -> None:
    accounts.add(any_registry, "anna", "p" * 1000)
    assert accounts.sign_in(any_registry, "anna", "p" * 1000) is not None
    assert accounts.sign_in(any_registry, "anna", "p" * 1001) is None


@pytest.mark.usefixtures("shipped_hashes")
def test_sign_in_does_the_same_work_for_an_unknown_name(
    any_registry: Registry, monkeypatch: pytest.MonkeyPatch
) -> None:
    """One scrypt of the same size whoever is named, so that the time tells nothing."""
    accounts.add(any_registry, "anna", PASSWORD)
    done: list[str] = []

    def checked(kept: str, password: str) -> bool:
        method, salt, digest = kept.split("$")
        done.append(f"{method} {len(salt)} {len(digest)} {len(password)}")
        return False

    monkeypatch.setattr("werkzeug.security.check_password_hash", checked)
    assert accounts.sign_in(any_registry, "anna", "wrong password") is None
    assert accounts.sign_in(any_registry, "nobody", "wrong password") is None
    assert done == ["scrypt:32768:8:1 16 128 14"] * 2
