"""The queries behind the diagrams, on both engines. Every name and number is invented, to test branches only."""

from __future__ import annotations

import pytest
import sqlalchemy as sa

from registry.diagrams import DIAGRAMS
from registry.judging import install_shipped_definitions
from registry.store import tables
from registry.store.engine import Registry, reading, writing
from registry.store.reading.columns import load_columns
from registry.store.reading.diagrams import cause_words, diagram_rows, point_details
from registry.store.reading.drawn_samples import GROUPS, Group
from registry.store.reading.filters import Filter, parse_filter
from registry.targets.definition import load_definitions


@pytest.fixture
def registry(any_registry: Registry) -> Registry:
    """Two samples, one a blank, without results: a derived row would need the whole pipeline."""
    with writing(any_registry) as connection:
        install_shipped_definitions(connection, tuple(load_definitions().values()))
        area = connection.execute(sa.insert(tables.area).values(name="North")).inserted_primary_key[0]
        body = connection.execute(sa.insert(tables.intrusion).values(name="Aster", area_id=area))
        values = {"intrusion_id": body.inserted_primary_key[0], "lithology": "granite"}
        for code, kind in (("A-1", "core"), ("A-2", "blank")):
            connection.execute(sa.insert(tables.sample).values(code=code, kind=kind, **values))
        connection.execute(sa.insert(tables.composition).values(sample_id=1, sio2_wt=70.0, sr_ppm=300.0, y_ppm=12.0,
                                                                qualifiers="." * 81, digestions="." * 81))  # fmt: skip
    return any_registry


@pytest.mark.parametrize("by", [*GROUPS, "porphyry_copper"])
def test_diagram_rows_hold_key_control_group_values_and_causes(registry: Registry, by: str) -> None:
    group = Group(by) if by in GROUPS else Group("verdict", by)
    with reading(registry) as connection:
        columns = load_columns(connection)
        for diagram in DIAGRAMS.values():
            chosen = [columns[name] for name in diagram.columns]
            rows = diagram_rows(connection, Filter(), chosen, group)
            assert [(row[0], row[1]) for row in rows] == [(1, 0), (2, 1)]
            assert {len(row) for row in rows} == {3 + 2 * len(chosen)}
    expected = {"intrusion": "Aster", "area": "North", "sample_kind": "core", "lithology": "granite"}
    assert rows[0][2] == expected.get(by)


def test_diagram_rows_take_every_condition_of_the_filter(registry: Registry) -> None:
    with reading(registry) as connection:
        columns = load_columns(connection)
        chosen = [columns["sr_ppm"], columns["y_ppm"]]
        group = Group("verdict", "tin")
        some = parse_filter({"text": ["aster"], "area": ["North"], "kind": ["core"], "sr_ppm_min": ["10"]}, columns, [])
        assert [row[3:5] for row in diagram_rows(connection, some, chosen, group)] == [(300.0, 12.0)]
        judged = parse_filter({"target": ["tin"], "verdict": ["favourable"], "site": ["X"]}, columns, ["tin"])
        assert diagram_rows(connection, judged, chosen, Group("verdict", "porphyry_copper")) == []
        assert [row[0] for row in diagram_rows(connection, judged, chosen, group, ["A-2", "none"])] == [2]


def test_point_details_and_causes_are_read_by_key(registry: Registry) -> None:
    with reading(registry) as connection:
        details = point_details(connection, [1, 2, 99])
        assert {key: detail["code"] for key, detail in details.items()} == {1: "A-1", 2: "A-2"}
        assert details[1]["digestions"] == "." * 81
        assert point_details(connection, []) == {}
        assert "an analyte it needs" in cause_words(connection)["a"]
