"""What a logged rock name allows, and whether it was logged as altered. Limits: fields of Le Bas et al. 1986."""

from __future__ import annotations

import numpy as np
import pytest

from registry.petrology.catalogue.logged import WARNINGS
from registry.petrology.conventions import Conventions
from registry.petrology.logged_alteration import logged_altered
from registry.petrology.logged_silica import SILICA_OF_NAME, disagrees_with_log, logged_silica_window


def _window(lithology: object, alteration: object = None) -> tuple[float, float]:
    low, high = logged_silica_window([lithology], [alteration])
    return float(low[0]), float(high[0])


@pytest.mark.parametrize(
    ("logged", "low", "high"),
    [
        ("basalt", 45.0, 54.0),
        ("Basaltic andesite", 52.0, 57.0),
        ("dacite porphyry", 62.0, 77.0),
        ("biotite granite", 63.0, 80.0),
        ("leucogranites", 63.0, 80.0),
        ("meta-gabbro", 40.0, 54.0),
        ("quartz monzonite", 55.0, 72.0),
        ("granite and diorite", 52.0, 80.0),
        ("dunite", 30.0, 50.0),
    ],
)
def test_window_follows_the_logged_names(logged: str, low: float, high: float) -> None:
    assert _window(logged) == (low, high)


@pytest.mark.parametrize(
    "logged",
    [None, "", 3.0, "lamprophyre", "fault gouge", "granite breccia", "quartz vein in granite", "skarn", "not granite"],
)
def test_window_of_a_log_that_says_nothing_is_missing(logged: object) -> None:
    assert np.isnan(_window(logged)).all()


def test_window_where_silica_moved_is_missing() -> None:
    assert np.isnan(_window("granite", "strong silicification")).all()
    assert _window("granite", "sericite") == (63.0, 80.0)


def test_windows_are_ordered_and_wide_enough_to_name_a_rock() -> None:
    assert all(30.0 <= low < high <= 82.0 and high - low >= 5.0 for low, high in SILICA_OF_NAME.values())


@pytest.mark.parametrize(
    ("silica", "loi", "logged", "remark"),
    [
        (50.0, 1.0, "granite", True),
        (60.0, 1.0, "granite", False),
        (59.9, 1.0, "granite", True),
        (59.9, 4.0, "granite", False),
        (56.9, 4.0, "granite", True),
        (57.1, 1.0, "basalt", True),
        (57.0, 1.0, "basalt", False),
        (np.nan, 1.0, "basalt", False),
        (50.0, np.nan, "granite", True),
        (50.0, 1.0, None, False),
    ],
)
def test_remark_stands_only_beyond_the_margin(silica: float, loi: float, logged: object, remark: bool) -> None:
    found = disagrees_with_log([silica], [loi], np.array([logged], dtype=object), np.array([None], dtype=object), 3.0)

    assert found.tolist() == [remark]


def test_remark_is_never_made_on_a_control() -> None:
    (warning,) = WARNINGS
    words = np.array(["granite", "granite"], dtype=object)
    nothing = np.array([None, None], dtype=object)
    found = warning.mask(
        np.array([50.0, 50.0]), np.array([1.0, 1.0]), words, nothing, np.array([False, True]), Conventions()
    )

    assert found.tolist() == [True, False] and "swapped" in warning.text


@pytest.mark.parametrize(
    ("logged", "altered"),
    [
        (None, False), ("", False), ("Fresh", False), ("weak chlorite", False), ("least_altered", False),
        ("none", False), ("phyllic", True), ("strong sericite", True), ("moderate argillic", True),
        (float("nan"), False),
    ],
)  # fmt: skip
def test_logged_alteration_by_its_words(logged: object, altered: bool) -> None:
    assert logged_altered([logged, logged]).tolist() == [altered, altered]
