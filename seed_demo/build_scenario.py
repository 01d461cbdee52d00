"""Write the CSV files of the invented district. Run by hand from a clone: ``python -m seed_demo.build_scenario``.

Every number comes from ``suites.py`` and ``district.py`` through a seed made of the sample's code, so that adding a
hole leaves the others as they are. A test runs this into a temporary folder and compares the bytes.
"""

from __future__ import annotations

import csv
import io
import random
import sys
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path

from seed_demo.averages import MAJORS
from seed_demo.certificates import LAYOUTS, certificate_text, normal
from seed_demo.differentiation import Composition, closed
from seed_demo.district import (
    AREAS,
    CONTROL_MATERIALS,
    CONTROL_ROTA,
    EPSG,
    HOLES,
    INTRUSIONS,
    OUTCROPS,
    ControlMaterial,
    Hole,
    Unit,
)
from seed_demo.suites import ALTERATIONS, SUITES, Suite

SUITE_OF = {intrusion.name: intrusion.suite for intrusion in INTRUSIONS}
AREA_COLUMNS = (
    "area", "epsg", "heat_flow_mw_m2", "surface_temperature_c", "conductivity_w_m_k", "heat_production_uw_m3",
    "heat_production_depth_m",
)  # fmt: skip
SITE_COLUMNS = (
    "site_code", "site_kind", "area", "easting", "northing", "elevation_m", "epsg", "depth_m", "azimuth_reference",
)  # fmt: skip
INTERVAL_COLUMNS = ("site_code", "from_m", "to_m", "lithology", "description")
INTRUSION_COLUMNS = (
    "intrusion", "area", "shape", "half_width_m", "volume_km3", "depth_to_top_m", "emplacement_depth_m", "age_ma",
    "age_sigma_ma", "country_density_kg_m3",
)  # fmt: skip
SAMPLE_COLUMNS = (
    "sample_code", "sample_kind", "site_code", "from_m", "to_m", "intrusion", "lithology", "texture", "alteration",
    "collected_on", "duplicate_of", "reference_material", "magnetic_susceptibility_si", "density_kg_m3",
    "pulp_available",
)  # fmt: skip
CERTIFICATE_COLUMNS = (
    "reference_material", "analyte", "value", "unit", "uncertainty", "uncertainty_type", "status", "source",
)  # fmt: skip


@dataclass(frozen=True)
class Bag:
    """One sample bag: its row of samples.csv, the certificate it went to and the rock in it."""

    row: Mapping[str, object]
    certificate: str
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
    suite = SUITES[SUITE_OF[unit.intrusion]]
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
    return Bag(row, hole.certificate, rock)


def _control(code: str, what: str, certificate: str, before: Bag) -> Bag:
    if what == "duplicate":
        row = _sample_row(code, "duplicate", duplicate_of=before.row["sample_code"])
        return Bag(row, certificate, before.rock)
    material = CONTROL_MATERIALS[what]
    row = _sample_row(code, material.kind, reference_material=material.name)
    return Bag(row, certificate, _powder(material))


def _powder(material: ControlMaterial) -> Composition:
    rock = dict(material.composition) | {"LOI": 0.35, "S": 0.01}
    rock["FeO"] = rock["Fe2O3T"] * 0.5
    return rock


def control_values() -> list[dict[str, object]]:
    """Invented certificates of the district's own materials: true values with a deviation between laboratories.

    1.2 % of a major (0.4 % of SiO2), 4.6 % of a trace, 10 % in the sand, and a fifth of the poorer laboratory's
    detection limit: chosen so that one certificate passes and the other passes with remarks.
    """
    limits: dict[str, float] = {}
    for layout in LAYOUTS.values():
        for column in layout.columns:
            limits[column.analyte] = max(limits.get(column.analyte, 0.0), column.limit / column.scale)
    rows: list[dict[str, object]] = []
    for material in CONTROL_MATERIALS.values():
        for analyte, value in _powder(material).items():
            if value <= 0.0:
                continue
            wt = analyte in MAJORS or analyte in ("LOI", "S", "FeO")
            relative = 0.1 if material.kind == "blank" else 0.004 if analyte == "SiO2" else 0.012 if wt else 0.046
            deviation = relative * value + 0.2 * limits.get(analyte, 0.0)
            row = (material.name, analyte, f"{value:.4g}", "wt%" if wt else "ppm", f"{deviation:.2g}", "SD")
            said = (*row, "certified" if material.kind == "reference_material" else "information", "invented")
            rows.append(dict(zip(CERTIFICATE_COLUMNS, said, strict=True)))
    return rows


