"""The list of samples: a page of it, how many match, the whole filtered set row by row.

One statement finds the matching samples, counts them and orders them, joining only the tables that the filter
names; a second one reads what is shown of the 50 rows of the page by their keys.
"""

from __future__ import annotations

import base64
import json
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

from sqlalchemy import Connection, text

from registry.store.reading.columns import CODE, Column, Columns
from registry.store.reading.filters import VERDICTS, Filter, sort_column

ROWS_PER_PAGE = 50
ROWS_PER_READ = 2000
#: What ``text`` is looked for in, in any part of the word and whatever the case.
SEARCHED = (
    "sample.code", "sample.lithology", "sample.texture", "sample.alteration", "sample.igsn", "site.code",
    "intrusion.name",
)  # fmt: skip
#: Minerals of the norm in the order of crystallisation tables, as the norm bar shows them.
NORM_ORDER = (
    "q", "c", "or", "ab", "an", "lc", "ne", "kp", "hl", "th", "ac", "ns", "ks", "di", "wo", "hy", "ol", "cs",
    "mt", "cm", "hm", "il", "tn", "pf", "ru", "z", "ap", "fr", "pr", "cc",
)  # fmt: skip
_JOINS = {
    "site": "LEFT JOIN site ON site.site_id = sample.site_id",
    "intrusion": "LEFT JOIN intrusion ON intrusion.intrusion_id = sample.intrusion_id",
    "area": (
        "LEFT JOIN area ON area.area_id = site.area_id "
        "LEFT JOIN area AS intrusion_area ON intrusion_area.area_id = intrusion.area_id"
    ),
    "composition": "LEFT JOIN composition ON composition.sample_id = sample.sample_id",
    "derived": "LEFT JOIN derived ON derived.sample_id = sample.sample_id",
    "stale": "LEFT JOIN stale ON stale.sample_id = sample.sample_id",
    "verdict": (
        "LEFT JOIN verdict ON verdict.sample_id = sample.sample_id AND verdict.target_id = "
        "(SELECT target_id FROM target WHERE target.code = :target)"
    ),
}


@dataclass(frozen=True)
class Place:
    """Where a page begins: after or before the row with this sort value and key."""

    value: Any
    sample_id: int
    backwards: bool = False

    def token(self) -> str:
        packed = json.dumps([self.value, self.sample_id], separators=(",", ":")).encode()
        return base64.urlsafe_b64encode(packed).decode().rstrip("=")


class BadPlace(ValueError):
    """The address names no place in the list."""


def read_place(token: str, *, backwards: bool) -> Place:
    """The place that a page's address names; raises BadPlace for anything this list did not write."""
    try:
        value, sample_id = json.loads(base64.urlsafe_b64decode(token + "=" * (-len(token) % 4)))
    except ValueError:
        value, sample_id = None, None
    if type(sample_id) is not int or not isinstance(value, str | int | float | None) or abs(sample_id) > 2**62:
        raise BadPlace("The address names no place in this list; go back to its first page.")
    return Place(value, sample_id, backwards)


@dataclass(frozen=True)
class Page:
    """One page of the list. ``rows`` are dictionaries by column name; the places lead to its neighbours."""

    total: int
    rows: list[dict[str, Any]]
    next: Place | None
    previous: Place | None


def is_postgresql(connection: Connection) -> bool:
    """Whether the registry lies on PostgreSQL."""
    return connection.dialect.name == "postgresql"


def joined_tables(tables: set[str]) -> str:
    """``sample`` joined with these tables, for FROM."""
    wanted = set(tables)
    if "area" in wanted:
        wanted |= {"site", "intrusion"}
    return " ".join(["sample", *(clause for table, clause in _JOINS.items() if table in wanted)])


def bind_list(values: Sequence[Any], stem: str, bound: dict[str, Any]) -> str:
    """Placeholders for a list of values, which go into ``bound``."""
    names = []
    for position, value in enumerate(values):
        bound[f"{stem}_{position}"] = value
        names.append(f":{stem}_{position}")
    return ", ".join(names)


