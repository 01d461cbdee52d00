"""Hypothesis strategies: invented analyses, inside and far outside what rocks have.

How many examples a generated test gets is set in ``tests/conftest.py``.
"""

from __future__ import annotations

import numpy as np
from hypothesis import strategies as st

from registry.petrology.norm import NORM_OXIDES

#: Upper ends of the ranges of igneous rocks and beyond, wt% (common practice, no source).
OXIDE_TOPS = {
    "sio2_wt": 80.0, "tio2_wt": 8.0, "al2o3_wt": 30.0, "fe2o3_wt": 15.0, "feo_wt": 15.0, "mno_wt": 0.6,
    "mgo_wt": 48.0, "cao_wt": 30.0, "na2o_wt": 15.0, "k2o_wt": 15.0, "p2o5_wt": 4.0, "cr2o3_wt": 1.0, "nio_wt": 0.5,
    "zro2_wt": 0.5, "v2o3_wt": 0.2, "bao_wt": 0.5, "sro_wt": 0.5, "li2o_wt": 1.0, "co2_wt": 6.0, "s_wt": 2.0,
    "f_wt": 2.0, "cl_wt": 2.0, "so3_wt": 2.0,
}  # fmt: skip
#: Columns that every analysis holds.
MAJORS = ("sio2_wt", "tio2_wt", "al2o3_wt", "fe2o3_wt", "feo_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt", "p2o5_wt")
assert set(OXIDE_TOPS) == set(NORM_OXIDES)


def amounts(top: float) -> st.SearchStrategy[float]:
    """Zero, or an amount between 1e-6 and ``top``: no laboratory reports less."""
    return st.just(0.0) | st.floats(1e-6, top, allow_nan=False)


def analyses(names: tuple[str, ...] = tuple(OXIDE_TOPS)) -> st.SearchStrategy[dict[str, float]]:
    """One analysis as a mapping of oxides in wt%; each oxide is independent, so most are no rocks."""
    return st.fixed_dictionaries({name: amounts(OXIDE_TOPS[name]) for name in names})


@st.composite
def analysis_tables(draw: st.DrawFn, names: tuple[str, ...] = tuple(OXIDE_TOPS)) -> dict[str, np.ndarray]:
    """Two to twelve analyses as a mapping of arrays, shape (n,)."""
    rows = draw(st.lists(analyses(names), min_size=2, max_size=12))
    return {name: np.array([row[name] for row in rows]) for name in names}


def missing_cells(names: tuple[str, ...] = MAJORS) -> st.SearchStrategy[str]:
    """The name of one oxide whose value is to go missing."""
    return st.sampled_from(names)
