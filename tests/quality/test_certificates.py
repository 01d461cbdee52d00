"""The deviation allowed of a certified value, conversions, and the shipped reference values against slips."""

from __future__ import annotations

from collections import defaultdict

import numpy as np
import pytest

from registry.petrology.consistency import neighbours_of, rare_earth_residual
from registry.petrology.normalising import CHONDRITE_MCDONOUGH
from registry.quality.certificates import allowed_deviation, horwitz_deviation, kind_of_uncertainty
from registry.quality.shipped import ReferenceValue, shipped_values, status_rank
from registry.quality.substances import analyte_symbol, conversion

#: Relative standard deviation of Horwitz' curve (1982, Anal. Chem. 54, 67A): 2 % pure, 4 % at 1 %, 16 % at 1 ppm, 45 %
#: at 1 ppb. Published.
HORWITZ = [(100.0, "wt%", 2.0), (1.0, "wt%", 4.0), (1.0, "ppm", 16.0), (1.0, "ppb", 45.0)]


@pytest.mark.parametrize(("value", "unit", "percent"), HORWITZ)
def test_horwitz_deviation_equals_the_printed_percentages(value: float, unit: str, percent: float) -> None:
    np.testing.assert_allclose(percent, 100.0 * horwitz_deviation(value, unit) / value, rtol=0.015)


def test_allowed_deviation_of_a_standard_deviation_is_that_deviation() -> None:
    deviation, basis = allowed_deviation(260.0, "ppm", 12.0, "1SD")
    assert (deviation, basis) == (12.0, "standard deviation of the certificate")
    assert allowed_deviation(260.0, "ppm", 12.0, None)[0] == 12.0
    assert allowed_deviation(260.0, "ppm", 12.0, "2SD")[0] == 6.0


def test_allowed_deviation_of_a_confidence_interval_adds_the_laboratory() -> None:
    """z' of ISO 13528, 9.5: sqrt(sigma^2 + u^2), u = half width/1.96."""
    deviation, basis = allowed_deviation(100.0, "ppm", 9.8, "95%CL")
    fit = float(horwitz_deviation(100.0, "ppm"))
    np.testing.assert_allclose(np.sqrt(fit**2 + 5.0**2), deviation, rtol=1e-5)
    assert "confidence interval" in basis


def test_allowed_deviation_of_an_expanded_uncertainty_halves_it() -> None:
    """U = k u with k = 2: ISO/IEC Guide 98-3:2008, 6.2 (from memory)."""
    deviation, basis = allowed_deviation(100.0, "ppm", 10.0, "U (k=2)")
    fit = float(horwitz_deviation(100.0, "ppm"))
    np.testing.assert_allclose(np.sqrt(fit**2 + 5.0**2), deviation, rtol=1e-12)
    assert "expanded uncertainty" in basis


def test_allowed_deviation_of_a_stated_zero_is_horwitz() -> None:
    deviation, basis = allowed_deviation(100.0, "ppm", 0.0, "SD")
    assert deviation == float(horwitz_deviation(100.0, "ppm"))
    assert basis.startswith("deviation fit for applied geochemistry")


@pytest.mark.parametrize("word", ["range", "two-tailed guess"])
def test_allowed_deviation_without_a_usable_uncertainty_is_horwitz(word: str) -> None:
    assert kind_of_uncertainty(word) == "nothing"
    assert allowed_deviation(100.0, "ppm", 3.0, word)[0] == float(horwitz_deviation(100.0, "ppm"))


#: Element to oxide factors of handbook tables (CRC Handbook of Chemistry and Physics), four figures.
FACTORS = [
    ("Mn", "ppm", "MnO", "wt%", 1.291e-4),
    ("FeOT", "wt%", "Fe2O3T", "wt%", 1.111),
    ("Fe", "wt%", "FeOT", "wt%", 1.286),
    ("Zr", "ppm", "ZrO2", "wt%", 1.351e-4),
    ("P2O5", "wt%", "P", "ppm", 4364.0),
    ("Au", "ppb", "Au", "ppm", 1e-3),
]


@pytest.mark.parametrize(("analyte", "unit", "to", "to_unit", "factor"), FACTORS)
def test_conversion_between_names_of_one_substance(
    analyte: str, unit: str, to: str, to_unit: str, factor: float
) -> None:
    np.testing.assert_allclose(factor, conversion(analyte, unit, to, to_unit), rtol=5e-4)


@pytest.mark.parametrize(("one", "other"), [("FeO", "FeOT"), ("Fe2O3", "Fe2O3T"), ("FeO", "Fe2O3"), ("H2O+", "LOI")])
def test_conversion_of_different_substances_is_refused(one: str, other: str) -> None:
    assert conversion(one, "wt%", other, "wt%") is None


@pytest.mark.parametrize(("text", "symbol"), [("H2Op", "H2O+"), ("sio2", "SiO2"), ("Stot", "S"), ("Quartz", None)])
def test_analyte_symbol_reads_the_spellings_of_certificates(text: str, symbol: str | None) -> None:
    assert analyte_symbol(text) == symbol


def by_source() -> dict[tuple[str, str], dict[str, ReferenceValue]]:
    tables: dict[tuple[str, str], dict[str, ReferenceValue]] = defaultdict(dict)
    for value in shipped_values():
        tables[value.material, value.source.split(";")[0]][value.analyte] = value
    return tables


