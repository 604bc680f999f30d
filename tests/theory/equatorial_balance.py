r"""Steady zonal wind over a closed equatorial layer: the exact state of rest.

tau_x [N m-2], L [m] basin width, g' [m s-2], rho0 [kg m-3]; x from the western wall. With u = v = 0 the pressure
carries the wind at every latitude, g' h h_x = tau_x / rho0, so h^2 = h_w^2 + s x, s = 2 tau_x / (rho0 g').
With a layer of varying buoyancy b the same holds for b h^2. Source: derived.
"""

from collections.abc import Callable

import numpy as np
import scipy.optimize
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.floating]


def square_slope(stress: float, gravity: float, density: float = 1025.0) -> float:
    """s = 2 tau_x / (rho0 g') [m], the zonal slope of h^2."""
    return 2.0 * stress / (density * gravity)


def outcrop_mean_thickness(stress: float, length: float, gravity: float, density: float = 1025.0) -> float:
    """The mean thickness (2/3) sqrt(2 |tau| L / (rho0 g')) [m] at which the shallow end comes to the surface."""
    return float(2.0 / 3.0 * np.sqrt(abs(square_slope(stress, gravity, density)) * length))


def linear_tilt(stress: float, length: float, gravity: float, mean: float, density: float = 1025.0) -> float:
    """h_e - h_w = tau L / (rho0 g' Hm) [m] of the theory linear about the mean thickness Hm [m]."""
    return stress * length / (density * gravity * mean)


def _shallow_square(mean_from_square: Callable[[float], float], mean: float, span: float) -> float:
    """The square of the shallow end's thickness that gives `mean`; `span` [m2] is the rise of h^2 over the basin."""
    if mean_from_square(0.0) > mean:
        raise ValueError(f"a mean of {mean} m is too thin for this wind: the shallow end outcrops")
    return float(
        scipy.optimize.brentq(lambda q: mean_from_square(q) - mean, 0.0, mean**2 + span, xtol=1e-10, rtol=1e-14)
    )


def tilted_thickness(
    x: ArrayLike, stress: float, length: float, gravity: float, mean: float, density: float = 1025.0
) -> Array:
    """h(x) = sqrt(h_w^2 + s x) [m] of mean Hm over 0 < x < L; x [m], any shape.

    h_w follows from [2/(3 s L)] [(h_w^2 + s L)^(3/2) - h_w^3] = Hm.
    Raises ValueError where the layer would outcrop; tau_x = 0 is not allowed.
    """
    slope = square_slope(stress, gravity, density)
    span = abs(slope) * length

    def mean_from_square(shallow: float) -> float:
        return float(2.0 / (3.0 * span) * ((shallow + span) ** 1.5 - shallow**1.5))

    shallow = _shallow_square(mean_from_square, mean, span)
    western = shallow if slope > 0 else shallow + span
    return np.sqrt(western + slope * np.asarray(x, dtype=float))


def tilted_thickness_on_centres(
    cells: int, stress: float, length: float, gravity: float, mean: float, density: float = 1025.0
) -> Array:
    """h_i [m], (cells,), at rest on a C-grid whose mean of centre values is Hm [m].

    Exact where the wind acts at u points as tau / (rho0 (h_i + h_(i+1))/2): then
    g' (h_(i+1)^2 - h_i^2) / (2 dx) = tau / rho0, and h_i^2 is linear in i.
    Raises ValueError where the layer would outcrop.
    """
    slope = square_slope(stress, gravity, density)
    rise = abs(slope) * length / cells * np.arange(cells)
    shallow = _shallow_square(lambda q: float(np.mean(np.sqrt(q + rise))), mean, float(rise[-1]))
    thickness = np.sqrt(shallow + rise)
    return thickness if slope > 0 else thickness[::-1]
