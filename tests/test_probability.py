"""The probability that a verdict survives analytical error, from a file of results to the verdict sheet.

Expected shares follow from the normal distribution (``statistics.NormalDist``, recomputed). Rocks, batches and the one
target, which asks for tin alone, are invented; so a verdict hangs on one drawn value.
"""

from __future__ import annotations

import json
import math
import shutil
from pathlib import Path
from statistics import NormalDist
from typing import Any

import numpy as np
import pytest

from registry import surviving
from registry.cli import main
from registry.computing import Helpers
from registry.errors import PlutonbookError, UsageError
from registry.importing import ImportOptions, import_files
from registry.judging import install_shipped_definitions, read_rules
from registry.pipeline import Chunk, compute, judged_only
from registry.refresh import chunk_of, recompose, refresh_registry
from registry.store.engine import Registry, open_registry, reading, writing
from registry.surviving import draw_probabilities, draws_of, inputs_of, shares_of
from registry.targets.definition import parse_definition

NORMAL = NormalDist()
DRAWS = 10_000
#: Five standard errors of a share of so many draws.
FIVE = 5.0 * 0.5 / math.sqrt(DRAWS)
TIN_ALONE = """
code = "tin_alone"
name = "Tin alone"
version = 1
applies_to = "Invented: whatever holds tin."
favourable = 1.0
possible = 0.5
argument = "Sn is {sn_ppm ppm}."
cautions = ["Invented."]
[[criterion]]
code = "tin"
label = "Tin"
group = "A"
quantity = "sn_ppm"
test = ">= 100"
weight = 100
provisional = false
source = "invented"
"""
MAJORS = "SiO2 (%) XRF,Al2O3 (%) XRF,Fe2O3T (%) XRF,MgO (%) XRF,CaO (%) XRF,Na2O (%) XRF,K2O (%) XRF"
ROCK = "72.8,14,1.8,0.4,1.1,3.6,5.6"
#: One sigma is 5 % of the value where nothing else is known, so 5 at 100 ppm.
TIN = {"T1": 100.0, "T2": 100.0 / 0.95, "T3": 100.0 / 1.05, "T4": 100.0 / 0.90, "T5": 300.0}


def one_target(registry: Registry, draws: int = DRAWS) -> Registry:
    with writing(registry) as connection:
        install_shipped_definitions(connection, (parse_definition(TIN_ALONE),))
        set_convention(connection, "probability_draws", draws)
    return registry


def set_convention(connection: Any, name: str, value: float) -> None:
    connection.exec_driver_sql(f"DELETE FROM setting WHERE name = 'convention.{name}'")
    connection.exec_driver_sql(f"INSERT INTO setting (name, value) VALUES ('convention.{name}', '{json.dumps(value)}')")


def bring(registry: Registry, folder: Path, tin: dict[str, float], batch: str = "K1") -> None:
    (folder / "samples.csv").write_text(
        "sample_code,sample_kind,lithology\n" + "".join(f"{code},core,granite\n" for code in tin)
    )
    rows = "".join(f"{code},{ROCK},{value!r}\n" for code, value in tin.items())
    (folder / f"{batch}.csv").write_text(f"Sample,{MAJORS},Sn fusion (ppm)\n{rows}")
    import_files(registry, [folder / "samples.csv", folder / f"{batch}.csv"], ImportOptions(batch=batch))


def sheet(registry: Registry, columns: str = "probability") -> dict[str, Any]:
    with reading(registry) as connection:
        rows = connection.exec_driver_sql(f"SELECT sample_code, {columns} FROM verdict_sheet ORDER BY sample_code")
        return {row[0]: row[1] if len(row) == 2 else tuple(row[1:]) for row in rows}


def table(registry: Registry, query: str) -> list[Any]:
    with reading(registry) as connection:
        return [tuple(row) for row in connection.exec_driver_sql(query)]


