"""Ranges of compositions as short bars on fixed scales, so that one intrusion can be held beside another.

The scales are a choice of this drawing (no published source): wide enough for common igneous rocks, logarithmic for
what varies over decades. What lies beyond an end is drawn at the end with an arrow; the numbers stand beside the bar.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from registry.store.reading.intrusions import ValueRange

LINEAR, LOGARITHMIC = False, True
SCALES: dict[str, tuple[float, float, bool]] = {
    "sio2_vf_wt": (40, 80, LINEAR), "tio2_vf_wt": (0, 3, LINEAR), "al2o3_vf_wt": (5, 25, LINEAR),
    "feot_vf_wt": (0, 15, LINEAR), "mgo_vf_wt": (0, 15, LINEAR), "cao_vf_wt": (0, 15, LINEAR),
    "na2o_vf_wt": (0, 8, LINEAR), "k2o_vf_wt": (0, 8, LINEAR), "p2o5_vf_wt": (0, 1, LINEAR),
    "rb_ppm": (1, 1000, LOGARITHMIC), "sr_ppm": (1, 10000, LOGARITHMIC), "ba_ppm": (1, 10000, LOGARITHMIC),
    "y_ppm": (1, 1000, LOGARITHMIC), "zr_ppm": (1, 10000, LOGARITHMIC), "nb_ppm": (0.1, 1000, LOGARITHMIC),
    "ta_ppm": (0.01, 100, LOGARITHMIC), "la_ppm": (0.1, 1000, LOGARITHMIC), "yb_ppm": (0.1, 100, LOGARITHMIC),
    "th_ppm": (0.1, 100, LOGARITHMIC), "u_ppm": (0.1, 100, LOGARITHMIC), "li_ppm": (1, 10000, LOGARITHMIC),
    "cs_ppm": (0.1, 1000, LOGARITHMIC), "sn_ppm": (0.1, 1000, LOGARITHMIC), "w_ppm": (0.1, 1000, LOGARITHMIC),
    "cu_ppm": (1, 10000, LOGARITHMIC), "ni_ppm": (1, 10000, LOGARITHMIC), "cr_ppm": (1, 10000, LOGARITHMIC),
    "v_ppm": (1, 1000, LOGARITHMIC),
    "mg_number_total_iron": (0, 100, LINEAR), "differentiation_index": (0, 100, LINEAR), "asi": (0.5, 1.5, LINEAR),
    "mali": (-10, 12, LINEAR), "fe_number": (0, 1, LINEAR), "sr_y": (0.1, 1000, LOGARITHMIC),
    "la_yb": (0.1, 1000, LOGARITHMIC), "eu_anomaly": (0, 2, LINEAR), "rb_sr": (0.01, 100, LOGARITHMIC),
    "k_rb": (10, 10000, LOGARITHMIC), "nb_ta": (1, 100, LOGARITHMIC), "zr_hf": (1, 100, LOGARITHMIC),
    "zircon_saturation_wh83_c": (500, 1000, LINEAR), "heat_production_uw_m3": (0.1, 100, LOGARITHMIC),
}  # fmt: skip


@dataclass(frozen=True)
class RangeBar:
    """Places on the bar in per cent of its width: the ends of the range and its median; which ends lie beyond."""

    low: float
    middle: float
    high: float
    beyond_low: bool
    beyond_high: bool
    scale_low: float
    scale_high: float
    logarithmic: bool


def range_bar(found: ValueRange) -> RangeBar | None:
    """The bar of a range; None where no value counts or the column has no scale."""
    scale = SCALES.get(found.column)
    if scale is None or found.least is None or found.median is None or found.greatest is None:
        return None
    low, high, logarithmic = scale

    def place(value: float) -> float:
        if logarithmic:
            if value <= 0.0:
                return 0.0
            share = math.log(value / low) / math.log(high / low)
        else:
            share = (value - low) / (high - low)
        return round(100.0 * min(1.0, max(0.0, share)), 2)

    return RangeBar(
        place(found.least),
        place(found.median),
        place(found.greatest),
        found.least < low,
        found.greatest > high,
        low,
        high,
        logarithmic,
    )
