"""Whole intrusions and areas, from results to the views, on both engines. All rocks and places are invented."""

from __future__ import annotations

import numpy as np
import pytest

from registry.petrology.intrusion_heat import theta_centre_interval
from registry.petrology.outliers import COMPARED_OXIDES
from registry.refresh import drain, refresh_registry
from registry.store.engine import Registry, reading, writing
from registry.store.reading.outliers import disagreeing_samples, far_samples, suspected_swaps
from registry.store.reading.suites import area_summaries, area_summary, intrusion_suite, sample_mass_change
from tests.suites.grey_sill import LEFT, OXIDES, SHARES, TRACES, add_samples, liquids, rows, store, value


def test_fractionation_made_forward_is_found_in_the_view(district: Registry) -> None:
    left, unit, quality, cause = value(district, "fractionation", "liquid_fraction_most_evolved")

    assert left == pytest.approx(LEFT[-1], rel=1e-6) and unit == "1" and cause is None
    assert "sample A09" in quality and "D = 0" in quality
    assert value(district, "fractionation", "parent_mg_number")[2].startswith("sample A00, the greatest Mg-number")
    assert value(district, "fractionation", "liquid_fraction_low")[0] == pytest.approx(LEFT[-1], rel=1e-6)


def test_mass_balance_made_forward_is_found_in_the_view(district: Registry) -> None:
    """The minerals' Mg-number is the mean of the two liquids', not the one they were made with: within 0.03."""
    left, _, quality, cause = value(district, "mass_balance", "liquid_fraction")

    assert left == pytest.approx(LEFT[-1], abs=0.03) and cause is None
    assert quality.startswith("good: residual sum of squares")
    removed = value(district, "mass_balance", "clinopyroxene_removed")[0]
    assert removed == pytest.approx(100.0 * (1.0 - LEFT[-1]) * SHARES["clinopyroxene"], abs=3.0)


def test_intrusion_sheet_holds_heat_trend_and_count(district: Registry) -> None:
    green, grey = rows(
        district,
        "SELECT theta_centre, theta_centre_low, theta_centre_high, heat_x_thickness_mw_m2, samples, trend_quality "
        "FROM intrusion_sheet ORDER BY samples",
    )
    expected = theta_centre_interval(["slab"], 400.0, 1500.0, 0.05, 0.01)

    for place, name in enumerate(("theta_centre", "theta_centre_low", "theta_centre_high")):
        assert grey[place] == pytest.approx(float(expected[name][0]), rel=1e-12)
    heat = value(district, "heat", "heat_production_median")[0]
    assert grey[3] == pytest.approx(0.8 * heat, rel=1e-12)
    assert grey[4] == 10 and grey[5].startswith("good: 10 samples, SiO2 ")
    assert tuple(green) == (None, None, None, None, 0, None)
    assert value(district, "cooling", "theta_centre", "Green stock")[3] == "shape_missing"
    assert value(district, "heat", "heat_x_thickness", "Green stock")[3] == "heat_production_missing"
    assert value(district, "samples", "samples_used", "Green stock")[3] == "no_computed_samples"


def test_samples_and_their_intrusion_keep_the_same_heat(district: Registry) -> None:
    """What a sample's verdict is told and what the intrusion shows come from one function."""
    names = ("theta_centre", "theta_centre_low", "theta_centre_high")
    of_samples = rows(district, f"SELECT DISTINCT {', '.join(names)} FROM derived")
    of_body = rows(district, f"SELECT {', '.join(names)} FROM intrusion_sheet WHERE intrusion = 'Grey sill'")

    assert len(of_samples) == 1
    np.testing.assert_allclose(of_samples[0], of_body[0], rtol=1e-12)


def test_every_row_has_a_value_or_a_cause(district: Registry) -> None:
    found = rows(district, "SELECT model, quantity, value, cause FROM suite_sheet")

    assert len(found) > 40
    assert [row for row in found if (row[2] is None) == (row[3] is None) and row[0] != "samples"] == []


