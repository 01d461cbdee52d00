"""The map of the samples under the filter sentence: sites, traces of holes, samples, what is left out and why."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from flask import Blueprint, Response, redirect, render_template, url_for

from registry.map_files import map_file
from registry.store.reading import samples as samples_reading
from registry.store.reading.columns import Columns
from registry.store.reading.filters import Filter
from registry.store.reading.targets import target_names
from web.diagram_request import ENDS, by_choices, by_words, checked
from web.map_request import OWN, WHOLE, MapChoice
from web.map_sheet import drawn_map
from web.reading import offered_columns, registry_connection
from web.sentence import address, arguments_of_request, asked_filter, sentence_context, unsettled

blueprint = Blueprint("map", __name__)
MOST_PARTS = 12
#: What the files of the map hold beside the columns that the filter speaks of.
FILE_COLUMNS = ("best_verdict", "best_target", "site_code", "from_m", "to_m", "intrusion", "lithology", "easting",
                "northing", "epsg", "longitude", "latitude")  # fmt: skip
FILES = {"geojson": "application/geo+json", "gpkg": "application/geopackage+sqlite3"}


@blueprint.get("/map")
def page() -> Any:
    arguments = arguments_of_request()
    with registry_connection() as connection:
        columns, targets = offered_columns(connection), target_names(connection)
        asked = asked_filter(arguments, columns, targets, OWN)
        choice = MapChoice(arguments, asked, targets, columns)
        asked = checked(connection, asked, choice.problems)
        problems = asked.problems
        if not problems and unsettled(arguments):
            return redirect(address([*asked.arguments(), *choice.pairs()], "map.page"))
        choices = samples_reading.choices(connection)
        drawn = {} if problems else drawn_map(connection, asked, choice, choices.get(choice.by, ()))
    shown_by = choice.number.label if choice.number else by_words(choice, targets)
    body = render_template(
        "map.html",
        section="Map",
        choices=choices,
        choice=choice,
        page={"total": drawn.get("total", 0)},
        by_words=shown_by,
        by_choices=by_choices(targets).items(),
        own_problems=[s for name, s in problems.items() if name in ("by", "number", *ENDS)],
        kept=[(name, value) for name, value in asked.arguments() if name in ("sort", "columns")],
        parts=_parts(asked, choice, choices),
        files=_files(asked, choice, columns),
        list_address=address(asked.arguments()),
        plain_address=url_for("map.page"),
        **sentence_context(asked, arguments, columns, targets),
        **drawn,
    )  # fmt: skip
    return body, 400 if problems else 200


@blueprint.get("/map.geojson")
def geojson_file() -> Any:
    """The samples of the filter that have a position, as GeoJSON."""
    return _file("geojson")


@blueprint.get("/map.gpkg")
def gpkg_file() -> Any:
    """The samples of the filter that have a position, as a GeoPackage."""
    return _file("gpkg")


def _file(kind: str) -> Any:
    with registry_connection() as connection:
        columns, targets = offered_columns(connection), target_names(connection)
        asked = asked_filter(arguments_of_request(), columns, targets)
        asked = checked(connection, asked, {})
        if asked.problems:
            return Response("\n".join(asked.problems.values()) + "\n", 400, mimetype="text/plain")
        content = map_file(connection, asked, columns, kind)
    headers = {"Content-Disposition": f'attachment; filename="samples.{kind}"'}
    return Response(content, mimetype=FILES[kind], headers=headers)


def _files(asked: Filter, choice: MapChoice, columns: Columns) -> list[tuple[str, str]]:
    """(words, address) of the files of these samples."""
    names = [name for name in FILE_COLUMNS if name in columns]
    names += [choice.number.name] if choice.number and choice.number.name not in names else []
    pairs = [pair for pair in asked.arguments() if pair[0] != "columns"] + [("columns", ",".join(names))]
    return [
        ("GeoJSON", address(pairs, "map.geojson_file")),
        ("GeoPackage", address(pairs, "map.gpkg_file")),
        ("CSV, also those without a position", address(pairs, "samples.csv_file")),
    ]


def _parts(asked: Filter, choice: MapChoice, choices: Mapping[str, Sequence[str]]) -> list[dict[str, Any]]:
    """Links that show one area or one intrusion alone, by what they are."""
    found = []
    for name, words in (("area", "Areas"), ("intrusion", "Intrusions")):
        values = choices[name]
        if not 1 < len(values) <= MOST_PARTS:
            continue
        links = []
        for value in values:
            narrower = Filter(**{**vars(asked), name: (value,), "problems": {}})
            where = address([*narrower.arguments(), *choice.pairs(**WHOLE)], "map.page")
            links.append({"words": value, "address": where, "current": getattr(asked, name) == (value,)})
        every = Filter(**{**vars(asked), name: (), "problems": {}})
        links.append({"words": "all", "address": address([*every.arguments(), *choice.pairs(**WHOLE)], "map.page"),
                      "current": not getattr(asked, name)})  # fmt: skip
        found.append({"words": words, "links": links})
    return found
