"""The samples list against the public view, on both engines. All rows are invented, to test order and joins."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pytest
import sqlalchemy as sa

from registry.store import tables
from registry.store.engine import Registry, reading, writing
from registry.store.reading.columns import Columns, load_columns
from registry.store.reading.filters import parse_filter
from registry.store.reading.sample import find_sample, near_codes
from registry.store.reading.samples import Place, every_sample, page_of_samples, shown_columns
from registry.store.sheets import SHEETS

RATIOS = (None, 5.0, 5.0, 20.0, -1.5, None, 5.0, 1e9, 0.0, 20.0)


def _fill(connection: Any) -> None:
    def insert(table: sa.Table, **values: Any) -> int:
        return int(connection.execute(sa.insert(table).values(**values)).inserted_primary_key[0])  # type: ignore[index]

    areas = [insert(tables.area, name=name) for name in ("North", "South")]
    site = insert(tables.site, code="DH-1", kind="drill_hole", area_id=areas[0])
    body = insert(tables.intrusion, name="Aster stock", area_id=areas[1])
    target = insert(tables.target, code="tin", name="Tin")
    version = insert(
        tables.target_version, target_id=target, version="1", definition="", created_at="2026-01-01T00:00:00Z", active=1
    )
    for n in range(40):
        sample = insert(
            tables.sample,
            code=f"s-{n:02d}",
            kind="core" if n % 2 else "outcrop",
            site_id=site if n % 4 == 1 else None,
            intrusion_id=body if n % 3 == 0 else None,
            lithology=None if n % 5 == 0 else f"rock {n % 4}",
        )
        if n % 8 == 7:
            continue
        insert(tables.composition, sample_id=sample, sio2_wt=50.0 + n, qualifiers="." * 81, digestions="." * 81)
        insert(
            tables.derived,
            sample_id=sample,
            sr_y=RATIOS[n % len(RATIOS)],
            causes="",
            warnings="",
            best_target="tin",
            best_verdict=n % 4,
        )
        connection.execute(
            sa.insert(tables.verdict).values(
                sample_id=sample, target_id=target, target_version_id=version, verdict=n % 4, score_min=n % 7 / 10,
                score_max=0.9, coverage=1.0, provisional=0, reasons="{}",
            )
        )  # fmt: skip
    connection.execute(sa.delete(tables.stale))


@pytest.fixture
def filled(any_registry: Registry) -> Iterator[tuple[Any, Columns]]:
    with writing(any_registry) as connection:
        _fill(connection)
    with reading(any_registry) as connection:
        yield connection, load_columns(connection)


def _all(connection: Any, columns: Columns, arguments: dict[str, list[str]], rows: int = 7) -> list[str]:
    """Codes over all pages forwards; the same pages backwards are checked against them."""
    asked = parse_filter(arguments, columns, ["tin"])
    assert asked.problems == {}
    page = page_of_samples(connection, asked, columns, rows=rows)
    pages = [page]
    while page.next:
        page = page_of_samples(connection, asked, columns, place=page.next, rows=rows)
        pages.append(page)
    assert {each.total for each in pages} == {sum(len(each.rows) for each in pages)}
    place, back = pages[-1].previous, []
    while place:
        page = page_of_samples(connection, asked, columns, place=place, rows=rows)
        back.append([row["sample_code"] for row in page.rows])
        place = page.previous
    forwards = [[row["sample_code"] for row in each.rows] for each in pages]
    assert back[::-1] == forwards[:-1]
    return [code for codes in forwards for code in codes]


@pytest.mark.parametrize("sort", ["", "-sample_code", "sr_y", "-sr_y", "lithology", "-lithology", "sio2_wt", "area"])
def test_pages_follow_the_view_in_every_order(filled: tuple[Any, Columns], sort: str) -> None:
    connection, columns = filled
    found = _all(connection, columns, {"sort": [sort]})
    name = sort.lstrip("-") or "sample_code"
    view = next(view for view in ("sample_sheet", "index_sheet") if name in SHEETS[view])
    direction = "DESC" if sort.startswith("-") else ""
    expected = connection.execute(
        sa.text(f"SELECT sample_code FROM {view} ORDER BY {name} IS NULL, {name} {direction}, sample_id")
    ).scalars()
    assert found == list(expected)


@pytest.mark.parametrize(
    ("arguments", "condition"),
    [
        ({"sr_y_min": ["5"], "sr_y_max": ["20"]}, "sr_y BETWEEN 5 AND 20"),
        ({"sio2_wt_min": ["70"], "sr_y_min": ["0"]}, "sio2_wt >= 70 AND sr_y >= 0"),
        ({"area": ["North"]}, "area = 'North'"),
        ({"area": ["South"]}, "area = 'South'"),
        ({"area": ["North", "South"], "kind": ["core"]}, "area IN ('North', 'South') AND sample_kind = 'core'"),
        ({"site": ["DH-1"], "sort": ["-sr_y"]}, "site_code = 'DH-1'"),
        ({"intrusion": ["Aster stock"]}, "intrusion = 'Aster stock'"),
        ({"verdict": ["favourable", "undecided"]}, "best_verdict IN ('favourable', 'undecided')"),
        ({"text": ["ROCK 2"]}, "lithology = 'rock 2'"),
        ({"text": ["aster"]}, "intrusion = 'Aster stock'"),
        ({"text": ["_0"]}, "1 = 0"),
        ({"text": ["%"]}, "1 = 0"),
    ],
)
def test_condition_finds_what_the_view_finds(
    filled: tuple[Any, Columns], arguments: dict[str, list[str]], condition: str
) -> None:
    connection, columns = filled
    expected = connection.execute(
        sa.text(
            "SELECT s.sample_code FROM sample_sheet AS s JOIN (SELECT sample_id, sr_y FROM index_sheet) AS x "
            f"ON x.sample_id = s.sample_id WHERE {condition} ORDER BY s.sample_code"
        )
    ).scalars()
    assert sorted(_all(connection, columns, arguments)) == list(expected)


def test_verdict_for_a_target_finds_what_the_verdict_view_finds(filled: tuple[Any, Columns]) -> None:
    connection, columns = filled
    found = _all(connection, columns, {"target": ["tin"], "verdict": ["possible"], "sort": ["-score"]})
    expected = connection.execute(
        sa.text(
            "SELECT sample_code FROM verdict_sheet WHERE target = 'tin' AND verdict = 'possible' "
            "ORDER BY score_min DESC, sample_id"
        )
    ).scalars()
    assert found == list(expected)


def test_target_without_verdict_keeps_samples_that_are_not_judged_last(filled: tuple[Any, Columns]) -> None:
    connection, columns = filled
    found = _all(connection, columns, {"target": ["tin"], "sort": ["-score"]})
    assert len(found) == 40
    assert found[-5:] == ["s-07", "s-15", "s-23", "s-31", "s-39"]


def test_every_sample_streams_the_rows_of_the_pages(filled: tuple[Any, Columns]) -> None:
    connection, columns = filled
    for arguments in ({"sort": ["-sr_y"]}, {"kind": ["core"], "target": ["tin"], "sort": ["lithology"]}):
        asked = parse_filter(arguments, columns, ["tin"])
        rows = list(every_sample(connection, asked, columns, shown_columns(asked, columns)))
        assert [row["sample_code"] for row in rows] == _all(connection, columns, arguments)


def test_page_beyond_the_end_is_empty_and_counts_on(filled: tuple[Any, Columns]) -> None:
    connection, columns = filled
    page = page_of_samples(connection, parse_filter({}, columns, []), columns, place=Place("zz", 9999))
    assert (page.rows, page.total, page.next, page.previous) == ([], 40, None, None)


def test_columns_are_those_of_the_one_row_views_each_once(filled: tuple[Any, Columns]) -> None:
    _, columns = filled
    wanted = {
        name
        for view in ("sample_sheet", "composition_sheet", "norm_sheet", "index_sheet", "class_sheet", "melt_sheet")
        for name in SHEETS[view]
    } - {"sample_id", "sample_code", "is_stale"}
    assert wanted <= set(columns)
    assert columns["sr_y"].numeric and not columns["lithology"].numeric and not columns["best_verdict"].numeric
    assert all(column.unit and column.meaning for column in columns.values())


def test_near_codes_give_the_other_case_first_then_the_neighbours(filled: tuple[Any, Columns]) -> None:
    connection, _ = filled
    assert near_codes(connection, "S-05")[0] == "s-05"
    assert near_codes(connection, "s-055") == ["s-03", "s-04", "s-05", "s-06", "s-07", "s-08"]
    assert find_sample(connection, "S-05") is None
