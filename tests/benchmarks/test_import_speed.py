"""The whole import against bare sqlite3: at most 2.5 times ``executemany`` of the same long rows, under 1 GB.

Each side runs in a process of its own; the figures are ratios within one run.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

SAMPLES = int(os.environ.get("PLUTONBOOK_BENCHMARK_SAMPLES", "100000"))
MOST_RATIO, MOST_BYTES = 2.5, 1_000_000_000
HERE = Path(__file__).parent

BARE = """
import json, sqlite3, sys, time
sys.path.insert(0, {here!r})
from batch_of_results import COLUMNS, censored_of, values_of
n = {n}
values, marks = values_of(n), censored_of(n).astype(int)
columns = len(COLUMNS)
aliquots = [i for i in range(1, n + 1) for _ in range(columns)]
rows = zip(aliquots, list(range(1, columns + 1)) * n, values.ravel().tolist(), marks.ravel().tolist())
db = sqlite3.connect({path!r}, isolation_level=None)
db.execute("PRAGMA journal_mode=WAL")
db.execute("PRAGMA synchronous=NORMAL")
db.execute("CREATE TABLE result(aliquot_id INTEGER NOT NULL, column_id INTEGER NOT NULL, value REAL, "
           "qualifier INTEGER NOT NULL, PRIMARY KEY (aliquot_id, column_id)) STRICT, WITHOUT ROWID")
start = time.perf_counter()
db.execute("BEGIN IMMEDIATE")
db.executemany("INSERT INTO result VALUES (?, ?, ?, ?)", rows)
db.execute("COMMIT")
print(json.dumps({{"seconds": time.perf_counter() - start}}))
"""

IMPORT = """
import json, resource, sys, time
sys.path.insert(0, {here!r})
from pathlib import Path
from registry.founding import found
from registry.importing import ImportOptions, import_files
registry = found({path!r})
import_files(registry, [Path({samples!r})])
before = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss
start = time.perf_counter()
report = import_files(registry, [Path({results!r})], ImportOptions(batch="B1"))
seconds = time.perf_counter() - start
assert report.recomputed == {n}, report.recomputed
peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss + resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss
print(json.dumps({{"seconds": seconds, "peak_bytes": peak * 1024}}))
"""


def run(code: str) -> dict[str, float]:
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, cwd=HERE.parents[1], check=False
    )
    assert done.returncode == 0, done.stderr
    return json.loads(done.stdout.splitlines()[-1])


@pytest.mark.benchmark
def test_import_of_a_large_batch_stays_near_bare_sqlite(tmp_path: Path, record_property) -> None:
    sys.path.insert(0, str(HERE))
    try:
        from batch_of_results import write_files
    finally:
        sys.path.remove(str(HERE))
    samples, results = write_files(tmp_path, SAMPLES)
    names = {"here": str(HERE), "n": SAMPLES, "samples": str(samples), "results": str(results)}
    bare = run(BARE.format(path=str(tmp_path / "bare.sqlite"), **names))
    whole = run(IMPORT.format(path=str(tmp_path / "registry.sqlite"), **names))
    ratio = whole["seconds"] / bare["seconds"]
    print(
        f"import {whole['seconds']:.1f} s, bare {bare['seconds']:.1f} s, ratio {ratio:.2f}, "
        f"peak {whole['peak_bytes'] / 1e6:.0f} MB"
    )
    record_property("ratio", ratio)
    assert ratio <= MOST_RATIO
    assert whole["peak_bytes"] < MOST_BYTES
