"""Checks of master data that need more than one cell: keys, depths that run backwards, dips, shapes, coordinates."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import pairwise
from typing import Any

import numpy as np

from registry.intake.findings import Findings
from registry.intake.readings import ReadingOptions

#: What may stand only once in a file.
_KEYS = {
    "areas": ("area",), "sites": ("site_code",), "surveys": ("site_code", "depth_m"),
    "intervals": ("site_code", "from_m", "to_m"), "intrusions": ("intrusion",), "samples": ("sample_code",),
    "reference-materials": ("reference_material", "analyte", "unit", "source"),
}  # fmt: skip

Table = dict[str, list[Any]]


def check_rows(
    kind: str,
    table: Table,
    lines: np.ndarray,
    headings: Mapping[str, str],
    options: ReadingOptions,
    findings: Findings,
    understood: list[str],
) -> None:
    """Check the rows of one kind; ``headings`` maps contract columns to the file's own headings."""
    _check_keys(kind, table, lines, headings, findings)
    if kind in ("intervals", "samples"):
        _check_depths(table, lines, headings, findings)
    if kind == "intervals":
        _check_overlaps(table, lines, headings, findings)
    if kind == "surveys":
        _check_dips(table, headings, options, findings, understood)
    if kind in ("sites", "samples"):
        _check_coordinates(kind, table, lines, headings, findings)
    if kind == "intrusions":
        _check_shapes(table, lines, headings, findings)
    if kind == "samples":
        _check_sample_kinds(table, lines, headings, findings)


def _check_keys(kind: str, table: Table, lines: np.ndarray, headings: Mapping[str, str], findings: Findings) -> None:
    names = _KEYS[kind]
    said = f"{names[0]} stands" if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]} stand together"
    seen: dict[tuple[Any, ...], int] = {}
    columns = [table.get(name, [None] * len(lines)) for name in names]
    for line, *key in zip(lines.tolist(), *columns, strict=True):
        if any(part is None for part in key):
            continue
        first = seen.setdefault(tuple(key), line)
        shown = ", ".join(f"{part:g}" if isinstance(part, float) else str(part) for part in key)
        if first != line:
            findings.add(
                f"{said} more than once", row=line, column=headings[names[0]], found=shown,
                expected=f"one row each (the first is in row {first})", remedy="delete or correct one of the rows",
            )  # fmt: skip


def _check_depths(table: Table, lines: np.ndarray, headings: Mapping[str, str], findings: Findings) -> None:
    blank = [None] * len(lines)
    starts, ends, sites = table.get("from_m", blank), table.get("to_m", blank), table.get("site_code", blank)
    for line, start, end, site in zip(lines.tolist(), starts, ends, sites, strict=True):
        if start is not None and end is not None and start >= end:
            findings.add(
                "the interval runs backwards or is empty", row=line, column=headings["from_m"],
                found=f"{start:g} to {end:g}",
                expected="from_m less than to_m", remedy="exchange or correct the depths",
            )  # fmt: skip
        elif (start is None) != (end is None):
            findings.warn(
                "only one end of the interval is given", row=line,
                column=headings.get("from_m", headings.get("to_m")),
                expected="from_m and to_m, or neither", remedy="add the other depth",
            )  # fmt: skip
        if (start is not None or end is not None) and site is None and "site_code" in table:
            findings.warn(
                "depths are given without a site", row=line, column=headings["site_code"],
                expected="the code of a drill hole",
                remedy="add the site code, or the depths mean nothing",
            )  # fmt: skip


def _check_overlaps(table: Table, lines: np.ndarray, headings: Mapping[str, str], findings: Findings) -> None:
    known = [
        (site, start, end, line)
        for site, start, end, line in zip(
            table["site_code"], table["from_m"], table["to_m"], lines.tolist(), strict=True
        )
        if site is not None and start is not None and end is not None and start < end
    ]
    known.sort()
    for before, after in pairwise(known):
        if before[0] == after[0] and after[1] < before[2] and before[1:3] != after[1:3]:
            findings.warn(
                "the interval overlaps another of its hole", row=after[3], column=headings["from_m"],
                found=f"{after[1]:g} to {after[2]:g}", expected=f"from {before[2]:g} on (row {before[3]} ends there)",
                remedy="correct the depths if the overlap is not meant",
            )  # fmt: skip


