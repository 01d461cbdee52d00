"""The numbers behind a diagram: every sample of a filter with the quantities of the axes and the group it is shown in.

One statement reads numbers only, so that 100,000 samples are quick; a second one reads code, place, doubts and remarks
of the few thousand points that are drawn one by one.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from sqlalchemy import Connection, text

from registry.store.reading.columns import Column
from registry.store.reading.filters import Filter
from registry.store.reading.samples import _bind_list, _conditions, _is_postgresql, _joins
from registry.store.sheets import CONTROL_KINDS, VERDICT_WORDS

#: No more samples than this are read for one diagram.
MOST_SAMPLES = 1_000_000
#: Keys bound in one statement; both engines take more.
KEYS_PER_READ = 5000
_CONTROLS = ", ".join(f"'{kind}'" for kind in CONTROL_KINDS)
#: What points can be grouped by, beside the verdict for a target: the expression and the table it needs.
GROUPS = {
    "intrusion": ("intrusion.name", "intrusion"),
    "area": ("coalesce(area.name, intrusion_area.name)", "area"),
    "site_kind": ("site.kind", "site"),
    "sample_kind": ("sample.kind", "sample"),
    "lithology": ("sample.lithology", "sample"),
    "best_verdict": ("derived.best_verdict", "derived"),
}
_SHOWN_VERDICT = (
    "LEFT JOIN verdict AS shown ON shown.sample_id = sample.sample_id AND shown.target_id = "
    "(SELECT target_id FROM target WHERE target.code = :shown_target)"
)


@dataclass(frozen=True)
class Group:
    """How points are told apart: one of ``GROUPS``, or the verdict for the target of that code."""

    by: str
    target: str | None = None

    @property
    def sql(self) -> tuple[str, str]:
        """(expression, table it needs)."""
        return ("shown.verdict", "") if self.target else GROUPS[self.by]

    @property
    def is_verdict(self) -> bool:
        return self.target is not None or self.by == "best_verdict"

    def word(self, stored: Any) -> str | None:
        """The stored value as a word."""
        return VERDICT_WORDS[stored] if self.is_verdict and stored is not None else stored


def _causes(connection: Connection, columns: Sequence[Column]) -> dict[str, int]:
    """Place of each derived column in ``derived.causes``."""
    rows = connection.execute(text("SELECT name, position FROM quantity"))
    places = {row.name: row.position for row in rows}
    return {column.name: places[column.field] for column in columns if column.field in places}


def diagram_rows(
    connection: Connection, asked: Filter, columns: Sequence[Column], group: Group, codes: Sequence[str] | None = None
) -> list[Any]:
    """``sample_id, is_control, group, value of every column, letter of every column's cause`` by key.

    The letter (None for a value that is there and for one as analysed) is explained by ``cause_words``. With ``codes``
    the samples of these codes instead of those of the filter.
    """
    bound: dict[str, Any] = {}
    places = _causes(connection, columns)
    expression, table = group.sql
    parts = [
        "sample.sample_id",
        f"CASE WHEN sample.kind IN ({_CONTROLS}) THEN 1 ELSE 0 END",
        f"{expression} AS shown_group",
        *(column.sql for column in columns),
    ]
    for column in columns:
        letter = f"substr(derived.causes, {int(places[column.name]) + 1}, 1)" if column.name in places else "NULL"
        parts.append(f"CASE WHEN {column.sql} IS NULL THEN {letter} END")
    tables = {column.table for column in columns} | {table} | ({"derived"} if places else set())
    if codes is None:
        clauses, needed = _conditions(asked, "ILIKE" if _is_postgresql(connection) else "LIKE", bound)
        tables |= needed
        if "verdict" in tables:
            bound["target"] = asked.target
    else:
        clauses = [f"sample.code IN ({_bind_list(codes, 'code', bound)})"]
    joins = _joins(tables - {"sample", ""})
    if group.target:
        joins += f" {_SHOWN_VERDICT}"
        bound["shown_target"] = group.target
    where = f" WHERE {' AND '.join(clauses)}" if clauses else ""
    statement = f"SELECT {', '.join(parts)} FROM {joins}{where} ORDER BY sample.sample_id LIMIT {MOST_SAMPLES}"
    return list(connection.execute(text(statement), bound).all())


def point_details(connection: Connection, keys: Sequence[int]) -> dict[int, dict[str, Any]]:
    """By key: ``code kind site lithology intrusion censored digestions is_stale`` of the points drawn one by one."""
    found: dict[int, dict[str, Any]] = {}
    joins = _joins({"site", "intrusion", "composition", "stale"})
    for start in range(0, len(keys), KEYS_PER_READ):
        bound: dict[str, Any] = {}
        listed = _bind_list([int(key) for key in keys[start : start + KEYS_PER_READ]], "key", bound)
        rows = connection.execute(
            text(
                "SELECT sample.sample_id, sample.code, sample.kind, sample.lithology, site.code AS site, "
                "intrusion.name AS intrusion, composition.censored, composition.digestions, "
                "CASE WHEN stale.sample_id IS NULL THEN 0 ELSE 1 END AS is_stale "
                f"FROM {joins} WHERE sample.sample_id IN ({listed})"
            ),
            bound,
        )
        found |= {row["sample_id"]: dict(row) for row in rows.mappings()}
    return found


def cause_words(connection: Connection) -> dict[str, str]:
    """Why a value is missing, in words, by the letter that ``derived.causes`` holds."""
    return {row.letter: row.text for row in connection.execute(text("SELECT letter, text FROM cause_kind"))}
