"""What the invented laboratories make of a rock: noise, detection limits, rounding, and the layout of the file."""

from __future__ import annotations

import math
import random
from dataclasses import dataclass, field
from statistics import NormalDist

from seed_demo.averages import MAJORS
from seed_demo.differentiation import Composition

NORMAL = NormalDist()


def normal(rng: random.Random) -> float:
    """A standard normal number by inversion: the same on every platform and version."""
    return NORMAL.inv_cdf(min(max(rng.random(), 1e-12), 1.0 - 1e-12))


@dataclass(frozen=True)
class Reported:
    """A column of a certificate: analyte of the composition, its name in the file, unit, method, limit in that unit.

    ``scale`` turns the composition's unit (wt% or ppm) into the unit of the file.
    """

    analyte: str
    name: str
    unit: str
    method: str
    limit: float
    scale: float = 1.0


@dataclass(frozen=True)
class Layout:
    """How a laboratory writes its files, and how well it measures."""

    sample_heading: str
    columns: tuple[Reported, ...]
    units_in_heading: bool
    delimiter: str
    decimal: str
    encoding: str
    majors_error: float
    traces_error: float
    #: Bags whose pulp ran out: only the majors were done.
    majors_only: frozenset[str] = field(default_factory=frozenset)


def _columns(names: str, unit: str, method: str, limits: dict[str, float], default: float) -> tuple[Reported, ...]:
    return tuple(Reported(name, name, unit, method, limits.get(name, default)) for name in names.split())


_OXIDES = "SiO2 TiO2 Al2O3 Fe2O3T MnO MgO CaO Na2O K2O P2O5"
_LIMITS = {"SiO2": 0.01, "MnO": 0.002, "TiO2": 0.01}
_TRACE_LIMITS = {
    "Zr": 2.0, "Ba": 3.0, "Sr": 2.0, "Cr": 10.0, "V": 5.0, "Sn": 1.0, "W": 1.0, "Ta": 0.1, "Nb": 0.2, "Cs": 0.1,
    "Rb": 0.2, "Y": 0.5, "Ni": 1.0, "Cu": 1.0, "Zn": 2.0, "Pb": 2.0, "Mo": 1.0, "Li": 1.0, "Be": 0.5, "Sc": 1.0,
    "Co": 0.5, "Ga": 0.5, "Hf": 0.2, "U": 0.05, "Th": 0.05, "Tm": 0.01, "Lu": 0.01, "Eu": 0.02, "Tb": 0.01,
    "Ho": 0.01, "Yb": 0.03, "Er": 0.03, "Dy": 0.05, "Gd": 0.05, "Sm": 0.03, "Pr": 0.02,
}  # fmt: skip
_FUSED_A = "V Cr Ga Rb Sr Y Zr Nb Sn Cs Ba La Ce Pr Nd Sm Eu Gd Tb Dy Ho Er Tm Yb Lu Hf Ta W Th U"
_FUSED_B = "V Ga Rb Sr Y Zr Nb Cs Ba La Ce Nd Sm Eu Gd Yb Lu Hf Ta Th U"

