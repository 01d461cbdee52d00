"""The log of changes: who changed what, and when."""

from __future__ import annotations

from typing import Any

from flask import Blueprint, render_template, request

from registry.store.reading import audit as reading
from web.reading import registry_connection

blueprint = Blueprint("log", __name__)
PAGE_ROWS = 100
#: A longer detail is cut on the page; the table holds it whole.
MOST_LETTERS = 600
#: Far more pages than there can be.
_LAST_PAGE = 1_000_000


@blueprint.get("/log")
def page() -> Any:
    # what no text of the database can hold narrows to nothing
    narrowed = {name: request.args.get(name, "")[:500].replace("\0", "\ufffd") for name in reading.NARROWED_BY}
    number = request.args.get("page", 1, type=int)
    number = min(max(number, 1), _LAST_PAGE)
    with registry_connection() as connection:
        rows, total = reading.audit_entries(connection, narrowed, (number - 1) * PAGE_ROWS, PAGE_ROWS)
    for row in rows:
        detail = row["detail"] or ""
        row["detail"] = detail if len(detail) <= MOST_LETTERS else f"{detail[:MOST_LETTERS]} …"
    return render_template(
        "log.html",
        section="Log",
        rows=rows,
        total=total,
        narrowed={name: text for name, text in narrowed.items() if text},
        number=number,
        pages=max(1, -(-total // PAGE_ROWS)),
    )
