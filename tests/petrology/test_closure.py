"""The sum of an analysis and the closing to 100; printed values stand in ``published/closure.csv``."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.closure import (
    CLOSED_OXIDES,
    MINOR_OXIDES,
    NEEDED_OXIDES,
    UNREPORTED_AS_ZERO,
    close_volatile_free,
    sum_of_oxides,
    trace_oxides,
    volatile_free_name,
)
from tests.strategies import analysis_tables

#: Average basalt of Le Maitre 1976 (J. Petrology 17, 589), from memory.
BASALT = {
    "sio2_wt": 49.20, "tio2_wt": 1.84, "al2o3_wt": 15.74, "fe2o3_wt": 3.79, "feo_wt": 7.13, "mno_wt": 0.20,
    "mgo_wt": 6.73, "cao_wt": 9.47, "na2o_wt": 2.91, "k2o_wt": 1.10, "p2o5_wt": 0.35,
}  # fmt: skip
CLOSED = tuple(volatile_free_name(name) for name in CLOSED_OXIDES)


def _sum(closed: dict[str, np.ndarray]) -> np.ndarray:
    return np.asarray(sum(closed[name] for name in CLOSED))


@given(analysis_tables(CLOSED_OXIDES))
def test_closure_sums_to_hundred_and_keeps_ratios(table: dict[str, np.ndarray]) -> None:
    total = sum(table.values())
    closed = close_volatile_free(table)

    np.testing.assert_allclose(_sum(closed)[total > 0.0], 100.0, rtol=1e-12)
    assert np.isnan(_sum(closed)[total == 0.0]).all()
    for name in CLOSED_OXIDES:
        np.testing.assert_allclose(
            (closed[volatile_free_name(name)] * total)[total > 0], (100.0 * table[name])[total > 0]
        )


@given(analysis_tables(CLOSED_OXIDES), st.floats(0.1, 10.0))
def test_closure_is_idempotent_and_blind_to_scale(table: dict[str, np.ndarray], factor: float) -> None:
    closed = close_volatile_free(table)
    again = close_volatile_free({name: closed[volatile_free_name(name)] * factor for name in CLOSED_OXIDES})

    for name in CLOSED:
        np.testing.assert_allclose(again[name], closed[name], rtol=1e-12)


@pytest.mark.parametrize("name", [*NEEDED_OXIDES, "fe2o3_wt", "feo_wt"])
def test_closure_without_a_needed_oxide_is_missing_in_that_row_only(name: str) -> None:
    table = {key: np.full(2, value) for key, value in BASALT.items()}
    table[name][1] = np.nan
    closed = close_volatile_free(table)

    for column, values in closed.items():
        assert np.isnan(values[1])
        np.testing.assert_array_equal(values[0], close_volatile_free(BASALT)[column])


@pytest.mark.parametrize("name", UNREPORTED_AS_ZERO)
def test_closure_counts_an_unreported_minor_oxide_as_zero(name: str) -> None:
    closed = close_volatile_free({key: value for key, value in BASALT.items() if key != name})

    assert closed[volatile_free_name(name)] == 0.0
    assert float(_sum(closed)) == pytest.approx(100.0, abs=1e-12)


def test_closure_total_iron_is_beside_the_sum() -> None:
    closed = close_volatile_free(BASALT)

    assert float(closed["feot_vf_wt"]) == pytest.approx(100.0 * 10.540 / 98.46, abs=1e-3)
    assert float(_sum(closed)) == pytest.approx(100.0, abs=1e-12)


def test_trace_oxides_ppm_goes_before_the_oxide_column() -> None:
    """Cr 300 ppm is 0.0438 wt% Cr2O3 (atomic weights, recomputed)."""
    found = trace_oxides({"cr_ppm": np.array([300.0, np.nan, np.nan]), "cr2o3_wt": np.array([0.5, 0.5, np.nan])})

    np.testing.assert_allclose(found["cr2o3_wt"], [0.0438, 0.5, 0.0], rtol=0, atol=5e-5)
    np.testing.assert_array_equal(found["nio_wt"], 0.0)


def test_trace_oxides_enter_the_closed_sum() -> None:
    with_traces = close_volatile_free(BASALT | {"cr_ppm": 3000.0, "zr_ppm": 400.0, "nio_wt": 0.2})

    assert float(with_traces["nio_vf_wt"]) == pytest.approx(0.2 * 100.0 / (98.46 + 0.2 + 0.4385 + 0.0540), abs=1e-4)
    assert float(_sum(with_traces)) == pytest.approx(100.0, abs=1e-12)


@pytest.mark.parametrize("name", NEEDED_OXIDES)
def test_sum_without_a_needed_oxide_is_missing(name: str) -> None:
    assert np.isnan(sum_of_oxides({key: value for key, value in BASALT.items() if key != name}, 11.714))


def test_sum_without_total_iron_is_missing() -> None:
    assert np.isnan(sum_of_oxides(BASALT, np.nan))


def test_sum_adds_minor_oxides_and_loss_on_ignition_where_reported() -> None:
    minor = {name: 0.01 for name in MINOR_OXIDES}
    bare = float(sum_of_oxides(BASALT, 11.714))

    assert float(sum_of_oxides(BASALT | minor, 11.714)) == pytest.approx(bare + 0.01 * len(MINOR_OXIDES), abs=1e-12)
    np.testing.assert_allclose(sum_of_oxides(BASALT, 11.714, np.array([1.5, np.nan])), [bare + 1.5, bare], rtol=1e-12)
