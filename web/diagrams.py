"""Diagrams of the samples under the filter sentence: points, field lines, what is left out and why, the sources."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from flask import Blueprint, redirect, render_template, url_for

from registry.diagrams import DIAGRAMS, PANELS, Diagram, chosen_inputs, doubts
from registry.plotting import (
    DRAWN,
    MISSING,
    NOT_POSITIVE,
    OUTSIDE,
    Placed,
    Window,
    coordinates,
    in_cells,
    numbers_of,
    place,
    window_of,
)
from registry.store.reading import diagrams as reading
from registry.store.reading import samples as samples_reading
from registry.store.reading.columns import Columns
from registry.store.reading.drawn_samples import CONTROL_KINDS
from registry.store.reading.filters import Filter
from registry.store.reading.targets import target_names
from web import diagram_drawing as drawing
from web import numbers, wording
from web.diagram_request import ENDS, NOTHING_WORDS, OWN, Choice, by_choices, by_words, checked, narrowed_to, picker
from web.reading import offered_columns, registry_connection
from web.sentence import address, arguments_of_request, asked_filter, sentence_context, unsettled

blueprint = Blueprint("diagrams", __name__)
#: Up to so many points are drawn one by one, each a link; above, counts in cells.
MOST_POINTS, MOST_PANEL_POINTS = 5000, 1500
CELLS, PANEL_CELLS = (96, 64), (48, 34)
PANEL_SIZE = (300, 200)
MOST_LISTED = 500
#: Why a value as analysed is missing.
NOT_REPORTED = "not reported, or not carried by the digestion"
#: Columns of a row of ``diagram_rows`` before the quantities.
KEY, CONTROL, GROUP, FIRST_VALUE = range(4)


@blueprint.get("/diagrams")
def page() -> Any:
    arguments = arguments_of_request()
    with registry_connection() as connection:
        columns, targets = offered_columns(connection), target_names(connection)
        asked = asked_filter(arguments, columns, targets, OWN)
        choice = Choice(arguments, asked, targets)
        asked = checked(connection, asked, choice.problems)
        problems = asked.problems
        if not problems and unsettled(arguments):
            return redirect(address([*asked.arguments(), *choice.pairs()], "diagrams.page"))
        choices = samples_reading.choices(connection)
        drawn = {} if problems else _drawn(connection, asked, choice, columns, choices.get(choice.by, ()))
    context = sentence_context(asked, arguments, columns, targets)
    body = render_template(
        "diagrams.html",
        section="Diagrams",
        choices=choices,
        choice=choice,
        page={"total": drawn.get("total", 0)},
        by_words=by_words(choice, targets),
        by_choices=by_choices(targets).items(),
        own_problems=[s for name, s in problems.items() if name in ("diagram", "by", "mark", *ENDS)],
        picker=picker(asked, choice),
        kept=[(name, value) for name, value in asked.arguments() if name in ("sort", "columns")],
        list_address=address(asked.arguments()),
        plain_address=address([("diagram", choice.key)], "diagrams.page"),
        **context,
        **drawn,
    )  # fmt: skip
    return body, 400 if problems else 200


def _drawn(connection: Any, asked: Filter, choice: Choice, columns: Columns, fixed: Sequence[str]) -> dict[str, Any]:
    """Everything below the sentence. ``fixed`` are all names that samples can be grouped by, where they are listed."""
    nothing = NOTHING_WORDS.get(choice.by, "not judged")
    panels = PANELS.get(choice.key)
    shown = [DIAGRAMS[key] for key in panels.members] if panels else [DIAGRAMS[choice.key]]
    needed = list(dict.fromkeys(name for diagram in shown for name in diagram.columns))
    quantities = [columns[name] for name in needed]
    every = reading.diagram_rows(connection, asked, quantities, choice.group)
    rows = every if asked.kind else [row for row in every if not row[CONTROL]]
    values = numbers_of(rows, FIRST_VALUE, len(needed))
    common = {"total": len(every), "diagram": panels or shown[0], "is_panels": panels is not None}
    left_out = _controls_left_out(len(every) - len(rows), asked, choice)
    if panels:
        return common | _panels(shown, needed, rows, values, choice, asked, nothing, fixed) | {"left_out": left_out}
    diagram = shown[0]
    x, y, _ = coordinates(diagram, values)
    window = window_of(diagram, x, y, choice.ends, whole=choice.whole)
    placed = place(diagram, values, window)
    causes = reading.cause_words(connection) if placed.count(MISSING) else {}
    left_out += _left_out(diagram, rows, placed, causes, asked, choice)
    marked = _marked(connection, diagram, quantities, asked, choice, window)
    positions = [place_ for place_, state in enumerate(placed.state.tolist()) if state == DRAWN]
    entries, symbols = drawing.legend_of(
        choice.group, [row[GROUP] for row in rows], [rows[p][GROUP] for p in positions], nothing, fixed
    )
    _link_entries(entries, rows, positions, symbols, asked, choice)
    found = common | {
        "drawn_count": len(positions),
        "left_out": left_out,
        "window": window,
        "axes": drawing.axis_words(diagram),
        "lines": drawing.field_paths(diagram, window),
        "names": drawing.field_names(diagram, window),
        "layers": diagram.layers,
        "entries": entries,
        "marked": marked,
        "used": drawing.used_symbols(entries, ()),
        "narrowed": any(end is not None for end in choice.ends) or choice.whole,
        "usual_address": address(
            [*asked.arguments(), *choice.pairs(**{name: "" for name in (*ENDS, "whole")})], "diagrams.page"
        ),
        "csv_address": _csv_address(asked, diagram),
        "table_address": address([*asked.arguments(), *choice.pairs(table="1")], "diagrams.page") + "#points",
    }
    found |= drawing.triangle_frame() if diagram.apex_a else {"marks": drawing.axis_ticks(window)}
    if len(positions) > MOST_POINTS:
        cells = in_cells(placed.across[positions], placed.up[positions], *CELLS)
        svg, key = drawing.cells_svg(cells)
        found |= {"cells": cells, "cells_svg": svg, "cells_key": key, "most_points": MOST_POINTS}
    keys = [rows[p][KEY] for p in (positions if len(positions) <= MOST_POINTS else [])]
    if choice.table and not keys:
        keys = [rows[p][KEY] for p in positions[:MOST_LISTED]]
    details = reading.point_details(connection, keys)
    points = _points(diagram, rows, placed, positions[: len(keys)], symbols, details, entries)
    if len(positions) <= MOST_POINTS:
        found["points_svg"] = drawing.points_svg([point for point, _ in points], entries)
        found["any_doubt"] = any(point.is_doubtful for point, _ in points)
        found["any_stale"] = any(point.is_stale for point, _ in points)
    if choice.table:
        listed = sorted((row for _, row in points), key=lambda row: row["code"])[:MOST_LISTED]
        found |= {"table_rows": listed, "most_listed": MOST_LISTED}
    return found


def _controls_left_out(count: int, asked: Filter, choice: Choice) -> list[dict[str, Any]]:
    if not count:
        return []
    pairs = [*asked.arguments(), *(("kind", kind) for kind in CONTROL_KINDS), *choice.pairs()]
    words = "control of the laboratory" if count == 1 else "controls of the laboratory"
    return [{"count": count, "words": f"{words} (blanks, reference materials, duplicates)",
             "link": "draw them alone", "address": address(pairs, "diagrams.page")}]  # fmt: skip


def _left_out(
    diagram: Diagram, rows: Sequence[Any], placed: Placed, causes: Mapping[str, str], asked: Filter, choice: Choice
) -> list[dict[str, Any]]:
    """Counts of the samples without a place, with the reason, most first."""
    needed = diagram.columns
    why: dict[tuple[str, str], int] = {}
    for number, lacking in enumerate(placed.missing.tolist()):
        if lacking >= 0:
            letter = rows[number][FIRST_VALUE + len(needed) + lacking]
            reason = (wording.column_words(needed[lacking]), causes.get(letter or "", NOT_REPORTED))
            why[reason] = why.get(reason, 0) + 1
    found = [
        {"count": count, "words": f"without {name}: {cause}"}
        for (name, cause), count in sorted(why.items(), key=lambda item: -item[1])
    ]
    if count := placed.count(NOT_POSITIVE):
        fault = "whose sum is zero" if diagram.apex_a else "at or below zero, which a logarithmic axis cannot show"
        found.append({"count": count, "words": fault})
    if count := placed.count(OUTSIDE):
        pairs = [*asked.arguments(), *choice.pairs(whole="1", **{name: "" for name in ENDS})]
        found.append({"count": count, "words": "beyond the ends of the axes", "link": "show the whole range",
                      "address": address(pairs, "diagrams.page")})  # fmt: skip
    return found


def _link_entries(
    entries: Sequence[drawing.Entry], rows: Sequence[Any], positions: Sequence[int], symbols: Sequence[str],
    asked: Filter, choice: Choice,
) -> None:  # fmt: skip
    """Give each group that a condition of the sentence can say its own address."""
    stored = dict(zip(symbols, (rows[p][GROUP] for p in positions), strict=True))
    for entry in entries:
        value = stored[entry.name]
        if entry.name in (drawing.NONE, drawing.OTHERS):
            continue
        narrower = narrowed_to(asked, choice, value)
        if narrower is not None:
            by = "" if choice.by == (narrower.target or "intrusion") else choice.by
            entry.address = address([*narrower.arguments(), *choice.pairs(by=by)], "diagrams.page")


def _points(
    diagram: Diagram, rows: Sequence[Any], placed: Placed, positions: Sequence[int], symbols: Sequence[str],
    details: Mapping[int, Mapping[str, Any]], entries: Sequence[drawing.Entry],
) -> list[tuple[drawing.Point, dict[str, Any]]]:  # fmt: skip
    """(point, row of the table) of each sample drawn."""
    inputs = frozenset().union(*(chosen_inputs(column) for column in diagram.columns))
    words = {entry.name: entry.words for entry in entries}
    found = []
    for number, symbol in zip(positions, symbols, strict=False):
        detail = details[rows[number][KEY]]
        left, top = drawing.percent(placed.across[number], placed.up[number])
        outside, minima = doubts(inputs, detail["censored"], detail["digestions"])
        remarks = [f"{wording.column_words(mark[:-1])} {'below' if mark[-1] == '<' else 'above'} the limit of detection"
                   for mark in outside]  # fmt: skip
        if minima:
            remarks.append(f"{wording.joined([wording.column_words(name) for name in minima])} by a partial digestion, "
                           "a minimum")  # fmt: skip
        shown = [_spelled(value, axis.unit) for value, axis in zip(_values(placed, number), diagram.axes, strict=False)]
        said = ", ".join(
            f"{wording.formula(axis.label)} {text}" for axis, text in zip(diagram.axes, shown, strict=True)
        )
        if detail["is_stale"]:
            remarks.append("changed since it was computed")
        title = "\n".join([f"{detail['code']}, {words.get(symbol, 'others')}", said, *remarks])
        point = drawing.Point(
            detail["code"], symbol, left, top, title, bool(outside or minima), bool(detail["is_stale"])
        )
        found.append((point, {**detail, "group": words.get(symbol, "others"), "symbol": symbol, "cells": shown,
                              "remarks": "; ".join(remarks)}))  # fmt: skip
    return found


def _values(placed: Placed, number: int) -> tuple[float, float, float]:
    return float(placed.x[number]), float(placed.y[number]), float(placed.a[number])


def _spelled(value: float, unit: str) -> str:
    return numbers.derived(value, "wt%" if unit.startswith("wt%") else unit)


def _csv_address(asked: Filter, diagram: Diagram) -> str:
    pairs = [(name, value) for name, value in asked.arguments() if name != "columns"]
    return address([*pairs, ("columns", ",".join(("intrusion", *diagram.columns)))], "samples.csv_file")


def _marked(
    connection: Any, diagram: Diagram, quantities: Sequence[Any], asked: Filter, choice: Choice, window: Window,
) -> list[dict[str, Any]]:  # fmt: skip
    """The samples of ``mark`` with their places, drawn whether the filter holds them or not."""
    if not choice.mark:
        return []
    rows = reading.diagram_rows(connection, asked, quantities, choice.group, choice.mark)
    codes = {key: detail["code"] for key, detail in reading.point_details(connection, [r[KEY] for r in rows]).items()}
    placed = place(diagram, numbers_of(rows, FIRST_VALUE, len(quantities)), window)
    found, known = [], set()
    for number, row in enumerate(rows):
        code = codes[row[KEY]]
        known.add(code)
        left, top = drawing.percent(placed.across[number], placed.up[number])
        state = int(placed.state[number])
        why = ""
        if state == MISSING:
            why = f"it has no {wording.column_words(diagram.columns[int(placed.missing[number])])}"
        elif state != DRAWN:
            why = "it lies beyond the ends of the axes" if state == OUTSIDE else "a logarithmic axis cannot show it"
        found.append({"code": code, "left": left, "top": top, "why": why, "drawn": state == DRAWN,
                      "to_left": bool(placed.across[number] > 0.8),
                      "address": url_for("sample.page", code=code)})  # fmt: skip
    found += [{"code": code, "why": "the registry holds no sample of this code", "drawn": False, "address": ""}
              for code in choice.mark if code not in known]  # fmt: skip
    return found


def _panels(
    shown: Sequence[Diagram],
    needed: Sequence[str],
    rows: Sequence[Any],
    values: Any,
    choice: Choice,
    asked: Filter,
    nothing: str,
    fixed: Sequence[str],
) -> dict[str, Any]:
    """Small diagrams that share one legend; each leads to its large one."""
    stored = [row[GROUP] for row in rows]
    entries, symbols = drawing.legend_of(choice.group, stored, stored, nothing, fixed)
    _link_entries(entries, rows, range(len(rows)), symbols, asked, choice)
    width, height = PANEL_SIZE
    drawn = []
    for diagram in shown:
        own = values[:, [needed.index(name) for name in diagram.columns]]
        x, y, _ = coordinates(diagram, own)
        window = window_of(diagram, x, y)
        placed = place(diagram, own, window)
        inside = placed.state == DRAWN
        count = placed.count(DRAWN)
        panel: dict[str, Any] = {
            "title": wording.formula(diagram.y.words), "count": count, "missing": len(rows) - count,
            "marks": drawing.axis_ticks(window, 5),
            "address": address([*asked.arguments(), *choice.pairs(diagram=diagram.key)], "diagrams.page"),
        }  # fmt: skip
        if count > MOST_PANEL_POINTS:
            panel["cells"] = in_cells(placed.across[inside], placed.up[inside], *PANEL_CELLS)
            panel["svg"], panel["key"] = drawing.cells_svg(panel["cells"])
        else:
            names = [name if here else "" for name, here in zip(symbols, inside.tolist(), strict=True)]
            panel["svg"] = drawing.panel_paths(placed, names, entries, width, height)
        drawn.append(panel)
    return {
        "panels": drawn, "panel_size": PANEL_SIZE, "entries": entries, "drawn_count": len(rows),
        "x_title": wording.formula(shown[0].x.words), "layers": (), "marked": [],
        "in_cells": any("cells" in panel for panel in drawn),
    }  # fmt: skip
