"""Intrusions: the ranking, the argument of the best sample, ranges and norms; every number against SQL of its own.

The registry is invented (conftest): it tests layout and counting, not geology.
"""

from __future__ import annotations

import re
import sqlite3
import statistics
from html import unescape
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from flask.testing import FlaskClient

from registry.standing import dearest_lacking, lacking_of
from registry.store.reading.intrusions import ValueRange, spread_evenly
from registry.targets.definition import load_definitions
from registry.targets.engine import judge
from registry.targets.redox_words import CONFLICT, REMEDIES
from web.ranges import SCALES, range_bar

DEFINITIONS = load_definitions()


def rows(path: Path, query: str, *bound: Any) -> list[tuple[Any, ...]]:
    connection = sqlite3.connect(path)
    try:
        return connection.execute(query, bound).fetchall()
    finally:
        connection.close()


def words(page: str) -> str:
    return re.sub(r"\s+", " ", unescape(re.sub(r"<[^>]+>", " ", page)))


def entry(page: str, target: str) -> str:
    """The part of a page that speaks of one target."""
    start = page.index(f'<li class="conclusion" id="{target}"')
    return page[start : page.index("</li>\n<li class=", start) if "</li>\n<li class=" in page[start:] else len(page)]


def test_intrusions_ranked_for_a_target_stand_by_verdict_then_median(client: FlaskClient) -> None:
    page = client.get("/intrusions?target=porphyry_copper").text
    assert page.index("Aster stock") < page.index("Brock gabbro")
    assert "Before anything is decided on this ranking" in page
    page = client.get("/intrusions?target=nickel_copper").text
    assert page.index("Brock gabbro") < page.index("Aster stock")


@pytest.mark.parametrize("target", list(DEFINITIONS))
def test_intrusions_counts_and_scores_are_those_of_the_verdict_view(
    client: FlaskClient, invented_registry: Path, target: str
) -> None:
    page = client.get(f"/intrusions?target={target}").text
    for name in ("Aster stock", "Brock gabbro"):
        found = rows(
            invented_registry,
            "SELECT v.verdict, v.score_min FROM verdict_sheet AS v JOIN sample_sheet AS s ON s.sample_id = v.sample_id "
            "WHERE s.intrusion = ? AND v.target = ?",
            name, target,
        )  # fmt: skip
        shown = page[page.index(f">{name}</a></th>") :].split("</tr>")[0]
        for word in ("favourable", "possible", "unfavourable", "undecided"):
            count = sum(verdict == word for verdict, _ in found)
            assert (f">{count} {word}<" in re.sub(r"</svg>", ">", shown)) == (count > 0)
        numbers = re.findall(r'score" class="number">(\d+)<', shown)
        scores = [score for _, score in found]
        assert numbers == [f"{100 * statistics.median(scores):.0f}", f"{100 * max(scores):.0f}"]


def test_intrusions_unknown_target_is_404_with_those_there_are(client: FlaskClient) -> None:
    answer = client.get("/intrusions?target=gold")
    assert answer.status_code == 404
    assert 'href="/intrusions?target=tin"' in answer.text


def test_intrusion_page_opens_with_the_argument_of_its_best_sample(
    client: FlaskClient, invented_registry: Path
) -> None:
    page = client.get("/intrusions/Aster stock").text
    order = [
        page.index(f"<h2>{title}<") for title in ("What it could be a source of", "The body", "Composition", "Samples")
    ]
    assert order == sorted(order)
    part = entry(page, "porphyry_copper")
    best, score = rows(
        invented_registry,
        "SELECT v.sample_code, v.score_min FROM verdict_sheet AS v JOIN sample_sheet AS s ON s.sample_id = v.sample_id "
        "WHERE s.intrusion = 'Aster stock' AND v.target = 'porphyry_copper' AND v.verdict = 'favourable' "
        "ORDER BY v.score_min DESC, v.score_max DESC, v.sample_id LIMIT 1",
    )[0]
    assert f'href="/samples/{best}#porphyry_copper">{best}</a>, its best sample' in part
    assert re.search(rf"favourable ?, {100 * score:.0f}(?: to \d+)? points", words(part))
    assert "Sr/Y" in part and "Before anything is decided on it" in part


def test_intrusion_page_says_the_sentences_of_the_sample_page(client: FlaskClient) -> None:
    part = entry(client.get("/intrusions/Aster stock").text, "porphyry_copper")
    best = re.search(r'href="/samples/([^"#]+)#', part).group(1)  # type: ignore[union-attr]
    sample = entry(client.get(f"/samples/{best}").text, "porphyry_copper")
    sentences = re.search(r"<p>([^<]*points are met[^<]*)</p>", sample)
    assert sentences is not None
    assert sentences.group(1) in part