def filter_conditions(asked: Filter, like: str, bound: dict[str, Any]) -> tuple[list[str], set[str]]:
    """SQL conditions of a filter, the tables they need; values go into ``bound``."""
    clauses, tables = [], set()
    if asked.text:
        escaped = asked.text.replace("\\", "\\\\").replace("%", "\\%").replace("_", "\\_")
        bound["words"] = f"%{escaped}%"
        clauses.append("(" + " OR ".join(f"{column} {like} :words ESCAPE '\\'" for column in SEARCHED) + ")")
        tables |= {"site", "intrusion"}
    area = "coalesce(area.name, intrusion_area.name)"
    for name, column in (("area", area), ("site", "site.code"), ("intrusion", "intrusion.name")):
        if values := getattr(asked, name):
            clauses.append(f"{column} IN ({bind_list(values, name, bound)})")
            tables.add(name)
    if asked.kind:
        clauses.append(f"sample.kind IN ({bind_list(asked.kind, 'kind', bound)})")
    if asked.verdict:
        table = "verdict" if asked.target else "derived"
        column = "verdict.verdict" if asked.target else "derived.best_verdict"
        clauses.append(f"{column} IN ({bind_list(_stored_verdicts(asked), 'verdict', bound)})")
        tables.add(table)
    for position, limit in enumerate(asked.ranges):
        for sign, value in ((">=", limit.low), ("<=", limit.high)):
            if value is not None:
                name = f"limit_{position}_{'low' if sign == '>=' else 'high'}"
                bound[name] = value
                clauses.append(f"{limit.column.sql} {sign} :{name}")
        tables.add(limit.column.table)
    return clauses, tables


def _stored_verdicts(asked: Filter) -> list[int]:
    return [VERDICTS.index(word) for word in asked.verdict]


def _order(column: Column, descending: bool, *, backwards: bool) -> str:
    """ORDER BY of a page: rows without a value stand last in either direction; the key breaks ties."""
    turned = descending != backwards
    nulls = "" if column.required else f"sort_value IS NULL{' DESC' if backwards else ''}, "
    return f"{nulls}sort_value{' DESC' if turned else ''}, sample_id{' DESC' if backwards else ''}"


def _beyond(place: Place, column: Column, descending: bool, bound: dict[str, Any]) -> str:
    """Condition: rows beyond a place in the direction of reading."""
    bound["place_id"] = place.sample_id
    key = f"sample_id {'<' if place.backwards else '>'} :place_id"
    if place.value is None:
        without = f"(sort_value IS NULL AND {key})"
        return f"({without} OR sort_value IS NOT NULL)" if place.backwards else without
    bound["place_value"] = place.value
    sign = "<" if descending != place.backwards else ">"
    nulls_follow = "" if place.backwards or column.required else " OR sort_value IS NULL"
    return f"(sort_value {sign} :place_value OR (sort_value = :place_value AND {key}){nulls_follow})"


def _found_sql(asked: Filter, column: Column, like: str, bound: dict[str, Any]) -> str:
    clauses, tables = filter_conditions(asked, like, bound)
    if column.table != "sample":
        tables = tables | {column.table}
    if "verdict" in tables:
        bound["target"] = asked.target
    where = f" WHERE {' AND '.join(clauses)}" if clauses else ""
    return f"SELECT sample.sample_id AS sample_id, {column.sql} AS sort_value FROM {joined_tables(tables)}{where}"


def page_of_samples(
    connection: Connection, asked: Filter, columns: Columns, *, place: Place | None = None, rows: int = ROWS_PER_PAGE
) -> Page:
    """The page of the list ``asked`` for that begins at ``place`` (None: the first page).

    ``rows`` of the page hold ``sample_id sample_code is_stale``, the columns of the filter, the columns of its
    ranges and order, the norm and, with a target, ``verdict score_min score_max provisional``.
    """
    like = "ILIKE" if is_postgresql(connection) else "LIKE"
    column = sort_column(asked, columns)
    backwards = place is not None and place.backwards
    bound: dict[str, Any] = {"rows": rows + 1}
    found = _found_sql(asked, column, like, bound)
    beyond = "" if place is None else f" WHERE {_beyond(place, column, asked.descending, bound)}"
    order = _order(column, asked.descending, backwards=backwards)
    if asked.narrows:
        kept = f"WITH found AS MATERIALIZED ({found})"
        total = "(SELECT count(*) FROM found)"
    else:
        kept = f"WITH found AS ({found})"
        total = "(SELECT count(*) FROM sample)"
    statement = (
        f"{kept} SELECT {total} AS total, sample_id, sort_value FROM "
        f"(SELECT sample_id, sort_value FROM found{beyond} ORDER BY {order} LIMIT :rows) AS page ORDER BY {order}"
    )
    hits = connection.execute(text(statement), bound).all()
    if hits:
        total_found = hits[0].total
    else:
        bound = {}
        counted = f"SELECT count(*) FROM ({_found_sql(asked, column, like, bound)}) AS found"
        total_found = connection.execute(text(counted), bound).scalar_one()
    more = len(hits) > rows
    hits = list(hits[:rows])
    if backwards:
        hits.reverse()
    if not hits:
        return Page(total_found, [], None, None)
    shown = _rows_by_key(connection, asked, columns, [hit.sample_id for hit in hits])
    first, last = hits[0], hits[-1]
    after = Place(last.sort_value, last.sample_id) if more or backwards else None
    before = Place(first.sort_value, first.sample_id, True) if (more if backwards else place is not None) else None
    return Page(total_found, shown, after, before)


