"""Imports in the background: one at a time, with progress that outlives the page and the process. Data are invented."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import threading
import time
import zipfile
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

from registry import import_jobs
from registry.errors import NotFound, UsageError
from registry.import_drafts import Draft, create_draft, draft_paths, safe_name
from registry.importing import ImportOptions, import_files
from registry.intake import ColumnChoice, Recipe, read_file
from registry.intake_choices import describe_reading, use_words
from registry.job_folder import JobFolder, state_folder
from registry.jobs import Jobs
from registry.reading_recipes import find_recipe, forget_recipe, list_recipes, proposed_names, save_recipe
from registry.store.engine import Registry, reading, writing

TEXT = "Sample,SiO2 XRF (%),Zr XRF (ppm)\nA,60.1,150\nB,61.2,160\nA,60.2,151\n"


def written(text: str) -> Callable[[Path], Any]:
    return lambda path: path.write_text(text)


@pytest.fixture
def jobs(founded_registry: Registry, tmp_path: Path) -> Iterator[Jobs]:
    yield Jobs(founded_registry, JobFolder(tmp_path / "jobs"))


def draft_of(jobs: Jobs, text: str = TEXT, name: str = "r.csv", **options: Any) -> Draft:
    draft = create_draft(jobs.folder, [(name, written(text))])
    draft.options = options
    return draft


def ended(jobs: Jobs, draft: Draft, seconds: float = 60) -> Draft:
    found = jobs.wait(draft.draft_id, seconds)
    assert isinstance(found, Draft) and not found.under_way
    return found


def batches(registry: Registry) -> list[str]:
    with reading(registry) as connection:
        return [row[0] for row in connection.exec_driver_sql("SELECT code FROM batch ORDER BY batch_id")]


def test_job_looks_first_and_stores_then(jobs: Jobs) -> None:
    draft = draft_of(jobs, create_samples=True)
    assert import_jobs.look(jobs, draft)
    looked = ended(jobs, draft)
    assert (looked.state, batches(jobs.registry)) == ("read", [])
    assert looked.report is not None and looked.report["dry_run"]
    assert looked.files[0].looked
    assert [column["analyte"] for column in looked.files[0].looked[0]["columns"]] == ["SiO2", "Zr"]

    import_jobs.store(jobs, looked)
    stored = ended(jobs, looked)
    assert (stored.state, batches(jobs.registry)) == ("done", ["r"])
    assert stored.report is not None
    assert stored.report["files"][0]["results"]["aliquots"] == 3
    assert not draft_paths(jobs.folder, stored)[0].exists(), "the registry holds the file now"
    assert jobs.folder.load(draft.draft_id) == stored


def test_job_that_has_ended_can_be_stored_at_once(jobs: Jobs, monkeypatch: pytest.MonkeyPatch) -> None:
    begun: list[bool] = []
    stored = threading.Event()
    end = jobs.end

    def end_and_store(draft: Any, state: str, sentence: str) -> None:
        end(draft, state, sentence)
        if state == "read":
            looked = jobs.find(draft.draft_id)
            assert isinstance(looked, Draft) and looked.state == "read"
            begun.append(import_jobs.store(jobs, looked))
            stored.set()

    monkeypatch.setattr(jobs, "end", end_and_store)
    draft = draft_of(jobs, create_samples=True)
    import_jobs.look(jobs, draft)
    assert stored.wait(60)
    assert ended(jobs, draft).state == "done"
    assert (begun, batches(jobs.registry)) == ([True], ["r"])


def test_job_with_problems_lists_them_and_stores_nothing(jobs: Jobs) -> None:
    draft = draft_of(jobs)
    import_jobs.store(jobs, draft)
    refused = ended(jobs, draft)
    assert refused.state == "refused"
    assert [problem["found"] for problem in refused.problems] == ["A", "B", "A"]
    assert batches(jobs.registry) == []


def test_job_fault_of_the_program_is_a_sentence_and_the_next_job_runs(
    jobs: Jobs, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_arguments: Any, **_more: Any) -> None:
        raise RuntimeError("planted")

    monkeypatch.setattr(import_jobs, "import_files", broken)
    draft = draft_of(jobs)
    import_jobs.look(jobs, draft)
    failed = ended(jobs, draft)
    assert failed.state == "failed"
    assert "a fault in the program and not in your data" in failed.sentence and "planted" not in failed.sentence
    monkeypatch.undo()
    failed.options = {"create_samples": True}
    assert import_jobs.look(jobs, failed)
    assert ended(jobs, failed).state == "read"


def test_job_wrong_use_is_a_sentence(jobs: Jobs) -> None:
    draft = create_draft(jobs.folder, [("a.csv", written(TEXT)), ("b.csv", written(TEXT.replace("150", "155")))])
    draft.options = {"batch": "X", "create_samples": True}
    import_jobs.store(jobs, draft)
    failed = ended(jobs, draft)
    assert failed.state == "failed" and "names one batch" in failed.sentence


def test_job_of_a_file_with_several_tables_and_another_file_names_each_as_it_is_read(
    jobs: Jobs, monkeypatch: pytest.MonkeyPatch
) -> None:
    def packed(path: Path) -> None:
        with zipfile.ZipFile(path, "w") as archive:
            for number in range(3):
                archive.writestr(f"{number}.csv", TEXT.replace("150", f"{150 + number}"))

    draft = create_draft(jobs.folder, [("three.zip", packed), ("r.csv", written(TEXT))])
    draft.options = {"create_samples": True}
    said: list[str] = []
    real = jobs.watched

    def watched(job: Any, say: Any) -> Any:
        progress = real(job, say)

        def heard(what: str, done: int, total: int) -> None:
            progress(what, done, total)
            said.append(job.sentence)

        return heard

    monkeypatch.setattr(jobs, "watched", watched)
    import_jobs.look(jobs, draft)
    assert ended(jobs, draft).state == "read"
    assert [text for text in said if ", file " in text] == [
        "Reading three.zip, file 1 of 2.",
        "Reading r.csv, file 2 of 2.",
    ]


def test_job_waits_for_another_writer_and_says_what_holds_the_registry(jobs: Jobs) -> None:
    draft = draft_of(jobs, create_samples=True)
    with writing(jobs.registry, what="an invented upheaval"):
        import_jobs.store(jobs, draft)
        until = time.monotonic() + 20
        while "invented upheaval" not in draft.sentence and time.monotonic() < until:
            time.sleep(0.05)
        assert draft.state == "waiting"
        assert "is held by an invented upheaval since" in draft.sentence
        with reading(jobs.registry) as connection:
            assert connection.exec_driver_sql("SELECT count(*) FROM sample").scalar() == 0
    assert ended(jobs, draft).state == "done"


def test_second_job_waits_and_names_the_first(jobs: Jobs, monkeypatch: pytest.MonkeyPatch) -> None:
    go_on = threading.Event()
    real = import_jobs.import_files

    def slow(*arguments: Any, **more: Any) -> Any:
        more["progress"]("storing", 8_192, 100_000)
        assert go_on.wait(60)
        return real(*arguments, **more)

    monkeypatch.setattr(import_jobs, "import_files", slow)
    first, second = draft_of(jobs, create_samples=True), draft_of(jobs, TEXT.replace("150", "9"), "second.csv")
    import_jobs.store(jobs, first)
    import_jobs.look(jobs, second)
    assert not import_jobs.look(jobs, second), "it is under way already"
    saved: dict[str, Any] = {}
    until = time.monotonic() + 20
    while saved.get("state") != "storing" and time.monotonic() < until:
        time.sleep(0.01)
        saved = json.loads((jobs.folder.place / first.draft_id / "job.json").read_text())
    assert (first.state, first.done, first.total) == ("storing", 8_192, 100_000)
    assert first.sentence == "Storing: 8,192 of 100,000 lines of results."
    assert "Waits until the import of r.csv" in jobs.sentence_of(second)
    assert (saved["state"], saved["done"]) == ("storing", 8_192), "a reload finds the progress in the side file"
    go_on.set()
    assert ended(jobs, first).state == "done"
    assert ended(jobs, second).state == "read", "its samples are there now"


def test_work_of_a_stopped_program_is_told_as_failed(jobs: Jobs) -> None:
    draft = draft_of(jobs)
    draft.state = "storing"
    jobs.folder.save(draft)
    found = jobs.find(draft.draft_id)
    assert found is not None
    assert found.state == "failed" and "stored whole or not at all" in found.sentence
    assert jobs.all()[0].state == "failed"


def test_work_that_begins_and_ends_while_it_is_looked_up_is_not_told_as_stopped(
    jobs: Jobs, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A draft just sent waits and is held by nobody yet; who looks just then must not write over what comes of it."""
    draft = draft_of(jobs, create_samples=True)
    real = jobs.folder.load

    def done_meanwhile(job_id: str) -> Any:
        as_it_was = real(job_id)
        monkeypatch.setattr(jobs.folder, "load", real)
        import_jobs.look(jobs, draft)
        assert ended(jobs, draft).state == "read"
        return as_it_was

    monkeypatch.setattr(jobs.folder, "load", done_meanwhile)
    found = jobs.find(draft.draft_id)
    assert found is not None and found.state == "read"
    assert jobs.all()[0].state == "read"


