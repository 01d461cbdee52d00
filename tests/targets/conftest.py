"""The 35 written compositions as a chunk of the pipeline.

Status of data/reference_compositions.csv: typical, from memory; invented numbers within published ranges. The expected
verdicts are common practice; rocks and rules have the same author, so this is a check of consistency, no validation.
"""

from __future__ import annotations

import csv
from collections.abc import Iterable
from pathlib import Path

import numpy as np
import pytest

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.digestion import DIGESTION_CODE
from registry.pipeline import Chunk, empty_chunk

FILE = Path(__file__).parent / "data" / "reference_compositions.csv"
_NUMBERS = (
    "half_width_m", "depth_to_top_m", "age_ma", "age_sigma_ma", "heat_flow_mw_m2", "magnetic_susceptibility_si",
)  # fmt: skip
_ALTERATIONS = ("greisen", "argillic", "potassic")
#: Invented, as a team would order them: majors by XRF, traces by fusion, what fusion cannot carry by other means.
_DIGESTION_OF = {
    "feo_titrated_wt": "titration",
    "s_wt": "combustion",
    "li_ppm": "four_acid",
    "be_ppm": "four_acid",
    "pd_ppm": "fire_assay",
    "pt_ppm": "fire_assay",
}


def _rows() -> list[dict[str, str]]:
    with FILE.open(newline="", encoding="utf-8") as handle:
        return list(csv.DictReader(handle))


def digestion_of(column: str) -> str:
    return _DIGESTION_OF.get(column, "xrf" if column.endswith("_wt") and column != "f_wt" else "fusion")


def chunk_of(table: list[dict[str, str]]) -> Chunk:
    chunk = empty_chunk(len(table))
    for name in table[0]:
        column = "fe2o3t_reported_wt" if name == "fe2o3t_wt" else name
        if column not in CHOSEN_INDEX:
            continue
        position = CHOSEN_INDEX[column]
        values = np.array([float(row[name]) if row[name] else np.nan for row in table])
        chunk.values[position] = values
        chunk.digestions[position] = np.where(np.isnan(values), 0, DIGESTION_CODE[digestion_of(column)])
    chunk.context = _context(table)
    return chunk


def _context(table: list[dict[str, str]]) -> dict[str, np.ndarray]:
    def numbers(name: str) -> np.ndarray:
        return np.array([float(row[name]) if row[name] else np.nan for row in table])

    def texts(values: Iterable[str | None]) -> np.ndarray:
        return np.array([value or None for value in values], dtype=object)

    context = {name: numbers(name) for name in _NUMBERS}
    context["has_intrusion"] = np.array([bool(row["shape"]) for row in table])
    context["body_mapped_or_cored"] = np.array([row["body_mapped_or_cored"] == "1.0" for row in table])
    context["intrusion_shape"] = texts(row["shape"] for row in table)
    context["texture"] = texts(row["texture"] for row in table)
    context["lithology"] = texts("plutonic rock" if row["plutonic"] == "1" else "lava" for row in table)
    context["alteration"] = texts(
        next((word for word in _ALTERATIONS if word in row["label"].lower()), None) for row in table
    )
    context["sample_kind"] = texts("core" for _ in table)
    return context


@pytest.fixture(scope="session")
def reference_table() -> list[dict[str, str]]:
    return _rows()


@pytest.fixture
def reference_chunk(reference_table: list[dict[str, str]]) -> Chunk:
    return chunk_of(reference_table)


@pytest.fixture
def make_chunk():
    """A chunk from rows of the reference table, some of them changed."""
    return chunk_of
