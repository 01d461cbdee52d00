"""Editing one sample, site, intrusion or area in a form, where the site takes changes."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from flask import Blueprint, abort, current_app, redirect, render_template, request, session, url_for

from registry import change_jobs, editing
from registry.editing import NUMBER, TRUTH, WORD, Field
from registry.errors import NotFound
from registry.store.reading import editing as reading
from web import working, writing
from web.errors import Missing
from web.reading import registry_connection
from web.wording import unit_words

blueprint = Blueprint("editing", __name__)
#: Headings of the parts of a form, with their fields.
PARTS = {
    "sample": (
        ("What it is", ("sample_kind", "lithology", "texture", "alteration", "intrusion")),
        ("Where it comes from", ("site_code", "from_m", "to_m", "collected_on", "igsn")),
        ("What was measured on it", ("magnetic_susceptibility_si", "density_kg_m3", "pulp_available")),
        ("If it is a control", ("duplicate_of", "duplicate_stage", "reference_material")),
        (
            "Coordinates of its own (blank: placed by its site)",
            ("easting", "northing", "epsg", "elevation_m", "longitude", "latitude"),
        ),
    ),
    "site": (
        ("What it is", ("site_kind", "area", "depth_m", "azimuth_reference")),
        ("Where it is", ("easting", "northing", "epsg", "elevation_m", "longitude", "latitude")),
    ),
    "intrusion": (
        ("The body", ("area", "shape", "half_width_m", "volume_km3", "depth_to_top_m", "mapped")),
        ("Its age and emplacement", ("age_ma", "age_sigma_ma", "emplacement_depth_m", "country_density_kg_m3")),
        ("Its samples", ("parent_sample", "fresh_sample")),
    ),
    "area": (
        ("Coordinates", ("epsg",)),
        (
            "Heat of the crust",
            (
                "heat_flow_mw_m2", "surface_temperature_c", "conductivity_w_m_k", "heat_production_uw_m3",
                "heat_production_depth_m", "moho_depth_m",
            ),
        ),
    ),
}  # fmt: skip
LABELS = {
    "sample_kind": "Kind", "site_kind": "Kind", "site_code": "Site", "from_m": "From", "to_m": "To",
    "collected_on": "Collected on", "igsn": "IGSN", "magnetic_susceptibility_si": "Magnetic susceptibility",
    "density_kg_m3": "Density", "pulp_available": "Pulp kept", "duplicate_of": "Duplicate of",
    "duplicate_stage": "What was split for it",
    "reference_material": "Reference material", "epsg": "EPSG code of the system", "elevation_m": "Elevation",
    "depth_m": "Length of the hole", "azimuth_reference": "Azimuths from north", "half_width_m": "Half-width",
    "volume_km3": "Volume", "depth_to_top_m": "Depth to top", "mapped": "Outline mapped or cored", "age_ma": "Age",
    "age_sigma_ma": "Standard deviation of the age", "emplacement_depth_m": "Depth of emplacement",
    "country_density_kg_m3": "Density of the country rock", "parent_sample": "Parent of the suite",
    "fresh_sample": "Fresh rock", "heat_flow_mw_m2": "Heat flow at the surface",
    "surface_temperature_c": "Temperature at the surface", "conductivity_w_m_k": "Thermal conductivity",
    "heat_production_uw_m3": "Heat production at the surface", "heat_production_depth_m": "Depth of heat production",
    "moho_depth_m": "Depth of the Moho",
}  # fmt: skip
UNITS = {
    "easting": "m", "northing": "m", "longitude": "°", "latitude": "°", "age_ma": "Ma", "age_sigma_ma": "Ma",
    "volume_km3": "km3", "magnetic_susceptibility_si": "SI", "density_kg_m3": "kg/m3",
    "country_density_kg_m3": "kg/m3", "heat_flow_mw_m2": "mW/m2", "surface_temperature_c": "°C",
    "conductivity_w_m_k": "W/(m K)", "heat_production_uw_m3": "uW/m3",
}  # fmt: skip
HINTS = {
    "half_width_m": "Half the thickness of a slab, the radius of a sphere or cylinder.",
    "parent_sample": "Code of the most primitive sample; blank: found by itself.",
    "fresh_sample": "Code of an unaltered sample; blank: the median of the fresh ones.",
    "collected_on": "As 2024-05-31.",
    "age_sigma_ma": "One standard deviation.",
    "longitude": "Blank: from easting and northing.",
}
#: Fields whose usual contents are offered while typing: (table, column).
SUGGESTED = {
    "area": ("area", "name"), "intrusion": ("intrusion", "name"), "site_code": ("site", "code"),
    "lithology": ("sample", "lithology"), "texture": ("sample", "texture"), "alteration": ("sample", "alteration"),
    "reference_material": ("reference_material", "name"),
}  # fmt: skip
#: Changes told one by one after saving.
TOLD = 10


def label(name: str) -> str:
    """What a field is called above it."""
    return LABELS.get(name, name.replace("_", " ").capitalize())


def unit(name: str) -> str:
    """The unit inside the field's right edge; nothing for words."""
    if name in UNITS:
        return unit_words(UNITS[name])
    return "m" if name.endswith("_m") else ""


