"""What a norm could not place is named, and adds up to the residual. The analyses are invented."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given

from registry.petrology.norm import cipw_norm
from registry.petrology.norm_warnings import NORM_WARNING_TEXTS, norm_shortfalls, norm_warnings
from tests.strategies import analysis_tables

GRANITE = {
    "sio2_wt": 73.0, "tio2_wt": 0.2, "al2o3_wt": 14.0, "fe2o3_wt": 0.6, "feo_wt": 1.0, "mgo_wt": 0.3, "cao_wt": 0.6,
    "na2o_wt": 3.6, "k2o_wt": 4.6, "p2o5_wt": 0.2,
}  # fmt: skip
#: Analyses that have nothing left to bind the constituent with, and how much of it must be left, wt%.
CASES = [
    ("p2o5_exceeds_cao", {"cao_wt": 0.1, "p2o5_wt": 1.0}, 1.0 - 0.3 * 0.1 / 56.077 * 141.943),
    ("co2_exceeds_cao", {"cao_wt": 0.0, "p2o5_wt": 0.0, "co2_wt": 0.7}, 0.7),
    ("f_exceeds_cao", {"cao_wt": 0.0, "p2o5_wt": 0.0, "f_wt": 0.9}, 0.9),
    ("cl_exceeds_na2o", {"na2o_wt": 0.0, "cl_wt": 0.3}, 0.3),
    ("so3_exceeds_na2o", {"na2o_wt": 0.0, "so3_wt": 0.4}, 0.4),
    ("s_exceeds_feo", {"feo_wt": 0.0, "s_wt": 0.5}, 0.5),
    ("cr2o3_exceeds_feo", {"feo_wt": 0.0, "cr2o3_wt": 0.1}, 0.1),
    ("zro2_exceeds_sio2", {"sio2_wt": 0.0, "zro2_wt": 0.2}, 0.2),
]


def test_warnings_of_a_plain_granite_are_none() -> None:
    assert [code for code, raised in norm_warnings(GRANITE).items() if raised] == []


@pytest.mark.parametrize(("code", "changes", "left"), CASES, ids=[case[0] for case in CASES])
def test_warning_constituent_without_partner_is_named_with_its_amount(code: str, changes: dict, left: float) -> None:
    shortfalls = norm_shortfalls(GRANITE | changes)
    found = [name for name, amount in shortfalls.items() if amount > 1e-6 and name != "silica_deficit"]

    assert found == [code]
    assert float(shortfalls[code]) == pytest.approx(left, abs=1e-4)


def test_warning_halogens_and_sulphur_set_oxygen_free() -> None:
    """O=F 0.4211, O=Cl 0.2256 and O per 2 S in pyrite 0.2495 by mass (atomic weights, recomputed)."""
    analysis = GRANITE | {"f_wt": 0.2, "cl_wt": 0.1, "s_wt": 0.1}
    shortfalls = norm_shortfalls(analysis)

    assert float(shortfalls["oxygen_set_free"]) == pytest.approx(0.2 * 0.4211 + 0.1 * 0.2256 + 0.1 * 0.2495, abs=1e-4)
    assert [code for code, raised in norm_warnings(analysis).items() if raised] == ["oxygen_set_free"]


def test_warning_silica_deficit_leaves_the_minerals_formed() -> None:
    """An invented carbonate rock without silica for its magnesium, calcium and alkalis."""
    rock = {"sio2_wt": 5.0, "al2o3_wt": 2.0, "feo_wt": 4.0, "mgo_wt": 15.0, "cao_wt": 30.0, "k2o_wt": 1.0}
    norm = cipw_norm(rock)
    shortfalls = norm_shortfalls(rock, norm)

    assert float(norm["cs_wt"]) > 10.0
    assert float(norm["norm_residual_wt"]) < -1.0
    assert float(shortfalls["silica_deficit"]) == pytest.approx(-float(norm["norm_residual_wt"]), abs=1e-9)


@given(analysis_tables())
def test_shortfalls_add_up_to_the_residual(table: dict[str, np.ndarray]) -> None:
    norm = cipw_norm(table)
    shortfalls = norm_shortfalls(table, norm)
    deficit = shortfalls.pop("silica_deficit")

    assert set(shortfalls) | {"silica_deficit"} == set(NORM_WARNING_TEXTS)
    np.testing.assert_allclose(sum(shortfalls.values()) - deficit, norm["norm_residual_wt"], rtol=0, atol=2e-6)
    assert all((amount >= -1e-9).all() for amount in (*shortfalls.values(), deficit))


@given(analysis_tables())
def test_residual_beyond_a_hundredth_is_always_named(table: dict[str, np.ndarray]) -> None:
    named = np.asarray(sum(norm_warnings(table).values())) > 0

    assert named[np.abs(cipw_norm(table)["norm_residual_wt"]) > 0.01].all()


def test_shortfalls_of_a_row_without_norm_are_missing_and_raise_no_warning() -> None:
    table = {name: np.array([value, np.nan]) for name, value in GRANITE.items()}

    assert all(np.isnan(amount[1]) and not np.isnan(amount[0]) for amount in norm_shortfalls(table).values())
    assert not any(raised.any() for raised in norm_warnings(table).values())
