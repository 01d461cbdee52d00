"""Reasons as JSON texts. The numbers are invented to test each branch."""

import json

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from registry.targets.evaluation import Outcome
from registry.targets.intervals import Words
from registry.targets.packing import pack_reasons, round_significant


@given(
    st.floats(allow_nan=False, allow_infinity=False, min_value=-1e12, max_value=1e12).filter(lambda v: abs(v) > 1e-9)
)
def test_round_significant_any_number_agrees_with_decimal_formatting(value):
    assert abs(round_significant(np.array([value]))[0] - float(f"{value:.5e}")) <= abs(value) * 1.01e-5


def test_round_significant_zero_nan_and_infinity_stay_writable():
    found = round_significant(np.array([0.0, np.nan, np.inf, -np.inf, 123456.789, 1.0 / 3.0]))
    assert found[0] == 0.0 and np.isnan(found[1:4]).all()
    assert found[4:].tolist() == [123457.0, 0.333333]


def test_pack_reasons_gives_each_sample_its_own_json():
    letters = np.array([[ord("m"), ord("u")], [ord("n"), ord("r")]], dtype=np.uint8)
    nothing = np.full(2, np.nan)
    outcomes = [
        Outcome(letters[:, 0], np.array([1.5, 2.5]), np.array([1.0, 3.0]), Words(np.zeros(2, dtype=np.intp), ("",))),
        Outcome(letters[:, 1], nothing, nothing, Words(np.array([1, 0]), ("", 'said "so"'))),
    ]
    cause = Words(np.array([0, 1]), ("", "not fit"))
    first, second = (json.loads(text) for text in pack_reasons(letters, outcomes, cause))
    assert first == {"outcomes": "mu", "values": [1.5, None], "thresholds": [1.0, None], "texts": {"1": 'said "so"'}}
    assert second == {"outcomes": "nr", "values": [2.5, None], "thresholds": [3.0, None], "texts": {"cause": "not fit"}}


def test_pack_reasons_many_distinct_texts_keep_their_samples():
    n = 3000
    letters = np.full((n, 9), ord("u"), dtype=np.uint8)
    nothing = np.full(n, np.nan)
    labels = ("", *(f"< {i}" for i in range(n)))
    outcomes = [Outcome(letters[:, 0], nothing, nothing, Words(np.roll(np.arange(n), k), labels)) for k in range(9)]
    texts = [json.loads(text)["texts"] for text in pack_reasons(letters, outcomes, Words(np.zeros(n, np.intp), ("",)))]
    for k in range(9):
        assert [found.get(str(k), "") for found in texts] == [labels[code] for code in np.roll(np.arange(n), k)]
