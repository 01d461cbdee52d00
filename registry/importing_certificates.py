"""Certificates of reference materials into the registry, with every fault of the file said at once."""

from __future__ import annotations

from typing import Any

from registry.errors import Problem
from registry.intake import MasterTable
from registry.intake.units import CANONICAL_UNITS, canonical_unit
from registry.quality.certificates import horwitz_deviation, kind_of_uncertainty, standard_uncertainty
from registry.quality.recognising import material_of
from registry.quality.substances import analyte_symbol, conversion
from registry.store.reference_values import Changed, material_names, upsert_values, values_of

#: A deviation of more than so many of Horwitz' function, and a value more than so many times another source's, look
#: like slips. Common practice, no source.
SLIP_OF_DEVIATION, SLIP_OF_VALUE = 3.0, 3.0
#: What a certificate without a word on its status or source counts as.
OWN_STATUS, OWN_SOURCE = "certified", "certificate entered by the user"


def store_certificates(connection: Any, table: MasterTable, file: str) -> tuple[Changed, list[Problem]]:
    """Bring in the values of a file of certificates; what changed, and what is to be said of them.

    Where one of that is a problem nothing was written; the rest are warnings. A deviation without a type counts as the
    standard deviation of results; a status left blank as ``certified``, which goes before every shipped value of the
    same material. ``BHVO 2`` is the registered ``BHVO-2``.
    """
    n = len(table)
    columns = {name: table.rows.get(name, [None] * n) for name in _COLUMNS}
    problems: list[Problem] = []
    rows: list[dict[str, Any]] = []
    lines: list[int] = []
    materials = material_names(connection)
    spelled: dict[str, str] = {}
    for place in range(n):
        row = {name: column[place] for name, column in columns.items()}
        faults = _faults(row, file, int(table.line_no[place]))
        problems += faults
        if not faults:
            name = row["reference_material"].strip()
            material = name if name in materials else material_of(name, "", materials) or name
            if material == name and name not in materials:
                materials.append(name)
            if material != name:
                spelled[name] = material
            lines.append(int(table.line_no[place]))
            rows.append(
                {
                    "material": material,
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
    told = [
        Problem(
            file, f"'{name}' is taken for the registered material '{material}'", severity="warning",
            remedy="if it is another one, give it a name that differs in more than case, spaces and dashes",
        )
        for name, material in spelled.items()
    ]  # fmt: skip
    told += _doubtful(connection, rows, lines, file)
    return upsert_values(connection, rows), told


def _doubtful(connection: Any, rows: list[dict[str, Any]], lines: list[int], file: str) -> list[Problem]:
    """Warnings of what a decimal slip looks like: a deviation no laboratory has, a value ten times another source's."""
    known = values_of(connection, {row["material"] for row in rows})
    told = []
    for row, line in zip(rows, lines, strict=True):
        value, uncertainty, unit = row["value"], row["uncertainty"], row["unit"]
        about = f"{row['material']} {row['analyte']}"
        if uncertainty == 0.0:
            what = f"{about}: an uncertainty of 0 says nothing and counts as not stated"
            told.append(_warning(file, what, line, "uncertainty", "0", "the certificate's uncertainty, or a blank"))
        elif uncertainty is not None and kind_of_uncertainty(row["uncertainty_type"]) != "nothing":
            deviation = standard_uncertainty(uncertainty, row["uncertainty_type"])
            usual = float(horwitz_deviation(value, unit))
            if deviation > SLIP_OF_DEVIATION * usual:
                what = f"{about}: results would pass that are {100.0 * deviation / value:.3g} % off (one deviation)"
                usually = f"about {usual:.2g} {unit} (Horwitz function); is the decimal point right?"
                told.append(_warning(file, what, line, "uncertainty", f"{uncertainty:g}", usually))
        for other in known.get(row["material"], ()):
            factor = conversion(other.analyte, other.unit, row["analyte"], unit)
            if factor is None or other.source == row["source"]:
                continue
            ratio = value / (other.value * factor)
            if not 1.0 / SLIP_OF_VALUE < ratio < SLIP_OF_VALUE:
                what = f"{about}: far from another value of the material in the registry"
                wanted = f"about {other.value * factor:.4g} {unit} ({other.source.split(';')[0]})"
                told.append(_warning(file, what, line, "value", f"{value:g}", wanted))
                break
    return told


def _warning(file: str, what: str, line: int, column: str, found: str, expected: str) -> Problem:
    remedy = "compare with the certificate; the row was stored"
    return Problem(file, what, line, column, found, expected, remedy, severity="warning")


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
