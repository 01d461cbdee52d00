"""What the entered and the counted columns mean: (unit, meaning, method, source)."""

from __future__ import annotations

from registry.store.group_meanings import GROUP_MEANINGS

Words = tuple[str, str, str, str]
_ENTERED, _COUNTED = "entered", "computed by the register"
_SOURCE, _OWN = "as entered", "this register"


def _entered(unit: str, meaning: str) -> Words:
    return unit, meaning, _ENTERED, _SOURCE


def _counted(unit: str, meaning: str, method: str = _COUNTED) -> Words:
    return unit, meaning, method, _OWN


_SCORE = "weights of the criteria met, near ones not counted, over all weights"

#: Columns that mean the same wherever they stand.
MEANINGS: dict[str, Words] = {
    "sample_id": _counted("1", "number of the sample in this registry, never used twice", "numbered on entry"),
    "sample_code": _entered("text", "code of the sample, unique in the registry"),
    "sample_kind": _entered(
        "text", "core, chips, outcrop, float or unknown; reference_material, blank and duplicate are controls"
    ),
    "is_stale": _counted("1", "1 where something changed since this row was computed, else 0"),
    "area": _entered("text", "prospect or licence block"),
    "site_code": _entered("text", "drill hole or outcrop station"),
    "site_kind": _entered("text", "drill_hole or outcrop"),
    "from_m": _entered("m", "depth along the hole where the sample begins"),
    "to_m": _entered("m", "depth along the hole where the sample ends"),
    "longitude": _counted("deg", "east of Greenwich, WGS 84", "transformed from the entered coordinates"),
    "latitude": _counted("deg", "north of the equator, WGS 84", "transformed from the entered coordinates"),
    "easting": _counted("m", "easting in the system of epsg", "collar or station; in a surveyed hole, desurveyed"),
    "northing": _counted("m", "northing in the system of epsg", "collar or station; in a surveyed hole, desurveyed"),
    "elevation_m": _counted("m", "height above the datum", "collar or station; in a surveyed hole, desurveyed"),
    "epsg": _entered("1", "EPSG code of the coordinate system"),
    "intrusion": _entered("text", "mapped or logged igneous body the sample is from"),
    "lithology": _entered("text", "rock as logged"),
    "texture": _entered("text", "texture as logged"),
    "best_target": _counted("text", "target with the best verdict and then the highest score", "verdicts compared"),
    "best_verdict": _counted("text", "verdict of that target: a screening aid, no resource statement"),
    "censored": _counted("text", "columns whose value is a limit, with < or >", "from the laboratory's signs"),
    "target": _counted("text", "code of the target that was asked for", "target definition"),
    "verdict": _counted("text", "favourable, possible, unfavourable or undecided: a screening aid"),
    "score_min": _counted("1", f"{_SCORE}; unknown ones taken as not met"),
    "score_max": _counted("1", f"{_SCORE}; unknown ones taken as met"),
    "coverage": _counted("1", "weights of the criteria that could be answered over all weights"),
    "probability": (
        "1",
        "chance that the verdict survives analytical error, not the chance of ore",
        "share of analyses drawn within analytical error that give the verdict again; normal errors, independent by "
        "analyte, s = s0 + k c by the batch's controls, else by convention",
        "Thompson & Howarth 1976 for the errors; the draws are this register's",
    ),
    "probability_state": _counted(
        "text",
        "not_computed (plutonbook refresh --probability does it), computed, or out_of_date where something changed "
        "since",
    ),
    "provisional": _counted("1", "1 where a threshold it rests on is provisional", "target definition"),
    "target_version": _counted("text", "version of the target definition used", "target definition"),
    "criterion": _counted("text", "code of the gate or criterion", "target definition"),
    "margin": _counted("1", "distance from the threshold in the value's unit, positive on the met side"),
    "outcome": _counted("text", "met, near, not met or unknown"),
    "missing": _counted("text", "what would have to be known to answer it"),
    "analyte": _entered("text", "what was determined"),
    "qualifier": _entered("text", "< below or > above the limit that stands as the value"),
    "method": _entered("text", "method as the laboratory names it"),
    "digestion": _entered("text", "how the rock was brought into the measurement"),
    "batch": _entered("text", "certificate of the laboratory"),
    "line_no": _entered("1", "line of the certificate, counted from 1"),
    "code": _counted("text", "code of the remark", "catalogue"),
    "column_name": _counted("text", "column the row is about", "catalogue"),
    "cause": _counted("text", "why there is no value, or why it changed", "catalogue"),
    "changed_at": _counted("text", "when, in UTC"),
    "verdict_from": _counted("text", "verdict before"),
    "verdict_to": _counted("text", "verdict after"),
    "kind": _counted(
        "text", "reference_material, blank, duplicate or lab_repeat", "sample list, certificate or code pattern"
    ),
    "expected": _counted(
        "in the column unit",
        "certified value; for a blank the content of its material; for a duplicate its original",
        "converted to the analyte and unit of the column",
    ),
    "found": _entered("in the column unit", "value reported for the control"),
    "z": (
        "1",
        "distance from the expected value in the deviation allowed; for a pair, in that of its difference",
        "certificate's deviation, else with the Horwitz function; pairs by s_0 + k c",
        "ISO 13528; Thompson & Howarth 1978",
    ),
    "material": _counted("text", "registered material the control is of", "as named, else found in the code"),
    "limit_low": _counted("in the column unit", "lower limit: three deviations; for a pair, 99 % of good ones"),
    "limit_high": _counted(
        "in the column unit",
        "upper limit: three deviations; for a pair, 99 % of good ones; for a blank, ten detection limits over its own",
    ),
    "rule": (
        "text",
        "the rule that was broken, or why nothing was judged",
        "limits at two and three deviations and rules on runs, in line order",
        "Shewhart 1931; Westgard et al. 1981",
    ),
    "state": _counted("text", "state"),
    "lab": _entered("text", "laboratory"),
    "file_name": _entered("text", "name of the imported file"),
    "sha256": _counted("text", "hash of the imported file", "SHA-256, FIPS 180-4"),
    "shape": _entered("text", "sphere, slab or cylinder"),
    "half_width_m": _entered("m", "radius, or half the thickness of a slab"),
    "age_ma": _entered("Ma", "age"),
    "samples": _counted("1", "number of samples from this intrusion", "counted"),
    "heat_flow_mw_m2": _entered("mW/m2", "surface heat flow"),
    "surface_temperature_c": _entered("degC", "mean temperature of the ground surface"),
    "conductivity_w_m_k": _entered("W/(m K)", "thermal conductivity of the crust"),
    "heat_production_depth_m": _entered("m", "depth scale of crustal heat production"),
    "view_name": _counted("text", "view"),
    "unit": _counted("text", "unit of the value"),
    "meaning": _counted("text", "what the column says"),
    "source": _counted("text", "where the method or number is from"),
    "value": _counted("1", "value"),
    "value_text": _counted("text", "value where it is a word"),
    "threshold": _counted("1", "limit used for this sample, in the value's unit"),
    "text": _counted("text", "in words"),
}

