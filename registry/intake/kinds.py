"""The kinds of files: contract columns of master data, the spellings they are known by, and how a kind is told."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from functools import lru_cache

TEXT, NUMBER, DATE, TRUTH, WORD = "text", "number", "date", "truth", "word"


@dataclass(frozen=True)
class Field:
    """One contract column: what it holds, other spellings, bounds, choices, and unit factors to the column's unit."""

    name: str
    holds: str = TEXT
    spellings: tuple[str, ...] = ()
    low: float | None = None
    high: float | None = None
    words: tuple[str, ...] = ()
    required: bool = False


def _field(name: str, holds: str = TEXT, spellings: str = "", low: float | None = None, high: float | None = None,
           words: str = "", required: bool = False) -> Field:  # fmt: skip
    return Field(
        name, holds, tuple(text.strip() for text in spellings.split(",") if text.strip()), low, high,
        tuple(words.split()), required,
    )  # fmt: skip


_SITE = "site, site id, site name, hole, hole id, holeid, hole no, hole number, hole name, hole code, bhid, borehole, "
_SITE += "borehole id, drill hole, drillhole, drillhole id, dhid, dh id, collar, collar id, station, station id"
_SITE += ", outcrop id, well, well id, hole_id, bh id, bh, point id, locality, locality id"
_LITHOLOGY = "lith, litho, lithology code, lith code, rock, rock type, rocktype, rock name, rock code, rock_type"
_EPSG = _field("epsg", NUMBER, "epsg code, crs, srid, coordinate system, coord sys", 1024, 32767)
_FROM = "from, from depth, depth from, start, top, top depth, sampfrom, from (m), interval from"
_TO = "to, to depth, depth to, end, bottom, bottom depth, base, sampto, interval to"
_SAMPLE_KINDS = "core chips outcrop float unknown reference_material blank duplicate"

