"""``plutonbook check``: what could be wrong with a registry, and with the methods of this installation."""

from __future__ import annotations

from typing import Any

from registry.petrology import selftest
from registry.store import integrity
from registry.store.engine import Registry, reading


def check_registry(registry: Registry) -> list[dict[str, Any]]:
    """Findings as dicts ``subject found remedy``, empty where all is well. Reads only, never refreshes."""
    with reading(registry) as connection:
        findings = integrity.findings(connection)
    off = [result for result in selftest.run_selftest() if not result.passed]
    findings += [
        {
            "subject": f"method {result.method}",
            "found": f"check value {result.found}, expected {result.expected} within {result.tolerance}",
            "remedy": "this installation computes wrongly: reinstall it and do not use its numbers",
        }
        for result in off
    ]
    return findings
