"""Records of the classes: silica, TAS, series, alumina, granites, redox."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.petrology import classification, granite_fields, redox_series, series, tas
from registry.petrology.catalogue.records import Cause, Method, Quantity, Range, Warning
from registry.petrology.quotients import is_absent

_SHEET = "class_sheet"
_ALKALIS_VF = ("na2o_vf_wt", "k2o_vf_wt")
_TAS_INPUTS = (
    "sio2_vf_wt", *_ALKALIS_VF, "mgo_vf_wt", "tio2_vf_wt", "q_wt", "or_wt", "ab_wt", "an_wt", "ne_wt", "ol_wt",
    "is_plutonic", "logged_cumulate",
)  # fmt: skip
_REDOX_INPUTS = ("delta_ox", "magnetic_susceptibility_si", "loi_wt", "logged_destroyed_magnetite", "conventions")


def _text(name: str, label: str, meaning: str, sheet: str = _SHEET) -> Quantity:
    return Quantity(name, sheet, label, "text", meaning)


def _not_granitic(quartz: Any) -> Any:
    return ~(quartz > classification.GRANITE_Q_WT) & ~np.isnan(quartz)


def _below_48(silica: Any) -> Any:
    return silica < series.K2O_SIO2_FROM_WT


def _afm_not_drawn(na2o: Any, k2o: Any, feot: Any, mgo: Any) -> Any:
    m = series.afm_coordinates(na2o, k2o, feot, mgo)["m"]
    return np.isfinite(m) & np.isnan(series.afm_divide_f(m))


def _too_alkalic(na2o: Any, k2o: Any) -> Any:
    return na2o + k2o > series.ALKALINE_DIVIDE_USABLE_TO_WT


def _without_subname(names: Any, nepheline: Any) -> Any:
    """Named, and the norm that the sub-names of basalt ask for is there: only a field without sub-names is left."""
    return ~is_absent(names) & ~np.isnan(nepheline)


def _off_diagram(rb: Any, y: Any, nb: Any) -> Any:
    known = np.isfinite(rb) & np.isfinite(y) & np.isfinite(nb)
    return known & ~granite_fields.granite_field_rb_y_nb(rb, y, nb).astype(bool)


def _no_evidence(index: Any, susceptibility: Any, *_: Any) -> Any:
    return np.isnan(index) & np.isnan(susceptibility)


_NOT_GRANITIC = Cause(
    "not_granitic",
    "normative quartz is at most 5 wt%: the diagram is for granites",
    _not_granitic,
    ("q_wt",),
)

METHODS = (
    Method(
        "silica_class", "silica class", classification.silica_class, ("sio2_vf_wt",),
        (_text("silica_class", "Silica class", "ultrabasic, basic, intermediate or acid"),),
        "lemaitre2002", "limits 45, 52, 63 wt% SiO2", "from memory",
        note="Volatile-free. A limit of 66 for acid is in print too.",
    ),
    Method(
        "tas", "total alkali-silica names", tas.tas_names, _TAS_INPUTS,
        (_text("tas_volcanic", "TAS name, volcanic", "name of the lava of this composition"),
         _text("tas_plutonic", "TAS name, plutonic", "name of the plutonic rock of this composition"),
         _text("tas_subname", "TAS sub-name", "sodic or potassic kind of S1-S3; alkali or subalkali basalt")),
        "lebas1986", "fig. 2; corners of [lemaitre2002]; plutonic names of [middlemost1994]", "from memory",
        optional=("mgo_vf_wt", "tio2_vf_wt", "q_wt", "or_wt", "ab_wt", "an_wt", "ne_wt", "ol_wt"),
        note="Volatile-free. On a vertical edge the field of higher SiO2, on any other the one of higher alkalis. "
        "Names of high-Mg lavas are not given to plutonic rocks or cumulates.",
        causes=(Cause("no_subname", "the rock's TAS field has no sub-names", _without_subname,
                      ("tas_volcanic", "ne_wt")),),
    ),
    Method(
        "a_type", "A-type granite", classification.a_type, ("ga_al_10000", "zr_nb_ce_y", "q_wt"),
        (_text("a_type", "A-type", "10000 Ga/Al above 2.6 and Zr + Nb + Ce + Y above 350 ppm"),),
        "whalen1987", "limits of table 1 and fig. 1", "from memory",
        note="Both limits are asked: highly fractionated I- and S-type granites pass on Ga/Al alone.",
        causes=(_NOT_GRANITIC,),
    ),
    Method(
        "k2o_series", "K2O-SiO2 series", series.k2o_series, ("sio2_vf_wt", "k2o_vf_wt"),
        (_text("k2o_series", "K2O series", "low-K tholeiitic, medium-K or high-K calc-alkaline, shoshonitic"),),
        "peccerillo1976", "lines of fig. 2", "from memory",
        note="Volatile-free. Published lines run from 48 to 70 % SiO2 (the uppermost to 63), carried on straight "
        "beyond. They are shown to be bands [rickwood1989].",
        causes=(Cause("below_48_silica", "SiO2 is below 48 wt%, where the lines begin", _below_48, ("sio2_vf_wt",)),),
    ),
    Method(
        "afm_series", "AFM series", series.afm_series, ("na2o_wt", "k2o_wt", "feot_wt", "mgo_wt"),
        (_text("afm_series", "AFM series", "tholeiitic or calc-alkaline by Na2O + K2O, FeOt and MgO"),),
        "irvine1971", "divide of fig. 2", "from memory",
        note="Closure does not change it. Drawn for M of 5 to 40 per cent. Another divide is in print [kuno1968].",
        causes=(Cause("afm_divide_not_drawn",
                      "MgO is outside 5 to 40 per cent of the AFM sum, where the divide is drawn",
                      _afm_not_drawn, ("na2o_wt", "k2o_wt", "feot_wt", "mgo_wt")),),
    ),
    Method(
        "alkalinity", "alkaline or subalkaline", series.alkalinity, ("sio2_vf_wt", *_ALKALIS_VF),
        (_text("alkalinity", "Alkalinity", "alkaline or subalkaline by Na2O + K2O and SiO2"),),
        "irvine1971", "appendix, polynomial in Na2O + K2O", "from memory",
        note="Volatile-free. A straight line for Hawaii is in print too [macdonald1964].",
        causes=(Cause("alkalis_beyond_divide", "Na2O + K2O is above 9.5 wt%, where the divide's polynomial fails",
                      _too_alkalic, _ALKALIS_VF),),
    ),
    Method(
        "alumina_class", "alumina class", classification.alumina_class, ("a_cnk", "a_nk"),
        (_text("alumina_class", "Alumina class", "peraluminous, metaluminous or peralkaline"),),
        "shand1943", "A/CNK and A/NK against 1", "published",
        note="The line at A/CNK 1.1 for S-type granites is not drawn here.",
    ),
    Method(
        "fe_class", "ferroan or magnesian", classification.fe_class, ("fe_number", "sio2_vf_wt"),
        (_text("fe_class", "Iron class", "ferroan above FeOt/(FeOt + MgO) = 0.486 + 0.0046 SiO2, else magnesian"),),
        "frost2001", "line of fig. 2, total iron", "from memory", calibration=(Range("sio2_vf_wt", 48.0, 80.0),),
        note="Volatile-free SiO2; down to 48 % SiO2 by [frost2008].",
    ),
    Method(
        "mali_class", "alkali-lime class", classification.mali_class, ("mali", "sio2_vf_wt"),
        (_text("mali_class", "Alkali-lime class", "calcic, calc-alkalic, alkali-calcic or alkalic"),),
        "frost2001", "lines of fig. 3", "from memory", calibration=(Range("sio2_vf_wt", 52.0, 80.0),),
        note="Volatile-free. Peacock's index of a suite [peacock1931] is what the lines generalise.",
    ),
    Method(
        "granite_field", "tectonic field of a granite", granite_fields.granite_field,
        ("rb_ppm", "y_ppm", "nb_ppm", "q_wt"),
        (_text("granite_field", "Granite field", "tectonic field by Rb against Y + Nb"),),
        "pearce1984", "fig. 4, Rb against Y + Nb", "from memory",
        note="Normative quartz above 5 wt% stands for modal quartz. Post-collision granites overlap all fields.",
        causes=(
            _NOT_GRANITIC,
            Cause("off_diagram", "Rb or Y + Nb lies off the diagram (1-2000 and 2-2000 ppm)", _off_diagram,
                  ("rb_ppm", "y_ppm", "nb_ppm")),
        ),
    ),
    Method(
        "redox_series", "magnetite or ilmenite series", redox_series.redox_series, _REDOX_INPUTS,
        (_text("redox_series", "Redox series", "magnetite or ilmenite series, from what was measured"),
         _text("redox_evidence", "Redox evidence", "what the redox series rests on", sheet="derived")),
        "ishihara1977", "definition; susceptibility limit 3e-3 SI from memory; oxidation index of [blevin2004]",
        "provisional", optional=("delta_ox", "magnetic_susceptibility_si", "loi_wt"),
        note="Never from a computed split of the iron. LOI above the convention's limit blocks both witnesses; low "
        "susceptibility of phyllic, argillic or greisen rock is no evidence.",
        causes=(
            Cause("redox_conflict", "titrated FeO and susceptibility say different series",
                  redox_series.is_redox_conflict, _REDOX_INPUTS),
            Cause("magnetite_destroyed",
                  "susceptibility is low, but alteration (LOI or the log) may have destroyed magnetite",
                  redox_series.is_magnetite_destroyed, _REDOX_INPUTS),
            Cause("redox_loi_high", "LOI is above the limit: iron and magnetite are no longer the magma's",
                  redox_series.is_loi_too_high, _REDOX_INPUTS),
            Cause("no_redox_evidence",
                  "neither titrated FeO nor magnetic susceptibility: a computed split decides nothing",
                  _no_evidence, _REDOX_INPUTS),
        ),
    ),
)  # fmt: skip


def _has(words: Any) -> Any:
    return ~is_absent(words)


def _k2o_line_extended(words: Any, silica: Any) -> Any:
    return (silica > series.K2O_SIO2_DRAWN_TO_WT) & _has(words)


def _afm_alkaline(words: Any, alkalinity: Any, na2o: Any, k2o: Any) -> Any:
    return _has(words) & ((alkalinity == "alkaline") | _too_alkalic(na2o, k2o))


def _tas_altered(words: Any, loi: Any, co2: Any, h2o: Any, mgo: Any, conventions: Any) -> Any:
    altered = (loi > 4.0) | (co2 > 0.5) | (h2o > 2.0)
    return altered & ~(mgo > conventions.loi_exempt_mgo_vf_wt) & _has(words)


def _loi_not_reported(words: Any, loi: Any) -> Any:
    return _has(words) & np.isnan(loi)


WARNINGS = (
    Warning(
        "tas_altered",
        "tas_volcanic",
        "loi_wt",
        "LOI is {value} wt% (above 4), or CO2 above 0.5 or H2O+ above 2 wt%: alkalis may have moved, the TAS name is "
        "doubtful",
        _tas_altered,
        ("tas_volcanic", "loi_wt", "co2_wt", "h2o_plus_wt", "mgo_vf_wt", "conventions"),
    ),
    Warning(
        "k2o_series_line_extended",
        "k2o_series",
        "sio2_vf_wt",
        "SiO2 is {value} wt% volatile-free: above 70 the series lines are carried on straight",
        _k2o_line_extended,
        ("k2o_series", "sio2_vf_wt"),
    ),
    Warning(
        "afm_series_alkaline",
        "afm_series",
        None,
        "the rock is alkaline: the AFM divide is meant for subalkaline rocks",
        _afm_alkaline,
        ("afm_series", "alkalinity", *_ALKALIS_VF),
    ),
    Warning(
        "redox_loi_not_reported",
        "redox_series",
        None,
        "LOI was not reported: whether the rock is fresh enough for its redox is not known",
        _loi_not_reported,
        ("redox_series", "loi_wt"),
    ),
)
