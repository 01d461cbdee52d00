"""Cells as laboratories and spreadsheets write them. Common practice, no source; the texts are invented."""

from __future__ import annotations

import math

import pytest

from registry.intake.cells import (
    ABOVE,
    BELOW,
    INSUFFICIENT,
    MISSING,
    NUMBER,
    SPREADSHEET_ERROR,
    TEXT,
    decimal_sign,
    parse_cell,
)


@pytest.mark.parametrize(
    ("text", "value", "qualifier"),
    [
        ("12.5", 12.5, 0),
        (".5", 0.5, 0),
        ("5.", 5.0, 0),
        ("+3", 3.0, 0),
        ("-0.5", -0.5, 0),
        ("\u22120.5", -0.5, 0),
        ("<0.5", 0.5, 1),
        ("< 0.5", 0.5, 1),
        ("<=0.5", 0.5, 1),
        ("≤0.5", 0.5, 1),
        ("&lt;0.5", 0.5, 1),
        (">100", 100.0, 2),
        ("> 100", 100.0, 2),
        ("≥100", 100.0, 2),
        ("1.2e3", 1200.0, 0),
        ("1E+05", 100000.0, 0),
        ("1.2x10^3", 1200.0, 0),
        ("1.5 \u00d7 10-3", 0.0015, 0),
        ("1,234.5", 1234.5, 0),
        ("1 234.5", 1234.5, 0),
        ("1'234.5", 1234.5, 0),
        ("1,234,567", 1234567.0, 0),
        ("  7 ", 7.0, 0),
    ],
)  # fmt: skip
def test_cell_with_a_decimal_point_gives_value_and_qualifier(text, value, qualifier):
    cell = parse_cell(text)
    assert (cell.state, cell.value, cell.qualifier) == (NUMBER, value, qualifier)


@pytest.mark.parametrize(
    ("text", "value", "qualifier"),
    [
        ("12,5", 12.5, 0),
        ("<0,02", 0.02, 1),
        ("1.234,5", 1234.5, 0),
        ("1 234,5", 1234.5, 0),
        ("7", 7.0, 0),
        (",5", 0.5, 0),
    ],
)
def test_cell_with_a_decimal_comma_gives_value_and_qualifier(text, value, qualifier):
    cell = parse_cell(text, ",")
    assert (cell.state, cell.value, cell.qualifier) == (NUMBER, value, qualifier)


@pytest.mark.parametrize(
    ("state", "texts"),
    [
        (MISSING, ["", " ", "NA", "n.a.", "N/A", "nan", "-", "--", "\u2014", "\u2013", "not analysed", "#N/A", "NR"]),
        (
            BELOW,
            ["nd", "n.d.", "ND", "LOD", "<LOD", "bdl", "B.D.L.", "<DL", "below detection", "not detected", "tr.", "<"],
        ),
        (
            INSUFFICIENT,
            ["I.S.", "insufficient sample", "Insufficient Sample", "listed, not received", "LNR", "NSS", "SNR"],
        ),
        (ABOVE, [">", "over range", "OVERRANGE"]),
        (SPREADSHEET_ERROR, ["#DIV/0!", "#VALUE!", "#REF!", "#NAME?", "Err:502"]),
        (TEXT, ["abc", "Sep-12", "1.2.3", "1_000", "inf", "12-5", "1,2,3", "0,5", "Ch", "2024-05-01", "1e999"]),
    ],
)
def test_word_in_a_cell_is_told_by_what_it_says(state, texts):
    assert {text: parse_cell(text).state for text in texts} == dict.fromkeys(texts, state)


def test_cell_with_its_own_unit_states_it():
    assert parse_cell("12.5%").unit == "wt%"
    assert parse_cell("5 ppm").unit == "ppm"
    assert parse_cell("5 apples").state == TEXT


def test_cell_that_reads_two_ways_carries_the_doubt():
    assert parse_cell("1,234").doubt == "thousands"
    assert parse_cell("1,234.5").doubt is None
    assert parse_cell("1,234", ",").value == pytest.approx(1.234)


@pytest.mark.parametrize(
    ("texts", "expected"),
    [
        (["1,5", "<0,2", "7"], (",", True)),
        (["1.5", "<0.2"], (".", True)),
        (["1.234,5", "2.000,1"], (",", True)),
        (["1,234.5"], (".", True)),
        (["1,234", "12"], (".", False)),
        (["0,123"], (",", True)),
        (["1", "2"], (".", True)),
        ([], (".", True)),
    ],
)
def test_decimal_sign_is_told_from_a_sample_of_cells(texts, expected):
    assert decimal_sign(texts) == expected


def test_missing_cell_has_no_value():
    assert math.isnan(parse_cell("").value)


@pytest.mark.parametrize(
    ("text", "state"),
    [
        ("Insuf.", INSUFFICIENT),
        ("insuff. sample", INSUFFICIENT),
        ("Insufficient sample for analysis", INSUFFICIENT),
        ("insufficient pulp", INSUFFICIENT),
        ("Sample insufficient", INSUFFICIENT),
        ("Listed, not present", INSUFFICIENT),
        ("Listed - not received", INSUFFICIENT),
        ("listed but not submitted", INSUFFICIENT),
        ("not present", INSUFFICIENT),
        ("Sample missing", INSUFFICIENT),
        ("lost in transit", INSUFFICIENT),
        ("< d.l.", BELOW),
        ("<RL", BELOW),
        ("&lt;LOD", BELOW),
        ("<det. lim.", BELOW),
        ("below LOD", BELOW),
        ("below the reporting limit", BELOW),
        ("under detection limit", BELOW),
        (">UL", ABOVE),
        ("above upper limit", ABOVE),
        ("over range", ABOVE),
        ("not requested", MISSING),
        ("to follow", MISSING),
        ("\u2500\u2500", MISSING),
        ("\u2043", MISSING),
        ("-.-", MISSING),
        ("\u200b", MISSING),
        ("UDL", TEXT),  # under, or upper, detection limit: nobody can tell
        ("over there", TEXT),
        ("present", TEXT),
        ("limit", TEXT),
    ],
)
def test_phrase_of_a_laboratory_has_the_meaning_of_its_short_word(text, state):
    assert parse_cell(text).state == state


@pytest.mark.parametrize("text", ["12\u200b", "\ufeff12", "'12", "\u200e12\u200f"])
def test_invisible_marks_around_a_number_are_no_part_of_it(text):
    assert parse_cell(text).value == 12.0
