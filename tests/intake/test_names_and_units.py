"""Spellings of analytes, units and digestions: the trade's own. Common practice of laboratories, no source."""

from __future__ import annotations

import pytest

from registry.intake import ColumnChoice, ReadingOptions, read_file
from registry.intake.methods import digestion_in, may_be_method
from registry.intake.names import analyte_symbol, read_heading
from registry.intake.recipes import ColumnCorrection
from registry.intake.units import canonical_unit, foreign_unit
from registry.petrology.analytes import ANALYTES
from registry.petrology.digestion import DIGESTIONS


@pytest.mark.parametrize(
    ("heading", "analyte", "unit", "method"),
    [
        ("SiO2 (%)", "SiO2", "wt%", None),
        ("SiO2_wt%", "SiO2", "wt%", None),
        ("SIO2", "SiO2", None, None),
        ("sio2_pct", "SiO2", "wt%", None),
        ("SiO₂", "SiO2", None, None),
        ("Al2O3 [wt %]", "Al2O3", "wt%", None),
        ("K2O%", "K2O", "wt%", None),
        ("Zr ppm", "Zr", "ppm", None),
        ("Zr_ppm", "Zr", "ppm", None),
        ("ZrPPM", "Zr", "ppm", None),
        ("Zr (mg/kg)", "Zr", "ppm", None),
        ("Nb (µg/g)", "Nb", "ppm", None),
        ("Au (g/t)", "Au", "ppm", None),
        ("Au_FA_ppb", "Au", "ppb", "FA"),
        ("Zr_ppm_XRF", "Zr", "ppm", "XRF"),
        ("XRF_Zr_ppm", "Zr", "ppm", "XRF"),
        ("zr_ppm_xrf", "Zr", "ppm", "xrf"),
        ("Ga_ppm_fusion ICP-MS", "Ga", "ppm", "fusion ICP MS"),
        ("L.O.I.", "LOI", None, None),
        ("LOI 1000C %", "LOI", "wt%", None),
        ("SUM", "Total", None, None),
        ("Total (%)", "Total", "wt%", None),
        ("H2O (-) %", "H2O-", "wt%", None),
        ("h2o_plus_wt", "H2O+", "wt%", None),
        ("Total S %", "S", "wt%", None),
        ("Au.1", "Au", None, None),
        ("W %", "W", "wt%", None),
        ("sio2_wt", "SiO2", "wt%", None),
        ("fe2o3t_wt", "Fe2O3T", "wt%", None),
    ],
)
def test_heading_in_a_spelling_of_the_trade_gives_analyte_unit_method(heading, analyte, unit, method):
    found = read_heading(heading)
    assert (found.analyte, found.unit, found.method) == (analyte, unit, method)


@pytest.mark.parametrize(
    ("spelling", "symbol"),
    [
        *[
            (text, "Fe2O3T")
            for text in ("TFe2O3", "Fe2O3(T)", "Fe2O3T", "Fe2O3*", "Fe2O3tot", "Total Fe2O3", "Fe2O3_T")
        ],
        *[
            (text, "Fe2O3T")
            for text in ("Fe2O3 total", "T-Fe2O3", "Total Fe as Fe2O3", "Total iron as Fe2O3", "tFe2O3")
        ],
        *[(text, "FeOT") for text in ("FeO*", "FeOT", "FeOt", "FeO(tot)", "FeO_total", "Σ FeO", "TFeO", "Fe as FeO")],
        ("Fe2O3", "Fe2O3"),
        ("FeO", "FeO"),
        ("Fe", "Fe"),
        ("Fe(T)", "Fe"),
    ],
)
def test_iron_in_every_usual_spelling_is_told_total_from_plain(spelling, symbol):
    assert analyte_symbol(spelling) == symbol


@pytest.mark.parametrize(
    "text",
    ["Sample ID", "Depth (m)", "B-12", "C-7A", "U 235", "From", "To", "No", "In situ", "Co/Ni", "Eu/Eu*", "(La/Yb)N",
     "La/YbN", "K2O+Na2O", "Comment", "Notes on U", "as received", "mg#", "Weight (kg)", "REE", "Unnamed: 4",
     "ME-ICP41", "Hole ID", ""],
)  # fmt: skip
def test_heading_that_is_no_analyte_stays_none(text):
    assert read_heading(text).analyte is None


