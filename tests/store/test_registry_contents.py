"""Batches, reading back for a refresh, what ``check`` finds, and that both engines show the same. Numbers invented."""

from __future__ import annotations

import hashlib
import shutil
import sqlite3
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from registry.errors import NotFound, PlutonbookError
from registry.founding import found
from registry.importing import ImportOptions, import_files
from registry.petrology.analytes import CHOSEN_INDEX
from registry.refresh import refresh_registry
from registry.store import batch_files, batches, bulk, integrity, loading
from registry.store.engine import Registry, open_registry, reading, writing
from registry.store.sheets import DERIVED_SHEETS, SHEETS

DATA = b"Sample,Zr ppm\nX001,120\n"


def insert_samples(connection: Any, count: int) -> np.ndarray:
    for number in range(1, count + 1):
        connection.exec_driver_sql(f"INSERT INTO sample (code, kind) VALUES ('X{number:03d}', 'core')")
    return np.array(connection.exec_driver_sql("SELECT sample_id FROM sample ORDER BY sample_id").scalars().all())


def insert_certificate(connection: Any, code: str, analytes: str, lines: list[Any], **facts: Any) -> int:
    """A batch; ``lines`` are (sample id, repeat number, values)."""
    batch_id = batches.insert_batch(connection, **{"imported_at": "2026-01-01T00:00:00Z", **facts, "code": code})
    columns = batches.insert_columns(
        connection, batch_id, [{"position": p, "analyte": a, "unit": "ppm"} for p, a in enumerate(analytes.split())]
    )
    ids, repeats, values = zip(*lines, strict=True)
    aliquots = bulk.insert_aliquots(
        connection, np.array(ids), batch_id, np.arange(len(ids)) + 2, ["original"] * len(ids), np.array(repeats)
    )
    table = np.array(values, dtype=float)
    bulk.insert_results(connection, aliquots, columns, table, np.zeros(table.shape, dtype=np.uint8))
    return batch_id