def bags() -> list[Bag]:
    """All bags in the order of their numbers, a control after every seventh rock of a hole."""
    found: list[Bag] = []
    controls = 0
    for hole in HOLES:
        number, since_control = hole.first_bag, 0
        for unit in hole.units:
            if unit.intrusion is None:
                continue
            from_m = unit.from_m + 2.0
            while from_m + 1.0 <= unit.to_m:
                found.append(_core(hole, unit, f"{hole.code}-{number}", from_m))
                number, since_control, from_m = number + 1, since_control + 1, from_m + hole.spacing_m
                if since_control == 7:
                    what = CONTROL_ROTA[controls % len(CONTROL_ROTA)]
                    found.append(_control(f"{hole.code}-{number}", what, hole.certificate, found[-1]))
                    number, since_control, controls = number + 1, 0, controls + 1
    for outcrop in OUTCROPS:
        suite = SUITES[SUITE_OF[outcrop.intrusion]]
        for place, progress in enumerate(outcrop.progress):
            code = f"{outcrop.code}{'abc'[place]}"
            rng = random.Random(code)
            alteration = "weathered" if outcrop.weathered else None
            rock, _, _ = rock_in_bag(suite, progress, alteration, outcrop.weathered, rng)
            row = _sample_row(
                code,
                outcrop.kind,
                site_code=outcrop.code,
                intrusion=outcrop.intrusion,
                lithology=suite.lithology,
                texture=suite.texture,
                alteration=alteration or "",
                collected_on="2024-02-20",
            )
            found.append(Bag(row, outcrop.certificate, rock))
        if place and outcrop.code in ("Q001", "O001"):
            rock_bag = found[-1]
            for number, what in enumerate(("QRM-A", "blank", "QRM-G", "duplicate"), 1):
                found.append(_control(f"{outcrop.code}-C{number}", what, outcrop.certificate, rock_bag))
    return found


def _table(columns: Iterable[str], rows: Iterable[Mapping[str, object]]) -> bytes:
    text = io.StringIO()
    writer = csv.DictWriter(text, list(columns), extrasaction="ignore", lineterminator="\n")
    writer.writeheader()
    for row in rows:
        writer.writerow({name: "" if value is None else value for name, value in row.items()})
    return text.getvalue().encode("utf-8")


def _renamed(record: object, **fields: str) -> dict[str, object]:
    """A record of ``district`` as a row: its fields, some under the column's name."""
    row = {name: getattr(record, name) for name in vars(record)}
    return row | {column: row[name] for column, name in fields.items()}


def scenario() -> dict[str, bytes]:
    """Every file of the scenario by name."""
    all_bags = bags()
    sites = [
        _renamed(site, site_code="code") | {"site_kind": kind, "epsg": EPSG} | extra
        for kind, group, extra in (
            ("drill_hole", HOLES, {"azimuth_reference": "grid"}),
            ("outcrop", OUTCROPS, {}),
        )
        for site in group
    ]
    surveys = [
        {"site_code": hole.code, "depth_m": depth, "azimuth_deg": azimuth, "dip_deg": dip}
        for hole in HOLES
        for depth, azimuth, dip in hole.surveys
    ]
    found = {
        "areas.csv": _table(AREA_COLUMNS, [_renamed(area, area="name") | {"epsg": EPSG} for area in AREAS]),
        "sites.csv": _table(SITE_COLUMNS, sites),
        "surveys.csv": _table(("site_code", "depth_m", "azimuth_deg", "dip_deg"), surveys),
        "intervals.csv": _table(
            INTERVAL_COLUMNS, [_renamed(unit) | {"site_code": hole.code} for hole in HOLES for unit in hole.units]
        ),
        "intrusions.csv": _table(INTRUSION_COLUMNS, [_renamed(each, intrusion="name") for each in INTRUSIONS]),
        "samples.csv": _table(SAMPLE_COLUMNS, [bag.row for bag in all_bags]),
        "reference_materials.csv": _table(CERTIFICATE_COLUMNS, control_values()),
    }
    for name, layout in LAYOUTS.items():
        lines = [(str(bag.row["sample_code"]), bag.rock) for bag in all_bags if bag.certificate == name]
        found[f"results_{name}.csv"] = certificate_text(name, lines).encode(layout.encoding)
    return found


def write(folder: Path) -> list[Path]:
    """Write the scenario into ``folder``; the paths written."""
    written = []
    for name, content in scenario().items():
        (folder / name).write_bytes(content)
        written.append(folder / name)
    return written


if __name__ == "__main__":
    for path in write(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent):
        print(path)
