"""Words of the log. The lists are common practice, no source; the texts here are invented to test them."""

import time

import numpy as np
import pytest

from registry.petrology.logged import LOGGED_NAMES, logged_words


def read(lithology=None, texture=None, alteration=None):
    """The set of names that are true for one sample."""
    words = logged_words([lithology], [texture], [alteration])
    return {name.removeprefix("logged_") for name in LOGGED_NAMES if words[name][0]}


@pytest.mark.parametrize(
    ("lithology", "texture", "expected"),
    [
        ("biotite granite", None, {"plutonic"}),
        ("Granodiorites", "equigranular", {"plutonic"}),
        ("LEUCOGRANITE", None, {"plutonic"}),
        ("quartz-monzodiorite", None, {"plutonic"}),
        ("meta-gabbro", None, {"plutonic"}),
        ("Dunite", None, {"cumulate", "plutonic"}),
        ("gabbro", "layered", {"cumulate", "plutonic"}),
        ("gabbro", "olivine adcumulate", {"cumulate", "plutonic"}),
        ("gabbronorite", None, {"plutonic"}),
        ("gabbronorite, cumulate", None, {"cumulate", "plutonic"}),
        ("norite", None, {"cumulate", "plutonic"}),
        ("harzburgite", None, {"cumulate", "plutonic"}),
        ("basaltic andesite", None, {"extrusive"}),
        ("andesite lava", "porphyritic", {"extrusive", "porphyritic"}),
        ("welded tuffs", None, {"extrusive"}),
        ("dacite porphyry", None, {"porphyritic"}),
        ("rhyolite dyke", None, set()),
        ("rhyolite tuff, beside the porphyry", None, {"extrusive", "porphyritic"}),
        ("granite", "feldspar-porphyritic", {"plutonic", "porphyritic"}),
        ("diorite", "non-porphyritic", {"plutonic"}),
        ("dacite", "microporphyritic", {"extrusive", "porphyritic"}),
        ("schist", "porphyroblastic", set()),
        ("sub-volcanic body", None, set()),
        ("subvolcanic body", None, set()),
        ("granitisation front", None, set()),
        ("dolerite", None, set()),
        ("Greisen", None, {"plutonic", "destroyed_magnetite"}),
        (None, None, {"blank"}),
        ("  ", "", {"blank"}),
        (float("nan"), None, {"blank"}),
        (None, "fine grained", set()),
    ],
)
def test_logged_words_rock_text_gives_expected_flags(lithology, texture, expected):
    assert read(lithology, texture) == expected


@pytest.mark.parametrize(
    ("alteration", "destroyed"),
    [
        ("phyllic", True),
        ("advanced argillic", True),
        ("quartz-sericite-pyrite", True),
        ("Sericitised", True),
        ("greisen", True),
        ("QSP, strong", True),
        ("potassic", False),
        ("propylitic, no sericite", False),
        ("fresh", False),
        (None, False),
    ],
)
def test_logged_words_alteration_says_whether_magnetite_is_destroyed(alteration, destroyed):
    assert ("destroyed_magnetite" in read("granite", None, alteration)) is destroyed


def test_logged_words_many_rows_equal_single_rows():
    lithology = np.array(["granite", None, "dunite", "andesite tuff", "granite"], dtype=object)
    texture = np.array([None, None, "cumulate", "porphyritic", "porphyritic"], dtype=object)
    alteration = np.array(["phyllic", None, None, "argillic", None], dtype=object)

    together = logged_words(lithology, texture, alteration)

    assert set(together) == set(LOGGED_NAMES)
    for name in LOGGED_NAMES:
        alone = [logged_words([a], [b], [c])[name][0] for a, b, c in zip(lithology, texture, alteration, strict=True)]
        assert together[name].dtype == bool
        assert together[name].tolist() == alone


def test_logged_words_no_rows_gives_empty_arrays():
    words = logged_words([], [], [])

    assert {name: array.shape for name, array in words.items()} == dict.fromkeys(LOGGED_NAMES, (0,))


def test_logged_words_unequal_lengths_are_refused():
    with pytest.raises(ValueError, match="2, 1 and 2 rows"):
        logged_words(["granite", "basalt"], [None], [None, None])


def test_logged_words_hundred_thousand_rows_cost_less_than_a_second():
    kinds = np.array(["granite", "andesite", None, "dunite", "rhyolite tuff"], dtype=object)
    lithology = np.resize(kinds, 100_000)
    blank = np.full(100_000, None, dtype=object)

    start = time.process_time()
    words = logged_words(lithology, blank, blank)

    assert time.process_time() - start < 1.0
    assert int(words["logged_extrusive"].sum()) == 40_000