FIELDS: dict[str, tuple[Field, ...]] = {
    "areas": (
        _field("area", TEXT, "area name, prospect, licence, license, block, project, area code, name", required=True),
        _EPSG,
        _field("heat_flow_mw_m2", NUMBER, "heat flow, surface heat flow, q0", 0, 1000),
        _field("surface_temperature_c", NUMBER, "surface temperature, mean surface temperature, t0", -60, 60),
        _field("conductivity_w_m_k", NUMBER, "conductivity, thermal conductivity", 0.1, 10),
        _field("heat_production_uw_m3", NUMBER, "heat production, a0, crustal heat production", 0, 100),
        _field("heat_production_depth_m", NUMBER, "heat production depth, heat production scale depth", 0, 100_000),
        _field("moho_depth_m", NUMBER, "moho, moho depth, crustal thickness", 3000, 100_000),
    ),
    "sites": (
        _field("site_code", TEXT, _SITE + ", code, name", required=True),
        _field("site_kind", WORD, "kind, type, site type, hole type, station type", words="drill_hole outcrop"),
        _field("area", TEXT, "prospect, project, licence, license, block, area name"),
        _field("easting", NUMBER, "east, x, utm e, utm_e, utm east, utm easting, easting x, e", -1e8, 1e8),
        _field("northing", NUMBER, "north, y, utm n, utm_n, utm north, utm northing, northing y, n", -1e8, 1e8),
        _field("elevation_m", NUMBER, "elevation, elev, rl, z, altitude, alt, height, collar rl", -11_000, 9000),
        _EPSG,
        _field("depth_m", NUMBER, "depth, total depth, hole depth,"
               "eoh, end of hole, max depth, td, length, final depth,"
               "final length",
               0, 15_000),
        _field("azimuth_reference", WORD, "north reference, azimuth ref, azimuth type", words="true grid magnetic"),
        _field("longitude", NUMBER, "lon, long, longitude wgs84, lng, x_wgs84", -180, 180),
        _field("latitude", NUMBER, "lat, latitude wgs84, y_wgs84", -90, 90),
    ),
    "surveys": (
        _field("site_code", TEXT, _SITE, required=True),
        _field("depth_m", NUMBER, "depth, at, survey depth, measured depth, md, distance, station depth", 0, 15_000,
               required=True),
        _field("azimuth_deg", NUMBER, "azimuth, azi, az, bearing, brg, azim", 0, 360, required=True),
        _field("dip_deg", NUMBER, "dip, inclination, incl, plunge, dip angle", -90, 90, required=True),
    ),
    "intervals": (
        _field("site_code", TEXT, _SITE, required=True),
        _field("from_m", NUMBER, _FROM, 0, 15_000, required=True),
        _field("to_m", NUMBER, _TO, 0, 15_000, required=True),
        _field("lithology", TEXT, _LITHOLOGY + ", code, unit", required=True),
        _field("description", TEXT, "comment, comments, remarks, notes, log, discription, geologist notes"),
    ),
    "intrusions": (
        _field("intrusion", TEXT, "intrusion name, body, pluton, name, intrusive", required=True),
        _field("area", TEXT, "prospect, project, area name"),
        _field("shape", WORD, "form, geometry", words="sphere slab cylinder"),
        _field("half_width_m", NUMBER, "half width, halfwidth, radius, radius_m, half thickness", 0, 1e6),
        _field("volume_km3", NUMBER, "volume", 0, 1e7),
        _field("depth_to_top_m", NUMBER, "depth to top, top depth, depth of top", -9000, 1e5),
        _field("emplacement_depth_m", NUMBER, "emplacement depth, intrusion depth", 0, 1e5),
        _field("age_ma", NUMBER, "age", 0, 4600),
        _field("age_sigma_ma", NUMBER, "age sigma, age error, age uncertainty, sigma age", 0, 4600),
        _field("country_density_kg_m3", NUMBER, "country density, country rock density, wall rock density", 1000, 4000),
        _field("mapped", TRUTH, "is mapped, mapped or inferred"),
        _field("parent_sample", TEXT, "primitive sample, parent composition"),
        _field("fresh_sample", TEXT, "unaltered sample, fresh reference"),
    ),
    "samples": (
        _field("sample_code", TEXT, "sample, sample id, sampleid, sample no, sample number, sample name, field id,"
               "lab id,"
               "field no, specimen, specimen id, sample_no, feild id, sampno, smp id", required=True),
        _field("sample_kind", WORD, "kind, type, sample type, material, sampletype", words=_SAMPLE_KINDS),
        _field("site_code", TEXT, _SITE),
        _field("from_m", NUMBER, _FROM, 0, 15_000),
        _field("to_m", NUMBER, _TO, 0, 15_000),
        _field("intrusion", TEXT, "intrusion name, pluton, body, intrusive"),
        _field("lithology", TEXT, _LITHOLOGY),
        _field("texture", TEXT, "fabric"),
        _field("alteration", TEXT, "alteration type, alt, alteration style"),
        _field("igsn", TEXT, "igsn number"),
        _field("collected_on", DATE, "collected, date, date collected, sample date, sampling date, collection date"),
        _field("duplicate_of", TEXT, "duplicate, dup of, parent sample, original sample, parent"),
        _field("duplicate_stage", WORD, "duplicate type, stage of duplicate, stage", words="field crush pulp lab"),
        _field("reference_material", TEXT, "crm, standard, standard id, reference, reference standard, srm"),
        _field("magnetic_susceptibility_si", NUMBER, "magnetic susceptibility, susceptibility, mag sus, magsus, k si,"
               "susceptibility si", -0.01, 20),
        _field("density_kg_m3", NUMBER, "density, bulk density, sg, specific gravity", 500, 10_000),
        _field("pulp_available", TRUTH, "pulp, pulp kept, pulp stored"),
        _field("easting", NUMBER, "east, x, utm e, utm_e, utm east, utm easting", -1e8, 1e8),
        _field("northing", NUMBER, "north, y, utm n, utm_n, utm north, utm northing", -1e8, 1e8),
        _field("elevation_m", NUMBER, "elevation, elev, rl, z, altitude", -11_000, 9000),
        _EPSG,
        _field("longitude", NUMBER, "lon, long, lng", -180, 180),
        _field("latitude", NUMBER, "lat", -90, 90),
    ),
    "reference-materials": (
        _field("reference_material", TEXT, "material, crm, standard, reference, srm, standard id, name", required=True),
        _field("analyte", TEXT, "element, oxide, parameter, constituent", required=True),
        _field("value", NUMBER, "certified value, certified, result, concentration, mean", 0, 1e7, required=True),
        _field("unit", TEXT, "units, uom", required=True),
        _field("uncertainty", NUMBER, "sd, sigma, std dev, standard deviation, error, 1sd", 0, 1e7),
        _field("uncertainty_type", TEXT, "type of uncertainty"),
        _field("status", TEXT, "certification, certified or indicative"),
        _field("source", TEXT, "reference source, citation, certificate"),
    ),
}  # fmt: skip
#: What each kind needs, in a sentence.
NEEDS = {
    "areas": "area, with epsg or heat_flow_mw_m2",
    "sites": "site_code with easting and northing (and epsg), or longitude and latitude",
    "surveys": "site_code, depth_m, azimuth_deg, dip_deg",
    "intervals": "site_code, from_m, to_m, lithology",
    "intrusions": "intrusion, with shape, half_width_m, volume_km3 or age_ma",
    "samples": "sample_code, with one of sample_kind, site_code, from_m, intrusion, lithology",
    "results": "a sample code column and analytes with units, as SiO2 (%) or Zr (ppm)",
    "reference-materials": "reference_material, analyte, value, unit",
}
_UNIT_TAIL = re.compile(
    r"(?:[\s_]*[(\[](?P<bracket>[^()\[\]]*)[)\]]|[\s_](?P<tail>m|ft|km|deg|degrees|si|c|kg m3|kg/m3"
    r"|g/cm3|g cm3|t/m3|km3|ma|mw m2|mw/m2|uw m3|w m k))\s*$"
)


