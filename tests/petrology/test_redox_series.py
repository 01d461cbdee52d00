"""Redox from measurements only. Limits stand in ``published/classification.csv``; here how the witnesses combine."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.catalogue import METHOD_BY_KEY, WARNINGS
from registry.petrology.conventions import Conventions
from registry.petrology.redox_series import delta_ox, fe2o3_feo, ferric_iron_wt, redox_series

NAN = float("nan")
HIGH, LOW = 0.01, 0.0001
INPUTS = METHOD_BY_KEY["redox_series"].inputs


def read(index, susceptibility, loi, destroyed=False, conventions=None):
    """Series, evidence and the first cause that holds, for one rock."""
    arguments = (
        np.array([index]), np.array([susceptibility]), np.array([loi]), np.array([destroyed]),
        conventions or Conventions(),
    )  # fmt: skip
    found = redox_series(*arguments)
    series, evidence = found["redox_series"][0], found["redox_evidence"][0]
    holds = [cause.code for cause in METHOD_BY_KEY["redox_series"].causes if cause.mask(*arguments)[0]]
    return series, evidence, None if series else holds[0]


@pytest.mark.parametrize(
    ("index", "susceptibility", "loi", "destroyed", "expected"),
    [
        (NAN, HIGH, 1.0, False, ("magnetite", "susceptibility", None)),
        (NAN, LOW, 1.0, False, ("ilmenite", "susceptibility", None)),
        (NAN, LOW, NAN, False, ("ilmenite", "susceptibility", None)),
        (0.2, NAN, 1.0, False, ("magnetite", "titrated FeO", None)),
        (0.0, NAN, 1.0, False, ("ilmenite", "titrated FeO", None)),
        (0.2, HIGH, 3.0, False, ("magnetite", "titrated FeO and susceptibility", None)),
        (-0.2, HIGH, 1.0, False, (None, None, "redox_conflict")),
        (0.2, LOW, 1.0, False, (None, None, "redox_conflict")),
        (NAN, LOW, 1.0, True, (None, None, "magnetite_destroyed")),
        (NAN, LOW, 3.1, False, (None, None, "magnetite_destroyed")),
        (0.2, LOW, 1.0, True, ("magnetite", "titrated FeO", None)),
        (-0.2, LOW, 1.0, True, ("ilmenite", "titrated FeO", None)),
        (NAN, HIGH, 1.0, True, ("magnetite", "susceptibility", None)),
        (NAN, HIGH, 3.1, False, (None, None, "redox_loi_high")),
        (0.2, NAN, 3.1, False, (None, None, "redox_loi_high")),
        (NAN, NAN, 1.0, False, (None, None, "no_redox_evidence")),
        (NAN, NAN, 9.0, True, (None, None, "no_redox_evidence")),
    ],
)
def test_redox_series_witnesses_combine_as_decided(index, susceptibility, loi, destroyed, expected):
    assert read(index, susceptibility, loi, destroyed) == expected


def test_redox_series_limit_is_the_conventions():
    assert read(NAN, 0.004, 1.0)[0] == "magnetite"
    assert read(NAN, 0.004, 1.0, conventions=Conventions(magnetite_series_si=0.005))[0] == "ilmenite"


@given(
    st.sampled_from([NAN, -0.3, 0.3]),
    st.sampled_from([NAN, LOW, HIGH]),
    st.sampled_from([NAN, 1.0, 5.0]),
    st.booleans(),
)
def test_redox_series_missing_series_always_has_a_cause_of_its_own(index, susceptibility, loi, destroyed):
    series, evidence, cause = read(index, susceptibility, loi, destroyed)

    assert (series is None) == (cause is not None) == (evidence is None)


def test_redox_series_reads_no_computed_split():
    assert not {"fe2o3_wt", "feo_wt", "fe2o3_vf_wt", "feo_vf_wt"} & set(INPUTS)
    assert METHOD_BY_KEY["fe2o3_feo"].inputs == ("fe2o3t_wt", "feo_titrated_wt")


@given(st.floats(0.1, 15.0), st.floats(0.1, 15.0))
def test_ferric_iron_total_less_ferrous_goes_there_and_back(ferric, ferrous):
    total = ferric + 1.11135 * ferrous

    np.testing.assert_allclose(ferric_iron_wt(total, ferrous), ferric, atol=1e-3)
    np.testing.assert_allclose(fe2o3_feo(total, ferrous), ferric / ferrous, rtol=0.02)


def test_ferric_iron_within_rounding_is_zero_and_beyond_it_missing():
    np.testing.assert_array_equal(ferric_iron_wt([1.111, 1.10], [1.0, 1.0]), [0.0, np.nan])


def test_delta_ox_rises_with_ferric_iron():
    index = delta_ox(np.array([0.1, 0.3, 1.0, 3.0]), 5.0)

    assert np.all(np.diff(index) > 0.0)
    np.testing.assert_allclose(np.diff(delta_ox([1.0, 1.0], [0.0, 10.0])), 0.3)


def test_redox_series_without_loi_is_warned():
    warning = next(each for each in WARNINGS if each.code == "redox_loi_not_reported")
    words = np.array(["magnetite", "magnetite", None], dtype=object)

    assert warning.mask(words, np.array([np.nan, 1.0, np.nan])).tolist() == [True, False, False]
