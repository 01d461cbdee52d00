"""A small registry for the pages. Every name, place and number in it is invented, to test layout and branches only."""

from __future__ import annotations

import re
import shutil
import sqlite3
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import sqlalchemy as sa
from flask import Flask
from flask.testing import FlaskClient

from registry.judging import install_shipped_definitions
from registry.petrology.analytes import ELEMENT_SYMBOLS, OXIDE_SYMBOLS
from registry.refresh import drain
from registry.store import schema, tables
from registry.store.engine import Registry, open_registry
from registry.targets.definition import load_definitions
from tests.registry_files import made_once
from tests.web.import_site import Site, small_registry
from web import create_app, working

HOSTILE = '<script>alert("x")</script>&amp;'
_OXIDES = ("sio2_wt", "tio2_wt", "al2o3_wt", "fe2o3t_reported_wt", "mno_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt")
_TRACES = (
    "p2o5_wt", "loi_wt", "sr_ppm", "y_ppm", "la_ppm", "yb_ppm", "nb_ppm", "zr_ppm", "rb_ppm", "ba_ppm", "v_ppm",
    "sc_ppm", "th_ppm", "u_ppm", "cr_ppm", "ni_ppm",
)  # fmt: skip
#: Invented analyses, in the order of _OXIDES and _TRACES.
ROCKS = {
    "granodiorite": (
        (65.2, 0.48, 16.1, 4.3, 0.07, 1.9, 4.2, 4.3, 2.6),
        (0.16, 0.9, 620, 11, 26, 0.9, 5.1, 128, 71, 760, 92, 9.5, 8.1, 2.2, 22, 14),
    ),
    "gabbro": (
        (48.6, 1.1, 16.4, 10.9, 0.17, 8.6, 11.2, 2.4, 0.35),
        (0.11, 0.6, 260, 21, 6.2, 2.1, 4.4, 66, 8, 96, 240, 33, 0.6, 0.2, 310, 140),
    ),
    "granite": (
        (73.1, 0.19, 13.9, 1.7, 0.04, 0.3, 0.9, 3.4, 4.9),
        (0.12, 0.8, 62, 31, 29, 3.2, 18, 98, 310, 280, 9, 4.1, 22.5, 9.8, 6, 4),
    ),
}
CONTROLS = ("blank", "reference_material")


def _insert(connection: Any, table: sa.Table, **values: Any) -> int:
    return int(connection.execute(sa.insert(table).values(**values)).inserted_primary_key[0])  # type: ignore[index]


def _places(connection: Any) -> dict[str, dict[str, int]]:
    areas = {
        name: _insert(connection, tables.area, name=name, epsg=32633, heat_flow_mw_m2=flow)
        for name, flow in (("North Block", 85.0), ("South Block", None))
    }
    sites = {
        code: _insert(
            connection, tables.site, code=code, kind=kind, area_id=areas[area], easting=500000.0 + n, northing=6.1e6,
            elevation_m=412.5, epsg=32633, longitude=15.0 + n / 1000, latitude=55.04, depth_m=depth,
        )
        for n, (code, kind, area, depth) in enumerate(
            (("DH-1", "drill_hole", "North Block", 220.0), ("OC-7", "outcrop", "South Block", None))
        )
    }  # fmt: skip
    intrusions = {
        name: _insert(
            connection, tables.intrusion, name=name, area_id=areas["North Block"], shape=shape, half_width_m=half_width,
            depth_to_top_m=800.0, age_ma=61.0, age_sigma_ma=1.5, mapped=1,
        )
        for name, shape, half_width in (("Aster stock", "cylinder", 900.0), ("Brock gabbro", None, None))
    }  # fmt: skip
    return {"area": areas, "site": sites, "intrusion": intrusions}


def _samples(connection: Any, places: dict[str, dict[str, int]], count: int) -> list[dict[str, Any]]:
    rows = []
    for n in range(count):
        rock = list(ROCKS)[n % 3]
        kind = "blank" if n % 20 == 19 else "core" if n % 4 else "outcrop"
        site = "DH-1" if kind == "core" else "OC-7"
        rows.append(
            {
                "code": f"PB-{n + 1:03d}", "kind": kind, "site_id": places["site"][site] if kind != "blank" else None,
                "from_m": 10.0 + n if kind == "core" else None, "to_m": 11.0 + n if kind == "core" else None,
                "intrusion_id": places["intrusion"]["Brock gabbro" if rock == "gabbro" else "Aster stock"]
                if kind != "blank" else None,
                "lithology": rock, "texture": "porphyritic" if n % 6 == 0 else None,
                "magnetic_susceptibility_si": 0.012 if n % 2 == 0 else None, "rock": rock,
            }
        )  # fmt: skip
    rows.append({"code": HOSTILE, "kind": "float", "lithology": "'; DROP TABLE sample; --", "rock": None})
    rows.append({"code": "no results/1", "kind": "chips", "lithology": "tuff 50%_x", "rock": None})
    for row in rows:
        values = {name: value for name, value in row.items() if name != "rock"}
        row["sample_id"] = _insert(connection, tables.sample, **values)
    return rows


