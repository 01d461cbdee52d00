"""Opening a registry again must not drop the locks that the same process holds on it.

POSIX advisory locks go when any descriptor of the file is closed in the process (POSIX.1-2017, fcntl; SQLite's
documentation, "How To Corrupt An SQLite Database File", section 2.2): a plain open() and close() of the file is enough.
"""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

from registry.store.engine import Registry, open_registry, reading, writing

OUTSIDER = "import sqlite3, sys; c = sqlite3.connect(sys.argv[1]); c.execute('SELECT count(*) FROM sample'); c.close()"


def look_from_outside(path: Path) -> None:
    """Another program opens the registry, reads, and closes it."""
    subprocess.run([sys.executable, "-c", OUTSIDER, str(path)], check=True)


def test_second_opening_keeps_the_locks_of_the_first(founded_registry: Registry) -> None:
    path = founded_registry.path
    assert path is not None
    with writing(founded_registry) as connection:
        connection.exec_driver_sql("INSERT INTO sample (code, kind) VALUES ('A', 'outcrop')")
    with reading(founded_registry) as connection:
        connection.exec_driver_sql("SELECT count(*) FROM sample").scalar()
    log = path.with_name(path.name + "-wal")
    assert log.exists(), "the registry is open and holds its log"

    open_registry(path).close()
    look_from_outside(path)

    assert log.exists(), "another program took the log away: the locks of this process were gone"
    with writing(founded_registry) as connection:
        connection.exec_driver_sql("INSERT INTO sample (code, kind) VALUES ('B', 'outcrop')")
    with reading(founded_registry) as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM sample").scalar() == 2
