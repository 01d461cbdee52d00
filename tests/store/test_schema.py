"""Creating registries on both engines, and that every view has its contract columns in contract order."""

from __future__ import annotations

import csv
from pathlib import Path

import pytest
import sqlalchemy as sa

from registry.errors import NotFound, PlutonbookError, UsageError
from registry.store import schema
from registry.store.engine import APPLICATION_ID, HEAD_REVISION, Registry, open_registry, reading, writing
from registry.store.sheets import DERIVED_COLUMNS, PER_SAMPLE_SHEETS, SHEETS

GOLDEN = Path(__file__).with_name("golden_columns.csv")


def test_create_on_each_engine_gives_every_view_its_columns_in_order(new_place: str) -> None:
    registry = schema.create(new_place)
    with reading(registry) as connection:
        for view, columns in SHEETS.items():
            assert tuple(connection.exec_driver_sql(f"SELECT * FROM {view}").keys()) == columns
    assert schema.revision(registry) == HEAD_REVISION
    registry.close()


def test_views_and_columns_equal_the_golden_list() -> None:
    """The list makes a change of the contract deliberate: change it by hand, together with the sheets."""
    with GOLDEN.open(encoding="utf-8", newline="") as file:
        golden = [(row["view_name"], row["column_name"]) for row in csv.DictReader(file)]
    assert [(view, column) for view, columns in SHEETS.items() for column in columns] == golden


def test_per_sample_views_begin_with_the_sample_and_end_with_is_stale() -> None:
    assert len(PER_SAMPLE_SHEETS) == 15
    for view in PER_SAMPLE_SHEETS:
        assert SHEETS[view][:2] == ("sample_id", "sample_code")
        assert SHEETS[view][-1] == "is_stale"
        assert len(set(SHEETS[view])) == len(SHEETS[view])


def test_derived_columns_are_the_quantities_of_the_catalogue() -> None:
    from registry.petrology.catalogue import QUANTITIES

    names = [quantity.name for quantity in QUANTITIES]
    assert len(set(names)) == len(names)
    assert sorted(names) == sorted(DERIVED_COLUMNS)


def test_column_guide_describes_every_column_with_unit_and_source(any_registry: Registry) -> None:
    with reading(any_registry) as connection:
        rows = connection.exec_driver_sql(
            "SELECT view_name, column_name, unit, meaning, method, source FROM column_guide"
        ).fetchall()
    assert {row[:2] for row in rows} == {(view, column) for view, columns in SHEETS.items() for column in columns}
    assert all(part and part.strip() for row in rows for part in row)
    undescribed = [row[:2] for row in rows if row[4] == "not yet computed" and row[3] == "not computed by this version"]
    assert undescribed == []


def test_create_over_an_existing_file_is_refused(registry_path: Path) -> None:
    before = registry_path.read_bytes()
    with pytest.raises(PlutonbookError, match="exists already; a new registry needs a path where nothing is"):
        schema.create(registry_path)
    assert registry_path.read_bytes() == before


def test_create_in_a_missing_folder_says_so(tmp_path: Path) -> None:
    with pytest.raises(PlutonbookError, match=r"the folder .*absent does not exist; make it first"):
        schema.create(tmp_path / "absent" / "registry.sqlite")


def test_create_twice_in_a_database_is_refused(postgresql_registry: Registry) -> None:
    with pytest.raises(PlutonbookError, match="holds a registry already; nothing was changed"):
        schema.create(postgresql_registry.url)


def test_create_whose_filling_fails_leaves_nothing(new_place: str) -> None:
    def fill(connection: sa.Connection) -> None:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Invented Block')")
        raise RuntimeError("planted")

    with pytest.raises(RuntimeError, match="planted"):
        schema.create(new_place, fill)
    if "://" in new_place:
        engine = sa.create_engine(new_place)
        assert sa.inspect(engine).get_table_names() == []
        engine.dispose()
    else:
        assert list(Path(new_place).parent.iterdir()) == []


