"""Files within files: members of a zip, the content of a gzip, sheets of a workbook; none unpacks beyond its bound."""

from __future__ import annotations

import gzip
import io
import zipfile
import zlib
from dataclasses import dataclass
from typing import IO

_TABLES = (".csv", ".txt", ".tsv", ".tab", ".asc", ".dat", ".xlsx", ".xlsm", ".gz")
_BLOCK = 1 << 20
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
    """One file out of a container; ``member`` is None for the file itself."""

    data: bytes
    member: str | None = None


def is_workbook(data: bytes) -> bool:
    """Whether the bytes are an Office Open XML workbook."""
    if not data.startswith(b"PK"):
        return False
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
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


def unpack(data: bytes, limit: int, depth: int = 0) -> list[Part]:
    """The files of a container, or the file itself; at most ``limit`` bytes in all.

    Raises BadContainer when it is damaged, locked, too large or nested more than twice.
    """
    if depth > 2:
        raise BadContainer("archives lie within archives", "unpack them and read the tables themselves")
    if data.startswith(b"\x1f\x8b"):
        inner = _gunzip(data, limit)
        return [Part(part.data, part.member) for part in unpack(inner, limit, depth + 1)]
    if data.startswith(b"PK") and not is_workbook(data):
        parts: list[Part] = []
        for name, content in _members(data, limit):
            for part in unpack(content, limit, depth + 1):
                parts.append(Part(part.data, name if part.member is None else f"{name}/{part.member}"))
        return parts
    if data.startswith(b"PK"):
        _check_workbook_size(data, limit)
    return [Part(data)]


def _gunzip(data: bytes, limit: int) -> bytes:
    try:
        with gzip.GzipFile(fileobj=io.BytesIO(data)) as stream:
            return _bounded(stream, limit)
    except (OSError, EOFError, zlib.error) as fault:
        raise BadContainer(f"the gzip file is damaged ({fault})", "get the file again") from fault


def _bounded(stream: IO[bytes] | gzip.GzipFile, limit: int, before: int = 0) -> bytes:
    pieces, size = [], before
    while piece := stream.read(_BLOCK):
        size += len(piece)
        if size > limit:
            raise BadContainer(
                f"the archive unpacks to more than {limit:,} bytes", "unpack it yourself and read it in parts"
            )
        pieces.append(piece)
    return b"".join(pieces)


def _members(data: bytes, limit: int) -> list[tuple[str, bytes]]:
    found, used = [], 0
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            for info in archive.infolist():
                name = info.filename
                base = name.rsplit("/", 1)[-1]
                if info.is_dir() or base.startswith(".") or name.startswith("__MACOSX/"):
                    continue
                if not base.lower().endswith(_TABLES):
                    continue
                with archive.open(info) as stream:
                    content = _bounded(stream, limit, used)
                used += len(content)
                found.append((name, content))
    except RuntimeError as fault:
        raise BadContainer(
            "the zip file is locked with a password", "unpack it and read the tables themselves"
        ) from fault
    except (zipfile.BadZipFile, zlib.error, NotImplementedError, EOFError, OSError, ValueError) as fault:
        raise BadContainer(f"the zip file is damaged ({fault})", "get the file again, or unpack it yourself") from fault
    if not found:
        raise BadContainer("the zip file holds no table", "a zip file may hold .csv, .txt, .tsv and .xlsx files")
    return found


def _check_workbook_size(data: bytes, limit: int) -> None:
    with zipfile.ZipFile(io.BytesIO(data)) as archive:
        size = sum(info.file_size for info in archive.infolist())
    if size > limit:
        raise BadContainer(f"the workbook unpacks to more than {limit:,} bytes", "save the sheets as CSV files")
