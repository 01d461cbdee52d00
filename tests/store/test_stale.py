"""Which edit makes which samples stale, on both engines, and from the clients a geologist has: sqlite3 and psql.

The rows are invented, to test the triggers.
"""

from __future__ import annotations

import subprocess
from collections.abc import Callable
from pathlib import Path

import pytest
import sqlalchemy as sa

from registry.store import bulk, stale
from registry.store.engine import Registry, reading, writing

SETUP = """
INSERT INTO area (name) VALUES ('North Block'), ('South Block');
INSERT INTO site (code, kind, area_id) VALUES ('XH1', 'drill_hole', 1), ('XO1', 'outcrop', NULL);
INSERT INTO intrusion (name, area_id) VALUES ('Grey stock', 2);
INSERT INTO sample (code, kind, site_id) VALUES ('A', 'core', 1), ('B', 'core', 1);
INSERT INTO sample (code, kind, intrusion_id) VALUES ('C', 'outcrop', 1);
INSERT INTO sample (code, kind) VALUES ('D', 'float');
INSERT INTO batch (code, imported_at) VALUES ('K1', '2026-01-01T00:00:00Z'), ('K2', '2026-01-02T00:00:00Z');
INSERT INTO batch_column (batch_id, position, analyte, unit) VALUES (1, 0, 'Zr', 'ppm'), (1, 1, 'Hf', 'ppm');
INSERT INTO batch_column (batch_id, position, analyte, unit) VALUES (2, 0, 'Zr', 'ppm');
INSERT INTO aliquot (sample_id, batch_id, line_no, kind) VALUES (1, 1, 1, 'original'), (2, 1, 2, 'original');
INSERT INTO aliquot (sample_id, batch_id, line_no, kind) VALUES (1, 2, 1, 'original');
INSERT INTO result (aliquot_id, column_id, value) VALUES (1, 1, 120.0), (1, 2, 3.1), (2, 1, 90.0), (3, 3, 118.0);
INSERT INTO target (code, name) VALUES ('porphyry_copper', 'Porphyry copper');
INSERT INTO target_version (target_id, version, definition, created_at, active) VALUES (1, '1', '', '', 1);
DELETE FROM stale
"""


@pytest.fixture
def filled(any_registry: Registry) -> Registry:
    with writing(any_registry) as connection:
        for statement in SETUP.strip().split(";\n"):
            connection.exec_driver_sql(statement)
    return any_registry


def marked(registry: Registry) -> dict[str, int]:
    with reading(registry) as connection:
        rows = connection.exec_driver_sql(
            "SELECT s.code, x.level FROM stale AS x JOIN sample AS s ON s.sample_id = x.sample_id ORDER BY s.code"
        )
        return {row[0]: row[1] for row in rows}


EDITS = [
    ("INSERT INTO result (aliquot_id, column_id, value) VALUES (2, 2, 2.0)", "B"),
    ("UPDATE result SET value = 121.0 WHERE aliquot_id = 1 AND column_id = 1", "A"),
    ("UPDATE result SET value = NULL, qualifier = 1 WHERE aliquot_id = 2", "B"),
    ("UPDATE result SET value = 120.0 WHERE aliquot_id = 1 AND column_id = 1", ""),
    ("DELETE FROM result WHERE column_id = 1", "AB"),
    ("INSERT INTO aliquot (sample_id, batch_id, line_no, kind) VALUES (4, 2, 2, 'original')", "D"),
    ("UPDATE aliquot SET sample_id = 4 WHERE aliquot_id = 2", "BD"),
    ("DELETE FROM aliquot WHERE aliquot_id = 3", "A"),
    ("UPDATE batch SET state = 'withdrawn' WHERE code = 'K1'", "AB"),
    ("UPDATE batch SET reported_on = '2025-12-01' WHERE code = 'K2'", "A"),
    ("UPDATE batch SET lab = 'Invented Laboratory'", ""),
    ("DELETE FROM batch WHERE code = 'K1'", "AB"),
    ("UPDATE batch_column SET digestion = 'four_acid' WHERE batch_column_id = 2", "A"),
    ("UPDATE batch_column SET unit = 'ppb' WHERE batch_column_id = 1", "AB"),
    ("UPDATE batch_column SET header = 'Zr (ppm)'", ""),
    ("DELETE FROM batch_column WHERE batch_column_id = 2", "A"),
    ("INSERT INTO sample (code, kind) VALUES ('E', 'outcrop')", "E"),
    ("UPDATE sample SET lithology = 'granite' WHERE code IN ('A', 'C')", "AC"),
    ("UPDATE sample SET lithology = NULL", ""),
    ("UPDATE sample SET density_kg_m3 = 2650 WHERE code = 'D'", "D"),
    ("UPDATE sample SET kind = 'blank' WHERE code = 'D'", "D"),
    ("UPDATE sample SET igsn = 'XX0001', easting = 1.0", ""),
    ("UPDATE intrusion SET half_width_m = 400", "C"),
    ("UPDATE intrusion SET name = 'Green stock'", ""),
    ("UPDATE site SET kind = 'outcrop' WHERE code = 'XH1'", "AB"),
    ("UPDATE site SET elevation_m = 10", ""),
    ("UPDATE area SET heat_flow_mw_m2 = 80 WHERE name = 'North Block'", "AB"),
    ("UPDATE area SET heat_flow_mw_m2 = 80 WHERE name = 'South Block'", "C"),
    ("UPDATE area SET name = 'Far Block' WHERE area_id = 1", ""),
    ("INSERT INTO setting (name, value) VALUES ('convention.pressure_gpa', '0.3')", "ABCD"),
]


