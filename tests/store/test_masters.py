"""Master data brought in by code: new, changed, identical and faulty rows. Every name and number is invented."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from registry.store import masters
from registry.store.engine import Registry, reading, writing

AREAS = {"area": ["North Block", "South Block"], "epsg": [32633, None], "heat_flow_mw_m2": [85.0, None]}
SITES = {
    "site_code": ["XH1", "XO1"],
    "site_kind": ["drill_hole", "outcrop"],
    "area": ["North Block", None],
    "easting": [600000.0, None],
    "northing": [5500000.0, None],
    "elevation_m": [300.0, 410.0],
    "depth_m": [250.0, None],
    "azimuth_reference": ["grid", None],
    "longitude": [None, 16.4],
    "latitude": [None, 49.65],
}
SURVEYS = {"site_code": ["XH1", "XH1"], "depth_m": [0.0, 100.0], "azimuth_deg": [0.0, 0.0], "dip_deg": [-45.0, -45.0]}
INTRUSIONS = {"intrusion": ["Grey stock"], "area": ["South Block"], "shape": ["sphere"], "half_width_m": [900.0]}
SAMPLES = {
    "sample_code": ["A1", "A2", "O1", "D1", "B1"],
    "sample_kind": ["core", "core", "outcrop", "duplicate", "blank"],
    "site_code": ["XH1", "XH1", "XO1", None, None],
    "from_m": [49.0, 150.0, None, None, None],
    "to_m": [51.0, 152.0, None, None, None],
    "intrusion": ["Grey stock", None, None, None, None],
    "lithology": ["granite", "gabbro", None, None, None],
    "duplicate_of": [None, None, None, "A2", None],
    "pulp_available": [True, False, None, None, None],
}


def bring(connection: Any, kind: str, rows: dict[str, list[Any]]) -> masters.Outcome:
    count = len(next(iter(rows.values())))
    return masters.upsert(connection, kind, rows, np.arange(2, count + 2), f"{kind}.csv")


def changed(rows: dict[str, list[Any]], **cells: tuple[int, Any]) -> dict[str, list[Any]]:
    copy = {name: list(column) for name, column in rows.items()}
    for name, (row, value) in cells.items():
        copy.setdefault(name, [None] * len(next(iter(copy.values()))))[row] = value
    return copy


@pytest.fixture
def filled(any_registry: Registry) -> Registry:
    with writing(any_registry) as connection:
        for kind, rows in (
            ("areas", AREAS), ("sites", SITES), ("surveys", SURVEYS), ("intrusions", INTRUSIONS), ("samples", SAMPLES)
        ):  # fmt: skip
            outcome = bring(connection, kind, rows)
            assert outcome.problems == []
            assert outcome.added == len(next(iter(rows.values())))
            assert outcome.changes == []
    return any_registry


def test_samples_stand_in_the_sheet_with_what_they_refer_to(filled: Registry) -> None:
    with reading(filled) as connection:
        rows = connection.exec_driver_sql(
            "SELECT sample_code, sample_kind, area, site_code, from_m, intrusion, lithology, is_stale "
            "FROM sample_sheet ORDER BY sample_code"
        ).fetchall()
        original = connection.exec_driver_sql(
            "SELECT o.code FROM sample AS s JOIN sample AS o ON o.sample_id = s.duplicate_of WHERE s.code = 'D1'"
        ).scalar()
    assert [tuple(row) for row in rows] == [
        ("A1", "core", "North Block", "XH1", 49.0, "Grey stock", "granite", 1),
        ("A2", "core", "North Block", "XH1", 150.0, None, "gabbro", 1),
        ("B1", "blank", None, None, None, None, None, 1),
        ("D1", "duplicate", None, None, None, None, None, 1),
        ("O1", "outcrop", None, "XO1", None, None, None, 1),
    ]
    assert original == "A2"


def test_sites_take_their_system_from_the_area_and_get_longitude_and_latitude(filled: Registry) -> None:
    with reading(filled) as connection:
        hole, rock = connection.exec_driver_sql("SELECT epsg, longitude, latitude FROM site ORDER BY code").fetchall()
    assert hole[0] == 32633
    assert hole[1] == pytest.approx(16.38, abs=0.01)
    assert hole[2] == pytest.approx(49.64, abs=0.01)
    assert tuple(rock) == (None, 16.4, 49.65)


def test_samples_lie_down_their_hole(filled: Registry) -> None:
    with reading(filled) as connection:
        rows = connection.exec_driver_sql(
            "SELECT code, northing, elevation_m, position_basis, longitude FROM sample ORDER BY code"
        ).fetchall()
    by_code = {row[0]: tuple(row[1:]) for row in rows}
    half = np.sqrt(0.5)
    assert by_code["A1"][:3] == (
        pytest.approx(5500000 + 50 * half),
        pytest.approx(300 - 50 * half),
        "desurveyed, middle of the interval",
    )
    assert by_code["A2"][2] == "desurveyed, straight on beyond the last station"
    assert by_code["O1"][1:] == (410.0, "station", 16.4)
    assert by_code["B1"] == (None, None, None, None)


def test_changed_survey_moves_the_samples_of_its_hole(filled: Registry) -> None:
    with writing(filled) as connection:
        outcome = bring(connection, "surveys", changed(SURVEYS, dip_deg=(0, -90.0)))
        assert outcome.changes == ["survey of XH1 0: dip_deg -45 -> -90"]
        northing = connection.exec_driver_sql("SELECT northing FROM sample WHERE code = 'A1'").scalar()
    assert northing < 5500000 + 50 * np.sqrt(0.5) - 1


def test_identical_rows_do_nothing(filled: Registry) -> None:
    with writing(filled) as connection:
        connection.exec_driver_sql("DELETE FROM stale")
        before = connection.exec_driver_sql("SELECT code, row_version FROM sample ORDER BY code").fetchall()
        for kind, rows in (("areas", AREAS), ("sites", SITES), ("surveys", SURVEYS), ("intrusions", INTRUSIONS),
                           ("samples", SAMPLES)):  # fmt: skip
            outcome = bring(connection, kind, rows)
            assert (outcome.added, outcome.changes, outcome.problems) == (0, [], [])
        after = connection.exec_driver_sql("SELECT code, row_version FROM sample ORDER BY code").fetchall()
        assert after == before
        assert connection.exec_driver_sql("SELECT count(*) FROM stale").scalar() == 0


def test_blank_cells_never_erase(filled: Registry) -> None:
    with writing(filled) as connection:
        outcome = bring(connection, "samples", {"sample_code": ["A1"], "lithology": [None], "from_m": [None]})
        assert outcome.changes == []
        assert connection.exec_driver_sql("SELECT lithology FROM sample WHERE code = 'A1'").scalar() == "granite"


def test_changes_are_listed_in_words_and_mark_the_sample_stale(filled: Registry) -> None:
    rows = {"sample_code": ["A1", "A2"], "lithology": ["granite", "norite"], "intrusion": [None, "Grey stock"],
            "density_kg_m3": [2650.0, None], "site_code": ["XO1", None]}  # fmt: skip
    with writing(filled) as connection:
        connection.exec_driver_sql("DELETE FROM stale")
        outcome = bring(connection, "samples", rows)
        stale = connection.exec_driver_sql(
            "SELECT code FROM sample JOIN stale ON stale.sample_id = sample.sample_id ORDER BY code"
        ).scalars().all()  # fmt: skip
    assert sorted(outcome.changes) == [
        "sample A1: density_kg_m3 (blank) -> 2650",
        "sample A1: site_code XH1 -> XO1",
        "sample A2: intrusion (blank) -> Grey stock",
        "sample A2: lithology gabbro -> norite",
    ]
    assert stale == ["A1", "A2"]


def test_codes_are_trimmed_and_composed_but_keep_their_case(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        first = bring(connection, "samples", {"sample_code": [" Kru\u0308ger-1 "]})
        second = bring(connection, "samples", {"sample_code": ["Kr\u00fcger-1", "KR\u00dcGER-1"]})
        codes = connection.exec_driver_sql("SELECT code, kind FROM sample ORDER BY sample_id").fetchall()
    assert (first.added, second.added) == (1, 1)
    assert [tuple(row) for row in codes] == [("Kr\u00fcger-1", "unknown"), ("KR\u00dcGER-1", "unknown")]
    (problem,) = second.problems
    assert problem.severity == "warning"
    assert problem.sentence() == (
        "samples.csv, row 3, column 'sample_code': a registered sample is written almost the same; "
        "found 'KR\u00dcGER-1', expected perhaps 'Kr\u00fcger-1'; "
        "they are kept apart; correct the code if they are the same."
    )


FAULTS = [
    ("sites", {"site_code": ["XH9"], "site_kind": ["drill_hole"], "area": ["Nort Block"]},
     "sites.csv, row 2, column 'area': this area is not in the registry; found 'Nort Block', "
     "expected a registered area; did you mean 'North Block'? import the area first, or correct the code."),
    ("sites", {"site_code": ["XH9"]}, "a new site needs its kind; expected drill_hole or outcrop"),
    ("sites", {"site_code": ["XH9"], "site_kind": ["shaft"]}, "this word is not known; found 'shaft'"),
    ("sites", {"site_code": ["XH9"], "site_kind": ["outcrop"], "easting": [1000.0], "northing": [2000.0]},
     "say nothing without their coordinate system"),
    ("sites", {"site_code": ["XH9"], "site_kind": ["outcrop"], "easting": [1.0], "northing": [2e6], "epsg": [29999]},
     "this coordinate system is not known; found '29999'"),
    ("sites", {"site_code": ["XH9"], "site_kind": ["outcrop"], "easting": [1e9], "northing": [1e9], "epsg": [32633]},
     "lie outside the system EPSG:32633"),
    ("surveys", {"site_code": ["XH1"], "depth_m": [300.0], "azimuth_deg": [0.0], "dip_deg": [-60.0]},
     "this lies beyond the end of hole XH1; found '300', expected at most 250 m"),
    ("surveys", {"site_code": ["XO1"], "depth_m": [1.0], "azimuth_deg": [0.0], "dip_deg": [-60.0]},
     "site XO1 is an outcrop and has no depths"),
    ("intervals", {"site_code": ["XH1"], "from_m": [200.0], "to_m": [260.0], "lithology": ["granite"]},
     "this lies beyond the end of hole XH1; found '260'"),
    ("samples", {"sample_code": ["N1"], "site_code": ["XH1"], "from_m": [10.0], "to_m": [251.0]},
     "this lies beyond the end of hole XH1"),
    ("samples", {"sample_code": ["A1"], "from_m": [60.0]}, "runs backwards together with the stored depth"),
    ("samples", {"sample_code": ["N1"], "duplicate_of": ["A9"]}, "this sample is not in the registry; found 'A9'"),
    ("samples", {"sample_code": ["N1", "N1"]},
     "this sample stands twice; found 'N1', expected one row (the first is in row 2)"),
    ("intrusions", {"intrusion": [None], "shape": ["sphere"]}, "the code is blank"),
]  # fmt: skip


@pytest.mark.parametrize(("kind", "rows", "sentence"), FAULTS)
def test_faulty_row_is_told_and_nothing_is_written(
    filled: Registry, kind: str, rows: dict[str, list[Any]], sentence: str
) -> None:
    with writing(filled) as connection:
        before = masters_state(connection)
        outcome = bring(connection, kind, rows)
        assert masters_state(connection) == before
    assert [problem for problem in outcome.problems if sentence in problem.sentence()] != []
    assert outcome.added == 0
    assert outcome.changes == []


def masters_state(connection: Any) -> list[Any]:
    tables = ("area", "site", "survey", "lithology_interval", "intrusion", "sample")
    return [connection.exec_driver_sql(f"SELECT * FROM {table} ORDER BY 1").fetchall() for table in tables]


def test_all_faults_of_a_file_are_told_at_once(filled: Registry) -> None:
    rows = {"sample_code": ["N1", "N2", "N3"], "site_code": ["XH1", "YH1", "XH1"], "from_m": [1.0, 1.0, 900.0],
            "to_m": [2.0, 2.0, 901.0], "intrusion": ["Gray stock", None, None]}  # fmt: skip
    with writing(filled) as connection:
        outcome = bring(connection, "samples", rows)
    assert [problem.row for problem in outcome.problems] == [3, 2, 4]
    assert {problem.column for problem in outcome.problems} == {"site_code", "intrusion", "to_m"}


def test_interval_over_a_stored_one_is_questioned(filled: Registry) -> None:
    rows = {"site_code": ["XH1"], "from_m": [0.0], "to_m": [50.0], "lithology": ["granite"], "description": [None]}
    with writing(filled) as connection:
        assert bring(connection, "intervals", rows).problems == []
        again = bring(connection, "intervals", {**rows, "lithology": ["gabbro"]})
        assert again.changes == ["interval of XH1 0 50: lithology granite -> gabbro"]
        assert again.problems == []
        over = bring(connection, "intervals", {**rows, "from_m": [40.0], "to_m": [60.0]})
    assert over.added == 1
    (problem,) = over.problems
    assert problem.severity == "warning"
    assert "overlaps one of its hole that is stored already; found '40 to 60'" in problem.sentence()


def test_sample_with_coordinates_of_its_own_keeps_them(filled: Registry) -> None:
    rows = {"sample_code": ["F1"], "sample_kind": ["float"], "site_code": ["XO1"], "easting": [500000.0],
            "northing": [0.0], "epsg": [32633]}  # fmt: skip
    with writing(filled) as connection:
        assert bring(connection, "samples", rows).problems == []
        row = connection.exec_driver_sql(
            "SELECT easting, longitude, latitude, position_basis FROM sample WHERE code = 'F1'"
        ).one()
    assert row[0] == 500000.0
    assert row[1] == pytest.approx(15.0)
    assert row[2] == pytest.approx(0.0, abs=1e-9)
    assert row[3] == "own coordinates"


def test_sample_functions_find_codes_and_near_ones(filled: Registry) -> None:
    with writing(filled) as connection:
        assert set(masters.sample_ids(connection, {"A1", "B1", "Z9"})) == {"A1", "B1"}
        assert masters.near_codes(connection, ["a1", "QQQQQ"]) == {"a1": "A1"}
        assert len(masters.samples_of_kinds(connection, ("blank", "duplicate"))) == 2
        added = masters.add_samples(connection, ["N1", "N2"])
        assert masters.sample_ids(connection, {"N1", "N2"}) == added
        assert masters.verdict_counts(connection) == {}


def test_unknown_kind_of_data_is_a_fault_of_the_caller(sqlite_registry: Registry) -> None:
    with writing(sqlite_registry) as connection, pytest.raises(KeyError, match="planets"):
        masters.upsert(connection, "planets", {}, [], "planets.csv")


def test_many_samples_come_in_and_are_found_again(any_registry: Registry) -> None:
    """More codes than one statement asks for."""
    codes = [f"M{number:05d}" for number in range(1203)]
    with writing(any_registry) as connection:
        assert bring(connection, "samples", {"sample_code": codes}).added == 1203
        again = bring(connection, "samples", {"sample_code": codes, "lithology": ["granite"] * 1203})
        assert (again.added, len(again.changes)) == (0, 1203)


def test_new_codes_of_one_file_written_almost_the_same_are_remarked_with_both_rows(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        outcome = bring(connection, "samples", {"sample_code": ["S1", "S2", "s-1", "S01"]})
        again = bring(connection, "samples", {"sample_code": ["S1", "S2", "s-1", "S01"]})
    assert outcome.added == 4
    assert [problem.severity for problem in outcome.problems] == ["warning", "warning"]
    assert outcome.problems[0].sentence() == (
        "samples.csv, row 4, column 'sample_code': another sample of the file is written almost the same; "
        "found 's-1', expected perhaps 'S1' of row 2; they are kept apart; correct one if they are the same."
    )
    assert again.problems == []
