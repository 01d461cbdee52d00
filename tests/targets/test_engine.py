"""Judging: the order of fitness, gates and score, on hand-made workspaces (invented to test each branch).

The censored cases are common practice: Nb 8 with Ta < 0.5 means Nb/Ta > 16, so a limit of 5 is surely not met.
"""

import json

import numpy as np
import pytest

from registry.petrology.analytes import QUALIFIER_BELOW
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_CODE
from registry.targets.definition import load_definition, load_definitions
from registry.targets.engine import (
    FAVOURABLE,
    NOT_JUDGED,
    POSSIBLE,
    UNDECIDED,
    UNFAVOURABLE,
    Verdicts,
    best,
    judge,
    judge_all,
)

#: A dacite porphyry that meets every criterion of porphyry copper.
PORPHYRY = {
    "fitness": "fit", "differentiation_index": 65.0, "sr_ppm": 720.0, "y_ppm": 11.0, "la_ppm": 24.0, "yb_ppm": 0.95,
    "eu_ppm": 0.98, "sm_ppm": 3.6, "gd_ppm": 2.8, "v_ppm": 105.0, "sc_ppm": 9.0, "sio2_vf_wt": 65.0,
    "redox_series": "magnetite", "logged_porphyritic": True, "logged_extrusive": False, "logged_blank": False,
    "nb_ppm": 6.0, "fe_number": 0.65,
}  # fmt: skip
#: A granite that meets every criterion of tin.
TIN_GRANITE = {
    "fitness": "fit", "differentiation_index": 93.0, "k2o_wt": 5.0, "rb_ppm": 540.0, "sr_ppm": 32.0, "sn_ppm": 18.0,
    "tio2_vf_wt": 0.14, "redox_series": "ilmenite", "nb_ppm": 17.0, "ta_ppm": 3.8, "zr_ppm": 70.0, "hf_ppm": 2.9,
    "f_wt": 0.35, "a_nk": 1.3,
}  # fmt: skip


def workspace(rock, *, below=(), four_acid=(), **changes):
    made = {"conventions": Conventions()}
    for name, value in (rock | changes).items():
        if value is None:
            continue
        made[name] = np.array([value], dtype=object if isinstance(value, str) else None)
        if name in below:
            made[f"qualifier:{name}"] = np.array([QUALIFIER_BELOW], dtype=np.uint8)
            made[f"reported:{name}"] = made[name]
            made[name] = made[name] * 0.5
        if name in four_acid:
            made[f"digestion:{name}"] = np.array([DIGESTION_CODE["four_acid"]], dtype=np.uint8)
    return made


def judged(code, rock, **changes):
    """Verdict code, reasons and outcome letters by criterion code of one rock."""
    definition = load_definition(code)
    verdicts = judge(definition, workspace(rock, **changes), 1)
    reasons = json.loads(verdicts.reasons[0])
    letters = {item.code: letter for item, letter in zip(definition.tests, reasons["outcomes"], strict=True)}
    return int(verdicts.verdict[0]), reasons, letters


def test_judge_rock_that_meets_everything_is_favourable_with_full_score():
    verdicts = judge(load_definition("porphyry_copper"), workspace(PORPHYRY), 1)
    assert verdicts.verdict[0] == FAVOURABLE
    assert (verdicts.score_min[0], verdicts.score_max[0], verdicts.coverage[0]) == (1.0, 1.0, 1.0)
    assert verdicts.provisional[0] and verdicts.judged[0]


@pytest.mark.parametrize("state", ["unfit", "unknown", None])
def test_judge_unfit_analysis_is_undecided_with_its_cause(state):
    verdict, reasons, letters = judged("porphyry_copper", PORPHYRY, fitness=state, fitness_cause="LOI is high")
    assert verdict == UNDECIDED
    assert set(letters.values()) == {"u"}
    assert reasons["texts"]["cause"] == "LOI is high"


def test_judge_analysis_fit_with_remarks_is_judged():
    assert judged("porphyry_copper", PORPHYRY, fitness="fit with remarks")[0] == FAVOURABLE


