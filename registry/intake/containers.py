"""Files within files: members of a zip, the content of a gzip, sheets of a workbook; none unpacks beyond its bound."""

from __future__ import annotations

import gzip
import io
import tempfile
import zipfile
import zlib
from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import chain
from pathlib import Path
from typing import IO

_TABLES = (".csv", ".txt", ".tsv", ".tab", ".asc", ".dat", ".xlsx", ".xlsm", ".gz")
_BLOCK = 1 << 20
#: A file out of a container that is larger waits on disk: a text is then read as a stream.
LARGE_BYTES = 20_000_000
#: A workbook, and a text in another encoding than UTF-8, is read in memory: so many bytes unpacked at most.
MOST_IN_MEMORY_BYTES = 500_000_000
#: Tables pack to a tenth or so. What unpacks to more than so many times its size, from this size on, is refused.
LARGEST_RATIO, RATIO_FROM_BYTES = 250, 50_000_000
#: Headings longer than this are none: cutting them into cells would only use up the memory.
LONGEST_FIRST_LINE = 2_000_000
#: Files of other programs by their first bytes, with what to do.
_FOREIGN = (
    (b"\xd0\xcf\x11\xe0", "an old binary workbook or document", "save it as .xlsx or CSV"),
    (b"%PDF", "a PDF", "ask the laboratory for the table as CSV or .xlsx"),
    (b"{\\rtf", "a text-processor document", "save the table as CSV"),
    (b"<html", "a web page", "save the table as CSV"),
    (b"<!DOCTYPE", "a web page", "save the table as CSV"),
    (b"\x89PNG", "a picture", "ask for the table as CSV or .xlsx"),
    (b"\xff\xd8\xff", "a picture", "ask for the table as CSV or .xlsx"),
    (b"SQLite format 3", "a database", "export the table as CSV"),
    (b"7z\xbc\xaf", "an archive of another kind", "pack it as zip or send the CSV itself"),
    (b"Rar!", "an archive of another kind", "pack it as zip or send the CSV itself"),
)


class BadContainer(Exception):
    """The container cannot be opened or holds too much; ``remedy`` says what to do."""

    def __init__(self, what: str, remedy: str) -> None:
        super().__init__(what)
        self.what, self.remedy = what, remedy


@dataclass(frozen=True)
class Part:
    """One file out of a container, in memory or, if it is large, on disk; ``member`` is None for the file itself."""

    data: bytes | None
    path: Path | None = None
    member: str | None = None

    @property
    def is_workbook(self) -> bool:
        return is_workbook(self._file())

    def content(self) -> bytes:
        """Its bytes in memory; BadContainer where they are too many for that."""
        if self.data is not None:
            return self.data
        assert self.path is not None
        if self.path.stat().st_size > MOST_IN_MEMORY_BYTES:
            raise BadContainer(
                f"{self.member or 'the file'} is larger than {MOST_IN_MEMORY_BYTES:,} bytes unpacked and no plain text",
                "save it as CSV in UTF-8: that is read as a stream, however large it is",
            )
        return self.path.read_bytes()

    def _file(self) -> bytes | Path:
        return self.data if self.path is None else self.path  # type: ignore[return-value]


class _Room:
    """Where unpacked files go: memory while they are small, else scratch files; ``limit`` bounds all of them."""

    def __init__(self, limit: int) -> None:
        self.limit, self.used = limit, 0
        self._folder: tempfile.TemporaryDirectory[str] | None = None
        self._count = 0

    def check(self, size: int) -> None:
        """BadContainer where so many more bytes would be too many."""
        if self.used + size > self.limit:
            raise BadContainer(
                f"the archive unpacks to more than {self.limit:,} bytes", "unpack it yourself and read it in parts"
            )

    def take(self, stream: IO[bytes] | gzip.GzipFile, packed_bytes: int) -> bytes | Path:
        """Everything a stream holds, which took ``packed_bytes`` before it was unpacked."""
        pieces: list[bytes] = []
        size = 0
        while size <= LARGE_BYTES and (piece := stream.read(_BLOCK)):
            size += len(piece)
            self.check(size)
            pieces.append(piece)
        if size <= LARGE_BYTES:
            self.used += size
            return b"".join(pieces)
        path = self._new_path()
        with path.open("wb") as out:
            for piece in chain(pieces, iter(lambda: stream.read(_BLOCK), b"")):
                self._write(out, piece)
                size = out.tell()
                self.check(size)
                if size > RATIO_FROM_BYTES and size > LARGEST_RATIO * packed_bytes:
                    raise BadContainer(
                        f"the archive unpacks to more than {LARGEST_RATIO} times its size, as no table does",
                        "see what it holds; if it is a table all the same, unpack it yourself",
                    )
        self.used += size
        return path

    def _write(self, out: IO[bytes], piece: bytes) -> None:
        try:
            out.write(piece)
        except OSError as fault:
            raise BadContainer(
                f"there is no room to unpack the archive in {tempfile.gettempdir()} ({fault.strerror})",
                "make room there, or name another folder in TMPDIR",
            ) from fault

    def _new_path(self) -> Path:
        if self._folder is None:
            self._folder = tempfile.TemporaryDirectory(prefix="plutonbook-")
        self._count += 1
        return Path(self._folder.name) / str(self._count)

    def drop(self, file: bytes | Path) -> None:
        """Delete a scratch file that has been read."""
        if isinstance(file, Path):
            file.unlink(missing_ok=True)

    def close(self) -> None:
        if self._folder is not None:
            self._folder.cleanup()


