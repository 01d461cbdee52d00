"""One intrusion: what is recorded of it, how its samples stand, the ranges of their compositions, their norms."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from sqlalchemy import Connection, text

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.digestion import DIGESTION_LETTERS, DIGESTIONS, carries
from registry.store import raw_rows
from registry.store.reading.doubts import doubted_samples
from registry.store.reading.samples import NORM_ORDER
from registry.store.sheets import CONTROL_KINDS, DERIVED_COLUMNS, VERDICT_WORDS

CONTROLS = ", ".join(f"'{kind}'" for kind in CONTROL_KINDS)
SAMPLES_SHOWN, NORMS_SHOWN = 100, 40
#: Oxides of the volatile-free analysis, traces as reported, indices; in the order of the page.
RANGE_COLUMNS = {
    "Oxides, volatile-free": (
        "sio2_vf_wt", "tio2_vf_wt", "al2o3_vf_wt", "feot_vf_wt", "mgo_vf_wt", "cao_vf_wt", "na2o_vf_wt", "k2o_vf_wt",
        "p2o5_vf_wt",
    ),
    "Trace elements": (
        "rb_ppm", "sr_ppm", "ba_ppm", "y_ppm", "zr_ppm", "nb_ppm", "ta_ppm", "la_ppm", "yb_ppm", "th_ppm", "u_ppm",
        "li_ppm", "cs_ppm", "sn_ppm", "w_ppm", "cu_ppm", "ni_ppm", "cr_ppm", "v_ppm",
    ),
    "Indices": (
        "mg_number_total_iron", "differentiation_index", "asi", "mali", "fe_number", "sr_y", "la_yb", "eu_anomaly",
        "rb_sr", "k_rb", "nb_ta", "zr_hf", "zircon_saturation_wh83_c", "heat_production_uw_m3",
    ),
}  # fmt: skip


@dataclass(frozen=True)
class ValueRange:
    """Least, middle and greatest of one column over some samples; None where no value counts.

    ``below`` values stand under their limit and are counted at it, ``partial`` ones come from a digestion that leaves
    part of the element behind and are left out. ``least_sign`` is ``<`` where the least is such a limit, ``≤`` where
    some value below its limit may be less still.
    """

    column: str
    values: int
    least: float | None = None
    median: float | None = None
    greatest: float | None = None
    least_sign: str = ""
    median_sign: str = ""
    below: int = 0
    partial: int = 0


def _rows(connection: Connection, sql: str, **bound: Any) -> list[dict[str, Any]]:
    return [dict(row) for row in connection.execute(text(sql), bound).mappings()]


def _grouping(column: str) -> str:
    if column not in ("intrusion_id", "site_id"):
        raise ValueError(f"samples are grouped by intrusion_id or site_id, not by {column!r}")
    return column


def find_intrusion(connection: Connection, name: str) -> dict[str, Any] | None:
    """The intrusion of this name with its area and what was computed of it; None where there is none."""
    rows = _rows(
        connection,
        """
        SELECT intrusion.*, area.name AS area, area.heat_flow_mw_m2, e.theta_centre, e.theta_centre_low,
            e.theta_centre_high, e.heat_x_thickness_mw_m2
        FROM intrusion LEFT JOIN area ON area.area_id = intrusion.area_id
        LEFT JOIN intrusion_derived AS e ON e.intrusion_id = intrusion.intrusion_id
        WHERE intrusion.name = :name
        """,
        name=name,
    )
    return rows[0] if rows else None


def near_intrusions(connection: Connection, name: str, limit: int = 6) -> list[str]:
    """Names that someone who typed ``name`` may have meant: those that begin alike, then the first of the list."""
    rows = _rows(
        connection,
        "SELECT name FROM intrusion ORDER BY CASE WHEN lower(name) = lower(:name) THEN 0 "
        "WHEN lower(substr(name, 1, 3)) = lower(substr(:name, 1, 3)) THEN 1 ELSE 2 END, name LIMIT :n",
        name=name,
        n=limit,
    )
    return [row["name"] for row in rows]


def kinds_of_samples(connection: Connection, column: str, key: int) -> dict[str, int]:
    """How many samples of each kind one intrusion (``intrusion_id``) or site (``site_id``) has."""
    rows = connection.execute(
        text(f"SELECT kind, count(*) FROM sample WHERE {_grouping(column)} = :key GROUP BY kind ORDER BY 2 DESC, 1"),
        {"key": key},
    )
    return {row[0]: row[1] for row in rows}


def judged_samples(connection: Connection, column: str, key: int) -> list[tuple[Any, ...]]:
    """Every verdict on the samples of one intrusion (``intrusion_id``) or site (``site_id``), as plain tuples.

    (target id, verdict code, score_min, score_max, sample id, packed reasons where undecided or else None).
    """
    return raw_rows.select(
        connection,
        "SELECT v.target_id, v.verdict, v.score_min, v.score_max, v.sample_id, "
        "CASE WHEN v.verdict = 3 THEN v.reasons END FROM sample AS s JOIN verdict AS v ON v.sample_id = s.sample_id "
        f"WHERE s.{_grouping(column)} = {int(key)} AND s.kind NOT IN ({CONTROLS})",
    )


def sample_codes(connection: Connection, sample_ids: Sequence[int]) -> dict[int, str]:
    """Codes by id."""
    if not sample_ids:
        return {}
    listed = ", ".join(str(int(key)) for key in sample_ids)
    rows = connection.execute(text(f"SELECT sample_id, code FROM sample WHERE sample_id IN ({listed})"))
    return {row[0]: row[1] for row in rows}


def members_of_intrusions(connection: Connection) -> tuple[np.ndarray, np.ndarray]:
    """Ids (n,) of the samples that are named after an intrusion, ascending, and those intrusions' ids (n,); int64."""
    rows = raw_rows.select(
        connection,
        f"SELECT sample_id, intrusion_id FROM sample WHERE intrusion_id IS NOT NULL AND kind NOT IN ({CONTROLS}) "
        "ORDER BY sample_id",
    )
    found = raw_rows.numbers_of(rows, 2).astype(np.int64)
    return found[:, 0], found[:, 1]


