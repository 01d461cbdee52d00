"""Typical fertile and barren rocks through the whole pipeline, against the verdicts a petrologist expects.

Status: typical, from memory; invented numbers within published ranges; the expectations are common practice. Rocks and
rules have the same author: this is a check of consistency, no validation.
"""

import numpy as np
import pytest

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_CODE
from registry.pipeline import compute
from registry.targets.definition import TARGET_CODES, load_definitions
from registry.targets.engine import UNDECIDED, VERDICT_WORDS

#: Traces whose loss can only take knowledge away, with the readings in the field.
REMOVABLE = [
    "s_wt", "f_wt", "li_ppm", "be_ppm", "sc_ppm", "v_ppm", "ni_ppm", "cu_ppm", "rb_ppm", "sr_ppm", "y_ppm", "zr_ppm",
    "nb_ppm", "sn_ppm", "cs_ppm", "la_ppm", "sm_ppm", "eu_ppm", "gd_ppm", "yb_ppm", "hf_ppm", "ta_ppm", "w_ppm",
    "th_ppm", "u_ppm", "pd_ppm", "pt_ppm", "k2o_wt", "na2o_wt", "cao_wt",
]  # fmt: skip
REMOVABLE_CONTEXT = ["half_width_m", "depth_to_top_m", "age_ma", "heat_flow_mw_m2", "intrusion_shape"]


def verdicts_of(chunk):
    computed = compute(chunk, list(load_definitions().values()), Conventions())
    return {code: found.verdict for code, found in computed.verdicts.items()}


@pytest.mark.parametrize("code", TARGET_CODES)
def test_reference_compositions_get_the_expected_verdict(code, reference_table, reference_chunk):
    found = verdicts_of(reference_chunk)[code]
    wrong = [
        f"{row['label']}: {VERDICT_WORDS[verdict]}, expected {row['expected_' + code]}"
        for row, verdict in zip(reference_table, found, strict=True)
        if VERDICT_WORDS[verdict] not in row["expected_" + code].split("/")
    ]
    assert wrong == []


def _many(make_chunk, table, copies):
    return make_chunk([row for row in table for _ in range(copies)])


def _only_became_undecided(before, after, copies):
    for code, codes in after.items():
        original = np.repeat(before[code], copies)
        changed = codes != original
        assert (codes[changed] == UNDECIDED).all(), code


def test_removal_of_analytes_only_turns_decided_verdicts_undecided(reference_table, reference_chunk, make_chunk):
    copies, rng = 60, np.random.default_rng(20)
    chunk = _many(make_chunk, reference_table, copies)
    for name in REMOVABLE:
        gone = rng.random(len(chunk)) < 0.25
        chunk.values[CHOSEN_INDEX[name], gone] = np.nan
        chunk.digestions[CHOSEN_INDEX[name], gone] = 0
    for name in REMOVABLE_CONTEXT:
        gone = rng.random(len(chunk)) < 0.25
        chunk.context[name][gone] = None if chunk.context[name].dtype == object else np.nan
    _only_became_undecided(verdicts_of(reference_chunk), verdicts_of(chunk), copies)


def test_four_acid_relabelling_only_turns_decided_verdicts_undecided(reference_table, reference_chunk, make_chunk):
    copies, rng = 30, np.random.default_rng(21)
    chunk = _many(make_chunk, reference_table, copies)
    for name in REMOVABLE:
        position = CHOSEN_INDEX[name]
        if name.endswith("_ppm") and name not in ("pd_ppm", "pt_ppm"):
            relabelled = (rng.random(len(chunk)) < 0.4) & ~np.isnan(chunk.values[position])
            chunk.digestions[position, relabelled] = DIGESTION_CODE["four_acid"]
    _only_became_undecided(verdicts_of(reference_chunk), verdicts_of(chunk), copies)


def _row(table, start):
    return dict(next(row for row in table if row["label"].startswith(start)))


def test_redox_witnesses_that_disagree_leave_redox_unknown(reference_table, make_chunk):
    reduced_by_susceptibility = _row(reference_table, "P01") | {"magnetic_susceptibility_si": "0.0001"}
    oxidised = _row(reference_table, "P01")
    computed = compute(
        make_chunk([oxidised, reduced_by_susceptibility]), list(load_definitions().values()), Conventions()
    )
    assert computed.derived["redox_series"].tolist() == ["magnetite", None]
    porphyry = computed.verdicts["porphyry_copper"]
    assert [VERDICT_WORDS[code] for code in porphyry.verdict] == ["favourable", "undecided"]
    assert '"6":"titrated FeO and magnetic susceptibility contradict each other"' in porphyry.reasons[1]
    assert porphyry.score_min[1] == pytest.approx(porphyry.score_min[0] - 0.24)


def test_low_susceptibility_of_altered_rock_is_never_called_reduced(reference_table, make_chunk):
    altered = _row(reference_table, "T05")  # greisen, susceptibility 1e-4
    computed = compute(make_chunk([altered]), list(load_definitions().values()), Conventions())
    assert computed.derived["redox_series"][0] is None


def test_argillic_porphyry_with_high_loss_on_ignition_is_not_judged(reference_table, make_chunk):
    computed = compute(make_chunk([_row(reference_table, "P09")]), list(load_definitions().values()), Conventions())
    assert computed.derived["fitness"].tolist() == ["unfit"]
    assert "loss on ignition" in computed.derived["fitness_cause"][0]
    assert VERDICT_WORDS[computed.verdicts["porphyry_copper"].verdict[0]] == "undecided"


def test_porphyry_by_aqua_regia_only_is_undecided_for_want_of_silica(reference_table, make_chunk):
    chunk = make_chunk([_row(reference_table, "P01")])
    lithophile = [name for name in CHOSEN_INDEX if name not in ("cu_ppm", "ni_ppm", "loi_wt")]
    for name in lithophile:
        position = CHOSEN_INDEX[name]
        present = ~np.isnan(chunk.values[position])
        chunk.values[position, present] = np.nan
        chunk.digestions[position, present] = DIGESTION_CODE["aqua_regia"]
    computed = compute(chunk, list(load_definitions().values()), Conventions())
    assert computed.derived["fitness_cause"][0] == "no whole-rock silica: aqua regia carries no lithophile element"
    assert {VERDICT_WORDS[found.verdict[0]] for found in computed.verdicts.values()} == {"undecided"}