def test_file_carries_the_mark_of_a_registry(registry_path: Path, sqlite_registry: Registry) -> None:
    with reading(sqlite_registry) as connection:
        assert connection.exec_driver_sql("PRAGMA application_id").scalar() == APPLICATION_ID
        assert connection.exec_driver_sql("PRAGMA journal_mode").scalar() == "wal"
    assert registry_path.read_bytes()[68:72] == b"PLUT"


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        (None, "there is no registry at .*'plutonbook create' makes a new one there"),
        (b"", "is empty, so it is not a registry"),
        (b"sample,SiO2\nA1,65.2\n", "is not an SQLite file, or its first page is damaged"),
        (b"SQLite format 3\0" + b"\x01" * 4096, "is not an SQLite file, or its first page is damaged"),
    ],
)
def test_open_of_what_is_no_registry_says_what_it_is(tmp_path: Path, content: bytes | None, sentence: str) -> None:
    path = tmp_path / "thing.sqlite"
    if content is not None:
        path.write_bytes(content)
    with pytest.raises(PlutonbookError, match=sentence):
        open_registry(path)
    assert path.exists() == (content is not None)


def test_open_of_another_sqlite_file_names_what_is_missing(tmp_path: Path) -> None:
    import sqlite3

    connection = sqlite3.connect(tmp_path / "other.sqlite")
    connection.execute("CREATE TABLE song (title TEXT)")
    connection.close()
    with pytest.raises(PlutonbookError, match="is an SQLite file of something else"):
        open_registry(tmp_path / "other.sqlite")


def test_open_of_a_folder_and_of_an_empty_database_say_so(tmp_path: Path, postgresql_server) -> None:
    with pytest.raises(PlutonbookError, match="is a folder; name the registry file in it"):
        open_registry(tmp_path)
    with pytest.raises(NotFound, match="holds no registry: 'plutonbook create' makes one in it"):
        open_registry(postgresql_server.new_database())
    with pytest.raises(PlutonbookError, match=r"cannot be reached: .*is the server running"):
        open_registry("postgresql://nobody@/nothing?host=/tmp/plutonbook-no-such-socket")


def test_open_of_an_unsupported_database_is_a_usage_error() -> None:
    with pytest.raises(UsageError, match="'mysql' databases are not supported; give the path of a file"):
        open_registry("mysql://someone@somewhere/registry")
    with pytest.raises(UsageError, match="names no file"):
        open_registry("sqlite://")


@pytest.mark.parametrize(
    ("revision", "sentence"), [("0000", "run 'plutonbook upgrade'"), ("9999", "made by a newer Plutonbook")]
)
def test_open_of_another_revision_says_what_to_do(any_registry: Registry, revision: str, sentence: str) -> None:
    with writing(any_registry) as connection:
        connection.execute(sa.text("UPDATE alembic_version SET version_num = :revision"), {"revision": revision})
    with pytest.raises(PlutonbookError, match=sentence):
        open_registry(any_registry.path or any_registry.url)
    opened = open_registry(any_registry.path or any_registry.url, any_revision=True)
    assert schema.revision(opened) == revision
    opened.close()


def test_upgrade_of_a_current_registry_rebuilds_what_a_tool_dropped(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        connection.exec_driver_sql("DROP VIEW sample_sheet")
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Invented Block')")
        connection.exec_driver_sql("DELETE FROM quantity")
    before, saved = schema.upgrade(any_registry)
    assert (before, saved) == (HEAD_REVISION, None)
    with reading(any_registry) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM sample_sheet").scalar() == 0
        assert connection.exec_driver_sql("SELECT name FROM area").scalar() == "Invented Block"
        assert connection.exec_driver_sql("SELECT count(*) FROM quantity").scalar() == len(DERIVED_COLUMNS)


def test_backup_is_a_registry_and_never_overwrites(sqlite_registry: Registry, tmp_path: Path) -> None:
    with writing(sqlite_registry) as connection:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Invented Block')")
    copy = tmp_path / "copy.sqlite"
    schema.backup(sqlite_registry, copy)
    copied = open_registry(copy)
    with reading(copied) as connection:
        assert connection.exec_driver_sql("SELECT name FROM area").scalar() == "Invented Block"
    copied.close()
    with pytest.raises(PlutonbookError, match="exists; name a file that does not"):
        schema.backup(sqlite_registry, copy)
