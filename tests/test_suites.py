"""Whole intrusions and areas, from results to the views, on both engines. All rocks and places are invented.

The suite is made forward: a basalt loses plagioclase, pyroxene and olivine, its incompatible elements rise as 1/F.
"""

from __future__ import annotations

import subprocess
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
import sqlalchemy as sa

from registry.petrology.intrusion_heat import theta_centre_interval
from registry.petrology.minerals import fractionating_minerals
from registry.petrology.outliers import COMPARED_OXIDES
from registry.refresh import drain, refresh_registry
from registry.store import stale_groups
from registry.store.engine import Registry, reading, writing
from registry.store.reading.outliers import disagreeing_samples, far_samples, suspected_swaps
from registry.store.reading.suites import area_summaries, area_summary, intrusion_suite, sample_mass_change
from registry.suites import refresh_groups

OXIDES = {
    "SiO2": 50.5, "TiO2": 1.1, "Al2O3": 15.5, "FeOT": 9.6, "MnO": 0.17, "MgO": 8.6, "CaO": 11.0, "Na2O": 2.4,
    "K2O": 0.5, "P2O5": 0.13,
}  # fmt: skip
COLUMNS = {
    "SiO2": "sio2_wt", "TiO2": "tio2_wt", "Al2O3": "al2o3_wt", "FeOT": "feot_wt", "MnO": "mno_wt", "MgO": "mgo_wt",
    "CaO": "cao_wt", "Na2O": "na2o_wt", "K2O": "k2o_wt", "P2O5": "p2o5_wt",
}  # fmt: skip
TRACES = {"Th": 0.6, "Nb": 4.0, "La": 6.0, "Zr": 80.0, "U": 0.2, "Y": 22.0, "Hf": 2.0, "Ce": 15.0, "Nd": 9.0, "Rb": 9.0}
SHARES = {"olivine": 0.2, "clinopyroxene": 0.35, "anorthite": 0.28, "albite": 0.12, "magnetite": 0.05}
LEFT = np.linspace(1.0, 0.62, 10)


def liquids() -> list[dict[str, float]]:
    """Ten liquids: the parent less what crystallised, closed to 99.5 with 0.5 % loss on ignition."""
    phases = fractionating_minerals(50.5, 61.5)
    parent = np.array([OXIDES[name] for name in OXIDES]) * 100.0 / sum(OXIDES.values())
    solid = np.sum([share * np.array([phases[p][COLUMNS[o]] for o in OXIDES]) for p, share in SHARES.items()], axis=0)
    made = []
    for left in LEFT:
        liquid = (parent - (1.0 - left) * solid) / left
        assert (liquid > 0.0).all()
        rock = dict(zip(OXIDES, 0.995 * liquid, strict=True))
        made.append({**rock, "LOI": 0.5, **{name: value / left for name, value in TRACES.items()}})
    return made


def store(connection: sa.Connection, rocks: dict[str, dict[str, float]], batch: str, digestion: str = "fusion") -> None:
    """Insert one batch with these rocks by sample code; the samples must be there."""
    number = connection.exec_driver_sql("SELECT coalesce(max(batch_id), 0) + 1 FROM batch").scalar()
    connection.execute(
        sa.text("INSERT INTO batch (batch_id, code, imported_at) VALUES (:n, :code, '2026-01-01T00:00:00Z')"),
        {"n": number, "code": batch},
    )
    analytes = list(next(iter(rocks.values())))
    for position, name in enumerate(analytes):
        unit = "ppm" if name in TRACES else "wt%"
        connection.execute(
            sa.text(
                "INSERT INTO batch_column (batch_column_id, batch_id, position, analyte, unit, digestion) "
                "VALUES (:id, :n, :p, :a, :u, :d)"
            ),
            {"id": 1000 * number + position, "n": number, "p": position, "a": name, "u": unit, "d": digestion},
        )
    for line, (code, rock) in enumerate(rocks.items(), 1):
        aliquot = 1000 * number + line
        connection.execute(
            sa.text(
                "INSERT INTO aliquot (aliquot_id, sample_id, batch_id, line_no, kind) "
                "SELECT :id, sample_id, :n, :line, 'original' FROM sample WHERE code = :code"
            ),
            {"id": aliquot, "n": number, "line": line, "code": code},
        )
        connection.execute(
            sa.text("INSERT INTO result (aliquot_id, column_id, value) VALUES (:a, :c, :v)"),
            [{"a": aliquot, "c": 1000 * number + p, "v": rock[name]} for p, name in enumerate(analytes)],
        )


