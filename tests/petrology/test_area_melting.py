"""What melting would take under an area: against the geotherm and the solidi themselves (areas invented)."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.area_melting import NUMBERS, TEXTS, area_melting
from registry.petrology.geotherm import geotherm_exponential_c
from registry.petrology.melting import (
    peridotite_solidus_hirschmann_2000,
    wet_granite_solidus,
)
from registry.petrology.melting_conditions import lithostatic_pressure_gpa

NAN = float("nan")
HOT = (100.0, 10.0, 2.5, 2.0, 10_000.0)
COLD = (40.0, 10.0, 3.0, 1.0, 10_000.0)


def _one(*area: float) -> dict[str, object]:
    found = area_melting(*([value] for value in area))
    assert set(found) == {*NUMBERS, *TEXTS}
    return {name: values[0] for name, values in found.items()}


def test_hot_crust_melts_where_the_two_curves_cross() -> None:
    found = _one(*HOT, 30_000.0)
    depth = 1000.0 * float(found["wet_granite_solidus_depth_km"])

    temperature = geotherm_exponential_c(depth, *HOT)
    assert temperature == pytest.approx(wet_granite_solidus(lithostatic_pressure_gpa(depth, 30_000.0)), abs=0.1)
    assert found["crust_heating_needed_c"] == 0.0
    assert found["crust_heating_depth_km"] == found["wet_granite_solidus_depth_km"]
    assert found["crust_water"] == "to saturation, from 18.1 km down"
    assert found["crust_decompression"] == "not by decompression" and found["geotherm_cause"] is None


def test_cold_crust_needs_the_least_heating_of_any_depth() -> None:
    found = _one(*COLD, 42_000.0)
    depths = np.linspace(8000.0, 42_000.0, 1000)
    needed = wet_granite_solidus(lithostatic_pressure_gpa(depths, 42_000.0)) - geotherm_exponential_c(depths, *COLD)

    assert found["crust_heating_needed_c"] == pytest.approx(np.nanmin(needed), abs=0.5)
    assert found["crust_heating_depth_km"] == 42.0
    assert found["geotherm_cause"] == "crust_colder_than_solidus"
    assert str(found["crust_water"]).startswith("no amount: 161 C too cold even at saturation, at 42.0 km")


def test_mantle_is_not_computed_without_a_moho() -> None:
    found = _one(*HOT, NAN)

    assert found["mantle_cause"] == "moho_depth_not_known"
    assert found["mantle_decompression"] is None
    empty = [name for name in NUMBERS if name.startswith(("mantle_", "moho_", "dry_")) and not name.endswith("_mw_m2")]
    assert len(empty) == 6 and all(np.isnan(float(found[name])) for name in empty)
    assert found["crust_heating_needed_c"] == 0.0


def test_mantle_at_the_moho_needs_heating_to_the_dry_solidus() -> None:
    found = _one(*HOT, 30_000.0)
    pressure = lithostatic_pressure_gpa(30_000.0, 30_000.0)
    temperature = float(geotherm_exponential_c(30_000.0, *HOT))

    assert found["moho_temperature_c"] == pytest.approx(temperature, abs=1e-6)
    assert found["mantle_heating_needed_c"] == pytest.approx(
        float(peridotite_solidus_hirschmann_2000(pressure)) - temperature, abs=1e-3
    )
    assert 0.0 < float(found["mantle_water_needed_wt"]) < 0.2 and found["mantle_cause"] is None
    assert found["mantle_decompression"] == "melts as it is"
    assert 30.0 < float(found["dry_peridotite_solidus_depth_km"]) < 45.0


def test_cold_mantle_melts_by_nothing_at_hand() -> None:
    found = _one(*COLD, 42_000.0)

    assert found["mantle_decompression"] == "not by decompression"
    assert np.isnan(float(found["mantle_water_needed_wt"]))
    assert found["mantle_cause"] == "colder_than_the_saturated_solidus_at_the_moho"


def test_mantle_just_below_the_solidus_melts_by_decompression() -> None:
    """A thin crust over mantle that stays a little too cold down to 100 km, but hot enough to rise a way."""
    found = _one(45.0, 10.0, 3.1, 0.5, 10_000.0, 8_000.0)

    assert found["mantle_decompression"] == "by decompression"
    assert float(found["mantle_decompression_needed_gpa"]) > 0.0
    assert 8.0 < float(found["mantle_decompression_depth_km"]) <= 100.1


@pytest.mark.parametrize(
    ("area", "cause"),
    [
        ((NAN, 10.0, 2.5, 2.0, 1e4, 3e4), "heat_flow_missing"),
        ((65.0, 10.0, NAN, 2.0, 1e4, 3e4), "conductivity_missing"),
        ((65.0, 10.0, 2.5, NAN, 1e4, 3e4), "heat_production_missing"),
        ((65.0, 10.0, 2.5, 6.0, 1e4, 3e4), "mantle_heat_flow_too_low"),
        ((65.0, NAN, 2.5, 2.0, 1e4, 3e4), "surface_temperature_missing"),
    ],
)
def test_area_without_a_geotherm_gives_the_cause_everywhere(area: tuple[float, ...], cause: str) -> None:
    """A0 D must leave 15 mW/m2 for the mantle: 65 - 6 x 10 = 5 does not (common practice)."""
    found = _one(*area)

    assert found["geotherm_cause"] == cause and found["mantle_cause"] == cause
    assert np.isnan(float(found["crust_heating_needed_c"])) and found["crust_water"] is None


def test_shallow_moho_leaves_no_crust_for_the_granite_solidus() -> None:
    """The wet granite curve begins at 0.2 GPa, 7.3 km."""
    found = _one(*HOT, 6_000.0)

    assert np.isnan(float(found["crust_heating_needed_c"])) and found["crust_decompression"] is None
    assert found["geotherm_cause"] == "crust_thinner_than_the_granite_solidus_begins"
    assert np.isnan(float(found["wet_granite_solidus_depth_km"])) and float(found["moho_temperature_c"]) > 100.0


def test_moho_below_the_search_is_still_computed_at_the_moho() -> None:
    assert float(_one(45.0, 10.0, 3.0, 1.0, 1e4, 120_000.0)["moho_temperature_c"]) > 1000.0


@given(st.floats(40.0, 120.0), st.floats(2.0, 4.0), st.floats(25_000.0, 60_000.0))
def test_more_heat_flow_never_needs_more_heating(heat_flow: float, conductivity: float, moho: float) -> None:
    colder = _one(heat_flow, 10.0, conductivity, 1.0, 10_000.0, moho)
    hotter = _one(heat_flow + 10.0, 10.0, conductivity, 1.0, 10_000.0, moho)

    for name in ("crust_heating_needed_c", "mantle_heating_needed_c"):
        assert float(hotter[name]) <= float(colder[name])
