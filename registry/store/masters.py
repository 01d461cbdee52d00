"""Master data: areas, sites, surveys, intervals, intrusions and samples, brought in by code.

Known codes are updated, new ones added; a blank never erases, an identical row does nothing, every change is listed.
All problems of a file are found before anything of it is written.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import sqlalchemy as sa

from registry.errors import Problem
from registry.store import bulk, master_checks, master_positions, positions, raw_rows, tables
from registry.store.master_kinds import MASTER_KINDS, WHOLE_COLUMNS, MasterKind, Reference
from registry.store.near_codes import nearest
from registry.store.sheets import VERDICT_WORDS

Rows = dict[str, list[Any]]


@dataclass
class Outcome:
    """What became of one file: rows added, changes in words, and problems (with one of severity ``problem`` nothing
    was written)."""

    added: int = 0
    changes: list[str] = field(default_factory=list)
    problems: list[Problem] = field(default_factory=list)


def upsert(
    connection: sa.Connection, kind: str, rows: Mapping[str, Sequence[Any]], line_no: Sequence[int] | Any, file: str
) -> Outcome:
    """Bring in rows of one kind; ``rows`` maps contract columns to values (None blank), ``line_no`` their lines.

    The result lists ``sample X: lithology A -> B`` for every changed cell. Nothing is written where a problem is
    found. KeyError for an unknown kind.
    """
    spec = MASTER_KINDS[kind]
    lines = [int(line) for line in line_no]
    given = {name: _cleaned(column) for name, column in rows.items() if name in _columns_of(spec)}
    outcome = Outcome()
    stored = _stored_columns(connection, spec, given, lines, file, outcome.problems)
    known = _known_rows(connection, spec, stored)
    if kind == "sites":
        master_positions.complete_sites(connection, stored, known)
    outcome.problems += master_checks.check(connection, spec, given, stored, known, lines, file)
    if any(problem.severity == "problem" for problem in outcome.problems):
        return outcome
    keys = list(zip(*(stored[name] for name in spec.key), strict=True))
    new = [row for row, key in enumerate(keys) if key not in known]
    old = [row for row, key in enumerate(keys) if key in known]
    outcome.added = len(new)
    outcome.changes, touched = _update(connection, spec, given, stored, known, old)
    _insert(connection, spec, stored, new)
    _link_duplicates(connection, kind, given, stored, new)
    _locate(connection, kind, stored, [*new, *touched])
    return outcome


def _columns_of(spec: MasterKind) -> set[str]:
    return {*spec.columns, *(reference.column for reference in spec.references)}


def _cleaned(column: Sequence[Any]) -> list[Any]:
    """Texts trimmed and in Unicode's composed form (NFC), case kept; empty ones are blanks."""
    return [(unicodedata.normalize("NFC", v).strip() or None) if isinstance(v, str) else v for v in column]


def _whole(value: Any) -> Any:
    return None if value is None else int(value)


def _stored_columns(
    connection: sa.Connection, spec: MasterKind, given: Rows, lines: list[int], file: str, problems: list[Problem]
) -> Rows:
    """The rows in stored columns, references resolved; unknown ones are added to ``problems``."""
    stored: Rows = {}
    for name, column in spec.columns.items():
        if name in given:
            stored[column] = [_whole(v) for v in given[name]] if column in WHOLE_COLUMNS else given[name]
    for reference in spec.references:
        if reference.column not in given:
            continue
        codes = given[reference.column]
        ids = _ids_by_code(connection, reference.table, reference.code, {code for code in codes if code is not None})
        own = set(given.get("sample_code", ())) if reference.table == spec.table else set()
        problems += master_checks.unknown_references(
            connection, reference, codes, {*ids, *own}, lines, file, near_names(connection, reference, codes, ids)
        )
        stored[reference.stored] = [ids.get(code) for code in codes]
    return stored


def near_names(connection: sa.Connection, reference: Any, codes: Sequence[Any], ids: Collection[str]) -> dict[str, str]:
    """The nearest known name of each unknown one of the first twenty."""
    unknown = [code for code in dict.fromkeys(codes) if code is not None and code not in ids][:20]
    if not unknown:
        return {}
    column = tables.metadata.tables[reference.table].c[reference.code]
    return nearest(unknown, connection.execute(sa.select(column)).scalars())


