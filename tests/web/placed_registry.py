"""The invented registry of the pages with positions: a surveyed hole and its samples. Beside the tests of the map."""

from __future__ import annotations

import shutil
import sqlite3
from collections.abc import Iterable
from pathlib import Path

from registry.store.engine import open_registry, writing
from registry.store.positions import replace_positions


def placed(source: Path, path: Path, statements: Iterable[str] = ()) -> Path:
    """A copy of ``source`` (with a survey of DH-1) whose samples follow their sites, after ``statements``."""
    connection = sqlite3.connect(shutil.copy(source, path))
    for statement in statements:
        connection.execute(statement)
    connection.commit()
    keys = [key for (key,) in connection.execute("SELECT site_id FROM site")]
    connection.close()
    registry = open_registry(path)
    with writing(registry) as store:
        replace_positions(store, keys)
        store.exec_driver_sql("DELETE FROM stale")
    registry.close()
    return path
