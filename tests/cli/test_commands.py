"""The contract of the command line: names, exit codes, sentences."""

from __future__ import annotations

import csv
import json
import shutil
from pathlib import Path

import pytest

from registry.cli import COMMANDS, main


@pytest.fixture(autouse=True)
def no_registry_in_the_environment(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("PLUTONBOOK_REGISTRY", raising=False)


def run(*arguments: object) -> int:
    with pytest.raises(SystemExit) as ended:
        main([str(argument) for argument in arguments])
    return int(ended.value.code or 0)


@pytest.fixture
def path(founded_registry_file: Path, tmp_path: Path) -> Path:
    return Path(shutil.copy(founded_registry_file, tmp_path / "registry.sqlite"))


@pytest.fixture
def files(tmp_path: Path) -> list[Path]:
    """Invented: two samples."""
    samples, results = tmp_path / "samples.csv", tmp_path / "C-1.csv"
    samples.write_text("sample_code,sample_kind\nA,outcrop\nB,outcrop\n")
    results.write_text(
        "Sample,SiO2 (%),Al2O3 (%),Fe2O3T (%),MgO (%),CaO (%),Na2O (%),K2O (%),LOI (%)\n"
        "A,65.0,16.0,5.0,2.0,4.5,4.0,2.5,0.9\nB,50.0,15.5,11.0,7.5,10.5,2.6,0.8,1.0\n"
    )
    return [samples, results]


@pytest.mark.parametrize("command", ["create", "import x.csv", "refresh", "batches", "check", "serve"])
def test_command_without_a_registry_exits_2_with_that_sentence(command: str, capsys: pytest.CaptureFixture) -> None:
    assert run(*command.split()) == 2
    assert "no registry given" in capsys.readouterr().err


def test_registry_option_stands_before_or_after_the_subcommand(
    path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture
) -> None:
    assert run("--registry", path, "batches") == 0
    assert run("batches", "--registry", path) == 0
    monkeypatch.setenv("PLUTONBOOK_REGISTRY", str(path))
    assert run("batches") == 0
    assert capsys.readouterr().out.count("No batches yet") == 3


def test_every_command_has_help_that_says_what_it_does(capsys: pytest.CaptureFixture) -> None:
    for name in COMMANDS:
        assert run(name, "--help") == 0
        assert len(capsys.readouterr().out.splitlines()[2].strip()) > 10, name


def test_create_refuses_a_path_where_something_is(path: Path, capsys: pytest.CaptureFixture) -> None:
    assert run("create", "--registry", path) == 1
    assert "exists already" in capsys.readouterr().err


def test_unknown_command_exits_2(capsys: pytest.CaptureFixture) -> None:
    assert run("dig") == 2
    assert "dig" in capsys.readouterr().err


def test_registry_of_something_else_is_refused_with_a_sentence(tmp_path: Path, capsys: pytest.CaptureFixture) -> None:
    note = tmp_path / "note.txt"
    note.write_text("not a registry")

    assert run("batches", "--registry", note) == 1
    assert "not an SQLite file" in capsys.readouterr().err


def test_import_prints_what_it_understood_and_batches_lists_it(
    path: Path, files: list[Path], capsys: pytest.CaptureFixture
) -> None:
    assert run("import", *files, "--registry", path, "--lab", "Invented lab") == 0
    printed = capsys.readouterr().out
    assert "SiO2" in printed and "Stored." in printed

    assert run("batches", "--registry", path) == 0
    assert "C-1  active  2 lines, 16 results  Invented lab" in capsys.readouterr().out


def test_import_with_problems_exits_1_and_says_nothing_was_written(
    path: Path, files: list[Path], capsys: pytest.CaptureFixture
) -> None:
    files[1].write_text("Sample,SiO2 (%)\nA,165\n")

    assert run("import", *files, "--registry", path) == 1
    errors = capsys.readouterr().err
    assert "row 2, column 'SiO2 (%)'" in errors
    assert "nothing was written" in errors


def test_import_report_as_json_is_json(path: Path, files: list[Path], capsys: pytest.CaptureFixture) -> None:
    assert run("import", *files, "--registry", path, "--json") == 0
    report = json.loads(capsys.readouterr().out)
    assert report["recomputed"] == 2
    assert report["verdicts"]["porphyry_copper"]


def test_withdraw_and_restore_say_what_changed(path: Path, files: list[Path], capsys: pytest.CaptureFixture) -> None:
    run("import", *files, "--registry", path)

    assert run("withdraw", "C-1", "--registry", path) == 0
    assert run("withdraw", "C-1", "--registry", path) == 1
    assert run("restore-batch", "C-1", "--registry", path) == 0
    assert run("withdraw", "C-9", "--registry", path) == 1
    captured = capsys.readouterr()
    assert "2 samples recomputed" in captured.out
    assert "there is no batch 'C-9'" in captured.err


def test_export_writes_the_rows_that_meet_every_condition(
    path: Path, files: list[Path], tmp_path: Path, capsys: pytest.CaptureFixture
) -> None:
    run("import", *files, "--registry", path)
    target = tmp_path / "out.csv"

    assert run("export", "sample_sheet", "--to", target, "--where", "sio2_wt > 60", "--registry", path) == 0
    with target.open(encoding="utf-8-sig", newline="") as file:
        written = list(csv.DictReader(file))
    assert [row["sample_code"] for row in written] == ["A"]
    assert run("export", "sample_sheet", "--to", target, "--where", "gold > 1", "--registry", path) == 2
    assert run("export", "ore_sheet", "--to", target, "--registry", path) == 1
    errors = capsys.readouterr().err
    assert "no column 'gold'" in errors and "no sheet 'ore_sheet'" in errors


def test_export_of_no_row_says_what_the_column_holds(
    path: Path, files: list[Path], tmp_path: Path, capsys: pytest.CaptureFixture
) -> None:
    run("import", *files, "--registry", path)
    target = tmp_path / "out.csv"

    assert run("export", "verdict_sheet", "--to", target, "--where", "target = copper", "--registry", path) == 0
    said = capsys.readouterr().out
    assert "no row meets the conditions; target holds " in said and "porphyry_copper" in said


def test_check_of_a_whole_registry_has_nothing_to_complain_of(
    path: Path, files: list[Path], capsys: pytest.CaptureFixture
) -> None:
    run("import", *files, "--registry", path)

    assert run("check", "--registry", path) == 0
    assert "Nothing to complain of" in capsys.readouterr().out


def test_methods_self_test_agrees_everywhere(capsys: pytest.CaptureFixture) -> None:
    assert run("methods", "--self-test") == 0
    last = capsys.readouterr().out.splitlines()[-1]
    agreeing, _, total = last.partition(" of ")
    assert agreeing == total.split()[0]


def test_methods_lists_every_quantity_with_unit_and_source(capsys: pytest.CaptureFixture) -> None:
    assert run("methods", "--json") == 0
    quantities = json.loads(capsys.readouterr().out)["quantities"]
    assert len(quantities) > 150
    assert all(row["unit"] and row["source"] and row["status"] and row["range"] for row in quantities)


def test_demo_refuses_a_registry_of_real_data(path: Path, capsys: pytest.CaptureFixture) -> None:
    assert run("demo", "--no-serve", "--registry", path) == 1
    assert "not a demo" in capsys.readouterr().err


def test_demo_is_built_once_and_then_used_again(tmp_path: Path, capsys: pytest.CaptureFixture) -> None:
    place = tmp_path / "demo.sqlite"

    assert run("demo", "--no-serve", "--registry", place) == 0
    assert run("demo", "--no-serve", "--registry", place) == 0
    printed = capsys.readouterr().out
    assert "invented" in printed and "again" in printed


@pytest.mark.parametrize(
    "arguments", [["refresh", "--intrusion", "Grey sill"], ["import", "x.csv", "--supersede", "--add-to", "B"]]
)
def test_options_that_contradict_each_other_or_lack_one_exit_2(
    arguments: list[str], path: Path, capsys: pytest.CaptureFixture
) -> None:
    assert run(*arguments, "--registry", path) == 2
    assert capsys.readouterr().err.startswith("plutonbook: ")


def test_backup_is_put_back_and_what_stood_there_is_kept(
    path: Path, files: list[Path], tmp_path: Path, capsys: pytest.CaptureFixture
) -> None:
    run("import", *files, "--registry", path)
    saved = tmp_path / "saved.sqlite"
    assert run("backup", saved, "--registry", path) == 0
    assert run("backup", saved, "--registry", path) == 1
    path.write_bytes(b"damaged")

    assert run("recover", saved, "--registry", path) == 0
    assert run("batches", "--registry", path) == 0
    assert run("recover", files[0], "--registry", path) == 1
    captured = capsys.readouterr()
    assert "C-1  active" in captured.out
    assert "not an SQLite file" in captured.err
    assert len(list(tmp_path.glob("registry-replaced-*.sqlite"))) == 1
