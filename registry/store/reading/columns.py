"""The columns a reader may ask for: every column of the one-row-a-sample views, and the table each one lies in.

A view joins every table, so a list of 100,000 samples must not be read through one. The names come from the contract
(``sheets``), units and meanings from the registry's data dictionary (``column_guide``).
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

from sqlalchemy import Connection, text

from registry.petrology.analytes import ELEMENT_COLUMNS, ELEMENT_SYMBOLS, OXIDE_COLUMNS, OXIDE_SYMBOLS
from registry.store import tables
from registry.store.sheets import DERIVED_SHEETS, SHEETS
from registry.store.types import Words

#: The views with one row a sample, in the order in which a reader meets them.
VIEWS = ("sample_sheet", "composition_sheet", *DERIVED_SHEETS)
#: Columns of ``sample_sheet`` that are not a column of the same name of a table.
PLACES = {
    "sample_kind": ("sample", "kind"),
    "sample_code": ("sample", "code"),
    "site_code": ("site", "code"),
    "site_kind": ("site", "kind"),
    "area": ("area", "name"),
    "intrusion": ("intrusion", "name"),
}
#: Looked through in this order for any other column.
TABLES = ("sample", "derived", "composition")
#: What a column is called at the head of a table, where its name does not say it.
LABELS = {
    **dict(zip(OXIDE_COLUMNS, OXIDE_SYMBOLS, strict=True)),
    **dict(zip(ELEMENT_COLUMNS, ELEMENT_SYMBOLS, strict=True)),
    "sample_kind": "kind",
    "area": "area",
    "site_code": "site",
    "site_kind": "kind of site",
    "from_m": "from",
    "to_m": "to",
    "elevation_m": "elevation",
    "epsg": "EPSG code",
    "feo_titrated_wt": "FeO titrated",
    "total_reported_wt": "total reported",
    "best_target": "best target",
    "best_verdict": "best verdict",
    "censored": "censored values",
}
#: Never a choice: the key, the code that heads every row, and the mark that stands beside it anyway.
NOT_OFFERED = ("sample_id", "sample_code", "is_stale")


@dataclass(frozen=True)
class Column:
    """One column of a per-sample view: its contract name, where it is read from, and what it means."""

    name: str
    label: str
    view: str
    unit: str
    meaning: str
    table: str
    field: str
    numeric: bool

    @property
    def sql(self) -> str:
        """The expression that a query selects; a sample without a site lies in its intrusion's area."""
        if self.table == "area":
            return "coalesce(area.name, intrusion_area.name)"
        return f'{self.table}."{self.field}"'

    @property
    def required(self) -> bool:
        """True where the column is never NULL, so that an index can serve an ordering by it."""
        return (self.table, self.field) in (("sample", "code"), ("sample", "sample_id"), ("sample", "kind"))


@dataclass(frozen=True)
class Columns(Mapping[str, Column]):
    """The offered columns by name, in view order."""

    by_name: Mapping[str, Column] = field(default_factory=dict)

    def __getitem__(self, name: str) -> Column:
        return self.by_name[name]

    def __iter__(self) -> Iterator[str]:
        return iter(self.by_name)

    def __len__(self) -> int:
        return len(self.by_name)

    def by_view(self) -> list[tuple[str, list[Column]]]:
        """(view, its columns) in view order; a column that stands in two views is listed under the first."""
        return [
            (view, columns)
            for view in VIEWS
            if (columns := [column for column in self.by_name.values() if column.view == view])
        ]


CODE = Column(
    "sample_code", "code", "sample_sheet", "text", "code of the sample, unique in the registry", "sample", "code", False
)


def _place(name: str) -> tuple[str, str] | None:
    if name in PLACES:
        return PLACES[name]
    return next(((table, name) for table in TABLES if name in tables.metadata.tables[table].columns), None)


def load_columns(connection: Connection) -> Columns:
    """The columns the registry offers, with units and meanings from its data dictionary."""
    guide = {
        (row.view_name, row.column_name): (row.unit, row.meaning)
        for row in connection.execute(text("SELECT view_name, column_name, unit, meaning FROM column_guide"))
    }
    labels = {row.name: row.label for row in connection.execute(text("SELECT name, label FROM quantity"))} | LABELS
    found: dict[str, Column] = {}
    for view in VIEWS:
        for name in SHEETS[view]:
            place = None if name in NOT_OFFERED or name in found else _place(name)
            if place is not None:
                table, field_name = place
                numeric = not isinstance(tables.metadata.tables[table].columns[field_name].type, Words)
                numeric = numeric and name != "best_verdict"
                unit, meaning = guide.get((view, name), ("1" if numeric else "text", name))
                label = labels.get(name, name.replace("_", " "))
                found[name] = Column(name, label, view, unit, meaning, table, field_name, numeric)
    return Columns(found)
