"""What is computed of a whole intrusion or area, and the list of those that have to be computed anew."""

from __future__ import annotations

import sqlalchemy as sa

from registry.store.table_parts import link, numbers, one_of, sample_key, table, words
from registry.store.types import Number, Whole, Words

#: Intrusions and areas to be computed anew: filled by triggers and by whoever computes samples.
stale_group = table(
    "stale_group",
    sa.Column("kind", Words, primary_key=True),
    sa.Column("group_id", Whole, primary_key=True, autoincrement=False),
    one_of("kind", "intrusion", "area"),
    counted=False,
    rowid=False,
)
intrusion_derived = table(
    "intrusion_derived",
    sa.Column(
        "intrusion_id",
        Whole,
        sa.ForeignKey("intrusion.intrusion_id", ondelete="CASCADE"),
        primary_key=True,
        autoincrement=False,
    ),
    *numbers("theta_centre theta_centre_low theta_centre_high heat_x_thickness_mw_m2"),
    sa.Column("trend_quality", Words),
    counted=False,
)
area_derived = table(
    "area_derived",
    sa.Column(
        "area_id", Whole, sa.ForeignKey("area.area_id", ondelete="CASCADE"), primary_key=True, autoincrement=False
    ),
    *numbers("mantle_heat_flow_mw_m2 wet_granite_solidus_depth_km"),
    sa.Column("geotherm_cause", Words),
    *numbers("crust_heating_needed_c crust_heating_depth_km"),
    *words("crust_decompression crust_water"),
    *numbers("moho_temperature_c mantle_heating_needed_c mantle_water_needed_wt dry_peridotite_solidus_depth_km"),
    *numbers("mantle_decompression_needed_gpa mantle_decompression_depth_km"),
    *words("mantle_decompression mantle_cause"),
    counted=False,
)
suite_row = table(
    "suite_row",
    sa.Column(
        "intrusion_id",
        Whole,
        sa.ForeignKey("intrusion.intrusion_id", ondelete="CASCADE"),
        primary_key=True,
        autoincrement=False,
    ),
    sa.Column("position", Whole, primary_key=True, autoincrement=False),
    *words("model quantity", nullable=False),
    sa.Column("value", Number),
    sa.Column("unit", Words, nullable=False),
    *words("quality cause"),
    counted=False,
    rowid=False,
)
#: Samples whose chemistry lies far from the rest of their intrusion.
suite_outlier = table(
    "suite_outlier",
    sample_key(),
    link("intrusion_id", "intrusion.intrusion_id", nullable=False, ondelete="CASCADE"),
    *numbers("distance distance_limit"),
    sa.Column("component", Words),
    *numbers("component_value component_median"),
    sa.Column("text", Words, nullable=False),
    counted=False,
)
sa.Index(None, suite_outlier.c.intrusion_id)
#: One row an altered sample; ``changes`` is a JSON object of two lists in the order of ``MASS_CHANGE_COMPONENTS``.
mass_change = table(
    "mass_change",
    sample_key(),
    link("intrusion_id", "intrusion.intrusion_id", nullable=False, ondelete="CASCADE"),
    sa.Column("reference_sample", Words),
    sa.Column("isocon_slope", Number),
    *words("immobile_components cause changes"),
    counted=False,
)
sa.Index(None, mass_change.c.intrusion_id)
