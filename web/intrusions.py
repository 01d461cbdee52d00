"""Intrusions: the list, ranked for a target, and one with its argument, body, suite, ranges, norms and samples."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from flask import Blueprint, render_template, request, url_for

from registry.explain import read_definition
from registry.standing import shared_cautions, standings
from registry.store.reading import intrusions as reading
from registry.store.reading import places as places_reading
from registry.store.reading import suites as suites_reading
from registry.store.reading import targets as targets_reading
from registry.store.reading.doubts import doubted_samples
from web.errors import Missing
from web.pictures import minerals_of, norm_segments
from web.ranges import range_bar
from web.reading import offered_columns, registry_connection
from web.remembered import remembered

blueprint = Blueprint("intrusions", __name__)
#: Verdicts, most interesting first.
ORDER = ("favourable", "possible", "undecided", "unfavourable")
#: Shown at once; the rest folds.
LACKING_SHOWN = 6


def scores(connection: Any, target_id: int) -> Mapping[int, Mapping[str, Any]]:
    """How the samples of every intrusion stand to a target, by intrusion id; kept until the registry changes."""

    def find() -> Mapping[int, Mapping[str, Any]]:
        members = remembered("members of intrusions", lambda: reading.members_of_intrusions(connection))
        doubted = remembered("samples of doubted identity", lambda: doubted_samples(connection))
        return reading.scores_by_intrusion(connection, target_id, members, doubted)

    return remembered(("scores by intrusion", target_id), find)


def leading_word(standing: Mapping[str, Any]) -> str | None:
    """The best verdict that any sample has of which nothing says that it may be another's."""
    counts, doubted = standing["counts"], standing["doubted"]
    return next((word for word in ORDER if counts[word] > doubted[word]), None)


def ranking_key(entry: Mapping[str, Any]) -> tuple[bool, float, float, float, float, str]:
    """Greatest share of favourable samples first, then of possible ones, then median and best score, then the name."""
    standing = entry["standing"]
    if not standing:
        return (True, 0.0, 0.0, 0.0, 0.0, entry["name"])
    favourable, possible = standing["shares"]
    scores = (-(standing["median_score"] or 0.0), -(standing["best_score"] or 0.0))
    return (False, -favourable, -possible, *scores, entry["name"])


@blueprint.get("/intrusions")
def list_page() -> Any:
    asked = request.args.get("target", "").strip()
    with registry_connection() as connection:
        targets = targets_reading.active_targets(connection)
        chosen = next((target for target in targets if target["code"] == asked), None)
        if asked and chosen is None:
            raise Missing(
                "target", asked, [(one["name"], url_for(".list_page", target=one["code"])) for one in targets]
            )
        rows = places_reading.intrusion_list(connection)
        if chosen is not None:
            standing = scores(connection, chosen["target_id"])
            for row in rows:
                row["standing"] = standing.get(row["intrusion_id"])
            rows.sort(key=ranking_key)
        else:
            by_target = [(target, scores(connection, target["target_id"])) for target in targets]
            for row in rows:
                row["leads"] = [
                    (target, found["counts"], found["doubted"])
                    for target, standing in by_target
                    if (found := standing.get(row["intrusion_id"]))
                    and leading_word(found) in ("favourable", "possible")
                ]
                row["judged"] = any(row["intrusion_id"] in standing for _, standing in by_target)
    return render_template(
        "intrusions.html",
        section="Intrusions",
        intrusions=rows,
        targets=targets,
        chosen=chosen,
        cautions=read_definition(chosen["definition"]).cautions if chosen else (),
        named_counts=reading.named_counts,
    )


@blueprint.get("/intrusions/<path:name>")
def page(name: str) -> Any:
    with registry_connection() as connection:
        found = reading.find_intrusion(connection, name)
        if found is None:
            near = [(other, url_for(".page", name=other)) for other in reading.near_intrusions(connection, name)]
            raise Missing("intrusion", name, near)
        key = found["intrusion_id"]
        columns = offered_columns(connection)
        kinds = reading.kinds_of_samples(connection, "intrusion_id", key)
        standing = remembered(("standings of intrusion", key), lambda: standings(connection, "intrusion_id", key))
        ranges, ordered = remembered(
            ("ranges of intrusion", key), lambda: reading.composition_ranges(connection, "intrusion_id", key)
        )
        chosen = reading.spread_evenly(ordered)
        norms = reading.norms_of(connection, [sample_id for sample_id, _ in chosen])
        samples = reading.sample_rows(connection, "intrusion_id", key)
        suite = suites_reading.intrusion_suite(connection, name) or {}
    bars = [
        {**norms[sample_id], "index": index, "segments": norm_segments(norms[sample_id]["norm"])}
        for sample_id, index in chosen
    ]
    return render_template(
        "intrusion.html",
        section="Intrusions",
        intrusion=found,
        kinds=kinds,
        total=sum(kinds.values()),
        standings=[one for one in standing if one.leading != "unfavourable"],
        against=[one for one in standing if one.leading == "unfavourable"],
        judged=any(one.samples for one in standing),
        shared_cautions=shared_cautions(standing),
        ranges=[
            (group, [(columns[one.column], one, range_bar(one)) for one in members if one.column in columns])
            for group, members in ranges.items()
        ],
        norms=bars,
        norms_of=len(ordered),
        minerals=minerals_of(bar["segments"] for bar in bars),
        samples=samples,
        suite=suite,
        models=[model for model in suite.get("models", []) if model["code"] not in ("cooling", "heat")],
        body_rows=[
            row for model in suite.get("models", []) if model["code"] in ("cooling", "heat") for row in model["rows"]
        ],
        lacking_shown=LACKING_SHOWN,
        named_counts=reading.named_counts,
    )
