"""The Barth-Niggli norm; printed values stand in ``published/norm.csv``."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.norm import CHUNK_ROWS, NORM_MINERALS, cipw_norm
from registry.petrology.norm_cation import CATION_COLUMNS, CATIONS, cation_norm
from tests.strategies import MAJORS, OXIDE_TOPS, analyses, analysis_tables

MINERALS = tuple(name.removesuffix("_wt") + "_cat" for name in NORM_MINERALS)
#: Molar masses (IUPAC 2021, five figures, g/mol) as counted in the sequence: or, ab, ne ... per alkali oxide.
MASSES = {
    "q": 60.083, "c": 101.961, "z": 183.305, "or": 556.654, "ab": 524.438, "an": 278.204, "lc": 436.488, "ne": 284.106,
    "kp": 316.322, "ac": 461.998, "ns": 122.062, "ks": 154.278, "wo": 116.160, "cs": 172.237, "mt": 231.531,
    "hm": 159.687, "il": 151.709, "tn": 196.025, "pf": 135.942, "ru": 79.865, "ap": 328.866, "hy_en": 100.387,
    "hy_fs": 131.927, "ol_fo": 140.691, "ol_fa": 203.771, "di_wo": 116.160, "di_en": 100.387, "di_fs": 131.927,
}  # fmt: skip


@given(analysis_tables())
def test_cation_norm_sums_to_hundred_without_negative_mineral(table: dict[str, np.ndarray]) -> None:
    norm = cation_norm(table)
    some = ~np.isnan(norm["q_cat"])

    assert tuple(norm) == CATION_COLUMNS
    np.testing.assert_allclose(np.asarray(sum(norm[name] for name in MINERALS))[some], 100.0, rtol=1e-9)
    for name in CATION_COLUMNS:
        assert (norm[name][some] >= 0.0).all(), name


@given(analyses(MAJORS))
def test_cation_norm_is_the_weight_norm_divided_by_masses(analysis: dict[str, float]) -> None:
    """Without Mn, Ni, Sr, Ba, Li and V every mineral has its own fixed mass, so the weight norm gives the moles."""
    weight, cation = cipw_norm(analysis), cation_norm(analysis)
    per_mole = CATIONS | {name: 2.0 for name in ("hy_en", "hy_fs", "di_wo", "di_en", "di_fs")}
    per_mole |= {"ol_fo": 3.0, "ol_fa": 3.0}
    cations = {name: float(weight[f"{name}_wt"]) / mass * per_mole[name] for name, mass in MASSES.items()}
    total = sum(cations.values())

    if total < 1e-3:
        return
    for name, amount in cations.items():
        np.testing.assert_allclose(cation[f"{name}_cat"], 100.0 * amount / total, rtol=1e-6, atol=1e-6)


@given(analyses(), st.floats(0.1, 10.0))
def test_cation_norm_is_blind_to_scale(analysis: dict[str, float], factor: float) -> None:
    norm = cation_norm(analysis)
    scaled = cation_norm({name: value * factor for name, value in analysis.items()})

    for name in CATION_COLUMNS:
        np.testing.assert_allclose(scaled[name], norm[name], rtol=1e-9, atol=1e-9)


def test_cation_norm_over_chunks_equals_row_by_row_and_keeps_missing_in_its_row() -> None:
    rng = np.random.default_rng(11)
    rows = CHUNK_ROWS + 3
    table = {name: rng.uniform(0.0, top, rows) for name, top in OXIDE_TOPS.items()}
    table["mgo_wt"][5], table["mgo_wt"][6] = np.nan, -1.0
    norm = cation_norm(table)

    for row in (0, 4, 7, CHUNK_ROWS - 1, CHUNK_ROWS, rows - 1):
        alone = cation_norm({name: values[row] for name, values in table.items()})
        for name in CATION_COLUMNS:
            np.testing.assert_array_equal(norm[name][row], alone[name])
    for name in CATION_COLUMNS:
        assert np.isnan(norm[name][5:7]).all()


def test_cation_norm_of_nothing_is_missing() -> None:
    assert np.isnan(cation_norm({"sio2_wt": 0.0})["q_cat"])
