"""What each kind of master data is made of: its table, its key, its columns and what they refer to."""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True)
class Reference:
    """A column that names another thing: stored as its id in ``stored`` of the own table."""

    column: str
    stored: str
    table: str
    code: str
    what: str


@dataclass(frozen=True)
class MasterKind:
    """One kind of master data.

    ``columns`` maps contract columns to stored ones (references left out); ``key`` are the stored columns that name a
    row; ``words`` are the columns that hold one of a few words; ``defaults`` fill a blank of a new row.
    """

    kind: str
    table: str
    noun: str
    key: tuple[str, ...]
    columns: dict[str, str]
    references: tuple[Reference, ...] = ()
    words: dict[str, tuple[str, ...]] = field(default_factory=dict)
    defaults: dict[str, str] = field(default_factory=dict)


def _same(names: str, **renamed: str) -> dict[str, str]:
    return {**renamed, **{name: name for name in names.split()}}


_AREA = Reference("area", "area_id", "area", "name", "area")
_SITE = Reference("site_code", "site_id", "site", "code", "site")
#: What was split to make a duplicate.
DUPLICATE_STAGES = ("field", "crush", "pulp", "lab")
SAMPLE_KINDS = ("core", "chips", "outcrop", "float", "unknown", "reference_material", "blank", "duplicate")

MASTER_KINDS = {
    "areas": MasterKind(
        "areas",
        "area",
        "area",
        ("name",),
        _same(
            "epsg heat_flow_mw_m2 surface_temperature_c conductivity_w_m_k heat_production_uw_m3 "
            "heat_production_depth_m moho_depth_m",
            area="name",
        ),
    ),
    "sites": MasterKind(
        "sites",
        "site",
        "site",
        ("code",),
        _same(
            "easting northing elevation_m epsg depth_m azimuth_reference longitude latitude",
            site_code="code",
            site_kind="kind",
        ),
        (_AREA,),
        {"site_kind": ("drill_hole", "outcrop"), "azimuth_reference": ("true", "grid", "magnetic")},
    ),
    "surveys": MasterKind(
        "surveys", "survey", "survey of", ("site_id", "depth_m"), _same("depth_m azimuth_deg dip_deg"), (_SITE,)
    ),
    "intervals": MasterKind(
        "intervals",
        "lithology_interval",
        "interval of",
        ("site_id", "from_m", "to_m"),
        _same("from_m to_m lithology description"),
        (_SITE,),
    ),
    "intrusions": MasterKind(
        "intrusions",
        "intrusion",
        "intrusion",
        ("name",),
        _same(
            "shape half_width_m volume_km3 depth_to_top_m emplacement_depth_m age_ma age_sigma_ma "
            "country_density_kg_m3 mapped parent_sample fresh_sample",
            intrusion="name",
        ),
        (_AREA,),
        {"shape": ("sphere", "slab", "cylinder")},
    ),
    "samples": MasterKind(
        "samples",
        "sample",
        "sample",
        ("code",),
        _same(
            "from_m to_m lithology texture alteration igsn collected_on duplicate_stage reference_material "
            "magnetic_susceptibility_si density_kg_m3 pulp_available easting northing elevation_m epsg longitude "
            "latitude",
            sample_code="code",
            sample_kind="kind",
        ),
        (
            _SITE,
            Reference("intrusion", "intrusion_id", "intrusion", "name", "intrusion"),
            Reference("duplicate_of", "duplicate_of", "sample", "code", "sample"),
        ),
        {"sample_kind": SAMPLE_KINDS, "duplicate_stage": DUPLICATE_STAGES},
        {"kind": "unknown"},
    ),
}
#: Stored columns that hold whole numbers.
WHOLE_COLUMNS = frozenset({"epsg", "mapped", "pulp_available"})
