"""The samples of a filter as a file for geographic information systems, as ``plutonbook export`` writes it."""

from __future__ import annotations

import tempfile
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from sqlalchemy import Connection

from registry.export_maps import write_geojson, write_gpkg
from registry.store.reading.columns import Columns
from registry.store.reading.filters import VERDICTS, Filter
from registry.store.reading.samples import every_sample, shown_columns

ROWS_AT_A_TIME = 2000


def map_file(connection: Connection, asked: Filter, columns: Columns, kind: str) -> bytes:
    """The samples of the filter that have a position, as ``geojson`` (RFC 7946) or ``gpkg`` (OGC GeoPackage 1.3).

    Points in longitude and latitude with the columns of the filter, ``sample_code`` first and, with a target, the
    verdict for it and its score.
    """
    shown = shown_columns(asked, columns)
    judged = ["verdict", "score_min", "score_max"] if asked.target else []
    names = ["sample_code", *judged, *(column.name for column in shown), "is_stale"]
    read = [*shown, *(columns[name] for name in ("longitude", "latitude") if columns[name] not in shown)]

    def placed() -> Iterator[list[Any]]:
        part: list[Any] = []
        for row in every_sample(connection, asked, columns, read):
            if row["longitude"] is None or row["latitude"] is None:
                continue
            cells = [row["sample_code"]]
            if asked.target:
                cells += [_word(row["target_verdict"]), row["target_score_min"], row["target_score_max"]]
            cells += [
                _word(row[column.name]) if column.name == "best_verdict" else row[column.name] for column in shown
            ]
            part.append((row["longitude"], row["latitude"], [*cells, row["is_stale"]]))
            if len(part) == ROWS_AT_A_TIME:
                yield part
                part = []
        yield part

    with tempfile.TemporaryDirectory() as folder:
        target = Path(folder) / f"samples.{kind}"
        if kind == "geojson":
            write_geojson(names, placed(), target)
        else:
            write_gpkg("samples", names, placed(), target)
        return target.read_bytes()


def _word(stored: int | None) -> str | None:
    return None if stored is None else VERDICTS[stored]
