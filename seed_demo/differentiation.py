"""Mass balance and the laws of Rayleigh and batch melting, by which the demo's suites grow from their parents."""

from __future__ import annotations

from seed_demo.averages import (
    AVERAGES,
    INCOMPATIBLE,
    MAJORS,
    MINERALS,
    PARTITION,
    TRACES,
    complete_rare_earths,
)

Composition = dict[str, float]


def closed(composition: Composition) -> Composition:
    """The majors closed to 100 wt% (all iron as Fe2O3); traces as they are."""
    total = sum(composition[name] for name in MAJORS)
    return {name: value * (100.0 / total if name in MAJORS else 1.0) for name, value in composition.items()}


def bulk_coefficient(assemblage: Composition, element: str) -> float:
    """Bulk D of an assemblage given as mass shares by mineral; ``plagioclase_55`` partitions as plagioclase."""
    total = sum(assemblage.values())
    shared = 0.0
    for mineral, share in assemblage.items():
        kind = mineral.rsplit("_", 1)[0] if mineral[-1].isdigit() else mineral
        shared += share / total * PARTITION[kind].get(element, INCOMPATIBLE)
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


def mixed(first: Composition, second: Composition, share_of_second: float) -> Composition:
    """Two magmas mixed by mass."""
    return {name: (1.0 - share_of_second) * first[name] + share_of_second * second[name] for name in first}


def average(name: str) -> Composition:
    """A published average, rare earths completed, majors (where it has them) closed."""
    full = complete_rare_earths(AVERAGES[name])
    return closed(full) if "SiO2" in full else full
