"""The lines of the classification diagrams as plain tuples, for drawing: made from the tables that classify.

A diagram's ``lines`` are tuples of (x, y) corners in the units of its axes; ``labels`` stand at (x, y). Nothing here
decides a class: the functions that do read the same tables.
"""

from __future__ import annotations

from typing import NamedTuple

from registry.petrology import granite_fields, granite_indices, series, tas

Point = tuple[float, float]
Line = tuple[Point, ...]


class Diagram(NamedTuple):
    """Axes (column names as the catalogue has them), lines, labels, and where they come from.

    ``x`` and ``y`` name the columns, joined by ``+`` where the axis is a sum. ``is_log`` holds for both axes. In the
    ternary AFM diagram x and y are F and M, per cent, and A is what is left of 100.
    """

    title: str
    x: str
    y: str
    is_log: bool
    lines: tuple[Line, ...]
    labels: tuple[tuple[str, float, float], ...]
    source: str
    status: str


#: Alkalis at which open tops are cut off when drawn, wt%.
_DRAWN_TOP_WT = 16.0


def _centre(corners: Line) -> Point:
    """Centre of gravity of the area of a polygon."""
    twice_area = x_moment = y_moment = 0.0
    for (x1, y1), (x2, y2) in zip(corners, (*corners[1:], corners[0]), strict=True):
        cross = x1 * y2 - x2 * y1
        twice_area += cross
        x_moment += (x1 + x2) * cross
        y_moment += (y1 + y2) * cross
    return x_moment / (3.0 * twice_area), y_moment / (3.0 * twice_area)


def _tas_outline(field: str) -> Line:
    """Corners of a field with its open sides cut where the diagram ends (SiO2 37-80, alkalis 0-16)."""
    return tuple((min(max(float(x), 37.0), 80.0), min(float(y), _DRAWN_TOP_WT)) for x, y in tas.POLYGONS[field])


def _tas_diagram(names: tuple[str, ...], title: str, source: str) -> Diagram:
    fields = tas.FIELDS[:-1]
    outlines = tuple(_tas_outline(field) for field in fields)
    centres = tuple(_centre(outline) for outline in outlines)
    return Diagram(
        title=title,
        x="sio2_vf_wt",
        y="na2o_vf_wt+k2o_vf_wt",
        is_log=False,
        lines=tuple((*outline, outline[0]) for outline in outlines),
        labels=tuple((names[position], *centre) for position, centre in enumerate(centres)),
        source=source,
        status="from memory",
    )


def _pairs(points: series.Points) -> Line:
    return tuple(zip(*points, strict=True))


def _sampled(coefficients: tuple[float, float, float]) -> Line:
    constant, linear, square = coefficients
    return tuple((float(s), constant + linear * s + square * s * s) for s in range(52, 81, 2))


def _alkaline_divide() -> Line:
    alkalis = [0.5 * step for step in range(20)]
    return tuple((float(series.alkaline_divide_sio2(a)), a) for a in alkalis)


_FERROAN = granite_indices.FERROAN_LINE
_RB_Y_NB_LABELS = (
    ("syn-collision granite", 10.0, 700.0),
    ("volcanic-arc granite", 10.0, 20.0),
    ("within-plate granite", 400.0, 500.0),
    ("ocean-ridge granite", 400.0, 15.0),
)

