"""Where a file of results goes among the batches: a batch of its own, a part of one, or the successor of one."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from registry.errors import Problem
from registry.intake import ResultTable
from registry.store import batches

if TYPE_CHECKING:
    from registry.importing import ImportOptions


@dataclass(frozen=True)
class Place:
    """Where a file of results goes: the code of its batch, the batch it is a part of, the batch it supersedes.

    ``lab`` and the dates are those of the superseded batch, for what the new file leaves open.
    """

    code: str
    part_of: int | None = None
    supersedes: int | None = None
    lab: str | None = None
    received_on: str | None = None
    reported_on: str | None = None


def place_of(
    connection: Any, file: str, table: ResultTable, sha256: str, options: ImportOptions
) -> tuple[Place, list[Problem]]:
    """The place of a file among the batches, or the problems that keep it out."""
    code = options.batch or table.certificate or Path(file).stem
    same = batches.find_by_hash(connection, sha256)
    if same is not None:
        remedy = (
            f"use 'plutonbook restore-batch {same['batch']}' to let it count again"
            if same["state"] == "withdrawn"
            else "nothing needs to be done"
        )
        what = f"the same bytes were imported before, as batch '{same['batch']}' ({same['state']})"
        return Place(code), [Problem(file, what, remedy=remedy)]
    if options.add_to:
        return _part(connection, file, options)
    by_certificate = batches.find_by_certificate(connection, table.certificate) if table.certificate else None
    other = batches.find_batch(connection, code) or by_certificate
    if options.supersede:
        return _successor(connection, file, code, other, options)
    if other is None:
        return Place(code), []
    problem = Problem(
        file,
        f"certificate or batch '{code}' is in the registry already, from another file ({other['file_name']})",
        remedy="if this is a corrected certificate use --supersede, if it is another part of the same one use "
        f"--add-to {other['batch']}, else give it a code of its own with --batch",
    )
    return Place(code), [problem]


def _part(connection: Any, file: str, options: ImportOptions) -> tuple[Place, list[Problem]]:
    parent = batches.find_batch(connection, options.add_to or "")
    if parent is None or parent["state"] != "active":
        what = f"--add-to names batch '{options.add_to}', which is " + (
            "not in the registry" if parent is None else parent["state"]
        )
        return Place(""), [Problem(file, what, remedy="'plutonbook batches' lists the batches; name an active one")]
    code = options.batch or batches.free_code(connection, parent["batch"], "/")
    return Place(code, part_of=parent["part_of"] or parent["batch_id"]), []


def _successor(
    connection: Any, file: str, code: str, other: dict[str, Any] | None, options: ImportOptions
) -> tuple[Place, list[Problem]]:
    while other is not None and other["state"] == "superseded" and other["superseded_by"]:
        other = batches.find_by_id(connection, other["superseded_by"])
    if other is None:
        what = f"--supersede: no batch has the code or certificate number '{code}'"
        remedy = "name the batch that this file corrects with --batch, or import it without --supersede"
        return Place(code), [Problem(file, what, remedy=remedy)]
    inherited = {name: other[name] for name in ("lab", "received_on", "reported_on")}
    code = batches.free_code(connection, code, " corrected ")
    return Place(code, supersedes=other["batch_id"], **inherited), []
