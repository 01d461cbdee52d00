"""Places of samples in a diagram. The numbers are invented or plain geometry, unless a source stands beside them."""

from __future__ import annotations

import math

import numpy as np
import pytest

from registry.diagrams import ALIASES, DIAGRAMS, PANELS, chosen_inputs, doubts
from registry.petrology import series
from registry.petrology.analytes import CHOSEN_COLUMNS, CHOSEN_INDEX
from registry.petrology.field_lines import DIAGRAMS as FIELD_LINES
from registry.petrology.references import REFERENCES
from registry.plotting import (
    DRAWN,
    MISSING,
    NOT_POSITIVE,
    OUTSIDE,
    Window,
    coordinates,
    count_steps,
    fractions,
    in_cells,
    line_places,
    numbers_of,
    place,
    ticks,
    triangle_place,
    window_of,
)
from registry.store.sheets import SHEETS

TAS = DIAGRAMS["tas_plutonic"]
PEARCE = DIAGRAMS["granite_rb_y_nb"]
AFM = DIAGRAMS["afm"]


def test_every_diagram_of_field_lines_is_drawn_with_those_lines_and_their_source() -> None:
    for name, lines in FIELD_LINES.items():
        layers = [layer for diagram in DIAGRAMS.values() for layer in diagram.layers]
        drawn = {line for layer in layers for line in layer.lines}
        assert set(lines.lines) <= drawn, name
        sources = {layer.source for layer in layers for line in layer.lines if line in lines.lines}
        assert REFERENCES[lines.source] in sources, name


def test_afm_divides_stand_under_their_own_sources() -> None:
    """The authors of the two divides (Irvine and Baragar 1971; Kuno 1968), corners as ``series`` has them."""
    first, second = AFM.layers
    assert first.lines == (tuple((f, m) for _, f, m in series.AFM_IRVINE),)
    assert second.lines == (tuple((f, m) for _, f, m in series.AFM_KUNO),)
    assert "Irvine" in first.source and "1971" in first.source
    assert "Kuno" in second.source and "1968" in second.source


def test_diagrams_need_columns_of_the_sheets_and_panels_their_members() -> None:
    offered = {column for sheet in SHEETS.values() for column in sheet}
    for diagram in DIAGRAMS.values():
        assert set(diagram.columns) <= offered
    assert all(member in DIAGRAMS for panels in PANELS.values() for member in panels.members)
    assert set(ALIASES.values()) <= set(DIAGRAMS)


def test_place_in_a_linear_frame_is_the_share_of_each_axis() -> None:
    window = window_of(TAS, np.array([]), np.array([]))
    assert (window.x, window.y) == ((37.0, 80.0), (0.0, 16.0))
    placed = place(TAS, np.array([[58.5, 5.0, 3.0], [80.0, 9.0, 7.0]]), window)
    assert placed.across == pytest.approx([0.5, 1.0])
    assert placed.up == pytest.approx([0.5, 1.0])
    assert placed.state.tolist() == [DRAWN, DRAWN]


def test_place_on_logarithmic_axes_is_the_share_of_the_logarithms() -> None:
    window = window_of(PEARCE, np.array([]), np.array([]))
    placed = place(PEARCE, np.array([[20.0, math.sqrt(2.0 * 2000.0) - 20.0, math.sqrt(2000.0)]]), window)
    assert placed.across == pytest.approx([0.5])
    assert placed.up == pytest.approx([0.5])


def test_place_says_why_a_sample_is_left_out() -> None:
    nothing = float("nan")
    values = np.array([[20.0, 5.0, 60.0], [nothing, 5.0, 60.0], [20.0, nothing, 60.0], [20.0, 5.0, 0.0], [1, 0.5, 60]])
    placed = place(PEARCE, values, window_of(PEARCE, np.array([]), np.array([])))
    assert placed.state.tolist() == [DRAWN, MISSING, MISSING, NOT_POSITIVE, OUTSIDE]
    assert placed.missing.tolist() == [-1, 0, 1, -1, -1]


def test_triangle_has_its_corners_where_one_part_is_all() -> None:
    """Plain geometry: F at the top, M at the right, A at the left; the middle of the triangle holds a third of each."""
    across, up = triangle_place([100.0, 0.0, 0.0, 100.0 / 3], [0.0, 100.0, 0.0, 100.0 / 3])
    assert across == pytest.approx([0.5, 1.0, 0.0, 0.5])
    assert up == pytest.approx([1.0, 0.0, 0.0, 1.0 / 3])


