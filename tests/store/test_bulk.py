"""Bulk writes and reading back: what goes in comes out, on both engines. All numbers are invented."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pytest
import sqlalchemy as sa
from hypothesis import given, settings
from hypothesis import strategies as st

from registry.petrology.analytes import CHOSEN_COLUMNS, CHOSEN_INDEX
from registry.petrology.digestion import DIGESTIONS
from registry.store import batches, bulk, loading, raw_rows, target_rows
from registry.store.engine import Registry, reading, writing
from registry.store.sheets import DERIVED_COLUMNS


@dataclass
class Judged:
    """One target's verdicts, as the targets' engine gives them."""

    verdict: np.ndarray
    reasons: list[str]
    judged: np.ndarray
    score_min: np.ndarray = field(init=False)
    score_max: np.ndarray = field(init=False)
    coverage: np.ndarray = field(init=False)
    provisional: np.ndarray = field(init=False)

    def __post_init__(self) -> None:
        n = len(self.verdict)
        self.score_min = np.where(self.judged, 0.25, np.nan)
        self.score_max = np.where(self.judged, 0.75, np.nan)
        self.coverage = np.where(self.judged, 0.5, np.nan)
        self.provisional = np.zeros(n, dtype=bool)


def add_samples(connection: sa.Connection, count: int) -> np.ndarray:
    ids = bulk.allocate_ids(connection, "sample", count)
    raw_rows.insert(
        connection,
        "sample",
        ("sample_id", "code", "kind"),
        [ids.tolist(), [f"X{number:03d}" for number in ids.tolist()], ["core"] * count],
    )
    return ids


def add_batch(connection: sa.Connection, code: str, analytes: str, **facts: Any) -> tuple[int, np.ndarray]:
    batch_id = batches.insert_batch(connection, code=code, imported_at="2026-01-01T00:00:00Z", **facts)
    described = [
        {"position": position, "analyte": analyte, "unit": "ppm", "digestion": "fusion"}
        for position, analyte in enumerate(analytes.split())
    ]
    return batch_id, np.array(batches.insert_columns(connection, batch_id, described))


def composition(n: int, seed: int = 1) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    random = np.random.default_rng(seed)
    values = random.lognormal(2.0, 1.0, (len(CHOSEN_COLUMNS), n))
    values[random.random(values.shape) < 0.3] = np.nan
    values[5] = np.nan
    qualifiers = (random.random(values.shape) < 0.1).astype(np.uint8) * random.integers(1, 3, values.shape)
    digestions = random.integers(0, len(DIGESTIONS), values.shape)
    return values, qualifiers.astype(np.uint8), digestions.astype(np.uint8)


def test_allocated_ids_follow_on_and_are_never_given_twice(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        first = add_samples(connection, 3)
        connection.exec_driver_sql("DELETE FROM sample")
        second = add_samples(connection, 2)
    assert first.tolist() == [1, 2, 3]
    assert second.tolist() == [4, 5]
    with writing(any_registry) as connection:
        connection.exec_driver_sql("INSERT INTO sample (code, kind) VALUES ('Y', 'float')")
        assert connection.exec_driver_sql("SELECT max(sample_id) FROM sample").scalar() == 6
        assert bulk.allocate_ids(connection, "sample", 0).tolist() == []


def test_results_are_stored_without_the_empty_cells_in_key_order(any_registry: Registry) -> None:
    values = np.array([[1.5, np.nan, 3.0], [np.nan, np.nan, 0.5], [7.0, 8.0, np.nan]])
    qualifiers = np.array([[0, 0, 0], [0, 2, 1], [0, 0, 0]], dtype=np.uint8)
    with writing(any_registry) as connection:
        ids = add_samples(connection, 3)
        batch_id, columns = add_batch(connection, "K1", "Zr Hf Nb")
        aliquots = bulk.insert_aliquots(connection, ids, batch_id, [2, 3, 4], ["original"] * 3, np.zeros(3, dtype=int))
        count = bulk.insert_results(
            connection, aliquots[::-1], columns[::-1], values[::-1, ::-1], qualifiers[::-1, ::-1]
        )
        rows = connection.exec_driver_sql("SELECT * FROM result ORDER BY aliquot_id, column_id").fetchall()
    assert count == 6
    assert [tuple(row) for row in rows] == [
        (1, 1, 1.5, 0), (1, 3, 3.0, 0), (2, 2, None, 2), (2, 3, 0.5, 1), (3, 1, 7.0, 0), (3, 2, 8.0, 0),
    ]  # fmt: skip


def test_many_results_fill_whole_and_broken_statements(any_registry: Registry) -> None:
    """257 x 3 rows: several statements of 100 rows and a rest."""
    values = np.arange(771, dtype=float).reshape(257, 3)
    with writing(any_registry) as connection:
        ids = add_samples(connection, 257)
        batch_id, columns = add_batch(connection, "K1", "Zr Hf Nb")
        kinds = ["original"] * 257
        aliquots = bulk.insert_aliquots(connection, ids, batch_id, np.arange(257), kinds, np.zeros(257, dtype=int))
        bulk.insert_results(connection, aliquots, columns, values, np.zeros(values.shape, dtype=np.uint8))
    with reading(any_registry) as connection:
        (block,) = loading.load_blocks(connection, ids)
    assert np.array_equal(block.values, values)
    assert np.array_equal(block.sample, np.arange(257))


def test_results_of_the_wrong_shape_are_refused(any_registry: Registry) -> None:
    with writing(any_registry) as connection, pytest.raises(ValueError, match=r"must both be \(2, 3\)"):
        bulk.insert_results(connection, [1, 2], [1, 2, 3], np.zeros((3, 2)), np.zeros((3, 2), dtype=np.uint8))


def test_infinite_results_are_refused(any_registry: Registry) -> None:
    values = np.array([[1.0], [np.inf]])
    with (
        pytest.raises(ValueError, match=r"result\.value: row 1 holds an infinite number"),
        writing(any_registry) as connection,
    ):
        bulk.insert_results(connection, [1, 2], [1], values, np.zeros((2, 1), dtype=np.uint8))


def test_composition_comes_back_as_it_was_written(any_registry: Registry) -> None:
    values, qualifiers, digestions = composition(40)
    with writing(any_registry) as connection:
        ids = add_samples(connection, 41)
        bulk.write_composition(connection, ids[:40], values, qualifiers, digestions)
    with reading(any_registry) as connection:
        stored = loading.load_composition(connection, ids[::-1])
    assert np.array_equal(stored.sample_ids, ids)
    assert np.array_equal(stored.values[:, :40], values, equal_nan=True)
    assert np.array_equal(stored.qualifiers[:, :40], qualifiers)
    assert np.array_equal(stored.digestions[:, :40], digestions)
    assert np.isnan(stored.values[:, 40]).all()
    assert not stored.qualifiers[:, 40].any()


def test_composition_written_again_leaves_nothing_of_the_first(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        ids = add_samples(connection, 10)
        bulk.write_composition(connection, ids, *composition(10))
        values, qualifiers, digestions = composition(10, seed=2)
        values[20:] = np.nan
        qualifiers[20:] = 0
        bulk.write_composition(connection, ids, values, qualifiers, digestions)
        stored = loading.load_composition(connection, ids)
    assert np.array_equal(stored.values, values, equal_nan=True)
    assert np.array_equal(stored.qualifiers, qualifiers)


def test_censored_lists_columns_in_order_with_their_signs() -> None:
    qualifiers = np.zeros((len(CHOSEN_COLUMNS), 3), dtype=np.uint8)
    qualifiers[CHOSEN_INDEX["sn_ppm"], 0] = 2
    qualifiers[CHOSEN_INDEX["zr_ppm"], 0] = 1
    qualifiers[CHOSEN_INDEX["pd_ppm"], 2] = 1
    assert bulk.censored(qualifiers) == ["zr_ppm<,sn_ppm>", None, "pd_ppm<"]


@given(st.integers(0, 6), st.integers(0, 5), st.integers(0, 2**32 - 1))
@settings(deadline=None, max_examples=60, derandomize=True)
def test_packed_codes_unpack_to_themselves(n: int, width: int, seed: int) -> None:
    codes = np.random.default_rng(seed).integers(0, 3, (n, width)).astype(np.uint8)
    texts = bulk.packed(codes, ".<>")
    assert [len(text) for text in texts] == [width] * n
    if n and width:
        assert np.array_equal(loading.unpacked(texts, ".<>"), codes)


def derived(n: int) -> dict[str, np.ndarray]:
    return {
        "mg_number": np.where(np.arange(n) % 2, 61.5, np.nan),
        "asi": np.full(n, np.nan),
        "silica_class": np.array(["acid", None] * n, dtype=object)[:n],
        "not_a_liquid": np.arange(n) % 2 == 0,
    }


def write_derived(connection: sa.Connection, ids: np.ndarray, columns: dict[str, np.ndarray], **best: Any) -> None:
    n = len(ids)
    causes = np.tile(np.frombuffer(b".a.", dtype=np.uint8), (n, 1))
    warnings = np.tile(np.frombuffer(b"01", dtype=np.uint8), (n, 1))
    conventions = target_rows.convention_set_id(connection, {}, "2026-01-01T00:00:00Z")
    bulk.write_derived(connection, ids, columns, causes, warnings, conventions, "1", **best)


def test_derived_rows_hold_what_was_given_and_null_elsewhere(any_registry: Registry) -> None:
    best = {
        "best_target": np.array(["tin", None, "tin", None], dtype=object),
        "best_verdict": np.array(["possible", None, "undecided", None], dtype=object),
    }
    with writing(any_registry) as connection:
        ids = add_samples(connection, 4)
        write_derived(connection, ids, derived(4), **best)
        rows = connection.exec_driver_sql(
            "SELECT mg_number, asi, silica_class, not_a_liquid, causes, warnings, best_target, best_verdict "
            "FROM derived ORDER BY sample_id"
        ).fetchall()
    assert [tuple(row) for row in rows] == [
        (None, None, "acid", 1.0, ".a.", "01", "tin", 1),
        (61.5, None, None, 0.0, ".a.", "01", None, None),
        (None, None, "acid", 1.0, ".a.", "01", "tin", 3),
        (61.5, None, None, 0.0, ".a.", "01", None, None),
    ]


def test_derived_rows_written_again_lose_what_is_no_longer_there(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        ids = add_samples(connection, 2)
        write_derived(connection, ids, derived(2), best_target=np.array(["tin", "tin"], dtype=object),
                      best_verdict=np.array(["possible"] * 2, dtype=object))  # fmt: skip
        write_derived(connection, ids, {"sr_y": np.array([20.0, 30.0])})
        rows = connection.exec_driver_sql(
            "SELECT mg_number, silica_class, sr_y, best_target, best_verdict FROM derived ORDER BY sample_id"
        ).fetchall()
    assert [tuple(row) for row in rows] == [(None, None, 20.0, None, None), (None, None, 30.0, None, None)]


def test_derived_column_without_a_place_is_named(any_registry: Registry) -> None:
    with writing(any_registry) as connection, pytest.raises(ValueError, match=r"no columns \['mg_numbr'\]"):
        write_derived(connection, np.array([1]), {"mg_numbr": np.array([1.0])})


def test_infinite_derived_value_is_refused_with_its_column(any_registry: Registry) -> None:
    with writing(any_registry) as connection, pytest.raises(ValueError, match="sr_y: row 1 holds an infinite number"):
        write_derived(connection, np.array([1, 2]), {"sr_y": np.array([1.0, -np.inf])})


def install_target(connection: sa.Connection) -> tuple[int, int]:
    """The ids of an invented target and its version."""
    criterion = {"kind": "criterion", "provisional": 1, "label": "Invented", "source": "invented", "weight": 0.5}
    target_rows.install_definition(
        connection, "tin", "Tin", "1", "invented",
        [
            {**criterion, "position": 0, "code": "high", "comparison": ">= 20", "threshold": 20.0},
            {**criterion, "position": 1, "code": "low", "comparison": "< 5", "threshold": 5.0},
            {**criterion, "position": 2, "code": "window", "comparison": "between 10 and 30", "threshold": 10.0},
            {**criterion, "position": 3, "code": "series", "comparison": "= magnetite", "threshold": None},
        ],
        "2026-01-01T00:00:00Z",
    )  # fmt: skip
    ((target_id, version_id, _, _),) = target_rows.active_definitions(connection)
    return target_id, version_id


REASONS = (
    '{"outcomes":"mnru","values":[25.5,7.0,31.5,null],"thresholds":[20.0,5.0,30.0,null],'
    '"texts":{"3":"missing: feo_titrated_wt","0":"four-acid: at least"}}'
)


def test_verdicts_are_written_overwritten_and_deleted_for_controls(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        target = install_target(connection)
        ids = add_samples(connection, 3)
        everywhere = np.ones(3, dtype=bool)
        first = Judged(np.array([0, 1, 2], dtype=np.uint8), [REASONS] * 3, everywhere)
        bulk.write_verdicts(connection, ids, [(*target, first)])
        before = bulk.verdicts_of(connection, ids, [target[0], 99])
        again = Judged(np.array([0, 3, 255], dtype=np.uint8), [REASONS, REASONS, ""], np.array([True, True, False]))
        bulk.write_verdicts(connection, ids, [(*target, again)])
        after = bulk.verdicts_of(connection, ids, [target[0], 99])
        assert (after[:1] == bulk.codes_of([again], 3)).all()
        logged = bulk.log_verdict_changes(connection, ids, [target[0], 99], before, after, "edited", "2026-01-02")
        changes = connection.exec_driver_sql(
            "SELECT sample_code, target, verdict_from, verdict_to, cause FROM change_sheet ORDER BY sample_id"
        ).fetchall()
    none = bulk.NO_VERDICT
    assert before.tolist() == [[0, 1, 2], [none] * 3]
    assert after.tolist() == [[0, 3, none], [none] * 3]
    assert logged == 2
    assert [tuple(row) for row in changes] == [
        ("X002", "tin", "possible", "undecided", "edited"),
        ("X003", "tin", "unfavourable", None, "edited"),
    ]
    with writing(any_registry) as connection:
        assert bulk.last_verdict_change(connection) == 2
        assert bulk.count_verdict_changes(connection, 1) == 1
        first_of_all = np.full_like(after, none)
        assert bulk.log_verdict_changes(connection, ids, [target[0], 99], first_of_all, after, "first", "2026") == 0


def test_verdict_with_broken_reasons_is_refused(any_registry: Registry) -> None:
    """One JSON that is none would break the whole view."""
    with writing(any_registry) as connection:
        target = install_target(connection)
        add_samples(connection, 1)
    broken = Judged(np.array([0], dtype=np.uint8), ['{"values":[NaN'], np.ones(1, dtype=bool))
    with (
        pytest.raises(
            Exception, match=r"CHECK constraint failed: ck_verdict_reasons|invalid input syntax for type json"
        ),
        writing(any_registry) as connection,
    ):
        bulk.write_verdicts(connection, np.array([1]), [(*target, broken)])


def test_reason_sheet_takes_the_packed_reasons_apart(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        target = install_target(connection)
        ids = add_samples(connection, 1)
        judged = Judged(np.zeros(1, dtype=np.uint8), [REASONS], np.ones(1, dtype=bool))
        bulk.write_verdicts(connection, ids, [(*target, judged)])
        rows = connection.exec_driver_sql(
            "SELECT criterion, value, value_text, threshold, margin, outcome, missing, provisional, source, is_stale "
            "FROM reason_sheet"
        ).fetchall()
        verdict = connection.exec_driver_sql("SELECT * FROM verdict_sheet").one()
    assert sorted(tuple(row) for row in rows) == [
        ("high", 25.5, "four-acid: at least", 20.0, 5.5, "met", None, 1, "invented", 1),
        ("low", 7.0, None, 5.0, -2.0, "not met", None, 1, "invented", 1),
        ("series", None, None, None, None, "unknown", "feo_titrated_wt", 1, "invented", 1),
        ("window", 31.5, None, 30.0, -1.5, "near", None, 1, "invented", 1),
    ]
    assert tuple(verdict) == (1, "X001", "tin", "favourable", 0.25, 0.75, 0.5, None, "not_computed", 0, "1", 1)


def test_bulk_outside_a_transaction_is_a_fault_of_the_caller(sqlite_registry: Registry) -> None:
    with sqlite_registry.writer.connect() as connection, pytest.raises(RuntimeError, match=r"inside writing\(\)"):
        raw_rows.insert(connection, "area", ("name",), [["Invented Block"]])


def test_fault_at_any_write_leaves_nothing(any_registry: Registry, monkeypatch: pytest.MonkeyPatch) -> None:
    """Raise at the n-th write, for every n: nothing of the transaction may stay."""
    values, qualifiers, digestions = composition(3)
    done = {"insert": raw_rows.insert, "upsert": raw_rows.upsert}
    writes = 0

    def store(fail_at: int | None) -> None:
        nonlocal writes
        writes = 0

        def counted(name: str) -> Any:
            def write(*arguments: Any, **named: Any) -> None:
                nonlocal writes
                writes += 1
                if writes == fail_at:
                    raise OSError("planted: disk full")
                done[name](*arguments, **named)

            return write

        for name in done:
            monkeypatch.setattr(raw_rows, name, counted(name))
        with writing(any_registry) as connection:
            target = install_target(connection)
            ids = add_samples(connection, 3)
            batch_id, columns = add_batch(connection, "K1", "Zr Hf")
            with bulk.guarded(connection):
                aliquots = bulk.insert_aliquots(
                    connection, ids, batch_id, [1, 2, 3], ["original"] * 3, np.zeros(3, int)
                )
                bulk.insert_results(connection, aliquots, columns, np.ones((3, 2)), np.zeros((3, 2), np.uint8))
                bulk.write_composition(connection, ids, values, qualifiers, digestions)
                write_derived(connection, ids, derived(3))
                judged = Judged(np.zeros(3, dtype=np.uint8), [REASONS] * 3, np.ones(3, dtype=bool))
                bulk.write_verdicts(connection, ids, [(*target, judged)])

    names = ("sample", "batch", "batch_column", "aliquot", "result", "composition", "derived", "verdict", "stale",
             "import_guard", "target", "criterion")  # fmt: skip
    for fail_at in range(1, 7):
        with pytest.raises(OSError, match="planted: disk full"):
            store(fail_at)
        with reading(any_registry) as connection:
            for name in names:
                assert connection.exec_driver_sql(f"SELECT count(*) FROM {name}").scalar() == 0, (fail_at, name)
    store(None)
    assert writes == 6
    with reading(any_registry) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM verdict").scalar() == 3


def test_every_quantity_has_a_column_that_takes_it(any_registry: Registry) -> None:
    """Every derived column at once, numbers and words, as the pipeline gives them."""
    from registry.petrology.catalogue import QUANTITIES

    units = {quantity.name: quantity.unit for quantity in QUANTITIES}
    columns = {
        name: np.array(["invented"], dtype=object) if units[name] == "text" else np.array([1.25])
        for name in DERIVED_COLUMNS
    }
    with writing(any_registry) as connection:
        write_derived(connection, add_samples(connection, 1), columns)
        row = connection.exec_driver_sql(f"SELECT {', '.join(DERIVED_COLUMNS)} FROM derived").one()
    assert set(row) == {"invented", 1.25}


def test_verdicts_of_several_targets_are_written_at_once(any_registry: Registry) -> None:
    """Seven targets with two patterns of judged samples, each row in its place."""
    with writing(any_registry) as connection:
        for code in "abcdefg":
            row = {"position": 0, "kind": "criterion", "code": "x", "label": "Invented", "provisional": 0}
            target_rows.install_definition(connection, code, code, "1", code, [row], "2026-01-01T00:00:00Z")
        installed = target_rows.active_definitions(connection)
        ids = add_samples(connection, 5)
        masks = [np.array([True, True, False, True, True]), np.ones(5, dtype=bool)]
        judged = [
            (target_id, version_id, Judged(np.full(5, place % 4, np.uint8), [REASONS] * 5, masks[place % 2]))
            for place, (target_id, version_id, _, _) in enumerate(installed)
        ]
        bulk.write_verdicts(connection, ids, judged)
        stored = bulk.verdicts_of(connection, ids, [target_id for target_id, _, _, _ in installed[::-1]])
    assert stored[::-1].tolist() == [
        [place % 4 if masks[place % 2][row] else bulk.NO_VERDICT for row in range(5)] for place in range(len(installed))
    ]
