"""What lies in the sample bags: rocks of the suites, altered as logged, and the controls put between them."""

from __future__ import annotations

import random
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from seed_demo.alterations import ALTERATIONS
from seed_demo.averages import MAJORS
from seed_demo.certificates import normal, split_name
from seed_demo.differentiation import Composition, closed
from seed_demo.district import (
    CONTROL_MATERIALS,
    CONTROL_ROTA,
    INTRUSIONS,
    SWAPPED,
    ControlMaterial,
    Hole,
    Outcrop,
    Unit,
)
from seed_demo.holes import HOLES
from seed_demo.outcrops import OUTCROPS
from seed_demo.suites import SUITES, Suite

SUITE_OF = {intrusion.name: intrusion.suite for intrusion in INTRUSIONS}
SAMPLE_COLUMNS = (
    "sample_code", "sample_kind", "site_code", "from_m", "to_m", "intrusion", "lithology", "texture", "alteration",
    "collected_on", "duplicate_of", "reference_material", "magnetic_susceptibility_si", "density_kg_m3",
    "pulp_available",
)  # fmt: skip
#: Rocks between two controls.
ROCKS_BETWEEN = 8


@dataclass(frozen=True)
class Bag:
    """One sample bag: its row of samples.csv, the certificates its pulp went to and the rock in it."""

    row: Mapping[str, object]
    certificates: tuple[str, ...]
    rock: Composition


def rock_in_bag(
    suite: Suite, progress: float, alteration: str | None, intensity: float, rng: random.Random
) -> tuple[Composition, float, float]:
    """A rock of the suite, altered, as bagged; its susceptibility (SI) and density (kg/m3).

    Real variation within a body: 1.5 % of each major, 5 % of each trace. Majors with LOI and S sum to 100 (all iron as
    Fe2O3); FeO from the suite's ferric ratio, which alteration raises.
    """
    fresh = suite.rock(min(max(progress + 0.06 * normal(rng), 0.0), 1.0), rng.random(), rng.random())
    sulphide_sulphur = fresh.pop("S", 0.0)
    rock = {name: value * (1.0 + (0.015 if name in MAJORS else 0.05) * normal(rng)) for name, value in fresh.items()}
    ferric = suite.ferric_ratio * 10 ** (0.06 * normal(rng))
    loi = suite.loi_wt * 10 ** (0.1 * normal(rng))
    sulphur = sulphide_sulphur + suite.sulphur_wt * 10 ** (0.25 * normal(rng))
    susceptibility = suite.susceptibility_si * 10 ** (0.15 * normal(rng))
    density = suite.density_kg_m3 * (1.0 + 0.004 * normal(rng))
    if alteration is not None:
        change = ALTERATIONS[alteration]
        strength = min(max(intensity * (1.0 + 0.15 * normal(rng)), 0.0), 1.15)
        for name, factor in change.factors.items():
            rock[name] *= factor**strength
        loi += change.loi_wt * strength
        sulphur += change.sulphur_wt * strength
        susceptibility *= 10 ** (-change.decades_of_magnetite_lost * strength)
        ferric *= 1.0 + 0.5 * strength
    rock = closed(rock)
    left = (100.0 - loi) / 100.0
    rock = {name: value * (left if name in MAJORS else 1.0) for name, value in rock.items()}
    rock |= {"LOI": loi, "S": sulphur, "FeO": rock["Fe2O3T"] / (ferric + 1.1113)}
    return rock, susceptibility, density


def _sample_row(code: str, kind: str, **values: object) -> dict[str, object]:
    return dict.fromkeys(SAMPLE_COLUMNS, "") | {"sample_code": code, "sample_kind": kind, "pulp_available": 1} | values


