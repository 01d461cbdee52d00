"""The cooling solutions against our own finite-volume integration of the heat equation.

The integration conserves heat cell by cell and knows nothing of error functions or images. Stated tolerances: 5e-4 in
theta for one dimension (60 cells a half-width), 6e-3 for the sphere below a cold surface (24 cells a radius).
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from registry.petrology.cooling import (
    centre_theta,
    cylinder_axis_theta,
    cylinder_theta,
    diffusion_length_m,
    error_function,
    slab_theta,
    sphere_theta,
)

ONE_DIMENSION_TOLERANCE, TWO_DIMENSION_TOLERANCE = 5e-4, 6e-3
_CELLS = 60


def _integrate_radial(power: int, tau: float, extent: float = 9.0) -> tuple[np.ndarray, np.ndarray]:
    """theta at cell centres r of a body of radius 1 after tau = kappa t; area of a shell grows as r**power."""
    step = 1.0 / _CELLS
    edges = np.arange(0.0, extent + step / 2, step)
    centres = 0.5 * (edges[:-1] + edges[1:])
    areas = edges**power if power else np.ones_like(edges)
    volumes = np.diff(edges ** (power + 1)) / (power + 1)
    theta = (centres < 1.0).astype(float)
    count = math.ceil(tau / (0.2 * step * step))
    for _ in range(count):
        flux = np.zeros_like(edges)
        flux[1:-1] = -areas[1:-1] * np.diff(theta) / step
        theta = theta - tau / count * np.diff(flux) / volumes
    return centres, theta


def _integrate_slab_below_surface(depth_to_top: float, tau: float) -> float:
    """theta at the centre of a slab of half-width 1 whose surface (depth 0) is held at zero."""
    step = 1.0 / _CELLS
    depth = np.arange(step / 2, depth_to_top + 2.0 + 9.0, step)
    theta = ((depth > depth_to_top) & (depth < depth_to_top + 2.0)).astype(float)
    count = math.ceil(tau / (0.2 * step * step))
    for _ in range(count):
        padded = np.concatenate([[-theta[0]], theta, [theta[-1]]])
        theta = theta + tau / count * np.diff(padded, 2) / step**2
    return float(np.interp(depth_to_top + 1.0, depth, theta))


def _integrate_sphere_below_surface(depth_to_top: float, tau: float) -> float:
    """theta at the centre of a sphere of radius 1, in r and z, the surface held at zero."""
    cells = 24
    step = 1.0 / cells
    edges = np.arange(0.0, 4.5 + step / 2, step)
    radius = 0.5 * (edges[:-1] + edges[1:])
    depth = np.arange(step / 2, depth_to_top + 2.0 + 3.5, step)
    fine = (np.arange(8) + 0.5) / 8 - 0.5  # share of each cell inside the sphere
    r = (radius[:, None] + fine * step).reshape(-1)
    z = (depth[:, None] + fine * step).reshape(-1) - depth_to_top - 1.0
    inside = (r[:, None] ** 2 + z[None, :] ** 2 < 1.0).astype(float)
    theta = inside.reshape(radius.size, 8, depth.size, 8).mean(axis=(1, 3))
    count = math.ceil(tau / (0.2 * step * step))
    for _ in range(count):
        flux = np.zeros((edges.size, depth.size))
        flux[1:-1] = -edges[1:-1, None] * np.diff(theta, axis=0) / step
        across = -np.diff(flux, axis=0) / (radius[:, None] * step)
        padded = np.concatenate([-theta[:, :1], theta, theta[:, -1:]], axis=1)
        theta = theta + tau / count * (across + np.diff(padded, 2, axis=1) / step**2)
    return float(np.interp(depth_to_top + 1.0, depth, theta[0]))


def test_error_function_agrees_with_the_standard_library() -> None:
    x = np.concatenate([np.linspace(-8.0, 8.0, 4001), [0.0, 1e-300, -3.0, 3.0, 40.0, -np.inf]])

    np.testing.assert_allclose(error_function(x), [math.erf(value) for value in x], rtol=0, atol=3e-15)


def test_error_function_of_missing_is_missing() -> None:
    assert np.isnan(error_function(np.nan))


@pytest.mark.parametrize("tau", [0.05, 0.25, 1.0])
@pytest.mark.parametrize(("power", "solution"), [(0, slab_theta), (1, cylinder_theta), (2, sphere_theta)])
def test_body_in_infinite_rock_agrees_with_integration(power: int, solution, tau: float) -> None:
    centres, theta = _integrate_radial(power, tau)
    near = centres < 4.0

    np.testing.assert_allclose(
        solution(centres[near], 1.0, math.sqrt(tau)), theta[near], rtol=0, atol=ONE_DIMENSION_TOLERANCE
    )


def test_cylinder_axis_is_the_quadrature_at_zero() -> None:
    s = np.sqrt([0.02, 0.1, 0.5, 2.0])

    np.testing.assert_allclose(cylinder_theta(0.0, 1.0, s), cylinder_axis_theta(1.0, s), rtol=0, atol=1e-10)


@pytest.mark.parametrize(("depth_to_top", "tau"), [(0.0, 0.3), (0.5, 0.5), (1.0, 1.5)])
def test_slab_below_the_surface_agrees_with_integration(depth_to_top: float, tau: float) -> None:
    image = centre_theta(np.array(["slab"], dtype=object), 1.0, depth_to_top, math.sqrt(tau))

    assert image[0] == pytest.approx(_integrate_slab_below_surface(depth_to_top, tau), abs=ONE_DIMENSION_TOLERANCE)
    assert image[0] < slab_theta(0.0, 1.0, math.sqrt(tau)), "the surface takes heat"


@pytest.mark.parametrize(("depth_to_top", "tau"), [(0.0, 0.3), (0.5, 0.5)])
def test_sphere_below_the_surface_agrees_with_integration(depth_to_top: float, tau: float) -> None:
    image = centre_theta(np.array(["sphere"], dtype=object), 1.0, depth_to_top, math.sqrt(tau))

    assert image[0] == pytest.approx(_integrate_sphere_below_surface(depth_to_top, tau), abs=TWO_DIMENSION_TOLERANCE)


def test_sphere_near_its_centre_is_continuous() -> None:
    centre = sphere_theta(0.0, 1.0, 0.5)

    assert sphere_theta(1e-4, 1.0, 0.5) == pytest.approx(float(centre), abs=1e-7)


@given(st.floats(0.05, 5.0), st.floats(1.01, 3.0), st.floats(0.0, 5.0))
def test_centre_cools_with_time_whatever_the_shape(length: float, factor: float, depth: float) -> None:
    shapes = np.array(["slab", "sphere", "cylinder"], dtype=object)
    early, late = centre_theta(shapes, 1.0, depth, length), centre_theta(shapes, 1.0, depth, length * factor)

    assert (late <= early + 1e-12).all()
    assert ((late > -1e-12) & (early <= 1.0 + 1e-12)).all()


@given(st.floats(0.1, 3.0))
def test_slab_keeps_more_than_cylinder_and_cylinder_more_than_sphere(length: float) -> None:
    slab, cylinder, sphere = (
        slab_theta(0.0, 1.0, length),
        cylinder_axis_theta(1.0, length),
        sphere_theta(0.0, 1.0, length),
    )

    assert slab >= cylinder >= sphere


def test_centre_unknown_depth_takes_no_image() -> None:
    shapes = np.array(["slab", "sphere"], dtype=object)

    np.testing.assert_allclose(
        centre_theta(shapes, 1.0, np.nan, 1.0), [slab_theta(0.0, 1.0, 1.0), sphere_theta(0.0, 1.0, 1.0)], rtol=1e-14
    )


def test_centre_at_time_zero_has_all_its_heat() -> None:
    shapes = np.array(["slab", "sphere", "cylinder", None, "lens"], dtype=object)

    np.testing.assert_array_equal(centre_theta(shapes, 1.0, 1.0, 0.0), [1.0, 1.0, 1.0, np.nan, np.nan])


def test_diffusion_length_negative_time_is_missing() -> None:
    np.testing.assert_allclose(diffusion_length_m([-1.0, 4e6], 1e-6), [np.nan, 2.0])
