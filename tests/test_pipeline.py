"""The whole catalogue through ``compute``: rows that do not touch each other, values without excuse, causes and marks.

The generated analyses are invented; most are no rocks, and some are absurd on purpose.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from registry.petrology.analytes import CHOSEN_COLUMNS, CHOSEN_INDEX, OXIDE_COLUMNS
from registry.petrology.catalogue import CAUSES, METHODS, QUANTITIES, WARNINGS
from registry.petrology.constants import FE2O3_FROM_FEO, molar_mass
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTIONS
from registry.petrology.liquidus_choice import OLIVINE_MODELS
from registry.petrology.plausible import JUDGED_BY_TRACES
from registry.pipeline import Chunk, Computed, compute, compute_in_parts, empty_chunk, is_missing
from tests.strategies import OXIDE_TOPS

LETTERS = {letter for letter, _ in CAUSES.values()}
LITHOLOGIES = (None, "granite", "basalt", "norite cumulate", "rhyolite obsidian", "dacite porphyry", "tuff", "soil")
SHAPES = (None, "slab", "sphere", "cylinder", "nonsense")
#: Context that a few samples share.
DEFAULTS = Conventions()
#: Convention sets that take every branch of the choices.
CONVENTION_SETS = [
    DEFAULTS,
    Conventions(iron_split="middlemost", water_depression="medard_grove", norm_co2_as_calcite=True),
    Conventions(iron_split="kress_carmichael", iron_buffer="NNO", water_depression="falloon_danyushevsky"),
    Conventions(iron_split="fixed_ratio", norm_sulphur_as_pyrite=True, norm_halogens=True, pressure_gpa=0.5),
]
#: Ratios and words that do not know the sum of the oxides: no method of theirs reads raw wt% or traces.
SCALE_FREE = (
    "sio2_vf_wt", "feot_vf_wt", "q_wt", "or_wt", "an_wt", "norm_total_wt", "mg_number_total_iron", "a_cnk", "a_nk",
    "asi", "agpaitic_index", "fe_number", "cia", "alteration_index", "ccpi", "hughes_x", "felsic_index", "mali",
    "differentiation_index", "liquidus_c", "zircon_m", "melt_density_kg_m3", "melt_viscosity_log10_pa_s",
    "k_rb", "ti_zr",
)  # fmt: skip


def _top(column: str) -> float:
    return OXIDE_TOPS.get(column, 20.0) if column.endswith("_wt") else 500.0


def random_chunk(rows: int, seed: int, absent: float = 0.15) -> Chunk:
    """Invented analyses: each value uniform up to the top of its column, some not reported, some censored."""
    rng = np.random.default_rng(seed)
    chunk = empty_chunk(rows)
    for position, column in enumerate(CHOSEN_COLUMNS):
        chunk.values[position] = rng.uniform(0.0, _top(column), rows)
    chunk.values[CHOSEN_INDEX["sio2_wt"]] = rng.uniform(35.0, 78.0, rows)
    chunk.values[rng.random(chunk.values.shape) < absent] = np.nan
    reported = ~np.isnan(chunk.values)
    chunk.qualifiers[reported & (rng.random(chunk.values.shape) < 0.1)] = 1
    chunk.digestions[:] = np.where(reported, rng.integers(1, len(DIGESTIONS), chunk.values.shape), 0)
    words = {"lithology": LITHOLOGIES, "texture": (None, "porphyritic", "layered"), "intrusion_shape": SHAPES,
             "alteration": (None, "phyllic", "none seen"), "sample_kind": (None, "core", "blank")}  # fmt: skip
    context: dict[str, Any] = {
        name: np.array(choice, dtype=object)[rng.integers(0, len(choice), rows)] for name, choice in words.items()
    }
    for name, top in {"half_width_m": 5e3, "depth_to_top_m": 5e3, "emplacement_depth_m": 1e4, "age_ma": 5.0,
                      "magnetic_susceptibility_si": 0.02, "volume_km3": 50.0}.items():  # fmt: skip
        context[name] = np.where(rng.random(rows) < 0.3, np.nan, rng.uniform(0.0, top, rows))
    context["has_intrusion"] = rng.random(rows) < 0.5
    return Chunk(np.arange(rows), chunk.values, chunk.qualifiers, chunk.digestions, context)


def rows_of(chunk: Chunk, rows: Any) -> Chunk:
    context = {name: column[rows] for name, column in chunk.context.items()}
    return Chunk(
        chunk.sample_id[rows], chunk.values[:, rows], chunk.qualifiers[:, rows], chunk.digestions[:, rows], context
    )


def assert_same(found: Computed, expected: Computed, rows: Any = slice(None), tolerance: float = 1e-9) -> None:
    for name, column in expected.derived.items():
        if column.dtype == np.dtype(object):
            assert found.derived[name].tolist() == column[rows].tolist(), name
        else:
            np.testing.assert_allclose(found.derived[name], column[rows], rtol=tolerance, atol=tolerance, err_msg=name)
    np.testing.assert_array_equal(found.causes, expected.causes[rows])
    np.testing.assert_array_equal(found.warnings, expected.warnings[rows])


def assert_whole(computed: Computed, n: int) -> None:
    """Every missing value has a cause's letter, every present one a dot; no value is infinite; marks are 0 or 1."""
    for position, quantity in enumerate(QUANTITIES):
        column, letters = computed.derived[quantity.name], computed.causes[:, position]
        assert column.shape == (n,), quantity.name
        missing = is_missing(column)
        assert (letters[~missing] == ord(".")).all(), quantity.name
        assert {chr(letter) for letter in letters[missing]} <= LETTERS, quantity.name
        if column.dtype.kind == "f":
            assert not np.isinf(column).any(), quantity.name
    assert computed.warnings.shape == (n, len(WARNINGS))
    assert np.isin(computed.warnings, [ord("0"), ord("1")]).all()