def add_samples(connection: sa.Connection, codes: list[str], intrusion: int, **columns: str) -> None:
    row = {"kind": "core", **columns}
    names = ", ".join(row)
    for code in codes:
        connection.execute(
            sa.text(f"INSERT INTO sample (code, intrusion_id, {names}) VALUES (:code, :i, :{', :'.join(row)})"),
            {"code": code, "i": intrusion, **row},
        )


@pytest.fixture
def district(any_registry: Registry) -> Registry:
    """A gabbro sill of ten liquids, one altered rock, and a second body without samples."""
    with writing(any_registry) as connection:
        connection.exec_driver_sql(
            "INSERT INTO area (name, heat_flow_mw_m2, surface_temperature_c, conductivity_w_m_k, "
            "heat_production_uw_m3, heat_production_depth_m, moho_depth_m) "
            "VALUES ('North Block', 60, 10, 2.5, 2, 10000, 35000)"
        )
        connection.exec_driver_sql("INSERT INTO area (name, heat_flow_mw_m2) VALUES ('South Block', 60)")
        connection.exec_driver_sql(
            "INSERT INTO intrusion (name, area_id, shape, half_width_m, depth_to_top_m, age_ma, age_sigma_ma) "
            "VALUES ('Grey sill', 1, 'slab', 400, 1500, 0.05, 0.01)"
        )
        connection.exec_driver_sql("INSERT INTO intrusion (name, age_ma) VALUES ('Green stock', 30)")
        codes = [f"A{number:02d}" for number in range(len(LEFT))]
        add_samples(connection, codes, 1, lithology="gabbro")
        store(connection, dict(zip(codes, liquids(), strict=True)), "K1")
        drain(connection)
    return any_registry


def rows(registry: Registry, sql: str) -> list[Any]:
    with reading(registry) as connection:
        return list(connection.exec_driver_sql(sql).fetchall())


def value(registry: Registry, model: str, quantity: str, intrusion: str = "Grey sill") -> tuple[Any, ...]:
    found = rows(
        registry,
        f"SELECT value, unit, quality, cause FROM suite_sheet WHERE intrusion = '{intrusion}' AND model = '{model}' "
        f"AND quantity = '{quantity}'",
    )
    assert len(found) == 1, (model, quantity, found)
    return tuple(found[0])


def waiting(registry: Registry) -> list[tuple[str, int]]:
    return [tuple(row) for row in rows(registry, "SELECT kind, group_id FROM stale_group ORDER BY kind, group_id")]


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


EDITS = [
    ("UPDATE intrusion SET age_ma = 0.1 WHERE intrusion_id = 1", [("intrusion", 1)]),
    ("UPDATE intrusion SET parent_sample = 'A03' WHERE intrusion_id = 2", [("intrusion", 2)]),
    ("UPDATE intrusion SET name = 'Blue stock' WHERE intrusion_id = 2", []),
    ("INSERT INTO intrusion (name) VALUES ('Red plug')", [("intrusion", 3)]),
    ("UPDATE sample SET intrusion_id = 2 WHERE code = 'A04'", [("intrusion", 1), ("intrusion", 2)]),
    ("UPDATE sample SET intrusion_id = NULL WHERE code = 'A04'", [("intrusion", 1)]),
    ("UPDATE sample SET code = 'B04' WHERE code = 'A04'", [("intrusion", 1)]),
    ("DELETE FROM sample WHERE code = 'A04'", [("intrusion", 1)]),
    ("UPDATE area SET heat_flow_mw_m2 = 80 WHERE area_id = 1", [("area", 1)]),
    ("UPDATE area SET moho_depth_m = 30000 WHERE area_id = 2", [("area", 2)]),
    ("UPDATE area SET name = 'Far Block' WHERE area_id = 2", []),
    ("INSERT INTO area (name) VALUES ('East Block')", [("area", 3)]),
    (
        "INSERT INTO setting (name, value) VALUES ('convention.thermal_diffusivity_m2_s', '2e-6')",
        [("intrusion", 1), ("intrusion", 2)],
    ),
]


@pytest.mark.parametrize(("edit", "marked"), EDITS)
def test_edit_marks_exactly_the_groups_it_touches(district: Registry, edit: str, marked: list[tuple[str, int]]) -> None:
    assert waiting(district) == []
    with writing(district) as connection:
        connection.exec_driver_sql(edit)
    assert waiting(district) == marked
    refresh_registry(district)
    assert waiting(district) == []


