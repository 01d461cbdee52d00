"""The district that the tests of whole intrusions and areas share."""

from __future__ import annotations

import pytest

from registry.refresh import drain
from registry.store.engine import Registry, writing
from tests.suites.grey_sill import LEFT, add_samples, liquids, store


@pytest.fixture
def district(any_registry: Registry) -> Registry:
    """A gabbro sill of ten liquids, one altered rock, and a second body without samples."""
    with writing(any_registry) as connection:
        connection.exec_driver_sql(
            "INSERT INTO area (name, heat_flow_mw_m2, surface_temperature_c, conductivity_w_m_k, "
            "heat_production_uw_m3, heat_production_depth_m, moho_depth_m) "
            "VALUES ('North Block', 60, 10, 2.5, 2, 10000, 35000)"
        )
        connection.exec_driver_sql("INSERT INTO area (name, heat_flow_mw_m2) VALUES ('South Block', 60)")
        connection.exec_driver_sql(
            "INSERT INTO intrusion (name, area_id, shape, half_width_m, depth_to_top_m, age_ma, age_sigma_ma) "
            "VALUES ('Grey sill', 1, 'slab', 400, 1500, 0.05, 0.01)"
        )
        connection.exec_driver_sql("INSERT INTO intrusion (name, age_ma) VALUES ('Green stock', 30)")
        codes = [f"A{number:02d}" for number in range(len(LEFT))]
        add_samples(connection, codes, 1, lithology="gabbro")
        store(connection, dict(zip(codes, liquids(), strict=True)), "K1")
        drain(connection)
    return any_registry