HOLDER = """
import sys
from pathlib import Path
from registry.job_folder import JobFolder
folder = JobFolder(Path(sys.argv[1]))
print(folder.hold(sys.argv[2]), flush=True)
sys.stdin.read()
"""


def test_work_of_another_living_program_is_left_alone_and_failed_when_that_is_killed(jobs: Jobs) -> None:
    """The lock ends with the process, whatever has its number afterwards (flock(2))."""
    draft = draft_of(jobs)
    draft.state = "storing"
    jobs.folder.save(draft)
    command = [sys.executable, "-c", HOLDER, str(jobs.folder.place), draft.draft_id]
    with subprocess.Popen(command, stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True) as other:
        assert other.stdout is not None and other.stdout.readline() == "True\n"
        found = jobs.find(draft.draft_id)
        assert found is not None and found.state == "storing"
        assert not import_jobs.store(jobs, draft), "another works on it"
        other.kill()
    found = jobs.find(draft.draft_id)
    assert found is not None and found.state == "failed"


def test_drafts_are_deleted_after_a_day(jobs: Jobs) -> None:
    old, new = draft_of(jobs), draft_of(jobs)
    mark = jobs.folder.place / old.draft_id / "job.json"
    os.utime(mark, (time.time() - 25 * 3600,) * 2)
    assert jobs.folder.clean() == 1
    assert jobs.find(old.draft_id) is None
    assert jobs.find(new.draft_id) is not None


