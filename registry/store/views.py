"""The views of both engines, made from ``sheets`` (columns and their order) and the warnings of the catalogue."""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Any

import sqlalchemy as sa

from registry.petrology.analytes import ANALYTES, CHOSEN_COLUMNS, QUALIFIER_SIGNS
from registry.petrology.mass_change import COMPONENT_COLUMNS
from registry.store import dialect_postgresql, dialect_sqlite, tables
from registry.store.sheets import (
    BODY_COLUMNS,
    CONTROL_KINDS,
    CONTROL_STATE_WORDS,
    DERIVED_COLUMNS,
    DERIVED_SHEETS,
    OUTCOME_WORDS,
    SHEETS,
    VERDICT_WORDS,
)

_SITE = "LEFT JOIN site AS k ON k.site_id = s.site_id"
_INTRUSION = "LEFT JOIN intrusion AS i ON i.intrusion_id = s.intrusion_id"
_COMPOSITION = "LEFT JOIN composition AS c ON c.sample_id = s.sample_id"
_DERIVED = "LEFT JOIN derived AS d ON d.sample_id = s.sample_id"
_COLUMN_OF_ANALYTE = {symbol: analyte.column for symbol, analyte in ANALYTES.items() if analyte.column is not None}
#: How the packed reasons begin a text that names what would have to be known.
_LACKING = "missing: "
_JUDGED = "s.kind NOT IN (" + ", ".join(f"'{kind}'" for kind in CONTROL_KINDS) + ")"


def statements(connection: sa.Connection) -> Iterator[str]:
    """CREATE VIEW of every sheet, for the engine of the connection; reads the rows of ``warning_kind``."""
    dialect: Any = dialect_sqlite if connection.dialect.name == "sqlite" else dialect_postgresql
    warning = tables.warning_kind.c
    kinds = connection.execute(sa.select(warning.position, warning.value_column, warning.text).order_by("position"))
    for name, (expressions, source) in _sheets(dialect, [(row[0], row[1], row[2]) for row in kinds]).items():
        columns = ", ".join(f"{expressions[column]} AS {column}" for column in SHEETS[name])
        yield f"CREATE VIEW {name} AS SELECT {columns} FROM {source}"


def _words(expression: str, words: dict[int, str] | dict[str, str]) -> str:
    branches = " ".join(
        f"WHEN {key} THEN '{word}'" if isinstance(key, int) else f"WHEN '{key}' THEN '{word}'"
        for key, word in words.items()
    )
    return f"CASE {expression} {branches} END"


def _verdict_word(expression: str) -> str:
    return _words(expression, dict(enumerate(VERDICT_WORDS)))


def _each(prefix: str, names: tuple[str, ...] | str) -> dict[str, str]:
    return {name: f"{prefix}.{name}" for name in (names.split() if isinstance(names, str) else names)}


def _sheets(dialect: Any, value_columns: list[tuple[int, str | None, str]]) -> dict[str, tuple[dict[str, str], str]]:
    """Sheet -> (column -> expression, FROM and WHERE)."""
    sample = {
        "sample_id": "s.sample_id",
        "sample_code": "s.code",
        "is_stale": dialect.as_integer("EXISTS (SELECT 1 FROM stale AS z WHERE z.sample_id = s.sample_id)"),
    }
    derived = _each("d", DERIVED_COLUMNS)
    sheets = {name: ({**sample, **derived}, f"sample AS s {_DERIVED}") for name in DERIVED_SHEETS}
    sheets["sample_sheet"] = (
        {
            **derived,
            **_each("s", "from_m to_m longitude latitude easting northing elevation_m epsg lithology texture"),
            **_each("c", "sio2_wt mgo_wt"),
            **sample,
            "sample_kind": "s.kind",
            "area": "coalesce(ka.name, ia.name)",
            "site_code": "k.code",
            "site_kind": "k.kind",
            "intrusion": "i.name",
            "best_target": "d.best_target",
            "best_verdict": _verdict_word("d.best_verdict"),
        },
        f"sample AS s {_SITE} LEFT JOIN area AS ka ON ka.area_id = k.area_id {_INTRUSION} "
        f"LEFT JOIN area AS ia ON ia.area_id = i.area_id {_COMPOSITION} {_DERIVED}",
    )
    sheets["composition_sheet"] = (
        {**derived, **_each("c", CHOSEN_COLUMNS), **sample, "censored": "c.censored"},
        f"sample AS s {_COMPOSITION} {_DERIVED}",
    )
    sheets.update(_judgement_sheets(dialect, sample))
    sheets.update(_expanded_sheets(dialect, sample, value_columns))
    sheets.update(_register_sheets(dialect, sample))
    return sheets