@pytest.mark.parametrize("conventions", CONVENTION_SETS, ids=lambda each: each.iron_split)
def test_ten_thousand_random_analyses_in_one_call_have_values_or_causes(conventions: Conventions) -> None:
    """Warnings of numpy are errors in this run, so none came."""
    assert_whole(compute(random_chunk(10_000, seed=1), [], conventions), 10_000)


@pytest.mark.parametrize("conventions", CONVENTION_SETS, ids=lambda each: each.iron_split)
def test_one_row_alone_equals_its_row_of_many(conventions: Conventions) -> None:
    chunk = random_chunk(40, seed=2)
    together = compute(chunk, [], conventions)

    for row in range(0, 40, 3):
        assert_same(compute(chunk.part(row, row + 1), [], conventions), together, slice(row, row + 1))


@settings(max_examples=10)
@given(seed=st.integers(0, 10_000), order=st.randoms(use_true_random=False))
def test_rows_in_another_order_give_the_same_rows(seed: int, order: Any) -> None:
    chunk = random_chunk(25, seed)
    shuffled = list(range(25))
    order.shuffle(shuffled)

    assert_same(compute(rows_of(chunk, shuffled), [], DEFAULTS), compute(chunk, [], DEFAULTS), shuffled)


@settings(max_examples=15)
@given(seed=st.integers(0, 10_000), row=st.integers(0, 9), column=st.sampled_from(CHOSEN_COLUMNS))
def test_value_that_goes_missing_changes_its_own_row_only(seed: int, row: int, column: str) -> None:
    chunk = random_chunk(10, seed)
    before = compute(chunk, [], DEFAULTS)
    chunk.values[CHOSEN_INDEX[column], row] = np.nan
    others = [each for each in range(10) if each != row]

    after = compute(chunk, [], DEFAULTS)
    assert_whole(after, 10)
    assert_same(compute(rows_of(chunk, others), [], DEFAULTS), before, others)
    np.testing.assert_array_equal(after.causes[others], before.causes[others])
    np.testing.assert_array_equal(after.warnings[others], before.warnings[others])


@settings(max_examples=10)
@given(seed=st.integers(0, 10_000), factor=st.floats(0.5, 1.5))
def test_all_oxides_scaled_leave_ratios_and_closed_analyses_as_they_are(seed: int, factor: float) -> None:
    chunk = random_chunk(30, seed, absent=0.0)
    for column in ("feo_titrated_wt", "fe2o3_ferric_wt"):
        chunk.values[CHOSEN_INDEX[column]] = np.nan
    conventions = Conventions(iron_split="fixed_ratio")  # the regressions read silica as analysed
    scaled = rows_of(chunk, slice(None))
    grown = [CHOSEN_INDEX[column] for column in (*OXIDE_COLUMNS, "fe2o3t_reported_wt")]
    scaled.values = chunk.values.copy()
    scaled.values[grown] *= factor
    traces = [place for column, place in CHOSEN_INDEX.items() if column.endswith("_ppm")]
    scaled.values[traces] *= factor

    found, expected = compute(scaled, [], conventions).derived, compute(chunk, [], conventions).derived
    for name in SCALE_FREE:
        np.testing.assert_allclose(found[name], expected[name], rtol=1e-7, atol=1e-7, err_msg=name)


