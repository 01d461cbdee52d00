"""What the columns computed of whole intrusions and areas mean: (unit, meaning, method, source) by view and column."""

from __future__ import annotations

from registry.petrology.references import REFERENCES

Words = tuple[str, str, str, str]
_PRACTICE = "common practice, no source"


def _of(unit: str, meaning: str, method: str, *sources: str) -> Words:
    return unit, meaning, method, "; ".join(REFERENCES.get(key, key) for key in sources)


_THETA = "conduction from an instantaneous sphere, slab or cylinder with its mirror image above the surface"
_MOST_WORDS = "over the suite's fit, unaltered samples that are no cumulates and not far from the rest"
_GEOTHERM = "steady conduction with heat production falling exponentially"
_CRUST = "geotherm against the water-saturated granite solidus, 0.2 GPa to the Moho (to 40 km where none is entered)"
_AT_MOHO = "geotherm at the entered Moho against the dry peridotite solidus"
_MANTLE = "geotherm continued from the Moho to 100 km against the dry peridotite solidus"
_ISOCON = "altered over fresh concentration of the components that did not move"
_TREND = f"rank correlation of MgO with SiO2 {_MOST_WORDS}"

GROUP_MEANINGS: dict[tuple[str, str], Words] = {
    ("intrusion_sheet", "theta_centre"): _of(
        "1", "share of its excess temperature that the body's centre keeps by conduction alone", _THETA, "jaeger1964"
    ),
    ("intrusion_sheet", "theta_centre_low"): _of(
        "1", "the same at the age + 2 sigma; an unknown depth to the top taken as nothing", _THETA, "jaeger1964"
    ),
    ("intrusion_sheet", "theta_centre_high"): _of(
        "1", "the same at the age - 2 sigma; why there is none stands in suite_sheet", _THETA, "jaeger1964"
    ),
    ("intrusion_sheet", "heat_x_thickness_mw_m2"): _of(
        "mW/m2",
        "heat flow that the body adds: median heat production of its samples times its thickness (slab), 4/3 of its "
        "radius (sphere); why there is none stands in suite_sheet",
        "A x thickness, A uniform through the body, the median of the samples that are no controls",
        "lachenbruch1970",
    ),
    ("intrusion_sheet", "trend_quality"): _of(
        "text", "good, fair, poor or no range, with the numbers: how well its samples form one series", _TREND,
        "spearman1904",
    ),
    ("area_sheet", "moho_depth_m"): ("m", "depth of the crust-mantle boundary", "entered", "as entered"),
    ("area_sheet", "mantle_heat_flow_mw_m2"): _of(
        "mW/m2", "heat flow from below the crust, q0 - A0 D; may come out negative", _GEOTHERM, "lachenbruch1970"
    ),
    ("area_sheet", "wet_granite_solidus_depth_km"): _of(
        "km", "shallowest depth at which granite with water begins to melt", _CRUST, "lachenbruch1970", "stern1973"
    ),
    ("area_sheet", "geotherm_cause"): _of(
        "text", "why there is no geotherm or no melting depth; empty where the depth is given",
        "heat flow, conductivity and heat production are needed, and at least 15 mW/m2 must come from the mantle",
        _PRACTICE,
    ),
    ("area_sheet", "crust_heating_needed_c"): _of(
        "degC", "least heating that melts wet granite in the crust; 0 where it melts as it is", _CRUST, "stern1973"
    ),
    ("area_sheet", "crust_heating_depth_km"): _of("km", "where the crust is nearest to that", _CRUST, "stern1973"),
    ("area_sheet", "crust_decompression"): _of(
        "text", "always not by decompression: the wet solidus rises as pressure falls", _CRUST, "stern1973"
    ),
    ("area_sheet", "crust_water"): _of(
        "text", "whether water, to saturation, would melt the crust, and from where down; dry crust is not computed",
        _CRUST, "stern1973",
    ),
    ("area_sheet", "moho_temperature_c"): _of("degC", "temperature at the Moho", _GEOTHERM, "lachenbruch1970"),
    ("area_sheet", "mantle_heating_needed_c"): _of(
        "degC", "heating that melts dry peridotite at the Moho; 0 where it melts as it is", _AT_MOHO, "hirschmann2000"
    ),
    ("area_sheet", "mantle_water_needed_wt"): _of(
        "wt%", "bulk water that brings the peridotite solidus down to the temperature at the Moho; empty where even "
        "saturation does not", _AT_MOHO, "katz2003",
    ),
    ("area_sheet", "dry_peridotite_solidus_depth_km"): _of(
        "km", "where the conductive geotherm meets the dry peridotite solidus, a screen of one dimension", _MANTLE,
        "hirschmann2000",
    ),
    ("area_sheet", "mantle_decompression"): _of(
        "text", "melts as it is, by decompression or not by decompression", _MANTLE, "hirschmann2000"
    ),
    ("area_sheet", "mantle_decompression_needed_gpa"): _of(
        "GPa", "least fall of pressure at constant temperature that melts mantle rock, without rising into the crust",
        _MANTLE, "hirschmann2000",
    ),
    ("area_sheet", "mantle_decompression_depth_km"): _of(
        "km", "from which depth that rise begins", _MANTLE, "hirschmann2000"
    ),
    ("area_sheet", "mantle_cause"): _of(
        "text", "why the mantle columns are empty: without a Moho depth peridotite is not computed",
        "peridotite solidi hold below the Moho only", _PRACTICE,
    ),
    ("suite_sheet", "model"): _of("text", "model of the suite", f"each {_MOST_WORDS}", _PRACTICE),
    ("suite_sheet", "quantity"): _of("text", "what the model gives", "see quality for the choices made", _PRACTICE),
    ("suite_sheet", "value"): _of(
        "in the unit beside it", "the number; empty with a cause",
        "trend, alkali-lime index, Rayleigh fractionation, batch melting, mass balance, cooling, heat",
        "rayleigh1896", "shaw1970", "bryan1969", "lawson1974", "peacock1931", "spearman1904",
    ),
    ("suite_sheet", "unit"): _of("text", "unit of the value", "fixed by the model", _PRACTICE),
    ("suite_sheet", "quality"): _of(
        "text", "how well the model holds, with what it was computed and from how many samples",
        "spread of the elements, sum of squares or rank correlation", _PRACTICE,
    ),
    ("suite_sheet", "cause"): _of("text", "why there is no value", "first reason that holds", _PRACTICE),
    ("mass_change_sheet", "reference_sample"): _of(
        "text", "fresh rock compared with: a sample's code, or the median of the fresh samples of the same intrusion; "
        "what the rock differed in before it was altered counts as change",
        "the intrusion's fresh_sample, else the median", _PRACTICE,
    ),
    ("mass_change_sheet", "component"): _of("text", "oxide or element", "as analysed", "as entered"),
    ("mass_change_sheet", "change_wt"): _of(
        "wt%", "gain (+) or loss (-) in g per 100 g of the original rock", "altered / slope - fresh", "grant1986"
    ),
    ("mass_change_sheet", "change_percent"): _of(
        "%", "the same relative to what the fresh rock had", "altered / slope / fresh - 1", "grant1986"
    ),
    ("mass_change_sheet", "isocon_slope"): _of(
        "1", "mass before over mass after: below 1 the rock gained mass", _ISOCON, "grant1986"
    ),
    ("mass_change_sheet", "immobile_components"): _of(
        "text", "what the isocon was drawn through, what was left out, and the range of the ratios", _ISOCON,
        "grant1986",
    ),
    ("mass_change_sheet", "cause"): _of("text", "why there is no isocon", "first reason that holds", _PRACTICE),
}  # fmt: skip
