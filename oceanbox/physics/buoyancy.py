"""Equation of state of the moving layers: buoyancy relative to the abyss.

alpha(T) = alpha_a + alpha_1 (T - T_a) covers the linear equation of state (alpha_1 = 0) and the quadratic one, a fit to
TEOS-10 at the surface (IOC, SCOR and IAPSO 2010, Manuals and Guides 56).
"""

import numpy as np
from numpy.typing import NDArray

from oceanbox.compiling import kernel
from oceanbox.physics.rows import place
from oceanbox.physics.state import Constants

__all__ = ["buoyancy", "layer_buoyancy", "thermal_expansion"]

Array = NDArray[np.float64]


@kernel
def thermal_expansion(theta: float, constants: Constants) -> float:
    """alpha = alpha_a + alpha_1 Theta, K-1."""
    return constants.expansion_abyss + constants.expansion_slope * theta


@kernel
def buoyancy(theta: float, sigma: float, constants: Constants) -> float:
    """b = g [alpha_a Theta + alpha_1 Theta^2 / 2 - beta_S Sigma], m s-2; zero in the abyss."""
    expansion = constants.expansion_abyss + 0.5 * constants.expansion_slope * theta
    return constants.gravity * (expansion * theta - constants.contraction * sigma)


@kernel
def layer_buoyancy(first: int, end: int, h: Array, heat: Array, salt: Array, constants: Constants, b: Array) -> None:
    """b in rows ``first`` to ``end`` - 1, ghost cells included, from h, h Theta and h Sigma (ny+4, nx+4); ``b`` a belt."""
    columns = h.shape[1]
    for j in range(first, end):
        here = place(j, b.shape[0])
        if constants.salty:
            for i in range(columns):
                per_h = 1.0 / h[j, i]
                b[here, i] = buoyancy(heat[j, i] * per_h, salt[j, i] * per_h, constants)
        else:
            for i in range(columns):
                b[here, i] = buoyancy(heat[j, i] / h[j, i], 0.0, constants)