@pytest.mark.parametrize("symbol", sorted(ANALYTES))
def test_symbol_of_the_register_reads_as_itself_in_any_case(symbol):
    expected = "Fe" if symbol == "Fe" else symbol
    assert analyte_symbol(symbol) == expected
    assert analyte_symbol(symbol.upper()) == expected
    assert analyte_symbol(symbol.lower()) == expected


@pytest.mark.parametrize(
    ("text", "unit"),
    [("%", "wt%"), ("wt. %", "wt%"), ("Weight %", "wt%"), ("g/100g", "wt%"), ("mg/kg", "ppm"), ("µg/g", "ppm"),
     ("g/t", "ppm"), ("PPM", "ppm"), ("ug/kg", "ppb"), ("ng/g", "ppb"), ("ppt", "ppt"), ("oz/ton", "oz/t"),
     ("mg/L", None), ("cps", None), ("SiO2", None)],
)  # fmt: skip
def test_unit_as_written_gives_the_canonical_word(text, unit):
    assert canonical_unit(text) == unit


def test_unit_of_no_mass_fraction_is_known_as_foreign():
    assert foreign_unit("mg/L")
    assert foreign_unit("at%")
    assert not foreign_unit("ppm")
    assert not foreign_unit("Granite")


@pytest.mark.parametrize(
    ("text", "digestion"),
    [
        ("Lithium borate fusion, ICP-MS", "fusion"),
        ("LiBO2", "fusion"),
        ("FUS-ICP", "fusion"),
        ("Sodium peroxide fusion", "peroxide_fusion"),
        ("Fused bead XRF", "xrf"),
        ("pXRF", "portable_xrf"),
        ("Handheld XRF", "portable_xrf"),
        ("4-acid ICP-OES", "four_acid"),
        ("Four Acid", "four_acid"),
        ("HF-HNO3-HClO4", "four_acid"),
        ("Aqua regia", "aqua_regia"),
        ("AR-ICP", "aqua_regia"),
        ("AR/ICP-MS", "aqua_regia"),
        ("HNO3-HCl 3:1", "aqua_regia"),
        ("Hf (ppm) HNO3-HCl", "aqua_regia"),
        ("HF-HClO4-HCl-HNO3", "four_acid"),
        ("hf-hcl-hno3", "four_acid"),
        ("HCl/HNO3/HF", "four_acid"),
        ("HNO3, HClO4 and HF", "four_acid"),
        ("4A/ICP-MS", "four_acid"),
        ("HF (PPM)", None),
        ("Hf ppm", None),
        ("HCl-HNO3-HClO4", None),
        ("NaOH fusion", "peroxide_fusion"),
        ("WDXRF", "xrf"),
        ("NiS collection", "fire_assay"),
        ("INAA", "inaa"),
        ("FeO by titration", "titration"),
        ("Combustion, infrared detection", "combustion"),
        ("Fire assay, AAS", "fire_assay"),
        ("FA50", "fire_assay"),
        ("ICP-MS", None),
        ("Zr (ppm)", None),
        ("SAR-12", None),
    ],
)
def test_method_text_names_the_digestion_or_none(text, digestion):
    assert digestion_in(text) == digestion
    assert digestion is None or digestion in DIGESTIONS


@pytest.mark.parametrize(
    "text",
    ["XRF", "fusion", "4-acid ICP", "30g", "ME-xx81", "OG46", "2", "950C", "NAA", "AAS", "B", "total", "calc.",
     "repeat", "Rerun", "as reported", "Lab 2", "ICP-MS", "over-range"],
)  # fmt: skip
def test_word_in_the_place_of_a_unit_can_be_a_method_or_a_remark(text):
    assert may_be_method(text)


