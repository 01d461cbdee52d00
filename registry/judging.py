"""What a registry judges with: its conventions and its active target definitions, read once a transaction."""

from __future__ import annotations

import json
from dataclasses import dataclass, fields
from typing import Any

from registry.clock import now
from registry.errors import PlutonbookError
from registry.petrology.conventions import Conventions
from registry.store import target_rows
from registry.targets.definition import TargetDefinition, parse_definition

#: Settings that hold a convention are named ``convention.<field>``; their values are JSON.
CONVENTION_PREFIX = "convention."


@dataclass(frozen=True)
class Rules:
    """Conventions with the id of their set, and the active definitions with the ids of target and version."""

    conventions: Conventions
    convention_set_id: int
    definitions: tuple[TargetDefinition, ...]
    target_ids: dict[str, int]
    version_ids: dict[str, int]


def read_rules(connection: Any) -> Rules:
    """The rules in force; PlutonbookError names a setting or definition that cannot be used."""
    conventions = read_conventions(connection)
    rows = target_rows.active_definitions(connection)
    try:
        definitions = tuple(parse_definition(text, code) for _, _, code, text in rows)
    except ValueError as fault:
        raise PlutonbookError(f"the registry holds a target definition that cannot be used: {fault}") from fault
    return Rules(
        conventions,
        target_rows.convention_set_id(connection, conventions.as_dict(), now()),
        definitions,
        {code: target_id for target_id, _, code, _ in rows},
        {code: version_id for _, version_id, code, _ in rows},
    )


#: How a stored setting is written.
_WORDS = {float: "a number", int: "a whole number", bool: "true or false", str: "a word in quotation marks"}


def read_conventions(connection: Any) -> Conventions:
    """The conventions in force: the defaults, changed by the settings ``convention.<name>``."""
    known: dict[str, Any] = {field.name: type(field.default) for field in fields(Conventions)}
    chosen = {}
    for name, value in target_rows.read_settings(connection).items():
        if not name.startswith(CONVENTION_PREFIX):
            continue
        field = name.removeprefix(CONVENTION_PREFIX)
        if field not in known:
            raise PlutonbookError(f"setting '{name}': there is no convention '{field}'; known are {sorted(known)}")
        try:
            chosen[field] = known[field](json.loads(value))
        except (ValueError, TypeError) as fault:
            raise PlutonbookError(
                f"setting '{name}': found '{value}', expected {_WORDS[known[field]]}; "
                f"DELETE FROM setting WHERE name = '{name}' gives the default back"
            ) from fault
    return Conventions(**chosen)


def install_shipped_definitions(connection: Any, definitions: tuple[TargetDefinition, ...]) -> list[str]:
    """Copy the shipped definitions in; the codes of those that became the active version."""
    changed = []
    for definition in definitions:
        new = target_rows.install_definition(
            connection,
            definition.code,
            definition.name,
            str(definition.version),
            definition.text,
            _criterion_rows(definition),
            now(),
        )
        if new:
            changed.append(definition.code)
    return changed


def _criterion_rows(definition: TargetDefinition) -> list[dict[str, Any]]:
    gates = len(definition.gates)
    return [
        {
            "position": position,
            "kind": "rule" if position < gates else "criterion",
            "code": item.code,
            "label": item.label,
            "column_name": item.test.quantity,
            "comparison": item.test.text,
            "threshold": None if item.test.is_text else item.test.constant,
            "weight": None if position < gates else item.weight / 100,  # type: ignore[union-attr]
            "provisional": int(item.provisional),
            "source": item.source,
        }
        for position, item in enumerate(definition.tests)
    ]
