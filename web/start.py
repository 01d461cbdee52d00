"""The start page: the leading intrusion of each target, what needs attention, what came in."""

from __future__ import annotations

from pathlib import PurePath
from typing import Any

from flask import Blueprint, current_app, render_template

from registry.explain import read_definition
from registry.standing import dearest_lacking
from registry.store.reading import places as places_reading
from registry.store.reading import start as reading
from registry.store.reading import targets as targets_reading
from web.intrusions import leading_word, ranking_key, scores
from web.reading import registry_connection
from web.remembered import remembered

blueprint = Blueprint("start", __name__)
LACKING_SHOWN = 6


@blueprint.get("/")
def page() -> Any:
    with registry_connection() as connection:
        totals = reading.totals(connection)
        targets = targets_reading.active_targets(connection)
        bodies = places_reading.intrusion_list(connection)
        leading = [_leading(connection, target, bodies) for target in targets]
        batches = reading.last_batches(connection)
        waiting = reading.waiting(connection)
        failed = reading.failed_controls(connection)
        attention = remembered("attention", lambda: _attention(connection, targets))
        demo = reading.is_demo(connection)
    return render_template(
        "start.html",
        section="Start",
        name=_name(),
        totals=totals,
        leading=[entry for entry in leading if entry["body"]],
        nobody=[entry["target"]["name"] for entry in leading if not entry["body"]],
        batches=batches,
        waiting=waiting,
        failed=failed,
        demo=demo,
        lacking_shown=LACKING_SHOWN,
        **attention,
    )


def _name() -> str:
    """The registry's name: its file without the ending, or its database."""
    registry = current_app.extensions["registry"]
    return registry.path.stem if registry.path is not None else PurePath(registry.url.partition("?")[0]).name


def _leading(connection: Any, target: dict[str, Any], bodies: list[dict[str, Any]]) -> dict[str, Any]:
    """The intrusion that ranks first for a target, where one of its samples is favourable or possible."""
    standing = scores(connection, target["target_id"])
    ranked = sorted(({**body, "standing": standing.get(body["intrusion_id"])} for body in bodies), key=ranking_key)
    first = ranked[0] if ranked and ranked[0]["standing"] else None
    word = leading_word(first["standing"]) if first else None
    stands_out = word in ("favourable", "possible")
    others = sum(
        leading_word(body["standing"]) in ("favourable", "possible")
        for body in ranked[1:]
        if body["standing"] and stands_out
    )
    return {"target": target, "body": first if stands_out else None, "word": word, "others": others}


def _attention(connection: Any, targets: list[dict[str, Any]]) -> dict[str, Any]:
    """What has to be read from the whole registry: samples that are not fit, what is lacking, remarks."""
    reasons = [(target, reading.undecided_reasons(connection, target["target_id"])) for target in targets]
    far, against_log, remarks = reading.remarks(connection)
    return {
        "unfit": reading.unfit_samples(connection),
        "lacking": dearest_lacking(
            (target["name"], read_definition(target["definition"]), packed) for target, packed in reasons
        ),
        "lacking_partly": any(len(packed) == reading.UNDECIDED_READ for _, packed in reasons),
        "far": far,
        "against_log": against_log,
        "remarks": remarks,
    }
