"""The rows of ``suite_sheet`` of one intrusion: trend, series, fractionation, melting and mass balance, with causes."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from registry.petrology.conventions import Conventions
from registry.petrology.logged_alteration import logged_altered
from registry.petrology.mass_balance import balance_fractionation
from registry.petrology.mass_change import NB_Y_DIVIDE, immobile_alkalinity
from registry.petrology.minerals import BALANCED_OXIDES, fractionating_minerals
from registry.petrology.normalising import PRIMITIVE_MANTLE_MCDONOUGH
from registry.petrology.outliers import COMPARED_OXIDES, Distances, distances_from_body
from registry.petrology.suite import (
    INCOMPATIBLE_COLUMNS,
    LHERZOLITE_D,
    batch_melt_fractions,
    most_primitive_sample,
    rayleigh_fractions,
)
from registry.petrology.suite_trend import FEWEST_SAMPLES, Trend, alkali_lime_index, alkali_lime_word, suite_trend
from registry.store.suite_rows import Suite

#: Mantle melts are basic and magnesian: limits of volatile-free SiO2 (wt%) and Mg-number (common practice, no source).
MANTLE_MELT_SILICA_WT, MANTLE_MELT_MG_NUMBER = 53.0, 60.0
FIT_WORDS = ("fit", "fit with remarks")
#: Oxides that both rocks must have for a mass balance; MnO and P2O5 are left out where one of them lacks it.
_NEEDED_OXIDES = frozenset(BALANCED_OXIDES) - {"mno_wt", "p2o5_wt"}


class Row(NamedTuple):
    """One row of the sheet; ``value`` NaN with a ``cause``."""

    model: str
    quantity: str
    value: float
    unit: str
    quality: str | None
    cause: str | None = None


@dataclass(frozen=True)
class Members:
    """Which samples (n,) of a suite are what: ``usable`` are fit, unaltered liquids not far from the rest."""

    usable: np.ndarray
    fit: np.ndarray
    altered: np.ndarray
    cumulate: np.ndarray
    distances: Distances

    def sentence(self) -> str:
        """How many are used and why the others are not."""
        return (
            f"{int(self.usable.sum())} of {len(self.fit)} samples used; {int((~self.fit).sum())} not fit, "
            f"{int(self.altered.sum())} altered, {int(self.cumulate.sum())} cumulates or no liquids, "
            f"{int(self.distances.far.sum())} far from the rest"
        )


def members(suite: Suite, conventions: Conventions) -> Members:
    """Sort the samples of a suite. Altered: logged, or a loss on ignition that warns (serpentine is exempt)."""
    numbers = suite.numbers
    fit = np.isin(suite.fitness.astype("U20"), FIT_WORDS)
    exempt = numbers["mgo_vf_wt"] > conventions.loi_exempt_mgo_vf_wt
    altered = logged_altered(suite.alteration) | ((numbers["loi_wt"] > conventions.loi_warn_wt) & ~exempt)
    cumulate = numbers["not_a_liquid"] > 0.0
    compared = fit & ~altered
    analyses = np.column_stack([np.where(compared, numbers[name], np.nan) for name in COMPARED_OXIDES])
    distances = distances_from_body(analyses)
    return Members(fit & ~altered & ~cumulate & ~distances.far, fit, altered, cumulate, distances)


def models(suite: Suite, sorted_members: Members, parent_sample: str | None) -> tuple[list[Row], Trend]:
    """Every row of one suite, and its trend. ``parent_sample``: code of the parent the user named, or None."""
    usable = sorted_members.usable
    numbers = suite.numbers
    of = {name: np.where(usable, column, np.nan) for name, column in numbers.items()}
    trend = suite_trend(of["sio2_vf_wt"], of["mgo_vf_wt"], of["differentiation_index"])
    rows = [
        Row("samples", "samples_used", float(usable.sum()), "1", sorted_members.sentence()),
        *_population(sorted_members.distances),
        *_trend(trend),
        _series(of),
    ]
    parent, said, cause = _parent(suite, sorted_members, parent_sample)
    if parent is None:
        blanks = (
            ("fractionation", "parent_mg_number", "1"),
            ("fractionation", "liquid_fraction_most_evolved", "1"),
            ("batch_melting", "melt_fraction", "1"),
            ("mass_balance", "liquid_fraction", "1"),
        )
        rows += [Row(model, quantity, np.nan, unit, None, cause) for model, quantity, unit in blanks]
    else:
        included = usable.copy()
        included[parent] = True
        index = np.where(included, numbers["differentiation_index"], np.nan)
        rows.append(Row("fractionation", "parent_mg_number", float(numbers["mg_number_total_iron"][parent]), "1", said))
        others = np.where(np.arange(len(suite)) == parent, np.nan, index)
        daughter = None if np.isnan(others).all() else int(np.nanargmax(others))
        rows += _fractionation(suite, included, parent, daughter, index)
        rows += _melting(numbers, parent, suite.codes[parent])
        rows += _mass_balance(suite, parent, daughter)
    rows += _immobile(numbers, sorted_members)
    return rows, trend


def _population(distances: Distances) -> list[Row]:
    if distances.samples == 0 or np.isnan(distances.limit):
        return [Row("population", "far_samples", np.nan, "1", None, "fewer_than_8_complete_analyses")]
    kind = "greatest robust deviation of a log-ratio" if distances.by_component else "robust distance of log-ratios"
    beyond = int((distances.distance > distances.limit).sum())
    said = f"{kind} above {distances.limit:.1f}, of {distances.samples} complete analyses"
    if not distances.one_population:
        said += f"; {beyond} lie beyond it, so the body is not one population and none is called far"
    return [Row("population", "far_samples", float(distances.far.sum()), "1", said)]


def _trend(trend: Trend) -> list[Row]:
    cause = "fewer_than_4_samples" if trend.word == "too_few_samples" else None
    said = trend.sentence()
    flat = cause is None and np.isnan(trend.correlation)
    rows = [
        Row(
            "trend",
            "rank_correlation_mgo_sio2",
            trend.correlation,
            "1",
            said,
            "no_spread" if flat else cause,
        )
    ]
    for name, unit, ends in (
        ("sio2", "wt%", trend.sio2_wt),
        ("mgo", "wt%", trend.mgo_wt),
        ("differentiation_index", "1", trend.differentiation_index),
    ):
        for end, value in zip(("least", "greatest"), ends, strict=True):
            missing = None if not np.isnan(value) else cause or "missing_input"
            rows.append(Row("trend", f"{name}_{end}", value, unit, None, missing))
    return rows


def _series(of: dict[str, np.ndarray]) -> Row:
    index = alkali_lime_index(of["sio2_vf_wt"], of["cao_vf_wt"], of["na2o_vf_wt"] + of["k2o_vf_wt"])
    if np.isnan(index):
        return Row("series", "alkali_lime_index", np.nan, "wt%", None, "lime_and_alkalis_do_not_cross_within_the_suite")
    return Row("series", "alkali_lime_index", index, "wt%", alkali_lime_word(index))


def _parent(suite: Suite, sorted_members: Members, named: str | None) -> tuple[int | None, str, str | None]:
    """Row of the parent, how it was chosen, or the cause of there being none."""
    usable = sorted_members.usable
    if named:
        if named not in suite.codes:
            return None, "", "named_parent_is_no_computed_sample_of_this_intrusion"
        row = suite.codes.index(named)
        aside = "" if usable[row] else ", though it is altered, unfit, a cumulate or far from the rest"
        return row, f"sample {named}, named as the parent{aside}", None
    if usable.sum() < FEWEST_SAMPLES:
        mostly_cumulates = 2 * sorted_members.cumulate.sum() > len(suite)
        return None, "", "cumulates_are_no_liquids" if mostly_cumulates else "fewer_than_4_samples"
    numbers = suite.numbers
    row_or_none = most_primitive_sample(
        numbers["mg_number_total_iron"], numbers["mgo_vf_wt"], numbers["sio2_vf_wt"], usable
    )
    if row_or_none is None:
        return None, "", "missing_input"
    code = suite.codes[row_or_none]
    return row_or_none, f"sample {code}, the greatest Mg-number of {int(usable.sum())} usable samples", None


def _fractionation(
    suite: Suite, included: np.ndarray, parent: int, daughter: int | None, index: np.ndarray
) -> list[Row]:
    model, rising = (
        "fractionation",
        {name: np.where(included, suite.numbers[name], np.nan) for name in INCOMPATIBLE_COLUMNS},
    )
    fractions = rayleigh_fractions(rising, parent, rises_with=index)
    others = included & (np.arange(len(included)) != parent)
    known = others & ~np.isnan(fractions.fraction)
    names = ("liquid_fraction_most_evolved", "liquid_fraction_low", "liquid_fraction_high", "liquid_fraction_median")
    cause = None
    if included.sum() < FEWEST_SAMPLES:
        cause = "fewer_than_4_samples"
    elif not fractions.elements:
        cause = "no_element_rises_with_differentiation"
    elif daughter is None or np.isnan(fractions.fraction[daughter]):
        cause = "most_evolved_sample_has_no_more_of_them_than_the_parent"
    if cause is not None or daughter is None:
        return [Row(model, name, np.nan, "1", None, cause) for name in names]
    symbols = " ".join(symbol(name) for name in fractions.elements)
    said = (
        f"greatest share of liquid left in sample {suite.codes[daughter]}, by {symbols} taken as wholly incompatible "
        "(D = 0): any uptake by minerals means less liquid still"
    )
    low, high = float(fractions.low[daughter]), float(fractions.high[daughter])
    return [
        Row(model, names[0], float(fractions.fraction[daughter]), "1", f"{said}; {low:.2f} to {high:.2f}"),
        Row(model, names[1], low, "1", "least of the elements"),
        Row(model, names[2], high, "1", "greatest of the elements"),
        Row(model, names[3], float(np.median(fractions.fraction[known])), "1", f"median of {int(known.sum())} samples"),
    ]


def _melting(numbers: dict[str, np.ndarray], parent: int, code: str) -> list[Row]:
    names = ("melt_fraction", "melt_fraction_low", "melt_fraction_high")
    silica, mg_number = (float(numbers[name][parent]) for name in ("sio2_vf_wt", "mg_number_total_iron"))
    cause = None
    if not (silica <= MANTLE_MELT_SILICA_WT and mg_number >= MANTLE_MELT_MG_NUMBER):
        cause = "parent_is_no_mantle_melt"
    source = {name: PRIMITIVE_MANTLE_MCDONOUGH[symbol(name)] for name in LHERZOLITE_D}
    melt = {name: numbers[name][parent : parent + 1] for name in LHERZOLITE_D}
    found = batch_melt_fractions(melt, source, LHERZOLITE_D)
    if cause is None and np.isnan(found.fraction[0]):
        cause = "no_element_between_source_and_melt"
    if cause is not None:
        return [Row("batch_melting", name, np.nan, "1", None, cause) for name in names]
    used = " ".join(symbol(name) for name in found.elements if not np.isnan(melt[name][0]))
    said = (
        f"sample {code} as a melt of primitive mantle (McDonough and Sun 1995) with bulk D of spinel lherzolite "
        f"(Workman and Hart 2005, from memory), by {used}; Mg-number {mg_number:.0f}: what it crystallised before "
        "makes this a minimum"
    )
    values = (found.fraction[0], found.low[0], found.high[0])
    words = (said, "least of the elements", "greatest of the elements")
    return [
        Row("batch_melting", name, float(value), "1", word)
        for name, value, word in zip(names, values, words, strict=True)
    ]


def _mass_balance(suite: Suite, parent: int, daughter: int | None) -> list[Row]:
    model = "mass_balance"
    if daughter is None:
        return [Row(model, "liquid_fraction", np.nan, "1", None, "no_other_sample")]
    rocks = [
        {oxide: float(suite.numbers[oxide.replace("_wt", "_vf_wt")][row]) for oxide in BALANCED_OXIDES}
        for row in (parent, daughter)
    ]
    missing = {oxide for rock in rocks for oxide, value in rock.items() if np.isnan(value)}
    mg_numbers = suite.numbers["mg_number_total_iron"][[parent, daughter]]
    if missing & _NEEDED_OXIDES or np.isnan(mg_numbers).any():
        return [Row(model, "liquid_fraction", np.nan, "1", None, "missing_input")]
    first, last = ({oxide: value for oxide, value in rock.items() if oxide not in missing} for rock in rocks)
    phases = fractionating_minerals(first["sio2_wt"], float(mg_numbers.mean()))
    try:
        fit = balance_fractionation(first, last, phases)
    except ArithmeticError:  # one odd pair of rocks must not stop an import
        return [Row(model, "liquid_fraction", np.nan, "1", None, "least_squares_did_not_end")]
    if not fit.decided:
        return [Row(model, "liquid_fraction", np.nan, "1", None, "minerals_alone_make_the_daughter")]
    used = ", ".join(name for name, share in fit.minerals.items() if share > 0.0) or "none"
    residual = fit.residual_sum_of_squares
    said = (
        f"{fit.quality}: residual sum of squares {residual:.2f} wt%2 over {len(first)} oxides; parent "
        f"{suite.codes[parent]}, daughter {suite.codes[daughter]}, minerals offered: {', '.join(phases)}; taken: {used}"
    )
    rows = [
        Row(model, "liquid_fraction", fit.liquid_fraction, "1", said),
        Row(model, "residual_sum_of_squares", residual, "wt%2", fit.quality),
    ]
    rows += [
        Row(model, f"{name}_removed", 100.0 * share, "% of the parent", None)
        for name, share in fit.minerals.items()
        if share > 0.0
    ]
    return rows


def _immobile(numbers: dict[str, np.ndarray], sorted_members: Members) -> list[Row]:
    ratio = numbers["nb_ppm"] / np.where(numbers["y_ppm"] > 0.0, numbers["y_ppm"], np.nan)
    rows = []
    for name, chosen in (("nb_y_fresh", ~sorted_members.altered), ("nb_y_altered", sorted_members.altered)):
        known = ratio[chosen & ~np.isnan(ratio)]
        if known.size == 0:
            rows.append(Row("immobile_classification", name, np.nan, "1", None, "missing_input"))
            continue
        middle = float(np.median(known))
        side = ">" if middle > NB_Y_DIVIDE else "<="
        said = f"{immobile_alkalinity(middle)[0]}: median of {known.size} samples, Nb/Y {side} {NB_Y_DIVIDE}"
        rows.append(Row("immobile_classification", name, middle, "1", said))
    return rows


def symbol(column: str) -> str:
    """What a column's oxide or element is called (``k2o_wt`` -> K2O)."""
    from registry.petrology.analytes import ELEMENT_COLUMNS, ELEMENT_SYMBOLS, OXIDE_COLUMNS, OXIDE_SYMBOLS

    table = {
        **dict(zip(OXIDE_COLUMNS, OXIDE_SYMBOLS, strict=True)),
        **dict(zip(ELEMENT_COLUMNS, ELEMENT_SYMBOLS, strict=True)),
        "fe2o3t_wt": "Fe2O3T",
        "feot_wt": "FeOt",
    }
    return table[column.replace("_vf_wt", "_wt")]
