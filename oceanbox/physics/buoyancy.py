"""Equation of state of the moving layers: buoyancy relative to the abyss.

alpha(T) = alpha_a + alpha_1 (T - T_a) covers the linear equation of state (alpha_1 = 0) and the quadratic one, a fit to
TEOS-10 at the surface (IOC, SCOR and IAPSO 2010, Manuals and Guides 56).
"""

from oceanbox.compiling import kernel
from oceanbox.physics.state import Constants

__all__ = ["buoyancy", "thermal_expansion"]


@kernel
def thermal_expansion(theta: float, constants: Constants) -> float:
    """alpha = alpha_a + alpha_1 Theta, K-1."""
    return constants.expansion_abyss + constants.expansion_slope * theta


@kernel
def buoyancy(theta: float, sigma: float, constants: Constants) -> float:
    """b = g [alpha_a Theta + alpha_1 Theta^2 / 2 - beta_S Sigma], m s-2; zero in the abyss."""
    expansion = constants.expansion_abyss + 0.5 * constants.expansion_slope * theta
    return constants.gravity * (expansion * theta - constants.contraction * sigma)
