"""A change tried out tells what the change itself does, and keeps nothing. All data are invented."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from registry import batching, setting_changes
from registry.importing import import_files
from registry.store.engine import Registry, reading
from tests.web.import_site import MAJORS, SAMPLES

TABLES = (
    "batch", "batch_column", "setting", "composition", "derived", "verdict", "verdict_change", "stale", "stale_group",
    "intrusion_derived", "suite_row", "audit_entry", "convention_set",
)  # fmt: skip


@pytest.fixture
def filled(founded_registry: Registry, tmp_path: Path) -> Iterator[Registry]:
    for name, text in (("samples.csv", SAMPLES), ("majors.csv", MAJORS)):
        (tmp_path / name).write_text(text)
        import_files(founded_registry, [tmp_path / name])
    yield founded_registry


def contents(registry: Registry) -> list[Any]:
    with reading(registry) as connection:
        return [sorted(map(repr, connection.exec_driver_sql(f"SELECT * FROM {table}").fetchall())) for table in TABLES]


CHANGES = {
    "withdrawing": lambda registry, trial: batching.set_state(registry, "majors", "withdrawn", trial),
    "a digestion": lambda registry, trial: batching.set_digestions(registry, "majors", {1: "aqua_regia"}, trial),
    "a convention": lambda registry, trial: setting_changes.change_settings(
        registry, ["loi_warn_wt=0.1", "total_fail_low_wt=99", "total_warn_low_wt=99.5"], trial
    ),
}


@pytest.mark.parametrize("name", CHANGES)
def test_change_tried_out_tells_what_it_does_and_keeps_nothing(filled: Registry, name: str) -> None:
    kept = contents(filled)
    foreseen = CHANGES[name](filled, True)
    assert contents(filled) == kept
    done = CHANGES[name](filled, False)
    assert done == foreseen
    assert done["recomputed"] == 3
    assert sum(number for *_, number in done["kinds"]) == done["verdicts_changed"] == len(done["changes"])
    with reading(filled) as connection:
        logged = connection.exec_driver_sql("SELECT count(*) FROM verdict_change").scalar()
        assert connection.exec_driver_sql("SELECT count(*) FROM stale").scalar() == 0
    assert logged == done["verdicts_changed"]
    assert contents(filled) != kept


def test_change_tells_how_far_it_is(filled: Registry) -> None:
    told: list[tuple[str, int, int]] = []
    batching.set_state(filled, "majors", "withdrawn", progress=lambda *what: told.append(what))
    assert told == [("marking", 0, 0), ("computing", 0, 3), ("writing", 0, 0)]
