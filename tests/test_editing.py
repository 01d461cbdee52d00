"""The use case of editing on both engines: stored, recomputed, noted, refused, and locked. Invented rows."""

from __future__ import annotations

from typing import Any

import pytest
import sqlalchemy as sa

from registry import editing, settings
from registry.errors import NotFound
from registry.setting_changes import change_settings
from registry.store import tables
from registry.store.engine import Registry, reading, writing


def _insert(connection: Any, table: sa.Table, **values: Any) -> int:
    return int(connection.execute(sa.insert(table).values(**values)).inserted_primary_key[0])  # type: ignore[index]


@pytest.fixture
def edited(any_registry: Registry) -> Registry:
    with writing(any_registry) as connection:
        site = _insert(
            connection, tables.site, code="DH-1", kind="drill_hole", longitude=15.0, latitude=55.0, depth_m=50.0
        )
        body = _insert(connection, tables.intrusion, name="Aster stock", shape="cylinder", half_width_m=900.0)
        _insert(
            connection, tables.sample, code="R-1", kind="core", site_id=site, intrusion_id=body, from_m=1.0, to_m=2.0
        )
    return any_registry


def _record(registry: Registry, kind: str, code: str) -> editing.Record:
    with reading(registry) as connection:
        return editing.find(connection, kind, code)


def test_editing_changes_erases_and_notes_on_either_engine(edited: Registry) -> None:
    before = _record(edited, "sample", "R-1")
    assert (before.values["intrusion"], before.values["site_code"]) == ("Aster stock", "DH-1")
    told = editing.change(
        edited, "sample", "R-1", before.row_version, {"intrusion": "", "pulp_available": "yes", "to_m": "3.5"}
    )
    assert sorted(told.changes) == [
        "intrusion Aster stock -> (blank)",
        "pulp_available (blank) -> yes",
        "to_m 2 -> 3.5",
    ]
    after = _record(edited, "sample", "R-1")
    assert (after.values["intrusion"], after.values["pulp_available"], after.values["to_m"]) == (None, True, 3.5)
    assert after.row_version > before.row_version
    with reading(edited) as connection:
        notes = connection.execute(sa.select(tables.audit_entry.c.subject, tables.audit_entry.c.action)).all()
        assert connection.scalar(sa.select(sa.func.count()).select_from(tables.stale)) == 0
    assert [tuple(note) for note in notes] == [("sample R-1", "edit")]


def test_editing_an_old_version_is_refused_with_what_stands_now(edited: Registry) -> None:
    before = _record(edited, "intrusion", "Aster stock")
    editing.change(edited, "intrusion", "Aster stock", before.row_version, {"age_ma": "61"})
    with pytest.raises(editing.ChangedMeanwhile, match="changed meanwhile by another") as raised:
        editing.change(edited, "intrusion", "Aster stock", before.row_version, {"age_ma": "62"})
    assert raised.value.record.values["age_ma"] == 61.0


def test_editing_faults_leave_everything_as_it_was(edited: Registry) -> None:
    before = _record(edited, "sample", "R-1")
    with pytest.raises(editing.Refused, match="beyond the end of hole DH-1") as raised:
        editing.change(edited, "sample", "R-1", before.row_version, {"to_m": "90", "texture": "", "intrusion": "X"})
    assert set(raised.value.faults) == {"intrusion", "to_m"}
    assert _record(edited, "sample", "R-1") == before


def test_editing_absent_things_and_nothing_changed(edited: Registry) -> None:
    with pytest.raises(NotFound, match="holds no site 'DH-2'"):
        editing.change(edited, "site", "DH-2", 1, {"depth_m": "5"})
    record = _record(edited, "site", "DH-1")
    assert editing.change(edited, "site", "DH-1", record.row_version, {"depth_m": "50.0"}) == editing.Edited()


def test_settings_are_foreseen_and_changed_on_either_engine(edited: Registry) -> None:
    told = change_settings(edited, ["pressure_gpa=0.4"], dry_run=True)
    assert (told["verdicts_changed"], told["kinds"]) == (0, [])
    with reading(edited) as connection:
        assert settings.current(connection)["pressure_gpa"] == 0.2
    change_settings(edited, ["pressure_gpa=0.4", "norm_halogens=yes", "iron_split=fixed_ratio"])
    with reading(edited) as connection:
        current = settings.current(connection)
    assert (current["pressure_gpa"], current["norm_halogens"], current["iron_split"]) == (0.4, True, "fixed_ratio")
