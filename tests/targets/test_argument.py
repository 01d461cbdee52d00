"""The argument in words, on invented rocks."""

import json

import pytest

from registry.petrology.analytes import CHOSEN_COLUMNS, CHOSEN_INDEX
from registry.targets.argument import argue, number_text
from registry.targets.definition import TARGET_CODES, load_definition
from registry.targets.stored_sample import workspace_of_sample

PORPHYRY = {
    "fitness": "fit", "differentiation_index": 65.0, "sr_ppm": 720.0, "y_ppm": 11.0, "la_ppm": 24.0, "yb_ppm": 0.95,
    "eu_ppm": 0.98, "sm_ppm": 3.6, "gd_ppm": 2.8, "v_ppm": 105.0, "sc_ppm": 9.0, "sio2_vf_wt": 64.0,
    "redox_series": "magnetite", "feo_titrated_wt": 1.9, "magnetic_susceptibility_si": 0.018, "texture": "porphyritic",
    "lithology": "granodiorite", "nb_ppm": 6.0, "fe_number": 0.65, "cao_wt": None,
}  # fmt: skip


def packed(**letters):
    text = ["."] * len(CHOSEN_COLUMNS)
    for column, letter in letters.items():
        text[CHOSEN_INDEX[column]] = letter
    return "".join(text)


def test_argue_favourable_porphyry_states_numbers_limits_and_points():
    told = argue(load_definition("porphyry_copper"), PORPHYRY)
    assert told["verdict"] == "favourable"
    assert "Sr/Y 65.5 against 35 and La/Yb 25.3 against 20 record suppressed plagioclase" in told["argument"]
    assert "V/Sc is 11.7 where the line at 64.0 % SiO2 gives 7.86" in told["argument"]
    assert "Redox is magnetite (titrated FeO and magnetic susceptibility)" in told["argument"]
    assert "100 of 100 points are met, 0 unknown, 83 rest on provisional limits" in told["argument"]
    assert told["would_turn"] == told["near_misses"] == told["contradictions"] == told["missing"] == []


def test_argue_gaps_are_listed_worth_most_first_with_what_supplies_them():
    sample = PORPHYRY | {
        "y_ppm": None,
        "redox_series": None,
        "feo_titrated_wt": None,
        "magnetic_susceptibility_si": None,
    }
    told = argue(load_definition("porphyry_copper"), sample)
    assert told["missing"] == [
        "Y by fusion ICP-MS (opens 38 of 100 points)",
        "titrated FeO or a susceptibility reading (opens 24 of 100 points)",
    ]
    assert "Redox is not known (neither titrated FeO nor a susceptibility reading)" in told["argument"]


def test_argue_witnesses_of_redox_that_disagree_are_named():
    told = argue(load_definition("porphyry_copper"), PORPHYRY | {"redox_series": None, "delta_ox": -0.3, "loi_wt": 1.0})
    assert told["missing"] == [
        "titrated FeO or the susceptibility once more, on fresh rock, since the two contradict each other "
        "(opens 24 of 100 points)"
    ]
    assert (
        "Redox is not settled (titrated FeO says ilmenite series, magnetic susceptibility magnetite series: the two "
        "contradict each other; repeat one of them on fresh rock)" in told["argument"]
    )


def test_argue_witnesses_of_redox_that_disagree_the_other_way_are_not_swapped():
    sample = PORPHYRY | {"redox_series": None, "delta_ox": 0.3, "loi_wt": 1.0, "magnetic_susceptibility_si": 2e-4}
    told = argue(load_definition("tin"), sample)
    assert "titrated FeO says magnetite series, magnetic susceptibility ilmenite series" in told["argument"]


