"""A dry run tells what the import then does; the rows that --keep-going set aside come in with --add-to.

The data are invented: branches of the rules. Three granites whose Zr and Sn decide verdicts.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from registry.import_reports import ImportReport
from registry.importing import ImportOptions, import_files
from registry.refresh import refresh_registry
from registry.store import integrity
from registry.store.engine import Registry, reading

HEAD = "Sample,SiO2 (%) XRF,TiO2 (%) XRF,Al2O3 (%) XRF,Fe2O3T (%) XRF,MnO (%) XRF,MgO (%) XRF,CaO (%) XRF,"
HEAD += "Na2O (%) XRF,K2O (%) XRF,P2O5 (%) XRF,LOI (%),Sr fusion (ppm),Y fusion (ppm),Rb fusion (ppm),Sn fusion (ppm)\n"
ROCK = "{code},{silica},0.4,15.5,3.2,0.06,1.4,3.1,4.2,2.8,0.12,0.8,{sr},{y},60,2\n"
SAMPLES = "sample_code,sample_kind,duplicate_of\nG1,core,\nG2,core,\nG3,core,\nD1,duplicate,G1\n"


def rocks(sr: int, y: int = 9, silica: str = "67") -> str:
    return HEAD + "".join(ROCK.format(code=code, silica=silica, sr=sr, y=y) for code in ("G1", "G2", "G3"))


def bring(registry: Registry, folder: Path, files: dict[str, str], **options: Any) -> ImportReport:
    for name, text in files.items():
        (folder / name).write_text(text)
    return import_files(registry, [folder / name for name in files], ImportOptions(**options))


def is_sound(registry: Registry) -> None:
    sheets = ("composition_sheet", "verdict_sheet", "change_sheet", "control_sheet", "warning_sheet", "suite_sheet")

    def everything() -> list[list[str]]:
        with reading(registry) as connection:
            return [sorted(map(repr, connection.exec_driver_sql(f"SELECT * FROM {sheet}").all())) for sheet in sheets]

    with reading(registry) as connection:
        assert integrity.findings(connection) == []
    before = everything()
    refresh_registry(registry, everything=True)
    assert everything() == before


STEPS: list[tuple[dict[str, str], dict[str, Any]]] = [
    ({"samples.csv": SAMPLES, "K1.csv": rocks(600)}, {}),
    ({"K2.csv": rocks(90, y=40)}, {}),
    ({"K1b.csv": rocks(700)}, {"batch": "K1", "supersede": True}),
    ({"K2b.csv": HEAD + ROCK.format(code="D1", silica="67", sr=90, y=40)}, {"add_to": "K2"}),
    ({"K3.csv": rocks(650).replace("G3,67", "G9,67")}, {"keep_going": True}),
    ({"K4.csv": rocks(20).replace("G", "N")}, {"create_samples": True}),
]


def test_dry_run_of_every_step_tells_what_the_import_then_does(founded_registry: Registry, tmp_path: Path) -> None:
    changed = 0
    for files, options in STEPS:
        trial = bring(founded_registry, tmp_path, files, dry_run=True, **options)
        with reading(founded_registry) as connection:
            stored = connection.exec_driver_sql("SELECT count(*) FROM result").scalar()
        done = bring(founded_registry, tmp_path, files, **options)
        with reading(founded_registry) as connection:
            now = connection.exec_driver_sql("SELECT count(*) FROM result").scalar() or 0
            assert now - (stored or 0) == sum(file.results.results for file in done.files if file.results is not None)
        assert trial.verdicts == done.verdicts
        assert (trial.recomputed, trial.verdicts_changed) == (done.recomputed, done.verdicts_changed)
        assert [list(change.values())[:4] for change in trial.changes] == [
            list(change.values())[:4] for change in done.changes
        ]
        for first, second in zip(trial.files, done.files, strict=True):
            assert (first.rows, first.added, first.refused, first.changes) == (
                second.rows, second.added, second.refused, second.changes,
            )  # fmt: skip
            assert (first.results is None) is (second.results is None)
            if first.results is not None and second.results is not None:
                assert first.results.lines() == second.results.lines()
        changed += done.verdicts_changed
    assert changed > 0
    is_sound(founded_registry)


@pytest.mark.parametrize("lost", ["G1", "D1"])
def test_corrected_rest_of_a_file_is_added_to_its_batch(founded_registry: Registry, tmp_path: Path, lost: str) -> None:
    """One row is refused for its silica (670 %), corrected in the saved file, and compared with its pair again."""
    text = rocks(600) + ROCK.format(code="D1", silica="67", sr=500, y=9)
    wrong = text.replace(f"{lost},67,", f"{lost},670,")
    report = bring(founded_registry, tmp_path, {"samples.csv": SAMPLES, "K1.csv": wrong}, keep_going=True)
    (results,) = [file for file in report.files if file.results is not None]
    assert results.refused == 1 and results.refused_file is not None
    saved = Path(results.refused_file)
    assert "import that file with --add-to 'K1'" in "\n".join(results.lines())
    saved.write_text(saved.read_text(encoding="utf-8-sig").replace(",670,", ",67,"))
    import_files(founded_registry, [saved], ImportOptions(add_to="K1"))
    with reading(founded_registry) as connection:
        pair = connection.exec_driver_sql(
            "SELECT sample_code, expected, found, state FROM control_sheet WHERE analyte = 'Sr'"
        ).all()
        states = connection.exec_driver_sql("SELECT batch, state FROM batch_sheet ORDER BY 1").all()
    assert [tuple(row) for row in pair] == [("D1", 600.0, 500.0, "passed")]
    assert [tuple(row) for row in states] == [("K1", "active"), ("K1/2", "active")]
    is_sound(founded_registry)
