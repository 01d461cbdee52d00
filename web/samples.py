"""The list of samples under its filter sentence, and the same samples as CSV."""

from __future__ import annotations

import csv
import io
from collections.abc import Collection, Iterator, Mapping, Sequence
from typing import Any

from flask import Blueprint, Response, current_app, redirect, render_template, stream_with_context

from registry.exporting import without_formula
from registry.store.reading import samples as reading
from registry.store.reading.columns import Column, Columns
from registry.store.reading.doubts import doubted_samples
from registry.store.reading.filters import (
    DEFAULT_COLUMNS,
    SCORE,
    VERDICTS,
    Filter,
)
from registry.store.reading.session import query_only
from registry.store.reading.targets import target_names
from web import numbers, wording
from web.pictures import minerals_of, norm_segments
from web.reading import offered_columns, registry_connection
from web.remembered import remembered
from web.sentence import address, arguments_of_request, asked_filter, sentence_context, unsettled

blueprint = Blueprint("samples", __name__)
#: Stored values of these columns stand for words.
VERDICT_COLUMNS = ("best_verdict",)
CONTROL_KINDS = ("reference_material", "blank", "duplicate")
#: A column of words up to this long is not broken into lines.
SHORT_WORDS = 20
#: Computed words that speak of the analysis and not of a rock.
OF_THE_ANALYSIS = ("fitness", "fitness_cause", "iron_basis", "norm_basis")


@blueprint.get("/samples")
def list_page() -> Any:
    arguments = arguments_of_request()
    with registry_connection() as connection:
        columns, targets = offered_columns(connection), target_names(connection)
        asked = asked_filter(arguments, columns, targets)
        problems = dict(asked.problems) | reading.names_not_found(connection, asked)
        place, problem = _place(arguments)
        if problem:
            problems["after"] = problem
        if problems:
            asked = Filter(**{**vars(asked), "problems": problems})
            page = reading.Page(0, [], None, None)
        elif unsettled(arguments):
            return redirect(address(asked.arguments()))
        else:
            page = reading.page_of_samples(connection, asked, columns, place=place)
        choices = reading.choices(connection)
        doubted = remembered("samples of doubted identity", lambda: doubted_samples(connection))
    shown = reading.shown_columns(asked, columns)
    if asked.target and asked.columns == DEFAULT_COLUMNS:
        shown = [column for column in shown if column.name not in ("best_target", *VERDICT_COLUMNS)]
    heads = _heads(asked, shown, targets)
    rows = _rows(page.rows, shown, asked, targets, heads, doubted)
    pairs = asked.arguments()
    addresses = {
        "first_address": address(pairs),
        "csv_address": address(pairs, "samples.csv_file"),
        "diagrams_address": address(pairs, "diagrams.page"),
        "next_address": page.next and address(pairs, after=page.next.token()),
        "previous_address": page.previous and address(pairs, before=page.previous.token()),
    }
    body = render_template(
        "samples.html",
        section="Samples",
        title="Samples",
        page=page,
        choices=choices,
        groups=[(wording.VIEW_WORDS[view], members) for view, members in columns.by_view()],
        sortable=shown,
        heads=heads,
        rows=rows,
        minerals=minerals_of(segments for row in rows for segments in row["cells"][:1]),
        any_stale=any(row["is_stale"] for row in page.rows),
        rows_per_page=reading.ROWS_PER_PAGE,
        **sentence_context(asked, arguments, columns, targets),
        **addresses,
    )
    return body, 400 if asked.problems else 200


def _place(arguments: Mapping[str, Sequence[str]]) -> tuple[reading.Place | None, str | None]:
    for name in ("after", "before"):
        if token := (arguments.get(name) or [""])[-1]:
            try:
                return reading.read_place(token, backwards=name == "before"), None
            except reading.BadPlace as fault:
                return None, str(fault)
    return None, None


def _heads(asked: Filter, shown: Sequence[Column], targets: Mapping[str, str]) -> list[dict[str, Any]]:
    heads = [
        _head(asked, "sample_code", "code", "", "code of the sample", "text"),
        _head(asked, "", "norm", "0 to 100 wt%", "CIPW weight norm in crystallisation order", "norm"),
    ]
    if asked.target:
        name = targets[asked.target]
        heads.append(_head(asked, "", "verdict", "", f"verdict for {name}", "verdict"))
        heads.append(_head(asked, SCORE, "score", "of 100", f"points met for {name}, least to most", "number"))
    for column in shown:
        kind = "number" if column.numeric else "verdict" if column.name in VERDICT_COLUMNS else "text"
        unit = wording.unit_words(column.unit)
        heads.append(_head(asked, column.name, wording.formula(column.label), unit, column.meaning, kind))
    return heads


