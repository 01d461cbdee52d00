"""Whether the geologist logged a sample as altered."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

#: Words that say there is none, or next to none (common practice, no source).
FRESH_WORDS = frozenset(
    ("", "-", "0", "none", "no", "nil", "n/a", "na", "not", "fresh", "unaltered", "least altered", "relatively fresh")
)
SLIGHT_WORDS = ("weak", "very weak", "slight", "very slight", "trace", "minor", "incipient")


def logged_altered(alteration: Sequence[object] | NDArray[np.object_]) -> NDArray[np.bool_]:
    """True where alteration was logged as more than fresh, weak, slight, trace or minor; texts or None, shape (n,).

    Each distinct text is read once. Source: the trade's words, common practice, no source.
    """
    texts = list(alteration)
    seen = {text: _altered(text) for text in set(texts)}
    return np.array([seen[text] for text in texts], dtype=np.bool_)


def _altered(text: object) -> bool:
    if not isinstance(text, str):
        return False
    words = " ".join(text.lower().replace("_", " ").split())
    return words not in FRESH_WORDS and not words.startswith(SLIGHT_WORDS)
