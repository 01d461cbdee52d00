"""Compute what belongs to whole intrusions and areas, from what the registry has, inside the caller's transaction."""

from __future__ import annotations

from typing import Any

import numpy as np

from registry.judging import read_conventions
from registry.petrology.area_melting import area_melting
from registry.petrology.conventions import Conventions
from registry.petrology.heat import effective_half_width_m, heat_x_thickness_mw_m2
from registry.petrology.intrusion_heat import theta_centre_interval
from registry.petrology.mass_change import COMPONENT_COLUMNS, IMMOBILE_COLUMNS, component_changes, isocon
from registry.store import stale_groups, suite_rows
from registry.store.suite_rows import Bodies, Suite
from registry.suite_models import Members, Row, members, models, symbol

#: Intrusions read at a time.
BODIES_AT_A_TIME = 200
#: Fresh samples from which a median is made.
FEWEST_FRESH = 3
_THETA = ("theta_centre", "theta_centre_low", "theta_centre_high")
_NOT_COMPUTED = "no_computed_samples"


def refresh_groups(connection: Any) -> int:
    """Compute the stale intrusions and areas; how many there were."""
    if not stale_groups.any_pending(connection):
        return 0
    conventions = read_conventions(connection)
    done = 0
    while ids := stale_groups.pending(connection, "intrusion", BODIES_AT_A_TIME):
        _refresh_intrusions(connection, ids, conventions)
        stale_groups.clear(connection, "intrusion", ids)
        done += len(ids)
    if ids := stale_groups.pending(connection, "area"):
        _refresh_areas(connection, ids)
        stale_groups.clear(connection, "area", ids)
        done += len(ids)
    return done


def _refresh_areas(connection: Any, area_ids: list[int]) -> None:
    ids, entered = suite_rows.load_areas(connection, area_ids)
    suite_rows.write_areas(connection, ids, area_melting(**entered))


def _refresh_intrusions(connection: Any, intrusion_ids: list[int], conventions: Conventions) -> None:
    bodies = suite_rows.load_bodies(connection, intrusion_ids)
    suites = suite_rows.load_suites(connection, intrusion_ids)
    cooling, heat_columns = _cooling(bodies, conventions), _heat(bodies, suites)
    rows: list[tuple[int, int, Row]] = []
    trends: list[str | None] = []
    far: list[dict[str, Any]] = []
    changes: list[dict[str, Any]] = []
    for place, intrusion_id in enumerate(bodies.ids.tolist()):
        suite = suites.get(intrusion_id)
        found = [*_cooling_rows(bodies, cooling, place), *_heat_rows(bodies, heat_columns, suite, place)]
        if suite is None:
            trends.append(None)
            found.append(Row("samples", "samples_used", 0.0, "1", None, _NOT_COMPUTED))
        else:
            sorted_members = members(suite, conventions)
            modelled, trend = models(suite, sorted_members, bodies.parent_sample[place])
            few = trend.word == "too_few_samples"
            trends.append(f"{trend.sentence()}; {sorted_members.sentence()}" if few else trend.sentence())
            found = modelled + found
            far.append(_far(suite, sorted_members, intrusion_id, bodies.names[place]))
            changes.append(_mass_changes(suite, sorted_members, intrusion_id, bodies.fresh_sample[place]))
        rows += [(intrusion_id, position, row) for position, row in enumerate(found)]
    sample_ids = np.concatenate([np.zeros(0, dtype=np.int64), *(suite.sample_ids for suite in suites.values())])
    suite_rows.clear_bodies(connection, intrusion_ids, sample_ids)
    suite_rows.write_intrusions(
        connection,
        bodies.ids,
        {**cooling, "heat_x_thickness_mw_m2": heat_columns["heat_x_thickness_mw_m2"], "trend_quality": trends},
    )
    _insert_rows(connection, rows)
    for table, parts in (("suite_outlier", far), ("mass_change", changes)):
        if parts:
            suite_rows.insert_rows(
                connection, table, {name: [cell for part in parts for cell in part[name]] for name in parts[0]}
            )


