"""Checks of master data against what the registry holds already: words, keys, references, depths, overlaps."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Collection, Mapping, Sequence
from itertools import pairwise
from typing import Any

import sqlalchemy as sa

from registry.errors import Problem
from registry.store import master_positions, raw_rows, sample_spans, tables
from registry.store.master_kinds import MasterKind, Reference
from registry.store.near_codes import near_misses, written_twice

Rows = dict[str, list[Any]]
Known = Mapping[tuple[Any, ...], Mapping[str, Any]]
#: Equal faults are listed up to this number, then counted.
LISTED = 20


def unknown_references(
    connection: sa.Connection,
    reference: Reference,
    codes: Sequence[Any],
    known: Collection[str],
    lines: Sequence[int],
    file: str,
    near: Mapping[str, str],
) -> list[Problem]:
    """A problem for each code that names nothing, with the nearest known name."""
    del connection
    rows = [row for row, code in enumerate(codes) if code is not None and code not in known]
    problems = []
    for row in rows[:LISTED]:
        hint = f"did you mean '{near[codes[row]]}'? " if codes[row] in near else ""
        problems.append(
            Problem(
                file,
                f"this {reference.what} is not in the registry",
                row=lines[row],
                column=reference.column,
                found=codes[row],
                expected=f"a registered {reference.what}",
                remedy=f"{hint}import the {reference.what} first, or correct the code",
            )
        )
    if len(rows) > LISTED:
        problems.append(
            Problem(file, f"{len(rows) - LISTED:,} more rows name a {reference.what} that is not in the registry")
        )
    return problems


def check(
    connection: sa.Connection,
    spec: MasterKind,
    given: Rows,
    stored: Rows,
    known: Known,
    lines: Sequence[int],
    file: str,
) -> list[Problem]:
    """Every problem of the rows of one file that the file alone does not show."""
    problems = _words(spec, given, lines, file)
    problems += _keys(connection, spec, given, stored, known, lines, file)
    if "epsg" in stored:
        problems += master_positions.check_systems(stored["epsg"], lines, file)
    if spec.kind == "sites":
        problems += master_positions.check_sites(given, stored, known, lines, file)
    if spec.kind in ("sites", "samples"):
        problems += master_positions.check_places(connection, spec.noun, given, stored, known, lines, file)
    if spec.kind in ("surveys", "intervals", "samples"):
        problems += _depths(connection, spec, stored, known, lines, file)
    if spec.kind == "intervals":
        problems += _overlaps(connection, stored, lines, file)
    if spec.kind == "samples":
        problems += sample_spans.partial_overlaps(connection, given, stored, known, lines, file)
    return problems


def _words(spec: MasterKind, given: Rows, lines: Sequence[int], file: str) -> list[Problem]:
    return [
        Problem(file, "this word is not known", lines[row], name, str(value), " or ".join(words), "use one of them")
        for name, words in spec.words.items()
        for row, value in enumerate(given.get(name, ()))
        if value is not None and value not in words
    ]


def _keys(
    connection: sa.Connection,
    spec: MasterKind,
    given: Rows,
    stored: Rows,
    known: Known,
    lines: Sequence[int],
    file: str,
) -> list[Problem]:
    """A key that is blank or stands twice, and codes that are almost those of registered ones."""
    problems = []
    seen: dict[tuple[Any, ...], int] = {}
    shown = next((name for name, column in spec.columns.items() if column == spec.key[-1]), spec.key[-1])
    for row, key in enumerate(zip(*(stored[name] for name in spec.key), strict=True)):
        if any(part is None for part in key):
            if spec.key[0] in spec.columns.values():
                problems.append(
                    Problem(file, "the code is blank", lines[row], shown, expected="a code", remedy="add the code")
                )
            continue
        first = seen.setdefault(key, row)
        if first != row:
            problems.append(
                Problem(
                    file,
                    f"this {spec.noun.removesuffix(' of')} stands twice",
                    lines[row],
                    shown,
                    str(given[shown][row]) if shown in given else None,
                    f"one row (the first is in row {lines[first]})",
                    "delete or correct one of the rows",
                )
            )
    if len(spec.key) == 1:
        problems += _written_otherwise(connection, spec, stored[spec.key[0]], shown, known, lines, file)
    return problems


def _written_otherwise(
    connection: sa.Connection,
    spec: MasterKind,
    codes: Sequence[Any],
    shown: str,
    known: Known,
    lines: Sequence[int],
    file: str,
) -> list[Problem]:
    """New codes that a registered one differs from only in case, spaces, dashes or leading zeros."""
    fresh = {code: row for row, code in enumerate(codes) if code is not None and (code,) not in known}
    if not fresh:
        return []
    column = tables.metadata.tables[spec.table].c[spec.key[0]]
    near = near_misses(fresh, connection.execute(sa.select(column)).scalars())
    warnings = _almost_the_same(
        [(code, f"perhaps '{close[0]}'", fresh[code]) for code, close in near.items()],
        f"a registered {spec.noun} is written almost the same",
        "they are kept apart; correct the code if they are the same",
        f"more codes are almost those of registered ones ({spec.kind})",
        shown,
        lines,
        file,
    )
    return warnings + _written_twice(spec, [code for code in fresh if code not in near], fresh, shown, lines, file)


def _written_twice(
    spec: MasterKind, codes: Sequence[str], rows: Mapping[str, int], shown: str, lines: Sequence[int], file: str
) -> list[Problem]:
    """New codes of one file that differ from each other only so; ``rows`` are theirs."""
    return _almost_the_same(
        [
            (code, f"perhaps '{one}' of row {lines[rows[one]]}", rows[code])
            for code, one in written_twice(codes).items()
        ],
        f"another {spec.noun} of the file is written almost the same",
        "they are kept apart; correct one if they are the same",
        f"more codes of the file are almost those of others ({spec.kind})",
        shown,
        lines,
        file,
    )


def _almost_the_same(
    found: Sequence[tuple[str, str, int]],
    what: str,
    remedy: str,
    more: str,
    shown: str,
    lines: Sequence[int],
    file: str,
) -> list[Problem]:
    """Warnings of codes, each with what it may be meant to be and its row; the first of them, and how many ``more``."""
    warnings = [
        Problem(file, what, lines[row], shown, code, perhaps, remedy, "warning")
        for code, perhaps, row in found[:LISTED]
    ]
    if len(found) > LISTED:
        warnings.append(Problem(file, f"{len(found) - LISTED:,} {more}", severity="warning"))
    return warnings


def _depths(
    connection: sa.Connection, spec: MasterKind, stored: Rows, known: Known, lines: Sequence[int], file: str
) -> list[Problem]:
    """Depths along what is no drill hole, or beyond its end; the blank end of a known sample counts as stored."""
    blank = [None] * len(lines)
    ids = {site for site in stored.get("site_id", blank) if site is not None}
    ids |= {row["site_id"] for row in known.values() if row.get("site_id") is not None}
    holes = {
        row[0]: row[1:]
        for row in raw_rows.select(connection, "SELECT site_id, code, kind, depth_m FROM site WHERE site_id {ids}", ids)
    }
    columns = ("depth_m",) if spec.kind == "surveys" else ("from_m", "to_m")
    problems = []
    keys = zip(*(stored[name] for name in spec.key), strict=True)
    for row, key in enumerate(keys):
        before = known.get(key, {})
        site = stored.get("site_id", blank)[row] or before.get("site_id")
        depths = {name: stored.get(name, blank)[row] for name in columns}
        depths = {name: before.get(name) if value is None else value for name, value in depths.items()}
        deepest = max((value for value in depths.values() if value is not None), default=None)
        if spec.kind == "samples" and None not in depths.values() and depths["from_m"] > depths["to_m"]:
            problems.append(
                Problem(
                    file,
                    "the interval runs backwards together with the stored depth",
                    lines[row],
                    "from_m",
                    f"{depths['from_m']:g} to {depths['to_m']:g}",
                    "from_m not below to_m",
                    "give both depths",
                )
            )
        if site not in holes or deepest is None:
            continue
        code, kind, depth = holes[site]
        if kind != "drill_hole":
            severity = "warning" if spec.kind == "samples" else "problem"
            what, remedy = f"site {code} is an outcrop and has no depths", "correct the site or its kind"
            problems.append(
                Problem(file, what, lines[row], columns[-1], f"{deepest:g}", "a drill hole", remedy, severity)
            )
        elif depth is not None and deepest > depth:
            problems.append(
                Problem(
                    file,
                    f"this lies beyond the end of hole {code}",
                    lines[row],
                    columns[-1],
                    f"{deepest:g}",
                    f"at most {depth:g} m",
                    "correct it, or the depth of the hole",
                )
            )
    return problems


def _overlaps(connection: sa.Connection, stored: Rows, lines: Sequence[int], file: str) -> list[Problem]:
    """Intervals of the file that overlap stored ones of their hole (within the file the intake warns), and gaps."""
    ids = {site for site in stored["site_id"] if site is not None}
    spans: dict[int, list[tuple[float, float, int]]] = defaultdict(list)
    query = "SELECT site_id, from_m, to_m FROM lithology_interval WHERE site_id {ids}"
    own = set()
    for row, (site, start, end) in enumerate(zip(stored["site_id"], stored["from_m"], stored["to_m"], strict=True)):
        if site is not None and start is not None and end is not None:
            spans[site].append((start, end, lines[row]))
            own.add((site, start, end))
    for site, start, end in raw_rows.select(connection, query, ids):
        if (site, start, end) not in own:
            spans[site].append((start, end, 0))
    problems = []
    gaps: list[Problem] = []
    for intervals in spans.values():
        gaps += _gaps(sorted(intervals), file)
        for before, after in pairwise(sorted(intervals)):
            if after[0] < before[1] and 0 in (before[2], after[2]) and (before[2] or after[2]):
                new, old = (after, before) if after[2] else (before, after)
                problems.append(
                    Problem(
                        file,
                        "the interval overlaps one of its hole that is stored already",
                        new[2],
                        "from_m",
                        f"{new[0]:g} to {new[1]:g}",
                        f"depths outside {old[0]:g} to {old[1]:g}",
                        "correct the depths if the overlap is not meant",
                        "warning",
                    )
                )
    if len(gaps) > LISTED:
        more = Problem(file, f"{len(gaps) - LISTED:,} more gaps between intervals", severity="warning")
        gaps = [*gaps[:LISTED], more]
    return problems + gaps


def _gaps(intervals: Sequence[tuple[float, float, int]], file: str) -> list[Problem]:
    """A warning for each stretch of a hole that no interval covers, beside an interval of the file."""
    found = []
    end, end_line = intervals[0][1], intervals[0][2]
    for start, stop, line in intervals[1:]:
        if start > end and (line or end_line):
            found.append(
                Problem(
                    file,
                    "nothing is logged between two intervals of the hole",
                    line or end_line,
                    "from_m",
                    f"nothing from {end:g} to {start:g} m",
                    "intervals that join",
                    "nothing to do where core was lost or not logged; else correct the depths",
                    "warning",
                )
            )
        if stop >= end:
            end, end_line = stop, line
    return found
