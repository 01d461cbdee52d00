"""How often a password may be tried: failed sign-ins are counted in the memory of the serving process."""

from __future__ import annotations

import hashlib
import math
import threading
import time
from collections import deque
from collections.abc import Callable

#: Failures count for so long.
WINDOW_S = 15 * 60
#: So many failures in that time are taken: of one name from one address, from one address, of one name from anywhere.
MOST_OF_BOTH, MOST_OF_ADDRESS, MOST_OF_NAME = 5, 20, 50
#: Names and addresses remembered at most; the longest quiet goes first.
MOST_KEPT = 10_000

Key = tuple[str, bytes]


class Attempts:
    """Counts failures by name and address. Safe among threads; an attempt counts as failed until it succeeded."""

    def __init__(self, clock: Callable[[], float] = time.monotonic) -> None:
        self._clock = clock
        self._failed: dict[Key, deque[float]] = {}
        self._lock = threading.Lock()

    def begin(self, name: str, address: str) -> int:
        """0 where the attempt may be made (it is counted), else the seconds to wait before the next."""
        limits = dict(zip(_keys(name, address), (MOST_OF_BOTH, MOST_OF_ADDRESS, MOST_OF_NAME), strict=True))
        with self._lock:
            now = self._clock()
            waits = [self._wait(key, most, now) for key, most in limits.items()]
            if max(waits) > 0:
                return math.ceil(max(waits))
            for key in limits:
                times = self._failed.pop(key, deque())
                times.append(now)
                self._failed[key] = times  # at the end: the order is that of the last attempt
            while len(self._failed) > MOST_KEPT:
                del self._failed[next(iter(self._failed))]
        return 0

    def succeeded(self, name: str, address: str) -> None:
        """The attempt just begun was right: it does not count, nor do the earlier ones of this name from here."""
        both, *others = _keys(name, address)
        with self._lock:
            self._failed.pop(both, None)
            for key in others:
                times = self._failed.get(key)
                if times:
                    times.pop()

    def _wait(self, key: Key, most: int, now: float) -> float:
        times = self._failed.get(key)
        if times is None:
            return 0
        while times and times[0] <= now - WINDOW_S:
            times.popleft()
        return times[-most] + WINDOW_S - now if len(times) >= most else 0


def _keys(name: str, address: str) -> tuple[Key, Key, Key]:
    """Digests, so that what is remembered has one size whatever was sent."""
    folded = " ".join(name.split()).casefold()
    return tuple(
        (kind, hashlib.sha256(text.encode("utf-8", "replace")).digest())
        for kind, text in (("both", f"{address} {folded}"), ("address", address), ("name", folded))
    )  # type: ignore[return-value]
