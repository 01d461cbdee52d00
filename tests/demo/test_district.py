"""What comes out of the invented district: who leads for what, wrong digestions, exchanged bags.

The data are invented (seed_demo/README.txt); the suites were written down from petrology, and these tests ask whether
the definitions of the targets find what was meant. They are no validation: rocks and rules have the same authors.
"""

from __future__ import annotations

import shutil
import sqlite3
from collections.abc import Iterator
from pathlib import Path

import pytest

from seed_demo.district import SWAPPED
from web import create_app

#: The body meant to lead for each target.
MEANT = {
    "porphyry_copper": "Kestrin stock",
    "tin": "Corvane granite",
    "rare_metal": "Ysker leucogranite",
    "nickel_copper": "Marrowan complex",
    "magmatic_heat": "Drisk feeder",
    "radiogenic_heat": "Ostrevel granite",
}


@pytest.fixture(scope="module")
def path(demo_file: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    return Path(shutil.copy(demo_file, tmp_path_factory.mktemp("district") / "district.sqlite"))


@pytest.fixture(scope="module")
def view(path: Path) -> Iterator[sqlite3.Connection]:
    connection = sqlite3.connect(f"file:{path}?mode=ro", uri=True)
    connection.row_factory = sqlite3.Row
    yield connection
    connection.close()


def standing(view: sqlite3.Connection, target: str) -> list[sqlite3.Row]:
    """A row a body, by its mean lower score: name, score, verdicts."""
    return view.execute(
        "SELECT s.intrusion, avg(v.score_min) AS score, count(*) AS samples,"
        " count(*) FILTER (WHERE v.verdict = 'favourable') AS favourable,"
        " count(*) FILTER (WHERE v.verdict = 'undecided') AS undecided"
        " FROM verdict_sheet AS v JOIN sample_sheet AS s USING (sample_id)"
        " WHERE v.target = ? GROUP BY s.intrusion ORDER BY score DESC",
        (target,),
    ).fetchall()


@pytest.mark.parametrize("target", sorted(MEANT))
def test_body_that_was_meant_leads_for_its_target(view: sqlite3.Connection, target: str) -> None:
    ranked = standing(view, target)
    assert len(ranked) == 8
    assert ranked[0]["intrusion"] == MEANT[target]
    assert ranked[0]["favourable"] > 0
    assert ranked[0]["favourable"] == max(row["favourable"] for row in ranked)


def test_granites_and_not_the_arc_lead_for_tungsten(view: sqlite3.Connection) -> None:
    """No body was meant for tungsten; fractionated granites of a metapelite carry it in nature."""
    first, second, *others = standing(view, "tungsten")
    assert {first["intrusion"], second["intrusion"]} == {"Corvane granite", "Ysker leucogranite"}
    assert sum(row["favourable"] for row in others) == 0


def test_barren_bodies_are_favourable_for_nothing(view: sqlite3.Connection) -> None:
    """The exchanged bags apart: they carry a neighbour's rock."""
    exchanged = [code for pair in SWAPPED for code in pair]
    rows = view.execute(
        "SELECT v.sample_code, v.target FROM verdict_sheet AS v JOIN sample_sheet AS s USING (sample_id)"
        " WHERE s.intrusion IN ('Vantry pluton', 'Hebrun sill') AND v.verdict = 'favourable'"
    ).fetchall()
    assert [tuple(row) for row in rows if row["sample_code"] not in exchanged] == []


def test_rest_of_the_copper_stock_is_undecided_for_a_stated_reason(view: sqlite3.Connection) -> None:
    """What is not favourable in the stock is altered, by the wrong package or without traces, not unfavourable."""
    (row,) = [row for row in standing(view, "porphyry_copper") if row["intrusion"] == "Kestrin stock"]
    assert row["favourable"] + row["undecided"] >= 0.9 * row["samples"]


def test_ore_packages_without_silica_yield_no_norm_and_no_verdict(view: sqlite3.Connection) -> None:
    """Aqua regia and four acids drive silica off or leave it behind; common practice, no source."""
    rows = view.execute(
        "SELECT DISTINCT r.sample_id, r.sample_code FROM result_sheet AS r JOIN sample_sheet AS s USING (sample_id)"
        " WHERE s.sample_kind = 'core' GROUP BY r.sample_id, r.sample_code"
        " HAVING min(r.batch) = 'results_Z19' AND max(r.batch) = 'results_Z19'"
    ).fetchall()
    assert len(rows) == 60
    for sample_id, code in rows:
        fitness = view.execute("SELECT fitness FROM class_sheet WHERE sample_id = ?", (sample_id,)).fetchone()[0]
        assert fitness in ("unfit", "unknown"), code
        assert view.execute("SELECT q_wt FROM norm_sheet WHERE sample_id = ?", (sample_id,)).fetchone()[0] is None
        verdicts = dict(
            view.execute("SELECT target, verdict FROM verdict_sheet WHERE sample_id = ?", (sample_id,)).fetchall()
        )
        assert "favourable" not in verdicts.values() and "possible" not in verdicts.values(), code
        assert {verdicts[target] for target in ("porphyry_copper", "tin", "nickel_copper")} == {"undecided"}, code


def test_pulp_analysed_again_by_fusion_is_judged_by_that(view: sqlite3.Connection) -> None:
    rows = view.execute(
        "SELECT s.sample_code, i.sr_y, c.sr_ppm, r.value FROM sample_sheet AS s JOIN index_sheet AS i USING (sample_id)"
        " JOIN composition_sheet AS c USING (sample_id) JOIN result_sheet AS r USING (sample_id)"
        " WHERE s.site_code = 'KD003' AND s.sample_kind = 'core' AND r.analyte = 'Sr' AND r.batch = 'results_A417'"
    ).fetchall()
    assert len(rows) == 12
    assert all(row["sr_ppm"] == row["value"] and row["sr_y"] is not None for row in rows)


def test_exchanged_bags_are_remarked_on_both_sides(view: sqlite3.Connection) -> None:
    said = dict(
        view.execute(
            "SELECT sample_code, value FROM warning_sheet WHERE code = 'chemistry_far_from_intrusion'"
        ).fetchall()
    )
    exchanged = {code for pair in SWAPPED for code in pair}
    assert exchanged <= set(said)
    honest = {code: distance for code, distance in said.items() if code not in exchanged}
    assert len(honest) <= 10, "more than a few honest samples are called far"
    assert min(said[code] for code in exchanged) > 2.0 * max(honest.values())


def test_page_of_an_exchanged_bag_doubts_it_before_its_verdicts(path: Path) -> None:
    client = create_app(str(path)).test_client()
    doubted = client.get("/samples/KD002-206").get_data(as_text=True)
    assert 0 < doubted.index("a swapped sample, another rock") < doubted.index("What it could be a source of")
    assert "a swapped sample, another rock" not in client.get("/samples/KD001-103").get_data(as_text=True)
    start = client.get("/").get_data(as_text=True)
    assert 0 < start.index("Look again at") < start.index("KD002-206")


def test_exchanged_bag_whose_rock_name_disagrees_is_remarked(view: sqlite3.Connection) -> None:
    said = {
        row[0]
        for row in view.execute(
            "SELECT sample_code FROM warning_sheet WHERE code = 'chemistry_disagrees_with_lithology'"
        )
    }
    assert said == {"Q021a", "H004a"}


def test_controls_of_every_certificate_are_judged(view: sqlite3.Connection) -> None:
    tally: dict[str, dict[str, int]] = {}
    for batch, state, count in view.execute("SELECT batch, state, count(*) FROM control_sheet GROUP BY batch, state"):
        tally.setdefault(batch, {})[state] = count
    assert len(tally) == 6
    for batch, states in tally.items():
        judged = sum(count for state, count in states.items() if state != "not judged")
        assert states["passed"] >= 0.98 * judged > 0, batch


def test_volume_stands_for_the_half_width_of_a_sphere(view: sqlite3.Connection) -> None:
    """V = 4/3 pi a^3: 60 km3 is a sphere of 2,429 m, which keeps heat at its centre for 60,000 years."""
    row = view.execute("SELECT * FROM intrusion_sheet WHERE intrusion = 'Drisk feeder'").fetchone()
    assert row["half_width_m"] is None
    assert 0.0 < row["theta_centre_low"] < row["theta_centre"] < row["theta_centre_high"] < 1.0
