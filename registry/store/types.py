"""Column types that STRICT tables of SQLite take as they are, and the same on PostgreSQL.

SQLite gets INTEGER, REAL, TEXT and BLOB only. PostgreSQL gets BIGINT, DOUBLE PRECISION, TEXT COLLATE "C" and BYTEA.
Values pass through :func:`plain`, the one place where numpy scalars become Python ones, NaN becomes NULL and infinity
is refused.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import sqlalchemy as sa
from sqlalchemy.dialects import postgresql, sqlite
from sqlalchemy.types import TypeDecorator, TypeEngine


def plain(value: Any) -> Any:
    """Return ``value`` as a plain Python value that both drivers store alike.

    numpy scalars become int, float or str; NaN becomes None; an infinity raises ValueError.
    """
    if isinstance(value, np.generic):
        value = value.item()
    if isinstance(value, float) and not math.isfinite(value):
        if math.isnan(value):
            return None
        raise ValueError(f"an infinite number ({value}) cannot be stored: a register holds finite numbers or NULL")
    return value


class _Plain(TypeDecorator[Any]):
    """A type whose values pass through :func:`plain`."""

    impl: Any = sa.Text
    cache_ok = True
    on_sqlite: type[TypeEngine[Any]] = sqlite.TEXT

    def load_dialect_impl(self, dialect: sa.Dialect) -> TypeEngine[Any]:
        return self.on_sqlite() if dialect.name == "sqlite" else self.on_others()

    def on_others(self) -> TypeEngine[Any]:
        return sa.Text()

    def process_bind_param(self, value: Any, dialect: sa.Dialect) -> Any:
        return plain(value)


class Number(_Plain):
    """A real number of eight bytes."""

    impl = sa.Double
    cache_ok = True
    on_sqlite = sqlite.REAL

    def on_others(self) -> TypeEngine[Any]:
        return postgresql.DOUBLE_PRECISION()


class Whole(_Plain):
    """A whole number of eight bytes; True and False are stored as 1 and 0."""

    impl = sa.BigInteger
    cache_ok = True
    on_sqlite = sqlite.INTEGER

    def on_others(self) -> TypeEngine[Any]:
        return sa.BigInteger()

    def process_bind_param(self, value: Any, dialect: sa.Dialect) -> Any:
        value = plain(value)
        return int(value) if isinstance(value, bool) else value


class Words(_Plain):
    """Text, compared byte by byte on both engines."""

    impl: Any = sa.Text
    cache_ok = True
    on_sqlite = sqlite.TEXT

    def on_others(self) -> TypeEngine[Any]:
        return postgresql.TEXT(collation="C")


class Bytes(_Plain):
    """Bytes as they are."""

    impl = sa.LargeBinary
    cache_ok = True
    on_sqlite = sqlite.BLOB

    def on_others(self) -> TypeEngine[Any]:
        return sa.LargeBinary()
