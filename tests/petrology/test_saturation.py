"""Zircon, apatite and monazite saturation: inverses, order of the models, ranges and impossible values."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.constants import ATOMIC_WEIGHT, ZR_IN_ZIRCON_PPM
from registry.petrology.digestion import DIGESTION_CODE
from registry.petrology.saturation import (
    saturation_hfse,
    zircon_m,
    zircon_saturation_boehnke,
    zircon_saturation_is_usable,
    zircon_saturation_shao,
    zircon_saturation_watson_harrison,
    zircon_zr_is_total,
    zr_at_saturation_boehnke,
    zr_at_saturation_shao,
    zr_at_saturation_watson_harrison,
)
from registry.petrology.saturation_phosphates import (
    apatite_saturation_harrison_watson,
    monazite_d,
    monazite_saturation_maimaiti,
    monazite_saturation_montel,
    p2o5_at_apatite_saturation,
    p2o5_peraluminous_bea,
    p2o5_peraluminous_pichavant,
)
from tests.petrology.melt_rocks import ANDESITE, BASALT, GRANITE, melt, table

_RARE_EARTHS = {"la_ppm": 35.0, "ce_ppm": 70.0, "pr_ppm": 8.0, "nd_ppm": 28.0, "sm_ppm": 5.5}


@pytest.mark.parametrize(
    ("temperature_of", "zr_at"),
    [
        (zircon_saturation_watson_harrison, zr_at_saturation_watson_harrison),
        (zircon_saturation_boehnke, zr_at_saturation_boehnke),
        (zircon_saturation_shao, zr_at_saturation_shao),
    ],
)
@given(temperature=st.floats(600.0, 1200.0), m=st.floats(0.9, 2.2))
def test_zircon_saturation_is_the_inverse_of_the_solubility(temperature_of, zr_at, temperature, m) -> None:
    assert temperature_of(zr_at(temperature, m), m) == pytest.approx(temperature, abs=1e-8)


@given(st.floats(50.0, 250.0), st.floats(1.2, 1.7))
def test_zircon_saturation_recalibration_lies_below_the_first(zr: float, m: float) -> None:
    """The gap of about 50 C on granites is real (from memory); the two cross only above 390 ppm at M 0.9."""
    gap = zircon_saturation_watson_harrison(zr, m) - zircon_saturation_boehnke(zr, m)

    assert 20.0 < gap < 120.0


@given(st.floats(10.0, 1000.0), st.floats(1.01, 3.0), st.floats(0.9, 1.9))
def test_zircon_saturation_more_zirconium_is_hotter(zr: float, factor: float, m: float) -> None:
    for model in (zircon_saturation_watson_harrison, zircon_saturation_boehnke, zircon_saturation_shao):
        assert model(zr * factor, m) > model(zr, m)


def test_zircon_constant_is_that_of_the_formula_within_rounding() -> None:
    """ZrSiO4 by atomic weights (IUPAC 2021) holds 497662 ppm Zr; the published constant is 497644."""
    formula = ATOMIC_WEIGHT["Zr"] + ATOMIC_WEIGHT["Si"] + 4.0 * ATOMIC_WEIGHT["O"]

    assert ATOMIC_WEIGHT["Zr"] / formula * 1e6 == pytest.approx(ZR_IN_ZIRCON_PPM, abs=30.0)


@pytest.mark.parametrize("zr", [0.0, -5.0, np.nan])
def test_zircon_saturation_impossible_zirconium_is_missing(zr: float) -> None:
    values = zircon_saturation_watson_harrison(np.array([150.0, zr]), 1.4)

    assert not np.isnan(values[0]) and np.isnan(values[1])


def test_zircon_m_shuffled_rows_are_shuffled_results() -> None:
    rocks = table(BASALT, ANDESITE, GRANITE)
    order = np.array([2, 0, 1])

    np.testing.assert_array_equal(
        zircon_m(**{name: values[order] for name, values in rocks.items()}), zircon_m(**rocks)[order]
    )


@pytest.mark.parametrize(
    ("m", "sio2", "a_nk", "is_total", "expected"),
    [
        (1.9, 63.0, 1.0, True, True),
        (0.9, 63.0, 1.0, True, True),
        (1.901, 70.0, 1.2, True, False),
        (0.899, 70.0, 1.2, True, False),
        (1.4, 62.99, 1.2, True, False),
        (1.4, 70.0, 0.999, True, False),
        (1.4, 70.0, 1.2, False, False),
        (np.nan, 70.0, 1.2, True, False),
    ],
)
def test_zircon_usable_at_the_edges_of_its_range(m, sio2, a_nk, is_total, expected) -> None:
    assert bool(zircon_saturation_is_usable(m, sio2, a_nk, is_total)) is expected


@pytest.mark.parametrize(
    ("digestion", "expected"),
    [("fusion", True), ("xrf", True), ("four_acid", False), ("aqua_regia", False), ("", False), ("unknown", True)],
)
def test_zircon_total_digestion_by_its_name(digestion: str, expected: bool) -> None:
    """Zircon survives four acids (common practice); an unknown digestion beside SiO2 counts as total."""
    assert bool(zircon_zr_is_total(np.array([DIGESTION_CODE[digestion]], dtype=np.uint8))[0]) is expected


def test_hfse_temperature_of_a_granite_lies_with_zircon_saturation() -> None:
    """Zr 150, Hf 4.2: 777 C against 778 C of Watson and Harrison (both recomputed)."""
    zircon = zircon_saturation_watson_harrison(150.0, zircon_m(**melt(GRANITE)))

    assert abs(float(saturation_hfse(150.0, 4.2) - zircon)) < 10.0


@given(st.floats(850.0, 1500.0), st.floats(45.0, 75.0))
def test_apatite_saturation_is_the_inverse_of_the_solubility(temperature: float, sio2: float) -> None:
    p2o5 = p2o5_at_apatite_saturation(temperature, sio2)

    assert apatite_saturation_harrison_watson(sio2, p2o5) == pytest.approx(temperature, abs=1e-7)


def test_apatite_peraluminous_corrections_raise_the_solubility_and_vanish_at_one() -> None:
    for correct in (
        lambda a_cnk: p2o5_peraluminous_bea(0.05, a_cnk, 800.0),
        lambda a_cnk: p2o5_peraluminous_pichavant(0.05, a_cnk, 800.0, 72.0),
    ):
        assert correct(1.0) == pytest.approx(0.05)
        assert correct(1.2) > correct(1.1) > 0.05


def test_monazite_lithium_raises_d_and_lowers_the_temperature() -> None:
    plain, with_li = monazite_d(**melt(GRANITE)), monazite_d(**melt(GRANITE), li_ppm=1000.0)
    cool = monazite_saturation_montel(**_RARE_EARTHS, gd_ppm=4.5, d=with_li, h2o_wt=3.0)

    assert with_li > plain
    assert cool < monazite_saturation_montel(**_RARE_EARTHS, gd_ppm=4.5, d=plain, h2o_wt=3.0)


def test_monazite_lithium_agrees_with_counting_moles() -> None:
    """1000 ppm Li beside the moles of the other alkalis, by plain arithmetic."""
    moles = {"na": 3.68 / 61.979 * 2, "k": 4.07 / 94.195 * 2, "ca": 1.84 / 56.077, "al": 14.32 / 101.961 * 2}
    silicon, lithium = 71.30 / 60.083, 0.1 / 6.94
    total = silicon / 0.67141951  # the cation fraction of Si in this granite
    base = (moles["na"] + moles["k"] + lithium + 2 * moles["ca"]) / total
    expected = base / (moles["al"] / total * (moles["al"] + silicon) / total)

    assert monazite_d(**melt(GRANITE), li_ppm=1000.0) == pytest.approx(expected, rel=1e-6)


@given(st.floats(1.05, 3.0))
def test_monazite_more_rare_earths_are_hotter(factor: float) -> None:
    richer = {name: value * factor for name, value in _RARE_EARTHS.items()}

    assert monazite_saturation_maimaiti(**richer, d=1.16, h2o_wt=3.0, pressure_gpa=0.2) > monazite_saturation_maimaiti(
        **_RARE_EARTHS, d=1.16, h2o_wt=3.0, pressure_gpa=0.2
    )


def test_monazite_missing_rare_earth_stays_in_its_row() -> None:
    earths = {name: np.array([value, value]) for name, value in _RARE_EARTHS.items()}
    earths["pr_ppm"] = np.array([8.0, np.nan])
    values = monazite_saturation_montel(**earths, gd_ppm=4.5, d=1.16, h2o_wt=3.0)

    assert not np.isnan(values[0]) and np.isnan(values[1])
