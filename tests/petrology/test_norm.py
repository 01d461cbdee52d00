"""The CIPW norm: constructed assemblages, mass balance and the properties that any norm must have."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.norm import CHUNK_ROWS, NORM_COLUMNS, NORM_END_MEMBERS, NORM_MINERALS, cipw_norm
from tests.strategies import MAJORS, OXIDE_TOPS, analyses, analysis_tables, missing_cells

#: 23 analyses added up from a chosen normative assemblage; constructed, not published.
CONSTRUCTED = list(
    csv.DictReader((Path(__file__).parent / "data" / "norm_constructed.csv").read_text(encoding="utf-8").splitlines())
)
OXIDES = ("SiO2", "TiO2", "Al2O3", "Fe2O3", "FeO", "MnO", "MgO", "CaO", "Na2O", "K2O", "P2O5", "CO2")
#: The mineral columns of the file stand behind the total.
MINERALS = tuple(CONSTRUCTED[0])[tuple(CONSTRUCTED[0]).index("total") + 1 :]
#: Average basalt of Le Maitre 1976 (J. Petrology 17, 589), from memory.
BASALT = dict(zip(MAJORS, (49.20, 1.84, 15.74, 3.79, 7.13, 6.73, 9.47, 2.91, 1.10, 0.35), strict=True), mno_wt=0.20)


def _used(oxides: dict[str, np.ndarray]) -> np.ndarray:
    return np.asarray(sum(oxides.values()))


@pytest.mark.parametrize("row", CONSTRUCTED, ids=lambda row: row["label"])
def test_norm_constructed_assemblage_recovered(row: dict[str, str]) -> None:
    norm = cipw_norm({f"{oxide.lower()}_wt": float(row[oxide]) for oxide in OXIDES})

    for mineral in MINERALS:
        np.testing.assert_allclose(norm[f"{mineral.lower()}_wt"], float(row[mineral]), rtol=0, atol=1e-3)
    np.testing.assert_allclose(norm["norm_total_wt"], float(row["total"]), rtol=0, atol=1e-3)


def test_norm_columns_are_those_of_the_sheet() -> None:
    norm = cipw_norm(BASALT)

    assert tuple(norm) == NORM_COLUMNS
    assert len(NORM_MINERALS) == 30
    assert len(NORM_END_MEMBERS) == 7
    assert {array.dtype for array in norm.values()} == {np.dtype(np.float64)}


def test_norm_scalars_give_scalar_shape() -> None:
    assert cipw_norm(BASALT)["or_wt"].shape == ()


def test_norm_scalar_beside_array_broadcasts() -> None:
    oxides = BASALT | {"sio2_wt": np.array([[45.0, 49.2], [52.0, 60.0]])}
    norm = cipw_norm(oxides)

    assert norm["or_wt"].shape == (2, 2)
    np.testing.assert_array_equal(norm["ol_wt"][0, 1], cipw_norm(BASALT)["ol_wt"])


def test_norm_without_rows_gives_no_rows() -> None:
    assert cipw_norm({"sio2_wt": np.empty(0)})["q_wt"].shape == (0,)


def test_norm_of_nothing_is_zero() -> None:
    norm = cipw_norm({"sio2_wt": 0.0})

    assert all(float(array) == 0.0 for array in norm.values())


def test_norm_other_columns_of_a_composition_are_left_aside() -> None:
    with_others = cipw_norm(BASALT | {"loi_wt": 2.0, "zr_ppm": 150.0, "feot_wt": 10.54})

    np.testing.assert_array_equal(with_others["norm_total_wt"], cipw_norm(BASALT)["norm_total_wt"])


@pytest.mark.parametrize(
    ("oxides", "message"),
    [
        ({"SiO2": 50.0}, r"knows no oxides \['SiO2'\]; expected names such as \['sio2_wt'"),
        ({"sio2_wt": 50.0, "feot_wt": 10.0}, r"found only \['feot_wt'\], expected 'feo_wt' and 'fe2o3_wt'"),
        ({"sio2_wt": np.ones(3), "mgo_wt": np.ones(2)}, r"one shape or broadcast to one; found .*\(3,\).*\(2,\)"),
    ],
)
def test_norm_wrong_input_is_told(oxides: dict, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        cipw_norm(oxides)


@pytest.mark.parametrize("bad", [np.nan, np.inf, -0.1])
@pytest.mark.parametrize("column", ["sio2_wt", "p2o5_wt", "mno_wt"])
def test_norm_impossible_value_gives_nan_in_that_row_only(bad: float, column: str) -> None:
    table = {name: np.full(3, value) for name, value in BASALT.items()}
    table[column][1] = bad
    norm = cipw_norm(table)

    for name, values in norm.items():
        assert np.isnan(values[1]), name
        np.testing.assert_array_equal(values[[0, 2]], cipw_norm(BASALT)[name])


def test_norm_over_several_chunks_equals_row_by_row() -> None:
    rng = np.random.default_rng(5)
    rows = 2 * CHUNK_ROWS + 7
    table = {name: rng.uniform(0.0, top, rows) for name, top in OXIDE_TOPS.items()}
    norm = cipw_norm(table)

    for row in (0, CHUNK_ROWS - 1, CHUNK_ROWS, rows - 1):
        alone = cipw_norm({name: values[row] for name, values in table.items()})
        for name in NORM_COLUMNS:
            np.testing.assert_array_equal(norm[name][row], alone[name])


def test_norm_phosphorus_beyond_calcium_leaves_anorthite_at_zero() -> None:
    norm = cipw_norm(BASALT | {"cao_wt": 0.1, "p2o5_wt": 2.0})

    assert float(norm["an_wt"]) == 0.0
    assert float(norm["norm_residual_wt"]) > 1.5


@given(analysis_tables())
def test_norm_no_mineral_is_negative(table: dict[str, np.ndarray]) -> None:
    norm = cipw_norm(table)

    for name in (*NORM_MINERALS, *NORM_END_MEMBERS, "norm_total_wt"):
        assert (norm[name] >= 0.0).all(), name


@given(analysis_tables())
def test_norm_minerals_and_residual_sum_to_the_oxides(table: dict[str, np.ndarray]) -> None:
    norm = cipw_norm(table)

    np.testing.assert_allclose(sum(norm[name] for name in NORM_MINERALS), norm["norm_total_wt"], rtol=1e-12, atol=1e-9)
    np.testing.assert_allclose(norm["norm_total_wt"] + norm["norm_residual_wt"], _used(table), rtol=1e-12, atol=1e-9)


@given(analysis_tables())
def test_norm_end_members_sum_to_their_minerals(table: dict[str, np.ndarray]) -> None:
    norm = cipw_norm(table)

    for mineral, parts in (("di", ("wo", "en", "fs")), ("hy", ("en", "fs")), ("ol", ("fo", "fa"))):
        np.testing.assert_allclose(
            sum(norm[f"{mineral}_{part}_wt"] for part in parts), norm[f"{mineral}_wt"], rtol=1e-12
        )


@given(analysis_tables())
def test_norm_incompatible_minerals_never_meet(table: dict[str, np.ndarray]) -> None:
    """Quartz with undersaturated minerals, corundum with diopside or acmite: excluded by the sequence [kelsey1965]."""
    norm = cipw_norm(table)

    for first, others in (
        ("q", ("ol", "ne", "lc", "kp", "pf", "cs")),
        ("c", ("di", "wo", "ac", "ns", "ks", "tn")),
        ("hy", ("wo", "ne", "lc", "kp", "cs")),
        ("ns", ("an", "mt", "hm")),
        ("hm", ("di_fs", "hy_fs", "ol_fa")),
    ):
        for other in others:
            assert ((norm[f"{first}_wt"] < 1e-9) | (norm[f"{other}_wt"] < 1e-9)).all(), (first, other)


@given(analysis_tables())
def test_norm_one_row_equals_row_of_many(table: dict[str, np.ndarray]) -> None:
    norm = cipw_norm(table)
    alone = cipw_norm({name: values[1] for name, values in table.items()})

    for name in NORM_COLUMNS:
        np.testing.assert_array_equal(norm[name][1], alone[name])


@given(analysis_tables(), st.randoms(use_true_random=False))
def test_norm_shuffled_rows_shuffle_the_norm(table: dict[str, np.ndarray], random) -> None:
    order = list(range(len(table["sio2_wt"])))
    random.shuffle(order)
    norm, shuffled = cipw_norm(table), cipw_norm({name: values[order] for name, values in table.items()})

    for name in NORM_COLUMNS:
        np.testing.assert_array_equal(norm[name][order], shuffled[name])


@given(analyses(), st.floats(0.1, 10.0))
def test_norm_scales_with_the_analysis(analysis: dict[str, float], factor: float) -> None:
    norm = cipw_norm(analysis)
    scaled = cipw_norm({name: value * factor for name, value in analysis.items()})

    for name in NORM_COLUMNS:
        np.testing.assert_allclose(scaled[name], factor * norm[name], rtol=1e-9, atol=1e-9)


@given(analysis_tables(MAJORS), missing_cells())
def test_norm_missing_value_stays_in_its_row(table: dict[str, np.ndarray], column: str) -> None:
    whole = cipw_norm(table)
    table = {name: values.copy() for name, values in table.items()}
    table[column][0] = np.nan
    norm = cipw_norm(table)

    for name in NORM_COLUMNS:
        assert np.isnan(norm[name][0])
        np.testing.assert_array_equal(norm[name][1:], whole[name][1:])


@given(analyses(MAJORS))
def test_norm_absent_oxide_equals_zero(analysis: dict[str, float]) -> None:
    others = {name: 0.0 for name in OXIDE_TOPS if name not in analysis}
    norm, with_zeros = cipw_norm(analysis), cipw_norm(analysis | others)

    for name in NORM_COLUMNS:
        np.testing.assert_allclose(with_zeros[name], norm[name], rtol=1e-12, atol=1e-12)
