"""Registry files that many tests start from: made once a run, then copied."""

from __future__ import annotations

import fcntl
import os
from collections.abc import Callable
from pathlib import Path

import pytest

from registry.store.engine import Registry


def made_once(tmp_path_factory: pytest.TempPathFactory, name: str, make: Callable[[Path], Registry]) -> Path:
    """A registry file that the workers of one run share: the first that asks makes it; copy it, do not write it."""
    folder = tmp_path_factory.getbasetemp()
    if "PYTEST_XDIST_WORKER" in os.environ:
        folder = folder.parent
    path = folder / f"{name}.sqlite"
    with (folder / f"{name}.lock").open("w") as lock:
        fcntl.flock(lock, fcntl.LOCK_EX)
        if not path.exists():
            coming = folder / f"{name}-coming.sqlite"
            _settled(make(coming))
            coming.rename(path)
    return path


def _settled(registry: Registry) -> None:
    """Move everything from the write-ahead log into the file, so that the file alone can be copied."""
    registry.close()
    engine = registry.engine(foreign_keys=True, query_only=False)
    driver = engine.raw_connection()
    driver.driver_connection.execute("PRAGMA wal_checkpoint(TRUNCATE)")
    driver.close()
    engine.dispose()
