"""The sources: joined without contradiction, none unused in what is computed, none unknown."""

from __future__ import annotations

import re

import pytest

from registry.petrology.catalogue import METHODS
from registry.petrology.references import REFERENCES, merge_references


def test_references_same_key_with_other_words_is_refused() -> None:
    with pytest.raises(ValueError, match="references 'b': the key 'x1' already stands for 'One', found 'Two'"):
        merge_references({"a": {"x1": "One"}, "b": {"x1": "Two"}})


def test_references_same_key_with_same_words_is_joined() -> None:
    assert merge_references({"a": {"x1": "One"}, "b": {"x1": "One", "y2": "Two"}}) == {"x1": "One", "y2": "Two"}


@pytest.mark.parametrize("key", sorted(REFERENCES))
def test_reference_states_its_year_or_that_there_is_no_source(key: str) -> None:
    year = re.search(r"\d{4}", key)

    assert REFERENCES[key].endswith(".")
    if year is None:
        assert "common practice" in REFERENCES[key].lower()
    else:
        assert year.group() in REFERENCES[key]


def test_methods_cite_known_references() -> None:
    assert [method.key for method in METHODS if method.source not in REFERENCES] == []
