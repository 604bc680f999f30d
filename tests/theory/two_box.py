r"""The two-box model of a thermohaline circulation, its steady states and folds.

    y' = 1 - y - |f| y (temperature),  x' = delta (1 - x) - |f| x (salinity),  lambda f = -y + R x.

All numbers are dimensionless. Source: Stommel (1961), Tellus 13, 224-230; folds derived.
"""

from typing import NamedTuple

import numpy as np
import scipy.optimize
from numpy.polynomial import Polynomial
from numpy.typing import NDArray

Array = NDArray[np.floating]


class TwoBoxState(NamedTuple):
    """Flow f, temperature y, salinity x of a steady state, and the growth rate of its fastest disturbance."""

    flow: float
    temperature: float
    salinity: float
    growth_rate: float


class Fold(NamedTuple):
    """Where two steady states meet: the parameter and the flow there."""

    parameter: float
    flow: float


class FreshwaterFold(NamedTuple):
    """Freshwater flux [m3 s-1], overturning [m3 s-1] and salinity difference [g kg-1] at the fold."""

    freshwater_flux: float
    overturning: float
    salinity_difference: float


def _growth_rate(flow: float, y: float, x: float, ratio: float, delta: float, resistance: float) -> float:
    """Largest real part of the eigenvalues of the Jacobian at a steady state with flow != 0."""
    sign = np.sign(flow)
    slope_y, slope_x = -sign / resistance, sign * ratio / resistance
    jacobian = np.array(
        [
            [-1.0 - abs(flow) - y * slope_y, -y * slope_x],
            [-x * slope_y, -delta - abs(flow) - x * slope_x],
        ]
    )
    return float(np.linalg.eigvals(jacobian).real.max())


def steady_states(ratio: float, delta: float, resistance: float) -> list[TwoBoxState]:
    """All steady states with flow != 0, by ascending flow, for R, delta and lambda = `resistance`.

    y = 1/(1 + |f|), x = 1/(1 + |f|/delta); for each sign of f the flow is a root of a cubic in |f|.
    """
    states = []
    for sign in (-1.0, 1.0):
        warm, salt = Polynomial([1.0, 1.0]), Polynomial([1.0, 1.0 / delta])
        cubic = sign * resistance * Polynomial([0.0, 1.0]) * warm * salt + salt - ratio * warm
        for root in cubic.roots():
            size = float(root.real)
            if abs(root.imag) > 1e-9 or size <= 0:
                continue
            y, x, flow = 1.0 / (1.0 + size), 1.0 / (1.0 + size / delta), sign * size
            growth = _growth_rate(flow, y, x, ratio, delta, resistance)
            states.append(TwoBoxState(flow, y, x, growth))
    return sorted(states)


def fold_in_ratio(delta: float, resistance: float) -> Fold:
    """The largest R with three states, for flow f = -g < 0.

    It is the maximum over g of R(g) = [-lambda g + 1/(1 + g)] (1 + g/delta).
    For delta = 1/6, lambda = 1/5 it is R = 7/3 at f = -2/3 exactly.
    """
    g, warm, salt = Polynomial([0.0, 1.0]), Polynomial([1.0, 1.0]), Polynomial([1.0, 1.0 / delta])
    slope = (-resistance * warm**2 - 1.0) * salt + (-resistance * g * warm + 1.0) * warm / delta
    roots = np.asarray(slope.roots(), dtype=complex)
    size = float(roots.real[np.abs(roots.imag) < 1e-9].max())
    return Fold((-resistance * size + 1.0 / (1.0 + size)) * (1.0 + size / delta), -size)


def fold_in_resistance(ratio: float, delta: float) -> Fold:
    """The largest lambda with a state f = -g < 0.

    It is the maximum over g of lambda(g) = [1/(1 + g) - R/(1 + g/delta)] / g.
    """

    def slope(g: float) -> float:
        value = 1.0 / (1.0 + g) - ratio / (1.0 + g / delta)
        change = -1.0 / (1.0 + g) ** 2 + ratio / delta / (1.0 + g / delta) ** 2
        return change * g - value

    # lambda vanishes where the flow changes sign, g0, and at infinity; its maximum lies between.
    start = (ratio - 1.0) / (1.0 / delta - ratio)
    size = float(scipy.optimize.brentq(slope, start, 1e3, xtol=1e-14))
    return Fold((1.0 / (1.0 + size) - ratio / (1.0 + size / delta)) / size, -size)


def fixed_temperature_states(salt_flux: float) -> Array:
    """Steady x = beta_S dS / (alpha dT), ascending, at fixed temperature and salt flux E > 0; derived.

    x (1 - x) = E where x < 1 and x (x - 1) = E where x > 1.
    """
    salty = 0.5 + np.sqrt(0.25 + salt_flux)
    if salt_flux > 0.25:
        return np.array([salty])
    root = np.sqrt(0.25 - salt_flux)
    return np.array([0.5 - root, 0.5 + root, salty])


def freshwater_fold(
    overturning_at_equal_salinity: float,
    thermal_expansion: float,
    temperature_difference: float,
    haline_contraction: float,
    salinity: float,
) -> FreshwaterFold:
    """The fold E = 1/4, x = 1/2 in dimensions: F_c = q0 alpha dT / (4 beta_S S0), q = q0/2, dS = alpha dT / (2 beta_S).

    q0 [m3 s-1], alpha [K-1], dT [K], beta_S [kg g-1], S0 [g kg-1]. Derived.
    """
    balance = thermal_expansion * temperature_difference / haline_contraction
    return FreshwaterFold(
        freshwater_flux=overturning_at_equal_salinity * balance / (4.0 * salinity),
        overturning=0.5 * overturning_at_equal_salinity,
        salinity_difference=0.5 * balance,
    )
