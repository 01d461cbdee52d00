"""What the laboratory wrote, letter by letter: re-read from the stored file of the certificate."""

from __future__ import annotations

import tempfile
from collections.abc import Iterable
from pathlib import Path
from typing import Any

from registry.intake import Reading
from registry.intake.refused import source_of
from registry.store import batch_files
from registry.store.reading import sample as sample_reading


def reported_lines(connection: Any, sample_id: int) -> list[dict[str, Any]]:
    """One dict a line of a certificate that names the sample: ``batch state file_name has_file line_no cells``.

    ``cells`` are dicts ``header text analyte value unit qualifier``, in the order of the file's columns; ``text`` is
    None where the file is not kept or its table does not lie as rows of samples.
    """
    lines: dict[tuple[int, int], dict[str, Any]] = {}
    for row in sample_reading.reported_places(connection, sample_id):
        line = lines.setdefault(
            (row["batch_id"], row["line_no"]),
            {key: row[key] for key in ("batch_id", "batch", "state", "file_name", "line_no")} | {"cells": []},
        )
        line["cells"].append({key: row[key] for key in ("position", "header", "analyte", "value", "unit", "qualifier")})
    for batch_id in {key[0] for key in lines}:
        wanted = [line_no for batch, line_no in lines if batch == batch_id]
        with tempfile.TemporaryDirectory() as folder:
            file = batch_files.laid_out(connection, batch_id, Path(folder))
            texts = {} if file is None else _texts(file, wanted)
        for line_no in wanted:
            lines[batch_id, line_no]["has_file"] = file is not None
            row_texts = texts.get(line_no, [])
            for cell in lines[batch_id, line_no]["cells"]:
                place = cell["position"]
                cell["text"] = row_texts[place].strip() if place < len(row_texts) else None
    return list(lines.values())


def _texts(file: bytes | Path, line_numbers: Iterable[int]) -> dict[int, list[str]]:
    """The cells of file lines as they stand in the stored file."""
    wanted, found = set(line_numbers), {}
    for chunk in source_of(file, Reading("stored file")).chunks():
        numbers = chunk.lines
        if len(numbers) and wanted & set(range(int(numbers[0]), int(numbers[-1]) + 1)):
            found.update({line: row for line, row in zip(numbers.tolist(), chunk.rows, strict=True) if line in wanted})
        if len(found) == len(wanted):
            break
    return found
