"""What README.md says is true: its commands, options, views, columns and SQL."""

from __future__ import annotations

import re
import shlex
import shutil
import sqlite3
import subprocess
import sys
from collections.abc import Callable, Iterator, Sequence
from pathlib import Path
from typing import Any

import click
import pytest
import sqlalchemy as sa

import seed_demo
from registry.cli import COMMANDS, group
from registry.store.sheets import SHEETS

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
CI_RUN = ROOT / ".ci" / "run"


def section(title: str) -> str:
    """The text under a heading, up to the next heading of its rank."""
    found = re.search(rf"^## {re.escape(title)}\n(.*?)(?=^## |\Z)", README, re.MULTILINE | re.DOTALL)
    assert found, f"README.md has no section '{title}'"
    return found[1]


def blocks(language: str, text: str) -> list[str]:
    return [body.strip() for body in re.findall(rf"```{language}\n(.*?)```", text, re.DOTALL)]


TWO_COMMANDS = blocks("sh", section("Two commands"))
#: Statements of a block: comments at their head stay with them.
QUERIES = [query.strip() for block in blocks("sql", section("Reading with SQL")) for query in block.split(";\n")]
WRITES = [query.strip() for block in blocks("sql", section("Writing with SQL")) for query in block.split(";\n")]
#: Every ``plutonbook ...`` in a code block or in backticks.
COMMAND_LINES = [
    line
    for line in [*"\n".join(blocks("sh", README)).splitlines(), *re.findall(r"`(plutonbook [^`]+)`", README)]
    if re.search(r"(^|[ /])plutonbook ", line)
]


def test_readme_first_line_says_what_plutonbook_is() -> None:
    assert re.match(r"# Plutonbook: a register of ", README)


def test_readme_gives_exactly_two_commands_first() -> None:
    assert len(TWO_COMMANDS) == 2 and all("\n" not in command for command in TWO_COMMANDS)
    assert TWO_COMMANDS[0].endswith("plutonbook demo") and TWO_COMMANDS[1].endswith(".venv/bin/pytest")
    assert "`python3-venv`" in section("Two commands")


@pytest.mark.parametrize("command", TWO_COMMANDS)
def test_ci_runs_the_readme_commands_word_for_word(command: str) -> None:
    lines = [line.strip() for line in CI_RUN.read_text(encoding="utf-8").splitlines()]
    assert lines.count(command) == 1, f"'{command}' must stand once as a line of .ci/run"


@pytest.mark.parametrize("command", TWO_COMMANDS)
def test_readme_commands_parse_in_a_plain_shell(command: str) -> None:
    shell = shutil.which("dash") or "sh"
    done = subprocess.run([shell, "-n", "-c", command], capture_output=True, text=True)
    assert (done.returncode, done.stderr) == (0, "")


def test_ci_run_is_executable_bash_that_parses() -> None:
    assert CI_RUN.stat().st_mode & 0o111
    assert CI_RUN.read_text(encoding="utf-8").startswith("#!/bin/bash\n")
    done = subprocess.run(["bash", "-n", str(CI_RUN)], capture_output=True, text=True)
    assert (done.returncode, done.stderr) == (0, "")


@pytest.mark.parametrize("line", COMMAND_LINES)
def test_readme_command_and_its_options_exist(line: str) -> None:
    words = shlex.split(line)
    at = next(i for i, word in enumerate(words) if word.endswith("plutonbook"))
    name = words[at + 1]
    assert name in COMMANDS, f"README.md names 'plutonbook {name}', which is no command"
    command = group.get_command(click.Context(group), name)
    assert command is not None
    known = {option for parameter in command.params for option in parameter.opts}
    used = {word for word in words[at + 2 :] if word.startswith("--")}
    assert used <= known, f"'{line}': the command has no {sorted(used - known)}"


def test_readme_names_the_commands_that_the_program_has() -> None:
    named = {re.search(r"plutonbook ([a-z-]+)", line)[1] for line in COMMAND_LINES}  # type: ignore[index]
    assert named == set(COMMANDS)


def test_readme_views_are_those_of_the_contract() -> None:
    table = section("Reading with SQL").split("```")[0]
    named = set(re.findall(r"`(\w+_sheet|column_guide)`", table))
    assert named == set(SHEETS)


@pytest.mark.parametrize("path", seed_demo.files()[:7], ids=lambda path: path.stem)
def test_readme_lists_the_columns_of_the_demo_files(path: Path) -> None:
    header = path.read_text(encoding="utf-8").splitlines()[0].split(",")
    row = next(line for line in section("Your own data").splitlines() if line.startswith(f"| {path.stem} |"))
    listed = row.split("`")[1].split()
    assert set(header) <= set(listed)
    assert listed[0] == header[0]


@pytest.fixture(scope="module", params=["sqlite", pytest.param("postgresql", marks=pytest.mark.postgresql)])
def demo_rows(request: pytest.FixtureRequest) -> Iterator[Callable[[str], Sequence[Any]]]:
    """A function that runs a query on the demo registry, once on each engine."""
    if request.param == "sqlite":
        place = f"sqlite:///{request.getfixturevalue('demo_file')}"
    else:
        place = request.getfixturevalue("postgresql_demo")
    engine = sa.create_engine(place)
    with engine.connect() as connection:
        yield lambda query: connection.exec_driver_sql(query).fetchall()
    engine.dispose()


def run(*arguments: str) -> str:
    done = subprocess.run([sys.executable, "-m", "registry.cli", *arguments], capture_output=True, text=True, cwd=ROOT)
    assert done.returncode == 0, done.stderr
    return done.stdout


@pytest.mark.parametrize("query", QUERIES, ids=lambda query: query.splitlines()[0].removeprefix("-- "))
def test_readme_query_runs_on_the_demo_and_finds_rows(demo_rows: Callable[[str], Sequence[Any]], query: str) -> None:
    assert demo_rows(query)


def test_readme_offers_ten_queries() -> None:
    assert len(QUERIES) == 10


def test_readme_writing_marks_samples_and_refresh_computes_them(demo_file: Path, tmp_path: Path) -> None:
    path = Path(shutil.copy(demo_file, tmp_path / "copy.sqlite"))
    connection = sqlite3.connect(path)
    waiting = "SELECT count(*) FROM sample_sheet WHERE is_stale = 1"
    try:
        assert connection.execute(waiting).fetchone() == (0,)
        connection.execute(WRITES[0])
        assert connection.execute(waiting).fetchone() == (1,)
        connection.execute(WRITES[1])
        everything = connection.execute("SELECT count(*) FROM sample_sheet").fetchone()
        assert connection.execute(waiting).fetchone() == everything
        connection.commit()
        run("refresh", "--registry", str(path))
        assert connection.execute(waiting).fetchone() == (0,)
    finally:
        connection.close()