@pytest.mark.parametrize(("edit", "codes"), EDITS)
def test_edit_marks_exactly_the_samples_it_touches(filled: Registry, edit: str, codes: str) -> None:
    with writing(filled) as connection:
        connection.exec_driver_sql(edit)
    assert marked(filled) == dict.fromkeys(codes, 1)


@pytest.mark.parametrize(
    "edit",
    [
        "UPDATE target_version SET active = 0",
        "UPDATE target_version SET definition = 'code = 1'",
        "INSERT INTO target_version (target_id, version, definition, created_at, active) VALUES (1, '2', '', '', 0)",
    ],
)
def test_edit_of_a_target_asks_for_judging_only(filled: Registry, edit: str) -> None:
    with writing(filled) as connection:
        connection.exec_driver_sql(edit)
    assert marked(filled) == dict.fromkeys("ABCD", 2)


def test_deriving_wins_over_judging_in_either_order(filled: Registry) -> None:
    with writing(filled) as connection:
        connection.exec_driver_sql("UPDATE sample SET lithology = 'granite' WHERE code = 'A'")
        connection.exec_driver_sql("UPDATE target_version SET active = 0")
        connection.exec_driver_sql("UPDATE sample SET lithology = 'granite' WHERE code = 'B'")
    assert marked(filled) == {"A": 1, "B": 1, "C": 2, "D": 2}


def test_or_replace_outside_does_not_break_the_list(sqlite_registry: Registry) -> None:
    """The outer statement's conflict clause overrides one inside a trigger; the triggers therefore have none."""
    with writing(sqlite_registry) as connection:
        for statement in SETUP.strip().split(";\n"):
            connection.exec_driver_sql(statement)
        for value in (1.0, 2.0):
            connection.exec_driver_sql(f"INSERT OR REPLACE INTO result VALUES (1, 1, {value}, 0)")
            connection.exec_driver_sql(f"INSERT OR ABORT INTO result VALUES (2, {int(value) + 10}, 1.0, 0)")
    assert marked(sqlite_registry) == {"A": 1, "B": 1}


def test_guard_keeps_the_triggers_silent_and_goes_with_the_block(filled: Registry) -> None:
    with writing(filled) as connection:
        with bulk.guarded(connection):
            connection.exec_driver_sql("UPDATE result SET value = 1.0")
            connection.exec_driver_sql("INSERT INTO sample (code, kind) VALUES ('E', 'outcrop')")
        connection.exec_driver_sql("UPDATE sample SET lithology = 'granite' WHERE code = 'D'")
    assert marked(filled) == {"D": 1}
    with reading(filled) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM import_guard").scalar() == 0


