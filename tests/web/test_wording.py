"""How numbers, names, tests and citations are spelled on the pages."""

from __future__ import annotations

import pytest

from web.numbers import MINUS, TIMES, aligned, counted, derived, grouped, reported
from web.pictures import MINERALS, minerals_of, norm_segments
from web.wording import column_letters, column_words, formula, joined, marked, readable, short_source, unit_of_column


@pytest.mark.parametrize(
    ("value", "spelled"),
    [
        (65.2, "65.2"), (0.48, "0.48"), (1200.0, "1200"), (0.0005, "0.0005"), (-3.5, f"{MINUS}3.5"), (0.0, "0"),
        (0.1 + 0.2, "0.3"), (2.5e-7, f"2.50 {TIMES} 10⁻⁷"), (32633, "32633"), (None, ""),
    ],
)  # fmt: skip
def test_reported_number_keeps_its_digits(value: float | None, spelled: str) -> None:
    assert reported(value) == spelled


@pytest.mark.parametrize(
    ("value", "unit", "spelled"),
    [
        (55.8123, "1", "55.8"), (0.011123, "1", "0.0111"), (1943.2, "1", "1943"), (1151.6, "degC", "1152"),
        (12.3456, "wt%", "12.35"), (2.06e-4, "m/yr", f"2.06 {TIMES} 10⁻⁴"), (-0.5, "1", f"{MINUS}0.500"),
        (9.999, "1", "10.0"), (None, "1", ""),
    ],
)  # fmt: skip
def test_derived_number_has_three_digits(value: float | None, unit: str, spelled: str) -> None:
    assert derived(value, unit) == spelled


def test_aligned_cells_have_their_points_at_the_same_distance_from_the_end() -> None:
    cells = aligned(["65.2", "7.25", "", "120", "<0.5"])
    assert [len(cell) - cell.index(".") for cell in cells if "." in cell] == [3, 3, 3]
    assert len(cells[3]) == len("120") + 3
    assert cells[2] == ""


def test_counts_carry_their_noun_and_thin_spaces() -> None:
    assert counted(1, "sample") == "1 sample"
    assert counted(412, "site") == "412 sites"
    assert grouped(100000) == "100\N{NARROW NO-BREAK SPACE}000"


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("feo_titrated_wt", "FeO titrated"), ("sn_ppm", "Sn"), ("sio2_vf_wt", "SiO₂ volatile-free"), ("s_wt", "S"),
        ("theta_centre", "heat left at the centre"), ("eu_anomaly", "Eu/Eu*"), ("asi", "ASI"),
        ("half_width_m", "half-width"), ("sr_y", "Sr/Y"), ("differentiation_index", "differentiation index"),
    ],
)  # fmt: skip
def test_column_name_is_said_in_words(name: str, words: str) -> None:
    assert column_words(name) == words


@pytest.mark.parametrize(
    ("written", "printed"),
    [
        (">= 35", "≥\N{NO-BREAK SPACE}35"), ("between 40 and 88", "from 40 to 88"), ("= magnetite", "is magnetite"),
        ("= yes", "yes"), ("<= 0.5 la_ppm", "≤\N{NO-BREAK SPACE}0.5 La"), ("61 +- 3 Ma", "61 ± 3 Ma"),
        ("2.217e-05 to 2.333e-05", f"2.22 {TIMES} 10⁻⁵ to 2.33 {TIMES} 10⁻⁵"),
        ("it keeps 4.749e-12", f"it keeps 4.75 {TIMES} 10⁻¹²"),
        ("at 1e-5 and 1e4/T, Fe2O3 of A-2e5", "at 10⁻⁵ and 10⁴/T, Fe₂O₃ of A-2e5"),
        ("mgo_vf_wt is 1.9", "MgO volatile-free is 1.9"),
    ],
)  # fmt: skip
def test_test_of_a_target_is_printed_without_code(written: str, printed: str) -> None:
    assert readable(written) == printed


