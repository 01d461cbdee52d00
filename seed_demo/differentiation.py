"""Mass balance and the laws of Rayleigh and batch melting, by which the demo's suites grow from their parents."""

from __future__ import annotations

from collections.abc import Mapping

from seed_demo.averages import (
    AVERAGES,
    FIXED_TRACES,
    INCOMPATIBLE,
    MAJORS,
    MINERALS,
    PARTITION,
    SULPHIDE_IRON_WT,
    SULPHIDE_SULPHUR_WT,
    TRACES,
    complete_rare_earths,
)

Composition = dict[str, float]
#: Fe2O3 by mass from Fe: 159.687 / (2 x 55.845).
FE2O3_PER_FE = 1.4297


def closed(composition: Composition) -> Composition:
    """The majors closed to 100 wt% (all iron as Fe2O3); traces as they are."""
    total = sum(composition[name] for name in MAJORS)
    return {name: value * (100.0 / total if name in MAJORS else 1.0) for name, value in composition.items()}


def _kind(mineral: str) -> str:
    """``plagioclase_55`` partitions as plagioclase."""
    return mineral.rsplit("_", 1)[0] if mineral[-1].isdigit() else mineral


def bulk_coefficient(assemblage: Composition, element: str) -> float:
    """Bulk D of an assemblage given as mass shares by mineral."""
    total = sum(assemblage.values())
    shared = 0.0
    for mineral, share in assemblage.items():
        shared += share / total * PARTITION[_kind(mineral)].get(element, INCOMPATIBLE)
    return shared


def fractionated(parent: Composition, assemblage: Composition, crystallised: float) -> Composition:
    """The liquid left when the share ``crystallised`` of the parent's mass has left as ``assemblage``.

    Majors by mass balance, traces by Rayleigh's law C = C0 F^(D-1). ValueError where a major would turn negative.
    """
    left = 1.0 - crystallised
    total = sum(assemblage.values())
    liquid = {}
    for name in MAJORS:
        solid = sum(share / total * MINERALS[mineral].get(name, 0.0) for mineral, share in assemblage.items())
        liquid[name] = (parent[name] - crystallised * solid) / left
        if liquid[name] < 0.0:
            raise ValueError(f"{name} would be {liquid[name]:.2f} wt% after {crystallised:.0%} crystallisation")
    for name in TRACES:
        liquid[name] = parent[name] * left ** (bulk_coefficient(assemblage, name) - 1.0)
    return closed(liquid)


def batch_melt_traces(source: Composition, residue: Composition, melted: float) -> Composition:
    """Traces of a batch melt, C = C0 / (D + F (1 - D)), with the residue's bulk D."""
    traces = {}
    for name in TRACES:
        coefficient = bulk_coefficient(residue, name)
        traces[name] = source[name] / (coefficient + melted * (1.0 - coefficient))
    return traces


def accumulated(
    liquid: Composition, cumulus: Mapping[str, float], trapped: float, sulphide: float, r_factor: float
) -> Composition:
    """A cumulate: crystals of the liquid, the share ``trapped`` of the liquid and ``sulphide`` of sulphide melt.

    ``cumulus`` in relative mass shares. Traces of the crystals by their coefficients; of the sulphide by
    C = C0 D (R + 1) / (R + D) with R the mass of magma each part of sulphide met (Campbell & Naldrett 1979, Econ. Geol.
    74, 1503-1506, from memory). The result has "S" in wt% too.
    """
    crystals = 1.0 - trapped - sulphide
    total = sum(cumulus.values())
    rock: Composition = {}
    for name in MAJORS:
        solid = sum(share / total * MINERALS[mineral].get(name, 0.0) for mineral, share in cumulus.items())
        rock[name] = crystals * solid + trapped * liquid[name]
    rock["Fe2O3T"] += sulphide * SULPHIDE_IRON_WT * FE2O3_PER_FE
    for name in TRACES:
        solid = 0.0
        for mineral, share in cumulus.items():
            coefficient = PARTITION[_kind(mineral)].get(name, INCOMPATIBLE)
            solid += share / total * FIXED_TRACES.get(mineral, {}).get(name, coefficient * liquid[name])
        coefficient = PARTITION["sulphide"].get(name, INCOMPATIBLE)
        in_sulphide = liquid[name] * coefficient * (r_factor + 1.0) / (r_factor + coefficient)
        rock[name] = crystals * solid + trapped * liquid[name] + sulphide * in_sulphide
    return closed(rock) | {"S": sulphide * SULPHIDE_SULPHUR_WT}


def mixed(first: Composition, second: Composition, share_of_second: float) -> Composition:
    """Two magmas mixed by mass."""
    return {name: (1.0 - share_of_second) * first[name] + share_of_second * second[name] for name in first}


def average(name: str) -> Composition:
    """A published average, rare earths completed, majors (where it has them) closed."""
    full = complete_rare_earths(AVERAGES[name])
    return closed(full) if "SiO2" in full else full
