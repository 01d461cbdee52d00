"""Normalising sets against what is known of them."""

import numpy as np
import pytest

from registry.petrology.normalising import (
    CHONDRITE_MCDONOUGH,
    CHONDRITE_SUN,
    NORMALISING_SETS,
    PRIMITIVE_MANTLE_MCDONOUGH,
    PRIMITIVE_MANTLE_SUN,
    normalised,
)

RARE_EARTHS = ("La", "Ce", "Pr", "Nd", "Sm", "Eu", "Gd", "Tb", "Dy", "Ho", "Er", "Tm", "Yb", "Lu")


@pytest.mark.parametrize("values", [CHONDRITE_MCDONOUGH, CHONDRITE_SUN], ids=["1995", "1989"])
def test_chondrite_even_atomic_numbers_stand_above_their_neighbours(values):
    """The Oddo-Harkins rule: an even atomic number (Ce 58, Nd 60, ...) is more abundant than both odd neighbours."""
    atomic_number = dict(zip(RARE_EARTHS, (57, 58, 59, 60, 62, 63, 64, 65, 66, 67, 68, 69, 70, 71), strict=True))
    amount = {atomic_number[symbol]: values[symbol] for symbol in RARE_EARTHS}
    for number in (58, 60, 64, 66, 68, 70):
        neighbours = [amount[other] for other in (number - 1, number + 1) if other in amount]
        assert amount[number] > max(neighbours)


def test_chondrite_sets_agree_within_six_per_cent():
    """Two compilations of the same meteorites."""
    ratios = np.array([CHONDRITE_SUN[symbol] / CHONDRITE_MCDONOUGH[symbol] for symbol in RARE_EARTHS])

    assert np.all(np.abs(ratios - 1.0) < 0.06)


@pytest.mark.parametrize(
    ("mantle", "chondrite"),
    [(PRIMITIVE_MANTLE_MCDONOUGH, CHONDRITE_MCDONOUGH), (PRIMITIVE_MANTLE_SUN, CHONDRITE_SUN)],
    ids=["1995", "1989"],
)
def test_primitive_mantle_rare_earths_are_one_factor_on_chondrite(mantle, chondrite):
    """Refractory lithophile elements keep chondritic proportions in the mantle [mcdonough1995]: factor about 2.8."""
    factors = np.array([mantle[symbol] / chondrite[symbol] for symbol in RARE_EARTHS])

    np.testing.assert_allclose(factors, 2.8, rtol=0.06)


def test_primitive_mantle_zr_hf_and_y_ho_are_those_of_chondrite():
    """Bau 1996: Zr/Hf 26-46 and Y/Ho 24-34 where charge and radius control them; from memory."""
    for values in (PRIMITIVE_MANTLE_MCDONOUGH, PRIMITIVE_MANTLE_SUN):
        assert 26.0 < values["Zr"] / values["Hf"] < 46.0
        assert 24.0 < values["Y"] / values["Ho"] < 34.0


def test_normalised_two_sets_give_the_two_printed_slopes():
    """La 35, Yb 2.5 ppm: 9.51 with one set, 10.04 with the other (recomputed)."""
    slopes = [
        normalised(35.0, "La", name) / normalised(2.5, "Yb", name) for name in ("chondrite_mcdonough", "chondrite_sun")
    ]

    np.testing.assert_allclose(slopes, [9.51, 10.04], atol=0.005)


@pytest.mark.parametrize("name", NORMALISING_SETS)
def test_normalised_the_set_itself_is_one(name):
    for symbol, ppm in NORMALISING_SETS[name].items():
        assert normalised(ppm, symbol, name) == 1.0


def test_normalised_unknown_set_is_refused():
    with pytest.raises(ValueError, match="no normalising set 'moon'; there are"):
        normalised(1.0, "La", "moon")


def test_normalised_unknown_element_is_refused():
    with pytest.raises(ValueError, match="'chondrite_sun' has no value for 'Rb'"):
        normalised(1.0, "Rb", "chondrite_sun")
