"""Weights of the generalised forward-backward scheme and of the third-order Adams-Bashforth scheme.

Shchepetkin and McWilliams 2005, Ocean Modelling 9, 347, with beta = 0.281105, gamma = 0.088, epsilon = 0.013: stable for
gravity waves up to omega dt = 1.7802, with the error of high frequencies small.  The first two steps of a run use what
history there is.
"""

from oceanbox.compiling import kernel

__all__ = ["advection_weights", "pressure_weights", "transport_weights"]

BETA = 0.281105
GAMMA = 0.088
EPSILON = 0.013


@kernel
def transport_weights(steps_done: int) -> tuple[float, float, float]:
    """Weights of U at steps n, n-1, n-2 in the thickness equation.

    At the start the missing transports are the first one, so that every later one counts once in all: rotation takes each
    velocity once, and only so does a step conserve linear potential vorticity.
    """
    if steps_done == 0:
        return 1.0, 0.0, 0.0
    if steps_done == 1:
        return 1.5 + BETA, -(0.5 + BETA), 0.0
    return 1.5 + BETA, -(0.5 + 2.0 * BETA), BETA


@kernel
def pressure_weights(steps_done: int) -> tuple[float, float, float, float]:
    """Weights of the pressure force at steps n+1, n, n-1, n-2 in the momentum equation."""
    if steps_done == 0:
        return 1.0, 0.0, 0.0, 0.0
    if steps_done == 1:
        return 0.5, 0.5, 0.0, 0.0
    if steps_done == 2:  # the force at the very start is not known
        return 0.5 + GAMMA + 2.0 * EPSILON, 0.5 - 2.0 * GAMMA - 3.0 * EPSILON, GAMMA + EPSILON, 0.0
    return 0.5 + GAMMA + 2.0 * EPSILON, 0.5 - 2.0 * GAMMA - 3.0 * EPSILON, GAMMA, EPSILON


@kernel
def advection_weights(steps_done: int) -> tuple[float, float, float]:
    """Third-order Adams-Bashforth weights (23, -16, 5)/12 of momentum advection at steps n, n-1, n-2."""
    if steps_done == 0:
        return 1.0, 0.0, 0.0
    if steps_done == 1:
        return 1.5, -0.5, 0.0
    return 23.0 / 12.0, -16.0 / 12.0, 5.0 / 12.0