@pytest.mark.parametrize("engine", ["sqlite", pytest.param("postgresql", marks=pytest.mark.postgresql)])
def test_edit_from_a_debian_client_is_computed_by_the_next_refresh(
    engine: str, request: pytest.FixtureRequest, client_program: Callable[[str], str]
) -> None:
    registry: Registry = request.getfixturevalue(f"{engine}_registry")
    with writing(registry) as connection:
        connection.exec_driver_sql(
            "INSERT INTO intrusion (name, shape, half_width_m, depth_to_top_m, age_ma, age_sigma_ma) "
            "VALUES ('Grey sill', 'slab', 400, 1500, 0.05, 0.01)"
        )
        drain(connection)
    before = rows(registry, "SELECT theta_centre FROM intrusion_sheet")[0][0]
    edit = "UPDATE intrusion SET age_ma = 0.005"
    if engine == "sqlite":
        command = [client_program("sqlite3"), str(registry.path), edit]
    else:
        url = sa.make_url(registry.url)
        command = [
            client_program("psql"),
            "-q",
            "-h",
            str(url.query["host"]),
            "-U",
            "plutonbook",
            "-d",
            str(url.database),
        ]
        command += ["-c", edit]
    subprocess.run(command, check=True, capture_output=True, timeout=60)

    assert waiting(registry) == [("intrusion", 1)]
    refresh_registry(registry)
    assert rows(registry, "SELECT theta_centre FROM intrusion_sheet")[0][0] > before


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


def test_stale_groups_of_an_unknown_kind_are_refused(district: Registry) -> None:
    with writing(district) as connection:
        with pytest.raises(ValueError, match="'lake' is no group of samples; expected one of"):
            stale_groups.pending(connection, "lake")
        assert refresh_groups(connection) == 0
        stale_groups.mark_all(connection)
        assert refresh_groups(connection) == 4


def test_new_results_compute_their_own_intrusion_only(district: Registry) -> None:
    with writing(district) as connection:
        connection.exec_driver_sql("UPDATE intrusion_derived SET trend_quality = 'left alone' WHERE intrusion_id = 2")
        add_samples(connection, ["A10"], 1)
        store(connection, {"A10": liquids()[4]}, "K2")
        drain(connection)

    assert value(district, "samples", "samples_used")[0] == 11.0
    assert rows(district, "SELECT trend_quality FROM intrusion_derived WHERE intrusion_id = 2") == [("left alone",)]


def test_small_refresh_leaves_groups_until_their_samples_are_done(district: Registry) -> None:
    with writing(district) as connection:
        connection.exec_driver_sql("UPDATE sample SET lithology = 'dolerite'")
        assert drain(connection, limit=4) == 4
        assert connection.exec_driver_sql("SELECT count(*) FROM stale_group").scalar() == 1
        drain(connection, limit=100)
        assert connection.exec_driver_sql("SELECT count(*) FROM stale_group").scalar() == 0


def test_deleted_intrusion_and_area_take_their_rows_along(district: Registry) -> None:
    with writing(district) as connection:
        connection.exec_driver_sql("DELETE FROM sample")
        connection.exec_driver_sql("DELETE FROM intrusion WHERE intrusion_id = 1")
        connection.exec_driver_sql("DELETE FROM area WHERE area_id = 1")

    for table in ("intrusion_derived", "suite_row"):
        assert rows(district, f"SELECT DISTINCT intrusion_id FROM {table}") == [(2,)]
    assert rows(district, "SELECT area_id FROM area_derived") == [(2,)]
    assert waiting(district) == []


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
    assert found[0][2] == pytest.approx(72.9, abs=0.3) and "SiO2 72.863 wt%" in found[0][3]
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


def test_intrusion_page_is_stale_between_edit_and_refresh(district: Registry) -> None:
    with writing(district) as connection:
        connection.exec_driver_sql("UPDATE intrusion SET age_ma = 1 WHERE intrusion_id = 2")
    with reading(district) as connection:
        sill, stock = intrusion_suite(connection, "Grey sill"), intrusion_suite(connection, "Green stock")
        assert intrusion_suite(connection, "No such body") is None

    assert sill is not None and stock is not None
    assert (sill["is_stale"], stock["is_stale"]) == (False, True)
    assert [model["code"] for model in sill["models"]][:3] == ["samples", "population", "trend"]
