"""Radiogenic heat of a rock from uranium, thorium and potassium, and the density it is reckoned with."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.constants import oxide_from_element
from registry.petrology.conventions import Conventions
from registry.petrology.melt_composition import Array, by_silica_class, not_negative, positive
from registry.petrology.quotients import is_absent

CUBIC_M_PER_CUBIC_KM = 1e9
#: Shapes of a body that the heat of an intrusion knows.
SHAPES = ("sphere", "slab", "cylinder")
#: Thickness (a sphere's mean chord) over half-width; a cylinder's length is not known.
THICKNESS_OF_HALF_WIDTH = {"sphere": 4.0 / 3.0, "slab": 2.0, "cylinder": np.nan}
#: Causes of a missing heat production, in the order in which they are looked for.
HEAT_CAUSES = ("u_missing", "th_missing", "k2o_missing", "density_unknown")


def heat_production_rybach(u_ppm: ArrayLike, th_ppm: ArrayLike, k_wt: ArrayLike, density_kg_m3: ArrayLike) -> Array:
    """Radiogenic heat production (uW/m3): 1e-5 rho (9.52 U + 2.56 Th + 3.48 K).

    U, Th in ppm, K (the element) in wt%, density in kg/m3, shape (n,). Negative amounts give NaN.
    Source [rybach1988]. Example: U 4, Th 15, K 3.5, 2650 kg/m3 -> 2.349.
    """
    per_kg = 9.52 * not_negative(u_ppm) + 2.56 * not_negative(th_ppm) + 3.48 * not_negative(k_wt)
    return 1e-5 * positive(density_kg_m3) * per_kg


def heat_production_wangen(u_ppm: ArrayLike, th_ppm: ArrayLike, k_wt: ArrayLike, density_kg_m3: ArrayLike) -> Array:
    """The same with the constants 9.8, 2.6 and 3.4 of another author, for comparison: 1-3 % apart in granite.

    Source [wangen2010] p. 131 and table. Example: granite U 3.4, Th 50, K 4.45, 2700 kg/m3 -> 4.8.
    """
    per_kg = 9.8 * not_negative(u_ppm) + 2.6 * not_negative(th_ppm) + 3.4 * not_negative(k_wt)
    return 1e-5 * positive(density_kg_m3) * per_kg


def potassium_wt(k2o_wt: ArrayLike) -> Array:
    """K (wt%) in K2O (wt%)."""
    return np.asarray(k2o_wt, dtype=np.float64) * (1.0 / oxide_from_element("K2O"))


def rock_density_kg_m3(density_kg_m3: ArrayLike, sio2_wt: ArrayLike, conventions: Conventions) -> Array:
    """Density (kg/m3) for heat production: the measured one, else the convention's for the silica class.

    ``sio2_wt`` anhydrous. Never the density of the melt. NaN where neither is known.
    """
    assumed = by_silica_class(
        sio2_wt,
        conventions.density_ultrabasic_kg_m3,
        conventions.density_basic_kg_m3,
        conventions.density_intermediate_kg_m3,
        conventions.density_acid_kg_m3,
    )
    measured = positive(density_kg_m3)
    return np.where(np.isnan(measured), assumed, measured)


def heat_production_cause(
    u_ppm: ArrayLike, th_ppm: ArrayLike, k2o_wt: ArrayLike, density_kg_m3: ArrayLike
) -> NDArray[np.object_]:
    """Which input of the heat production is missing first, object array (n,): one of ``HEAT_CAUSES`` or None."""
    words = np.array([*HEAT_CAUSES, None], dtype=object)
    inputs = [not_negative(u_ppm), not_negative(th_ppm), not_negative(k2o_wt), positive(density_kg_m3)]
    cause = np.full(np.broadcast_shapes(*(values.shape for values in inputs), (1,)), len(HEAT_CAUSES))
    for position in (3, 2, 1, 0):
        cause = np.where(np.isnan(inputs[position]), position, cause)
    return words[cause]


def shape_codes(intrusion_shape: ArrayLike) -> NDArray[np.intp]:
    """1, 2, ... by the place in ``SHAPES``, 0 for None or another word; shape (n,)."""
    shape = np.atleast_1d(np.asarray(intrusion_shape, dtype=object))
    code = np.zeros(shape.shape, dtype=np.intp)
    rows = np.flatnonzero(~is_absent(shape))
    known = shape[rows]
    for position, name in enumerate(SHAPES if rows.size else (), start=1):
        code[rows[np.asarray(known == name, dtype=bool)]] = position
    return code


def sphere_radius_m(volume_km3: ArrayLike) -> Array:
    """Radius (m) of a sphere from its volume (km3); a volume alone fixes no other shape."""
    volume = positive(volume_km3) * CUBIC_M_PER_CUBIC_KM
    return np.cbrt(0.75 * volume / np.pi)


def effective_half_width_m(intrusion_shape: ArrayLike, half_width_m: ArrayLike, volume_km3: ArrayLike) -> Array:
    """Half-width (m) of a body: as given (slab half thickness, cylinder and sphere radius), else a sphere's from its
    volume; NaN where neither fixes it. ``intrusion_shape`` is an object array of ``SHAPES`` or None."""
    given = positive(half_width_m)
    from_volume = np.isnan(given) & (np.asarray(volume_km3) > 0.0)
    if not from_volume.any():
        return given
    is_sphere = np.asarray(intrusion_shape, dtype=object) == "sphere"
    return np.where(from_volume & is_sphere, sphere_radius_m(volume_km3), given)


def heat_x_thickness_mw_m2(
    heat_production_uw_m3: ArrayLike, intrusion_shape: ArrayLike, half_width_m: ArrayLike
) -> Array:
    """Heat flow (mW/m2) that a body adds: A x 2a for a slab, A x 4a/3 (the mean chord) for a sphere.

    NaN for a cylinder, whose length is not known, and for an unknown shape. Source: derivable; a uniform A.
    """
    code = shape_codes(intrusion_shape)
    factor = np.array([np.nan, *(THICKNESS_OF_HALF_WIDTH[shape] for shape in SHAPES)])[code]
    return np.asarray(heat_production_uw_m3, dtype=np.float64) * factor * positive(half_width_m) * 1e-3
