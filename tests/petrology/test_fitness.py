"""Fitness of an analysis. Limits: common practice, no source; the rocks are invented to test each branch."""

import re

import numpy as np
import pytest

from registry.petrology.catalogue.fitness import METHODS, NEEDED_MAJORS, WARNINGS, fitness
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_CODE
from registry.petrology.references import REFERENCES

GRANITE = {
    "SiO2": 71.3, "Al2O3": 14.3, "total iron": 3.0, "MgO": 0.7, "CaO": 1.8, "Na2O": 3.7, "K2O": 4.1,
}  # fmt: skip


def judged(digestion="fusion", total=99.8, loi=0.6, mgo_vf=0.7, without=(), other=None):
    """Fitness and cause of one granite with the given departures."""
    values, codes = [], []
    for name in NEEDED_MAJORS:
        values.append(np.array([np.nan if name in without else GRANITE[name]]))
        codes.append(np.array([DIGESTION_CODE[(other or {}).get(name, digestion)]], dtype=np.uint8))
    tail = [np.array([value]) for value in (total, loi, mgo_vf)]
    result = fitness(*values, *codes, *tail, Conventions())
    return result["fitness"][0], result["fitness_cause"][0]


def test_fitness_fusion_analysis_with_good_total_is_fit():
    assert judged() == ("fit", None)
    assert judged("xrf") == ("fit", None)


@pytest.mark.parametrize(
    ("departure", "word", "cause"),
    [
        ({"total": 98.2}, "fit with remarks", "window"),
        ({"total": 96.9}, "unfit", "total lies below"),
        ({"total": 102.1}, "unfit", "total lies above"),
        ({"loi": 3.1}, "fit with remarks", "loss on ignition is high"),
        ({"loi": 6.1}, "unfit", "loss on ignition lies above"),
        ({"loi": 12.0, "mgo_vf": 40.0}, "fit", None),
        ({"loi": np.nan}, "fit with remarks", "not reported"),
        ({"loi": np.nan, "total": 96.0}, "unknown", "not reported and the oxides sum to less"),
        ({"digestion": "unknown"}, "fit with remarks", "unknown digestion"),
        ({"digestion": "four_acid"}, "unfit", "fusion or XRF is needed|drives SiO2 off"),
        ({"digestion": "portable_xrf"}, "unfit", "by portable XRF: fusion or XRF is needed"),
        ({"other": {"Na2O": "four_acid"}}, "unfit", "Na2O by four-acid digestion"),
        ({"without": ("K2O",), "other": {"K2O": ""}}, "unknown", "not reported: K2O"),
        ({"without": ("Na2O",), "other": {"Na2O": "peroxide_fusion"}}, "unfit", "Na2O by peroxide fusion"),
    ],
)
def test_fitness_departure_from_a_good_analysis_gives_word_and_cause(departure, word, cause):

    found, why = judged(**departure)
    assert found == word
    assert why is None if cause is None else re.search(cause, why)


def test_fitness_aqua_regia_file_says_that_silica_is_missing():
    without = tuple(NEEDED_MAJORS)
    found, why = judged("aqua_regia", total=np.nan, loi=np.nan, mgo_vf=np.nan, without=without)
    assert found == "unfit"
    assert why == "no whole-rock silica: aqua regia carries no lithophile element"


def test_fitness_refused_major_outweighs_one_not_reported():
    found, why = judged(without=("SiO2", "MgO"), other={"SiO2": "four_acid", "MgO": ""}, total=np.nan)
    assert found == "unfit"
    assert "four-acid digestion drives SiO2 off" in why and "not reported: MgO" in why


def test_fitness_limits_follow_the_conventions():
    values = [np.array([GRANITE[name]]) for name in NEEDED_MAJORS]
    codes = [np.array([1], dtype=np.uint8)] * 7
    tail = (np.array([99.0]), np.array([5.0]), np.array([0.7]))
    strict = fitness(*values, *codes, *tail, Conventions(loi_fail_wt=4.0))
    assert strict["fitness"][0] == "unfit"


def test_fitness_records_have_known_source_and_warnings_name_their_value():
    assert METHODS[0].source in REFERENCES
    for warning in WARNINGS:
        assert ("{value}" in warning.text) == (warning.value_column is not None)


def test_warnings_screens_mark_only_their_own_case():
    conventions = Conventions()
    by_code = {warning.code: warning for warning in WARNINGS}
    loi, mgo = np.array([2.0, 4.0, 7.0, 12.0, np.nan]), np.array([1.0, 1.0, 1.0, 40.0, 1.0])
    total = np.full(5, 99.0)
    assert by_code["loi_high"].mask(loi, mgo, conventions).tolist() == [False, True, False, False, False]
    assert by_code["loi_fails_fitness"].mask(loi, mgo, conventions).tolist() == [False, False, True, False, False]
    assert by_code["loi_not_reported"].mask(total, loi).tolist() == [False] * 4 + [True]
    assert by_code["sulphide_ties_iron"].mask(np.array([0.4, 0.6, np.nan]), conventions).tolist() == [
        False,
        True,
        False,
    ]
    low = by_code["total_fails_fitness"].mask(
        np.array([96.0, 96.0, 103.0]), np.array([1.0, np.nan, np.nan]), conventions
    )
    assert low.tolist() == [True, False, True]


def test_warning_digestion_unknown_marks_samples_with_an_unnamed_column():
    warning = next(warning for warning in WARNINGS if warning.code == "digestion_unknown")
    codes = [np.array([1, 0], dtype=np.uint8) for _ in warning.inputs]
    codes[5] = np.array([1, DIGESTION_CODE["unknown"]], dtype=np.uint8)
    assert warning.mask(*codes).tolist() == [False, True]