def scores_by_intrusion(
    connection: Connection,
    target_id: int,
    members: tuple[np.ndarray, np.ndarray] | None = None,
    doubted: Collection[int] = (),
) -> dict[int, dict[str, Any]]:
    """How the samples of every intrusion stand to one target, by intrusion id.

    ``counts`` by verdict word, ``best_score`` and ``median_score`` (share of the points met; None where none was
    scored). The ids in ``doubted`` are told apart in ``doubted`` (counts by word) and left out of ``best_score`` and of
    ``shares``, those of favourable and of possible samples among all with a verdict. ``members`` as
    ``members_of_intrusions`` gives them, else they are read. Reads every verdict on the
    target, from the index alone: keep the answer.
    """
    samples, bodies = members_of_intrusions(connection) if members is None else members
    rows = raw_rows.select(
        connection,
        f"SELECT sample_id, verdict, coalesce(score_min, -1.0) FROM verdict WHERE target_id = {int(target_id)}",
    )
    if not rows or not samples.size:
        return {}
    ids, verdicts, scores = raw_rows.numbers_of(rows, 3).T
    scores = np.where(scores < 0, np.nan, scores)
    places = np.minimum(np.searchsorted(samples, ids), samples.size - 1)
    named = samples[places] == ids
    body, verdict, score = bodies[places[named]], verdicts[named].astype(np.int64), scores[named]
    doubt = np.isin(ids[named], np.fromiter(doubted, dtype=np.float64))
    order = np.argsort(body, kind="stable")
    body, verdict, score, doubt = body[order], verdict[order], score[order], doubt[order]
    starts = np.flatnonzero(np.r_[True, body[1:] != body[:-1]]) if body.size else np.zeros(0, dtype=np.int64)
    found = {}
    for start, end in zip(starts.tolist(), [*starts[1:].tolist(), body.size], strict=True):
        part, sure = score[start:end], ~doubt[start:end]
        counted = np.bincount(verdict[start:end], minlength=len(VERDICT_WORDS))
        unsure = np.bincount(verdict[start:end][~sure], minlength=len(VERDICT_WORDS))
        known, best = part[~np.isnan(part)], part[sure & ~np.isnan(part)]
        counts = dict(zip(VERDICT_WORDS, counted.tolist(), strict=True))
        doubts = dict(zip(VERDICT_WORDS, unsure.tolist(), strict=True))
        found[int(body[start])] = {
            "counts": counts,
            "doubted": doubts,
            "shares": shares_of(counts, doubts),
            "best_score": float(best.max()) if best.size else None,
            "median_score": float(np.median(known)) if known.size else None,
        }
    return found


def shares_of(counts: Mapping[str, int], doubted: Mapping[str, int]) -> tuple[float, float]:
    """Shares of favourable and of possible samples among all with a verdict, those of doubted identity left out."""
    total = sum(counts.values()) - sum(doubted.values())
    favourable, possible = (counts[word] - doubted[word] for word in ("favourable", "possible"))
    return (favourable / total, possible / total) if total else (0.0, 0.0)


def composition_ranges(
    connection: Connection, column: str, key: int
) -> tuple[dict[str, list[ValueRange]], list[tuple[int, float]]]:
    """Ranges of ``RANGE_COLUMNS`` over the judged samples, by group, and (sample id, differentiation index) upwards."""
    names = [name for group in RANGE_COLUMNS.values() for name in group]
    derived = [name for name in names if name in DERIVED_COLUMNS]
    chosen = [name for name in names if name not in DERIVED_COLUMNS]
    selected = ", ".join([*(f"d.{name}" for name in derived), *(f"c.{name}" for name in chosen)])
    rows = raw_rows.select(
        connection,
        f"SELECT s.sample_id, c.qualifiers, c.digestions, {selected} FROM sample AS s "
        "JOIN derived AS d ON d.sample_id = s.sample_id JOIN composition AS c ON c.sample_id = s.sample_id "
        f"WHERE s.{_grouping(column)} = {int(key)} AND s.kind NOT IN ({CONTROLS})",
    )
    if not rows:
        return {}, []
    ids, signs, letters, *columns = zip(*rows, strict=True)
    values = dict(zip([*derived, *chosen], np.array(columns, dtype=np.float64), strict=True))
    ranges = {
        group: [
            _derived_range(name, values[name]) if name in derived else _chosen_range(name, values[name], signs, letters)
            for name in members
        ]
        for group, members in RANGE_COLUMNS.items()
    }
    index = values["differentiation_index"]
    ordered = [place for place in np.argsort(index, kind="stable").tolist() if not np.isnan(index[place])]
    return ranges, [(int(ids[place]), float(index[place])) for place in ordered]