def test_judge_failed_gate_is_unfavourable_even_with_gaps():
    verdict, _, letters = judged("porphyry_copper", PORPHYRY, differentiation_index=20.0, redox_series=None)
    assert verdict == UNFAVOURABLE
    assert letters["porphyry_stage"] == "n" and letters["oxidised"] == "u"


def test_judge_unknown_gate_turns_favourable_into_undecided():
    assert judged("porphyry_copper", PORPHYRY, nb_ppm=None)[0] == UNDECIDED


def test_judge_unknown_gate_leaves_unfavourable_by_score():
    poor = {"redox_series": "ilmenite", "sr_ppm": 100.0, "logged_porphyritic": False, "yb_ppm": 4.0}
    assert judged("porphyry_copper", PORPHYRY, nb_ppm=None, **poor)[0] == UNFAVOURABLE


def test_judge_score_that_may_still_pass_is_undecided():
    verdicts = judge(load_definition("porphyry_copper"), workspace(PORPHYRY, redox_series=None), 1)
    assert verdicts.verdict[0] == UNDECIDED
    assert (verdicts.score_min[0], verdicts.score_max[0]) == pytest.approx((0.76, 1.0))
    assert verdicts.coverage[0] == pytest.approx(0.76)


def test_judge_near_miss_scores_nothing_and_is_shown():
    verdict, reasons, letters = judged("porphyry_copper", PORPHYRY, sr_ppm=330.0, y_ppm=11.0)
    assert letters["sr_over_y"] == "r"
    assert verdict == POSSIBLE  # 0.78
    assert reasons["values"][2] == 30.0 and reasons["thresholds"][2] == 35.0


def test_judge_false_precondition_is_not_met_and_says_why():
    _, reasons, letters = judged("porphyry_copper", PORPHYRY, sr_ppm=150.0)
    assert letters["europium"] == letters["v_over_sc"] == "n"
    assert reasons["texts"]["4"] == "counts only if sr_y >= 20"


def test_judge_unknown_precondition_is_unknown_unless_the_test_fails():
    _, _, letters = judged("porphyry_copper", PORPHYRY, y_ppm=None)
    assert letters["europium"] == letters["v_over_sc"] == "u"
    _, _, letters = judged("porphyry_copper", PORPHYRY, y_ppm=None, v_ppm=20.0)
    assert letters["v_over_sc"] == "n"


def test_judge_line_gives_each_sample_its_own_threshold():
    _, reasons, _ = judged("porphyry_copper", PORPHYRY, sio2_vf_wt=60.0)
    assert reasons["thresholds"][5] == pytest.approx(9.4)  # Loucks 2014 line at 60 %, from memory


def test_judge_missing_analyte_is_named_in_the_texts():
    _, reasons, letters = judged("porphyry_copper", PORPHYRY, yb_ppm=None)
    assert letters["la_over_yb"] == "u"
    assert reasons["texts"]["3"] == "missing: yb_ppm"
    assert reasons["values"][3] is None


def test_judge_niobium_below_5_at_lanthanum_10_decides_the_trough():
    _, reasons, letters = judged("porphyry_copper", PORPHYRY, nb_ppm=5.0, la_ppm=10.0, below=["nb_ppm"])
    assert letters["subduction_source"] == letters["niobium_trough"] == "m"
    assert reasons["texts"]["8"] == "< 5"


def test_judge_niobium_below_20_leaves_the_gate_open():
    verdict, _, letters = judged("porphyry_copper", PORPHYRY, nb_ppm=20.0, la_ppm=10.0, below=["nb_ppm"])
    assert letters["subduction_source"] == "u"
    assert verdict == UNDECIDED


def test_judge_tantalum_below_half_decides_niobium_over_tantalum():
    _, reasons, letters = judged("tin", TIN_GRANITE, nb_ppm=8.0, ta_ppm=0.5, below=["ta_ppm"])
    assert letters["nb_over_ta"] == "n"
    assert "> 16" in reasons["texts"].values()