#: Analyte of a results column by the name in ROCKS.
_ANALYTES = {"fe2o3t_reported_wt": "Fe2O3T"}


def _analyte(name: str) -> tuple[str, str]:
    stem, _, unit = name.rpartition("_")
    symbols = {symbol.lower(): symbol for symbol in (*OXIDE_SYMBOLS, *ELEMENT_SYMBOLS)}
    return _ANALYTES.get(name) or symbols[stem], "wt%" if unit == "wt" else "ppm"


def _batch(connection: Any, rows: list[dict[str, Any]]) -> None:
    """One certificate: majors by XRF, traces by fusion, Zr by four-acid (a minimum); some Nb below its limit."""
    batch = _insert(
        connection, tables.batch, code="Q-2041", lab="Invented Laboratory", certificate="Q-2041",
        reported_on="2026-03-02", imported_at="2026-03-04T09:12:00Z", imported_by="tester", file_name="q2041.csv",
        sha256="0" * 64,
    )  # fmt: skip
    columns = {}
    for position, name in enumerate((*_OXIDES, *_TRACES)):
        analyte, unit = _analyte(name)
        digestion = "xrf" if name in _OXIDES else "four_acid" if name == "zr_ppm" else "fusion"
        columns[name] = _insert(
            connection, tables.batch_column, batch_id=batch, position=position, header=f"{analyte} ({unit})",
            analyte=analyte, unit=unit, method="invented method", digestion=digestion, detection_limit=0.01,
        )  # fmt: skip
    noise = np.random.default_rng(7)
    for line, row in enumerate(rows, 2):
        if row["rock"] is None:
            continue
        aliquot = _insert(
            connection, tables.aliquot, sample_id=row["sample_id"], batch_id=batch, line_no=line,
            kind="control" if row["kind"] in CONTROLS else "original",
        )  # fmt: skip
        oxides, traces = ROCKS[row["rock"]]
        for name, value in zip((*_OXIDES, *_TRACES), (*oxides, *traces), strict=True):
            below = name == "nb_ppm" and line % 5 == 2
            varied = value if value >= 40 else round(value * (1 + 0.02 * noise.standard_normal()), 2)
            connection.execute(
                sa.insert(tables.result).values(
                    aliquot_id=aliquot, column_id=columns[name], value=varied, qualifier=int(below)
                )
            )


def build_registry(path: Path, count: int = 120) -> Registry:
    """A registry of ``count`` invented samples, one with a hostile name, one without results."""

    def fill(connection: Any) -> None:
        rows = _samples(connection, _places(connection), count)
        _batch(connection, rows)
        install_shipped_definitions(connection, tuple(load_definitions().values()))
        drain(connection)

    return schema.create(path, fill)


