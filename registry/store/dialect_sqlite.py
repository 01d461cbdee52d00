"""What SQLite says in its own way: the triggers, and the few expressions of the views that differ."""

from __future__ import annotations

from collections.abc import Iterator

import sqlalchemy as sa

from registry.store.sheets import SHEETS
from registry.store.stale_rules import (
    BEFORE_CLEANING,
    CLEANED,
    GROUP_RULES,
    PREFIX,
    RULES,
    VERSIONED,
    GroupRule,
    Rule,
)

NULL_NUMBER = "CAST(NULL AS REAL)"
NULL_TEXT = "CAST(NULL AS TEXT)"


def as_integer(condition: str) -> str:
    """A truth value as 0 or 1."""
    return f"({condition})"


def packed_number(document: str, key: str, position: str) -> str:
    """Number at a position of an array of a JSON text."""
    return f"CAST(json_extract({document}, '$.{key}[' || {position} || ']') AS REAL)"


def packed_text(document: str, key: str, position: str | None = None) -> str:
    """Text under a key of a JSON text, or under the position within the object of that key."""
    if position is None:
        return f"json_extract({document}, '$.{key}')"
    return f"json_extract({document}, '$.{key}.\"' || {position} || '\"')"


def spelled(number: str) -> str:
    """A number rounded to four significant digits, without an exponent, as text; NULL stays NULL."""
    # pushed off the middle by a trillionth: the engines do not agree on where 0.21875 and 6.0625 go
    rounded = f"CAST(printf('%.3e', {number} * 1.000000000001) AS REAL)"
    # printf writes NULL as 0
    return f"CASE WHEN {number} IS NOT NULL THEN rtrim(rtrim(printf('%.12f', {rounded}), '0'), '.') END"


def trigger_statements() -> Iterator[str]:
    """Every CREATE TRIGGER: stale samples, rows that go with their parent, row versions."""
    for rule in (*RULES, *GROUP_RULES):
        for event in rule.events:
            yield _stale_trigger(rule, event)
    for table, cleaned in CLEANED.items():
        steps = [before.format(row="OLD")] if (before := BEFORE_CLEANING.get(table)) else []
        steps += [f"DELETE FROM {child} WHERE {condition.format(row='OLD')};" for child, condition in cleaned]
        if table == "sample":
            steps.append("UPDATE sample SET duplicate_of = NULL WHERE duplicate_of = OLD.sample_id;")
        yield f"CREATE TRIGGER {PREFIX}clean_{table} AFTER DELETE ON {table} BEGIN\n  " + "\n  ".join(steps) + "\nEND"
    for table, key in VERSIONED.items():
        yield (
            f"CREATE TRIGGER {PREFIX}version_{table} AFTER UPDATE ON {table} "
            f"WHEN NEW.row_version = OLD.row_version BEGIN\n  UPDATE {table} SET row_version = OLD.row_version + 1 "
            f"WHERE {key} = NEW.{key};\nEND"
        )


def _stale_trigger(rule: Rule, event: str) -> str:
    """INSERT ... WHERE NOT EXISTS: the outer statement's conflict clause would override OR IGNORE in here."""
    when = "NOT EXISTS (SELECT 1 FROM import_guard)"
    if event == "UPDATE":
        changed = " OR ".join(f"OLD.{column} IS NOT NEW.{column}" for column in rule.watched)
        when = f"({changed}) AND {when}"
    steps = []
    for row in {"INSERT": ("NEW",), "UPDATE": ("OLD", "NEW"), "DELETE": ("OLD",)}[event]:
        touched = rule.select(row)
        if isinstance(rule, GroupRule):
            steps.append(rule.mark(touched))
            continue
        if rule.level == 1:
            steps.append(f"UPDATE stale SET level = 1 WHERE level > 1 AND sample_id IN ({touched});")
        steps.append(
            f"INSERT INTO stale (sample_id, level) SELECT s.sample_id, {rule.level} FROM sample AS s "
            f"WHERE s.sample_id IN ({touched}) "
            "AND NOT EXISTS (SELECT 1 FROM stale AS x WHERE x.sample_id = s.sample_id);"
        )
    return (
        f"CREATE TRIGGER {PREFIX}stale_{rule.name}_{event.lower()} AFTER {event} ON {rule.table} WHEN {when} BEGIN\n  "
        + "\n  ".join(steps)
        + "\nEND"
    )


def drop_statements(connection: sa.Connection) -> Iterator[str]:
    """DROP of every view and trigger of ours that stands in the registry, also those of another version."""
    views = set(SHEETS)
    if sa.inspect(connection).has_table("column_guide_row"):
        views.update(connection.exec_driver_sql("SELECT DISTINCT view_name FROM column_guide_row").scalars())
    standing = connection.exec_driver_sql(
        "SELECT type, name FROM sqlite_master WHERE type IN ('view', 'trigger') ORDER BY type, name"
    ).fetchall()
    for kind, name in standing:
        if (kind == "view" and name in views) or (kind == "trigger" and name.startswith(PREFIX)):
            yield f'DROP {kind.upper()} "{name}"'
