"""The history of the schema: one line of revisions, equal to the tables, up and down, whole or not at all."""

from __future__ import annotations

import re
from collections.abc import Iterator
from pathlib import Path

import pytest
import sqlalchemy as sa
from alembic.autogenerate import compare_metadata
from alembic.runtime.migration import MigrationContext
from alembic.script import ScriptDirectory

from registry.errors import PlutonbookError
from registry.store import schema, tables
from registry.store.engine import HEAD_REVISION, Registry, open_registry, writing
from registry.store.sheets import SHEETS

#: The revision after the newest, of the tests' own.
PLANTED = f"{int(HEAD_REVISION) + 1:04d}"


def scripts() -> ScriptDirectory:
    return ScriptDirectory.from_config(schema.alembic_config())


def ddl(connection: sa.Connection, tables_only: bool = True) -> dict[str, str]:
    """Every object of an SQLite database with its text, white space evened out."""
    kinds = "('table', 'index')" if tables_only else "('table', 'index', 'view', 'trigger')"
    rows = connection.exec_driver_sql(
        f"SELECT name, sql FROM sqlite_master WHERE type IN {kinds} AND sql IS NOT NULL AND name NOT LIKE 'sqlite_%' "
        "AND name NOT LIKE 'alembic_%'"
    )
    return {name: re.sub(r"\s+", " ", text).replace("( ", "(").replace(" )", ")").strip() for name, text in rows}


def counts(connection: sa.Connection) -> dict[str, int]:
    return {
        name: connection.exec_driver_sql(f"SELECT count(*) FROM {name}").scalar() or 0
        for name in tables.metadata.tables
    }


@pytest.fixture
def bare(tmp_path: Path) -> Iterator[sa.Connection]:
    """A connection to a new empty file, set up as the migrations want it, in a transaction."""
    path = tmp_path / "bare.sqlite"
    path.touch()
    engine = Registry(f"sqlite:///{path}", path).engine(foreign_keys=False, query_only=False)
    with engine.connect() as connection:
        connection.begin()
        yield connection
    engine.dispose()


def test_revisions_form_one_line_numbered_without_gap() -> None:
    directory = scripts()
    assert directory.get_heads() == [HEAD_REVISION]
    revisions = [script.revision for script in directory.walk_revisions()][::-1]
    assert revisions == [f"{number:04d}" for number in range(1, len(revisions) + 1)]


def test_revision_files_say_why_and_import_no_application_code() -> None:
    for script in scripts().walk_revisions():
        text = Path(script.path).read_text(encoding="utf-8")
        assert Path(script.path).name.startswith(f"{script.revision}_")
        assert script.doc
        assert not re.search(r"^\s*(from|import) +(registry|web|seed_demo)\b", text, re.MULTILINE)


def test_head_equals_the_tables_word_by_word(bare: sa.Connection) -> None:
    schema.migrate(bare, "head")
    migrated = ddl(bare)
    other = sa.create_engine("sqlite://")
    tables.metadata.create_all(other)
    with other.connect() as connection:
        declared = ddl(connection)
    assert set(migrated) == set(declared)
    assert migrated == declared
    assert len(migrated) > len(tables.metadata.tables)


def test_head_equals_the_tables_on_postgresql(postgresql_registry: Registry) -> None:
    with postgresql_registry.reader.connect() as connection:
        context = MigrationContext.configure(
            connection, opts={"compare_type": True, "compare_server_default": True, "include_object": _no_views}
        )
        assert compare_metadata(context, tables.metadata) == []
        types = connection.exec_driver_sql(
            "SELECT DISTINCT data_type, collation_name FROM information_schema.columns WHERE table_schema = 'public' "
            "AND table_name IN ('sample', 'derived', 'batch', 'batch_file', 'result') ORDER BY 1, 2"
        ).fetchall()
    assert [tuple(row) for row in types] == [
        ("bigint", None),
        ("bytea", None),
        ("double precision", None),
        ("text", "C"),
    ]


