r"""The wind-driven gyre with lateral viscosity on the transport.

A lap(lap psi) - beta psi_x = -curl(tau) / rho0. Near the western wall psi / psi_S depends on xi = x / delta_M only,
delta_M = (A / beta)^(1/3); `side` says whether the meridional walls are no-slip or free-slip.

Source: Munk (1950), J. Meteorol. 7, 79-93 (from memory); closed basin and free-slip forms derived.
"""

from dataclasses import dataclass
from functools import cached_property
from typing import Literal

import numpy as np
import scipy.optimize
from numpy.typing import ArrayLike, NDArray

from tests.theory.gyres import GyreBasin

Array = NDArray[np.floating]
Side = Literal["no_slip", "free_slip"]


def munk_width(viscosity: float, beta: float) -> float:
    """delta_M = (A / beta)^(1/3) [m]; A [m2 s-1], beta [m-1 s-1]."""
    return float(np.cbrt(viscosity / beta))


def _sine_weight(side: Side) -> float:
    return 1.0 / np.sqrt(3.0) if side == "no_slip" else -1.0 / np.sqrt(3.0)


def munk_profile(xi: ArrayLike, side: Side) -> Array:
    """psi / psi_S = 1 - exp(-xi/2) [cos(s xi) +- sin(s xi)/sqrt 3], s = sqrt(3)/2; plus is no-slip; xi any shape."""
    xi = np.asarray(xi, dtype=float)
    phase = 0.5 * np.sqrt(3.0) * xi
    return np.asarray(1.0 - np.exp(-0.5 * xi) * (np.cos(phase) + _sine_weight(side) * np.sin(phase)))


def munk_velocity_profile(xi: ArrayLike, side: Side) -> Array:
    """d(psi / psi_S) / d xi, so that v = psi_S / delta_M times this; xi any shape."""
    xi = np.asarray(xi, dtype=float)
    phase = 0.5 * np.sqrt(3.0) * xi
    weight, s = _sine_weight(side), 0.5 * np.sqrt(3.0)
    return np.asarray(np.exp(-0.5 * xi) * ((0.5 - s * weight) * np.cos(phase) + (0.5 * weight + s) * np.sin(phase)))


def munk_overshoot(side: Side) -> tuple[float, float]:
    """(largest psi / psi_S, its xi): 1 + exp(-pi/sqrt 3) at 2 pi/sqrt 3 (no-slip), 1 + exp(-2 pi/(3 sqrt 3)) at
    4 pi/(3 sqrt 3) (free-slip)."""
    xi = (2.0 if side == "no_slip" else 4.0 / 3.0) * np.pi / np.sqrt(3.0)
    return float(munk_profile(xi, side)), float(xi)


@dataclass(frozen=True)
class MunkGyre:
    """Exact gyre of a closed GyreBasin, psi = X(x) sin(l y), l = pi/B, with free-slip zonal walls.

    A (X'''' - 2 l^2 X'' + l^4 X) - beta X' = tau0 l / rho0 with X = 0 and X' = 0 (no-slip) or X'' = 0 (free-slip)
    at x = 0, L; A [m2 s-1].
    """

    basin: GyreBasin
    viscosity: float
    side: Side

    @cached_property
    def _roots(self) -> NDArray[np.complex128]:
        """Roots m of A (m^2 - l^2)^2 = beta m [m-1], by growing size: m[0] is the slow interior one."""
        width = munk_width(self.viscosity, self.basin.beta)
        wall = (self.basin.meridional_wavenumber * width) ** 2
        roots = np.roots([1.0, 0.0, -2.0 * wall, -1.0, wall**2])
        roots = roots[np.argsort(np.abs(roots))].astype(complex)
        # The small root loses digits among large ones: two fixed-point steps of m = (m^2 - wall)^2 restore them.
        for _ in range(3):
            roots[0] = (roots[0] ** 2 - wall) ** 2
        return np.asarray(roots / width, dtype=complex)

    @cached_property
    def _coefficients(self) -> NDArray[np.complex128]:
        """Weights of the four terms of _terms that meet the wall conditions."""
        order = 1 if self.side == "no_slip" else 2
        x = np.array([0.0, self.basin.length])
        matrix = np.vstack([self._terms(x, 0).T, self._terms(x, order).T])
        forced = np.concatenate([self._forced(x, 0), self._forced(x, order)])
        return np.asarray(np.linalg.solve(matrix, -forced))

    def _terms(self, x: ArrayLike, order: int) -> NDArray[np.complex128]:
        """The order-th derivative of the homogeneous solutions, each of size one at its wall, (4, *x.shape)."""
        anchors = np.where(self._roots.real * self.basin.length > 1.0, self.basin.length, 0.0)
        return np.stack([m**order * np.exp(m * (x - a)) for m, a in zip(self._roots, anchors, strict=True)])

    def _forced(self, x: ArrayLike, order: int) -> NDArray[np.complex128]:
        """The order-th derivative of X_p [1 - exp(m0 x)], X_p = tau0 / (rho0 A l^3), which hardly cancels."""
        m = self._roots[0]
        wavenumber = self.basin.meridional_wavenumber
        size = self.basin.stress / (self.basin.density * self.viscosity * wavenumber**3)
        return -size * (np.expm1(m * x) if order == 0 else m**order * np.exp(m * x))

    def profile(self, x: ArrayLike) -> Array:
        """X(x) [m3 s-1]; x [m], any shape."""
        x = np.asarray(x, dtype=float)
        homogeneous = np.tensordot(self._coefficients, self._terms(x, 0), axes=1)
        return np.asarray((self._forced(x, 0) + homogeneous).real)

    def profile_derivative(self, x: ArrayLike, order: int) -> Array:
        """The order-th x-derivative of X, order >= 1 [m(3-order) s-1]; x [m], any shape."""
        x = np.asarray(x, dtype=float)
        homogeneous = np.tensordot(self._coefficients, self._terms(x, order), axes=1)
        return np.asarray((self._forced(x, order) + homogeneous).real)

    def streamfunction(self, x: ArrayLike, y: ArrayLike) -> Array:
        """psi [m3 s-1]; x, y [m] broadcast together."""
        return self.profile(x) * np.sin(self.basin.meridional_wavenumber * np.asarray(y))

    def maximum(self) -> tuple[float, float]:
        """(largest psi [m3 s-1], its x [m]): the first zero of X', which lies near the overshoot's xi."""
        width = munk_width(self.viscosity, self.basin.beta)
        _, xi = munk_overshoot(self.side)
        x = scipy.optimize.brentq(
            lambda x: float(self.profile_derivative(np.asarray(x), 1)), 0.5 * xi * width, 1.5 * xi * width
        )
        return float(self.profile(np.asarray(x))), float(x)