def test_area_sheet_holds_the_geotherm_and_its_causes(district: Registry) -> None:
    """The same area as the check values recomputed by hand in published/suites.csv."""
    with reading(district) as connection:
        north, south = area_summary(connection, "North Block"), area_summary(connection, "South Block")
        assert [row["area"] for row in area_summaries(connection)] == ["North Block", "South Block"]
        assert area_summary(connection, "Nowhere") is None

    assert north is not None and south is not None
    assert north["moho_temperature_c"] == pytest.approx(647.6, abs=0.05)
    assert north["wet_granite_solidus_depth_km"] == pytest.approx(33.65, abs=0.05)
    assert north["geotherm_cause"] is None and [row["intrusion"] for row in north["intrusions"]] == ["Grey sill"]
    assert south["geotherm_cause"] == south["mantle_cause"] == "conductivity_missing"


def test_registry_that_was_never_computed_says_so(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('North Block')")

    assert rows(any_registry, "SELECT geotherm_cause FROM area_sheet") == [("not_yet_computed",)]
    assert refresh_registry(any_registry) == 0
    assert rows(any_registry, "SELECT geotherm_cause FROM area_sheet") == [("heat_flow_missing",)]


@pytest.mark.parametrize(
    ("columns", "cause"),
    [
        ("age_ma = 30", "shape_missing"),
        ("shape = 'slab', age_ma = 30", "size_missing"),
        ("shape = 'slab', half_width_m = 500", "age_missing"),
        ("shape = 'slab', half_width_m = 500, age_ma = -1", "not_applicable"),
        ("shape = 'cylinder', half_width_m = 500, age_ma = 0.01", None),
    ],
)
def test_cooling_gives_a_cause_or_its_limits(district: Registry, columns: str, cause: str | None) -> None:
    with writing(district) as connection:
        connection.exec_driver_sql("UPDATE intrusion SET age_ma = NULL WHERE intrusion_id = 2")
        connection.exec_driver_sql(f"UPDATE intrusion SET {columns} WHERE intrusion_id = 2")
        drain(connection)
    theta, _, quality, found = value(district, "cooling", "theta_centre", "Green stock")

    assert found == cause and (theta is None) == (cause is not None)
    if cause is None:
        for said in ("water that moves cools 2 to 10", "10 % taken", "depth to the top not known", "an upper bound"):
            assert said in quality


def test_named_parent_is_used_and_a_wrong_name_gives_the_cause(district: Registry) -> None:
    with writing(district) as connection:
        connection.exec_driver_sql("UPDATE intrusion SET parent_sample = 'A04' WHERE intrusion_id = 1")
        drain(connection)
    assert value(district, "fractionation", "parent_mg_number")[2] == "sample A04, named as the parent"
    assert value(district, "fractionation", "liquid_fraction_most_evolved")[0] == pytest.approx(LEFT[-1] / LEFT[4])

    with writing(district) as connection:
        connection.exec_driver_sql("UPDATE intrusion SET parent_sample = 'Z99' WHERE intrusion_id = 1")
        drain(connection)
    cause = "named_parent_is_no_computed_sample_of_this_intrusion"
    for model, quantity in (("fractionation", "liquid_fraction_most_evolved"), ("mass_balance", "liquid_fraction")):
        assert value(district, model, quantity) == (None, "1", None, cause)


def test_suite_of_three_samples_gives_the_cause(district: Registry) -> None:
    with writing(district) as connection:
        connection.exec_driver_sql("UPDATE sample SET intrusion_id = NULL WHERE code > 'A02'")
        drain(connection)

    assert value(district, "fractionation", "liquid_fraction_most_evolved")[3] == "fewer_than_4_samples"
    assert value(district, "trend", "rank_correlation_mgo_sio2")[3] == "fewer_than_4_samples"
    assert value(district, "population", "far_samples")[3] == "fewer_than_8_complete_analyses"


def test_suite_of_cumulates_says_that_they_are_no_liquids(district: Registry) -> None:
    with writing(district) as connection:
        connection.exec_driver_sql("UPDATE sample SET lithology = 'layered gabbro' WHERE code > 'A01'")
        drain(connection)

    assert value(district, "fractionation", "liquid_fraction_most_evolved")[3] == "cumulates_are_no_liquids"
    said = rows(district, "SELECT trend_quality FROM intrusion_sheet WHERE intrusion = 'Grey sill'")[0][0]
    assert said.startswith("too few samples: 2 of the 4 needed; 2 of 10 samples used;")
    assert "8 cumulates or no liquids" in said


def test_controls_and_partial_digestions_do_not_enter_the_suite(district: Registry) -> None:
    with writing(district) as connection:
        add_samples(connection, ["BLANK1"], 1, **{"kind": "blank"})
        add_samples(connection, ["AR1"], 1)
        store(connection, {"BLANK1": liquids()[0]}, "K2")
        store(connection, {"AR1": liquids()[0]}, "K3", "aqua_regia")
        drain(connection)

    _, _, quality, _ = value(district, "samples", "samples_used")
    assert quality.startswith("10 of 11 samples used; 1 not fit")


def test_swapped_sample_is_remarked_and_not_changed(district: Registry) -> None:
    granite = dict(zip(OXIDES, (72.5, 0.25, 14.3, 1.9, 0.05, 0.5, 1.6, 3.9, 4.3, 0.1), strict=True))
    with writing(district) as connection:
        add_samples(connection, ["SW1"], 1, lithology="gabbro")
        store(connection, {"SW1": {**granite, "LOI": 0.5, **TRACES}}, "K2")
        drain(connection)
    found = rows(
        district,
        "SELECT sample_code, code, value, text FROM warning_sheet "
        "WHERE substr(code, 1, 10) = 'chemistry_' ORDER BY code",
    )

    assert [row[:2] for row in found] == [
        ("SW1", "chemistry_disagrees_with_lithology"),
        ("SW1", "chemistry_far_from_intrusion"),
    ]
    assert found[0][2] == pytest.approx(72.9, abs=0.3) and "SiO2 72.86 wt%" in found[0][3]
    assert found[1][2] > 8.0 and "among the 11 compared samples of Grey sill (limit 9.5)" in found[1][3]
    with reading(district) as connection:
        (far,) = far_samples(connection)
        (logged,) = disagreeing_samples(connection)
        (both,) = suspected_swaps(connection)
        assert far_samples(connection, "Green stock") == []
    assert far["component"] in COMPARED_OXIDES and far["distance"] > far["distance_limit"]
    assert (logged["allowed_low_wt"], logged["allowed_high_wt"]) == (40.0, 54.0)
    assert "logged gabbro (40 to 54 wt% SiO2" in logged["text"]
    assert both["codes"] == ["chemistry_far_from_intrusion", "chemistry_disagrees_with_lithology"]
    assert len(both["texts"]) == 2 and both["sample_code"] == "SW1"
    assert "1 far from the rest" in value(district, "samples", "samples_used")[2]
    assert rows(district, "SELECT lithology, intrusion FROM sample_sheet WHERE sample_code = 'SW1'") == [
        ("gabbro", "Grey sill")
    ]


def altered(rock: dict[str, float], mass_ratio: float) -> dict[str, float]:
    """The rock after losing half its soda and lime and gaining 3 g potash and the rest as volatiles (invented)."""
    gained = {**rock, "Na2O": 0.5 * rock["Na2O"], "CaO": 0.5 * rock["CaO"], "K2O": rock["K2O"] + 3.0}
    changed = {name: value * mass_ratio for name, value in gained.items()}
    changed["LOI"] = 100.0 - sum(changed[name] for name in OXIDES)
    return changed


def test_mass_change_made_forward_is_found_in_the_view(district: Registry) -> None:
    """Against a named fresh sample the gains come back exactly; a slope below 1 is a gain of mass."""
    fresh = liquids()[5]
    with writing(district) as connection:
        connection.exec_driver_sql("UPDATE intrusion SET fresh_sample = 'A05' WHERE intrusion_id = 1")
        add_samples(connection, ["ALT1"], 1, alteration="phyllic", lithology="gabbro")
        store(connection, {"ALT1": altered(fresh, 0.97)}, "K2")
        drain(connection)
    found = {
        row[0]: row[1:]
        for row in rows(
            district,
            "SELECT component, change_wt, change_percent, isocon_slope, immobile_components, reference_sample, cause "
            "FROM mass_change_sheet WHERE sample_code = 'ALT1'",
        )
    }

    assert found["k2o_wt"][0] == pytest.approx(3.0, abs=2e-4)
    assert found["na2o_wt"][1] == pytest.approx(-50.0, abs=0.01) and found["cao_wt"][1] == pytest.approx(
        -50.0, abs=0.01
    )
    assert found["sio2_wt"][0] == pytest.approx(0.0, abs=2e-3)
    assert found["zr_ppm"][0] == pytest.approx(0.0, abs=1e-6)
    assert found["k2o_wt"][2] == pytest.approx(0.97, abs=1e-9)
    assert found["k2o_wt"][3] == "Al2O3 TiO2 Zr Nb Y Hf Th; ratios 0.97 to 0.97"
    assert found["k2o_wt"][4:] == ("A05", None)
    assert "li_ppm" not in found
    with reading(district) as connection:
        suite = intrusion_suite(connection, "Grey sill")
        sample_id = connection.exec_driver_sql("SELECT sample_id FROM sample WHERE code = 'ALT1'").scalar()
        assert len(sample_mass_change(connection, sample_id)) == len(found)
    assert suite is not None
    (told,) = suite["mass_change"]
    assert told["mass_change_percent"] == pytest.approx(100.0 * (1.0 / 0.97 - 1.0))
    assert {row["component"]: row["change_wt"] for row in told["components"]}["k2o_wt"] == found["k2o_wt"][0]
    assert suite["named"] == {"parent_sample": None, "fresh_sample": "A05"} and suite["is_stale"] is False


@pytest.mark.parametrize(
    ("setup", "cause"),
    [
        (
            "UPDATE intrusion SET fresh_sample = 'Z9' WHERE intrusion_id = 1",
            "named_fresh_sample_is_no_computed_sample_of",
        ),
        ("UPDATE sample SET intrusion_id = NULL WHERE code BETWEEN 'A02' AND 'A09'", "fewer_than_3_fresh_samples"),
    ],
)
def test_altered_sample_without_a_fresh_parent_gives_the_cause(district: Registry, setup: str, cause: str) -> None:
    with writing(district) as connection:
        add_samples(connection, ["ALT1"], 1, alteration="phyllic")
        store(connection, {"ALT1": altered(liquids()[5], 0.97)}, "K2")
        connection.exec_driver_sql(setup)
        drain(connection)
    found = rows(district, "SELECT component, change_wt, isocon_slope, cause FROM mass_change_sheet")

    assert len(found) == 1 and tuple(found[0][:3]) == (None, None, None)
    assert found[0][3].startswith(cause)


def test_altered_sample_that_leaves_its_intrusion_leaves_no_rows(district: Registry) -> None:
    with writing(district) as connection:
        add_samples(connection, ["ALT1"], 1, alteration="phyllic")
        store(connection, {"ALT1": altered(liquids()[5], 0.97)}, "K2")
        drain(connection)
        assert connection.exec_driver_sql("SELECT count(*) FROM mass_change").scalar() == 1
        connection.exec_driver_sql("UPDATE sample SET intrusion_id = 2 WHERE code = 'ALT1'")
        drain(connection)
        assert connection.exec_driver_sql("SELECT intrusion_id, cause FROM mass_change").fetchall() == [
            (2, "fewer_than_3_fresh_samples")
        ]
        connection.exec_driver_sql("DELETE FROM sample WHERE code = 'ALT1'")
        assert connection.exec_driver_sql("SELECT count(*) FROM mass_change").scalar() == 0
