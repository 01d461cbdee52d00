"""The metric grid of a map: the system the places were entered in, their area's, or a suitable one, and why.

Systems and transformations are those of the EPSG registry through PROJ (pyproj). A grid is fit for a map where both
axes count metres, one to the east and one to the north, and where its metre is true within 1 % in the middle of what is
shown; a system in feet, of a pole or of the web's tiles is not.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np
import pyproj
from numpy.typing import NDArray

Floats = NDArray[np.float64]
#: Degrees of longitude from the middle of a UTM zone up to which the zone is used; its scale there is 1.0027 at most.
MOST_FROM_MERIDIAN = 4.5
UTM_SOUTH, UTM_NORTH = -80.0, 84.0
MOST_SCALE_FAULT = 0.01
_STEP_DEG = 1e-4


@dataclass(frozen=True)
class Places:
    """Coordinates of n places, each (n,), NaN where not given: as entered with their EPSG codes, and in degrees."""

    easting: Floats
    northing: Floats
    epsg: Floats
    longitude: Floats
    latitude: Floats

    @property
    def entered(self) -> NDArray[np.bool_]:
        return np.isfinite(self.easting) & np.isfinite(self.northing) & np.isfinite(self.epsg)

    @property
    def in_degrees(self) -> NDArray[np.bool_]:
        return np.isfinite(self.longitude) & np.isfinite(self.latitude)

    @property
    def known(self) -> NDArray[np.bool_]:
        return self.entered | self.in_degrees


@dataclass(frozen=True)
class Grid:
    """The grid of a map: ``key`` in an address, ``name`` and ``why`` in words; ``epsg`` None for one without a code."""

    key: str
    name: str
    why: str
    system: str
    epsg: int | None = None


def places_of(rows: Sequence[Sequence[Any]]) -> Places:
    """Places from rows of ``easting northing epsg longitude latitude``, None where not given."""
    table = np.array(rows, dtype=np.float64).reshape(-1, 5)
    return Places(*table.T)


def joined(first: Places, second: Places) -> Places:
    """The places of both, one after the other."""
    return Places(
        *(np.r_[getattr(first, name), getattr(second, name)] for name in Places.__dataclass_fields__)
    )  # fmt: skip


@cache
def _crs(system: str) -> pyproj.CRS | None:
    try:
        return pyproj.CRS.from_user_input(system)
    except pyproj.exceptions.CRSError:
        return None


@cache
def _from_degrees(system: str) -> pyproj.Transformer:
    return pyproj.Transformer.from_crs("EPSG:4326", system, always_xy=True)


def middle_of(longitude: Floats, latitude: Floats) -> tuple[float, float, float]:
    """(longitude and latitude of the middle, width in degrees of longitude) of places, also across 180 degrees: the
    widest gap on the parallel is what they leave free."""
    turned = np.sort(longitude % 360.0)
    gaps = np.diff(np.r_[turned, turned[0] + 360.0])
    widest = int(np.argmax(gaps))
    width = 360.0 - float(gaps[widest])
    west = float(turned[(widest + 1) % len(turned)])
    middle = (west + width / 2.0 + 180.0) % 360.0 - 180.0
    return middle, float(latitude.min() + latitude.max()) / 2.0, width


def why_unfit(code: int, longitude: float | None, latitude: float | None) -> str:
    """Why a system of the EPSG registry is no grid for a map about this middle; empty where it is one."""
    crs = _crs(f"EPSG:{code}")
    if crs is None:
        return f"EPSG:{code} is not known here"
    if not crs.is_projected:
        return f"EPSG:{code} counts in degrees"
    axes = crs.axis_info[:2]
    if {axis.direction for axis in axes} != {"east", "north"}:
        return f"the axes of EPSG:{code} do not run east and north"
    if any(abs(axis.unit_conversion_factor - 1.0) > 1e-9 for axis in axes):
        return f"EPSG:{code} counts in {axes[0].unit_name}"
    if longitude is not None and latitude is not None:
        factors = pyproj.Proj(crs).get_factors(longitude, latitude)
        scales = np.array([factors.meridional_scale, factors.parallel_scale], dtype=np.float64)
        if not (np.abs(scales - 1.0) <= MOST_SCALE_FAULT).all():
            return f"a metre of EPSG:{code} is not a metre on this ground"
    return ""


def choose_grid(places: Places, areas: Collection[int]) -> Grid | None:
    """The grid for these places, whose areas have the EPSG codes ``areas``; None where no place is known."""
    if not places.known.any():
        return None
    degrees = places.in_degrees
    middle = middle_of(places.longitude[degrees], places.latitude[degrees]) if degrees.any() else None
    about = middle[:2] if middle else (None, None)
    entered = set(places.epsg[places.known & places.entered].astype(int).tolist())
    all_entered = bool((places.entered | ~places.known).all())
    unfit = []
    if len(entered) == 1 and all_entered:
        (code,) = entered
        unfit.append(why_unfit(code, *about))
        if not unfit[-1]:
            return _of_code(code, "the system in which all that is shown was entered")
    if len(set(areas)) == 1:
        (code,) = set(areas)
        reason = why_unfit(code, *about)
        if not reason:
            return _of_code(code, "the system of the area")
        unfit += [reason] if reason not in unfit else []
    if middle is None:
        return None
    reasons = "; ".join(reason for reason in unfit if reason)
    because = reasons or ("what is shown was entered in several systems" if len(entered) > 1 else
                          "what is shown was entered in degrees" if not entered else
                          "what is shown was entered partly in degrees")  # fmt: skip
    return _suitable(places.longitude[degrees], places.latitude[degrees], middle, because)


def _of_code(code: int, why: str) -> Grid:
    crs = _crs(f"EPSG:{code}")
    return Grid(str(code), f"EPSG:{code}, {crs.name if crs else ''}", why, f"EPSG:{code}", code)


def _suitable(longitude: Floats, latitude: Floats, middle: tuple[float, float, float], because: str) -> Grid:
    """The UTM zone of the middle where all places lie in or near it, else an equal-area projection about the middle."""
    zone = int((middle[0] + 180.0) // 6.0) % 60 + 1
    away = np.abs((longitude - (6.0 * zone - 183.0) + 180.0) % 360.0 - 180.0)
    if (away <= MOST_FROM_MERIDIAN).all() and latitude.min() >= UTM_SOUTH and latitude.max() <= UTM_NORTH:
        code = (32600 if middle[1] >= 0.0 else 32700) + zone
        return _of_code(code, f"the UTM zone of the middle, because {because}")
    lon, lat = round(middle[0]), round(middle[1])
    said = f"{abs(lat)}° {'N' if lat >= 0 else 'S'} {abs(lon)}° {'E' if lon >= 0 else 'W'}"
    return Grid(
        f"equal-area_{lat}_{lon}",
        f"Lambert azimuthal equal-area projection about {said} (WGS 84), from where eastings and northings count",
        f"chosen because {because} and no UTM zone holds all of it; lengths are true in the middle and less so towards "
        "the edges",
        f"+proj=laea +lat_0={lat} +lon_0={lon} +x_0=0 +y_0=0 +datum=WGS84 +units=m +no_defs",
    )


def to_grid(grid: Grid, places: Places) -> tuple[Floats, Floats]:
    """Eastings and northings (m) in the grid: as entered where the system is the same, else from the degrees; NaN for
    places that are not known or that the projection cannot show."""
    same = places.entered & (places.epsg == grid.epsg) if grid.epsg else np.zeros(len(places.easting), dtype=bool)
    x, y = np.where(same, places.easting, np.nan), np.where(same, places.northing, np.nan)
    turned = places.in_degrees & ~same
    if turned.any():
        east, north = _from_degrees(grid.system).transform(places.longitude[turned], places.latitude[turned])
        shown = np.isfinite(east) & np.isfinite(north)
        x[turned], y[turned] = np.where(shown, east, np.nan), np.where(shown, north, np.nan)
    return x, y


def true_north_deg(grid: Grid, x: float, y: float) -> float:
    """Degrees clockwise from grid north to true north at a place of the grid; NaN where the projection ends."""
    transformer = _from_degrees(grid.system)
    longitude, latitude = transformer.transform(x, y, direction="INVERSE")
    east, north = transformer.transform([longitude] * 2, [latitude - _STEP_DEG, latitude + _STEP_DEG])
    across, up = east[1] - east[0], north[1] - north[0]
    return float(np.degrees(np.arctan2(across, up))) if np.isfinite([across, up]).all() else float("nan")