ABSURD = st.sampled_from([0.0, -0.0, -1.0, -1e6, 1e6, 1e-300, 1e300, 100.0, np.nan, np.inf, -np.inf])


@settings(max_examples=30)
@given(data=st.data(), seed=st.integers(0, 100))
def test_absurd_values_give_values_or_causes_and_nothing_infinite(data: st.DataObject, seed: int) -> None:
    chunk = random_chunk(6, seed)
    for _ in range(data.draw(st.integers(1, 40))):
        place, row = data.draw(st.integers(0, len(CHOSEN_COLUMNS) - 1)), data.draw(st.integers(0, 5))
        chunk.values[place, row] = data.draw(ABSURD)
    for column in chunk.context.values():
        if column.dtype.kind == "f":
            column[data.draw(st.integers(0, 5))] = data.draw(ABSURD)

    assert_whole(compute(chunk, [], data.draw(st.sampled_from(CONVENTION_SETS))), 6)


@pytest.mark.parametrize("value", [0.0, -1.0, 1e6, 1e300, np.inf])
def test_one_absurd_value_in_every_column_gives_nothing_infinite(value: float) -> None:
    chunk = random_chunk(4, seed=3, absent=0.0)
    chunk.values[:] = value

    assert_whole(compute(chunk, [], DEFAULTS), 4)


def test_parts_of_a_chunk_computed_one_by_one_equal_the_whole(monkeypatch: pytest.MonkeyPatch) -> None:
    chunk = random_chunk(103, seed=4)
    whole = compute(chunk, [], DEFAULTS)
    monkeypatch.setattr("registry.pipeline.CHUNK_SIZE", 20)

    parts = list(compute_in_parts(chunk, [], DEFAULTS))
    assert [len(part) for part, _ in parts] == [20, 20, 20, 20, 20, 3]
    for start, (_, computed) in zip(range(0, 103, 20), parts, strict=True):
        assert_same(computed, whole, slice(start, start + 20))


#: Invented analyses that raise what random ones do not: mineral formulas (as moles of oxide), carbonate, odd losses.
MINERALS = [
    {"MgO": 1.9, "FeO": 0.1, "SiO2": 1.0},
    {"CaO": 0.9, "MgO": 1.0, "FeO": 0.1, "SiO2": 2.0},
    {"CaO": 0.5, "Na2O": 0.25, "Al2O3": 0.75, "SiO2": 2.5},
    {"Na2O": 1.5, "K2O": 0.5, "Al2O3": 2.0, "SiO2": 4.0},
    {"FeO": 3.0, "Al2O3": 1.0, "SiO2": 3.0},
    {"K2O": 0.5, "MgO": 3.0, "Al2O3": 0.5, "SiO2": 3.0},
    {"K2O": 0.5, "Al2O3": 1.5, "SiO2": 3.0},
    {"SiO2": 1.0},
    {"FeO": 1.0, "TiO2": 1.0},
    {"CaO": 10.0, "P2O5": 3.0},
    {"ZrO2": 1.2, "SiO2": 1.0},
]
GRANITE = {"SiO2": 71.0, "TiO2": 0.3, "Al2O3": 14.3, "MgO": 0.7, "CaO": 1.8, "Na2O": 3.7, "K2O": 4.1, "FeO": 2.5}
ODD = [
    {},
    {"co2_wt": 30.0},
    {"loi_wt": -0.5},
    {"loi_wt": -0.3, "feo_titrated_wt": 1.5},
    {"la_ppm": 1e308, "yb_ppm": 1e-9},
    {f"{symbol.lower()}_ppm": 1e-4 for symbol in JUDGED_BY_TRACES},
    {"zr_ppm": 2000.0},  # zircon of another source: saturated above 892 C by every model
]


