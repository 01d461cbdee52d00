"""Tectonic fields of granites by trace elements: straight lines on logarithmic axes, from memory [pearce1984].

For granites (more than 5 % modal quartz). Post-collision granites overlap all fields: the source says so itself. A
point on a line belongs to the field above or to the right of it.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.broken_lines import broken_line
from registry.petrology.classification import GRANITE_Q_WT
from registry.petrology.quotients import Floats, floats, labels, log10_positive

Line = tuple[tuple[float, float], ...]

RB_Y_NB_FIELDS = (
    "volcanic-arc granite", "syn-collision granite", "within-plate granite", "ocean-ridge granite",
)  # fmt: skip
NB_Y_FIELDS = ("volcanic-arc or syn-collision granite", "within-plate granite", "ocean-ridge granite")
TA_YB_FIELDS = (
    "volcanic-arc or syn-collision granite", "within-plate granite", "within-plate or ocean-ridge granite",
    "ocean-ridge granite",
)  # fmt: skip

#: Rb against Y + Nb, ppm.
RB_Y_NB_SYN_ARC: Line = ((2.0, 80.0), (55.0, 300.0))
RB_Y_NB_DIVIDE: Line = ((50.0, 1.0), (51.5, 8.0), (55.0, 300.0), (400.0, 2000.0))
RB_Y_NB_PLATE_RIDGE: Line = ((51.5, 8.0), (2000.0, 400.0))
#: Rb against Yb + Ta, ppm.
RB_YB_TA_SYN_ARC: Line = ((0.5, 140.0), (6.0, 200.0))
RB_YB_TA_DIVIDE: Line = ((6.0, 1.0), (6.0, 8.0), (6.0, 200.0), (50.0, 2000.0))
RB_YB_TA_PLATE_RIDGE: Line = ((6.0, 8.0), (50.0, 400.0))
#: Nb against Y, ppm.
NB_Y_PLATE: Line = ((1.0, 2000.0), (50.0, 10.0), (1000.0, 100.0))
NB_Y_ARC_RIDGE: Line = ((40.0, 1.0), (50.0, 10.0))
NB_Y_ANOMALOUS_RIDGE: Line = ((25.0, 25.0), (1000.0, 400.0))
#: Ta against Yb, ppm.
TA_YB_ARC: Line = ((0.55, 20.0), (3.0, 2.0), (5.0, 1.0), (5.0, 0.05))
TA_YB_PLATE: Line = ((3.0, 2.0), (100.0, 20.0))
TA_YB_RIDGE: Line = ((5.0, 1.0), (100.0, 7.0))


def _height(log_x: Floats, line: Line) -> Floats:
    """log10 y of a broken line at log10 x; its first and last stretch are carried on straight."""
    x, y = np.log10(np.array(line)).T
    return broken_line(log_x, x, y, extended=True)


def _abscissa(log_y: Floats, line: Line) -> Floats:
    """log10 x of a steep broken line at log10 y, held beyond its ends; corners in order of rising y."""
    x, y = np.log10(np.array(line)).T
    return broken_line(log_y, y, x)


def line_height(x_ppm: ArrayLike, line: Line) -> Floats:
    """y (ppm) of a line of this module at x (ppm), shape (n,); NaN where x is not above zero."""
    return np.power(10.0, _height(log10_positive(x_ppm), line))


def _rubidium_field(x: Floats, y: Floats, syn_arc: Line, divide: Line, plate_ridge: Line) -> NDArray[np.intp]:
    """0 arc, 1 syn-collision, 2 within-plate, 3 ocean-ridge from logarithms."""
    left = x < _abscissa(y, divide)
    return np.where(left, np.where(y >= _height(x, syn_arc), 1, 0), np.where(y >= _height(x, plate_ridge), 2, 3))


def granite_field_rb_y_nb(rb_ppm: ArrayLike, y_ppm: ArrayLike, nb_ppm: ArrayLike) -> Any:
    """Field of Rb against Y + Nb (ppm), shape (n,); None where missing or off the diagram (2-2000, Rb 1-2000).

    Source [pearce1984], fig. 4.
    """
    rb, y_nb = floats(rb_ppm, np.add(y_ppm, nb_ppm))
    code = _rubidium_field(
        log10_positive(y_nb), log10_positive(rb), RB_Y_NB_SYN_ARC, RB_Y_NB_DIVIDE, RB_Y_NB_PLATE_RIDGE
    )
    inside = (rb >= 1.0) & (rb <= 2000.0) & (y_nb >= 2.0) & (y_nb <= 2000.0)
    return labels(np.where(inside, code, -1), RB_Y_NB_FIELDS)


def granite_field_rb_yb_ta(rb_ppm: ArrayLike, yb_ppm: ArrayLike, ta_ppm: ArrayLike) -> Any:
    """Field of Rb against Yb + Ta (ppm), shape (n,); None where missing or off the diagram (0.5-50, Rb 1-2000).

    Source [pearce1984].
    """
    rb, yb_ta = floats(rb_ppm, np.add(yb_ppm, ta_ppm))
    code = _rubidium_field(
        log10_positive(yb_ta), log10_positive(rb), RB_YB_TA_SYN_ARC, RB_YB_TA_DIVIDE, RB_YB_TA_PLATE_RIDGE
    )
    inside = (rb >= 1.0) & (rb <= 2000.0) & (yb_ta >= 0.5) & (yb_ta <= 50.0)
    return labels(np.where(inside, code, -1), RB_Y_NB_FIELDS)


def granite_field_nb_y(nb_ppm: ArrayLike, y_ppm: ArrayLike) -> Any:
    """Field of Nb against Y (ppm), shape (n,); None where missing or off the diagram (1-1000, Nb 1-2000).

    Source [pearce1984].
    """
    nb, y = floats(nb_ppm, y_ppm)
    log_nb, log_y = log10_positive(nb), log10_positive(y)
    is_left = log_y < _abscissa(log_nb, NB_Y_ARC_RIDGE)
    code = np.select([log_nb >= _height(log_y, NB_Y_PLATE), is_left], [1, 0], default=2)
    inside = (nb >= 1.0) & (nb <= 2000.0) & (y >= 1.0) & (y <= 1000.0)
    return labels(np.where(inside, code, -1), NB_Y_FIELDS)


def granite_field_ta_yb(ta_ppm: ArrayLike, yb_ppm: ArrayLike) -> Any:
    """Field of Ta against Yb (ppm), shape (n,); None where missing or off the diagram (0.1-100, Ta 0.05-100).

    Between the within-plate and the ocean-ridge line lie granites of both. Source [pearce1984].
    """
    ta, yb = floats(ta_ppm, yb_ppm)
    log_ta, log_yb = log10_positive(ta), log10_positive(yb)
    is_left = log_yb < _abscissa(log_ta, tuple(reversed(TA_YB_ARC)))
    code = np.select(
        [is_left, log_ta >= _height(log_yb, TA_YB_PLATE), log_ta >= _height(log_yb, TA_YB_RIDGE)], [0, 1, 2], default=3
    )
    inside = (ta >= 0.05) & (ta <= 100.0) & (yb >= 0.1) & (yb <= 100.0)
    return labels(np.where(inside, code, -1), TA_YB_FIELDS)


def granite_field(rb_ppm: ArrayLike, y_ppm: ArrayLike, nb_ppm: ArrayLike, q_wt: ArrayLike) -> Any:
    """``granite_field_rb_y_nb`` for granites only: None where normative quartz is at most 5 wt% or unknown.

    Normative quartz stands for the modal quartz of the source. Source [pearce1984].
    """
    (quartz,) = floats(q_wt)
    return np.where(quartz > GRANITE_Q_WT, granite_field_rb_y_nb(rb_ppm, y_ppm, nb_ppm), None)