def _check_dips(
    table: Table, headings: Mapping[str, str], options: ReadingOptions, findings: Findings, understood: list[str]
) -> None:
    dips = [dip for dip in table["dip_deg"] if dip is not None and dip != 0]
    if not dips or min(dips) < 0:
        return
    if options.positive_dips == "down":
        table["dip_deg"] = [None if dip is None else -dip for dip in table["dip_deg"]]
        understood.append("positive dips point down by the user's word; their signs are turned")
    elif options.positive_dips == "up":
        understood.append("positive dips point up by the user's word")
    else:
        findings.add(
            "every dip of the file is positive", column=headings["dip_deg"], found=f"{min(dips):g} to {max(dips):g}",
            expected="negative dips for holes that go down",
            remedy="turn the signs (a hole straight down has -90); else use --positive-dips down or up",
        )  # fmt: skip


def _check_coordinates(
    kind: str, table: Table, lines: np.ndarray, headings: Mapping[str, str], findings: Findings
) -> None:
    blank = [None] * len(lines)
    for one, other in (("easting", "northing"), ("longitude", "latitude")):
        for line, first, second in zip(lines.tolist(), table.get(one, blank), table.get(other, blank), strict=True):
            if (first is None) != (second is None) and line not in findings.refused_lines:
                missing, given = (one, other) if first is None else (other, one)
                findings.add(
                    "only one of a pair of coordinates is given", row=line,
                    column=headings.get(missing, missing), found="",
                    expected=f"{missing} beside {given}", remedy="fill in the missing coordinate",
                )  # fmt: skip
    if kind != "sites":
        return
    pairs = zip(table.get("easting", blank), table.get("longitude", blank), strict=True)
    for line, (east, longitude) in zip(lines.tolist(), pairs, strict=True):
        if east is None and longitude is None:
            findings.warn(
                "the site has no coordinates", row=line,
                expected="easting and northing, or longitude and latitude",
                remedy="it is stored without a position; add the coordinates later",
            )  # fmt: skip


def _check_shapes(table: Table, lines: np.ndarray, headings: Mapping[str, str], findings: Findings) -> None:
    blank = [None] * len(lines)
    columns = (table.get(name, blank) for name in ("shape", "half_width_m", "volume_km3"))
    for line, shape, half_width, volume in zip(lines.tolist(), *columns, strict=True):
        if shape in ("slab", "cylinder") and half_width is None and volume is not None:
            findings.add(
                f"a volume alone does not fix the size of a {shape}", row=line,
                column=headings["volume_km3"],
                found=f"{volume:g} km3",
                expected="half_width_m: half the thickness of a slab, the radius of a cylinder",
                remedy="give half_width_m, or the shape sphere if the body is about as wide as high",
            )  # fmt: skip
        for name, value in (("half_width_m", half_width), ("volume_km3", volume)):
            if value == 0:
                findings.add(
                    f"{name} is zero", row=line, column=headings[name], found="0", expected="more than 0",
                    remedy="give the size, or leave the cell blank",
                )  # fmt: skip


def _check_sample_kinds(table: Table, lines: np.ndarray, headings: Mapping[str, str], findings: Findings) -> None:
    blank = [None] * len(lines)
    columns = (table.get(name, blank) for name in ("sample_kind", "duplicate_of", "reference_material", "sample_code"))
    for line, kind, parent, material, code in zip(lines.tolist(), *columns, strict=True):
        if kind == "duplicate" and parent is None:
            findings.warn(
                "a duplicate names no original", row=line, column=headings.get("duplicate_of", "duplicate_of"),
                found=str(code), expected="the code of the sample it repeats",
                remedy="fill duplicate_of, or it cannot be compared",
            )  # fmt: skip
        if kind == "reference_material" and material is None:
            findings.warn(
                "a reference material is not named", row=line,
                column=headings.get("reference_material", "reference_material"),
                found=str(code), expected="the name of the material",
                remedy="fill reference_material, or it cannot be checked",
            )  # fmt: skip
        if parent is not None and parent == code:
            findings.add(
                "a sample is the duplicate of itself", row=line, column=headings["duplicate_of"], found=str(parent),
                expected="the code of another sample", remedy="correct duplicate_of",
            )  # fmt: skip
