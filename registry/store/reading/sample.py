"""Everything the registry holds of one sample, section by section, as plain dictionaries.

One sample is read through the public views, which find it by its key.
"""

from __future__ import annotations

from typing import Any

from sqlalchemy import Connection, text

from registry.petrology.analytes import CHOSEN_COLUMNS, ELEMENT_COLUMNS, ELEMENT_SYMBOLS, OXIDE_COLUMNS, OXIDE_SYMBOLS
from registry.petrology.digestion import DIGESTION_LETTERS, DIGESTION_WORDS, DIGESTIONS, carries
from registry.store.sheets import VERDICT_WORDS

#: Sheets of one row a sample that a page may ask for.
ROW_SHEETS = (
    "sample_sheet", "composition_sheet", "volatile_free_sheet", "norm_sheet", "index_sheet", "class_sheet",
    "melt_sheet",
)  # fmt: skip
#: What a chosen column is called.
CHOSEN_LABELS = {
    **dict(zip(OXIDE_COLUMNS, OXIDE_SYMBOLS, strict=True)),
    **dict(zip(ELEMENT_COLUMNS, ELEMENT_SYMBOLS, strict=True)),
    "fe2o3t_reported_wt": "Fe2O3 total",
    "feo_titrated_wt": "FeO titrated",
    "fe2o3_ferric_wt": "Fe2O3 ferric",
    "total_reported_wt": "Total reported",
}
SIGNS = {".": "", "<": "<", ">": ">"}


def _rows(connection: Connection, sql: str, **bound: Any) -> list[dict[str, Any]]:
    return [dict(row) for row in connection.execute(text(sql), bound).mappings()]


def reported_places(connection: Connection, sample_id: int) -> list[dict[str, Any]]:
    """Every result of a sample with the place of its cell in the file it came in."""
    return _rows(
        connection,
        """
        SELECT batch.batch_id, batch.code AS batch, batch.state, batch.file_name, aliquot.line_no,
            batch_column.position, batch_column.header, batch_column.analyte, batch_column.unit, result.value,
            result.qualifier, batch.file_part, batch.reading,
            kept.batch_id AS file_batch_id, kept.code AS file_batch
        FROM aliquot JOIN batch ON batch.batch_id = aliquot.batch_id
        JOIN batch AS kept ON kept.batch_id = CASE WHEN batch.sha256 IS NOT NULL OR batch.part_of IS NULL
            THEN batch.batch_id ELSE
                (SELECT max(holder.batch_id) FROM batch AS holder
                WHERE holder.batch_id < batch.batch_id AND holder.sha256 IS NOT NULL
                AND coalesce(holder.part_of, holder.batch_id) = batch.part_of) END
        JOIN result ON result.aliquot_id = aliquot.aliquot_id
        JOIN batch_column ON batch_column.batch_column_id = result.column_id
        WHERE aliquot.sample_id = :sample_id
        ORDER BY batch.batch_id, aliquot.line_no, batch_column.position
        """,
        sample_id=sample_id,
    )


def find_sample(connection: Connection, code: str) -> dict[str, Any] | None:
    """The sample of this code with its site, area and intrusion; None where there is none."""
    rows = _rows(
        connection,
        """
        SELECT sample.sample_id, sample.code, sample.kind, sample.from_m, sample.to_m, sample.lithology,
            sample.texture, sample.alteration, sample.igsn, sample.collected_on, sample.reference_material,
            sample.magnetic_susceptibility_si, sample.density_kg_m3, sample.pulp_available, sample.duplicate_stage,
            sample.longitude,
            sample.latitude, sample.position_basis, site.code AS site_code, site.kind AS site_kind,
            area.name AS area, intrusion.name AS intrusion, original.code AS duplicate_of,
            CASE WHEN stale.sample_id IS NULL THEN 0 ELSE 1 END AS is_stale, derived.method_version,
            convention_set.conventions, composition.qualifiers, composition.digestions
        FROM sample
        LEFT JOIN site ON site.site_id = sample.site_id
        LEFT JOIN area ON area.area_id = site.area_id
        LEFT JOIN intrusion ON intrusion.intrusion_id = sample.intrusion_id
        LEFT JOIN sample AS original ON original.sample_id = sample.duplicate_of
        LEFT JOIN stale ON stale.sample_id = sample.sample_id
        LEFT JOIN derived ON derived.sample_id = sample.sample_id
        LEFT JOIN composition ON composition.sample_id = sample.sample_id
        LEFT JOIN convention_set ON convention_set.convention_set_id = derived.convention_set_id
        WHERE sample.code = :code
        """,
        code=code,
    )
    return rows[0] if rows else None


def near_codes(connection: Connection, code: str, limit: int = 6) -> list[str]:
    """Codes that someone who typed ``code`` may have meant: the same in other case, then its neighbours in order."""
    same = _rows(connection, "SELECT code FROM sample WHERE lower(code) = lower(:code) LIMIT 3", code=code)
    before = _rows(
        connection,
        "SELECT code FROM sample WHERE code < :code ORDER BY code DESC LIMIT :n",
        code=code,
        n=limit // 2,
    )
    after = _rows(
        connection, "SELECT code FROM sample WHERE code > :code ORDER BY code LIMIT :n", code=code, n=limit // 2
    )
    return list(dict.fromkeys(row["code"] for row in (*same, *reversed(before), *after)))[:limit]


def sheet_row(connection: Connection, sheet: str, sample_id: int) -> dict[str, Any]:
    """The sample's row of a sheet by column name; empty where it has none."""
    if sheet not in ROW_SHEETS:
        raise ValueError(f"no sheet of one row a sample is called {sheet!r}; choose from {', '.join(ROW_SHEETS)}")
    rows = _rows(connection, f"SELECT * FROM {sheet} WHERE sample_id = :sample_id", sample_id=sample_id)
    return rows[0] if rows else {}


