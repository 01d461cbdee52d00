"""Sites: the list, and one with its conclusion, its position, and for a hole the strip down it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from flask import Blueprint, render_template, request, url_for

from registry.explain import read_definition
from registry.standing import Standing, shared_cautions, standings
from registry.store.reading import intrusions as samples_reading
from registry.store.reading import places as places_reading
from registry.store.reading import sites as reading
from registry.store.reading import targets as targets_reading
from registry.store.reading.columns import Column, Columns
from web.errors import Missing
from web.reading import offered_columns, registry_connection
from web.remembered import remembered
from web.strip import build_strip

blueprint = Blueprint("sites", __name__)
MOST_TRACKS = 3
DEFAULT_VALUES = ("differentiation_index", "sr_y")
NOTHING = "none"
SAMPLES_SHOWN = 200
LACKING_SHOWN = 4
#: Values offered for the strip; the address takes every numeric column of the sample views.
OFFERED = (
    "differentiation_index", "mg_number", "mg_number_total_iron", "sio2_vf_wt", "mgo_vf_wt", "k2o_vf_wt", "loi_wt",
    "asi", "sr_y", "la_yb", "eu_anomaly", "rb_sr", "k_rb", "nb_ta", "zr_hf", "v_sc", "cu_zr", "fe2o3_feo",
    "alteration_index", "ccpi", "cia", "zircon_saturation_wh83_c", "liquidus_c", "melt_density_kg_m3",
    "heat_production_uw_m3", "cu_ppm", "ni_ppm", "cr_ppm", "sn_ppm", "w_ppm", "li_ppm", "cs_ppm", "ta_ppm", "u_ppm",
    "th_ppm", "s_wt",
)  # fmt: skip


@blueprint.get("/sites")
def list_page() -> Any:
    with registry_connection() as connection:
        rows = places_reading.site_list(connection)
        verdicts = remembered("best verdicts by site", lambda: places_reading.best_verdicts_by_site(connection))
    for row in rows:
        row["counts"] = verdicts.get(row["site_id"], {})
    return render_template("sites.html", section="Sites", sites=rows)


@blueprint.get("/sites/<path:code>")
def page(code: str) -> Any:
    with registry_connection() as connection:
        site = reading.find_site(connection, code)
        if site is None:
            near = [(other, url_for(".page", code=other)) for other in reading.near_sites(connection, code)]
            raise Missing("site", code, near)
        key = site["site_id"]
        columns = offered_columns(connection)
        targets = targets_reading.active_targets(connection)
        hole = site["kind"] == "drill_hole"
        standing = remembered(
            ("standings of site", key),
            lambda: standings(connection, "site_id", key, explained=("favourable", "possible")),
        )
        usual = _usual_values(connection, key, columns, targets, standing) if hole else DEFAULT_VALUES
        target, shown, faults = _asked(columns, targets, usual)
        survey = reading.survey_rows(connection, key) if hole else []
        intervals = reading.interval_rows(connection, key) if hole else []
        values = reading.strip_samples(connection, key, shown, target["target_id"] if target else None) if hole else []
        kinds = samples_reading.kinds_of_samples(connection, "site_id", key)
        samples = samples_reading.sample_rows(connection, "site_id", key, SAMPLES_SHOWN)
        bases = reading.position_bases(connection, key)
    return render_template(
        "site.html",
        section="Sites",
        site=site,
        hole=hole,
        survey=survey,
        intervals=intervals,
        strip=build_strip(site["depth_m"], intervals, values, shown) if hole else None,
        strip_samples=len(values),
        offered=_offered(columns, shown),
        shown=[column.name for column in shown],
        most_tracks=MOST_TRACKS,
        nothing=NOTHING,
        targets=targets,
        target=target,
        faults=faults,
        standings=[one for one in standing if one.leading in ("favourable", "possible")],
        others=[one for one in standing if one.samples and one.leading not in ("favourable", "possible")],
        judged=any(one.samples for one in standing),
        shared_cautions=shared_cautions(standing),
        kinds=kinds,
        total=sum(kinds.values()),
        samples=samples,
        bases=bases,
        lacking_shown=LACKING_SHOWN,
    )


def _usual_values(
    connection: Any, site_id: int, columns: Columns, targets: Sequence[dict[str, Any]], standing: Sequence[Standing]
) -> tuple[str, ...]:
    """The values drawn unasked: the first that the criteria of the leading target weigh and that the hole has."""
    leading = next((one.target for one in standing if one.leading in ("favourable", "possible")), None)
    target = next((one for one in targets if one["code"] == leading), None)
    if target is None:
        return DEFAULT_VALUES
    asked = [criterion.test.quantity for criterion in read_definition(target["definition"]).criteria]
    offered = [columns[name] for name in dict.fromkeys((*asked, *DEFAULT_VALUES)) if _is_drawn(columns.get(name))]
    rows = reading.strip_samples(connection, site_id, offered, None)
    given = [
        column.name for place, column in enumerate(offered) if any(row[f"value_{place}"] is not None for row in rows)
    ]
    return tuple(given[: len(DEFAULT_VALUES)]) or DEFAULT_VALUES


def _is_drawn(column: Column | None) -> bool:
    return column is not None and column.numeric and column.table in ("derived", "composition", "sample")


def _asked(
    columns: Columns, targets: Sequence[dict[str, Any]], usual: Sequence[str]
) -> tuple[dict[str, Any] | None, list[Column], list[str]]:
    """The target whose verdicts stand beside the strip (None: the best of all), the values drawn, and faults."""
    faults = []
    code = request.args.get("target", "").strip()
    target = next((one for one in targets if one["code"] == code), None)
    if code and target is None:
        faults.append(f"There is no target “{code}”; the best verdict of all targets is shown.")
    typed = [name.strip() for name in request.args.getlist("value") if name.strip()]
    names = [name for name in dict.fromkeys(typed) if name != NOTHING] if typed else list(usual)
    shown: list[Column] = []
    for name in names:
        column = columns.get(name)
        if column is None or not _is_drawn(column):
            faults.append(f"“{name}” is no number of the sample views and is not drawn.")
        elif len(shown) == MOST_TRACKS:
            faults.append(f"At most {MOST_TRACKS} values are drawn beside one another; {column.label} is left out.")
        else:
            shown.append(column)
    return target, shown, faults


def _offered(columns: Columns, shown: Sequence[Column]) -> list[Column]:
    names = [name for name in OFFERED if name in columns]
    return [columns[name] for name in names] + [column for column in shown if column.name not in names]