def test_probability_is_that_of_the_normal_distribution(any_registry: Registry, tmp_path: Path) -> None:
    """A value on the threshold survives in half of the draws, one sigma from it in 84 per cent."""
    bring(one_target(any_registry), tmp_path, TIN)
    assert set(sheet(any_registry, "probability, probability_state").values()) == {(None, "not_computed")}
    assert draw_probabilities(any_registry) == len(TIN)
    found = sheet(any_registry, "verdict, probability, probability_state")
    assert [verdict for verdict, *_ in found.values()] == [
        "favourable", "favourable", "unfavourable", "favourable", "favourable",
    ]  # fmt: skip
    for (_, share, state), sigmas in zip(found.values(), (0.0, 1.0, 1.0, 2.0, 13.3), strict=True):
        assert state == "computed"
        assert abs(share - NORMAL.cdf(sigmas)) < FIVE
    assert found["T5"][1] == 1.0


def test_probability_run_changes_nothing_else_and_a_second_has_nothing_to_do(
    founded_registry: Registry, tmp_path: Path
) -> None:
    bring(one_target(founded_registry, 50), tmp_path, TIN)
    queries = [
        "SELECT * FROM derived ORDER BY 1", "SELECT * FROM composition ORDER BY 1", "SELECT * FROM verdict_change",
        "SELECT sample_id, target_id, target_version_id, verdict, score_min, score_max, coverage, provisional, reasons "
        "FROM verdict ORDER BY 1, 2", "SELECT * FROM stale", "SELECT * FROM stale_group", "SELECT * FROM audit_entry",
    ]  # fmt: skip
    before = [table(founded_registry, query) for query in queries]
    assert draw_probabilities(founded_registry) == len(TIN)
    assert [table(founded_registry, query) for query in queries] == before
    assert draw_probabilities(founded_registry) == 0
    (count,) = table(founded_registry, "SELECT count(*) FROM verdict WHERE probability BETWEEN 0 AND 1")[0]
    assert count == len(TIN) * 8