def _derived_range(name: str, values: np.ndarray) -> ValueRange:
    known = values[~np.isnan(values)]
    if not known.size:
        return ValueRange(name, 0)
    return ValueRange(name, int(known.size), float(known.min()), float(np.median(known)), float(known.max()))


def _chosen_range(name: str, values: np.ndarray, signs: Sequence[str], letters: Sequence[str]) -> ValueRange:
    position = CHOSEN_INDEX[name]
    partial_letters = {
        letter
        for letter, digestion in zip(DIGESTION_LETTERS, DIGESTIONS, strict=True)
        if digestion != "unknown" and carries(digestion, name) == "minimum"
    }
    given = ~np.isnan(values)
    partial = given & np.array([text[position] in partial_letters for text in letters])
    used = given & ~partial
    if not used.any():
        return ValueRange(name, 0, partial=int(partial.sum()))
    under = np.array([text[position] == "<" for text in signs])[used]
    known = values[used]
    order = np.argsort(known, kind="stable")
    middle = float(np.median(known))
    below = int(under.sum())
    # limits stand for values that lie under them: the median is a limit too where half of the values are
    return ValueRange(
        name,
        int(known.size),
        float(known[order[0]]),
        middle,
        float(known[order[-1]]),
        "<" if under[order[0]] else "≤" if below else "",
        "<" if 2 * below >= known.size else "",
        below,
        int(partial.sum()),
    )


def spread_evenly(ordered: Sequence[tuple[int, float]], most: int = NORMS_SHOWN) -> list[tuple[int, float]]:
    """At most ``most`` of the ordered samples, first and last among them, at even steps."""
    if len(ordered) <= most:
        return list(ordered)
    places = np.unique(np.linspace(0, len(ordered) - 1, most).round().astype(int))
    return [ordered[place] for place in places.tolist()]


def norms_of(connection: Connection, sample_ids: Sequence[int]) -> dict[int, dict[str, Any]]:
    """Code, lithology and weight norm (``norm``: mineral symbol -> wt%) of samples, by id."""
    if not sample_ids:
        return {}
    listed = ", ".join(str(int(key)) for key in sample_ids)
    minerals = ", ".join(f'd."{mineral}_wt"' for mineral in NORM_ORDER)
    rows = connection.execute(
        text(
            f"SELECT s.sample_id, s.code, s.lithology, {minerals} FROM sample AS s JOIN derived AS d ON "
            f"d.sample_id = s.sample_id WHERE s.sample_id IN ({listed})"
        )
    )
    return {
        row[0]: {"code": row[1], "lithology": row[2], "norm": dict(zip(NORM_ORDER, row[3:], strict=True))}
        for row in rows
    }


def sample_rows(connection: Connection, column: str, key: int, limit: int = SAMPLES_SHOWN) -> list[dict[str, Any]]:
    """The first samples by site and depth, then code, with rock name, verdict in words and whether they are stale.

    ``is_doubted``: a remark says that the sample may not be what it is recorded as.
    """
    rows = _rows(
        connection,
        f"""
        SELECT s.code, s.kind, k.code AS site_code, s.from_m, s.to_m, s.lithology, s.alteration, i.name AS intrusion,
            s.sample_id, d.differentiation_index, d.sio2_vf_wt, d.mgo_vf_wt, d.tas_plutonic, d.fitness, d.best_target,
            d.best_verdict, CASE WHEN z.sample_id IS NULL THEN 0 ELSE 1 END AS is_stale
        FROM sample AS s LEFT JOIN site AS k ON k.site_id = s.site_id
        LEFT JOIN intrusion AS i ON i.intrusion_id = s.intrusion_id
        LEFT JOIN derived AS d ON d.sample_id = s.sample_id LEFT JOIN stale AS z ON z.sample_id = s.sample_id
        WHERE s.{_grouping(column)} = :key ORDER BY k.code, s.from_m, s.code LIMIT :n
        """,
        key=key,
        n=limit,
    )
    doubted = doubted_samples(connection, column, key)
    for row in rows:
        row["is_doubted"] = row["sample_id"] in doubted
        row["best_verdict"] = None if row["best_verdict"] is None else VERDICT_WORDS[row["best_verdict"]]
    return rows


def named_counts(counts: Mapping[str, int]) -> list[tuple[str, int]]:
    """(verdict word, how many) of those there are, in the order of a reader's interest."""
    order = ("favourable", "possible", "undecided", "unfavourable")
    return [(word, counts[word]) for word in order if counts.get(word)]
