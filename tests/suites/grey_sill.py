"""An invented gabbro sill, made forward: a basalt loses minerals, its incompatible elements rise as 1/F."""

from __future__ import annotations

from typing import Any

import numpy as np
import sqlalchemy as sa

from registry.petrology.minerals import fractionating_minerals
from registry.store.engine import Registry, reading

OXIDES = {
    "SiO2": 50.5, "TiO2": 1.1, "Al2O3": 15.5, "FeOT": 9.6, "MnO": 0.17, "MgO": 8.6, "CaO": 11.0, "Na2O": 2.4,
    "K2O": 0.5, "P2O5": 0.13,
}  # fmt: skip
COLUMNS = {
    "SiO2": "sio2_wt", "TiO2": "tio2_wt", "Al2O3": "al2o3_wt", "FeOT": "feot_wt", "MnO": "mno_wt", "MgO": "mgo_wt",
    "CaO": "cao_wt", "Na2O": "na2o_wt", "K2O": "k2o_wt", "P2O5": "p2o5_wt",
}  # fmt: skip
TRACES = {"Th": 0.6, "Nb": 4.0, "La": 6.0, "Zr": 80.0, "U": 0.2, "Y": 22.0, "Hf": 2.0, "Ce": 15.0, "Nd": 9.0, "Rb": 9.0}
SHARES = {"olivine": 0.2, "clinopyroxene": 0.35, "anorthite": 0.28, "albite": 0.12, "magnetite": 0.05}
LEFT = np.linspace(1.0, 0.62, 10)


def liquids() -> list[dict[str, float]]:
    """Ten liquids: the parent less what crystallised, closed to 99.5 with 0.5 % loss on ignition."""
    phases = fractionating_minerals(50.5, 61.5)
    parent = np.array([OXIDES[name] for name in OXIDES]) * 100.0 / sum(OXIDES.values())
    solid = np.sum([share * np.array([phases[p][COLUMNS[o]] for o in OXIDES]) for p, share in SHARES.items()], axis=0)
    made = []
    for left in LEFT:
        liquid = (parent - (1.0 - left) * solid) / left
        assert (liquid > 0.0).all()
        rock = dict(zip(OXIDES, 0.995 * liquid, strict=True))
        made.append({**rock, "LOI": 0.5, **{name: value / left for name, value in TRACES.items()}})
    return made


def store(connection: sa.Connection, rocks: dict[str, dict[str, float]], batch: str, digestion: str = "fusion") -> None:
    """Insert one batch with these rocks by sample code; the samples must be there."""
    number = connection.exec_driver_sql("SELECT coalesce(max(batch_id), 0) + 1 FROM batch").scalar()
    connection.execute(
        sa.text("INSERT INTO batch (batch_id, code, imported_at) VALUES (:n, :code, '2026-01-01T00:00:00Z')"),
        {"n": number, "code": batch},
    )
    analytes = list(next(iter(rocks.values())))
    for position, name in enumerate(analytes):
        unit = "ppm" if name in TRACES else "wt%"
        connection.execute(
            sa.text(
                "INSERT INTO batch_column (batch_column_id, batch_id, position, analyte, unit, digestion) "
                "VALUES (:id, :n, :p, :a, :u, :d)"
            ),
            {"id": 1000 * number + position, "n": number, "p": position, "a": name, "u": unit, "d": digestion},
        )
    for line, (code, rock) in enumerate(rocks.items(), 1):
        aliquot = 1000 * number + line
        connection.execute(
            sa.text(
                "INSERT INTO aliquot (aliquot_id, sample_id, batch_id, line_no, kind) "
                "SELECT :id, sample_id, :n, :line, 'original' FROM sample WHERE code = :code"
            ),
            {"id": aliquot, "n": number, "line": line, "code": code},
        )
        connection.execute(
            sa.text("INSERT INTO result (aliquot_id, column_id, value) VALUES (:a, :c, :v)"),
            [{"a": aliquot, "c": 1000 * number + p, "v": rock[name]} for p, name in enumerate(analytes)],
        )


def add_samples(connection: sa.Connection, codes: list[str], intrusion: int, **columns: str) -> None:
    row = {"kind": "core", **columns}
    names = ", ".join(row)
    for code in codes:
        connection.execute(
            sa.text(f"INSERT INTO sample (code, intrusion_id, {names}) VALUES (:code, :i, :{', :'.join(row)})"),
            {"code": code, "i": intrusion, **row},
        )


def rows(registry: Registry, sql: str) -> list[Any]:
    with reading(registry) as connection:
        return list(connection.exec_driver_sql(sql).fetchall())


def value(registry: Registry, model: str, quantity: str, intrusion: str = "Grey sill") -> tuple[Any, ...]:
    found = rows(
        registry,
        f"SELECT value, unit, quality, cause FROM suite_sheet WHERE intrusion = '{intrusion}' AND model = '{model}' "
        f"AND quantity = '{quantity}'",
    )
    assert len(found) == 1, (model, quantity, found)
    return tuple(found[0])