def test_probability_is_the_same_in_any_chunk_order_and_run(
    sqlite_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    bring(one_target(sqlite_registry, 100), tmp_path, TIN)
    with writing(sqlite_registry) as connection:
        rules = read_rules(connection)
        ids = np.arange(1, len(TIN) + 1)
        whole = shares_of(inputs_of(connection, ids, rules), rules)
        single = [shares_of(inputs_of(connection, ids[[row]], rules), rules)[:, 0] for row in (3, 1, 4, 0, 2)]
        monkeypatch.setattr(surviving, "CHUNK_SIZE", 250)
        parted = shares_of(inputs_of(connection, ids, rules), rules)
    assert (whole[:, [3, 1, 4, 0, 2]] == np.array(single).T).all()
    assert (parted == whole).all()
    monkeypatch.setattr(surviving, "DRAWS_A_COMMIT", 200)
    draw_probabilities(sqlite_registry)
    assert list(sheet(sqlite_registry).values()) == whole[0].tolist()


def test_probability_of_an_interrupted_run_stays_and_the_next_goes_on(
    sqlite_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    bring(one_target(sqlite_registry, 100), tmp_path, TIN)
    monkeypatch.setattr(surviving, "DRAWS_A_COMMIT", 200)
    told: list[tuple[int, int]] = []

    def interrupt(_what: str, done: int, total: int) -> None:
        told.append((done, total))
        if done == 4:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt, match=r"^$"):
        draw_probabilities(sqlite_registry, progress=interrupt)
    assert told == [(0, 5), (2, 5), (4, 5)]
    assert [share is None for share in sheet(sqlite_registry).values()] == [False] * 4 + [True]
    assert draw_probabilities(sqlite_registry) == 1


def test_probability_goes_with_the_verdict_when_the_sample_is_derived_anew(
    any_registry: Registry, tmp_path: Path
) -> None:
    """Edits by SQL mark it out of date at once; the refresh sets it back."""
    bring(one_target(any_registry, 50), tmp_path, TIN)
    draw_probabilities(any_registry)
    kept = sheet(any_registry)
    with writing(any_registry) as connection:
        connection.exec_driver_sql("UPDATE sample SET texture = 'porphyritic' WHERE code = 'T2'")
    states = "probability_state"
    assert sheet(any_registry, states) == {code: "computed" if code != "T2" else "out_of_date" for code in TIN}
    assert draw_probabilities(any_registry) == 0  # derived first, then drawn
    refresh_registry(any_registry)
    assert sheet(any_registry, states) == {code: "computed" if code != "T2" else "not_computed" for code in TIN}
    assert sheet(any_registry) == {**kept, "T2": None}
    assert draw_probabilities(any_registry) == 1
    assert sheet(any_registry) == kept


def test_probability_is_set_back_when_a_convention_changes(sqlite_registry: Registry, tmp_path: Path) -> None:
    bring(one_target(sqlite_registry), tmp_path, TIN)
    draw_probabilities(sqlite_registry)
    with writing(sqlite_registry) as connection:
        set_convention(connection, "error_trace_percent", 10.0)
    refresh_registry(sqlite_registry)
    assert set(sheet(sqlite_registry).values()) == {None}
    draw_probabilities(sqlite_registry)
    assert abs(sheet(sqlite_registry)["T4"] - NORMAL.cdf(1.0)) < FIVE


def test_probability_rests_on_the_precision_that_the_controls_of_the_batch_showed(
    sqlite_registry: Registry, tmp_path: Path
) -> None:
    """T2 lies 5.26 ppm above: sigma is 5.26 by convention, 2 + 0.01 c = 3.05 as fitted to pairs, 10.5 by materials."""
    bring(one_target(sqlite_registry), tmp_path, TIN)
    distance = TIN["T2"] - 100.0
    known = {
        "precision_s0 = 2, precision_k = 0.01": 2.0 + 0.01 * TIN["T2"],
        "precision_s0 = NULL, precision_k = NULL, bias_error_percent = 2.5, reference_results = 16": 0.1 * TIN["T2"],
        "reference_results = 9": 0.05 * TIN["T2"],
    }
    with writing(sqlite_registry) as connection:
        connection.exec_driver_sql(
            "INSERT INTO control_state (column_id, batch_id, state, remarks, reference_results, blank_results, pairs) "
            "SELECT batch_column_id, batch_id, 0, '', 0, 0, 60 FROM batch_column WHERE analyte = 'Sn'"
        )
    for change, sigma in known.items():
        with writing(sqlite_registry) as connection:
            connection.exec_driver_sql(f"UPDATE control_state SET {change}")
            connection.exec_driver_sql("UPDATE verdict SET probability_state = 'not_computed', probability = NULL")
        draw_probabilities(sqlite_registry)
        assert abs(sheet(sqlite_registry)["T2"] - NORMAL.cdf(distance / sigma)) < FIVE, change


def test_probability_precision_is_turned_into_the_unit_of_the_composition(
    sqlite_registry: Registry, tmp_path: Path
) -> None:
    one_target(sqlite_registry)
    (tmp_path / "s.csv").write_text("sample_code,sample_kind,lithology\nP1,core,granite\n")
    (tmp_path / "r.csv").write_text(f"Sample,{MAJORS},Sn fusion (%)\nP1,{ROCK},0.0103\n")
    import_files(sqlite_registry, [tmp_path / "s.csv", tmp_path / "r.csv"])
    with writing(sqlite_registry) as connection:
        connection.exec_driver_sql(
            "INSERT INTO control_state (column_id, batch_id, state, remarks, reference_results, blank_results, pairs, "
            "precision_s0, precision_k) SELECT batch_column_id, batch_id, 0, '', 0, 0, 60, 0.0003, 0 "
            "FROM batch_column WHERE analyte = 'Sn'"
        )
    draw_probabilities(sqlite_registry)
    assert abs(sheet(sqlite_registry)["P1"] - NORMAL.cdf(1.0)) < FIVE


def test_probability_of_a_sample_that_changed_meanwhile_is_not_written(
    sqlite_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    bring(one_target(sqlite_registry, 50), tmp_path, TIN)
    drawing = surviving.shares_of

    def edited_meanwhile(*arguments: Any) -> np.ndarray:
        with writing(sqlite_registry) as connection:
            connection.exec_driver_sql("UPDATE result SET value = 140 WHERE value = 300")
            connection.exec_driver_sql("UPDATE sample SET texture = 'fine' WHERE code = 'T1'")
        shares = drawing(*arguments)
        with writing(sqlite_registry) as connection:
            connection.exec_driver_sql("DELETE FROM stale WHERE sample_id > 1")
        return shares

    monkeypatch.setattr(surviving, "shares_of", edited_meanwhile)
    assert draw_probabilities(sqlite_registry) == len(TIN) - 2
    assert [code for code, share in sheet(sqlite_registry).items() if share is None] == ["T1", "T5"]


def test_probability_run_stops_where_conventions_change_meanwhile(
    sqlite_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    bring(one_target(sqlite_registry, 50), tmp_path, TIN)
    drawing = surviving.shares_of

    def changed_meanwhile(*arguments: Any) -> np.ndarray:
        with writing(sqlite_registry) as connection:
            set_convention(connection, "error_trace_percent", 10.0)
        return drawing(*arguments)

    monkeypatch.setattr(surviving, "shares_of", changed_meanwhile)
    with pytest.raises(PlutonbookError, match="conventions or targets changed while probabilities were drawn"):
        draw_probabilities(sqlite_registry)
    assert set(sheet(sqlite_registry).values()) == {None}


@pytest.fixture
def demo(demo_file: Path, tmp_path: Path) -> Any:
    registry = open_registry(shutil.copy(demo_file, tmp_path / "demo.sqlite"))
    yield registry
    registry.close()


def test_verdicts_of_draws_are_those_of_the_whole_pipeline(demo: Registry) -> None:
    """All rocks of the invented demo, as they are and with every value changed by a tenth or so."""
    with writing(demo) as connection:
        rules = read_rules(connection)
        ids = [row[0] for row in connection.exec_driver_sql("SELECT sample_id FROM derived ORDER BY 1")]
        chunk = chunk_of(connection, recompose(connection, ids))
    noise = np.exp(0.1 * np.random.default_rng(5).standard_normal(chunk.values.shape))
    for values in (chunk.values, chunk.values * noise):
        changed = Chunk(chunk.sample_id, values, chunk.qualifiers, chunk.digestions, chunk.context)
        whole = compute(changed, rules.definitions, rules.conventions).verdicts
        codes = judged_only(changed, rules.definitions, rules.conventions)
        assert list(codes) == list(whole)
        assert all((codes[code] == whole[code].verdict).all() for code in codes)


def test_probability_can_be_limited_to_an_intrusion(demo: Registry) -> None:
    with writing(demo) as connection:
        set_convention(connection, "probability_draws", 20)
        connection.exec_driver_sql("DELETE FROM stale")  # the draws alone change
    counts = dict(
        table(demo, "SELECT i.name, count(DISTINCT v.sample_id) FROM verdict AS v JOIN sample AS s ON s.sample_id = "
              "v.sample_id JOIN intrusion AS i ON i.intrusion_id = s.intrusion_id GROUP BY 1 ORDER BY 2")
    )  # fmt: skip
    name = next(iter(counts))
    assert draw_probabilities(demo, [name]) == counts[name] > 0
    drawn = table(demo, "SELECT DISTINCT i.name FROM verdict AS v JOIN sample AS s ON s.sample_id = v.sample_id "
                  "LEFT JOIN intrusion AS i ON i.intrusion_id = s.intrusion_id WHERE probability_state = 'computed'"
    )  # fmt: skip
    assert drawn == [(name,)]
    with pytest.raises(UsageError, match="there is no intrusion 'Nowhere'; write its name as it is recorded"):
        draw_probabilities(demo, [name, "Nowhere"])


def test_control_samples_have_no_probability(demo: Registry) -> None:
    with writing(demo) as connection:
        rules = read_rules(connection)
        ids = np.array([r[0] for r in connection.exec_driver_sql(
            "SELECT s.sample_id FROM sample AS s JOIN derived AS d ON d.sample_id = s.sample_id WHERE s.kind IN "
            "('blank', 'duplicate', 'reference_material') ORDER BY 1 LIMIT 5")])  # fmt: skip
        shares = shares_of(inputs_of(connection, ids, rules), rules)
    assert len(ids) == 5 and np.isnan(shares).all()
    assert draws_of(rules.conventions) == 200


def test_probability_is_set_back_when_the_controls_of_its_batch_show_another_precision(
    any_registry: Registry, tmp_path: Path
) -> None:
    """A result of a reference material corrected by SQL touches no other sample's verdict, but its error."""
    one_target(any_registry, 50)
    (tmp_path / "samples.csv").write_text(
        "sample_code,sample_kind,lithology,reference_material\nT1,core,granite,\nC1,reference_material,,XM-1\n"
        "C2,reference_material,,XM-1\n"
    )
    (tmp_path / "materials.csv").write_text(
        "reference_material,analyte,value,unit,uncertainty,status,source\nXM-1,Sn,100,ppm,10,certified,invented\n"
    )
    (tmp_path / "K1.csv").write_text(f"Sample,{MAJORS},Sn fusion (ppm)\nT1,{ROCK},120\nC1,{ROCK},98\nC2,{ROCK},104\n")
    import_files(any_registry, [tmp_path / name for name in ("samples.csv", "materials.csv", "K1.csv")])
    draw_probabilities(any_registry)
    assert sheet(any_registry, "probability_state") == {"T1": "computed"}
    refresh_registry(any_registry)
    assert sheet(any_registry, "probability_state") == {"T1": "computed"}
    with writing(any_registry) as connection:
        connection.exec_driver_sql("UPDATE result SET value = 99 WHERE value = 104")
    refresh_registry(any_registry)
    assert sheet(any_registry, "probability, probability_state") == {"T1": (None, "not_computed")}


def test_probability_is_the_same_with_child_processes(
    sqlite_registry: Registry, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    bring(one_target(sqlite_registry, 100), tmp_path, TIN)
    draw_probabilities(sqlite_registry)
    alone = sheet(sqlite_registry)
    with writing(sqlite_registry) as connection:
        connection.exec_driver_sql("UPDATE verdict SET probability_state = 'not_computed', probability = NULL")
    monkeypatch.setattr(surviving, "WORTH_HELPERS", 0)
    monkeypatch.setattr("os.cpu_count", lambda: 3)
    given: list[int] = []
    sharing = Helpers.share

    def watched(helpers: Helpers, function: Any, tasks: Any) -> list[Any]:
        given.append(len(tasks))
        return sharing(helpers, function, tasks)

    monkeypatch.setattr(Helpers, "share", watched)
    assert draw_probabilities(sqlite_registry) == len(TIN)
    assert given == [3]
    assert sheet(sqlite_registry) == alone


def test_what_a_child_process_raises_is_raised_here_and_the_others_end() -> None:
    with Helpers(2) as helpers:
        assert helpers.share(divmod, [(7, 2), (9, 4), (5, 5)]) == [(3, 1), (2, 1), (1, 0)]
        children = list(helpers.children)
        with pytest.raises(ZeroDivisionError, match="by zero"):
            helpers.share(divmod, [(7, 0), (9, 4), (5, 5)])
        assert helpers.share(divmod, [(1, 1)]) == [(1, 0)]
    assert [child.wait(5) for child in children] == [0, 0]


def run(*arguments: object) -> int:
    with pytest.raises(SystemExit) as ended:
        main([str(argument) for argument in arguments])
    return int(ended.value.code or 0)


def test_refresh_command_draws_and_says_what_it_is(
    founded_registry: Registry, tmp_path: Path, capsys: pytest.CaptureFixture
) -> None:
    bring(one_target(founded_registry, 20), tmp_path, TIN)
    assert run("refresh", "--probability", "--registry", founded_registry.path) == 0
    printed = capsys.readouterr().out
    assert "Drew probabilities for 5 samples" in printed and "not the chance of ore" in printed
    assert "Those drawn stand in verdict_sheet.probability and beside the verdicts on the sample pages." in printed
    assert table(founded_registry, "SELECT count(*) FROM verdict_sheet WHERE probability IS NOT NULL")[0][0] > 0
    assert table(founded_registry, "SELECT DISTINCT probability_state FROM verdict") == [("computed",)]
    assert run("refresh", "--probability", "--json", "--registry", founded_registry.path) == 0
    assert json.loads(capsys.readouterr().out) == {"recomputed": 0, "drawn": 0}
    assert run("refresh", "--probability", "--intrusion", "X", "--registry", founded_registry.path) == 2
    assert "there is no intrusion 'X'" in capsys.readouterr().err
