"""The secret of the site: private, kept, one key a registry."""

from __future__ import annotations

import stat
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from threading import Barrier

import pytest

from registry.server_secrets import secret_file, signing_key


def test_secret_is_made_once_with_mode_0600_and_gives_the_same_key_again(tmp_path: Path) -> None:
    place = tmp_path / "state" / "plutonbook" / "secret"
    key = signing_key("sqlite:///a.sqlite", place)
    assert len(key) == 32
    assert stat.S_IMODE(place.stat().st_mode) == 0o600
    assert stat.S_IMODE(place.parent.stat().st_mode) == 0o700
    assert signing_key("sqlite:///a.sqlite", place) == key
    assert [path.name for path in place.parent.iterdir()] == ["secret"]


def test_secret_gives_every_registry_its_own_key(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    place = tmp_path / "secret"
    (tmp_path / "other").mkdir()
    monkeypatch.chdir(tmp_path)
    one = signing_key("sqlite:///a.sqlite", place)
    assert signing_key(f"sqlite:///{tmp_path}/a.sqlite", place) == one, "the same file, named by its whole path"
    monkeypatch.chdir(tmp_path / "other")
    assert signing_key("sqlite:///a.sqlite", place) != one, "another file of that name"
    assert signing_key("postgresql+psycopg://host/a", place) != signing_key("postgresql+psycopg://host/b", place)


@pytest.mark.parametrize("mode", [0o644, 0o660, 0o604])
def test_secret_that_others_may_read_is_replaced(tmp_path: Path, mode: int) -> None:
    place = tmp_path / "secret"
    key = signing_key("x", place)
    place.chmod(mode)
    assert signing_key("x", place) != key
    assert stat.S_IMODE(place.stat().st_mode) == 0o600


@pytest.mark.parametrize("content", [b"", b"short", b"x" * 33])
def test_secret_of_another_length_is_replaced(tmp_path: Path, content: bytes) -> None:
    place = tmp_path / "secret"
    place.write_bytes(content)
    place.chmod(0o600)
    key = signing_key("x", place)
    assert len(place.read_bytes()) == 32 and place.read_bytes() != content
    assert signing_key("x", place) == key


def test_secret_behind_a_link_is_not_followed(tmp_path: Path) -> None:
    other = tmp_path / "other"
    other.write_bytes(b"o" * 32)
    other.chmod(0o600)
    place = tmp_path / "secret"
    place.symlink_to(other)
    signing_key("x", place)
    assert not place.is_symlink() and place.read_bytes() != b"o" * 32
    assert other.read_bytes() == b"o" * 32


def test_secret_that_cannot_be_kept_holds_for_the_process(tmp_path: Path) -> None:
    blocked = tmp_path / "file"
    blocked.write_text("no folder")
    first, second = signing_key("x", blocked / "secret"), signing_key("x", blocked / "secret")
    assert len(first) == 32 and first != second


def test_secret_of_many_that_begin_at_once_is_one(tmp_path: Path) -> None:
    place, start = tmp_path / "secret", Barrier(8)

    def begin(_: int) -> bytes:
        start.wait(timeout=30)
        return signing_key("x", place)

    with ThreadPoolExecutor(8) as pool:
        assert len(set(pool.map(begin, range(8)))) == 1
    assert [path.name for path in tmp_path.iterdir()] == ["secret"]


def test_secret_lies_in_the_state_folder_of_the_user(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """XDG Base Directory Specification 0.8: XDG_STATE_HOME, else ~/.local/state."""
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path))
    assert secret_file() == tmp_path / "plutonbook" / "secret"
    monkeypatch.delenv("XDG_STATE_HOME")
    monkeypatch.setenv("HOME", str(tmp_path))
    assert secret_file() == tmp_path / ".local" / "state" / "plutonbook" / "secret"