@pytest.mark.parametrize(
    ("changes", "why", "remedy"),
    [
        (
            {"magnetic_susceptibility_si": 2e-4, "feo_titrated_wt": None, "alteration": "phyllic"},
            "not known (magnetic susceptibility is low, but alteration may have destroyed magnetite)",
            "titrated FeO of fresh rock, since alteration may have destroyed the magnetite",
        ),
        (
            {"delta_ox": 0.3, "loi_wt": 5.0, "feo_titrated_wt": 1.9, "magnetic_susceptibility_si": None},
            "not known (loss on ignition is too high for the iron to be the magma's)",
            "titrated FeO or a susceptibility reading of fresh rock, since the loss on ignition is too high here",
        ),
    ],
)
def test_argue_redox_that_a_measurement_does_not_tell_says_why(changes, why, remedy):
    told = argue(load_definition("porphyry_copper"), PORPHYRY | {"redox_series": None} | changes)
    assert f"Redox is {why}" in told["argument"]
    assert told["missing"] == [f"{remedy} (opens 24 of 100 points)"]


def test_argue_near_miss_and_contradiction_are_shown():
    told = argue(load_definition("porphyry_copper"), PORPHYRY | {"sr_ppm": 330.0, "eu_ppm": 0.5})
    asked = "Sr over Y: 30.0, asked for >= 35.0, a near miss worth 22 points; if it were met: favourable"
    assert (told["would_turn"], told["near_misses"]) == ([asked], [])
    assert told["contradictions"] == ["Eu/Eu* below 0.6: plagioclase was taken out"]


def test_argue_failed_gate_leads_what_would_turn_it():
    told = argue(load_definition("porphyry_copper"), PORPHYRY | {"differentiation_index": 20.0})
    assert told["verdict"] == "unfavourable"
    assert told["would_turn"][0].startswith("Evolved to the porphyry stage: 20.0, asked for >= 35.0")
    assert told["would_turn"][0].endswith("; if it were met: favourable")


def test_argue_two_failed_gates_turn_nothing_alone():
    told = argue(load_definition("porphyry_copper"), PORPHYRY | {"differentiation_index": 20.0, "nb_ppm": 30.0})
    assert told["would_turn"] == []
    assert told["failed_rules"][0].startswith("Evolved to the porphyry stage: ")
    assert len(told["failed_rules"]) == 2


def test_argue_near_miss_that_crosses_a_border_is_told_with_the_verdict_it_gives():
    """As many criteria met as leave the sample below favourable, the heaviest one nearly."""
    definition = load_definition("porphyry_copper")
    points = {criterion.code: criterion.weight for criterion in definition.criteria}
    stored = {"values": [None] * 11, "thresholds": [35.0] * 11, "texts": {}}
    heaviest = max(points, key=points.__getitem__)
    met, total = set(), 0
    for code, weight in points.items():
        if code != heaviest and total + weight < 100 * definition.favourable:
            met.add(code)
            total += weight
    assert 100 * definition.favourable - points[heaviest] <= total
    letters = "".join("r" if c == heaviest else "m" if c in met else "n" for c in points)
    told = argue(definition, PORPHYRY, stored | {"outcomes": "m" * len(definition.gates) + letters})
    assert len(told["would_turn"]) == 1 and told["near_misses"] == []
    assert told["would_turn"][0].endswith(f"a near miss worth {points[heaviest]} points; if it were met: favourable")


def test_argue_packed_qualifiers_and_digestions_give_intervals():
    sample = {
        "fitness": "fit", "differentiation_index": 93.0, "k2o_wt": 5.0, "rb_ppm": 540.0, "sr_ppm": 32.0,
        "sn_ppm": 10.0, "nb_ppm": 8.0, "ta_ppm": 0.5, "tio2_vf_wt": 0.1, "a_nk": 1.3,
        "qualifiers": packed(sn_ppm="<", ta_ppm="<"), "digestions": packed(sn_ppm="f", ta_ppm="f", nb_ppm="f"),
    }  # fmt: skip
    told = argue(load_definition("tin"), sample)
    assert "Sn is < 10 ppm" in told["argument"]
    assert told["missing"][0].startswith("titrated FeO or a susceptibility reading")
    assert "Sn by fusion or peroxide fusion, with a lower detection limit (opens 8 of 100 points)" in told["missing"]