def _judgement_sheets(dialect: Any, sample: dict[str, str]) -> dict[str, tuple[dict[str, str], str]]:
    """Verdicts, their reasons (the packed JSON, by the criterion's position) and their changes."""
    value = dialect.packed_number("v.reasons", "values", "q.position")
    threshold = dialect.packed_number("v.reasons", "thresholds", "q.position")
    said = dialect.packed_text("v.reasons", "texts", "q.position")
    outcome = f"substr({dialect.packed_text('v.reasons', 'outcomes')}, CAST(q.position AS integer) + 1, 1)"
    judged = f"verdict AS v JOIN sample AS s ON s.sample_id = v.sample_id AND {_JUDGED} JOIN target AS t ON "
    judged += "t.target_id = v.target_id"
    return {
        "verdict_sheet": (
            {
                **_each("v", "score_min score_max coverage probability provisional"),
                **sample,
                "probability_state": "CASE WHEN v.probability_state = 'computed' AND EXISTS (SELECT 1 FROM stale AS z "
                "WHERE z.sample_id = s.sample_id) THEN 'out_of_date' ELSE v.probability_state END",
                "target": "t.code",
                "verdict": _verdict_word("v.verdict"),
                "target_version": "w.version",
            },
            f"{judged} JOIN target_version AS w ON w.target_version_id = v.target_version_id",
        ),
        "reason_sheet": (
            {
                **sample,
                "target": "t.code",
                "criterion": "q.code",
                "value": value,
                "value_text": f"CASE WHEN substr({said}, 1, {len(_LACKING)}) <> '{_LACKING}' THEN {said} END",
                "threshold": threshold,
                "margin": f"CASE substr(q.comparison, 1, 1) WHEN '<' THEN {threshold} - {value} "
                f"WHEN '>' THEN {value} - {threshold} "
                # between: the packed threshold is the nearer end, rounded to six digits
                f"WHEN 'b' THEN CASE WHEN abs({threshold} - q.threshold) <= 1e-5 * abs(q.threshold) "
                f"THEN {value} - {threshold} ELSE {threshold} - {value} END END",
                "outcome": _words(outcome, OUTCOME_WORDS),
                "missing": f"CASE WHEN substr({said}, 1, {len(_LACKING)}) = '{_LACKING}' "
                f"THEN substr({said}, {len(_LACKING) + 1}) END",
                "provisional": "q.provisional",
                "source": "q.source",
            },
            f"{judged} JOIN criterion AS q ON q.target_version_id = v.target_version_id",
        ),
        "change_sheet": (
            {
                **_each("h", "changed_at cause"),
                **sample,
                "target": "t.code",
                "verdict_from": _verdict_word("h.verdict_from"),
                "verdict_to": _verdict_word("h.verdict_to"),
            },
            "verdict_change AS h JOIN sample AS s ON s.sample_id = h.sample_id JOIN target AS t ON "
            "t.target_id = h.target_id",
        ),
    }


