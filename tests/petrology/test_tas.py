"""Total alkali-silica: the fields cover the plane once, edges go where the rule says, names fit known rocks."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology import tas
from registry.petrology.catalogue import METHOD_BY_KEY, WARNINGS
from registry.petrology.conventions import Conventions


def inside_polygon(x, y, corners):
    """Even-odd rule on rays to the right, array-wise: a second way to say in which field a point lies."""
    inside = np.zeros(np.shape(x), dtype=bool)
    for (x1, y1), (x2, y2) in zip(corners, (*corners[1:], corners[0]), strict=True):
        crosses = (y1 > y) != (y2 > y)
        if y1 != y2:
            inside ^= crosses & (x < x1 + (y - y1) * (x2 - x1) / (y2 - y1))
    return inside


def test_tas_field_two_hundred_thousand_points_lie_in_one_polygon_each():
    """No gap and no overlap (recomputed), and the broken lines agree with the printed corners everywhere."""
    generator = np.random.default_rng(20260101)
    silica, alkalis = generator.uniform(30.0, 90.0, 200_000), generator.uniform(0.0, 20.0, 200_000)

    hits = np.array([inside_polygon(silica, alkalis, tas.POLYGONS[field]) for field in tas.FIELDS])

    assert np.all(hits.sum(axis=0) == 1)
    np.testing.assert_array_equal(tas.tas_field(silica, alkalis), hits.argmax(axis=0))


@pytest.mark.parametrize(
    ("silica", "alkalis", "field"),
    [
        (45.0, 2.0, "B"), (52.0, 2.0, "O1"), (57.0, 2.0, "O2"), (63.0, 2.0, "O3"), (41.0, 1.0, "Pc"),
        (61.0, 14.0, "T"), (52.5, 20.0, "Ph"), (69.0, 9.0, "R"), (45.0, 4.0, "B"), (41.0, 4.0, "U1"),
        (48.0, 5.0, "S1"), (43.0, 3.0, "U1"), (40.0, 3.0, "F"), (54.5, 5.45, "S2"), (73.0, 4.0, "R"),
        (50.7, 6.15, "S2"), (47.2, 6.15, "U1"), (41.0, 7.0, "F"), (57.0, 5.9, "S3"), (52.0, 5.0, "S2"),
        (63.0, 7.0, "T"), (49.4, 7.3, "U2"), (77.0, 0.0, "R"), (69.0, 8.0, "R"),
    ],
)  # fmt: skip
def test_tas_field_point_on_an_edge_goes_to_higher_silica_or_alkalis(silica, alkalis, field):
    """Corners of Le Bas et al. 1986 from memory; a vertical edge belongs to the right, another one upwards."""
    assert tas.FIELDS[int(tas.tas_field(silica, alkalis))] == field


def test_tas_field_missing_or_impossible_point_has_no_code():
    assert tas.tas_field([np.nan, 50.0, -1.0, 101.0, 50.0], [4.0, np.nan, 4.0, 4.0, -0.1]).tolist() == [-1] * 5


def names(silica, na2o, k2o, mgo=5.0, tio2=1.0, norm=None, is_plutonic=False, logged_cumulate=False):
    norm = {"q": 0.0, "or": 10.0, "ab": 30.0, "an": 20.0, "ne": 0.0, "ol": 0.0, **(norm or {})}
    found = tas.tas_names(silica, na2o, k2o, mgo, tio2, *norm.values(), is_plutonic, logged_cumulate)
    return tuple(found[key].item() if hasattr(found[key], "item") else found[key] for key in found)


MAFIC = ("basaltic andesite", "gabbroic diorite")


@pytest.mark.parametrize(
    ("label", "oxides", "volcanic", "plutonic"),
    [
        ("granite", (70.4, 0.4, 14.4, 1.0, 1.9, 0.1, 0.8, 2.0, 3.2, 5.0, 0.2), "rhyolite", "granite"),
        ("granodiorite", (66.9, 0.6, 15.7, 1.3, 2.6, 0.1, 1.6, 3.6, 3.8, 3.1, 0.2), "dacite", "granodiorite"),
        ("diorite", (51.9, 1.5, 16.4, 2.7, 7.0, 0.2, 6.1, 8.4, 3.4, 1.3, 0.4), *MAFIC),
        ("gabbro", (48.4, 1.3, 16.8, 2.6, 7.9, 0.2, 8.1, 11.1, 2.3, 0.6, 0.2), "basalt", "gabbro"),
        (
            "andesite",
            (54.9, 1.0, 17.7, 2.4, 5.6, 0.2, 4.9, 7.9, 3.7, 1.1, 0.3),
            "basaltic andesite",
            "gabbroic diorite",
        ),
        ("basalt", (50.8, 2.0, 14.1, 2.9, 9.1, 0.2, 6.3, 10.4, 2.2, 0.8, 0.2), "basalt", "gabbro"),
        ("komatiite", (44.9, 0.3, 3.1, 2.3, 11.5, 0.2, 33.0, 3.8, 0.01, 0.01, 0.03), "komatiite", "peridotite"),
    ],
)
def test_tas_names_textbook_averages_get_sane_names(label, oxides, volcanic, plutonic):
    """Averages of The Solid Earth, table 9.1, after Nockolds et al. 1978 and Smith and Erlank 1982, closed to 100.

    The table's diorite and andesite have 52 and 55 % SiO2, so they fall in the field of basaltic andesite.
    """
    closed = 100.0 * np.array(oxides) / sum(oxides)

    found = names(closed[0], closed[8], closed[9], mgo=closed[6], tio2=closed[1], norm={"q": 20.0})

    assert found[:2] == (volcanic, plutonic), label


def test_tas_names_textbook_peridotite_is_never_a_lava():
    """The Solid Earth, table 9.1: peridotite 43.5 SiO2, 34.0 MgO."""
    assert names(43.8, 0.6, 0.3, mgo=34.2, tio2=0.8, is_plutonic=True)[:2] == ("picrobasalt", "peridotite")


@pytest.mark.parametrize(
    ("silica", "na2o", "mgo", "tio2", "expected"),
    [
        (46.0, 1.0, 19.0, 0.5, "komatiite"),
        (46.0, 1.0, 19.0, 1.5, "meimechite"),
        (46.0, 1.0, 19.0, 1.0, "picrite"),
        (46.0, 1.0, 19.0, np.nan, "picrite"),
        (46.0, 2.5, 19.0, 0.5, "picrite"),
        (46.0, 2.5, 12.1, 0.5, "picrite"),
        (46.0, 2.5, 12.0, 0.5, "basalt"),
        (46.0, 3.0, 15.0, 0.5, "basalt"),
        (52.0, 1.0, 15.0, 0.5, "basaltic andesite"),
        (53.0, 1.0, 9.0, 0.4, "boninite"),
        (53.0, 1.0, 9.0, 0.5, "basaltic andesite"),
        (38.0, 0.5, 30.0, 0.2, "komatiite"),
        (38.0, 0.5, 10.0, 0.2, "unclassified ultrabasic"),
    ],
)
def test_tas_names_high_magnesium_lavas_come_first(silica, na2o, mgo, tio2, expected):
    """Le Maitre 2002, limits from memory."""
    assert names(silica, na2o, 0.0, mgo=mgo, tio2=tio2)[0] == expected


@pytest.mark.parametrize("flag", ["is_plutonic", "logged_cumulate"])
def test_tas_names_plutonic_or_cumulate_rock_gets_no_lava_name(flag):
    assert names(46.0, 1.0, 0.0, mgo=25.0, tio2=0.5, **{flag: True})[0] == "basalt"


@pytest.mark.parametrize(
    ("quartz", "expected"),
    [(14.9, ("trachyte", "syenite")), (15.0, ("trachydacite", "quartz monzonite")),
     (np.nan, ("trachyte or trachydacite", "syenite or quartz monzonite"))],
)  # fmt: skip
def test_tas_names_field_t_parts_at_twenty_per_cent_quartz(quartz, expected):
    """q = 100 Q/(Q + Or + Ab + An): 15/(15 + 60) is 20."""
    assert names(65.0, 5.0, 5.0, norm={"q": quartz})[:2] == expected


@pytest.mark.parametrize(
    ("olivine", "expected"), [(9.9, "tephrite"), (10.0, "basanite"), (np.nan, "tephrite or basanite")]
)
def test_tas_names_field_u1_parts_at_ten_per_cent_olivine(olivine, expected):
    assert names(44.0, 4.0, 1.0, norm={"ol": olivine})[0] == expected


@pytest.mark.parametrize(
    ("silica", "na2o", "k2o", "nepheline", "expected"),
    [
        (49.0, 4.0, 2.0, 0.0, "hawaiite"), (49.0, 3.9, 2.0, 0.0, "potassic trachybasalt"),
        (53.0, 5.0, 2.0, 0.0, "mugearite"), (53.0, 3.5, 3.5, 0.0, "shoshonite"),
        (58.0, 6.0, 3.0, 0.0, "benmoreite"), (58.0, 4.5, 4.5, 0.0, "latite"),
        (49.0, 3.0, 1.0, 0.5, "alkali basalt"), (49.0, 2.0, 0.5, 0.0, "subalkali basalt"),
        (49.0, 2.0, 0.5, np.nan, None), (60.0, 3.0, 1.0, 0.0, None),
    ],
)  # fmt: skip
def test_tas_subname_follows_soda_against_potash(silica, na2o, k2o, nepheline, expected):
    """Na2O - 2 >= K2O is sodic; Le Maitre 2002, from memory."""
    assert names(silica, na2o, k2o, norm={"ne": nepheline})[2] == expected


@given(st.lists(st.tuples(st.floats(30.0, 80.0), st.floats(0.0, 10.0), st.floats(0.0, 10.0)), min_size=1, max_size=8))
def test_tas_names_many_rows_equal_single_rows(points):
    silica, na2o, k2o = np.array(points).T
    n = len(points)
    norm = [np.zeros(n), *(np.ones(n) for _ in range(5))]
    no = np.zeros(n, dtype=bool)

    together = tas.tas_names(silica, na2o, k2o, np.full(n, 5.0), np.ones(n), *norm, no, no)

    for row in range(n):
        part = slice(row, row + 1)
        alone = tas.tas_names(
            silica[part], na2o[part], k2o[part], np.full(1, 5.0), np.ones(1), *(m[part] for m in norm), no[:1], no[:1]
        )
        assert all(alone[key][0] == together[key][row] for key in alone)


def test_tas_subname_of_a_field_without_one_has_its_cause():
    cause = METHOD_BY_KEY["tas"].causes[0]
    names = np.array(["andesite", "basalt", None], dtype=object)

    assert cause.code == "no_subname"
    assert cause.mask(names, np.array([0.0, np.nan, np.nan])).tolist() == [True, False, False]


@pytest.mark.parametrize(
    ("loi", "co2", "h2o", "mgo", "expected"),
    [(4.1, np.nan, np.nan, 5.0, True), (4.0, np.nan, np.nan, 5.0, False), (1.0, 0.6, np.nan, 5.0, True),
     (1.0, np.nan, 2.1, 5.0, True), (9.0, np.nan, np.nan, 35.0, False), (np.nan, np.nan, np.nan, 5.0, False)],
)  # fmt: skip
def test_tas_altered_rock_is_warned_but_serpentine_is_not(loi, co2, h2o, mgo, expected):
    warning = next(each for each in WARNINGS if each.code == "tas_altered")
    words = np.array(["basalt"], dtype=object)
    columns = [np.array([value]) for value in (loi, co2, h2o, mgo)]

    assert warning.mask(words, *columns, Conventions()).tolist() == [expected]