def test_judge_limit_equal_to_the_threshold_is_not_met():
    _, _, letters = judged("tin", TIN_GRANITE, sn_ppm=10.0, below=["sn_ppm"])
    assert letters["tin"] == "n"  # < 10 is not >= 10
    assert letters["tin_lower"] == "u"
    assert judged("tin", TIN_GRANITE, sn_ppm=10.0)[2]["tin"] == "m"


@pytest.mark.parametrize(("limit", "letter"), [(4.0, "n"), (10.0, "u")])
def test_judge_tungsten_below_its_limit_is_decided_only_under_the_threshold(limit, letter):
    rock = TIN_GRANITE | {"a_cnk": 1.1, "cs_ppm": 20.0, "w_ppm": limit}
    assert judged("tungsten", rock, below=["w_ppm"])[2]["tungsten"] == letter


def test_judge_four_acid_tin_is_a_minimum():
    assert judged("tin", TIN_GRANITE, sn_ppm=12.0, four_acid=["sn_ppm"])[2]["tin"] == "m"
    assert judged("tin", TIN_GRANITE, sn_ppm=8.0, four_acid=["sn_ppm"])[2]["tin"] == "u"


def test_judge_ratio_of_two_four_acid_minima_is_unknown():
    _, reasons, letters = judged("tin", TIN_GRANITE, four_acid=["nb_ppm", "ta_ppm", "zr_ppm", "hf_ppm"])
    assert letters["nb_over_ta"] == letters["zr_over_hf"] == "u"
    assert "not bounded" in reasons["texts"].values()


def test_judge_peralkaline_granite_outside_the_zircon_model_is_not_cool():
    rock = TIN_GRANITE | {"sio2_vf_wt": 74.0, "zircon_saturation_wh83_c": 700.0, "a_nk": 0.9}
    assert judged("tungsten", rock)[2]["cool_granite"] == "n"


def test_judge_intrusion_without_volume_is_sized_by_its_half_width():
    rock = {
        "fitness": "fit", "has_intrusion": True, "intrusion_shape": "slab", "half_width_m": 1400.0, "age_ma": 0.01,
        "theta_centre": 0.9, "theta_centre_low": 0.8, "theta_centre_high": 0.95, "depth_to_top_m": 3000.0,
        "heat_flow_mw_m2": 120.0, "sio2_vf_wt": 70.0, "body_mapped_or_cored": True,
    }  # fmt: skip
    verdict, reasons, letters = judged("magmatic_heat", rock)
    assert (verdict, letters["size"], reasons["values"][3]) == (FAVOURABLE, "m", 1400.0)
    assert judged("magmatic_heat", rock, half_width_m=1000.0)[2]["size"] == "r"
    assert judged("magmatic_heat", rock, volume_km3=2.0)[2]["size"] == "n"


def test_judge_magmatic_heat_without_intrusion_is_undecided_and_says_so():
    verdict, reasons, _ = judged("magmatic_heat", {"fitness": "fit", "sio2_vf_wt": 70.0})
    assert verdict == UNDECIDED
    assert reasons["texts"]["cause"] == "no intrusion"


def test_judge_straddling_theta_is_undecided():
    rock = {
        "fitness": "fit", "has_intrusion": True, "intrusion_shape": "sphere", "half_width_m": 4000.0, "age_ma": 1.2,
        "theta_centre": 0.06, "theta_centre_low": 0.02, "theta_centre_high": 0.4,
    }  # fmt: skip
    verdict, reasons, letters = judged("magmatic_heat", rock)
    assert (verdict, letters["heat_left_least"]) == (UNDECIDED, "u")
    assert reasons["texts"]["0"] == "0.02 to 0.4"