def _expanded_sheets(
    dialect: Any, sample: dict[str, str], value_columns: list[tuple[int, str | None, str]]
) -> dict[str, tuple[dict[str, str], str]]:
    """The strings of each derived row, one letter a quantity and one 0/1 a warning, as rows."""
    branches = " ".join(
        f"WHEN {position} THEN {place}"
        for position, column, _ in value_columns
        if column is not None and (place := _place_of(column)) is not None
    )
    value = f"CASE w.position {branches} END" if branches else dialect.NULL_NUMBER
    said = f"replace(w.text, '{{value}}', coalesce({dialect.spelled(value)}, 'not known'))"
    others = ""
    for position, _, text in value_columns:  # a text may name columns beside its value
        told = said
        for name in sorted(set(re.findall(r"\{(\w+)\}", text)) - {"value"}):
            told = f"replace({told}, '{{{name}}}', coalesce({dialect.spelled(_place_of(name))}, 'not known'))"
        others += f" WHEN {position} THEN {told}" if told != said else ""
    said = f"CASE w.position{others} ELSE {said} END" if others else said
    letter = "substr(d.causes, CAST(q.position AS integer) + 1, 1)"
    return {
        "warning_sheet": (
            {**sample, "code": "w.code", "column_name": "w.column_name", "value": value, "text": said},
            f"derived AS d JOIN sample AS s ON s.sample_id = d.sample_id {_COMPOSITION} JOIN warning_kind AS w ON "
            f"substr(d.warnings, CAST(w.position AS integer) + 1, 1) = '1' UNION ALL {_far_samples(sample)} "
            f"UNION ALL {_failed_controls(sample)}",
        ),
        "cause_sheet": (
            {**sample, "column_name": "q.name", "cause": "w.code", "text": "w.text"},
            f"derived AS d JOIN sample AS s ON s.sample_id = d.sample_id JOIN quantity AS q ON {letter} <> '.' "
            f"JOIN cause_kind AS w ON w.letter = {letter} AND w.code <> 'value_present'",
        ),
    }


def _far_samples(sample: dict[str, str]) -> str:
    """The remarks on samples far from the rest of their intrusion, as rows of the warning sheet."""
    said = {
        **sample,
        "code": "'chemistry_far_from_intrusion'",
        "column_name": "'intrusion'",
        "value": "o.distance",
        "text": "o.text",
    }
    columns = ", ".join(said[column] for column in SHEETS["warning_sheet"])
    return f"SELECT {columns} FROM suite_outlier AS o JOIN sample AS s ON s.sample_id = o.sample_id"


def _failed_controls(sample: dict[str, str]) -> str:
    """The remarks on values whose analyte failed its control in their batch, by the convention ``failed_control``.

    A value that a newer batch by the same digestion goes before is in no use, and so is not remarked on.
    """
    held = "EXISTS (SELECT 1 FROM setting AS g WHERE g.name = 'convention.failed_control' AND g.value = '\"hold\"')"
    ignored = held.replace("hold", "ignore")
    said = {
        **sample,
        "code": "'failed_control'",
        "column_name": f"coalesce({_words('b.analyte', _COLUMN_OF_ANALYTE)}, b.analyte)",
        "value": "r.value",
        "text": "b.analyte || ' failed its control in batch ' || h.code || "
        f"CASE WHEN {held} THEN ' and is held out of the composition: ' ELSE ': ' END || f.remarks",
    }
    columns = ", ".join(said[column] for column in SHEETS["warning_sheet"])
    return (
        f"SELECT {columns} FROM control_state AS f JOIN batch AS h ON h.batch_id = f.batch_id AND h.state = 'active' "
        "JOIN batch_column AS b ON b.batch_column_id = f.column_id JOIN aliquot AS a ON a.batch_id = f.batch_id "
        f"JOIN sample AS s ON s.sample_id = a.sample_id AND {_JUDGED} JOIN result AS r ON r.aliquot_id = a.aliquot_id "
        f"AND r.column_id = f.column_id AND r.value IS NOT NULL WHERE f.state = 2 AND NOT {ignored} "
        "AND NOT EXISTS (SELECT 1 FROM aliquot AS n JOIN batch AS m ON m.batch_id = n.batch_id AND m.state = 'active' "
        f"AND {_age('m')} > {_age('h')} JOIN result AS v ON v.aliquot_id = n.aliquot_id AND v.value IS NOT NULL "
        "AND v.qualifier <> 2 JOIN batch_column AS k ON k.batch_column_id = v.column_id AND k.analyte = b.analyte "
        "AND k.digestion = b.digestion WHERE n.sample_id = a.sample_id AND n.repeat_no = 0)"
    )


def _age(batch: str) -> str:
    """What batches are put in order by, as the choice of values does."""
    day = f"coalesce({batch}.reported_on, {batch}.received_on, substr({batch}.imported_at, 1, 10))"
    return f"({day}, {batch}.imported_at, {batch}.batch_id)"


def _place_of(column: str) -> str | None:
    """Where a warning's value stands; None where it is no number of a stored row."""
    for prefix, table in (("d", tables.derived), ("c", tables.composition), ("s", tables.sample)):
        if column in table.c and column not in ("sample_id", "code") and not _is_text(table.c[column]):
            return f"{prefix}.{column}"
    return None


