"""A site served as ``plutonbook serve`` does it, and what a browser drew of it. Shared by the browser tests."""

from __future__ import annotations

import struct
import threading
import zlib
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Any

import numpy as np
from flask import Flask
from selenium.webdriver.support.wait import WebDriverWait
from waitress.server import create_server

#: Rows, columns, channels (red, green, blue), 0 to 255.
Pixels = np.ndarray


@contextmanager
def served(app: Flask, threads: int = 2) -> Iterator[str]:
    """The address of a site served on a free port meanwhile."""
    server = create_server(app, host="127.0.0.1", port=0, threads=threads)
    thread = threading.Thread(target=server.run, daemon=True)
    thread.start()
    yield f"http://127.0.0.1:{server.effective_port}"
    server.close()
    thread.join(timeout=0.2)  # kept-alive connections of the browser may keep it; it is a daemon


def until(browser: Any, state: Callable[[], Any]) -> None:
    """Wait for what the page comes to by itself; the limit is for a machine that is very busy."""
    WebDriverWait(browser, 60, poll_frequency=0.05).until(lambda _: state())


def pixels(browser: Any, selector: str) -> Pixels:
    """What the browser drew where the first element of ``selector`` stands."""
    return decoded(browser.find_element("css selector", selector).screenshot_as_png)


def decoded(png: bytes) -> Pixels:
    """Pixels of a PNG of eight bits a channel without interlace (ISO/IEC 15948)."""
    width, height, depth, colour, _, _, interlace = struct.unpack(">IIBBBBB", png[16:29])
    assert (depth, interlace) == (8, 0)
    channels = {2: 3, 6: 4}[colour]
    packed, place = b"", 8
    while place < len(png):
        size, kind = struct.unpack(">I4s", png[place : place + 8])
        packed += png[place + 8 : place + 8 + size] if kind == b"IDAT" else b""
        place += size + 12
    lines = np.frombuffer(zlib.decompress(packed), dtype=np.uint8).reshape(height, width * channels + 1)
    rows = np.zeros((height + 1, width, channels), dtype=np.uint8)
    for number, (kind, line) in enumerate(zip(lines[:, 0], lines[:, 1:], strict=True)):
        rows[number + 1] = _unfiltered(int(kind), line.reshape(width, channels), rows[number])
    return rows[1:, :, :3]


def _unfiltered(kind: int, line: Pixels, above: Pixels) -> Pixels:
    """One line of pixels from what stands in the file and the line above; sums are modulo 256."""
    if kind in (0, 2):
        return line + above if kind == 2 else line
    if kind == 1:
        return np.add.accumulate(line, axis=0, dtype=np.uint8)
    made = np.empty_like(line)
    for channel in range(line.shape[1]):
        left = corner = 0
        values = []
        for value, up in zip(line[:, channel].tolist(), above[:, channel].tolist(), strict=True):
            left = (value + _predicted(kind, left, up, corner)) % 256
            corner = up
            values.append(left)
        made[:, channel] = values
    return made


def _predicted(kind: int, left: int, up: int, corner: int) -> int:
    if kind == 4:
        guess = left + up - corner
        return min((left, up, corner), key=lambda value: abs(guess - value))
    return (left + up) // 2


def near(drawn: Pixels, colour: str, by: int = 6) -> np.ndarray:
    """Which of the pixels have a colour such as ``#E69F00``, each channel within ``by``."""
    wanted = [int(colour[at : at + 2], 16) for at in (1, 3, 5)]
    return (np.abs(np.asarray(drawn, dtype=int) - wanted) <= by).all(axis=-1)


def share(drawn: Pixels, colour: str) -> float:
    """Which part of the pixels has this colour."""
    return float(near(drawn, colour).mean())


def sound(browser: Any, width: int, refused: bool = False) -> None:
    """The page fits its width and the browser complains of nothing but, of one that is ``refused``, the answer 400."""
    assert browser.execute_script("return document.documentElement.scrollWidth") <= width
    complaints = [entry for entry in browser.get_log("browser") if entry["level"] in ("SEVERE", "WARNING")]
    assert [c for c in complaints if not (refused and "400" in c["message"])] == []