def test_intrusion_page_names_what_its_undecided_samples_lack_worth_most_first(client: FlaskClient) -> None:
    """Nothing was analysed for W and F in the invented registry."""
    part = words(entry(client.get("/intrusions/Aster stock").text, "tungsten"))
    assert "To determine next on its undecided samples, worth most first" in part
    assert part.index("W by fusion ICP-MS") < part.index("F by fusion and ion-selective electrode")


def test_intrusion_page_says_what_holds_for_all_targets_once(client: FlaskClient) -> None:
    page = words(client.get("/intrusions/Aster stock").text)
    assert page.count("decisions on money and land belong to competent persons") == 1
    assert page.count("Thick crust alone also raises Sr/Y") == 1


def test_intrusion_page_ranges_are_those_of_the_views(client: FlaskClient, invented_registry: Path) -> None:
    page = client.get("/intrusions/Brock gabbro").text
    for view, column, label, digits in (
        ("volatile_free_sheet", "mgo_vf_wt", "MgO", 2), ("composition_sheet", "ni_ppm", "Ni", 0),
        ("index_sheet", "sr_y", "Sr/Y", 1),
    ):  # fmt: skip
        values = [
            row[0]
            for row in rows(
                invented_registry,
                f"SELECT v.{column} FROM {view} AS v JOIN sample_sheet AS s ON s.sample_id = v.sample_id "
                f"WHERE s.intrusion = 'Brock gabbro' AND v.{column} IS NOT NULL",
            )
        ]
        shown = re.search(rf">\s*{label}(?: <span[^>]*>[^<]*</span>)?</th>(.*?)</tr>", page, re.S)
        assert shown is not None
        numbers = [float(number) for number in re.findall(r'class="number[^"]*">([0-9.]+)<', shown.group(1))]
        expected = [min(values), statistics.median(values), max(values)]
        assert numbers == pytest.approx(expected, abs=0.5 * 10**-digits + 1e-9)


def test_intrusion_page_values_below_their_limit_are_marked(client: FlaskClient) -> None:
    """Every fifth line of the invented certificate has Nb below its limit; Zr came by four-acid, a minimum."""
    page = client.get("/intrusions/Aster stock").text
    row = page[page.index("Nb <span") :].split("</tr>")[0]
    assert re.search(r'class="number censored">≤4.83<', row)
    assert "below the limit" in row
    assert "Zr <span" not in page[page.index("Trace elements") : page.index("Indices")]


def test_intrusion_page_norms_stand_by_differentiation_index(client: FlaskClient) -> None:
    page = client.get("/intrusions/Aster stock").text
    found = [int(number) for number in re.findall(r'class="norm-index">(\d+)<', page)]
    assert len(found) == 40
    assert found == sorted(found)
    assert found[0] < found[-1]


def test_intrusion_page_of_an_absent_name_is_404_with_near_ones(client: FlaskClient) -> None:
    answer = client.get("/intrusions/aster stock")
    assert answer.status_code == 404
    assert "The registry holds no intrusion “aster stock”." in answer.text
    assert 'href="/intrusions/Aster%20stock"' in answer.text


def test_intrusion_page_without_samples_says_what_to_do(writable: Any) -> None:
    writable.sql("INSERT INTO intrusion (name) VALUES ('Bare <b>body</b>/1')")
    page = writable.client.get("/intrusions/Bare <b>body</b>/1").text
    assert "No sample is named after it yet" in page
    assert "<b>body" not in page
    assert "none judged" in writable.client.get("/intrusions").text


def test_intrusions_ranking_follows_a_change_behind_its_back(writable: Any) -> None:
    before = writable.client.get("/intrusions?target=porphyry_copper").text
    assert "Aster stock" in before and "favourable" in before
    writable.sql("UPDATE verdict SET verdict = 2, score_min = 0.0")
    after = writable.client.get("/intrusions?target=porphyry_copper").text
    assert " favourable" not in words(after).split("Verdicts on its samples")[1].split("Before anything")[0]


def test_lacking_points_follow_the_weights_of_the_definition() -> None:
    definition = DEFINITIONS["tungsten"]
    first = len(definition.gates)
    weights = [criterion.weight for criterion in definition.criteria]
    packed = f'{{"outcomes":"","texts":{{"{first}":"missing: w_ppm","{first + 1}":"missing: w_ppm, rb_ppm"}}}}'
    lacking, causes = lacking_of(definition, [packed, packed, '{"texts":{"cause":"SiO2 is not known"}}'])
    assert [(one.name, one.points, one.samples) for one in lacking] == [
        ("w_ppm", 2 * (weights[0] + weights[1]), 2), ("rb_ppm", 2 * weights[1], 2)
    ]  # fmt: skip
    assert causes == (("SiO2 is not known", 1),)
    over_all = dearest_lacking([("Tungsten", definition, [packed]), ("Again", definition, [packed])])
    assert (over_all[0].name, over_all[0].verdicts, over_all[0].targets) == ("w_ppm", 2, ("Tungsten", "Again"))


