"""What is drawn of samples in diagrams and on the map: numbers of all of them, words of the few drawn singly.

One statement reads numbers only, so that 100,000 samples are quick; a second one reads the words of a few thousand.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from sqlalchemy import Connection, text

from registry.store.reading.filters import Filter
from registry.store.reading.samples import bind_list, filter_conditions, is_postgresql, joined_tables
from registry.store.sheets import CONTROL_KINDS, VERDICT_WORDS

#: No more samples than this are drawn.
MOST_SAMPLES = 1_000_000
#: Keys bound in one statement; both engines take more.
KEYS_PER_READ = 5000
_CONTROLS = ", ".join(f"'{kind}'" for kind in CONTROL_KINDS)
#: What samples can be grouped by, beside the verdict for a target: the expression and the table it needs.
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
    """How samples are told apart: one of ``GROUPS``, or the verdict for the target of that code."""

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


def drawn_rows(
    connection: Connection,
    asked: Filter,
    expressions: Sequence[str],
    tables: set[str],
    group: Group | None,
    codes: Sequence[str] | None = None,
) -> list[Any]:
    """``sample_id, is_control, group, expressions ...`` of every sample of the filter by key, as the driver's tuples.

    ``tables`` are those that the expressions need; without ``group`` it is None. With ``codes`` the samples of these
    codes instead of those of the filter.
    """
    bound: dict[str, Any] = {}
    expression, table = ("NULL", "") if group is None else group.sql
    tables = tables | {table}
    if codes is None:
        clauses, needed = filter_conditions(asked, "ILIKE" if is_postgresql(connection) else "LIKE", bound)
        tables |= needed
        if "verdict" in tables:
            bound["target"] = asked.target
    else:
        clauses = [f"sample.code IN ({bind_list(codes, 'code', bound)})"]
    joins = joined_tables(tables - {"sample", ""})
    if group is not None and group.target:
        joins += f" {_SHOWN_VERDICT}"
        bound["shown_target"] = group.target
    where = f" WHERE {' AND '.join(clauses)}" if clauses else ""
    listed = ", ".join(
        ["sample.sample_id", f"CASE WHEN sample.kind IN ({_CONTROLS}) THEN 1 ELSE 0 END", expression, *expressions]
    )
    statement = f"SELECT {listed} FROM {joins}{where} ORDER BY sample.sample_id LIMIT {MOST_SAMPLES}"
    result = connection.execute(text(statement), bound)
    rows: list[Any] = list(result.cursor.fetchall())  # 100,000 rows in two thirds of the time of SQLAlchemy's own
    result.close()
    return rows


def details(connection: Connection, keys: Sequence[int], columns: str, tables: set[str]) -> dict[int, dict[str, Any]]:
    """By key: ``columns`` (SQL with names) and ``is_stale`` of the samples drawn one by one."""
    found: dict[int, dict[str, Any]] = {}
    joins = joined_tables({"stale", *tables})
    for start in range(0, len(keys), KEYS_PER_READ):
        bound: dict[str, Any] = {}
        listed = bind_list([int(key) for key in keys[start : start + KEYS_PER_READ]], "key", bound)
        rows = connection.execute(
            text(
                f"SELECT sample.sample_id, {columns}, "
                "CASE WHEN stale.sample_id IS NULL THEN 0 ELSE 1 END AS is_stale "
                f"FROM {joins} WHERE sample.sample_id IN ({listed})"
            ),
            bound,
        )
        found |= {row["sample_id"]: dict(row) for row in rows.mappings()}
    return found
