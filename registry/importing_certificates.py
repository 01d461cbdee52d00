"""Certificates of reference materials into the registry, with every fault of the file said at once."""

from __future__ import annotations

from typing import Any

from registry.errors import Problem
from registry.intake import MasterTable
from registry.intake.units import CANONICAL_UNITS, canonical_unit
from registry.quality.certificates import kind_of_uncertainty
from registry.quality.substances import analyte_symbol
from registry.store.reference_values import Changed, upsert_values

#: What a certificate without a word on its status or source counts as.
OWN_STATUS, OWN_SOURCE = "certified", "certificate entered by the user"


def store_certificates(connection: Any, table: MasterTable, file: str) -> tuple[Changed, list[Problem]]:
    """Bring in the values of a file of certificates; what changed, or the problems (then nothing was written).

    A deviation without a type counts as the standard deviation of results; a status left blank as ``certified``, which
    goes before every shipped value of the same material.
    """
    n = len(table)
    columns = {name: table.rows.get(name, [None] * n) for name in _COLUMNS}
    problems: list[Problem] = []
    rows = []
    for place in range(n):
        row = {name: column[place] for name, column in columns.items()}
        faults = _faults(row, file, int(table.line_no[place]))
        problems += faults
        if not faults:
            rows.append(
                {
                    "material": row["reference_material"].strip(),
                    "analyte": analyte_symbol(row["analyte"]),
                    "value": float(row["value"]),
                    "unit": canonical_unit(row["unit"]),
                    "uncertainty": None if row["uncertainty"] is None else float(row["uncertainty"]),
                    "uncertainty_type": row["uncertainty_type"],
                    "status": (row["status"] or OWN_STATUS).strip(),
                    "source": (row["source"] or OWN_SOURCE).strip(),
                }
            )
    if problems:
        return Changed(), problems
    return upsert_values(connection, rows), []


_COLUMNS = ("reference_material", "analyte", "value", "unit", "uncertainty", "uncertainty_type", "status", "source")


def _faults(row: dict[str, Any], file: str, line: int) -> list[Problem]:
    found = []
    if analyte_symbol(row["analyte"] or "") is None:
        remedy = "write it as in the results (SiO2, Fe2O3T, FeOT, Zr)"
        found.append(
            Problem(file, "this is no analyte of the register", line, "analyte", row["analyte"], "an analyte", remedy)
        )
    if canonical_unit(row["unit"] or "") is None:
        found.append(
            Problem(
                file,
                "this unit is not known",
                line,
                "unit",
                row["unit"],
                f"one of {', '.join(CANONICAL_UNITS)}",
                "write the unit of the value",
            )
        )
    if row["value"] is None or not row["value"] > 0.0:
        found.append(
            Problem(
                file,
                "a certified value must be above zero",
                line,
                "value",
                None if row["value"] is None else f"{row['value']:g}",
                "a number above 0",
                "leave the row out",
            )
        )
    word = row["uncertainty_type"]
    if word and kind_of_uncertainty(word) == "nothing" and word.casefold() != "range":
        found.append(
            Problem(
                file,
                "this kind of uncertainty is not known",
                line,
                "uncertainty_type",
                word,
                "SD, 2SD, 95%CL, U (k=2) or range",
                "write one of these, or leave it blank for a standard deviation",
            )
        )
    return found