def _is_text(column: sa.Column[Any]) -> bool:
    return issubclass(column.type._type_affinity or object, sa.String)


def _register_sheets(dialect: Any, sample: dict[str, str]) -> dict[str, tuple[dict[str, str], str]]:
    """Results, batches and controls; intrusions, areas, suites and altered samples with what was computed of them."""
    components = " UNION ALL ".join(
        f"SELECT {position} AS position, '{column}' AS component" for position, column in enumerate(COMPONENT_COLUMNS)
    )
    change_wt = dialect.packed_number("m.changes", "wt", "q.position")
    signs = {code: sign for code, sign in enumerate(QUALIFIER_SIGNS) if sign}
    return {
        "result_sheet": (
            {
                **_each("b", "analyte unit method digestion"),
                **sample,
                "value": "r.value",
                "qualifier": _words("r.qualifier", signs),
                "batch": "h.code",
                "line_no": "a.line_no",
            },
            "sample AS s JOIN aliquot AS a ON a.sample_id = s.sample_id JOIN batch AS h ON h.batch_id = a.batch_id "
            "AND h.state = 'active' JOIN result AS r ON r.aliquot_id = a.aliquot_id "
            "JOIN batch_column AS b ON b.batch_column_id = r.column_id",
        ),
        "batch_sheet": ({"batch": "h.code", **_each("h", "lab state file_name sha256")}, "batch AS h"),
        "control_sheet": (
            {
                **_each("o", "kind expected found z material limit_low limit_high rule source"),
                "batch": "h.code",
                "analyte": "b.analyte",
                "state": _words("o.state", dict(enumerate(CONTROL_STATE_WORDS))),
                "line_no": "a.line_no",
                "sample_code": "s.code",
                "qualifier": _words("r.qualifier", signs),
            },
            "control_outcome AS o JOIN batch AS h ON h.batch_id = o.batch_id JOIN batch_column AS b ON "
            "b.batch_column_id = o.column_id JOIN aliquot AS a ON a.aliquot_id = o.aliquot_id "
            "JOIN sample AS s ON s.sample_id = a.sample_id "
            "LEFT JOIN result AS r ON r.aliquot_id = o.aliquot_id AND r.column_id = o.column_id",
        ),
        "intrusion_sheet": (
            {
                **_each("i", "shape half_width_m age_ma"),
                **_each("e", (*BODY_COLUMNS, "trend_quality")),
                "intrusion": "i.name",
                "area": "a.name",
                "samples": "(SELECT count(*) FROM sample AS s WHERE s.intrusion_id = i.intrusion_id)",
            },
            "intrusion AS i LEFT JOIN area AS a ON a.area_id = i.area_id "
            "LEFT JOIN intrusion_derived AS e ON e.intrusion_id = i.intrusion_id",
        ),
        "area_sheet": (
            {
                **_each("e", SHEETS["area_sheet"][6:]),
                **_each("a", (*SHEETS["area_sheet"][1:6], "moho_depth_m")),
                "area": "a.name",
                "geotherm_cause": "CASE WHEN e.area_id IS NULL THEN 'not_yet_computed' ELSE e.geotherm_cause END",
            },
            "area AS a LEFT JOIN area_derived AS e ON e.area_id = a.area_id",
        ),
        "suite_sheet": (
            {**_each("r", SHEETS["suite_sheet"][1:]), "intrusion": "i.name"},
            "suite_row AS r JOIN intrusion AS i ON i.intrusion_id = r.intrusion_id",
        ),
        "mass_change_sheet": (
            {
                **_each("m", "reference_sample isocon_slope immobile_components cause"),
                **sample,
                "component": "q.component",
                "change_wt": change_wt,
                "change_percent": dialect.packed_number("m.changes", "percent", "q.position"),
            },
            # a sample without an isocon has one row that says why
            f"mass_change AS m JOIN sample AS s ON s.sample_id = m.sample_id LEFT JOIN ({components}) AS q ON "
            f"m.cause IS NULL AND {change_wt} IS NOT NULL",
        ),
        "column_guide": (_each("g", SHEETS["column_guide"]), "column_guide_row AS g"),
    }