@pytest.mark.parametrize("name", ["../escape", "", "a" * 15, "a" * 17, "AAAAAAAA/AAAAAAA"])
def test_draft_id_that_is_none_finds_nothing(jobs: Jobs, name: str) -> None:
    draft_of(jobs)
    assert jobs.find(name) is None
    jobs.folder.delete(name)
    assert len(jobs.all()) == 1


@pytest.mark.parametrize(
    ("sent", "kept"),
    [
        ("plain.csv", "plain.csv"),
        ("C:\\data\\a b.csv", "a b.csv"),
        ("/etc/passwd", "passwd"),
        ("..", "file"),
        ("", "file"),
        ("tab\there\x00.csv", "tabhere.csv"),
        ("é" * 200 + ".csv", "é" * 116 + ".csv"),
    ],
)
def test_file_name_is_freed_of_folders_and_kept_short(sent: str, kept: str) -> None:
    assert safe_name(sent) == kept
    assert len(safe_name(sent).encode()) <= 240


def test_state_folder_follows_the_standard_and_the_registry(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    """XDG Base Directory Specification 0.8: XDG_STATE_HOME, else ~/.local/state."""
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path))
    one, other = state_folder("sqlite:///a"), state_folder("sqlite:///b")
    monkeypatch.chdir(tmp_path)
    assert state_folder("sqlite:///a") == state_folder(f"sqlite:///{tmp_path / 'a'}"), "one registry, named in two ways"
    assert state_folder("sqlite:///a") != one, "two registries of one name in two folders"
    assert one != other and one.is_relative_to(tmp_path / "plutonbook")
    monkeypatch.delenv("XDG_STATE_HOME")
    monkeypatch.setenv("HOME", str(tmp_path))
    assert state_folder("sqlite:///a").is_relative_to(tmp_path / ".local" / "state")
    assert not (tmp_path / "plutonbook").exists(), "nothing is made before a file comes"


