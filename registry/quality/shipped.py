"""Reference values that ship: published ones as such, recommended and information values with that word beside them.

``data/reference_materials.csv`` was copied second-hand from the publication named in each row, and tested: smooth rare
earths, Nb/Ta, Zr/Hf, Y/Ho, oxide sums, and each uncertainty against Horwitz' function. Uncertainties that failed (more
than twice it, or zero) were left out, which the note beside the value says; values that were slips are not there.
Compare with the certificate that came with
the powder, and import that one: it goes before these.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass
from functools import cache
from importlib.resources import files

#: Which of several values of one analyte counts: a user's own certificate first.
STATUS_ORDER = ("certified", "published", "recommended", "", "information")
INFORMATION = STATUS_ORDER.index("information")
#: Words of certificates for values that are given for information only.
_FOR_INFORMATION = {"info", "informational", "information value", "information values", "for information",
                    "information only", "indicative", "indicative value", "indicative values", "not certified",
                    "non-certified", "uncertified"}  # fmt: skip


@dataclass(frozen=True)
class ReferenceValue:
    """One value of one material, as printed: ``uncertainty`` in the value's unit, None where none is stated."""

    material: str
    analyte: str
    value: float
    unit: str
    uncertainty: float | None
    uncertainty_type: str | None
    status: str
    source: str


def status_rank(status: str) -> int:
    """Rank of a status, 0 best; an unknown word stands before ``information``."""
    word = " ".join(status.casefold().split())
    if word in _FOR_INFORMATION:
        return INFORMATION
    return STATUS_ORDER.index(word) if word in STATUS_ORDER else STATUS_ORDER.index("")


@cache
def shipped_values() -> tuple[ReferenceValue, ...]:
    """Every shipped value, in file order."""
    text = (files("registry.quality") / "data" / "reference_materials.csv").read_text(encoding="utf-8")
    return tuple(
        ReferenceValue(
            row["reference_material"],
            row["analyte"],
            float(row["value"]),
            row["unit"],
            float(row["uncertainty"]) if row["uncertainty"] else None,
            row["uncertainty_type"] or None,
            row["status"],
            row["source"] + (f"; {row['note']}" if row["note"] else ""),
        )
        for row in csv.DictReader(text.splitlines())
    )
