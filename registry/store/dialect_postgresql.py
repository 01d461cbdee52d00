"""What PostgreSQL says in its own way: trigger functions and triggers, and the expressions of the views that differ."""

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

NULL_NUMBER = "CAST(NULL AS double precision)"
NULL_TEXT = "CAST(NULL AS text)"


def as_integer(condition: str) -> str:
    """A truth value as 0 or 1."""
    return f"CAST(({condition}) AS integer)"


def packed_number(document: str, key: str, position: str) -> str:
    """Number at a position of an array of a JSON text."""
    return f"CAST({document}::jsonb -> '{key}' ->> CAST({position} AS integer) AS double precision)"


def packed_text(document: str, key: str, position: str | None = None) -> str:
    """Text under a key of a JSON text, or under the position within the object of that key."""
    if position is None:
        return f"({document}::jsonb ->> '{key}')"
    return f"({document}::jsonb -> '{key}' ->> CAST({position} AS text))"


def spelled(number: str) -> str:
    """A number rounded to four significant digits, without an exponent, as text; NULL stays NULL."""
    # pushed off the middle by a trillionth: the engines do not agree on where 0.21875 and 6.0625 go
    rounded = f"CAST(to_char(CAST({number} AS double precision) * 1.000000000001, '9.999EEEE') AS numeric)"
    return f"rtrim(rtrim(CAST(round({rounded}, 12) AS text), '0'), '.')"


def trigger_statements() -> Iterator[str]:
    """Every function and trigger: stale samples, rows that go with their parent, row versions.

    Inserts and deletes are seen a statement at a time through transition tables (a copy of millions of results would
    crawl otherwise), updates row by row where a watched column changes.
    """
    for rule in (*RULES, *GROUP_RULES):
        for event in rule.events:
            yield from _stale_trigger(rule, event)
    for table, cleaned in CLEANED.items():
        steps = " ".join(f"DELETE FROM {child} WHERE {condition.format(row='OLD')};" for child, condition in cleaned)
        steps = f"{BEFORE_CLEANING.get(table, '').format(row='OLD')} {steps}"
        name = f"{PREFIX}clean_{table}"
        yield _function(name, f"{steps} RETURN NULL;")
        yield f"CREATE TRIGGER {name} AFTER DELETE ON {table} FOR EACH ROW EXECUTE FUNCTION {name}()"
    yield _function(f"{PREFIX}version", "NEW.row_version := OLD.row_version + 1; RETURN NEW;")
    for table in VERSIONED:
        yield (
            f"CREATE TRIGGER {PREFIX}version_{table} BEFORE UPDATE ON {table} FOR EACH ROW "
            f"WHEN (NEW.row_version = OLD.row_version) EXECUTE FUNCTION {PREFIX}version()"
        )


def _function(name: str, body: str) -> str:
    return f"CREATE FUNCTION {name}() RETURNS trigger LANGUAGE plpgsql AS $body$ BEGIN {body} END $body$"


def _mark(rule: Rule, touched: str) -> str:
    if isinstance(rule, GroupRule):
        return rule.mark(touched)
    level = rule.level
    raised = f"UPDATE stale SET level = 1 WHERE level > 1 AND sample_id IN ({touched}); " if level == 1 else ""
    return raised + (
        f"INSERT INTO stale (sample_id, level) SELECT s.sample_id, {level} FROM sample AS s "
        f"WHERE s.sample_id IN ({touched}) "
        "AND NOT EXISTS (SELECT 1 FROM stale AS x WHERE x.sample_id = s.sample_id);"
    )


def _stale_trigger(rule: Rule, event: str) -> Iterator[str]:
    name = f"{PREFIX}stale_{rule.name}_{event.lower()}"
    guard = "IF EXISTS (SELECT 1 FROM import_guard) THEN RETURN NULL; END IF;"
    if event == "UPDATE":
        marks = " ".join(_mark(rule, rule.select(row)) for row in ("OLD", "NEW"))
        changed = " OR ".join(f"OLD.{column} IS DISTINCT FROM NEW.{column}" for column in rule.watched)
        when = f"FOR EACH ROW WHEN ({changed})"
    else:
        marks = _mark(rule, rule.select("changed", "changed"))
        table = "NEW" if event == "INSERT" else "OLD"
        when = f"REFERENCING {table} TABLE AS changed FOR EACH STATEMENT"
    yield _function(name, f"{guard} {marks} RETURN NULL;")
    yield f"CREATE TRIGGER {name} AFTER {event} ON {rule.table} {when} EXECUTE FUNCTION {name}()"


def drop_statements(connection: sa.Connection) -> Iterator[str]:
    """DROP of every view, function and trigger of ours that stands in the registry, also those of another version."""
    views = set(SHEETS)
    if sa.inspect(connection).has_table("column_guide_row"):
        views.update(connection.exec_driver_sql("SELECT DISTINCT view_name FROM column_guide_row").scalars())
    standing = connection.exec_driver_sql(
        "SELECT viewname FROM pg_views WHERE schemaname = current_schema() ORDER BY viewname"
    ).scalars()
    for name in list(standing):
        if name in views:
            yield f'DROP VIEW "{name}"'
    functions = connection.execute(
        sa.text(
            "SELECT p.proname FROM pg_proc AS p JOIN pg_namespace AS n ON n.oid = p.pronamespace "
            "WHERE n.nspname = current_schema() AND starts_with(p.proname, :prefix) ORDER BY p.proname"
        ),
        {"prefix": PREFIX},
    ).scalars()
    for name in list(functions):
        yield f'DROP FUNCTION "{name}"() CASCADE'