#: Columns that mean something else in one view.
BY_VIEW: dict[tuple[str, str], Words] = {
    ("result_sheet", "value"): _entered("in the column unit", "value as reported; with a qualifier, the limit"),
    ("result_sheet", "unit"): _entered("text", "unit of the value as reported"),
    ("batch_sheet", "state"): _counted("text", "active, superseded or withdrawn; only active ones count"),
    ("control_sheet", "state"): _counted("text", "passed, warned, failed or not judged", "rules on the controls"),
    ("control_sheet", "source"): _counted("text", "where the expected value and its deviation are from", "certificate"),
    ("verdict_sheet", "provisional"): _counted("1", "1 where any threshold it rests on is provisional"),
    ("reason_sheet", "value"): _counted("in the criterion's unit", "value the criterion was asked of"),
    ("reason_sheet", "source"): _counted("text", "where the threshold is from", "target definition"),
    ("warning_sheet", "value"): _counted("in the value column's unit", "number the remark is about"),
    ("warning_sheet", "text"): _counted("text", "the remark in words, with its number"),
    ("change_sheet", "cause"): _counted("text", "batch, edit, setting or version that changed it"),
    ("area_sheet", "heat_production_uw_m3"): _entered("uW/m3", "crustal heat production at the surface"),
    **GROUP_MEANINGS,
    ("column_guide", "method"): _counted("text", "how the value comes about"),
    ("column_guide", "unit"): _counted("text", "unit; text for words, 1 for pure numbers"),
}
