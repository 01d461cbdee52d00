"""Melting of peridotite and granite, and what a partial melt carries."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.melting import (
    batch_melt_enrichment,
    batch_melt_enrichment_nonmodal,
    batch_melt_fraction,
    haplogranite_minimum,
    katz_depression_c,
    melt_fraction_katz_dry,
    melt_fraction_katz_wet,
    peridotite_curves_katz,
    peridotite_solidus_hirschmann_2000,
    peridotite_solidus_hirschmann_2009,
    peridotite_solidus_katz_saturated,
    rayleigh_liquid_fraction,
    wet_granite_liquidus,
    wet_granite_solidus,
)
from registry.petrology.melting_conditions import (
    area_geotherm,
    lithostatic_pressure_gpa,
    melting_conditions,
    wet_granite_solidus_depth_m,
)


def test_two_peridotite_solidi_differ_by_thirty_five_degrees() -> None:
    """Katz is 35 C below Hirschmann 2000 at the surface, the revision of 2009 13 C (recomputed)."""
    first = peridotite_solidus_hirschmann_2000(0.0)

    assert first - peridotite_curves_katz(0.0)["solidus_c"] == pytest.approx(35.0, abs=0.5)
    assert first - peridotite_solidus_hirschmann_2009(0.0) == pytest.approx(12.6, abs=0.05)


@given(st.floats(900.0, 2000.0), st.floats(1.0, 60.0), st.floats(0.0, 4.0))
def test_dry_melt_fraction_rises_with_heat_and_stays_a_fraction(t: float, more: float, p: float) -> None:
    low, high = melt_fraction_katz_dry(t, p), melt_fraction_katz_dry(t + more, p)

    assert 0.0 <= low <= high <= 1.0


def test_dry_melt_fraction_is_continuous_where_clinopyroxene_runs_out() -> None:
    t = np.linspace(1300.0, 1450.0, 15_001)

    assert np.abs(np.diff(melt_fraction_katz_dry(t, 1.0))).max() < 1e-4


@given(st.floats(1000.0, 1500.0), st.floats(0.5, 3.0), st.floats(0.01, 0.5))
def test_wet_melt_fraction_solves_its_own_equation(t: float, p: float, water: float) -> None:
    f = float(melt_fraction_katz_wet(t, p, water))
    effective = t + float(katz_depression_c(f, p, water))

    assert f >= float(melt_fraction_katz_dry(t, p)) - 1e-9
    assert float(melt_fraction_katz_dry(effective, p)) == pytest.approx(f, abs=1e-6)


def test_wet_melt_fraction_without_water_is_the_dry_one() -> None:
    t = np.array([1100.0, 1250.0, 1350.0])

    np.testing.assert_allclose(melt_fraction_katz_wet(t, 1.0, 0.0), melt_fraction_katz_dry(t, 1.0), atol=1e-12)


def test_wet_melt_fraction_below_the_saturated_solidus_is_zero() -> None:
    solidus = float(peridotite_solidus_katz_saturated(1.0))

    assert melt_fraction_katz_wet(solidus - 1.0, 1.0, 50.0) == 0.0
    assert melt_fraction_katz_wet(solidus + 1.0, 1.0, 50.0) > 0.0


def test_melt_fraction_missing_temperature_is_missing() -> None:
    assert np.isnan(melt_fraction_katz_dry(np.nan, 1.0)) and np.isnan(melt_fraction_katz_wet(np.nan, 1.0, 0.1))


def test_wet_granite_solidus_rises_as_pressure_falls() -> None:
    """From 10 to 2 kbar the solidus rises from 620 to 680 C (Stern and Wyllie 1973): no melting by decompression."""
    p = np.linspace(0.2, 1.0, 50)

    assert (np.diff(wet_granite_solidus(p)) < 0.0).all()
    assert (wet_granite_liquidus(p) > wet_granite_solidus(p)).all()


def test_haplogranite_minimum_is_within_ten_degrees_of_natural_granite_at_two_kilobars() -> None:
    assert abs(float(haplogranite_minimum(0.2) - wet_granite_solidus(0.2))) <= 10.0


def test_haplogranite_minimum_below_two_kilobars_is_linear_in_log_pressure() -> None:
    assert haplogranite_minimum(np.sqrt(0.05 * 0.1)) == pytest.approx(745.0)


@pytest.mark.parametrize("p", [0.04, 1.01, np.nan])
def test_haplogranite_minimum_outside_its_table_is_missing(p: float) -> None:
    assert np.isnan(haplogranite_minimum(p))


@given(st.floats(0.001, 1.0), st.floats(0.0, 0.9))
def test_batch_melting_goes_there_and_back(f: float, d: float) -> None:
    assert batch_melt_fraction(batch_melt_enrichment(f, d), d) == pytest.approx(f, abs=1e-9)


def test_batch_melting_modal_is_non_modal_with_equal_coefficients() -> None:
    assert batch_melt_enrichment_nonmodal(0.2, 0.3, 0.3) == batch_melt_enrichment(0.2, 0.3)


@pytest.mark.parametrize("f", [-0.1, 1.1, np.nan])
def test_batch_melting_impossible_fraction_is_missing(f: float) -> None:
    assert np.isnan(batch_melt_enrichment(f, 0.1))


def test_batch_melt_fraction_more_than_the_source_allows_is_missing() -> None:
    assert np.isnan(batch_melt_fraction(200.0, 0.01))


@given(st.floats(1.0, 50.0), st.floats(0.0, 0.9))
def test_rayleigh_goes_there_and_back(enrichment: float, d: float) -> None:
    f = rayleigh_liquid_fraction(enrichment, d)

    assert f ** (d - 1.0) == pytest.approx(enrichment, rel=1e-9)


def test_rayleigh_lost_element_is_missing() -> None:
    assert np.isnan(rayleigh_liquid_fraction(0.9, 0.0))


def test_pressure_below_the_moho_uses_the_mantle_density() -> None:
    assert lithostatic_pressure_gpa(40_000.0) == pytest.approx(9.81 * 2800 * 40_000 * 1e-9)
    assert lithostatic_pressure_gpa(50_000.0) - lithostatic_pressure_gpa(40_000.0) == pytest.approx(0.32373)


def test_geotherm_meets_the_wet_granite_solidus_shallower_where_it_is_hotter() -> None:
    depth = wet_granite_solidus_depth_m([65.0, 90.0, 35.0, np.nan], 10.0, 2.5, [2.5, 2.5, 1.0, 2.5], 1e4)

    assert 30_000.0 < depth[0] < 36_000.0 and 18_000.0 < depth[1] < 24_000.0
    assert np.isnan(depth[2:]).all()


def test_melting_crust_is_not_by_decompression() -> None:
    here = melting_conditions(25_000.0, 585.0)

    assert here["decompression"][0] == "not by decompression"
    assert here["heating_needed_c"][0] == pytest.approx(float(wet_granite_solidus(here["pressure_gpa"][0])) - 585.0)
    assert np.isnan(here["water_needed_wt"][0])


def test_melting_mantle_by_rise_or_by_water_ends_on_the_solidus() -> None:
    here = melting_conditions(60_000.0, 1300.0)
    up = here["pressure_gpa"] - here["decompression_needed_gpa"]

    assert here["decompression"][0] == "by decompression"
    assert peridotite_solidus_hirschmann_2000(up)[0] == pytest.approx(1300.0, abs=1e-6)
    lowered = here["solidus_c"] - katz_depression_c(0.0, here["pressure_gpa"], here["water_needed_wt"])
    assert lowered[0] == pytest.approx(1300.0, abs=1e-6)


def test_melting_cold_mantle_cannot_rise_far_enough() -> None:
    here = melting_conditions([60_000.0, 60_000.0], [1000.0, 600.0])

    assert list(here["decompression"]) == ["not by decompression"] * 2
    assert np.isnan(here["decompression_needed_gpa"]).all()
    assert np.isnan(here["water_needed_wt"][1]), "not even with all the water that a melt holds"


def test_melting_hot_rock_melts_as_it_is() -> None:
    here = melting_conditions([25_000.0, 60_000.0], [700.0, 1400.0])

    assert list(here["decompression"]) == ["melts as it is"] * 2
    np.testing.assert_array_equal(here["heating_needed_c"], 0.0)


def test_melting_above_the_granite_curve_is_not_given() -> None:
    here = melting_conditions(5000.0, 200.0)

    assert np.isnan(here["solidus_c"][0]) and here["decompression"][0] is None


def test_area_geotherm_gives_a_depth_or_a_cause() -> None:
    nan = np.nan
    area = area_geotherm(
        [65.0, 65.0, 35.0, 65.0, nan], [10.0, 10.0, 10.0, nan, 10.0], 2.5, [2.5, 8.0, 1.0, 2.5, 2.5], 1e4
    )

    np.testing.assert_allclose(area["mantle_heat_flow_mw_m2"], [40.0, -15.0, 25.0, 40.0, nan])
    assert 30.0 < area["wet_granite_solidus_depth_km"][0] < 36.0
    assert np.isnan(area["wet_granite_solidus_depth_km"][1:]).all()
    assert list(area["geotherm_cause"]) == [
        None,
        "mantle_heat_flow_too_low",
        "crust_colder_than_solidus",
        "surface_temperature_missing",
        "heat_flow_missing",
    ]