def _no_views(_object: object, name: str, kind: str, _reflected: bool, _other: object) -> bool:
    return not (kind == "table" and (name in SHEETS or name == "alembic_version"))


def test_every_table_is_strict_and_names_every_constraint(bare: sa.Connection) -> None:
    schema.migrate(bare, "head")
    for name, text in ddl(bare).items():
        if not text.startswith("CREATE TABLE"):
            continue
        assert text.endswith("STRICT"), name
        assert len(re.findall(r"\b(?:CHECK|UNIQUE|FOREIGN KEY)\b", text)) == len(
            re.findall(r"CONSTRAINT \w+ (?:CHECK|UNIQUE|FOREIGN KEY)", text)
        ), name


def test_up_down_and_up_again_gives_the_same_schema(bare: sa.Connection) -> None:
    schema.migrate(bare, "head")
    first = ddl(bare, tables_only=False)
    schema.migrate(bare, "base")
    assert ddl(bare, tables_only=False) == {}
    schema.migrate(bare, "head")
    assert ddl(bare, tables_only=False) == first


def test_up_and_down_on_postgresql_leaves_an_empty_database(postgresql_server) -> None:
    engine = sa.create_engine(postgresql_server.new_database())
    with engine.connect() as connection:
        connection.begin()
        schema.migrate(connection, "head")
        assert len(sa.inspect(connection).get_table_names()) == len(tables.metadata.tables) + 1
        schema.migrate(connection, "base")
        assert sa.inspect(connection).get_table_names() == ["alembic_version"]
    engine.dispose()


def planted_revision(folder: Path, body: str) -> Path:
    """A later revision as a file of its own; invented, to test what a failure leaves."""
    versions = folder / "versions"
    versions.mkdir(parents=True)
    source = Path(scripts().dir)
    (folder / "env.py").write_text((source / "env.py").read_text(encoding="utf-8"), encoding="utf-8")
    for script in scripts().walk_revisions():
        (versions / Path(script.path).name).write_text(Path(script.path).read_text(encoding="utf-8"), encoding="utf-8")
    (versions / f"{PLANTED}_add_planted_table.py").write_text(
        f'"""Planted."""\nfrom alembic import op\nrevision = "{PLANTED}"\ndown_revision = "{HEAD_REVISION}"\n'
        f"def upgrade():\n    op.execute('CREATE TABLE planted (x INTEGER)')\n    {body}\n"
        "def downgrade():\n    op.execute('DROP TABLE planted')\n",
        encoding="utf-8",
    )
    return folder


def with_planted(monkeypatch: pytest.MonkeyPatch, folder: Path) -> None:
    config = schema.alembic_config()
    config.set_main_option("script_location", str(folder))
    monkeypatch.setattr(schema, "alembic_config", lambda: config)


def fill(registry: Registry) -> None:
    """An invented hole with two samples."""
    with writing(registry) as connection:
        connection.exec_driver_sql("INSERT INTO site (code, kind) VALUES ('XH1', 'drill_hole')")
        connection.exec_driver_sql("INSERT INTO survey (site_id, depth_m, azimuth_deg, dip_deg) VALUES (1, 0, 90, -60)")
        connection.exec_driver_sql("INSERT INTO sample (code, kind, site_id) VALUES ('X1', 'core', 1)")
        connection.exec_driver_sql("INSERT INTO sample (code, kind, site_id) VALUES ('X2', 'core', 1)")