def _insert_rows(connection: Any, rows: list[tuple[int, int, Row]]) -> None:
    value = np.array([row.value for _, _, row in rows], dtype=np.float64)
    suite_rows.insert_rows(
        connection,
        "suite_row",
        {
            "intrusion_id": [body for body, _, _ in rows],
            "position": [position for _, position, _ in rows],
            "model": [row.model for _, _, row in rows],
            "quantity": [row.quantity for _, _, row in rows],
            "value": value,
            "unit": [row.unit for _, _, row in rows],
            "quality": [row.quality for _, _, row in rows],
            "cause": [row.cause for _, _, row in rows],
        },
    )


def _half_width_m(bodies: Bodies) -> np.ndarray:
    return effective_half_width_m(bodies.shape, bodies.numbers["half_width_m"], bodies.numbers["volume_km3"])


def _cooling(bodies: Bodies, conventions: Conventions) -> dict[str, np.ndarray]:
    numbers = bodies.numbers
    return theta_centre_interval(
        bodies.shape,
        _half_width_m(bodies),
        numbers["depth_to_top_m"],
        numbers["age_ma"],
        numbers["age_sigma_ma"],
        conventions.thermal_diffusivity_m2_s,
    )


def _cooling_rows(bodies: Bodies, cooling: dict[str, np.ndarray], place: int) -> list[Row]:
    numbers = bodies.numbers
    cause = None
    if bodies.shape[place] is None:
        cause = "shape_missing"
    elif np.isnan(_half_width_m(bodies)[place]):
        cause = "size_missing"
    elif np.isnan(numbers["age_ma"][place]):
        cause = "age_missing"
    elif np.isnan(cooling["theta_centre"][place]):
        cause = "not_applicable"
    notes = ["by conduction alone; water that moves cools 2 to 10 times faster"]
    if np.isnan(numbers["age_sigma_ma"][place]):
        notes.append("the age has no standard deviation, 10 % taken")
    if np.isnan(numbers["depth_to_top_m"][place]):
        notes.append("depth to the top not known: the low end takes a body that reaches the surface")
    if bodies.shape[place] == "cylinder":
        notes.append("a cylinder never feels the surface here: an upper bound")
    said = None if cause else "; ".join(notes)
    return [Row("cooling", name, float(cooling[name][place]), "1", said, cause) for name in _THETA]


def _heat(bodies: Bodies, suites: dict[int, Suite]) -> dict[str, np.ndarray]:
    """Quartiles of the heat production of each body's samples, and the heat flow it adds."""
    quartiles = np.full((3, len(bodies.ids)), np.nan)
    for place, intrusion_id in enumerate(bodies.ids.tolist()):
        if intrusion_id in suites:
            heat = suites[intrusion_id].numbers["heat_production_uw_m3"]
            known = heat[~np.isnan(heat)]
            if known.size:
                quartiles[:, place] = np.quantile(known, (0.25, 0.5, 0.75))
    return {
        "heat_production_lower_quartile": quartiles[0],
        "heat_production_median": quartiles[1],
        "heat_production_upper_quartile": quartiles[2],
        "heat_x_thickness_mw_m2": heat_x_thickness_mw_m2(quartiles[1], bodies.shape, _half_width_m(bodies)),
    }


def _heat_rows(bodies: Bodies, heat: dict[str, np.ndarray], suite: Suite | None, place: int) -> list[Row]:
    count = 0 if suite is None else int((~np.isnan(suite.numbers["heat_production_uw_m3"])).sum())
    cause = None if count else "heat_production_missing"
    rows = [
        Row("heat", name, float(heat[name][place]), "uW/m3", f"of {count} samples" if count else None, cause)
        for name in ("heat_production_median", "heat_production_lower_quartile", "heat_production_upper_quartile")
    ]
    thickness = float(heat["heat_x_thickness_mw_m2"][place])
    if cause is None and np.isnan(thickness):
        cause = "thickness_unknown"
    said = None if cause else "median heat production, uniform through the body, times its thickness"
    return [*rows, Row("heat", "heat_x_thickness", thickness, "mW/m2", said, cause)]


