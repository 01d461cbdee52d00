"""The two ways into a registry: who may write, who waits, and what a failure leaves."""

from __future__ import annotations

import json
import math
import os
import socket
import sqlite3
import threading
import time
from pathlib import Path

import numpy as np
import pytest
import sqlalchemy as sa

from registry.errors import RegistryBusy
from registry.store import holder, tables
from registry.store.engine import Registry, reading, writing
from registry.store.types import plain


def areas(registry: Registry) -> list[str]:
    with reading(registry) as connection:
        return list(connection.exec_driver_sql("SELECT name FROM area ORDER BY name").scalars())


def test_reading_refuses_to_write(any_registry: Registry) -> None:
    with (
        pytest.raises(sa.exc.DBAPIError, match=r"readonly|read-only"),
        reading(any_registry) as connection,
    ):
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Invented Block')")
    assert areas(any_registry) == []


def test_reading_sees_one_unchanging_picture(any_registry: Registry) -> None:
    with reading(any_registry) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM area").scalar() == 0
        with writing(any_registry) as writer:
            writer.exec_driver_sql("INSERT INTO area (name) VALUES ('Invented Block')")
        assert connection.exec_driver_sql("SELECT count(*) FROM area").scalar() == 0
    assert areas(any_registry) == ["Invented Block"]


def test_writing_drains_before_it_commits(any_registry: Registry) -> None:
    seen = []

    def drain(connection: sa.Connection) -> None:
        seen.append(connection.exec_driver_sql("SELECT count(*) FROM area").scalar())
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Drained Block')")

    with writing(any_registry, drain) as connection:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Invented Block')")
    assert seen == [1]
    assert areas(any_registry) == ["Drained Block", "Invented Block"]


@pytest.mark.parametrize("where", ["body", "drain"])
def test_writing_that_raises_stores_nothing(any_registry: Registry, where: str) -> None:
    def fail(_connection: sa.Connection) -> None:
        raise RuntimeError("planted")

    with pytest.raises(RuntimeError, match="planted"), writing(any_registry, fail) as connection:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Invented Block')")
        if where == "body":
            fail(connection)
    assert areas(any_registry) == []
    with writing(any_registry) as connection:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Second Block')")
    assert areas(any_registry) == ["Second Block"]


def test_second_writer_is_told_what_holds_the_registry(any_registry: Registry) -> None:
    with writing(any_registry, what="an import of 3 files") as connection:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Invented Block')")
        start = time.monotonic()
        with (
            pytest.raises(RegistryBusy, match=r"held by an import of 3 files since \d{4}-\d\d-\d\dT[\d:]+Z"),
            writing(any_registry, wait_s=0.3),
        ):
            pass
        assert time.monotonic() - start > 0.25
    with writing(any_registry) as connection:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Second Block')")
    assert areas(any_registry) == ["Invented Block", "Second Block"]


def test_writer_that_must_not_wait_is_refused_at_once(any_registry: Registry) -> None:
    with writing(any_registry):
        start = time.monotonic()
        with pytest.raises(RegistryBusy, match="Nothing was changed; try again"), writing(any_registry, wait_s=0):
            pass
        assert time.monotonic() - start < holder.TOLD_AFTER_S  # where it waits it is told after so long


