"""Records of the indices of alteration."""

from __future__ import annotations

from registry.petrology import alteration
from registry.petrology.catalogue.indices import nothing_to_divide_by, phosphorus_warning
from registry.petrology.catalogue.records import Method, Quantity

_SHEET = "index_sheet"

METHODS = (
    Method(
        "cia", "chemical index of alteration", alteration.cia,
        ("al2o3_wt", "cao_wt", "na2o_wt", "k2o_wt", "p2o5_wt"),
        (Quantity("cia", _SHEET, "CIA", "mol%", "100 Al2O3/(Al2O3 + CaO* + Na2O + K2O), molar, apatite taken off", 0.0,
                  100.0),),
        "nesbitt1982", "definition, p. 715", "published", standard_error="that of the analysis",
        note="Closure does not change it. Lime is not held to soda (a rule for sediments [mclennan1993]) and carbonate "
        "is not taken off. Fresh granite 45-55, basalt 30-45.",
        causes=nothing_to_divide_by("al2o3_wt", "cao_wt", "na2o_wt", "k2o_wt"),
    ),
    Method(
        "alteration_index", "alteration index", alteration.alteration_index,
        ("k2o_wt", "mgo_wt", "na2o_wt", "cao_wt"),
        (Quantity("alteration_index", _SHEET, "Alteration index", "wt%",
                  "100 (K2O + MgO)/(K2O + MgO + Na2O + CaO)", 0.0, 100.0),),
        "ishikawa1976", "definition", "from memory", standard_error="that of the analysis",
        note="Closure does not change it. Least altered about 30-65; use the median of the same rock.",
        causes=nothing_to_divide_by("k2o_wt", "mgo_wt", "na2o_wt", "cao_wt"),
    ),
    Method(
        "ccpi", "chlorite-carbonate-pyrite index", alteration.ccpi, ("mgo_wt", "feot_wt", "na2o_wt", "k2o_wt"),
        (Quantity("ccpi", _SHEET, "CCPI", "wt%", "100 (MgO + FeOt)/(MgO + FeOt + Na2O + K2O)", 0.0, 100.0),),
        "large2001", "definition", "from memory", standard_error="that of the analysis",
        note="Closure does not change it. Fresh felsic rocks about 15-45, mafic ones higher.",
        causes=nothing_to_divide_by("mgo_wt", "feot_wt", "na2o_wt", "k2o_wt"),
    ),
    Method(
        "hughes_x", "igneous spectrum, abscissa", alteration.hughes_x, ("na2o_wt", "k2o_wt"),
        (Quantity("hughes_x", _SHEET, "100 K2O/(Na2O + K2O)", "wt%",
                  "place on the igneous spectrum: low after soda gain, high after potash gain", 0.0, 100.0),),
        "hughes1973", "figure; no equation in the paper", "published", standard_error="that of the analysis",
        note="Closure does not change it. The limbs of the spectrum are not reproduced.",
        causes=nothing_to_divide_by("na2o_wt", "k2o_wt"),
    ),
)  # fmt: skip
WARNINGS = (phosphorus_warning("cia", "CIA"),)
