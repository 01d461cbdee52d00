"""The invented district as data: areas, intrusions, holes, outcrops and the certificates their samples went to.

No name here is a real place, person or company; the coordinates lie in the open ocean on purpose.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from seed_demo.differentiation import Composition, average

EPSG = 32731


@dataclass(frozen=True)
class Area:
    name: str
    heat_flow_mw_m2: float
    surface_temperature_c: float
    conductivity_w_m_k: float
    heat_production_uw_m3: float
    heat_production_depth_m: float


@dataclass(frozen=True)
class Intrusion:
    """A body and the suite (key of ``suites.SUITES``) of its rocks; a field left None stays blank in the file."""

    name: str
    area: str
    suite: str
    shape: str
    half_width_m: float
    depth_to_top_m: float
    emplacement_depth_m: float
    age_ma: float
    age_sigma_ma: float
    country_density_kg_m3: float | None = None


@dataclass(frozen=True)
class Unit:
    """A stretch of core: what was logged from ``from_m`` to ``to_m``. ``intrusion`` None is country rock, not sampled.

    ``progress`` is where in its suite the rock lies (0-1) at both ends; ``alteration`` a key of ``suites.ALTERATIONS``.
    """

    from_m: float
    to_m: float
    lithology: str
    description: str
    intrusion: str | None = None
    progress: tuple[float, float] = (0.5, 0.5)
    alteration: str | None = None
    intensity: float = 0.0


@dataclass(frozen=True)
class Hole:
    code: str
    area: str
    easting: float
    northing: float
    elevation_m: float
    depth_m: float
    surveys: tuple[tuple[float, float, float], ...]
    spacing_m: float
    first_bag: int
    certificate: str
    units: tuple[Unit, ...]


@dataclass(frozen=True)
class Outcrop:
    code: str
    area: str
    easting: float
    northing: float
    elevation_m: float
    certificate: str
    intrusion: str
    progress: tuple[float, ...]
    weathered: float = 0.0
    kind: str = "outcrop"


@dataclass(frozen=True)
class ControlMaterial:
    """A reference material or blank of the district's own sample room, with its true composition."""

    name: str
    kind: str
    composition: Composition = field(repr=False)


