"""An analysis against itself: published patterns agree, planted slips are told by the element that slipped."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from registry.petrology import catalogue
from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.catalogue.consistency import WARNINGS
from registry.petrology.consistency import (
    OXYGEN_PER_FEO,
    disagreement_percent,
    element_from_oxide,
    neighbours_of,
    rare_earth_residual,
)
from registry.petrology.constants import FEO_FROM_FE2O3
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_CODE
from registry.petrology.plausible import JUDGED_BY_TRACES
from registry.pipeline import empty_chunk, workspace_of
from registry.quality.assessment import Column
from registry.quality.medians import implausible_columns

#: BCR-2: Jochum et al. 2016, Geostand. Geoanal. Res. 40, 333-350 (ppm; published).
BCR_2 = {
    "La": 25.08, "Ce": 53.12, "Pr": 6.827, "Nd": 28.26, "Sm": 6.547, "Eu": 1.989, "Gd": 6.811, "Tb": 1.077,
    "Dy": 6.424, "Ho": 1.313, "Er": 3.67, "Tm": 0.5341, "Yb": 3.392, "Lu": 0.5049, "Zr": 186.5, "Hf": 4.972,
    "Nb": 12.44, "Ta": 0.785,
}  # fmt: skip
#: The same material; from memory, rounded.
BCR_2_MORE = {"Sr": 337.0, "Y": 36.0, "Rb": 46.0, "Th": 5.8, "U": 1.68, "V": 418.0, "Sc": 33.5}


def told(changes: dict[str, float], digestion: str = "fusion", summed: float = np.nan) -> set[str]:
    """The codes of this topic that a sample of BCR-2 with these columns changed is warned of."""
    chunk = empty_chunk(1)
    columns = {f"{symbol.lower()}_ppm": value for symbol, value in BCR_2.items()} | changes
    for column, value in columns.items():
        chunk.values[CHOSEN_INDEX[column], 0] = value
        chunk.digestions[CHOSEN_INDEX[column], 0] = DIGESTION_CODE[digestion]
    known: dict[str, Any] = workspace_of(chunk, Conventions())
    known["zr_hf"], known["nb_ta"] = known["zr_ppm"] / known["hf_ppm"], known["nb_ppm"] / known["ta_ppm"]
    known["total_wt"] = np.array([summed])
    known["feot_wt"] = known["fe2o3t_reported_wt"] * FEO_FROM_FE2O3
    return {
        warning.code
        for warning in WARNINGS
        if np.asarray(warning.mask(*(known[name] for name in warning.inputs)), dtype=bool).any()
    }


def test_published_analysis_agrees_with_itself() -> None:
    assert told({}) == set()


def test_remarks_of_this_topic_are_in_the_catalogue() -> None:
    assert set(WARNINGS) <= set(catalogue.WARNINGS)
    assert len(WARNINGS) == 35


@pytest.mark.parametrize("symbol", ["Pr", "Nd", "Sm", "Gd", "Tb", "Dy", "Ho", "Er", "Tm", "Yb"])
@pytest.mark.parametrize("slip", [10.0, 0.1])
def test_decimal_slip_of_a_rare_earth_is_told_by_its_element(symbol: str, slip: float) -> None:
    codes = told({f"{symbol.lower()}_ppm": BCR_2[symbol] * slip})
    assert f"{symbol.lower()}_not_smooth" in codes


@pytest.mark.parametrize("symbol", ["Ce", "Eu"])
def test_anomaly_of_cerium_or_europium_is_no_slip(symbol: str) -> None:
    assert neighbours_of(symbol) == ((), ())
    assert told({f"{symbol.lower()}_ppm": BCR_2[symbol] * 0.2}) == set()


def test_rare_earth_residual_of_a_straight_pattern_is_zero_and_of_a_gap_missing() -> None:
    from registry.petrology.normalising import CHONDRITE_MCDONOUGH as chondrite

    ppm = {s: [chondrite[s] * 10 ** (2 - 0.1 * (z - 57))] for s, z in (("Tb", 65), ("Dy", 66), ("Ho", 67))}
    ppm |= {"Gd": [np.nan], "Er": [np.nan]}
    np.testing.assert_allclose([0.0], rare_earth_residual("Dy", ppm), atol=1e-12)
    ppm["Tb"] = ppm["Ho"] = [np.nan]
    assert np.isnan(rare_earth_residual("Dy", ppm)).all()


def test_ratio_outside_nature_is_told() -> None:
    assert told({"hf_ppm": 49.72}) == {"zr_hf_outside_nature"}
    assert told({"ta_ppm": 0.0785}) == {"nb_ta_outside_nature"}


def test_oxide_against_element_of_one_metal() -> None:
    """Cr2O3 0.100 wt% is 684 ppm Cr (factor 1.4616, handbook)."""
    np.testing.assert_allclose(684.2, element_from_oxide(0.1, "Cr2O3"), atol=0.1)
    np.testing.assert_allclose(20.0, disagreement_percent(90.0, 110.0))
    assert told({"cr2o3_wt": 0.1, "cr_ppm": 690.0}) == set()
    assert told({"cr2o3_wt": 0.1, "cr_ppm": 500.0}) == {"cr_disagrees_with_oxide"}


def test_oxide_above_the_element_of_a_partial_digestion_is_explained() -> None:
    assert told({"cr2o3_wt": 0.1, "cr_ppm": 500.0}, "four_acid") == set()
    assert told({"cr2o3_wt": 0.1, "cr_ppm": 900.0}, "four_acid") == {"cr_disagrees_with_oxide"}


@pytest.mark.parametrize(("loi", "code"), [(0.2, set()), (-0.5, {"loi_negative"}), (-1.5, {"loi_below_oxidation"})])
def test_gain_on_ignition_is_told_by_what_iron_can_take_up(loi: float, code: set[str]) -> None:
    """4 FeO + O2 = 2 Fe2O3: 31.998/(4 x 71.844) = 0.1113 of FeO (IUPAC weights); 10 wt% FeO gain 1.11."""
    np.testing.assert_allclose(31.998 / (4 * 71.844), OXYGEN_PER_FEO, rtol=1e-4)
    assert told({"loi_wt": loi, "fe2o3t_reported_wt": 11.113}) == code


@pytest.mark.parametrize(
    ("reported", "summed", "code"),
    [(99.8, 100.1, set()), (99.8, 98.4, set()), (99.8, 98.2, {"total_differs_from_reported"}),
     (80.0, 101.0, {"total_differs_from_reported"}), (99.8, np.nan, set())],
)  # fmt: skip
def test_total_of_the_laboratory_that_is_not_the_sum_is_told(reported: float, summed: float, code: set[str]) -> None:
    assert told({"total_reported_wt": reported}, summed=summed) == code


@pytest.mark.parametrize("symbol", JUDGED_BY_TRACES)
def test_trace_wrong_by_a_thousand_or_more_is_told(symbol: str) -> None:
    """The content of BCR-2 in a unit that is wrong by 10^6 lies outside any rock; as published it does not."""
    column, published = f"{symbol.lower()}_ppm", {**BCR_2, **BCR_2_MORE}[symbol]
    code = f"{symbol.lower()}_implausible"

    assert code not in told({column: published})
    assert code in told({column: published * 1e-6})
    assert code in told({column: published * 1e6})
    assert code not in told({column: published * 1e-6, "mgo_wt": 42.0})  # a peridotite may hold so little


def test_yttrium_of_a_dacite_in_the_wrong_unit_is_told() -> None:
    assert "y_implausible" in told({"y_ppm": 0.0097})
    assert "y_implausible" not in told({"y_ppm": 9.7})


def test_medians_of_columns_outside_any_rock_are_told_once_a_column() -> None:
    columns = [Column(1, "Y", "ppm", "fusion", None), Column(2, "Sr", "ppm", "fusion", None),
               Column(3, "Cu", "ppm", "fusion", None), Column(4, "Ta", "ppm", "fusion", None)]  # fmt: skip
    values = np.array([[0.0097, 509.0, 1e-6, 1e-5]] * 3 + [[0.0081, 480.0, 1e-6, 1e-5]] * 3)
    signs = np.zeros(values.shape, dtype=np.uint8)
    signs[1:5, 3] = 1  # tantalum is mostly below the limit
    (sentence,) = implausible_columns(columns, values, signs)

    assert sentence.startswith("Y (ppm): the median is 0.0089 ppm, rocks hold about 0.3 to 3,000 ppm: is the unit")


def test_median_in_another_unit_is_compared_in_that_unit() -> None:
    columns = [Column(1, "Sr", "ppb", "fusion", None), Column(2, "Y2O3", "wt%", "fusion", None)]
    values = np.array([[509.0, 0.0012]] * 3)
    told_of = implausible_columns(columns, values, np.zeros(values.shape, dtype=np.uint8))
    nothing = implausible_columns(columns, values * [1000.0, 1.0], np.zeros(values.shape, dtype=np.uint8))

    assert told_of == []  # 0.509 ppm may be: the bounds are wide
    assert nothing == []


def test_medians_of_peridotite_may_be_low() -> None:
    columns = [Column(1, "Y", "ppm", "fusion", None), Column(2, "MgO", "wt%", "fusion", None)]
    values = np.array([[0.04, 42.0]] * 3)
    assert implausible_columns(columns, values, np.zeros(values.shape, dtype=np.uint8)) == []


def test_majors_in_the_wrong_unit_or_as_fractions_are_told_once_a_column() -> None:
    """G-2: SiO2 69.14, K2O 4.48, MgO 0.75 wt% (Govindaraju 1994; from memory)."""
    names = ("SiO2", "K2O", "MgO")
    values = np.array([[69.14, 4.48, 0.75]] * 3)
    signs = np.zeros(values.shape, dtype=np.uint8)

    def told_of(unit: str, factor: float = 1.0, digestion: str = "xrf") -> list[str]:
        columns = [Column(place, name, unit, digestion, None) for place, name in enumerate(names)]
        return [sentence.split(":")[0] for sentence in implausible_columns(columns, values * factor, signs)]

    assert told_of("wt%") == [] and told_of("ppm", 1e4) == []
    assert told_of("ppm") == ["SiO2 (ppm)", "K2O (ppm)", "MgO (ppm)"]
    assert told_of("wt%", 0.01) == ["SiO2 (wt%)"]
    assert told_of("ppm", digestion="aqua_regia") == []