def _head(asked: Filter, name: str, label: str, unit: str, meaning: str, kind: str) -> dict[str, Any]:
    sorted_by = name and asked.sort == name
    turned = Filter(
        **{**vars(asked), "sort": name, "descending": not asked.descending if sorted_by else kind == "number"}
    )
    return {
        "label": label,
        "unit": unit,
        "meaning": meaning,
        "kind": kind,
        "numeric": kind == "number",
        "sorted": ("descending" if asked.descending else "ascending") if sorted_by else "",
        "address": address(turned.arguments()) if name else "",
    }


def _rows(
    rows: Sequence[Mapping[str, Any]],
    shown: Sequence[Column],
    asked: Filter,
    targets: Mapping[str, str],
    heads: Sequence[dict[str, Any]],
    doubted: Collection[int],
) -> list[dict[str, Any]]:
    blocks: list[Sequence[Any]] = [
        [norm_segments({mineral: row[f"norm_{mineral}"] for mineral in reading.NORM_ORDER}) for row in rows]
    ]
    if asked.target:
        blocks.append([_verdict_word(row["target_verdict"]) for row in rows])
        blocks.append([_score(row["target_score_min"], row["target_score_max"]) for row in rows])
    for head, column in zip(heads[-len(shown) :], shown, strict=True):
        cells = ["" if _names_a_control(row, column) else _cell(row[column.name], column, targets) for row in rows]
        head["short"] = max(map(len, cells), default=0) <= SHORT_WORDS
        blocks.append(numbers.aligned(cells) if column.numeric else cells)
    return [
        {
            "code": row["sample_code"],
            "control": row["kind"].replace("_", " ") if row["kind"] in CONTROL_KINDS else "",
            "is_stale": row["is_stale"],
            "is_doubted": row["sample_id"] in doubted,
            "cells": cells,
        }
        for row, cells in zip(rows, zip(*blocks, strict=True), strict=True)
    ]


def _names_a_control(row: Mapping[str, Any], column: Column) -> bool:
    """Whether a column would give a control sample the name or class of a rock, which it is not."""
    named = column.table == "derived" and not column.numeric and column.name not in OF_THE_ANALYSIS
    return named and row["kind"] in CONTROL_KINDS


def _verdict_word(stored: int | None) -> str:
    return "" if stored is None else VERDICTS[stored]


def _score(least: float | None, most: float | None) -> str:
    if least is None or most is None:
        return ""
    points = [f"{100 * share:.0f}" for share in (least, most)]
    return points[0] if most - least < 0.005 else "\N{EN DASH}".join(points)


def _cell(value: Any, column: Column, targets: Mapping[str, str]) -> str:
    if value is None:
        return ""
    if column.name in VERDICT_COLUMNS:
        return _verdict_word(value)
    if column.name == "best_target":
        return targets.get(value, value)
    if not column.numeric:
        return str(value).replace("_", " ") if column.table == "derived" or column.name == "sample_kind" else str(value)
    return numbers.derived(value, column.unit) if column.table == "derived" else numbers.reported(value)


@blueprint.get("/samples.csv")
def csv_file() -> Any:
    """The filtered set, all of it, as comma-separated values; raw numbers, names of the sample views at the head."""
    with registry_connection() as connection:
        columns, targets = offered_columns(connection), target_names(connection)
        asked = asked_filter(arguments_of_request(), columns, targets)
        problems = dict(asked.problems) | reading.names_not_found(connection, asked)
    if problems:
        return Response("\n".join(problems.values()) + "\n", 400, mimetype="text/plain")
    registry = current_app.extensions["registry"]
    shown = reading.shown_columns(asked, columns)
    lines = stream_with_context(_csv_lines(registry, asked, columns, shown))
    headers = {"Content-Disposition": 'attachment; filename="samples.csv"'}
    return Response(lines, mimetype="text/csv", headers=headers)


def _csv_lines(registry: Any, asked: Filter, columns: Columns, shown: Sequence[Column]) -> Iterator[str]:
    judged = ["verdict", "score_min", "score_max"] if asked.target else []
    buffer = io.StringIO()
    writer = csv.writer(buffer)
    writer.writerow(["sample_code", *judged, *(column.name for column in shown), "is_stale"])
    with query_only(registry) as connection:
        for count, row in enumerate(reading.every_sample(connection, asked, columns, shown)):
            cells = [row["sample_code"]]
            if asked.target:
                cells += [_verdict_word(row["target_verdict"]), row["target_score_min"], row["target_score_max"]]
            for column in shown:
                value = row[column.name]
                cells.append(_verdict_word(value) if column.name in VERDICT_COLUMNS else value)
            writer.writerow([*map(without_formula, cells), row["is_stale"]])
            if count % 500 == 499:
                yield buffer.getvalue()
                buffer.seek(0)
                buffer.truncate()
    yield buffer.getvalue()