def shown_columns(asked: Filter, columns: Columns) -> list[Column]:
    """The columns a page shows: those chosen, then those that the conditions and the order speak of."""
    names = [name for name in asked.columns if name in columns]
    names += [limit.column.name for limit in asked.ranges]
    if asked.sort in columns:
        names.append(asked.sort)
    return [columns[name] for name in dict.fromkeys(names)]


def _selected(asked: Filter, shown: Sequence[Column], *, norm: bool) -> tuple[str, set[str]]:
    tables = {column.table for column in shown} | {"stale"}
    parts = ["sample.sample_id AS sample_id", "sample.code AS sample_code", "sample.kind AS kind"]
    parts += [f'{column.sql} AS "{column.name}"' for column in shown]
    if norm:
        parts += [f'derived."{mineral}_wt" AS "norm_{mineral}"' for mineral in NORM_ORDER]
        tables.add("derived")
    if asked.target:
        parts += [
            "verdict.verdict AS target_verdict",
            "verdict.score_min AS target_score_min",
            "verdict.score_max AS target_score_max",
            "verdict.provisional AS target_provisional",
        ]
        tables.add("verdict")
    parts.append("CASE WHEN stale.sample_id IS NULL THEN 0 ELSE 1 END AS is_stale")
    return ", ".join(parts), tables


def _rows_by_key(connection: Connection, asked: Filter, columns: Columns, keys: list[int]) -> list[dict[str, Any]]:
    bound: dict[str, Any] = {"target": asked.target} if asked.target else {}
    selected, tables = _selected(asked, shown_columns(asked, columns), norm=True)
    listed = bind_list(keys, "key", bound)
    statement = f"SELECT {selected} FROM {joined_tables(tables - {'sample'})} WHERE sample.sample_id IN ({listed})"
    by_key = {row["sample_id"]: dict(row) for row in connection.execute(text(statement), bound).mappings()}
    return [by_key[key] for key in keys if key in by_key]


def every_sample(
    connection: Connection, asked: Filter, columns: Columns, shown: Sequence[Column]
) -> Iterator[dict[str, Any]]:
    """Every matching sample in the order of the list, ``shown`` columns, read a few thousand rows at a time."""
    like = "ILIKE" if is_postgresql(connection) else "LIKE"
    column = sort_column(asked, columns)
    bound: dict[str, Any] = {}
    clauses, needed = filter_conditions(asked, like, bound)
    selected, tables = _selected(asked, shown, norm=False)
    tables = (tables | needed | {column.table}) - {"sample"}
    if asked.target:
        bound["target"] = asked.target
    where = f" WHERE {' AND '.join(clauses)}" if clauses else ""
    order = _order(column, asked.descending, backwards=False).replace("sample_id", "sample.sample_id")
    statement = (
        f"SELECT {selected}, {column.sql} AS sort_value FROM {joined_tables(tables)}{where} ORDER BY "
        f"{order.replace('sort_value', column.sql)}"
    )
    result = connection.execution_options(yield_per=ROWS_PER_READ).execute(text(statement), bound)
    for row in result.mappings():
        yield dict(row)


def choices(connection: Connection) -> dict[str, list[str]]:
    """What the parts of the sentence offer: areas, kinds in use, intrusions, and sites where they are few."""
    lists = {
        "area": "SELECT name FROM area ORDER BY name",
        "intrusion": "SELECT name FROM intrusion ORDER BY name",
        "site": "SELECT code FROM site ORDER BY code LIMIT 500",
    }
    return {name: [row[0] for row in connection.execute(text(sql))] for name, sql in lists.items()}


def names_not_found(connection: Connection, asked: Filter) -> dict[str, str]:
    """A sentence for every area, site and intrusion of the filter that the registry does not hold."""
    problems = {}
    for name, table, column in (
        ("area", "area", "name"),
        ("site", "site", "code"),
        ("intrusion", "intrusion", "name"),
    ):
        if values := getattr(asked, name):
            bound: dict[str, Any] = {}
            sql = f"SELECT {column} FROM {table} WHERE {column} IN ({bind_list(values, 'name', bound)})"
            known = {row[0] for row in connection.execute(text(sql), bound)}
            missing = [value for value in values if value not in known]
            if missing:
                problems[name] = f"The registry holds no {name} “{missing[0]}”."
    return problems


__all__ = [
    "CODE",
    "BadPlace",
    "Page",
    "Place",
    "choices",
    "every_sample",
    "names_not_found",
    "page_of_samples",
    "read_place",
    "shown_columns",
]
