"""What the page of the map draws: its grid and frame, sites and traces, samples or counted cells, what is left out."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from registry import map_grids, mapping
from registry.map_grids import Grid, choose_grid, places_of
from registry.plotting import fractions, in_cells
from registry.store.reading import maps as reading
from registry.store.reading.drawn_samples import CONTROL_KINDS
from registry.store.reading.filters import Filter
from web import diagram_drawing, numbers, wording
from web import map_drawing as drawing
from web.diagram_request import NOTHING_WORDS, narrowed_to
from web.map_points import drawn_samples, sites_within, table_of
from web.map_request import WHOLE, MapChoice
from web.map_words import bases, moves, north_said, surveys_said
from web.remembered import remembered
from web.sentence import address

#: Up to so many symbols are drawn one by one, each a link; above, samples are counted in cells.
MOST_POINTS, MOST_SITES, MOST_TRACES = 5000, 1500, 1000
CELLS_ACROSS = 96
MOST_LISTED = 200


def _sites_shown(sites: Mapping[int, Mapping[str, Any]], asked: Filter, used: set[Any]) -> list[Mapping[str, Any]]:
    """The sites of the samples; where the sentence asks for nothing but places, those without samples as well."""
    by_sample = bool(asked.text or asked.kind or asked.verdict or asked.ranges or asked.intrusion)
    return [
        site
        for key, site in sites.items()
        if key in used
        or (
            not (by_sample or (asked.area and site["area"] not in asked.area))
            and not (by_sample or (asked.site and site["code"] not in asked.site))
        )
    ]


def drawn_map(connection: Any, asked: Filter, choice: MapChoice, fixed: Sequence[str]) -> dict[str, Any]:
    """Everything below the sentence. ``fixed`` are all names that samples can be grouped by, where they are listed."""
    every = reading.map_rows(connection, asked, choice.group, choice.number)
    rows = every if asked.kind else [row for row in every if not row[reading.CONTROL]]
    used = {row[reading.SITE] for row in rows} - {None}
    every_site = remembered("sites of the map", lambda: reading.map_sites(connection))
    sites = _sites_shown(every_site, asked, used)
    found: dict[str, Any] = {"total": len(every), "some_sites": bool(sites), "left_out": []}
    if count := len(every) - len(rows):
        kinds = [("kind", kind) for kind in CONTROL_KINDS]
        words = "control of the laboratory" if count == 1 else "controls of the laboratory"
        found["left_out"].append({
            "count": count, "words": f"{words} (blanks, reference materials, duplicates)", "link": "show them alone",
            "address": address([*asked.arguments(), *kinds, *choice.pairs()], "map.page"),
        })  # fmt: skip
    places = places_of([row[reading.EASTING : reading.BASIS] for row in rows])
    at_sites = places_of(
        [[site[name] for name in ("easting", "northing", "epsg", "longitude", "latitude")] for site in sites]
    )
    known = places.known.tolist()
    found |= _without_place(connection, rows, known, sites, at_sites.known.tolist())
    codes = {site["area_epsg"] for site in sites if site["area_epsg"] is not None}
    grid = choose_grid(map_grids.joined(places, at_sites), codes)
    if grid is None:
        return found
    return found | _placed(connection, asked, choice, fixed, rows, places, sites, at_sites, grid, found["left_out"])


def _without_place(
    connection: Any, rows: Sequence[Any], known: Sequence[bool], sites: Sequence[Mapping[str, Any]], at: Sequence[bool]
) -> dict[str, Any]:
    """Samples and sites without coordinates: how many, and the first of them as links."""
    keys = [row[reading.KEY] for row, is_known in zip(rows, known, strict=True) if not is_known]
    details = reading.place_details(connection, keys[:MOST_LISTED])
    nowhere = [site["code"] for site, is_known in zip(sites, at, strict=True) if not is_known]
    return {
        "without": len(keys),
        "without_codes": sorted(detail["code"] for detail in details.values()),
        "sites_without": len(nowhere),
        "sites_without_codes": nowhere[:MOST_LISTED],
    }


def _placed(
    connection: Any, asked: Filter, choice: MapChoice, fixed: Sequence[str], rows: Sequence[Any], places: Any,
    sites: Sequence[Mapping[str, Any]], at_sites: Any, grid: Grid, left_out: list[dict[str, Any]],
) -> dict[str, Any]:  # fmt: skip
    """The map itself, once its grid is known."""
    x, y = map_grids.to_grid(grid, places)
    found_places = mapping.finite(x, y)
    site_x, site_y = map_grids.to_grid(grid, at_sites)
    surveyed = [site for site in sites if site["stations"] and site["kind"] == "drill_hole"]
    too_many = len(surveyed) > MOST_TRACES
    key = ("traces", tuple(site["site_id"] for site in surveyed))
    trace_sites, along = remembered(key, lambda: mapping.traces(connection, () if too_many else surveyed))
    trace_x, trace_y = map_grids.to_grid(grid, along)
    notes = surveys_said(sites, set(trace_sites.tolist()), MOST_TRACES, too_many)
    ends = choice.ends if choice.grid in ("", grid.key) else None
    if choice.ends and not ends:
        notes.append("The address asked for a part of the map in another grid; all of it is shown.")
    if ends is None and not found_places + mapping.finite(site_x, site_y):
        return {"grid": grid, "notes": notes}
    frame = mapping.frame_about((x, site_x, trace_x), (y, site_y, trace_y), ends)
    across, up = fractions(frame.window, x, y)
    within = (across >= 0) & (across <= 1) & (up >= 0) & (up <= 1)
    inside = within.nonzero()[0].tolist()
    whole = address([*asked.arguments(), *choice.pairs(**WHOLE)], "map.page")
    if unshown := int(places.known.sum()) - found_places:
        left_out.append({"count": unshown, "words": "which this projection cannot show"})
    if beyond := found_places - len(inside):
        left_out.append({"count": beyond, "words": "beyond the edges of this part", "link": "show all of the map",
                         "address": whole})  # fmt: skip
    nothing = NOTHING_WORDS.get(choice.by, "not judged")
    if choice.number:
        values = mapping.numbers_of([rows[n][reading.VALUE] for n in inside])
        classes = mapping.classes_of(mapping.numbers_of([row[reading.VALUE] for row in rows])).among(inside)
        unit = wording.unit_words(choice.number.unit)
        without = int((classes.number < 0).sum())
        entries: list[Any] = drawing.class_entries(classes, choice.number.unit, without)
        symbols = [f"c{n}" if n >= 0 else diagram_drawing.NONE for n in classes.number.tolist()]
        heading = f"{wording.formula(choice.number.label)}{', ' + unit if unit else ''}"
    else:
        classes, values, heading = None, None, ""
        stored = [row[reading.GROUP] for row in rows]
        entries, symbols = diagram_drawing.legend_of(choice.group, stored, [stored[n] for n in inside], nothing, fixed)
        _link_entries(entries, [stored[n] for n in inside], symbols, asked, choice)
    found: dict[str, Any] = {
        "grid": grid, "frame": frame, "marks": drawing.frame_marks(frame), "north": north_said(grid, frame),
        "digits": max(4, len(f"{max(map(abs, (*frame.window.x, *frame.window.y))):.0f}")),
        "traces": drawing.trace_paths(frame, trace_sites, trace_x, trace_y), "notes": notes, "entries": entries,
        "heading": heading, "drawn_count": len(inside), "left_out": left_out, "narrowed": ends is not None,
        "whole_address": whole, "moves": moves(frame, grid, asked, choice, whole if ends else ""),
        "bases": bases([rows[n][reading.BASIS] for n in inside]),
        "table_address": address([*asked.arguments(), *choice.pairs(table="1")], "map.page") + "#points",
    }  # fmt: skip
    within_sites = sites_within(frame, sites, site_x, site_y, {rows[n][reading.SITE] for n in inside})
    found["sites_count"] = len(within_sites)
    labels = drawing.Labels(frame)
    order = {entry.name: place for place, entry in enumerate(entries)}
    codes = mapping.codes_of([order[symbol] for symbol in symbols])
    stacks = mapping.stacked(
        frame, x[inside], y[inside], codes, mapping.numbers_of([rows[n][reading.SITE] for n in inside]),
        by_most=not (choice.group.is_verdict or choice.number), highest_of=values,
    )  # fmt: skip
    if len(stacks) > MOST_POINTS:
        high = round(CELLS_ACROSS / mapping.SHAPES[frame.shape])
        cells = in_cells(across[inside], up[inside], CELLS_ACROSS, high)
        found |= {"cells": cells, "most_points": MOST_POINTS}
        if classes is not None:
            filled, _ = mapping.classes_in_cells(across[inside], up[inside], classes.number, CELLS_ACROSS, high)
            found["cells_svg"] = drawing.class_cells_svg(filled, len(classes.ends))
        else:
            found["cells_svg"], found["cells_key"] = diagram_drawing.cells_svg(cells)
    else:
        samples = drawn_samples(connection, rows, inside, stacks, symbols, entries, values, x, y, sites, asked, choice,
                                grid, frame)  # fmt: skip
        found["any_stack"] = any(one.count > 1 for one in samples)
        found["any_stale"] = any(one.is_stale for one in samples)
        for one in samples:
            labels.keep_off(one.across, one.up)
    if len(within_sites) <= MOST_SITES:
        for site in within_sites:
            labels.keep_off(site["across"], site["up"])
        found |= {"sites_svg": drawing.sites_svg(within_sites), "site_names": drawing.site_names(within_sites, labels)}
        found["site_kinds"] = sorted({site["kind"] for site in within_sites if site["is_signed"]})
    else:
        notes.append(f"{numbers.counted(len(within_sites), 'site')} would hide each other and are not drawn; narrow "
                     "the sentence or close up on a part.")  # fmt: skip
    if len(stacks) <= MOST_POINTS:
        depth = {entry.name: entry.depth for entry in entries}
        found["samples_svg"] = drawing.samples_svg(samples, depth, labels)
    if choice.table:
        found |= table_of(connection, rows, inside, symbols, entries, values, x, y, within_sites, choice)
    return found


def _link_entries(
    entries: Sequence[Any], stored: Sequence[Any], symbols: Sequence[str], asked: Filter, choice: MapChoice
) -> None:
    """Give each group that a condition of the sentence can say the address of the map of it alone."""
    value_of = dict(zip(symbols, stored, strict=True))
    for entry in entries:
        if entry.name in (diagram_drawing.NONE, diagram_drawing.OTHERS):
            continue
        value = value_of[entry.name]
        narrower = narrowed_to(asked, choice, value)
        if narrower is not None:
            by = "" if choice.by == (narrower.target or "best_verdict") else choice.by
            entry.address = address([*narrower.arguments(), *choice.pairs(by=by, **WHOLE)], "map.page")
