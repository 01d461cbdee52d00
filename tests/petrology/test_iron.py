"""The iron split: what was measured goes first, a convention only after it, and nothing is clamped.

Printed values stand in ``published/iron.csv``; the analyses here are invented unless their source is named.
"""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.conventions import Conventions
from registry.petrology.iron import (
    SPLITS,
    ferrous_fraction_le_maitre,
    iron_split,
    ratio_middlemost,
    split_by_ratio,
    split_le_maitre,
    total_iron_as_fe2o3,
    total_iron_as_feo,
)
from tests.strategies import amounts

#: Average basalt of Le Maitre 1976 (J. Petrology 17, 589), from memory.
BASALT = {
    "sio2_wt": 49.20, "tio2_wt": 1.84, "al2o3_wt": 15.74, "mno_wt": 0.20, "mgo_wt": 6.73, "cao_wt": 9.47,
    "na2o_wt": 2.91, "k2o_wt": 1.10, "p2o5_wt": 0.35,
}  # fmt: skip
masses = amounts(30.0)


def _split(is_plutonic: bool = False, conventions: Conventions | None = None, **changes: object) -> dict:
    return iron_split({**BASALT, **changes}, is_plutonic, conventions or Conventions())


@given(masses, masses)
def test_total_iron_as_either_oxide_is_the_same_iron(feo: float, fe2o3: float) -> None:
    as_fe2o3 = total_iron_as_fe2o3(feo, fe2o3)

    np.testing.assert_allclose(total_iron_as_feo(0.0, as_fe2o3), total_iron_as_feo(feo, fe2o3), rtol=1e-12)


@given(masses, st.floats(0.0, 20.0))
def test_split_by_ratio_keeps_total_and_ratio(total: float, ratio: float) -> None:
    split = split_by_ratio(total, ratio)

    np.testing.assert_allclose(total_iron_as_feo(split["feo_wt"], split["fe2o3_wt"]), total, rtol=1e-12)
    np.testing.assert_allclose(split["fe2o3_wt"], ratio * split["feo_wt"], rtol=1e-12)


def test_split_by_negative_ratio_is_missing() -> None:
    assert np.isnan(split_by_ratio(10.0, -0.1)["feo_wt"])


@given(st.floats(0.0, 100.0), st.floats(0.0, 30.0), st.booleans())
def test_split_le_maitre_outside_limits_is_missing_never_clamped(silica: float, alkalis: float, plutonic: bool) -> None:
    fraction = float(ferrous_fraction_le_maitre(silica, alkalis, 0.0, plutonic))
    split = split_le_maitre(10.0, silica, alkalis, 0.0, plutonic)

    if 0.05 < fraction < 1.0:
        found = split["feo_wt"] / (split["feo_wt"] + split["fe2o3_wt"])
        np.testing.assert_allclose(found, fraction, rtol=1e-12)
    else:
        assert np.isnan(split["feo_wt"])
        assert np.isnan(split["fe2o3_wt"])


@pytest.mark.parametrize(
    ("silica", "alkalis", "ratio"),
    [
        (
            41.0,
            2.99,
            0.15,
        ),  # the corners follow the TAS diagram, Le Bas et al. 1986; a vertical edge goes to higher SiO2
        (44.99, 2.0, 0.15),
        (45.0, 4.99, 0.20),
        (52.0, 4.99, 0.30),
        (57.0, 5.8, 0.35),
        (63.0, 6.99, 0.40),
        (69.0, 7.99, 0.40),
        (70.0, 6.99, 0.40),
        (70.0, 7.0, 0.50),
        (77.0, 0.0, 0.50),
        (40.99, 2.0, np.nan),
        (44.99, 3.0, np.nan),
        (48.0, 5.0, np.nan),
        (57.0, 5.9, np.nan),
        (68.99, 8.0, np.nan),
        (np.nan, 3.0, np.nan),
        (50.0, np.nan, np.nan),
    ],
)
def test_ratio_middlemost_at_the_edges_of_the_fields(silica: float, alkalis: float, ratio: float) -> None:
    np.testing.assert_array_equal(ratio_middlemost(silica, alkalis), ratio)


def test_iron_titrated_feo_goes_before_any_convention() -> None:
    for name in SPLITS:
        split = _split(conventions=Conventions(iron_split=name), fe2o3t_reported_wt=11.714, feo_titrated_wt=7.13)

        assert split["iron_basis"][()] == "titrated FeO"
        assert split["feo_wt"] == 7.13
        assert split["fe2o3_wt"] == pytest.approx(3.79, abs=5e-4)


def test_iron_ferric_and_ferrous_without_total_are_summed() -> None:
    split = _split(fe2o3_ferric_wt=3.79, feo_titrated_wt=7.13)

    assert split["fe2o3t_wt"] == pytest.approx(11.714, abs=5e-4)
    assert split["fe2o3_wt"] == pytest.approx(3.79, abs=1e-12)


