"""Conductive cooling of an intrusion emplaced at once: the share of its excess temperature that is left.

theta = (T - T country)/(T magma - T country), pure number. Infinite medium of equal properties, no latent heat, no
water moving; ``surface_image`` functions hold the ground surface at its temperature by a mirrored source. Lengths in
m, times in s, diffusivity in m2/s; arrays broadcast.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.melt_composition import Array, not_negative, positive

_SERIES_LIMIT = 3.0
_SERIES_TERMS, _FRACTION_LEVELS = 60, 50
_QUADRATURE_NODES = 96
_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(_QUADRATURE_NODES)


def error_function(x: ArrayLike) -> Array:
    """erf(x) to about 1e-15. Source [abramowitz1964] eqs. 7.1.6 (series) and 7.1.14 (continued fraction)."""
    values = np.asarray(x, dtype=np.float64)
    size = np.abs(values)
    near = np.minimum(size, _SERIES_LIMIT)
    square = near * near
    term = near.copy()
    series = near.copy()
    for n in range(1, _SERIES_TERMS):
        term = term * (2.0 * square / (2 * n + 1))
        series = series + term
    inside = 2.0 / np.sqrt(np.pi) * np.exp(-square) * series
    far = np.minimum(np.maximum(size, _SERIES_LIMIT), 30.0)  # erfc(30) is below the smallest number
    fraction = far
    for k in range(_FRACTION_LEVELS, 0, -1):
        fraction = far + 0.5 * k / fraction
    outside = 1.0 - np.exp(-far * far) / (np.sqrt(np.pi) * fraction)
    result = np.copysign(np.where(size <= _SERIES_LIMIT, inside, outside), values)
    return np.where(np.isnan(values), np.nan, result)


def diffusion_length_m(time_s: ArrayLike, thermal_diffusivity_m2_s: ArrayLike) -> Array:
    """s = sqrt(kappa t), m; NaN for negative times."""
    return np.sqrt(not_negative(time_s) * positive(thermal_diffusivity_m2_s))


def slab_theta(distance_m: ArrayLike, half_width_m: ArrayLike, diffusion_m: ArrayLike) -> Array:
    """theta at a distance from the middle of a slab of half-width a, ``diffusion_m`` = sqrt(kappa t) > 0.

    0.5 (erf((a - x)/2s) + erf((a + x)/2s)). Source [jaeger1964]. Example: centre, kappa t/a2 = 0.25 -> 0.84270.
    """
    a, x = positive(half_width_m), np.asarray(distance_m, dtype=np.float64)
    scale = 0.5 / positive(diffusion_m)
    near, far = error_function(np.stack(np.broadcast_arrays((a - x) * scale, (a + x) * scale)))
    return 0.5 * (near + far)


def sphere_theta(distance_m: ArrayLike, radius_m: ArrayLike, diffusion_m: ArrayLike) -> Array:
    """theta at a distance r from the centre of a sphere of radius a, ``diffusion_m`` = s = sqrt(kappa t) > 0.

    0.5 (erf((a - r)/2s) + erf((a + r)/2s)) - s/(r sqrt(pi)) (exp(-(a - r)2/4s2) - exp(-(a + r)2/4s2)); at r = 0
    erf(a/2s) - a/(s sqrt(pi)) exp(-a2/4s2). Source [crank1975]. Example: centre, kappa t/a2 = 0.25 -> 0.42759.
    """
    a, r = positive(radius_m), not_negative(distance_m)
    s = positive(diffusion_m)
    central = r < 1e-6 * a
    safe = np.where(central, a, positive(r))
    near, far, half = np.broadcast_arrays((a - safe) / (2.0 * s), (a + safe) / (2.0 * s), a / (2.0 * s))
    erf_near, erf_far, erf_half = error_function(np.stack([near, far, half]))
    away = 0.5 * (erf_near + erf_far) - s / (safe * np.sqrt(np.pi)) * (_gaussian(near) - _gaussian(far))
    centre = erf_half - 2.0 * half / np.sqrt(np.pi) * _gaussian(half)
    return np.where(central, centre, away)


def cylinder_axis_theta(radius_m: ArrayLike, diffusion_m: ArrayLike) -> Array:
    """theta on the axis of a long cylinder of radius a: 1 - exp(-a2/4s2). Source [carslaw1959].

    Example: kappa t/a2 = 0.25 -> 0.63212.
    """
    half = positive(radius_m) / (2.0 * positive(diffusion_m))
    return -np.expm1(-np.minimum(half * half, 700.0))


def cylinder_theta(distance_m: ArrayLike, radius_m: ArrayLike, diffusion_m: ArrayLike) -> Array:
    """theta at a distance r from the axis of a long cylinder, by Gauss-Legendre quadrature with 96 nodes.

    Integral over 0..a of exp(-(r2 + q2)/4s2) I0(r q/2s2) q dq/(2 s2). Error below 1e-6 for s >= a/50.
    Source [carslaw1959] section 10.3.
    """
    r, a, s = np.broadcast_arrays(
        not_negative(distance_m), positive(radius_m), positive(diffusion_m)
    )  # shapes agree from here on
    r, a, s = r[..., None], a[..., None], s[..., None]
    q = 0.5 * a * (_NODES + 1.0)
    kernel = _gaussian((r - q) / (2.0 * s)) * _scaled_bessel_i0(r * q / (2.0 * s * s)) * q / (2.0 * s * s)
    return np.sum(kernel * _WEIGHTS, axis=-1) * 0.5 * a[..., 0]


def centre_theta(
    intrusion_shape: ArrayLike,
    half_width_m: ArrayLike,
    depth_to_top_m: ArrayLike,
    diffusion_m: ArrayLike,
) -> Array:
    """theta at the centre of a body below the ground surface, for its shape, by the mirrored source above the surface.

    With zc = depth to top + a: slab erf(a/2s) - (erf((2zc + a)/2s) - erf((2zc - a)/2s))/2; sphere less its own
    formula at r = 2zc; a vertical cylinder takes no image (an upper bound), nor does a body whose depth is NaN.
    ``diffusion_m`` 0 gives 1. NaN for an unknown shape. Source [jaeger1964], method of images [carslaw1959].
    """
    shape = np.asarray(intrusion_shape, dtype=object)
    a, depth = positive(half_width_m), not_negative(depth_to_top_m)
    started = np.asarray(diffusion_m, dtype=np.float64)
    s = np.where(started == 0.0, np.nan, started)
    image_distance = 2.0 * (depth + a)
    slab_image = np.nan_to_num(slab_theta(image_distance, a, s), nan=0.0)
    sphere_image = np.nan_to_num(sphere_theta(image_distance, a, s), nan=0.0)
    result = np.where(
        shape == "slab",
        slab_theta(0.0, a, s) - slab_image,
        np.where(
            shape == "sphere",
            sphere_theta(0.0, a, s) - sphere_image,
            np.where(shape == "cylinder", cylinder_axis_theta(a, s), np.nan),
        ),
    )
    known = ((shape == "slab") | (shape == "sphere") | (shape == "cylinder")) & ~np.isnan(a)
    return np.where(known & (started == 0.0), 1.0, result)


def _gaussian(x: Array) -> Array:
    """exp(-x2), without underflow warnings."""
    return np.exp(-np.minimum(x * x, 700.0))


def _scaled_bessel_i0(z: Array) -> Array:
    """exp(-z) I0(z) for z >= 0: numpy's I0 below 500, above it the expansion [abramowitz1964] eq. 9.7.1."""
    small = np.minimum(z, 500.0)
    large = np.maximum(z, 500.0)
    expansion = (1.0 + 1.0 / (8.0 * large) + 9.0 / (128.0 * large * large)) / np.sqrt(2.0 * np.pi * large)
    return np.where(z < 500.0, np.exp(-small) * np.i0(small), expansion)