def folded(text: str) -> str:
    """A heading in one spelling: lower case, one space for underscores, dots, dashes and runs of spaces."""
    text = unicodedata.normalize("NFKC", text).casefold().replace("µ", "u").replace("μ", "u")
    return re.sub(r"[\s_.\-:]+", " ", text).strip()


@lru_cache(maxsize=8192)
def field_of(kind: str, heading: str) -> tuple[Field, str | None] | None:
    """The contract column that a heading of this kind of file means, and the unit stated in it."""
    plain = folded(heading)
    if not plain:
        return None
    bare, unit = plain, None
    tail = _UNIT_TAIL.search(plain)
    if tail:
        bare, unit = plain[: tail.start()].strip(), (tail["bracket"] or tail["tail"] or "").strip()
    names = _spelt(kind)
    if plain in names:
        return names[plain], "g/cm3" if plain in ("sg", "specific gravity") else None
    known = names.get(bare) or _spelt_bare(kind).get(bare)
    return None if known is None else (known, unit)


@lru_cache
def _spelt(kind: str) -> dict[str, Field]:
    spelt: dict[str, Field] = {}
    for one in FIELDS[kind]:
        for text in (one.name, *one.spellings):
            spelt.setdefault(folded(text), one)
    return spelt


@lru_cache
def _spelt_bare(kind: str) -> dict[str, Field]:
    """The contract's names without their own unit: ``depth`` of ``depth (m)``."""
    ending = re.compile(r" (m|deg|c|si|ma|km3|kg m3|mw m2|uw m3|w m k)$")
    return {ending.sub("", folded(one.name)): one for one in FIELDS[kind]}


def columns_of(kind: str, headings: list[str]) -> dict[str, int]:
    """Positions of the contract columns among the headings, the first of equals."""
    found: dict[str, int] = {}
    for position, heading in enumerate(headings):
        known = field_of(kind, heading)
        if known is not None:
            found.setdefault(known[0].name, position)
    return found


def possible_kinds(headings: list[str], analytes: int) -> list[str]:
    """The kinds of master data that a heading row could be; ``analytes`` counts its analyte headings."""
    have = {kind: set(columns_of(kind, headings)) for kind in FIELDS}
    kinds = []
    if {"reference_material", "analyte", "value"} <= have["reference-materials"] and "sample_code" not in have[
        "samples"
    ]:
        return ["reference-materials"]
    samples = have["samples"]
    exact = {folded(heading) for heading in headings}
    if "sample_code" in samples and analytes < 2 and len(samples) > 1:
        kinds.append("samples")
    if have["surveys"] >= {"site_code", "depth_m", "azimuth_deg", "dip_deg"} and "sample_code" not in samples:
        kinds.append("surveys")
    site = have["sites"]
    placed = {"easting", "northing"} <= site or {"longitude", "latitude"} <= site
    if "site_code" in site and placed and "sample_code" not in samples and "intrusion" not in exact:
        kinds.append("sites")
    if have["intervals"] >= {"site_code", "from_m", "to_m", "lithology"} and "sample_code" not in samples:
        kinds.append("intervals")
    body = have["intrusions"] & {
        "shape",
        "half_width_m",
        "volume_km3",
        "depth_to_top_m",
        "emplacement_depth_m",
        "age_ma",
    }
    if "intrusion" in have["intrusions"] and body and "sample_code" not in samples:
        kinds.append("intrusions")
    heat = have["areas"] & {
        "epsg",
        "heat_flow_mw_m2",
        "surface_temperature_c",
        "conductivity_w_m_k",
        "heat_production_uw_m3",
    }
    if "area" in have["areas"] and heat and not kinds and not exact & {"site code", "intrusion"}:
        kinds.append("areas")
    return kinds