def told_chunk() -> Chunk:
    chunk = empty_chunk(len(MINERALS) + len(ODD))
    chunk.digestions[:] = 1
    weights = [{oxide: amount * molar_mass(oxide) for oxide, amount in mineral.items()} for mineral in MINERALS]
    for row, analysis in enumerate([*weights, *([GRANITE] * len(ODD))]):
        total = sum(analysis.values())
        for oxide in ("SiO2", "TiO2", "Al2O3", "MgO", "CaO", "Na2O", "K2O", "P2O5", "ZrO2"):
            chunk.values[CHOSEN_INDEX[f"{oxide.lower()}_wt"], row] = 100.0 * analysis.get(oxide, 0.0) / total
        iron = FE2O3_FROM_FEO * 100.0 * analysis.get("FeO", 0.0) / total
        chunk.values[CHOSEN_INDEX["fe2o3t_reported_wt"], row] = iron
    for row, changes in enumerate(ODD, start=len(MINERALS)):
        for column, value in changes.items():
            chunk.values[CHOSEN_INDEX[column], row] = value
    return chunk


def test_every_warning_and_every_cause_is_met_by_some_analysis() -> None:
    """A remark that nothing can raise, or a cause that nothing can have, is dead: take it out or add an analysis."""
    raised, letters = np.zeros(len(WARNINGS), dtype=bool), set()
    fixed = replace(DEFAULTS, iron_split="fixed_ratio")
    computed = [compute(random_chunk(5_000, n, absent=0.05), [], each) for n, each in enumerate(CONVENTION_SETS)]
    for each in (*computed, compute(told_chunk(), [], fixed)):
        raised |= (each.warnings == ord("1")).any(axis=0)
        letters |= {chr(letter) for letter in np.unique(each.causes)}

    assert [warning.code for warning, was in zip(WARNINGS, raised, strict=True) if not was] == []
    assert [code for code, (letter, _) in CAUSES.items() if letter not in letters] == ["not_yet_computed"]


def test_average_granite_by_fusion_raises_only_what_its_log_leaves_open() -> None:
    """Not every remark on everything: a whole fresh analysis [lemaitre1976b] has few."""
    chunk = told_chunk().part(len(MINERALS), len(MINERALS) + 1)
    chunk.values[CHOSEN_INDEX["loi_wt"]], chunk.values[CHOSEN_INDEX["mno_wt"]] = 0.7, 0.05
    chunk.values[CHOSEN_INDEX["p2o5_wt"]] = 0.12
    marks = compute(chunk, [], DEFAULTS).warnings[0]

    assert {warning.code for warning, mark in zip(WARNINGS, marks, strict=True) if mark == ord("1")} == {
        *(f"liquidus_{model}_outside_range" for model in OLIVINE_MODELS),  # acid: no olivine model applies
        "iron_split_assumed_volcanic",
        "diapir_radius_assumed",
        "k2o_series_line_extended",
        "liquidus_by_convention",
        "liquidus_makhluf_by_convention",
        "liquidus_duan_from_silica_alone",
        "apatite_saturation_above_liquidus",  # 936 C against 892 C
    }


def test_chunk_of_no_samples_gives_columns_of_no_length() -> None:
    assert_whole(compute(random_chunk(0, seed=5), [], DEFAULTS), 0)


def test_chunk_of_nothing_reported_has_a_cause_everywhere() -> None:
    computed = compute(empty_chunk(3), [], DEFAULTS)

    assert_whole(computed, 3)
    numbers = [place for place, quantity in enumerate(QUANTITIES) if quantity.name.startswith(("sio2_vf", "la_yb"))]
    assert (computed.causes[:, numbers] == ord(CAUSES["missing_input"][0])).all()


def test_method_that_is_not_computed_yet_leaves_its_columns_empty_with_that_cause(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    without = tuple(
        type(method)(**{**vars(method), "function": None}) if method.key in ("cia", "silica_class") else method
        for method in METHODS
    )
    monkeypatch.setattr("registry.pipeline.METHODS", without)
    computed = compute(random_chunk(3, seed=6), [], DEFAULTS)

    places = {quantity.name: place for place, quantity in enumerate(QUANTITIES)}
    assert np.isnan(computed.derived["cia"]).all()
    assert computed.derived["silica_class"].tolist() == [None] * 3
    assert (computed.causes[:, [places["cia"], places["silica_class"]]] == ord(CAUSES["not_yet_computed"][0])).all()