def _ids_by_code(connection: sa.Connection, table_name: str, code: str, codes: Collection[str]) -> dict[str, int]:
    table = tables.metadata.tables[table_name]
    key = table.c[f"{table_name}_id"]
    found: dict[str, int] = {}
    if len(codes) > 20_000:
        everything = connection.execute(sa.select(table.c[code], key))
        return {row[0]: row[1] for row in everything if row[0] in codes}
    for part in raw_rows.in_parts(sorted(codes), 500):
        found.update(
            (row[0], row[1]) for row in connection.execute(sa.select(table.c[code], key).where(table.c[code].in_(part)))
        )
    return found


def _known_rows(connection: sa.Connection, spec: MasterKind, stored: Rows) -> dict[tuple[Any, ...], dict[str, Any]]:
    """The stored rows that have one of the keys, by key."""
    table = tables.metadata.tables[spec.table]
    first = stored[spec.key[0]]
    wanted = {key for key in zip(*(stored[name] for name in spec.key), strict=True)}
    found = {}
    for part in raw_rows.in_parts(sorted({v for v in first if v is not None}), 500):
        for row in connection.execute(sa.select(table).where(table.c[spec.key[0]].in_(part))).mappings():
            key = tuple(row[name] for name in spec.key)
            if key in wanted:
                found[key] = dict(row)
    return found


def _update(
    connection: sa.Connection,
    spec: MasterKind,
    given: Rows,
    stored: Rows,
    known: dict[tuple[Any, ...], dict[str, Any]],
    rows: list[int],
) -> tuple[list[str], list[int]]:
    """Update known rows cell by cell; the changes in words, and the rows that changed."""
    table = tables.metadata.tables[spec.table]
    shown = {column: name for name, column in spec.columns.items()}
    shown |= {reference.stored: reference.column for reference in spec.references}
    labels = _labels(connection, spec, known.values())
    changes: list[str] = []
    touched: list[int] = []
    updates: dict[tuple[str, ...], list[dict[str, Any]]] = {}
    for row in rows:
        key = tuple(stored[name][row] for name in spec.key)
        before = known[key]
        changed = {
            column: values[row]
            for column, values in stored.items()
            if column not in spec.key and values[row] is not None and values[row] != before[column]
        }
        if not changed:
            continue
        touched.append(row)
        name = _name(spec, given, row)
        for column, value in changed.items():
            after = given[shown[column]][row] if column in labels else value
            old = labels.get(column, {}).get(before[column], before[column])
            changes.append(f"{name}: {shown[column]} {_spelled(old)} -> {_spelled(after)}")
        identity = {"_id": before[f"{spec.table}_id"]}
        updates.setdefault(tuple(changed), []).append({**identity, **{f"_{c}": v for c, v in changed.items()}})
    for columns, parameters in updates.items():
        statement = (
            sa.update(table)
            .where(table.c[f"{spec.table}_id"] == sa.bindparam("_id"))
            .values({column: sa.bindparam(f"_{column}") for column in columns})
        )
        connection.execute(statement, parameters)
    return changes, touched


def _labels(
    connection: sa.Connection, spec: MasterKind, rows: Iterable[Mapping[str, Any]]
) -> dict[str, dict[int, str]]:
    """Names of the things that stored references point at, for the list of changes."""
    rows = list(rows)
    labels: dict[str, dict[int, str]] = {}
    for reference in spec.references:
        table = tables.metadata.tables[reference.table]
        ids = sorted({row[reference.stored] for row in rows if row[reference.stored] is not None})
        names = labels.setdefault(reference.stored, {})
        for part in raw_rows.in_parts(ids, 500):
            key = table.c[f"{reference.table}_id"]
            found = connection.execute(sa.select(key, table.c[reference.code]).where(key.in_(part)))
            names.update((row[0], row[1]) for row in found)
    return labels


def _name(spec: MasterKind, given: Rows, row: int) -> str:
    contract = {column: name for name, column in spec.columns.items()}
    contract |= {reference.stored: reference.column for reference in spec.references}
    return f"{spec.noun} " + " ".join(_spelled(given[contract[name]][row]) for name in spec.key)


def _spelled(value: Any) -> str:
    if value is None:
        return "(blank)"
    return f"{value:.12g}" if isinstance(value, float) else str(value)


def _insert(connection: sa.Connection, spec: MasterKind, stored: Rows, rows: list[int]) -> None:
    if not rows:
        return
    table = tables.metadata.tables[spec.table]
    columns: Rows = {name: [values[row] for row in rows] for name, values in stored.items()}
    for name, default in spec.defaults.items():
        columns[name] = [default if value is None else value for value in columns.get(name, [None] * len(rows))]
    columns[f"{spec.table}_id"] = bulk.allocate_ids(connection, spec.table, len(rows)).tolist()
    whole = {column.name for column in table.columns if column.name in WHOLE_COLUMNS}
    for name in whole & columns.keys():
        columns[name] = [_whole(value) for value in columns[name]]
    raw_rows.insert(connection, spec.table, list(columns), list(columns.values()))