def test_iron_ferric_beside_total_gives_ferrous_by_difference() -> None:
    split = _split(fe2o3t_reported_wt=11.714, fe2o3_ferric_wt=3.79)

    assert split["feo_wt"] == pytest.approx(7.13, abs=5e-4)
    assert split["iron_basis"][()] == "reported Fe2O3 beside total iron"


@pytest.mark.parametrize("measured", [{"feo_titrated_wt": 11.0}, {"fe2o3_ferric_wt": 12.0}])
def test_iron_measurement_above_total_makes_no_split(measured: dict[str, float]) -> None:
    split = _split(fe2o3t_reported_wt=11.714, **measured)

    assert np.isnan(split["feo_wt"])
    assert np.isnan(split["fe2o3_wt"])
    assert split["iron_basis"][()] is None
    assert split["feot_wt"] == pytest.approx(10.540, abs=5e-4)


def test_iron_all_ferrous_leaves_no_rounding_in_ferric() -> None:
    total = total_iron_as_fe2o3(9.87, 0.0)

    assert _split(fe2o3t_reported_wt=total, feo_titrated_wt=9.87)["fe2o3_wt"] == 0.0


def test_iron_not_reported_is_missing() -> None:
    split = _split(fe2o3_ferric_wt=3.79)

    assert np.isnan(split["feot_wt"])
    assert split["iron_basis"][()] is None


@pytest.mark.parametrize(
    ("convention", "basis"),
    [
        (Conventions(), "Le Maitre 1976, volcanic"),
        (Conventions(iron_split="middlemost"), "Middlemost 1989 (provisional)"),
        (Conventions(iron_split="fixed_ratio"), "Fe2O3/FeO 0.15 by weight"),
        (
            Conventions(iron_split="kress_carmichael", iron_buffer="NNO", iron_buffer_shift=-0.5),
            "Kress and Carmichael 1991 at 1200 C, 1 bar, NNO-0.5 (Frost 1991)",
        ),
    ],
)
def test_iron_convention_is_named_and_keeps_the_total(convention: Conventions, basis: str) -> None:
    split = _split(conventions=convention, fe2o3t_reported_wt=11.714)

    assert split["iron_basis"][()] == basis
    assert total_iron_as_fe2o3(split["feo_wt"], split["fe2o3_wt"]) == pytest.approx(11.714, rel=1e-12)


def test_iron_plutonic_row_takes_the_plutonic_regression() -> None:
    split = iron_split({**BASALT, "fe2o3t_reported_wt": 11.714}, np.array([True, False]), Conventions())

    assert list(split["iron_basis"]) == ["Le Maitre 1976, plutonic", "Le Maitre 1976, volcanic"]
    assert split["feo_wt"][0] > split["feo_wt"][1]


def test_iron_convention_without_silica_makes_no_split() -> None:
    split = _split(fe2o3t_reported_wt=11.714, sio2_wt=np.nan)

    assert np.isnan(split["feo_wt"])
    assert split["feot_wt"] == pytest.approx(10.540, abs=5e-4)


def test_iron_middlemost_counts_unreported_minor_oxides_as_zero() -> None:
    middlemost = Conventions(iron_split="middlemost")
    split = _split(conventions=middlemost, fe2o3t_reported_wt=11.714, tio2_wt=np.nan, mno_wt=np.nan, p2o5_wt=np.nan)

    assert split["fe2o3_wt"] / split["feo_wt"] == pytest.approx(0.20, rel=1e-12)


def test_iron_more_oxidised_buffer_makes_more_ferric_iron() -> None:
    ferric = [
        float(
            _split(
                conventions=Conventions(iron_split="kress_carmichael", iron_buffer_shift=shift),
                fe2o3t_reported_wt=11.714,
            )["fe2o3_wt"]
        )
        for shift in (-1.0, 0.0, 1.0)
    ]

    assert ferric == sorted(ferric)
    assert ferric[0] < ferric[2]


def test_iron_unknown_convention_is_told() -> None:
    with pytest.raises(ValueError, match=r"unknown iron_split 'guess'; known are .*'le_maitre'"):
        _split(conventions=Conventions(iron_split="guess"))


def test_iron_missing_row_does_not_touch_its_neighbours() -> None:
    split = iron_split({**BASALT, "fe2o3t_reported_wt": np.array([11.714, np.nan, 11.714])}, False, Conventions())

    assert np.isnan(split["feo_wt"][1])
    np.testing.assert_array_equal(split["feo_wt"][[0, 2]], _split(fe2o3t_reported_wt=11.714)["feo_wt"])
