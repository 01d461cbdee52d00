"""How conditions are written. No outside source: the language is the register's own."""

import pytest

from registry.targets.grammar import parse_conditions, parse_near, parse_test


def test_parse_test_constant_limit_gives_sign_and_number():
    test = parse_test("sr_y", ">= 35")
    assert (test.sign, test.constant, test.slope, test.of) == (">=", 35.0, 0.0, None)


def test_parse_test_line_gives_constant_and_slope():
    test = parse_test("v_sc", ">= 32.5 - 0.385 sio2_vf_wt")
    assert (test.constant, test.slope, test.of) == (32.5, -0.385, "sio2_vf_wt")


def test_parse_test_multiple_of_another_quantity_gives_slope_only():
    test = parse_test("nb_ppm", "<= 0.5 la_ppm")
    assert (test.constant, test.slope, test.of) == (0.0, 0.5, "la_ppm")


def test_parse_test_words_gives_each_word():
    assert parse_test("redox_series", "= magnetite, ilmenite").words == ("magnetite", "ilmenite")


@pytest.mark.parametrize("text", [">=35", "about 35", "> 3 la ppm", "between 3 and", "magnetite", ">= "])
def test_parse_test_not_in_the_language_names_the_grammar(text):
    with pytest.raises(ValueError, match="is not understood; expected"):
        parse_test("sr_y", text)


def test_parse_test_between_with_limits_reversed_is_refused():
    with pytest.raises(ValueError, match="the lower limit stands first"):
        parse_test("differentiation_index", "between 88 and 40")


def test_parse_near_percentage_loosens_the_whole_line():
    near = parse_near(parse_test("v_sc", ">= 32.5 - 0.385 sio2_vf_wt"), "within 10 %")
    assert (near.constant, near.slope) == pytest.approx((29.25, -0.3465))


def test_parse_near_amount_loosens_the_constant_away_from_the_test():
    assert parse_near(parse_test("fe_number", "<= 0.5"), "within 0.03").constant == pytest.approx(0.53)
    assert parse_near(parse_test("a_nk", ">= 1"), "within 0.05").constant == pytest.approx(0.95)


def test_parse_near_stricter_than_the_test_is_refused():
    with pytest.raises(ValueError, match="is not looser than the test"):
        parse_near(parse_test("sr_y", ">= 35"), ">= 40")


def test_parse_near_of_another_form_is_refused():
    with pytest.raises(ValueError, match="must have the form of the test"):
        parse_near(parse_test("nb_ppm", "<= 0.5 la_ppm"), "<= 12")


def test_parse_near_percentage_of_a_range_is_refused():
    with pytest.raises(ValueError, match="needs a test with one limit"):
        parse_near(parse_test("differentiation_index", "between 40 and 88"), "within 10 %")


def test_parse_conditions_joined_by_and_gives_both():
    first, second = parse_conditions("pd_ppm < 0.0001 and pd_pt < 3")
    assert (first.quantity, first.constant, second.quantity, second.constant) == ("pd_ppm", 0.0001, "pd_pt", 3.0)
    (alone,) = parse_conditions("th_u between 2 and 8")
    assert (alone.constant, alone.upper) == (2.0, 8.0)
