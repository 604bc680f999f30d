r"""The wind-driven gyre with linear drag on the transport: streamfunction and exact thickness.

r lap(psi) + beta psi_x = curl(tau) / rho0 with psi = 0 on the walls of a GyreBasin has the solution
psi = X(x) sin(pi y / B),

    X = [tau0 B / (pi rho0 r)] [1 - p exp(a x) - q exp(d x)],
    a, d = -beta/(2r) +- sqrt(beta^2/(4 r^2) + pi^2/B^2),  p = (1 - exp(d L)) / (exp(a L) - exp(d L)),  q = 1 - p.

It stays exact when the thickness varies, given no momentum advection, drag -r (h u), wind stress in the
transport equation as tau / rho0 and no outcrop.

Source: Stommel (1948), Trans. Am. Geophys. Union 29, 202-206 (from memory); thickness field derived.
"""

from dataclasses import dataclass

import numpy as np
import scipy.optimize
from numpy.typing import ArrayLike, NDArray

from tests.theory.gyres import GyreBasin

Array = NDArray[np.floating]


@dataclass(frozen=True)
class StommelGyre:
    """The gyre of a basin under drag r [s-1]."""

    basin: GyreBasin
    drag: float

    @property
    def rates(self) -> tuple[float, float]:
        """(a, d) [m-1], the growth rates of the two exponentials in x."""
        half = self.basin.beta / (2.0 * self.drag)
        root = np.hypot(half, self.basin.meridional_wavenumber)
        return float(self.basin.meridional_wavenumber**2 / (half + root)), float(-half - root)

    @property
    def weights(self) -> tuple[float, float]:
        """(p, q), the shares of the two exponentials."""
        a, d = self.rates
        length = self.basin.length
        p = -np.expm1(d * length) / (np.exp(a * length) - np.exp(d * length))
        return float(p), float(1.0 - p)

    @property
    def scale(self) -> float:
        """tau0 B / (pi rho0 r) [m3 s-1]."""
        return self.basin.stress / (self.basin.meridional_wavenumber * self.basin.density * self.drag)

    def profile(self, x: ArrayLike) -> Array:
        """X(x) [m3 s-1]; x [m], any shape."""
        (a, d), (p, q) = self.rates, self.weights
        x = np.asarray(x, dtype=float)
        return np.asarray(self.scale * (1.0 - p * np.exp(a * x) - q * np.exp(d * x)))

    def profile_slope(self, x: ArrayLike) -> Array:
        """dX/dx [m2 s-1]; x [m], any shape."""
        (a, d), (p, q) = self.rates, self.weights
        x = np.asarray(x, dtype=float)
        return np.asarray(-self.scale * (p * a * np.exp(a * x) + q * d * np.exp(d * x)))

    def profile_integral(self, x: ArrayLike) -> Array:
        """Int_0^x X dx' [m4 s-1]; x [m], any shape."""
        (a, d), (p, q) = self.rates, self.weights
        x = np.asarray(x, dtype=float)
        return np.asarray(self.scale * (x - p / a * np.expm1(a * x) - q / d * np.expm1(d * x)))

    def streamfunction(self, x: ArrayLike, y: ArrayLike) -> Array:
        """psi [m3 s-1]; x, y [m] broadcast together."""
        return self.profile(x) * np.sin(self.basin.meridional_wavenumber * np.asarray(y))

    def transport_x(self, x: ArrayLike, y: ArrayLike) -> Array:
        """U = -psi_y [m2 s-1]; x, y [m] broadcast together."""
        wavenumber = self.basin.meridional_wavenumber
        return -wavenumber * self.profile(x) * np.cos(wavenumber * np.asarray(y))

    def transport_y(self, x: ArrayLike, y: ArrayLike) -> Array:
        """V = psi_x [m2 s-1]; x, y [m] broadcast together."""
        return self.profile_slope(x) * np.sin(self.basin.meridional_wavenumber * np.asarray(y))

    def maximum(self) -> tuple[float, float]:
        """(largest psi [m3 s-1], its x [m]), at y = B/2 and x = ln[-q d / (p a)] / (a - d)."""
        (a, d), (p, q) = self.rates, self.weights
        x = float(np.log(-q * d / (p * a)) / (a - d))
        return float(self.profile(np.asarray(x))), x


@dataclass(frozen=True)
class StommelThickness:
    """Thickness of a StommelGyre on f = f0 + beta y, of given mean.

    P = g' h^2 / 2 = f psi + G + C with
    G = r X'(0) (B/pi) [cos(pi y/B) - 1] + tau_x(y) x / rho0 + r (pi/B) cos(pi y/B) Int_0^x X dx'.

    gyre; f0 [s-1] at y = 0; g' [m s-2]; mean thickness over the basin [m]. Source: derived from the two steady
    momentum equations, -f V = -P_x + tau_x/rho0 - r U and f U = -P_y - r V.
    """

    gyre: StommelGyre
    coriolis_at_south: float
    gravity: float
    mean_thickness: float

    def pressure_without_constant(self, x: ArrayLike, y: ArrayLike) -> Array:
        """f psi + G [m3 s-2]; x, y [m] broadcast together."""
        gyre, basin = self.gyre, self.gyre.basin
        x, y = np.asarray(x, dtype=float), np.asarray(y, dtype=float)
        cosine = np.cos(basin.meridional_wavenumber * y)
        wall_slope = float(gyre.profile_slope(np.asarray(0.0)))
        return np.asarray(
            (self.coriolis_at_south + basin.beta * y) * gyre.streamfunction(x, y)
            + gyre.drag * wall_slope / basin.meridional_wavenumber * (cosine - 1.0)
            + basin.zonal_stress(y) * x / basin.density
            + gyre.drag * basin.meridional_wavenumber * cosine * gyre.profile_integral(x)
        )

    def constant(self) -> float:
        """C [m3 s-2], which gives the mean thickness; Gauss-Legendre quadrature over the basin.

        Raises ValueError if the layer would have to outcrop to have so small a mean.
        """
        basin = self.gyre.basin
        # 240 nodes crowd towards the western wall and resolve a boundary layer of L/100 to round-off.
        nodes_x, weights_x = np.polynomial.legendre.leggauss(240)
        nodes_y, weights_y = np.polynomial.legendre.leggauss(60)
        x = 0.5 * basin.length * (nodes_x + 1.0)
        y = 0.5 * basin.width * (nodes_y + 1.0)
        pressure = self.pressure_without_constant(x[np.newaxis, :], y[:, np.newaxis])

        def excess(constant: float) -> float:
            thickness = np.sqrt(2.0 * (pressure + constant) / self.gravity)
            return float(weights_y @ thickness @ weights_x / 4.0 - self.mean_thickness)

        lowest = -float(pressure.min())
        if excess(lowest) > 0:
            raise ValueError(f"a mean of {self.mean_thickness} m is too thin: the layer outcrops")
        highest = 0.5 * self.gravity * self.mean_thickness**2 + float(np.abs(pressure).max())
        return float(scipy.optimize.brentq(excess, lowest, highest, xtol=1e-9))

    def thickness(self, x: ArrayLike, y: ArrayLike) -> Array:
        """h [m]; x, y [m] broadcast together."""
        return np.sqrt(2.0 * (self.pressure_without_constant(x, y) + self.constant()) / self.gravity)