def test_judge_missing_uranium_may_exclude_but_never_favour():
    cool = {"fitness": "fit", "th_ppm": 3.0, "k2o_wt": 2.0, "differentiation_index": 50.0, "sio2_vf_wt": 60.0}
    assert judged("radiogenic_heat", cool)[0] == UNFAVOURABLE
    hot = {
        "fitness": "fit", "th_ppm": 200.0, "k2o_wt": 5.0, "differentiation_index": 68.0, "sio2_vf_wt": 70.0,
        "has_intrusion": True, "intrusion_shape": "slab", "half_width_m": 4000.0, "depth_to_top_m": 1000.0,
        "heat_flow_mw_m2": 100.0,
    }  # fmt: skip
    verdict, _, letters = judged("radiogenic_heat", hot)
    assert letters["hotter_than_granite"] == "m"
    assert verdict == UNDECIDED


def test_judge_empty_workspace_leaves_every_target_undecided():
    verdicts = judge_all(load_definitions().values(), {}, 3)
    for found in verdicts.values():
        assert found.verdict.tolist() == [UNDECIDED] * 3
        assert found.coverage.tolist() == [0.0] * 3


def test_judge_no_samples_gives_empty_verdicts():
    found = judge(load_definition("tin"), {}, 0)
    assert found.verdict.shape == (0,) and found.reasons == []


@pytest.mark.parametrize("kind", ["reference_material", "blank", "duplicate"])
def test_judge_control_sample_gets_no_verdict(kind):
    made = {name: np.repeat(values, 2) for name, values in workspace(PORPHYRY).items() if name != "conventions"}
    made["sample_kind"] = np.array([kind, "core"], dtype=object)
    found = judge(load_definition("porphyry_copper"), made, 2)
    assert found.verdict.tolist() == [NOT_JUDGED, FAVOURABLE]
    assert found.judged.tolist() == [False, True]
    assert found.reasons[0] == "" and np.isnan(found.score_min[0])


def test_judge_reasons_round_to_six_digits_and_never_hold_nan():
    _, reasons, _ = judged("porphyry_copper", PORPHYRY, sr_ppm=1000.0 / 3.0)
    assert reasons["values"][2] == 30.303
    definition = load_definition("nickel_copper")
    text = judge(definition, {"mgo_vf_wt": np.array([np.nan]), "ni_ppm": np.array([1e-9])}, 1).reasons[0]
    assert "NaN" not in text and "Infinity" not in text
    assert len(json.loads(text)["values"]) == len(definition.tests)


def test_judge_many_samples_gives_each_what_it_gets_alone():
    rocks = [PORPHYRY, PORPHYRY | {"sr_ppm": 330.0}, PORPHYRY | {"nb_ppm": 40.0}, PORPHYRY | {"fe_number": 0.9}]
    together = {name: np.array([rock[name] for rock in rocks], dtype=object if isinstance(value, str) else None)
                for name, value in PORPHYRY.items()}  # fmt: skip
    found = judge(load_definition("porphyry_copper"), together, len(rocks))
    alone = [judge(load_definition("porphyry_copper"), workspace(rock), 1) for rock in rocks]
    assert [json.loads(text) for text in found.reasons] == [json.loads(one.reasons[0]) for one in alone]
    assert found.verdict.tolist() == [int(one.verdict[0]) for one in alone]


def _verdicts(codes, scores):
    n = len(codes)
    scores = np.array(scores)
    yes = np.ones(n, dtype=bool)
    return Verdicts(
        np.array(codes, dtype=np.uint8), scores, scores, scores, yes, yes, np.zeros((n, 1), np.uint8), [""] * n
    )


def test_best_prefers_the_verdict_then_the_score_then_the_order():
    first = _verdicts([UNFAVOURABLE, POSSIBLE, FAVOURABLE, UNDECIDED], [0.3, 0.5, 0.7, 0.2])
    second = _verdicts([UNDECIDED, POSSIBLE, FAVOURABLE, UNFAVOURABLE], [0.0, 0.6, 0.7, 0.9])
    targets, words = best({"tin": first, "tungsten": second}, 4)
    assert targets.tolist() == ["tungsten", "tungsten", "tin", "tin"]
    assert words.tolist() == ["undecided", "possible", "favourable", "undecided"]


def test_best_without_targets_is_none():
    targets, words = best({}, 2)
    assert targets.tolist() == words.tolist() == [None, None]