def test_triggers_stand_again_after_the_guard_and_after_an_error_in_it(filled: Registry) -> None:
    edit = "INSERT INTO result (aliquot_id, column_id, value) VALUES (2, {}, 2.0)"
    with pytest.raises(RuntimeError, match="planted"), writing(filled) as connection, bulk.guarded(connection):
        connection.exec_driver_sql(edit.format(2))
        raise RuntimeError("planted")
    with writing(filled) as connection:
        with bulk.guarded(connection):
            connection.exec_driver_sql(edit.format(7))
        assert stale.pending(connection) == []
        connection.exec_driver_sql(edit.format(2))
    assert marked(filled) == {"B": 1}


def test_deleted_parents_take_their_rows_with_them(filled: Registry) -> None:
    with writing(filled) as connection:
        connection.exec_driver_sql("UPDATE sample SET duplicate_of = 1 WHERE code = 'D'")
        connection.exec_driver_sql("DELETE FROM sample WHERE code = 'A'")
        assert connection.exec_driver_sql("SELECT aliquot_id FROM aliquot").scalars().all() == [2]
        assert connection.exec_driver_sql("SELECT aliquot_id FROM result").scalars().all() == [2]
        assert connection.exec_driver_sql("SELECT duplicate_of FROM sample WHERE code = 'D'").scalar() is None
        connection.exec_driver_sql("DELETE FROM batch WHERE code = 'K1'")
        assert connection.exec_driver_sql("SELECT count(*) FROM result").scalar() == 0
        assert connection.exec_driver_sql("SELECT batch_id FROM batch_column").scalars().all() == [2]
    assert marked(filled) == {"B": 1, "D": 1}


@pytest.mark.parametrize("table", ["area", "site", "intrusion", "sample"])
def test_row_version_rises_with_every_update(filled: Registry, table: str) -> None:
    name = "code" if table in ("site", "sample") else "name"
    with writing(filled) as connection:
        for _ in range(2):
            connection.exec_driver_sql(f"UPDATE {table} SET {name} = {name} WHERE {table}_id = 1")
        connection.exec_driver_sql(f"UPDATE {table} SET row_version = 9 WHERE {table}_id = 1 AND row_version = 3")
        assert connection.exec_driver_sql(f"SELECT row_version FROM {table} WHERE {table}_id = 1").scalar() == 9


def test_stale_functions_list_mark_and_clear(filled: Registry) -> None:
    with writing(filled) as connection:
        stale.mark(connection, [1, 2, 99], stale.JUDGE)
        stale.mark(connection, [2])
        assert stale.pending(connection) == [(1, 2), (2, 1)]
        assert stale.pending(connection, 1) == [(1, 2)]
        stale.mark_all(connection, stale.JUDGE)
        assert stale.pending(connection) == [(1, 2), (2, 1), (3, 2), (4, 2)]
        stale.mark_all(connection)
        stale.clear(connection, [1, 3])
        stale.clear(connection, [])
        assert stale.pending(connection) == [(2, 1), (4, 1)]
        assert stale.count(connection) == 2


@pytest.mark.parametrize("filled_by", ["sqlite3", "psql"])
def test_edit_from_a_debian_client_marks_samples_stale(
    filled_by: str, request: pytest.FixtureRequest, client_program: Callable[[str], str]
) -> None:
    registry: Registry = request.getfixturevalue("sqlite_registry" if filled_by == "sqlite3" else "postgresql_registry")
    with writing(registry) as connection:
        for statement in SETUP.strip().split(";\n"):
            connection.exec_driver_sql(statement)
    edit = "UPDATE sample SET lithology = 'monzonite' WHERE code = 'B'; DELETE FROM result WHERE aliquot_id = 1;"
    program = client_program(filled_by)
    if registry.path is not None:
        command = [program, str(registry.path), edit]
    else:
        url = sa.make_url(registry.url)
        command = [program, "-X", "-q", "-v", "ON_ERROR_STOP=1", "-h", str(url.query["host"]), "-U", str(url.username)]
        command += ["-d", str(url.database), "-c", edit]
    done = subprocess.run(command, capture_output=True, text=True, check=False, cwd=Path("/"))
    assert (done.returncode, done.stderr) == (0, "")
    assert marked(registry) == {"A": 1, "B": 1}
    with reading(registry) as connection:
        rows = connection.exec_driver_sql("SELECT sample_code, lithology, is_stale FROM sample_sheet ORDER BY 1")
        assert [tuple(row) for row in rows] == [
            ("A", None, 1), ("B", "monzonite", 1), ("C", None, 0), ("D", None, 0),
        ]  # fmt: skip