@pytest.mark.parametrize(
    ("source", "short"),
    [
        ("Larsen, E.S. 1938. Some new variation diagrams.", "Larsen 1938"),
        ("Thornton, C.P., Tuttle, O.F. 1960. Chemistry of igneous rocks.", "Thornton and Tuttle 1960"),
        ("Frost, B.R., Barnes, C.G., Collins, W.J. 2001. A classification.", "Frost et al. 2001"),
        ("McDonough, W.F., Sun, S.-s. 1995. The composition of the Earth.", "McDonough and Sun 1995"),
        ("Zen, E-an 1988. Phase relations of peraluminous granitic rocks.", "Zen 1988"),
        ("Prohaska, T. et al. 2022. Standard atomic weights.", "Prohaska et al. 2022"),
        ("Le Maitre, R.W. (ed.) 2002. Igneous Rocks.", "Le Maitre 2002"),
        ("Common practice, no source: the molar ratio, 1 to 1900 in use", "Common practice, no source"),
        ("as entered", "as entered"),
    ],
)
def test_citation_is_shortened_to_names_and_year(source: str, short: str) -> None:
    assert short_source(source) == short


def test_marked_text_sets_names_as_code_and_escapes_the_rest() -> None:
    assert marked("why liquidus_c < 3e-3 & SiO2") == f"why <code>liquidus_c</code> &lt; 3 {TIMES} 10⁻³ &amp; SiO₂"


def test_formula_lowers_figures_of_oxides_only() -> None:
    assert (
        formula("SiO2, Al2O3 and Fe2O3 of 2023; R1 and T, Putirka 13")
        == "SiO₂, Al₂O₃ and Fe₂O₃ of 2023; R1 and T, Putirka 13"
    )


def test_joined_words_read_as_a_list() -> None:
    assert [joined(["a"]), joined(["a", "b"]), joined(["a", "b", "c"], "or")] == ["a", "a and b", "a, b or c"]


def test_norm_bar_stands_in_crystallisation_order_and_fills_its_share() -> None:
    segments = norm_segments({"ol": 20.0, "q": None, "an": 50.0, "mt": 5.0, "di": 25.0, "ap": 0.001})
    assert [segment.mineral.symbol for segment in segments] == ["an", "di", "ol", "mt"]
    assert [segment.x for segment in segments] == [0.0, 50.0, 75.0, 95.0]
    assert sum(segment.width for segment in segments) == pytest.approx(100.0)


def test_norm_bar_of_a_sum_above_100_is_drawn_to_its_own_sum() -> None:
    segments = norm_segments({"ne": 60.0, "cs": 65.0})
    assert segments[-1].x + segments[-1].width == pytest.approx(100.0)


def test_minerals_are_each_drawn_in_a_way_of_their_own_within_a_group_of_rock_formers() -> None:
    rock_formers = [mineral for mineral in MINERALS if mineral.group != "accessory"]
    assert len({(mineral.colour, mineral.pattern) for mineral in rock_formers}) == len(rock_formers)
    assert minerals_of([norm_segments({"an": 1.0}), norm_segments({"q": 1.0})])[0].symbol == "q"


def test_unit_of_column_follows_the_guide_then_the_end_of_the_name() -> None:
    assert unit_of_column("differentiation_index", {"differentiation_index": "wt%"}) == "\u00a0wt%"
    assert [unit_of_column(name) for name in ("depth_to_top_m", "heat_flow_mw_m2", "s_wt", "sn_ppm", "volume_km3")] == [
        "\u00a0m", "\u00a0mW/m²", "\u00a0wt%", "\u00a0ppm", "\u00a0km³"
    ]  # fmt: skip
    assert [unit_of_column(name) for name in ("v_sc", "th_u", "redox_series", "k_rb")] == [""] * 4


def test_column_letters_count_as_sheets_do() -> None:
    assert [column_letters(place) for place in (0, 25, 26, 51, 52, 701, 702)] == [
        "A", "Z", "AA", "AZ", "BA", "ZZ", "AAA"
    ]  # fmt: skip
