"""One sample: the conclusion first, then the reasons, then the evidence they stand on."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any
from urllib.parse import urlencode

from flask import Blueprint, render_template, url_for

from registry.explain import explain_sample
from registry.reported import reported_lines
from registry.store.reading import methods as methods_reading
from registry.store.reading import sample as reading
from registry.store.reading.columns import Columns
from web import numbers
from web.diagram_request import where_it_plots
from web.errors import Missing
from web.pictures import norm_segments
from web.reading import offered_columns, registry_connection
from web.wording import VIEW_WORDS, column_words

blueprint = Blueprint("sample", __name__)
#: Sheets of computed values in the order of the page.
COMPUTED_SHEETS = ("index_sheet", "class_sheet", "melt_sheet")
#: Columns that say why another is missing or how it came about; shown beside it, not as rows of their own.
BESIDE = {
    "fitness_cause": "fitness",
    "liquidus_model": "liquidus_c",
    "liquidus_cause": "liquidus_c",
    "ascent_cause": "ascent_outcome",
    "heat_production_cause": "heat_production_uw_m3",
}

#: Warnings that a sample may not be what it is recorded as: they stand before its verdicts.
DOUBTED_IDENTITY = ("chemistry_far_from_intrusion", "chemistry_disagrees_with_lithology")


@blueprint.get("/samples/<path:code>")
def page(code: str) -> Any:
    with registry_connection() as connection:
        found = reading.find_sample(connection, code)
        if found is None:
            near = [(name, url_for("sample.page", code=name)) for name in reading.near_codes(connection, code)]
            raise Missing("sample", code, near)
        key = found["sample_id"]
        columns = offered_columns(connection)
        quantities = {row["name"]: row for row in methods_reading.quantities(connection)}
        sheets = {sheet: reading.sheet_row(connection, sheet, key) for sheet in reading.ROW_SHEETS}
        warnings = reading.warning_rows(connection, key)
        causes = reading.cause_rows(connection, key)
        conclusions = explain_sample(connection, key)
        chosen = reading.chosen_values(connection, key)
        results = reading.result_rows(connection, key)
        changes = reading.change_rows(connection, key)
    remarks: dict[str, list[str]] = {}
    for warning in warnings:
        remarks.setdefault(warning["column_name"], []).append(warning["text"])
    norm = sheets["norm_sheet"]
    return render_template(
        "sample.html",
        section="Samples",
        sample=found,
        facts=_facts(found),
        doubts=[f"Identity in doubt: {warning['text']}" for warning in warnings if warning["code"] in DOUBTED_IDENTITY],
        conclusions=conclusions,
        labels={name: row["label"] for name, row in quantities.items()},
        units={name: row["unit"] for name, row in quantities.items()},
        majors=_majors(chosen, sheets),
        traces=[value for value in chosen if value["unit"] == "ppm"],
        iron=_iron(sheets["composition_sheet"]),
        composition_remarks=[
            f"{_subject(warning, columns)}: {warning['text']}"
            for warning in warnings
            if warning["column_name"] not in quantities
        ],
        remarks=remarks,
        plots=where_it_plots(found["code"], found["intrusion"], _known(sheets)),
        norm=norm,
        segments=norm_segments({name[:-3]: norm[name] for name in norm if name.endswith("_wt")}),
        norm_causes=_causes_of(causes, ("norm_total_wt", "q_wt")),
        computed=[
            (VIEW_WORDS[sheet], *_computed(sheets[sheet], quantities, columns, remarks, causes))
            for sheet in COMPUTED_SHEETS
        ],
        results=_by_batch(results),
        changes=changes,
    )


def _subject(warning: Mapping[str, Any], columns: Columns) -> str:
    """What a remark speaks of: the label of its column."""
    name = warning["column_name"]
    if warning["code"] in DOUBTED_IDENTITY:
        return "Identity in doubt"
    return columns[name].label if name in columns else column_words(name)


def _known(sheets: Mapping[str, Mapping[str, Any]]) -> set[str]:
    return {name for row in sheets.values() for name, value in row.items() if value is not None}


@blueprint.get("/reported/<path:code>")
def reported(code: str) -> Any:
    """The cells of the certificates as the laboratory wrote them."""
    with registry_connection() as connection:
        found = reading.find_sample(connection, code)
        if found is None:
            near = [(name, url_for("sample.reported", code=name)) for name in reading.near_codes(connection, code)]
            raise Missing("sample", code, near)
        lines = reported_lines(connection, found["sample_id"])
    return render_template("reported.html", section="Samples", sample=found, lines=lines)


def _facts(found: Mapping[str, Any]) -> list[tuple[str, str, str]]:
    """(label, words, address or nothing) of what is recorded about the sample."""
    depth = ""
    if found["from_m"] is not None and found["to_m"] is not None:
        depth = f"{numbers.reported(found['from_m'])} to {numbers.reported(found['to_m'])} m"
    position = ""
    if found["longitude"] is not None and found["latitude"] is not None:
        position = f"longitude {found['longitude']:.5f}, latitude {found['latitude']:.5f}".replace("-", numbers.MINUS)
    susceptibility, density = found["magnetic_susceptibility_si"], found["density_kg_m3"]
    site_kind = {"drill_hole": "drill hole", "outcrop": "outcrop"}.get(found["site_kind"], "")
    entries = [
        ("Kind", (found["kind"] or "").replace("_", " "), ""),
        (
            "Site",
            found["site_code"] and f"{found['site_code']} ({site_kind})",
            _page_of("sites.page", code=found["site_code"]),
        ),
        ("Depth", depth, ""),
        ("Area", found["area"], _list_of("area", found["area"])),
        ("Intrusion", found["intrusion"], _page_of("intrusions.page", name=found["intrusion"])),
        ("Lithology", found["lithology"], ""),
        ("Texture", found["texture"], ""),
        ("Alteration", found["alteration"], ""),
        ("Susceptibility", susceptibility is not None and f"{numbers.reported(susceptibility)} SI", ""),
        ("Density", density is not None and f"{numbers.reported(density)} kg/m³", ""),
        ("Position", position, _page_of("map.page", site=found["site_code"])),
        ("Position from", found["position_basis"], ""),
        ("Collected", found["collected_on"], ""),
        ("IGSN", found["igsn"], ""),
        ("Pulp kept", {1: "yes", 0: "no"}.get(found["pulp_available"], ""), ""),
        ("Reference material", found["reference_material"], ""),
        ("Duplicate of", found["duplicate_of"], _sample_address(found["duplicate_of"])),
        ("Split for it", found["duplicate_stage"], ""),
    ]
    return [(label, str(words), address) for label, words, address in entries if words]


def _list_of(argument: str, name: str | None) -> str:
    return f"{url_for('samples.list_page')}?{urlencode({argument: name})}" if name else ""


def _page_of(endpoint: str, **name: str | None) -> str:
    return url_for(endpoint, **name) if all(name.values()) else ""  # type: ignore[arg-type]


def _sample_address(code: str | None) -> str:
    return url_for("sample.page", code=code) if code else ""


def _majors(chosen: Sequence[Mapping[str, Any]], sheets: Mapping[str, Mapping[str, Any]]) -> list[dict[str, Any]]:
    """Rows of the major oxides: as analysed beside the volatile-free analysis closed to 100."""
    closed = sheets["volatile_free_sheet"]
    rows = []
    for value in chosen:
        if value["unit"] == "wt%":
            rows.append({**value, "volatile_free": closed.get(value["column"].replace("_wt", "_vf_wt"))})
    as_analysed = numbers.aligned([row["sign"] + numbers.reported(row["value"]) for row in rows])
    for row, spelled in zip(rows, as_analysed, strict=True):
        row["spelled"] = spelled
    return rows


def _iron(composition: Mapping[str, Any]) -> dict[str, Any] | None:
    """Total iron both ways, the split used, and where it came from."""
    if composition.get("feot_wt") is None:
        return None
    return {name: composition.get(name) for name in ("fe2o3t_wt", "feot_wt", "fe2o3_wt", "feo_wt", "iron_basis")}


def _causes_of(causes: Sequence[Mapping[str, Any]], names: Sequence[str]) -> list[str]:
    return list(dict.fromkeys(row["text"] for row in causes if row["column_name"] in names))


def _computed(
    row: Mapping[str, Any],
    quantities: Mapping[str, Mapping[str, Any]],
    columns: Columns,
    remarks: Mapping[str, Sequence[str]],
    causes: Sequence[Mapping[str, Any]],
) -> tuple[list[dict[str, Any]], list[tuple[str, list[str]]]]:
    """What a sheet says of the sample: rows for the values that stand; for the others, names by cause in words."""
    beside: dict[str, list[str]] = {}
    for name, owner in BESIDE.items():
        if row.get(name):
            model = quantities.get(f"liquidus_{row[name]}_c")
            words = model["label"] if model else str(row[name]).replace("_", " ")
            beside.setdefault(owner, []).append(words)
    present: list[dict[str, Any]] = []
    for name, value in row.items():
        quantity = quantities.get(name)
        if quantity is None or name in BESIDE or value is None:
            continue
        numeric = not isinstance(value, str)
        present.append(
            {
                "name": name,
                "label": quantity["label"],
                "meaning": quantity["meaning"],
                "value": numbers.derived(value, quantity["unit"]) if numeric else value.replace("_", " "),
                "numeric": numeric,
                "unit": "" if quantity["unit"] in ("1", "text") else quantity["unit"],
                "method": quantity["method"],
                "source": quantity["source"],
                "beside": beside.get(name, []),
                "remarks": list(remarks.get(name, [])),
            }
        )
    absent: dict[str, list[str]] = {}
    for cause in causes:
        name = cause["column_name"]
        if name in row and name in quantities and name not in BESIDE and row[name] is None:
            absent.setdefault(cause["text"], []).append(quantities[name]["label"])
    return present, list(absent.items())


def _by_batch(results: Sequence[Mapping[str, Any]]) -> list[dict[str, Any]]:
    """Results under the batch they came in, newest batch first."""
    batches: dict[str, dict[str, Any]] = {}
    for result in results:
        batch = batches.setdefault(result["batch"], {"code": result["batch"], "state": result["state"], "rows": []})
        batch["rows"].append(result)
    return list(batches.values())
