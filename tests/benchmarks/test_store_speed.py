"""The store's own share of a large import against bare sqlite3, and the quick expansions of packed strings.

Invented numbers. The bare side writes the long result rows only; the store writes these and the compositions, derived
rows and verdicts of the same samples, with foreign keys, triggers and indexes. Each side runs in a process of its own.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

SAMPLES = int(os.environ.get("PLUTONBOOK_BENCHMARK_SAMPLES", "100000"))
#: What the store may take of the whole import's 2.5: the rest is parsing and computing.
#: Ours: what the store alone may take of an import that does not hand rows over ready (PostgreSQL, small imports).
MOST_RATIO, ROUNDS = 2.3, 2
HERE = Path(__file__).parent

BARE = """
import json, sqlite3, sys, time
sys.path.insert(0, {here!r})
from batch_of_results import COLUMNS, censored_of, values_of
n, columns = {n}, len(COLUMNS)
values, marks = values_of(n), censored_of(n).astype(int)
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

STORE = """
import json, sys, time
from types import SimpleNamespace
sys.path.insert(0, {here!r})
import numpy as np
from batch_of_results import COLUMNS, censored_of, values_of
from registry.founding import found
from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.petrology.catalogue import QUANTITIES, WARNINGS
from registry.store import batches, bulk, masters, target_rows
from registry.store.engine import writing
n, chunk = {n}, 16_384
values, marks = values_of(n), censored_of(n).astype(np.uint8)
registry = found({path!r})
with writing(registry) as connection:
    ids = np.array(list(masters.add_samples(connection, [f"BM{{i:07d}}" for i in range(n)]).values()))
    connection.exec_driver_sql("DELETE FROM stale")
random = np.random.default_rng(3)
few = min(n, chunk)
def columns_of(length):
    columns = {{}}
    for quantity in QUANTITIES:
        if quantity.unit == "text":
            columns[quantity.name] = np.array(["granodiorite"] * length, dtype=object)
        else:
            columns[quantity.name] = random.random(length)
    return columns
derived = columns_of(few)
causes = np.full((few, len(QUANTITIES)), ord("."), np.uint8)
warnings = np.full((few, len(WARNINGS)), ord("0"), np.uint8)
reasons = ['{{"outcomes":"mmnmunmmnmmnmn","values":[' + ",".join(["12.3456"] * 14) + '],"thresholds":['
           + ",".join(["10.0"] * 14) + '],"texts":{{"4":"missing: zr_ppm"}}}}'] * few
def judged(length):
    share = np.full(length, 0.5)
    return SimpleNamespace(verdict=np.zeros(length, np.uint8), score_min=share, score_max=share, coverage=share,
                           provisional=np.ones(length, bool), judged=np.ones(length, bool), reasons=reasons[:length])
spent = {{}}
def timed(name, function, *arguments):
    begin = time.perf_counter()
    result = function(*arguments)
    spent[name] = spent.get(name, 0.0) + time.perf_counter() - begin
    return result
start = time.perf_counter()
with writing(registry, bulk=True) as connection, bulk.guarded(connection):
    batch_id = batches.insert_batch(connection, code="B1", imported_at="2026-01-01T00:00:00Z")
    column_ids = batches.insert_columns(connection, batch_id, [
        {{"position": p, "analyte": name.split()[0], "unit": "ppm"}} for p, name in enumerate(COLUMNS)])
    aliquots = timed("aliquots", bulk.insert_aliquots, connection, ids, batch_id, np.arange(n), ["original"] * n,
                     np.zeros(n, int))
    timed("results", bulk.insert_results, connection, aliquots, column_ids, values, marks)
    conventions = target_rows.convention_set_id(connection, {{}}, "2026-01-01T00:00:00Z")
    targets = target_rows.active_definitions(connection)
    for begin in range(0, n, chunk):
        part = ids[begin:begin + chunk]
        m = len(part)
        chosen = np.full((len(CHOSEN_COLUMNS), m), np.nan)
        chosen[:len(COLUMNS)] = values[begin:begin + m].T
        signs = np.zeros(chosen.shape, np.uint8)
        signs[:len(COLUMNS)] = marks[begin:begin + m].T
        timed("composition", bulk.write_composition, connection, part, chosen, signs, signs,
              True)
        timed("derived", bulk.write_derived, connection, part, {{k: v[:m] for k, v in derived.items()}}, causes[:m],
              warnings[:m], conventions, "1", None, None, True)
        timed("verdicts", bulk.write_verdicts, connection, part, [(t[0], t[1], judged(m)) for t in targets],
              True)
seconds = time.perf_counter() - start
spent["commit"] = seconds - sum(spent.values())
print(json.dumps({{"seconds": seconds, "spent": spent, "verdicts": n * len(targets)}}))
"""


def run(code: str, **names: object) -> dict[str, float]:
    done = subprocess.run(
        [sys.executable, "-c", code.format(here=str(HERE), **names)],
        capture_output=True,
        text=True,
        cwd=HERE.parents[1],
        check=False,
    )
    assert done.returncode == 0, done.stderr
    return json.loads(done.stdout.splitlines()[-1])


@pytest.mark.benchmark
def test_store_writes_everything_of_an_import_near_bare_sqlite(tmp_path: Path, record_property) -> None:
    rounds = [
        (
            run(BARE, n=SAMPLES, path=str(tmp_path / f"bare{turn}")),
            run(STORE, n=SAMPLES, path=str(tmp_path / f"all{turn}")),
        )
        for turn in range(ROUNDS)
    ]
    bare, store = (min(side, key=lambda run_of: run_of["seconds"]) for side in zip(*rounds, strict=True))
    ratio = store["seconds"] / bare["seconds"]
    record_property("ratio", ratio)
    print(f"store {store['seconds']:.1f} s, bare {bare['seconds']:.1f} s, ratio {ratio:.2f}; {store['spent']}")
    assert ratio <= MOST_RATIO
