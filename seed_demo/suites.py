"""The suites of the district as data: parent, what crystallised, how much, how oxidised, what the log calls it.

Fixed before anything was judged, from what the petrology of such rocks says, and not changed to please a threshold.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from seed_demo.differentiation import Composition, average, batch_melt_traces, fractionated, mixed


@dataclass(frozen=True)
class Suite:
    """One magma series.

    ``assemblage`` in mass shares by mineral; ``crystallised`` and ``recharge_share`` are the ranges that samples span.
    ``ferric_ratio`` is Fe2O3/FeO by weight, ``susceptibility_si`` the median of fresh rock; both scatter.
    """

    parent: str
    assemblage: Composition
    crystallised: tuple[float, float]
    ferric_ratio: float
    susceptibility_si: float
    density_kg_m3: float
    lithology: str
    texture: str
    loi_wt: float
    sulphur_wt: float
    recharge: str | None = None
    recharge_share: tuple[float, float] = (0.0, 0.0)
    melted_source: str | None = None
    residue: Composition = field(default_factory=dict)
    melted: float = 0.0

    def parent_magma(self) -> Composition:
        """Majors of the parent's average; traces its own, or those of a batch melt of ``melted_source``."""
        composition = average(self.parent)
        if self.melted_source is not None:
            composition |= batch_melt_traces(average(self.melted_source), self.residue, self.melted)
        return composition

    def magma(self, progress: float, recharge: float) -> Composition:
        """The liquid at ``progress`` (0-1) along the suite with ``recharge`` (0-1) of the recharge range mixed in."""
        low, high = self.crystallised
        liquid = fractionated(self.parent_magma(), self.assemblage, low + progress * (high - low))
        if self.recharge is not None:
            least, most = self.recharge_share
            liquid = mixed(liquid, average(self.recharge), least + recharge * (most - least))
        return liquid


SUITES: dict[str, Suite] = {
    # Wet, oxidised arc magma: amphibole and magnetite early, plagioclase held back; andesite mixed in.
    "fertile_arc_porphyry": Suite(
        parent="silicic_adakite",
        assemblage={
            "hornblende": 0.42, "plagioclase_45": 0.45, "magnetite": 0.05, "biotite": 0.07, "apatite": 0.008,
            "zircon": 0.0002,
        },
        crystallised=(0.02, 0.22),
        recharge="andesite",
        recharge_share=(0.0, 0.2),
        ferric_ratio=0.75,
        susceptibility_si=0.016,
        density_kg_m3=2690.0,
        lithology="dacite porphyry",
        texture="porphyritic",
        loi_wt=1.1,
        sulphur_wt=0.04,
    ),
    # Dry arc magma of the same belt: plagioclase and pyroxenes, ilmenite.
    "ordinary_arc_granodiorite": Suite(
        parent="andesite",
        assemblage={
            "plagioclase_55": 0.56, "clinopyroxene": 0.19, "orthopyroxene": 0.15, "magnetite": 0.05, "ilmenite": 0.015,
            "apatite": 0.006, "sulphide": 0.001,
        },
        crystallised=(0.12, 0.48),
        ferric_ratio=0.28,
        susceptibility_si=0.0012,
        density_kg_m3=2710.0,
        lithology="granodiorite",
        texture="equigranular",
        loi_wt=0.9,
        sulphur_wt=0.02,
    ),
    # Crustal melt of a metapelite rich in Th and U, then feldspars, quartz and biotite.
    "hot_granite": Suite(
        parent="granite",
        melted_source="metapelite",
        residue={
            "plagioclase_25": 0.24, "k_feldspar": 0.08, "quartz": 0.33, "biotite": 0.3, "garnet": 0.05,
            "zircon": 0.0002, "allanite": 0.00015, "sulphide": 0.002,
        },
        melted=0.33,
        assemblage={
            "plagioclase_25": 0.44, "k_feldspar": 0.18, "quartz": 0.24, "biotite": 0.12, "ilmenite": 0.003,
            "apatite": 0.0025, "zircon": 0.0004, "allanite": 0.0003, "sulphide": 0.001,
        },
        crystallised=(0.05, 0.35),
        ferric_ratio=0.22,
        susceptibility_si=0.0002,
        density_kg_m3=2630.0,
        lithology="biotite granite",
        texture="coarse-grained, K-feldspar megacrysts",
        loi_wt=0.7,
        sulphur_wt=0.01,
    ),
}  # fmt: skip


@dataclass(frozen=True)
class Alteration:
    """What full intensity does to a fresh rock: factors by element, mass added, decades of susceptibility lost."""

    name: str
    factors: Composition
    loi_wt: float
    sulphur_wt: float
    decades_of_magnetite_lost: float


#: Directions as every text on hydrothermal alteration has them; sizes are invented.
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
}  # fmt: skip