@blueprint.get("/edit/<kind>/<path:code>")
def page(kind: str, code: str) -> Any:
    _allowed(kind)
    return _form(_found(kind, code), done=session.pop("edit_done", None) if "edit_done" in session else None)


@blueprint.post("/edit/<kind>/<path:code>")
def change(kind: str, code: str) -> Any:
    _allowed(kind)
    typed = {one.name: request.form[one.name] for one in editing.fields_of(kind) if one.name in request.form}
    version = request.form.get("row_version", "")
    if not version.isdigit():
        abort(400, "The form came without the version of what it edits. Load the page again and repeat the edit.")
    try:
        told = editing.change(current_app.extensions["registry"], kind, code, int(version), typed)
    except editing.Refused as fault:
        return _form(_found(kind, code), typed, faults=fault.faults, version=int(version)), 400
    except editing.ChangedMeanwhile as fault:
        return _form(fault.record, typed, meanwhile=True), 409
    except NotFound as fault:
        raise Missing(kind, code) from fault
    session["edit_done"] = {
        "changes": [_short(text) for text in told.changes[:TOLD]], "more": max(0, len(told.changes) - TOLD),
        "remarks": [_short(text) for text in told.remarks[:TOLD]], "verdicts": told.consequence.verdicts,
        "waiting": told.consequence.waiting, "work": _computed_by_and_by(told, f"the edit of {kind} {code}"),
    }  # fmt: skip
    return redirect(url_for("editing.page", kind=kind, code=code), 303)


def _computed_by_and_by(told: editing.Edited, what: str) -> str | None:
    """Let what an edit left stale be computed as a job; the address of its page."""
    if not told.consequence.waiting:
        return None
    return working.address_of(change_jobs.start(working.jobs(), change_jobs.REFRESH, what))


def _short(text: str) -> str:
    """The note of what was done travels in a cookie, which holds 4,000 letters."""
    return text if len(text) <= 160 else text[:159] + "…"


def _allowed(kind: str) -> None:
    if kind not in editing.KINDS:
        raise Missing("kind of thing to edit", kind)
    writing.require()


def _found(kind: str, code: str) -> editing.Record:
    with registry_connection() as connection:
        try:
            return editing.find(connection, kind, code)
        except NotFound as fault:
            raise Missing(kind, code) from fault


def _form(
    record: editing.Record,
    typed: Mapping[str, str] | None = None,
    *,
    faults: Mapping[str, str] | None = None,
    meanwhile: bool = False,
    version: int | None = None,
    done: Mapping[str, Any] | None = None,
) -> str:
    typed = typed or {}
    known = {one.name: one for one in editing.fields_of(record.kind)}
    with registry_connection() as connection:
        offered = {
            name: reading.names_in_use(connection, *SUGGESTED[name]) for name in known if name in SUGGESTED
        }  # fmt: skip
    now = {name: _typed_form(value) for name, value in record.values.items()}
    fields = {name: _field(one, typed.get(name, now[name]), offered.get(name, [])) for name, one in known.items()}
    return render_template(
        "edit.html",
        section={"sample": "Samples", "site": "Sites", "intrusion": "Intrusions", "area": "Start"}[record.kind],
        record=record,
        version=record.row_version if version is None else version,
        parts=[(title, [fields[name] for name in names]) for title, names in PARTS[record.kind]],
        faults=faults or {},
        other_faults=[text for name, text in (faults or {}).items() if name not in known],
        meanwhile=[
            (label(name), now[name] or "(blank)", typed[name] or "(blank)")
            for name in known
            if meanwhile and name in typed and typed[name].strip() != now[name]
        ],
        stale=meanwhile,
        done=done,
        label=label,
        back=_page_of(record),
    )


def _page_of(record: editing.Record) -> str:
    if record.kind == "sample":
        return url_for("sample.page", code=record.code)
    if record.kind == "site":
        return url_for("sites.page", code=record.code)
    return url_for("intrusions.page", name=record.code) if record.kind == "intrusion" else url_for("start.page")


def _typed_form(value: Any) -> str:
    return "" if value is None else editing.spelled(value)


def _field(one: Field, shown: str, offered: list[str]) -> dict[str, Any]:
    """One field as the form draws it: ``choices`` (value, words) for a list, ``offered`` for suggestions."""
    choices: list[tuple[str, str]] = []
    if one.holds == WORD:
        choices = [(word, word.replace("_", " ")) for word in one.words]
    elif one.holds == TRUTH:
        choices = [("yes", "yes"), ("no", "no")]
    return {
        "name": one.name,
        "label": label(one.name),
        "unit": unit(one.name),
        "shown": shown,
        "choices": choices,
        "needed": any(one.name in names for names in editing.NEEDED.values()),
        "numeric": one.holds == NUMBER,
        "hint": HINTS.get(one.name, ""),
        "offered": offered,
    }
