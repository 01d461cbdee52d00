"""What could be wrong with a registry, and what to do about it; reads only."""

from __future__ import annotations

from typing import Any

import sqlalchemy as sa
from alembic.runtime.migration import MigrationContext

from registry.errors import PlutonbookError
from registry.store import batch_files, dialect_postgresql, dialect_sqlite, tables
from registry.store.engine import HEAD_REVISION
from registry.store.sheets import CONTROL_KINDS, SHEETS

Finding = dict[str, Any]
_REPLACED = (
    "rows were replaced or deleted by a tool with foreign keys off (INSERT OR REPLACE gives a row a new id and leaves "
    "its children behind; write UPDATE or an upsert); delete these rows or restore a backup"
)


def findings(connection: sa.Connection) -> list[Finding]:
    """Dicts ``subject found remedy``, empty where all is well; nothing is repaired or refreshed."""
    found = _damage(connection)
    if found:
        return found  # nothing read from a damaged file can be trusted
    found = _broken_keys(connection)
    revision = MigrationContext.configure(connection).get_current_revision()
    if revision != HEAD_REVISION:
        found.append(_finding("schema", f"revision {revision}, expected {HEAD_REVISION}", "run 'plutonbook upgrade'"))
        return found
    found += _objects(connection)
    found += _orphans(connection)
    found += _files(connection)
    found += _derived(connection)
    return found


def _finding(subject: str, found: str, remedy: str) -> Finding:
    return {"subject": subject, "found": found, "remedy": remedy}


def _damage(connection: sa.Connection) -> list[Finding]:
    """What SQLite's own check says of the pages of the file."""
    if connection.dialect.name != "sqlite":
        return []
    try:
        said = list(connection.exec_driver_sql("PRAGMA integrity_check(20)").scalars())
    except sa.exc.DatabaseError as error:
        said = [str(error.orig)]
    remedy = "stop writing; restore a backup with 'plutonbook recover'"
    return [_finding("file", text, remedy) for text in said if text != "ok"]


def _broken_keys(connection: sa.Connection) -> list[Finding]:
    """Rows that point at rows that are not there; PostgreSQL lets none happen."""
    if connection.dialect.name != "sqlite":
        return []
    broken: dict[tuple[str, str], int] = {}
    for row in connection.exec_driver_sql("PRAGMA foreign_key_check"):
        broken[row[0], row[2]] = broken.get((row[0], row[2]), 0) + 1
    return [
        _finding(f"table {table}", f"{_rows(count)} pointing at a {parent} that is not there", _REPLACED)
        for (table, parent), count in broken.items()
    ]


def _objects(connection: sa.Connection) -> list[Finding]:
    """Views and triggers that a tool dropped."""
    sqlite = connection.dialect.name == "sqlite"
    expected = {
        words[2]
        for statement in (dialect_sqlite if sqlite else dialect_postgresql).trigger_statements()
        if (words := statement.split())[1] == "TRIGGER"
    }
    if sqlite:
        triggers = connection.exec_driver_sql("SELECT name FROM sqlite_master WHERE type = 'trigger'").scalars()
        views = connection.exec_driver_sql("SELECT name FROM sqlite_master WHERE type = 'view'").scalars()
    else:
        triggers = connection.exec_driver_sql("SELECT tgname FROM pg_trigger WHERE NOT tgisinternal").scalars()
        views = connection.exec_driver_sql(
            "SELECT viewname FROM pg_views WHERE schemaname = current_schema()"
        ).scalars()
    remedy = "run 'plutonbook upgrade', which builds views and triggers anew, then 'plutonbook refresh --all'"
    gone = sorted(expected - set(triggers))
    found = [_finding(f"trigger {name}", "is not there: edits no longer mark samples stale", remedy) for name in gone]
    found += [_finding(f"view {name}", "is not there", remedy) for name in sorted(set(SHEETS) - set(views))]
    return found