@pytest.mark.parametrize(
    ("body", "error", "sentence"),
    [
        ("raise RuntimeError('planted failure')", RuntimeError, "planted failure"),
        ("op.execute('INSERT INTO nowhere VALUES (1)')", sa.exc.DBAPIError, "nowhere"),
    ],
)
def test_upgrade_that_fails_leaves_the_earlier_registry_whole(
    any_registry: Registry,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    body: str,
    error: type[Exception],
    sentence: str,
) -> None:
    fill(any_registry)
    with_planted(monkeypatch, planted_revision(tmp_path / "planted", body))
    with any_registry.reader.connect() as connection:
        before = counts(connection)
    with pytest.raises(error, match=sentence):
        schema.upgrade(any_registry)
    with any_registry.reader.connect() as connection:
        assert counts(connection) == before
        assert not sa.inspect(connection).has_table("planted")
        assert connection.exec_driver_sql("SELECT count(*) FROM sample_sheet").scalar() == 2
        assert connection.exec_driver_sql("SELECT count(*) FROM stale").scalar() == 2
    assert schema.revision(any_registry) == HEAD_REVISION
    with writing(any_registry) as connection:
        connection.exec_driver_sql("UPDATE sample SET lithology = 'granite' WHERE code = 'X1'")
        assert connection.exec_driver_sql("SELECT row_version FROM sample WHERE code = 'X1'").scalar() == 2


def test_upgrade_that_orphans_rows_is_undone_and_says_which(
    sqlite_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    fill(sqlite_registry)
    with_planted(monkeypatch, planted_revision(tmp_path / "planted", "op.execute('DELETE FROM site')"))
    sentence = r"would leave 3 rows that point at missing rows \(sample -> site, survey -> site\)"
    with pytest.raises(RuntimeError, match=sentence):
        schema.upgrade(sqlite_registry)
    with sqlite_registry.reader.connect() as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM site").scalar() == 1
        assert connection.exec_driver_sql("SELECT count(*) FROM survey").scalar() == 1


def test_upgrade_of_an_older_registry_makes_a_backup_and_keeps_every_row(
    sqlite_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    fill(sqlite_registry)
    with_planted(monkeypatch, planted_revision(tmp_path / "planted", "pass"))
    monkeypatch.setattr(schema, "HEAD_REVISION", PLANTED)
    with sqlite_registry.reader.connect() as connection:
        before = counts(connection)
    earlier, saved = schema.upgrade(sqlite_registry)
    assert earlier == HEAD_REVISION
    assert saved is not None
    with sqlite_registry.reader.connect() as connection:
        assert counts(connection) == before
        assert connection.exec_driver_sql("SELECT count(*) FROM planted").scalar() == 0
        assert connection.exec_driver_sql("PRAGMA foreign_key_check").fetchall() == []
        assert connection.exec_driver_sql("SELECT count(*) FROM sample_sheet").scalar() == 2
    assert schema.revision(sqlite_registry) == PLANTED
    copied = open_registry(saved)
    assert schema.revision(copied) == HEAD_REVISION
    with copied.reader.connect() as connection:
        assert counts(connection) == before
    copied.close()


def test_batch_rebuild_of_a_parent_keeps_its_children_with_foreign_keys_off(
    sqlite_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """With the pragma on, this rebuild empties the survey table without an error (measured, SQLite 3.40.1)."""
    fill(sqlite_registry)
    body = "\n    ".join(
        [
            "import sqlalchemy as sa",
            "with op.batch_alter_table('site', recreate='always', table_kwargs={'sqlite_strict': True}) as batch:",
            "    batch.add_column(sa.Column('note', sa.Text()))",
        ]
    )
    with_planted(monkeypatch, planted_revision(tmp_path / "planted", body))
    schema.upgrade(sqlite_registry)
    with sqlite_registry.reader.connect() as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM survey").scalar() == 1
        assert connection.exec_driver_sql("SELECT note FROM site").scalar() is None
    with writing(sqlite_registry) as connection:
        connection.exec_driver_sql("DELETE FROM stale")
        connection.exec_driver_sql("UPDATE site SET kind = 'outcrop'")
        assert connection.exec_driver_sql("SELECT count(*) FROM stale").scalar() == 2


def test_upgrade_of_a_newer_registry_is_refused(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        connection.exec_driver_sql("UPDATE alembic_version SET version_num = '9999'")
    with pytest.raises(PlutonbookError, match="schema 9999, made by a newer Plutonbook"):
        schema.upgrade(any_registry)
