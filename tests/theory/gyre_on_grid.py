r"""What a C-grid makes of the gyres of Stommel and Munk: the exact steady solution of the difference equations.

Transports U = -delta_y psi on x faces and V = delta_x psi on y faces, psi at corners, 4-point energy-conserving Coriolis
average with f at corners, drag -r (U, V) and viscosity A lap5(U, V), free-slip zonal walls. psi = X(x) sin(l y),
l = pi/B, separates on the grid as it does in the continuum; with Z = (delta_xx - lambda) X, the vorticity,

    [A (delta_xx - lambda) - r] Z - beta cos(l dy) (X_{I+1} - X_{I-1})/(2 dx) = (tau0/rho0) 2 sin(l dy/2)/dy,

lambda = (2 - 2 cos(l dy))/dy^2, X = 0 on the meridional walls and there Z = 0 (free-slip) or Z = 2 X_1/dx^2 (no-slip).
The cosine is the mean of V over two rows that the Coriolis average takes. In the interior, with neither friction,

    V / V_Sverdrup = [sin(l dy/2) / (l dy/2)] / cos(l dy) = 1 + (11/24) (l dy)^2 + ...

Source: derived.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import scipy.linalg
import scipy.optimize
from numpy.typing import NDArray

from tests.theory.gyres import GyreBasin
from tests.theory.munk_gyre import Side

Array = NDArray[np.floating]


def sverdrup_bias(basin: GyreBasin, dy: float) -> float:
    """V / V_Sverdrup - 1 in the frictionless interior of the grid."""
    angle = basin.meridional_wavenumber * dy
    return float(np.sin(0.5 * angle) / (0.5 * angle * np.cos(angle)) - 1.0)


@dataclass(frozen=True)
class GridGyre:
    """The gyre of a basin on cells_x by cells_y cells, drag r [s-1] and viscosity A [m2 s-1] on transport."""

    basin: GyreBasin
    cells_x: int
    cells_y: int
    drag: float = 0.0
    viscosity: float = 0.0
    side: Side = "free_slip"

    @property
    def dx(self) -> float:
        """Width of a cell [m]."""
        return self.basin.length / self.cells_x

    @property
    def dy(self) -> float:
        """Height of a cell [m]."""
        return self.basin.width / self.cells_y

    @cached_property
    def profile(self) -> Array:
        """X on the corner columns, (nx+1,) [m3 s-1]."""
        n, dx, dy = self.cells_x, self.dx, self.dy
        angle = self.basin.meridional_wavenumber * dy
        wall = {"free_slip": 0.0, "no_slip": 2.0 / dx**2}[self.side]
        laplacian = np.zeros((n + 1, n + 1))
        inner = np.arange(1, n)
        laplacian[inner, inner] = -2.0 / dx**2 - (2.0 - 2.0 * np.cos(angle)) / dy**2
        laplacian[inner, inner - 1] = laplacian[inner, inner + 1] = 1.0 / dx**2
        vorticity = laplacian.copy()
        vorticity[0, 1] = vorticity[n, n - 1] = wall
        slope = np.zeros((n + 1, n + 1))
        slope[inner, inner + 1], slope[inner, inner - 1] = 0.5 / dx, -0.5 / dx
        operator = self.viscosity * laplacian @ vorticity - self.drag * vorticity
        operator -= self.basin.beta * np.cos(angle) * slope
        curl = self.basin.stress / self.basin.density * 2.0 * np.sin(0.5 * angle) / dy
        x = np.zeros(n + 1)
        x[1:n] = scipy.linalg.solve(operator[1:n, 1:n], np.full(n - 1, curl))
        return x

    @property
    def streamfunction(self) -> Array:
        """psi at corners, (ny+1, nx+1) [m3 s-1]."""
        return np.sin(np.pi * np.arange(self.cells_y + 1) / self.cells_y)[:, np.newaxis] * self.profile

    @property
    def transport_x(self) -> Array:
        """U on x faces, (ny, nx+1) [m2 s-1]."""
        return -np.diff(self.streamfunction, axis=0) / self.dy

    @property
    def transport_y(self) -> Array:
        """V on y faces, (ny+1, nx) [m2 s-1]."""
        return np.diff(self.streamfunction, axis=1) / self.dx

    def _friction_x(self, U: Array) -> Array:
        """Friction on U between the cells of a row, (ny, nx-1) [m2 s-2]; U repeats beyond the zonal walls."""
        tall = np.pad(U, ((1, 1), (0, 0)), mode="edge")
        along = np.diff(U, 2, axis=1) / self.dx**2
        across = np.diff(tall, 2, axis=0)[:, 1:-1] / self.dy**2
        return self.viscosity * (along + across) - self.drag * U[:, 1:-1]

    def _friction_y(self, V: Array) -> Array:
        """Friction on V between the rows, (ny-1, nx) [m2 s-2]; V repeats or changes sign beyond meridional walls."""
        sign = 1.0 if self.side == "free_slip" else -1.0
        wide = np.hstack([sign * V[:, :1], V, sign * V[:, -1:]])
        along = np.diff(V, 2, axis=0) / self.dy**2
        across = np.diff(wide, 2, axis=1)[1:-1] / self.dx**2
        return self.viscosity * (along + across) - self.drag * V[1:-1]

    def pressure_without_constant(self, coriolis_at_south: float) -> Array:
        """P = g' h^2/2 at centres up to a constant, (ny, nx) [m3 s-2]: the sum of the steady momentum equations along
        the first column and then along each row."""
        U, V = self.transport_x, self.transport_y
        y_face = np.arange(self.cells_y + 1) * self.dy
        f = (coriolis_at_south + self.basin.beta * y_face)[:, np.newaxis]
        turned = f * 0.5 * (V[:, 1:] + V[:, :-1])
        wind = self.basin.zonal_stress(y_face[:-1] + 0.5 * self.dy)[:, np.newaxis] / self.basin.density
        eastward = 0.5 * (turned[1:] + turned[:-1]) + wind + self._friction_x(U)
        around = 0.25 * (U[1:, 1:] + U[1:, :-1] + U[:-1, 1:] + U[:-1, :-1])
        northward = -f[1:-1] * around + self._friction_y(V)
        pressure = np.zeros((self.cells_y, self.cells_x))
        pressure[1:, 0] = self.dy * np.cumsum(northward[:, 0])
        pressure[:, 1:] = pressure[:, :1] + self.dx * np.cumsum(eastward, axis=1)
        return pressure

    def thickness(self, coriolis_at_south: float, gravity: float, mean: float) -> Array:
        """h at centres, (ny, nx) [m], of given mean [m] on f = f0 [s-1] + beta y; g' [m s-2].

        Raises ValueError if the layer would have to outcrop to have so small a mean.
        """
        pressure = self.pressure_without_constant(coriolis_at_south)
        pressure -= pressure.min()

        def of(constant: float) -> Array:
            return np.sqrt(2.0 * (pressure + constant) / gravity)

        if of(0.0).mean() > mean:
            raise ValueError(f"a mean of {mean} m is too thin: the layer outcrops")
        highest = 0.5 * gravity * mean**2
        return of(float(scipy.optimize.brentq(lambda c: of(c).mean() - mean, 0.0, highest, xtol=1e-12, rtol=1e-15)))