def _head(file: bytes | Path) -> bytes:
    if isinstance(file, bytes):
        return file[:4]
    with file.open("rb") as stream:
        return stream.read(4)


def is_archive(path: Path) -> bool:
    """Whether a file on disk is a zip file (a workbook is one as well) or a gzip file."""
    return _head(path).startswith((b"PK", b"\x1f\x8b"))


def _zip(file: bytes | Path) -> zipfile.ZipFile:
    return zipfile.ZipFile(io.BytesIO(file) if isinstance(file, bytes) else file)


def is_workbook(file: bytes | Path) -> bool:
    """Whether a file, given as its bytes or its path, is an Office Open XML workbook."""
    if not _head(file).startswith(b"PK"):
        return False
    try:
        with _zip(file) as archive:
            return any(name.lower().startswith("xl/") for name in archive.namelist())
    except (zipfile.BadZipFile, ValueError, OSError):
        return False


def foreign_file(data: bytes) -> tuple[str, str] | None:
    """What a file of another kind is and what to do about it; None if it may be a table."""
    head = data[:16].lstrip()
    for mark, what, remedy in _FOREIGN:
        if head.lower().startswith(mark.lower()):
            return what, remedy
    if len(data) > LONGEST_FIRST_LINE and not any(data.find(end, 0, LONGEST_FIRST_LINE) >= 0 for end in (b"\n", b"\r")):
        return f"one line of more than {LONGEST_FIRST_LINE:,} bytes", "see whether the file is whole and holds a table"
    return None


def unpack(file: bytes | Path, limit: int, only: str | None = None) -> Iterator[Part]:
    """The files of a container one after the other, or the file itself; at most ``limit`` bytes in all.

    ``file``: bytes or where it lies. The ``path`` of a part is there until the next part is asked for or the iterator
    is let go. ``only`` names one member, where there is one of that name: it comes as if it were a file of its own.
    Raises BadContainer when it is damaged, locked, too large, packed as no table is, or nested more than twice.
    """
    room = _Room(limit)
    try:
        yield from _unpacked(file, room, 0, only)
    finally:
        room.close()


def _unpacked(file: bytes | Path, room: _Room, depth: int, only: str | None) -> Iterator[Part]:
    if depth > 2:
        raise BadContainer("archives lie within archives", "unpack them and read the tables themselves")
    head = _head(file)
    if head.startswith(b"\x1f\x8b"):
        inner = _gunzip(file, room)
        yield from _unpacked(inner, room, depth + 1, only)
        room.drop(inner)
    elif head.startswith(b"PK") and not is_workbook(file):
        for name, content in _members(file, room, only):
            for part in _unpacked(content, room, depth + 1, None):
                place = name if part.member is None else f"{name}/{part.member}"
                yield replace(part, member=None if name == only else place)
            room.drop(content)
    else:
        if head.startswith(b"PK"):
            _check_workbook_size(file, min(room.limit, MOST_IN_MEMORY_BYTES))
        yield Part(file) if isinstance(file, bytes) else Part(None, file)


def _gunzip(file: bytes | Path, room: _Room) -> bytes | Path:
    packed = len(file) if isinstance(file, bytes) else file.stat().st_size
    try:
        with gzip.open(io.BytesIO(file) if isinstance(file, bytes) else file) as stream:
            return room.take(stream, packed)
    except (OSError, EOFError, zlib.error) as fault:
        raise BadContainer(f"the gzip file is damaged ({fault})", "get the file again") from fault


def _members(file: bytes | Path, room: _Room, only: str | None) -> Iterator[tuple[str, bytes | Path]]:
    """The tables of a zip file by name; what it says of their size is believed only where it is too large."""
    try:
        with _zip(file) as archive:
            tables = [info for info in archive.infolist() if _may_be_table(info)]
            wanted = [info for info in tables if info.filename == only] or tables
            if only is not None and wanted is tables and not any(_may_hold_sheets(info) for info in tables):
                names = ", ".join(info.filename for info in tables[:40])
                raise BadContainer(f"the zip file holds no table '{only}'", f"its tables are {names}")
            room.check(sum(info.file_size for info in wanted))
            for info in wanted:
                with archive.open(info) as stream:
                    content = room.take(stream, info.compress_size)
                yield info.filename, content
    except RuntimeError as fault:
        raise BadContainer(
            "the zip file is locked with a password", "unpack it and read the tables themselves"
        ) from fault
    except (zipfile.BadZipFile, zlib.error, NotImplementedError, EOFError, OSError, ValueError) as fault:
        raise BadContainer(f"the zip file is damaged ({fault})", "get the file again, or unpack it yourself") from fault
    if not tables:
        raise BadContainer("the zip file holds no table", "a zip file may hold .csv, .txt, .tsv and .xlsx files")


def _may_be_table(info: zipfile.ZipInfo) -> bool:
    base = info.filename.rsplit("/", 1)[-1]
    hidden = info.is_dir() or base.startswith(".") or info.filename.startswith("__MACOSX/")
    return not hidden and base.lower().endswith(_TABLES)


def _may_hold_sheets(info: zipfile.ZipInfo) -> bool:
    return info.filename.lower().endswith((".xlsx", ".xlsm", ".gz"))


def _check_workbook_size(file: bytes | Path, limit: int) -> None:
    with _zip(file) as archive:
        size = sum(info.file_size for info in archive.infolist())
    if size > limit:
        raise BadContainer(f"the workbook unpacks to more than {limit:,} bytes", "save the sheets as CSV files")
