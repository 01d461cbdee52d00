"""Phrases of an argument that is met in part, and evidence against that is shown beside it, on invented rocks."""

from __future__ import annotations

import pytest

from registry.targets.argument import argue
from registry.targets.definition import DefinitionError, definition_text, load_definition, parse_definition

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
