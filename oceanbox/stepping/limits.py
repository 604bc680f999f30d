"""The longest stable step, from the amplification factors of the scheme on the C-grid (von Neumann analysis).

For a plane wave (k_x, k_y) the grid turns derivatives into s_x = (2/dx) sin(k_x dx/2) and the Coriolis parameter into
f cos(k_x dx/2) cos(k_y dy/2).  The largest factor over a fan of waves, from the longest to the checkerboard, must not exceed 1.
Friction, lateral mixing and flow have limits of their own.
"""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from oceanbox.grid import Grid
from oceanbox.stepping.weights import BETA, EPSILON, GAMMA

__all__ = ["StepLimits", "largest_amplification", "step_limits"]

# Round-off of a 9x9 eigenvalue problem with a defective neutral mode: its eigenvalues scatter by about eps**(1/3).
NEUTRAL = 1.0 + 2e-5
Array = NDArray[np.float64]
RUNGE_KUTTA_STAGES = {"runge_kutta_3": 3, "runge_kutta_4": 4}


@dataclass(frozen=True)
class StepLimits:
    """Longest stable steps, s: waves with rotation; friction; lateral mixing; flow through a cell."""

    waves: float
    friction: float
    mixing: float
    flow: float

    @property
    def smallest(self) -> float:
        """The limit that counts, s."""
        return min(self.waves, self.friction, self.mixing, self.flow)

    @property
    def cause(self) -> str:
        """Which limit it is, in words."""
        named = {
            "gravity waves and rotation": self.waves,
            "viscosity": self.friction,
            "lateral mixing": self.mixing,
            "advection": self.flow,
        }
        return min(named, key=lambda name: named[name])


def _forward_backward_matrices(sx: Array, sy: Array, f: Array, wave_speed: float, dt: float) -> NDArray[np.complex128]:
    """One step of each of n plane waves on (eta, u, v) at n, n-1, n-2, (n, 9, 9), eta scaled so that both gradients carry c.

    Thickness first, then u with the rotation of v^n, then v with the rotation of u^{n+1}.
    """
    transport = np.array([1.5 + BETA, -(0.5 + 2 * BETA), BETA])
    pressure = np.array([0.5 + GAMMA + 2 * EPSILON, 0.5 - 2 * GAMMA - 3 * EPSILON, GAMMA, EPSILON])
    eta, u, v = 0, 3, 6
    m = np.zeros((sx.size, 9, 9), dtype=complex)
    along_x, along_y = (-1j * dt * wave_speed * sx)[:, None], (-1j * dt * wave_speed * sy)[:, None]
    m[:, eta, eta] = 1.0
    m[:, eta, u : u + 3] = along_x * transport
    m[:, eta, v : v + 3] = along_y * transport
    for row, slope in ((u, along_x), (v, along_y)):
        m[:, row, row] = 1.0
        m[:, row] += slope * pressure[0] * m[:, eta]
        m[:, row, eta : eta + 3] += slope * pressure[1:]
    m[:, u, v] += dt * f
    m[:, v] -= (dt * f)[:, None] * m[:, u]
    for first in (eta, u, v):
        m[:, first + 1, first] = 1.0
        m[:, first + 2, first + 1] = 1.0
    return m


def largest_amplification(scheme: str, grid: Grid, wave_speed: float, f: float, dt: float, waves: int = 9) -> float:
    """Largest amplification factor a step over a fan of plane waves, ``waves`` in x and both ways in y, to the checkerboard."""
    # The order of the rotation tells north from south, so both signs of k_y count.
    half_x = np.linspace(0.0, math.pi / 2, waves)
    half_y = np.linspace(-math.pi / 2, math.pi / 2, 2 * waves - 1)
    px, py = (angle.ravel() for angle in np.meshgrid(half_x, half_y))
    sx, sy = 2.0 / grid.dx * np.sin(px), 2.0 / grid.dy * np.sin(py)
    rotation = f * np.cos(px) * np.cos(py)
    if scheme in RUNGE_KUTTA_STAGES:
        z = 1j * dt * np.sqrt(rotation**2 + wave_speed**2 * (sx**2 + sy**2))
        # The factor of an explicit method whose order equals its number of stages.
        factor = sum(z**n / math.factorial(n) for n in range(RUNGE_KUTTA_STAGES[scheme] + 1))
        return float(np.abs(factor).max())
    return float(np.abs(np.linalg.eigvals(_forward_backward_matrices(sx, sy, rotation, wave_speed, dt))).max())


def _wave_limit(scheme: str, grid: Grid, wave_speed: float, f: float) -> float:
    """Bisection on the step to a relative width of 1e-4."""
    gravity = 2.0 * wave_speed * math.hypot(1.0 / grid.dx, 1.0 / grid.dy)
    longest = 3.0 / max(gravity, f, 1e-30)
    low, high = 0.0, longest
    while high - low > 1e-4 * high:
        middle = 0.5 * (low + high)
        if largest_amplification(scheme, grid, wave_speed, f, middle) <= NEUTRAL:
            low = middle
        else:
            high = middle
    return low


def step_limits(
    scheme: str, grid: Grid, wave_speed: float, crossing_rate: float, viscosity: float, diffusivity: float
) -> StepLimits:
    """Longest stable steps of ``scheme`` on ``grid``.

    ``wave_speed`` [m s-1] is the fastest gravity wave expected, ``crossing_rate`` [s-1] the largest |u|/dx + |v|/dy,
    ``viscosity`` and ``diffusivity`` in m2 s-1.  Friction and mixing are forward in time, limit 2 on the real axis (2.51 for
    the three-stage method, 2.78 for four); a current may carry half a cell away in a step, the bound under which no new
    extremum is made.
    """
    f = float(np.abs(grid.coriolis(grid.y_face)).max())
    stiffness = 4.0 * (1.0 / grid.dx**2 + 1.0 / grid.dy**2)
    real_axis = {"runge_kutta_3": 2.51275, "runge_kutta_4": 2.78529}.get(scheme, 2.0)
    return StepLimits(
        waves=_wave_limit(scheme, grid, wave_speed, f),
        friction=real_axis / (viscosity * stiffness) if viscosity > 0.0 else math.inf,
        mixing=real_axis / (diffusivity * stiffness) if diffusivity > 0.0 else math.inf,
        flow=0.5 / crossing_rate if crossing_rate > 0.0 else math.inf,
    )
