"""A private PostgreSQL server of the tests, and registries on it that are emptied and lent again.

A database that is copied anew for every test costs some 300 files; emptying the one in hand costs a few milliseconds.
What is lent twice is checked first: schema, catalogue and sequences must be those of the template, else the database is
dropped and a new copy is lent.
"""

from __future__ import annotations

import os
import shutil
import subprocess
import tempfile
from pathlib import Path
from typing import Any

import psycopg
import sqlalchemy as sa

from registry.store import schema

_TABLES = "SELECT relname FROM pg_class WHERE relkind = 'r' AND relnamespace = 'public'::regnamespace ORDER BY relname"
_SEQUENCES = "SELECT sequencename::text, last_value FROM pg_sequences"
#: Every object of the schema by number, and by the transaction that wrote it where an object can be replaced.
_OBJECTS = """
SELECT md5(string_agg(one, ' ' ORDER BY one)) FROM (
    SELECT concat_ws(':', 'class', oid, relname, relkind, relnatts, relpersistence, reloptions) AS one
    FROM pg_class WHERE relnamespace = 'public'::regnamespace
    UNION ALL SELECT concat_ws(':', 'column', attrelid, attnum, attname, atttypid, atttypmod, attnotnull, attisdropped)
    FROM pg_attribute JOIN pg_class ON pg_class.oid = attrelid WHERE relnamespace = 'public'::regnamespace
    UNION ALL SELECT concat_ws(':', 'trigger', oid, tgname, tgenabled, tgfoid) FROM pg_trigger
    UNION ALL SELECT concat_ws(':', 'function', oid, xmin) FROM pg_proc WHERE pronamespace = 'public'::regnamespace
    UNION ALL SELECT concat_ws(':', 'view', pg_rewrite.oid, pg_rewrite.xmin)
    FROM pg_rewrite JOIN pg_class ON pg_class.oid = ev_class WHERE relnamespace = 'public'::regnamespace
    UNION ALL SELECT concat_ws(':', 'constraint', oid, xmin) FROM pg_constraint
    UNION ALL SELECT concat_ws(':', 'default', oid, xmin) FROM pg_attrdef
    UNION ALL SELECT concat_ws(':', 'index', indexrelid, indisvalid, indisunique) FROM pg_index
    UNION ALL SELECT concat_ws(':', 'schema', nspname) FROM pg_namespace WHERE nspname !~ '^pg_'
    UNION ALL SELECT concat_ws(':', 'setting', setconfig) FROM pg_db_role_setting
) AS objects
"""


class PostgresqlServer:
    """A private cluster on a unix socket in a folder of its own, run by an unprivileged user."""

    def __init__(self, programs: Path, user: str | None) -> None:
        self._programs, self._user = programs, user
        self.folder = Path(tempfile.mkdtemp(prefix="plutonbook-pg-", dir="/tmp"))
        self.folder.chmod(0o755)
        if user is not None:
            shutil.chown(self.folder, user)
        self._databases = 0
        self._template: str | None = None
        self._idle: list[str] = []
        data = str(self.folder / "data")
        self._run("initdb", "-D", data, "-U", "plutonbook", "-A", "trust", "-E", "UTF8", "--locale=C", "--no-sync")
        options = (
            f"-c listen_addresses='' -c unix_socket_directories='{self.folder}' -c fsync=off -c full_page_writes=off "
            "-c synchronous_commit=off -c wal_level=minimal -c max_wal_senders=0 -c autovacuum=off"
        )
        log = str(self.folder / "log")
        self._run("pg_ctl", "-D", data, "-w", "-t", "60", "-l", log, "-o", options, "start")

    def _run(self, program: str, *arguments: str) -> None:
        done = subprocess.run(
            [str(self._programs / program), *arguments],
            user=self._user,
            extra_groups=[] if self._user else None,
            cwd="/",
            env={"PATH": os.environ["PATH"], "LC_ALL": "C"},
            stdin=subprocess.DEVNULL,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.PIPE,
            text=True,
            timeout=120,
        )
        assert done.returncode == 0, f"{program}: {done.stderr}"

    def url(self, database: str) -> str:
        return f"postgresql+psycopg://plutonbook@/{database}?host={self.folder}"

    def _connect(self, database: str) -> psycopg.Connection[Any]:
        return psycopg.connect(dbname=database, user="plutonbook", host=str(self.folder), autocommit=True)

    def new_database(self, template: str | None = None) -> str:
        """The URL of a new database, empty or a copy of another of this server."""
        self._databases += 1
        name = f"test_{self._databases}"
        with self._connect("postgres") as connection:
            copied = "" if template is None else f" TEMPLATE {template}"
            connection.execute(f"CREATE DATABASE {name}{copied}")
        return self.url(name)

    def new_registry(self) -> str:
        """The URL of a new database with an empty registry at the newest schema, copied from one made once."""
        if self._template is None:
            url = self.new_database()
            schema.create(url).close()
            name = str(sa.make_url(url).database)
            with self._connect(name) as connection:
                self._learn(connection)
            self._template = name
        return self.new_database(self._template)

    def _learn(self, connection: psycopg.Connection[Any]) -> None:
        """What an empty registry holds: its catalogue, its objects, where its sequences stand."""
        tables = [row[0] for row in connection.execute(_TABLES)]
        filled = [name for name in tables if connection.execute(f"SELECT FROM {name} LIMIT 1").fetchone() is not None]
        self._kept = "SELECT md5(concat({}))".format(
            ", ".join(f"(SELECT string_agg(t::text, ' ' ORDER BY t::text) FROM {name} AS t)" for name in filled)
        )
        self._entered = " UNION ALL ".join(
            f"SELECT '{name}' WHERE EXISTS (SELECT FROM {name})" for name in tables if name not in filled
        )
        self._sequences = dict(connection.execute(_SEQUENCES).fetchall())
        self._empty = self._state(connection)

    def _state(self, connection: psycopg.Connection[Any]) -> tuple[Any, ...]:
        return tuple(connection.execute(query).fetchone() for query in (_OBJECTS, self._kept))

    def lend_registry(self) -> str:
        """The URL of an empty registry: one that was given back, or a new one."""
        return self._idle.pop() if self._idle else self.new_registry()

    def take_back(self, url: str) -> None:
        """Empty a registry that was lent; drop its database where it does not become what the template is."""
        name = str(sa.make_url(url).database)
        if self._emptied(name):
            self._idle.append(url)
            return
        with self._connect("postgres") as connection:
            connection.execute(f"DROP DATABASE IF EXISTS {name} WITH (FORCE)")

    def _emptied(self, name: str) -> bool:
        try:
            with self._connect(name) as connection:
                connection.execute("SET lock_timeout = '2s'")
                connection.execute("SET session_replication_role = replica")  # no trigger and no foreign key is asked
                entered = [row[0] for row in connection.execute(self._entered)]
                if entered:
                    connection.execute("; ".join(f"DELETE FROM {table}" for table in entered))
                for sequence, stands_at in connection.execute(_SEQUENCES).fetchall():
                    if stands_at != self._sequences[sequence]:
                        start = self._sequences[sequence]
                        connection.execute("SELECT setval(%s, %s, %s)", (sequence, start or 1, start is not None))
                return self._state(connection) == self._empty
        except (psycopg.Error, KeyError):
            return False

    def stop(self) -> None:
        self._run("pg_ctl", "-D", str(self.folder / "data"), "-m", "immediate", "-w", "stop")
        shutil.rmtree(self.folder, ignore_errors=True)
