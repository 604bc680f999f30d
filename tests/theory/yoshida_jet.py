r"""The equatorial jet under a uniform zonal wind that is switched on over an unbounded ocean.

With F = tau_x / (rho0 H) [m s-2] and y in Le = sqrt(c/beta), after the transients

    u = F t (1 + y V),    p = g' eta = -F c t V',    v = F Te V,    V'' - y^2 V = y,

    V = -(y/2) Int_0^1 (1 - m^2)^(-1/4) exp(-m y^2/2) dm.

Source: Yoshida (1959), J. Oceanogr. Soc. Japan 15, 159-170; integral form as in Moore and Philander (1977), The Sea 6
(from memory), here checked against the differential equation.
"""

from typing import NamedTuple

import numpy as np
import scipy.linalg
import scipy.special
from numpy.typing import ArrayLike, NDArray

from tests.theory.equatorial_waves import equatorial_radius, equatorial_time

Array = NDArray[np.floating]

QUADRATURE_NODES = 200


class YoshidaRates(NamedTuple):
    """du/dt [m s-2] and dh/dt [m s-1], which stay constant, and the steady v [m s-1]."""

    acceleration: Array
    deepening: Array
    velocity_y: Array


def _nodes() -> tuple[Array, Array]:
    """Nodes m in (0, 1) and weights for Int_0^1 (1 - m^2)^(-1/4) (...) dm; Gauss-Jacobi takes the end's singularity."""
    nodes, weights = scipy.special.roots_jacobi(QUADRATURE_NODES, -0.25, 0.0)
    m = 0.5 * (nodes + 1.0)
    return m, weights * 0.5**0.75 * (1.0 + m) ** -0.25


def yoshida_function(y: ArrayLike) -> Array:
    """V(y), y in Le, any shape."""
    y = np.asarray(y, dtype=float)
    m, weights = _nodes()
    return np.asarray(-0.5 * y * (np.exp(-0.5 * y[..., np.newaxis] ** 2 * m) @ weights))


def yoshida_function_slope(y: ArrayLike) -> Array:
    """V'(y), y in Le, any shape; V'(0) = -B(1/2, 3/4) / 4."""
    square = np.asarray(y, dtype=float)[..., np.newaxis] ** 2
    m, weights = _nodes()
    return np.asarray(-0.5 * ((np.exp(-0.5 * square * m) * (1.0 - square * m)) @ weights))


def yoshida_rates(
    y: ArrayLike, stress: float, depth: float, gravity: float, beta: float, density: float = 1025.0
) -> YoshidaRates:
    """Rates at y [m], any shape, for tau_x [N m-2], H [m], g' [m s-2], beta [m-1 s-1].

    An eastward wind draws water towards the equator (v < 0 north of it) and deepens the layer there.
    """
    c = float(np.sqrt(gravity * depth))
    force = stress / (density * depth)
    scaled = np.asarray(y, dtype=float) / equatorial_radius(c, beta)
    profile = yoshida_function(scaled)
    return YoshidaRates(
        acceleration=force * (1.0 + scaled * profile),
        deepening=-force * c / gravity * yoshida_function_slope(scaled),
        velocity_y=force * equatorial_time(c, beta) * profile,
    )


def yoshida_rates_on_c_grid(
    y_face: Array, stress: float, depth: float, gravity: float, beta: float, density: float = 1025.0
) -> YoshidaRates:
    """The same as a C-grid with f at corners has it: u and h rates at centres (ny,), v at faces (ny + 1,).

    y_face [m] (ny + 1,), evenly spaced, walls included.
    With C the y average of f v to centres and D the difference from centres to faces, a = du/dt, b = d(g' h)/dt:
    a = C v + F, 0 = -C^T a - D b, b = c^2 D^T v, hence (C^T C + c^2 D D^T) v = -C^T F. Source: derived.
    """
    spacing = float(y_face[1] - y_face[0])
    force, square = stress / (density * depth), gravity * depth
    f = beta * y_face[1:-1]
    bands = np.zeros((3, f.size))
    bands[1] = 0.5 * f**2 + 2.0 * square / spacing**2
    bands[0, 1:] = bands[2, :-1] = 0.25 * f[1:] * f[:-1] - square / spacing**2
    v = np.zeros_like(y_face)
    v[1:-1] = scipy.linalg.solve_banded((1, 1), bands, -f * force)
    flux = np.zeros_like(y_face)
    flux[1:-1] = f * v[1:-1]
    return YoshidaRates(
        acceleration=0.5 * (flux[1:] + flux[:-1]) + force,
        deepening=-depth * np.diff(v) / spacing,
        velocity_y=v,
    )
