"""What is known around a sample: its own measurements, its intrusion, its site and its area."""

from __future__ import annotations

from typing import Any

import numpy as np
import sqlalchemy as sa

from registry.store import raw_rows

_NUMBERS = {
    "magnetic_susceptibility_si": "s.magnetic_susceptibility_si",
    "density_kg_m3": "s.density_kg_m3",
    "half_width_m": "i.half_width_m",
    "volume_km3": "i.volume_km3",
    "depth_to_top_m": "i.depth_to_top_m",
    "emplacement_depth_m": "i.emplacement_depth_m",
    "age_ma": "i.age_ma",
    "age_sigma_ma": "i.age_sigma_ma",
    "country_density_kg_m3": "i.country_density_kg_m3",
    "heat_flow_mw_m2": "a.heat_flow_mw_m2",
    "surface_temperature_c": "a.surface_temperature_c",
    "conductivity_w_m_k": "a.conductivity_w_m_k",
    "area_heat_production_uw_m3": "a.heat_production_uw_m3",
    "heat_production_depth_m": "a.heat_production_depth_m",
}
_TEXTS = {
    "sample_kind": "s.kind",
    "lithology": "s.lithology",
    "texture": "s.texture",
    "alteration": "s.alteration",
    "intrusion_shape": "i.shape",
    "site_kind": "k.kind",
}
_FLAGS = {
    "has_intrusion": "CASE WHEN s.intrusion_id IS NULL THEN 0 ELSE 1 END",
    # mapped, or this sample itself was drilled from the body
    "body_mapped_or_cored": "CASE WHEN s.intrusion_id IS NOT NULL AND (coalesce(i.mapped, 0) = 1 OR s.kind IN "
    "('core', 'chips')) THEN 1 ELSE 0 END",
}
_EXPRESSIONS = {**_NUMBERS, **_TEXTS, **_FLAGS}
_QUERY = (
    f"SELECT s.sample_id, {', '.join(_EXPRESSIONS.values())} FROM sample AS s "
    "LEFT JOIN site AS k ON k.site_id = s.site_id LEFT JOIN intrusion AS i ON i.intrusion_id = s.intrusion_id "
    "LEFT JOIN area AS a ON a.area_id = coalesce(k.area_id, i.area_id) WHERE s.sample_id {ids} ORDER BY s.sample_id"
)


def load_context(connection: sa.Connection, sample_ids: Any) -> dict[str, np.ndarray]:
    """The context of samples (ids ascending, all of them there) as arrays (n,), named as in DEVELOPERS.md.

    Numbers float64 with NaN, texts object with None, flags bool. The area is that of the site, else that of the
    intrusion. KeyError names ids without a sample.
    """
    ids = np.asarray(sample_ids, dtype=np.int64)
    rows = raw_rows.select(connection, _QUERY, ids)
    found, *columns = zip(*rows, strict=True) if rows else [()] * (len(_EXPRESSIONS) + 1)
    if len(found) != len(ids) or (np.array(found, dtype=np.int64) != ids).any():
        absent = sorted(set(ids.tolist()) - set(found))
        raise KeyError(f"no sample has the ids {absent[:5]}; give the ids of samples, each once, ascending")
    context: dict[str, np.ndarray] = {}
    for name, column in zip(_EXPRESSIONS, columns, strict=True):
        if name in _NUMBERS:
            context[name] = np.array(column, dtype=np.float64)
        elif name in _FLAGS:
            context[name] = np.array(column, dtype=bool)
        else:
            texts = np.empty(len(column), dtype=object)
            texts[:] = column
            context[name] = texts
    return context
