"""The catalogue as one table in Markdown: what ``plutonbook methods --markdown`` prints and README.md holds."""

from __future__ import annotations

import re

from registry.petrology.catalogue import METHODS
from registry.petrology.references import REFERENCES
from registry.store.sheets import DERIVED_COLUMNS, DERIVED_SHEETS, SHEETS

#: README.md holds the table between these two lines.
BEGIN, END = "<!-- methods begin -->", "<!-- methods end -->"
HEADER = ("Quantity", "View", "Unit", "Method", "Source", "Status")
#: Stands in place of a view for what is computed on the way and shown in none.
NO_VIEW = "on the way, in no view"
_AUTHORS_AND_YEAR = re.compile(r".*?\b\d{4}[a-z]?\b")


def short_citation(key: str) -> str:
    """Authors and year of a reference, or its opening words where it is no publication."""
    citation = REFERENCES[key]
    found = _AUTHORS_AND_YEAR.match(citation) if re.search(r"\d{4}", key) else None
    return found.group() if found else re.split(r"[:,.]", citation)[0]


def view_of(quantity: str) -> str:
    """The view that shows a quantity: its own sheet, or that of the composition or the intrusion; else ``NO_VIEW``."""
    for view in (*DERIVED_SHEETS, "composition_sheet", "intrusion_sheet"):
        if quantity in SHEETS[view]:
            return view
    return NO_VIEW


def methods_table() -> str:
    """A Markdown table with one row a method, view and unit, in the order of the sheets; ends without a line break."""
    position = {name: place for place, name in enumerate(DERIVED_COLUMNS)}
    rows = []
    for method in METHODS:
        names: dict[tuple[str, str], list[str]] = {}
        for output in method.outputs:
            names.setdefault((view_of(output.name), output.unit), []).append(output.name)
        for (view, unit), columns in names.items():
            columns.sort(key=position.__getitem__)
            quantities = " ".join(f"`{name}`" for name in columns)
            shown = view if view == NO_VIEW else f"`{view}`"
            cells = (quantities, shown, unit, method.label, short_citation(method.source), method.status)
            rows.append((position[columns[0]], f"| {' | '.join(cells)} |"))
    head = f"| {' | '.join(HEADER)} |\n|{'---|' * len(HEADER)}"
    return "\n".join([head, *(line for _, line in sorted(rows))])