def test_argue_tungsten_names_the_digestion_of_its_key_analyte():
    told = argue(load_definition("tungsten"), {"fitness": "fit", "w_ppm": 9.0, "digestions": packed(w_ppm="a")})
    assert "16 to inf" not in told["argument"]
    assert "W is 9 to inf ppm (four-acid digestion)" in told["argument"]


def test_argue_stored_reasons_are_taken_as_they_stand():
    definition = load_definition("porphyry_copper")
    stored = {"outcomes": "mm" + "r" * 9, "values": [None] * 11, "thresholds": [35.0] * 11, "texts": {}}
    told = argue(definition, PORPHYRY, json.dumps(stored))
    assert "0 of 100 points are met" in told["argument"]
    assert len(told["near_misses"]) == 9 and told["would_turn"] == []


def test_argue_unfit_analysis_gives_the_cause():
    told = argue(load_definition("tin"), {"fitness": "unfit", "fitness_cause": "loss on ignition is too high"})
    assert (told["verdict"], told["cause"]) == ("undecided", "loss on ignition is too high")


@pytest.mark.parametrize("code", TARGET_CODES)
def test_argue_sample_without_any_value_fills_every_sentence(code):
    told = argue(load_definition(code), {})
    assert "{" not in told["argument"] and "nan" not in told["argument"].lower()
    assert told["verdict"] == "undecided"
    assert told["missing"] and told["cautions"]


def test_argue_magmatic_heat_gives_the_age_with_two_sigma():
    sample = {
        "fitness": "fit", "intrusion": "Invented Dome", "intrusion_shape": "sphere", "half_width_m": 2500.0,
        "age_ma": 0.1, "age_sigma_ma": 0.02, "depth_to_top_m": 4500.0, "heat_flow_mw_m2": 140.0, "sio2_vf_wt": 75.0,
        "body_mapped_or_cored": True,
    }  # fmt: skip
    told = argue(load_definition("magmatic_heat"), sample)
    assert "shape is sphere, its half-width 2500 m, age 0.100 +- 0.0400 (2 sigma) Ma" in told["argument"]
    assert told["verdict"] == "favourable"


def test_workspace_of_sample_replaces_a_censored_value_by_its_substitute():
    made = workspace_of_sample({"sn_ppm": 10.0, "qualifiers": packed(sn_ppm="<")})
    assert made["sn_ppm"][0] == 5.0 and made["reported:sn_ppm"][0] == 10.0


@pytest.mark.parametrize(
    ("value", "text"),
    [(35.0, "35.0"), (1234.5, "1230"), (0.12345, "0.123"), (9.996, "10.0"), (0.0, "0"), (2.5e-6, "2.5e-06")],
)
def test_number_text_keeps_three_digits(value, text):
    assert number_text(value) == text


def test_argue_size_by_the_half_width_names_it_where_the_volume_is_not_known():
    sample = {
        "fitness": "fit", "intrusion": "Invented Dome", "intrusion_shape": "slab", "half_width_m": 1200.0,
        "age_ma": 0.1, "age_sigma_ma": 0.02, "depth_to_top_m": 4500.0, "heat_flow_mw_m2": 140.0, "sio2_vf_wt": 75.0,
        "body_mapped_or_cored": True,
    }  # fmt: skip
    told = argue(load_definition("magmatic_heat"), sample)
    assert told["instead"] == ["size"]
    near = [text for text in told["would_turn"] + told["near_misses"] if text.startswith("Size")]
    assert len(near) == 1 and "half_width_m 1200, asked for >= 1340" in near[0]
    assert argue(load_definition("magmatic_heat"), sample | {"volume_km3": 20.0})["instead"] == []
