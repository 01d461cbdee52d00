"""The encoding of a text file, told from its bytes."""

from __future__ import annotations

import codecs
from dataclasses import dataclass

_BOMS = (
    (codecs.BOM_UTF8, "utf-8-sig", "UTF-8 with a byte-order mark"),
    (codecs.BOM_UTF32_LE, "utf-32", "UTF-32"),
    (codecs.BOM_UTF32_BE, "utf-32", "UTF-32"),
    (codecs.BOM_UTF16_LE, "utf-16", "UTF-16"),
    (codecs.BOM_UTF16_BE, "utf-16", "UTF-16"),
)
#: Signs that a lab table outside ASCII is likely to hold; the encoding that yields more of them wins.
_LIKELY = frozenset("°±²³µ·\u00d7\u2013\u2014≤≥•“”\u2018\u2019éèêëáàâäãåæçíîïñóôöõøúüßÁÉÍÓÖÄÜÑÇØÅ\u00a0")
#: Bytes that Windows-1252 leaves undefined.
_UNDEFINED_1252 = frozenset(b"\x81\x8d\x8f\x90\x9d")
_BLOCK = 1 << 20


@dataclass(frozen=True)
class Encoding:
    """``codec`` is Python's name, ``words`` ours; ``errors`` is ``replace`` where some bytes have no meaning."""

    codec: str
    words: str
    errors: str = "strict"


def tell_encoding(data: bytes) -> Encoding | None:
    """The encoding of a text file; None if the bytes are no text."""
    for mark, codec, words in _BOMS:
        if data.startswith(mark):
            return Encoding(codec, words, "strict" if _decodes(data, codec) else "replace")
    head = data[:4096]
    nulls = head.count(0)
    if nulls:
        even, odd = head[0::2].count(0), head[1::2].count(0)
        if odd > 0.6 * len(head) / 2 and even < 0.1 * len(head):
            return _unmarked(data, "utf-16-le")
        if even > 0.6 * len(head) / 2 and odd < 0.1 * len(head):
            return _unmarked(data, "utf-16-be")
    controls = sum(head.count(code) for code in range(32) if code not in (9, 10, 12, 13, 26))
    if controls > 0.02 * len(head) + 1:
        return None
    if _decodes(data, "utf-8"):
        return Encoding("utf-8", "ASCII" if data.isascii() else "UTF-8")
    high = bytes(byte for byte in data[: 4 * _BLOCK] if byte > 127)
    as_windows = sum(sign in _LIKELY for sign in high.decode("cp1252", "replace"))
    as_mac = sum(sign in _LIKELY for sign in high.decode("mac_roman"))
    carriage_only = b"\r" in data and b"\n" not in data
    undefined = any(byte in _UNDEFINED_1252 for byte in high)
    if as_mac > as_windows or (as_mac == as_windows and as_mac > 0 and (carriage_only or undefined)):
        return Encoding("mac_roman", "Mac Roman")
    return Encoding("cp1252", "Windows-1252", "replace" if undefined else "strict")


def _unmarked(data: bytes, codec: str) -> Encoding:
    errors = "strict" if _decodes(data, codec) else "replace"
    return Encoding(codec, "UTF-16 without a byte-order mark", errors)


def _decodes(data: bytes, codec: str) -> bool:
    decoder = codecs.getincrementaldecoder(codec)()
    try:
        for start in range(0, len(data), _BLOCK):
            decoder.decode(data[start : start + _BLOCK])
        decoder.decode(b"", final=True)
    except UnicodeDecodeError:
        return False
    return True