#: Weighed or summed, so that an untold digestion is no gap.
WEIGHED = frozenset({"loi_wt", "h2o_plus_wt", "h2o_minus_wt", "total_reported_wt"})
_UNKNOWN = tuple(name.startswith("unknown") for name in DIGESTIONS)


def chosen_values(connection: Connection, sample_id: int) -> list[dict[str, Any]]:
    """The chosen value of every reported column: ``column label unit value sign digestion minimum``.

    ``sign`` is ``<`` or ``>`` for a censored value, ``digestion`` is in words, ``minimum`` is true where the digestion
    leaves part of the element in the residue.
    """
    rows = _rows(connection, "SELECT * FROM composition WHERE sample_id = :sample_id", sample_id=sample_id)
    if not rows:
        return []
    row, found = rows[0], []
    for column, qualifier, letter in zip(CHOSEN_COLUMNS, row["qualifiers"], row["digestions"], strict=True):
        if row[column] is None:
            continue
        code = DIGESTION_LETTERS.index(letter)
        found.append(
            {
                "column": column,
                "label": CHOSEN_LABELS[column],
                "unit": "ppm" if column.endswith("_ppm") else "wt%",
                "value": row[column],
                "sign": SIGNS.get(qualifier, ""),
                "digestion": "" if not code or (column in WEIGHED and _UNKNOWN[code]) else DIGESTION_WORDS[code],
                "minimum": bool(code) and carries(DIGESTIONS[code], column) == "minimum",
            }
        )
    return found


def derived_row(connection: Connection, sample_id: int) -> dict[str, Any]:
    """The derived quantities of a sample with its packed qualifiers and digestions, and its conventions as JSON."""
    rows = _rows(
        connection,
        """
        SELECT derived.*, composition.qualifiers, composition.digestions, convention_set.conventions,
            intrusion.name AS intrusion
        FROM derived JOIN sample ON sample.sample_id = derived.sample_id
        LEFT JOIN composition ON composition.sample_id = derived.sample_id
        LEFT JOIN intrusion ON intrusion.intrusion_id = sample.intrusion_id
        LEFT JOIN convention_set ON convention_set.convention_set_id = derived.convention_set_id
        WHERE derived.sample_id = :sample_id
        """,
        sample_id=sample_id,
    )
    return rows[0] if rows else {}


def verdict_rows(connection: Connection, sample_id: int) -> list[dict[str, Any]]:
    """The verdicts on a sample, favourable ones first, each with its target's definition and its packed reasons."""
    rows = _rows(
        connection,
        """
        SELECT target.code AS target, target.name AS target_name, target_version.version, target_version.definition,
            verdict.verdict, verdict.score_min, verdict.score_max, verdict.coverage, verdict.provisional,
            verdict.probability, verdict.probability_state, verdict.reasons
        FROM verdict JOIN target ON target.target_id = verdict.target_id
        JOIN target_version ON target_version.target_version_id = verdict.target_version_id
        WHERE verdict.sample_id = :sample_id
        ORDER BY CASE verdict.verdict WHEN 0 THEN 0 WHEN 1 THEN 1 WHEN 3 THEN 2 ELSE 3 END,
            verdict.score_min DESC, target.target_id
        """,
        sample_id=sample_id,
    )
    for row in rows:
        row["verdict"] = VERDICT_WORDS[row["verdict"]]
    return rows


def result_rows(connection: Connection, sample_id: int) -> list[dict[str, Any]]:
    """Every result of the sample as reported, with its batch, line, method and digestion."""
    return _rows(
        connection,
        """
        SELECT batch.code AS batch, batch.state, aliquot.line_no, aliquot.kind AS line_kind, aliquot.repeat_no,
            batch_column.analyte, batch_column.unit, batch_column.method, batch_column.digestion,
            batch_column.detection_limit, result.value, result.qualifier
        FROM aliquot
        JOIN batch ON batch.batch_id = aliquot.batch_id
        JOIN result ON result.aliquot_id = aliquot.aliquot_id
        JOIN batch_column ON batch_column.batch_column_id = result.column_id
        WHERE aliquot.sample_id = :sample_id
        ORDER BY batch.batch_id DESC, aliquot.line_no, batch_column.position
        """,
        sample_id=sample_id,
    )


def warning_rows(connection: Connection, sample_id: int) -> list[dict[str, Any]]:
    """Remarks on values that stand: ``code column_name value text``."""
    return _rows(
        connection,
        "SELECT code, column_name, value, text FROM warning_sheet WHERE sample_id = :sample_id",
        sample_id=sample_id,
    )


def cause_rows(connection: Connection, sample_id: int) -> list[dict[str, Any]]:
    """Why values are missing: ``column_name cause text``."""
    return _rows(
        connection,
        "SELECT column_name, cause, text FROM cause_sheet WHERE sample_id = :sample_id",
        sample_id=sample_id,
    )


def change_rows(connection: Connection, sample_id: int) -> list[dict[str, Any]]:
    """Verdicts that changed, newest first."""
    rows = _rows(
        connection,
        """
        SELECT target.name AS target, change.changed_at, change.verdict_from, change.verdict_to, change.cause
        FROM verdict_change AS change JOIN target ON target.target_id = change.target_id
        WHERE change.sample_id = :sample_id ORDER BY change.verdict_change_id DESC LIMIT 20
        """,
        sample_id=sample_id,
    )
    for row in rows:
        for end in ("verdict_from", "verdict_to"):
            row[end] = None if row[end] is None else VERDICT_WORDS[row[end]]
    return rows
