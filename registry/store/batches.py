"""Batches: one laboratory certificate each, with its file as it was sent and what state it is in."""

from __future__ import annotations

import hashlib
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import sqlalchemy as sa

from registry.errors import NotFound
from registry.store import batch_files, tables

STATES = ("active", "superseded", "withdrawn")
_batch, _column = tables.batch, tables.batch_column


def insert_batch(
    connection: sa.Connection,
    *,
    code: str,
    imported_at: str,
    data: bytes | None = None,
    parts: Iterable[bytes] = (),
    sha256: str | None = None,
    lab: str | None = None,
    certificate: str | None = None,
    received_on: str | None = None,
    reported_on: str | None = None,
    imported_by: str | None = None,
    file_name: str | None = None,
    part_of: int | None = None,
    file_part: str | None = None,
    reading: str | None = None,
) -> int:
    """Insert an active batch; its id. ``data`` are the file's bytes, kept compressed; their hash is computed here.

    ``file_part`` is the sheet or member of the file it was read from, ``reading`` how, as a recipe's JSON.
    ``parts``: the pieces of the compressed bytes, where they were compressed beforehand; then ``sha256`` is enough.
    """
    if data is not None:
        computed = hashlib.sha256(data).hexdigest()
        if sha256 is not None and sha256 != computed:
            raise ValueError(f"batch '{code}': the hash given is {sha256}, that of the bytes is {computed}")
        sha256 = computed
        parts = batch_files.pieces(batch_files.compress(data))
    inserted = connection.execute(
        sa.insert(_batch).values(
            code=code,
            lab=lab,
            certificate=certificate,
            received_on=received_on,
            reported_on=reported_on,
            imported_at=imported_at,
            imported_by=imported_by,
            file_name=file_name,
            sha256=sha256,
            state="active",
            part_of=part_of,
            file_part=file_part,
            reading=reading,
        )
    )
    batch_id = int(inserted.inserted_primary_key[0])  # type: ignore[index]
    batch_files.insert_file(connection, batch_id, parts)
    return batch_id


def insert_columns(connection: sa.Connection, batch_id: int, columns: Sequence[Mapping[str, Any]]) -> list[int]:
    """Insert the columns of a batch (keys of the table ``batch_column`` without ids); their ids in the same order."""
    return [
        int(connection.execute(sa.insert(_column).values(batch_id=batch_id, **column)).inserted_primary_key[0])  # type: ignore[index]
        for column in columns
    ]


def list_batches(connection: sa.Connection) -> list[dict[str, Any]]:
    """Every batch, oldest import first, with the number of its lines and results."""
    lines = (
        sa.select(sa.func.count())
        .select_from(tables.aliquot)
        .where(tables.aliquot.c.batch_id == _batch.c.batch_id)
        .scalar_subquery()
    )
    results = (
        sa.select(sa.func.count())
        .select_from(tables.result.join(tables.aliquot, tables.aliquot.c.aliquot_id == tables.result.c.aliquot_id))
        .where(tables.aliquot.c.batch_id == _batch.c.batch_id)
        .scalar_subquery()
    )
    query = sa.select(*_described(), lines.label("lines"), results.label("results")).order_by(_batch.c.batch_id)
    return [dict(row._mapping) for row in connection.execute(query)]


def find_batch(connection: sa.Connection, code: str) -> dict[str, Any] | None:
    """The batch with this code, None where there is none."""
    return _first(connection, _batch.c.code == code)


def find_by_hash(connection: sa.Connection, sha256: str) -> dict[str, Any] | None:
    """The batch imported from a file with this hash, None where there is none."""
    return _first(connection, _batch.c.sha256 == sha256)


def find_by_certificate(connection: sa.Connection, certificate: str) -> dict[str, Any] | None:
    """The batch with this certificate number: the oldest that counts, else the oldest; None where there is none."""
    return _first(connection, _batch.c.certificate == certificate, sa.case((_batch.c.state == "active", 0), else_=1))


