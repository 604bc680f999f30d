r"""Amplification factors of time-stepping schemes and the steps they allow.

For y_t = s y and z = s dt, each scheme multiplies y by one of its factors per step; s = i omega is an oscillation,
s < 0 a decay. A scheme is stable where no factor exceeds 1 in size. Forward-backward schemes treat the two equations
of a gravity wave, eta_t = -i omega u and u_t = -i omega eta, differently and so take w = omega dt itself.

Source: standard coefficients (from memory), such as in Durran (1991), Mon. Weather Rev. 119, 702-720; factors derived.
"""

from collections.abc import Callable
from math import factorial

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.floating]
Factors = NDArray[np.complex128]

ADAMS_BASHFORTH = {
    2: (3.0 / 2.0, -1.0 / 2.0),
    3: (23.0 / 12.0, -16.0 / 12.0, 5.0 / 12.0),
    4: (55.0 / 24.0, -59.0 / 24.0, 37.0 / 24.0, -9.0 / 24.0),
}


def leapfrog_factors(z: complex) -> Factors:
    """(2,): roots of G^2 - 2 z G - 1 = 0; one of them is the computational mode."""
    return np.asarray(np.roots([1.0, -2.0 * z, -1.0]), dtype=complex)


def adams_bashforth_factors(z: complex, order: int) -> Factors:
    """(order,): roots of G^m = G^(m-1) + z sum_j b_j G^(m-1-j), order m = 2, 3 or 4."""
    weights = np.array(ADAMS_BASHFORTH[order], dtype=complex)
    polynomial = np.concatenate([[1.0 + 0.0j], -z * weights])
    polynomial[1] -= 1.0
    return np.asarray(np.roots(polynomial), dtype=complex)


def runge_kutta_factors(z: complex, order: int) -> Factors:
    """(1,): sum_j z^j / j! up to the order, as every m-stage scheme of order m <= 4 has (SSP ones too)."""
    return np.array([sum(z**j / factorial(j) for j in range(order + 1))], dtype=complex)


def forward_backward_factors(w: float) -> Factors:
    """(2,): roots of G^2 - (2 - w^2) G + 1 = 0, eta stepped first and u from the new eta."""
    return np.asarray(np.roots([1.0, w**2 - 2.0, 1.0]), dtype=complex)


def generalised_forward_backward_factors(
    w: float, beta: float = 0.281105, gamma: float = 0.088, epsilon: float = 0.013
) -> Factors:
    """(6,): eigenvalues of one step of the AB3-AM4 forward-backward scheme.

    eta_(n+1) = eta_n - i w [(3/2 + beta) u_n - (1/2 + 2 beta) u_(n-1) + beta u_(n-2)],
    u_(n+1) = u_n - i w [delta eta_(n+1) + (1 - delta - gamma - epsilon) eta_n + gamma eta_(n-1) + epsilon eta_(n-2)],

    delta = 1/2 + gamma + 2 epsilon. A factor leaves through -1 at w = 1 / sqrt[2 (gamma + epsilon) (1 + 2 beta)].
    Source: Shchepetkin and McWilliams (2005), Ocean Modelling 9, 347-404 (from memory); eigenvalues derived.
    """
    delta = 0.5 + gamma + 2.0 * epsilon
    step = np.zeros((6, 6), dtype=complex)  # state: eta_n, eta_(n-1), eta_(n-2), u_n, u_(n-1), u_(n-2)
    step[0, 0] = 1.0
    step[0, 3:] = -1j * w * np.array([1.5 + beta, -(0.5 + 2.0 * beta), beta])
    step[3] = -1j * w * delta * step[0]
    step[3, :3] += -1j * w * np.array([1.0 - delta - gamma - epsilon, gamma, epsilon])
    step[3, 3] += 1.0
    step[[1, 2, 4, 5], [0, 1, 3, 4]] = 1.0
    return np.asarray(np.linalg.eigvals(step), dtype=complex)


def largest_factor(factors: Factors) -> float:
    """The size of the largest factor; above 1 the scheme is unstable."""
    return float(np.abs(factors).max())


def stability_limit(factors_of: Callable[[float], Factors], highest: float = 4.0) -> float:
    """The largest w up to which every step 0 < w' <= w is stable; 0 if none is, `highest` if all are.

    Scans in steps of 0.01 and then bisects. Growth of less than 1e-9 per step counts as round-off: it is far above the
    errors of the roots and below the weakest growth met, 2.5e-9 of AB2 at 0.01.
    """

    def unstable(w: float) -> bool:
        return largest_factor(factors_of(w)) > 1.0 + 1e-9

    stable = 0.0
    for w in 0.01 * np.arange(1, round(highest / 0.01) + 1):
        if unstable(float(w)):
            break
        stable = float(w)
    else:
        return highest
    if stable == 0.0:
        return 0.0
    beyond = stable + 0.01
    while beyond - stable > 1e-12:
        middle = 0.5 * (stable + beyond)
        stable, beyond = (stable, middle) if unstable(middle) else (middle, beyond)
    return stable


def oscillation_limit(factors_of: Callable[[complex], Factors]) -> float:
    """The largest stable omega dt of a scheme given by its factors of z."""
    return stability_limit(lambda w: factors_of(1j * w))


def decay_limit(factors_of: Callable[[complex], Factors]) -> float:
    """The largest stable |s| dt on the negative real axis of a scheme given by its factors of z."""
    return stability_limit(lambda w: factors_of(complex(-w)))


def c_grid_gravity_wave_frequency(k: ArrayLike, l: ArrayLike, wave_speed: float, dx: float, dy: float) -> Array:  # noqa: E741
    """omega = 2 c sqrt[sin^2(k dx/2)/dx^2 + sin^2(l dy/2)/dy^2] [s-1] without rotation; derived.

    k, l [m-1] broadcast together; c [m s-1]; dx, dy [m].
    """
    zonal = np.sin(0.5 * dx * np.asarray(k)) / dx
    meridional = np.sin(0.5 * dy * np.asarray(l)) / dy
    return np.asarray(2.0 * wave_speed * np.hypot(zonal, meridional))


def highest_gravity_wave_frequency(wave_speed: float, dx: float, dy: float) -> float:
    """2 c sqrt(1/dx^2 + 1/dy^2) [s-1], of the checkerboard wave; c [m s-1], dx, dy [m]. Derived."""
    return float(2.0 * wave_speed * np.hypot(1.0 / dx, 1.0 / dy))