def test_patient_writer_is_told_once_and_then_gets_in(any_registry: Registry, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(holder, "TOLD_AFTER_S", 0.2)
    inside, told = threading.Event(), []

    def hold() -> None:
        with writing(any_registry, what="a long import") as connection:
            connection.exec_driver_sql("INSERT INTO area (name) VALUES ('First Block')")
            inside.set()
            time.sleep(0.9)

    thread = threading.Thread(target=hold)
    thread.start()
    assert inside.wait(10)
    with writing(any_registry, tell=told.append) as connection:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Second Block')")
    thread.join()
    assert len(told) == 1
    assert "a long import since " in told[0]
    assert told[0].endswith("; waiting.")
    assert areas(any_registry) == ["First Block", "Second Block"]


def test_writer_behind_a_foreign_tool_says_that_it_does_not_know_which(registry_path: Path) -> None:
    from registry.store.engine import open_registry

    registry = open_registry(registry_path)
    other = sqlite3.connect(registry_path, isolation_level=None)
    other.execute("BEGIN IMMEDIATE")
    stale_note = {
        "what": "an import",
        "since": "2026-01-01T00:00:00Z",
        "process": 2**22 + 1,
        "host": socket.gethostname(),
    }
    holder.side_file(registry_path).write_text(json.dumps(stale_note))
    with (
        pytest.raises(RegistryBusy, match="another program, which does not say what it does"),
        writing(registry, wait_s=0),
    ):
        pass
    other.execute("ROLLBACK")
    other.close()
    registry.close()


def test_side_file_stands_only_while_the_registry_is_written(sqlite_registry: Registry, registry_path: Path) -> None:
    side = holder.side_file(registry_path)
    with writing(sqlite_registry, what="an edit"):
        note = json.loads(side.read_text())
    assert note["what"] == "an edit"
    assert note["process"] == os.getpid()
    assert not side.exists()


def test_writing_checks_foreign_keys(any_registry: Registry) -> None:
    with pytest.raises(sa.exc.IntegrityError, match=r"(?i)foreign key"), writing(any_registry) as connection:
        connection.exec_driver_sql("INSERT INTO site (code, kind, area_id) VALUES ('XH1', 'drill_hole', 99)")


def test_ids_are_never_used_twice(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Invented Block')")
        connection.exec_driver_sql("DELETE FROM area")
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Second Block')")
        assert connection.exec_driver_sql("SELECT area_id FROM area").scalar() == 2


def test_strict_columns_refuse_words_for_numbers(any_registry: Registry) -> None:
    with (
        pytest.raises(sa.exc.DBAPIError, match=r"cannot store TEXT value in REAL column|invalid input syntax"),
        writing(any_registry) as connection,
    ):
        connection.exec_driver_sql("INSERT INTO area (name, heat_flow_mw_m2) VALUES ('Invented Block', '<0.5')")


def test_core_writes_take_numpy_values_and_turn_nan_into_null(any_registry: Registry) -> None:
    with writing(any_registry) as connection:
        connection.execute(
            sa.insert(tables.area).values(
                name="Invented Block",
                epsg=np.int64(32633),
                heat_flow_mw_m2=np.float32(64.5),
                surface_temperature_c=float("nan"),
                conductivity_w_m_k=np.float64("nan"),
            )
        )
        row = connection.exec_driver_sql(
            "SELECT epsg, heat_flow_mw_m2, surface_temperature_c, conductivity_w_m_k FROM area"
        ).one()
    assert tuple(row) == (32633, 64.5, None, None)


def test_core_writes_refuse_infinity(any_registry: Registry) -> None:
    with (
        pytest.raises(sa.exc.StatementError, match=r"infinite number \(inf\) cannot be stored"),
        writing(any_registry) as connection,
    ):
        connection.execute(sa.insert(tables.area).values(name="Invented Block", heat_flow_mw_m2=math.inf))


def test_plain_leaves_ordinary_values_alone() -> None:
    assert [plain(value) for value in (None, 3, 2.5, "a", b"b", np.bool_(True), np.str_("c"))] == [
        None, 3, 2.5, "a", b"b", True, "c",
    ]  # fmt: skip


def test_killed_writer_leaves_the_registry_whole(registry_path: Path) -> None:
    """The process is killed in the middle of a transaction; the file opens and holds nothing of it."""
    import subprocess
    import sys

    from registry.store.engine import open_registry

    code = (
        "import os, signal\nfrom registry.store.engine import open_registry, writing\n"
        f"with writing(open_registry({str(registry_path)!r}), what='a doomed import') as connection:\n"
        "    connection.exec_driver_sql(\"INSERT INTO area (name) VALUES ('Invented Block')\")\n"
        "    os.kill(os.getpid(), signal.SIGKILL)\n"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=Path(__file__).parents[2], check=False)
    assert done.returncode == -9
    registry = open_registry(registry_path)
    assert areas(registry) == []
    with writing(registry, wait_s=0) as connection:
        connection.exec_driver_sql("INSERT INTO area (name) VALUES ('Second Block')")
    assert areas(registry) == ["Second Block"]
    registry.close()
