"""Samples and sites of the map as they are drawn and as the table lists them: what is said of each, where it leads."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from typing import Any

from flask import url_for

from registry.map_grids import Grid
from registry.mapping import Frame, Stacks
from registry.plotting import fractions
from registry.store.reading import maps as reading
from registry.store.reading.filters import Filter
from web import numbers, wording
from web.diagram_request import ENDS
from web.map_drawing import Drawn, metres
from web.map_request import MapChoice
from web.sentence import address

#: Samples and sites listed in the tables, at most.
MOST_SAMPLES, MOST_SITES = 500, 500
#: What can be told apart by closing up, m.
CLOSEST_M = 5.0


def place_words(x: float, y: float) -> str:
    """``482 310 E, 5 573 140 N``."""
    return f"{metres(x)} E, {metres(y)} N"


def _depths(detail: Mapping[str, Any]) -> str:
    ends = [numbers.reported(detail[name]) for name in ("from_m", "to_m") if detail[name] is not None]
    return f"{' to '.join(ends)} m" if ends else ""


def _value_words(value: float, choice: MapChoice) -> str:
    if choice.number is None:
        return ""
    name = wording.formula(choice.number.label)
    if value != value:
        return f"{name}: no value"
    return f"{name} {numbers.derived(value, choice.number.unit)}{wording.unit_after(choice.number.unit)}"


def drawn_samples(
    connection: Any, rows: Sequence[Any], inside: Sequence[int], stacks: Stacks, symbols: Sequence[str],
    entries: Sequence[Any], values: Any, x: Any, y: Any, sites: Sequence[Mapping[str, Any]], asked: Filter,
    choice: MapChoice, grid: Grid, frame: Frame,
) -> list[Drawn]:  # fmt: skip
    """Each sample alone on its place, and each stack of samples on one place, with its address.

    A sample leads to its page. A stack leads to the list of its samples where they are all of one site, to the map of
    the part where that tells them apart, else to the table.
    """
    leaders = [inside[number] for number in stacks.leader.tolist()]
    alone = [
        rows[row][reading.KEY] for row, count in zip(leaders, stacks.count.tolist(), strict=True) if count == 1
    ]  # fmt: skip
    details = reading.place_details(connection, alone)
    words = {entry.name: entry.words for entry in entries}
    codes = {site["site_id"]: site["code"] for site in sites}
    found = []
    for number, row in enumerate(leaders):
        leader, count = int(stacks.leader[number]), int(stacks.count[number])
        across, up, symbol = float(stacks.across[number]), float(stacks.up[number]), symbols[leader]
        value = _value_words(float(values[leader]), choice) if values is not None else ""
        site = codes.get(rows[row][reading.SITE], "")
        if count == 1:
            detail = details[rows[row][reading.KEY]]
            said = [f"{detail['code']}, {value or words[symbol]}", place_words(float(x[row]), float(y[row]))]
            said.append(", ".join(part for part in (site, _depths(detail), detail["lithology"]) if part))
            said.append(detail["position_basis"] or "")
            said += ["changed since it was computed"] if detail["is_stale"] else []
            where = url_for("sample.page", code=detail["code"])
            title = "\n".join(line for line in said if line)
            found.append(Drawn(across, up, symbol, title, where, is_stale=bool(detail["is_stale"])))
            continue
        one_site = bool(stacks.one_site[number])
        among = ", ".join(
            f"{numbers.grouped(many)} {entries[code].words}" for code, many in stacks.tally[number]
        )  # fmt: skip
        if choice.number:
            among = f"the highest {value}"
        said = [f"{numbers.counted(count, 'sample')} on one place{f', {site}' if one_site and site else ''}: {among}"]
        said.append(place_words(float(x[row]), float(y[row])))
        found.append(
            Drawn(across, up, symbol, "\n".join(said), _address_of_stack(
                site if one_site else "", float(stacks.spread_m[number]), float(x[row]), float(y[row]), asked, choice,
                grid, frame), count)
        )  # fmt: skip
    return found


def _address_of_stack(
    site: str, spread_m: float, x: float, y: float, asked: Filter, choice: MapChoice, grid: Grid, frame: Frame
) -> str:
    side = max(8.0 * spread_m, 4.0 * CLOSEST_M)
    if spread_m >= CLOSEST_M and side < 0.8 * frame.width_m:
        ends = (x - side, x + side, y - side / 1.5, y + side / 1.5)
        changed = {"grid": grid.key, **{n: f"{round(end, 1):.12g}" for n, end in zip(ENDS, ends, strict=True)}}
        return address([*asked.arguments(), *choice.pairs(**changed)], "map.page")
    if site:
        narrower = Filter(**{**vars(asked), "site": (site,), "sort": "from_m"})
        return address(narrower.arguments())
    return address([*asked.arguments(), *choice.pairs(table="1")], "map.page") + "#points"


def sites_within(
    frame: Frame, sites: Sequence[Mapping[str, Any]], x: Any, y: Any, with_samples: Collection[int]
) -> list[dict[str, Any]]:
    """The sites in the frame with their places, what is said of each and the address of its page.

    A collar has a sign of its own, an outcrop only where no sample of it is shown.
    """
    across, up = fractions(frame.window, x, y)
    found = []
    for number, site in enumerate(sites):
        if not (0.0 <= across[number] <= 1.0 and 0.0 <= up[number] <= 1.0):
            continue
        hole = site["kind"] == "drill_hole"
        survey = ""
        if hole:
            survey = numbers.counted(site["stations"], "survey station") if site["stations"] else "no survey"
            survey += f", {numbers.reported(site['depth_m'])} m long" if site["depth_m"] is not None else ""
        where = place_words(float(x[number]), float(y[number]))
        title = "\n".join([f"{site['code']}, {'collar' if hole else 'outcrop'}", where, *([survey] if survey else [])])
        found.append({
            "code": site["code"], "kind": site["kind"], "across": float(across[number]), "up": float(up[number]),
            "title": title, "survey": survey, "easting": metres(float(x[number])), "northing": metres(float(y[number])),
            "area": site["area"], "is_signed": hole or site["site_id"] not in with_samples,
            "address": url_for("sites.page", code=site["code"]),
        })  # fmt: skip
    return found


def table_of(
    connection: Any, rows: Sequence[Any], inside: Sequence[int], symbols: Sequence[str], entries: Sequence[Any],
    values: Any, x: Any, y: Any, sites: Sequence[Mapping[str, Any]], choice: MapChoice,
) -> dict[str, Any]:  # fmt: skip
    """Rows of the tables: ``table_rows`` the samples, ``site_rows`` the sites, in the order of their codes."""
    keys = [rows[row][reading.KEY] for row in inside]
    details = reading.place_details(connection, keys[:MOST_SAMPLES])
    words = {entry.name: entry.words for entry in entries}
    listed = []
    for number, row in enumerate(inside[:MOST_SAMPLES]):
        detail = details[rows[row][reading.KEY]]
        shown = words[symbols[number]]
        if values is not None and choice.number is not None:
            value = float(values[number])
            shown = numbers.derived(value, choice.number.unit) if value == value else ""
        listed.append({**detail, "shown": shown, "easting": metres(float(x[row])), "northing": metres(float(y[row])),
                       "depths": _depths(detail)})  # fmt: skip
    listed.sort(key=lambda row: row["code"])
    return {"table_rows": listed, "site_rows": sites[:MOST_SITES], "most_listed": MOST_SAMPLES}
