"""Where a point at a depth along a surveyed hole lies: minimum curvature, arc by arc.

Between two stations the hole is taken as a circular arc; its plane and radius follow from the two directions. Taylor,
H.L. and Mason, C.M. 1972. A systematic approach to well surveying calculations. SPE Journal 12, 474-488 (ratio factor
2/b tan(b/2) of the dogleg angle b; from memory).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
#: Below this dogleg (radian) the ratio factor is 1 to the last digit.
_STRAIGHT_RAD = 1e-7


def directions(azimuth_deg: Floats, dip_deg: Floats) -> Floats:
    """Unit vectors (n, 3) east, north, up of a hole heading so; dips are negative downwards."""
    azimuth, dip = np.radians(azimuth_deg), np.radians(dip_deg)
    return np.stack([np.cos(dip) * np.sin(azimuth), np.cos(dip) * np.cos(azimuth), np.sin(dip)], axis=1)


def offsets(stations_m: Floats, azimuth_deg: Floats, dip_deg: Floats, depths_m: Floats) -> Floats:
    """East, north and up (m), shape (k, 3), from the collar to points at ``depths_m`` (k,) along the hole.

    ``stations_m`` (n,) ascending depths of the survey with azimuth (degrees clockwise from the north that easting and
    northing follow) and dip. Above the first station and beyond the last the hole goes straight on.
    ValueError where there is no station or their depths do not ascend.
    """
    if not len(stations_m) or (np.diff(stations_m) <= 0).any():
        raise ValueError("a survey needs at least one station, with ascending depths")
    if stations_m[0] > 0:
        stations_m = np.r_[0.0, stations_m]
        azimuth_deg, dip_deg = np.r_[azimuth_deg[:1], azimuth_deg], np.r_[dip_deg[:1], dip_deg]
    heading = directions(azimuth_deg, dip_deg)
    lengths = np.diff(stations_m)
    dogleg = np.arccos(np.clip((heading[:-1] * heading[1:]).sum(axis=1), -1.0, 1.0))
    steps = 0.5 * lengths[:, None] * (heading[:-1] + heading[1:]) * _ratio_factor(dogleg)[:, None]
    at_stations = np.concatenate([np.zeros((1, 3)), np.cumsum(steps, axis=0)])
    segment = np.clip(np.searchsorted(stations_m, depths_m, side="right") - 1, 0, len(stations_m) - 1)
    along = depths_m - stations_m[segment]
    inside = segment < len(lengths)
    part = np.where(inside, segment, 0)
    if not len(lengths):
        return at_stations[segment] + along[:, None] * heading[segment]
    share = along / lengths[part]
    arc = dogleg[part]
    here = _between(heading[part], heading[np.minimum(part + 1, len(heading) - 1)], arc, share)
    curved = 0.5 * along[:, None] * (heading[part] + here) * _ratio_factor(share * arc)[:, None]
    straight = along[:, None] * heading[segment]
    return at_stations[segment] + np.where(inside[:, None], curved, straight)


def _ratio_factor(angle: Floats) -> Floats:
    bent = np.abs(angle) > _STRAIGHT_RAD
    safe = np.where(bent, angle, 1.0)
    return np.where(bent, 2.0 / safe * np.tan(safe / 2.0), 1.0)


def _between(first: Floats, second: Floats, arc: Floats, share: Floats) -> Floats:
    """The direction at a share of the arc between two directions."""
    bent = arc > _STRAIGHT_RAD
    sine = np.where(bent, np.sin(arc), 1.0)
    a = np.where(bent, np.sin((1.0 - share) * arc) / sine, 1.0 - share)
    b = np.where(bent, np.sin(share * arc) / sine, share)
    return a[:, None] * first + b[:, None] * second