def test_lacking_redox_that_two_witnesses_contradict_asks_for_a_repeat_not_for_a_first_measurement() -> None:
    definition = DEFINITIONS["tin"]
    n = 2
    known = {"delta_ox": np.array([0.3, np.nan]), "magnetic_susceptibility_si": np.array([2e-4, np.nan])}
    workspace = known | {"fitness": np.full(n, "fit", dtype=object), "redox_series": np.full(n, None, dtype=object)}
    lacking, _ = lacking_of(definition, judge(definition, workspace, n).reasons)
    told = {one.remedy: (one.points, one.samples) for one in lacking}
    (weight,) = (criterion.weight for criterion in definition.criteria if criterion.code == "reduced")
    assert told[definition.supply["redox_series"]] == (weight, 1)
    assert told[REMEDIES[CONFLICT]] == (weight, 1)
    assert "contradict each other" in REMEDIES[CONFLICT]


def test_spread_evenly_keeps_first_and_last() -> None:
    ordered = [(number, float(number)) for number in range(1000)]
    chosen = spread_evenly(ordered, 40)
    assert (chosen[0], chosen[-1], len(chosen)) == (ordered[0], ordered[-1], 40)
    assert spread_evenly(ordered[:7], 40) == ordered[:7]


def test_range_bar_places_ends_on_linear_and_logarithmic_scales() -> None:
    linear = range_bar(ValueRange("sio2_vf_wt", 3, 50.0, 60.0, 90.0))
    assert linear is not None
    assert (linear.low, linear.middle, linear.high, linear.beyond_low, linear.beyond_high) == (25, 50, 100, False, True)
    decades = range_bar(ValueRange("rb_ppm", 3, 0.1, 10.0, 100.0))
    assert decades is not None
    assert (decades.low, decades.beyond_low) == (0, True)
    assert (decades.middle, decades.high) == pytest.approx((33.33, 66.67), abs=0.01)
    assert range_bar(ValueRange("rb_ppm", 0)) is None


def test_range_scales_are_ascending_and_positive_where_logarithmic() -> None:
    for name, (low, high, logarithmic) in SCALES.items():
        assert low < high, name
        assert low > 0 or not logarithmic, name


def test_intrusions_doubted_sample_lends_no_rank_and_is_no_best_sample(writable: Any) -> None:
    """One favourable gabbro far from its body: counted and said to be doubted, ranked as if it were not there."""
    inside = "SELECT sample_id FROM sample WHERE intrusion_id = (SELECT intrusion_id FROM intrusion WHERE name = ?)"
    tin = writable.sql("SELECT target_id FROM target WHERE code = 'tin'")[0][0]
    for name in ("Aster stock", "Brock gabbro"):
        writable.sql(
            f"UPDATE verdict SET verdict = 2, score_min = 0.1, score_max = 0.1 WHERE sample_id IN ({inside})", name
        )
    odd, body, code = writable.sql(
        "SELECT s.sample_id, s.intrusion_id, s.code FROM sample AS s JOIN verdict AS v ON v.sample_id = s.sample_id "
        "JOIN intrusion AS i ON i.intrusion_id = s.intrusion_id WHERE i.name = 'Brock gabbro' AND v.target_id = ? "
        "ORDER BY s.sample_id LIMIT 1",
        tin,
    )[0]
    writable.sql("UPDATE verdict SET verdict = 0, score_min = 0.9 WHERE sample_id = ? AND target_id = ?", odd, tin)
    page = writable.client.get("/intrusions?target=tin").text
    assert page.index(">Brock gabbro<") < page.index(">Aster stock<")
    assert (
        f'href="/samples/{code}#tin">{code}</a>, its best sample'
        in writable.client.get("/intrusions/Brock gabbro").text
    )
    writable.sql(
        "INSERT INTO suite_outlier (sample_id, intrusion_id, distance, distance_limit, text) "
        "VALUES (?, ?, 9.0, 3.5, 'invented remark')",
        odd, body,
    )  # fmt: skip
    page = writable.client.get("/intrusions?target=tin").text
    assert page.index(">Aster stock<") < page.index(">Brock gabbro<")
    assert "1 favourable (1 of doubted identity)" in words(page)
    page = writable.client.get("/intrusions/Brock gabbro").text
    assert f'href="/samples/{code}#tin"' not in page
    assert re.search(rf">{code}</a> <abbr class=\"doubt\"", page)
