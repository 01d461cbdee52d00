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


#: Between the code of a batch and the number of its corrected form.
_CORRECTED = " corrected "


@dataclass(frozen=True)
class Place:
    """Where a file of results goes: the code of its batch, the batch it is a part of, the batch it supersedes.

    ``told`` says what that does. ``lab``, the dates and the batch it is a part of are those of the superseded batch,
    for what the new file leaves open.
    """

    code: str
    part_of: int | None = None
    supersedes: int | None = None
    told: str | None = None
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
        what = f"the same bytes were imported before, as batch '{same['batch']}' ({same['state']})"
        return Place(code), [
            Problem(file, what + _counting(connection, same), remedy=_to_count_again(connection, same))
        ]
    if options.add_to:
        return _part(connection, file, options)
    by_code = batches.find_batch(connection, code)
    by_certificate = batches.find_by_certificate(connection, table.certificate) if table.certificate else None
    if options.supersede and options.corrects:
        named = batches.find_batch(connection, options.corrects)
        given = options.batch or table.certificate
        code = given or _first_form(named, options.corrects)
        return _successor(connection, file, options.corrects if named is None else code, named)
    if options.supersede:
        return _successor(connection, file, code, by_code or by_certificate)
    if by_code is None and by_certificate is not None and options.batch and by_certificate["state"] != "active":
        by_certificate = None  # nothing of that certificate counts, and the new file has a code of its own
    other = by_code or by_certificate
    if other is None:
        return Place(code), []
    return Place(code), [_taken(connection, file, code, table.certificate, other)]


def _taken(connection: Any, file: str, code: str, certificate: str | None, other: dict[str, Any]) -> Problem:
    """That the code or certificate is in the registry already, with the ways that lead on."""
    own_code = "give it a code of its own with --batch"
    counting = batches.counting_for(connection, other["batch_id"])
    is_certificate = certificate is not None and other["certificate"] == certificate
    name = certificate if is_certificate else code
    what = f"certificate '{name}'" if is_certificate else f"a batch '{name}'"
    what += f" is in the registry already, from another file ({other['file_name']})"
    if other["batch"] != name or other["state"] != "active":
        what += f", as batch '{other['batch']}'"
    if other["state"] != "active":
        what += f", which is {other['state']}{_counting(connection, other)}"
    corrects = "if this is a corrected certificate use --supersede"
    if counting is None:
        return Problem(file, what, remedy=f"{corrects}, else {own_code}")
    added = f"if it is another part of the same one use --add-to {_quoted(counting['batch'])}"
    return Problem(file, what, remedy=", ".join([corrects, added, *([] if is_certificate else [f"else {own_code}"])]))


def _quoted(code: str) -> str:
    return f"'{code}'" if " " in code else code


def _counting(connection: Any, batch: dict[str, Any]) -> str:
    """Which batch counts in the place of one that does not, to be put after what is said of it."""
    counting = batches.counting_for(connection, batch["batch_id"])
    return (
        ""
        if counting is None or counting["batch_id"] == batch["batch_id"]
        else (f"; '{counting['batch']}' counts in its place")
    )


def _to_count_again(connection: Any, same: dict[str, Any]) -> str:
    if same["state"] == "active":
        return "nothing needs to be done"
    restore = f"'plutonbook restore-batch {_quoted(same['batch'])}' lets it count again"
    counting = batches.counting_for(connection, same["batch_id"])
    return (
        f"use {restore}" if counting is None else f"if it is right after all, withdraw '{counting['batch']}': {restore}"
    )


def _part(connection: Any, file: str, options: ImportOptions) -> tuple[Place, list[Problem]]:
    parent = batches.find_batch(connection, options.add_to or "")
    if parent is None or parent["state"] != "active":
        what = f"--add-to names batch '{options.add_to}', which is " + (
            "not in the registry" if parent is None else parent["state"] + _counting(connection, parent)
        )
        return Place(""), [Problem(file, what, remedy="'plutonbook batches' lists the batches; name an active one")]
    code = options.batch or batches.free_code(connection, parent["batch"], "/")
    return Place(code, part_of=parent["part_of"] or parent["batch_id"]), []


def _successor(connection: Any, file: str, code: str, other: dict[str, Any] | None) -> tuple[Place, list[Problem]]:
    if other is None:
        what = f"--supersede: no batch has the code or certificate number '{code}'"
        remedy = "name the batch that this file corrects with --batch, or import it without --supersede"
        return Place(code), [Problem(file, what, remedy=remedy)]
    other = batches.counting_for(connection, other["batch_id"]) or other
    inherited = {name: other[name] for name in ("lab", "received_on", "reported_on", "part_of")}
    if batches.find_batch(connection, code) is not None:
        code = batches.free_code(connection, code, _CORRECTED)
    whose = f" ({other['file_name']})" if other["file_name"] else ""
    told = f"takes the place of batch '{other['batch']}'{whose}, which is kept and no longer used"
    return Place(code, supersedes=other["batch_id"], told=told, **inherited), []


def _first_form(batch: dict[str, Any] | None, code: str) -> str:
    """What a correction of a batch is called after: its certificate, else its code as it was before corrections."""
    return (batch and batch["certificate"]) or code.partition(_CORRECTED)[0]
