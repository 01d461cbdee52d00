"""Every source that a formula, a constant or a check value stands on: ``REFERENCES[key]`` is the full citation.

Each topic module of this package exports a dictionary ``REFERENCES``; they are joined here. A key is the first
author's name and the year (``kress1991``), with a letter where that is not enough (``lemaitre1976a``). Two topics
may cite the same source under the same key only with the same words.
"""

from __future__ import annotations

from collections.abc import Mapping
from importlib import import_module
from pkgutil import iter_modules


def merge_references(topics: Mapping[str, Mapping[str, str]]) -> dict[str, str]:
    """Join the dictionaries of the topics; ValueError where two of them give one key different citations."""
    merged: dict[str, str] = {}
    for topic, references in topics.items():
        for key, citation in references.items():
            if merged.setdefault(key, citation) != citation:
                raise ValueError(
                    f"references '{topic}': the key '{key}' already stands for '{merged[key]}', found '{citation}'; "
                    "use the same words or another key"
                )
    return merged


def _topics() -> dict[str, Mapping[str, str]]:
    names = sorted(module.name for module in iter_modules(__path__))
    return {name: import_module(f"{__name__}.{name}").REFERENCES for name in names}


REFERENCES = merge_references(_topics())