def set_state(connection: sa.Connection, batch_id: int, state: str) -> list[str]:
    """Make a batch ``active``, ``superseded`` or ``withdrawn``; triggers mark its samples stale. Codes of its parts.

    Those of its parts that are in the state it was in go with it; a part that another took the place of does not. A
    batch that counts again takes the place of those that it was superseded by or that it superseded.
    """
    if state not in STATES:
        raise ValueError(f"a batch cannot be '{state}'; its states are {', '.join(STATES)}")
    batch = find_by_id(connection, batch_id)
    if batch is None:
        raise NotFound(f"there is no batch with the id {batch_id}")
    belongs = sa.or_(_batch.c.part_of == batch_id, _batch.c.batch_id.in_(further_tables(connection, batch_id)))
    together = sa.and_(belongs, _batch.c.state == batch["state"], _batch.c.superseded_by.is_(None))
    parts = list(connection.scalars(sa.select(_batch.c.code).where(together).order_by(_batch.c.batch_id)))
    whole = sa.or_(_batch.c.batch_id == batch_id, together)
    connection.execute(sa.update(_batch).where(whole).values(state=state))
    if state == "active":
        _put_before(connection, batch_id)
    return parts


def further_tables(connection: sa.Connection, batch_id: int) -> list[int]:
    """The ids of the batches that are further tables (sheets, members) of the file of a batch: stored after it."""
    ids = (_batch.c.batch_id, sa.func.coalesce(_batch.c.part_of, _batch.c.batch_id), _batch.c.sha256)
    rows = connection.execute(sa.select(*ids).where(_batch.c.batch_id >= batch_id).order_by(_batch.c.batch_id)).all()
    found: list[int] = []
    for other, whole, sha256 in rows[1:]:
        if sha256 is not None or whole != rows[0][1]:
            break
        found.append(other)
    return found


def supersede(connection: sa.Connection, batch_id: int, successor_id: int) -> list[str]:
    """Let a corrected certificate take the place of a batch and, by ``supersede_parts``, of its parts; their codes."""
    earlier = lineage(connection, batch_id)
    values = {"state": "superseded", "superseded_by": successor_id}
    connection.execute(sa.update(_batch).where(_batch.c.batch_id == batch_id).values(**values))
    parts = supersede_parts(connection, batch_id, successor_id)
    _put_before(connection, successor_id, earlier)
    return parts


def supersede_parts(connection: sa.Connection, batch_id: int, successor_id: int) -> list[str]:
    """Let a table of a corrected certificate take the place of those active parts of a batch that it corrects; codes.

    It corrects a part where it reports half of the part's analytes or more: a correction of the majors leaves the
    traces, which came as another file, in use.
    """
    brought = set(connection.scalars(sa.select(_column.c.analyte).where(_column.c.batch_id == successor_id)))
    own = [*lineage(connection, batch_id), *further_tables(connection, batch_id)]
    belongs = sa.or_(_batch.c.part_of.in_(own), _batch.c.batch_id.in_(own))
    mine = [successor_id, *further_tables(connection, successor_id)]
    others = sa.and_(belongs, _batch.c.state == "active", _batch.c.batch_id.not_in(mine))
    taken = []
    parts = sa.select(_batch.c.batch_id, _batch.c.code).where(others).order_by(_batch.c.batch_id)
    for part, code in connection.execute(parts).all():
        held = set(connection.scalars(sa.select(_column.c.analyte).where(_column.c.batch_id == part)))
        if 2 * len(held & brought) >= len(held):
            connection.execute(sa.update(_batch).where(_batch.c.batch_id == part).values(state="superseded"))
            taken.append(code)
    return taken


def parts_in_use(connection: sa.Connection, batch_id: int) -> list[tuple[int, str]]:
    """Ids and codes of the active parts of a batch and of those it took the place of, oldest first."""
    active = sa.and_(_batch.c.part_of.in_(lineage(connection, batch_id)), _batch.c.state == "active")
    query = sa.select(_batch.c.batch_id, _batch.c.code).where(active).order_by(_batch.c.batch_id)
    return [(row[0], row[1]) for row in connection.execute(query)]


