"""The map of 100,000 samples against the bare SQL that reads the same rows, drawn one by one and in cells.

The samples are invented: they stand at random along 300 surveyed holes, or on 4,000 places. Both sides run in this
process on the same file, in turns; the figure is a ratio of medians. The goal in milliseconds (500) is printed, and
asserted only in its ratio. The page places, stacks, tells apart and draws what the bare side only reads.
"""

from __future__ import annotations

import os
import sqlite3
from pathlib import Path

import numpy as np
import pytest

from registry.founding import found
from tests.benchmarks.turns import medians
from web import create_app

SAMPLES = int(os.environ.get("PLUTONBOOK_BENCHMARK_SAMPLES", "100000"))
HOLES, PLACES, TURNS, MOST_RATIO = 300, 4000, 7, 4.0
BARE = """
    SELECT s.sample_id, s.kind, d.best_verdict, d.sr_y, s.site_id, s.easting, s.northing, s.epsg, s.longitude,
        s.latitude, s.position_basis FROM sample AS s LEFT JOIN derived AS d ON d.sample_id = s.sample_id
    ORDER BY s.sample_id
"""

pytestmark = pytest.mark.benchmark


def _insert(connection: sqlite3.Connection, table: str, columns: dict[str, object], number: int) -> None:
    lists = [column if isinstance(column, list) else [column] * number for column in columns.values()]
    marks = ", ".join("?" * len(lists))
    connection.executemany(
        f"INSERT INTO {table} ({', '.join(columns)}) VALUES ({marks})", zip(*lists, strict=True)
    )  # fmt: skip


def _write(path: Path, epsg: int | None) -> None:
    """Samples along holes where ``epsg`` is None (their positions given in degrees alone), else on few places."""
    found(path).close()
    random = np.random.default_rng(19)
    connection = sqlite3.connect(path, isolation_level=None)
    connection.execute("BEGIN")
    connection.execute("INSERT INTO import_guard VALUES (1)")
    holes = list(range(1, HOLES + 1))
    collars = random.uniform([14.6, 54.8], [15.4, 55.2], (HOLES, 2))
    _insert(connection, "site", {
        "site_id": holes, "code": [f"H{n:03d}" for n in holes], "kind": "drill_hole", "depth_m": 800.0,
        "elevation_m": 300.0, "longitude": collars[:, 0].tolist(), "latitude": collars[:, 1].tolist(),
        "azimuth_reference": "true",
    }, HOLES)  # fmt: skip
    _insert(connection, "survey", {"site_id": holes, "depth_m": 0.0, "azimuth_deg": 45.0, "dip_deg": -60.0}, HOLES)
    keys = list(range(1, SAMPLES + 1))
    site = random.integers(0, HOLES, SAMPLES)
    values: dict[str, object] = {
        "sample_id": keys, "code": [f"S{key:06d}" for key in keys], "kind": "core", "site_id": (site + 1).tolist(),
        "position_basis": "desurveyed, middle of the interval",
    }  # fmt: skip
    if epsg is None:
        along = random.uniform(0.0, 0.004, SAMPLES)
        values |= {name: (collars[site, n] + along).tolist() for n, name in enumerate(("longitude", "latitude"))}
    else:
        spots = random.uniform([475000.0, 6080000.0], [525000.0, 6115000.0], (PLACES, 2))
        spot = random.integers(0, PLACES, SAMPLES)
        values |= {"easting": spots[spot, 0].tolist(), "northing": spots[spot, 1].tolist(), "epsg": epsg}
        connection.execute("UPDATE site SET easting = 500000, northing = 6100000, epsg = ?", (epsg,))
        values |= {"longitude": 15.0, "latitude": 55.0}
    _insert(connection, "sample", values, SAMPLES)
    derived = {"sample_id": keys, "sr_y": np.round(random.lognormal(3.0, 0.8, SAMPLES), 4).tolist(),
               "causes": "." * 240, "warnings": "0" * 90,
               "best_verdict": random.integers(0, 4, SAMPLES).tolist()}  # fmt: skip
    _insert(connection, "derived", derived, SAMPLES)
    for table in ("stale", "import_guard"):
        connection.execute(f"DELETE FROM {table}")
    connection.execute("COMMIT")
    connection.execute("ANALYZE")
    connection.close()


@pytest.fixture(scope="module")
def along_holes(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("map") / "holes.sqlite"
    _write(path, None)
    return path


@pytest.fixture(scope="module")
def on_places(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("map") / "places.sqlite"
    _write(path, 32633)
    return path


@pytest.mark.parametrize("query", ["", "?number=sr_y"])
@pytest.mark.parametrize("registry", ["along_holes", "on_places"])
def test_map_of_100_000_samples_against_the_bare_sql(request: pytest.FixtureRequest, registry: str, query: str) -> None:
    path = request.getfixturevalue(registry)
    bare = sqlite3.connect(path)
    app = create_app(str(path))
    client = app.test_client()
    text = client.get(f"/map{query}").text
    counted = f"{SAMPLES:,}".replace(",", "\u202f")
    assert f"{counted} of {counted} samples" in text
    page, rows = medians(TURNS, lambda: client.get(f"/map{query}").text, lambda: bare.execute(BARE).fetchall())
    print(f"\n{registry}{query}: page {page * 1e3:.0f} ms (goal 500), bare {rows * 1e3:.0f} ms, {page / rows:.1f}")
    assert page <= MOST_RATIO * rows
    bare.close()
    app.extensions["registry"].close()
