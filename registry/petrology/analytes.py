"""The analytes of the register: symbols, canonical columns and units, in the order of ``composition_sheet``."""

from __future__ import annotations

from dataclasses import dataclass

from registry.petrology.constants import FE2O3_FROM_FEO, oxide_from_element

OXIDE_SYMBOLS = [
    "SiO2", "TiO2", "Al2O3", "MnO", "MgO", "CaO", "Na2O", "K2O", "P2O5", "Cr2O3", "NiO", "V2O3", "BaO", "SrO",
    "ZrO2", "Li2O", "LOI", "H2O+", "H2O-", "CO2", "S", "SO3", "F", "Cl",
]  # fmt: skip
ELEMENT_SYMBOLS = [
    "Li", "Be", "B", "Sc", "V", "Cr", "Co", "Ni", "Cu", "Zn", "Ga", "Ge", "As", "Rb", "Sr", "Y", "Zr", "Nb", "Mo",
    "Ag", "Cd", "In", "Sn", "Sb", "Te", "Cs", "Ba", "La", "Ce", "Pr", "Nd", "Sm", "Eu", "Gd", "Tb", "Dy", "Ho",
    "Er", "Tm", "Yb", "Lu", "Hf", "Ta", "W", "Re", "Tl", "Pb", "Bi", "Th", "U", "Au", "Pt", "Pd",
]  # fmt: skip


def _oxide_column(symbol: str) -> str:
    return symbol.lower().replace("+", "_plus").replace("-", "_minus") + "_wt"


#: Columns of the composition as chosen from the results, in wt% or ppm. Iron is kept as reported:
#: total iron (as Fe2O3T), ferrous iron by titration, ferric iron where it was reported beside FeO.
OXIDE_COLUMNS = tuple(_oxide_column(symbol) for symbol in OXIDE_SYMBOLS)
IRON_COLUMNS = ("fe2o3t_reported_wt", "feo_titrated_wt", "fe2o3_ferric_wt")
ELEMENT_COLUMNS = tuple(symbol.lower() + "_ppm" for symbol in ELEMENT_SYMBOLS)
CHOSEN_COLUMNS = (*OXIDE_COLUMNS, *IRON_COLUMNS, "total_reported_wt", *ELEMENT_COLUMNS)
CHOSEN_INDEX = {column: position for position, column in enumerate(CHOSEN_COLUMNS)}


@dataclass(frozen=True)
class Analyte:
    """One thing a laboratory reports.

    ``unit`` is the canonical unit (``wt%`` or ``ppm``) of ``column``; ``column`` is None for an analyte that is
    kept as a result but has no place in the composition (Hg, Se). ``factor`` turns a value of this analyte in
    its canonical unit into the column's unit (an element reported for an oxide column: Al in wt% -> al2o3_wt).
    """

    symbol: str
    column: str | None
    unit: str
    factor: float = 1.0


#: Unit words in canonical spelling -> (canonical unit family, factor to wt%). ppm = 1e-4 wt%.
WT_PERCENT_PER_UNIT = {"wt%": 1.0, "ppm": 1e-4, "ppb": 1e-7, "ppt": 1e-10, "oz/t": 3.4285714e-3}

QUALIFIER_NONE, QUALIFIER_BELOW, QUALIFIER_ABOVE = 0, 1, 2
#: Signs by qualifier code, as shown and exported.
QUALIFIER_SIGNS = ("", "<", ">")


#: Elements whose place in the composition is an oxide column.
ELEMENT_OF_OXIDE_COLUMN = {
    "Si": "SiO2", "Ti": "TiO2", "Al": "Al2O3", "Mn": "MnO", "Mg": "MgO", "Ca": "CaO", "Na": "Na2O", "K": "K2O",
    "P": "P2O5",
}  # fmt: skip
#: Oxides reported for elements that stand in ppm; an oxide with a column of its own also fills the element's.
OXIDE_OF_ELEMENT_COLUMN = {
    "Rb": "Rb2O", "Cs": "Cs2O", "Be": "BeO", "B": "B2O3", "Sc": "Sc2O3", "Co": "CoO", "Cu": "CuO", "Zn": "ZnO",
    "Ga": "Ga2O3", "Ge": "GeO2", "Y": "Y2O3", "Nb": "Nb2O5", "Mo": "MoO3", "Sn": "SnO2", "La": "La2O3",
    "Ce": "CeO2", "Pr": "Pr2O3", "Nd": "Nd2O3", "Sm": "Sm2O3", "Eu": "Eu2O3", "Gd": "Gd2O3", "Tb": "Tb2O3",
    "Dy": "Dy2O3", "Ho": "Ho2O3", "Er": "Er2O3", "Tm": "Tm2O3", "Yb": "Yb2O3", "Lu": "Lu2O3", "Hf": "HfO2",
    "Ta": "Ta2O5", "W": "WO3", "Pb": "PbO", "Th": "ThO2", "U": "U3O8",
}  # fmt: skip
#: Oxides with both an oxide column and an element column: each fills the element's when that is missing.
OXIDE_BESIDE_ELEMENT = {"Cr": "Cr2O3", "Ni": "NiO", "V": "V2O3", "Ba": "BaO", "Sr": "SrO", "Zr": "ZrO2", "Li": "Li2O"}
#: Known analytes without a place in the composition; their results are kept.
OTHER_SYMBOLS = ("Hg", "Se", "Rh", "Ru", "Ir", "Os", "C", "C_organic", "N", "H2O")


def _build() -> dict[str, Analyte]:
    table = {symbol: Analyte(symbol, _oxide_column(symbol), "wt%") for symbol in OXIDE_SYMBOLS}
    table["Total"] = Analyte("Total", "total_reported_wt", "wt%")
    table["Fe2O3T"] = Analyte("Fe2O3T", "fe2o3t_reported_wt", "wt%")
    table["FeOT"] = Analyte("FeOT", "fe2o3t_reported_wt", "wt%", FE2O3_FROM_FEO)
    table["Fe"] = Analyte("Fe", "fe2o3t_reported_wt", "wt%", oxide_from_element("Fe2O3"))
    table["FeO"] = Analyte("FeO", "feo_titrated_wt", "wt%")
    table["Fe2O3"] = Analyte("Fe2O3", "fe2o3_ferric_wt", "wt%")
    for symbol in ELEMENT_SYMBOLS:
        table[symbol] = Analyte(symbol, symbol.lower() + "_ppm", "ppm")
    for symbol, oxide in ELEMENT_OF_OXIDE_COLUMN.items():
        table[symbol] = Analyte(symbol, _oxide_column(oxide), "wt%", oxide_from_element(oxide))
    for symbol, oxide in OXIDE_OF_ELEMENT_COLUMN.items():
        table[oxide] = Analyte(oxide, symbol.lower() + "_ppm", "ppm", 1.0 / oxide_from_element(oxide))
    table["V2O5"] = Analyte("V2O5", "v_ppm", "ppm", 1.0 / oxide_from_element("V2O5"))
    for symbol in OTHER_SYMBOLS:
        table[symbol] = Analyte(symbol, None, "ppm" if len(symbol) == 2 and symbol != "H2O" else "wt%")
    return table


#: By the symbol that ``batch_column.analyte`` stores.
ANALYTES = _build()