def lineage(connection: sa.Connection, batch_id: int) -> list[int]:
    """The ids of a batch and of all that took its place or whose place it took, over several steps; ascending."""
    linked: dict[int, set[int]] = {}
    query = sa.select(_batch.c.batch_id, _batch.c.superseded_by).where(_batch.c.superseded_by.is_not(None))
    for earlier, later in connection.execute(query):
        linked.setdefault(earlier, set()).add(later)
        linked.setdefault(later, set()).add(earlier)
    found, open_ids = {batch_id}, [batch_id]
    while open_ids:
        further = linked.get(open_ids.pop(), set()) - found
        found |= further
        open_ids += further
    return sorted(found)


def counting_for(connection: sa.Connection, batch_id: int) -> dict[str, Any] | None:
    """The batch that counts in the place of this one, which may be itself; None where none of them does."""
    return _first(connection, sa.and_(_batch.c.batch_id.in_(lineage(connection, batch_id)), _batch.c.state == "active"))


def _put_before(connection: sa.Connection, batch_id: int, others: Iterable[int] = ()) -> None:
    """Let a batch be the last of its lineage: what was last before is superseded by it."""
    others = {*others, *lineage(connection, batch_id)} - {batch_id}
    last = sa.and_(_batch.c.batch_id.in_(others), _batch.c.superseded_by.is_(None))
    connection.execute(sa.update(_batch).where(last).values(superseded_by=batch_id))
    connection.execute(sa.update(_batch).where(_batch.c.batch_id == batch_id).values(superseded_by=None))


def free_code(connection: sa.Connection, code: str, mark: str) -> str:
    """The first of ``code`` + ``mark`` + 2, 3, ... that no batch has."""
    taken = set(
        connection.scalars(sa.select(_batch.c.code).where(_batch.c.code.startswith(f"{code}{mark}", autoescape=True)))
    )
    return next(name for number in range(2, len(taken) + 3) if (name := f"{code}{mark}{number}") not in taken)


def find_by_id(connection: sa.Connection, batch_id: int) -> dict[str, Any] | None:
    """The batch with this id, None where there is none."""
    return _first(connection, _batch.c.batch_id == batch_id)


def columns_of(connection: sa.Connection, batch_id: int) -> list[dict[str, Any]]:
    """The columns of a batch in file order: ``position header analyte unit method digestion``."""
    names = ("position", "header", "analyte", "unit", "method", "digestion")
    query = sa.select(*(_column.c[name] for name in names)).where(_column.c.batch_id == batch_id)
    return [dict(row._mapping) for row in connection.execute(query.order_by(_column.c.position))]


def set_digestions(connection: sa.Connection, batch_id: int, digestions: Mapping[int, str]) -> None:
    """Write the digestion of columns of a batch, by position; the triggers mark the samples stale where it changes."""
    for position, digestion in digestions.items():
        column = sa.and_(_column.c.batch_id == batch_id, _column.c.position == position)
        found = connection.scalar(sa.select(_column.c.digestion).where(column))
        if found is None:
            raise NotFound(f"the batch has no column at position {position}")
        if found != digestion:
            connection.execute(sa.update(_column).where(column).values(digestion=digestion))


def _described() -> list[Any]:
    return [
        _batch.c.batch_id,
        _batch.c.code.label("batch"),
        *(_batch.c[name] for name in ["lab", "certificate", "received_on", "reported_on", "imported_at"]),
        *(_batch.c[name] for name in ["imported_by", "file_name", "sha256", "state", "superseded_by", "part_of"]),
    ]


def _first(connection: sa.Connection, condition: Any, *order: Any) -> dict[str, Any] | None:
    query = sa.select(*_described()).where(condition).order_by(*order, _batch.c.batch_id)
    row = connection.execute(query).first()
    return None if row is None else dict(row._mapping)
