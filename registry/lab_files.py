"""A file on its way into the registry: its bytes or, if it is large, its path; its hash and its compressed bytes."""

from __future__ import annotations

import hashlib
import tempfile
import zlib
from collections.abc import Callable, Iterator
from concurrent.futures import Executor, Future
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path
from typing import IO

from registry.errors import NotFound, PlutonbookError
from registry.intake import Reading, ReadingOptions, read_all, read_path
from registry.intake.containers import is_archive
from registry.store.batch_files import COMPRESSION_LEVEL, PART_BYTES

#: Files from this size on are read as a stream, without ever lying in memory whole.
LARGE_BYTES = 20_000_000
_BLOCK = 1 << 20
#: Compressed bytes beyond these wait on disk until they are stored.
_HELD_BYTES = 8 * PART_BYTES


@dataclass(frozen=True)
class Packed:
    """The SHA-256 of a file, and its compressed bytes: in memory or, if they are many, in a nameless scratch file."""

    sha256: str
    compressed: IO[bytes]

    def parts(self) -> Iterator[bytes]:
        """The compressed bytes, in the pieces they are stored in."""
        self.compressed.seek(0)
        while part := self.compressed.read(PART_BYTES):
            yield part


class LabFile:
    """One file of an import. ``data`` are its bytes, None of a large one that is read as a stream.

    Hash and compression are worked out by ``pool`` beside the reading: zlib needs no interpreter. Raises NotFound
    where there is no such file.
    """

    def __init__(self, path: Path, pool: Executor) -> None:
        self.path = path
        if path.is_dir():
            raise NotFound(f"{path} is a folder; name the files in it")
        try:
            self._stamp = _stamp(path)
            self.size = self._stamp[0]
            self.data = None if self.is_large else path.read_bytes()
        except FileNotFoundError as error:
            raise NotFound(f"there is no file {path}") from error
        except OSError as error:
            raise NotFound(f"{path} cannot be read: {error.strerror}") from error
        self._packed: Future[Packed] = pool.submit(_pack, path, self.data)

    @property
    def is_large(self) -> bool:
        return self.size >= LARGE_BYTES

    def packed(self) -> Packed:
        """Hash and compressed bytes; PlutonbookError where the file was changed since it was first looked at."""
        packed = self._packed.result()
        if self.is_large and _stamp(self.path) != self._stamp:
            raise PlutonbookError(
                f"{self.path} was changed while it was read; nothing was written. Import it again when it is complete"
            )
        return packed

    def close(self) -> None:
        """Give back the scratch file of the compressed bytes."""
        if not self._packed.cancel():
            with suppress(OSError):
                self._packed.result().compressed.close()

    def readings(
        self, kind: str | None, options: ReadingOptions, progress: Callable[[str, int, int], None]
    ) -> list[Reading]:
        """The tables of the file; a large one reports its progress in bytes."""
        if self.data is None:
            reading = read_path(self.path, kind, options, watch=lambda done: progress("reading bytes", done, self.size))
            if reading is not None:
                return [reading]
            if not is_archive(self.path):
                self.data = self.path.read_bytes()
        file = self.path if self.data is None else self.data
        watch: Callable[[int, int], None] = lambda done, total: progress("reading bytes", done, total)  # noqa: E731
        return read_all(self.path.name, file, kind, options, watch=watch)


def _stamp(path: Path) -> tuple[int, int]:
    found = path.stat()
    return found.st_size, found.st_mtime_ns


def _pack(path: Path, data: bytes | None) -> Packed:
    digest, packer = hashlib.sha256(), zlib.compressobj(COMPRESSION_LEVEL)
    packed: IO[bytes] = tempfile.SpooledTemporaryFile(_HELD_BYTES)  # noqa: SIM115 - it goes with the last who holds it
    for block in _blocks(path, data):
        digest.update(block)
        packed.write(packer.compress(block))
    packed.write(packer.flush())
    return Packed(digest.hexdigest(), packed)


def _blocks(path: Path, data: bytes | None) -> Iterator[bytes]:
    if data is not None:
        yield data
        return
    with path.open("rb") as stream:
        while block := stream.read(_BLOCK):
            yield block
