"""The arrows between the parts, read from every file's syntax tree; the house rules on names, length and words.

Nothing here has a published source: the rules are the project's own (DEVELOPERS.md, "Layers" and "House rules").
"""

from __future__ import annotations

import ast
import os
import re
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path, PurePosixPath

import pytest

ROOT = Path(__file__).resolve().parents[1]
ALLOWED_TOP_LEVEL = {
    "README.md", "DEVELOPERS.md", "LICENSE", "pyproject.toml", "registry", "migrations", "web", "tests", "seed_demo",
}  # fmt: skip
OWN_PACKAGES = {"registry", "migrations", "web", "seed_demo"}
LONGEST_MODULE_LINES, LONGEST_TEST_MODULE_LINES = 320, 500
#: One revision is one step of the schema's history; the first makes every table.
LONGEST_REVISION_LINES = 500
VAGUE_MODULE_NAMES = {"utils", "util", "helpers", "helper", "common", "manager", "managers", "misc"}
#: Spelt backwards, so that this file does not hold them: nothing in the project cites where its idea came from.
FORBIDDEN_WORDS = [
    word[::-1]
    for word in (
        "erutcel", "serutcel", "rerutcel", "esruoc", "sesruoc", "tpircsnart", "stpircsnart", "rekaeps", "srekaeps",
        "tsacdop", "ranibew",
    )
]  # fmt: skip
TEXT_SUFFIXES = {".py", ".md", ".toml", ".txt", ".csv", ".html", ".css", ".js", ".svg", ".mako", ".sql", ".json", ""}


@dataclass(frozen=True)
class Layer:
    """What the files under ``prefix`` may import: outside packages, and own modules by dotted prefix."""

    prefix: str
    outside: frozenset[str]
    own: tuple[str, ...]
    never_stdlib: frozenset[str] = frozenset()


def _layer(prefix: str, outside: str, own: str, never_stdlib: str = "") -> Layer:
    return Layer(prefix, frozenset(outside.split()), tuple(own.split()), frozenset(never_stdlib.split()))


TOUCHES_THE_WORLD = "os pathlib shutil sqlite3 socket subprocess tempfile urllib http glob"
SERVING = ("web", "waitress", "flask", "werkzeug")
#: The first prefix that fits decides. A trailing slash means a folder, otherwise one file.
LAYERS = (
    _layer("registry/petrology/", "numpy", "registry.petrology", TOUCHES_THE_WORLD),
    _layer(
        "registry/targets/", "numpy orjson", "registry.targets registry.petrology registry.errors", "sqlite3 socket"
    ),
    _layer(
        "registry/intake/",
        "numpy pandas openpyxl pyproj",
        "registry.intake registry.petrology registry.errors",
        "sqlite3 socket",
    ),
    _layer(
        "registry/quality/",
        "numpy pandas openpyxl pyproj",
        "registry.quality registry.petrology registry.errors",
        "sqlite3 socket",
    ),
    _layer("registry/pipeline.py", "numpy", "registry.petrology registry.targets", "sqlite3 socket"),
    _layer("registry/choice.py", "numpy", "registry.petrology registry.errors", "sqlite3 socket"),
    _layer("registry/errors.py", "", ""),
    _layer(
        "registry/store/",
        "sqlalchemy alembic numpy orjson pyproj psycopg",
        "registry.store registry.petrology registry.errors",
    ),
    _layer("registry/", "numpy pandas openpyxl orjson pyproj click sqlalchemy alembic pyarrow", "registry seed_demo"),
    _layer("web/serving.py", "waitress flask", "web registry.errors"),
    _layer(
        "web/",
        "flask flask_login flask_wtf wtforms werkzeug jinja2 markupsafe orjson",
        "web registry.store.reading registry.errors registry.@usecase",
        "sqlite3",
    ),
    _layer("migrations/env.py", "alembic sqlalchemy", "registry.store"),
    _layer("migrations/", "alembic sqlalchemy", "migrations"),
    _layer("seed_demo/", "numpy", "seed_demo"),
    _layer(
        "tests/",
        "numpy pandas openpyxl orjson pyproj click sqlalchemy alembic pyarrow flask werkzeug waitress pytest "
        "tests hypothesis selenium psycopg molmass periodictable markupsafe jinja2",
        "registry migrations web seed_demo",
    ),
)
#: Modules directly in ``registry`` that a page must not reach past the use cases.
NO_USE_CASE = {"pipeline", "choice", "cli", "petrology", "targets", "intake", "quality", "store"}