@pytest.mark.parametrize(
    "text",
    ["furlong", "Furlong", "stones", "kg/t", "kg / t", "ppmv", "PPX", "mg/L", "at%", "mass fraction", "grams per ton",
     "% by mass", "lb/ton", "cps"],
)  # fmt: skip
def test_unit_that_is_not_known_is_no_method(text):
    assert not may_be_method(text)


@pytest.mark.parametrize(
    ("heading", "analyte", "method"),
    [("SiO2 (XRF)", "SiO2", "XRF"), ("sio2 (xrf)", "SiO2", "xrf"), ("Zr (ME-xx81)", "Zr", "ME-xx81"),
     ("Au (30g)", "Au", "30g"), ("Fe2O3 (T)", "Fe2O3T", None), ("U (1)", None, "U (1)"), ("Y (m)", None, "Y (m)")],
)  # fmt: skip
def test_bracket_behind_an_analyte_is_its_method(heading, analyte, method):
    found = read_heading(heading)
    assert (found.analyte, found.method) == (analyte, method)


def read(text, **options):
    return read_file("r.csv", text.encode(), None, ReadingOptions(**options))


@pytest.mark.parametrize(
    "head",
    ["Sample,SiO2 (furlong),Zr (ppm)", "Sample,sio2 [furlong],Zr (ppm)", "Sample,SiO2,Zr\nUnit,furlong,ppm",
     "Sample,SiO2_kg/t,Zr (ppm)", "Sample,SiO2 ppx,Zr (ppm)"],
)  # fmt: skip
def test_unit_that_is_not_known_is_a_problem_that_names_the_known_ones(head):
    """Invented: taken as a method it would have let custom choose the unit."""
    (problem,) = [one for one in read(f"{head}\nA,60,180\nB,61,181\n").problems if one.severity == "problem"]
    assert problem.what == "the unit is not known"
    assert problem.found in ("furlong", "kg/t", "ppx")
    assert problem.expected == "wt% ppm ppb ppt oz/t" and "--column" in problem.remedy


def test_unit_that_is_not_known_is_settled_by_a_known_one_beside_it_or_by_the_user():
    beside = read("Sample,SiO2 (furlong),Zr (stones) ppm\nUnit,%,\nA,60,180\nB,61,181\n")
    assert beside.ok and [one.unit for one in beside.results.columns] == ["wt%", "ppm"]
    said = ColumnCorrection("SiO2 (furlong)", ColumnChoice(unit="wt%"))
    reading = read("Sample,SiO2 (furlong),Zr (ppm)\nA,60,180\nB,61,181\n", columns=(said,))
    assert reading.ok and [one.method for one in reading.results.columns] == [None, None]


def test_method_in_brackets_leaves_the_unit_to_custom():
    reading = read("Sample,SiO2 (XRF),Zr (ME-xx81),Au (30g)\nA,60,180,1\nB,61,181,2\n", unit="ppm")
    assert reading.ok
    assert [(one.method, one.unit) for one in reading.results.columns] == [
        ("XRF", "ppm"), ("ME-xx81", "ppm"), ("30g", "ppm"),
    ]  # fmt: skip


@pytest.mark.parametrize(
    "text",
    ["Sample,Analyte,Value\nA,SiO2 (furlong),60\n", "Sample,Analyte,Value (furlong)\nA,SiO2,60\n",
     "Sample,Analyte,Value,Unit\nA,SiO2,60,furlong\n"],
)  # fmt: skip
def test_unit_that_is_not_known_in_a_long_table_is_a_problem(text):
    (problem,) = [one for one in read(text).problems if one.severity == "problem"]
    assert problem.what == "the unit is not known" and problem.found == "furlong"
    assert read(text.replace("furlong", "%")).ok


@pytest.mark.parametrize("heading", ["Nb kcps", "Nb (kcps)", "Nb Mcps", "Nb mg/L"])
def test_counts_and_other_units_behind_an_analyte_are_a_problem_and_no_method(heading: str) -> None:
    reading = read_file("k.csv", f"Sample,SiO2 (%),{heading}\nA,60,3\nB,61,4\n".encode())
    (problem,) = [problem for problem in reading.problems if problem.severity == "problem"]
    assert "the unit is not" in problem.what and problem.column == heading