LAYOUTS: dict[str, Layout] = {
    # Units in every heading, method after the analyte, decimal point, comma.
    "A417": Layout(
        "Sample No.",
        (
            *_columns(_OXIDES, "%", "XRF", _LIMITS, 0.01),
            Reported("LOI", "LOI", "%", "", 0.05),
            Reported("Total", "Total", "%", "", 0.01),
            Reported("FeO", "FeO", "%", "titration", 0.05),
            Reported("S", "S", "%", "combustion", 0.01),
            *_columns(_FUSED_A, "ppm", "fusion", _TRACE_LIMITS, 0.1),
            *_columns("Li Be Sc Co Ni Cu Zn Mo Pb", "ppm", "four-acid", _TRACE_LIMITS, 0.5),
        ),
        True, ",", ".", "utf-8-sig", 0.006, 0.03,
        frozenset({"KD001-121", "KD001-122"}),
    ),
    # Analytes, units and methods in three rows, decimal comma, semicolon; no titrated FeO, no S, fewer rare earths.
    "K88": Layout(
        "Sample N°",
        (
            *_columns(_OXIDES.replace(" MnO", "").replace(" P2O5", ""), "%", "XRF", _LIMITS, 0.01),
            Reported("MnO", "MnO", "ppm", "XRF", 20.0, 1e4),
            Reported("P2O5", "P2O5", "%", "XRF", 0.01),
            Reported("LOI", "LOI", "%", "", 0.05),
            *_columns(_FUSED_B, "ppm", "fusion", _TRACE_LIMITS | {"Cs": 0.5, "Ta": 0.5, "Nb": 1.0}, 0.2),
            *_columns("Sc Ni Cu Zn Pb", "ppm", "four-acid", _TRACE_LIMITS, 0.5),
        ),
        False, ";", ",", "cp1252", 0.008, 0.04,
        frozenset({"KD002-214", "OD001-318"}),
    ),
}  # fmt: skip
_FILE_NAMES = {"K88": {"Fe2O3T": "Fe2O3tot"}, "A417": {"Fe2O3T": "Fe2O3T"}}


def measured(layout: Layout, rock: Composition, rng: random.Random) -> Composition:
    """One measurement: relative error, plus an error of a quarter of the limit; LOI and Total follow from the rock.

    ``rock`` holds majors, LOI, FeO, S in wt% and traces in ppm. The total is what the laboratory would add up.
    """
    found: Composition = {}
    for column in layout.columns:
        if column.analyte == "Total":
            continue
        relative = layout.majors_error if column.analyte in MAJORS or column.analyte == "SiO2" else layout.traces_error
        if column.analyte == "SiO2":
            relative /= 3.0
        true = rock[column.analyte] * column.scale
        found[column.analyte] = true * (1.0 + relative * normal(rng)) + 0.25 * column.limit * normal(rng)
    found["Total"] = sum(max(found[name], 0.0) for name in MAJORS if name in found) + found["LOI"]
    return found


def cell(column: Reported, value: float, decimal: str) -> str:
    """A number as the laboratory prints it: ``<limit`` below the limit, else the limit's decimals, fewer when large."""
    decimals = max(0, -math.floor(math.log10(column.limit)))
    if value < column.limit:
        text = f"<{column.limit:g}"
    else:
        if column.unit == "ppm" and value >= 100.0:
            decimals = 0
        elif column.unit == "ppm" and value >= 10.0:
            decimals = min(decimals, 1)
        text = f"{value:.{decimals}f}"
    return text.replace(".", decimal)


def certificate_text(name: str, lines: list[tuple[str, Composition]]) -> str:
    """The whole file of a certificate from (sample code, rock as bagged) in the order of the bags."""
    layout = LAYOUTS[name]
    names = [_FILE_NAMES[name].get(column.analyte, column.name) for column in layout.columns]
    rows: list[list[str]] = []
    if layout.units_in_heading:
        rows.append(
            [layout.sample_heading]
            + [
                " ".join(word for word in (text, column.method, f"({column.unit})") if word)
                for text, column in zip(names, layout.columns, strict=True)
            ]
        )
    else:
        rows.append([layout.sample_heading, *names])
        rows.append(["", *(column.unit for column in layout.columns)])
        rows.append(["", *(column.method for column in layout.columns)])
    for code, rock in lines:
        found = measured(layout, rock, random.Random(f"{name} {code}"))
        only_majors = code in layout.majors_only
        rows.append(
            [code]
            + [
                "" if only_majors and column.unit == "ppm" and column.analyte not in MAJORS
                else cell(column, found[column.analyte], layout.decimal)
                for column in layout.columns
            ]
        )  # fmt: skip
    return "\r\n".join(layout.delimiter.join(row) for row in rows) + "\r\n"