def project_files() -> list[str]:
    """Paths from the root of every file that is or would be committed; by walking where git is absent."""
    if (ROOT / ".git").exists():
        listing = subprocess.run(
            ["git", "-c", f"safe.directory={ROOT}", "ls-files", "--cached", "--others", "--exclude-standard", "-z"],
            cwd=ROOT,
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        return sorted(name for name in listing.split("\0") if name and (ROOT / name).exists())
    found = []
    for top in sorted(ALLOWED_TOP_LEVEL):
        for folder, folders, names in os.walk(ROOT / top):
            folders[:] = [name for name in folders if name != "__pycache__"]
            found += [str((Path(folder) / name).relative_to(ROOT)) for name in names]
        if (ROOT / top).is_file():
            found.append(top)
    return sorted(found)


def imports_of(path: str, source: str) -> Iterator[tuple[int, str, bool]]:
    """Line, dotted module and whether it stands at module level, for every import (relative ones resolved)."""
    package = list(PurePosixPath(path).parent.parts)
    tree = ast.parse(source, filename=path)
    lazy = {
        id(inner)
        for outer in ast.walk(tree)
        if isinstance(outer, ast.FunctionDef | ast.AsyncFunctionDef)
        for inner in ast.walk(outer)
    }
    for node in ast.walk(tree):
        top = id(node) not in lazy
        if isinstance(node, ast.Import):
            yield from ((node.lineno, alias.name, top) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            base = package[: len(package) - node.level + 1] if node.level else []
            module = ".".join([*base, *([node.module] if node.module else [])])
            yield from ((node.lineno, f"{module}.{alias.name}" if module else alias.name, top) for alias in node.names)
        elif isinstance(node, ast.Call) and ast.unparse(node.func).endswith("import_module"):
            yield from ((node.lineno, str(arg.value), top) for arg in node.args[:1] if isinstance(arg, ast.Constant))


def _may_reach(layer: Layer, module: str) -> bool:
    for allowed in layer.own:
        if allowed == "registry.@usecase":
            parts = module.split(".")
            if parts[0] == "registry" and len(parts) > 1 and parts[1] not in NO_USE_CASE:
                return True
        elif module == allowed or module.startswith(allowed + "."):
            return True
        elif allowed == "registry.store.reading" and module.startswith(allowed):
            return True  # reading_samples, reading_targets ...
    return False


def violations(path: str, source: str) -> list[str]:
    """Sentences ``file:line: what is wrong`` for the imports of one file."""
    layer = next((each for each in LAYERS if path == each.prefix or path.startswith(each.prefix)), None)
    if layer is None:
        return [f"{path}:1: no layer is stated for this file in tests/test_layers.py"]
    found = []
    for line, module, at_module_level in imports_of(path, source):
        root = module.split(".")[0]
        if layer.prefix == "registry/" and root in SERVING:
            if at_module_level:
                found.append(f"{path}:{line}: imports {module} at module level; only the serve command may, inside it")
        elif root in OWN_PACKAGES:
            if root == "registry" and module.count(".") == 0:
                continue  # the bare package holds nothing
            if not _may_reach(layer, module):
                found.append(f"{path}:{line}: {layer.prefix} may not import {module}; it may import {layer.own}")
        elif root in sys.stdlib_module_names:
            if root in layer.never_stdlib:
                found.append(f"{path}:{line}: {layer.prefix} may not use {root}")
        elif layer.prefix == "tests/" and (ROOT / path).with_name(f"{root}.py").is_file():
            continue  # a module beside the test
        elif root not in layer.outside:
            found.append(f"{path}:{line}: {layer.prefix} may not import {module}; outside it: {sorted(layer.outside)}")
    if layer.prefix == "registry/petrology/":
        found += [
            f"{path}:{node.lineno}: petrology opens no files"
            for node in ast.walk(ast.parse(source))
            if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id == "open"
        ]
    return found


PYTHON_FILES = [name for name in project_files() if name.endswith(".py")]


def test_layers_every_file_imports_only_forward() -> None:
    assert PYTHON_FILES
    found = [
        sentence for name in PYTHON_FILES for sentence in violations(name, (ROOT / name).read_text(encoding="utf-8"))
    ]
    assert not found, "\n" + "\n".join(found)


@pytest.mark.parametrize(
    ("path", "source", "expected"),
    [
        ("registry/petrology/norm.py", "import numpy\nimport pandas\n", "registry/petrology/norm.py:2:"),
        ("registry/petrology/norm.py", "def f():\n    from registry.store import reading\n", "norm.py:2:"),
        ("registry/petrology/iron.py", "from ..store import tables\n", "registry.store.tables"),
        ("registry/petrology/iron.py", "x = open('a.csv')\n", "iron.py:1: petrology opens no files"),
        ("registry/targets/judge.py", "import sqlalchemy\n", "judge.py:1:"),
        ("registry/intake/cells.py", "from registry.pipeline import compute\n", "cells.py:1:"),
        ("registry/pipeline.py", "from registry.store import reading\n", "pipeline.py:1:"),
        ("registry/store/tables.py", "import registry.intake.header\n", "tables.py:1:"),
        ("registry/refresh.py", "import flask\n", "refresh.py:1:"),
        ("registry/cli.py", "from web import create_app\n", "cli.py:1:"),
        ("web/samples.py", "import flask\n\nimport numpy as np\n", "samples.py:3:"),
        ("web/samples.py", "from registry.petrology import norm\n", "samples.py:1:"),
        ("web/samples.py", "from registry.store.tables import sample\n", "samples.py:1:"),
        ("web/samples.py", "import importlib\nimportlib.import_module('sqlalchemy')\n", "samples.py:2:"),
        ("migrations/versions/0001_create.py", "from registry.store import tables\n", "0001_create.py:1:"),
        ("elsewhere/module.py", "import os\n", "no layer is stated"),
    ],
)
def test_layers_planted_back_arrow_is_named_with_file_and_line(path: str, source: str, expected: str) -> None:
    assert any(expected in sentence for sentence in violations(path, source))


@pytest.mark.parametrize(
    ("path", "source"),
    [
        ("registry/petrology/norm.py", "import numpy as np\nfrom registry.petrology import constants\n"),
        ("registry/cli.py", "def serve():\n    from web import create_app\n    import waitress\n"),
        ("web/samples.py", "from registry.store import reading\nfrom registry.store.reading_samples import page\n"),
        ("web/samples.py", "from registry.refresh import refresh_some\nfrom registry.errors import NotFound\n"),
        ("migrations/env.py", "from alembic import context\nfrom registry.store import tables\n"),
    ],
)
def test_layers_forward_arrow_passes(path: str, source: str) -> None:
    assert violations(path, source) == []


def test_modules_stay_short() -> None:
    found = []
    for name in PYTHON_FILES:
        lines = (ROOT / name).read_text(encoding="utf-8").count("\n")
        limit = LONGEST_TEST_MODULE_LINES if name.startswith("tests/") else LONGEST_MODULE_LINES
        if name.startswith("migrations/versions/"):
            limit = LONGEST_REVISION_LINES
        if lines > limit:
            found.append(f"{name}:{lines}: longer than {limit} lines; split it by subject")
    assert not found, "\n" + "\n".join(found)


def test_modules_and_folders_carry_telling_names() -> None:
    found = [
        f"{name}: '{part}' says nothing about its subject"
        for name in PYTHON_FILES
        for part in PurePosixPath(name).with_suffix("").parts
        if part.lower() in VAGUE_MODULE_NAMES
    ]
    assert not found, "\n" + "\n".join(found)


def test_files_hold_no_forbidden_word() -> None:
    pattern = re.compile(r"\b(" + "|".join(FORBIDDEN_WORDS) + r")\b", re.IGNORECASE)
    assert pattern.search("a " + "erutceL"[::-1] + " hall")
    found = []
    for name in project_files():
        if pattern.search(name):
            found.append(f"{name}: the file name")
        if PurePosixPath(name).suffix in TEXT_SUFFIXES:
            for number, line in enumerate((ROOT / name).read_bytes().decode("utf-8", "replace").splitlines(), 1):
                if pattern.search(line):
                    found.append(f"{name}:{number}: {line.strip()[:100]}")
    assert not found, "\n" + "\n".join(found)


def test_top_level_holds_only_the_stated_names() -> None:
    top = {PurePosixPath(name).parts[0] for name in project_files()}
    assert {name for name in top if not name.startswith(".")} <= ALLOWED_TOP_LEVEL


def test_tests_folder_has_no_package_files() -> None:
    """pytest runs with importlib mode; an __init__.py in tests would make two test modules of one name collide."""
    assert [name for name in PYTHON_FILES if name.startswith("tests/") and name.endswith("__init__.py")] == []