def _core(hole: Hole, unit: Unit, code: str, from_m: float) -> Bag:
    rng = random.Random(code)
    assert unit.intrusion is not None
    suite = SUITES[unit.suite or SUITE_OF[unit.intrusion]]
    share = (from_m - unit.from_m) / (unit.to_m - unit.from_m)
    progress = unit.progress[0] + share * (unit.progress[1] - unit.progress[0])
    rock, susceptibility, density = rock_in_bag(suite, progress, unit.alteration, unit.intensity, rng)
    row = _sample_row(
        code,
        "core",
        site_code=hole.code,
        from_m=f"{from_m:.1f}",
        to_m=f"{from_m + 1.0:.1f}",
        intrusion=unit.intrusion,
        lithology=unit.lithology,
        texture=suite.texture,
        alteration=unit.alteration or "",
        collected_on="2024-03-14",
        magnetic_susceptibility_si=f"{susceptibility:.3g}",
        density_kg_m3=f"{density:.0f}",
    )
    return Bag(row, unit.certificates or (hole.certificate,), rock)


def _surface(station: Outcrop, place: int) -> Bag:
    code = f"{station.code}{'abc'[place]}"
    suite = SUITES[station.suite or SUITE_OF[station.intrusion]]
    alteration = "weathered" if station.weathered else None
    rng = random.Random(code)
    rock, _, _ = rock_in_bag(suite, station.progress[place], alteration, station.weathered, rng)
    row = _sample_row(
        code,
        station.kind,
        site_code=station.code,
        intrusion=station.intrusion,
        lithology=suite.lithology,
        texture=suite.texture,
        alteration=alteration or "",
        collected_on="2024-02-20",
    )
    return Bag(row, (station.certificate,), rock)


def _control(code: str, what: str, certificates: tuple[str, ...], before: Bag) -> Bag:
    if what == "duplicate":
        row = _sample_row(code, "duplicate", duplicate_of=before.row["sample_code"])
        return Bag(row, certificates, before.rock)
    material = CONTROL_MATERIALS[what]
    row = _sample_row(code, material.kind, reference_material=material.name)
    return Bag(row, certificates, powder(material))


def powder(material: ControlMaterial) -> Composition:
    """A control material as it is analysed: with ignition loss, sulphur and ferrous iron."""
    rock = dict(material.composition) | {"LOI": 0.35, "S": 0.01}
    rock["FeO"] = rock["Fe2O3T"] * 0.5
    return rock


class _Controls:
    """Which control comes next, by certificate."""

    def __init__(self) -> None:
        self._inserted: Counter[str] = Counter()

    def next(self, code: str, before: Bag) -> Bag:
        name = split_name(before.certificates[-1])[0]
        rota = CONTROL_ROTA[name]
        what = rota[self._inserted[name] % len(rota)]
        self._inserted[name] += 1
        return _control(code, what, before.certificates[-1:], before)


def _of_hole(hole: Hole, controls: _Controls) -> list[Bag]:
    found: list[Bag] = []
    number, since_control = hole.first_bag, 0
    for unit in hole.units:
        if unit.intrusion is None:
            continue
        from_m = unit.from_m + 2.0
        while from_m + 1.0 <= unit.to_m:
            found.append(_core(hole, unit, f"{hole.code}-{number}", from_m))
            number, since_control, from_m = number + 1, since_control + 1, from_m + hole.spacing_m
            if since_control == ROCKS_BETWEEN:
                found.append(controls.next(f"{hole.code}-{number}", found[-1]))
                number, since_control = number + 1, 0
    return found


def _of_stations(stations: Sequence[Outcrop], controls: _Controls) -> list[Bag]:
    found: list[Bag] = []
    since_control: Counter[str] = Counter()
    for station in stations:
        found += [_surface(station, place) for place in range(len(station.progress))]
        name = station.certificate
        since_control[name] += len(station.progress)
        if since_control[name] >= ROCKS_BETWEEN:
            since_control[name] = 0
            found.append(controls.next(f"{station.code}-C", found[-1]))
    return found


def bags() -> list[Bag]:
    """All bags in the order of their numbers, a control after every eighth rock of a hole or certificate.

    The rocks of ``SWAPPED`` lie in each other's bags: the row of samples.csv is that of the place.
    """
    controls = _Controls()
    found = [bag for hole in HOLES for bag in _of_hole(hole, controls)] + _of_stations(OUTCROPS, controls)
    place = {str(bag.row["sample_code"]): number for number, bag in enumerate(found)}
    for first, second in SWAPPED:
        one, other = place[first], place[second]
        found[one], found[other] = (
            replace(found[one], rock=found[other].rock),
            replace(found[other], rock=found[one].rock),
        )
    return found
