"""The invented laboratories: what each measures, how well, and how it writes its file."""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True)
class Reported:
    """A column of a certificate: analyte of the composition, its name in the file, unit, method, limit in that unit.

    ``scale`` turns the composition's unit (wt% or ppm) into the unit of the file; ``recovery`` is the share of the
    element that the digestion brings into solution.
    """

    analyte: str
    name: str
    unit: str
    method: str
    limit: float
    scale: float = 1.0
    recovery: float = 1.0


@dataclass(frozen=True)
class Layout:
    """How a laboratory writes its file, and how well it measures.

    ``heading_rows`` in order: "analyte", "unit", "method", "limit", or words joined by + that stand in one cell; none
    of them where the table is ``long``. ``packages`` by name; "" is the only one of a file.
    """

    file: str
    sample_heading: str
    packages: dict[str, tuple[Reported, ...]]
    heading_rows: tuple[str, ...]
    majors_error: float
    traces_error: float
    delimiter: str = ","
    decimal: str = "."
    encoding: str = "utf-8"
    titles: tuple[str, ...] = ()
    #: Bags whose pulp ran out: only the majors were done.
    majors_only: frozenset[str] = field(default_factory=frozenset)


_LIMITS = {
    "SiO2": 0.01, "MnO": 0.002, "TiO2": 0.01,
    "Zr": 2.0, "Ba": 3.0, "Sr": 2.0, "Cr": 10.0, "V": 5.0, "Sn": 1.0, "W": 1.0, "Ta": 0.1, "Nb": 0.2, "Cs": 0.1,
    "Rb": 0.2, "Y": 0.5, "Ni": 1.0, "Cu": 1.0, "Zn": 2.0, "Pb": 2.0, "Mo": 1.0, "Li": 1.0, "Be": 0.5, "Sc": 1.0,
    "Co": 0.5, "Ga": 0.5, "Hf": 0.2, "U": 0.05, "Th": 0.05, "Tm": 0.01, "Lu": 0.01, "Eu": 0.02, "Tb": 0.01,
    "Ho": 0.01, "Yb": 0.03, "Er": 0.03, "Dy": 0.05, "Gd": 0.05, "Sm": 0.03, "Pr": 0.02, "La": 0.1, "Ce": 0.1,
    "Nd": 0.1,
}  # fmt: skip
_OXIDES = "SiO2 TiO2 Al2O3 Fe2O3T MnO MgO CaO Na2O K2O P2O5"
_RARE_EARTHS = "La Ce Pr Nd Sm Eu Gd Tb Dy Ho Er Tm Yb Lu"
#: Oxide to element by mass, and the element's name.
_ELEMENTS = {
    "Al2O3": ("Al", 0.52925), "CaO": ("Ca", 0.71470), "Fe2O3T": ("Fe", 0.69943), "K2O": ("K", 0.83015),
    "MgO": ("Mg", 0.60304), "Na2O": ("Na", 0.74186), "TiO2": ("Ti", 0.59934),
}  # fmt: skip
#: Share dissolved, common practice, no source; what is not listed dissolves.
_FOUR_ACIDS = {
    "Zr": 0.45, "Hf": 0.5, "Nb": 0.85, "Ta": 0.8, "Sn": 0.5, "W": 0.7, "Cr": 0.45, "TiO2": 0.9, "Ba": 0.92, "Y": 0.9,
    "Gd": 0.93, "Yb": 0.8, "Lu": 0.8, "Al2O3": 0.97,
}  # fmt: skip
_AQUA_REGIA = {
    "Al2O3": 0.16, "CaO": 0.45, "Fe2O3T": 0.75, "K2O": 0.15, "MgO": 0.6, "Na2O": 0.05, "TiO2": 0.12, "Rb": 0.3,
    "Sr": 0.25, "Ba": 0.2, "Y": 0.5, "Zr": 0.02, "Nb": 0.04, "La": 0.55, "Ce": 0.55, "Th": 0.55, "U": 0.5, "Cr": 0.3,
    "V": 0.5, "Sc": 0.4, "Ni": 0.7, "Co": 0.75, "Li": 0.6, "Sn": 0.2, "W": 0.3, "Cs": 0.4,
}  # fmt: skip


def _columns(
    names: str,
    unit: str,
    method: str,
    limits: dict[str, float] | None = None,
    recoveries: dict[str, float] | None = None,
) -> tuple[Reported, ...]:
    known = _LIMITS | (limits or {})
    return tuple(
        Reported(name, name, unit, method, known.get(name, 0.01), 1.0, (recoveries or {}).get(name, 1.0))
        for name in names.split()
    )


def _elements(method: str, recoveries: dict[str, float]) -> tuple[Reported, ...]:
    """Majors as elements in per cent, as a laboratory that dissolves in acid reports them."""
    return tuple(
        Reported(oxide, element, "%", method, 0.01, factor, recoveries.get(oxide, 1.0))
        for oxide, (element, factor) in _ELEMENTS.items()
    )


_XRF = _columns(_OXIDES, "%", "XRF")
_LOI = Reported("LOI", "LOI", "%", "", 0.05)
_TOTAL = Reported("Total", "Total", "%", "", 0.01)
_FEO = Reported("FeO", "FeO", "%", "titration", 0.05)
_SULPHUR = Reported("S", "S", "%", "combustion", 0.01)
_FLUORINE = Reported("F", "F", "%", "fusion ISE", 0.005, 1e-4)

