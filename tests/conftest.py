"""Fixtures that several parts share: registries made by the migrations, a private PostgreSQL server, a browser.

What is not installed is skipped with the reason; where the variable CI is set it fails instead, so that CI never
passes by leaving something out.
"""

from __future__ import annotations

import os
import pwd
import shutil
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any, NoReturn

import pytest
from hypothesis import HealthCheck, settings

import seed_demo
from registry import accounts
from registry.founding import build_demo, found
from registry.store import schema
from registry.store.engine import Registry
from tests.registry_files import made_once

#: Examples of a generated test. Every day a few that differ from run to run; in CI many, the same every time.
settings.register_profile("everyday", max_examples=25, deadline=5_000, suppress_health_check=[HealthCheck.too_slow])
settings.register_profile("ci", settings.get_profile("everyday"), max_examples=100, derandomize=True)
settings.load_profile("ci" if os.environ.get("CI") else "everyday")
#: Files that take long, longest first: begun last, one of them would keep one process busy while the others idle.
LONG_FILES = (
    "demo/test_demo.py", "web/test_import_browser.py", "web/test_places_browser.py", "web/test_browser.py",
    "test_computing.py", "store/test_registry_contents.py", "web/test_import_pages.py", "suites/test_suites.py",
    "store/test_quality_controls.py", "web/test_diagrams_browser.py", "store/test_stale.py", "test_importing.py",
    "web/test_accounts.py", "suites/test_stale_groups.py", "web/test_work_pages.py", "test_import_batch_states.py",
    "web/test_attempts.py", "cli/test_progress.py",
)  # fmt: skip
ROOT = Path(__file__).resolve().parents[1]
ENGINES = ["sqlite", pytest.param("postgresql", marks=pytest.mark.postgresql)]


@pytest.fixture(scope="session", autouse=True)
def state_of_the_tests(tmp_path_factory: pytest.TempPathFactory) -> Iterator[None]:
    """The site's secret and drafts of a test lie in a folder of the tests, never in the user's own."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv("XDG_STATE_HOME", str(tmp_path_factory.mktemp("state")))
        yield


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """The long files go first; all others keep their order."""
    ranks = {ROOT / "tests" / name: rank for rank, name in enumerate(LONG_FILES)}
    items.sort(key=lambda item: ranks.get(item.path, len(ranks)))


def absent(what: str) -> NoReturn:
    """Skip with the reason; in CI fail."""
    if os.environ.get("CI"):
        pytest.fail(f"{what}; CI must have it")
    pytest.skip(what)


def _postgresql_programs() -> Path:
    found_there = sorted(Path("/usr/lib/postgresql").glob("*/bin/initdb"))
    if not found_there:
        absent("Debian's postgresql is not installed (/usr/lib/postgresql/*/bin)")
    return found_there[-1].parent


@pytest.fixture(scope="session")
def postgresql_server() -> Iterator[Any]:
    """One server a test session (a worker of its own each with xdist)."""
    programs = _postgresql_programs()
    from tests.postgresql_server import PostgresqlServer

    user = None
    if os.geteuid() == 0:
        try:
            user = pwd.getpwnam("postgres").pw_name
        except KeyError:
            absent("PostgreSQL refuses to run as root and there is no user postgres")
    server = PostgresqlServer(programs, user)
    yield server
    server.stop()


@pytest.fixture(scope="session")
def empty_registry_file(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """An empty registry at the newest schema, made once by the migrations; copy it, do not write it."""
    return made_once(tmp_path_factory, "empty", schema.create)


@pytest.fixture(scope="session")
def founded_registry_file(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The same with the shipped targets copied in, as ``plutonbook create`` makes it; copy it, do not write it."""
    return made_once(tmp_path_factory, "founded", found)


