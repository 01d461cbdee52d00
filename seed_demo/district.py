"""The invented district as data: areas, intrusions, control materials, and the pairs of bags that were mixed up.

No name here is a real place, person or company; the coordinates lie in the open ocean on purpose. Holes and outcrops
stand in modules of their own.
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
    depth_to_top_m: float
    emplacement_depth_m: float
    age_ma: float
    age_sigma_ma: float
    half_width_m: float | None = None
    volume_km3: float | None = None
    country_density_kg_m3: float | None = None


@dataclass(frozen=True)
class Unit:
    """A stretch of core: what was logged from ``from_m`` to ``to_m``. ``intrusion`` None is country rock, not sampled.

    ``progress`` is where in its suite the rock lies (0-1) at both ends; ``alteration`` a key of
    ``alterations.ALTERATIONS``; ``suite`` and ``certificates`` where they are not those of the body and the hole.
    """

    from_m: float
    to_m: float
    lithology: str
    description: str
    intrusion: str | None = None
    progress: tuple[float, float] = (0.5, 0.5)
    alteration: str | None = None
    intensity: float = 0.0
    suite: str | None = None
    certificates: tuple[str, ...] = ()


@dataclass(frozen=True)
class Hole:
    """A drill hole; ``surveys`` of (depth, azimuth, dip), a sample of 1 m every ``spacing_m``."""

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
    """A station: one sample for each ``progress``; ``kind`` of the samples is outcrop or float."""

    code: str
    area: str
    easting: float
    northing: float
    elevation_m: float
    certificate: str
    intrusion: str
    suite: str | None
    progress: tuple[float, ...]
    weathered: float
    kind: str


@dataclass(frozen=True)
class ControlMaterial:
    """A reference material or blank of the district's own sample room, with its true composition."""

    name: str
    kind: str
    composition: Composition = field(repr=False)


AREAS = (
    Area("Quellmar", 64.0, 9.0, 2.6, 1.4, 9000.0),
    # An old belt of granites, stretched again: hence the heat flow and the young domes.
    Area("Ostrevel", 91.0, 8.0, 3.1, 2.2, 8000.0),
)
INTRUSIONS = (
    Intrusion("Kestrin stock", "Quellmar", "fertile_arc_porphyry", "cylinder", 0.0, 3200.0, 61.5, 0.8, 420.0),
    Intrusion("Vantry pluton", "Quellmar", "ordinary_arc_granodiorite", "sphere", 0.0, 6500.0, 94.0, 1.6, 3100.0,
              country_density_kg_m3=2720.0),
    Intrusion("Marrowan complex", "Quellmar", "layered_norite", "slab", 0.0, 8000.0, 1112.0, 6.0, 1300.0,
              country_density_kg_m3=2740.0),
    Intrusion("Hebrun sill", "Quellmar", "gabbro_sill", "slab", 0.0, 1500.0, 121.0, 1.5, 65.0,
              country_density_kg_m3=2550.0),
    Intrusion("Ostrevel granite", "Ostrevel", "hot_granite", "slab", 0.0, 7000.0, 287.0, 3.0, 2600.0,
              country_density_kg_m3=2690.0),
    Intrusion("Corvane granite", "Ostrevel", "tin_granite", "sphere", 0.0, 4500.0, 279.0, 2.5, 1900.0),
    Intrusion("Ysker leucogranite", "Ostrevel", "rare_metal_leucogranite", "slab", 0.0, 9000.0, 281.0, 3.0, 300.0),
    # The chamber below the domes: its volume is ten times theirs (Smith & Shaw 1975, from memory); its half-width is
    # not known otherwise.
    Intrusion("Drisk feeder", "Ostrevel", "young_rhyolite", "sphere", 2500.0, 5000.0, 0.06, 0.008, None, 60.0),
)  # fmt: skip

_SAND = dict.fromkeys(average("andesite"), 0.0) | {
    "SiO2": 99.35, "TiO2": 0.03, "Al2O3": 0.32, "Fe2O3T": 0.12, "MnO": 0.002, "MgO": 0.01, "CaO": 0.02, "Na2O": 0.01,
    "K2O": 0.07, "P2O5": 0.004, "Zr": 14.0, "Ba": 9.0, "Sr": 3.0, "La": 1.1, "Ce": 2.2, "Nd": 0.9, "Y": 0.8,
    "Rb": 1.5, "Th": 0.4, "U": 0.1, "Cr": 4.0, "Cu": 1.5, "Zn": 2.0,
}  # fmt: skip
CONTROL_MATERIALS = {
    "QRM-A": ControlMaterial("QRM-A", "reference_material", average("andesite")),
    "QRM-G": ControlMaterial("QRM-G", "reference_material", average("metapelite") | average("granite")),
    "QRM-M": ControlMaterial("QRM-M", "reference_material", average("magnesian_basaltic_andesite")),
    "blank": ControlMaterial("quartz sand", "blank", _SAND),
}
#: Controls by certificate, one after every eighth rock, in this order; ``duplicate`` repeats the bag before it. What is
#: dissolved in acid is no test of materials whose total content is known.
CONTROL_ROTA = {
    "A417": ("QRM-A", "duplicate", "blank", "QRM-G"),
    "K88": ("QRM-G", "duplicate", "blank", "QRM-A"),
    "T506": ("QRM-M", "duplicate", "blank", "QRM-M"),
    "B2231": ("QRM-G", "blank", "duplicate", "QRM-G"),
    "W77": ("QRM-G", "duplicate", "blank", "QRM-G"),
    "Z19": ("duplicate", "blank"),
}
#: Bags exchanged on purpose before they were sent: under each code stands the analysis of the other.
SWAPPED = (("KD002-206", "OD001-312"), ("Q021a", "H004a"))
