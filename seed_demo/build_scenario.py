"""Write the CSV files of the invented district. Run by hand from a clone: ``python -m seed_demo.build_scenario``.

Every number comes from ``suites.py``, ``holes.py``, ``outcrops.py`` and ``district.py`` through a seed made of the
sample's code, so that adding a hole leaves the others as they are. A test runs this into a temporary folder and
compares the bytes.
"""

from __future__ import annotations

import csv
import io
import sys
from collections.abc import Iterable, Mapping
from pathlib import Path

from seed_demo.averages import MAJORS
from seed_demo.bags import SAMPLE_COLUMNS, bags, powder
from seed_demo.certificates import certificate_file, split_name
from seed_demo.district import AREAS, CONTROL_MATERIALS, EPSG, INTRUSIONS
from seed_demo.holes import HOLES
from seed_demo.laboratories import LAYOUTS
from seed_demo.outcrops import OUTCROPS

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
CERTIFICATE_COLUMNS = (
    "reference_material", "analyte", "value", "unit", "uncertainty", "uncertainty_type", "status", "source",
)  # fmt: skip


def control_values() -> list[dict[str, object]]:
    """Invented certificates of the district's own materials: true values with a deviation between laboratories.

    1.2 % of a major (0.4 % of SiO2), 4.6 % of all else, 10 % in the sand, and a fifth of the poorer laboratory's
    detection limit, which is what the laboratories' own errors come to with one between them.
    """
    limits: dict[str, float] = {}
    for layout in LAYOUTS.values():
        for column in layout.packages.get("", ()):
            limits[column.analyte] = max(limits.get(column.analyte, 0.0), column.limit / column.scale)
    rows: list[dict[str, object]] = []
    for material in CONTROL_MATERIALS.values():
        for analyte, value in powder(material).items():
            if value <= 0.0:
                continue
            wt = analyte in MAJORS or analyte in ("LOI", "S", "FeO")
            relative = (
                0.1
                if material.kind == "blank"
                else 0.004
                if analyte == "SiO2"
                else 0.012
                if analyte in MAJORS
                else 0.046
            )
            deviation = relative * value + 0.2 * limits.get(analyte, 0.0)
            row = (material.name, analyte, f"{value:.4g}", "wt%" if wt else "ppm", f"{deviation:.2g}", "SD")
            said = (*row, "certified" if material.kind == "reference_material" else "information", "invented")
            rows.append(dict(zip(CERTIFICATE_COLUMNS, said, strict=True)))
    return rows


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
        lines = [
            (str(bag.row["sample_code"]), package, bag.rock)
            for bag in all_bags
            for certificate, package in map(split_name, bag.certificates)
            if certificate == name
        ]
        found[layout.file] = certificate_file(name, lines)
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
