"""The samples page with three ranges and an order on 100,000 samples: at most twice the bare SQL of the same page.

The rows are drawn at random, to have something to scan. Both sides run in this process on the same file, taken in
turns; the figure is a ratio of medians. The bare side reads the 50 rows and the count with sqlite3 alone, in the one
statement a person would write for it.
"""

from __future__ import annotations

import os
import sqlite3
import statistics
import time
from pathlib import Path

import numpy as np
import pytest

from registry.founding import found
from registry.store.engine import open_registry, reading
from registry.store.reading.columns import load_columns
from registry.store.reading.filters import parse_filter
from registry.store.reading.samples import page_of_samples
from web import create_app

SAMPLES = int(os.environ.get("PLUTONBOOK_BENCHMARK_SAMPLES", "100000"))
MOST_RATIO, TURNS = 2.0, 9
RANGES = (("sio2_wt", 52.0, 70.0), ("sr_y", 20.0, 80.0), ("differentiation_index", 40.0, 88.0))
QUERY = "&".join(f"{name}_min={low:g}&{name}_max={high:g}" for name, low, high in RANGES) + "&sort=-la_yb"
BARE = """
    SELECT s.code, k.code, i.name, s.lithology, s.from_m, s.to_m, c.sio2_wt, c.mgo_wt, d.differentiation_index,
        d.tas_plutonic, d.best_target, d.best_verdict, d.sr_y, d.la_yb, count(*) OVER ()
    FROM sample AS s JOIN derived AS d ON d.sample_id = s.sample_id
    JOIN composition AS c ON c.sample_id = s.sample_id
    LEFT JOIN site AS k ON k.site_id = s.site_id LEFT JOIN intrusion AS i ON i.intrusion_id = s.intrusion_id
    WHERE c.sio2_wt BETWEEN 52 AND 70 AND d.sr_y BETWEEN 20 AND 80 AND d.differentiation_index BETWEEN 40 AND 88
    ORDER BY d.la_yb DESC, s.sample_id LIMIT 50
"""

pytestmark = pytest.mark.benchmark


def _insert(connection: sqlite3.Connection, table: str, columns: dict[str, object]) -> None:
    marks = ", ".join("?" * len(columns))
    rows = zip(
        *(column if isinstance(column, list) else [column] * SAMPLES for column in columns.values()), strict=True
    )
    connection.executemany(f"INSERT INTO {table} ({', '.join(columns)}) VALUES ({marks})", rows)


@pytest.fixture(scope="module")
def wide_registry(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """100,000 samples with every composition and derived number filled, as after an import."""
    path = tmp_path_factory.mktemp("list") / "wide.sqlite"
    registry = found(path)
    registry.close()
    random = np.random.default_rng(41)
    connection = sqlite3.connect(path, isolation_level=None)
    connection.execute("BEGIN")
    connection.execute("INSERT INTO import_guard VALUES (1)")
    keys = list(range(1, SAMPLES + 1))
    _insert(connection, "sample", {"sample_id": keys, "code": [f"S{key:06d}" for key in keys], "kind": "core"})
    for table in ("composition", "derived"):
        info = connection.execute(f"PRAGMA table_info({table})").fetchall()
        numbers = [row[1] for row in info if row[2] == "REAL"]
        columns: dict[str, object] = {"sample_id": keys}
        for name in numbers:
            columns[name] = np.round(random.uniform(0.0, 100.0, SAMPLES), 4).tolist()
        if table == "composition":
            columns |= {"qualifiers": "." * 81, "digestions": "x" * 81}
        else:
            columns |= {
                "causes": "." * 240,
                "warnings": "0" * 90,
                "best_verdict": random.integers(0, 4, SAMPLES).tolist(),
            }
        _insert(connection, table, columns)
    connection.execute("DELETE FROM stale")
    connection.execute("DELETE FROM import_guard")
    connection.execute("COMMIT")
    connection.close()
    return path


def _median_times(*sides: object) -> list[float]:
    taken: list[list[float]] = [[] for _ in sides]
    for _ in range(TURNS):
        for times, side in zip(taken, sides, strict=True):
            start = time.perf_counter()
            side()  # type: ignore[operator]
            times.append(time.perf_counter() - start)
    return [statistics.median(times) for times in taken]


def test_list_page_of_100_000_samples_takes_at_most_twice_the_bare_sql(wide_registry: Path) -> None:
    bare = sqlite3.connect(wide_registry)
    bare.execute("PRAGMA cache_size=-65536")
    registry = open_registry(wide_registry)
    app = create_app(str(wide_registry))
    client = app.test_client()
    with reading(registry) as connection:
        columns = load_columns(connection)
    asked = parse_filter({key: [value] for key, value in (pair.split("=") for pair in QUERY.split("&"))}, columns, [])

    def bare_sql() -> list[tuple[object, ...]]:
        return bare.execute(BARE).fetchall()

    def query() -> None:
        with reading(registry) as connection:
            page_of_samples(connection, asked, columns)

    def page() -> str:
        return client.get(f"/samples?{QUERY}").text

    rows = bare_sql()
    with reading(registry) as connection:
        found_page = page_of_samples(connection, asked, columns)
    assert [row["sample_code"] for row in found_page.rows] == [row[0] for row in rows]
    assert found_page.total == rows[0][-1] > 50
    bare_time, query_time, page_time = _median_times(bare_sql, query, page)
    print(f"\nbare {bare_time * 1e3:.1f} ms, query {query_time * 1e3:.1f} ms, page {page_time * 1e3:.1f} ms")
    assert query_time <= MOST_RATIO * bare_time
    assert page_time <= MOST_RATIO * bare_time
    bare.close()
    registry.close()
    app.extensions["registry"].close()


def test_list_next_page_costs_no_more_than_the_first(wide_registry: Path) -> None:
    """Keyset paging: no page further on reads through what came before it twice."""
    registry = open_registry(wide_registry)
    with reading(registry) as connection:
        columns = load_columns(connection)
        asked = parse_filter({"sort": ["-la_yb"], "sr_y_min": ["10"]}, columns, [])
        first = page_of_samples(connection, asked, columns)
        middle = page_of_samples(connection, asked, columns)
        for _ in range(5):
            middle = page_of_samples(connection, asked, columns, place=middle.next)
        times = _median_times(
            lambda: page_of_samples(connection, asked, columns),
            lambda: page_of_samples(connection, asked, columns, place=middle.next),
        )
    assert first.total == middle.total
    print(f"\nfirst {times[0] * 1e3:.1f} ms, later {times[1] * 1e3:.1f} ms")
    assert times[1] <= 1.5 * times[0]
    registry.close()
