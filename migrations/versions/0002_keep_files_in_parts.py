"""Keep the file of a batch in parts, and how it was read.

A table ``batch_file`` takes the place of the column ``batch.file_bytes``.

A file in one value has to lie in memory whole to be written or read, and SQLite allows a value of at most 1 GB. The
parts are pieces of the same zlib stream, so the bytes stay as they are; no row is lost either way. ``file_part`` is the
sheet or member of the file that the batch was read from, ``reading`` how (a reading recipe as JSON), so that what the
laboratory wrote can be looked up in it; both are unknown of earlier batches. ``sample.duplicate_stage`` says of a
duplicate whether it was taken in the field, after crushing or of the pulp.

Revision ID: 0002
Revises: 0001
"""

from __future__ import annotations

from collections.abc import Iterable

import sqlalchemy as sa
from alembic import op
from sqlalchemy.dialects import postgresql, sqlite

revision = "0002"
down_revision = "0001"
branch_labels = None
depends_on = None

PART_BYTES = 1_048_576
words = sa.Text().with_variant(postgresql.TEXT(collation="C"), "postgresql")
whole = sa.BigInteger().with_variant(sqlite.INTEGER(), "sqlite")
batch = sa.table("batch", sa.column("batch_id", whole), sa.column("file_bytes", sa.LargeBinary()))
batch_file = sa.table(
    "batch_file", sa.column("batch_id", whole), sa.column("part_no", whole), sa.column("content", sa.LargeBinary())
)


def upgrade() -> None:
    op.create_table(
        "batch_file",
        sa.Column("batch_id", whole, nullable=False),
        sa.Column("part_no", whole, nullable=False),
        sa.Column("content", sa.LargeBinary(), nullable=False),
        sa.PrimaryKeyConstraint("batch_id", "part_no", name="pk_batch_file"),
        sa.ForeignKeyConstraint(
            ["batch_id"], ["batch.batch_id"], name="fk_batch_file_batch_id_batch", ondelete="CASCADE"
        ),
        sqlite_strict=True,
    )
    bind = op.get_bind()
    for batch_id in _kept(bind, sa.select(batch.c.batch_id).where(batch.c.file_bytes.is_not(None))):
        stored = bind.scalar(sa.select(batch.c.file_bytes).where(batch.c.batch_id == batch_id))
        for part_no, start in enumerate(range(0, len(stored), PART_BYTES)):
            part = bytes(stored[start : start + PART_BYTES])
            bind.execute(sa.insert(batch_file).values(batch_id=batch_id, part_no=part_no, content=part))
    op.drop_column("batch", "file_bytes")
    op.add_column("batch", sa.Column("file_part", words))
    op.add_column("batch", sa.Column("reading", words))
    op.add_column("sample", sa.Column("duplicate_stage", words))


def downgrade() -> None:
    op.add_column("batch", sa.Column("file_bytes", sa.LargeBinary()))
    bind = op.get_bind()
    for batch_id in _kept(bind, sa.select(batch_file.c.batch_id).distinct()):
        parts = sa.select(batch_file.c.content).where(batch_file.c.batch_id == batch_id).order_by(batch_file.c.part_no)
        stored = b"".join(bind.scalars(parts))
        bind.execute(sa.update(batch).where(batch.c.batch_id == batch_id).values(file_bytes=stored))
    op.drop_table("batch_file")
    op.drop_column("sample", "duplicate_stage")
    op.drop_column("batch", "reading")
    op.drop_column("batch", "file_part")


def _kept(bind: sa.Connection, query: sa.Select[tuple[int]]) -> Iterable[int]:
    return bind.scalars(query).all()
