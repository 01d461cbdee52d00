"""What is computed of whole intrusions and areas: their samples as arrays, and the rows written back."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import orjson
import sqlalchemy as sa

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.digestion import CARRIES, DIGESTION_LETTERS, TOTAL
from registry.petrology.mass_change import COMPONENT_COLUMNS, IMMOBILE_COLUMNS
from registry.petrology.outliers import COMPARED_OXIDES
from registry.petrology.suite import INCOMPATIBLE_COLUMNS
from registry.store import raw_rows
from registry.store.bulk import QUALIFIER_LETTERS
from registry.store.loading import unpacked
from registry.store.sheets import CONTROL_KINDS

#: Numbers of the derived table that the suites need.
DERIVED_NUMBERS = (
    *COMPARED_OXIDES, "mno_vf_wt", "p2o5_vf_wt", "fe2o3t_wt", "mg_number_total_iron", "differentiation_index",
    "heat_production_uw_m3", "not_a_liquid",
)  # fmt: skip
#: Chosen values that the suites need; what is below a limit, or carried only in part by its digestion, is NaN.
CHOSEN_NUMBERS = tuple(
    dict.fromkeys(
        name for name in (*COMPONENT_COLUMNS, *IMMOBILE_COLUMNS, *INCOMPATIBLE_COLUMNS) if name in CHOSEN_INDEX
    )
)
_BODY_NUMBERS = ("half_width_m", "volume_km3", "depth_to_top_m", "age_ma", "age_sigma_ma")
_AREA_NUMBERS = (
    "heat_flow_mw_m2", "surface_temperature_c", "conductivity_w_m_k", "heat_production_uw_m3",
    "heat_production_depth_m", "moho_depth_m",
)  # fmt: skip


@dataclass(frozen=True)
class Bodies:
    """Intrusions (n,) by ascending id: names, shape and named samples (object, None missing), numbers by name."""

    ids: np.ndarray
    names: list[str]
    shape: np.ndarray
    parent_sample: list[str | None]
    fresh_sample: list[str | None]
    numbers: dict[str, np.ndarray]


@dataclass(frozen=True)
class Suite:
    """The samples (n,) of one intrusion that have been computed and are no controls."""

    sample_ids: np.ndarray
    codes: list[str]
    numbers: dict[str, np.ndarray]
    fitness: np.ndarray
    alteration: np.ndarray

    def __len__(self) -> int:
        return len(self.sample_ids)


def load_bodies(connection: sa.Connection, intrusion_ids: Any) -> Bodies:
    """The intrusions of these ids that are there."""
    rows = raw_rows.select(
        connection,
        f"SELECT intrusion_id, name, shape, parent_sample, fresh_sample, {', '.join(_BODY_NUMBERS)} FROM intrusion "
        "WHERE intrusion_id {ids} ORDER BY intrusion_id",
        intrusion_ids,
    )
    ids, names, shapes, parents, fresh, *numbers = zip(*rows, strict=True) if rows else [()] * 10
    return Bodies(
        np.array(ids, dtype=np.int64),
        list(names),
        _words(shapes),
        list(parents),
        list(fresh),
        {name: np.array(column, dtype=np.float64) for name, column in zip(_BODY_NUMBERS, numbers, strict=True)},
    )


def load_suites(connection: sa.Connection, intrusion_ids: Any) -> dict[int, Suite]:
    """The computed samples of these intrusions, by intrusion id; one without any is left out.

    The ids are looked up first, so that the wide rows are read in the order in which they lie in the file.
    """
    controls = ", ".join(f"'{kind}'" for kind in CONTROL_KINDS)
    members = raw_rows.select(
        connection,
        f"SELECT sample_id FROM sample WHERE kind NOT IN ({controls}) AND intrusion_id {{ids}}",
        intrusion_ids,
    )
    columns = [
        "s.intrusion_id", "s.sample_id", "s.code", "s.alteration", "d.fitness", "c.qualifiers", "c.digestions",
        *(f"d.{name}" for name in DERIVED_NUMBERS),
        *(f"c.{name}" for name in CHOSEN_NUMBERS),
    ]  # fmt: skip
    rows = raw_rows.select(
        connection,
        f"SELECT {', '.join(columns)} FROM sample AS s JOIN derived AS d ON d.sample_id = s.sample_id "
        "JOIN composition AS c ON c.sample_id = s.sample_id WHERE s.sample_id {ids} ORDER BY s.sample_id",
        sorted(row[0] for row in members),
    )
    if not rows:
        return {}
    bodies, ids, codes, alteration, fitness, signs, letters, *values = zip(*rows, strict=True)
    derived = dict(zip(DERIVED_NUMBERS, np.array(values[: len(DERIVED_NUMBERS)], dtype=np.float64), strict=True))
    chosen = np.array(values[len(DERIVED_NUMBERS) :], dtype=np.float64)
    places = np.array([CHOSEN_INDEX[name] for name in CHOSEN_NUMBERS])
    sure = unpacked(signs, QUALIFIER_LETTERS)[:, places].T == 0
    sure &= CARRIES[unpacked(letters, DIGESTION_LETTERS)[:, places].T, places[:, None]] == TOTAL
    chosen[~sure] = np.nan
    numbers = {**derived, **dict(zip(CHOSEN_NUMBERS, chosen, strict=True))}
    body, sample_ids = np.array(bodies, dtype=np.int64), np.array(ids, dtype=np.int64)
    words, changed = _words(fitness), _words(alteration)
    order = np.argsort(body, kind="stable")
    ends = np.flatnonzero(np.diff(body[order])) + 1
    return {
        int(body[rows_of[0]]): Suite(
            sample_ids[rows_of],
            [codes[row] for row in rows_of.tolist()],
            {name: column[rows_of] for name, column in numbers.items()},
            words[rows_of],
            changed[rows_of],
        )
        for rows_of in np.split(order, ends)
    }


def write_intrusions(connection: sa.Connection, ids: np.ndarray, columns: Mapping[str, Any]) -> None:
    """Upsert ``intrusion_derived``: numbers (n,) and ``trend_quality`` by name."""
    _upsert(connection, "intrusion_derived", "intrusion_id", ids, columns)


def write_areas(connection: sa.Connection, ids: np.ndarray, columns: Mapping[str, Any]) -> None:
    """Upsert ``area_derived``."""
    _upsert(connection, "area_derived", "area_id", ids, columns)


def load_areas(connection: sa.Connection, area_ids: Any) -> tuple[np.ndarray, dict[str, np.ndarray]]:
    """Ids of these areas, ascending, and what was entered of them, float64 (n,) by name."""
    rows = raw_rows.select(
        connection,
        f"SELECT area_id, {', '.join(_AREA_NUMBERS)} FROM area WHERE area_id {{ids}} ORDER BY area_id",
        area_ids,
    )
    ids, *numbers = zip(*rows, strict=True) if rows else [()] * (len(_AREA_NUMBERS) + 1)
    return np.array(ids, dtype=np.int64), {
        name: np.array(column, dtype=np.float64) for name, column in zip(_AREA_NUMBERS, numbers, strict=True)
    }


def clear_bodies(connection: sa.Connection, intrusion_ids: Any, sample_ids: Any) -> None:
    """Delete the rows of these intrusions, and those that these samples have from another intrusion."""
    for table in ("suite_row", "suite_outlier", "mass_change"):
        raw_rows.select(connection, f"DELETE FROM {table} WHERE intrusion_id {{ids}}", intrusion_ids)
    for table in ("suite_outlier", "mass_change"):
        raw_rows.select(connection, f"DELETE FROM {table} WHERE sample_id {{ids}}", sample_ids)


def insert_rows(connection: sa.Connection, table: str, columns: Mapping[str, Any]) -> None:
    """Insert rows of ``suite_row``, ``suite_outlier`` or ``mass_change`` given by columns, arrays or lists (n,)."""
    sqlite = raw_rows.is_sqlite(connection)
    raw_rows.insert(
        connection, table, list(columns), [_cells(name, column, sqlite) for name, column in columns.items()]
    )


def packed_changes(change_wt: np.ndarray, change_percent: np.ndarray) -> list[str]:
    """One JSON text a sample from changes (components, n); NaN is null. Five significant digits are kept."""
    lists = [orjson.dumps(_rounded(values).T.copy(), option=orjson.OPT_SERIALIZE_NUMPY).decode() for values in
             (change_wt, change_percent)]  # fmt: skip
    if change_wt.shape[1] == 0:
        return []
    rows = (text[2:-2].split("],[") for text in lists)
    return [f'{{"wt":[{wt}],"percent":[{percent}]}}' for wt, percent in zip(*rows, strict=True)]


def _rounded(values: np.ndarray) -> np.ndarray:
    with np.errstate(divide="ignore", invalid="ignore"):
        digits = 4.0 - np.floor(np.log10(np.abs(values)))
        scale = 10.0 ** np.where(np.isfinite(digits), np.clip(digits, -300.0, 300.0), 0.0)
        return np.round(values * scale) / scale


def _upsert(connection: sa.Connection, table: str, key: str, ids: np.ndarray, columns: Mapping[str, Any]) -> None:
    sqlite = raw_rows.is_sqlite(connection)
    raw_rows.upsert(
        connection,
        table,
        (key,),
        [key, *columns],
        [ids.tolist(), *(_cells(name, column, sqlite) for name, column in columns.items())],
    )


def _cells(name: str, column: Any, sqlite: bool) -> list[Any]:
    return raw_rows.cells(name, column, sqlite) if isinstance(column, np.ndarray) else list(column)


def _words(texts: Sequence[Any]) -> np.ndarray:
    words = np.empty(len(texts), dtype=object)
    words[:] = texts
    return words
