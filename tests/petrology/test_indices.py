"""Indices of differentiation. Printed and recomputed values stand in ``published/indices.csv``."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology import alteration, granite_indices, indices
from registry.petrology.catalogue import METHOD_BY_KEY, WARNINGS
from registry.petrology.conventions import Conventions

AMOUNT = st.floats(0.01, 60.0)
#: Indices that a common factor on all oxides must not change.
SCALE_FREE = {
    "mg_number": 2, "solidification_index": 5, "felsic_index": 3, "mafic_index": 3, "a_cnk": 4, "a_nk": 3, "asi": 5,
    "agpaitic_index": 3, "fe_number": 2, "cia": 5, "alteration_index": 4, "ccpi": 4, "hughes_x": 2,
}  # fmt: skip
#: Indices in proportion to the oxides (or norm minerals) they are given.
SCALING = {"differentiation_index": 6, "larsen_index": 5, "mali": 3, "fssi": 4}
EVERY = {**SCALE_FREE, **SCALING, "rittmann_index": 3, "crystallization_index": 6}


def function_of(name):
    return next(getattr(m, name) for m in (indices, granite_indices, alteration) if hasattr(m, name))


@pytest.mark.parametrize(("name", "arity"), SCALE_FREE.items())
@given(data=st.data(), factor=st.floats(0.1, 10.0))
def test_index_all_oxides_scaled_stays_the_same(name, arity, data, factor):
    oxides = data.draw(st.lists(AMOUNT, min_size=arity, max_size=arity))
    function = function_of(name)

    scaled = function(*(factor * oxide for oxide in oxides))

    np.testing.assert_allclose(scaled, function(*oxides), rtol=1e-9)


@pytest.mark.parametrize(("name", "arity"), SCALING.items())
@given(data=st.data(), factor=st.floats(0.1, 10.0))
def test_index_in_proportion_scales_with_the_oxides(name, arity, data, factor):
    oxides = data.draw(st.lists(AMOUNT, min_size=arity, max_size=arity))
    function = function_of(name)

    scaled = function(*(factor * oxide for oxide in oxides))

    np.testing.assert_allclose(scaled, factor * function(*oxides), rtol=1e-9, atol=1e-9)


@pytest.mark.parametrize(("name", "arity"), EVERY.items())
@given(data=st.data())
def test_index_many_rows_equal_single_rows_and_nan_stays_in_its_row(name, arity, data):
    rows = data.draw(st.lists(st.lists(AMOUNT, min_size=arity, max_size=arity), min_size=2, max_size=6))
    hole = data.draw(st.integers(0, len(rows) - 1)), data.draw(st.integers(0, arity - 1))
    table = np.array(rows)
    table[hole] = np.nan
    function = function_of(name)

    together = function(*table.T)

    alone = [float(function(*row)) for row in table]
    np.testing.assert_array_equal(together, alone)
    others = np.delete(np.arange(len(rows)), hole[0])
    if name != "rittmann_index":
        assert np.isfinite(together[others]).all()
    if not (name == "crystallization_index" and hole[1] >= 4):
        assert np.isnan(together[hole[0]])


def test_crystallization_index_corundum_counts_only_in_ultrabasic_rocks():
    basic, ultrabasic = indices.crystallization_index(20.0, 0.0, 0.0, 0.0, 2.0, np.array([45.0, 44.9]))

    assert basic == 20.0
    assert ultrabasic == pytest.approx(20.0 + 2.0 * 1.3953, abs=1e-3)


def test_r1_r2_doubled_oxides_double_both():
    oxides = (50.0, 3.0, 1.0, 10.0, 1.5, 9.0, 7.0, 15.0)

    once, twice = indices.r1_r2(*oxides), indices.r1_r2(*(2.0 * oxide for oxide in oxides))

    assert set(once) == {"r1", "r2"}
    np.testing.assert_allclose([twice["r1"], twice["r2"]], [2.0 * once["r1"], 2.0 * once["r2"]])


@given(st.lists(st.floats(0.0, 60.0), min_size=7, max_size=7))
def test_streckeisen_coordinates_any_norm_lies_between_0_and_100_or_is_missing(minerals):
    for name, value in indices.streckeisen_coordinates(*minerals).items():
        assert np.isnan(value) or -1e-9 <= value <= 100.0 + 1e-9, name


def test_alkali_lime_index_suite_with_a_hole_leaves_that_sample_out():
    silica, lime, alkalis = [50.0, 60.0, 70.0, 65.0], [10.0, 6.0, 2.0, np.nan], [3.0, 6.0, 9.0, 7.0]

    assert indices.alkali_lime_index(silica, lime, alkalis) == pytest.approx(60.0)


@pytest.mark.parametrize(
    ("silica", "lime", "alkalis"),
    [([50.0, 50.0], [9.0, 8.0], [3.0, 4.0]), ([50.0, 60.0], [5.0, 9.0], [6.0, 3.0])],
    ids=["one silica", "alkalis fall against lime"],
)
def test_alkali_lime_index_without_a_crossing_is_nan(silica, lime, alkalis):
    assert np.isnan(indices.alkali_lime_index(silica, lime, alkalis))


def cause_of(key, **columns):
    """Code of the first cause that holds for one row of columns; None if none does."""
    arrays = {name: np.array([value], dtype=float) for name, value in columns.items()}
    for cause in METHOD_BY_KEY[key].causes:
        if bool(np.asarray(cause.mask(*(arrays[name] for name in cause.inputs)))[0]):
            return cause.code
    return None


@pytest.mark.parametrize(
    ("key", "columns", "code"),
    [
        ("mg_number", {"mgo_wt": 0.0, "feo_wt": 0.0}, "zero_denominator"),
        ("mg_number", {"mgo_wt": np.nan, "feo_wt": 1.0}, None),
        ("rittmann_index", {"sio2_wt": 43.0}, "silica_at_most_43"),
        ("rittmann_index", {"sio2_wt": np.nan}, None),
        ("fe2o3_feo", {"fe2o3t_wt": 5.0, "feo_titrated_wt": np.nan}, "no_titrated_feo"),
        ("fe2o3_feo", {"fe2o3t_wt": 2.0, "feo_titrated_wt": 3.0}, "ferrous_exceeds_total"),
        ("fe2o3_feo", {"fe2o3t_wt": 2.0, "feo_titrated_wt": 0.0}, "zero_denominator"),
        ("delta_ox", {"fe2o3_feo": 0.0, "fe2o3t_wt": 2.0, "feo_titrated_wt": 1.799}, "no_ferric_iron"),
        ("a_nk", {"na2o_wt": 0.0, "k2o_wt": 0.0}, "zero_denominator"),
    ],
)
def test_index_missing_value_has_its_cause(key, columns, code):
    assert cause_of(key, **columns) == code


def warned(code, **columns):
    warning = next(each for each in WARNINGS if each.code == code)
    values = [columns[name] if name == "conventions" else np.array([columns[name]]) for name in warning.inputs]
    return bool(warning.mask(*values)[0])


@pytest.mark.parametrize(("sulphur", "expected"), [(0.51, True), (0.5, False), (np.nan, False)])
def test_mg_number_sulphidic_rock_is_warned(sulphur, expected):
    assert warned("mg_number_sulphidic", mg_number=57.0, s_wt=sulphur, conventions=Conventions()) is expected


@pytest.mark.parametrize(("p2o5", "expected"), [(0.5, True), (0.1, False)])
def test_asi_and_cia_phosphorus_beyond_lime_is_warned(p2o5, expected):
    for name in ("asi", "cia"):
        code = f"{name}_phosphorus_exceeds_lime"
        assert warned(code, cao_wt=0.2, p2o5_wt=p2o5, **{name: 1.2}) is expected


def test_fe2o3_feo_high_loss_on_ignition_is_warned():
    assert warned("fe2o3_feo_altered", fe2o3_feo=0.6, loi_wt=3.5, conventions=Conventions())
    assert not warned("fe2o3_feo_altered", fe2o3_feo=0.6, loi_wt=3.0, conventions=Conventions())
