"""Run the migrations, all in one transaction, with foreign keys off on SQLite and checked before the end.

The store hands its connection over in ``config.attributes["connection"]``, already inside a transaction. A developer's
``alembic`` command has none: it names the registry with ``-x registry=PATH-or-URL`` or in ``PLUTONBOOK_REGISTRY``.
"""

from __future__ import annotations

import os
from typing import Any

import sqlalchemy as sa
from alembic import context

config = context.config


def _target_metadata() -> sa.MetaData | None:
    """The tables of the application, for autogenerate only; the revisions never see them."""
    return config.attributes.get("target_metadata")


def check_foreign_keys(connection: sa.Connection) -> None:
    """Raise RuntimeError if a row points at a row that is not there (SQLite)."""
    if connection.dialect.name != "sqlite":
        return
    broken = connection.exec_driver_sql("PRAGMA foreign_key_check").fetchall()
    if broken:
        places = ", ".join(sorted({f"{row[0]} -> {row[2]}" for row in broken}))
        raise RuntimeError(
            f"the migration would leave {len(broken)} rows that point at missing rows ({places}); it was undone"
        )


def run(connection: sa.Connection) -> None:
    context.configure(
        connection=connection,
        target_metadata=_target_metadata(),
        transactional_ddl=True,
        compare_type=True,
        compare_server_default=True,
    )
    with context.begin_transaction():
        context.run_migrations()
        check_foreign_keys(connection)


def _own_engine() -> sa.Engine:
    place = context.get_x_argument(as_dictionary=True).get("registry") or os.environ.get("PLUTONBOOK_REGISTRY")
    if not place:
        raise SystemExit("say which registry: alembic -x registry=PATH-or-URL ..., or set PLUTONBOOK_REGISTRY")
    engine = sa.create_engine(place if "://" in place else f"sqlite:///{place}")
    if engine.dialect.name == "sqlite":

        @sa.event.listens_for(engine, "connect")
        def _connect(driver_connection: Any, _record: Any) -> None:
            driver_connection.isolation_level = None
            driver_connection.execute("PRAGMA foreign_keys=OFF")

        @sa.event.listens_for(engine, "begin")
        def _begin(connection: sa.Connection) -> None:
            connection.exec_driver_sql("BEGIN IMMEDIATE")

    return engine


if context.is_offline_mode():
    raise SystemExit("the migrations read the database they change; offline mode is not supported")
given = config.attributes.get("connection")
if given is not None:
    run(given)
else:
    with _own_engine().begin() as own:
        run(own)