def test_import_reports_progress_in_order(founded_registry: Registry, tmp_path: Path) -> None:
    path = tmp_path / "r.csv"
    path.write_text(TEXT)
    told: list[tuple[str, int, int]] = []
    seen: list[str | None] = []
    import_files(
        founded_registry,
        [path],
        ImportOptions(create_samples=True),
        progress=lambda *what: told.append(what),
        on_read=lambda _path, reading: seen.append(reading.kind),
    )
    assert seen == ["results"]
    assert told[0] == ("reading", 0, 1)
    assert ("storing", 0, 3) in told and ("computing", 0, 2) in told
    assert [what for what, _, _ in told] == sorted(
        (what for what, _, _ in told), key=["reading", "storing", "computing", "writing"].index
    )
    assert all(0 <= done <= total for _, done, total in told)


def test_use_of_a_column_names_place_conversion_and_what_the_digestion_makes_of_it() -> None:
    """Cr from Cr2O3: 2 x 51.9961 / 151.9904 (CIAAW 2021 atomic weights, recomputed) = 0.6842."""
    assert use_words("MgO", "wt%", "xrf", True) == "mgo_wt"
    assert use_words("MgO", "ppm", "xrf", True).endswith("0.0001")
    assert use_words("Zr", "ppm", "four_acid", True) == "zr_ppm; a minimum by four-acid digestion"
    assert use_words("SiO2", "wt%", "aqua_regia", True) == "not used: aqua regia does not carry it"
    assert use_words("Hg", "ppb", "aqua_regia", False) == "kept as a result only"
    assert use_words("Zr", "", "xrf", True) == ""


def test_description_of_a_reading_is_plain_json() -> None:
    described = describe_reading(read_file("r.csv", TEXT.encode()))
    assert json.loads(json.dumps(described)) == described
    assert described["rows"] == 3
    assert described["sample_header"] == "Sample"
    assert not any(text.startswith("column 'SiO2") for text in described["understood"])


RECIPE = Recipe(shape=("Sample", "Au"), columns={"Au": ColumnChoice(unit="ppb", digestion="fire_assay")})


def test_saved_reading_is_found_by_name_and_by_shape(founded_registry: Registry) -> None:
    assert not save_recipe(founded_registry, " Invented  lab ", RECIPE)
    found = find_recipe(founded_registry, "Invented lab")
    assert (found.columns, found.name) == (RECIPE.columns, "Invented lab")
    assert proposed_names(founded_registry, ("Sample", "Au")) == ["Invented lab"]
    assert proposed_names(founded_registry, ("Au", "Sample")) == proposed_names(founded_registry, ()) == []
    assert save_recipe(founded_registry, "Invented lab", RECIPE)
    save_recipe(founded_registry, "a newer one", RECIPE)
    assert proposed_names(founded_registry, ("Sample", "Au")) == ["a newer one", "Invented lab"]
    assert [row["name"] for row in list_recipes(founded_registry)] == ["Invented lab", "a newer one"]
    forget_recipe(founded_registry, "Invented lab")
    with pytest.raises(NotFound, match="no saved reading 'Invented lab'"):
        find_recipe(founded_registry, "Invented lab")
    with pytest.raises(NotFound, match="no saved reading 'Invented lab'"):
        forget_recipe(founded_registry, "Invented lab")


@pytest.mark.parametrize("name", ["", "  ", "x" * 81, "bell\x07"])
def test_saved_reading_needs_a_printable_name(founded_registry: Registry, name: str) -> None:
    with pytest.raises(UsageError, match="1 to 80 printable characters"):
        save_recipe(founded_registry, name, RECIPE)


def test_saved_reading_needs_a_shape(founded_registry: Registry) -> None:
    with pytest.raises(UsageError, match="knows no headings"):
        save_recipe(founded_registry, "shapeless", Recipe())