def _link_duplicates(connection: sa.Connection, kind: str, given: Rows, stored: Rows, new: list[int]) -> None:
    """Duplicates whose original came in the same file are linked once both are there."""
    if kind != "samples" or "duplicate_of" not in given:
        return
    open_rows = [row for row in new if given["duplicate_of"][row] is not None and stored["duplicate_of"][row] is None]
    if not open_rows:
        return
    ids = sample_ids(connection, {given["duplicate_of"][row] for row in open_rows})
    connection.execute(
        sa.update(tables.sample)
        .where(tables.sample.c.code == sa.bindparam("_code"))
        .values(duplicate_of=sa.bindparam("_original")),
        [{"_code": stored["code"][row], "_original": ids[given["duplicate_of"][row]]} for row in open_rows],
    )


def _locate(connection: sa.Connection, kind: str, stored: Rows, rows: list[int]) -> None:
    """Place the samples that new or changed sites, surveys and samples concern."""
    if kind == "sites":
        codes = {stored["code"][row] for row in rows}
        sites = list(_ids_by_code(connection, "site", "code", codes).values())
    elif kind == "surveys":
        sites = sorted({stored["site_id"][row] for row in rows})
    elif kind == "samples":
        master_positions.mark_own_positions(connection, [stored["code"][row] for row in rows], stored)
        sites = sorted({site for site in stored.get("site_id", []) if site is not None}) if rows else []
    else:
        return
    positions.replace_positions(connection, sites)


def registered(connection: sa.Connection, reference: Reference, codes: Collection[str]) -> set[str]:
    """Those of the codes that the table of a reference holds."""
    return set(_ids_by_code(connection, reference.table, reference.code, codes))


def sample_ids(connection: sa.Connection, codes: Collection[str]) -> dict[str, int]:
    """The ids of those codes that are samples, by code."""
    return _ids_by_code(connection, "sample", "code", codes)


def add_samples(connection: sa.Connection, codes: Sequence[str], kind: str = "unknown") -> dict[str, int]:
    """Add samples of which only the code is known; their ids by code."""
    clean = _cleaned(codes)
    ids = bulk.allocate_ids(connection, "sample", len(clean)).tolist()
    raw_rows.insert(connection, "sample", ("sample_id", "code", "kind"), [ids, clean, [kind] * len(clean)])
    return dict(zip(codes, ids, strict=True))


def near_codes(connection: sa.Connection, codes: Sequence[str]) -> dict[str, str]:
    """The nearest registered sample code of each code that has one."""
    return nearest(codes, connection.execute(sa.select(tables.sample.c.code)).scalars()) if codes else {}


def all_sample_codes(connection: sa.Connection) -> Iterable[str]:
    """The code of every registered sample."""
    return connection.execute(sa.select(tables.sample.c.code)).scalars()


def sample_codes(connection: sa.Connection, sample_ids: Collection[int]) -> dict[int, str]:
    """The codes of samples by id."""
    return dict(raw_rows.select(connection, "SELECT sample_id, code FROM sample WHERE sample_id {ids}", sample_ids))


def samples_of_kinds(connection: sa.Connection, kinds: Sequence[str]) -> np.ndarray:
    """The ids of samples of these kinds, int64, ascending."""
    query = (
        sa.select(tables.sample.c.sample_id)
        .where(tables.sample.c.kind.in_(list(kinds)))
        .order_by(tables.sample.c.sample_id)
    )
    return np.fromiter(connection.execute(query).scalars(), dtype=np.int64)


def verdict_counts(connection: sa.Connection) -> dict[str, dict[str, int]]:
    """How many samples have each verdict, by target and verdict word; targets without verdicts are left out."""
    query = (
        sa.select(tables.target.c.code, tables.verdict.c.verdict, sa.func.count())
        .join(tables.target, tables.target.c.target_id == tables.verdict.c.target_id)
        .group_by(tables.target.c.target_id, tables.target.c.code, tables.verdict.c.verdict)
        .order_by(tables.target.c.target_id, tables.verdict.c.verdict)
    )
    counts: dict[str, dict[str, int]] = {}
    for code, verdict, number in connection.execute(query):
        counts.setdefault(code, {})[VERDICT_WORDS[verdict]] = number
    return counts
