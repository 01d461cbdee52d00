"""What the invented laboratories make of a rock: noise, detection limits, rounding, and the bytes of the file."""

from __future__ import annotations

import codecs
import math
import random
from collections.abc import Sequence
from statistics import NormalDist

from seed_demo.averages import MAJORS
from seed_demo.differentiation import Composition
from seed_demo.laboratories import FILE_NAMES, LAYOUTS, Layout, Reported
from seed_demo.workbook import workbook

NORMAL = NormalDist()
NOTES = (
    ("Every number in this workbook is invented.",),
    ("Majors by XRF, traces by fusion, some metals by four acids.",),
)
LONG_HEADINGS = ("Analyte", "Result", "Unit", "Method", "Detection limit")


def normal(rng: random.Random) -> float:
    """A standard normal number by inversion: the same on every platform and version."""
    return NORMAL.inv_cdf(min(max(rng.random(), 1e-12), 1.0 - 1e-12))


def split_name(certificate: str) -> tuple[str, str]:
    """``Z19:aqua regia`` -> the file's name and the package."""
    name, _, package = certificate.partition(":")
    return name, package


def measured(layout: Layout, columns: Sequence[Reported], rock: Composition, rng: random.Random) -> Composition:
    """One measurement by name in the file: relative error, plus an error of a quarter of the limit.

    ``rock`` holds majors, LOI, FeO, S in wt% and traces in ppm. The total is what the laboratory would add up.
    """
    found: Composition = {}
    total = 0.0
    for column in columns:
        if column.analyte == "Total":
            continue
        relative = layout.majors_error if column.analyte in MAJORS else layout.traces_error
        if column.analyte == "SiO2":
            relative /= 3.0
        true = rock[column.analyte] * column.scale * column.recovery
        value = true * (1.0 + relative * normal(rng)) + 0.25 * column.limit * normal(rng)
        found[column.name] = value
        if column.analyte in MAJORS or column.analyte == "LOI":
            total += max(value, 0.0) / column.scale
    found["Total"] = total
    return found


def cell(column: Reported, value: float, decimal: str) -> str:
    """A number as the laboratory prints it: ``<limit`` below the limit, else the limit's decimals, fewer when large."""
    decimals = max(0, -math.floor(math.log10(column.limit)))
    if value < column.limit:
        text = f"<{column.limit:g}"
    else:
        if column.unit != "%" and value >= 100.0:
            decimals = 0
        elif column.unit != "%" and value >= 10.0:
            decimals = min(decimals, 1)
        text = f"{value:.{decimals}f}"
    return text.replace(".", decimal)


def certificate_file(name: str, lines: Sequence[tuple[str, str, Composition]]) -> bytes:
    """The whole file of a certificate from (sample code, package, rock as bagged) in the order of the bags."""
    layout = LAYOUTS[name]
    reported = []
    for code, package, rock in lines:
        columns = layout.packages[package]
        key = f"{name}:{package}" if package else name
        found = measured(layout, columns, rock, random.Random(f"{key} {code}"))
        only_majors = code in layout.majors_only
        texts = [
            "" if only_majors and not _is_major(column) else cell(column, found[column.name], layout.decimal)
            for column in columns
        ]
        reported.append((code, columns, texts))
    if not layout.heading_rows:
        rows = [[layout.sample_heading, *LONG_HEADINGS]]
        for code, columns, texts in reported:
            rows += [
                [code, column.name, text, column.unit, column.method, f"{column.limit:g}"]
                for column, text in zip(columns, texts, strict=True)
            ]
    else:
        rows = [_heading_row(name, layout, words) for words in layout.heading_rows]
        rows += [[code, *texts] for code, _, texts in reported]
    if layout.file.endswith(".xlsx"):
        return workbook({"Results": rows, "Notes": NOTES})
    text = "\r\n".join([*layout.titles, *(layout.delimiter.join(row) for row in rows)]) + "\r\n"
    if layout.encoding == "utf-16":
        return codecs.BOM_UTF16_LE + text.encode("utf-16-le")
    return text.encode(layout.encoding)


def _is_major(column: Reported) -> bool:
    return column.analyte in (*MAJORS, "LOI", "Total")


def _heading_row(name: str, layout: Layout, words: str) -> list[str]:
    (columns,) = layout.packages.values()
    label = layout.sample_heading if "analyte" in words else ""
    if words in ("method", "limit") and layout.titles:
        label = {"method": "Method", "limit": "Detection limit"}[words]
    return [label, *(_heading(name, column, words) for column in columns)]


def _heading(name: str, column: Reported, words: str) -> str:
    parts = {
        "analyte": FILE_NAMES.get(name, {}).get(column.analyte, column.name),
        "method": column.method,
        "unit": column.unit,
        "(unit)": f"({column.unit})",
        "limit": f"{column.limit:g}",
    }
    return " ".join(part for word in words.split("+") if (part := parts[word]))
