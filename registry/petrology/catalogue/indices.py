"""Records of the indices of differentiation and of granites, and of the oxidation of the rock's iron."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.petrology import granite_indices, indices, redox_series
from registry.petrology.catalogue.records import Cause, Method, Quantity, Warning
from registry.petrology.catalogue.trace import ZERO_DENOMINATOR
from registry.petrology.constants import FE2O3_FROM_FEO

_SHEET = "index_sheet"
_AL_ALKALIS = ("al2o3_wt", "na2o_wt", "k2o_wt")
_FELDSPARS = ("or_wt", "ab_wt", "an_wt")
_FOIDS = ("ne_wt", "lc_wt", "kp_wt")


def _sum_is_zero(*columns: Any) -> Any:
    return np.add.reduce(columns) <= 0.0


def nothing_to_divide_by(*columns: str) -> tuple[Cause, ...]:
    """The cause of a missing quotient whose denominator is the sum of ``columns``."""
    return (Cause("zero_denominator", ZERO_DENOMINATOR, _sum_is_zero, columns),)


def _index(name: str, label: str, unit: str, meaning: str, low: float | None = None, high: float | None = None) -> Any:
    return Quantity(name, _SHEET, label, unit, meaning, low, high)


def _silica_too_low(silica: Any) -> Any:
    return silica <= indices.RITTMANN_SIO2_WT


def _no_titration(ferrous: Any) -> Any:
    return np.isnan(ferrous)


def _ferrous_exceeds_total(total: Any, ferrous: Any) -> Any:
    return FE2O3_FROM_FEO * ferrous > total + redox_series.ROUNDING_WT


def _no_ferrous(ferrous: Any) -> Any:
    return ferrous <= 0.0


def _no_ferric(ratio: Any) -> Any:
    return ratio <= 0.0


_NO_TITRATION = Cause(
    "no_titrated_feo",
    "FeO was not titrated; a computed split of the iron never decides redox",
    _no_titration,
    ("feo_titrated_wt",),
)
_EXCEEDS = Cause(
    "ferrous_exceeds_total",
    "titrated FeO is more than the total iron: the two analyses exclude each other",
    _ferrous_exceeds_total,
    ("fe2o3t_wt", "feo_titrated_wt"),
)

METHODS = (
    Method(
        "mg_number", "Mg-number", indices.mg_number, ("mgo_wt", "feo_wt"),
        (_index("mg_number", "Mg-number", "mol%", "100 Mg/(Mg + Fe2+), molar, by the iron split used", 0.0, 100.0),),
        "mgnumber", "definition", "common practice", standard_error="that of the iron split",
        note="Defined for any rock; depends on the iron split, named in iron_basis.",
        causes=nothing_to_divide_by("mgo_wt", "feo_wt"),
    ),
    Method(
        "mg_number_total_iron", "Mg-number, total iron", indices.mg_number, ("mgo_wt", "feot_wt"),
        (_index("mg_number_total_iron", "Mg-number (total iron)", "mol%",
                "100 Mg/(Mg + Fe), molar, all iron as FeO", 0.0, 100.0),),
        "mgnumber", "definition", "common practice", standard_error="that of the analysis",
        note="Defined for any rock. Criteria use this one: it does not depend on a split.",
        causes=nothing_to_divide_by("mgo_wt", "feot_wt"),
    ),
    Method(
        "differentiation_index", "differentiation index", indices.differentiation_index,
        ("q_wt", "or_wt", "ab_wt", *_FOIDS),
        (_index("differentiation_index", "Differentiation index", "wt%",
                "Q + Or + Ab + Ne + Lc + Kp of the stored norm", 0.0, 100.5),),
        "thornton1960", "definition, p. 664", "published", standard_error="that of the norm",
        note="Volatile-free norm. Acmite is not counted, so a peralkaline rock comes out low.",
    ),
    Method(
        "solidification_index", "solidification index", indices.solidification_index,
        ("mgo_wt", "feo_wt", "fe2o3_wt", "na2o_wt", "k2o_wt"),
        (_index("solidification_index", "Solidification index", "wt%",
                "100 MgO/(MgO + FeO + Fe2O3 + Na2O + K2O)", 0.0, 100.0),),
        "kuno1959", "definition", "from memory", standard_error="that of the iron split",
        note="As analysed; closure does not change it. Primary basalt about 40.",
        causes=nothing_to_divide_by("mgo_wt", "feo_wt", "fe2o3_wt", "na2o_wt", "k2o_wt"),
    ),
    Method(
        "larsen_index", "Larsen index", indices.larsen_index, ("sio2_wt", "k2o_wt", "feot_wt", "mgo_wt", "cao_wt"),
        (_index("larsen_index", "Larsen index", "wt%", "SiO2/3 + K2O - FeOt - MgO - CaO, as analysed"),),
        "larsen1938", "definition", "from memory", standard_error="that of the analysis", note="As analysed (raw wt%).",
    ),
    Method(
        "crystallization_index", "crystallization index", indices.crystallization_index,
        ("an_wt", "di_en_wt", "ol_fo_wt", "hy_en_wt", "c_wt", "sio2_vf_wt"),
        (_index("crystallization_index", "Crystallization index", "wt%",
                "An + Mg-diopside + forsterite + Mg-spinel of the stored norm", 0.0, 160.0),),
        "poldervaart1964", "definition, p. 281", "published", standard_error="that of the norm",
        note="Volatile-free norm. Spinel only in ultrabasic rocks, from corundum (its factor is recomputed).",
    ),
    Method(
        "felsic_index", "felsic index", indices.felsic_index, ("na2o_wt", "k2o_wt", "cao_wt"),
        (_index("felsic_index", "Felsic index", "wt%", "100 (Na2O + K2O)/(Na2O + K2O + CaO)", 0.0, 100.0),),
        "simpson1954", "definition", "published", standard_error="that of the analysis",
        note="As analysed; closure does not change it.", causes=nothing_to_divide_by("na2o_wt", "k2o_wt", "cao_wt"),
    ),
    Method(
        "mafic_index", "mafic index", indices.mafic_index, ("feo_wt", "fe2o3_wt", "mgo_wt"),
        (_index("mafic_index", "Mafic index", "wt%", "100 (FeO + Fe2O3)/(FeO + Fe2O3 + MgO)", 0.0, 100.0),),
        "wager1939", "definition", "from memory", standard_error="that of the iron split",
        note="As analysed; closure does not change it.", causes=nothing_to_divide_by("feo_wt", "fe2o3_wt", "mgo_wt"),
    ),
    Method(
        "a_cnk", "A/CNK", granite_indices.a_cnk, ("al2o3_wt", "cao_wt", "na2o_wt", "k2o_wt"),
        (_index("a_cnk", "A/CNK", "1", "molar Al2O3/(CaO + Na2O + K2O)", 0.0),),
        "shand1943", "definition", "published", standard_error="that of the analysis",
        note="Closure does not change it. Apatite is not taken off: see asi.",
        causes=nothing_to_divide_by("cao_wt", "na2o_wt", "k2o_wt"),
    ),
    Method(
        "a_nk", "A/NK", granite_indices.a_nk, _AL_ALKALIS,
        (_index("a_nk", "A/NK", "1", "molar Al2O3/(Na2O + K2O)", 0.0),),
        "shand1943", "definition", "published", standard_error="that of the analysis",
        note="Closure does not change it.", causes=nothing_to_divide_by("na2o_wt", "k2o_wt"),
    ),
    Method(
        "asi", "alumina saturation index", granite_indices.asi,
        ("al2o3_wt", "cao_wt", "na2o_wt", "k2o_wt", "p2o5_wt"),
        (_index("asi", "ASI", "1", "molar Al2O3/(CaO - 10/3 P2O5 + Na2O + K2O)", 0.0),),
        "frost2001", "Al/(Ca - 1.67 P + Na + K) in cations, p. 2035", "published",
        standard_error="that of the analysis",
        note="Closure does not change it. 1.67 belongs to the element P, 10/3 to P2O5 [zen1988].",
        causes=nothing_to_divide_by("cao_wt", "na2o_wt", "k2o_wt"),
    ),
    Method(
        "agpaitic_index", "agpaitic index", granite_indices.agpaitic_index, _AL_ALKALIS,
        (_index("agpaitic_index", "Agpaitic index", "1", "molar (Na + K)/Al; above 1 peralkaline", 0.0),),
        "liegeois1987", "definition", "from memory", standard_error="that of the analysis",
        note="Closure does not change it. 0.87 and more: alkaline granite.", causes=nothing_to_divide_by("al2o3_wt"),
    ),
    Method(
        "mali", "modified alkali-lime index", granite_indices.mali, ("na2o_vf_wt", "k2o_vf_wt", "cao_vf_wt"),
        (_index("mali", "MALI", "wt%", "Na2O + K2O - CaO of the volatile-free analysis", -60.0, 30.0),),
        "frost2001", "definition, p. 2034", "published", standard_error="that of the analysis", note="Volatile-free.",
    ),
    Method(
        "fe_number", "iron number", granite_indices.fe_number, ("feot_wt", "mgo_wt"),
        (_index("fe_number", "Fe-number", "1", "FeOt/(FeOt + MgO) by weight, total iron", 0.0, 1.0),),
        "frost2001", "Fe*, p. 2034", "published", standard_error="that of the analysis",
        note="Closure does not change it; total iron, so the line 0.486 + 0.0046 SiO2 applies.",
        causes=nothing_to_divide_by("feot_wt", "mgo_wt"),
    ),
    Method(
        "rittmann_index", "Rittmann index", indices.rittmann_index, ("sio2_wt", "na2o_wt", "k2o_wt"),
        (_index("rittmann_index", "Rittmann index", "wt%", "(Na2O + K2O)^2/(SiO2 - 43), as analysed", 0.0),),
        "rittmann1957", "definition", "published",
        standard_error="that of the analysis",
        note="As analysed. Below 1.8 calcic, to 3.3 calc-alkaline, to 9 alkaline, above peralkaline (from memory).",
        causes=(Cause("silica_at_most_43", "SiO2 is at most 43 wt%: the index is not defined", _silica_too_low,
                      ("sio2_wt",)),),
    ),
    Method(
        "r1_r2", "R1 and R2", indices.r1_r2,
        ("sio2_wt", "na2o_wt", "k2o_wt", "feot_wt", "tio2_wt", "cao_wt", "mgo_wt", "al2o3_wt"),
        (_index("r1", "R1", "millications", "4 Si - 11 (Na + K) - 2 (Fe + Ti), as analysed"),
         _index("r2", "R2", "millications", "6 Ca + 2 Mg + Al, as analysed", 0.0)),
        "delaroche1980", "definition, p. 183", "published", standard_error="that of the analysis",
        note="As analysed, millications a 100 g. Coordinates only: the printed field grid is not reproduced.",
    ),
    Method(
        "streckeisen_coordinates", "Q', F' and ANOR", indices.streckeisen_coordinates,
        ("q_wt", *_FELDSPARS, *_FOIDS),
        (_index("q_prime", "Q'", "wt%", "100 Q/(Q + Or + Ab + An) of the stored weight norm", 0.0, 100.0),
         _index("f_prime", "F'", "wt%", "100 (Ne + Lc + Kp)/(Ne + Lc + Kp + Or + Ab + An)", 0.0, 100.0),
         _index("anor", "ANOR", "wt%", "100 An/(Or + An) of the stored weight norm", 0.0, 100.0)),
        "streckeisen1979", "definition", "from memory", standard_error="that of the norm",
        note="Volatile-free CIPW weight norm; the original takes a molecular norm. Coordinates only: no rock is named "
        "from them.",
        causes=nothing_to_divide_by("or_wt", "an_wt"),
    ),
    Method(
        "fssi", "feldspathoid silica-saturation index", granite_indices.fssi, ("q_wt", "lc_wt", "ne_wt", "kp_wt"),
        (_index("fssi", "FSSI", "1", "(Q - [Lc + 2 (Ne + Kp)])/100 of the stored norm", -2.0, 1.0),),
        "frost2008", "definition, p. 1957", "from memory", standard_error="that of the norm",
        note="Volatile-free norm.",
    ),
    Method(
        "fe2o3_feo", "Fe2O3/FeO", redox_series.fe2o3_feo, ("fe2o3t_wt", "feo_titrated_wt"),
        (_index("fe2o3_feo", "Fe2O3/FeO", "1", "ferric over ferrous iron by weight, titrated FeO only", 0.0),),
        "ishihara1977", "definition by mass", "published", standard_error="that of the titration",
        note="Never from a computed split.",
        causes=(
            _NO_TITRATION, _EXCEEDS,
            Cause("zero_denominator", ZERO_DENOMINATOR, _no_ferrous, ("feo_titrated_wt",)),
        ),
    ),
    Method(
        "delta_ox", "oxidation index", redox_series.delta_ox, ("fe2o3_feo", "feot_wt"),
        (_index("delta_ox", "Oxidation index", "log10 units",
                "log10(Fe2O3/FeO) + 0.3 + 0.03 FeOt; above 0 oxidised; titrated FeO only"),),
        "blevin2004", "definition", "provisional", standard_error="not stated",
        note="Raw wt%. From memory: provisional wherever a verdict hangs on it.",
        causes=(
            _NO_TITRATION, _EXCEEDS,
            Cause("no_ferric_iron", "the titration leaves no ferric iron: a logarithm is not defined", _no_ferric,
                  ("fe2o3_feo",)),
            Cause("zero_denominator", ZERO_DENOMINATOR, _no_ferrous, ("feo_titrated_wt",)),
        ),
    ),
)  # fmt: skip


def _sulphidic(value: Any, sulphur: Any, conventions: Any) -> Any:
    return (sulphur > conventions.sulphur_warn_wt) & ~np.isnan(value)


def _phosphorus_exceeds_lime(value: Any, cao: Any, p2o5: Any) -> Any:
    return (granite_indices.silicate_calcium_moles(cao, p2o5) < 0.0) & ~np.isnan(value)


def phosphorus_warning(quantity: str, label: str) -> Warning:
    """P2O5 asks for more lime than there is: the lime term of ``quantity`` stands at zero."""
    return Warning(
        f"{quantity}_phosphorus_exceeds_lime",
        quantity,
        "p2o5_wt",
        f"P2O5 {{value}} wt% asks for more lime than was found: the lime term of {label} is taken as zero",
        _phosphorus_exceeds_lime,
        (quantity, "cao_wt", "p2o5_wt"),
    )


def _iron_altered(value: Any, loi: Any, conventions: Any) -> Any:
    return (loi > conventions.loi_warn_wt) & ~np.isnan(value)


WARNINGS = (
    Warning(
        "mg_number_sulphidic",
        "mg_number",
        "s_wt",
        "S is {value} wt%: sulphide ties iron, so the Mg-number of the silicates is higher",
        _sulphidic,
        ("mg_number", "s_wt", "conventions"),
    ),
    phosphorus_warning("asi", "ASI"),
    Warning(
        "fe2o3_feo_altered",
        "fe2o3_feo",
        "loi_wt",
        "LOI is {value} wt%: the ratio of ferric to ferrous iron may not be the magma's",
        _iron_altered,
        ("fe2o3_feo", "loi_wt", "conventions"),
    ),
)