AREAS = (
    Area("Quellmar", 64.0, 9.0, 2.6, 1.4, 9000.0),
    Area("Ostrevel", 91.0, 8.0, 3.1, 2.2, 8000.0),
)
INTRUSIONS = (
    Intrusion("Kestrin stock", "Quellmar", "fertile_arc_porphyry", "cylinder", 420.0, 0.0, 3200.0, 61.5, 0.8),
    Intrusion("Vantry pluton", "Quellmar", "ordinary_arc_granodiorite", "sphere", 3100.0, 0.0, 6500.0, 94.0, 1.6,
              2720.0),
    Intrusion("Ostrevel granite", "Ostrevel", "hot_granite", "slab", 2600.0, 0.0, 7000.0, 287.0, 3.0, 2690.0),
)  # fmt: skip
HOLES = (
    Hole(
        "KD001",
        "Quellmar",
        482310.0,
        5573140.0,
        412.0,
        342.0,
        (
            (0.0, 62.0, -65.0),
            (60.0, 62.6, -64.4),
            (120.0, 63.5, -63.8),
            (180.0, 64.1, -63.1),
            (240.0, 65.2, -62.3),
            (300.0, 66.0, -61.7),
            (342.0, 66.4, -61.2),
        ),
        9.0,
        100,
        "A417",
        (
            Unit(0.0, 14.0, "overburden", "soil and blocks"),
            Unit(14.0, 118.0, "dacite porphyry", "hornblende-biotite-plagioclase phyric", "Kestrin stock", (0.1, 0.5)),
            Unit(
                118.0,
                176.0,
                "dacite porphyry",
                "sericite-quartz-pyrite, sheeted veins",
                "Kestrin stock",
                (0.4, 0.6),
                "phyllic",
                0.9,
            ),
            Unit(
                176.0,
                236.0,
                "dacite porphyry",
                "secondary biotite, K-feldspar in veins",
                "Kestrin stock",
                (0.3, 0.5),
                "potassic",
                0.8,
            ),
            Unit(236.0, 342.0, "dacite porphyry", "fresh, magnetite in groundmass", "Kestrin stock", (0.5, 0.95)),
        ),
    ),
    Hole(
        "KD002",
        "Quellmar",
        482905.0,
        5572660.0,
        398.0,
        318.0,
        (
            (0.0, 245.0, -60.0),
            (80.0, 245.9, -59.1),
            (160.0, 247.0, -58.4),
            (240.0, 248.2, -57.2),
            (318.0, 249.0, -56.6),
        ),
        9.0,
        200,
        "K88",
        (
            Unit(0.0, 8.0, "overburden", "soil"),
            Unit(8.0, 126.0, "dacite porphyry", "hornblende phyric", "Kestrin stock", (0.2, 0.8)),
            Unit(126.0, 150.0, "hornfels", "dark, biotite; contact zone"),
            Unit(
                150.0, 262.0, "granodiorite", "equigranular, pyroxene cores in amphibole", "Vantry pluton", (0.3, 0.7)
            ),
            Unit(262.0, 318.0, "granodiorite", "chlorite along joints", "Vantry pluton", (0.6, 0.9), "chloritic", 0.8),
        ),
    ),
    Hole(
        "OD001",
        "Ostrevel",
        503480.0,
        5561220.0,
        655.0,
        264.0,
        ((0.0, 0.0, -90.0), (130.0, 12.0, -89.2), (264.0, 15.0, -88.6)),
        10.0,
        300,
        "K88",
        (
            Unit(0.0, 6.0, "overburden", "grus"),
            Unit(6.0, 30.0, "biotite granite", "weathered joints", "Ostrevel granite", (0.2, 0.3), "weathered", 0.8),
            Unit(30.0, 264.0, "biotite granite", "K-feldspar megacrysts", "Ostrevel granite", (0.1, 0.95)),
        ),
    ),
)
OUTCROPS = (
    Outcrop("Q001", "Quellmar", 482150.0, 5573320.0, 440.0, "A417", "Kestrin stock", (0.15, 0.4)),
    Outcrop("Q002", "Quellmar", 482640.0, 5572980.0, 431.0, "A417", "Kestrin stock", (0.7,)),
    Outcrop("Q003", "Quellmar", 481890.0, 5572705.0, 405.0, "A417", "Kestrin stock", (0.55,), 0.7),
    Outcrop("Q004", "Quellmar", 484120.0, 5571480.0, 377.0, "A417", "Vantry pluton", (0.05, 0.2)),
    Outcrop("Q005", "Quellmar", 485260.0, 5570905.0, 362.0, "A417", "Vantry pluton", (0.45,)),
    Outcrop("Q006", "Quellmar", 483975.0, 5570110.0, 350.0, "A417", "Vantry pluton", (0.65, 0.95)),
    Outcrop("Q007", "Quellmar", 486030.0, 5572240.0, 371.0, "A417", "Vantry pluton", (0.35,)),
    Outcrop("O001", "Ostrevel", 502870.0, 5561890.0, 671.0, "K88", "Ostrevel granite", (0.05, 0.3)),
    Outcrop("O002", "Ostrevel", 504410.0, 5560430.0, 702.0, "K88", "Ostrevel granite", (0.6,)),
    Outcrop("O003", "Ostrevel", 505150.0, 5562075.0, 688.0, "K88", "Ostrevel granite", (0.8,), 0.9),
)  # fmt: skip

_SAND = dict.fromkeys(average("andesite"), 0.0) | {
    "SiO2": 99.35, "TiO2": 0.03, "Al2O3": 0.32, "Fe2O3T": 0.12, "MnO": 0.002, "MgO": 0.01, "CaO": 0.02, "Na2O": 0.01,
    "K2O": 0.07, "P2O5": 0.004, "Zr": 14.0, "Ba": 9.0, "Sr": 3.0, "La": 1.1, "Ce": 2.2, "Nd": 0.9, "Y": 0.8,
    "Rb": 1.5, "Th": 0.4, "U": 0.1, "Cr": 4.0, "Cu": 1.5, "Zn": 2.0,
}  # fmt: skip
#: Inserted in this order, one every tenth bag; ``duplicate`` repeats the bag before it.
CONTROL_ROTA = ("QRM-A", "duplicate", "blank", "QRM-G")
CONTROL_MATERIALS = {
    "QRM-A": ControlMaterial("QRM-A", "reference_material", average("andesite")),
    "QRM-G": ControlMaterial("QRM-G", "reference_material", average("metapelite") | average("granite")),
    "blank": ControlMaterial("quartz sand", "blank", _SAND),
}
