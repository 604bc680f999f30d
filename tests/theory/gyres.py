r"""Ekman, Sverdrup and zonal-momentum relations of a wind-driven layer.

Common symbols: tau_x [N m-2] zonal stress on the ocean, rho0 [kg m-3], f [s-1], beta [m-1 s-1], g' [m s-2]
reduced gravity, w_E [m s-1] Ekman vertical velocity, positive up, V [m2 s-1] meridional transport per length.
The standard gyre is a basin 0 < x < L, 0 < y < B under tau_x = -tau0 cos(pi y / B); psi [m3 s-1] with
V = psi_x, U = -psi_y.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.floating]


@dataclass(frozen=True)
class GyreBasin:
    """L [m], B [m], tau0 [N m-2], beta [m-1 s-1] and rho0 [kg m-3] of the standard gyre."""

    length: float
    width: float
    stress: float
    beta: float
    density: float = 1025.0

    @property
    def meridional_wavenumber(self) -> float:
        """pi / B [m-1]."""
        return float(np.pi / self.width)

    def zonal_stress(self, y: ArrayLike) -> Array:
        """tau_x = -tau0 cos(pi y / B) [N m-2]; y [m], any shape."""
        return np.asarray(-self.stress * np.cos(self.meridional_wavenumber * np.asarray(y)))

    def zonal_stress_slope(self, y: ArrayLike) -> Array:
        """d tau_x / dy [N m-3]; y [m], any shape."""
        wavenumber = self.meridional_wavenumber
        return np.asarray(self.stress * wavenumber * np.sin(wavenumber * np.asarray(y)))

    @property
    def sverdrup_streamfunction(self) -> float:
        """psi at the western edge of the interior, y = B/2 [m3 s-1]: pi tau0 L / (rho0 beta B).

        Source: Sverdrup (1947), Proc. Natl. Acad. Sci. 33, 318-326 (from memory).
        """
        return self.meridional_wavenumber * self.stress * self.length / (self.density * self.beta)


def ekman_transport(stress_x: float, stress_y: float, coriolis: float, density: float) -> tuple[float, float]:
    """(U_E, V_E) = (tau_y, -tau_x) / (rho0 f) [m2 s-1].

    Source: Ekman (1905), Ark. Mat. Astr. Fys. 2(11) (from memory).
    """
    return stress_y / (density * coriolis), -stress_x / (density * coriolis)


def sverdrup_transport(stress_curl: float, beta: float, density: float) -> float:
    """V = curl(tau) / (rho0 beta) [m2 s-1]; curl(tau) [N m-3].

    Exact for a reduced-gravity layer without friction and advection. Source: Sverdrup (1947) (from memory).
    """
    return stress_curl / (density * beta)


def sverdrup_thickness(
    distance: ArrayLike, ekman_velocity: float, coriolis: float, beta: float, gravity: float, eastern: float
) -> Array:
    """h [m] where w_E does not vary along the row: h^2 = h_e^2 - 2 f^2 w_E X / (beta g').

    X = `distance` [m] from the eastern wall, any shape; h_e = `eastern` [m].
    Source: derived; a standard result, such as in Pedlosky (1996), Ocean Circulation Theory (from memory).
    """
    square = eastern**2 - 2.0 * coriolis**2 * ekman_velocity * np.asarray(distance) / (beta * gravity)
    return np.sqrt(square)


def sverdrup_thickness_from_stress(
    distance: ArrayLike,
    stress: float,
    stress_slope: float,
    coriolis: float,
    beta: float,
    gravity: float,
    eastern: float,
    density: float = 1025.0,
) -> Array:
    """The same from the stress: h^2 = h_e^2 - 2 [tau_x - (f/beta) d tau_x/dy] X / (rho0 g') [m].

    Regular at the equator. `distance` X [m] from the eastern wall, any shape; tau_x [N m-2], its slope [N m-3].
    Source: derived, as sverdrup_thickness.
    """
    pull = stress - coriolis / beta * stress_slope
    return np.sqrt(eastern**2 - 2.0 * pull * np.asarray(distance) / (density * gravity))


def stress_for_ekman_velocity(
    y: ArrayLike, south: float, width: float, pumping: float, coriolis: ArrayLike, density: float = 1025.0
) -> Array:
    """tau_x = rho0 f W (B/pi) [1 - cos theta], theta = pi (y - south)/B, which gives w_E = -W sin(theta) [N m-2].

    y, f any shape [m, s-1]; W = `pumping` [m s-1]. Source: derived from w_E = -d/dy [tau_x / (rho0 f)].
    """
    theta = np.pi * (np.asarray(y) - south) / width
    return np.asarray(density * np.asarray(coriolis) * pumping * width / np.pi * (1.0 - np.cos(theta)))


def western_wall_thickness(
    stress: float, length: float, gravity: float, eastern: float, density: float = 1025.0
) -> float:
    """h_w [m] on the western wall by the zonal-momentum identity (g'/2)(h_e^2 - h_w^2) = tau_x L / rho0.

    Holds at every latitude of a closed steady basin, Int V dx = 0, without zonal friction and advection; with
    tau_x the zonal mean. Source: derived.

    Raises ValueError where the wind exceeds separation_stress and the layer has left the wall.
    """
    square = eastern**2 - 2.0 * stress * length / (density * gravity)
    if square < 0:
        raise ValueError(f"the layer has left the western wall: h_w^2 = {square} m2 under {stress} N m-2")
    return float(np.sqrt(square))


def separation_stress(eastern: float, length: float, gravity: float, density: float = 1025.0) -> float:
    """tau_x = rho0 g' h_e^2 / (2 L) [N m-2], at which the layer leaves the western wall.

    Source: Parsons (1969), J. Fluid Mech. 39, 173-186 (from memory), re-derived.
    """
    return density * gravity * eastern**2 / (2.0 * length)
