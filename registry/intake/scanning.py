"""One look through a text file on disk, a block at a time: what ``read_path`` has to know before it reads the rows."""

from __future__ import annotations

import codecs
from dataclasses import dataclass
from pathlib import Path

from registry.intake.containers import foreign_file
from registry.intake.encodings import Encoding, tell_encoding

_BLOCK = 1 << 20


@dataclass(frozen=True)
class Scan:
    """Encoding, line ends, underscores and whether there is a quotation mark."""

    encoding: Encoding
    line_ends: int
    underscores: int
    quoted: bool


def scan(path: Path) -> Scan | None:
    """Look through a file; None unless it is plain text in ASCII or UTF-8, which alone are read as a stream."""
    decoder = codecs.getincrementaldecoder("utf-8")()
    ascii_only, plain, quoted, blank = True, True, False, True
    line_ends = underscores = 0
    encoding: Encoding | None = None
    with path.open("rb") as stream:
        head = stream.read(_BLOCK)
        if (
            head.startswith((b"PK", b"\x1f\x8b"))
            or foreign_file(head) is not None
            or (len(head) == _BLOCK and b"\n" not in head and b"\r" not in head)
            or head[:4096].count(0)
            or tell_encoding(head[:4096].rsplit(b"\n", 1)[0]) is None
        ):
            plain = False
        elif head.startswith(codecs.BOM_UTF8):
            encoding = Encoding("utf-8-sig", "UTF-8 with a byte-order mark")
        block = head
        while block:
            line_ends += block.count(b"\n") + block.count(b"\r")
            underscores += block.count(b"_")
            quoted = quoted or b'"' in block
            ascii_only = ascii_only and block.isascii()
            blank = blank and not block.strip()
            try:
                decoder.decode(block)
            except UnicodeDecodeError:
                plain = False
            block = stream.read(_BLOCK)
    try:
        decoder.decode(b"", final=True)
    except UnicodeDecodeError:
        plain = False
    if not plain or blank:
        return None
    encoding = encoding or Encoding("utf-8", "ASCII" if ascii_only else "UTF-8")
    return Scan(encoding, line_ends, underscores, quoted)
