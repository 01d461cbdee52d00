"""What the laboratory wrote, letter by letter: re-read from the stored file of the certificate."""

from __future__ import annotations

import tempfile
from collections.abc import Callable, Collection
from pathlib import Path
from typing import Any

from registry.intake import Reading
from registry.intake.arrangement import WIDE, arrange, tell_arrangement
from registry.intake.findings import Findings
from registry.intake.recipes import Recipe
from registry.intake.refused import source_of
from registry.store import batch_files
from registry.store.reading import sample as sample_reading

_CELL = ("position", "header", "analyte", "value", "unit", "qualifier")
_LINE = ("batch_id", "batch", "state", "file_name", "file_part", "line_no", "reading", "file_batch_id", "file_batch")


def reported_lines(connection: Any, sample_id: int) -> list[dict[str, Any]]:
    """One dict a line of a certificate that names the sample: ``batch state file_name file_part has_file laid_out
    line_no cells``.

    ``laid_out`` is ``wide`` (samples as lines), ``long`` (results as lines; ``line_no`` is that of the first) or
    ``turned`` (samples as columns; ``line_no`` counts columns). ``cells`` are dicts ``header line_no text analyte value
    unit qualifier``, in the order of the file's columns; ``text`` is None where the file is not kept.
    """
    lines: dict[tuple[int, int], dict[str, Any]] = {}
    for row in sample_reading.reported_places(connection, sample_id):
        line = lines.setdefault(
            (row["batch_id"], row["line_no"]), {key: row[key] for key in _LINE} | {"laid_out": WIDE, "cells": []}
        )
        line["cells"].append({key: row[key] for key in _CELL} | {"line_no": row["line_no"], "text": None})
    for batch_id in {key[0] for key in lines}:
        here = [line for key, line in lines.items() if key[0] == batch_id]
        with tempfile.TemporaryDirectory() as folder:
            file = batch_files.laid_out(connection, here[0]["file_batch_id"], Path(folder))
            if file is not None:
                _fill(here, file)
        for line in here:
            line["has_file"] = file is not None
    return list(lines.values())


def _fill(lines: list[dict[str, Any]], file: bytes | Path) -> None:
    """Put the texts, and how the table lies, beside the cells of the lines of one batch."""
    made_by = lines[0]["reading"]
    recipe = None if made_by is None else Recipe.from_json(made_by)
    source = source_of(file, Reading("stored file", part=lines[0]["file_part"], recipe=recipe))
    laid_out = tell_arrangement(source.preview()[0]) or WIDE
    findings = Findings("stored file", 0)
    if laid_out != WIDE:
        arranged = arrange(source, 0, False, findings, [], recipe)
        source = source if arranged is None else arranged.source
    texts = _rows(source.chunks, {line["line_no"] for line in lines})
    for line in lines:
        line["laid_out"] = laid_out
        row = texts.get(line["line_no"], [])
        for cell in line["cells"]:
            if findings.place is not None:
                cell["line_no"] = findings.place(line["line_no"], cell["header"])[0]
            cell["text"] = row[cell["position"]].strip() if cell["position"] < len(row) else None


def _rows(chunks: Callable[[], Any], wanted: Collection[int]) -> dict[int, list[str]]:
    """The cells of these lines."""
    found: dict[int, list[str]] = {}
    for chunk in chunks():
        numbers = chunk.lines
        if len(numbers) and any(numbers[0] <= line <= numbers[-1] for line in wanted):
            found.update({line: row for line, row in zip(numbers.tolist(), chunk.rows, strict=True) if line in wanted})
        if len(found) == len(wanted):
            break
    return found
