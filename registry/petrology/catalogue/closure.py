"""Records of the sum of the analysis and of the volatile-free analysis closed to 100."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.petrology.catalogue.records import Cause, Method, Quantity, Warning
from registry.petrology.closure import (
    CLOSED_OXIDES,
    MINOR_OXIDES,
    NEEDED_OXIDES,
    TRACE_ELEMENTS,
    UNREPORTED_AS_ZERO,
    close_volatile_free,
    sum_of_oxides,
    volatile_free_name,
)

_SUM_INPUTS = (*NEEDED_OXIDES, *UNREPORTED_AS_ZERO, *MINOR_OXIDES, "fe2o3t_wt", "loi_wt")
_CLOSE_INPUTS = (*CLOSED_OXIDES, *TRACE_ELEMENTS)
_CLOSE_OPTIONAL = (*UNREPORTED_AS_ZERO, "cr2o3_wt", "nio_wt", "zro2_wt", *TRACE_ELEMENTS)
_LABELS = {
    "sio2": "SiO2", "tio2": "TiO2", "al2o3": "Al2O3", "fe2o3": "Fe2O3", "feo": "FeO", "feot": "FeO total",
    "mno": "MnO", "mgo": "MgO", "cao": "CaO", "na2o": "Na2O", "k2o": "K2O", "p2o5": "P2O5", "cr2o3": "Cr2O3",
    "nio": "NiO", "zro2": "ZrO2",
}  # fmt: skip
#: The order of ``volatile_free_sheet``.
_SHEET_ORDER = (
    "sio2", "tio2", "al2o3", "fe2o3", "feo", "feot", "mno", "mgo", "cao", "na2o", "k2o", "p2o5", "cr2o3", "nio",
    "zro2",
)  # fmt: skip


def _sum(*values: Any) -> Any:
    *oxides, fe2o3t, loi = values
    return sum_of_oxides(dict(zip(_SUM_INPUTS[:-2], oxides, strict=True)), fe2o3t, loi)


def _close(*values: Any) -> dict[str, Any]:
    return close_volatile_free(dict(zip(_CLOSE_INPUTS, values, strict=True)))


def _no_split(ferric: Any, ferrous: Any, total: Any, *others: Any) -> Any:
    """The split alone is wanting: all other majors that the closure needs are there."""
    complete = ~np.logical_or.reduce([np.isnan(column) for column in others])
    return complete & np.isfinite(total) & (np.isnan(ferric) | np.isnan(ferrous))


def _counted_as_zero(column: Any, closed: Any) -> Any:
    return np.isnan(column) & ~np.isnan(closed)


def _outside(total: Any, conventions: Any) -> Any:
    return (total < conventions.total_warn_low_wt) | (total > conventions.total_warn_high_wt)


METHODS = (
    Method(
        key="total",
        label="sum of the analysis",
        function=_sum,
        inputs=_SUM_INPUTS,
        optional=(*UNREPORTED_AS_ZERO, *MINOR_OXIDES, "loi_wt"),
        outputs=(
            Quantity(
                "total_wt",
                "composition_sheet",
                "total",
                "wt%",
                "sum of the oxides with all iron as Fe2O3, and loss on ignition",
                0.0,
                300.0,
            ),
        ),
        source="cox1979",
        equation="sum over the oxides reported; CO2, S and H2O are part of the loss on ignition",
        status="common practice",
        note="Minor oxides and a loss on ignition that were not reported count as zero.",
    ),
    Method(
        key="closure",
        label="volatile-free analysis",
        function=_close,
        inputs=_CLOSE_INPUTS,
        optional=_CLOSE_OPTIONAL,
        outputs=tuple(
            Quantity(
                volatile_free_name(f"{stem}_wt"),
                "volatile_free_sheet",
                f"{_LABELS[stem]} volatile-free",
                "wt%",
                f"{_LABELS[stem]} of the analysis closed to 100 without volatiles"
                + (
                    ", all iron as FeO" if stem == "feot" else ", after the iron split" if stem.startswith("fe") else ""
                ),
                0.0,
                130.0 if stem == "feot" else 100.0,
            )
            for stem in _SHEET_ORDER
        ),
        source="kelsey1965",
        equation="100 x oxide / sum of the eleven majors with Cr2O3, NiO and ZrO2",
        status="common practice",
        note="Cr, Ni and Zr from ppm, else from their oxides. Ba, Sr, Rb and V are left out.",
        causes=(
            Cause(
                "iron_not_split",
                "total iron is known but could not be split into ferric and ferrous iron",
                _no_split,
                ("fe2o3_wt", "feo_wt", "feot_wt", *NEEDED_OXIDES),
            ),
        ),
    ),
)

WARNINGS = (
    *(
        Warning(
            f"{column.removesuffix('_wt')}_counted_as_zero",
            volatile_free_name(column),
            None,
            f"{_LABELS[column.removesuffix('_wt')]} was not reported and counts as zero in the volatile-free analysis",
            _counted_as_zero,
            (column, "sio2_vf_wt"),
        )
        for column in UNREPORTED_AS_ZERO
    ),
    Warning(
        "total_outside_limits",
        "total_wt",
        "total_wt",
        "the oxides sum to {value} wt%, outside the convention's limits of a good analysis (as shipped 98.5 to 101.5)",
        _outside,
        ("total_wt", "conventions"),
    ),
)
