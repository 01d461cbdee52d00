"""What words and codes say of a control; the texts are such as laboratories write (common practice, no source)."""

from __future__ import annotations

import pytest

from registry.quality.recognising import Patterns, Spoken, material_of, read_control_text

TEXTS = [
    ("BLANK", Spoken("blank")),
    ("QA/QC; Blank Sample", Spoken("blank")),
    ("DUPL OF P3/D/BH1-020", Spoken("duplicate", "P3/D/BH1-020")),
    ("Duplicate of RC.BH19.014", Spoken("duplicate", "RC.BH19.014")),
    ("pulp duplicate of A1", Spoken("duplicate", "A1", "pulp")),
    ("Coarse reject dup of A 2", Spoken("duplicate", "A 2", "crush")),
    ("field dup", Spoken("duplicate", None, "field")),
    ("lab repeat", Spoken("duplicate", None, "lab")),
    ("CRM", Spoken("reference_material")),
    ("core", Spoken()),
    (None, Spoken()),
]


@pytest.mark.parametrize(("text", "spoken"), TEXTS)
def test_read_control_text_takes_the_words_of_certificates(text: str | None, spoken: Spoken) -> None:
    assert read_control_text(text) == spoken


def test_patterns_tell_kinds_and_stages_of_codes() -> None:
    patterns = Patterns({"control_pattern.blank": "^BL", "control_pattern.pulp_duplicate": '"-P$"', "created_at": "x"})
    assert [patterns.kind_of(code) for code in ("BL-1", "A7-P", "A7")] == ["blank", "duplicate", None]
    assert (patterns.stage_of("A7-P"), patterns.stage_of("BL-1")) == ("pulp", "unknown")
    assert not Patterns({"convention.failed_control": '"hold"'})


@pytest.mark.parametrize(
    ("pattern", "code", "original"),
    [
        ("-PD$", "A12-PD", "A12"),
        ("^DUP_", "DUP_A12", "A12"),
        (r"^QC_(?P<original>.+)_\d$", "QC_A12_1", "A12"),
        (r"^(\w+)\.P$", "A12.P", "A12"),
        ("^P[0-9]+$", "P77", None),
        ("-PD$", "A12", None),
    ],
)
def test_patterns_of_duplicates_tell_the_original(pattern: str, code: str, original: str | None) -> None:
    patterns = Patterns({"control_pattern.pulp_duplicate": pattern, "control_pattern.blank": "^A"})
    assert patterns.original_of(code) == original


def test_patterns_that_cannot_be_used_are_named() -> None:
    with pytest.raises(ValueError, match=r"setting 'control_pattern.blank': '\(' is no regular expression"):
        Patterns({"control_pattern.blank": "("})
    with pytest.raises(ValueError, match="there is no such pattern; known are blank"):
        Patterns({"control_pattern.standard": "x"})


@pytest.mark.parametrize(
    ("named", "code", "material"),
    [
        ("bhvo 2", "S1", "BHVO-2"),
        (None, "KD001_BHVO-2G_03", "BHVO-2G"),
        (None, "KD001-17", None),
        ("W-9", "BHVO-2", None),
    ],
)
def test_material_of_finds_the_longest_name(named: str | None, code: str, material: str | None) -> None:
    assert material_of(named, code, ["BHVO-2", "BHVO-2G", "W-2"]) == material
