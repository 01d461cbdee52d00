"""Which result makes the composition: precedence by digestion, refusal, conversion, repeats. Values are invented."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.choice import Block, ColumnUse, choose
from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.digestion import AQUA_REGIA, FOUR_ACID, FUSION


def block(columns: list[tuple[str, str, str]], values: list[list[float]], **more: int) -> Block:
    table = np.array(values, dtype=float)
    signs = np.zeros(table.shape, dtype=np.uint8)
    return Block([ColumnUse(*column) for column in columns], np.arange(len(table)), table, signs, **more)


def one(column: str, *blocks: Block, n: int = 1) -> tuple[float, int, int]:
    values, qualifiers, digestions = choose(n, list(blocks))
    row = CHOSEN_INDEX[column]
    return float(values[row, 0]), int(qualifiers[row, 0]), int(digestions[row, 0])


def test_choice_of_two_digestions_takes_the_total_one_even_if_older() -> None:
    fusion = block([("Zr", "ppm", "fusion")], [[180.0]], newness=1)
    four_acid = block([("Zr", "ppm", "four_acid")], [[95.0]], newness=2)

    assert one("zr_ppm", four_acid, fusion) == (180.0, 0, FUSION)


def test_choice_of_two_batches_of_one_digestion_takes_the_newest() -> None:
    old = block([("Zr", "ppm", "fusion")], [[180.0]], newness=1)
    new = block([("Zr", "ppm", "fusion")], [[185.0]], newness=2)

    assert one("zr_ppm", old, new)[0] == 185.0


def test_choice_of_aqua_regia_lithophile_is_refused_and_says_which_digestion() -> None:
    value, _, digestion = one("k2o_wt", block([("K", "wt%", "aqua_regia")], [[0.33]]))

    assert np.isnan(value)
    assert digestion == AQUA_REGIA


def test_choice_of_unknown_digestion_without_silica_refuses_nothing_a_four_acid_carries() -> None:
    value, _, _ = one("rb_ppm", block([("Rb", "ppm", "unknown")], [[120.0]]))

    assert value == 120.0


def test_choice_converts_element_to_oxide_by_the_published_factor() -> None:
    """Oxide factors from the IUPAC weights: Al 1.8894, ppm to wt% 1e-4 (handbook tables, methods sheet section 1)."""
    aluminium = block([("Al", "wt%", "four_acid")], [[8.0]])
    potassium = block([("K", "ppm", "four_acid")], [[10_000.0]])

    assert one("al2o3_wt", aluminium)[0] == pytest.approx(8.0 * 1.8894, abs=5e-4)
    assert one("k2o_wt", potassium)[0] == pytest.approx(1.2046, abs=5e-5)


def test_choice_fills_an_element_from_its_oxide_where_the_element_is_missing() -> None:
    """Cr2O3 -> Cr 0.6842 (handbook factor)."""
    chromium = block([("Cr2O3", "wt%", "fusion")], [[0.0438]])

    assert one("cr_ppm", chromium)[0] == pytest.approx(438.0 * 0.6842, abs=0.05)


def test_choice_of_over_range_value_gives_way_to_any_other() -> None:
    over = block([("Cu", "ppm", "fusion")], [[10_000.0]], newness=2)
    over.qualifiers[0, 0] = 2
    exact = block([("Cu", "ppm", "four_acid")], [[14_200.0]], newness=1)

    assert one("cu_ppm", over, exact) == (14_200.0, 0, FOUR_ACID)
    assert one("cu_ppm", over) == (10_000.0, 2, FUSION)


def test_choice_of_repeats_takes_the_first_line_and_fills_gaps_from_the_next() -> None:
    columns = [("Zr", "ppm", "fusion"), ("Nb", "ppm", "fusion")]
    first = block(columns, [[180.0, np.nan]])
    repeat = block(columns, [[190.0, 12.0]], repeat=1)

    values, _, _ = choose(1, [repeat, first])

    assert values[CHOSEN_INDEX["zr_ppm"], 0] == 180.0
    assert values[CHOSEN_INDEX["nb_ppm"], 0] == 12.0


@given(st.permutations(range(4)))
def test_choice_does_not_depend_on_the_order_of_the_blocks(order: list[int]) -> None:
    blocks = [
        block([("Zr", "ppm", "fusion"), ("K", "wt%", "fusion")], [[180.0, np.nan]], newness=1),
        block([("Zr", "ppm", "four_acid"), ("K2O", "wt%", "xrf")], [[95.0, 2.5]], newness=2),
        block([("Zr", "ppm", "xrf"), ("K", "wt%", "aqua_regia")], [[np.nan, 0.4]], newness=3),
        block([("ZrO2", "wt%", "fusion"), ("K2O", "wt%", "fusion")], [[0.03, 2.6]], newness=4),
    ]

    expected = choose(1, blocks)
    found = choose(1, [blocks[position] for position in order])

    for left, right in zip(expected, found, strict=True):
        np.testing.assert_array_equal(left, right)