@pytest.fixture(scope="session")
def invented_registry(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return made_once(tmp_path_factory, "invented", build_registry)


@pytest.fixture(scope="session")
def app(invented_registry: Path) -> Iterator[Flask]:
    application = create_app(str(invented_registry))
    application.testing = True
    yield application
    application.extensions["registry"].close()


@pytest.fixture
def client(app: Flask) -> FlaskClient:
    return app.test_client()


@pytest.fixture(scope="session")
def empty_client(tmp_path_factory: pytest.TempPathFactory) -> Iterator[FlaskClient]:
    path = tmp_path_factory.mktemp("empty") / "empty.sqlite"
    schema.create(path).close()
    application = create_app(str(path))
    yield application.test_client()
    application.extensions["registry"].close()


@pytest.fixture
def changed(invented_registry: Path, tmp_path: Path) -> Iterator[tuple[Registry, FlaskClient]]:
    """A copy of the registry in which PB-003 was edited behind the program's back, and its site."""
    registry = open_registry(shutil.copy(invented_registry, tmp_path / "changed.sqlite"))
    edited = sqlite3.connect(tmp_path / "changed.sqlite")
    edited.execute("UPDATE sample SET lithology = 'dunite' WHERE code = 'PB-003'")
    edited.commit()
    edited.close()
    application = create_app(str(tmp_path / "changed.sqlite"))
    yield registry, application.test_client()
    application.extensions["registry"].close()
    registry.close()


class WritableSite:
    """A client of a site that may write, over a copy of the registry with a logged hole; ``post`` brings the token."""

    def __init__(self, path: Path) -> None:
        self.path = path
        self.app = create_app(str(path), writable=True, drafts=path.parent / "drafts")
        self.client = self.app.test_client()

    def post(self, address: str, **fields: str) -> Any:
        page = self.client.get(address).text
        token = re.search(r'name="csrf_token" value="([^"]+)"', page)
        assert token is not None
        version = re.search(r'name="row_version" value="([^"]+)"', page)
        known = {"csrf_token": token[1]} | ({"row_version": version[1]} if version else {})
        return self.client.post(address, data=known | fields)

    def sql(self, query: str, *bound: Any) -> list[tuple[Any, ...]]:
        """Rows by sqlite3 alone, beside the program."""
        connection = sqlite3.connect(self.path)
        try:
            rows = connection.execute(query, bound).fetchall()
            connection.commit()
        finally:
            connection.close()
        return rows


@pytest.fixture(scope="session")
def small_registry_file(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Three invented samples with their majors; copy it, do not write it."""
    return made_once(tmp_path_factory, "small", small_registry)


@pytest.fixture
def site(small_registry_file: Path, tmp_path: Path) -> Iterator[Site]:
    """The site of three samples, with the forms as a person sends them."""
    made = Site(small_registry_file, tmp_path)
    yield made
    made.close()


@pytest.fixture(scope="session")
def writable_file(invented_registry: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The invented registry with a log and a survey of DH-1, invented as well; copy it, do not write it."""
    path = Path(shutil.copy(invented_registry, tmp_path_factory.mktemp("site") / "logged.sqlite"))
    connection = sqlite3.connect(path)
    (hole,) = connection.execute("SELECT site_id FROM site WHERE code = 'DH-1'").fetchone()
    connection.executemany(
        "INSERT INTO lithology_interval (site_id, from_m, to_m, lithology) VALUES (?, ?, ?, ?)",
        [
            (hole, 0, 8, "overburden"),
            (hole, 8, 60, "granodiorite"),
            (hole, 60, 140, "very fine grained gabbronorite"),
        ],
    )
    connection.execute("INSERT INTO survey (site_id, depth_m, azimuth_deg, dip_deg) VALUES (?, 0, 90, -60)", (hole,))
    connection.commit()
    connection.execute("PRAGMA wal_checkpoint(TRUNCATE)")
    connection.close()
    return path


@pytest.fixture(scope="module")
def logged_app(writable_file: Path, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Flask]:
    """A site that may write, for tests that only read its pages."""
    path = Path(shutil.copy(writable_file, tmp_path_factory.mktemp("logged") / "logged.sqlite"))
    application = create_app(str(path), writable=True, drafts=path.parent / "drafts")
    yield application
    application.extensions["registry"].close()


@pytest.fixture
def writable(writable_file: Path, tmp_path: Path) -> Iterator[WritableSite]:
    """A site that may write, over a copy of its own."""
    site = WritableSite(Path(shutil.copy(writable_file, tmp_path / "writable.sqlite")))
    yield site
    site.app.extensions["registry"].close()


@pytest.fixture(autouse=True)
def patience(monkeypatch: pytest.MonkeyPatch) -> None:
    """A change is answered with its outcome however slow the machine is; tests of progress set less."""
    monkeypatch.setattr(working, "PATIENCE_S", 60.0)


@pytest.fixture
def window(browser: Any) -> Iterator[Callable[..., Any]]:
    """Open an address at a width and in a theme; the browser is put back afterwards."""

    def visit(where: str, width: int = 1280, dark: bool = False) -> Any:
        browser.execute_cdp_cmd(
            "Emulation.setDeviceMetricsOverride",
            {"width": width, "height": 1200, "deviceScaleFactor": 1, "mobile": width < 500},
        )
        scheme = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
        browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": [scheme]})
        browser.get_log("browser")
        browser.get(where)
        return browser

    yield visit
    browser.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": []})