def test_batch_keeps_its_file_and_hash(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        batch_id = batches.insert_batch(
            connection, code="K1", imported_at="2026-01-01T00:00:00Z", data=DATA, certificate="C-77", file_name="k1.csv"
        )
        assert batch_files.file_of(connection, batch_id) == DATA
        batch = batches.find_by_hash(connection, hashlib.sha256(DATA).hexdigest())
        assert batch == batches.find_batch(connection, "K1") == batches.find_by_certificate(connection, "C-77")
        assert (batch["batch"], batch["state"], batch["file_name"]) == ("K1", "active", "k1.csv")
        assert batches.find_batch(connection, "K2") is None
        with pytest.raises(ValueError, match="batch 'K3': the hash given is abc, that of the bytes is"):
            batches.insert_batch(connection, code="K3", imported_at="x", data=DATA, sha256="abc")


def test_damaged_stored_file_is_told(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        batch_id = batches.insert_batch(connection, code="K1", imported_at="2026-01-01T00:00:00Z", data=DATA)
        connection.exec_driver_sql("DELETE FROM batch_file")
        assert batch_files.file_of(connection, batch_id) is None
    with writing(any_registry) as connection:
        from registry.store import tables

        connection.execute(tables.batch_file.insert().values(batch_id=batch_id, part_no=0, content=b"not compressed"))
        with pytest.raises(PlutonbookError, match="the stored file of batch 1 is damaged"):
            batch_files.file_of(connection, batch_id)
        connection.execute(tables.batch_file.update().values(content=batch_files.compress(DATA)[:-1]))
        with pytest.raises(PlutonbookError, match="the stored file of batch 1 is damaged: its end is missing"):
            batch_files.file_of(connection, batch_id)


def test_large_file_is_kept_in_parts_and_read_back_whole(any_registry: Registry) -> None:
    data = np.random.default_rng(1).bytes(3 * batch_files.PART_BYTES)  # invented, cannot be compressed
    with writing(any_registry) as connection:
        batch_id = batches.insert_batch(connection, code="K1", imported_at="2026-01-01T00:00:00Z", data=data)
        assert connection.exec_driver_sql("SELECT count(*) FROM batch_file").scalar() == 4
        assert batch_files.file_of(connection, batch_id) == data
        assert batch_files.hash_of(connection, batch_id) == hashlib.sha256(data).hexdigest()
        connection.exec_driver_sql("DELETE FROM batch WHERE batch_id = 1")
        assert connection.exec_driver_sql("SELECT count(*) FROM batch_file").scalar() == 0


@pytest.mark.parametrize("code", ["K-1", "K\\1", "K_1", "K%1"])
def test_free_code_is_one_that_no_batch_has(any_registry: Registry, code: str) -> None:
    """Also where the code holds what a pattern of SQL gives a meaning to; the codes are invented."""
    with writing(any_registry) as connection:
        for taken in (code, f"{code} corrected 2"):
            batches.insert_batch(connection, code=taken, imported_at="2026-01-01T00:00:00Z")
        assert batches.free_code(connection, code, " corrected ") == f"{code} corrected 3"


def test_withdrawn_batch_gives_no_results_until_it_is_restored(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        ids = insert_samples(connection, 2)
        insert_certificate(connection, "K1", "Zr", [(1, 0, [120.0]), (2, 0, [90.0])])
        batches.set_state(connection, 1, "withdrawn")
        assert loading.load_blocks(connection, ids) == []
        assert connection.exec_driver_sql("SELECT count(*) FROM result_sheet").scalar() == 0
        assert [(b["batch"], b["state"], b["lines"], b["results"]) for b in batches.list_batches(connection)] == [
            ("K1", "withdrawn", 2, 2)
        ]
        batches.set_state(connection, 1, "active")
        assert len(loading.load_blocks(connection, ids)) == 1
        rows = connection.exec_driver_sql("SELECT * FROM result_sheet ORDER BY sample_id").fetchall()
    assert tuple(rows[0]) == (1, "X001", "Zr", 120.0, "ppm", None, None, "unknown", "K1", 2, 1)


def test_batch_states_are_checked(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        batch_id = batches.insert_batch(connection, code="K1", imported_at="2026-01-01T00:00:00Z")
        with pytest.raises(ValueError, match="cannot be 'gone'; its states are active, superseded, withdrawn"):
            batches.set_state(connection, batch_id, "gone")
        with pytest.raises(NotFound, match="no batch with the id 99"):
            batches.set_state(connection, 99, "active")


def test_blocks_hold_each_batch_and_repeat_apart_with_their_age(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        ids = insert_samples(connection, 4)
        insert_certificate(
            connection, "NEW", "Zr Hf", [(1, 0, [120.0, 3.0]), (3, 0, [80.0, np.nan]), (1, 1, [122.0, 3.1])],
            reported_on="2025-06-01",
        )  # fmt: skip
        insert_certificate(connection, "OLD", "Nb", [(1, 0, [8.0]), (4, 0, [9.0])], reported_on="2024-06-01")
        insert_certificate(connection, "TWICE", "Y", [(2, 0, [20.0]), (2, 0, [21.0])], reported_on="2026-01-01")
        blocks = loading.load_blocks(connection, ids[:3])
    found = [
        ([c.analyte for c in b.columns], b.sample.tolist(), b.values.tolist(), b.newness, b.repeat) for b in blocks
    ]
    assert found[0] == (["Zr", "Hf"], [0, 2], [[120.0, 3.0], [80.0, pytest.approx(np.nan, nan_ok=True)]], 1, 0)
    assert found[1:] == [
        (["Zr", "Hf"], [0], [[122.0, 3.1]], 1, 1),
        (["Nb"], [0], [[8.0]], 0, 0),
        (["Y"], [1], [[20.0]], 2, 0),
        (["Y"], [1], [[21.0]], 2, 0),
    ]
    assert loading.load_blocks.__doc__


def test_samples_with_aliquots_are_told_from_those_without(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        ids = insert_samples(connection, 3)
        insert_certificate(connection, "K1", "Zr", [(2, 0, [1.0])])
        assert loading.samples_with_aliquots(connection, ids).tolist() == [2]
        assert loading.samples_with_aliquots(connection, ids[:1]).tolist() == []


CONTEXT = """
INSERT INTO area (name, heat_flow_mw_m2, heat_production_uw_m3) VALUES ('North', 85, 2.5), ('South', 60, 1.5);
INSERT INTO site (code, kind, area_id) VALUES ('XH1', 'drill_hole', 1);
INSERT INTO intrusion (name, area_id, shape, half_width_m, age_ma, mapped) VALUES ('Grey', 2, 'sphere', 900, 5, 1);
INSERT INTO intrusion (name, shape) VALUES ('Deep body', 'slab');
INSERT INTO sample (code, kind, site_id, intrusion_id, lithology, magnetic_susceptibility_si)
 VALUES ('A', 'core', 1, 2, 'granite', 0.01);
INSERT INTO sample (code, kind, intrusion_id) VALUES ('B', 'outcrop', 1), ('C', 'outcrop', 2);
INSERT INTO sample (code, kind) VALUES ('D', 'float')
"""


def test_context_brings_what_is_known_around_each_sample(any_registry: Registry) -> None:
    from registry.pipeline import FLAG_CONTEXT, NUMBER_CONTEXT, TEXT_CONTEXT

    with writing(any_registry) as connection:
        for statement in CONTEXT.strip().split(";\n"):
            connection.exec_driver_sql(statement)
        context = loading.load_context(connection, np.array([1, 2, 3, 4]))
        with pytest.raises(KeyError, match=r"no sample has the ids \[9\]"):
            loading.load_context(connection, np.array([1, 9]))
    assert set(context) == {*NUMBER_CONTEXT, *TEXT_CONTEXT, *FLAG_CONTEXT}
    assert context["has_intrusion"].tolist() == [True, True, True, False]
    assert context["body_mapped_or_cored"].tolist() == [True, True, False, False]
    assert context["sample_kind"].tolist() == ["core", "outcrop", "outcrop", "float"]
    assert context["site_kind"].tolist() == ["drill_hole", None, None, None]
    assert context["intrusion_shape"].tolist() == ["slab", "sphere", "slab", None]
    np.testing.assert_array_equal(context["half_width_m"], [np.nan, 900.0, np.nan, np.nan])
    np.testing.assert_array_equal(context["heat_flow_mw_m2"], [85.0, 60.0, np.nan, np.nan])
    np.testing.assert_array_equal(context["area_heat_production_uw_m3"], [2.5, 1.5, np.nan, np.nan])
    np.testing.assert_array_equal(context["magnetic_susceptibility_si"], [0.01, np.nan, np.nan, np.nan])


@pytest.fixture
def demo(demo_file: Path, tmp_path: Path) -> Any:
    """A copy of the invented demo registry, opened."""
    registry = open_registry(shutil.copy(demo_file, tmp_path / "demo.sqlite"))
    yield registry
    registry.close()


def findings(registry: Registry) -> list[str]:
    with reading(registry) as connection:
        found = integrity.findings(connection)
    assert all(set(finding) == {"subject", "found", "remedy"} and finding["remedy"] for finding in found)
    return [f"{finding['subject']}: {finding['found']}" for finding in found]


def test_check_of_a_sound_registry_finds_nothing(demo: Registry) -> None:
    assert findings(demo) == []


def test_check_of_a_new_registry_on_each_engine_finds_nothing(any_registry: Registry) -> None:
    assert findings(any_registry) == []


def test_check_names_what_insert_or_replace_broke(demo: Registry) -> None:
    """As Debian's sqlite3 client does it: foreign keys off, no delete trigger fires, the sample gets a new id."""
    client = sqlite3.connect(demo.path, isolation_level=None)
    code, kind = client.execute("SELECT code, kind FROM sample WHERE kind = 'core' LIMIT 1").fetchone()
    client.execute("INSERT OR REPLACE INTO sample (code, kind) VALUES (?, ?)", (code, kind))
    client.close()
    found = findings(demo)
    assert "table aliquot: 1 row pointing at a sample that is not there" in found
    assert "table verdict: 7 rows pointing at a sample that is not there" in found
    assert "derived values: 1 stale: something changed since they were computed" in found
    with reading(demo) as connection:
        remedy = integrity.findings(connection)[0]["remedy"]
    assert "INSERT OR REPLACE gives a row a new id" in remedy


@pytest.mark.parametrize(
    ("edit", "expected"),
    [
        ("UPDATE batch_file SET content = x'00' WHERE batch_id = 1", "the stored file does not have the hash"),
        ("UPDATE batch SET sha256 = 'abc' WHERE batch_id = 1", "the stored file does not have the hash"),
        ("DROP TRIGGER plutonbook_stale_sample_update", "trigger plutonbook_stale_sample_update: is not there"),
        ("DROP VIEW norm_sheet", "view norm_sheet: is not there"),
        ("INSERT INTO import_guard VALUES (1)", "a row stands in it, so edits mark nothing stale"),
        ("INSERT INTO stale VALUES (999999, 1)", "1 row pointing at a sample that is not there"),
        ("UPDATE result SET column_id = column_id + 5000 WHERE aliquot_id = 1", "at a batch column that is not there"),
        ("DELETE FROM derived WHERE sample_id = 1", "1 samples without any that are not marked stale"),
        ("UPDATE derived SET causes = 'a' WHERE sample_id = 1", "rows computed with another catalogue"),
        ("UPDATE alembic_version SET version_num = '0000'", "schema: revision 0000, expected"),
        ("UPDATE sample SET kind = 'blank' WHERE sample_id = 1", "of control samples"),
    ],
)  # fmt: skip
def test_check_finds_what_a_tool_broke(demo: Registry, edit: str, expected: str) -> None:
    client = sqlite3.connect(demo.path, isolation_level=None)
    client.execute(edit)
    client.close()
    assert [line for line in findings(demo) if expected in line] != []


def test_check_of_a_damaged_page_says_so(demo: Registry) -> None:
    demo.close()
    assert demo.path is not None
    content = bytearray(demo.path.read_bytes())
    page = int.from_bytes(content[16:18], "big")  # SQLite's file format: page size in the header
    start = len(content) // 2 // page * page
    content[start : start + page] = bytes(page)
    demo.path.write_bytes(content)
    assert [line for line in findings(demo) if line.startswith("file: ")] != []


def rounded(value: Any) -> Any:
    return float(f"{value:.12g}") if isinstance(value, float) else value


def sheet(connection: Any, name: str) -> list[tuple[Any, ...]]:
    rows = connection.exec_driver_sql(f"SELECT * FROM {name}").fetchall()
    return sorted((tuple(rounded(value) for value in row) for row in rows), key=repr)


def test_every_view_shows_the_same_on_both_engines(demo: Registry, postgresql_demo: str) -> None:
    other = open_registry(postgresql_demo)
    with reading(demo) as here, reading(other) as there:
        for name in SHEETS:
            assert sheet(there, name) == sheet(here, name), name
        assert len(sheet(here, "reason_sheet")) > 1000
    other.close()


def test_refresh_of_everything_gives_the_rows_that_the_import_wrote(demo: Registry) -> None:
    """The guarded bulk route and the stale route are one mechanism: they give the same rows."""
    names = ("composition", "derived", "verdict")
    with reading(demo) as connection:
        before = {name: sheet(connection, name) for name in names}
    assert refresh_registry(demo, everything=True) == len(before["derived"])
    with reading(demo) as connection:
        assert {name: sheet(connection, name) for name in names} == before
        assert connection.exec_driver_sql("SELECT count(*) FROM change_sheet").scalar() == 0


def test_every_missing_value_of_a_derived_sheet_has_a_cause(demo: Registry) -> None:
    with reading(demo) as connection:
        causes = {tuple(row) for row in connection.exec_driver_sql("SELECT sample_id, column_name FROM cause_sheet")}
        explained = 0
        for name in DERIVED_SHEETS:
            numbers = [column for column in SHEETS[name][2:-1] if not column.endswith("_cause")]
            rows = connection.exec_driver_sql(f"SELECT sample_id, {', '.join(numbers)} FROM {name}").fetchall()
            for sample_id, *values in rows:
                missing = {(sample_id, column) for column, value in zip(numbers, values, strict=True) if value is None}
                assert missing <= causes
                explained += len(missing)
    assert explained > 100


def test_control_samples_stand_in_the_sheets_but_are_never_judged(demo: Registry) -> None:
    with reading(demo) as connection:
        controls = set(
            connection.exec_driver_sql(
                "SELECT sample_code FROM sample_sheet WHERE sample_kind IN ('reference_material', 'blank', 'duplicate')"
            ).scalars()
        )
        assert len(controls) > 5
        for name in ("verdict_sheet", "reason_sheet"):
            assert not controls & set(connection.exec_driver_sql(f"SELECT sample_code FROM {name}").scalars())
        for name in ("composition_sheet", "norm_sheet", "result_sheet"):
            assert controls & set(connection.exec_driver_sql(f"SELECT sample_code FROM {name}").scalars())


def test_composition_sheet_shows_limits_and_lists_them(tmp_path: Path) -> None:
    """Two invented lines; a censored cell is shown as its limit in the column's unit."""
    file = tmp_path / "K1.csv"
    file.write_text("Sample,Zr (ppm),Sn (ppm),Au (ppb)\nX1,<5,>1000,<2\nX2,120,3,4\n")
    registry = found(tmp_path / "registry.sqlite")
    import_files(registry, [file], ImportOptions(create_samples=True))
    with reading(registry) as connection:
        rows = connection.exec_driver_sql(
            "SELECT sample_code, zr_ppm, sn_ppm, au_ppm, censored FROM composition_sheet ORDER BY sample_code"
        ).fetchall()
        stored = loading.load_composition(connection, [1, 2])
    assert [tuple(row) for row in rows] == [
        ("X1", 5.0, 1000.0, pytest.approx(0.002), "zr_ppm<,sn_ppm>,au_ppm<"),
        ("X2", 120.0, 3.0, pytest.approx(0.004), None),
    ]
    assert stored.qualifiers[CHOSEN_INDEX["sn_ppm"]].tolist() == [2, 0]
    registry.close()


def test_stored_bytes_are_the_file_itself(demo: Registry) -> None:
    import seed_demo

    files = {path.name: path.read_bytes() for path in seed_demo.files()}
    with reading(demo) as connection:
        rows = connection.exec_driver_sql("SELECT file_name, sha256, batch_id FROM batch").fetchall()
        kept = {row[0]: batch_files.file_of(connection, row[2]) for row in rows}
    assert {row[0] for row in rows} == {name for name in files if name.startswith("results_")}
    for name, sha256, _ in rows:
        assert kept[name] == files[name]
        assert hashlib.sha256(files[name]).hexdigest() == sha256
