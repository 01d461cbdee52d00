"""The settings: every convention with its unit, meaning and choices; a change is foreseen before it is made."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from flask import Blueprint, redirect, render_template, request, session, url_for

from registry import change_jobs, setting_changes, settings
from registry.change_jobs import Change
from registry.settings import Convention
from web import working
from web.reading import registry_connection

blueprint = Blueprint("settings", __name__)
#: Words of the choices.
CHOICE_WORDS = {
    "le_maitre": "by the rock (Le Maitre 1976)", "middlemost": "by its field (Middlemost 1989)",
    "fixed_ratio": "one ratio for all", "kress_carmichael": "from an oxygen buffer (Kress and Carmichael 1991)",
    "almeev": "Almeev et al. 2007", "medard_grove": "Medard and Grove 2008",
    "falloon_danyushevsky": "Falloon and Danyushevsky 2000", "hold": "left out", "mark": "used and marked",
    "ignore": "used without a word", "yes": "yes", "no": "no",
}  # fmt: skip
_LABELS = {
    "iron_split": "Split of iron", "iron_fixed_ratio": "The one ratio", "iron_buffer": "Oxygen buffer",
    "iron_buffer_shift": "Distance from the buffer", "norm_co2_as_calcite": "Calcite in the norm",
    "norm_sulphur_as_pyrite": "Pyrite in the norm", "norm_halogens": "Fluorite and halite in the norm",
    "censored_substitute": "Share of the limit", "h2o_ultrabasic_wt": "Water, ultrabasic",
    "h2o_basic_wt": "Water, basic", "h2o_intermediate_wt": "Water, intermediate", "h2o_acid_wt": "Water, acid",
    "pressure_gpa": "Pressure", "water_depression": "Effect of water",
    "wall_rock_viscosity_pa_s": "Wall rock viscosity",
    "diapir_radius_m": "Radius of a diapir", "dyke_width_m": "Width of a dyke",
    "country_density_kg_m3": "Country rock density", "thermal_diffusivity_m2_s": "Thermal diffusivity",
    "density_acid_kg_m3": "Density, acid", "density_intermediate_kg_m3": "Density, intermediate",
    "density_basic_kg_m3": "Density, basic", "density_ultrabasic_kg_m3": "Density, ultrabasic",
    "total_warn_low_wt": "Total, remarked below", "total_warn_high_wt": "Total, remarked above",
    "total_fail_low_wt": "Total, unfit below", "total_fail_high_wt": "Total, unfit above",
    "loi_warn_wt": "Loss on ignition, remarked above", "loi_fail_wt": "Loss on ignition, unfit above",
    "loi_exempt_mgo_vf_wt": "Exempt above MgO of", "sulphur_warn_wt": "Sulphur, remarked above",
    "magnetite_series_si": "Magnetite series from", "failed_control": "Failed controls",
    "probability_draws": "Draws a sample", "error_major_percent": "Error of majors",
    "error_trace_percent": "Error of traces", "error_feo_percent": "Error of titrated FeO",
    "error_volatile_percent": "Error of volatiles",
    "control_pattern.blank": "Blanks", "control_pattern.reference_material": "Reference materials",
    "control_pattern.duplicate": "Duplicates", "control_pattern.field_duplicate": "Field duplicates",
    "control_pattern.crush_duplicate": "Crush duplicates", "control_pattern.pulp_duplicate": "Pulp duplicates",
}  # fmt: skip
PATTERN_MEANINGS = {
    "control_pattern.blank": "^BLK finds BLK-001 and BLK-002.",
    "control_pattern.reference_material": "^STD-(.+)$ finds STD-A1, and takes A1 for the name of the material.",
    "control_pattern.duplicate": "-D$ finds A12-D, the duplicate of A12.",
    "control_pattern.field_duplicate": "-FD$ finds A12-FD: a second piece of the core or outcrop.",
    "control_pattern.crush_duplicate": "-CD$ finds A12-CD: a second split of the crushed rock.",
    "control_pattern.pulp_duplicate": "-PD$ finds A12-PD: the same pulp analysed twice.",
}


def label(name: str) -> str:
    """What a convention is called at its field."""
    return _LABELS.get(name, name.replace("_", " "))


def choices_of(record: Convention) -> list[tuple[str, str]]:
    """(value, words) of what may be chosen; empty for numbers."""
    values = (settings.YES, settings.NO) if isinstance(record.default, bool) else record.choices
    return [(value, CHOICE_WORDS.get(value, value)) for value in values]


def typed_form(value: Any) -> str:
    """A value as it stands in its field."""
    if isinstance(value, bool):
        return settings.YES if value else settings.NO
    if isinstance(value, float):
        return f"{value:g}" if float(f"{value:g}") == value else repr(value)
    return str(value)


@blueprint.get("/settings")
def page() -> Any:
    job = working.jobs().find(session.pop("settings_done")) if "settings_done" in session else None
    return _page({}, {}, done=_done(job) if isinstance(job, Change) and job.report else None)


@blueprint.post("/settings")
def change() -> Any:
    with registry_connection() as connection:
        before = settings.current(connection)
        patterns = setting_changes.stored_patterns(connection)
    typed = {name: request.form[name].strip() for name in (*settings.CONVENTIONS, *patterns) if name in request.form}
    values, faults = settings.read_typed(typed, before)
    differing = {name: typed[name] for name in patterns if typed.get(name, patterns[name]) != patterns[name]}
    faults |= setting_changes.pattern_faults(differing)
    if faults:
        return _page(typed, faults), 400
    if not values and not differing:
        return _page(typed, {}, unchanged=True)
    changes = _changes(before, values)
    changes += [f"{label(name)}: {patterns[name] or 'none'} → {text or 'none'}" for name, text in differing.items()]
    wishes = {name: typed[name] for name in values} | differing
    # what was foreseen is sent back with the form: fields typed since are foreseen again first
    trial = request.form.get("do") != "change" or request.form.get("seen") != "; ".join(changes)
    asked = change_jobs.start(working.jobs(), change_jobs.SETTINGS, "", wishes, trial=trial, told=changes)
    return working.answered(asked, _outcome if trial else _back_to_settings)


@working.outcome_of(change_jobs.SETTINGS)
def _outcome(change: Change) -> Any:
    if not change.trial:
        return _page({}, {}, done=_done(change))
    return _page(
        change.wishes, {}, foreseen=change.report, changes=change.told, controls=_controls(change.report or {}, True)
    )


def _back_to_settings(change: Change) -> Any:
    session["settings_done"] = change.job_id  # what was typed may be longer than a cookie
    return redirect(url_for("settings.page"), 303)


def _done(change: Change) -> dict[str, Any]:
    report = change.report or {}
    return {"changes": change.told, "verdicts": report["verdicts_changed"], "controls": _controls(report, False)}


def _controls(report: Mapping[str, Any], trial: bool) -> list[str]:
    """What changed patterns make of registered samples, the patterns called what they are called at their fields."""
    lines = setting_changes.controls_in_lines(report, trial) if "controls" in report else []
    for name in setting_changes.PATTERNS:
        lines = [line.replace(f"{name} is", f"The pattern of {label(name).lower()} is") for line in lines]
    return lines


def _changes(before: Mapping[str, Any], values: Mapping[str, Any]) -> list[str]:
    def words(name: str, value: Any) -> str:
        typed = typed_form(value)
        unit = settings.CONVENTIONS[name].unit
        return CHOICE_WORDS.get(typed, typed) + (f" {unit}" if unit not in ("1", "text") else "")

    return [f"{label(name)}: {words(name, before[name])} → {words(name, value)}" for name, value in values.items()]


def _page(typed: Mapping[str, str], faults: Mapping[str, str], **more: Any) -> str:
    with registry_connection() as connection:
        current = settings.current(connection)
        patterns = setting_changes.stored_patterns(connection)
    return render_template(
        "settings.html",
        section="Settings",
        groups=settings.CONVENTION_GROUPS,
        shown={name: typed.get(name, typed_form(value)) for name, value in current.items()},
        patterns={name: typed.get(name, text) for name, text in patterns.items()},
        pattern_meanings=PATTERN_MEANINGS,
        faults=faults,
        label=label,
        choices_of=choices_of,
        typed_form=typed_form,
        choice_words=CHOICE_WORDS,
        **{"done": None, "foreseen": None, "changes": [], "controls": [], "unchanged": False, **more},
    )
