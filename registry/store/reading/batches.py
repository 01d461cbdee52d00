"""Lab certificates: the list, and one certificate with its columns and the samples on it."""

from __future__ import annotations

from typing import Any

from sqlalchemy import Connection, text

SAMPLES_SHOWN = 200


def batch_list(connection: Connection) -> list[dict[str, Any]]:
    """Every batch, newest first, with how many lines and samples it reports."""
    rows = connection.execute(
        text(
            """
            SELECT batch.batch_id, batch.code, batch.lab, batch.certificate, batch.received_on, batch.reported_on,
                batch.imported_at, batch.imported_by, batch.file_name, batch.state, counted.lines, counted.samples
            FROM batch LEFT JOIN (
                SELECT batch_id, count(*) AS lines, count(DISTINCT sample_id) AS samples FROM aliquot GROUP BY batch_id
            ) AS counted ON counted.batch_id = batch.batch_id
            ORDER BY batch.batch_id DESC
            """
        )
    )
    return [dict(row) for row in rows.mappings()]


def find_batch(connection: Connection, code: str) -> dict[str, Any] | None:
    """One batch by its code, with the batch that supersedes it; None where there is none."""
    row = (
        connection.execute(
            text(
                """
                SELECT batch.batch_id, batch.code, batch.lab, batch.certificate, batch.received_on, batch.reported_on,
                    batch.imported_at, batch.imported_by, batch.file_name, batch.sha256, batch.state,
                    newer.code AS superseded_by, whole.code AS part_of,
                    EXISTS (SELECT 1 FROM batch_file WHERE batch_file.batch_id = batch.batch_id) AS has_file
                FROM batch LEFT JOIN batch AS newer ON newer.batch_id = batch.superseded_by
                LEFT JOIN batch AS whole ON whole.batch_id = batch.part_of
                WHERE batch.code = :code
                """
            ),
            {"code": code},
        )
        .mappings()
        .first()
    )
    return None if row is None else dict(row)


def batch_relatives(connection: Connection, batch_id: int) -> dict[str, list[str]]:
    """Codes of the batches that this one supersedes (``supersedes``) and of its further parts (``parts``)."""
    rows = connection.execute(
        text(
            "SELECT code, superseded_by, part_of FROM batch WHERE superseded_by = :batch_id OR part_of = :batch_id "
            "ORDER BY batch_id"
        ),
        {"batch_id": batch_id},
    ).all()
    return {
        "supersedes": [row.code for row in rows if row.superseded_by == batch_id],
        "parts": [row.code for row in rows if row.part_of == batch_id],
    }


def batch_columns(connection: Connection, batch_id: int) -> list[dict[str, Any]]:
    """The columns of a certificate in file order, with how each sample was digested and measured."""
    rows = connection.execute(
        text(
            "SELECT position, header, analyte, unit, method, digestion, detection_limit FROM batch_column "
            "WHERE batch_id = :batch_id ORDER BY position"
        ),
        {"batch_id": batch_id},
    )
    return [dict(row) for row in rows.mappings()]


def batch_samples(
    connection: Connection, batch_id: int, limit: int = SAMPLES_SHOWN
) -> tuple[int, list[dict[str, Any]]]:
    """How many lines a certificate has, and the first ``limit`` of them with the sample of each."""
    total = connection.execute(
        text("SELECT count(*) FROM aliquot WHERE batch_id = :batch_id"), {"batch_id": batch_id}
    ).scalar_one()
    rows = connection.execute(
        text(
            """
            SELECT aliquot.line_no, aliquot.kind AS line_kind, aliquot.repeat_no, sample.code, sample.kind,
                sample.lithology
            FROM aliquot JOIN sample ON sample.sample_id = aliquot.sample_id
            WHERE aliquot.batch_id = :batch_id ORDER BY aliquot.line_no, aliquot.aliquot_id LIMIT :limit
            """
        ),
        {"batch_id": batch_id, "limit": limit},
    )
    return total, [dict(row) for row in rows.mappings()]


def near_batches(connection: Connection, limit: int = 6) -> list[str]:
    """The newest batch codes, for someone whose code was not found."""
    rows = connection.execute(text("SELECT code FROM batch ORDER BY batch_id DESC LIMIT :limit"), {"limit": limit})
    return [row[0] for row in rows]
