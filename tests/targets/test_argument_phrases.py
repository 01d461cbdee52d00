"""Phrases of an argument that is met in part, and evidence against that is shown beside it, on invented rocks."""

from __future__ import annotations

import re

import pytest

from registry.targets.argument import argue
from registry.targets.definition import (
    TARGET_CODES,
    DefinitionError,
    definition_text,
    load_definition,
    parse_definition,
)

PORPHYRY = {
    "fitness": "fit", "differentiation_index": 65.0, "sr_ppm": 720.0, "y_ppm": 11.0, "la_ppm": 24.0, "yb_ppm": 0.95,
    "eu_ppm": 0.98, "sm_ppm": 3.6, "gd_ppm": 2.8, "v_ppm": 105.0, "sc_ppm": 9.0, "sio2_vf_wt": 64.0,
    "redox_series": "magnetite", "texture": "porphyritic", "lithology": "granodiorite", "nb_ppm": 6.0,
    "fe_number": 0.65,
}  # fmt: skip
EUROPIUM = "Eu/Eu* below 0.6: plagioclase was taken out"


def test_argue_plagioclase_shown_by_one_ratio_and_not_by_the_other_says_which() -> None:
    told = argue(load_definition("porphyry_copper"), PORPHYRY | {"yb_ppm": 2.4, "eu_ppm": 0.5})

    assert told["verdict"] == "favourable"
    assert "agree in part (Sr over Y is met, La over Yb is not) on suppressed plagioclase" in told["argument"]
    assert told["contradictions"] == [EUROPIUM]


def test_argue_plagioclase_shown_by_neither_ratio_is_not_recorded_and_europium_contradicts() -> None:
    """Sr/Y 1.65: possible by its weights, with the evidence against it shown."""
    changes = {"sr_ppm": 33.0, "y_ppm": 20.0, "yb_ppm": 2.4, "eu_ppm": 0.5}
    told = argue(load_definition("porphyry_copper"), PORPHYRY | changes)

    assert told["verdict"] == "possible"
    assert "Sr/Y 1.65 against 35 and La/Yb 10.0 against 20 do not record suppressed plagioclase" in told["argument"]
    assert told["contradictions"] == [EUROPIUM]


def test_argue_low_thorium_over_uranium_is_not_called_altered_in_leucogranite_with_uraninite() -> None:
    told = argue(load_definition("radiogenic_heat"), {"fitness": "fit", "u_ppm": 20.0, "th_ppm": 10.0, "k2o_wt": 5.0})

    assert told["contradictions"] == []
    assert any("uraninite-bearing leucogranite" in caution for caution in told["cautions"])


def test_parse_definition_part_of_a_phrase_with_an_unknown_word_in_braces_is_refused() -> None:
    text = definition_text("porphyry_copper").replace("({met} is met", "({found} is met")

    with pytest.raises(DefinitionError, match=r"part holds \['\{found\}'\]; it may hold \{met\} and \{not_met\} only"):
        parse_definition(text, "porphyry_copper")


def test_argue_line_that_hangs_on_silica_is_left_out_where_silica_is_not_known() -> None:
    told = argue(load_definition("porphyry_copper"), PORPHYRY | {"sio2_vf_wt": None})

    assert "V/Sc is 11.7. Redox is magnetite" in told["argument"]


@pytest.mark.parametrize("code", TARGET_CODES)
def test_argue_sample_without_any_value_compares_no_unknown_with_another(code: str) -> None:
    argument = argue(load_definition(code), {})["argument"]

    assert "not known" in argument
    assert not re.search(r"(?:gives|give|explains up to|\+-|at|keeps) not known", argument)


@pytest.mark.parametrize(
    ("rock", "said"),
    [
        ({"loi_wt": 0.8}, False),
        ({"loi_wt": 5.5}, True),
        ({"loi_wt": 0.8, "alteration": "phyllic"}, True),
        ({}, True),  # LOI is not known, so it cannot be told
    ],
)
def test_argue_caution_on_alteration_is_said_unless_the_rock_is_known_to_be_fresh(
    rock: dict[str, object], said: bool
) -> None:
    cautions = argue(load_definition("porphyry_copper"), PORPHYRY | rock)["cautions"]

    assert any("sericite takes Sr out" in caution for caution in cautions) == said
    assert any("screening aid" in caution for caution in cautions)


def test_argue_caution_on_ore_in_the_sample_is_said_of_sulphur_above_its_limit_only() -> None:
    definition = load_definition("nickel_copper")
    told = {s: argue(definition, {"fitness": "fit", "s_wt": s, "mgo_vf_wt": 9.0})["cautions"] for s in (0.1, 1.2)}

    assert [any("S above 0.5 %" in caution for caution in told[s]) for s in (0.1, 1.2)] == [False, True]
    assert not any("barren dunite" in caution for caution in told[1.2])
    assert all(any("fibrous minerals" in caution for caution in told[s]) for s in (0.1, 1.2))


@pytest.mark.parametrize("code", TARGET_CODES)
def test_cautions_on_hazards_and_on_decisions_are_never_left_out(code: str) -> None:
    definition = load_definition(code)
    always = [caution for caution in definition.cautions if caution not in definition.caution_tests]

    for word in ("fibrous", "Hot ground", "screening aid"):
        assert [c for c in definition.cautions if word in c] == [c for c in always if word in c]


@pytest.mark.parametrize(
    ("written", "instead", "fault"),
    [
        ("[ where the line", " where the line", r"a '\[' or '\]' alone"),
        ('only_if = "sr_y >= 20" }', 'only_when = "sr_y >= 20" }', "caution 1: 'only_if' is missing"),
        ('only_if = "sr_y >= 20" }', 'only_if = "sr_y about 20" }', "caution 1: test 'about 20' on sr_y"),
    ],
)
def test_parse_definition_faulty_caution_or_optional_part_is_told(written: str, instead: str, fault: str) -> None:
    text = definition_text("porphyry_copper").replace(written, instead, 1)

    with pytest.raises(DefinitionError, match=fault):
        parse_definition(text, "porphyry_copper")