DIAGRAMS: dict[str, Diagram] = {
    "tas_volcanic": _tas_diagram(tas.VOLCANIC_NAMES, "Total alkalis against silica, lavas", "lebas1986"),
    "tas_plutonic": _tas_diagram(tas.PLUTONIC_NAMES, "Total alkalis against silica, plutonic", "middlemost1994"),
    "alkaline_divide": Diagram(
        "Alkaline and subalkaline", "sio2_vf_wt", "na2o_vf_wt+k2o_vf_wt", False, (_alkaline_divide(),),
        (("alkaline", 45.0, 7.0), ("subalkaline", 60.0, 3.0)), "irvine1971", "from memory",
    ),
    "k2o_sio2": Diagram(
        "K2O against silica", "sio2_vf_wt", "k2o_vf_wt", False,
        (_pairs(series.K2O_LOW_MEDIUM), _pairs(series.K2O_MEDIUM_HIGH), _pairs(series.K2O_HIGH_SHOSHONITIC)),
        (("low-K tholeiitic", 64.0, 0.5), ("medium-K calc-alkaline", 64.0, 1.7), ("high-K calc-alkaline", 64.0, 3.2),
         ("shoshonitic", 55.0, 4.0)),
        "peccerillo1976", "from memory",
    ),
    "afm": Diagram(
        "Alkalis, total iron, magnesia", "feot_wt", "mgo_wt", False,
        (tuple((f, m) for _, f, m in series.AFM_IRVINE), tuple((f, m) for _, f, m in series.AFM_KUNO)),
        (("tholeiitic", 65.0, 15.0), ("calc-alkaline", 30.0, 15.0)), "irvine1971", "from memory",
    ),
    "alumina": Diagram(
        "Alumina saturation", "a_cnk", "a_nk", False,
        (((1.0, 1.0), (1.0, 3.0)), ((0.4, 1.0), (1.0, 1.0)), ((0.4, 0.4), (1.0, 1.0), (2.0, 2.0))),
        (("metaluminous", 0.75, 2.0), ("peraluminous", 1.4, 2.2), ("peralkaline", 0.7, 0.85)),
        "shand1943", "published",
    ),
    "ferroan": Diagram(
        "Iron number against silica", "sio2_vf_wt", "fe_number", False,
        (tuple((s, _FERROAN[0] + _FERROAN[1] * s) for s in (48.0, 80.0)),),
        (("ferroan", 60.0, 0.9), ("magnesian", 60.0, 0.6)), "frost2001", "from memory",
    ),
    "alkali_lime": Diagram(
        "Alkali-lime index against silica", "sio2_vf_wt", "mali", False,
        (_sampled(granite_indices.MALI_ALKALIC), _sampled(granite_indices.MALI_ALKALI_CALCIC),
         _sampled(granite_indices.MALI_CALC_ALKALIC)),
        (("alkalic", 62.0, 9.0), ("alkali-calcic", 66.0, 5.6), ("calc-alkalic", 70.0, 5.2), ("calcic", 70.0, 1.0)),
        "frost2001", "from memory",
    ),
    "granite_rb_y_nb": Diagram(
        "Granites: Rb against Y + Nb", "y_ppm+nb_ppm", "rb_ppm", True,
        (granite_fields.RB_Y_NB_SYN_ARC, granite_fields.RB_Y_NB_DIVIDE, granite_fields.RB_Y_NB_PLATE_RIDGE),
        _RB_Y_NB_LABELS, "pearce1984", "from memory",
    ),
    "granite_nb_y": Diagram(
        "Granites: Nb against Y", "y_ppm", "nb_ppm", True,
        (granite_fields.NB_Y_PLATE, granite_fields.NB_Y_ARC_RIDGE, granite_fields.NB_Y_ANOMALOUS_RIDGE),
        (("volcanic-arc or syn-collision granite", 8.0, 5.0), ("within-plate granite", 100.0, 300.0),
         ("ocean-ridge granite", 300.0, 4.0)),
        "pearce1984", "from memory",
    ),
    "granite_rb_yb_ta": Diagram(
        "Granites: Rb against Yb + Ta", "yb_ppm+ta_ppm", "rb_ppm", True,
        (granite_fields.RB_YB_TA_SYN_ARC, granite_fields.RB_YB_TA_DIVIDE, granite_fields.RB_YB_TA_PLATE_RIDGE),
        (("syn-collision granite", 1.5, 700.0), ("volcanic-arc granite", 1.5, 20.0),
         ("within-plate granite", 20.0, 400.0), ("ocean-ridge granite", 20.0, 8.0)),
        "pearce1984", "from memory",
    ),
    "granite_ta_yb": Diagram(
        "Granites: Ta against Yb", "yb_ppm", "ta_ppm", True,
        (granite_fields.TA_YB_ARC, granite_fields.TA_YB_PLATE, granite_fields.TA_YB_RIDGE),
        (("volcanic-arc or syn-collision granite", 0.6, 0.5), ("within-plate granite", 8.0, 15.0),
         ("within-plate or ocean-ridge granite", 30.0, 5.0), ("ocean-ridge granite", 20.0, 0.4)),
        "pearce1984", "from memory",
    ),
}  # fmt: skip
