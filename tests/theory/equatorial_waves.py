r"""Free waves of one linear layer on the equatorial beta-plane, f = beta y.

The layer obeys, with pressure p = g' eta, wave speed c and rest depth H = c^2 / g',

    u_t - f v = -p_x,    v_t + f u = -p_y,    p_t + c^2 (u_x + v_y) = 0.

Lengths are scaled by Le = sqrt(c / beta) and times by Te = 1 / sqrt(beta c). The other convention in use,
sqrt(c / (2 beta)), is nowhere meant here. A wave travels as exp[i (k x - omega t)] with omega > 0, so
that k > 0 is eastward and k < 0 westward phase propagation.

Source: Matsuno (1966), J. Meteor. Soc. Japan 44, 25-43, and Gill (1982), Atmosphere-Ocean Dynamics,
chapter 11; both from memory unless a docstring says otherwise.
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.floating]


class MeridionalStructure(NamedTuple):
    """Real amplitudes u, v [m s-1] and h [m] of a wave, each of y's shape.

    The fields are u cos(theta), v sin(theta) and h cos(theta), theta = k x - omega t.
    """

    u: Array
    v: Array
    h: Array


def equatorial_radius(wave_speed: float, beta: float) -> float:
    """Le = sqrt(c / beta) [m], the standard deviation of the Kelvin wave's Gaussian; c in m s-1, beta in m-1 s-1."""
    return float(np.sqrt(wave_speed / beta))


def equatorial_time(wave_speed: float, beta: float) -> float:
    """Te = 1 / sqrt(beta c) [s]; c in m s-1, beta in m-1 s-1."""
    return float(1.0 / np.sqrt(beta * wave_speed))


def dispersion_roots(n: int, wavenumber: float, wave_speed: float, beta: float) -> Array:
    """The three real roots omega [s-1], ascending, (3,), of the dispersion relation for n >= 1.

    omega^3 - [c^2 k^2 + (2n + 1) beta c] omega - beta c^2 k = 0,

    k in m-1 (either sign), c in m s-1, beta in m-1 s-1: an inertia-gravity wave at each end and the Rossby
    wave between them. A negative root is the wave of opposite k.

    Raises ValueError for n < 1, where one root of the cubic is spurious.
    """
    if n < 1:
        raise ValueError(f"the cubic holds for n >= 1, got n = {n}; use yanai_frequency or kelvin_frequency")
    k = wavenumber * equatorial_radius(wave_speed, beta)
    roots = np.roots([1.0, 0.0, -(k**2 + 2 * n + 1), -k])
    return np.asarray(np.sort(roots.real)) / equatorial_time(wave_speed, beta)


def rossby_frequency(n: int, wavenumber: float, wave_speed: float, beta: float) -> float:
    """omega > 0 [s-1] of the Rossby wave n >= 1; k < 0 [m-1].

    Raises ValueError for k >= 0: Rossby phases travel westward only.
    """
    if wavenumber >= 0:
        raise ValueError(f"a Rossby wave needs a negative wavenumber, got {wavenumber}")
    return float(dispersion_roots(n, wavenumber, wave_speed, beta)[1])


def inertia_gravity_frequency(n: int, wavenumber: float, wave_speed: float, beta: float) -> float:
    """omega > 0 [s-1] of the inertia-gravity wave n >= 1; k > 0 eastward, k < 0 westward [m-1]."""
    return float(dispersion_roots(n, wavenumber, wave_speed, beta)[2])


def yanai_frequency(wavenumber: float, wave_speed: float, beta: float) -> float:
    """omega [s-1] of the mixed Rossby-gravity (n = 0) wave, (c/2) [k + sqrt(k^2 + 4 beta / c)].

    The cubic's other root, omega = -c k, is spurious and is not given.
    """
    c, k = wave_speed, wavenumber
    return float(0.5 * c * (k + np.sqrt(k**2 + 4.0 * beta / c)))


def kelvin_frequency(wavenumber: float, wave_speed: float) -> float:
    """omega = c k [s-1] of the Kelvin wave, k > 0 [m-1], c [m s-1]."""
    return wave_speed * wavenumber


def long_rossby_speed(n: int, wave_speed: float) -> float:
    """c / (2n + 1) [m s-1], the westward speed of Rossby waves with |k| Le << 1."""
    return wave_speed / (2 * n + 1)


