"""The norm of 2,063 real lava analyses (Ueki et al. 2022, Front. Earth Sci. 10; GPL-3.0, read where it lies)."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

from registry.petrology.constants import FEO_FROM_FE2O3
from registry.petrology.iron import split_le_maitre
from registry.petrology.norm import NORM_END_MEMBERS, NORM_MINERALS, cipw_norm

FILE = Path(__file__).resolve().parents[3] / "shared" / "data" / "igneous_analyses" / "Uekietal_SMR_input.csv"
pytestmark = pytest.mark.skipif(not FILE.exists(), reason=f"the open analyses are not at {FILE}; they are not shipped")


@pytest.fixture(scope="module")
def analyses() -> dict[str, np.ndarray]:
    with FILE.open(encoding="utf-8", newline="") as lines:
        rows = list(csv.DictReader(lines))
    names = ("SiO2", "TiO2", "Al2O3", "Fe2O3", "MgO", "CaO", "Na2O", "K2O")
    oxides = {f"{name.lower()}_wt": np.array([float(row[name]) for row in rows]) for name in names}
    total_iron = oxides.pop("fe2o3_wt")
    split = split_le_maitre(
        FEO_FROM_FE2O3 * total_iron, oxides["sio2_wt"], oxides["na2o_wt"], oxides["k2o_wt"], np.zeros(len(rows), bool)
    )
    return oxides | split


def test_norm_of_real_analyses_closes(analyses: dict[str, np.ndarray]) -> None:
    norm = cipw_norm(analyses)

    assert norm["q_wt"].shape == (2063,)
    assert not np.isnan(norm["q_wt"]).any()
    np.testing.assert_allclose(norm["norm_total_wt"], sum(analyses.values()), rtol=0, atol=0.01)
    assert np.abs(norm["norm_residual_wt"]).max() < 0.01


def test_norm_of_real_analyses_has_no_negative_mineral(analyses: dict[str, np.ndarray]) -> None:
    norm = cipw_norm(analyses)

    assert min(float(norm[name].min()) for name in (*NORM_MINERALS, *NORM_END_MEMBERS)) >= 0.0


def test_norm_of_real_analyses_uses_many_branches(analyses: dict[str, np.ndarray]) -> None:
    norm = cipw_norm(analyses)

    for name in ("q", "c", "ne", "lc", "ol", "hy", "di", "wo"):
        assert (norm[f"{name}_wt"] > 0.01).any(), name