@pytest.fixture(scope="session")
def demo_file(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The invented demo as ``plutonbook demo`` makes it; copy it, do not write it."""

    def make(path: Path) -> Registry:
        build_demo(str(path))
        return schema.open_registry(path)

    return made_once(tmp_path_factory, "demo", make)


@pytest.fixture(scope="session")
def postgresql_demo(postgresql_server: Any) -> str:
    """The URL of the invented demo on PostgreSQL, made by the commands of a team; read it, do not write it."""
    url = str(postgresql_server.new_database())
    lab = ("--lab", "Invented laboratory")
    for arguments in (("create",), ("import", *map(str, seed_demo.files()), *lab)):
        command = [sys.executable, "-m", "registry.cli", *arguments, "--registry", url]
        done = subprocess.run(command, capture_output=True, text=True, cwd=ROOT)
        assert done.returncode == 0, done.stdout + done.stderr
    return url


@pytest.fixture(scope="module")
def cheap_hashes() -> Iterator[None]:
    """Password hashes of a thirtieth of the work, for tests that ask something else of accounts."""
    shipped, cheap = accounts.METHOD, "scrypt:1024:8:1"
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(accounts, "METHOD", cheap)
        patch.setattr(accounts, "_NOBODYS_HASH", accounts._NOBODYS_HASH.replace(shipped, cheap))
        yield


@pytest.fixture
def registry_path(empty_registry_file: Path, tmp_path: Path) -> Path:
    """The path of a new empty registry file."""
    return Path(shutil.copy(empty_registry_file, tmp_path / "registry.sqlite"))


@pytest.fixture
def sqlite_registry(registry_path: Path) -> Iterator[Registry]:
    """A new empty registry file, opened."""
    registry = schema.open_registry(registry_path)
    yield registry
    registry.close()


@pytest.fixture
def founded_registry(founded_registry_file: Path, tmp_path: Path) -> Iterator[Registry]:
    """A new registry file with the shipped targets, opened."""
    registry = schema.open_registry(shutil.copy(founded_registry_file, tmp_path / "registry.sqlite"))
    yield registry
    registry.close()


@pytest.fixture
def postgresql_registry(postgresql_server: Any) -> Iterator[Registry]:
    """An empty registry in a database that no other test uses meanwhile."""
    url = postgresql_server.lend_registry()
    registry = schema.open_registry(url)
    yield registry
    registry.close()
    postgresql_server.take_back(url)


@pytest.fixture(params=ENGINES)
def any_registry(request: pytest.FixtureRequest) -> Registry:
    """An empty registry, once on SQLite and once on PostgreSQL."""
    return request.getfixturevalue(f"{request.param}_registry")


@pytest.fixture(params=ENGINES)
def new_place(request: pytest.FixtureRequest, tmp_path: Path) -> str:
    """A path or URL where a registry can be created, once for each engine."""
    if request.param == "sqlite":
        return str(tmp_path / "new.sqlite")
    return request.getfixturevalue("postgresql_server").new_database()


@pytest.fixture(scope="session")
def browser(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Any]:
    """Debian's chromium, headless, that reaches nothing outside; one a session."""
    chromium, driver = Path("/usr/bin/chromium"), Path("/usr/bin/chromedriver")
    if not (chromium.exists() and driver.exists()):
        absent("Debian's chromium and chromium-driver are not installed")
    try:
        from selenium import webdriver
        from selenium.webdriver.chrome.service import Service
    except ImportError:
        absent("selenium is not installed (the extra named test brings it)")
    options = webdriver.ChromeOptions()
    options.binary_location = str(chromium)
    for flag in (
        "--headless",
        "--no-sandbox",
        "--disable-gpu",
        "--disable-dev-shm-usage",
        "--disable-background-networking",
        "--disable-component-update",
        "--disable-sync",
        f"--user-data-dir={tmp_path_factory.mktemp('browser')}",
    ):
        options.add_argument(flag)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL"})
    window = webdriver.Chrome(options=options, service=Service(str(driver)))
    window.set_window_size(1280, 900)
    yield window
    window.quit()


@pytest.fixture
def client_program() -> Callable[[str], str]:
    """The path of a Debian program such as sqlite3 or psql."""

    def find(name: str) -> str:
        path = shutil.which(name)
        if path is None:
            absent(f"Debian's {name} is not installed")
        return path

    return find
