"""Samples whose identity is doubted: their chemistry stands against their intrusion or against the logged rock."""

from __future__ import annotations

from sqlalchemy import Connection

from registry.store import raw_rows
from registry.store.reading.outliers import DISAGREES


def doubted_samples(connection: Connection, column: str | None = None, key: int = 0) -> frozenset[int]:
    """Ids of the samples with such a remark; of all, or of one intrusion (``intrusion_id``) or site (``site_id``).

    The remarks change no verdict. Whoever ranks or names a best sample leaves these out: a swapped bag judged under
    another's name says nothing of the place it is recorded at.
    """
    if column not in (None, "intrusion_id", "site_id"):
        raise ValueError(f"samples are grouped by intrusion_id or site_id, not by {column!r}")
    where = "" if column is None else f" AND s.{column} = {int(key)}"
    place = connection.exec_driver_sql(f"SELECT min(position) FROM warning_kind WHERE code = '{DISAGREES}'").scalar()
    rows = raw_rows.select(
        connection,
        f"SELECT o.sample_id FROM suite_outlier AS o JOIN sample AS s ON s.sample_id = o.sample_id WHERE 1 = 1{where} "
        "UNION SELECT d.sample_id FROM sample AS s JOIN derived AS d ON d.sample_id = s.sample_id "
        f"WHERE substr(d.warnings, {int(-1 if place is None else place) + 1}, 1) = '1'{where}",
    )
    return frozenset(int(row[0]) for row in rows)
