"""Records of the iron split: total iron, the split used and where it came from."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.petrology.catalogue.records import Cause, Method, Quantity, Warning
from registry.petrology.constants import FE2O3_FROM_FEO
from registry.petrology.iron import CONVENTION_OXIDES, ROUNDING_WT, iron_split, resolve_total_iron

_REPORTED = ("fe2o3t_reported_wt", "feo_titrated_wt", "fe2o3_ferric_wt")
_INPUTS = (*_REPORTED, *CONVENTION_OXIDES, "is_plutonic", "conventions")
_SHEET = "composition_sheet"


def _split(*values: Any) -> dict[str, Any]:
    *columns, is_plutonic, conventions = values
    return iron_split(dict(zip(_INPUTS[:-2], columns, strict=True)), is_plutonic, conventions)


def _no_total(reported: Any, ferrous: Any, ferric: Any) -> Any:
    return np.isnan(resolve_total_iron(reported, ferrous, ferric)["fe2o3t_wt"])


def _exceeds_total(reported: Any, ferrous: Any, ferric: Any) -> Any:
    """Titrated FeO (or, without it, ferric iron) above the reported total."""
    from_ferrous = ferrous * FE2O3_FROM_FEO > reported + ROUNDING_WT
    return from_ferrous | (np.isnan(ferrous) & (ferric > reported + ROUNDING_WT))


def _no_silica_or_alkalis(silica: Any, soda: Any, potash: Any) -> Any:
    return np.isnan(silica) | np.isnan(soda) | np.isnan(potash)


def _totals_disagree(reported: Any, ferrous: Any, ferric: Any) -> Any:
    difference = np.abs(ferric + FE2O3_FROM_FEO * ferrous - reported)
    return difference > np.maximum(0.1, 0.02 * reported)


def _assumed_volcanic(ferrous: Any, ferric: Any, split: Any, plutonic: Any, extrusive: Any, conventions: Any) -> Any:
    modelled = np.isnan(ferrous) & np.isnan(ferric) & ~np.isnan(split)
    return modelled & ~plutonic & ~extrusive & (conventions.iron_split == "le_maitre")


METHODS = (
    Method(
        key="iron",
        label="iron split",
        function=_split,
        inputs=_INPUTS,
        optional=(*_REPORTED, *CONVENTION_OXIDES),
        outputs=(
            Quantity(
                "fe2o3t_wt", _SHEET, "Fe2O3 total", "wt%", "total iron as Fe2O3, as reported or summed", 0.0, 160.0
            ),
            Quantity("feot_wt", _SHEET, "FeO total", "wt%", "total iron as FeO", 0.0, 130.0),
            Quantity("fe2o3_wt", _SHEET, "Fe2O3", "wt%", "ferric iron of the split used", 0.0, 160.0),
            Quantity("feo_wt", _SHEET, "FeO", "wt%", "ferrous iron of the split used", 0.0, 130.0),
            Quantity("iron_basis", _SHEET, "iron basis", "text", "measurement or convention that split the iron"),
        ),
        source="lemaitre1976a",
        equation="regressions of volcanic and of plutonic rocks, p. 185; others by convention",
        status="from memory",
        standard_error="not stated; the scatter about the regressions is large",
        note="Titrated FeO decides. Without it the convention iron_split: Le Maitre 1976 (default), Middlemost 1989 "
        "(provisional, fields without excess alkalis only), a fixed ratio [brooks1976] or Kress and Carmichael 1991 "
        "[kress1991] at 1200 C and the buffer of the convention [frost1991]. A computed split never decides redox.",
        causes=(
            Cause("no_total_iron", "total iron was not reported", _no_total, _REPORTED),
            Cause(
                "iron_measurements_exclude",
                "titrated FeO (or ferric iron) is above the total iron reported: no split can be made of them",
                _exceeds_total,
                _REPORTED,
            ),
            Cause(
                "no_silica_or_alkalis",
                "the convention for the iron split needs SiO2, Na2O and K2O",
                _no_silica_or_alkalis,
                ("sio2_wt", "na2o_wt", "k2o_wt"),
            ),
            Cause(
                "iron_split_outside_range",
                "the convention for the iron split gives no ratio for this composition (Le Maitre 1976: "
                "FeO/(FeO + Fe2O3) outside 0.05 to 1; Middlemost 1989: alkaline or outside the TAS fields)",
                np.isfinite,
                ("feot_wt",),
            ),
        ),
    ),
)

WARNINGS = (
    Warning(
        "feo_exceeds_total_iron",
        "feo_titrated_wt",
        "feo_titrated_wt",
        "titrated FeO {value} wt% (or reported ferric iron) is above the total iron reported, "
        "{fe2o3t_reported_wt} wt% as Fe2O3; check the units and columns of the certificate, no iron split is made",
        _exceeds_total,
        _REPORTED,
    ),
    Warning(
        "total_iron_disagrees",
        "fe2o3t_wt",
        "fe2o3t_wt",
        "reported total iron {value} wt% as Fe2O3 differs by more than 0.1 wt% and 2 % from ferric plus titrated "
        "ferrous iron (Fe2O3 {fe2o3_ferric_wt}, FeO {feo_titrated_wt} wt%); the reported total is used (common "
        "practice, no source)",
        _totals_disagree,
        _REPORTED,
    ),
    Warning(
        "iron_split_assumed_volcanic",
        "feo_wt",
        "feo_wt",
        "neither an intrusion nor a plutonic or volcanic word is known for this sample: iron is split as in a volcanic "
        "rock (FeO {value} wt%)",
        _assumed_volcanic,
        ("feo_titrated_wt", "fe2o3_ferric_wt", "feo_wt", "is_plutonic", "logged_extrusive", "conventions"),
    ),
)
