"""Which change makes which samples stale: one list, from which the triggers of both engines are made.

Level 1: derive and judge anew. Level 2: judge only. A rule says in SQL which samples a changed row touches; ``{row}``
stands for the row (NEW or OLD on SQLite, the transition table on PostgreSQL). ``GROUP_RULES`` do the same for whole
intrusions and areas (``stale_group``); those of samples that are computed anew are added by the one who computes.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Rule:
    """Rows of ``table`` touch the samples ``sample`` of ``source`` where ``condition`` holds.

    ``watched``: an UPDATE counts only where one of these columns changes (compared with IS NOT).
    """

    table: str
    sample: str
    source: str
    condition: str
    level: int
    watched: tuple[str, ...]
    events: tuple[str, ...] = ("INSERT", "UPDATE", "DELETE")

    @property
    def name(self) -> str:
        """What its triggers are called after."""
        return self.table

    def select(self, row: str, extra_source: str = "") -> str:
        """SELECT of the ids of the samples that ``row`` touches (those that exist)."""
        source = f"{extra_source}, {self.source}" if extra_source else self.source
        return f"SELECT {self.sample} FROM {source} WHERE {self.condition.format(row=row)}"


@dataclass(frozen=True)
class GroupRule(Rule):
    """The same for whole intrusions or areas: ``sample`` selects the ids of the ``kind`` (its table's name too)."""

    kind: str = "intrusion"

    @property
    def name(self) -> str:
        return f"{self.kind}_by_{self.table}"

    def mark(self, touched: str) -> str:
        """The statement that puts the ids selected by ``touched`` on the list."""
        return (
            f"INSERT INTO stale_group (kind, group_id) SELECT '{self.kind}', s.{self.kind}_id FROM {self.kind} AS s "
            f"WHERE s.{self.kind}_id IN ({touched}) AND NOT EXISTS "
            f"(SELECT 1 FROM stale_group AS x WHERE x.kind = '{self.kind}' AND x.group_id = s.{self.kind}_id);"
        )


def _watched(names: str) -> tuple[str, ...]:
    return tuple(names.split())


_SITES_OF_AREA = (
    "p.site_id IN (SELECT q.site_id FROM site AS q WHERE q.area_id = {row}.area_id) OR "
    "p.intrusion_id IN (SELECT q.intrusion_id FROM intrusion AS q WHERE q.area_id = {row}.area_id)"
)

RULES = (
    Rule(
        "result",
        "a.sample_id",
        "aliquot AS a",
        "a.aliquot_id = {row}.aliquot_id",
        1,
        _watched("aliquot_id column_id value qualifier"),
    ),
    Rule(
        "aliquot",
        "p.sample_id",
        "sample AS p",
        "p.sample_id = {row}.sample_id",
        1,
        _watched("sample_id batch_id kind repeat_no line_no"),
    ),
    Rule(
        "batch",
        "a.sample_id",
        "aliquot AS a",
        "a.batch_id = {row}.batch_id",
        1,
        _watched("state received_on reported_on imported_at"),
        ("UPDATE",),
    ),
    Rule(
        "batch_column",
        "a.sample_id",
        "aliquot AS a JOIN result AS r ON r.aliquot_id = a.aliquot_id",
        "a.batch_id = {row}.batch_id AND r.column_id = {row}.batch_column_id",
        1,
        _watched("analyte unit digestion batch_id position"),
        ("UPDATE",),
    ),
    Rule(
        "sample",
        "p.sample_id",
        "sample AS p",
        "p.sample_id = {row}.sample_id",
        1,
        _watched(
            "kind site_id intrusion_id lithology texture alteration duplicate_of duplicate_stage reference_material "
            "magnetic_susceptibility_si density_kg_m3"
        ),
        ("INSERT", "UPDATE"),
    ),
    Rule(
        "intrusion",
        "p.sample_id",
        "sample AS p",
        "p.intrusion_id = {row}.intrusion_id",
        1,
        _watched(
            "area_id shape half_width_m volume_km3 depth_to_top_m emplacement_depth_m age_ma age_sigma_ma "
            "country_density_kg_m3 mapped"
        ),
        ("UPDATE",),
    ),
    Rule("site", "p.sample_id", "sample AS p", "p.site_id = {row}.site_id", 1, _watched("kind area_id"), ("UPDATE",)),
    Rule(
        "area",
        "p.sample_id",
        "sample AS p",
        f"({_SITES_OF_AREA})",
        1,
        _watched(
            "heat_flow_mw_m2 surface_temperature_c conductivity_w_m_k heat_production_uw_m3 heat_production_depth_m"
        ),
        ("UPDATE",),
    ),
    Rule("setting", "p.sample_id", "sample AS p", "{row}.name IS NOT NULL", 1, _watched("name value")),
    Rule(
        "reference_value",
        "p.sample_id",
        "sample AS p",
        "{row}.value IS NOT NULL AND p.kind IN ('reference_material', 'blank')",
        1,
        _watched("reference_material_id analyte value unit uncertainty uncertainty_type status source"),
    ),
    Rule(
        "reference_material",
        "p.sample_id",
        "sample AS p",
        "{row}.name IS NOT NULL AND p.kind IN ('reference_material', 'blank')",
        1,
        _watched("name"),
        ("UPDATE", "DELETE"),
    ),
    Rule("target", "p.sample_id", "sample AS p", "{row}.code IS NOT NULL", 2, _watched("code"), ("UPDATE", "DELETE")),
    Rule(
        "target_version",
        "p.sample_id",
        "sample AS p",
        "{row}.target_id IS NOT NULL",
        2,
        _watched("target_id version definition active"),
    ),
)

_INTRUSION = ("q.intrusion_id", "intrusion AS q", "q.intrusion_id = {row}.intrusion_id", 1)
GROUP_RULES = (
    GroupRule("sample", *_INTRUSION, _watched("intrusion_id code kind"), ("UPDATE", "DELETE")),
    GroupRule(
        "intrusion",
        *_INTRUSION,
        _watched("shape half_width_m volume_km3 depth_to_top_m age_ma age_sigma_ma parent_sample fresh_sample"),
        ("INSERT", "UPDATE"),
    ),
    GroupRule("setting", "q.intrusion_id", "intrusion AS q", "{row}.name IS NOT NULL", 1, _watched("name value")),
    GroupRule(
        "area",
        "q.area_id",
        "area AS q",
        "q.area_id = {row}.area_id",
        1,
        _watched(
            "heat_flow_mw_m2 surface_temperature_c conductivity_w_m_k heat_production_uw_m3 heat_production_depth_m "
            "moho_depth_m"
        ),
        ("INSERT", "UPDATE"),
        "area",
    ),
)

#: Rows that go with a deleted row, from any client, foreign keys on or off: table -> (table, condition on {row}).
#: The results of a batch column are found through the batch's lines: ``result`` has no index on ``column_id``.
CLEANED = {
    "sample": (
        ("aliquot", "sample_id = {row}.sample_id"),
        ("composition", "sample_id = {row}.sample_id"),
        ("derived", "sample_id = {row}.sample_id"),
        ("verdict", "sample_id = {row}.sample_id"),
        ("stale", "sample_id = {row}.sample_id"),
        ("suite_outlier", "sample_id = {row}.sample_id"),
        ("mass_change", "sample_id = {row}.sample_id"),
    ),
    "intrusion": (
        ("intrusion_derived", "intrusion_id = {row}.intrusion_id"),
        ("suite_row", "intrusion_id = {row}.intrusion_id"),
        ("suite_outlier", "intrusion_id = {row}.intrusion_id"),
        ("mass_change", "intrusion_id = {row}.intrusion_id"),
        ("stale_group", "kind = 'intrusion' AND group_id = {row}.intrusion_id"),
    ),
    "area": (
        ("area_derived", "area_id = {row}.area_id"),
        ("stale_group", "kind = 'area' AND group_id = {row}.area_id"),
    ),
    "batch": (
        ("aliquot", "batch_id = {row}.batch_id"),
        ("batch_column", "batch_id = {row}.batch_id"),
        ("batch_file", "batch_id = {row}.batch_id"),
        ("control_outcome", "batch_id = {row}.batch_id"),
        ("control_state", "batch_id = {row}.batch_id"),
        ("stale_batch", "batch_id = {row}.batch_id"),
    ),
    "batch_column": (
        (
            "result",
            "column_id = {row}.batch_column_id AND aliquot_id IN "
            "(SELECT a.aliquot_id FROM aliquot AS a WHERE a.batch_id = {row}.batch_id)",
        ),
        ("control_outcome", "column_id = {row}.batch_column_id AND batch_id = {row}.batch_id"),
        ("control_state", "column_id = {row}.batch_column_id"),
    ),
    "aliquot": (
        ("result", "aliquot_id = {row}.aliquot_id"),
        ("control_outcome", "aliquot_id = {row}.aliquot_id"),
    ),
    "reference_material": (("reference_value", "reference_material_id = {row}.reference_material_id"),),
    "site": (
        ("survey", "site_id = {row}.site_id"),
        ("lithology_interval", "site_id = {row}.site_id"),
    ),
}

#: What else happens before those rows go, on {row}: a batch that loses a control line is judged anew.
BEFORE_CLEANING = {
    "aliquot": "INSERT INTO stale_batch (batch_id) SELECT h.batch_id FROM batch AS h WHERE h.batch_id = {row}.batch_id "
    "AND EXISTS (SELECT 1 FROM control_outcome AS o WHERE o.aliquot_id = {row}.aliquot_id) "
    "AND NOT EXISTS (SELECT 1 FROM stale_batch AS x WHERE x.batch_id = {row}.batch_id);",
}
#: Tables whose ``row_version`` rises with every update.
VERSIONED = {"area": "area_id", "site": "site_id", "intrusion": "intrusion_id", "sample": "sample_id"}
#: Every trigger and function of ours begins so.
PREFIX = "plutonbook_"
