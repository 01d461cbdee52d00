"""The metadata of the tables, their naming rule, and the few kinds of column they are made of."""

from __future__ import annotations

import sqlalchemy as sa

from registry.store.types import Number, Whole, Words

NAMING = {
    "pk": "pk_%(table_name)s",
    "uq": "uq_%(table_name)s_%(column_0_N_name)s",
    "ck": "ck_%(table_name)s_%(constraint_name)s",
    "fk": "fk_%(table_name)s_%(column_0_N_name)s_%(referred_table_name)s",
    "ix": "ix_%(table_name)s_%(column_0_N_name)s",
}
metadata = sa.MetaData(naming_convention=NAMING)


def own_id(name: str) -> sa.Column[int]:
    return sa.Column(name, Whole, sa.Identity(), primary_key=True)


def sample_key() -> sa.Column[int]:
    return sa.Column(
        "sample_id", Whole, sa.ForeignKey("sample.sample_id", ondelete="CASCADE"), primary_key=True, autoincrement=False
    )


def link(name: str, target: str, nullable: bool = True, ondelete: str | None = None) -> sa.Column[int]:
    return sa.Column(name, Whole, sa.ForeignKey(target, ondelete=ondelete), nullable=nullable)


def numbers(names: str) -> list[sa.Column[float]]:
    return [sa.Column(name, Number) for name in names.split()]


def words(names: str, nullable: bool = True) -> list[sa.Column[str]]:
    return [sa.Column(name, Words, nullable=nullable) for name in names.split()]


def row_version() -> sa.Column[int]:
    return sa.Column("row_version", Whole, nullable=False, server_default=sa.text("1"))


def one_of(column: str, *words: str) -> sa.CheckConstraint:
    listed = ", ".join(f"'{word}'" for word in words)
    return sa.CheckConstraint(f"{column} IN ({listed})", name=column)


def table(name: str, *parts: sa.schema.SchemaItem, counted: bool = True, rowid: bool = True) -> sa.Table:
    return sa.Table(name, metadata, *parts, sqlite_strict=True, sqlite_autoincrement=counted, sqlite_with_rowid=rowid)
