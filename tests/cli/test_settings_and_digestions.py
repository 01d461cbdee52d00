"""``plutonbook settings`` and ``plutonbook digestion``; the files are invented."""

from __future__ import annotations

import json
import shutil
import sqlite3
from collections.abc import Callable
from pathlib import Path

import pytest

from registry.cli import main

Run = Callable[..., tuple[int, str, str]]
RESULTS = (
    "Sample,SiO2 (%),MgO (%),Zr (ppm),LOI (%)\nA,66,2,180,1\nB,65,2.1,170,1\nBLK-1,0.1,<0.01,2,0.1\n"  # no method told
)


@pytest.fixture
def path(founded_registry_file: Path, tmp_path: Path) -> Path:
    return Path(shutil.copy(founded_registry_file, tmp_path / "registry.sqlite"))


@pytest.fixture
def run(path: Path, tmp_path: Path, capsys: pytest.CaptureFixture) -> Run:
    def called(command: str, *arguments: object) -> tuple[int, str, str]:
        with pytest.raises(SystemExit) as ended:
            main([command, *map(str, arguments), "--registry", str(path)])
        captured = capsys.readouterr()
        return int(ended.value.code or 0), captured.out, captured.err

    results = tmp_path / "C-1.csv"
    results.write_text(RESULTS)
    assert called("import", results, "--create-samples")[0] == 0
    return called


def of_registry(path: Path, query: str) -> list[tuple]:
    connection = sqlite3.connect(path)
    rows = connection.execute(query).fetchall()
    connection.close()
    return rows


def test_settings_are_listed_with_value_meaning_and_choices(run: Run) -> None:
    code, printed, _ = run("settings")
    assert code == 0
    assert "failed_control = mark  What becomes of an analyte that fails its controls" in printed
    assert "(hold, mark, ignore)" in printed
    assert "control_pattern.blank = none" in printed


def test_pattern_of_blanks_makes_controls_of_samples_of_unknown_kind(run: Run, path: Path) -> None:
    code, printed, _ = run("settings", "control_pattern.blank=^BLK", "--dry-run")
    assert code == 0
    assert printed.splitlines()[0] == "control_pattern.blank: none -> ^BLK"
    assert printed.splitlines()[-1] == "Dry run: nothing was written."
    assert of_registry(path, "SELECT kind FROM sample WHERE code = 'BLK-1'") == [("unknown",)]
    run("settings", "control_pattern.blank=^BLK")
    assert of_registry(path, "SELECT kind FROM sample WHERE code = 'BLK-1'") == [("blank",)]
    assert of_registry(path, "SELECT kind FROM sample WHERE code = 'A'") == [("unknown",)]
    assert of_registry(path, "SELECT count(*) FROM stale") == [(0,)]


def test_change_of_a_pattern_says_how_many_samples_become_controls(run: Run) -> None:
    _, tried, _ = run("settings", "control_pattern.blank=^BLK", "control_pattern.duplicate=^B$", "--dry-run")
    assert "1 sample of unknown kind would become a blank and be judged no more: BLK-1." in tried.splitlines()
    assert "1 sample of unknown kind would become a duplicate and be judged no more: B." in tried.splitlines()
    _, printed, _ = run("settings", "control_pattern.blank=^[AB]", "--json")
    report = json.loads(printed)
    assert report["controls"] == [{"kind": "blank", "samples": 3, "first": ["A", "B", "BLK-1"]}]
    _, printed, _ = run("settings", "control_pattern.blank=")
    assert "the samples it made controls stay controls: correct their kind" in printed


def test_change_of_a_pattern_that_no_registered_code_fits_says_so(run: Run) -> None:
    _, printed, _ = run("settings", "control_pattern.blank=^QQ")
    assert "No registered sample of unknown kind becomes a control by these patterns." in printed.splitlines()


def test_change_of_a_convention_says_nothing_of_controls(run: Run) -> None:
    _, printed, _ = run("settings", "failed_control=hold")
    assert "control by" not in printed and "unknown kind" not in printed


def test_convention_is_changed_and_given_back_its_default(run: Run) -> None:
    assert run("settings", "failed_control=hold")[0] == 0
    assert "failed_control = hold, by default mark" in run("settings")[1]
    assert run("settings", "convention.failed_control=")[0] == 0
    assert "failed_control = mark  " in run("settings")[1]


@pytest.mark.parametrize(
    ("wish", "code", "words"),
    [
        ("failed_control=drop", 2, "is no choice; choose one of hold, mark, ignore"),
        ("failed_control", 2, "write NAME=VALUE"),
        ("colour=red", 2, "there is no setting 'colour'"),
        ("control_pattern.blank=(", 2, "is no regular expression"),
        ("failed_control=mark", 1, "stand so already"),
    ],
)
def test_setting_that_cannot_be_made_ends_with_a_sentence(run: Run, wish: str, code: int, words: str) -> None:
    found, _, errors = run("settings", wish)
    assert found == code
    assert words in errors


def test_digestion_is_stated_by_heading_analyte_or_for_all_that_tell_none(run: Run, path: Path) -> None:
    assert "Zr (ppm): Zr in ppm, unknown" in run("digestion", "C-1")[1]
    code, printed, _ = run("digestion", "C-1", "unknown=four-acid", "SiO2 (%)=XRF", "mgo=Fusion")
    assert code == 0
    assert "Zr (ppm): unknown -> four acid" in printed
    digestions = dict(of_registry(path, "SELECT analyte, digestion FROM batch_column"))
    assert digestions == {"SiO2": "xrf", "MgO": "fusion", "Zr": "four_acid", "LOI": "unknown"}


def test_digestion_on_trial_writes_nothing(run: Run, path: Path) -> None:
    code, printed, _ = run("digestion", "C-1", "all=aqua regia", "--dry-run", "--json")
    report = json.loads(printed)
    assert (code, report["dry_run"], report["recomputed"]) == (0, True, 3)
    assert set(of_registry(path, "SELECT digestion FROM batch_column")) == {("unknown",)}


@pytest.mark.parametrize(
    ("wish", "words"),
    [
        ("Xx=fusion", "no column 'Xx'; its columns are 'SiO2 (%)'"),
        ("Zr=vinegar", "there is no digestion 'vinegar'"),
        ("Zr", "write COLUMN=DIGESTION"),
    ],
)
def test_digestion_that_cannot_be_stated_ends_with_a_sentence(run: Run, wish: str, words: str) -> None:
    code, _, errors = run("digestion", "C-1", wish)
    assert code == 2
    assert words in errors


def test_withdrawal_on_trial_says_what_it_would_do_and_writes_nothing(run: Run, path: Path) -> None:
    code, printed, _ = run("withdraw", "C-1", "--dry-run")
    assert code == 0
    assert "3 samples recomputed" in printed
    assert "Dry run: nothing was written." in printed
    assert of_registry(path, "SELECT state FROM batch") == [("active",)]
