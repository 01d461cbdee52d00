"""``read_file``: the one door of the intake."""

from __future__ import annotations

from registry.intake.findings import Findings
from registry.intake.readings import Reading, ReadingOptions


def read_file(name: str, data: bytes, kind: str | None = None, options: ReadingOptions | None = None) -> Reading:
    """Read one file into a checked table; never raises for what stands in the file, all faults are in ``problems``."""
    options = options or ReadingOptions()
    findings = Findings(name, options.listed)
    findings.add("the intake cannot read files yet")
    return Reading(name, kind, findings.problems(), whole_file_refused=True)