def _orphans(connection: sa.Connection) -> list[Finding]:
    """Rows without a parent where no foreign key says so."""
    found = []
    checks = (
        (
            "result",
            "batch column",
            "SELECT count(*) FROM result AS r WHERE NOT EXISTS "
            "(SELECT 1 FROM batch_column AS c WHERE c.batch_column_id = r.column_id)",
        ),
        (
            "result",
            "batch column of the batch of its line",
            "SELECT count(*) FROM result AS r JOIN aliquot AS a ON a.aliquot_id = r.aliquot_id "
            "JOIN batch_column AS c ON c.batch_column_id = r.column_id WHERE c.batch_id <> a.batch_id",
        ),
        (
            "control_outcome",
            "line of its batch",
            "SELECT count(*) FROM control_outcome AS o WHERE NOT EXISTS "
            "(SELECT 1 FROM aliquot AS a WHERE a.aliquot_id = o.aliquot_id AND a.batch_id = o.batch_id)",
        ),
        (
            "control_outcome",
            "column of its batch",
            "SELECT count(*) FROM control_outcome AS o WHERE NOT EXISTS "
            "(SELECT 1 FROM batch_column AS c WHERE c.batch_column_id = o.column_id AND c.batch_id = o.batch_id)",
        ),
        (
            "control_state",
            "column of its batch",
            "SELECT count(*) FROM control_state AS f WHERE NOT EXISTS "
            "(SELECT 1 FROM batch_column AS c WHERE c.batch_column_id = f.column_id AND c.batch_id = f.batch_id)",
        ),
        (
            "stale",
            "sample",
            "SELECT count(*) FROM stale AS x WHERE NOT EXISTS "
            "(SELECT 1 FROM sample AS s WHERE s.sample_id = x.sample_id)",
        ),
    )
    for table, parent, query in checks:
        count = connection.exec_driver_sql(query).scalar() or 0
        if count:
            what = f"{_rows(count)} pointing at a {parent} that is not there"
            found.append(_finding(f"table {table}", what, _REPLACED))
    if connection.exec_driver_sql("SELECT count(*) FROM import_guard").scalar():
        found.append(
            _finding(
                "table import_guard",
                "a row stands in it, so edits mark nothing stale",
                "delete the row, then run 'plutonbook refresh --all'",
            )
        )
    return found


def _files(connection: sa.Connection) -> list[Finding]:
    """Stored certificate files whose bytes no longer have the hash they were imported with."""
    found = []
    batch = tables.batch
    for batch_id in batch_files.kept_files(connection):
        query = sa.select(batch.c.code, batch.c.sha256).where(batch.c.batch_id == batch_id)
        code, sha256 = connection.execute(query).one_or_none() or (f"with the id {batch_id}", None)
        try:
            intact = batch_files.hash_of(connection, batch_id) == sha256
        except PlutonbookError:
            intact = False
        if not intact:
            found.append(
                _finding(
                    f"batch {code}",
                    "the stored file does not have the hash it was imported with",
                    "compare its results with the certificate; restore a backup, or withdraw it and import the file",
                )
            )
    return found


def _derived(connection: sa.Connection) -> list[Finding]:
    """What is stale, missing, too much, or of another width than the catalogue."""
    controls = ", ".join(f"'{kind}'" for kind in CONTROL_KINDS)
    quantities = connection.exec_driver_sql("SELECT count(*) FROM quantity").scalar() or 0
    warnings = connection.exec_driver_sql("SELECT count(*) FROM warning_kind").scalar() or 0
    again = "run 'plutonbook refresh --all'"
    checks = (
        (
            "derived values",
            "stale: something changed since they were computed",
            "SELECT count(*) FROM stale",
            "run 'plutonbook refresh'",
        ),
        (
            "intrusions and areas",
            "stale: something changed since they were computed",
            "SELECT count(*) FROM stale_group",
            "run 'plutonbook refresh'",
        ),
        (
            "derived values",
            "samples without any that are not marked stale",
            "SELECT count(*) FROM sample AS s "
            "WHERE EXISTS (SELECT 1 FROM aliquot AS a WHERE a.sample_id = s.sample_id) "
            "AND NOT EXISTS (SELECT 1 FROM derived AS d WHERE d.sample_id = s.sample_id) "
            "AND NOT EXISTS (SELECT 1 FROM stale AS x WHERE x.sample_id = s.sample_id)",
            again,
        ),
        (
            "verdicts",
            "of control samples, which are never judged",
            "SELECT count(*) FROM verdict AS v JOIN sample AS s ON s.sample_id = v.sample_id "
            f"WHERE s.kind IN ({controls})",
            again,
        ),
        (
            "derived values",
            "rows computed with another catalogue than this registry describes",
            f"SELECT count(*) FROM derived WHERE length(causes) <> {quantities} OR length(warnings) <> {warnings}",
            again,
        ),
    )
    found = []
    for subject, text, query, remedy in checks:
        count = connection.exec_driver_sql(query).scalar() or 0
        if count:
            found.append(_finding(subject, f"{count:,} {text}", remedy))
    return found


def _rows(count: int) -> str:
    return "1 row" if count == 1 else f"{count:,} rows"
