"""Progress of a command: a line written over on a terminal, a line now and then elsewhere. All data are invented."""

from __future__ import annotations

import os
import pty
import re
import subprocess
import sys
import threading
from pathlib import Path

import pytest

from registry.commands import progress as shown_progress
from registry.commands.progress import shown
from registry.importing import ImportOptions, import_files
from registry.progress import words
from registry.store.engine import open_registry, writing

CERTIFICATE = "Sample,SiO2 (%),MgO (%)\n" + "".join(f"T{row},{50 + row % 20},3.1\n" for row in range(3))


@pytest.mark.parametrize(
    ("given", "sentence"),
    [
        (("reading", 0, 1, "a.csv", False), "Reading a.csv."),
        (("reading", 1, 3, "b.csv", False), "Reading b.csv, file 2 of 3."),
        (("reading bytes", 30_000_000, 143_000_000, "b.csv", False), "Reading b.csv: 30 of 143 MB."),
        (("storing", 8192, 100_000, "", False), "Storing: 8,192 of 100,000 lines of results."),
        (("computing", 4096, 100_000, "", True), "Computing and judging on trial: 4,096 of 100,000 samples."),
        (("marking", 0, 0, "", False), "Finding the samples it touches."),
        (("writing", 0, 0, "", False), "Writing it to the registry."),
        (("writing", 0, 0, "", True), "Undoing the trial."),
    ],
)
def test_progress_in_words(given: tuple[str, int, int, str, bool], sentence: str) -> None:
    what, done, total, file, trial = given
    assert words(what, done, total, file=file, trial=trial) == sentence


def test_progress_without_a_terminal_is_a_line_now_and_then(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    clock = iter([0.0, 1.0, 6.0, 7.0, 12.0, 17.0])
    monkeypatch.setattr(shown_progress.time, "monotonic", lambda: next(clock))
    with shown([Path("a.csv")]) as progress:
        for done in (0, 100, 200, 300, 400):
            progress("storing", done, 1000)
    assert capsys.readouterr().err.splitlines() == [
        "Storing: 100 of 1,000 lines of results.",
        "Storing: 400 of 1,000 lines of results.",
    ]


def in_terminal(arguments: list[str]) -> tuple[int, str, str]:
    """Exit code, standard output and what the terminal that is standard error showed."""
    ours, theirs = pty.openpty()
    seen = bytearray()

    def watch() -> None:
        while True:
            try:
                data = os.read(ours, 4096)
            except OSError:  # the other end is closed
                return
            if not data:
                return
            seen.extend(data)

    with subprocess.Popen(
        [sys.executable, "-m", "registry.cli", *arguments], stdout=subprocess.PIPE, stderr=theirs, text=True
    ) as done:
        os.close(theirs)
        watcher = threading.Thread(target=watch)
        watcher.start()
        output = done.communicate(timeout=60)[0]
    watcher.join(timeout=60)
    os.close(ours)
    return done.returncode, output, seen.decode()


def test_import_on_a_terminal_shows_its_progress_and_wipes_it(founded_registry: object, tmp_path: Path) -> None:
    path = founded_registry.path
    (tmp_path / "lab.csv").write_text(CERTIFICATE, encoding="utf-8")
    code, output, terminal = in_terminal(
        ["--registry", str(path), "import", str(tmp_path / "lab.csv"), "--create-samples"]
    )
    assert code == 0 and "Stored." in output
    assert "Reading lab.csv." in terminal and "Writing it to the registry." in terminal
    assert terminal.endswith("\r\x1b[2K")
    assert not re.search(r"[^\r\n]\n", terminal)  # nothing of it stays on the terminal
    assert "Reading lab.csv." not in output


def test_import_that_has_to_wait_says_for_what_and_goes_on(founded_registry: object, tmp_path: Path) -> None:
    path = founded_registry.path
    (tmp_path / "lab.csv").write_text(CERTIFICATE, encoding="utf-8")
    with writing(open_registry(path), what="a long repair"):
        child = subprocess.Popen(
            [sys.executable, "-m", "registry.cli", "--registry", str(path), "import", str(tmp_path / "lab.csv"),
             "--create-samples"],
            stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
        )  # fmt: skip
        assert child.stderr is not None
        said = child.stderr.readline()
    output, _ = child.communicate(timeout=60)
    assert "is held by a long repair since" in said and said.endswith("; waiting.\n")
    assert child.returncode == 0 and "Stored." in output


@pytest.mark.parametrize(
    ("command", "done"),
    [
        (("withdraw", "B-1"), "Batch B-1 withdrawn"),
        pytest.param(("digestion", "B-1", "Zr=xrf"), "fusion -> xrf", marks=pytest.mark.slow),
        pytest.param(("settings", "loi_warn_wt=1"), "loi_warn_wt: 3.0 -> 1.0", marks=pytest.mark.slow),
    ],
)
def test_change_that_has_to_wait_says_for_what_and_goes_on(
    founded_registry: object, tmp_path: Path, command: tuple[str, ...], done: str
) -> None:
    path = founded_registry.path
    (tmp_path / "lab.csv").write_text("Sample,Zr fusion (ppm)\nA,150\n", encoding="utf-8")
    import_files(founded_registry, [tmp_path / "lab.csv"], ImportOptions(create_samples=True, batch="B-1"))
    with writing(open_registry(path), what="a long repair"):
        child = subprocess.Popen(
            [sys.executable, "-m", "registry.cli", "--registry", str(path), *command],
            stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
        )  # fmt: skip
        assert child.stderr is not None
        said = child.stderr.readline()
    output, _ = child.communicate(timeout=60)
    assert "is held by a long repair since" in said and said.endswith("; waiting.\n")
    assert child.returncode == 0 and done in output