def zero_group_velocity_frequencies(n: int, wave_speed: float, beta: float) -> tuple[float, float]:
    """(highest Rossby omega, lowest inertia-gravity omega) [s-1], between which no free wave n exists.

    Both lie at k Le = -1 / (2 omega Te), where omega Te = sqrt((n + 1)/2) -+ sqrt(n/2).
    Source: derived from the dispersion relation by d(omega)/dk = 0.
    """
    time = equatorial_time(wave_speed, beta)
    upper, lower = np.sqrt((n + 1) / 2.0), np.sqrt(n / 2.0)
    return float((upper - lower) / time), float((upper + lower) / time)


def hermite_functions(count: int, y: ArrayLike) -> Array:
    """Orthonormal Hermite functions psi_0 ... psi_(count-1) of the number y, (count, *y.shape).

    psi_n = H_n(y) exp(-y^2/2) / sqrt(2^n n! sqrt(pi)), by the recurrence
    psi_(n+1) = y sqrt(2/(n+1)) psi_n - sqrt(n/(n+1)) psi_(n-1), which stays finite where H_n overflows.
    Source: Abramowitz and Stegun (1964), chapter 22 (from memory).
    """
    y = np.asarray(y, dtype=float)
    psi = np.empty((max(count, 2), *y.shape))
    psi[0] = np.pi**-0.25 * np.exp(-0.5 * y**2)
    psi[1] = np.sqrt(2.0) * y * psi[0]
    for n in range(1, count - 1):
        psi[n + 1] = y * np.sqrt(2.0 / (n + 1)) * psi[n] - np.sqrt(n / (n + 1.0)) * psi[n - 1]
    return psi[:count]


def wave_structure(
    y: ArrayLike, n: int, wavenumber: float, frequency: float, wave_speed: float, beta: float, depth: float
) -> MeridionalStructure:
    """Structure of the wave n >= 0 with a root (k, omega) of its dispersion relation.

    With y in Le, k in 1/Le, omega in 1/Te and velocity amplitude 1 m s-1,

        v = psi_n,
        u = (1/2) [sqrt(2(n+1)) psi_(n+1) / (omega - k) + sqrt(2n) psi_(n-1) / (omega + k)],
        p = (1/2) [sqrt(2(n+1)) psi_(n+1) / (omega - k) - sqrt(2n) psi_(n-1) / (omega + k)],  h = H p / c.

    y [m] any shape; k [m-1], omega [s-1], c [m s-1], beta [m-1 s-1], depth H [m]. n = 0 is the Yanai wave.
    Source: derived; the phases follow MeridionalStructure.
    """
    radius, time = equatorial_radius(wave_speed, beta), equatorial_time(wave_speed, beta)
    k, omega = wavenumber * radius, frequency * time
    psi = hermite_functions(n + 2, np.asarray(y) / radius)
    eastward = np.sqrt(2.0 * (n + 1)) * psi[n + 1] / (omega - k)
    westward = np.sqrt(2.0 * n) * psi[n - 1] / (omega + k) if n > 0 else np.zeros_like(psi[0])
    return MeridionalStructure(
        u=0.5 * (eastward + westward), v=psi[n], h=0.5 * (eastward - westward) * depth / wave_speed
    )


def kelvin_structure(y: ArrayLike, wave_speed: float, beta: float, depth: float) -> MeridionalStructure:
    """Structure of the Kelvin wave: u = exp(-y^2 / (2 Le^2)) [m s-1], v = 0, h = H u / c [m]; y [m]."""
    u = np.exp(-0.5 * (np.asarray(y) / equatorial_radius(wave_speed, beta)) ** 2)
    return MeridionalStructure(u=u, v=np.zeros_like(u), h=u * depth / wave_speed)


def basin_mode_period(length: float, wave_speed: float, order: int = 1) -> float:
    """T_m = 4 L / (m c) [s]: one Kelvin crossing and the gravest long Rossby wave's return, of a basin L [m] wide.

    Holds for long waves in a meridionally wide basin with weak damping.
    Source: Cane and Moore (1981), J. Phys. Oceanogr. 11, 1578-1584 (from memory).
    """
    return 4.0 * length / (order * wave_speed)