def test_triangle_coordinates_are_per_cent_of_the_sum_and_equal_the_classification() -> None:
    values = np.array([[9.0, 6.0, 3.0, 2.0], [0.0, 0.0, 0.0, 0.0]])
    f, m, a = coordinates(AFM, values)
    expected = series.afm_coordinates([3.0], [2.0], [9.0], [6.0])
    assert [f[0], m[0], a[0]] == pytest.approx([expected["f"][0], expected["m"][0], expected["a"][0]])
    placed = place(AFM, values, window_of(AFM, f, m))
    assert placed.state.tolist() == [DRAWN, NOT_POSITIVE]


def test_window_asked_for_wins_and_whole_takes_every_point_in() -> None:
    x, y = np.array([30.0, 70.0]), np.array([2.0, 18.0])
    assert window_of(TAS, x, y, (50.0, None, None, 9.0)) == Window((50.0, 80.0), (0.0, 9.0))
    whole = window_of(TAS, x, y, whole=True)
    assert whole.x[0] < 30.0 and whole.x[1] == 80.0
    assert whole.y[0] == 0.0 and whole.y[1] > 18.0


def test_window_of_one_point_or_none_has_width() -> None:
    diagram = DIAGRAMS["harker_mgo"]
    for values in ([], [0.0], [3.0], [float("nan")]):
        window = window_of(diagram, np.array(values), np.array(values))
        assert window.x[0] < window.x[1] and window.y[0] < window.y[1]
        assert ticks(*window.x, is_log=False)


def test_ticks_are_round_and_within_the_axis() -> None:
    assert [value for value, _ in ticks(37.0, 80.0, is_log=False)] == [40.0, 50.0, 60.0, 70.0, 80.0]
    numbered = [value for value, shown in ticks(2.0, 2000.0, is_log=True) if shown]
    assert numbered == [10.0, 100.0, 1000.0]
    assert [value for value, shown in ticks(20.0, 300.0, is_log=True) if shown] == [20.0, 50.0, 100.0, 200.0]
    assert all(shown for _, shown in ticks(2.1, 4.2, is_log=True))


def test_field_line_places_agree_with_the_places_of_samples_on_them() -> None:
    window = window_of(PEARCE, np.array([]), np.array([]))
    corner = PEARCE.layers[0].lines[0][1]
    sample = place(PEARCE, np.array([[corner[0] - 5.0, 5.0, corner[1]]]), window)
    assert line_places(PEARCE, window, (corner,))[0] == pytest.approx((sample.across[0], sample.up[0]))
    assert fractions(window, corner[0], corner[1])[0] == pytest.approx(sample.across[0])


def test_cells_hold_every_place_once_with_the_edges_in_the_last_cell() -> None:
    draw = np.random.default_rng(3).random((2, 1000))
    cells = in_cells(np.append(draw[0], [0.0, 1.0]), np.append(draw[1], [0.0, 1.0]), 12, 9)
    assert sum(count for _, _, count in cells.filled) == 1002
    assert max(column for column, _, _ in cells.filled) == 11
    assert in_cells(np.array([0.0, 1.0]), np.array([1.0, 0.0]), 4, 3).filled == [(0, 0, 1), (3, 2, 1)]


def test_count_steps_rise_from_one_and_stay_below_the_most() -> None:
    assert count_steps(1, 7) == [1]
    steps = count_steps(828, 7)
    assert steps[0] == 1 and len(steps) == 7 and steps == sorted(set(steps)) and steps[-1] < 828


def test_numbers_of_rows_without_values_are_missing() -> None:
    assert numbers_of([], 1, 3).shape == (0, 3)
    assert np.isnan(numbers_of([("a", None, 2.0)], 1, 2)).tolist() == [[True, False]]


def test_inputs_of_an_axis_are_the_analysed_columns() -> None:
    assert chosen_inputs("sr_y") == {"sr_ppm", "y_ppm"}
    assert chosen_inputs("k2o_vf_wt") == {"k2o_wt"}
    assert chosen_inputs("a_cnk") == {"al2o3_wt", "cao_wt", "na2o_wt", "k2o_wt"}


def test_doubts_name_censored_inputs_and_minima_of_a_partial_digestion() -> None:
    letters = ["."] * len(CHOSEN_COLUMNS)
    letters[CHOSEN_INDEX["y_ppm"]] = "a"  # four-acid: xenotime keeps its share of Y (common practice, no source)
    letters[CHOSEN_INDEX["sr_ppm"]] = "f"
    assert doubts(chosen_inputs("sr_y"), "sr_ppm<,w_ppm<", "".join(letters)) == (["sr_ppm<"], ["y_ppm"])
    assert doubts(chosen_inputs("sr_y"), None, None) == ([], [])