def _far(suite: Suite, sorted_members: Members, intrusion_id: int, name: str) -> dict[str, list[Any]]:
    """Rows of ``suite_outlier``: the samples far from the rest, with the numbers."""
    distances = sorted_members.distances
    rows = np.flatnonzero(distances.far).tolist()
    columns: dict[str, list[Any]] = {
        "sample_id": suite.sample_ids[rows].tolist(),
        "intrusion_id": [intrusion_id] * len(rows),
        "distance": distances.distance[rows].tolist(),
        "distance_limit": [distances.limit] * len(rows),
        "component": [distances.component[row] for row in rows],
        "component_value": [float(suite.numbers[distances.component[row]][row]) for row in rows],
        "component_median": [distances.middle[distances.component[row]] for row in rows],
    }
    measure = "greatest robust deviation of a log-ratio" if distances.by_component else "robust distance"
    columns["text"] = [
        f"{measure} {distance:.1f} among the {distances.samples} compared samples of {name} (limit {limit:.1f}), most "
        f"by {symbol(component)} {value:.2f} against a median of {middle:.2f} wt%: a swapped sample, another rock or "
        "an enclave; look again"
        for distance, limit, component, value, middle in zip(
            *(
                columns[key]
                for key in ("distance", "distance_limit", "component", "component_value", "component_median")
            ),
            strict=True,
        )
    ]
    return columns


def _mass_changes(
    suite: Suite, sorted_members: Members, intrusion_id: int, fresh_sample: str | None
) -> dict[str, list[Any]]:
    """Rows of ``mass_change``: the altered samples of one suite against its fresh parent."""
    names = tuple(dict.fromkeys((*COMPONENT_COLUMNS, *IMMOBILE_COLUMNS)))
    rows = np.flatnonzero(sorted_members.altered)
    label, fresh, missing = _fresh_parent(suite, sorted_members, names, fresh_sample)
    rows = rows[[suite.codes[row] != label for row in rows.tolist()]] if rows.size else rows
    altered = {name: suite.numbers[name][rows] for name in names}
    lines = isocon(fresh, altered)
    changes = component_changes(
        [fresh[name] for name in COMPONENT_COLUMNS], [altered[name] for name in COMPONENT_COLUMNS], lines.slope
    )
    in_wt = np.array([1e-4 if name.endswith("_ppm") else 1.0 for name in COMPONENT_COLUMNS])[:, None]
    causes = [missing or cause for cause in lines.cause.tolist()]
    packed = suite_rows.packed_changes(changes["change"] * in_wt, changes["percent"])
    symbols = [symbol(name) for name in lines.components]
    patterns: dict[bytes, str] = {}
    told: list[str | None] = []
    for place, cause in enumerate(causes):
        if cause is not None:
            told.append(None)
            continue
        used, rejected = lines.used[:, place], lines.rejected[:, place]
        key = used.tobytes() + rejected.tobytes()
        if key not in patterns:
            words = " ".join(name for name, mark in zip(symbols, used, strict=True) if mark)
            out = " ".join(name for name, mark in zip(symbols, rejected, strict=True) if mark)
            patterns[key] = words + (f"; left out: {out}" if out else "")
        told.append(f"{patterns[key]}; ratios {lines.least[place]:.2f} to {lines.greatest[place]:.2f}")
    return {
        "sample_id": suite.sample_ids[rows].tolist(),
        "intrusion_id": [intrusion_id] * rows.size,
        "reference_sample": [label] * rows.size,
        "isocon_slope": [None if np.isnan(slope) or missing else float(slope) for slope in lines.slope],
        "immobile_components": told,
        "cause": causes,
        "changes": [None if cause else text for cause, text in zip(causes, packed, strict=True)],
    }


def _fresh_parent(
    suite: Suite, sorted_members: Members, names: tuple[str, ...], fresh_sample: str | None
) -> tuple[str | None, dict[str, float], str | None]:
    """What altered samples are compared with: its label, its composition, and the cause of there being none."""
    nothing = dict.fromkeys(names, float("nan"))
    if fresh_sample:
        if fresh_sample not in suite.codes:
            return fresh_sample, nothing, "named_fresh_sample_is_no_computed_sample_of_this_intrusion"
        row = suite.codes.index(fresh_sample)
        return fresh_sample, {name: float(suite.numbers[name][row]) for name in names}, None
    chosen = sorted_members.usable
    count = int(chosen.sum())
    if count < FEWEST_FRESH:
        return None, nothing, f"fewer_than_{FEWEST_FRESH}_fresh_samples"
    medians = {}
    for name in names:
        values = suite.numbers[name][chosen]
        known = values[~np.isnan(values)]
        medians[name] = float(np.median(known)) if known.size >= FEWEST_FRESH else float("nan")
    return f"median of {count} fresh samples", medians, None
