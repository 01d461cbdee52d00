"""Remarks on what a temperature of the melt rests on and on temperatures that contradict each other."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from registry.petrology.catalogue import METHOD_BY_KEY, WARNINGS
from registry.petrology.conventions import Conventions

BY_CODE = {warning.code: warning for warning in WARNINGS}


def _raised(code: str, *columns: object) -> list[bool]:
    arrays = [np.array(column, dtype=float) if isinstance(column, list) else column for column in columns]
    return BY_CODE[code].mask(*arrays).tolist()


def test_acid_liquidus_is_marked_as_set_by_the_water_alone() -> None:
    silica = [51.9, 52.0, 63.0, 63.1, 75.0]
    temperature, water = [1100.0, 1100.0, 900.0, 892.3, np.nan], [1.0, 3.0, 3.0, 4.0, 4.0]

    assert _raised("liquidus_makhluf_by_convention", temperature, silica, water) == [False, True, True, True, False]
    assert _raised("liquidus_by_convention", temperature, silica, water) == [False, False, False, True, False]
    assert _raised("liquidus_partly_by_convention", temperature, silica, water) == [False, True, True, False, False]
    for code in ("liquidus_makhluf_by_convention", "liquidus_by_convention", "liquidus_partly_by_convention"):
        assert "convention's water" in BY_CODE[code].text and "provisional" in BY_CODE[code].text


@pytest.mark.parametrize(
    ("pressure_gpa", "expected"),
    [  # 680 C at 0.2 GPa and 620 C at 1 GPa (Stern and Wyllie 1973); 720 C at 0.1 GPa (Tuttle and Bowen 1958)
        (0.2, [True, False, False]),
        (1.0, [False, False, False]),
        (0.1, [True, True, False]),
        (9.0, [False, False, False]),
    ],
)
def test_silica_temperature_below_the_wet_solidus_is_marked(pressure_gpa: float, expected: list[bool]) -> None:
    conventions = replace(Conventions(), pressure_gpa=pressure_gpa)

    assert _raised("liquidus_duan_below_solidus", [652.0, 696.0, 790.0], conventions) == expected


def test_silica_temperature_of_an_acid_rock_is_marked_as_from_silica_alone() -> None:
    assert _raised("liquidus_duan_from_silica_alone", [902.6, 790.0, np.nan], [57.9, 65.9, 70.0]) == [
        False,
        True,
        False,
    ]


@pytest.mark.parametrize(
    "code", [f"{name}_above_liquidus" for name in ("apatite_saturation", "zircon_saturation_wh83",
                                                   "zircon_saturation_b13", "zircon_saturation_shao")]
)  # fmt: skip
def test_saturation_above_the_chosen_liquidus_is_marked(code: str) -> None:
    assert _raised(code, [931.0, 892.0, 931.0, np.nan], [892.0, 892.0, np.nan, 892.0]) == [True, False, False, False]


def test_zircon_saturation_shao_outside_its_experiments_is_marked_and_boehnke_says_it_has_no_range() -> None:
    """750-1400 C: Shao and others 2020, abstract."""
    assert _raised("zircon_saturation_shao_extrapolated", [749.9, 750.0, 1400.0, 1400.1]) == [True, False, False, True]
    assert "not stated" in METHOD_BY_KEY["zircon_saturation_b13"].note


def test_ratio_over_a_low_denominator_is_marked_as_moved_by_rounding() -> None:
    assert _raised("nb_ta_low_ta", [28.0, 16.0, np.nan], [0.2, 0.5, 0.2]) == [True, False, False]
    assert _raised("zr_hf_low_hf", [40.0, 40.0, np.nan], [0.9, 1.0, 0.9]) == [True, False, False]


def test_range_remark_names_labels_and_units_not_columns() -> None:
    texts = [warning.text for code, warning in BY_CODE.items() if code.endswith("_outside_range")]

    assert [text for text in texts if "_wt" in text or "_vf" in text or "zircon_m" in text] == []
    assert "(MgO volatile-free 5 to 11 wt%; " in BY_CODE["liquidus_helz_thornber_outside_range"].text
    assert "; A/NK from 1); M is {value}" in BY_CODE["zircon_saturation_wh83_outside_range"].text
