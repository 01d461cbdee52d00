"""Mass change by the isocon: rocks altered forward by a known amount, then recovered (invented)."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.mass_change import (
    COMPONENT_COLUMNS,
    IMMOBILE_COLUMNS,
    component_changes,
    immobile_alkalinity,
    isocon,
)

FRESH = {
    "al2o3_wt": 16.0, "tio2_wt": 0.6, "zr_ppm": 130.0, "nb_ppm": 7.0, "y_ppm": 16.0, "hf_ppm": 3.6, "th_ppm": 6.0,
}  # fmt: skip


def _altered(slope: float, **moved: float) -> dict[str, np.ndarray]:
    """The fresh rock after a change of mass 1/slope; ``moved`` multiplies single components further."""
    return {name: np.array([value * slope * moved.get(name, 1.0)]) for name, value in FRESH.items()}


@given(st.floats(0.4, 2.5))
def test_isocon_of_a_rock_altered_forward_is_recovered(slope: float) -> None:
    found = isocon(FRESH, _altered(slope))

    assert found.slope[0] == pytest.approx(slope, rel=1e-12)
    assert found.mass_change_percent[0] == pytest.approx(100.0 * (1.0 / slope - 1.0), abs=1e-9)
    assert found.least[0] == pytest.approx(found.greatest[0]) and found.cause[0] is None
    assert found.used.all() and not found.rejected.any()


@given(
    st.floats(0.5, 2.0),
    st.lists(st.floats(-1.0, 4.0), min_size=4, max_size=4),
    st.lists(st.floats(0.2, 20.0), min_size=4, max_size=4),
)
def test_gains_built_forward_are_recovered(mass_ratio: float, shares: list[float], fresh: list[float]) -> None:
    """Each component gains its share of what it had, the whole changes by any mass: the slope undoes the dilution."""
    before = np.array(fresh)
    gain = before * np.array(shares)
    after = (before + gain) * mass_ratio
    found = component_changes(before, after[:, None], np.array([mass_ratio]))

    np.testing.assert_allclose(found["change"][:, 0], gain, atol=1e-10)
    np.testing.assert_allclose(found["percent"][:, 0], 100.0 * np.array(shares), atol=1e-9)


@given(st.floats(0.5, 2.0), st.floats(0.3, 3.0))
def test_isocon_does_not_depend_on_units_or_a_common_factor(slope: float, factor: float) -> None:
    """Both rocks in other units, component by component, leave the slope as it is."""
    fresh = {name: value * factor * place for place, (name, value) in enumerate(FRESH.items(), 1)}
    altered = {name: value * factor * place for place, (name, value) in enumerate(_altered(slope).items(), 1)}

    assert isocon(fresh, altered).slope[0] == pytest.approx(isocon(FRESH, _altered(slope)).slope[0], rel=1e-12)


def test_isocon_back_from_altered_to_fresh_is_the_inverse() -> None:
    there = isocon(FRESH, _altered(0.8))
    back = isocon({name: float(value[0]) for name, value in _altered(0.8).items()}, _altered(1.0))

    assert back.slope[0] == pytest.approx(1.0 / there.slope[0])


def test_isocon_moved_component_is_rejected_and_named() -> None:
    found = isocon(FRESH, _altered(0.9, th_ppm=1.6, y_ppm=0.5))

    assert found.slope[0] == pytest.approx(0.9)
    names = np.array(found.components)
    assert set(names[found.rejected[:, 0]]) == {"th_ppm", "y_ppm"}


@pytest.mark.parametrize(
    ("altered", "cause"),
    [
        ({"al2o3_wt": [16.0], "tio2_wt": [0.6]}, "too_few_immobile_components"),
        ({"al2o3_wt": [np.nan], "tio2_wt": [0.6], "zr_ppm": [130.0]}, "too_few_immobile_components"),
        ({"al2o3_wt": [16.0], "tio2_wt": [1.2], "zr_ppm": [400.0]}, "immobile_components_disagree"),
        (
            {"al2o3_wt": [16.0], "tio2_wt": [0.6], "zr_ppm": [130.0], "nb_ppm": [14.0], "y_ppm": [40.0],
             "hf_ppm": [12.0], "th_ppm": [1.0]},
            "immobile_components_disagree",
        ),
    ],
)  # fmt: skip
def test_isocon_that_cannot_be_drawn_gives_the_cause(altered: dict[str, list[float]], cause: str) -> None:
    found = isocon(FRESH, {name: np.array(values) for name, values in altered.items()})

    assert np.isnan(found.slope[0]) and found.cause[0] == cause
    assert np.isnan(found.least[0]) and not found.used.any() and not found.rejected.any()


def test_isocon_of_many_rocks_equals_each_alone() -> None:
    rocks = [_altered(0.7), _altered(1.1, zr_ppm=2.0), {name: np.array([np.nan]) for name in FRESH}]
    together = isocon(FRESH, {name: np.concatenate([rock[name] for rock in rocks]) for name in FRESH})

    np.testing.assert_array_equal(together.slope, [isocon(FRESH, rock).slope[0] for rock in rocks])
    assert isocon(FRESH, {}).slope.size == 0


def test_component_change_of_what_the_fresh_rock_lacked_has_no_percentage() -> None:
    found = component_changes([0.0, 2.0], [[3.0], [3.0]], [0.75])

    np.testing.assert_allclose(found["change"][:, 0], [4.0, 2.0])
    assert np.isnan(found["percent"][0, 0]) and found["percent"][1, 0] == pytest.approx(100.0)


def test_grants_limiting_cases_constant_mass_and_constant_component() -> None:
    """Grant 1986: on the constant-mass line the slope is 1; below the isocon a component was lost."""
    fresh = np.array([10.0, 10.0, 10.0])
    change = component_changes(fresh, [[10.0], [5.0], [20.0]], [1.0])["change"]

    np.testing.assert_allclose(change[:, 0], [0.0, -5.0, 10.0])


@pytest.mark.parametrize(("ratio", "word"), [(0.2, "subalkaline"), (0.67, "subalkaline"), (0.68, "alkaline")])
def test_immobile_alkalinity_divides_at_the_printed_ratio(ratio: float, word: str) -> None:
    """Nb/Y 0.67, Winchester and Floyd 1977, from memory."""
    assert immobile_alkalinity(ratio)[0] == word
    assert immobile_alkalinity([np.nan])[0] is None


def test_immobile_components_are_all_told() -> None:
    assert set(IMMOBILE_COLUMNS) <= set(COMPONENT_COLUMNS)
