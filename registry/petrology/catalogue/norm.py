"""Records of the CIPW norm and of the cation norm of the volatile-free analysis."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from registry.petrology.catalogue.records import Cause, Method, Quantity, Warning
from registry.petrology.closure import CLOSED_OXIDES, volatile_free_name
from registry.petrology.constants import molar_mass
from registry.petrology.conventions import Conventions
from registry.petrology.norm import NORM_END_MEMBERS, NORM_MINERALS, cipw_norm
from registry.petrology.norm_cation import cation_norm
from registry.petrology.norm_sequence import CAO_PER_P2O5
from registry.petrology.norm_warnings import NORM_WARNING_TEXTS, SMALLEST_WT, norm_shortfalls

_CLOSED = tuple(volatile_free_name(column) for column in CLOSED_OXIDES)
#: As analysed; their ratio to the closed values is the factor of the closing, for the volatiles a convention admits.
_ANALYSED = ("sio2_wt", "al2o3_wt", "cao_wt")
_VOLATILES = ("co2_wt", "s_wt", "f_wt", "cl_wt")
_INPUTS = (*_CLOSED, *_ANALYSED, *_VOLATILES, "conventions")

_MINERAL_NAMES = {
    "q": "quartz", "c": "corundum", "z": "zircon", "or": "orthoclase", "ab": "albite", "an": "anorthite",
    "lc": "leucite", "ne": "nepheline", "kp": "kaliophilite", "hl": "halite", "th": "thenardite", "ac": "acmite",
    "ns": "sodium metasilicate", "ks": "potassium metasilicate", "di": "diopside", "wo": "wollastonite",
    "hy": "hypersthene", "ol": "olivine", "cs": "dicalcium silicate", "mt": "magnetite", "cm": "chromite",
    "hm": "hematite", "il": "ilmenite", "tn": "titanite", "pf": "perovskite", "ru": "rutile", "ap": "apatite",
    "fr": "fluorite", "pr": "pyrite", "cc": "calcite", "di_wo": "wollastonite in diopside",
    "di_en": "enstatite in diopside", "di_fs": "ferrosilite in diopside", "hy_en": "enstatite in hypersthene",
    "hy_fs": "ferrosilite in hypersthene", "ol_fo": "forsterite in olivine", "ol_fa": "fayalite in olivine",
}  # fmt: skip


def _admitted(conventions: Conventions) -> tuple[str, ...]:
    """The volatiles that the conventions take into the norm."""
    return (
        *(("co2_wt",) if conventions.norm_co2_as_calcite else ()),
        *(("s_wt",) if conventions.norm_sulphur_as_pyrite else ()),
        *(("f_wt", "cl_wt") if conventions.norm_halogens else ()),
    )


def norm_oxides_of_sample(values: tuple[Any, ...]) -> dict[str, Any]:
    """The oxides that the stored norm is made of, from the columns in the order of the method's inputs.

    The closed analysis; volatiles that the conventions admit are multiplied by the factor of the closing, and what
    was not reported of them counts as zero.
    """
    given = dict(zip(_INPUTS, values, strict=True))
    oxides = {column: given[volatile_free_name(column)] for column in CLOSED_OXIDES}
    admitted = _admitted(given["conventions"])
    if admitted:
        analysed = np.asarray(sum(given[column] for column in _ANALYSED))
        closed = sum(given[volatile_free_name(column)] for column in _ANALYSED)
        factor = closed / np.where(analysed > 0.0, analysed, np.nan)
        for column in admitted:
            oxides[column] = np.where(np.isnan(given[column]), 0.0, given[column]) * factor
    return oxides


def norm_basis_text(conventions: Conventions) -> str:
    """What the stored norm was made of, in words."""
    words = {"co2_wt": "CO2 as calcite", "s_wt": "S as pyrite", "f_wt": "F and Cl"}
    admitted = [words[column] for column in _admitted(conventions) if column in words]
    return "volatile-free analysis closed to 100" + "".join(f", with {word}" for word in admitted)


def _weight_norm(*values: Any) -> dict[str, Any]:
    result: dict[str, Any] = dict(cipw_norm(norm_oxides_of_sample(values)))
    basis = np.full(result["norm_total_wt"].shape, None, dtype=object)
    basis[~np.isnan(result["norm_total_wt"])] = norm_basis_text(values[-1])
    return {**result, "norm_basis": basis}


def _cation_norm(*values: Any) -> dict[str, Any]:
    return cation_norm(norm_oxides_of_sample(values))


def _is_missing_closure(closed: Any) -> Any:
    return np.isnan(closed)


_VOLATILE_OF = {
    "co2_exceeds_cao": "co2_wt",
    "s_exceeds_feo": "s_wt",
    "f_exceeds_cao": "f_wt",
    "cl_exceeds_na2o": "cl_wt",
}


def _may_fall_short(values: Any, residual: Any) -> Any:
    """Rows with a residual, or with parts of one that may cancel: P2O5 beyond lime stands against missing silica."""
    given = dict(zip(_INPUTS, values, strict=True))
    if _admitted(given["conventions"]):
        return ~np.isnan(residual)
    phosphorus = given["p2o5_vf_wt"] * (CAO_PER_P2O5 * molar_mass("CaO") / molar_mass("P2O5"))
    return (np.abs(residual) > SMALLEST_WT) | (phosphorus > given["cao_vf_wt"])


def _shortfall(code: str) -> Callable[..., Any]:
    def mask(*inputs: Any) -> Any:
        *values, residual = inputs
        admitted = _admitted(values[-1])
        if (code in _VOLATILE_OF and _VOLATILE_OF[code] not in admitted) or (
            code == "oxygen_set_free" and not admitted
        ):
            return np.zeros(np.shape(residual), dtype=bool)
        result = np.zeros(np.shape(residual), dtype=bool)
        rows = np.flatnonzero(_may_fall_short(values, residual))
        if rows.size:
            few = tuple(value[rows] if isinstance(value, np.ndarray) else value for value in values)
            shortfalls = norm_shortfalls(norm_oxides_of_sample(few), {"norm_residual_wt": residual[rows]})
            result[rows] = shortfalls[code] > SMALLEST_WT
        return result

    return mask


def _mineral(column: str, sheet: str, kind: str, unit: str) -> Quantity:
    symbol = column.rpartition("_")[0]
    meaning = f"normative {_MINERAL_NAMES[symbol]}, {kind}"
    label = f"{_MINERAL_NAMES[symbol]} ({symbol.replace('_', ' ')})"
    return Quantity(column, sheet, label, unit, meaning, 0.0, 130.0 if unit == "wt%" else 100.0)


_CAUSES = (
    Cause(
        "no_closed_analysis",
        "there is no volatile-free analysis: a major oxide is missing or the iron was not split",
        _is_missing_closure,
        ("sio2_vf_wt",),
    ),
)
_OPTIONAL = (*_ANALYSED, *_VOLATILES)

METHODS = (
    Method(
        key="norm",
        label="CIPW norm",
        function=_weight_norm,
        inputs=_INPUTS,
        optional=_OPTIONAL,
        outputs=(
            *(_mineral(column, "norm_sheet", "CIPW", "wt%") for column in (*NORM_MINERALS, *NORM_END_MEMBERS)),
            Quantity(
                "norm_total_wt", "norm_sheet", "sum of the norm", "wt%", "sum of the normative minerals", 0.0, 150.0
            ),
            Quantity(
                "norm_residual_wt",
                "norm_sheet",
                "residual of the norm",
                "wt%",
                "oxides used less the normative minerals; negative where silica is short",
                -60.0,
                100.0,
            ),
            Quantity("norm_basis", "norm_sheet", "basis of the norm", "text", "what the norm was made of"),
        ),
        source="kelsey1965",
        equation="steps 1 to 15; order of Cox, Bell and Pankhurst 1979, appendix 3; mean masses of Verma et al. 2003",
        status="from memory",
        note="Mn and Ni go with ferrous iron at the mean mass of the group. CO2, S, F and Cl only by convention.",
        causes=_CAUSES,
    ),
    Method(
        key="cation_norm",
        label="Barth-Niggli cation norm",
        function=_cation_norm,
        inputs=_INPUTS,
        optional=_OPTIONAL,
        outputs=tuple(
            _mineral(column.removesuffix("_wt") + "_cat", "cation_norm_sheet", "Barth-Niggli", "cation %")
            for column in (*NORM_MINERALS, *NORM_END_MEMBERS)
        ),
        source="barth1962",
        equation="sequence of the CIPW norm in cation proportions, sum 100",
        status="from memory",
        note="Anions of halite, fluorite and pyrite do not count.",
        causes=_CAUSES,
    ),
)

WARNINGS = tuple(
    Warning(
        code,
        "norm_residual_wt",
        "norm_residual_wt",
        f"{text}; residual of the norm {{value}} wt%",
        _shortfall(code),
        (*_INPUTS, "norm_residual_wt"),
    )
    for code, text in NORM_WARNING_TEXTS.items()
    if code != "so3_exceeds_na2o"  # the stored norm takes no SO3
)
