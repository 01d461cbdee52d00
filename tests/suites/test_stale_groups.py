"""Which edit makes which intrusions and areas stale, on both engines and from the clients a geologist has."""

from __future__ import annotations

import subprocess
from collections.abc import Callable

import pytest
import sqlalchemy as sa

from registry.refresh import drain, refresh_registry
from registry.store import stale_groups
from registry.store.engine import Registry, reading, writing
from registry.store.reading.suites import intrusion_suite
from registry.suites import refresh_groups
from tests.suites.grey_sill import add_samples, liquids, rows, store, value


def waiting(registry: Registry) -> list[tuple[str, int]]:
    return [tuple(row) for row in rows(registry, "SELECT kind, group_id FROM stale_group ORDER BY kind, group_id")]


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


def test_intrusion_page_is_stale_between_edit_and_refresh(district: Registry) -> None:
    with writing(district) as connection:
        connection.exec_driver_sql("UPDATE intrusion SET age_ma = 1 WHERE intrusion_id = 2")
    with reading(district) as connection:
        sill, stock = intrusion_suite(connection, "Grey sill"), intrusion_suite(connection, "Green stock")
        assert intrusion_suite(connection, "No such body") is None

    assert sill is not None and stock is not None
    assert (sill["is_stale"], stock["is_stale"]) == (False, True)
    assert [model["code"] for model in sill["models"]][:3] == ["samples", "population", "trend"]
