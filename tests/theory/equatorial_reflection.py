r"""Reflection of long equatorial waves at meridional walls.

Amplitudes refer to the structures, with psi_n the orthonormal Hermite functions of y / Le,

    Kelvin    u = p = psi_0 / 2,
    Rossby n  u = [psi_(n+1)/sqrt(n+1) - psi_(n-1)/sqrt(n)] / (2 sqrt 2),
              p = [psi_(n+1)/sqrt(n+1) + psi_(n-1)/sqrt(n)] / (2 sqrt 2),

in which the zonal energy flux, Int u p dy, is 1/4 a^2 for Kelvin and -r^2 / [8 n (n + 1)] for Rossby waves.

Source: method of Cane and Sarachik (1977), J. Mar. Res. 35, 395-432 (from memory); numbers derived.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tests.theory.equatorial_waves import hermite_functions

Array = NDArray[np.floating]


def eastern_wall_rossby_amplitudes(count: int) -> Array:
    """Amplitudes r_1, r_3, r_5, ... (count,) made by a Kelvin wave of amplitude 1 at an eastern wall.

    r_1 = sqrt(2), r_(n+2) = r_n sqrt((n+2)/(n+1)): each Hermite component of u at the wall vanishes.
    """
    n = 2.0 * np.arange(count - 1) + 1.0
    return np.sqrt(2.0) * np.concatenate([[1.0], np.cumprod(np.sqrt((n + 2.0) / (n + 1.0)))])


def eastern_wall_energy_shares(count: int) -> Array:
    """Shares of the incident Kelvin energy flux in Rossby n = 1, 3, 5, ... (count,): r_n^2 / [2 n (n + 1)]."""
    n = 2.0 * np.arange(count) + 1.0
    return eastern_wall_rossby_amplitudes(count) ** 2 / (2.0 * n * (n + 1.0))


def eastern_wall_rossby_height(y: ArrayLike, order: int) -> Array:
    """Height of reflected Rossby wave n = 1, 3, 5, ... over the incident equatorial height; y in Le, any shape."""
    amplitude = eastern_wall_rossby_amplitudes((order + 1) // 2)[-1]
    psi = hermite_functions(order + 2, y)
    pressure = (psi[order + 1] / np.sqrt(order + 1) + psi[order - 1] / np.sqrt(order)) / np.sqrt(8.0)
    return np.asarray(amplitude * pressure / (0.5 * np.pi**-0.25))


def eastern_wall_height(y: ArrayLike, count: int) -> Array:
    """Height along the wall over the incident equatorial height, by `count` Rossby waves; y in Le, any shape.

    The sum tends to the constant sqrt(2), slowly and with alternating signs; see eastern_wall_height_limit.
    """
    n = 2.0 * np.arange(count) + 1.0
    amplitudes = eastern_wall_rossby_amplitudes(count) / np.sqrt(8.0)
    even = hermite_functions(2 * count + 1, y)[::2]  # psi_0, psi_2, ..., of which wave n uses psi_(n-1) and psi_(n+1)
    rossby = np.tensordot(amplitudes / np.sqrt(n), even[:-1], axes=1)
    rossby += np.tensordot(amplitudes / np.sqrt(n + 1.0), even[1:], axes=1)
    return np.asarray((0.5 * even[0] + rossby) / (0.5 * np.pi**-0.25))


def eastern_wall_height_limit() -> float:
    """sqrt(2): where u = 0 on the wall, f u = -p_y makes the height uniform in latitude.

    Its value follows by projecting p = const on psi_0, which the incident wave and Rossby n = 1 alone hold:
    const Int psi_0 dy = 1/2 + r_1 / (2 sqrt 2) = 1.
    """
    return float(np.sqrt(2.0))


def western_wall_kelvin_share(order: int) -> float:
    """Share of the energy flux of a long Rossby wave of odd n that a western wall returns as a Kelvin wave.

    Short Rossby waves carry no net zonal transport, so Int u dy = 0 fixes the Kelvin amplitude;
    Int psi_(m+1) dy = sqrt(m/(m+1)) Int psi_(m-1) dy. Even n carry no transport and return none.
    """
    if order % 2 == 0:
        return 0.0
    integral = 1.0  # Int psi_(n-1) dy over Int psi_0 dy
    for m in range(1, order - 1, 2):
        integral *= np.sqrt(m / (m + 1.0))
    next_integral = integral * np.sqrt(order / (order + 1.0))
    transport = (next_integral / np.sqrt(order + 1.0) - integral / np.sqrt(order)) / np.sqrt(8.0)
    kelvin = -2.0 * transport
    return float((kelvin**2 / 4.0) / (1.0 / (8.0 * order * (order + 1.0))))
