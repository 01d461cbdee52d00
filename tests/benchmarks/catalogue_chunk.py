"""Invented analyses for timing the catalogue: most columns reported, every route and many warnings taken."""

from __future__ import annotations

import numpy as np

from registry.petrology.analytes import CHOSEN_COLUMNS, CHOSEN_INDEX
from registry.petrology.digestion import DIGESTION_CODE
from registry.pipeline import Chunk, empty_chunk

#: Least and greatest of the majors, wt%; other oxides 0.01-0.3 wt%, elements 1-300 ppm.
RANGES = {
    "sio2_wt": (45.0, 75.0), "tio2_wt": (0.1, 3.0), "al2o3_wt": (11.0, 19.0), "mgo_wt": (0.3, 10.0),
    "cao_wt": (0.5, 12.0), "na2o_wt": (1.5, 5.0), "k2o_wt": (0.2, 5.0), "mno_wt": (0.02, 0.2),
    "p2o5_wt": (0.05, 0.6), "fe2o3t_reported_wt": (1.5, 13.0), "loi_wt": (0.2, 4.0),
}  # fmt: skip
NOT_REPORTED = ("feo_titrated_wt", "fe2o3_ferric_wt", "total_reported_wt")
LITHOLOGIES = ("granite", "basalt", "gabbro", "andesite lava", None)


def invented_chunk(rows: int) -> Chunk:
    """``rows`` random analyses by fusion, half of them of an intrusion, four fifths with a logged rock name."""
    rng = np.random.default_rng(3)
    chunk = empty_chunk(rows)
    for position, column in enumerate(CHOSEN_COLUMNS):
        low, high = RANGES.get(column, (0.01, 0.3) if column.endswith("_wt") else (1.0, 300.0))
        chunk.values[position] = rng.uniform(low, high, rows)
        chunk.digestions[position] = DIGESTION_CODE["fusion"]
    for column in NOT_REPORTED:
        chunk.values[CHOSEN_INDEX[column]], chunk.digestions[CHOSEN_INDEX[column]] = np.nan, 0
    has_intrusion = rng.random(rows) < 0.5
    chunk.context = {
        "lithology": np.array(LITHOLOGIES, dtype=object)[rng.integers(0, len(LITHOLOGIES), rows)],
        "has_intrusion": has_intrusion,
        "magnetic_susceptibility_si": rng.uniform(0.0, 0.01, rows),
        "intrusion_shape": np.where(has_intrusion, "slab", None).astype(object),
        "half_width_m": np.where(has_intrusion, 1500.0, np.nan),
        "depth_to_top_m": np.where(has_intrusion, 2000.0, np.nan),
        "emplacement_depth_m": np.where(has_intrusion, 5000.0, np.nan),
        "age_ma": np.where(has_intrusion, 0.3, np.nan),
    }
    return chunk