#: Synthetic glass doped with about 400 ppm of each element: no rock, so no pattern of one.
DOPED = "NIST SRM 610"


def test_shipped_values_have_status_source_and_known_names() -> None:
    values = shipped_values()
    assert len(values) > 700
    assert {value.status for value in values} == {"published", "recommended", "information"}
    assert all(value.source and value.value > 0.0 for value in values)
    assert all(analyte_symbol(value.analyte) == value.analyte for value in values)
    keys = [(value.material, value.analyte, value.unit, value.source) for value in values]
    assert len(set(keys)) == len(keys)


def test_shipped_rare_earths_are_smooth() -> None:
    """A decimal slip of one value puts it, or its neighbour, off by a factor of three or more."""
    checked = 0
    for (material, source), values in by_source().items():
        if material == DOPED:
            continue
        for symbol in ("Pr", "Nd", "Sm", "Gd", "Tb", "Dy", "Ho", "Er", "Tm", "Yb"):
            lighter, heavier = neighbours_of(symbol)
            ppm = {each: [values[each].value if each in values else np.nan] for each in (symbol, *lighter, *heavier)}
            (residual,) = rare_earth_residual(symbol, ppm)
            if not np.isnan(residual):
                checked += 1
                assert abs(residual) < np.log10(1.3), f"{material} {symbol} ({source})"
    assert checked > 150


#: Bounds that rocks of these kinds keep with room to spare; a decimal slip leaves them. Common practice, no source.
RATIOS = [("Nb", "Ta", 2.0, 25.0), ("Zr", "Hf", 18.0, 60.0), ("Y", "Ho", 20.0, 45.0), ("Sr", "Ba", 0.02, 40.0),
          ("K2O", "Rb", 0.01, 0.2)]  # fmt: skip


@pytest.mark.parametrize(("above", "below", "low", "high"), RATIOS)
def test_shipped_ratios_are_sane(above: str, below: str, low: float, high: float) -> None:
    for (material, source), values in by_source().items():
        if above in values and below in values and material != DOPED:
            assert low < values[above].value / values[below].value < high, f"{material} {above}/{below} ({source})"


def test_shipped_europium_and_cerium_anomalies_are_those_of_rocks() -> None:
    """Eu/Eu* 0.1 to 1.3 and Ce/Ce* 0.9 to 1.15 in unaltered igneous rocks; common practice, no source."""
    chondrite = CHONDRITE_MCDONOUGH
    checked = 0
    for (material, source), values in by_source().items():
        if material == DOPED:
            continue
        for element, before, after, low, high in (("Eu", "Sm", "Gd", 0.1, 1.3), ("Ce", "La", "Pr", 0.9, 1.15)):
            if {element, before, after} <= values.keys():
                n = {name: values[name].value / chondrite[name] for name in (element, before, after)}
                assert low < n[element] / np.sqrt(n[before] * n[after]) < high, f"{material} {element} ({source})"
                checked += 1
    assert checked > 30


def test_shipped_values_leave_out_what_was_found_to_be_a_slip() -> None:
    """Ba of ML3B-G, Yb of GOR132-G and Ta of BIR-1 (decimals), Eu of ML3B-G (167) and of StHs6/80-G (0.53)."""
    kept = {(value.material, value.analyte) for value in shipped_values()}
    slips = {("ML3B-G", "Ba"), ("GOR132-G", "Yb"), ("BIR-1", "Ta"), ("ML3B-G", "Eu"), ("StHs6/80-G", "Eu")}
    assert kept.isdisjoint(slips) and ("ML3B-G", "Sm") in kept


def test_shipped_oxides_sum_to_a_rock() -> None:
    """Anhydrous sums lie between 94 (carbonate and water not certified) and 101.5 wt%."""
    majors = ["SiO2", "TiO2", "Al2O3", "MnO", "MgO", "CaO", "Na2O", "K2O", "P2O5", "CO2", "H2O+", "H2O-"]
    for (material, source), values in by_source().items():
        if "SiO2" in values and material != DOPED:
            iron = next(
                (values[name].value for name in ("Fe2O3T", "FeOT") if name in values),
                sum(values[name].value for name in ("Fe2O3", "FeO") if name in values),
            )
            total = sum(values[name].value for name in majors if name in values) + iron
            assert 94.0 < total < 101.5, f"{material} ({source}): {total:.2f}"


def test_shipped_uncertainties_are_plausible() -> None:
    """Not above twice, nor below a hundredth of, the deviation of Horwitz' function at that concentration."""
    for value in shipped_values():
        if value.uncertainty is not None:
            share = value.uncertainty / float(horwitz_deviation(value.value, value.unit))
            assert 0.01 < share <= 2.0, f"{value.material} {value.analyte}: {value.uncertainty}"


def test_shipped_values_of_two_sources_agree() -> None:
    """The same powder in two compilations, and the glass fused from it, within a factor of 1.35."""
    both: dict[tuple[str, str], list[float]] = defaultdict(list)
    for value in shipped_values():
        both[value.material.removesuffix("G"), f"{value.analyte} {value.unit}"].append(value.value)
    compared = [values for values in both.values() if len(values) > 1]
    assert len(compared) > 60
    assert all(max(values) < 1.35 * min(values) for values in compared)


def test_status_rank_puts_the_own_certificate_first_and_information_last() -> None:
    order = sorted(["information", "recommended", "published", "Certified", "of our own"], key=status_rank)
    assert order == ["Certified", "published", "recommended", "of our own", "information"]
