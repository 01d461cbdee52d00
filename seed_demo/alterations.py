"""What alteration does to the rocks of the district: directions as in every text on the subject, sizes invented."""

from __future__ import annotations

from dataclasses import dataclass

from seed_demo.differentiation import Composition


@dataclass(frozen=True)
class Alteration:
    """What full intensity does to a fresh rock: factors by element, mass added, decades of susceptibility lost."""

    name: str
    factors: Composition
    loi_wt: float
    sulphur_wt: float
    decades_of_magnetite_lost: float


ALTERATIONS: dict[str, Alteration] = {
    "phyllic": Alteration(
        "phyllic",
        {"Na2O": 0.35, "CaO": 0.3, "MgO": 0.75, "K2O": 1.6, "Sr": 0.35, "Rb": 1.8, "Ba": 1.1, "Cs": 1.6, "Cu": 9.0,
         "Mo": 8.0, "W": 3.0, "Zn": 1.3, "Eu": 0.9},
        5.2,
        2.4,
        1.8,
    ),
    "potassic": Alteration(
        "potassic",
        {"CaO": 0.75, "K2O": 1.35, "Rb": 1.4, "Sr": 0.85, "Ba": 1.1, "Cu": 14.0, "Mo": 10.0},
        0.7,
        0.6,
        -0.1,
    ),
    "chloritic": Alteration("chloritic", {"CaO": 0.85, "Na2O": 0.95, "MgO": 1.1, "Zn": 1.5}, 2.4, 0.05, 0.5),
    "weathered": Alteration("weathered", {"CaO": 0.7, "Na2O": 0.8, "Sr": 0.85, "U": 0.55}, 2.6, 0.0, 0.6),
    "greisen": Alteration(
        "greisen",
        {"Na2O": 0.2, "CaO": 0.8, "K2O": 0.85, "Fe2O3T": 1.3, "Li": 2.2, "Rb": 1.6, "Cs": 1.5, "Sr": 0.5, "Ba": 0.5,
         "Sn": 12.0, "W": 8.0, "F": 5.0, "Cu": 6.0, "Zn": 2.0},
        1.9,
        0.1,
        0.2,
    ),
    "serpentinised": Alteration("serpentinised", {"CaO": 0.7, "Na2O": 0.6, "Sr": 0.7, "Ba": 0.7}, 9.0, 0.02, -0.7),
    "argillic": Alteration(
        "argillic", {"Na2O": 0.35, "CaO": 0.4, "MgO": 1.2, "K2O": 0.9, "Sr": 0.5, "Cs": 1.8, "Li": 2.0}, 4.8, 0.5, 1.2
    ),
}  # fmt: skip
