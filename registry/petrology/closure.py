"""The sum of an analysis, and the analysis without volatiles closed to 100 wt%, as the norm takes it."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.constants import FEO_FROM_FE2O3, oxide_from_element

Array = NDArray[np.float64]

#: Without one of these there is neither a sum nor a closed analysis; iron stands beside them.
NEEDED_OXIDES = ("sio2_wt", "al2o3_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt")
#: Major oxides that count as zero where they were not reported, with a warning that names them.
UNREPORTED_AS_ZERO = ("tio2_wt", "mno_wt", "p2o5_wt")
#: Minor oxides of the sum, as reported in oxide columns; what was not reported counts as zero.
MINOR_OXIDES = ("cr2o3_wt", "nio_wt", "v2o3_wt", "bao_wt", "sro_wt", "zro2_wt", "li2o_wt")
#: Oxides taken from the element in ppm where there is one, else from the oxide column.
_TRACE_OXIDES = {"cr2o3_wt": ("cr_ppm", "Cr2O3"), "nio_wt": ("ni_ppm", "NiO"), "zro2_wt": ("zr_ppm", "ZrO2")}
TRACE_ELEMENTS = tuple(column for column, _ in _TRACE_OXIDES.values())
WT_PER_PPM = 1e-4

#: The closed analysis in the order of ``volatile_free_sheet``; ``feot_vf_wt`` is total iron and not part of the sum.
CLOSED_OXIDES = (
    "sio2_wt", "tio2_wt", "al2o3_wt", "fe2o3_wt", "feo_wt", "mno_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt",
    "p2o5_wt", "cr2o3_wt", "nio_wt", "zro2_wt",
)  # fmt: skip


def volatile_free_name(column: str) -> str:
    """Column of the closed analysis: ``sio2_wt`` -> ``sio2_vf_wt``."""
    return column.removesuffix("_wt") + "_vf_wt"


def sum_of_oxides(oxides: Mapping[str, ArrayLike], fe2o3t_wt: ArrayLike, loi_wt: ArrayLike = np.nan) -> Array:
    """Total of an analysis, wt%: oxides with all iron as Fe2O3, and the loss on ignition.

    ``oxides``: ``NEEDED_OXIDES``, ``UNREPORTED_AS_ZERO`` and ``MINOR_OXIDES``, wt%. CO2, S and H2O are part of the loss
    on ignition and not added again. NaN where one of ``NEEDED_OXIDES`` or total iron is missing; the others and the
    loss on ignition count as zero then. Common practice, no source.
    """
    needed = sum(np.asarray(oxides.get(name, np.nan), dtype=np.float64) for name in NEEDED_OXIDES)
    rest = sum(_or_zero(oxides.get(name, np.nan)) for name in (*UNREPORTED_AS_ZERO, *MINOR_OXIDES))
    return needed + np.asarray(fe2o3t_wt, dtype=np.float64) + rest + _or_zero(loi_wt)


def trace_oxides(columns: Mapping[str, ArrayLike]) -> dict[str, Array]:
    """``cr2o3_wt nio_wt zro2_wt`` from Cr, Ni and Zr in ppm, else from the oxide columns, else zero."""
    result = {}
    for oxide, (element, formula) in _TRACE_OXIDES.items():
        from_ppm = np.asarray(columns.get(element, np.nan), dtype=np.float64) * WT_PER_PPM * oxide_from_element(formula)
        from_oxide = _or_zero(columns.get(oxide, np.nan))
        result[oxide] = np.where(np.isnan(from_ppm), from_oxide, from_ppm)
    return result


def close_volatile_free(columns: Mapping[str, ArrayLike]) -> dict[str, Array]:
    """The analysis closed to 100 wt% without volatiles, by ``<oxide>_vf_wt`` with ``feot_vf_wt`` beside it.

    ``columns``: eleven major oxides with the iron split (``fe2o3_wt feo_wt``), wt%; Cr, Ni and Zr as ``cr_ppm ni_ppm
    zr_ppm`` or ``cr2o3_wt nio_wt zro2_wt``. The sum is over ``CLOSED_OXIDES``. TiO2, MnO, P2O5, Cr, Ni and Zr count as
    zero where missing; one of the other majors missing, or a sum of zero, gives NaN in that row.
    Source: common practice of norm calculation [kelsey1965]; the choice of oxides is the project's own.
    """
    traces = trace_oxides(columns)
    parts = {}
    for name in CLOSED_OXIDES:
        value = traces[name] if name in traces else columns.get(name, np.nan)
        parts[name] = _or_zero(value) if name in UNREPORTED_AS_ZERO else np.asarray(value, dtype=np.float64)
    total = np.asarray(sum(parts.values()))
    factor = 100.0 / np.where(total > 0.0, total, np.nan)
    closed = {volatile_free_name(name): value * factor for name, value in parts.items()}
    closed["feot_vf_wt"] = closed["feo_vf_wt"] + FEO_FROM_FE2O3 * closed["fe2o3_vf_wt"]
    return closed


def _or_zero(value: ArrayLike) -> Array:
    array = np.asarray(value, dtype=np.float64)
    return np.where(np.isnan(array), 0.0, array)
