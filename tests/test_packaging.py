"""The wheel holds the whole product: an installation from it needs nothing of the source tree."""

from __future__ import annotations

import subprocess
import sys
import tomllib
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
PACKAGES = ("registry", "migrations", "web", "seed_demo")


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> zipfile.ZipFile:
    folder = tmp_path_factory.mktemp("wheel")
    done = subprocess.run(
        [sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", str(folder)],
        cwd=ROOT,
        capture_output=True,
        text=True,
    )
    assert done.returncode == 0, done.stderr
    (built,) = folder.glob("plutonbook-*.whl")
    return zipfile.ZipFile(built)


def _files_of(folder: str) -> set[str]:
    """Files of a package as they lie in the tree, without what Python and tools leave behind."""
    return {
        str(path.relative_to(ROOT))
        for path in (ROOT / folder).rglob("*")
        if path.is_file() and "__pycache__" not in path.parts and path.suffix not in {".pyc", ".pyo"}
    }


@pytest.mark.slow
@pytest.mark.parametrize("package", PACKAGES)
def test_wheel_holds_every_file_of_the_package(wheel: zipfile.ZipFile, package: str) -> None:
    expected = _files_of(package)
    assert expected
    assert expected <= set(wheel.namelist())


@pytest.mark.slow
@pytest.mark.parametrize(
    "pattern",
    [
        r"web/templates/*.html",
        r"web/static/*.css",
        r"migrations/versions/0001_*.py",
        r"registry/targets/**/porphyry_copper*.toml",
        r"registry/petrology/published/*.csv",
        r"seed_demo/results_*.csv",
        r"seed_demo/README.txt",
    ],
)
def test_wheel_holds_the_data_files(wheel: zipfile.ZipFile, pattern: str) -> None:
    names = [Path(name) for name in wheel.namelist()]
    loose = pattern.replace("**/", "")
    assert any(path.match(pattern) or path.match(loose) for path in names)


@pytest.mark.slow
def test_wheel_holds_nothing_but_the_packages_and_its_own_records(wheel: zipfile.ZipFile) -> None:
    tops = {name.split("/")[0] for name in wheel.namelist()}
    records = {top for top in tops if top.endswith(".dist-info")}
    assert tops - records == set(PACKAGES) and len(records) == 1


@pytest.mark.slow
def test_wheel_names_the_command_and_the_licence(wheel: zipfile.ZipFile) -> None:
    (record,) = {name.split("/")[0] for name in wheel.namelist() if ".dist-info" in name}
    entry_points = wheel.read(f"{record}/entry_points.txt").decode()
    assert "plutonbook = registry.cli:main" in entry_points
    metadata = wheel.read(f"{record}/METADATA").decode()
    assert "License-Expression: MIT" in metadata and "Requires-Python: >=3.11" in metadata
    assert f"{record}/licenses/LICENSE" in wheel.namelist()


def test_project_runs_on_packages_of_general_purpose_only() -> None:
    """No petrology, geochemistry or drill-hole package: the list is closed, an addition is deliberate."""
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    names = {requirement.split(">=")[0].split("[")[0] for requirement in project["dependencies"]}
    assert names == {
        "alembic", "click", "flask", "flask-login", "flask-wtf", "numpy", "openpyxl", "orjson", "pandas", "pyproj",
        "sqlalchemy", "waitress",
    }  # fmt: skip
