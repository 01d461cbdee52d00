"""The two real laboratory files, whole: imported, no norm, no verdict but undecided with the reason.

Their place and licence stand beside them in ../shared/data/lab_files; they are read there and never copied.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from registry.importing import ImportOptions, import_files
from registry.store.engine import Registry, reading

FOLDER = Path(__file__).resolve().parents[2] / "shared" / "data" / "lab_files"


@pytest.mark.parametrize(("name", "lines"), [("An6_Chip.csv", 192), ("An7_Cores_DD.csv", 135)])
def test_partial_digestion_without_silica_gives_results_but_no_norm_and_no_verdict(
    founded_registry: Registry, name: str, lines: int
) -> None:
    path = FOLDER / name
    if not path.exists():
        pytest.skip(f"the real lab file {name} is not here (../shared/data/lab_files)")

    report = import_files(founded_registry, [path], ImportOptions(create_samples=True))

    stored = report.files[0].results
    assert stored is not None and stored.results > 30 * lines
    with reading(founded_registry) as connection:
        ask = connection.exec_driver_sql
        assert ask("SELECT count(*) FROM norm_sheet WHERE norm_total_wt IS NOT NULL").scalar() == 0
        assert ask("SELECT DISTINCT verdict FROM verdict_sheet").scalars().all() == ["undecided"]
        causes = ask("SELECT DISTINCT fitness, fitness_cause FROM class_sheet").fetchall()
        assert all(fitness in ("unfit", "unknown") and "SiO2" in cause for fitness, cause in causes), causes
        lithophile = ask("SELECT count(*) FROM composition_sheet WHERE zr_ppm IS NOT NULL AND sio2_wt IS NOT NULL")
        assert lithophile.scalar() == 0
        kept = ask("SELECT count(*) FROM result_sheet WHERE qualifier = '<'").scalar()
        assert kept > lines