LAYOUTS: dict[str, Layout] = {
    "A417": Layout(
        "results_A417.csv",
        "Sample No.",
        {
            "": (
                *_XRF, _LOI, _TOTAL, _FEO, _SULPHUR,
                *_columns(f"V Cr Ga Rb Sr Y Zr Nb Sn Cs Ba {_RARE_EARTHS} Hf Ta W Th U", "ppm", "fusion"),
                *_columns("Li Be Sc Co Ni Cu Zn Mo Pb", "ppm", "four-acid"),
            )
        },
        ("analyte+method+(unit)",),
        0.006, 0.03,
        encoding="utf-8-sig",
        majors_only=frozenset({"KD001-121", "KD001-122", "VD001-417"}),
    ),
    # No titrated FeO, no S, fewer rare earths.
    "K88": Layout(
        "results_K88.csv",
        "Sample N°",
        {
            "": (
                *_columns(_OXIDES.replace(" MnO", "").replace(" P2O5", ""), "%", "XRF"),
                Reported("MnO", "MnO", "ppm", "XRF", 20.0, 1e4),
                *_columns("P2O5", "%", "XRF"), _LOI,
                *_columns("V Ga Rb Sr Y Zr Nb Cs Ba La Ce Nd Sm Eu Gd Yb Lu Hf Ta Th U", "ppm", "fusion",
                          {"Cs": 0.5, "Ta": 0.5, "Nb": 1.0, "La": 0.2, "Ce": 0.2, "Nd": 0.2}),
                *_columns("Sc Ni Cu Zn Pb", "ppm", "four-acid"),
            )
        },
        ("analyte", "unit", "method"),
        0.008, 0.04,
        delimiter=";", decimal=",", encoding="cp1252",
        majors_only=frozenset({"KD002-214", "OD001-318"}),
    ),
    # Mafic rocks: sulphur, precious metals in ppb, chromium as an oxide; no FeO.
    "T506": Layout(
        "results_T506.txt",
        "SAMPLE",
        {
            "": (
                *_XRF, Reported("Cr", "Cr2O3", "%", "XRF", 0.005, 1.4616e-4), _LOI, _SULPHUR,
                *_columns("Rb Sr Y Zr Nb Ba La Ce Nd Sm Eu Gd Yb Lu Hf Ta Th U", "ppm", "fusion"),
                *_columns("Sc V Co Ni Cu Zn", "ppm", "four-acid"),
                *(Reported(name, name, "ppb", "fire assay", 1.0, 1e3) for name in ("Pt", "Pd", "Au")),
            )
        },
        ("analyte+method", "unit"),
        0.007, 0.035,
        delimiter="\t", encoding="utf-16",
        majors_only=frozenset({"HD001-711"}),
    ),
    # Granites: methods and detection limits above the names, units below them.
    "B2231": Layout(
        "results_B2231.csv",
        "Sample ID",
        {
            "": (
                *_columns("Li Be Cu Zn Pb Sc Mo", "ppm", "four-acid"),
                *_columns(f"Rb Sr Y Zr Nb Sn Cs Ba {_RARE_EARTHS} Hf Ta W Th U Ga V", "ppm", "fusion"),
                _FLUORINE, *_XRF, _LOI, _FEO,
            )
        },
        ("method", "limit", "analyte", "unit"),
        0.006, 0.03,
        titles=("Laboratory: Invented Assay Rooms", "Certificate No: B2231"),
        majors_only=frozenset({"CD001-612", "YD001-905"}),
    ),
    "W77": Layout(
        "results_W77.xlsx",
        "Sample",
        {
            "": (
                *_XRF, _LOI,
                *_columns("V Ga Rb Sr Y Zr Nb Sn Cs Ba La Ce Nd Sm Eu Gd Dy Yb Lu Hf Ta W Th U", "ppm", "fusion"),
                *_columns("Li Be Sc Cu Zn Pb", "ppm", "four-acid"),
            )
        },
        ("analyte+method+(unit)",),
        0.007, 0.035,
        majors_only=frozenset({"DD001-1008"}),
    ),
    # A line for each result. Two packages that were ordered for ore and say little of the magma.
    "Z19": Layout(
        "results_Z19.csv",
        "Sample",
        {
            "four-acid": (
                *_elements("four-acid ICP", _FOUR_ACIDS),
                *_columns("Li Sc V Cr Co Ni Cu Zn Rb Sr Y Zr Nb Sn Cs Ba La Ce Hf Ta W Pb Th U", "ppm", "four-acid ICP",
                          {"Sn": 0.5, "W": 0.5}, _FOUR_ACIDS),
            ),
            "aqua regia": (
                *_elements("aqua regia ICP", _AQUA_REGIA),
                *_columns("Li Sc V Cr Co Ni Cu Zn Mo Rb Sr Y Zr Nb Sn Cs Ba La Ce W Pb Th U", "ppm", "aqua regia ICP",
                          {"Sn": 0.5, "W": 0.5, "Zr": 0.5}, _AQUA_REGIA),
            ),
        },
        (),
        0.015, 0.04,
    ),
}  # fmt: skip
#: What laboratories call an analyte in their file, where it is not our name.
FILE_NAMES = {"K88": {"Fe2O3T": "Fe2O3tot"}, "B2231": {"Fe2O3T": "Fe2O3 total"}}
