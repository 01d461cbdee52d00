"""Settings: conventions and the code patterns of control samples, listed, and changed with what that does."""

from __future__ import annotations

import json
import re
from collections.abc import Callable, Mapping, Sequence
from typing import Any

from registry import auditing, settings
from registry.controlling import call_by_patterns
from registry.errors import PlutonbookError, UsageError
from registry.judging import CONVENTION_PREFIX
from registry.petrology.catalogue.conventions import CONVENTIONS
from registry.progress import Progress
from registry.quality.recognising import PATTERN_NAMES, PATTERN_PREFIX, Patterns
from registry.recomputing import recomputed_after
from registry.store import target_rows
from registry.store.engine import Registry, reading

#: The settings that hold a code pattern of control samples.
PATTERNS = tuple(PATTERN_PREFIX + name for name in PATTERN_NAMES)
#: So many codes of samples that become controls are named, the others counted.
CODES_NAMED = 5


def list_settings(registry: Registry) -> list[dict[str, Any]]:
    """Every setting: ``name value default unit meaning choices``; patterns of control codes last."""
    with reading(registry) as connection:
        in_force, stored = settings.current(connection), target_rows.read_settings(connection)
    rows = [
        {
            "name": name,
            "value": in_force[name],
            "default": record.default,
            "unit": record.unit,
            "meaning": record.meaning,
            "choices": list(record.choices),
        }
        for name, record in CONVENTIONS.items()
    ]
    for name in PATTERNS:
        what = name.removeprefix(PATTERN_PREFIX).replace("_", " ")
        meaning = f"Regular expression: a sample of unknown kind whose code it is found in becomes a {what}."
        value = stored.get(name, "")
        rows.append({"name": name, "value": value, "default": "", "unit": "1", "meaning": meaning, "choices": []})
    return rows


def stored_patterns(connection: Any) -> dict[str, str]:
    """The code patterns of control samples by the name of their setting, '' where none is set."""
    stored = target_rows.read_settings(connection)
    return {name: stored.get(name, "") for name in PATTERNS}


def pattern_faults(typed: Mapping[str, str]) -> dict[str, str]:
    """A sentence for each pattern that is no regular expression, by the name of its setting."""
    faults = {}
    for name, text in typed.items():
        try:
            re.compile(text)
        except re.error as fault:
            faults[name] = f"“{text}” is no regular expression: {fault}."
    return faults


def change_settings(
    registry: Registry,
    wishes: Sequence[str],
    dry_run: bool = False,
    *,
    progress: Progress | None = None,
    tell: Callable[[str], Any] | None = None,
) -> dict[str, Any]:
    """Put ``name=value`` settings in force and compute all that hangs on them, in one transaction.

    A value left empty gives a convention its default back and takes a pattern away. Returns ``settings`` (what
    changed, before and after), ``controls`` (``kind samples first`` of the samples that patterns make controls) and
    ``recomputed verdicts_changed changes kinds``. UsageError names every wish that cannot be met.
    """
    conventions, patterns = _sorted_out(wishes)
    with reading(registry) as connection:
        before = settings.current(connection)
        stored = target_rows.read_settings(connection)
    typed = {name: text or _typed(CONVENTIONS[name].default) for name, text in conventions.items()}
    values, faults = settings.read_typed(typed, before)
    if faults:
        raise UsageError("; ".join(f"{name}: {sentence}" for name, sentence in faults.items()))
    try:
        Patterns(patterns)
    except ValueError as fault:
        raise UsageError(str(fault)) from fault
    differing = {name: text for name, text in patterns.items() if text != stored.get(name, "")}
    changed = {name: [str(before[name]), str(value)] for name, value in values.items()}
    changed |= {name: [stored.get(name, ""), text] for name, text in differing.items()}
    if not changed:
        raise PlutonbookError("these settings stand so already; nothing was changed")

    controls: list[dict[str, Any]] = []

    def change(connection: Any) -> None:
        for name, value in values.items():
            target_rows.write_setting(connection, CONVENTION_PREFIX + name, json.dumps(value))
        for name, text in differing.items():
            target_rows.write_setting(connection, name, text)
        for name, (was, now) in changed.items():
            auditing.note(connection, "setting", name, f"{was or '(none)'} -> {now or '(none)'}")
        called = call_by_patterns(connection) if differing else {}
        for kind, codes in called.items():
            controls.append({"kind": kind, "samples": len(codes), "first": sorted(codes)[:CODES_NAMED]})

    what = ("a trial of " if dry_run else "") + "changing the settings"
    report = recomputed_after(registry, change, what, settings.CAUSE, dry_run, progress=progress, tell=tell)
    return {"settings": changed, "controls": controls, **report}


def controls_in_lines(report: Mapping[str, Any], dry_run: bool) -> list[str]:
    """What a change of patterns makes of registered samples, in sentences; none where no pattern was changed."""
    patterns = {name: now for name, (_, now) in report["settings"].items() if name in PATTERNS}
    lines = []
    for made in report["controls"]:
        number, kind = made["samples"], made["kind"].replace("_", " ")
        became = "would become" if dry_run else "became"
        judged = "be judged no more" if dry_run else ("is judged no more" if number == 1 else "are judged no more")
        named = ", ".join(made["first"]) + (
            f" and {number - len(made['first']):,} more" * (number > len(made["first"]))
        )
        what = f"{became} a {kind}" if number == 1 else f"{became} {kind}s"
        samples = "sample" if number == 1 else "samples"
        lines.append(f"{number:,} {samples} of unknown kind {what} and {judged}: {named}.")
    if any(patterns.values()) and not lines:
        lines.append("No registered sample of unknown kind becomes a control by these patterns.")
    lines += [
        f"{name} is taken away; the samples it made controls stay controls: correct their kind in the sample list."
        for name, now in patterns.items()
        if not now
    ]
    return lines


def _sorted_out(wishes: Sequence[str]) -> tuple[dict[str, str], dict[str, str]]:
    """Wishes as (conventions, patterns) by name; a convention may be named with its prefix or without."""
    conventions: dict[str, str] = {}
    patterns: dict[str, str] = {}
    for wish in wishes:
        name, sign, text = wish.partition("=")
        name = name.strip().removeprefix(CONVENTION_PREFIX)
        if not sign:
            raise UsageError(f"'{wish}' is no setting with its value; write NAME=VALUE")
        if name in CONVENTIONS:
            conventions[name] = text.strip()
        elif name in PATTERNS:
            patterns[name] = text.strip()
        else:
            raise UsageError(f"there is no setting '{name}'; 'plutonbook settings' lists them")
    return conventions, patterns


def _typed(value: Any) -> str:
    if isinstance(value, bool):
        return settings.YES if value else settings.NO
    return str(value)


def shown(settings_: Sequence[Mapping[str, Any]]) -> list[str]:
    """The settings in lines."""
    lines = []
    for row in settings_:
        unit = "" if row["unit"] in ("1", "", "text") else f" {row['unit']}"
        choices = f" ({', '.join(row['choices'])})" if row["choices"] else ""
        changed = "" if row["value"] == row["default"] else f", by default {_typed(row['default']) or 'none'}{unit}"
        value = _typed(row["value"]) or "none"
        lines.append(f"{row['name']} = {value}{unit}{changed}  {row['meaning']}{choices}")
    return lines
