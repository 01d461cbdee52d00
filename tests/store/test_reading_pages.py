"""What the other pages read, on both engines: a sample's sections, batches, targets, methods, places. Invented rows."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pytest
import sqlalchemy as sa

from registry.explain import explain_sample
from registry.judging import install_shipped_definitions
from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.refresh import drain
from registry.standing import standings
from registry.store import tables
from registry.store.engine import Registry, reading, writing
from registry.store.reading import batches, editing, intrusions, methods, places, sample, sites, start, targets
from registry.store.reading.columns import load_columns
from registry.store.reading.session import change_mark
from registry.store.sheets import VERDICT_WORDS
from registry.targets.definition import load_definitions

RESULTS = (
    ("SiO2", "wt%", "xrf", 66.0, 0), ("Al2O3", "wt%", "xrf", 15.9, 0), ("Fe2O3T", "wt%", "xrf", 4.1, 0),
    ("MgO", "wt%", "xrf", 1.8, 0), ("CaO", "wt%", "xrf", 3.9, 0), ("Na2O", "wt%", "xrf", 4.4, 0),
    ("K2O", "wt%", "xrf", 2.5, 0), ("TiO2", "wt%", "xrf", 0.45, 0), ("LOI", "wt%", "fusion", 0.9, 0),
    ("Sr", "ppm", "fusion", 640.0, 0), ("Y", "ppm", "fusion", 10.0, 0), ("Zr", "ppm", "four_acid", 120.0, 0),
    ("Sn", "ppm", "fusion", 1.0, 1),
)  # fmt: skip


def _insert(connection: Any, table: sa.Table, **values: Any) -> int:
    return int(connection.execute(sa.insert(table).values(**values)).inserted_primary_key[0])  # type: ignore[index]


@pytest.fixture
def connection(any_registry: Registry) -> Iterator[Any]:
    with writing(any_registry) as writer:
        install_shipped_definitions(writer, tuple(load_definitions().values()))
        area = _insert(writer, tables.area, name="North")
        site = _insert(writer, tables.site, code="DH-1", kind="drill_hole", area_id=area)
        body = _insert(writer, tables.intrusion, name="Aster stock", area_id=area, mapped=1)
        _insert(writer, tables.intrusion, name="Brock gabbro")
        rock = _insert(
            writer, tables.sample, code="R-1", kind="core", site_id=site, intrusion_id=body, from_m=1.0, to_m=2.0
        )
        control = _insert(writer, tables.sample, code="R-2", kind="duplicate", duplicate_of=rock)
        batch = _insert(writer, tables.batch, code="Q-1", imported_at="2026-01-02T03:04:05Z", sha256="1" * 64)
        _insert(
            writer, tables.batch, code="Q-2", imported_at="2026-01-03T03:04:05Z", state="withdrawn", sha256="2" * 64
        )
        columns = [
            _insert(
                writer, tables.batch_column, batch_id=batch, position=n, analyte=analyte, unit=unit, digestion=digestion
            )
            for n, (analyte, unit, digestion, _, _) in enumerate(RESULTS)
        ]
        for line, key in ((2, rock), (3, control)):
            aliquot = _insert(writer, tables.aliquot, sample_id=key, batch_id=batch, line_no=line, kind="original")
            for column, (_, _, _, value, qualifier) in zip(columns, RESULTS, strict=True):
                writer.execute(
                    sa.insert(tables.result).values(
                        aliquot_id=aliquot, column_id=column, value=value, qualifier=qualifier
                    )
                )
        drain(writer)
    with reading(any_registry) as reader:
        yield reader


def test_sample_is_found_with_its_places_and_its_original(connection: Any) -> None:
    found = sample.find_sample(connection, "R-1")
    assert found is not None
    assert (found["site_code"], found["area"], found["intrusion"], found["is_stale"]) == (
        "DH-1",
        "North",
        "Aster stock",
        0,
    )
    twin = sample.find_sample(connection, "R-2")
    assert twin is not None and twin["duplicate_of"] == "R-1"


def test_sample_sections_hold_what_the_views_hold(connection: Any) -> None:
    key = sample.find_sample(connection, "R-1")["sample_id"]  # type: ignore[index]
    for sheet in sample.ROW_SHEETS:
        assert sample.sheet_row(connection, sheet, key)["sample_code"] == "R-1"
    assert len(sample.result_rows(connection, key)) == len(RESULTS)
    assert sample.cause_rows(connection, key)
    assert isinstance(sample.warning_rows(connection, key), list)
    assert sample.change_rows(connection, key) == []
    with pytest.raises(ValueError, match="no sheet of one row a sample"):
        sample.sheet_row(connection, "sample", key)


def test_chosen_values_carry_sign_digestion_and_minimum(connection: Any) -> None:
    key = sample.find_sample(connection, "R-1")["sample_id"]  # type: ignore[index]
    chosen = {value["column"]: value for value in sample.chosen_values(connection, key)}
    assert set(chosen) <= set(CHOSEN_COLUMNS)
    assert (chosen["sn_ppm"]["sign"], chosen["sn_ppm"]["value"]) == ("<", 1.0)
    assert chosen["zr_ppm"]["minimum"] and not chosen["sr_ppm"]["minimum"]
    assert chosen["sio2_wt"]["digestion"] == "XRF"


def test_explanation_gives_every_target_with_reasons_in_order(connection: Any) -> None:
    key = sample.find_sample(connection, "R-1")["sample_id"]  # type: ignore[index]
    conclusions = explain_sample(connection, key)
    assert {conclusion.target for conclusion in conclusions} == set(targets.target_names(connection))
    porphyry = next(conclusion for conclusion in conclusions if conclusion.target == "porphyry_copper")
    ratio = next(reason for reason in porphyry.reasons if reason.quantity == "sr_y" and not reason.gate)
    assert (ratio.value, ratio.outcome, ratio.limit) == (64.0, "met", 35.0)
    assert ratio.margin is not None and ratio.margin.dot is not None and ratio.margin.dot > 0
    assert porphyry.argument and porphyry.cautions
    met = sum(reason.weight for reason in porphyry.reasons if reason.outcome == "met")
    assert porphyry.score_min == pytest.approx(met / 100)
    control = sample.find_sample(connection, "R-2")["sample_id"]  # type: ignore[index]
    assert explain_sample(connection, control) == []


def test_batches_count_lines_and_name_columns(connection: Any) -> None:
    listed = {row["code"]: row for row in batches.batch_list(connection)}
    assert list(listed) == ["Q-2", "Q-1"]
    assert (listed["Q-1"]["lines"], listed["Q-1"]["samples"]) == (2, 2)
    found = batches.find_batch(connection, "Q-1")
    assert found is not None
    assert [row["analyte"] for row in batches.batch_columns(connection, found["batch_id"])] == [r[0] for r in RESULTS]
    total, lines = batches.batch_samples(connection, found["batch_id"], limit=1)
    assert (total, [row["code"] for row in lines]) == (2, ["R-1"])
    assert batches.find_batch(connection, "none") is None


def test_targets_and_places_count_verdicts(connection: Any) -> None:
    for target in targets.target_list(connection):
        assert sum(target["counts"].values()) == 1
        assert targets.criteria(connection, target["target_version_id"])
    bodies = {row["name"]: row for row in places.intrusion_list(connection)}
    assert {name: row["samples"] for name, row in bodies.items()} == {"Aster stock": 1, "Brock gabbro": 0}
    sites = places.site_list(connection)
    assert [(row["code"], row["samples"]) for row in sites] == [("DH-1", 1)]
    assert sum(places.best_verdicts_by_site(connection)[sites[0]["site_id"]].values()) == 1
    for target in targets.active_targets(connection):
        scores = intrusions.scores_by_intrusion(connection, target["target_id"])
        assert list(scores) == [bodies["Aster stock"]["intrusion_id"]]
        assert sum(scores[bodies["Aster stock"]["intrusion_id"]]["counts"].values()) == 1


def test_methods_give_unit_and_source_of_every_quantity(connection: Any) -> None:
    assert all(row["unit"] and row["source"] for row in methods.quantities(connection))
    assert all(row["unit"] and row["source"] for row in methods.column_guide(connection))
    assert methods.warning_kinds(connection)


def test_intrusion_and_site_are_read_on_either_engine(connection: Any) -> None:
    body = intrusions.find_intrusion(connection, "Aster stock")
    assert body is not None and body["area"] == "North"
    assert intrusions.find_intrusion(connection, "aster stock") is None
    assert intrusions.near_intrusions(connection, "aster stock")[0] == "Aster stock"
    key = body["intrusion_id"]
    assert intrusions.kinds_of_samples(connection, "intrusion_id", key) == {"core": 1}
    found = standings(connection, "intrusion_id", key)
    assert {one.target for one in found} == set(load_definitions())
    assert all(sum(one.counts.values()) == one.samples == 1 for one in found)
    assert all(one.conclusion is not None and one.best[0].code == "R-1" for one in found)
    ranges, ordered = intrusions.composition_ranges(connection, "intrusion_id", key)
    by_name = {one.column: one for group in ranges.values() for one in group}
    assert (by_name["sr_ppm"].least, by_name["sr_ppm"].greatest) == (640.0, 640.0)
    assert (by_name["sn_ppm"].least_sign, by_name["sn_ppm"].below) == ("<", 1)
    assert (by_name["zr_ppm"].values, by_name["zr_ppm"].partial) == (0, 1)
    assert intrusions.norms_of(connection, [ordered[0][0]])[ordered[0][0]]["norm"]["q"] > 10
    assert [row["code"] for row in intrusions.sample_rows(connection, "intrusion_id", key)] == ["R-1"]
    place = sites.find_site(connection, "DH-1")
    assert place is not None and place["area"] == "North"
    assert sites.near_sites(connection, "dh-1") == ["DH-1"]
    columns = load_columns(connection)
    target = targets.active_targets(connection)[0]["target_id"]
    for chosen in (None, target):
        (row,) = sites.strip_samples(connection, place["site_id"], [columns["sr_y"], columns["sr_ppm"]], chosen)
        assert (row["code"], row["value_0"], row["value_1"]) == ("R-1", pytest.approx(64.0), 640.0)
        assert row["verdict"] in VERDICT_WORDS
    assert sites.survey_rows(connection, place["site_id"]) == sites.interval_rows(connection, place["site_id"]) == []


def test_groups_of_samples_are_of_an_intrusion_or_a_site_alone(connection: Any) -> None:
    with pytest.raises(ValueError, match="grouped by intrusion_id or site_id, not by 'kind'"):
        intrusions.judged_samples(connection, "kind", 1)


def test_start_page_is_read_on_either_engine(connection: Any) -> None:
    assert start.totals(connection) == {
        "samples": 1, "controls": 1, "sites": 1, "intrusions": 2, "areas": 1, "batches": 2
    }  # fmt: skip
    assert [row["code"] for row in start.last_batches(connection)] == ["Q-2", "Q-1"]
    assert start.waiting(connection) == {"stale": 0, "without_results": 0}
    assert start.failed_controls(connection) == start.unfit_samples(connection) == []
    assert start.is_demo(connection) is False
    assert start.remarks(connection) == (0, 0, [])
    undecided = [start.undecided_reasons(connection, one["target_id"]) for one in targets.active_targets(connection)]
    assert any(undecided)
    assert editing.names_in_use(connection, "intrusion", "name") == ["Aster stock", "Brock gabbro"]


def test_change_mark_stays_until_somebody_commits(any_registry: Registry) -> None:
    mark = change_mark(any_registry)
    assert change_mark(any_registry) == mark
    with writing(any_registry) as writer:
        _insert(writer, tables.area, name="Elsewhere")
    later = change_mark(any_registry)
    assert later != mark
    with reading(any_registry) as reader:
        reader.execute(sa.select(tables.area)).all()
    assert change_mark(any_registry) == later
