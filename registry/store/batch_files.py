"""The file of a certificate as it was sent, kept compressed (zlib) in parts, so that it never lies in memory whole."""

from __future__ import annotations

import hashlib
import zlib
from collections.abc import Iterable, Iterator
from pathlib import Path

import sqlalchemy as sa

from registry.errors import PlutonbookError
from registry.store import tables

#: Of zlib: its quickest; a lab file still shrinks to about a third.
COMPRESSION_LEVEL = 1
PART_BYTES = 1 << 20
#: Larger files are laid out on disk to be read.
HELD_BYTES = 8 * PART_BYTES
_file = tables.batch_file


def compress(data: bytes) -> bytes:
    """The bytes of a file as they are kept."""
    return zlib.compress(data, COMPRESSION_LEVEL)


def pieces(data: bytes) -> Iterator[bytes]:
    """Bytes in parts of the size they are stored in."""
    for start in range(0, len(data), PART_BYTES):
        yield data[start : start + PART_BYTES]


def insert_file(connection: sa.Connection, batch_id: int, parts: Iterable[bytes]) -> None:
    """Keep the file of a batch: ``parts`` are the pieces of its compressed bytes in order, none of them empty."""
    for part_no, content in enumerate(parts):
        connection.execute(sa.insert(_file).values(batch_id=batch_id, part_no=part_no, content=content))


def stored_parts(connection: sa.Connection, batch_id: int) -> Iterator[bytes]:
    """The compressed bytes of the file of a batch, part by part; nothing where it is not kept."""
    numbers = sa.select(_file.c.part_no).where(_file.c.batch_id == batch_id).order_by(_file.c.part_no)
    for part_no in connection.scalars(numbers).all():
        here = sa.and_(_file.c.batch_id == batch_id, _file.c.part_no == part_no)
        yield bytes(connection.scalars(sa.select(_file.c.content).where(here)).one())


def unpacked_parts(connection: sa.Connection, batch_id: int) -> Iterator[bytes]:
    """The bytes of the file of a batch, piece by piece; PlutonbookError where they are damaged."""
    unpacker = zlib.decompressobj()
    any_part = False
    try:
        for part in stored_parts(connection, batch_id):
            any_part = True
            while part:
                yield unpacker.decompress(part, PART_BYTES)
                part = unpacker.unconsumed_tail
    except zlib.error as error:
        raise PlutonbookError(f"the stored file of batch {batch_id} is damaged: {error}") from error
    if any_part and not unpacker.eof:
        raise PlutonbookError(f"the stored file of batch {batch_id} is damaged: its end is missing")


def is_kept(connection: sa.Connection, batch_id: int) -> bool:
    """Whether the file of a batch is kept."""
    return connection.scalar(sa.select(_file.c.part_no).where(_file.c.batch_id == batch_id).limit(1)) is not None


def file_of(connection: sa.Connection, batch_id: int) -> bytes | None:
    """The bytes of the file a batch was imported from, None where it is not kept; PlutonbookError where damaged."""
    return b"".join(unpacked_parts(connection, batch_id)) if is_kept(connection, batch_id) else None


def laid_out(connection: sa.Connection, batch_id: int, folder: Path) -> bytes | Path | None:
    """The file of a batch to be read: its bytes or, from ``HELD_BYTES`` on, where it was written in ``folder``.

    None where it is not kept; PlutonbookError where it is damaged.
    """
    if not is_kept(connection, batch_id):
        return None
    held, path = bytearray(), folder / f"file of batch {batch_id}"
    pieces_to_come = unpacked_parts(connection, batch_id)
    for piece in pieces_to_come:
        held += piece
        if len(held) >= HELD_BYTES:
            with path.open("wb") as out:
                out.write(held)
                out.writelines(pieces_to_come)
            return path
    return bytes(held)


def hash_of(connection: sa.Connection, batch_id: int) -> str:
    """The SHA-256 of the file of a batch; PlutonbookError where it is damaged."""
    digest = hashlib.sha256()
    for piece in unpacked_parts(connection, batch_id):
        digest.update(piece)
    return digest.hexdigest()


def kept_files(connection: sa.Connection) -> list[int]:
    """The ids of the batches whose file is kept, ascending."""
    query = sa.select(_file.c.batch_id).distinct().order_by(_file.c.batch_id)
    return list(connection.scalars(query))
